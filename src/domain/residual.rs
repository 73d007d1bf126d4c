//! Residual current devices and earth electrodes: highest resistances, disconnection times.
//!
//! Sources disagree on the electrode's limit (50 V/IΔn against a stable 200 Ω) and on whether the
//! tests at half and five times are wanted; the plan chooses, the output says which.

use super::{expect::Source, plan::ElectrodeRule};

/// Multiple of the rated residual current a time is measured at.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Multiple {
    /// Once.
    One,
    /// Twice.
    Two,
    /// Five times.
    Five,
}

/// Shortest (time-delayed types) and longest disconnection time, ms.
#[derive(Debug, Clone, PartialEq)]
pub struct Times {
    /// Not before; `None`: at once is right.
    pub low_ms: Option<f64>,
    /// Not after; the time itself still counts as within.
    pub high_ms: f64,
    /// Where from.
    pub source: Source,
}

/// Times of BS EN 61008 and 61009 (general and S).
#[must_use]
pub fn times(multiple: Multiple, delayed: bool) -> Times {
    let (low_ms, high_ms) = match (multiple, delayed) {
        (Multiple::One, false) => (None, 300.0),
        (Multiple::One, true) => (Some(130.0), 500.0),
        (Multiple::Two, false) => (None, 150.0),
        (Multiple::Two, true) => (Some(60.0), 200.0),
        (Multiple::Five, false) => (None, 40.0),
        (Multiple::Five, true) => (Some(50.0), 150.0),
    };
    Times {
        low_ms,
        high_ms,
        source: Source {
            text: match multiple {
                Multiple::Five => {
                    "BS EN 61008/61009; not required since BS 7671:2018+A2:2022, kept as practice"
                }
                _ => "BS EN 61008/61009",
            }
            .into(),
            checked: !(delayed && multiple == Multiple::Two),
        },
    }
}

/// Highest resistance to earth for a residual current device: touch voltage over rated residual
/// current. 50 V ordinarily; BS 7671 table 41.5 prints it rounded.
#[must_use]
pub fn fifty_volt_ohm(rated_ma: f64, touch_v: f64) -> f64 {
    touch_v / (rated_ma / 1000.0)
}

/// The limit of an electrode under the rule of the plan.
#[must_use]
pub fn electrode_limit(rule: ElectrodeRule, rated_ma: f64) -> (f64, Source) {
    let fifty = fifty_volt_ohm(rated_ma, 50.0);
    match rule {
        ElectrodeRule::FiftyVolts => (
            fifty,
            Source {
                text: format!("50 V / {rated_ma} mA, BS 7671:2018 table 41.5"),
                checked: true,
            },
        ),
        ElectrodeRule::TwoHundredOhm => (
            fifty.min(200.0),
            Source {
                text: "200 Ω, above which it may not be stable (UK site guidance 7.2.6)".into(),
                checked: true,
            },
        ),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn electrode_limits_are_those_of_table_41_5() {
        // BS 7671 table 41.5: 5000, 1667, 500, 167, 100 Ω.
        for (ma, ohm) in [
            (10.0, 5000.0),
            (30.0, 1667.0),
            (100.0, 500.0),
            (300.0, 167.0),
            (500.0, 100.0),
        ] {
            assert!((fifty_volt_ohm(ma, 50.0) - ohm).abs() < 0.5);
        }
        let strict = electrode_limit(ElectrodeRule::TwoHundredOhm, 30.0).0;
        assert!((strict - 200.0).abs() < 1e-9);
        let small = electrode_limit(ElectrodeRule::TwoHundredOhm, 500.0).0;
        assert!((small - 100.0).abs() < 1e-9);
    }
}
