//! What readings that are off most likely mean, ranked, each with its numbers and a next check.
//!
//! Promises: every reading kept for the circuit takes part, not only the newest; a healthy series
//! raises nothing; a finding is a suspicion with a check, never a verdict. The weighing is in
//! `weigh`, its plausibilities in `plausible`; what each fault does to a series is in `radial`,
//! `wiring`, `ring` and `insulating`. Live readings are judged in `live`.

use super::{
    conductor,
    expect::{Expected, Finding, Verdict},
    expected,
    insulation::Span,
    kept::Kept,
    layout,
    plan::{Circuit, CircuitKind, InstrumentRange, Job, Run},
    range,
    reading::{Bound, Reading, Unit},
    test::{Target, TestKind},
};
use insulating::{Around, Pair};
use radial::{At, Series};
use ring::RingSeries;
use weigh::Seen;
use wiring::{Spot, What};

mod insulating;
mod live;
mod plausible;
mod radial;
mod ring;
mod weigh;
mod wiring;

/// Findings for a reading of `target`, with everything kept so far.
pub(crate) fn of(
    job: &Job,
    target: &Target,
    expected: &Expected,
    reading: &Reading,
    kept: &Kept,
    verdict: Verdict,
) -> Vec<Finding> {
    let circuit = expected::circuit_of(job, target);
    let questioned = verdict.questioned();
    match (target.test, circuit) {
        (TestKind::R1R2 | TestKind::R2, Some(circuit)) if circuit.kind != CircuitKind::Ring => {
            of_radial(job, target, circuit, reading, kept, questioned)
        }
        (
            TestKind::RingR1
            | TestKind::RingRn
            | TestKind::RingR2
            | TestKind::RingLineNeutral
            | TestKind::RingLineEarth,
            Some(circuit),
        ) => of_ring(job, target, circuit, reading, kept, questioned),
        (TestKind::Bonding, _) => {
            let bond = job
                .bonds
                .iter()
                .find(|b| Some(&b.name) == target.name.as_ref());
            bond.map_or_else(Vec::new, |b| of_run(job, b.run, reading, questioned))
        }
        (TestKind::MainEarth, _) => job
            .supply
            .main_earth
            .map_or_else(Vec::new, |run| of_run(job, run, reading, questioned)),
        (TestKind::Insulation(_) | TestKind::Separation, _) => {
            of_insulation(job, target, circuit, reading, kept, questioned)
        }
        _ => live::findings(job, target, circuit, expected, reading, verdict),
    }
}

/// What a continuity reading showed. A bound far beyond any conductor counts as open.
fn seen(reading: &Reading) -> Option<Seen> {
    match reading.bound() {
        Bound::Open | Bound::OverRange => Some(Seen::Open),
        Bound::Above => {
            let ohm = expected::in_unit(reading, Unit::Ohm)?;
            Some(if ohm >= 90.0 {
                Seen::Open
            } else {
                Seen::Ohm(ohm)
            })
        }
        Bound::Exact | Bound::Below => Some(Seen::Ohm(expected::in_unit(reading, Unit::Ohm)?)),
    }
}

/// Readings of a kind on a circuit with the one in hand in its place.
fn series_of<'a>(
    kept: &'a Kept,
    target: &'a Target,
    test: TestKind,
    reading: &'a Reading,
) -> Vec<(&'a Target, &'a Reading)> {
    let mut all: Vec<(&Target, &Reading)> = match (target.board.as_ref(), target.circuit) {
        (Some(board), Some(circuit)) => kept
            .series(test, board, circuit)
            .filter(|(t, _)| *t != target)
            .collect(),
        _ => Vec::new(),
    };
    if target.test == test {
        all.push((target, reading));
    }
    all
}

