//! One reading against its expected range, and against the series it belongs to.
//!
//! A verdict compares and never calls a circuit safe. Beyond the limit of a standard comes before
//! above or below a range. The findings are those of `findings`, which looks at every reading kept
//! for the circuit, not only at this one.

use rust_decimal::Decimal;

use super::{
    expect::{Assessment, Expected, Verdict},
    findings,
    kept::Kept,
    plan::Job,
    reading::{Bound, Reading, Unit},
    test::{Target, TestKind},
};

/// Assesses a reading of `target` against `expected`, with everything kept so far. An older value
/// of the same target in `kept` is set aside: the new one takes its place.
#[must_use]
pub fn assess(
    job: &Job,
    target: &Target,
    expected: &Expected,
    reading: &Reading,
    kept: &Kept,
) -> Assessment {
    let verdict = verdict(target, expected, reading);
    let findings = findings::of(job, target, expected, reading, kept, verdict);
    Assessment { verdict, findings }
}

/// How a reading lies to its range, without looking at anything else.
#[must_use]
pub fn verdict(target: &Target, expected: &Expected, reading: &Reading) -> Verdict {
    let insulating = matches!(target.test, TestKind::Insulation(_) | TestKind::Separation);
    match reading.bound() {
        Bound::Open | Bound::OverRange if insulating || expected.open => return Verdict::InRange,
        Bound::Open | Bound::OverRange => {
            // Over-range of a fault current or a time is high, not open.
            return if expected.unit == Unit::Ohm {
                Verdict::Open
            } else if expected.unknown.is_some() {
                Verdict::Unknown
            } else {
                Verdict::Above
            };
        }
        _ if expected.open => return Verdict::NotOpen,
        _ => {}
    }
    if expected.unknown.is_some() {
        return Verdict::Unknown;
    }
    let Some(value) = in_unit_exact(reading, expected.unit) else {
        return Verdict::Unknown;
    };
    let below = |end: Decimal| match reading.bound() {
        // `>299` is not below anything up to 299; `<0.01` is below all from 0.01.
        Bound::Above => false,
        Bound::Below => value <= end,
        _ => value < end,
    };
    let above = |end: Decimal| match reading.bound() {
        Bound::Below => false,
        Bound::Above => value >= end,
        _ => value > end,
    };
    if let Some(limit) = &expected.limit
        && (limit.minimum && below(limit.value) || !limit.minimum && above(limit.value))
    {
        return Verdict::BeyondLimit;
    }
    // A display of `>1` shows that the minimum is met and no more.
    if reading.bound() == Bound::Above && expected.low.is_some_and(|low| value < low) {
        return Verdict::Unknown;
    }
    if expected.low.is_some_and(below) {
        return Verdict::Below;
    }
    if expected.high.is_some_and(above) {
        return Verdict::Above;
    }
    Verdict::InRange
}

/// The figure as an exact decimal in `unit`, whatever unit it was said in.
fn in_unit_exact(reading: &Reading, unit: Unit) -> Option<Decimal> {
    if reading.unit().is_none_or(|said| said == unit) {
        return reading.value();
    }
    let base = reading.in_base(unit)?;
    let (_, power) = unit.base();
    let ten = Decimal::from(10_i64.checked_pow(power.unsigned_abs())?);
    if power >= 0 {
        base.checked_div(ten)
    } else {
        base.checked_mul(ten)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::domain::expect::{Limit, Source};

    fn range(low: &str, high: &str, unit: Unit) -> Expected {
        Expected {
            unit,
            low: low.parse().ok(),
            nominal: None,
            high: high.parse().ok(),
            open: false,
            limit: None,
            why: Vec::new(),
            sources: Vec::new(),
            unknown: None,
        }
    }

    fn target(test: TestKind) -> Target {
        Target {
            test,
            board: None,
            circuit: None,
            point: None,
            name: None,
        }
    }

    #[track_caller]
    fn check(test: TestKind, expected: &Expected, figure: &str, verdict: Verdict) {
        let reading = figure.parse().expect("a reading");
        assert_eq!(
            super::verdict(&target(test), expected, &reading),
            verdict,
            "{figure}"
        );
    }

    #[test]
    fn ends_of_a_range_are_inside_it() {
        let expected = range("0.50", "0.63", Unit::Ohm);
        check(TestKind::R1R2, &expected, "0.50", Verdict::InRange);
        check(TestKind::R1R2, &expected, "0.63 Ω", Verdict::InRange);
        check(TestKind::R1R2, &expected, "580 mΩ", Verdict::InRange);
        check(TestKind::R1R2, &expected, "0.49", Verdict::Below);
        check(TestKind::R1R2, &expected, "0.64", Verdict::Above);
        check(TestKind::R1R2, &expected, "open", Verdict::Open);
        check(TestKind::R1R2, &expected, "over-range", Verdict::Open);
        check(TestKind::R1R2, &expected, "<0.01", Verdict::Below);
        check(TestKind::R1R2, &expected, ">199", Verdict::Above);
    }

    #[test]
    fn a_bound_is_compared_as_a_bound() {
        let mut expected = range("2", "", Unit::Megohm);
        expected.limit = Some(Limit {
            value: Decimal::ONE,
            minimum: true,
            source: Source {
                text: String::new(),
                checked: true,
            },
        });
        let test = TestKind::Insulation(crate::domain::test::Between::LineEarth);
        check(test, &expected, ">999", Verdict::InRange);
        check(test, &expected, "over-range", Verdict::InRange);
        check(test, &expected, "1.5", Verdict::Below);
        check(test, &expected, "0.99", Verdict::BeyondLimit);
        check(test, &expected, "900 kΩ", Verdict::BeyondLimit);
        check(test, &expected, ">1", Verdict::Unknown);
        check(test, &expected, "<1", Verdict::BeyondLimit);
    }
}
