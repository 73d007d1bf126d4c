//! The columns of a circuit's row: of many values, the one that matters most.
//!
//! Promises: for resistances and times the highest, for insulation the lowest, a `>299` counts as
//! more than 299 and an open circuit as more than any figure; the marks of all values behind a cell
//! are on it, so that a low one does not hide behind the highest.

use std::cmp::Ordering;

use rust_decimal::Decimal;

use super::model::{Cell, Columns};
use crate::{
    domain::{
        kept::Value,
        reading::{Bound, Unit},
        test::{Between, Target, TestKind},
    },
    report::{
        history::{History, Shown},
        review::Material,
        words,
    },
};

#[derive(Clone, Copy, PartialEq)]
enum Which {
    Highest,
    Lowest,
}

/// The columns for the targets of one circuit.
pub(super) fn columns(material: &Material, history: &History, targets: &[&Target]) -> Columns {
    let cell = |which, wanted: fn(TestKind) -> bool| {
        let these: Vec<&Target> = targets.iter().copied().filter(|t| wanted(t.test)).collect();
        cell(material, history, &these, which)
    };
    use Which::{Highest, Lowest};
    Columns {
        r1: cell(Highest, |t| t == TestKind::RingR1),
        rn: cell(Highest, |t| t == TestKind::RingRn),
        r2: cell(Highest, |t| t == TestKind::RingR2),
        // On a ring, R1+R2 is the highest of the line-cpc readings across it (IET Wiring Matters
        // 89, ring final circuits).
        r1_r2: cell(Highest, |t| {
            matches!(t, TestKind::R1R2 | TestKind::R2 | TestKind::RingLineEarth)
        }),
        insulation_live: cell(
            Lowest,
            |t| matches!(t, TestKind::Insulation(between) if between_lives(between)),
        ),
        insulation_earth: cell(Lowest, |t| {
            matches!(t, TestKind::Separation)
                || matches!(t, TestKind::Insulation(between) if !between_lives(between))
        }),
        polarity: cell(Highest, |t| t == TestKind::Polarity),
        zs: cell(Highest, |t| t == TestKind::Zs),
        rcd_time: cell(Highest, |t| t == TestKind::RcdTime),
        functional: cell(Highest, |t| {
            matches!(
                t,
                TestKind::Functional | TestKind::PhaseSequence | TestKind::RcdHalf
            )
        }),
    }
}

fn between_lives(between: Between) -> bool {
    matches!(
        between,
        Between::LineNeutral
            | Between::L1L2
            | Between::L2L3
            | Between::L1L3
            | Between::L1Neutral
            | Between::L2Neutral
            | Between::L3Neutral
    )
}

fn cell(material: &Material, history: &History, targets: &[&Target], which: Which) -> Cell {
    let mut cell = Cell {
        state: "not-required",
        value: None,
        unit: None,
        marks: vec![],
        entry: None,
    };
    let values: Vec<&Shown> = targets
        .iter()
        .filter_map(|target| history.counting(target))
        .collect();
    let Some(worst) = values.iter().copied().reduce(|a, b| {
        let order = compare(a, b);
        let keep = match which {
            Which::Highest => order != Ordering::Less,
            Which::Lowest => order != Ordering::Greater,
        };
        if keep { a } else { b }
    }) else {
        cell.state = match targets {
            [] => "not-required",
            all if all
                .iter()
                .all(|t| material.standing.skipped.contains_key(*t)) =>
            {
                "left-out"
            }
            _ => "open",
        };
        return cell;
    };
    cell.state = if values.len() == targets.len() {
        "measured"
    } else {
        "partly"
    };
    match &worst.value {
        Some(Value::Reading(reading)) => {
            cell.value = Some(reading.figure());
            cell.unit = reading.unit().map(|unit| unit.word().to_owned());
        }
        _ => cell.value = Some(worst.text.clone()),
    }
    for shown in &values {
        let mark = words::mark(shown.verdict);
        // Ticked tests have no range: that needs no mark.
        if !mark.is_empty() && shown.target.test.unit().is_some() && !cell.marks.contains(&mark) {
            cell.marks.push(mark);
        }
    }
    if values.iter().any(|shown| shown.amends.is_some()) {
        cell.marks.push("(A)");
    }
    cell.entry = Some(worst.entry.no);
    cell
}

fn compare(a: &Shown, b: &Shown) -> Ordering {
    key(a).cmp(&key(b))
}

/// Orders values of one kind of test: by figure in the base unit, then `<` before `=` before `>`.
/// A tick that is not there orders above all, as the value that matters most.
fn key(shown: &Shown) -> (Decimal, u8) {
    match &shown.value {
        Some(Value::Reading(reading)) => {
            let own = shown.target.test.unit().unwrap_or(Unit::Ohm);
            let rank = match reading.bound() {
                Bound::Below => 0,
                Bound::Exact => 1,
                Bound::Above => 2,
                Bound::Open | Bound::OverRange => 3,
            };
            (reading.in_base(own).unwrap_or(Decimal::MAX), rank)
        }
        Some(Value::Ticked(true)) => (Decimal::ZERO, 0),
        Some(Value::Ticked(false)) => (Decimal::ONE, 0),
        None => (Decimal::MAX, 9),
    }
}
