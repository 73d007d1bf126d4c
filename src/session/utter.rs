//! The words of the screen: places, tests, works, ranges, verdicts, the keys and the menu.
//!
//! Short enough for 40 columns; nothing rests on colour. It leaves out what is said aloud (`aloud`)
//! and how a screen is laid out (`screen`).

use crate::{
    domain::{
        expect::{Expected, Verdict},
        place::Place,
        record::{Work, WorkKind},
        test::Target,
    },
    speech::meaning::{Context, Control},
};

use super::{
    prompt::{DeadStep, Prompt},
    state::State,
};

/// What the tester acknowledges after an insulation test.
pub(super) const DISCHARGED: &str =
    "Probes held on until discharged; no voltage left (below 50 V) before anybody touches it.";

/// The keys, for the help page; six lines a page, 38 columns at most.
pub(super) const HELP: [&str; 24] = [
    "ENTER yes, done   - no, back off",
    "* menu   / say again   + next",
    "Figure: digits and point, ENTER",
    "  + first: greater than  >299",
    "  - first: less than     <0.01",
    "  / first: open; // over-range",
    "  - later: rubs out",
    "At a read-back a digit starts anew.",
    "* then 1 call a circuit (7  4.2  7+3)",
    "* then 2 call a test",
    "* then 3 what is open",
    "* then 4 links and works in",
    "* then 5 how to connect, why the range",
    "* then 6 correct the last value",
    "* then 7 leave this test out",
    "* then 8 standby   * 9 end the session",
    "* then + next   * - one step back",
    "* then . note   * ENTER listen once",
    "Say: affirm, negative, say again,",
    "  correction, disregard, digit by digit",
    "  circuit one two, board alpha, next,",
    "  back, skip, list open, list links,",
    "  why, standby, resume, stop, help",
    "Letters do the same: y n o l w s b c t",
];

/// The menu, for the screen.
pub(super) const MENU: [&str; 6] = [
    "1 call circuit     2 call test",
    "3 what is open     4 links in",
    "5 how and why      6 correct last",
    "7 leave out        8 standby",
    "9 end session      0 help",
    "+ next   - back   / say again   . note",
];

/// What may be said now.
pub(super) fn context_of(prompt: &Prompt) -> Context {
    use crate::domain::reading::Unit;
    match prompt {
        Prompt::Gate(_) | Prompt::Fit(_) | Prompt::TakeOut(_) | Prompt::Hold(_) => Context::Gate,
        Prompt::Dead(dead) => match dead.step {
            DeadStep::Method => Context::Pick,
            DeadStep::Number => Context::All,
            _ => Context::Gate,
        },
        Prompt::Ask(ask) if ask.by_digit => Context::Digits,
        Prompt::Ask(ask) => match ask.target.test.unit() {
            None => Context::Tick,
            Some(Unit::Ohm) => Context::Ohms,
            Some(Unit::Megohm) => Context::Insulation,
            Some(_) => Context::Live,
        },
        Prompt::Confirm(_) | Prompt::StopAsk | Prompt::Trouble(_) => Context::Confirm,
        Prompt::Question(_) => Context::Question,
        Prompt::List(_) => Context::Pick,
        Prompt::Page(_) | Prompt::Menu | Prompt::Call(_) | Prompt::Finish => Context::All,
        Prompt::Standby => Context::Gate,
    }
}

impl State {
    /// What may be said now.
    #[must_use]
    pub fn context(&self) -> Context {
        match self.top() {
            // A list of reasons takes reason codes as well.
            Prompt::List(list)
                if list.items.iter().any(|(_, c)| {
                    matches!(
                        c,
                        super::prompt::Choice::Keep(..) | super::prompt::Choice::Skip(_)
                    )
                }) =>
            {
                Context::Question
            }
            top => context_of(top),
        }
    }
}

/// The question of a step of proving dead.
pub(super) fn dead_question(step: DeadStep, pairs: &str) -> String {
    match step {
        DeadStep::Method => "Proved on: 1 unit, 2 live source?".into(),
        DeadStep::Number => "Number of the indicator?".into(),
        DeadStep::Before => "Indicator proved just now?".into(),
        DeadStep::Dead => format!("No voltage: {pairs}?"),
        DeadStep::After => "Indicator proved again after?".into(),
    }
}

/// How a reading lies, in words that hold without colour.
pub(super) fn verdict_text(verdict: Verdict) -> &'static str {
    match verdict {
        Verdict::InRange => "within the range",
        Verdict::Below => "BELOW the range",
        Verdict::Above => "ABOVE the range",
        Verdict::Open => "OPEN, a value was expected",
        Verdict::NotOpen => "NOT OPEN, open was expected",
        Verdict::BeyondLimit => "BEYOND THE LIMIT",
        Verdict::Unknown => "no range to compare with",
    }
}

