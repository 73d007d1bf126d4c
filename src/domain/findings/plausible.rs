//! How plausible each fault is before anything was read, as logarithms, and the errors that are no
//! fault.
//!
//! These are judgements (common practice, no source): only their order of magnitude matters,
//! because a series of readings usually speaks much louder.

use crate::domain::{
    plan::{InstrumentRange, LengthBasis},
    range,
};

/// Log plausibility of a kind of fault in a circuit under test.
pub(crate) fn prior(code: &str) -> f64 {
    let share: f64 = match code {
        "open" => 0.004,
        "high-joint" => 0.005,
        "wrong-size" => 0.002,
        "longer" | "shorter" => 0.002,
        "parallel-path" => 0.004,
        "spur" => 0.004,
        "own-leg-link" => 0.004,
        "one-core-open" => 0.012,
        "cut-cable" => 0.001,
        "bridge" => 0.003,
        "reversed" => 0.004,
        "second-ring" => 0.000_2,
        "lead-not-nulled" => 0.004,
        "unit-slip" => 0.002,
        "point-slip" => 0.001,
        _ => 1e-6,
    };
    share.ln()
}

/// What the basis of a length says about a wrong size against a wrong length (logs): where the run
/// was measured the size is doubted, where it was guessed the length.
pub(crate) fn favours(basis: LengthBasis) -> (f64, f64) {
    match basis {
        LengthBasis::Measured => (1.0, -2.5),
        LengthBasis::Drawing => (-1.5, 1.0),
        LengthBasis::Guess => (-2.5, 2.0),
    }
}

/// Mean of good copper against the maximum of its standard.
pub(crate) const COPPER_MEAN: f64 = 1.0 - range::UNDER_MAXIMUM / 2.0;
/// Its spread: uniform over the allowance.
pub(crate) const COPPER_SPREAD: f64 = 0.5 * range::UNDER_MAXIMUM / 1.732;
/// Spread between cores of one cable beyond what they share.
pub(crate) const CORE_SPREAD: f64 = 0.012;

/// Spread of the gain of an instrument: its percent accuracy, nearly all of it common to a series.
pub(crate) fn gain_spread(instrument: &InstrumentRange) -> f64 {
    instrument.accuracy_percent / 100.0 / 1.732
}

/// Spread of a length.
pub(crate) fn length_spread(basis: LengthBasis) -> f64 {
    range::length_share(basis) / 1.732
}

/// Variance of a reading's own error: last digits, rounding, contact.
pub(crate) fn own_variance(instrument: &InstrumentRange, ohm: f64) -> f64 {
    let step = range::step(instrument);
    let digits = instrument.accuracy_digits * step / 1.732;
    let rounding = step / 3.46;
    let contact = 0.004;
    let share = 0.004 * ohm;
    digits * digits + rounding * rounding + contact * contact + share * share
}
