//! Where a job stands: what its entries, taken in order, add up to.
//!
//! Promises: a pure fold over the entries, so the same log always gives the same standing; the
//! newest value of a target counts; a temporary work stays on the list until an entry of the same
//! handheld (or one after a join) takes it out. It leaves out whether entries can be trusted
//! (`journal`) and which tests are required (`sequence`).

use std::collections::{BTreeMap, BTreeSet};

use super::{
    kept::{Kept, Value},
    moment::Moment,
    place::{BoardId, CircuitNo},
    reading::{Reading, Unit},
    record::{EntryNo, ReadingKept, Record, Work},
    test::{Stage, Target},
};

/// One entry that holds.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Entry {
    /// Its number in the log, from 1; numbers named inside the record are of the same count.
    pub no: EntryNo,
    /// Which handheld's chain it stands in, from 0.
    pub chain: usize,
    /// When it was entered.
    pub time: Moment,
    /// What it says.
    pub record: Record,
}

/// A stage at a place: of a circuit, of a board, or of the whole job.
pub type StageAt = (Stage, Option<BoardId>, Option<CircuitNo>);

/// A test left out.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Left {
    /// Why.
    pub reason: String,
    /// Who said so.
    pub by: String,
    /// The entry.
    pub entry: EntryNo,
}

/// What the log adds up to.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Standing {
    /// The value that counts, by target.
    pub kept: Kept,
    /// Temporary works that are in, oldest first.
    pub works_in: Vec<Work>,
    /// Reminders acknowledged, with the latest entry that says so. Compare with
    /// [`Standing::session_began`] where they must be of this session.
    pub acknowledged: BTreeMap<StageAt, EntryNo>,
    /// Boards proved dead, with the latest entry that says so.
    pub proved_dead: BTreeMap<BoardId, EntryNo>,
    /// Tests left out with a reason and not done since.
    pub skipped: BTreeMap<Target, Left>,
    /// Tests to be done again, with the entry whose failure asks for it.
    pub repeats: BTreeMap<Target, EntryNo>,
    /// Stages closed with their works out, and not opened again since.
    pub closed: BTreeSet<StageAt>,
    /// Targets measured on several handhelds with different figures: nobody has decided yet, so
    /// none counts. Each value with its entry, in the order of the log.
    pub undecided: BTreeMap<Target, Vec<(EntryNo, Value)>>,
    /// Readings whose value no rule of ours can read (another version wrote them).
    pub unreadable: Vec<EntryNo>,
    /// The entry with which the latest session began; 0 before the first.
    pub session_began: EntryNo,
    /// True when the latest session has not been closed in order.
    pub session_open: bool,
    /// Who tests in the latest session; empty before the first.
    pub by: String,
    /// The newest entry taken in; 0 for an empty log.
    pub last: EntryNo,
}

/// The value a kept reading stands for: a figure or a tick.
///
/// `None` when its text is neither (see [`Standing::unreadable`]).
#[must_use]
pub fn value_of(reading: &ReadingKept) -> Option<Value> {
    read_value(&reading.value, reading.unit.as_deref(), &reading.target)
}

/// Reads a value as kept in a log: `yes` and `no` for ticked tests, a figure for the others; the
/// unit is the one kept, or the test's own.
#[must_use]
pub fn read_value(value: &str, unit: Option<&str>, target: &Target) -> Option<Value> {
    match (target.test.unit(), value) {
        (None, "yes") => Some(Value::Ticked(true)),
        (None, "no") => Some(Value::Ticked(false)),
        (None, _) => None,
        (Some(own), figure) => {
            let unit = match unit {
                None => own,
                Some(word) => Unit::ALL.into_iter().find(|u| u.word() == word)?,
            };
            let reading: Reading = figure.parse().ok()?;
            // A unit inside the figure would be a second, contradicting one.
            reading
                .unit()
                .is_none()
                .then(|| Value::Reading(reading.or_unit(unit)))
        }
    }
}

impl Standing {
    /// Nothing entered yet.
    #[must_use]
    pub fn new() -> Self {
        Self::default()
    }

