//! `handsfull verify`: say what holds of a job's log, entry by entry.

use std::{collections::BTreeSet, fmt::Write as _, path::PathBuf};

use clap::Args as ClapArgs;

use super::{
    failure::{Failure, Kind},
    logbook,
};
use crate::{
    domain::record::Record,
    journal::{
        self, Inspection,
        clips::{Clips, Keeping},
    },
};

/// Say what holds of a job's log: every check, the end, the clips
///
/// Each entry carries a check over itself and the check before it, so a lost, changed or moved
/// entry shows. A witness beside the log shows a cleanly cut end. What does not hold is listed with
/// its line, and the exit code is 1.
#[derive(Debug, ClapArgs)]
pub struct Args {
    /// Job file (NAME.toml) or its log (NAME.log.toml)
    job: PathBuf,
    /// Say also whether the log still holds the entry with this check, as printed on a schedule
    /// (the first 12 digits or more)
    #[arg(long, value_name = "CHECK")]
    holds: Option<String>,
}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(args: &Args) -> Result<(), Failure> {
    let inspection = journal::inspect(&args.job).map_err(|e| logbook::failure(&e))?;
    let mut findings: Vec<String> = inspection
        .log
        .problems
        .iter()
        .map(ToString::to_string)
        .collect();
    let mut out = String::new();
    said(&mut out, &inspection);
    let clips = clips(&inspection, &mut findings);
    let _ = writeln!(out, "{clips}");
    let path = inspection.places.log();
    if let Some(wanted) = &args.holds {
        match find(&inspection, wanted)? {
            Some(no) => {
                let _ = writeln!(
                    out,
                    "check {wanted}: entry {no}, and all before it unchanged"
                );
            }
            None => findings.push(format!("no entry has the check {wanted}")),
        }
    }
    for finding in &findings {
        let _ = writeln!(out, "{finding}");
    }
    logbook::print(&out)?;
    match findings.len() {
        0 => logbook::print("All of it holds.\n"),
        n => Err(Failure::new(
            Kind::Findings,
            format!(
                "{}: {n} {} not hold",
                path.display(),
                if n == 1 { "thing does" } else { "things do" }
            ),
        )
        .hint("entries that do not hold count for nothing: their tests are open again")),
    }
}

fn said(out: &mut String, inspection: &Inspection) {
    let log = &inspection.log;
    let _ = writeln!(out, "{}", inspection.places.log().display());
    for chain in &log.chains {
        let begun = chain.begun.map_or_else(
            || "at an unknown time".into(),
            |m| format!("on {}", m.minute()),
        );
        let name = match chain.journal.as_str() {
            "" => "(unreadable head)",
            name => name,
        };
        let _ = writeln!(
            out,
            "journal {name} of job {}, begun {begun}: {} entries, last check {}",
            chain.job, chain.entries, chain.check
        );
    }
    if inspection.held {
        out.push_str("a session holds it now: this is how it stands at this moment\n");
    }
    if !inspection.witnessed {
        out.push_str("no witness beside it: whether its end is complete cannot be said\n");
    }
}

/// Looks at every clip the log names; gives a line about them.
fn clips(inspection: &Inspection, findings: &mut Vec<String>) -> String {
    let clips = Clips::new(inspection.places.clips(), Keeping::default());
    let (mut there, mut gone, mut named) = (0, 0, BTreeSet::new());
    for entry in &inspection.log.entries {
        let Record::Reading(reading) = &entry.record else {
            continue;
        };
        let (Some(file), Some(digest)) = (&reading.clip, &reading.clip_digest) else {
            continue;
        };
        named.insert(file.as_str());
        match clips.holds(file, digest) {
            Ok(Some(true)) => there += 1,
            Ok(Some(false)) => findings.push(format!(
                "entry {}: clip {file} is not the one that was recorded",
                entry.no
            )),
            // Clips are thrown away by age and size; the log keeps their digests.
            Ok(None) => gone += 1,
            Err(e) => findings.push(format!("entry {}: {e}", entry.no)),
        }
    }
    let mut line = match there + gone {
        0 => "no clips named".to_owned(),
        _ => format!("{} there and unchanged", counted(there)),
    };
    if gone > 0 {
        let _ = write!(line, ", {gone} no longer there");
    }
    match clips.others(&named) {
        Ok((others, changed)) => {
            if others > 0 {
                let other = counted(others);
                let _ = write!(line, "; {other} more of commands and refused hearings");
            }
            findings.extend(changed.iter().map(|file| {
                format!("clip {file}, which no entry names, is not the one that was recorded")
            }));
        }
        Err(e) => findings.push(e.to_string()),
    }
    line
}

fn counted(clips: usize) -> String {
    match clips {
        1 => "1 clip".into(),
        n => format!("{n} clips"),
    }
}

/// The entry whose check begins with these digits.
fn find(inspection: &Inspection, wanted: &str) -> Result<Option<u64>, Failure> {
    let hex = wanted.chars().all(|c| matches!(c, '0'..='9' | 'a'..='f'));
    if !(12..=64).contains(&wanted.len()) || !hex {
        return Err(
            Failure::new(Kind::Usage, format!("`{wanted}` is not a check"))
                .hint("give 12 to 64 of its digits, 0-9 and a-f, as printed on the schedule"),
        );
    }
    let log = &inspection.log;
    Ok(log
        .entries
        .iter()
        .zip(&log.checks)
        .find(|(_, check)| check.to_hex().starts_with(wanted))
        .map(|(entry, _)| entry.no))
}
