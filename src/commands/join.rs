//! `handsfull join`: bring the logs of several handhelds on one job together; decide conflicts.

use std::{
    fs,
    path::{Path, PathBuf},
};

use clap::Args as ClapArgs;
use jiff::ZonedDateTime;

use super::{
    failure::{Failure, Kind},
    logbook::{self, Logbook},
};
use crate::{
    domain::{moment::Moment, record::Record, standing::Standing},
    journal::{
        self, Inspection, Journal, Places,
        join::{self, Source},
    },
    report::words,
};

/// Bring the logs of several handhelds on one job together
///
/// Each journal goes in byte for byte, so `verify` still says of every entry whether it holds. A
/// test measured on several handhelds with different values counts for none of them until a person
/// decides: the entries are listed, and `--take` says which one counts. The logs joined stay as
/// they are; go on with the joined one.
#[derive(Debug, ClapArgs)]
pub struct Args {
    /// Job file or log; with --take the joined log
    job: PathBuf,
    /// Logs (or job files) of the other handhelds
    #[arg(required_unless_present = "take")]
    others: Vec<PathBuf>,
    /// Where the joined log goes (default: NAME.joined.log.toml beside the first)
    #[arg(long, value_name = "FILE")]
    into: Option<PathBuf>,
    /// Decide: the value in this entry counts (may be given several times)
    #[arg(long, value_name = "ENTRY", conflicts_with_all = ["others", "into"], requires_all = ["reason", "name"])]
    take: Vec<u64>,
    /// Decide: why
    #[arg(long, requires = "take")]
    reason: Option<String>,
    /// Decide: who
    #[arg(long, requires = "take")]
    name: Option<String>,
}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(args: &Args) -> Result<(), Failure> {
    if args.take.is_empty() {
        bring_together(args)
    } else {
        decide(args)
    }
}

fn bring_together(args: &Args) -> Result<(), Failure> {
    let paths: Vec<&Path> = std::iter::once(&args.job)
        .chain(&args.others)
        .map(PathBuf::as_path)
        .collect();
    let mut logs: Vec<(Inspection, Vec<u8>)> = vec![];
    for path in paths {
        let seen = journal::inspect(path).map_err(|e| logbook::failure(&e))?;
        let log = seen.places.log();
        if seen.held {
            return Err(Failure::new(
                Kind::Busy,
                format!("{}: a session holds this log now", log.display()),
            )
            .hint("close the session, then join"));
        }
        let bytes = fs::read(&log)
            .map_err(|e| Failure::new(Kind::Input, format!("{}: {e}", log.display())))?;
        for problem in &seen.log.problems {
            eprintln!("handsfull: {}: {problem}", log.display());
        }
        logs.push((seen, bytes));
    }
    let into = target(args, &logs)?;
    let sources: Vec<Source> = logs
        .iter()
        .map(|(seen, bytes)| Source {
            name: seen.places.log().display().to_string(),
            bytes,
            log: &seen.log,
        })
        .collect();
    let now = Moment::from(&ZonedDateTime::now());
    let joined = join::join(&sources, now, None).map_err(|e| Failure::new(Kind::Input, e))?;
    for note in &joined.notes {
        eprintln!("handsfull: {note}");
    }
    let written = |e: std::io::Error| {
        Failure::new(
            Kind::Log,
            format!("{}: cannot be written: {e}", into.log().display()),
        )
    };
    journal::whole(&into.log(), into.folder(), &joined.bytes).map_err(written)?;
    // A witness of an older joined log would speak of entries this one never had.
    match fs::remove_file(into.lock()) {
        Err(e) if e.kind() != std::io::ErrorKind::NotFound => return Err(written(e)),
        _ => {}
    }
    for (seen, _) in &logs {
        copy_clips(&seen.places, &into)?;
    }
    let standing = record_join(&into, &joined, now)?;
    report(&into, &joined, &standing)
}

/// Where the joined log goes. One that is there already must be among those joined.
fn target(args: &Args, logs: &[(Inspection, Vec<u8>)]) -> Result<Places, Failure> {
    let log = match &args.into {
        Some(path) => Places::of(path).log(),
        None => Places::of(&args.job).joined(),
    };
    let same = |other: &Path| matches!((fs::canonicalize(other), fs::canonicalize(&log)), (Ok(a), Ok(b)) if a == b);
    if log.exists() && !logs.iter().any(|(seen, _)| same(&seen.places.log())) {
        return Err(
            Failure::new(Kind::Usage, format!("{}: is there already", log.display()))
                .hint("name it among the logs to be joined, or give another file with --into"),
        );
    }
    Ok(Places::of(&log))
}

