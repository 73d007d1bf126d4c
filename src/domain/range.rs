//! How a nominal value becomes a range: copper under the standard's maximum, length, terminations,
//! instrument; and what an instrument can show.
//!
//! The allowances are suggestions of this project (common practice, no source) except where a
//! source is named; each is a constant here, and each shows in `why`.

use rust_decimal::Decimal;

use super::{
    expect::Contribution,
    plan::{InstrumentRange, Job, LengthBasis},
    quantity::{Round, show},
    reading::Unit,
};

/// Good copper reads up to this much under the maximum of IEC 60228 (common practice, no source).
pub const UNDER_MAXIMUM: f64 = 0.08;
/// A pair of terminations, at the board and at the point, Ω (common practice, no source).
pub const END_TERMINATIONS_OHM: f64 = 0.02;
/// Terminations of a point passed on the way, Ω (common practice, no source).
pub const PASSED_POINT_OHM: f64 = 0.002;
/// Line conductor a switch drop may add to a lighting point, m (common practice, no source).
pub const SWITCH_DROP_M: f64 = 6.0;
/// Ends of a ring agree within this, Ω (trade guidance; electriciansforums 36313).
pub const RING_AGREEMENT_OHM: f64 = 0.05;
/// Spread between the cores of one cable against the table's ratio (own suggestion: covers the
/// 1.55 to 1.75 in trade use for 2.5/1.5 mm²).
pub const CORE_SPREAD: f64 = 0.06;

/// Share of a length that may be wrong.
#[must_use]
pub fn length_share(basis: LengthBasis) -> f64 {
    match basis {
        LengthBasis::Measured => 0.02,
        LengthBasis::Drawing => 0.10,
        LengthBasis::Guess => 0.20,
    }
}

/// The basis as a word.
#[must_use]
pub fn basis_word(basis: LengthBasis) -> &'static str {
    match basis {
        LengthBasis::Measured => "measured",
        LengthBasis::Drawing => "drawing",
        LengthBasis::Guess => "guess",
    }
}

/// A usual continuity function: 0.01 Ω steps, ±(3 % + 2 digits) (common practice, no source; EN
/// 61557-4 asks for 0.01 Ω and allows more error).
#[must_use]
pub fn usual_continuity() -> InstrumentRange {
    InstrumentRange {
        unit: Unit::Ohm,
        resolution: Decimal::new(1, 2),
        ceiling: Decimal::new(1999, 0),
        accuracy_percent: 3.0,
        accuracy_digits: 2.0,
    }
}

/// A usual insulation function: 0.01 MΩ steps, ±(3 % + 2 digits), to 999 MΩ (common practice, no
/// source).
#[must_use]
pub fn usual_insulation() -> InstrumentRange {
    InstrumentRange {
        unit: Unit::Megohm,
        resolution: Decimal::new(1, 2),
        ceiling: Decimal::new(999, 0),
        accuracy_percent: 3.0,
        accuracy_digits: 2.0,
    }
}

/// The continuity function of the job's first instrument, or a usual one.
#[must_use]
pub fn continuity_of(job: &Job) -> InstrumentRange {
    job.instruments
        .first()
        .map_or_else(usual_continuity, |i| i.continuity.clone())
}

/// The insulation function of the job's first instrument, or a usual one.
#[must_use]
pub fn insulation_of(job: &Job) -> InstrumentRange {
    job.instruments
        .first()
        .map_or_else(usual_insulation, |i| i.insulation.clone())
}

/// Smallest step as a number.
#[must_use]
pub fn step(instrument: &InstrumentRange) -> f64 {
    instrument.resolution.try_into().unwrap_or(0.01)
}

/// Decimal places the instrument shows at low readings.
#[must_use]
pub fn decimals(instrument: &InstrumentRange) -> u32 {
    instrument.resolution.normalize().scale()
}

/// A range in the making.
#[derive(Debug, Clone, PartialEq)]
pub struct Band {
    /// What the arithmetic gives, unrounded.
    pub nominal: f64,
    /// Lowest so far.
    pub low: f64,
    /// Highest so far.
    pub high: f64,
    /// How it came about.
    pub why: Vec<Contribution>,
}

impl Band {
    /// Starts at a nominal value; `what` says how it came about.
    #[must_use]
    pub fn at(nominal: f64, what: impl Into<String>) -> Self {
        Self {
            nominal,
            low: nominal,
            high: nominal,
            why: vec![Contribution {
                what: what.into(),
                low: 0.0,
                high: 0.0,
            }],
        }
    }

    /// Notes a step of the arithmetic that moves neither end.
    #[must_use]
    pub fn note(mut self, what: impl Into<String>) -> Self {
        self.why.push(Contribution {
            what: what.into(),
            low: 0.0,
            high: 0.0,
        });
        self
    }

    /// Moves both ends: the low end down, the high end up.
    #[must_use]
    pub fn widen(mut self, what: impl Into<String>, low: f64, high: f64) -> Self {
        self.low = (self.low - low).max(0.0);
        self.high += high;
        self.why.push(Contribution {
            what: what.into(),
            low,
            high,
        });
        self
    }

    /// Cable that is better than the maximum of its standard.
    #[must_use]
    pub fn under_maximum(self) -> Self {
        let by = self.low * UNDER_MAXIMUM;
        let what = format!(
            "conductor up to {:.0} % under the maximum",
            UNDER_MAXIMUM * 100.0
        );
        self.widen(what, by, 0.0)
    }

    /// Length known on some basis.
    #[must_use]
    pub fn length(self, basis: LengthBasis) -> Self {
        let share = length_share(basis);
        let (low, high) = (self.low * share, self.high * share);
        let what = format!("length ±{:.0} % ({})", share * 100.0, basis_word(basis));
        self.widen(what, low, high)
    }

    /// Terminations in series: those at the ends and those passed on the way.
    #[must_use]
    pub fn terminations(self, passed: usize) -> Self {
        let high = END_TERMINATIONS_OHM + PASSED_POINT_OHM * passed as f64;
        self.widen(
            format!("terminations, {passed} points on the way"),
            0.0,
            high,
        )
    }

    /// Instrument accuracy and resolution.
    #[must_use]
    pub fn instrument(self, instrument: &InstrumentRange) -> Self {
        let share = instrument.accuracy_percent / 100.0;
        let digits = instrument.accuracy_digits * step(instrument);
        let (low, high) = (self.low * share + digits, self.high * share + digits);
        let what = format!(
            "instrument ±({} % + {} digits)",
            instrument.accuracy_percent, instrument.accuracy_digits
        );
        self.widen(what, low, high)
    }

    /// The three figures as an instrument shows them: the ends are rounded outwards, so that
    /// rounding never makes the range narrower.
    #[must_use]
    pub fn shown(&self, decimals: u32) -> (Decimal, Decimal, Decimal) {
        (
            show(self.low, decimals, Round::Down),
            show(self.nominal, decimals, Round::Nearest),
            show(self.high, decimals, Round::Up),
        )
    }
}
