//! Meanings to words, for reading back: digits one by one, the point said, units in full.
//!
//! Promises: understood in [`Context::All`](super::Context::All), the words mean what they were
//! made from (a property test); radiotelephony style: figures digit by digit, board letters in the
//! ICAO alphabet. It leaves out voices and sound.

use crate::domain::{
    expect::Verdict,
    place::{Line, Place},
    reading::{Bound, Reading, Unit},
};

use super::spelling::{LETTERS, digit_word};

/// A reading: `zero point five eight ohms`, `greater than nine nine nine megohms`, `open circuit`.
#[must_use]
pub fn reading(reading: &Reading) -> String {
    let bound = match reading.bound() {
        Bound::Open => return "open circuit".into(),
        Bound::OverRange => return "over range".into(),
        Bound::Exact => "",
        Bound::Above => "greater than ",
        Bound::Below => "less than ",
    };
    let figure = reading.value().map_or(String::new(), |v| v.to_string());
    let mut words = format!("{bound}{}", characters(&figure));
    if let Some(unit) = reading.unit() {
        words.push(' ');
        words.push_str(unit_words(unit, figure == "1"));
    }
    words
}

/// A unit as said after a figure.
#[must_use]
pub fn unit_words(unit: Unit, single: bool) -> &'static str {
    match (unit, single) {
        (Unit::Ohm, true) => "ohm",
        (Unit::Ohm, false) => "ohms",
        (Unit::Milliohm, true) => "milliohm",
        (Unit::Milliohm, false) => "milliohms",
        (Unit::Kilohm, true) => "kilohm",
        (Unit::Kilohm, false) => "kilohms",
        (Unit::Megohm, true) => "megohm",
        (Unit::Megohm, false) => "megohms",
        (Unit::Gigohm, true) => "gigohm",
        (Unit::Gigohm, false) => "gigohms",
        (Unit::Volt, true) => "volt",
        (Unit::Volt, false) => "volts",
        (Unit::Millivolt, true) => "millivolt",
        (Unit::Millivolt, false) => "millivolts",
        (Unit::Amp, true) => "amp",
        (Unit::Amp, false) => "amps",
        (Unit::Milliamp, true) => "milliamp",
        (Unit::Milliamp, false) => "milliamps",
        (Unit::Kiloamp, true) => "kiloamp",
        (Unit::Kiloamp, false) => "kiloamps",
        (Unit::Millisecond, true) => "millisecond",
        (Unit::Millisecond, false) => "milliseconds",
        (Unit::Second, true) => "second",
        (Unit::Second, false) => "seconds",
        (Unit::Hertz, _) => "hertz",
        (Unit::Percent, _) => "percent",
        (Unit::Metre, true) => "metre",
        (Unit::Metre, false) => "metres",
        (Unit::Celsius, _) => "degrees celsius",
    }
}

/// A place: `board delta bravo one circuit one two point three`, `way four line two`. A point alone
/// is `at point three`, because "point three" is a figure too.
#[must_use]
pub fn place(place: &Place) -> String {
    if let Some(name) = &place.name {
        return name.clone();
    }
    let mut parts = Vec::new();
    if let Some(board) = &place.board {
        parts.push(format!("board {}", characters(board.as_str())));
    }
    if let Some(circuit) = place.circuit {
        let way = characters(&circuit.way().to_string());
        parts.push(match circuit.line() {
            None => format!("circuit {way}"),
            Some(Line::L1) => format!("way {way} line one"),
            Some(Line::L2) => format!("way {way} line two"),
            Some(Line::L3) => format!("way {way} line three"),
        });
    }
    if let Some(point) = place.point {
        let number = characters(&point.to_string());
        parts.push(match (parts.is_empty(), place.circuit) {
            _ if place.spur => format!("spur off {number}"),
            (true, _) => format!("at point {number}"),
            (false, None) => format!("socket {number}"),
            (false, Some(_)) => format!("point {number}"),
        });
    }
    parts.join(" ")
}

/// A verdict, as spoken after the reading. It says what was found against the range, and no more.
#[must_use]
pub fn verdict(verdict: Verdict) -> &'static str {
    match verdict {
        Verdict::InRange => "in range",
        Verdict::Below => "lower than expected",
        Verdict::Above => "higher than expected",
        Verdict::Open => "open, a value was expected",
        Verdict::NotOpen => "a value, open was expected",
        Verdict::BeyondLimit => "beyond the limit",
        Verdict::Unknown => "no range to compare with",
    }
}

/// Digits and letters one by one: `0.58`, `DB1`.
fn characters(text: &str) -> String {
    let words: Vec<&str> = text
        .chars()
        .filter_map(|c| match c {
            '.' => Some("point"),
            'A'..='Z' => Some(LETTERS[c as usize - 'A' as usize]),
            _ => digit_word(c),
        })
        .collect();
    words.join(" ")
}
