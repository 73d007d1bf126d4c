//! Insulation resistance: test voltages, minima, and arithmetic that keeps an over-range display
//! what it is, a bound.
//!
//! A reading `>999` is at least 999 and has no upper end; the parallel of such readings has a lower
//! end and, where a plain figure takes part, an upper one. Nothing here turns `>999` into 999.

use super::{
    expect::Source,
    reading::{Bound, Reading, Unit},
};

/// Test voltage and minimum for a nominal voltage (IEC 60364-6:2016 table 6.1, BS 7671 table 64).
#[derive(Debug, Clone, PartialEq)]
pub struct Rule {
    /// Direct test voltage, V.
    pub test_v: u16,
    /// Minimum, MΩ.
    pub minimum_megohm: f64,
    /// Where from.
    pub source: Source,
}

/// What limits the test voltage of a circuit.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Voltage {
    /// SELV or PELV.
    ExtraLow,
    /// Up to and including 500 V, FELV too.
    Low,
    /// Above 500 V.
    Above500,
    /// Up to 500 V with electronics or surge protection that stays in: 250 V, lives joined, the
    /// same 1 MΩ.
    LowWithElectronics,
}

/// The rule for a voltage.
#[must_use]
pub fn rule(voltage: Voltage) -> Rule {
    let (test_v, minimum_megohm) = match voltage {
        Voltage::ExtraLow => (250, 0.5),
        Voltage::Low => (500, 1.0),
        Voltage::Above500 => (1000, 1.0),
        Voltage::LowWithElectronics => (250, 1.0),
    };
    Rule {
        test_v,
        minimum_megohm,
        source: Source {
            text: "IEC 60364-6:2016 table 6.1, BS 7671:2018+A2:2022 table 64".into(),
            checked: true,
        },
    }
}

/// A resistance known between two ends, MΩ. `high` is infinite where there is no upper end.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Span {
    /// At least.
    pub low: f64,
    /// At most.
    pub high: f64,
}

impl Span {
    /// What a reading says; `None` for an open or over-range display without its figure, since the
    /// instrument's ceiling is then not known.
    #[must_use]
    pub fn of(reading: &Reading) -> Option<Self> {
        let ohm: f64 = reading.in_base(Unit::Megohm)?.try_into().ok()?;
        let megohm = ohm / 1e6;
        match reading.bound() {
            Bound::Exact => Some(Self {
                low: megohm,
                high: megohm,
            }),
            Bound::Above => Some(Self {
                low: megohm,
                high: f64::INFINITY,
            }),
            Bound::Below => Some(Self {
                low: 0.0,
                high: megohm,
            }),
            Bound::Open | Bound::OverRange => None,
        }
    }
}

/// Several insulation resistances at once: 1/R = Σ 1/Ri, at both ends. Nothing in parallel is
/// an infinite resistance.
#[must_use]
pub fn parallel(parts: &[Span]) -> Span {
    let sum = |end: fn(&Span) -> f64| {
        let conductance: f64 = parts.iter().map(|part| 1.0 / end(part)).sum();
        1.0 / conductance
    };
    Span {
        low: sum(|part| part.low),
        high: sum(|part| part.high),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn spans(figures: &[&str]) -> Vec<Span> {
        figures
            .iter()
            .filter_map(|text| Span::of(&text.parse().expect("a reading")))
            .collect()
    }

    #[test]
    fn a_worked_examination_example_comes_out() {
        // C&G 2391 study blog, 2 July 2007: 5, 20, 10, 20, 2 MΩ give 1.11111 MΩ.
        let all = parallel(&spans(&["5", "20", "10", "20", "2"]));
        assert!((all.low - 1.111_111).abs() < 1e-6 && all.low == all.high);
    }

    #[test]
    fn bounds_stay_bounds() {
        // 1/(3/999 + 1/100) = 76.9 at least, below 100: arithmetic.
        let all = parallel(&spans(&[">999", ">999", ">999", "100"]));
        assert!((all.low - 76.90).abs() < 0.01, "{all:?}");
        assert!((all.high - 100.0).abs() < 1e-9);
        let open_ended = parallel(&spans(&[">999", ">299"]));
        assert!(open_ended.high.is_infinite() && open_ended.low < 299.0);
    }

    #[test]
    fn a_dead_short_in_parallel_is_a_dead_short() {
        let all = parallel(&spans(&["0", "200"]));
        assert_eq!(all.low, 0.0);
        assert_eq!(all.high, 0.0);
    }
}
