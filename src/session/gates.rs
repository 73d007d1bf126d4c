//! What must be true before a test may be done: gates, proving dead, temporary works.
//!
//! Promises: [`State::before`] gives the first thing still missing for a test, or nothing; a
//! reading is asked for only when it gives nothing. It leaves out which test is next.

use std::collections::BTreeSet;

use crate::domain::{
    place::{BoardId, CircuitNo},
    record::Work,
    standing::StageAt,
    test::{Stage, Target, TestKind},
};

use super::{
    prompt::{Dead, DeadStep, Gate, Hold, Prompt, paginate},
    state::State,
    trade,
};

/// Columns and lines of a page of reminders: they fit a 40 x 15 screen.
pub(super) const PAGE_COLUMNS: usize = 38;
pub(super) const PAGE_LINES: usize = 6;

/// Whether a stage's gate is passed board by board; otherwise once for the job.
pub(super) fn by_board(stage: Stage) -> bool {
    !matches!(
        stage,
        Stage::Instrument | Stage::Nulling | Stage::Bonding | Stage::Electrode | Stage::Energise
    )
}

/// A test made on energised conductors.
pub(super) fn is_live(test: TestKind) -> bool {
    test.stage() == Stage::Live
}

impl State {
    /// The board a test is done at: its own, or the origin for what belongs to the job.
    pub(super) fn board_of(&self, target: &Target) -> Option<BoardId> {
        target
            .board
            .clone()
            .or_else(|| self.job().boards.first().map(|b| b.id.clone()))
    }

    fn gate_at(&self, stage: Stage, board: Option<&BoardId>) -> StageAt {
        (stage, board.filter(|_| by_board(stage)).cloned(), None)
    }

    /// Whether the stage's reminders were acknowledged for that board.
    pub(super) fn passed_gate(&self, stage: Stage, board: Option<&BoardId>) -> bool {
        let lapsed = stage == Stage::Isolation
            && board.is_some_and(|b| {
                self.lapsed.contains(b)
                    && self
                        .standing
                        .acknowledged
                        .get(&self.gate_at(stage, Some(b)))
                        .is_none_or(|no| {
                            *no < self.lapsed_at.unwrap_or(self.standing.session_began)
                        })
            });
        !lapsed
            && self
                .standing
                .acknowledged
                .contains_key(&self.gate_at(stage, board))
    }

    fn proved_dead(&self, board: &BoardId) -> bool {
        !self.lapsed.contains(board) && self.standing.proved_dead.contains_key(board)
    }

    /// The gate of a stage, as a prompt.
    pub(super) fn gate(&self, stage: Stage, board: Option<&BoardId>) -> Prompt {
        let board = board.filter(|_| by_board(stage));
        let mut reminders = trade::reminders(stage, self.job(), board, None);
        if stage == Stage::Energise {
            // Outstanding doubts stand before the switch, not behind it.
            let doubts = trade::before_energising(self.job(), &self.standing.kept);
            reminders.extend(doubts.iter().map(|d| {
                let word = if d.against { "AGAINST" } else { "In doubt" };
                format!("{word}: {}. {}", d.text, d.check)
            }));
            let left = self.standing.skipped.len();
            if left > 0 {
                reminders.push(format!(
                    "Left out with a reason: {left} tests. See the review."
                ));
            }
        }
        Prompt::Gate(Gate {
            stage,
            board: board.cloned(),
            pages: paginate(&reminders, PAGE_COLUMNS, PAGE_LINES),
            reminders,
            page: 0,
        })
    }

