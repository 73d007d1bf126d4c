//! The journal as the session's ledger: gives each entry its time, and a clip its digest.
//!
//! It leaves out how an entry is made durable: that is the journal's.

use std::path::PathBuf;

use jiff::ZonedDateTime;

use super::Ledger;
use crate::{
    domain::{
        moment::Moment,
        record::{EntryNo, Record},
    },
    journal::Journal,
};

/// A journal with a clock.
pub struct JournalLedger {
    journal: Journal,
    clock: Box<dyn FnMut() -> Moment>,
    clips: PathBuf,
}

impl JournalLedger {
    /// The journal with the clock on the wall.
    #[must_use]
    pub fn new(journal: Journal) -> Self {
        Self::with_clock(journal, Box::new(wall_clock))
    }

    /// The journal with a clock of its own (rehearsals and tests).
    #[must_use]
    pub fn with_clock(journal: Journal, clock: Box<dyn FnMut() -> Moment>) -> Self {
        let clips = journal.places().clips();
        Self {
            journal,
            clock,
            clips,
        }
    }
}

/// The time on the wall, with its offset.
#[must_use]
pub fn wall_clock() -> Moment {
    Moment::from(&ZonedDateTime::now())
}

impl Ledger for JournalLedger {
    fn keep(&mut self, mut record: Record) -> Result<EntryNo, String> {
        if let Record::Reading(reading) = &mut record
            && let (Some(clip), None) = (&reading.clip, &reading.clip_digest)
        {
            // A clip that cannot be read is named all the same; its digest is what is missing.
            if let Ok(bytes) = std::fs::read(self.clips.join(clip)) {
                reading.clip_digest = Some(blake3::hash(&bytes).to_hex().to_string());
            }
        }
        let now = (self.clock)();
        self.journal.append(&record, now).map_err(|e| e.to_string())
    }
}
