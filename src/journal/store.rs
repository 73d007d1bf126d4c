//! The open log of a job: appends entries, one write and one sync each.
//!
//! Promises: [`Journal::append`] gives a number only after the entry is on the medium; an entry
//! that failed is taken back, so the file is as it was; when even that fails, nothing more is
//! written. It leaves out what the session does with a failure (it must say "not kept").

use std::{fs::OpenOptions, io, os::unix::fs::OpenOptionsExt, path::Path};

use super::{
    error::JournalError,
    lock::Lock,
    medium::Medium,
    places::Places,
    recover::{self, Found, Recovery},
    text::{self, LONGEST},
};
use crate::domain::{
    moment::Moment,
    record::{EntryNo, Record},
};

/// An open log. The job is locked while it lives.
#[derive(Debug)]
pub struct Journal {
    places: Places,
    medium: Box<dyn Medium>,
    lock: Lock,
    /// Number of the newest entry; 0 when there is none.
    last: EntryNo,
    /// Check of the newest entry, or of the head.
    check: String,
    /// When the newest entry was entered.
    time: Option<Moment>,
    /// How long the file must be.
    length: u64,
    stuck: bool,
}

impl Journal {
    /// Opens the log of a job, or begins it. `path` is the job file or the log; `job` its
    /// reference; `now` the time for what recovery enters into the log.
    ///
    /// # Errors
    /// [`JournalError`]: locked by another session, of another job, no log at all, of a newer
    /// format, or not readable and writable.
    pub fn open(path: &Path, job: &str, now: Moment) -> Result<(Self, Recovery), JournalError> {
        Self::open_as(path, job, now, None)
    }

    /// Like [`Journal::open`]; a log that is begun gets this name for its journal in place of a
    /// random one, so that the same input gives the same file.
    ///
    /// # Errors
    /// See [`Journal::open`].
    pub fn open_as(
        path: &Path,
        job: &str,
        now: Moment,
        name: Option<&str>,
    ) -> Result<(Self, Recovery), JournalError> {
        let places = Places::of(path);
        let lock = Lock::take(&places.lock())?;
        let found = recover::examine(&places, job, lock.witness.as_ref())?;
        let (found, mut recovery) = recover::mend(&places, job, now, name, found)?;
        let Found {
            last,
            check,
            time,
            length,
            ..
        } = found;
        let log = places.log();
        let file = OpenOptions::new()
            .read(true)
            .write(true)
            .mode(0o600)
            .open(&log)
            .map_err(JournalError::io("open the log for writing", &log))?;
        let mut journal = Self {
            places,
            medium: Box::new(file),
            lock,
            last,
            check,
            time,
            length,
            stuck: false,
        };
        for what in std::mem::take(&mut recovery.incidents) {
            let incident = Record::Incident { what: what.clone() };
            let no = journal.append(&incident, now)?;
            recovery.standing.apply(no, &incident);
            recovery.incidents.push(what);
        }
        if journal.last > 0 {
            journal.lock.see(journal.last, &journal.check);
        }
        Ok((journal, recovery))
    }

    /// Keeps a record. Only when this returns a number is the entry kept; say so only then.
    ///
    /// When the clock went back by more than a second since the entry before, an incident that
    /// says so goes in first, in the same write.
    ///
    /// # Errors
    /// [`JournalError::NotKept`] when writing or syncing failed and the log is as before,
    /// [`JournalError::Stuck`] when it could not be brought back, [`JournalError::Changed`] when
    /// another program wrote to it, [`JournalError::TooLong`].
    pub fn append(&mut self, record: &Record, at: Moment) -> Result<EntryNo, JournalError> {
        let path = self.places.log();
        if self.stuck {
            return Err(JournalError::Stuck { path });
        }
        let mut no = self.last;
        let mut check = self.check.clone();
        let mut bytes = String::new();
        let mut put = |record: &Record| -> Result<(), JournalError> {
            let (text, sealed) = text::entry(no + 1, at, record, &check)
                .map_err(|e| self.not_kept(no + 1, io::Error::other(e)))?;
            if text.len() > LONGEST {
                return Err(JournalError::TooLong {
                    path: path.clone(),
                    length: text.len(),
                    most: LONGEST,
                });
            }
            no += 1;
            check = sealed;
            bytes.push_str(&text);
            Ok(())
        };
        if let Some(before) = self.time
            && at.seconds_since(before) < -1
        {
            put(&clock_went_back(before, at))?;
        }
        put(record)?;
        self.write(bytes.as_bytes(), no)?;
        self.last = no;
        self.check = check;
        self.time = Some(at);
        self.lock.see(self.last, &self.check);
        Ok(no)
    }

    fn write(&mut self, bytes: &[u8], no: EntryNo) -> Result<(), JournalError> {
        let found = self.medium.length().map_err(|e| self.not_kept(no, e))?;
        if found != self.length {
            return Err(JournalError::Changed {
                path: self.places.log(),
                expected: self.length,
                found,
            });
        }
        let done = self.medium.append(bytes).and_then(|()| self.medium.sync());
        match done {
            Ok(()) => {
                self.length += bytes.len() as u64;
                Ok(())
            }
            Err(source) => {
                if self.medium.cut(self.length).is_err() {
                    self.stuck = true;
                }
                Err(self.not_kept(no, source))
            }
        }
    }

    fn not_kept(&self, no: EntryNo, source: io::Error) -> JournalError {
        JournalError::NotKept {
            path: self.places.log(),
            no,
            source,
        }
    }

    /// Number of the newest entry; 0 when there is none.
    #[must_use]
    pub fn last(&self) -> EntryNo {
        self.last
    }

    /// The check of the newest entry, which stands for all before it.
    #[must_use]
    pub fn check(&self) -> &str {
        &self.check
    }

    /// Where the files of the job lie.
    #[must_use]
    pub fn places(&self) -> &Places {
        &self.places
    }

    /// The entries, read from the file again.
    ///
    /// # Errors
    /// [`JournalError::Io`].
    pub fn entries(&self) -> Result<super::Log, JournalError> {
        super::Log::open(&self.places.log())
    }
}

fn clock_went_back(before: Moment, at: Moment) -> Record {
    let seconds = -at.seconds_since(before);
    Record::Incident {
        what: format!(
            "clock went back by {seconds} s, from {before}: entries count by their numbers, times \
             are kept as the clock said"
        ),
    }
}

#[cfg(test)]
#[path = "store_tests.rs"]
mod tests;
