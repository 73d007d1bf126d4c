//! What a test should read, from the plan and the readings kept so far.
//!
//! Promises: the ambient temperature of the job is in every conductor value; a ratio is used where
//! it needs no length; where no range can be given the reason is. Live limits come with their
//! source and say when it could not be checked. Findings are elsewhere (`findings`).

use super::{
    conductor,
    expect::{Contribution, Expected, Source},
    insulation::{self, Voltage},
    kept::Kept,
    plan::{Circuit, CircuitKind, Conductor, InstrumentRange, Job, Run},
    quantity::Celsius,
    range::{self, Band},
    reading::{Bound, Unit},
    sequence,
    temperature::{self, From20},
    test::{Target, TestKind},
};
use rust_decimal::Decimal;

pub(crate) mod live;

mod radial;
mod ring;

/// What the test of `target` should read.
#[must_use]
pub fn expected(job: &Job, target: &Target, kept: &Kept) -> Expected {
    let circuit = circuit_of(job, target);
    match target.test {
        TestKind::Leads => leads(job),
        TestKind::MainEarth => match job.supply.main_earth {
            Some(run) => conductor_run(job, run, "main earthing conductor"),
            None => unknown(Unit::Ohm, "no main earthing conductor in the plan"),
        },
        TestKind::Bonding => bonding(job, target),
        TestKind::R1R2 | TestKind::R2 => match circuit {
            None => unknown(Unit::Ohm, "no such circuit in the plan"),
            Some(circuit) if circuit.kind == CircuitKind::Ring => {
                ring::expected(job, target, circuit, kept)
            }
            Some(circuit) => radial::expected(job, target, circuit, kept),
        },
        TestKind::RingR1
        | TestKind::RingRn
        | TestKind::RingR2
        | TestKind::RingLineNeutral
        | TestKind::RingLineEarth => match circuit {
            None => unknown(Unit::Ohm, "no such circuit in the plan"),
            Some(circuit) => ring::expected(job, target, circuit, kept),
        },
        TestKind::Insulation(_) | TestKind::Separation => insulating(job, target, circuit, kept),
        TestKind::Electrode => live::electrode(job),
        TestKind::Ze => live::ze(job),
        TestKind::Zs => match circuit {
            None => unknown(Unit::Ohm, "no such circuit in the plan"),
            Some(circuit) => live::zs(job, target, circuit, kept),
        },
        TestKind::FaultCurrent => live::fault_current(job, target, kept),
        TestKind::RcdTime | TestKind::RcdTimeFive => live::rcd_time(target.test, circuit),
        TestKind::Polarity | TestKind::RcdHalf | TestKind::PhaseSequence | TestKind::Functional => {
            unknown(Unit::Ohm, "ticked, not measured")
        }
    }
}

/// The circuit a target belongs to.
pub(crate) fn circuit_of<'a>(job: &'a Job, target: &Target) -> Option<&'a Circuit> {
    job.circuit(target.board.as_ref()?, target.circuit?)
}

/// A reading of the job as a number in the unit its test reads in; only plain figures.
pub(crate) fn figure(kept: &Kept, target: &Target) -> Option<f64> {
    let reading = kept.reading(target)?;
    (reading.bound() == Bound::Exact)
        .then(|| in_unit(reading, target.test.unit()?))
        .flatten()
}

/// A reading's figure in `unit`, whatever unit it was said in.
pub(crate) fn in_unit(reading: &super::reading::Reading, unit: Unit) -> Option<f64> {
    let base: f64 = reading.in_base(unit)?.try_into().ok()?;
    Some(base / 10_f64.powi(unit.base().1))
}

/// The target of another kind of test at the same circuit, without or with a point.
pub(crate) fn sibling(target: &Target, test: TestKind, point: bool) -> Target {
    Target {
        test,
        point: if point { target.point } else { None },
        name: None,
        ..target.clone()
    }
}

pub(super) fn unknown(unit: Unit, reason: impl Into<String>) -> Expected {
    Expected {
        unit,
        low: None,
        nominal: None,
        high: None,
        open: false,
        limit: None,
        why: Vec::new(),
        sources: Vec::new(),
        unknown: Some(reason.into()),
    }
}

pub(super) fn from_band(
    band: Band,
    instrument: &InstrumentRange,
    sources: Vec<Source>,
) -> Expected {
    let (low, nominal, high) = band.shown(range::decimals(instrument));
    Expected {
        low: Some(low),
        nominal: Some(nominal),
        high: Some(high),
        why: band.why,
        sources,
        unknown: None,
        ..unknown(Unit::Ohm, "")
    }
}

/// The temperature at the conductors, held inside the bounds of the type.
pub(crate) fn ambient(job: &Job) -> Celsius {
    Celsius::clamped(job.ambient_c)
}

/// Milliohm per metre of a conductor at the ambient of the job.
pub(crate) fn rate_at_ambient(job: &Job, conductor: Conductor) -> Result<f64, String> {
    let at_20 = conductor::rate(conductor).map_err(|e| e.to_string())?;
    let factor = From20::to(
        job.rules.temperature,
        conductor::material(conductor),
        ambient(job),
    );
    Ok(at_20.milliohm_per_m() * factor.factor())
}

