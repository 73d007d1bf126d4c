//! The interview that makes a job file: which question comes next, given the answers so far.
//!
//! Promises: it is a pure function of the answers, so that an interview can be broken off, taken
//! up again and stepped back at any question; an answer that cannot be right is refused with the
//! reason; a finished interview gives a job whose file loads without a mistake. It leaves out
//! prompting, history and files (the command), and what few jobs need (pronunciations of names,
//! conductor classes, several instruments): those are added to the file by hand.

mod answers;
mod circuits;
mod draft;
mod questions;

pub use draft::{Draft, DraftError};

use crate::domain::plan::Job;

/// A question to put.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Question {
    /// Stable name of the question, for drafts: `board.1.circuit.2.kind`.
    pub id: String,
    /// What is asked.
    pub text: String,
    /// What an empty answer means; `None` when something must be answered.
    pub default: Option<String>,
    /// Which answers there are, or an example; may be empty.
    pub help: String,
}

/// Where an interview stands.
#[derive(Debug, Clone, PartialEq)]
pub enum Step {
    /// The next question.
    Ask(Question),
    /// The last answer cannot be right, with the reason; drop it and ask again.
    Refused(Question, String),
    /// Everything is known.
    Done(Box<Job>),
}

/// The step that follows the given answers.
///
/// When an answer before the last cannot be right (an edited draft), the answers from it on do
/// not count: [`Script::used`] says how many do.
#[must_use]
pub fn next(answers: &[String]) -> Step {
    step(answers).0
}

/// As [`next`], with the number of answers that were taken.
#[must_use]
pub fn step(answers: &[String]) -> (Step, usize) {
    let mut script = Script { answers, used: 0 };
    let step = match questions::job(&mut script) {
        Ok(job) => Step::Done(Box::new(job)),
        Err(Pause::Ask(question)) => Step::Ask(question),
        Err(Pause::Refused(question, why)) => Step::Refused(question, why),
    };
    (step, script.used)
}

/// Why the questions stop: an answer is missing or wrong.
enum Pause {
    Ask(Question),
    Refused(Question, String),
}

/// The answers being worked through.
struct Script<'a> {
    answers: &'a [String],
    used: usize,
}

impl Script<'_> {
    /// Puts one question: takes the next answer, or pauses when there is none.
    fn ask<T>(
        &mut self,
        question: Question,
        read: impl Fn(&str) -> Result<T, String>,
    ) -> Result<T, Pause> {
        let Some(answer) = self.answers.get(self.used) else {
            return Err(Pause::Ask(question));
        };
        let given = answer.trim();
        let meant = match (&question.default, given) {
            (Some(default), "") => default.clone(),
            (None, "") => {
                return Err(Pause::Refused(question, "this cannot be left empty".into()));
            }
            (_, given) => given.to_string(),
        };
        if meant.chars().any(char::is_control) {
            return Err(Pause::Refused(
                question,
                "an answer is one line without control characters".into(),
            ));
        }
        match read(&meant) {
            Ok(value) => {
                self.used += 1;
                Ok(value)
            }
            Err(why) => Err(Pause::Refused(question, why)),
        }
    }
}
