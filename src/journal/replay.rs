//! What the entries of a log add up to, journal by journal.
//!
//! Promises: the same log gives the same [`Standing`]; each handheld's entries are added up on
//! their own and brought together where a join stands, or at the end of the log.

use super::read::{Chain, Item, Log};
use crate::domain::standing::Standing;

/// Adds up items in the order in which the reader hands them out.
#[derive(Debug, Default)]
pub struct Replay {
    /// Journals added up and not joined yet, by name.
    before: Vec<(String, Standing)>,
    name: String,
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
        let name = std::mem::replace(&mut self.name, chain.journal.clone());
        self.before.push((name, std::mem::take(&mut self.now)));
        if chain.joins.is_empty() {
            return;
        }
        // Only what the join took in: a journal brought in later must not be decided about by
        // entries that did not know it.
        let joins = |name: &String| chain.joins.iter().any(|j| j.journal == *name);
        let (taken, left) = std::mem::take(&mut self.before)
            .into_iter()
            .partition(|(name, _)| joins(name));
        self.before = left;
        self.now = joined(taken);
    }

    /// Where the job stands.
    #[must_use]
    pub fn standing(mut self) -> Standing {
        self.before.retain(|(_, side)| *side != Standing::default());
        if self.before.is_empty() {
            return self.now;
        }
        self.before.push((self.name, self.now));
        joined(self.before)
    }
}

fn joined(sides: Vec<(String, Standing)>) -> Standing {
    Standing::joined(sides.into_iter().map(|(_, side)| side).collect())
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
