//! Going to a place or a test called by name, by keys or by voice.
//!
//! Promises: a place that is not in the plan is refused with a line that says so; what was not said
//! is where the tester stands; live tests stay shut until the dead ones are through and every work
//! is out. Going away keeps nothing.

use crate::domain::{
    place::{CircuitNo, Line, Place, PointNo},
    plan::{Board, Point},
    test::{Stage, Target, TestKind},
};

use super::{effect::Effect, gates::is_live, prompt::Prompt, state::State};

impl State {
    /// A circuit typed on the keypad: `7`, `4.2` for way 4 line 2, `7+3` for its point 3.
    pub(super) fn call_typed(&mut self, text: &str, out: &mut Vec<Effect>) {
        let (circuit, point) = match text.split_once('+') {
            Some((circuit, point)) => (circuit, point.parse().ok().map(PointNo)),
            None => (text, None),
        };
        let (way, line) = match circuit.split_once('.') {
            Some((way, "1")) => (way, Some(Line::L1)),
            Some((way, "2")) => (way, Some(Line::L2)),
            Some((way, "3")) => (way, Some(Line::L3)),
            Some(_) => return self.refuse("After the point: line 1, 2 or 3.", out),
            None => (circuit, None),
        };
        let circuit = way
            .parse()
            .ok()
            .and_then(|way| CircuitNo::new(way, line).ok());
        if circuit.is_none() && point.is_none() {
            return self.refuse("Type the number of the circuit, then enter.", out);
        }
        let place = Place {
            circuit,
            point,
            ..Place::default()
        };
        self.go_to(&place, out);
    }

    /// Goes to a place called by name; what was not said is where the tester stands.
    pub(super) fn go_to(&mut self, place: &Place, out: &mut Vec<Effect>) {
        let named = place.name.as_ref().and_then(|name| {
            self.job()
                .place_names
                .iter()
                .find(|p| p.name == *name)
                .cloned()
        });
        if let (Some(name), None) = (&place.name, &named) {
            return self.refuse(format!("`{name}` is no place of this job."), out);
        }
        let called = place
            .board
            .clone()
            .or(named.as_ref().and_then(|n| n.board.clone()));
        let circuit = place.circuit.or(named.as_ref().and_then(|n| n.circuit));
        let Some(board) = called.clone().or_else(|| self.here.board.clone()) else {
            return self.refuse("Call the board first.", out);
        };
        let Some(plan) = self.job().board(&board) else {
            return self.refuse(format!("There is no board {board} in this job."), out);
        };
        let circuit = match (circuit, &called) {
            (Some(no), _) if plan.circuits.iter().any(|c| c.no == no) => Some(no),
            (Some(no), _) => {
                return self.refuse(format!("There is no circuit {no} on {board}."), out);
            }
            // A board alone is the whole board; a point alone is on the circuit in hand.
            (None, Some(_)) => None,
            (None, None) => self.here.circuit,
        };
        if let (Some(point), Some(no)) = (place.point, circuit) {
            let known = plan
                .circuits
                .iter()
                .any(|c| c.no == no && c.points.iter().any(|p| p.no == point));
            if !known {
                return self.refuse(format!("There is no point {point} on {board}/{no}."), out);
            }
        }
        let point = match (place.spur, place.point, circuit) {
            (true, Some(from), Some(no)) => match spur_off(plan, no, from) {
                Some(spur) => Some(spur),
                None => {
                    return self.refuse(
                        format!(
                            "The plan has no single spur off point {from} of {board}/{no}. Call \
                             it by its own number."
                        ),
                        out,
                    );
                }
            },
            _ => place.point,
        };
        let there = |t: &&Target| {
            t.board.as_ref() == Some(&board)
                && (circuit.is_none() || t.circuit == circuit)
                && (point.is_none() || t.point == point)
        };
        let stage = self.here.stage;
        let live = self.live_shut().is_some();
        let found = self
            .open()
            .filter(there)
            .filter(|t| !(live && is_live(t.test)))
            // A point called by number is wanted for the test in hand, where it has one.
            .min_by_key(|t| point.is_some() && Some(t.test.stage()) != stage)
            .cloned();
        let again = self
            .setup
            .required()
            .iter()
            .find(|t| point.is_some() && there(t) && Some(t.test.stage()) == stage)
            .cloned();
        match found.or(again) {
            Some(target) => self.call(target, out),
            None => {
                self.here.board = Some(board.clone());
                self.here.circuit = circuit;
                let at = circuit.map_or(board.to_string(), |c| format!("{board}/{c}"));
                self.refuse(
                    format!("Nothing is open at {at}. Call a test to repeat it."),
                    out,
                );
            }
        }
    }

