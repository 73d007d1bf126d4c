//! Quantities of the physics: ohms, megohms, metres, degrees and the rest, each a type of its own.
//!
//! Promises: a value that exists is finite and in the stated bounds; milliohms per metre, ohms and
//! megohms do not mix without a named conversion. Inside is `f64`; rounding happens where a figure
//! is shown (`show`). Readings are not made of these: they stay decimals (`reading`).
//!
//! Adding a resistance of a conductor to one of an insulation does not compile:
//! ```compile_fail
//! use handsfull::domain::quantity::{Megohms, Ohms};
//! let sum = Ohms::new(0.58).unwrap() + Megohms::new(200.0).unwrap();
//! ```
//! Nor does a length where a resistance per metre belongs:
//! ```compile_fail
//! use handsfull::domain::quantity::Metres;
//! let r = Metres::new(30.0).unwrap().of(Metres::new(19.51).unwrap());
//! ```
//! The same with the right types does:
//! ```
//! use handsfull::domain::quantity::{Metres, MilliohmPerMetre, Ohms};
//! let r = Metres::new(30.0)?.of(MilliohmPerMetre::new(19.51)?);
//! assert!((r + Ohms::new(0.0)?).ohm() - 0.5853 < 1e-12);
//! # Ok::<(), handsfull::domain::quantity::QuantityError>(())
//! ```

use std::ops::{Add, Mul};

use rust_decimal::{Decimal, RoundingStrategy, prelude::FromPrimitive};

/// A number that cannot be that quantity.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[error("{value} {unit} cannot be a {what}; it must be {low} to {high} {unit}")]
pub struct QuantityError {
    /// What was given.
    pub value: f64,
    /// The quantity: "length".
    pub what: &'static str,
    /// Its unit as text.
    pub unit: &'static str,
    /// Lowest allowed.
    pub low: f64,
    /// Highest allowed.
    pub high: f64,
}

