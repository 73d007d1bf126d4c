//! The readings kept so far, by target: what ranges and findings may lean on.
//!
//! The newest entry for a target is the one that counts; older ones live in the log only.

use std::collections::BTreeMap;

use super::{
    place::{BoardId, CircuitNo},
    reading::Reading,
    record::EntryNo,
    test::{Target, TestKind},
};

/// A value kept for a target.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Value {
    /// A figure.
    Reading(Reading),
    /// A ticked test: in order or not.
    Ticked(bool),
}

/// The newest value of every target, with the number of its entry.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Kept {
    values: BTreeMap<Target, (Value, EntryNo)>,
}

impl Kept {
    /// Nothing kept yet.
    #[must_use]
    pub fn new() -> Self {
        Self::default()
    }

    /// Keeps a value; an older one of the same target is replaced.
    pub fn keep(&mut self, target: Target, value: Value, entry: EntryNo) {
        self.values.insert(target, (value, entry));
    }

    /// Forgets a target (it must be tested again).
    pub fn forget(&mut self, target: &Target) {
        self.values.remove(target);
    }

    /// The value of a target.
    #[must_use]
    pub fn value(&self, target: &Target) -> Option<&Value> {
        self.values.get(target).map(|(value, _)| value)
    }

    /// The reading of a target, if it is one.
    #[must_use]
    pub fn reading(&self, target: &Target) -> Option<&Reading> {
        match self.value(target) {
            Some(Value::Reading(reading)) => Some(reading),
            _ => None,
        }
    }

    /// The entry that holds a target's value.
    #[must_use]
    pub fn entry(&self, target: &Target) -> Option<EntryNo> {
        self.values.get(target).map(|(_, entry)| *entry)
    }

    /// The target whose value stands in that entry.
    #[must_use]
    pub fn target_of(&self, entry: EntryNo) -> Option<&Target> {
        self.values
            .iter()
            .find(|(_, (_, held))| *held == entry)
            .map(|(target, _)| target)
    }

    /// All readings of one kind of test on one circuit, in order of their points.
    pub fn series<'a>(
        &'a self,
        test: TestKind,
        board: &'a BoardId,
        circuit: CircuitNo,
    ) -> impl Iterator<Item = (&'a Target, &'a Reading)> {
        self.values.iter().filter_map(move |(target, (value, _))| {
            let here = target.test == test
                && target.board.as_ref() == Some(board)
                && target.circuit == Some(circuit);
            match value {
                Value::Reading(reading) if here => Some((target, reading)),
                _ => None,
            }
        })
    }

    /// Every target with its value.
    pub fn iter(&self) -> impl Iterator<Item = (&Target, &Value)> {
        self.values
            .iter()
            .map(|(target, (value, _))| (target, value))
    }
}
