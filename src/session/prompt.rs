//! The prompts: what stands before the tester, each a small state.
//!
//! Promises: plain data, so that a state can be shown, compared and replayed. What keys and words
//! do at each prompt stands in `keys`, `hear` and `act`.

use std::fmt;

use crate::{
    domain::{
        expect::{Assessment, Expected},
        place::{BoardId, CircuitNo},
        reading::Reading,
        record::{AlternativeKept, Entered, EntryNo, Work},
        test::{Stage, Target, TestKind},
    },
    speech::meaning::{Control, Meaning},
};

/// What stands on the screen. Prompts lie on one another: the lowest is the step of the work, a
/// list or a menu lies over it and leaves it untouched.
#[derive(Debug, Clone, PartialEq)]
pub enum Prompt {
    /// Reminders of a stage, to be acknowledged.
    Gate(Gate),
    /// Proving dead, with the indicator's details.
    Dead(Dead),
    /// A temporary work is needed: fitted?
    Fit(Work),
    /// A temporary work must come out: out?
    TakeOut(Work),
    /// After an insulation test: hold until the charge is gone.
    Hold(Hold),
    /// A reading or a tick is asked for.
    Ask(Box<Ask>),
    /// What was entered is read back: affirm or negative.
    Confirm(Box<Candidate>),
    /// It is out of range: keep as found, or measure again.
    Question(Box<Candidate>),
    /// A list to pick from.
    List(List),
    /// Text to read, page by page.
    Page(Page),
    /// The menu behind `*`.
    Menu,
    /// A circuit is being called by key; what was typed.
    Call(String),
    /// Nothing is listened to but "resume".
    Standby,
    /// The journal could not keep a record; why.
    Trouble(String),
    /// End the session?
    StopAsk,
    /// Nothing is left to do.
    Finish,
}

/// Reminders of a stage.
#[derive(Debug, Clone, PartialEq)]
pub struct Gate {
    /// The stage.
    pub stage: Stage,
    /// The board it is for, where it is for one.
    pub board: Option<BoardId>,
    /// The reminders, whole, as they go into the log.
    pub reminders: Vec<String>,
    /// The same, cut into pages that fit the smallest screen.
    pub pages: Vec<Vec<String>>,
    /// The page shown, from 0.
    pub page: usize,
}

/// Steps of proving a board dead.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum DeadStep {
    /// How the indicator is proved: 1 proving unit, 2 known live source.
    Method,
    /// Number of the indicator, typed or said.
    Number,
    /// Proved before?
    Before,
    /// Dead between all conductors?
    Dead,
    /// Proved again after?
    After,
}

/// Proving dead.
#[derive(Debug, Clone, PartialEq)]
pub struct Dead {
    /// The board.
    pub board: BoardId,
    /// More than one line conductor there.
    pub three_phase: bool,
    /// The step.
    pub step: DeadStep,
    /// How the indicator was proved, once chosen.
    pub method: Option<&'static str>,
    /// The indicator's number as typed; may stay empty.
    pub number: String,
}

/// Holding until the charge is gone.
#[derive(Debug, Clone, PartialEq)]
pub struct Hold {
    /// The board.
    pub board: BoardId,
    /// The circuit.
    pub circuit: CircuitNo,
    /// When it began, ms.
    pub since: u64,
}

/// A reading is asked for.
#[derive(Debug, Clone, PartialEq)]
pub struct Ask {
    /// Which.
    pub target: Target,
    /// What to expect, worked out once.
    pub expected: Expected,
    /// How to connect, one sentence each.
    pub connections: Vec<String>,
    /// The value that stands, when this one would replace it: entry and value as text.
    pub stands: Option<(EntryNo, String)>,
    /// Hearings in a row that were not understood or refused.
    pub misses: u8,
    /// Digits are taken one at a time.
    pub by_digit: bool,
}

/// A value as entered.
#[derive(Debug, Clone, PartialEq)]
pub enum Entry {
    /// A figure.
    Reading(Reading),
    /// In order or not.
    Tick(bool),
}

