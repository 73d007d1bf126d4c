//! Values on their way in: typed figures, spoken readings, and the candidate to be affirmed.
//!
//! Promises: a figure keeps every digit it was given; a unit of another quantity than the test's
//! is refused, never converted; nothing here reaches the log.

use crate::{
    domain::{
        expect::{Assessment, Expected, Verdict},
        kept::Value,
        reading::{Bound, Reading, Unit},
        record::{AlternativeKept, Entered, ExpectedShown, FindingKept, ReadingKept, Record},
        test::{Target, TestKind},
    },
    speech::meaning::{Heard, Meaning},
};

use super::{
    event::Key,
    prompt::{Ask, Candidate, Entry, Prompt},
    state::State,
    trade,
};

/// Longest figure that can be typed.
const LONGEST: usize = 11;

/// A value as text for the screen.
pub(super) fn value_text(value: &Value) -> String {
    match value {
        Value::Reading(reading) => reading.to_string(),
        Value::Ticked(ok) => Entry::Tick(*ok).to_string(),
    }
}

/// Whether an open circuit means "above the instrument's range" in this test.
pub(super) fn open_is_over(test: TestKind) -> bool {
    matches!(test, TestKind::Insulation(_) | TestKind::Separation)
}

/// What a key does to a half-typed figure.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) enum Typed {
    /// The draft changed.
    Changed,
    /// The key does not fit there; why.
    Refused(&'static str),
    /// The key is not for typing here.
    NotTyping,
    /// Enter on a figure: what it reads.
    Done(Reading),
}

/// Types one key into a draft. `+` and `-` in front make "greater than" and "less than", `/` makes
/// open and over-range, `-` later rubs out.
pub(super) fn type_key(draft: &mut String, key: Key, test: TestKind) -> Typed {
    let whole = draft.starts_with('o');
    match key {
        Key::Digit(d) if !whole => {
            if draft.len() >= LONGEST {
                return Typed::Refused("That is too long for a reading.");
            }
            draft.push(char::from(b'0' + d.min(9)));
            Typed::Changed
        }
        Key::Point if !whole && !draft.contains('.') => {
            if draft.is_empty() || draft == ">" || draft == "<" {
                draft.push('0');
            }
            draft.push('.');
            Typed::Changed
        }
        Key::Plus if draft.is_empty() => {
            draft.push('>');
            Typed::Changed
        }
        Key::Minus if draft.is_empty() => {
            draft.push('<');
            Typed::Changed
        }
        Key::Slash if draft.is_empty() => {
            draft.push_str(if open_is_over(test) {
                "over-range"
            } else {
                "open"
            });
            Typed::Changed
        }
        Key::Slash if draft == "open" => {
            "over-range".clone_into(draft);
            Typed::Changed
        }
        Key::Minus | Key::Erase if !draft.is_empty() => {
            if whole {
                draft.clear();
            } else {
                draft.pop();
            }
            Typed::Changed
        }
        Key::Enter if !draft.is_empty() => match draft.parse::<Reading>() {
            Ok(reading) => Typed::Done(reading),
            Err(_) => Typed::Refused("That is no reading yet. - rubs out."),
        },
        Key::Digit(_) | Key::Point | Key::Plus | Key::Slash => {
            Typed::Refused("That does not fit there. - rubs out.")
        }
        _ => Typed::NotTyping,
    }
}

/// The digits of an utterance said one by one ("zero", "point five"); `None` when other words are
/// among them.
pub(super) fn spelled(words: &str) -> Option<String> {
    let mut text = String::new();
    for word in words.split_whitespace() {
        text.push(match word {
            "zero" | "nought" | "oh" | "naught" => '0',
            "one" | "wun" => '1',
            "two" => '2',
            "three" | "tree" => '3',
            "four" | "fower" => '4',
            "five" | "fife" => '5',
            "six" => '6',
            "seven" => '7',
            "eight" => '8',
            "nine" | "niner" => '9',
            "point" | "decimal" => '.',
            _ => return None,
        });
    }
    (!text.is_empty()).then_some(text)
}

