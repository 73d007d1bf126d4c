//! Many thousand entries through the real session with an ear that is wrong or deaf one time in
//! five, and a tester who looks at every read-back.
//!
//! The confusions are those measured for this vocabulary and those one sound apart by the CMU
//! pronouncing dictionary: five/nine, one/nine, four/five, zero/four, seven/eleven, teens/tens, a
//! lost "point", a lost "greater than", repeated digits heard once. A reading may also be heard as
//! another phrase of the prompt, a reply as another command.
//!
//! `HANDSFULL_ENTRIES` sets how many entries are made (20 000 when not set).

use std::collections::BTreeMap;

use handsfull::{
    domain::{
        kept::Value,
        plan::Job,
        reading::{Reading, Unit},
        record::Record,
        standing::Standing,
        test::Target,
    },
    session::{
        Event, Key, Prompt, Settings, Setup,
        prompt::{Choice, DeadStep, Entry},
    },
    speech::meaning::{Control, Meaning, Reply},
};
use rust_decimal::Decimal;

use super::bench::{Bench, job};

/// SplitMix64: small, seeded, good enough to choose with.
pub struct Dice(pub u64);

impl Dice {
    pub fn next(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }

    pub fn below(&mut self, n: usize) -> usize {
        (self.next() % n.max(1) as u64) as usize
    }

    pub fn percent(&mut self, p: usize) -> bool {
        self.below(100) < p
    }
}

/// How the ear fails.
#[derive(Clone, Copy)]
struct Ear {
    /// Percent of utterances wrong or lost.
    wrong: usize,
    /// Affirm and negative may be heard as each other.
    flips: bool,
}

#[derive(Default, Debug)]
struct Tally {
    entries: usize,
    utterances: usize,
    misheard: usize,
    keys: usize,
    refused: usize,
    sessions: usize,
    /// Wrong values that reached the log before the tester corrected them.
    wrong_entries: usize,
}

struct Tester {
    dice: Dice,
    ear: Ear,
    /// The test whose reading was asked for last.
    at: Option<Target>,
    /// What the instrument shows, by target.
    truth: BTreeMap<Target, Entry>,
    tally: Tally,
}

impl Tester {
    /// What the instrument shows for a target: mostly within the range, sometimes off.
    fn truth(&mut self, bench: &Bench, target: &Target) -> Entry {
        if let Some(entry) = self.truth.get(target) {
            return entry.clone();
        }
        let Some(unit) = target.test.unit() else {
            return Entry::Tick(true);
        };
        let range = match bench.state().top() {
            Prompt::Ask(ask) => (ask.expected.low, ask.expected.high),
            _ => (None, None),
        };
        let off = self.dice.percent(5);
        let value = match range {
            (Some(low), Some(high)) if !off => {
                let steps = ((high - low) * Decimal::from(100))
                    .try_into()
                    .unwrap_or(0_u32);
                low.round_dp(2) + Decimal::new(self.dice.below(steps as usize + 1) as i64, 2)
            }
            _ if unit == Unit::Megohm => Decimal::from(self.dice.below(997) as i64 + 3),
            _ => Decimal::new(self.dice.below(500) as i64, 2),
        };
        let text = match unit {
            Unit::Megohm if self.dice.percent(40) => format!(">{value}"),
            _ => value.to_string(),
        };
        let reading: Reading = text.parse().expect("a reading");
        let entry = Entry::Reading(reading.or_unit(unit));
        self.truth.insert(target.clone(), entry.clone());
        entry
    }

    /// Another reading that sounds alike.
    fn alike(&mut self, reading: &Reading) -> Reading {
        const PAIRS: [(char, char); 8] = [
            ('5', '9'),
            ('1', '9'),
            ('4', '5'),
            ('0', '4'),
            ('9', '5'),
            ('9', '1'),
            ('5', '4'),
            ('6', '7'),
        ];
        let figure = reading.figure();
        let mut text = match self.dice.below(6) {
            0 => figure.replace('.', ""),
            1 => figure.replace(['>', '<'], ""),
            2 => {
                let (from, to) = PAIRS[self.dice.below(PAIRS.len())];
                figure.replacen(from, &to.to_string(), 1)
            }
            3 if figure.len() > 2 => figure[..figure.len() - 1].trim_end_matches('.').to_owned(),
            4 => format!("{figure}0"),
            _ => {
                // A teen for a ten, or the other way round.
                let plain: String = figure.chars().filter(char::is_ascii_digit).collect();
                match plain.parse::<u32>() {
                    Ok(n @ 13..=19) => ((n - 10) * 10).to_string(),
                    Ok(n @ 30..=90) if n % 10 == 0 => (n / 10 + 10).to_string(),
                    _ => {
                        let (from, to) = PAIRS[self.dice.below(PAIRS.len())];
                        figure.replace(from, &to.to_string())
                    }
                }
            }
        };
        if text.is_empty() || text.ends_with('.') {
            text = "9".into();
        }
        text.parse::<Reading>()
            .unwrap_or_else(|_| "9".parse().expect("a reading"))
    }

