//! One session a job: the lock beside the log, and in it a witness of the newest entry kept.
//!
//! The checks of a log cannot show that its last entries were cut off cleanly. The witness can: it
//! is written after each entry is kept, so it never runs ahead of the log; where it names an entry
//! the log does not have, the end was lost. It is not synced: after a power cut it may be older
//! than the log, which says nothing.

use std::{
    fs::{File, OpenOptions, TryLockError},
    io::{self, Read},
    os::unix::fs::{FileExt, OpenOptionsExt},
    path::Path,
    thread,
    time::Duration,
};

use super::error::JournalError;
use crate::domain::record::EntryNo;

/// The newest entry kept, as the witness saw it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Witness {
    /// Its number in the log.
    pub no: EntryNo,
    /// Its check.
    pub check: String,
}

/// Held while a session is open; let go when dropped or when the process ends, however it ends.
#[derive(Debug)]
pub(super) struct Lock {
    file: File,
    /// What it said when it was taken.
    pub witness: Option<Witness>,
}

impl Lock {
    /// Takes the lock of a job.
    pub fn take(path: &Path) -> Result<Self, JournalError> {
        let mut file = OpenOptions::new()
            .read(true)
            .write(true)
            .create(true)
            .truncate(false)
            .mode(0o600)
            .open(path)
            .map_err(JournalError::io("open the lock", path))?;
        // A command that only looks holds the lock for an instant; a session holds it for hours.
        let mut patience = 10;
        loop {
            match file.try_lock() {
                Ok(()) => break,
                Err(TryLockError::WouldBlock) if patience > 0 => {
                    patience -= 1;
                    thread::sleep(Duration::from_millis(20));
                }
                Err(TryLockError::WouldBlock) => {
                    return Err(JournalError::Busy { path: path.into() });
                }
                Err(TryLockError::Error(e)) => return Err(JournalError::io("lock", path)(e)),
            }
        }
        let witness = read(&mut file).ok().flatten();
        Ok(Self { file, witness })
    }

    /// Notes the newest entry kept. A failure is no failure of the entry: it is kept already.
    pub fn see(&mut self, no: EntryNo, check: &str) {
        // Twenty digits hold any number, so the line always has the same length.
        let line = format!("{no:020} {check}\n");
        let _ = self.file.write_all_at(line.as_bytes(), 0);
    }
}

/// What the lock beside a log says, and whether a session holds it now.
pub(super) fn look(path: &Path) -> (Option<Witness>, bool) {
    let Ok(mut file) = File::open(path) else {
        return (None, false);
    };
    let held = matches!(file.try_lock_shared(), Err(TryLockError::WouldBlock));
    (read(&mut file).ok().flatten(), held)
}

fn read(file: &mut File) -> io::Result<Option<Witness>> {
    let mut text = String::new();
    file.take(256).read_to_string(&mut text)?;
    Ok(parse(&text))
}

fn parse(text: &str) -> Option<Witness> {
    let (no, check) = text.lines().next()?.split_once(' ')?;
    Some(Witness {
        no: no.parse().ok().filter(|no| *no > 0)?,
        check: (check.len() == 64).then(|| check.to_owned())?,
    })
}
