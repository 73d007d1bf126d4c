//! Proving a board dead, step by step: the indicator proved, no voltage between any conductors,
//! the indicator proved again.
//!
//! Order and pairs: HSE GS38 and guidance on safe isolation (prove, test, prove; all pairs on
//! three phases). The record says what was done and with what; it never says that anything is safe.

use crate::domain::record::Record;

use super::{
    effect::Effect,
    prompt::{Dead, DeadStep, Prompt},
    state::State,
};

/// Ways of proving the indicator, in the order of the keys.
pub(super) const METHODS: [&str; 2] = ["proving unit", "known live source"];

impl Dead {
    /// The conductor pairs that must show no voltage.
    #[must_use]
    pub fn pairs(&self) -> &'static str {
        if self.three_phase {
            "L1-L2, L2-L3, L1-L3, each L-N, each L-E, N-E"
        } else {
            "L-N, L-E, N-E"
        }
    }
}

impl State {
    fn dead_step(&mut self, step: DeadStep, out: &mut Vec<Effect>) {
        if let Some(Prompt::Dead(dead)) = self.stack.last_mut() {
            dead.step = step;
        }
        out.push(Effect::Show);
        out.push(Effect::Listen(self.context()));
        let text = super::utter::prompt(self);
        self.say(text, out);
    }

    pub(super) fn dead_method(&mut self, n: u8, out: &mut Vec<Effect>) {
        let method = usize::from(n).checked_sub(1).and_then(|n| METHODS.get(n));
        match (method, self.stack.last_mut()) {
            (Some(method), Some(Prompt::Dead(dead))) => {
                dead.method = Some(method);
                self.dead_step(DeadStep::Number, out);
            }
            _ => self.refuse("1 proving unit, 2 known live source.", out),
        }
    }

    pub(super) fn dead_yes(&mut self, out: &mut Vec<Effect>) {
        let Prompt::Dead(dead) = self.top().clone() else {
            return;
        };
        match dead.step {
            DeadStep::Method => self.refuse("1 proving unit, 2 known live source.", out),
            DeadStep::Number => self.dead_step(DeadStep::Before, out),
            DeadStep::Before => self.dead_step(DeadStep::Dead, out),
            DeadStep::Dead => self.dead_step(DeadStep::After, out),
            DeadStep::After => {
                let number = match dead.number.as_str() {
                    "" => String::new(),
                    number => format!(" no. {number}"),
                };
                let with = format!(
                    "voltage indicator{number}, proved before and after on a {}; no voltage {}",
                    dead.method.unwrap_or(METHODS[0]),
                    dead.pairs()
                );
                let record = Record::ProvedDead {
                    board: dead.board,
                    with,
                    by: self.setup.tester.clone(),
                };
                self.keep(record, out);
            }
        }
    }

    pub(super) fn dead_no(&mut self, step: DeadStep, out: &mut Vec<Effect>) {
        let Prompt::Dead(dead) = self.top() else {
            return;
        };
        let board = dead.board.clone();
        match step {
            DeadStep::Method => self.refuse("1 proving unit, 2 known live source.", out),
            DeadStep::Number => self.dead_step(DeadStep::Method, out),
            DeadStep::Before | DeadStep::After => {
                self.note("Indicator not proved: get another, begin again.");
                self.dead_step(DeadStep::Method, out);
            }
            DeadStep::Dead => {
                self.note("VOLTAGE FOUND. Stop. Find the source first.");
                self.dead_step(DeadStep::Method, out);
                self.keep_incident(&format!("voltage found while proving {board} dead"), out);
            }
        }
    }
}
