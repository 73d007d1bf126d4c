//! Ring final circuits in closed form: ends, cross-connected readings at any point, spurs.
//!
//! With line of leg 1 joined to the other core of leg 2 and the reverse, a reading at fraction `x`
//! of the ring sees two paths in parallel: `x a + (1-x) b` and `(1-x) a + x b`. For like cores that
//! is a quarter of the two-core loop everywhere; for unlike ones it is lowest at the board and
//! highest half way round. (IET Wiring Matters 89, March 2022; the algebra also in scribd 72915510;
//! agrees with the nodal solver.) Faults are left to `findings`.

use super::{
    plan::{Conductor, TemperatureRule},
    quantity::{Celsius, Metres, Ohms},
    temperature::From20,
};
use crate::domain::conductor::{self, ConductorError};

/// End-to-end resistances of the cores of a ring, at one temperature.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Ends {
    /// Line.
    pub r1: Ohms,
    /// Neutral.
    pub rn: Ohms,
    /// Protective conductor.
    pub r2: Ohms,
}

/// A core's resistance for a length at a temperature.
///
/// # Errors
/// [`ConductorError`] for a conductor the tables do not hold.
pub fn core(
    conductor: Conductor,
    length: Metres,
    rule: TemperatureRule,
    t: Celsius,
) -> Result<Ohms, ConductorError> {
    let factor = From20::to(rule, conductor::material(conductor), t);
    Ok(factor.apply(length.of(conductor::rate(conductor)?)))
}

/// The reading between two cross-connected cores, `x` of the way round (0 and 1 are the board).
#[must_use]
pub fn cross(a: Ohms, b: Ohms, x: f64) -> f64 {
    let (a, b, x) = (a.ohm(), b.ohm(), x.clamp(0.0, 1.0));
    if a + b <= 0.0 {
        return 0.0;
    }
    (x * a + (1.0 - x) * b) * ((1.0 - x) * a + x * b) / (a + b)
}

/// The reading when each leg was linked to its own other core instead: almost nothing at the
/// board, the same as a good ring half way round.
#[must_use]
pub fn own_leg(a: Ohms, b: Ohms, x: f64) -> f64 {
    let x = x.clamp(0.0, 1.0);
    x * (1.0 - x) * (a.ohm() + b.ohm())
}

impl Ends {
    /// Line to neutral at `x`, cross-connected.
    #[must_use]
    pub fn line_neutral(&self, x: f64) -> f64 {
        cross(self.r1, self.rn, x)
    }

    /// Line to protective conductor at `x`, cross-connected.
    #[must_use]
    pub fn line_earth(&self, x: f64) -> f64 {
        cross(self.r1, self.r2, x)
    }

    /// R1+R2 of the circuit: the reading half way round, a quarter of the loop.
    #[must_use]
    pub fn r1r2(&self) -> f64 {
        (self.r1.ohm() + self.r2.ohm()) / 4.0
    }
}

/// The length of a spur that makes a point read `over` ohms more than the ring there; the branch
/// counts in full, out and back. `rate` is the sum of both cores in milliohm per metre.
#[must_use]
pub fn spur_length_m(over: f64, rate_milliohm_per_m: f64) -> f64 {
    if rate_milliohm_per_m > 0.0 {
        over * 1000.0 / rate_milliohm_per_m
    } else {
        0.0
    }
}
