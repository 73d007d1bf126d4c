//! Earth fault loops: maximum Zs of protective devices, the cold rule, disconnection times, fault
//! current.
//!
//! Circuit-breakers follow from their tripping current by arithmetic. Fuse values come from
//! published transcriptions that disagree in places and were not checked against the standard:
//! their source says so wherever they are shown.

use super::{
    expect::Source,
    plan::{CircuitKind, ColdLoopRule, DeviceType, Earthing},
};

/// Lowest voltage factor (BS 7671:2018 appendix 3, Cmin).
pub const C_MIN: f64 = 0.95;

/// A device the tables do not hold.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[allow(missing_docs)] // the fields are named in the messages
pub enum LoopError {
    #[error("a {device} of {rated_a} A is not held; ratings held for {time} are {held} A")]
    NoSuchFuse {
        device: &'static str,
        rated_a: f64,
        time: &'static str,
        held: String,
    },
    #[error("a {device} cannot be rated {rated_a} A; it must be above 0 and at most 125 A")]
    Rating { device: &'static str, rated_a: f64 },
}

/// The disconnection time the device is checked for.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Disconnection {
    /// 0.4 s (final circuits, TN). Also used for the 0.2 s of TT where the device is magnetic.
    FourTenths,
    /// 5 s (distribution and larger circuits, TN).
    FiveSeconds,
}

/// A maximum and where it comes from.
#[derive(Debug, Clone, PartialEq)]
pub struct Maximum {
    /// Ω, unrounded where it is arithmetic, as tabulated where it is not.
    pub ohm: f64,
    /// Where from.
    pub source: Source,
}

type FuseRow = (f64, Option<f64>, Option<f64>);

/// Rated current, Ω at 0.4 s, Ω at 5 s, for 230 V and Cmin 0.95.
const BS_88_2: [FuseRow; 14] = [
    (6.0, Some(7.80), Some(12.0)),
    (10.0, Some(4.65), Some(6.80)),
    (16.0, Some(2.43), Some(4.00)),
    (20.0, Some(1.68), Some(2.80)),
    (25.0, Some(1.29), Some(2.20)),
    (32.0, Some(0.99), Some(1.70)),
    (40.0, Some(0.75), Some(1.30)),
    (50.0, Some(0.57), Some(0.99)),
    (63.0, Some(0.44), Some(0.78)),
    (80.0, None, Some(0.55)),
    (100.0, None, Some(0.42)),
    (125.0, None, Some(0.32)),
    (160.0, None, Some(0.27)),
    (200.0, None, Some(0.18)),
];
const BS_88_3: [FuseRow; 8] = [
    (5.0, Some(9.93), Some(14.6)),
    (16.0, Some(2.30), Some(3.90)),
    (20.0, Some(1.93), Some(3.20)),
    (32.0, Some(0.91), Some(1.60)),
    (45.0, Some(0.57), Some(1.00)),
    (63.0, Some(0.36), Some(0.68)),
    (80.0, None, Some(0.51)),
    (100.0, None, Some(0.38)),
];
const BS_3036: [FuseRow; 7] = [
    (5.0, Some(9.10), Some(16.8)),
    (15.0, Some(2.43), Some(5.08)),
    (20.0, Some(1.68), Some(3.64)),
    (30.0, Some(1.04), Some(2.51)),
    (45.0, Some(0.56), Some(1.51)),
    (60.0, Some(0.40), Some(1.07)),
    (100.0, None, Some(0.51)),
];
const BS_1361: [FuseRow; 8] = [
    (5.0, Some(9.93), Some(15.6)),
    (15.0, Some(3.12), Some(4.75)),
    (20.0, Some(1.62), Some(2.66)),
    (30.0, Some(1.09), Some(1.75)),
    (45.0, None, Some(0.91)),
    (60.0, None, Some(0.67)),
    (80.0, None, Some(0.48)),
    (100.0, None, Some(0.34)),
];

/// The device as the trade writes it.
#[must_use]
pub fn device_word(device: DeviceType) -> &'static str {
    match device {
        DeviceType::B => "type B breaker",
        DeviceType::C => "type C breaker",
        DeviceType::D => "type D breaker",
        DeviceType::Bs88_2 => "BS 88-2 fuse",
        DeviceType::Bs88_3 => "BS 88-3 fuse",
        DeviceType::Bs3036 => "BS 3036 fuse",
        DeviceType::Bs1361 => "BS 1361 fuse",
    }
}