    /// Says something to the session through the ear.
    fn say(&mut self, bench: &mut Bench, meaning: Meaning) {
        self.tally.utterances += 1;
        let heard = if self.dice.percent(self.ear.wrong) {
            self.tally.misheard += 1;
            self.misheard(&meaning)
        } else {
            // Digits without their unit, as most are said.
            meaning
        };
        bench.hear("words", heard);
    }

    fn misheard(&mut self, meaning: &Meaning) -> Meaning {
        if self.dice.percent(35) {
            return Meaning::Nothing("noise or other talk".into());
        }
        match meaning {
            Meaning::Reading(reading) => match self.dice.below(10) {
                0 => Meaning::Control(self.any_command()),
                1 => {
                    let other = self.alike(reading);
                    Meaning::Ambiguous(vec![
                        Meaning::Reading(other),
                        Meaning::Reading(reading.clone()),
                    ])
                }
                2 => {
                    let (a, b) = (self.alike(reading), self.alike(reading));
                    Meaning::Ambiguous(vec![Meaning::Reading(a), Meaning::Reading(b)])
                }
                _ => Meaning::Reading(self.alike(reading)),
            },
            Meaning::Reply(Reply::Affirm) if self.ear.flips && self.dice.percent(60) => {
                Meaning::Reply(Reply::Negative)
            }
            Meaning::Reply(Reply::Negative) if self.ear.flips && self.dice.percent(60) => {
                Meaning::Reply(Reply::Affirm)
            }
            _ => Meaning::Control(self.any_command()),
        }
    }

    fn any_command(&mut self) -> Control {
        const ANY: [Control; 13] = [
            Control::SayAgain,
            Control::Disregard,
            Control::Correction(None),
            Control::Standby,
            Control::Back,
            Control::Next,
            Control::Help,
            Control::ListOpen,
            Control::ListLinks,
            Control::Why,
            Control::DigitByDigit,
            Control::Skip,
            Control::Stop,
        ];
        ANY[self.dice.below(ANY.len())].clone()
    }

    fn press(&mut self, bench: &mut Bench, key: Key) {
        self.tally.keys += 1;
        bench.take(Event::Key(key));
    }

    fn type_reading(&mut self, bench: &mut Bench, reading: &Reading) {
        for c in reading.figure().chars() {
            let key = match c {
                '>' => Key::Plus,
                '<' => Key::Minus,
                '.' => Key::Point,
                d => Key::Digit(d.to_digit(10).unwrap_or(0) as u8),
            };
            self.press(bench, key);
        }
        self.press(bench, Key::Enter);
    }

    /// A value that stands in the log and is not what the instrument showed.
    fn wrong_one(&self, standing: &Standing) -> Option<Target> {
        let last = standing
            .kept
            .iter()
            .max_by_key(|(t, _)| standing.kept.entry(t))?;
        let (target, value) = last;
        let entry = match value {
            Value::Reading(r) => Entry::Reading(r.clone()),
            Value::Ticked(ok) => Entry::Tick(*ok),
        };
        self.truth
            .get(target)
            .is_some_and(|truth| !same(truth, &entry))
            .then(|| target.clone())
    }

    /// Whether that is what the instrument shows, to the last zero.
    fn reads(&self, target: &Target, entry: &Entry) -> bool {
        let truth = self.truth.get(target).unwrap_or(&Entry::Tick(true));
        same(truth, entry)
    }

