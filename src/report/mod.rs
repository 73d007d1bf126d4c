//! What a log says, for eyes and for other programs: the review at the van and the schedule.
//!
//! Promises: text out, nothing read or written here; every value stands with its range, how it lay
//! to it, and the entry it comes from; what is open is said as plainly as what was measured; no
//! word calls a circuit safe. It knows `domain` only. It leaves out whether the log holds: that is
//! passed in as [`Integrity`].

pub mod events;
pub mod history;
pub mod page;
pub mod review;
pub mod sheet;
pub mod words;

use crate::domain::record::EntryNo;

/// What is known of the log a report is made from.
#[derive(Debug, Clone, Default, PartialEq, Eq, serde::Serialize)]
pub struct Integrity {
    /// Entries in the log.
    pub entries: EntryNo,
    /// The check of the newest: it stands for all before it.
    pub last_check: String,
    /// The journals in it, one a handheld: names.
    pub journals: Vec<String>,
    /// What does not hold, a sentence each.
    pub problems: Vec<String>,
    /// Whether a cleanly cut end would have been noticed.
    pub witnessed: bool,
}

impl Integrity {
    /// The statement, in one sentence.
    #[must_use]
    pub fn statement(&self) -> String {
        let entries = match self.entries {
            1 => "1 entry".to_owned(),
            n => format!("{n} entries"),
        };
        match (self.problems.len(), self.witnessed) {
            (0, true) => format!("{entries}, every check holds, the end is witnessed."),
            (0, false) => format!(
                "{entries}, every check holds. No witness stood beside the log: whether its end \
                 is complete cannot be said."
            ),
            (1, _) => format!("{entries}; 1 thing does NOT hold, see `handsfull verify`."),
            (n, _) => format!("{entries}; {n} things do NOT hold, see `handsfull verify`."),
        }
    }
}
