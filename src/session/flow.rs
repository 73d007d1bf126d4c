//! What comes next: the next required test, by the order of the stages and by where the tester
//! stands; then closing up; then the end.
//!
//! Promises: a stage or a circuit closes only with nothing open and no temporary work in; a test
//! passed over is not lost, it comes last.

use crate::domain::{
    place::{BoardId, CircuitNo},
    record::{Record, Work},
    test::{Stage, Target},
};

use super::{
    effect::Effect,
    gates::is_live,
    prompt::{Ask, Prompt},
    state::State,
    trade,
};

/// The group in which tests are finished before moving: a stage at a circuit.
type Group = (Stage, Option<BoardId>, Option<CircuitNo>);

pub(super) fn group(target: &Target) -> Group {
    (target.test.stage(), target.board.clone(), target.circuit)
}

impl State {
    /// Whether a required test is still to be done.
    pub(super) fn is_open(&self, target: &Target) -> bool {
        let standing = &self.standing;
        !standing.skipped.contains_key(target)
            && (standing.kept.value(target).is_none()
                || standing.repeats.contains_key(target)
                || standing.undecided.contains_key(target))
    }

    /// Required tests still to be done, in order.
    pub fn open(&self) -> impl Iterator<Item = &Target> {
        self.setup.required().iter().filter(|t| self.is_open(t))
    }

    /// Open tests that are made dead.
    pub(super) fn open_dead(&self) -> impl Iterator<Item = &Target> {
        self.open().filter(|t| !is_live(t.test))
    }

    /// Puts a test behind the others of its stage; the second time, or for a fault that has to be
    /// put right first, behind all others.
    pub(super) fn pass_over(&mut self, target: Target, fault: bool) {
        let before = self.passed.iter().position(|(t, _)| *t == target);
        let last = fault || before.is_some();
        if let Some(at) = before {
            self.passed.remove(at);
        }
        if self.called.as_ref() == Some(&target) {
            self.called = None;
        }
        self.passed.push((target, last));
    }

    pub(super) fn next_target(&self) -> Option<Target> {
        if let Some(called) = &self.called {
            return Some(called.clone());
        }
        let here = (self.here.stage, self.here.board.clone(), self.here.circuit);
        self.open()
            .min_by_key(|target| {
                let (stage, board, circuit) = group(target);
                let passed = self.passed.iter().position(|(t, _)| t == *target);
                let behind_all = passed.is_some_and(|at| self.passed[at].1);
                let elsewhere = passed.is_some() || (Some(stage), board, circuit) != here;
                // Live tests only when no dead one is left; the place in hand first; then stage by
                // stage, what was passed over longest ago first. The order of the list does the
                // rest.
                (is_live(target.test), behind_all, elsewhere, stage, passed)
            })
            .cloned()
    }

    /// Chooses and shows the next step of the work.
    pub(super) fn advance(&mut self, out: &mut Vec<Effect>) {
        if let Some(closed) = self.closable() {
            for (stage, board, circuit) in closed {
                self.queue(Record::StageClosed {
                    stage,
                    board,
                    circuit,
                });
            }
            self.move_on = true;
            self.send(out);
            return;
        }
        match self.next_target() {
            Some(target)
                if is_live(target.test)
                    && self.called.is_none()
                    && !self.passed_gate(Stage::Energise, None) =>
            {
                match self.close_up() {
                    Some(prompt) => self.replace(prompt, out),
                    None => self.go(target, out),
                }
            }
            Some(target) => self.go(target, out),
            None => {
                let prompt = self.close_up().unwrap_or(Prompt::Finish);
                self.replace(prompt, out);
            }
        }
    }

    fn go(&mut self, target: Target, out: &mut Vec<Effect>) {
        let prompt = match self.before(&target) {
            Some(prompt) => prompt,
            None => self.ask(&target),
        };
        match &prompt {
            Prompt::Ask(_) => {
                self.here.stage = Some(target.test.stage());
                self.stand_at(&target);
                if self.trail.last() != Some(&target) {
                    self.trail.push(target.clone());
                }
            }
            Prompt::TakeOut(work) => {
                if work.board.is_some() {
                    self.here.board.clone_from(&work.board);
                    self.here.circuit = work.circuit;
                }
            }
            Prompt::Hold(hold) => {
                self.here.board = Some(hold.board.clone());
                self.here.circuit = Some(hold.circuit);
            }
            _ => self.stand_at(&target),
        }
        // A test called by name is not forgotten because something has to be done before it.
        if self.called.as_ref() == Some(&target) && !matches!(prompt, Prompt::Ask(_)) {
            let then = format!("Then: {}.", super::utter::target_text(&target));
            self.note(format!("{} {then}", self.notice).trim_start());
        }
        self.replace(prompt, out);
    }

