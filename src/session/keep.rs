//! Waiting for the journal: a record counts when it is on disk, and only then is "kept" said.
//!
//! Promises: records go to the journal one at a time and in order; a record that could not be kept
//! is neither lost nor counted: the tester tries again, or drops it knowingly.

use crate::domain::{
    kept::Value,
    record::{EntryNo, ReadingKept, Record},
    standing::value_of,
    test::{Target, TestKind},
};

use super::{
    effect::{Effect, Tone},
    prompt::Prompt,
    state::{Pending, State},
    trade,
};

impl State {
    /// Keeps a record: on its way to the journal, after those already on theirs.
    pub(super) fn keep(&mut self, record: Record, out: &mut Vec<Effect>) {
        self.queue(record);
        self.send(out);
    }

    pub(super) fn queue(&mut self, record: Record) {
        self.pending.push_back(Pending {
            record,
            failed: false,
        });
    }

    pub(super) fn keep_incident(&mut self, what: &str, out: &mut Vec<Effect>) {
        self.keep(Record::Incident { what: what.into() }, out);
    }

    /// Hands the first pending record to the journal, unless one is there already.
    pub(super) fn send(&mut self, out: &mut Vec<Effect>) {
        if self.awaiting {
            return;
        }
        if let Some(pending) = self.pending.front() {
            self.awaiting = true;
            out.push(Effect::Keep(Box::new(pending.record.clone())));
        }
    }

    /// The journal has it.
    pub(super) fn kept(&mut self, no: EntryNo, out: &mut Vec<Effect>) {
        if !self.awaiting {
            return;
        }
        self.awaiting = false;
        let Some(Pending { record, failed }) = self.pending.pop_front() else {
            return;
        };
        self.standing.apply(no, &record);
        self.unkept.retain(|lost| !makes_good(&record, lost));
        self.move_on |= self.after(no, &record, failed, out);
        self.settle(out);
    }

    /// Sends what still waits; when nothing does, moves on and takes up what was held.
    pub(super) fn settle(&mut self, out: &mut Vec<Effect>) {
        if !self.pending.is_empty() {
            // What comes next is chosen once the last record is in.
            self.send(out);
            return;
        }
        if self.ending {
            self.ended = true;
            out.push(Effect::Show);
            out.push(Effect::Quit);
            return;
        }
        if std::mem::take(&mut self.move_on) {
            self.advance(out);
        } else {
            out.push(Effect::Show);
        }
        while !self.awaiting && !self.ended {
            match self.held.pop_front() {
                Some(event) => self.take(event, out),
                None => break,
            }
        }
    }

    /// What a kept record changes besides the standing; true when the work moves on.
    fn after(&mut self, no: EntryNo, record: &Record, failed: bool, out: &mut Vec<Effect>) -> bool {
        match record {
            Record::Reading(reading) => {
                out.push(Effect::Tone(Tone::Saved));
                let as_found = reading.kept_as_found.as_ref();
                self.note(match as_found {
                    Some(why) => format!(
                        "Kept as found: {}, {why} (entry {no}).",
                        value_text(reading)
                    ),
                    None => format!("Kept: {} (entry {no}).", value_text(reading)),
                });
                self.done_with(&reading.target);
                if let (
                    TestKind::Insulation(_) | TestKind::Separation,
                    Some(board),
                    Some(circuit),
                ) = (
                    reading.target.test,
                    &reading.target.board,
                    reading.target.circuit,
                ) {
                    self.charged.insert((board.clone(), circuit));
                }
                if failed {
                    self.mark_repeats(no, &reading.target);
                }
            }
            Record::Skipped { target, reason, .. } => {
                self.note(format!("Left out: {}, {reason}.", target.test.title()));
                self.done_with(target);
            }
            Record::Acknowledged {
                stage,
                board,
                circuit,
                ..
            } => {
                if let (Some(board), Some(circuit)) = (board, circuit) {
                    self.charged.remove(&(board.clone(), *circuit));
                    self.note("Discharged.");
                } else {
                    self.note(format!("{}: acknowledged.", stage.title()));
                }
            }
            Record::ProvedDead { board, .. } => {
                self.lapsed.remove(board);
                self.note(format!("{board} proved dead (entry {no})."));
            }
            Record::WorkIn { work, .. } => {
                self.left_in.remove(work);
                self.note(format!("On the list: {}.", work.kind.words()));
            }
            Record::WorkOut { work, .. } => {
                self.left_in.remove(work);
                self.look_everywhere = true;
                self.note(format!("Off the list: {}.", work.kind.words()));
            }
            Record::Incident { .. } | Record::Note { .. } => return false,
            _ => {}
        }
        true
    }

