//! Looking at a log without touching it: for `verify`, `review`, `sheet` and `join`.

use std::path::Path;

use super::{
    error::JournalError,
    lock,
    places::Places,
    problem::{Problem, Trouble},
    read::Log,
    recover,
};

/// A log as it stands, and what does not hold of it.
#[derive(Debug, Clone)]
pub struct Inspection {
    /// Where its files lie.
    pub places: Places,
    /// Its entries and problems, those the witness knows of included.
    pub log: Log,
    /// A session holds the job now: the log may grow while it is looked at.
    pub held: bool,
    /// Whether a witness stood beside the log. Without one a cleanly cut end cannot be noticed.
    pub witnessed: bool,
}

/// Reads a log, given the job file or the log itself.
///
/// # Errors
/// [`JournalError::Io`], [`JournalError::NotALog`].
pub fn inspect(path: &Path) -> Result<Inspection, JournalError> {
    let places = Places::of(path);
    // The witness first: what a session adds meanwhile can only make the log longer than it.
    let (witness, held) = lock::look(&places.lock());
    let mut log = Log::open(&places.log())?;
    if held && log.problems.last().is_some_and(being_written) {
        log.problems.pop();
    }
    let seen = witness.as_ref().and_then(|w| log.check(w.no));
    log.problems
        .extend(recover::lost(witness.as_ref(), log.last(), seen.as_deref()));
    Ok(Inspection {
        places,
        log,
        held,
        witnessed: witness.is_some(),
    })
}

/// A torn last entry under a running session is one that is being written.
fn being_written(problem: &Problem) -> bool {
    problem.trouble == Trouble::Torn
}
