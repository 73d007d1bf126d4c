//! Acts carried out: what yes, no, a value or a pick does at each prompt.
//!
//! Promises: the only way from a value to the log leads through yes at [`Prompt::Confirm`], and,
//! out of range or in doubt, through a reason at [`Prompt::Question`] as well. Keys and voice come through the
//! same door.

use crate::{
    domain::{
        place::Place,
        record::{Entered, Record},
        test::{Stage, Target, TestKind},
    },
    speech::meaning::{Control, Heard},
};

use super::{
    effect::{Effect, Tone},
    flow::group,
    prompt::{Candidate, Choice, DeadStep, Entry, Prompt},
    state::State,
};

/// What a tester can mean, whatever the way it came.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Act {
    Yes,
    No,
    Pick(u8),
    Value(Entry),
    KeepAsFound,
    MeasureAgain,
    Command(Control),
    Go(Place),
    Test(TestKind),
    Stage(Stage),
    Menu,
    CallCircuit,
    CallTest,
    Talk,
    Nothing,
}

/// How an act came.
#[derive(Debug, Clone)]
pub(super) struct How {
    pub entered: Entered,
    pub heard: Option<Heard>,
}

impl State {
    pub(super) fn act(&mut self, act: Act, how: &How, out: &mut Vec<Effect>) {
        if self.in_trouble() && leads_away(&act) {
            return self.refuse("Not kept yet. Enter tries again, - drops it.", out);
        }
        match act {
            Act::Yes => self.yes(how, out),
            Act::No => self.no(out),
            Act::Pick(n) => self.picked(n, how, out),
            Act::Value(entry) => self.value(entry, how, out),
            Act::KeepAsFound => match self.top() {
                Prompt::Question(_) => self.keep_reasons(out),
                _ => self.refuse("Nothing to keep here.", out),
            },
            Act::MeasureAgain => match self.top() {
                Prompt::Question(_) | Prompt::Confirm(_) => self.measure_again(out),
                Prompt::List(_) if self.questioned().is_some() => self.measure_again(out),
                _ => self.refuse("Nothing to measure again here.", out),
            },
            Act::Command(control) => self.command(control, how, out),
            Act::Go(place) => self.go_to(&place, out),
            Act::Test(test) => self.take_up(test, out),
            Act::Stage(stage) => self.take_up_stage(stage, out),
            Act::Menu => match self.top() {
                Prompt::Menu => self.pop(out),
                _ => self.push(Prompt::Menu, out),
            },
            Act::CallCircuit => self.push(Prompt::Call(String::new()), out),
            Act::CallTest => self.tests(out),
            Act::Talk => self.talk(out),
            Act::Nothing => out.push(Effect::Show),
        }
    }

    /// Hearings in a row that were not right, at the reading in hand.
    fn misses(&self) -> u8 {
        match self.stack.first() {
            Some(Prompt::Ask(ask)) => ask.misses,
            _ => 0,
        }
    }

    fn in_trouble(&self) -> bool {
        self.stack.iter().any(|p| matches!(p, Prompt::Trouble(_)))
    }

