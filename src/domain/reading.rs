//! A reading exactly as it was said or keyed: a decimal with its zeros, a bound, a unit.
//!
//! Promises: `0.50` and `0.5` are different readings in print (their value compares equal through
//! [`Reading::value`]); nothing here is a float. It leaves out whether the reading is good: see
//! `expect`.

use std::{fmt, str::FromStr};

use rust_decimal::Decimal;
use serde::{Deserialize, Serialize};

/// Units a tester's instrument shows. Only these can stand in a log.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
#[allow(missing_docs)] // the names are the units
pub enum Unit {
    Ohm,
    Milliohm,
    Kilohm,
    Megohm,
    Gigohm,
    Volt,
    Millivolt,
    Amp,
    Milliamp,
    Kiloamp,
    Millisecond,
    Second,
    Hertz,
    Percent,
    Metre,
    Celsius,
}

impl Unit {
    /// Every unit, in the order of the enum.
    pub const ALL: [Unit; 16] = [
        Unit::Ohm,
        Unit::Milliohm,
        Unit::Kilohm,
        Unit::Megohm,
        Unit::Gigohm,
        Unit::Volt,
        Unit::Millivolt,
        Unit::Amp,
        Unit::Milliamp,
        Unit::Kiloamp,
        Unit::Millisecond,
        Unit::Second,
        Unit::Hertz,
        Unit::Percent,
        Unit::Metre,
        Unit::Celsius,
    ];

    /// The word used in files and JSON: `ohm`, `milliohm`, `megohm`, `kiloamp`, ...
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Unit::Ohm => "ohm",
            Unit::Milliohm => "milliohm",
            Unit::Kilohm => "kilohm",
            Unit::Megohm => "megohm",
            Unit::Gigohm => "gigohm",
            Unit::Volt => "volt",
            Unit::Millivolt => "millivolt",
            Unit::Amp => "amp",
            Unit::Milliamp => "milliamp",
            Unit::Kiloamp => "kiloamp",
            Unit::Millisecond => "millisecond",
            Unit::Second => "second",
            Unit::Hertz => "hertz",
            Unit::Percent => "percent",
            Unit::Metre => "metre",
            Unit::Celsius => "celsius",
        }
    }

    /// The symbol on a screen or a schedule (SI, IEC 80000): `Ω`, `MΩ`, `kA`, ...
    #[must_use]
    pub fn symbol(self) -> &'static str {
        match self {
            Unit::Ohm => "Ω",
            Unit::Milliohm => "mΩ",
            Unit::Kilohm => "kΩ",
            Unit::Megohm => "MΩ",
            Unit::Gigohm => "GΩ",
            Unit::Volt => "V",
            Unit::Millivolt => "mV",
            Unit::Amp => "A",
            Unit::Milliamp => "mA",
            Unit::Kiloamp => "kA",
            Unit::Millisecond => "ms",
            Unit::Second => "s",
            Unit::Hertz => "Hz",
            Unit::Percent => "%",
            Unit::Metre => "m",
            Unit::Celsius => "°C",
        }
    }

    /// The base unit of the same quantity and the power of ten that leads to it:
    /// `Megohm` gives `(Ohm, 6)`.
    #[must_use]
    pub fn base(self) -> (Unit, i32) {
        match self {
            Unit::Milliohm => (Unit::Ohm, -3),
            Unit::Kilohm => (Unit::Ohm, 3),
            Unit::Megohm => (Unit::Ohm, 6),
            Unit::Gigohm => (Unit::Ohm, 9),
            Unit::Millivolt => (Unit::Volt, -3),
            Unit::Milliamp => (Unit::Amp, -3),
            Unit::Kiloamp => (Unit::Amp, 3),
            Unit::Millisecond => (Unit::Second, -3),
            other => (other, 0),
        }
    }
}

impl fmt::Display for Unit {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.symbol())
    }
}

/// What the display said about the value.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Bound {
    /// The value itself.
    Exact,
    /// Above the value: `>299` ("greater than two nine nine").
    Above,
    /// Below the value: `<0.01`.
    Below,
    /// No continuity: the display shows an open circuit. It has no value.
    Open,
    /// Beyond the instrument's range, no figure said. It has no value.
    OverRange,
}

impl Bound {
    /// The word used in files and JSON: `exact`, `above`, `below`, `open`, `over-range`.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Bound::Exact => "exact",
            Bound::Above => "above",
            Bound::Below => "below",
            Bound::Open => "open",
            Bound::OverRange => "over-range",
        }
    }
}

/// Why a reading could not be made.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[allow(missing_docs)] // the fields are named in the messages
pub enum ReadingError {
    #[error(
        "`{text}` is not a reading; say a number such as 0.58, >299, <0.01, open or over-range"
    )]
    NotAReading { text: String },
    #[error("{value} is outside what a reading can be (0 to 999999999, at most 6 decimals)")]
    OutOfBounds { value: Decimal },
}

/// A reading as entered: value (for exact, above, below), bound, and the unit if it was said.
#[derive(Debug, Clone, PartialEq, Eq, Hash)]
pub struct Reading {
    value: Option<Decimal>,
    bound: Bound,
    unit: Option<Unit>,
}

impl Reading {
    /// A reading with a figure. `bound` must be exact, above or below.
    ///
    /// # Errors
    /// [`ReadingError::OutOfBounds`] when negative (a null left over from other leads shows as
    /// such and must not be logged as a resistance), above 999 999 999 or finer than 6 decimals;
    /// [`ReadingError::NotAReading`] when `bound` takes no figure.
    pub fn new(value: Decimal, bound: Bound, unit: Option<Unit>) -> Result<Self, ReadingError> {
        if matches!(bound, Bound::Open | Bound::OverRange) {
            return Err(ReadingError::NotAReading {
                text: format!("{} {value}", bound.word()),
            });
        }
        if value.is_sign_negative() && !value.is_zero()
            || value > Decimal::from(999_999_999)
            || value.scale() > 6
        {
            return Err(ReadingError::OutOfBounds { value });
        }
        Ok(Self {
            value: Some(value),
            bound,
            unit,
        })
    }

