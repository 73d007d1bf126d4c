//! Commands that work at every prompt, and going to a place or a test called by name.
//!
//! Promises: going away never keeps anything; what was not affirmed is dropped with a line that
//! says so. Live tests stay shut until the dead ones are through and every work is out.

use crate::{
    domain::{
        place::{CircuitNo, Line, Place, PointNo},
        record::{Record, Work, WorkKind},
        test::{Stage, Target, TestKind},
    },
    speech::meaning::{Control, Meaning},
};

use super::{
    act::How,
    effect::{Effect, Tone},
    gates::is_live,
    prompt::{Choice, DeadStep, Prompt},
    state::State,
    trade, utter,
};

impl State {
    pub(super) fn command(&mut self, control: Control, how: &How, out: &mut Vec<Effect>) {
        match control {
            Control::SayAgain => {
                out.push(Effect::Show);
                out.push(Effect::Say(self.spoken.clone()));
            }
            Control::Disregard => self.disregard(out),
            Control::Correction(inner) => match inner {
                Some(meaning) => self.correction(*meaning, how, out),
                None => self.correct_last(out),
            },
            Control::Standby => {
                if !matches!(self.top(), Prompt::Standby) {
                    out.push(Effect::Pause(true));
                    self.push(Prompt::Standby, out);
                }
            }
            Control::Resume => match self.top() {
                Prompt::Standby => {
                    out.push(Effect::Pause(false));
                    self.note("Listening again.");
                    self.pop(out);
                }
                _ => self.command(Control::SayAgain, how, out),
            },
            Control::Back => self.back(out),
            Control::Next => self.forward(out),
            Control::Skip => self.skip_reasons(out),
            Control::Help => self.help(out),
            Control::ListOpen => self.list_open(out),
            Control::ListLinks => self.list_links(out),
            Control::Why => self.why(out),
            Control::LinkIn => self.link_in(out),
            Control::LinkOut => self.link_out(out),
            Control::DigitByDigit => self.start_digits(out),
            // Taken where they are asked for, before it comes to commands.
            Control::Digits(_) => self.refuse("No figure is asked for digit by digit.", out),
            Control::Stop => match self.top() {
                Prompt::StopAsk => out.push(Effect::Show),
                _ => self.push(Prompt::StopAsk, out),
            },
            Control::Note => {
                let target = match self.stack.first() {
                    Some(Prompt::Ask(ask)) => Some(ask.target.clone()),
                    _ => None,
                };
                let clip = how.heard.as_ref().and_then(|h| h.clip.clone());
                let text = match clip {
                    Some(clip) => format!("to be written at the van; clip {clip}"),
                    None => "to be written at the van".into(),
                };
                let by = self.setup.tester.clone();
                self.note("Note marked: write it at the van.");
                self.keep(Record::Note { target, text, by }, out);
            }
            // These come as acts of their own; here only when picked out of a list.
            Control::Test(test) => self.take_up(test, out),
            Control::Stage(stage) => self.take_up_stage(stage, out),
            Control::Reason(_) | Control::Confirmed | Control::NotConfirmed => {
                self.refuse("Not here.", out);
            }
        }
    }

    fn disregard(&mut self, out: &mut Vec<Effect>) {
        if self.stack.len() > 1 {
            if let Prompt::Standby = self.top() {
                out.push(Effect::Pause(false));
            }
            if let Some(Prompt::Confirm(c) | Prompt::Question(c)) = self
                .stack
                .iter()
                .rev()
                .find(|p| matches!(p, Prompt::Confirm(_) | Prompt::Question(_)))
            {
                self.note(format!("{} dropped, not kept.", c.entry));
            }
            // A record that waits after trouble is not let go of by a slip of the tongue.
            if matches!(self.top(), Prompt::Trouble(_)) {
                return self.refuse("Try again (Enter), or drop it (-).", out);
            }
            let to = if matches!(self.top(), Prompt::Confirm(_) | Prompt::Question(_)) {
                1
            } else {
                self.stack.len() - 1
            };
            self.stack.truncate(to);
            out.push(Effect::Show);
            out.push(Effect::Listen(self.context()));
            return;
        }
        if let Some(Prompt::Ask(ask)) = self.stack.first_mut() {
            ask.by_digit = false;
            let target = ask.target.clone();
            self.drafts.remove(&target);
            self.note("Dropped.");
        }
        out.push(Effect::Show);
    }