    fn yes(&mut self, how: &How, out: &mut Vec<Effect>) {
        match self.top().clone() {
            Prompt::Gate(gate) => {
                if gate.page + 1 < gate.pages.len() {
                    return self.command(Control::Next, how, out);
                }
                if gate.stage == Stage::CloseUp && !self.standing.works_in.is_empty() {
                    return self.refuse("A link or work is still in. See the list of links.", out);
                }
                let closing = gate.board.as_ref().filter(|_| gate.stage == Stage::CloseUp);
                let closing = closing
                    .map(|b| self.closing_circuits(b))
                    .unwrap_or_default();
                self.queue(Record::Acknowledged {
                    stage: gate.stage,
                    board: gate.board,
                    circuit: None,
                    reminders: gate.reminders,
                    by: self.setup.tester.clone(),
                    entered: how.entered,
                });
                for (stage, board, circuit) in closing {
                    self.queue(Record::StageClosed {
                        stage,
                        board,
                        circuit,
                    });
                }
                self.send(out);
            }
            Prompt::Dead(_) => self.dead_yes(out),
            Prompt::Fit(work) => {
                let by = self.setup.tester.clone();
                self.keep(Record::WorkIn { work, by }, out);
            }
            Prompt::TakeOut(work) => self.took_out(work, out),
            Prompt::Hold(hold) => self.keep(
                Record::Acknowledged {
                    stage: Stage::Insulation,
                    board: Some(hold.board),
                    circuit: Some(hold.circuit),
                    reminders: vec![super::utter::DISCHARGED.into()],
                    by: self.setup.tester.clone(),
                    entered: how.entered,
                },
                out,
            ),
            Prompt::Confirm(candidate) => self.affirmed(*candidate, how, out),
            Prompt::Question(_) => {
                self.refuse("Say or pick: keep as found, or measure again.", out)
            }
            Prompt::Ask(_) => self.command(Control::SayAgain, how, out),
            // A list of one is a question: yes takes it.
            Prompt::List(list) if list.items.len() == 1 => self.picked(1, how, out),
            Prompt::List(_) | Prompt::Page(_) => self.command(Control::Next, how, out),
            Prompt::Menu => self.pop(out),
            Prompt::Call(text) => self.call_typed(&text, out),
            Prompt::Standby => self.command(Control::Resume, how, out),
            Prompt::Trouble(_) => {
                self.pop(out);
                self.move_on = true;
                self.settle(out);
            }
            Prompt::StopAsk | Prompt::Finish => self.end(None, out),
        }
    }

    fn no(&mut self, out: &mut Vec<Effect>) {
        match self.top().clone() {
            Prompt::Gate(gate) if gate.page > 0 => {
                if let Some(Prompt::Gate(gate)) = self.stack.last_mut() {
                    gate.page -= 1;
                }
                out.push(Effect::Show);
            }
            Prompt::Gate(gate) => self.refuse(
                format!("Not acknowledged: {} stays shut.", gate.stage.title()),
                out,
            ),
            Prompt::Dead(dead) => self.dead_no(dead.step, out),
            Prompt::Fit(_) if self.stack.len() > 1 => self.pop(out),
            Prompt::Fit(_) => {
                self.note("Not done: what needs it comes later.");
                self.later(out);
            }
            Prompt::TakeOut(work) => self.stays_in(&work, out),
            Prompt::Hold(_) => self.refuse("Hold on. Enter when it is discharged.", out),
            Prompt::Confirm(candidate) => {
                self.note(format!("{} not kept. Again, please.", candidate.entry));
                out.push(Effect::Tone(Tone::Refused));
                if candidate.entered == Entered::Voice {
                    // A hearing refused counts like one not understood.
                    self.pop_all();
                    if let Some(Prompt::Ask(ask)) = self.stack.first_mut() {
                        ask.misses = ask.misses.saturating_add(1);
                        if ask.misses >= 2 {
                            self.note("Twice not right. Type it, or say: digit by digit.");
                        }
                    }
                    out.push(Effect::Show);
                    out.push(Effect::Listen(self.context()));
                    let another = self.misses() >= 2;
                    let text = if another {
                        super::utter::ANOTHER_WAY.into()
                    } else {
                        super::utter::prompt(self)
                    };
                    self.say(text, out);
                } else {
                    self.pop_all();
                    out.push(Effect::Show);
                    out.push(Effect::Listen(self.context()));
                }
            }
            Prompt::Question(_) => self.measure_again(out),
            Prompt::Ask(_) => self.refuse("Nothing to answer no to. Say or type the reading.", out),
            Prompt::Trouble(_) => {
                self.pop(out);
                self.drop_pending(out);
            }
            Prompt::Finish => self.refuse("Nothing is left to do. Call a circuit, or end.", out),
            Prompt::List(_)
            | Prompt::Page(_)
            | Prompt::Menu
            | Prompt::Call(_)
            | Prompt::Standby
            | Prompt::StopAsk => self.pop(out),
        }
    }