/// A value that waits to be affirmed. It is nowhere but here until then.
#[derive(Debug, Clone, PartialEq)]
pub struct Candidate {
    /// For which test.
    pub target: Target,
    /// The value.
    pub entry: Entry,
    /// The unit was not said but taken from the test.
    pub unit_assumed: bool,
    /// Voice or keypad.
    pub entered: Entered,
    /// Words heard.
    pub heard: Option<String>,
    /// Margin to the next hypothesis, as text.
    pub margin: Option<String>,
    /// Other hypotheses.
    pub alternatives: Vec<AlternativeKept>,
    /// Clip of the utterance.
    pub clip: Option<String>,
    /// How it lies to the expected range.
    pub assessment: Assessment,
    /// The entry it replaces.
    pub corrects: Option<EntryNo>,
    /// Affirmed by (set when affirmed; the question whether to keep comes after).
    pub confirmed: Option<Entered>,
}

/// What picking a line of a list does.
#[derive(Debug, Clone, PartialEq)]
pub enum Choice {
    /// Takes this value to the read-back.
    Candidate(Box<Candidate>),
    /// Does what the words may have meant.
    Meaning(Meaning),
    /// Gives a command.
    Command(Control),
    /// Goes to a board.
    Board(BoardId),
    /// Takes up a test.
    Test(TestKind),
    /// Goes to a test at its place.
    Target(Target),
    /// Leaves the test out for this reason.
    Skip(&'static str),
    /// Keeps the value as found for this reason; true: a fault, to be put right.
    Keep(&'static str, bool),
    /// Says that this work is out.
    Out(Work),
    /// Says that this work is in.
    In(Work),
}

/// A list to pick from.
#[derive(Debug, Clone, PartialEq)]
pub struct List {
    /// What it is about.
    pub title: String,
    /// Lines and what picking them does.
    pub items: Vec<(String, Choice)>,
    /// The page shown, from 0; [`List::PER_PAGE`] lines each.
    pub page: usize,
}

/// Text to read.
#[derive(Debug, Clone, PartialEq)]
pub struct Page {
    /// What it is about.
    pub title: String,
    /// Pages of lines.
    pub pages: Vec<Vec<String>>,
    /// The page shown, from 0.
    pub page: usize,
}

impl List {
    /// Lines a page: they fit the smallest screen and have a key and a word each.
    pub const PER_PAGE: usize = 6;

    /// The lines of the page shown.
    pub fn shown(&self) -> impl Iterator<Item = (usize, &(String, Choice))> {
        self.items
            .iter()
            .skip(self.page * Self::PER_PAGE)
            .take(Self::PER_PAGE)
            .enumerate()
            .map(|(at, item)| (at + 1, item))
    }

    /// What the n-th line shown, from 1, does.
    #[must_use]
    pub fn pick(&self, n: u8) -> Option<&Choice> {
        self.shown()
            .find(|(at, _)| *at == usize::from(n))
            .map(|(_, (_, choice))| choice)
    }

    /// Number of pages, at least one.
    #[must_use]
    pub fn pages(&self) -> usize {
        self.items.len().div_ceil(Self::PER_PAGE).max(1)
    }
}

impl fmt::Display for Entry {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Entry::Reading(reading) => write!(f, "{reading}"),
            Entry::Tick(true) => f.write_str("in order"),
            Entry::Tick(false) => f.write_str("NOT in order"),
        }
    }
}

/// Cuts sentences into pages of at most `lines` lines of `width` columns; a sentence stays on one
/// page unless it is longer than a page.
#[must_use]
pub fn paginate(sentences: &[String], width: usize, lines: usize) -> Vec<Vec<String>> {
    let mut pages: Vec<Vec<String>> = vec![Vec::new()];
    let mut used = 0;
    for sentence in sentences {
        let wrapped = super::wrap::wrap(sentence, width);
        if used > 0 && used + wrapped.len() > lines {
            pages.push(Vec::new());
            used = 0;
        }
        for chunk in wrapped.chunks(lines.max(1)) {
            if used > 0 && used + chunk.len() > lines {
                pages.push(Vec::new());
                used = 0;
            }
            if let Some(page) = pages.last_mut() {
                page.push(chunk.join(" "));
            }
            used += chunk.len();
        }
    }
    pages
}