    /// "Correction": over a value not yet affirmed it asks for another; otherwise the last value
    /// kept is asked for again, and the new entry will name the old.
    fn correct_last(&mut self, out: &mut Vec<Effect>) {
        let unaffirmed = self
            .stack
            .iter()
            .any(|p| matches!(p, Prompt::Confirm(_) | Prompt::Question(_)));
        if unaffirmed {
            self.pop_all();
            self.note("Dropped. Say or type the right one.");
            out.push(Effect::Show);
            out.push(Effect::Listen(self.context()));
            return;
        }
        let kept = &self.standing.kept;
        let last = kept
            .iter()
            .max_by_key(|(target, _)| kept.entry(target))
            .map(|(target, _)| target.clone());
        match last {
            Some(target) => self.call(target, out),
            None => self.refuse("Nothing is kept yet.", out),
        }
    }

    pub(super) fn correction(&mut self, inner: Meaning, how: &How, out: &mut Vec<Effect>) {
        self.correct_last(out);
        // The reading that came with the word goes where the old one was, and is read back.
        if matches!(self.top(), Prompt::Ask(_)) {
            self.meaning(inner, how, out);
        }
    }

    fn back(&mut self, out: &mut Vec<Effect>) {
        let over = self.stack.len() > 1;
        match self.stack.last_mut() {
            Some(Prompt::Gate(gate)) if gate.page > 0 => {
                gate.page -= 1;
                out.push(Effect::Show);
            }
            Some(Prompt::Page(page)) if page.page > 0 => {
                page.page -= 1;
                out.push(Effect::Show);
            }
            Some(Prompt::List(list)) if list.page > 0 => {
                list.page -= 1;
                out.push(Effect::Show);
            }
            Some(Prompt::Dead(dead)) if dead.step > DeadStep::Method => {
                dead.step = match dead.step {
                    DeadStep::After => DeadStep::Dead,
                    DeadStep::Dead => DeadStep::Before,
                    DeadStep::Before => DeadStep::Number,
                    _ => DeadStep::Method,
                };
                out.push(Effect::Show);
            }
            Some(Prompt::Trouble(_)) => self.refuse("Try again (Enter), or drop it (-).", out),
            Some(_) if over => self.disregard(out),
            _ => {
                // The prompt on the screen is the last of the trail, when it asks for a reading.
                if matches!(self.top(), Prompt::Ask(_)) {
                    self.trail.pop();
                }
                match self.trail.pop() {
                    Some(target) => {
                        self.note("One step back. Next goes on.");
                        self.call(target, out);
                    }
                    None => {
                        if let Prompt::Ask(ask) = self.top() {
                            self.trail.push(ask.target.clone());
                        }
                        self.refuse("There is no step before this one.", out);
                    }
                }
            }
        }
    }

    fn forward(&mut self, out: &mut Vec<Effect>) {
        let over = self.stack.len() > 1;
        match self.stack.last_mut() {
            Some(Prompt::Gate(gate)) if gate.page + 1 < gate.pages.len() => {
                gate.page += 1;
                out.push(Effect::Show);
            }
            Some(Prompt::Gate(_)) => self.refuse("Acknowledge first: enter, or say done.", out),
            Some(Prompt::Page(page)) if page.page + 1 < page.pages.len() => {
                page.page += 1;
                out.push(Effect::Show);
            }
            Some(Prompt::List(list)) if list.page + 1 < list.pages() => {
                list.page += 1;
                out.push(Effect::Show);
            }
            Some(Prompt::Page(_)) => self.pop(out),
            Some(Prompt::List(list)) if list.page > 0 => {
                list.page = 0;
                out.push(Effect::Show);
            }
            Some(Prompt::List(_)) => self.refuse("Pick a line, or - for none.", out),
            Some(Prompt::Confirm(_)) => self.refuse("Affirm or negative first.", out),
            Some(Prompt::Question(_)) => {
                self.refuse("Keep as found or measure again first.", out);
            }
            Some(Prompt::Ask(_) | Prompt::Fit(_)) if !over => {
                self.note("Passed over: it comes back later.");
                self.later(out);
            }
            Some(Prompt::TakeOut(work)) => {
                let work = work.clone();
                self.stays_in(&work, out);
            }
            Some(Prompt::Dead(_) | Prompt::Hold(_)) => {
                self.refuse("This cannot be passed over.", out)
            }
            _ => self.refuse("Nothing comes next here.", out),
        }
    }