fn leads(job: &Job) -> Expected {
    let instrument = range::continuity_of(job);
    let places = range::decimals(&instrument);
    Expected {
        low: Some(super::quantity::show(
            0.0,
            places,
            super::quantity::Round::Down,
        )),
        high: Some(super::quantity::show(
            1.0,
            places,
            super::quantity::Round::Up,
        )),
        why: vec![Contribution {
            what: "test leads 0.05 to 0.5 Ω, a long lead up to 1 Ω; 0.00 once nulled (common \
                   practice, no source)"
                .into(),
            low: 0.0,
            high: 0.0,
        }],
        unknown: None,
        ..unknown(Unit::Ohm, "")
    }
}

fn bonding(job: &Job, target: &Target) -> Expected {
    let bond = target
        .name
        .as_ref()
        .and_then(|name| job.bonds.iter().find(|bond| &bond.name == name));
    match bond {
        Some(bond) => conductor_run(job, bond.run, &format!("bond to {}", bond.name)),
        None => unknown(Unit::Ohm, "no bonding conductor of that name in the plan"),
    }
}

fn conductor_run(job: &Job, run: Run, what: &str) -> Expected {
    let rate = match rate_at_ambient(job, run.conductor) {
        Ok(rate) => rate,
        Err(reason) => return unknown(Unit::Ohm, reason),
    };
    let instrument = range::continuity_of(job);
    let band = Band::at(
        run.length.m * rate / 1000.0,
        format!(
            "{what}: {} m of {} at {} °C, {rate:.3} mΩ/m",
            run.length.m,
            conductor::words(run.conductor),
            job.ambient_c
        ),
    )
    .under_maximum()
    .length(run.length.basis)
    .terminations(0)
    .note("no fixed limit: 0.05 Ω is a rule of thumb for short runs, not one of BS 7671")
    .instrument(&instrument);
    let sources = vec![
        conductor::source(run.conductor),
        temperature::rule_source(job.rules.temperature),
    ];
    from_band(band, &instrument, sources)
}

/// Sum of the cores that a radial test reads, mΩ/m at 20 °C with their sources.
pub(crate) fn tested_cores(
    circuit: &Circuit,
    test: TestKind,
) -> Result<Vec<Conductor>, &'static str> {
    let cpc = circuit
        .cable
        .cpc
        .ok_or("the plan gives this cable no protective conductor")?;
    Ok(match test {
        TestKind::R2 => vec![cpc],
        _ => vec![circuit.cable.line, cpc],
    })
}

fn insulating(job: &Job, target: &Target, circuit: Option<&Circuit>, kept: &Kept) -> Expected {
    let board = target.board.as_ref().and_then(|id| job.board(id));
    let electronics = circuit.is_some_and(|c| c.electronics);
    // The same choice that tells the tester the voltage to set.
    let voltage = circuit.map_or(Voltage::Low, |c| sequence::voltage_class(job, c));
    let rule = insulation::rule(voltage);
    let instrument = range::insulation_of(job);
    let places = range::decimals(&instrument);
    let mut why = vec![note(format!(
        "test at {} V d.c., minimum {} MΩ",
        rule.test_v, rule.minimum_megohm
    ))];
    if electronics {
        why.push(note(
            "electronics stay in: lives joined, to earth only; better disconnect and test at 500 V"
                .into(),
        ));
    }
    if board.is_some_and(|b| b.surge_protection) && voltage != Voltage::ExtraLow {
        why.push(note(
            "surge protection in this board: take it out, or it pulls a good reading down".into(),
        ));
    }
    let investigate = job.rules.investigate_below_megohm.max(rule.minimum_megohm);
    let mut low = investigate;
    why.push(note(format!(
        "below {investigate} MΩ is investigated although it meets the minimum"
    )));
    // A board as a whole is the parallel of its circuits: what they read bounds what it may read.
    if circuit.is_none()
        && let TestKind::Insulation(between) = target.test
    {
        let parts: Vec<insulation::Span> = kept
            .iter()
            .filter(|(t, _)| {
                t.test == TestKind::Insulation(between)
                    && t.board == target.board
                    && t.circuit.is_some()
            })
            .filter_map(|(t, _)| kept.reading(t).and_then(insulation::Span::of))
            .collect();
        if !parts.is_empty() {
            let all = insulation::parallel(&parts);
            why.push(note(format!(
                "{} circuits kept so far in parallel: at least {:.1} MΩ",
                parts.len(),
                all.low
            )));
            // The meter's own error on either side of the comparison.
            low = low.min(all.low * 0.9).max(0.0);
        }
    }
    Expected {
        low: Some(super::quantity::show(
            low,
            places,
            super::quantity::Round::Down,
        )),
        limit: Some(super::expect::Limit {
            value: Decimal::try_from(rule.minimum_megohm)
                .unwrap_or(Decimal::ONE)
                .normalize(),
            minimum: true,
            source: rule.source.clone(),
        }),
        why,
        sources: vec![rule.source],
        unknown: None,
        ..unknown(Unit::Megohm, "")
    }
}

pub(super) fn note(what: String) -> Contribution {
    Contribution {
        what,
        low: 0.0,
        high: 0.0,
    }
}