    /// Why live tests are shut, if they are.
    pub(super) fn live_shut(&self) -> Option<String> {
        if !self.job().rules.live_tests {
            return Some("Live tests are not part of this job.".into());
        }
        let dead = self.open_dead().count();
        let works = self.standing.works_in.len();
        (dead > 0 || works > 0)
            .then(|| format!("Live tests stay shut: {dead} dead tests open, {works} works in."))
    }

    /// Takes up a kind of test: here if it can be done here, else the first that is open.
    pub(super) fn take_up(&mut self, test: TestKind, out: &mut Vec<Effect>) {
        let here = |t: &&Target| {
            t.test == test && t.board == self.here.board && t.circuit == self.here.circuit
        };
        let all = self.setup.required();
        let found = self
            .open()
            .find(here)
            .or_else(|| all.iter().find(here))
            .or_else(|| self.open().find(|t| t.test == test))
            .or_else(|| all.iter().find(|t| t.test == test))
            .cloned();
        match found {
            Some(target) => self.call(target, out),
            None => self.refuse(format!("{} is not needed in this job.", test.title()), out),
        }
    }

    /// Takes up a stage: at this circuit if something is open in it, else the first that is open.
    pub(super) fn take_up_stage(&mut self, stage: Stage, out: &mut Vec<Effect>) {
        let here = |t: &&Target| {
            t.test.stage() == stage && t.board == self.here.board && t.circuit == self.here.circuit
        };
        let found = self
            .open()
            .find(here)
            .or_else(|| self.open().find(|t| t.test.stage() == stage))
            .cloned();
        match found {
            Some(target) => self.call(target, out),
            None => self.refuse(format!("Nothing is open in: {}.", stage.title()), out),
        }
    }

    /// Goes to one test.
    pub(super) fn call(&mut self, target: Target, out: &mut Vec<Effect>) {
        if is_live(target.test)
            && let Some(why) = self.live_shut()
        {
            return self.refuse(why, out);
        }
        if matches!(self.top(), Prompt::Trouble(_)) || !self.pending.is_empty() {
            return self.refuse("Try again (Enter), or drop it (-).", out);
        }
        let dropped = self.stack.iter().find_map(|p| match p {
            Prompt::Confirm(c) | Prompt::Question(c) => Some(c.entry.to_string()),
            _ => None,
        });
        if let Some(text) = dropped {
            self.note(format!("{text} was not affirmed and is not kept."));
        }
        if self.stack.iter().any(|p| matches!(p, Prompt::Standby)) {
            out.push(Effect::Pause(false));
        }
        self.passed.retain(|(t, _)| *t != target);
        self.called = Some(target);
        self.advance(out);
    }
}

/// The one spur that leaves the run of a circuit where a point sits.
fn spur_off(board: &Board, no: CircuitNo, from: PointNo) -> Option<PointNo> {
    let circuit = board.circuits.iter().find(|c| c.no == no)?;
    let at = circuit.points.iter().find(|p| p.no == from)?.at_m;
    let leaves = |p: &&Point| {
        let same_place = match (at, p.at_m) {
            (Some(from), Some(spur)) => (from - spur).abs() < 0.05,
            // Without places a spur is numbered right after the point it leaves.
            _ => p.no.0 == from.0 + 1,
        };
        p.no != from && p.spur_m.is_some() && same_place
    };
    let mut spurs = circuit.points.iter().filter(leaves);
    let first = spurs.next()?.no;
    spurs.next().is_none().then_some(first)
}