    /// Does one thing, looking at the screen as a person would.
    fn act(&mut self, bench: &mut Bench) {
        let wrong = self.wrong_one(bench.state().standing());
        match bench.state().top().clone() {
            Prompt::Ask(ask) => {
                if let Some(target) = wrong.filter(|t| *t != ask.target) {
                    // "Kept: 0.59" stood on the screen and it is wrong.
                    let _ = target;
                    return self.say(bench, Meaning::Control(Control::Correction(None)));
                }
                self.at = Some(ask.target.clone());
                let truth = self.truth(bench, &ask.target);
                match &truth {
                    Entry::Tick(true) => self.say(bench, Meaning::Control(Control::Confirmed)),
                    Entry::Tick(false) => self.say(bench, Meaning::Control(Control::NotConfirmed)),
                    Entry::Reading(reading) => {
                        if ask.misses >= 2 || self.dice.percent(10) {
                            // A draft may stand there from an interruption: rub it out first.
                            for _ in 0..12 {
                                self.press(bench, Key::Erase);
                            }
                            if matches!(bench.state().top(), Prompt::Ask(a) if a.target == ask.target)
                            {
                                self.type_reading(bench, reading);
                            }
                        } else {
                            let figure = reading.figure();
                            let reading = figure.parse().expect("a reading");
                            self.say(bench, Meaning::Reading(reading));
                        }
                    }
                }
            }
            Prompt::Confirm(candidate) => {
                let right = self.reads(&candidate.target, &candidate.entry);
                if !right {
                    self.tally.refused += 1;
                }
                let reply = if right {
                    Reply::Affirm
                } else {
                    Reply::Negative
                };
                if self.dice.percent(20) {
                    self.press(bench, if right { Key::Enter } else { Key::Minus });
                } else {
                    self.say(bench, Meaning::Reply(reply));
                }
            }
            Prompt::Question(candidate) => {
                let right = self.reads(&candidate.target, &candidate.entry);
                let reply = if right {
                    Reply::KeepAsFound
                } else {
                    Reply::MeasureAgain
                };
                self.say(bench, Meaning::Reply(reply));
            }
            Prompt::List(list) => {
                // The list of reasons names the value that would be kept: it is looked at.
                let shown = self.at.as_ref().and_then(|at| self.truth.get(at));
                let right = shown.is_none_or(|truth| list.title.contains(&truth.to_string()));
                let mut pick = None;
                for (n, (_, choice)) in list.shown() {
                    let wanted = match choice {
                        Choice::Candidate(c) => self.reads(&c.target, &c.entry),
                        Choice::Keep(_, fault) => !*fault && right,
                        _ => false,
                    };
                    if wanted && pick.is_none() {
                        pick = Some(n as u8);
                    }
                }
                match pick {
                    Some(n) => self.say(bench, Meaning::Reply(Reply::Pick(n))),
                    None => self.say(bench, Meaning::Control(Control::Disregard)),
                }
            }
            Prompt::Dead(dead) if dead.step == DeadStep::Method => {
                self.say(bench, Meaning::Reply(Reply::Pick(1)));
            }
            Prompt::Standby => self.say(bench, Meaning::Control(Control::Resume)),
            Prompt::StopAsk => self.say(bench, Meaning::Reply(Reply::Negative)),
            Prompt::Page(_) | Prompt::Menu | Prompt::Call(_) => {
                self.say(bench, Meaning::Control(Control::Disregard));
            }
            // The last value kept stands on this screen, too.
            Prompt::Finish if wrong.is_some() => {
                self.say(bench, Meaning::Control(Control::Correction(None)));
            }
            Prompt::Finish => self.press(bench, Key::Enter),
            Prompt::Gate(_)
            | Prompt::Dead(_)
            | Prompt::Fit(_)
            | Prompt::TakeOut(_)
            | Prompt::Hold(_)
            | Prompt::Trouble(_) => {
                if self.dice.percent(50) {
                    self.press(bench, Key::Enter);
                } else {
                    self.say(bench, Meaning::Reply(Reply::Affirm));
                }
            }
        }
    }

