//! The words reports use for values, ranges and how one lies to the other.
//!
//! Promises: neutral words; a value within its range is just that.

use crate::domain::{
    expect::Verdict,
    kept::Value,
    reading::Unit,
    record::{Entered, ExpectedShown},
};

/// How a value lies to its range.
#[must_use]
pub fn lies(verdict: Verdict) -> &'static str {
    match verdict {
        Verdict::InRange => "within the expected range",
        Verdict::Below => "lower than expected",
        Verdict::Above => "higher than expected",
        Verdict::Open => "open where a value was expected",
        Verdict::NotOpen => "a value where open was expected",
        Verdict::BeyondLimit => "beyond the limit",
        Verdict::Unknown => "no range to compare with",
    }
}

/// The same as a mark for narrow columns; nothing where the value is within its range. A legend
/// explains the marks wherever they are used.
#[must_use]
pub fn mark(verdict: Verdict) -> &'static str {
    match verdict {
        Verdict::InRange => "",
        Verdict::Below => "(L)",
        Verdict::Above => "(H)",
        Verdict::Open | Verdict::NotOpen => "(O)",
        Verdict::BeyondLimit => "(X)",
        Verdict::Unknown => "(?)",
    }
}

/// A value as kept: `0.50 Ω`, `>299 MΩ`, `open`, `confirmed`.
#[must_use]
pub fn value(value: &Value) -> String {
    match value {
        Value::Reading(reading) => reading.to_string(),
        Value::Ticked(true) => "confirmed".into(),
        Value::Ticked(false) => "NOT confirmed".into(),
    }
}

/// A value as it stands in an entry, readable or not.
#[must_use]
pub fn raw(value: &str, unit: Option<&str>) -> String {
    match (value, unit) {
        ("yes", None) => "confirmed".into(),
        ("no", None) => "NOT confirmed".into(),
        (value, None) => value.into(),
        ("open", _) => "open".into(),
        (value, Some(word)) => format!("{value} {}", symbol(word)),
    }
}

/// The symbol of a unit word, or the word itself.
#[must_use]
pub fn symbol(word: &str) -> &str {
    Unit::ALL
        .into_iter()
        .find(|unit| unit.word() == word)
        .map_or(word, |unit| unit.symbol())
}

/// The range that was shown: `0.51 to 0.63 Ω`, `at least 1 MΩ`, `at most 1.09 Ω`.
#[must_use]
pub fn range(shown: &ExpectedShown) -> String {
    let unit = symbol(&shown.unit);
    let band = match (&shown.low, &shown.high) {
        (Some(low), Some(high)) => Some(format!("{low} to {high} {unit}")),
        (Some(low), None) => Some(format!("from {low} {unit}")),
        (None, Some(high)) => Some(format!("up to {high} {unit}")),
        (None, None) => None,
    };
    let limit = shown.limit.as_ref().map(|limit| {
        match (limit.strip_prefix(">="), limit.strip_prefix("<=")) {
            (Some(least), _) => format!("at least {least} {unit}"),
            (_, Some(most)) => format!("at most {most} {unit}"),
            _ => format!("{limit} {unit}"),
        }
    });
    match (band, limit) {
        (Some(band), Some(limit)) => format!("{band}, {limit}"),
        (Some(one), None) | (None, Some(one)) => one,
        (None, None) => "none given".into(),
    }
}

/// Voice or keypad.
#[must_use]
pub fn entered(how: Entered) -> &'static str {
    match how {
        Entered::Voice => "voice",
        Entered::Keypad => "keypad",
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(low: Option<&str>, high: Option<&str>, limit: Option<&str>, text: &str) {
        let shown = ExpectedShown {
            low: low.map(Into::into),
            high: high.map(Into::into),
            limit: limit.map(Into::into),
            unit: "ohm".into(),
            source: String::new(),
        };
        assert_eq!(range(&shown), text);
    }

    #[test]
    fn ranges_are_said_as_a_person_would() {
        check(Some("0.51"), Some("0.63"), None, "0.51 to 0.63 Ω");
        check(None, None, Some(">=1"), "at least 1 Ω");
        check(
            Some("0.51"),
            Some("0.63"),
            Some("<=1.09"),
            "0.51 to 0.63 Ω, at most 1.09 Ω",
        );
        check(None, Some("0.05"), None, "up to 0.05 Ω");
        check(None, None, None, "none given");
    }

    #[test]
    fn no_word_calls_a_circuit_safe() {
        for verdict in [
            Verdict::InRange,
            Verdict::Below,
            Verdict::Above,
            Verdict::Open,
            Verdict::NotOpen,
            Verdict::BeyondLimit,
            Verdict::Unknown,
        ] {
            let words = lies(verdict).to_lowercase();
            for claim in ["safe", "pass", "good", "ok", "fail"] {
                assert!(!words.split(' ').any(|w| w == claim), "{words}");
            }
        }
    }
}
