//! What is said aloud at each prompt, and the words of the screen: places, tests, works, ranges,
//! verdicts, the keys and the menu.
//!
//! Short and plain, the question last: a tester on a step-ladder hears the value first. The sentences
//! said aloud have recorded phrases (`src/voice/clips/phrases.txt`); nothing rests on colour. It
//! leaves out how a text becomes sound and how a screen is laid out (`screen`).

use crate::{
    domain::{
        expect::{Expected, Verdict},
        place::Place,
        reading::{Bound, Reading},
        record::{Work, WorkKind},
        test::Target,
    },
    speech::meaning::{Context, Control},
};

use super::{
    prompt::{Candidate, DeadStep, Entry, Prompt},
    state::State,
};

/// What the tester acknowledges after an insulation test.
pub(super) const DISCHARGED: &str =
    "Probes held on until discharged; no voltage left (below 50 V) before anybody touches it.";

/// Said when two hearings in a row were not right.
pub(super) const ANOTHER_WAY: &str = "Not understood. Type it, or say: digit by digit.";

/// Said when one hearing was not understood.
pub(super) const AGAIN: &str = "Not understood.";

/// Said when digits are taken one at a time.
pub(super) const BY_DIGIT: &str = "One digit at a time, then done.";

/// Title of the help.
pub(super) const HELP: &str = "Keys and words";

/// The keys, all of them on one screen of 40 x 15.
pub(super) const KEYS: [&str; 13] = [
    "ENTER yes, done   - no, back, rub out",
    "/ say again   + next   * menu, then:",
    "  1 circuit 7, 4.2, 7+3 (point), /board",
    "  2 call a test     3 what is open",
    "  4 links, works in 5 how and why",
    "  6 correct last    7 leave test out",
    "  8 standby  9 end the session  0 help",
    "  + next  - step back  . note",
    "  ENTER or space: speak; again: end",
    "Figure: digits and point, ENTER; first",
    "  + over >299       - under <0.01",
    "  / open circuit    // over-range",
    "A digit at a read-back starts anew.",
];

/// The words, on the next.
pub(super) const WORDS: [&str; 13] = [
    "Say: a reading, affirm, negative, done,",
    "  say again, correction (and the value),",
    "  disregard, digit by digit, standby,",
    "  resume, next, back, stop, help",
    "Places: circuit one two, way four line",
    "  two, board alpha, socket three,",
    "  spur off three, your own names",
    "Also: what is open, list links, why,",
    "  link in, link out, skip, no access,",
    "  same as last point, take a note",
    "Out of range: keep as found, measure",
    "  again; then the reason in its words",
    "Letters: y n o l w s b x c t r d e p q m",
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

/// What is said when the prompt on top comes up.
pub(super) fn prompt(state: &State) -> String {
    match state.top() {
        Prompt::Gate(gate) => {
            let text = gate.pages.get(gate.page).map(|p| p.join(" "));
            format!("{}. {}", gate.stage.title(), text.unwrap_or_default())
        }
        Prompt::Dead(dead) => dead_question(dead.step, dead.pairs()),
        Prompt::Fit(work) => {
            let (head, question) = in_words(work.kind);
            format!("{head}: {}. {question}", work_text(work))
        }
        Prompt::TakeOut(work) => {
            let (head, question) = out_words(work.kind);
            format!("{head}: {}. {question}", work_text(work))
        }
        Prompt::Hold(_) => "Hold the probes on until discharged. Discharged?".into(),
        Prompt::Ask(ask) => {
            let range = range_text(&ask.expected);
            format!("{}. {range}", target_text(&ask.target))
        }
        Prompt::Confirm(c) => read_back(c),
        Prompt::Question(c) => {
            let finding = c.assessment.findings.first().map(|f| f.text.clone());
            format!(
                "{}. {} Keep as found, or measure again?",
                verdict_text(c.assessment.verdict),
                finding.unwrap_or_default()
            )
        }
        Prompt::List(list) => {
            let lines: Vec<String> = list
                .shown()
                .map(|(n, (t, _))| format!("{n}: {t}."))
                .collect();
            format!("{} {}", list.title, lines.join(" "))
        }
        Prompt::Standby => "Standby.".into(),
        Prompt::Trouble(_) => "Not kept. Try again?".into(),
        Prompt::StopAsk => "End the session?".into(),
        Prompt::Finish => "Nothing is left to do.".into(),
        Prompt::Page(_) | Prompt::Menu | Prompt::Call(_) => String::new(),
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

/// The read-back: value digit by digit, unit, place, verdict, question.
pub(super) fn read_back(candidate: &Candidate) -> String {
    let value = match &candidate.entry {
        Entry::Reading(reading) => spoken(reading),
        tick @ Entry::Tick(_) => tick.to_string(),
    };
    let off = match candidate.assessment.verdict {
        Verdict::InRange | Verdict::Unknown => String::new(),
        verdict => format!(" {}.", verdict_text(verdict)),
    };
    format!("{value}. {}.{off} Affirm?", target_text(&candidate.target))
}

/// A reading digit by digit.
pub(super) fn spoken(reading: &Reading) -> String {
    let unit = reading.unit().map_or("", |u| u.word());
    let figure = reading.value().map(|v| draft(&v.to_string()));
    let figure = figure.unwrap_or_default();
    let text = match reading.bound() {
        Bound::Open => return "open circuit".into(),
        Bound::OverRange => return "over range".into(),
        Bound::Above => format!("greater than {figure} {unit}"),
        Bound::Below => format!("less than {figure} {unit}"),
        Bound::Exact => format!("{figure} {unit}"),
    };
    text.trim_end().into()
}

/// Half-typed digits, one word each.
pub(super) fn draft(text: &str) -> String {
    let word = |c: char| match c {
        '0' => "zero",
        '1' => "one",
        '2' => "two",
        '3' => "three",
        '4' => "four",
        '5' => "five",
        '6' => "six",
        '7' => "seven",
        '8' => "eight",
        '9' => "nine",
        '.' => "decimal",
        '>' => "greater than",
        '<' => "less than",
        _ => "",
    };
    let words: Vec<&str> = text.chars().map(word).filter(|w| !w.is_empty()).collect();
    words.join(" ")
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
        Control::SameAs(point) => format!("same as point {point}"),
        Control::LeaveOut(n) => super::lists::SKIP
            .get(usize::from(*n).saturating_sub(1))
            .map_or("leave out".into(), |r| (*r).into()),
        Control::KeepFor(n) => super::lists::KEEP
            .get(usize::from(*n).saturating_sub(1))
            .map_or("keep as found".into(), |(r, _)| (*r).into()),
        plain => plain.word().replace('-', " "),
    }
}