    /// Works a job to its end, through as many sessions as it takes.
    fn work(&mut self, plan: &Job) {
        self.truth.clear();
        let mut standing = Standing::new();
        let mut records: Vec<Record> = Vec::new();
        loop {
            self.tally.sessions += 1;
            let mut setup = Setup::new(plan.clone(), "A. Tester", Settings::default());
            setup.voice = Some("test voice".into());
            let mut bench = Bench::with_muted(setup, standing, records);
            let mut idle = 0;
            let mut before = bench.records.len();
            while !bench.quit {
                if self.dice.below(400) == 0 {
                    bench.refusals = 1;
                }
                self.act(&mut bench);
                idle = if bench.records.len() > before {
                    0
                } else {
                    idle + 1
                };
                before = bench.records.len();
                assert!(idle < 400, "a dead end at {:?}", bench.state().top());
            }
            standing = bench.state().standing().clone();
            records = std::mem::take(&mut bench.records);
            let open = bench.state().open().count();
            if open == 0 && standing.works_in.is_empty() {
                break;
            }
        }
        self.check(plan, &standing, &records);
    }

    fn check(&mut self, plan: &Job, standing: &Standing, records: &[Record]) {
        let setup = Setup::new(plan.clone(), "A. Tester", Settings::default());
        for target in setup.required() {
            if standing.skipped.contains_key(target) {
                continue;
            }
            let value = standing.kept.value(target).expect("every test is in");
            let truth = self.truth.get(target).cloned().unwrap_or(Entry::Tick(true));
            let entry = match value {
                Value::Reading(r) => Entry::Reading(r.clone()),
                Value::Ticked(ok) => Entry::Tick(*ok),
            };
            assert_eq!(entry.to_string(), truth.to_string(), "{target}");
        }
        // An affirmed value stands once: a second entry of a test names the one it replaces.
        let mut newest: BTreeMap<&Target, u64> = BTreeMap::new();
        for (at, record) in records.iter().enumerate() {
            let Record::Reading(reading) = record else {
                continue;
            };
            self.tally.entries += 1;
            if let Some(Entry::Reading(truth)) = self.truth.get(&reading.target)
                && truth.figure() != reading.value
            {
                self.tally.wrong_entries += 1;
            }
            let before = newest.insert(&reading.target, at as u64 + 1);
            assert_eq!(reading.corrects, before, "{}", reading.target);
        }
    }
}

/// Equal as printed: 0.50 is not 0.5.
fn same(a: &Entry, b: &Entry) -> bool {
    a.to_string() == b.to_string()
}

fn wanted() -> usize {
    std::env::var("HANDSFULL_ENTRIES")
        .ok()
        .and_then(|n| n.parse().ok())
        .unwrap_or(20_000)
}

fn simulate(ear: Ear, entries: usize, seed: u64) -> Tally {
    let jobs = [
        job(include_str!("../fixtures/workshop.toml")),
        job(include_str!("../fixtures/press-hall.toml")),
        job(include_str!("../fixtures/barn.toml")),
        job(include_str!("../fixtures/garden.toml")),
    ];
    let mut tester = Tester {
        dice: Dice(seed),
        ear,
        at: None,
        truth: BTreeMap::new(),
        tally: Tally::default(),
    };
    for plan in jobs.iter().cycle() {
        tester.work(plan);
        if tester.tally.entries >= entries {
            break;
        }
    }
    tester.tally
}

fn report(name: &str, tally: &Tally) {
    let per = |n: usize| n as f64 / tally.entries as f64;
    println!(
        "{name}: {} entries in {} sessions; {:.2} utterances and {:.2} keys an entry (gates and \
         works included); {} of {} utterances wrong or lost; {} read-backs refused; {} wrong \
         values entered and corrected",
        tally.entries,
        tally.sessions,
        per(tally.utterances),
        per(tally.keys),
        tally.misheard,
        tally.utterances,
        tally.refused,
        tally.wrong_entries,
    );
}

#[test]
fn a_bad_ear_and_a_watchful_tester_leave_no_wrong_value() {
    let ear = Ear {
        wrong: 20,
        flips: false,
    };
    let tally = simulate(ear, wanted(), 1);
    report("one in five wrong or lost", &tally);
    assert_eq!(tally.wrong_entries, 0);
    assert!(tally.misheard * 100 > tally.utterances * 18, "{tally:?}");
    assert!(tally.refused > 0);
}

#[test]
fn even_yes_heard_for_no_is_put_right_by_a_correction() {
    let ear = Ear {
        wrong: 20,
        flips: true,
    };
    let tally = simulate(ear, wanted() / 4, 2);
    report("the same, affirm and negative swapped at times", &tally);
    assert!(tally.wrong_entries > 0, "the swap never bit: {tally:?}");
}