    fn done_with(&mut self, target: &Target) {
        self.drafts.remove(target);
        self.passed.retain(|(t, _)| t != target);
        if self.called.as_ref() == Some(target) {
            self.called = None;
        }
    }

    /// A failed test: it and every earlier one it may have influenced are done again.
    fn mark_repeats(&mut self, because: EntryNo, target: &Target) {
        let mut again = vec![target.clone()];
        again.extend(
            trade::influenced_by(self.job(), target)
                .into_iter()
                .filter(|t| t != target && self.standing.kept.value(t).is_some()),
        );
        self.note(format!(
            "{} To do again: {}.",
            self.notice,
            match again.len() {
                1 => "this test".to_owned(),
                n => format!("{n} tests"),
            }
        ));
        for target in again {
            // It is not the next thing to do: the fault has to be put right first.
            self.pass_over(target.clone(), true);
            self.queue(Record::Repeat { target, because });
        }
    }

    /// The journal could not keep it.
    pub(super) fn not_kept(&mut self, why: String, out: &mut Vec<Effect>) {
        if !self.awaiting {
            return;
        }
        self.awaiting = false;
        if self.ending {
            // Nothing more can be done here; what was kept before is on disk.
            self.unkept.extend(self.pending.drain(..).map(|p| p.record));
            self.ended = true;
            out.push(Effect::Quit);
            return;
        }
        out.push(Effect::Tone(Tone::Refused));
        self.push(Prompt::Trouble(why), out);
    }

    /// The tester lets go of a record that could not be kept, with all that hung on it.
    pub(super) fn drop_pending(&mut self, out: &mut Vec<Effect>) {
        self.unkept.extend(self.pending.drain(..).map(|p| p.record));
        self.note("NOT kept. It is asked again.");
        self.move_on = true;
        self.settle(out);
    }
}

/// Whether a record that was kept says what one that was lost would have said, or what took its
/// place.
fn makes_good(kept: &Record, lost: &Record) -> bool {
    match (kept, lost) {
        (Record::Reading(kept), Record::Reading(lost)) => kept.target == lost.target,
        (Record::Reading(kept), Record::Skipped { target, .. }) => kept.target == *target,
        (Record::Skipped { target, .. }, Record::Reading(lost)) => lost.target == *target,
        (Record::Skipped { target, .. }, Record::Skipped { target: lost, .. }) => target == lost,
        (Record::WorkIn { work, .. }, Record::WorkIn { work: lost, .. })
        | (Record::WorkOut { work, .. }, Record::WorkOut { work: lost, .. }) => work == lost,
        (
            Record::Acknowledged {
                stage,
                board,
                circuit,
                ..
            },
            Record::Acknowledged {
                stage: lost_stage,
                board: lost_board,
                circuit: lost_circuit,
                ..
            },
        ) => (stage, board, circuit) == (lost_stage, lost_board, lost_circuit),
        (Record::ProvedDead { board, .. }, Record::ProvedDead { board: lost, .. }) => board == lost,
        (kept, lost) => kept == lost,
    }
}

fn value_text(reading: &ReadingKept) -> String {
    match value_of(reading) {
        Some(Value::Reading(value)) => value.to_string(),
        Some(Value::Ticked(true)) => "in order".into(),
        Some(Value::Ticked(false)) => "NOT in order".into(),
        None => reading.value.clone(),
    }
}