/// Tripping multiple of a circuit-breaker: the current that opens it at once, over the rated one.
#[must_use]
pub fn multiple(device: DeviceType) -> Option<f64> {
    match device {
        DeviceType::B => Some(5.0),
        // The top of the trip band is what disconnects for certain: 10, not 5.
        DeviceType::C => Some(10.0),
        DeviceType::D => Some(20.0),
        _ => None,
    }
}

/// Maximum Zs of a device at `u0_v` volts.
///
/// Circuit-breakers use their magnetic trip at 5 s too: published tables that double type D (and
/// wrongly type C) at 5 s are not followed.
///
/// # Errors
/// [`LoopError`] for a rating that is not held.
pub fn maximum(
    device: DeviceType,
    rated_a: f64,
    u0_v: f64,
    time: Disconnection,
) -> Result<Maximum, LoopError> {
    let word = device_word(device);
    if let Some(multiple) = multiple(device) {
        if !(rated_a > 0.0 && rated_a <= 125.0) {
            return Err(LoopError::Rating {
                device: word,
                rated_a,
            });
        }
        return Ok(Maximum {
            ohm: C_MIN * u0_v / (multiple * rated_a),
            source: Source {
                text: format!(
                    "BS 7671:2018+A2:2022 table 41.3: {C_MIN} x {u0_v} V / ({multiple} x {rated_a} A)"
                ),
                checked: true,
            },
        });
    }
    let (rows, table): (&[FuseRow], &str) = match device {
        DeviceType::Bs88_3 => (&BS_88_3, "tables 41.2/41.4"),
        DeviceType::Bs3036 => (&BS_3036, "tables 41.2/41.4"),
        DeviceType::Bs1361 => (&BS_1361, "withdrawn fuse, 17th edition values x 0.95"),
        _ => (&BS_88_2, "tables 41.2/41.4"),
    };
    let at = |row: &FuseRow| match time {
        Disconnection::FourTenths => row.1,
        Disconnection::FiveSeconds => row.2,
    };
    let seconds = match time {
        Disconnection::FourTenths => "0.4 s",
        Disconnection::FiveSeconds => "5 s",
    };
    let held = || {
        let ratings: Vec<String> = rows
            .iter()
            .filter(|row| at(row).is_some())
            .map(|row| row.0.to_string())
            .collect();
        ratings.join(", ")
    };
    rows.iter()
        .find(|row| (row.0 - rated_a).abs() < 1e-9)
        .and_then(at)
        .map(|ohm| Maximum {
            ohm: ohm * u0_v / 230.0,
            source: Source {
                text: format!("BS 7671:2018 {table}, {word}, {seconds}: transcribed"),
                checked: false,
            },
        })
        .ok_or_else(|| LoopError::NoSuchFuse {
            device: word,
            rated_a,
            time: seconds,
            held: held(),
        })
}

/// What a cold measurement may be at most.
#[must_use]
pub fn cold(maximum_ohm: f64, rule: ColdLoopRule) -> f64 {
    match rule {
        ColdLoopRule::FourFifths => 0.8 * maximum_ohm,
        // IEC 60364-6 takes two thirds of U0/Ia itself, without Cmin.
        ColdLoopRule::TwoThirds => 2.0 / 3.0 * maximum_ohm / C_MIN,
    }
}

/// The cold rule in words.
#[must_use]
pub fn cold_source(rule: ColdLoopRule) -> Source {
    match rule {
        ColdLoopRule::FourFifths => Source {
            text: "0.8 x tabulated Zs, BS 7671:2018 appendix 3".into(),
            checked: true,
        },
        ColdLoopRule::TwoThirds => Source {
            text: "2/3 x U0/Ia, IEC 60364-6 (informative annex, from memory)".into(),
            checked: false,
        },
    }
}