    /// Takes in the next record; `no` is its number in the log.
    pub fn apply(&mut self, no: EntryNo, record: &Record) {
        self.last = no;
        match record {
            Record::SessionOpened { by, .. } => {
                self.session_began = no;
                self.session_open = true;
                self.by.clone_from(by);
            }
            Record::SessionClosed { .. } => self.session_open = false,
            Record::Acknowledged {
                stage,
                board,
                circuit,
                ..
            } => {
                self.acknowledged
                    .insert((*stage, board.clone(), *circuit), no);
            }
            Record::ProvedDead { board, .. } => {
                self.proved_dead.insert(board.clone(), no);
            }
            Record::Reading(reading) => match value_of(reading) {
                Some(value) => self.keep(&reading.target, value, no),
                None => self.unreadable.push(no),
            },
            Record::Skipped { target, reason, by } => {
                let left = Left {
                    reason: reason.clone(),
                    by: by.clone(),
                    entry: no,
                };
                self.skipped.insert(target.clone(), left);
            }
            Record::Repeat { target, because } => self.ask_again(target, *because),
            Record::WorkIn { work, .. } => {
                if !self.works_in.contains(work) {
                    self.works_in.push(work.clone());
                }
            }
            Record::WorkOut { work, .. } => self.works_in.retain(|w| w != work),
            Record::StageClosed {
                stage,
                board,
                circuit,
            } => {
                self.closed.insert((*stage, board.clone(), *circuit));
            }
            Record::Amended {
                corrects,
                value,
                unit,
                ..
            } => self.amend(*corrects, value, unit.as_deref(), no),
            Record::Decided { target, takes, .. } => self.decide(target, *takes),
            Record::Note { .. } | Record::Incident { .. } => {}
        }
    }

    /// Adds up the standings of several handhelds on one job, in the order of the log. Values of
    /// one target that differ become undecided; works stay in while any handheld has them in.
    #[must_use]
    pub fn joined(sides: Vec<Standing>) -> Standing {
        let mut all = Standing::new();
        let mut values: BTreeMap<Target, Vec<(EntryNo, Value)>> = BTreeMap::new();
        for side in sides {
            for (target, value) in side.kept.iter() {
                let entry = side.kept.entry(target).unwrap_or_default();
                let here = values.entry(target.clone()).or_default();
                here.push((entry, value.clone()));
            }
            for (target, several) in side.undecided {
                values.entry(target).or_default().extend(several);
            }
            for work in side.works_in {
                if !all.works_in.contains(&work) {
                    all.works_in.push(work);
                }
            }
            all.acknowledged.extend(side.acknowledged);
            all.proved_dead.extend(side.proved_dead);
            all.skipped.extend(side.skipped);
            all.repeats.extend(side.repeats);
            all.closed.extend(side.closed);
            all.unreadable.extend(side.unreadable);
            all.session_began = all.session_began.max(side.session_began);
            all.session_open |= side.session_open;
            all.last = all.last.max(side.last);
            if !side.by.is_empty() {
                all.by = side.by;
            }
        }
        for (target, several) in values {
            let same = several.windows(2).all(|pair| pair[0].1 == pair[1].1);
            // A test one handheld still wants done again stays open, whoever else has measured it:
            // which came first, the failure or the other reading, is for a person to say.
            let again = all.repeats.contains_key(&target);
            all.skipped.remove(&target);
            match several.first() {
                Some((entry, value)) if same && !again => {
                    all.kept.keep(target, value.clone(), *entry)
                }
                _ => {
                    all.undecided.insert(target, several);
                }
            }
        }
        all
    }

    fn keep(&mut self, target: &Target, value: Value, no: EntryNo) {
        self.skipped.remove(target);
        self.repeats.remove(target);
        self.undecided.remove(target);
        self.kept.keep(target.clone(), value, no);
    }

    /// The value no longer counts, and the stage it belonged to is open again.
    fn ask_again(&mut self, target: &Target, because: EntryNo) {
        self.kept.forget(target);
        self.skipped.remove(target);
        self.repeats.insert(target.clone(), because);
        let stage = target.test.stage();
        self.closed.retain(|(closed, board, circuit)| {
            *closed != stage
                || (board.is_some() && *board != target.board)
                || (circuit.is_some() && *circuit != target.circuit)
        });
    }

    /// An amendment counts where the entry it corrects counts; amending a superseded entry
    /// changes nothing but the log.
    fn amend(&mut self, corrects: EntryNo, value: &str, unit: Option<&str>, no: EntryNo) {
        let target = self.kept.target_of(corrects).cloned();
        let Some(target) = target else { return };
        match read_value(value, unit, &target) {
            Some(value) => self.kept.keep(target, value, no),
            None => self.unreadable.push(no),
        }
    }

    fn decide(&mut self, target: &Target, takes: EntryNo) {
        let taken = self
            .undecided
            .get(target)
            .and_then(|several| several.iter().find(|(entry, _)| *entry == takes))
            .cloned();
        if let Some((entry, value)) = taken {
            self.keep(target, value, entry);
        }
    }
}

#[cfg(test)]
#[path = "standing_tests.rs"]
mod tests;
