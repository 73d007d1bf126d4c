//! A real `field` session, keyed by a script and killed at random moments, again and again.
//!
//! `HANDSFULL_KILLS` says how often (60 without it); `HANDSFULL_SEED` which moments. What the
//! session said is kept must be in the log; what is in the log must have been keyed.

use std::{
    collections::BTreeSet,
    fs,
    io::{BufRead, BufReader, Write},
    path::PathBuf,
    process::{Child, Command, Stdio},
    sync::mpsc::{Receiver, channel},
    thread,
    time::Duration,
};

use handsfull::{
    domain::{record::Record, standing::Entry},
    journal::{Log, Trouble},
};

use crate::records::Chance;

const JOB: &str = include_str!("../fixtures/workshop.toml");

/// One job on one handheld, through its kills.
struct Life {
    folder: tempfile::TempDir,
    entries: Vec<Entry>,
    keyed: BTreeSet<String>,
}

#[derive(Debug, Default)]
struct Tally {
    kills: u32,
    torn: u32,
    said_kept: usize,
    in_log: usize,
    unsaid: usize,
    lost: Vec<String>,
    false_ones: Vec<String>,
}

impl Life {
    fn new() -> Self {
        let life = Self {
            folder: tempfile::tempdir().expect("a folder"),
            entries: vec![],
            keyed: BTreeSet::new(),
        };
        fs::write(life.folder.path().join("job.toml"), JOB).expect("written");
        life
    }

    fn log(&self) -> PathBuf {
        self.folder.path().join("job.log.toml")
    }

    fn start(&self) -> Child {
        Command::new(env!("CARGO_BIN_EXE_handsfull"))
            .args(["field", "job.toml", "--keypad-only", "--text-only"])
            .current_dir(self.folder.path())
            .env("TERM", "dumb")
            .env("HOME", self.folder.path())
            .env_remove("XDG_CONFIG_HOME")
            .stdin(Stdio::piped())
            .stdout(Stdio::piped())
            .stderr(Stdio::null())
            .spawn()
            .expect("the program runs")
    }

    /// Keys until the moment comes, then kills. True when the session ended by itself.
    fn round(&mut self, chance: &mut Chance, tally: &mut Tally) -> bool {
        let mut child = self.start();
        let mut keys = child.stdin.take().expect("a pipe");
        let lines = reader(&mut child);
        // The moment: after so many lines on the screen, and a little more.
        let after = chance.below(160);
        let linger = Duration::from_micros(chance.below(6000));
        let mut said = String::new();
        let mut seen = 0;
        let mut over = false;
        while seen < after {
            let line = match chance.below(8) {
                0..=4 => String::new(),
                5 => "1".into(),
                _ => format!("0.{:02}", chance.below(100)),
            };
            self.keyed.insert(line.clone());
            if writeln!(keys, "{line}").is_err() {
                over = true;
                break;
            }
            while let Ok(line) = lines.recv_timeout(Duration::from_millis(40)) {
                seen += 1;
                put(&mut said, &line);
                if seen >= after || line.starts_with(">>") {
                    break;
                }
            }
        }
        thread::sleep(linger);
        // SIGKILL: nothing of the session runs after this.
        child.kill().expect("it can be killed");
        child.wait().expect("it ends");
        while let Ok(line) = lines.recv() {
            put(&mut said, &line);
        }
        tally.kills += 1;
        self.compare(&kept(&said), tally);
        over || said.contains("Session ended")
    }

