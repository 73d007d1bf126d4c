//! What is said aloud at each prompt.
//!
//! Promises: only words of [`WORDS`], so that every text can be put together from recorded words
//! (a text with a word that was not recorded would not be said at all); the value first, the
//! question last: a tester on a step-ladder cannot look at the screen. Reminders and findings are
//! long and are read, not heard; what is said is that they stand there. It leaves out sound.

use crate::{
    domain::{
        place::{Line, Place},
        record::{Work, WorkKind},
        test::{Between, Stage, Target, TestKind},
    },
    speech::say,
};

use super::{
    prompt::{Candidate, DeadStep, Entry, Prompt},
    state::State,
};

/// Every word that may be said, besides the alphabet words of board letters and the units.
pub const WORDS: &[&str] = &[
    "a",
    "affirm",
    "again",
    "all",
    "as",
    "at",
    "back",
    "beyond",
    "board",
    "bonding",
    "by",
    "c",
    "charge",
    "check",
    "checks",
    "circuit",
    "clear",
    "close",
    "conductor",
    "connected",
    "continuity",
    "cross",
    "current",
    "dead",
    "digit",
    "digits",
    "disconnect",
    "done",
    "earth",
    "eight",
    "electrode",
    "end",
    "energising",
    "expected",
    "fault",
    "find",
    "first",
    "fit",
    "five",
    "found",
    "four",
    "free",
    "functional",
    "gone",
    "greater",
    "half",
    "higher",
    "hold",
    "in",
    "indicator",
    "instrument",
    "insulation",
    "is",
    "isolation",
    "joined",
    "keep",
    "kept",
    "lead",
    "leads",
    "left",
    "less",
    "limit",
    "line",
    "link",
    "list",
    "live",
    "lives",
    "long",
    "lower",
    "main",
    "measure",
    "negative",
    "neutral",
    "next",
    "nine",
    "no",
    "not",
    "nothing",
    "null",
    "number",
    "of",
    "off",
    "one",
    "open",
    "or",
    "order",
    "other",
    "out",
    "over",
    "p",
    "phase",
    "pick",
    "plus",
    "point",
    "polarity",
    "proved",
    "put",
    "r",
    "range",
    "reading",
    "ready",
    "reminders",
    "resistance",
    "right",
    "ring",
    "rated",
    "s",
    "say",
    "second",
    "separation",
    "sequence",
    "session",
    "seven",
    "six",
    "socket",
    "standby",
    "than",
    "the",
    "third",
    "three",
    "time",
    "times",
    "to",
    "tests",
    "trip",
    "two",
    "type",
    "understood",
    "value",
    "voltage",
    "was",
    "way",
    "which",
    "with",
    "z",
    "zero",
];

/// What is said when the prompt on top comes up; empty: nothing.
pub(super) fn prompt(state: &State) -> String {
    match state.top() {
        Prompt::Gate(gate) if gate.page > 0 => String::new(),
        Prompt::Gate(gate) => format!("{}. Reminders. Done?", stage(gate.stage)),
        Prompt::Dead(dead) => match dead.step {
            DeadStep::Method => "Indicator proved? First or second?".into(),
            DeadStep::Number => "Number of the indicator?".into(),
            DeadStep::Before => "Indicator proved?".into(),
            DeadStep::Dead => "No voltage? All dead?".into(),
            DeadStep::After => "Indicator proved again?".into(),
        },
        Prompt::Fit(work) => format!("{}. Done?", going_in(work.kind)),
        Prompt::TakeOut(work) => format!("{}. Done?", coming_out(work)),
        Prompt::Hold(_) => "Hold. Is the charge gone?".into(),
        Prompt::Ask(ask) => format!("{}. Ready.", target(&ask.target)),
        Prompt::Confirm(candidate) => read_back(candidate),
        Prompt::Question(candidate) => {
            let verdict = say::verdict(candidate.assessment.verdict);
            format!("{verdict}. Keep as found, or measure again?")
        }
        Prompt::List(_) => "Which one? Pick first, second, third.".into(),
        Prompt::Standby => "Standby.".into(),
        Prompt::Trouble(_) => "Not kept. Again?".into(),
        Prompt::StopAsk => "End the session?".into(),
        Prompt::Finish => "Nothing left.".into(),
        Prompt::Page(_) | Prompt::Menu | Prompt::Call(_) => String::new(),
    }
}