/// Why a value cannot be an answer to the test in hand.
pub(super) fn misfit(entry: &Entry, test: TestKind) -> Option<String> {
    match (entry, test.unit()) {
        (Entry::Tick(_), None) => None,
        (Entry::Tick(_), Some(unit)) => Some(format!("This test wants a figure in {unit}.")),
        (Entry::Reading(_), None) => Some("This test wants: in order, or not.".into()),
        (Entry::Reading(reading), Some(unit)) => {
            let said = reading.unit().unwrap_or(unit);
            (said.base().0 != unit.base().0)
                .then(|| format!("This test reads in {unit}, not in {said}."))
        }
    }
}

impl State {
    /// A candidate from a value; the unit of the test is added where none was said.
    pub(super) fn candidate(
        &self,
        ask: &Ask,
        entry: Entry,
        entered: Entered,
        heard: Option<&Heard>,
    ) -> Result<Candidate, String> {
        let test = ask.target.test;
        if let Some(why) = misfit(&entry, test) {
            return Err(why);
        }
        let unit = test.unit().unwrap_or(Unit::Ohm);
        let (entry, unit_assumed) = match entry {
            Entry::Reading(r) if r.bound() == Bound::Open && open_is_over(test) => {
                (Entry::Reading(Reading::over_range(Some(unit))), true)
            }
            Entry::Reading(r) => {
                let assumed = r.unit().is_none() && r.bound() != Bound::Open;
                (Entry::Reading(r.or_unit(unit)), assumed)
            }
            tick @ Entry::Tick(_) => (tick, false),
        };
        let assessment = self.assess(&ask.target, &ask.expected, &entry);
        let mut candidate = Candidate {
            target: ask.target.clone(),
            entry,
            unit_assumed,
            entered,
            heard: None,
            margin: None,
            alternatives: Vec::new(),
            clip: None,
            assessment,
            corrects: self.standing.kept.entry(&ask.target),
            confirmed: None,
        };
        if let Some(heard) = heard {
            candidate.heard = Some(heard.words().to_owned());
            candidate.clip.clone_from(&heard.clip);
            let mut rest = heard.hypotheses.iter().skip(1);
            candidate.margin = rest.clone().next().map(|h| format!("{:.2}", h.margin));
            candidate.alternatives = rest
                .by_ref()
                .take(3)
                .map(|h| AlternativeKept {
                    words: h.words.clone(),
                    meaning: meaning_text(&h.meaning),
                    margin: format!("{:.2}", h.margin),
                })
                .collect();
        }
        Ok(candidate)
    }

    fn assess(&self, target: &Target, expected: &Expected, entry: &Entry) -> Assessment {
        match entry {
            Entry::Reading(reading) => {
                trade::assess(self.job(), target, expected, reading, &self.standing.kept)
            }
            Entry::Tick(true) => Assessment {
                verdict: Verdict::InRange,
                findings: Vec::new(),
            },
            // A tick that is missing is beyond what the standard allows, whatever the range.
            Entry::Tick(false) => Assessment {
                verdict: Verdict::BeyondLimit,
                findings: Vec::new(),
            },
        }
    }

    /// The record of an affirmed candidate.
    pub(super) fn record(&self, candidate: &Candidate, as_found: Option<&str>) -> Record {
        let (value, unit, bound) = match &candidate.entry {
            Entry::Reading(reading) => (
                reading.figure(),
                reading.unit().map(|u| u.word().to_owned()),
                reading.bound().word().to_owned(),
            ),
            Entry::Tick(ok) => (
                if *ok { "yes" } else { "no" }.to_owned(),
                None,
                "ticked".to_owned(),
            ),
        };
        // The range as it stood when the reading was asked for.
        let range = match self.stack.first() {
            Some(Prompt::Ask(ask)) => shown(&ask.expected),
            _ => None,
        };
        Record::Reading(Box::new(ReadingKept {
            target: candidate.target.clone(),
            value,
            unit,
            bound,
            unit_assumed: candidate.unit_assumed,
            expected: range,
            verdict: candidate.assessment.verdict,
            findings: candidate
                .assessment
                .findings
                .iter()
                .map(|f| FindingKept {
                    code: f.code.into(),
                    text: f.text.clone(),
                })
                .collect(),
            entered: candidate.entered,
            heard: candidate.heard.clone(),
            margin: candidate.margin.clone(),
            alternatives: candidate.alternatives.clone(),
            confirmed: candidate.confirmed.unwrap_or(Entered::Keypad),
            by: self.setup.tester.clone(),
            kept_as_found: as_found.map(Into::into),
            corrects: candidate.corrects,
            clip: candidate.clip.clone(),
            clip_digest: None,
        }))
    }
}