    fn stand_at(&mut self, target: &Target) {
        if target.board.is_some() {
            self.here.board.clone_from(&target.board);
        }
        self.here.circuit = target.circuit;
        self.here.point = target.point;
    }

    /// The prompt that asks for a reading.
    pub(super) fn ask(&self, target: &Target) -> Prompt {
        let kept = &self.standing.kept;
        let stands = match (kept.entry(target), kept.value(target)) {
            (Some(no), Some(value)) => Some((no, super::entry::value_text(value))),
            _ => None,
        };
        Prompt::Ask(Box::new(Ask {
            target: target.clone(),
            expected: trade::expected(self.job(), target, kept),
            connections: trade::connections(self.job(), target),
            stands,
            misses: 0,
            by_digit: false,
        }))
    }

    /// Stages of circuits that can be closed now and are not yet.
    fn closable(&mut self) -> Option<Vec<Group>> {
        // A stage closes when its last test is in and its last work out: it is enough to look at
        // the place where the tester has just been, and everywhere when a work came out or a
        // session begins.
        let last = self.trail.last().map(|t| (t.board.clone(), t.circuit));
        let last = last.filter(|_| !std::mem::take(&mut self.look_everywhere));
        let mut groups: Vec<Group> = self
            .setup
            .required()
            .iter()
            .filter(|t| last.is_none() || last == Some((t.board.clone(), t.circuit)))
            .filter(|t| {
                self.standing.kept.value(t).is_some() || self.standing.skipped.contains_key(t)
            })
            .map(group)
            .collect();
        groups.sort();
        groups.dedup();
        groups.retain(|at| !self.standing.closed.contains(at) && self.may_close(at));
        (!groups.is_empty()).then_some(groups)
    }

    fn may_close(&self, at: &Group) -> bool {
        let (_, board, circuit) = at;
        let open = self.open().any(|target| group(target) == *at);
        let here = |work: &Work| (&work.board, work.circuit) == (board, *circuit);
        let works = self.standing.works_in.iter().any(here);
        let charged = match (board, circuit) {
            (Some(board), Some(circuit)) => self.charged.contains(&(board.clone(), *circuit)),
            _ => false,
        };
        !open && !works && !charged
    }

    /// Closing up, board by board, once the dead tests are through; `None` when all is closed.
    fn close_up(&self) -> Option<Prompt> {
        if let Some((board, circuit)) = self.charged.iter().next() {
            return Some(self.hold(board, *circuit));
        }
        // At the end every work is asked for again, whatever was said about it before.
        if let Some(work) = self.standing.works_in.last() {
            return Some(Prompt::TakeOut(work.clone()));
        }
        self.job()
            .boards
            .iter()
            .map(|board| &board.id)
            .find(|board| {
                !self.passed_gate(Stage::CloseUp, Some(board))
                    && self.setup.required().iter().any(|t| {
                        t.board.as_ref() == Some(board)
                            && (self.standing.kept.value(t).is_some()
                                || self.standing.skipped.contains_key(t))
                    })
            })
            .map(|board| self.gate(Stage::CloseUp, Some(board)))
    }

    /// The circuits that close with a board's close-up: all their dead tests are in or left out,
    /// and no temporary work is in. Closing up is refused before (see `act`).
    pub(super) fn closing_circuits(&self, board: &BoardId) -> Vec<Group> {
        let circuits = self
            .job()
            .board(board)
            .into_iter()
            .flat_map(|b| &b.circuits);
        circuits
            .map(|circuit| (Stage::CloseUp, Some(board.clone()), Some(circuit.no)))
            .filter(|(_, board, circuit)| {
                let place = |b: &Option<BoardId>, c: Option<CircuitNo>| (b, c) == (board, *circuit);
                !self.open_dead().any(|t| place(&t.board, t.circuit))
                    && !self
                        .standing
                        .works_in
                        .iter()
                        .any(|w| place(&w.board, w.circuit))
            })
            .collect()
    }
}