    /// A value for the test in hand: shown and read back, never kept by itself.
    pub(super) fn value(&mut self, entry: Entry, how: &How, out: &mut Vec<Effect>) {
        let ask = match self.stack.first() {
            Some(Prompt::Ask(ask)) => ask.clone(),
            _ => {
                return self.refuse(
                    format!("{entry}: no reading is asked for here. Answer first."),
                    out,
                );
            }
        };
        let candidate = match self.candidate(&ask, entry, how.entered, how.heard.as_ref()) {
            Ok(candidate) => candidate,
            Err(why) => return self.missed(&why, out),
        };
        // Two values on two ways at once: neither is lost, the tester says which.
        let standing = self.stack.iter().find_map(|p| match p {
            Prompt::Confirm(other) => Some(other.clone()),
            _ => None,
        });
        if let Some(other) = standing
            && other.entered != candidate.entered
            // As printed: 0.50 and 0.5 are two values.
            && other.entry.to_string() != candidate.entry.to_string()
        {
            let line = |c: &Candidate| match c.entered {
                Entered::Voice => format!("{} (heard)", c.entry),
                Entered::Keypad => format!("{} (typed)", c.entry),
            };
            self.pop_all();
            let items = vec![
                (line(&other), Choice::Candidate(other)),
                (line(&candidate), Choice::Candidate(Box::new(candidate))),
            ];
            return self.list("Two values came. Which one?", items, out);
        }
        self.read_back(candidate, out);
    }

    pub(super) fn read_back(&mut self, candidate: Candidate, out: &mut Vec<Effect>) {
        self.pop_all();
        self.note("");
        let off = candidate.assessment.questioned();
        out.push(Effect::Tone(if off {
            Tone::OutOfRange
        } else {
            Tone::Understood
        }));
        self.push(Prompt::Confirm(Box::new(candidate)), out);
    }

    /// The read-back was affirmed.
    fn affirmed(&mut self, mut candidate: Candidate, how: &How, out: &mut Vec<Effect>) {
        candidate.confirmed = Some(how.entered);
        if let Some(Prompt::Ask(ask)) = self.stack.first_mut() {
            ask.misses = 0;
        }
        self.pop_all();
        if candidate.assessment.questioned() {
            self.note("");
            self.push(Prompt::Question(Box::new(candidate)), out);
        } else {
            self.keep_value(&candidate, None, out);
        }
    }

    /// Affirmed, and where it was questioned, a reason given: now it goes to the journal.
    pub(super) fn keep_value(
        &mut self,
        candidate: &Candidate,
        as_found: Option<(&str, bool)>,
        out: &mut Vec<Effect>,
    ) {
        let record = self.record(candidate, as_found.map(|(reason, _)| reason));
        self.queue(record);
        if let Some(last) = self.pending.back_mut() {
            last.failed = as_found.is_some_and(|(_, fault)| fault);
        }
        self.send(out);
    }

    fn measure_again(&mut self, out: &mut Vec<Effect>) {
        self.pop_all();
        self.note("Measure again. The old value is not kept.");
        out.push(Effect::Show);
        out.push(Effect::Listen(self.context()));
        let text = super::utter::prompt(self);
        self.say(text, out);
    }

    /// The candidate under question, below whatever lies over it.
    pub(super) fn questioned(&self) -> Option<Candidate> {
        self.stack.iter().rev().find_map(|p| match p {
            Prompt::Question(candidate) => Some((**candidate).clone()),
            _ => None,
        })
    }