/// The range as it stood on the screen.
pub(super) fn shown(expected: &Expected) -> Option<ExpectedShown> {
    if expected.low.is_none() && expected.high.is_none() && expected.limit.is_none() {
        return None;
    }
    let limit = expected.limit.as_ref();
    Some(ExpectedShown {
        low: expected.low.map(|v| v.to_string()),
        high: expected.high.map(|v| v.to_string()),
        limit: limit.map(|l| format!("{}{}", if l.minimum { ">=" } else { "<=" }, l.value)),
        unit: expected.unit.word().into(),
        source: expected
            .sources
            .first()
            .or(limit.map(|l| &l.source))
            .map(|s| s.text.clone())
            .unwrap_or_default(),
    })
}

/// A meaning as short text, for the log and for pick lists.
pub(super) fn meaning_text(meaning: &Meaning) -> String {
    match meaning {
        Meaning::Reading(reading) => reading.to_string(),
        Meaning::Place(place) => super::utter::place_text(place),
        Meaning::Reply(reply) => format!("{reply:?}").to_lowercase(),
        Meaning::Control(control) => super::utter::control_text(control),
        Meaning::Ambiguous(several) => several
            .iter()
            .map(meaning_text)
            .collect::<Vec<_>>()
            .join(" or "),
        Meaning::Nothing(why) => why.clone(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use Key::{Digit, Enter, Minus, Plus, Point, Slash};

    #[track_caller]
    fn check(keys: &[Key], expected: &str) {
        let mut draft = String::new();
        for key in keys {
            type_key(&mut draft, *key, TestKind::R1R2);
        }
        assert_eq!(draft, expected);
    }

    #[test]
    fn figures_are_typed_digit_by_digit() {
        check(&[Digit(0), Point, Digit(5), Digit(0)], "0.50");
        check(&[Point, Digit(5)], "0.5");
        check(&[Plus, Digit(2), Digit(9), Digit(9)], ">299");
        check(&[Minus, Point, Digit(0), Digit(1)], "<0.01");
        check(&[Digit(4), Minus, Digit(5)], "5");
        check(&[Slash], "open");
        check(&[Slash, Slash], "over-range");
        check(&[Slash, Minus], "");
        check(&[Digit(1), Point, Point, Digit(2)], "1.2");
        check(&[Digit(1); 20], "11111111111");
    }

    #[test]
    fn enter_gives_the_reading_with_its_zeros() {
        let mut draft = String::from("0.50");
        assert_eq!(
            type_key(&mut draft, Enter, TestKind::R1R2),
            Typed::Done("0.50".parse().expect("a reading"))
        );
        let mut draft = String::from("0.");
        assert!(matches!(
            type_key(&mut draft, Enter, TestKind::R1R2),
            Typed::Refused(_)
        ));
    }

    #[test]
    fn on_an_insulation_test_open_is_over_range() {
        let mut draft = String::new();
        type_key(
            &mut draft,
            Slash,
            TestKind::Insulation(crate::domain::test::Between::LineNeutral),
        );
        assert_eq!(draft, "over-range");
    }

    #[test]
    fn digits_said_one_by_one_are_spelled() {
        assert_eq!(spelled("nought point five niner").as_deref(), Some("0.59"));
        assert_eq!(spelled("zero").as_deref(), Some("0"));
        assert_eq!(spelled("fifteen"), None);
        assert_eq!(spelled(""), None);
    }
}