/// Clips are named after their digest, so equal names are equal clips.
fn copy_clips(from: &Places, to: &Places) -> Result<(), Failure> {
    let Ok(listing) = fs::read_dir(from.clips()) else {
        return Ok(());
    };
    if from.clips() == to.clips() {
        return Ok(());
    }
    let failed = |e: std::io::Error| {
        Failure::new(
            Kind::Log,
            format!("{}: cannot be copied: {e}", from.clips().display()),
        )
    };
    fs::create_dir_all(to.clips()).map_err(failed)?;
    for clip in listing {
        let clip = clip.map_err(failed)?;
        let copy = to.clips().join(clip.file_name());
        if clip.path().extension().is_some_and(|e| e == "flac") && !copy.exists() {
            let bytes = fs::read(clip.path()).map_err(failed)?;
            journal::whole(&copy, &to.clips(), &bytes).map_err(failed)?;
        }
    }
    Ok(())
}

/// The join itself is an entry: from then on a witness stands beside the log.
fn record_join(into: &Places, joined: &join::Joined, now: Moment) -> Result<Standing, Failure> {
    let job = journal::inspect(&into.log())
        .map_err(|e| logbook::failure(&e))?
        .log
        .chains
        .first()
        .map(|c| c.job.clone())
        .unwrap_or_default();
    let (mut journal, mut recovery) =
        Journal::open(&into.log(), &job, now).map_err(|e| logbook::failure(&e))?;
    let parts: Vec<String> = joined
        .journals
        .iter()
        .map(|(name, entries)| format!("{name} ({entries} entries)"))
        .collect();
    let record = Record::Incident {
        what: format!("joined from journals {}", parts.join(", ")),
    };
    let no = journal
        .append(&record, now)
        .map_err(|e| logbook::failure(&e))?;
    recovery.standing.apply(no, &record);
    Ok(recovery.standing)
}

fn report(into: &Places, joined: &join::Joined, standing: &Standing) -> Result<(), Failure> {
    let log = into.log();
    let mut out = format!("{}\n", log.display());
    let letters = ('A'..='Z')
        .map(String::from)
        .chain(std::iter::repeat("?".into()));
    for ((name, entries), letter) in joined.journals.iter().zip(letters) {
        out.push_str(&format!("{letter} journal {name}: {entries} entries\n"));
    }
    logbook::print(&out)?;
    undecided(standing, &log)
}

/// Lists what a person must decide; that is a finding.
fn undecided(standing: &Standing, log: &Path) -> Result<(), Failure> {
    if standing.undecided.is_empty() {
        return logbook::print("No test has two values to decide between.\n");
    }
    let mut out = String::new();
    for (target, several) in &standing.undecided {
        out.push_str(&format!("{target}: measured on several handhelds\n"));
        for (no, value) in several {
            out.push_str(&format!("  #{no}  {}\n", words::value(value)));
        }
    }
    logbook::print(&out)?;
    let n = standing.undecided.len();
    Err(Failure::new(
        Kind::Findings,
        format!(
            "{n} {} open until a person decides",
            if n == 1 { "test is" } else { "tests are" }
        ),
    )
    .hint(format!(
        "handsfull join {} --take ENTRY --reason WHY --name WHO; or measure again",
        log.display()
    )))
}

fn decide(args: &Args) -> Result<(), Failure> {
    let book = Logbook::open(&args.job)?;
    let (Some(reason), Some(name)) = (&args.reason, &args.name) else {
        return Err(Failure::new(Kind::Usage, "--reason and --name are needed"));
    };
    let records = args
        .take
        .iter()
        .map(|no| {
            let target = book
                .standing
                .undecided
                .iter()
                .find(|(_, several)| several.iter().any(|(entry, _)| entry == no))
                .map(|(target, _)| target.clone());
            match target {
                Some(target) => Ok(Record::Decided {
                    target,
                    takes: *no,
                    reason: reason.clone(),
                    by: name.clone(),
                }),
                None if book.inspection.log.entry(*no).is_none() => Err(book.no_entry(*no)),
                None => Err(Failure::new(
                    Kind::Usage,
                    format!("entry {no} is not one to decide about"),
                )
                .hint("`handsfull review` lists what waits for a decision under Open")),
            }
        })
        .collect::<Result<Vec<_>, _>>()?;
    let now = Moment::from(&ZonedDateTime::now());
    let log = book.inspection.places.log();
    let (mut journal, mut recovery) =
        Journal::open(&log, &book.reference(), now).map_err(|e| logbook::failure(&e))?;
    for record in records {
        let no = journal
            .append(&record, now)
            .map_err(|e| logbook::failure(&e))?;
        recovery.standing.apply(no, &record);
        if let Record::Decided { target, takes, .. } = &record {
            logbook::print(&format!("entry {no} kept: {target}: #{takes} counts\n"))?;
        }
    }
    undecided(&recovery.standing, &log)
}