    /// No continuity: the display shows an open circuit.
    #[must_use]
    pub fn open() -> Self {
        Self {
            value: None,
            bound: Bound::Open,
            unit: None,
        }
    }

    /// Beyond the instrument's range, no figure said.
    #[must_use]
    pub fn over_range(unit: Option<Unit>) -> Self {
        Self {
            value: None,
            bound: Bound::OverRange,
            unit,
        }
    }

    /// The figure, with the zeros it was said with; `None` for open and over-range.
    #[must_use]
    pub fn value(&self) -> Option<Decimal> {
        self.value
    }

    /// What the display said about the figure.
    #[must_use]
    pub fn bound(&self) -> Bound {
        self.bound
    }

    /// The unit, if one was said.
    #[must_use]
    pub fn unit(&self) -> Option<Unit> {
        self.unit
    }

    /// The same reading in the unit the test in hand reads in, when none was said.
    #[must_use]
    pub fn or_unit(mut self, unit: Unit) -> Self {
        if self.unit.is_none() && self.bound != Bound::Open {
            self.unit = Some(unit);
        }
        self
    }

    /// The figure in the base unit of its quantity (ohm, volt, amp, second), as an exact decimal;
    /// `default` is used where no unit was said.
    #[must_use]
    pub fn in_base(&self, default: Unit) -> Option<Decimal> {
        let (_, power) = self.unit.unwrap_or(default).base();
        let value = self.value?;
        if power >= 0 {
            value.checked_mul(Decimal::from(10_i64.pow(power.unsigned_abs())))
        } else {
            Decimal::from_i128_with_scale(value.mantissa(), value.scale())
                .checked_div(Decimal::from(10_i64.pow(power.unsigned_abs())))
        }
    }

    /// The figure with its sign as text: `0.50`, `>299`, `<0.01`, `open`, `over-range`.
    /// [`FromStr`] reads it back.
    #[must_use]
    pub fn figure(&self) -> String {
        match (self.bound, self.value) {
            (Bound::Open, _) => "open".into(),
            (Bound::OverRange, _) | (_, None) => "over-range".into(),
            (Bound::Above, Some(v)) => format!(">{v}"),
            (Bound::Below, Some(v)) => format!("<{v}"),
            (Bound::Exact, Some(v)) => v.to_string(),
        }
    }
}

impl fmt::Display for Reading {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.figure())?;
        match self.unit {
            Some(unit) => write!(f, " {unit}"),
            None => Ok(()),
        }
    }
}

impl FromStr for Reading {
    type Err = ReadingError;

    /// Reads the figure (see [`Reading::figure`]), optionally followed by a unit word or symbol.
    fn from_str(text: &str) -> Result<Self, Self::Err> {
        let wrong = || ReadingError::NotAReading { text: text.into() };
        let mut parts = text.split_whitespace();
        let figure = parts.next().ok_or_else(wrong)?;
        let unit = match parts.next() {
            None => None,
            Some(word) => Some(
                Unit::ALL
                    .into_iter()
                    .find(|u| u.word() == word || u.symbol() == word)
                    .ok_or_else(wrong)?,
            ),
        };
        if parts.next().is_some() {
            return Err(wrong());
        }
        let (bound, digits) = match figure {
            "open" => return Ok(Self::open()),
            "over-range" => return Ok(Self::over_range(unit)),
            _ => match figure.split_at_checked(1) {
                Some((">", rest)) => (Bound::Above, rest),
                Some(("<", rest)) => (Bound::Below, rest),
                _ => (Bound::Exact, figure),
            },
        };
        // Only plain figures: no exponent, no sign, no grouping, a digit before the point.
        let plain = digits.chars().all(|c| c.is_ascii_digit() || c == '.')
            && digits.starts_with(|c: char| c.is_ascii_digit())
            && digits.ends_with(|c: char| c.is_ascii_digit());
        if !plain {
            return Err(wrong());
        }
        let value = Decimal::from_str_exact(digits).map_err(|_| wrong())?;
        Self::new(value, bound, unit)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn round(text: &str) {
        let reading: Reading = text.parse().expect(text);
        assert_eq!(reading.to_string(), text);
    }

    #[test]
    fn figures_come_back_as_they_were_entered() {
        for text in [
            "0.50 Ω",
            "0.5 Ω",
            ">299 MΩ",
            "<0.01 Ω",
            "open",
            "over-range",
            "480",
        ] {
            round(text);
        }
    }

    #[test]
    fn what_is_no_reading_is_refused() {
        for text in [
            "",
            "1e5",
            "-0.1",
            ".5",
            "5.",
            "0.1 0.2",
            "12 parsecs",
            "1,5",
            "NaN",
        ] {
            assert!(text.parse::<Reading>().is_err(), "{text}");
        }
    }

    #[test]
    fn prefixes_are_powers_of_ten() {
        let r: Reading = "58 mΩ".parse().expect("a reading");
        assert_eq!(r.in_base(Unit::Ohm), Some(Decimal::new(58, 3)));
        let r: Reading = "1.5 MΩ".parse().expect("a reading");
        assert_eq!(r.in_base(Unit::Ohm), Some(Decimal::from(1_500_000)));
    }
}