    pub(super) fn picked(&mut self, n: u8, how: &How, out: &mut Vec<Effect>) {
        match self.top() {
            Prompt::List(list) => match list.pick(n).cloned() {
                Some(choice) => self.choose(choice, how, out),
                None if n == 0 => self.pop(out),
                None => self.refuse(format!("There is no line {n}."), out),
            },
            Prompt::Question(_) => match n {
                1 => self.keep_reasons(out),
                2 => self.measure_again(out),
                _ => self.refuse("1 keep as found, 2 measure again.", out),
            },
            Prompt::Dead(dead) if dead.step == DeadStep::Method => self.dead_method(n, out),
            Prompt::Dead(_) | Prompt::Gate(_) => self.refuse("Enter when done, - when not.", out),
            _ => self.refuse("There is nothing to pick here.", out),
        }
    }

    pub(super) fn choose(&mut self, choice: Choice, how: &How, out: &mut Vec<Effect>) {
        match choice {
            Choice::Candidate(candidate) => self.read_back(*candidate, out),
            Choice::Meaning(meaning) => {
                self.pop(out);
                self.meaning(meaning, how, out);
            }
            Choice::Command(control) => {
                self.pop(out);
                self.command(control, how, out);
            }
            Choice::Board(board) => self.go_to(
                &Place {
                    board: Some(board),
                    ..Place::default()
                },
                out,
            ),
            Choice::Test(test) => self.take_up(test, out),
            Choice::Target(target) => self.call(target, out),
            Choice::Skip(reason) => match self.stack.first() {
                Some(Prompt::Ask(ask)) => {
                    let record = Record::Skipped {
                        target: ask.target.clone(),
                        reason: reason.into(),
                        by: self.setup.tester.clone(),
                    };
                    self.pop_all();
                    self.keep(record, out);
                }
                _ => self.refuse("There is no test to leave out here.", out),
            },
            Choice::Keep(reason, fault) => match self.questioned() {
                Some(candidate) => {
                    self.pop_all();
                    self.keep_value(&candidate, Some((reason, fault)), out);
                }
                None => self.refuse("There is nothing to keep.", out),
            },
            Choice::Out(work) => self.push(Prompt::TakeOut(work), out),
            Choice::In(work) => self.push(Prompt::Fit(work), out),
        }
    }

    /// The tester says that a work is out.
    pub(super) fn took_out(&mut self, work: crate::domain::record::Work, out: &mut Vec<Effect>) {
        let by = self.setup.tester.clone();
        self.keep(Record::WorkOut { work, by }, out);
    }

    /// The test in hand comes later; the next one now.
    pub(super) fn later(&mut self, out: &mut Vec<Effect>) {
        self.pop_all();
        if let Some(target) = self.wanted() {
            if group(&target).0 == Stage::Nulling {
                self.note("Leads not nulled: readings will be off.");
            }
            // Without the work none of the tests that need it can be done.
            if let Some(Prompt::Fit(work)) = self.stack.first().cloned() {
                let needing = self.setup.needing(&work).filter(|t| self.is_open(t));
                let all: Vec<Target> = needing.cloned().collect();
                for other in all {
                    self.pass_over(other, false);
                }
            } else {
                self.pass_over(target.clone(), false);
            }
            if self.called.as_ref() == Some(&target) {
                self.called = None;
            }
        }
        self.advance(out);
    }
}

/// Acts that would leave a record behind that is not on disk.
fn leads_away(act: &Act) -> bool {
    match act {
        Act::Value(_)
        | Act::Go(_)
        | Act::Test(_)
        | Act::Stage(_)
        | Act::KeepAsFound
        | Act::MeasureAgain
        | Act::CallCircuit
        | Act::CallTest => true,
        Act::Command(control) => matches!(
            control,
            Control::Correction(_)
                | Control::Skip
                | Control::DigitByDigit
                | Control::LinkIn
                | Control::LinkOut
                | Control::Note
                | Control::SameAsLast
                | Control::SameAs(_)
                | Control::LeaveOut(_)
                | Control::KeepFor(_)
                | Control::Test(_)
                | Control::Stage(_)
        ),
        _ => false,
    }
}