/// What earlier readings say for or against un-nulled leads, as a logarithm: the leads' own test,
/// or a conductor of another circuit that reads as it should with the same leads.
fn leads(job: &Job, target: &Target, kept: &Kept) -> f64 {
    let own = kept.iter().find_map(|(t, _)| {
        (t.test == TestKind::Leads)
            .then(|| expected::figure(kept, t))
            .flatten()
    });
    match own {
        Some(ohm) if ohm > 0.04 => return 3.0,
        Some(_) => return -3.0,
        None => {}
    }
    let proved = kept.iter().any(|(other, _)| {
        let elsewhere = other.circuit != target.circuit || other.board != target.board;
        let conductor = matches!(
            other.test,
            TestKind::R1R2 | TestKind::R2 | TestKind::RingR1 | TestKind::RingRn | TestKind::Bonding
        );
        if !elsewhere || !conductor {
            return false;
        }
        let Some(value) = expected::figure(kept, other) else {
            return false;
        };
        let range = expected::expected(job, other, kept);
        let nominal: Option<f64> = range.nominal.and_then(|n| n.try_into().ok());
        nominal.is_some_and(|n| value <= n * 1.02 + 0.02 && value >= n * 0.85 - 0.02)
    });
    if proved { -4.5 } else { 0.0 }
}

fn of_radial(
    job: &Job,
    target: &Target,
    circuit: &Circuit,
    reading: &Reading,
    kept: &Kept,
    questioned: bool,
) -> Vec<Finding> {
    let Ok(cores) = expected::tested_cores(circuit, target.test) else {
        return Vec::new();
    };
    let rates: Result<Vec<f64>, String> = cores
        .iter()
        .map(|c| expected::rate_at_ambient(job, *c))
        .collect();
    let Ok(rates) = rates else {
        return Vec::new();
    };
    let spots = layout::spots(circuit);
    let furthest = spots
        .iter()
        .max_by(|a, b| a.path_m().total_cmp(&b.path_m()))
        .copied();
    let mut at = Vec::new();
    let mut shown = Vec::new();
    let mut newest = 0;
    for (place, value) in series_of(kept, target, target.test, reading) {
        let spot = match place.point {
            Some(no) => spots.iter().find(|s| s.no == no).copied(),
            None => furthest,
        };
        let (Some(spot), Some(value)) = (spot, seen(value)) else {
            continue;
        };
        if place == target {
            newest = at.len();
        }
        at.push(At {
            no: spot.no.0,
            at_m: spot.at_m,
            spur_m: spot.spur_m,
            off_m: spot.off_m,
            passed: spot.passed,
        });
        shown.push(value);
    }
    if at.is_empty() {
        return Vec::new();
    }
    let lighting = circuit.kind == CircuitKind::Lighting && target.test == TestKind::R1R2;
    let instrument = range::continuity_of(job);
    radial::findings(
        &Series {
            at,
            seen: shown,
            newest,
            switch_ohm: if lighting {
                // Out to the switch and back, half of the allowance on average, spread as widely.
                range::SWITCH_DROP_M * rates[0] / 1000.0
            } else {
                0.0
            },
            cores,
            rates,
            basis: circuit.length.basis,
            whole_m: circuit.length.m,
            instrument: &instrument,
            leads: leads(job, target, kept),
            stray: true,
        },
        questioned,
    )
}

/// One conductor end to end: a bond or the main earthing conductor.
fn of_run(job: &Job, run: Run, reading: &Reading, questioned: bool) -> Vec<Finding> {
    let (Ok(rate), Some(value)) = (expected::rate_at_ambient(job, run.conductor), seen(reading))
    else {
        return Vec::new();
    };
    let instrument: InstrumentRange = range::continuity_of(job);
    radial::findings(
        &Series {
            at: vec![At {
                no: 0,
                at_m: run.length.m,
                spur_m: 0.0,
                off_m: 0.0,
                passed: 0,
            }],
            seen: vec![value],
            newest: 0,
            cores: vec![run.conductor],
            rates: vec![rate],
            basis: run.length.basis,
            whole_m: run.length.m,
            instrument: &instrument,
            switch_ohm: 0.0,
            leads: 0.0,
            stray: true,
        },
        questioned,
    )
}