/// The range on one line.
pub(super) fn range_text(expected: &Expected) -> String {
    let unit = expected.unit;
    if expected.open {
        return "Expect: open".into();
    }
    let limit = expected.limit.as_ref().map(|l| {
        let sign = if l.minimum { "min" } else { "max" };
        format!("{sign} {} {unit}", l.value)
    });
    let range = match (expected.low, expected.high) {
        (Some(low), Some(high)) => Some(format!("{low} to {high} {unit}")),
        (Some(low), None) => Some(format!("from {low} {unit}")),
        (None, Some(high)) => Some(format!("up to {high} {unit}")),
        (None, None) => None,
    };
    match (range, limit) {
        (Some(range), Some(limit)) => format!("Expect: {range} ({limit})"),
        (Some(only), None) | (None, Some(only)) => format!("Expect: {only}"),
        (None, None) => match &expected.unknown {
            Some(why) => format!("No range: {why}"),
            None => "No range".into(),
        },
    }
}

/// A test and its place, short.
pub(super) fn target_text(target: &Target) -> String {
    let mut text = String::new();
    if let (Some(board), Some(circuit)) = (&target.board, target.circuit) {
        text = format!("{board}/{circuit} ");
    } else if let Some(board) = &target.board {
        text = format!("{board} ");
    }
    text.push_str(&target.test.title());
    if let Some(name) = &target.name {
        text.push_str(&format!(" {name}"));
    }
    if let Some(point) = target.point {
        text.push_str(&format!(" pt {point}"));
    }
    text
}

/// A temporary work and its place.
pub(super) fn work_text(work: &Work) -> String {
    let mut text = work.kind.words().to_owned();
    if let Some(name) = &work.name {
        text.push_str(&format!(", {name}"));
    }
    match (&work.board, work.circuit) {
        (Some(board), Some(circuit)) => text.push_str(&format!(", {board}/{circuit}")),
        (Some(board), None) => text.push_str(&format!(", {board}")),
        _ => {}
    }
    text
}

/// What is asked for a work to go in: a heading and a question.
pub(super) fn in_words(kind: WorkKind) -> (&'static str, &'static str) {
    match kind {
        WorkKind::LineEarthLink
        | WorkKind::CrossLineNeutral
        | WorkKind::CrossLineEarth
        | WorkKind::LivesJoined => ("Fit before the test", "Is it in?"),
        WorkKind::RingLegsOut
        | WorkKind::EarthOff
        | WorkKind::LoadsOut
        | WorkKind::ElectrodeOff => ("Disconnect before the test", "Is it off?"),
        WorkKind::LongLeadNull => ("Null with the long lead in", "Is it nulled?"),
    }
}

/// What is asked for a work to be undone: a heading and a question.
pub(super) fn out_words(kind: WorkKind) -> (&'static str, &'static str) {
    match kind {
        WorkKind::LineEarthLink
        | WorkKind::CrossLineNeutral
        | WorkKind::CrossLineEarth
        | WorkKind::LivesJoined => ("TAKE OUT", "Is it out?"),
        WorkKind::RingLegsOut
        | WorkKind::EarthOff
        | WorkKind::LoadsOut
        | WorkKind::ElectrodeOff => ("PUT BACK", "Is it back, as it was, tight?"),
        WorkKind::LongLeadNull => ("CLEAR THE NULL", "Nulled again, short leads?"),
    }
}

/// A place as called.
pub(super) fn place_text(place: &Place) -> String {
    let mut parts = Vec::new();
    if let Some(name) = &place.name {
        parts.push(name.clone());
    }
    if let Some(board) = &place.board {
        parts.push(format!("board {board}"));
    }
    if let Some(circuit) = place.circuit {
        parts.push(format!("circuit {circuit}"));
    }
    if let Some(point) = place.point {
        parts.push(format!("point {point}"));
    }
    parts.join(", ")
}

/// A command as a word or two.
pub(super) fn control_text(control: &Control) -> String {
    match control {
        Control::Test(test) => test.title(),
        Control::Stage(stage) => stage.title().into(),
        Control::Reason(n) => format!("reason {n}"),
        Control::Correction(Some(inner)) => {
            format!("correction {}", super::entry::meaning_text(inner))
        }
        Control::Correction(None) => "correction".into(),
        Control::Digits(digits) => digits.clone(),
        plain => plain.word().replace('-', " "),
    }
}
