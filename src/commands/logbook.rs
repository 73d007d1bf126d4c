//! What review, schedule, verification and join share: the log, its job, and errors as told.

use std::path::Path;

use crate::{
    domain::{plan::Job, record::EntryNo, sequence, standing::Standing, test::Target},
    journal::{self, Inspection, JournalError},
    plan::{self, PlanError},
    report::{Integrity, review::Material},
};

use super::failure::{Failure, Kind};

/// A log with everything a report is made from.
pub(super) struct Logbook {
    pub inspection: Inspection,
    pub job: Option<Job>,
    pub required: Vec<Target>,
    pub standing: Standing,
    pub integrity: Integrity,
}

impl Logbook {
    /// Reads the log of a job, given the job file or the log. A missing job file is said, not an
    /// error: a log can be reviewed without its plan.
    pub fn open(path: &Path) -> Result<Self, Failure> {
        let inspection = journal::inspect(path).map_err(|e| failure(&e))?;
        let places = inspection.places.clone();
        let job = match plan::load(&places.job()) {
            Ok(job) => Some(job),
            Err(PlanError::Unreadable { .. }) if !places.job().exists() => None,
            Err(e) => return Err(Failure::new(Kind::Input, e)),
        };
        if let Some(job) = &job
            && let Some(other) = inspection
                .log
                .chains
                .iter()
                .find(|c| c.holds && c.job != job.reference)
        {
            return Err(failure(&JournalError::OtherJob {
                path: places.log(),
                expected: job.reference.clone(),
                found: other.job.clone(),
            }));
        }
        let required = job.as_ref().map(sequence::required).unwrap_or_default();
        let standing = journal::replay::standing(&inspection.log);
        let integrity = integrity(&inspection);
        Ok(Self {
            inspection,
            job,
            required,
            standing,
            integrity,
        })
    }

    /// What reports are made from.
    pub fn material(&self) -> Material<'_> {
        Material {
            job: self.job.as_ref(),
            required: &self.required,
            entries: &self.inspection.log.entries,
            standing: &self.standing,
            integrity: &self.integrity,
        }
    }

    /// Reference of the job, from its plan or its log.
    pub fn reference(&self) -> String {
        match (&self.job, self.inspection.log.chains.first()) {
            (Some(job), _) => job.reference.clone(),
            (None, Some(chain)) => chain.job.clone(),
            (None, None) => String::new(),
        }
    }

    /// A failure that names an entry which is not there.
    pub fn no_entry(&self, no: EntryNo) -> Failure {
        Failure::new(
            Kind::Usage,
            format!(
                "{}: there is no entry {no}",
                self.inspection.places.log().display()
            ),
        )
        .hint(format!(
            "entries are numbered 1 to {}; `handsfull review --by time` lists them",
            self.inspection.log.last()
        ))
    }
}

/// What is known of a log, for reports.
fn integrity(inspection: &Inspection) -> Integrity {
    let log = &inspection.log;
    Integrity {
        entries: log.last(),
        last_check: log
            .chains
            .last()
            .map(|c| c.check.clone())
            .unwrap_or_default(),
        journals: log.chains.iter().map(|c| c.journal.clone()).collect(),
        problems: log.problems.iter().map(ToString::to_string).collect(),
        witnessed: inspection.witnessed,
    }
}

/// A journal's error as told to the user.
pub(super) fn failure(error: &JournalError) -> Failure {
    let missing = |source: &std::io::Error| source.kind() == std::io::ErrorKind::NotFound;
    match error {
        JournalError::Busy { .. } => Failure::new(Kind::Busy, error),
        JournalError::Io {
            path,
            source,
            doing: "open the log",
        } if missing(source) => {
            Failure::new(Kind::Input, format!("{}: there is no log", path.display()))
                .hint("`handsfull field JOB` begins one; name the job file or its log")
        }
        JournalError::Io { .. } | JournalError::NotKept { .. } | JournalError::Stuck { .. } => {
            Failure::new(Kind::Log, error)
                .hint("free some space or make the folder writable, then open the job again")
        }
        JournalError::TooLong { .. } => Failure::new(Kind::Usage, error),
        JournalError::Changed { .. } => Failure::new(Kind::Log, error),
        JournalError::OtherJob { .. }
        | JournalError::NotALog { .. }
        | JournalError::Newer { .. }
        | JournalError::HandJoined { .. } => Failure::new(Kind::Input, error),
    }
}

/// Writes to standard output; a reader that has gone away (`| head`) is no error.
pub(super) fn print(text: &str) -> Result<(), Failure> {
    use std::io::{ErrorKind, Write};
    match std::io::stdout().lock().write_all(text.as_bytes()) {
        Err(e) if e.kind() != ErrorKind::BrokenPipe => {
            Err(Failure::new(Kind::Device, format!("cannot print: {e}")))
        }
        _ => Ok(()),
    }
}