/// The read-back: value digit by digit, where, how it lies, the question.
pub(super) fn read_back(candidate: &Candidate) -> String {
    let value = match &candidate.entry {
        Entry::Reading(reading) => say::reading(reading),
        Entry::Tick(true) => "in order".into(),
        Entry::Tick(false) => "not in order".into(),
    };
    let verdict = candidate.assessment.verdict;
    let off = match (&candidate.entry, verdict.questioned()) {
        (Entry::Reading(_), true) => format!(" {}.", say::verdict(verdict)),
        _ => String::new(),
    };
    let place = place(&candidate.target);
    let place = if place.is_empty() {
        place
    } else {
        format!(" {place}.")
    };
    format!("{value}.{place}{off} Affirm?")
}

/// Two hearings in a row were not right.
pub(super) const ANOTHER_WAY: &str = "Not understood. Type, or say digit by digit.";

/// One hearing was not understood.
pub(super) const AGAIN: &str = "Not understood. Say again.";

/// Digits are taken one at a time.
pub(super) const BY_DIGIT: &str = "Say the digits one by one, point, done.";

/// Half-typed digits, one word each.
pub(super) fn digits(draft: &str) -> String {
    draft.parse().map_or_else(
        |_| String::new(),
        |reading: crate::domain::reading::Reading| say::reading(&reading),
    )
}

fn place(target: &Target) -> String {
    say::place(&Place {
        board: None,
        circuit: target.circuit,
        point: target.point,
        name: None,
    })
}

fn target(target: &Target) -> String {
    let place = place(target);
    let test = test(target.test);
    if place.is_empty() {
        test
    } else {
        format!("{test}. {place}")
    }
}

fn stage(stage: Stage) -> &'static str {
    match stage {
        Stage::Isolation => "isolation",
        Stage::Instrument => "instrument",
        Stage::Nulling => "null the leads",
        Stage::Bonding => "main earth, bonding",
        Stage::Continuity => "continuity",
        Stage::Ring => "ring continuity",
        Stage::Insulation => "insulation",
        Stage::Separation => "separation",
        Stage::Polarity => "polarity",
        Stage::Electrode => "earth electrode",
        Stage::CloseUp => "close",
        Stage::Energise => "energising",
        Stage::Live => "live tests",
    }
}

fn test(test: TestKind) -> String {
    match test {
        TestKind::Leads => "lead resistance".into(),
        TestKind::MainEarth => "main earth conductor".into(),
        TestKind::Bonding => "bonding".into(),
        TestKind::R1R2 => "r one plus r two".into(),
        TestKind::R2 => "r two, long lead".into(),
        TestKind::RingR1 => "ring line, end to end".into(),
        TestKind::RingRn => "ring neutral, end to end".into(),
        TestKind::RingR2 => "ring c p c, end to end".into(),
        TestKind::RingLineNeutral => "ring line to neutral, cross connected".into(),
        TestKind::RingLineEarth => "ring line to earth, cross connected".into(),
        TestKind::Insulation(between) => format!("insulation {}", pair(between)),
        TestKind::Separation => "separation".into(),
        TestKind::Polarity => "polarity".into(),
        TestKind::Electrode => "earth electrode".into(),
        TestKind::Ze => "z e".into(),
        TestKind::Zs => "z s".into(),
        TestKind::FaultCurrent => "fault current".into(),
        TestKind::RcdTime => "trip time at rated current".into(),
        TestKind::RcdTimeFive => "trip time at five times".into(),
        TestKind::RcdHalf => "no trip at half current".into(),
        TestKind::PhaseSequence => "phase sequence".into(),
        TestKind::Functional => "functional checks".into(),
    }
}