    /// Holds what was said against what is there.
    fn compare(&mut self, said: &[(u64, String)], tally: &mut Tally) {
        if !self.log().exists() {
            // Killed before the log began: then nothing can have been said.
            tally
                .lost
                .extend(said.iter().map(|s| format!("{s:?}, no log")));
            return;
        }
        let log = Log::open(&self.log()).expect("a log");
        for problem in &log.problems {
            match problem.trouble {
                Trouble::Torn => tally.torn += 1,
                _ => tally.false_ones.push(problem.to_string()),
            }
        }
        if !log.entries.starts_with(&self.entries) {
            tally.lost.push(format!(
                "of {} entries some are gone or changed",
                self.entries.len()
            ));
        }
        let new = &log.entries[self.entries.len().min(log.entries.len())..];
        let mut readings = 0;
        for entry in new {
            if let Record::Reading(reading) = &entry.record {
                readings += 1;
                let tick = reading.target.test.unit().is_none();
                // The first keys of a line may have answered another question.
                let keyed = self.keyed.iter().any(|line| line.ends_with(&reading.value));
                if !tick && !keyed {
                    tally
                        .false_ones
                        .push(format!("{} was never keyed", reading.value));
                }
            }
        }
        for (no, value) in said {
            let there = log.entry(*no).is_some_and(|entry| match &entry.record {
                Record::Reading(reading) => {
                    value.starts_with(&reading.value) || reading.target.test.unit().is_none()
                }
                _ => false,
            });
            if !there {
                tally.lost.push(format!("entry {no}, {value}"));
            }
        }
        // Between the sync and the word on the screen there is room for one entry.
        match readings - said.len().min(readings) {
            0 => {}
            1 => tally.unsaid += 1,
            n => tally
                .false_ones
                .push(format!("{n} entries nobody was told of")),
        }
        tally.said_kept += said.len();
        tally.in_log += readings;
        self.entries = log.entries;
    }
}

fn reader(child: &mut Child) -> Receiver<String> {
    let out = child.stdout.take().expect("a pipe");
    let (send, lines) = channel();
    thread::spawn(move || {
        for line in BufReader::new(out).lines().map_while(Result::ok) {
            if send.send(line).is_err() {
                break;
            }
        }
    });
    lines
}

/// Lines of the transcript end to end, so that what was wrapped reads through.
fn put(said: &mut String, line: &str) {
    said.push(' ');
    said.push_str(line.strip_prefix("* ").unwrap_or(line).trim());
}

/// The values said to be kept, with their entries.
fn kept(said: &str) -> Vec<(u64, String)> {
    // "Kept: 0.59 Ω (entry 3)", or with its reason "Kept as found: 0.91 Ω, why (entry 4)".
    said.replace("Kept as found: ", "Kept: ")
        .split("Kept: ")
        .skip(1)
        .filter_map(|rest| {
            let (value, rest) = rest.split_once(" (entry ")?;
            let value = value.split(", ").next()?;
            let (no, _) = rest.split_once(')')?;
            Some((no.parse().ok()?, value.to_owned()))
        })
        .collect()
}

#[test]
fn whatever_moment_a_session_is_killed_at_what_it_said_is_kept_is_kept() {
    let number = |name: &str| std::env::var(name).ok().and_then(|n| n.parse::<u64>().ok());
    let kills = number("HANDSFULL_KILLS").unwrap_or(60);
    let mut chance = Chance(number("HANDSFULL_SEED").unwrap_or(20_260_302));
    let mut tally = Tally::default();
    let mut life = Life::new();
    for kill in 0..kills {
        let ended = life.round(&mut chance, &mut tally);
        if ended || kill % 25 == 24 {
            finish(&life, &mut tally);
            life = Life::new();
        }
    }
    finish(&life, &mut tally);
    println!(
        "{} kills: {} readings said to be kept, {} in the logs, {} kept but not said yet, {} torn \
         ends, {} lost, {} false",
        tally.kills,
        tally.said_kept,
        tally.in_log,
        tally.unsaid,
        tally.torn,
        tally.lost.len(),
        tally.false_ones.len()
    );
    assert_eq!(tally.lost, Vec::<String>::new());
    assert_eq!(tally.false_ones, Vec::<String>::new());
    // A harness that never gets as far as a reading shows nothing.
    assert!(tally.said_kept as u64 > kills / 10, "{tally:?}");
}

/// A last session opens the log, mends its end and closes in order; then all of it must hold.
fn finish(life: &Life, tally: &mut Tally) {
    let mut child = life.start();
    drop(child.stdin.take());
    // What it prints is read to the end: a closed pipe would be another kind of fault.
    for _ in reader(&mut child) {}
    child.wait().expect("it ends");
    let verified = Command::new(env!("CARGO_BIN_EXE_handsfull"))
        .args(["verify", "job.toml"])
        .current_dir(life.folder.path())
        .output()
        .expect("the program runs");
    if !verified.status.success() {
        let text = String::from_utf8_lossy(&verified.stdout).into_owned();
        tally.false_ones.push(text);
    }
}