macro_rules! quantity {
    ($(#[$doc:meta])* $name:ident, $get:ident, $what:literal, $unit:literal, $low:expr, $high:expr) => {
        $(#[$doc])*
        #[derive(Debug, Clone, Copy, PartialEq, PartialOrd)]
        pub struct $name(f64);

        impl $name {
            /// Lowest value allowed.
            pub const LOW: f64 = $low;
            /// Highest value allowed.
            pub const HIGH: f64 = $high;

            /// # Errors
            /// [`QuantityError`] when not a number or outside [`Self::LOW`] to [`Self::HIGH`].
            pub fn new(value: f64) -> Result<Self, QuantityError> {
                if value.is_finite() && ($low..=$high).contains(&value) {
                    Ok(Self(value))
                } else {
                    Err(QuantityError { value, what: $what, unit: $unit, low: $low, high: $high })
                }
            }

            /// The nearest value allowed: for arithmetic on values that were checked before.
            /// What is no number becomes the lowest.
            #[must_use]
            pub fn clamped(value: f64) -> Self {
                if value.is_nan() { Self($low) } else { Self(value.clamp($low, $high)) }
            }

            /// The figure in the unit of the type.
            #[must_use]
            pub fn $get(self) -> f64 {
                self.0
            }
        }
    };
}

quantity!(
    /// Resistance of conductors, electrodes and loops, ohm.
    Ohms, ohm, "resistance", "ohm", 0.0, 1e9
);
quantity!(
    /// Resistance of insulation, megohm.
    Megohms, megohm, "insulation resistance", "megohm", 0.0, 1e9
);
quantity!(
    /// Resistance per metre of conductor at 20 °C, milliohm per metre (the same figure as ohm per
    /// kilometre).
    MilliohmPerMetre, milliohm_per_m, "resistance per metre", "milliohm per metre", 1e-3, 1e4
);
quantity!(
    /// Length of cable, metre. More than 10 km of final circuit is a slip.
    Metres, m, "length", "metre", 0.0, 10_000.0
);
quantity!(
    /// Temperature of a conductor, degree Celsius. The bounds are those of the linear law and of
    /// cable insulation, not of physics.
    Celsius, c, "conductor temperature", "degree Celsius", -50.0, 250.0
);
quantity!(
    /// Current, ampere.
    Amps, a, "current", "ampere", 1e-3, 1e5
);
quantity!(
    /// Voltage, volt.
    Volts, v, "voltage", "volt", 1.0, 1000.0
);

impl Metres {
    /// The resistance of this length of a conductor at 20 °C.
    #[must_use]
    pub fn of(self, rate: MilliohmPerMetre) -> Ohms {
        Ohms(self.0 * rate.0 / 1000.0)
    }
}

impl Ohms {
    /// The same resistance as insulation meters show it.
    #[must_use]
    pub fn to_megohms(self) -> Megohms {
        Megohms(self.0 / 1e6)
    }
}

impl Add for Ohms {
    type Output = Ohms;
    fn add(self, other: Ohms) -> Ohms {
        Ohms(self.0 + other.0)
    }
}

impl Add for MilliohmPerMetre {
    type Output = MilliohmPerMetre;
    fn add(self, other: MilliohmPerMetre) -> MilliohmPerMetre {
        MilliohmPerMetre(self.0 + other.0)
    }
}

impl Mul<f64> for Ohms {
    type Output = Ohms;
    fn mul(self, factor: f64) -> Ohms {
        Ohms(self.0 * factor.max(0.0))
    }
}

/// Which way a figure is rounded when it is shown.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Round {
    /// To the nearest step, halves away from zero: a nominal value.
    Nearest,
    /// To the step below: a low end, and a maximum when in doubt.
    Down,
    /// To the step above: a high end, and a minimum when in doubt.
    Up,
}

/// A figure as it is shown: rounded to `decimals` places. Dust of binary arithmetic (1e-12 of the
/// value) does not move it a step. Beyond the range of a decimal it is the largest one.
#[must_use]
pub fn show(value: f64, decimals: u32, round: Round) -> Decimal {
    let dust = value.abs() * 1e-12;
    let (value, strategy) = match round {
        Round::Nearest => (value, RoundingStrategy::MidpointAwayFromZero),
        Round::Down => (value + dust, RoundingStrategy::ToNegativeInfinity),
        Round::Up => (value - dust, RoundingStrategy::ToPositiveInfinity),
    };
    let mut shown = Decimal::from_f64(value)
        .unwrap_or(Decimal::MAX)
        .round_dp_with_strategy(decimals, strategy);
    // A screen shows 0.50, not 0.5: the step of the instrument is part of the figure.
    shown.rescale(decimals);
    shown
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_length_below_nothing_and_a_number_that_is_none_are_refused() {
        assert!(Metres::new(-1.0).is_err());
        assert!(Metres::new(f64::NAN).is_err());
        assert!(Celsius::new(400.0).is_err());
        assert_eq!(
            Metres::new(-1.0).map_err(|e| e.to_string()),
            Err("-1 metre cannot be a length; it must be 0 to 10000 metre".into())
        );
    }

    #[test]
    fn figures_are_rounded_the_way_that_is_asked() {
        assert_eq!(show(0.5853, 2, Round::Nearest).to_string(), "0.59");
        assert_eq!(show(1.0925, 2, Round::Down).to_string(), "1.09");
        assert_eq!(show(0.501, 2, Round::Up).to_string(), "0.51");
        assert_eq!(show(0.5, 2, Round::Up).to_string(), "0.50");
        // 0.1 + 0.2 is a hair over 0.3 in binary and must stay 0.30.
        assert_eq!(show(0.1 + 0.2, 2, Round::Up).to_string(), "0.30");
        assert_eq!(show(0.3 - 1e-17, 2, Round::Down).to_string(), "0.30");
    }
}
