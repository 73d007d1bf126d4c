//! Commands that work at every prompt: again, back, next, links in and out, correction, the same
//! value as elsewhere.
//!
//! Promises: no command keeps a value; what was not affirmed is dropped with a line that says so.
//! Going to a place or a test by name stands in `calls`.

use crate::{
    domain::{
        kept::Value,
        place::PointNo,
        record::{Record, Work, WorkKind},
        test::Target,
    },
    speech::meaning::{Control, Meaning},
};

use super::{
    act::How,
    effect::{Effect, Tone},
    prompt::{Choice, DeadStep, Entry, Prompt},
    state::{EarState, State},
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
            // Received is not yes (ICAO Annex 10 volume II keeps the two words apart).
            Control::Received => self.refuse(
                match self.top() {
                    Prompt::Confirm(_) | Prompt::Question(_) => {
                        "Roger means received, not yes: nothing kept."
                    }
                    _ => "Roger means received, not yes or done.",
                },
                out,
            ),
            Control::Same => self.refuse(
                "Same as what? Say: same as last point, or same as point two.",
                out,
            ),
            Control::SameAsLast => self.same_as(None, how, out),
            Control::SameAs(point) => self.same_as(Some(point), how, out),
            Control::LeaveOut(n) => self.leave_out_for(n, how, out),
            Control::KeepFor(n) => self.keep_for(n, how, out),
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
        let mut dropped = false;
        if let Some(Prompt::Ask(ask)) = self.stack.first_mut() {
            dropped |= std::mem::take(&mut ask.by_digit);
            let target = ask.target.clone();
            dropped |= self.drafts.remove(&target).is_some();
        }
        if dropped {
            self.note("Dropped.");
            out.push(Effect::Show);
            out.push(Effect::Listen(self.context()));
        } else {
            // What is kept stays in the log; a newer entry replaces it.
            self.refuse(
                "Nothing to drop. Correction replaces the last kept value.",
                out,
            );
        }
    }

    /// The value that another point of this circuit has, said by its place: read back like any
    /// other.
    fn same_as(&mut self, point: Option<PointNo>, how: &How, out: &mut Vec<Effect>) {
        let target = match self.stack.first() {
            Some(Prompt::Ask(ask)) if ask.target.test.unit().is_some() => ask.target.clone(),
            _ => return self.refuse("No figure is asked for here.", out),
        };
        let kept = &self.standing.kept;
        let like = |t: &Target| {
            let at = (t.test, &t.board, t.circuit) == (target.test, &target.board, target.circuit);
            at && *t != target && (point.is_none() || t.point == point)
        };
        let found = kept
            .iter()
            .filter(|(t, _)| like(t))
            .max_by_key(|(t, _)| kept.entry(t));
        match found {
            Some((_, Value::Reading(reading))) => {
                let entry = Entry::Reading(reading.clone());
                self.value(entry, how, out);
            }
            _ => {
                let at = point.map_or("before it".to_owned(), |p| format!("at point {p}"));
                self.refuse(
                    format!(
                        "No {} is kept here {at}: say the figure.",
                        target.test.title()
                    ),
                    out,
                );
            }
        }
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
        // A place called again needs no value to go back to.
        if let Meaning::Place(place) = &inner {
            return self.go_to(place, out);
        }
        self.correct_last(out);
        // The reading that came with the word goes where the old one was, and is read back.
        if matches!(self.top(), Prompt::Ask(_)) {
            self.meaning(inner, how, out);
        } else if self.called.is_some() {
            // Something has to be done before that value can be asked for again.
            let text = super::entry::meaning_text(&inner);
            self.note(format!("{} {text} not taken: say it then.", self.notice));
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
            EarState::None => self.refuse("Keypad only: there is no voice.", out),
            EarState::Lost => self.refuse("The microphone is gone.", out),
            EarState::Listening => self.note("It listens all the time: speak."),
            // The second press says that it was said.
            EarState::Asked | EarState::Speech => out.push(Effect::Talk),
            EarState::OnKey => {
                self.ear = EarState::Asked;
                out.push(Effect::Talk);
                out.push(Effect::Tone(Tone::Listening));
                out.push(Effect::Show);
            }
        }
    }

    fn link_in(&mut self, out: &mut Vec<Effect>) {
        match self.top().clone() {
            Prompt::Fit(work) if is_link(work.kind) => {
                let by = self.setup.tester.clone();
                return self.keep(Record::WorkIn { work, by }, out);
            }
            Prompt::TakeOut(work) if is_link(work.kind) => return self.stays_in(&work, out),
            Prompt::Fit(work) | Prompt::TakeOut(work) => {
                return self.refuse(no_link(work.kind), out);
            }
            _ => {}
        }
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
        match self.top().clone() {
            Prompt::TakeOut(work) if is_link(work.kind) => return self.took_out(work, out),
            Prompt::TakeOut(work) => return self.refuse(no_link(work.kind), out),
            _ => {}
        }
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
}

/// Whether that work is a link that goes in and comes out; the others are undone otherwise.
fn is_link(kind: WorkKind) -> bool {
    matches!(
        kind,
        WorkKind::LineEarthLink
            | WorkKind::CrossLineNeutral
            | WorkKind::CrossLineEarth
            | WorkKind::LivesJoined
    )
}

/// "Link in" or "link out" where something else is asked for.
fn no_link(kind: WorkKind) -> String {
    format!("Asked is: {}. Say done, or negative.", kind.words())
}