/// The longest disconnection time of a circuit in seconds at 230 V, and the column it is checked
/// in. Final circuits: up to 63 A with socket-outlets, up to 32 A for fixed equipment.
#[must_use]
pub fn disconnection(earthing: Earthing, kind: CircuitKind, rated_a: f64) -> (f64, Disconnection) {
    let short = match kind {
        CircuitKind::Ring | CircuitKind::Radial => rated_a <= 63.0,
        CircuitKind::Lighting | CircuitKind::Fixed => rated_a <= 32.0,
        CircuitKind::Distribution | CircuitKind::Selv | CircuitKind::Pelv => false,
    };
    match (earthing, short) {
        (Earthing::Tt, true) => (0.2, Disconnection::FourTenths),
        (Earthing::Tt, false) => (1.0, Disconnection::FourTenths),
        (_, true) => (0.4, Disconnection::FourTenths),
        (_, false) => (5.0, Disconnection::FiveSeconds),
    }
}

/// Prospective fault current in kA: U0/Z, doubled for three phases (what the trade records; exact
/// where line and neutral impedances are equal).
#[must_use]
pub fn fault_ka(u0_v: f64, z_ohm: f64, three_phase: bool) -> f64 {
    let single = u0_v / z_ohm / 1000.0;
    if three_phase { 2.0 * single } else { single }
}

/// Published guide maximum of the external impedance; `None` where there is none.
#[must_use]
pub fn ze_guide(earthing: Earthing) -> Option<(f64, Source)> {
    let ohm = match earthing {
        Earthing::TnCS => 0.35,
        Earthing::TnS => 0.8,
        Earthing::Tt => 21.0,
        Earthing::It => return None,
    };
    Some((
        ohm,
        Source {
            text: "supplier's guide figure, ENA ER P23/1:1991, superseded by P23/2:2018; never \
                   guaranteed"
                .into(),
            checked: false,
        },
    ))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(device: DeviceType, rated_a: f64, time: Disconnection, ohm: f64) {
        let got = maximum(device, rated_a, 230.0, time).expect("held").ohm;
        assert!((got - ohm).abs() < 0.0051, "{got} is not {ohm}");
    }

    #[test]
    fn breakers_match_table_41_3() {
        use DeviceType::{B, C, D};
        // BS 7671:2018 table 41.3 by two transcriptions; 45 A: electriciansforums 174091.
        for (rated, b, c, d) in [
            (6.0, 7.28, 3.64, 1.82),
            (16.0, 2.73, 1.37, 0.68),
            (32.0, 1.37, 0.68, 0.34),
            (45.0, 0.97, 0.49, 0.24),
            (63.0, 0.69, 0.35, 0.17),
        ] {
            check(B, rated, Disconnection::FourTenths, b);
            check(C, rated, Disconnection::FourTenths, c);
            check(D, rated, Disconnection::FiveSeconds, d);
        }
    }

    #[test]
    fn fuses_say_that_they_were_not_checked() {
        // NICEIC Connections Winter 2011-12 p. 60: 1.04 Ω before Cmin; x 0.95 = 0.988.
        check(
            DeviceType::Bs88_2,
            32.0,
            Disconnection::FourTenths,
            1.04 * 0.95,
        );
        let fuse = maximum(DeviceType::Bs3036, 30.0, 230.0, Disconnection::FourTenths);
        assert!(fuse.is_ok_and(|m| !m.source.checked));
    }

    #[test]
    fn a_rating_that_is_not_held_is_refused_with_those_that_are() {
        let none = maximum(DeviceType::B, 0.0, 230.0, Disconnection::FourTenths);
        assert!(none.is_err_and(|e| e.to_string().contains("0 A")));
        let odd = maximum(DeviceType::Bs3036, 32.0, 230.0, Disconnection::FourTenths);
        assert!(odd.is_err_and(|e| e.to_string().contains("5, 15, 20, 30, 45, 60")));
    }

    #[test]
    fn the_two_cold_rules_differ_as_published() {
        // B32: 0.8 x 1.365625 = 1.0925; two thirds of 230/160 = 0.958.
        let b32 = 0.95 * 230.0 / 160.0;
        assert!((cold(b32, ColdLoopRule::FourFifths) - 1.0925).abs() < 1e-9);
        assert!((cold(b32, ColdLoopRule::TwoThirds) - 0.958_333).abs() < 1e-6);
    }
}