    /// The first thing missing before this test, in the order in which it has to be done.
    pub(super) fn before(&self, target: &Target) -> Option<Prompt> {
        // What was left behind comes before anything new.
        if let Some(prompt) = self.leave(target) {
            return Some(prompt);
        }
        let board = self.board_of(target);
        let stage = target.test.stage();
        if is_live(target.test) {
            for stage in [Stage::Energise, Stage::Live] {
                if !self.passed_gate(stage, board.as_ref()) {
                    return Some(self.gate(stage, board.as_ref()));
                }
            }
        } else {
            if let Some(prompt) = self.isolation(board.as_ref()) {
                return Some(prompt);
            }
            for stage in [Stage::Instrument, stage] {
                if !self.passed_gate(stage, board.as_ref()) {
                    return Some(self.gate(stage, board.as_ref()));
                }
            }
        }
        trade::works_needed(self.job(), target)
            .into_iter()
            .find(|work| !self.standing.works_in.contains(work))
            .map(Prompt::Fit)
    }

    fn isolation(&self, board: Option<&BoardId>) -> Option<Prompt> {
        let id = board?;
        if !self.passed_gate(Stage::Isolation, board) {
            return Some(self.gate(Stage::Isolation, board));
        }
        if self.proved_dead(id) {
            return None;
        }
        let three_phase = self
            .job()
            .board(id)
            .is_some_and(|board| trade::multiphase(self.job(), board));
        Some(Prompt::Dead(Dead {
            board: id.clone(),
            three_phase,
            step: DeadStep::Method,
            method: None,
            number: String::new(),
        }))
    }

    /// What must be undone before going on to `next`: charge first, then works that would falsify
    /// it, then works nobody needs any more; of each the one that went in last.
    fn leave(&self, next: &Target) -> Option<Prompt> {
        let same = |board: &BoardId, circuit: CircuitNo| {
            next.board.as_ref() == Some(board) && next.circuit == Some(circuit)
        };
        let charging = matches!(next.test, TestKind::Insulation(_) | TestKind::Separation);
        for (board, circuit) in &self.charged {
            if !(charging && same(board, *circuit)) {
                return Some(self.hold(board, *circuit));
            }
        }
        if self.standing.works_in.is_empty() {
            return None;
        }
        let in_the_way = trade::works_in_the_way(self.job(), next, &self.standing.works_in);
        let idle = || {
            let needed = trade::works_needed(self.job(), next);
            let left = |work: &&Work| {
                !needed.contains(work)
                    && !self.left_in.contains(work)
                    && !self.still_needed(work, next.test.stage())
            };
            self.standing.works_in.iter().rev().find(left).cloned()
        };
        // The newest first: a cross-link comes out before the legs go back in.
        in_the_way
            .into_iter()
            .next_back()
            .or_else(idle)
            .map(Prompt::TakeOut)
    }

    pub(super) fn hold(&self, board: &BoardId, circuit: CircuitNo) -> Prompt {
        Prompt::Hold(Hold {
            board: board.clone(),
            circuit,
            since: self.now,
        })
    }

    /// Whether a test that is still open, and was not passed over, needs this work in the stage
    /// that goes on or the one just left. A later stage fits it again: an earth is not left off
    /// from the bonding tests until the live ones.
    fn still_needed(&self, work: &Work, next: Stage) -> bool {
        let last = self.trail.last().map(|t| t.test.stage());
        self.setup.needing(work).any(|target| {
            let stage = target.test.stage();
            (stage == next || Some(stage) == last)
                && self.is_open(target)
                && !self.passed.iter().any(|(t, _)| t == target)
        })
    }

    /// Circuits whose insulation was tested and not yet discharged, by the log.
    pub(super) fn charges(&self) -> BTreeSet<(BoardId, CircuitNo)> {
        let mut charged = BTreeSet::new();
        for (target, _) in self.standing.kept.iter() {
            let (TestKind::Insulation(_) | TestKind::Separation, Some(board), Some(circuit)) =
                (target.test, &target.board, target.circuit)
            else {
                continue;
            };
            let entry = self.standing.kept.entry(target).unwrap_or_default();
            let at = (Stage::Insulation, Some(board.clone()), Some(circuit));
            if self
                .standing
                .acknowledged
                .get(&at)
                .is_none_or(|no| *no < entry)
            {
                charged.insert((board.clone(), circuit));
            }
        }
        charged
    }
}