fn of_ring(
    job: &Job,
    target: &Target,
    circuit: &Circuit,
    reading: &Reading,
    kept: &Kept,
    questioned: bool,
) -> Vec<Finding> {
    let Some(cpc) = circuit.cable.cpc else {
        return Vec::new();
    };
    let conductors = [circuit.cable.line, circuit.cable.neutral, cpc];
    if conductors.iter().any(|c| conductor::rate(*c).is_err()) {
        return Vec::new();
    }
    let rates = conductors.map(|c| expected::rate_at_ambient(job, c).unwrap_or(0.0));
    let whole_m = circuit.length.m;
    let placed = layout::spots(circuit);
    let spots: Vec<Spot> = placed
        .iter()
        .map(|s| Spot {
            no: s.no.0,
            x: s.at_m / whole_m,
            spur_m: s.spur_m,
            off: s.off_m / whole_m,
        })
        .collect();
    let mut what = Vec::new();
    let mut shown = Vec::new();
    let mut newest = 0;
    for test in [
        TestKind::RingR1,
        TestKind::RingRn,
        TestKind::RingR2,
        TestKind::RingLineNeutral,
        TestKind::RingLineEarth,
    ] {
        for (place, value) in series_of(kept, target, test, reading) {
            let spot = place
                .point
                .and_then(|no| placed.iter().position(|s| s.no == no));
            let kind = match test {
                TestKind::RingR1 => What::End(0),
                TestKind::RingRn => What::End(1),
                TestKind::RingR2 => What::End(2),
                TestKind::RingLineNeutral => What::Cross(1, spot),
                _ => What::Cross(2, spot),
            };
            let Some(value) = seen(value) else {
                continue;
            };
            if place == target {
                newest = what.len();
            }
            what.push(kind);
            shown.push(value);
        }
    }
    if what.is_empty() {
        return Vec::new();
    }
    let instrument = range::continuity_of(job);
    ring::findings(
        &RingSeries {
            spots,
            what,
            seen: shown,
            newest,
            cable: circuit.cable,
            rates,
            whole_m,
            basis: circuit.length.basis,
            instrument: &instrument,
            leads: leads(job, target, kept),
        },
        questioned,
    )
}

fn of_insulation(
    job: &Job,
    target: &Target,
    circuit: Option<&Circuit>,
    reading: &Reading,
    kept: &Kept,
    questioned: bool,
) -> Vec<Finding> {
    let instrument = range::insulation_of(job);
    let ceiling: f64 = instrument.ceiling.try_into().unwrap_or(999.0);
    if let Some(finding) = ceiling_slip(reading, &instrument) {
        return vec![finding];
    }
    let between = |test: TestKind| match test {
        TestKind::Insulation(between) => Some(between),
        TestKind::Separation => Some(super::test::Between::OtherCircuits),
        _ => None,
    };
    let mut pairs: Vec<Pair> = kept
        .iter()
        .filter(|(t, _)| *t != target && t.board == target.board && t.circuit == target.circuit)
        .filter_map(|(t, _)| {
            Some(Pair {
                between: between(t.test)?,
                span: Span::of(kept.reading(t)?)?,
                newest: false,
            })
        })
        .collect();
    let (Some(between), Some(span)) = (between(target.test), Span::of(reading)) else {
        return Vec::new();
    };
    pairs.push(Pair {
        between,
        span,
        newest: true,
    });
    let board = target.board.as_ref().and_then(|id| job.board(id));
    insulating::findings(
        &pairs,
        Around {
            surge_protection: board.is_some_and(|b| b.surge_protection),
            electronics: circuit.is_some_and(|c| c.electronics),
            ceiling,
            other_unit: reading.unit().is_some_and(|unit| unit != instrument.unit),
        },
        questioned,
    )
}

/// An over-range insulation display wants its sign and its ceiling: `>999`, not 999, not "open".
fn ceiling_slip(reading: &Reading, instrument: &InstrumentRange) -> Option<Finding> {
    let ceiling = instrument.ceiling;
    let text = match (reading.bound(), reading.value()) {
        (Bound::Open, _) => {
            format!("over range is recorded with its ceiling: >{ceiling}, not open")
        }
        (Bound::Exact, Some(value))
            if value == ceiling && reading.unit().is_none_or(|u| u == instrument.unit) =>
        {
            format!("{ceiling} is the top of this instrument: is it >{ceiling}?")
        }
        _ => return None,
    };
    Some(Finding {
        code: "ceiling",
        text,
        check: "look for the sign on the display".into(),
        weight: 1.0,
    })
}