    fn start_digits(&mut self, out: &mut Vec<Effect>) {
        self.pop_all();
        match self.stack.first_mut() {
            Some(Prompt::Ask(ask)) if ask.target.test.unit().is_some() => {
                ask.by_digit = true;
                let target = ask.target.clone();
                self.drafts.remove(&target);
                self.note("Say one digit at a time, then affirm.");
                out.push(Effect::Show);
                out.push(Effect::Listen(self.context()));
                self.say(super::utter::BY_DIGIT.into(), out);
            }
            _ => self.refuse("No figure is asked for here.", out),
        }
    }

    pub(super) fn talk(&mut self, out: &mut Vec<Effect>) {
        match self.ear {
            super::state::EarState::None => self.refuse("Keypad only: there is no voice.", out),
            super::state::EarState::Lost => self.refuse("The microphone is gone.", out),
            _ => {
                out.push(Effect::Tone(Tone::Listening));
                out.push(Effect::Talk);
            }
        }
    }

    fn link_in(&mut self, out: &mut Vec<Effect>) {
        let needed = self
            .wanted()
            .map(|t| trade::works_needed(self.job(), &t))
            .unwrap_or_default();
        let first = needed
            .into_iter()
            .find(|w| !self.standing.works_in.contains(w));
        match (first, &self.here.board) {
            (Some(work), _) => self.push(Prompt::Fit(work), out),
            (None, Some(board)) => {
                let (board, circuit) = (board.clone(), self.here.circuit);
                let kinds = [
                    WorkKind::LineEarthLink,
                    WorkKind::CrossLineNeutral,
                    WorkKind::CrossLineEarth,
                    WorkKind::RingLegsOut,
                    WorkKind::LoadsOut,
                    WorkKind::LivesJoined,
                ];
                let items = kinds
                    .map(|kind| Work {
                        kind,
                        board: Some(board.clone()),
                        circuit,
                        name: None,
                    })
                    .into_iter()
                    .filter(|work| !self.standing.works_in.contains(work))
                    .map(|work| (work.kind.words().to_owned(), Choice::In(work)))
                    .collect();
                self.list("Which one went in?", items, out);
            }
            (None, None) => self.refuse("Call a circuit first.", out),
        }
    }

    fn link_out(&mut self, out: &mut Vec<Effect>) {
        match self.standing.works_in.as_slice() {
            [] => self.refuse("No link or work is in.", out),
            [one] => {
                let one = one.clone();
                self.push(Prompt::TakeOut(one), out);
            }
            _ => self.list_links(out),
        }
    }

    /// The tester says it is still in.
    pub(super) fn stays_in(&mut self, work: &Work, out: &mut Vec<Effect>) {
        if self.stack.len() > 1 {
            self.note(format!("Still in: {}.", work.kind.words()));
            return self.pop(out);
        }
        let wanted = self.wanted();
        let in_the_way = wanted.as_ref().is_none_or(|t| {
            trade::works_in_the_way(self.job(), t, &self.standing.works_in).contains(work)
        });
        if in_the_way {
            return self.refuse(
                format!("It must come out first: {}.", work.kind.words()),
                out,
            );
        }
        self.left_in.insert(work.clone());
        self.note(format!("STILL IN: {}.", utter::work_text(work)));
        self.advance(out);
    }

    /// The test the work is heading for.
    pub(super) fn wanted(&self) -> Option<Target> {
        match self.stack.first() {
            Some(Prompt::Ask(ask)) => Some(ask.target.clone()),
            _ => self.next_target(),
        }
    }

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
        let there = |t: &&Target| {
            t.board.as_ref() == Some(&board)
                && (circuit.is_none() || t.circuit == circuit)
                && (place.point.is_none() || t.point == place.point)
        };
        let stage = self.here.stage;
        let live = self.live_shut().is_some();
        let found = self
            .open()
            .filter(there)
            .filter(|t| !(live && is_live(t.test)))
            // A point called by number is wanted for the test in hand, where it has one.
            .min_by_key(|t| place.point.is_some() && Some(t.test.stage()) != stage)
            .cloned();
        let again = self
            .setup
            .required()
            .iter()
            .find(|t| place.point.is_some() && there(t) && Some(t.test.stage()) == stage)
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
