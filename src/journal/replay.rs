//! What the entries of a log add up to, journal by journal.
//!
//! Promises: the same log gives the same [`Standing`]; each handheld's entries are added up on
//! their own and brought together where a join stands, or at the end of the log.

use super::read::{Chain, Item, Log};
use crate::domain::standing::Standing;

/// Adds up items in the order in which the reader hands them out.
#[derive(Debug, Default)]
pub struct Replay {
    before: Vec<Standing>,
    now: Standing,
}

impl Replay {
    /// Nothing taken in yet.
    #[must_use]
    pub fn new() -> Self {
        Self::default()
    }

    /// Takes in the next item; problems add nothing.
    pub fn take(&mut self, item: &Item) {
        match item {
            Item::Chain(chain) => self.chain(chain),
            Item::Entry(entry, _) => self.now.apply(entry.no, &entry.record),
            Item::Problem(_) => {}
        }
    }

    fn chain(&mut self, chain: &Chain) {
        self.before.push(std::mem::take(&mut self.now));
        if !chain.joins.is_empty() {
            self.now = Standing::joined(std::mem::take(&mut self.before));
        }
    }

    /// Where the job stands.
    #[must_use]
    pub fn standing(mut self) -> Standing {
        self.before.retain(|side| *side != Standing::default());
        if self.before.is_empty() {
            return self.now;
        }
        self.before.push(self.now);
        Standing::joined(self.before)
    }
}

/// Where the job of a whole log stands.
#[must_use]
pub fn standing(log: &Log) -> Standing {
    let mut replay = Replay::new();
    let mut entries = log.entries.iter().peekable();
    for (at, chain) in log.chains.iter().enumerate() {
        replay.chain(chain);
        while let Some(entry) = entries.next_if(|e| e.chain == at) {
            replay.now.apply(entry.no, &entry.record);
        }
    }
    replay.standing()
}
