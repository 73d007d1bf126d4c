//! Why a log could not be opened or an entry not kept: what, where, what to do.

use std::{io, path::PathBuf};

use crate::domain::record::EntryNo;

/// What can go wrong with a log on disk.
#[derive(Debug, thiserror::Error)]
#[allow(missing_docs)] // the fields are named in the messages
pub enum JournalError {
    #[error("{path}: cannot {doing}: {source}", path = path.display())]
    Io {
        doing: &'static str,
        path: PathBuf,
        source: io::Error,
    },
    #[error(
        "{path}: another session holds this job; close it first, or work on your own copy and \
         join the two logs afterwards",
        path = path.display()
    )]
    Busy { path: PathBuf },
    #[error("{path}: is the log of job `{found}`, not of `{expected}`", path = path.display())]
    OtherJob {
        path: PathBuf,
        expected: String,
        found: String,
    },
    #[error(
        "{path}: is not a handsfull log (no [[journal]] table); it is left as it is",
        path = path.display()
    )]
    NotALog { path: PathBuf },
    #[error(
        "{path}: is written in format {format}, this program knows format {known}; use the \
         program that wrote it",
        path = path.display(),
        known = super::text::FORMAT
    )]
    Newer { path: PathBuf, format: u64 },
    #[error(
        "{path}: was put together by hand; `handsfull join` makes a log that can go on",
        path = path.display()
    )]
    HandJoined { path: PathBuf },
    #[error(
        "{path}: entry {no} is NOT kept ({source}); the log stands as before",
        path = path.display()
    )]
    NotKept {
        path: PathBuf,
        no: EntryNo,
        source: io::Error,
    },
    #[error("{path}: entry is NOT kept: {length} bytes, at most {most} may stand in one", path = path.display())]
    TooLong {
        path: PathBuf,
        length: usize,
        most: usize,
    },
    #[error(
        "{path}: an entry failed and could not be taken back; nothing more is written until the \
         log has been opened again",
        path = path.display()
    )]
    Stuck { path: PathBuf },
    #[error(
        "{path}: another program changed the log ({expected} bytes expected, {found} found); \
         close the session and run `handsfull verify`",
        path = path.display()
    )]
    Changed {
        path: PathBuf,
        expected: u64,
        found: u64,
    },
}

impl JournalError {
    /// For `map_err`: an I/O error with what was being done to which file.
    pub(super) fn io(
        doing: &'static str,
        path: impl Into<PathBuf>,
    ) -> impl FnOnce(io::Error) -> Self {
        let path = path.into();
        move |source| JournalError::Io {
            doing,
            path,
            source,
        }
    }
}