fn pair(between: Between) -> String {
    let line = |line: Line| match line {
        Line::L1 => "line one",
        Line::L2 => "line two",
        Line::L3 => "line three",
    };
    let two = |a, b| format!("{} to {}", line(a), line(b));
    match between {
        Between::LineNeutral => "line to neutral".into(),
        Between::LineEarth => "line to earth".into(),
        Between::NeutralEarth => "neutral to earth".into(),
        Between::LivesEarth => "lives to earth".into(),
        Between::L1L2 => two(Line::L1, Line::L2),
        Between::L2L3 => two(Line::L2, Line::L3),
        Between::L1L3 => two(Line::L1, Line::L3),
        Between::L1Neutral => format!("{} to neutral", line(Line::L1)),
        Between::L2Neutral => format!("{} to neutral", line(Line::L2)),
        Between::L3Neutral => format!("{} to neutral", line(Line::L3)),
        Between::L1Earth => format!("{} to earth", line(Line::L1)),
        Between::L2Earth => format!("{} to earth", line(Line::L2)),
        Between::L3Earth => format!("{} to earth", line(Line::L3)),
        Between::OtherCircuits => "to other".into(),
    }
}

fn going_in(kind: WorkKind) -> &'static str {
    match kind {
        WorkKind::LineEarthLink => "fit the link, line to earth",
        WorkKind::CrossLineNeutral => "fit the cross link, line to neutral",
        WorkKind::CrossLineEarth => "fit the cross link, line to earth",
        WorkKind::LivesJoined => "fit the link, lives joined",
        WorkKind::RingLegsOut => "disconnect the ring",
        WorkKind::EarthOff => "disconnect the earth conductor",
        WorkKind::LoadsOut => "disconnect all",
        WorkKind::ElectrodeOff => "disconnect the electrode",
        WorkKind::LongLeadNull => "null the long lead",
    }
}

fn coming_out(work: &Work) -> &'static str {
    match work.kind {
        WorkKind::LineEarthLink
        | WorkKind::CrossLineNeutral
        | WorkKind::CrossLineEarth
        | WorkKind::LivesJoined => "link out",
        WorkKind::RingLegsOut => "put the ring back",
        WorkKind::EarthOff => "put the earth conductor back",
        WorkKind::LoadsOut => "put all back",
        WorkKind::ElectrodeOff => "put the electrode back",
        WorkKind::LongLeadNull => "clear the null",
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn known(text: &str) {
        for word in text
            .split(|c: char| !c.is_alphanumeric())
            .filter(|w| !w.is_empty())
        {
            let word = word.to_lowercase();
            assert!(
                word == "e" || WORDS.contains(&word.as_str()),
                "`{word}` of `{text}`"
            );
        }
    }

    #[test]
    fn every_fixed_phrase_is_made_of_known_words() {
        for kind in TestKind::all() {
            known(&test(kind));
        }
        for at in Stage::ALL {
            known(stage(at));
        }
        for kind in [
            WorkKind::LineEarthLink,
            WorkKind::CrossLineNeutral,
            WorkKind::CrossLineEarth,
            WorkKind::RingLegsOut,
            WorkKind::EarthOff,
            WorkKind::LoadsOut,
            WorkKind::LivesJoined,
            WorkKind::LongLeadNull,
            WorkKind::ElectrodeOff,
        ] {
            known(going_in(kind));
            known(coming_out(&Work {
                kind,
                board: None,
                circuit: None,
                name: None,
            }));
        }
        for text in [ANOTHER_WAY, AGAIN, BY_DIGIT] {
            known(text);
        }
    }

    #[test]
    fn words_are_in_order_and_once() {
        let mut sorted = WORDS.to_vec();
        sorted.sort_unstable();
        sorted.dedup();
        let mut given = WORDS.to_vec();
        given.sort_unstable();
        assert_eq!(given, sorted);
    }
}
