//! Expected values of ring final circuits: ends by length or by ratio, cross-connected readings by
//! the ends when they are known.

use super::{figure, from_band, rate_at_ambient, sibling, unknown};
use crate::domain::{
    conductor,
    expect::{Expected, Source},
    kept::Kept,
    layout::{self, Spot},
    plan::{Circuit, Conductor, Job},
    quantity::Ohms,
    range::{self, Band},
    reading::Unit,
    ring::{self, Ends},
    temperature,
    test::{Target, TestKind},
};

pub(super) fn expected(job: &Job, target: &Target, circuit: &Circuit, kept: &Kept) -> Expected {
    let Some(cpc) = circuit.cable.cpc else {
        return unknown(
            Unit::Ohm,
            "the plan gives this cable no protective conductor",
        );
    };
    let rates = [circuit.cable.line, circuit.cable.neutral, cpc].map(|c| rate_at_ambient(job, c));
    let [Ok(line), Ok(neutral), Ok(earth)] = rates else {
        let reason = rates.into_iter().find_map(Result::err).unwrap_or_default();
        return unknown(Unit::Ohm, reason);
    };
    let mut sources: Vec<Source> = [circuit.cable.line, circuit.cable.neutral, cpc]
        .map(conductor::source)
        .to_vec();
    sources.dedup();
    sources.push(temperature::rule_source(job.rules.temperature));
    match target.test {
        TestKind::RingR1 => end(
            job,
            target,
            circuit,
            kept,
            line,
            circuit.cable.line,
            sources,
        ),
        TestKind::RingRn => end(
            job,
            target,
            circuit,
            kept,
            neutral,
            circuit.cable.neutral,
            sources,
        ),
        TestKind::RingR2 => end(job, target, circuit, kept, earth, cpc, sources),
        TestKind::R2 => unknown(
            Unit::Ohm,
            "a ring is proved end to end and cross-connected, not by a long lead",
        ),
        other => {
            let ends = Ends {
                r1: Ohms::clamped(circuit.length.m * line / 1000.0),
                rn: Ohms::clamped(circuit.length.m * neutral / 1000.0),
                r2: Ohms::clamped(circuit.length.m * earth / 1000.0),
            };
            let pair = if other == TestKind::RingLineNeutral {
                (line, neutral)
            } else {
                (line, earth)
            };
            cross(job, target, circuit, kept, ends, pair, sources)
        }
    }
}

/// The end-to-end reading of one core: by the ratio to another core already kept (no length
/// needed), else by length.
fn end(
    job: &Job,
    target: &Target,
    circuit: &Circuit,
    kept: &Kept,
    rate: f64,
    core: Conductor,
    sources: Vec<Source>,
) -> Expected {
    let instrument = range::continuity_of(job);
    let others = [
        (TestKind::RingR1, Some(circuit.cable.line), "r1"),
        (TestKind::RingRn, Some(circuit.cable.neutral), "rn"),
    ];
    for (test, other, name) in others {
        if test == target.test {
            continue;
        }
        let Some(measured) = figure(kept, &sibling(target, test, false)) else {
            continue;
        };
        let Some(Ok(other_rate)) = other.map(|c| rate_at_ambient(job, c)) else {
            continue;
        };
        let ratio = rate / other_rate;
        let band = Band::at(
            measured * ratio,
            format!("{name} {measured} Ω x {ratio:.3} (ratio of the cores, no length needed)"),
        );
        let band = if (ratio - 1.0).abs() < 1e-9 {
            let by = range::RING_AGREEMENT_OHM.max(0.03 * measured);
            band.widen("like cores agree within 0.05 Ω", by, by)
        } else {
            let by = measured * ratio * range::CORE_SPREAD;
            band.widen(
                format!("spread between cores ±{:.0} %", range::CORE_SPREAD * 100.0),
                by,
                by,
            )
        };
        // The gain error of one instrument is common to both readings; the last digits are not.
        let digits = instrument.accuracy_digits * range::step(&instrument) * (1.0 + ratio);
        let band = band.widen("last digits of both readings", digits, digits);
        return from_band(band, &instrument, sources);
    }
    let band = Band::at(
        circuit.length.m * rate / 1000.0,
        format!(
            "{} m of {} at {} °C, {rate:.2} mΩ/m",
            circuit.length.m,
            conductor::words(core),
            job.ambient_c
        ),
    )
    .under_maximum()
    .length(circuit.length.basis)
    .terminations(circuit.points.len())
    .instrument(&instrument);
    from_band(band, &instrument, sources)
}

/// A cross-connected reading at a point, at the board (no point), or half way round (R1+R2
/// without a point).
fn cross(
    job: &Job,
    target: &Target,
    circuit: &Circuit,
    kept: &Kept,
    planned: Ends,
    pair: (f64, f64),
    sources: Vec<Source>,
) -> Expected {
    let instrument = range::continuity_of(job);
    let spots = layout::spots(circuit);
    let spot = match target.point {
        Some(no) => match spots.iter().find(|spot| spot.no == no) {
            Some(spot) => *spot,
            None => return unknown(Unit::Ohm, "no such point in the plan"),
        },
        None => Spot {
            no: crate::domain::place::PointNo(0),
            at_m: if target.test == TestKind::R1R2 {
                circuit.length.m / 2.0
            } else {
                0.0
            },
            spur_m: 0.0,
            off_m: 0.0,
            passed: 0,
        },
    };
    let x = spot.at_m / circuit.length.m;
    let second = if target.test == TestKind::RingLineNeutral {
        TestKind::RingRn
    } else {
        TestKind::RingR2
    };
    let measured = (
        figure(kept, &sibling(target, TestKind::RingR1, false)),
        figure(kept, &sibling(target, second, false)),
    );
    let at = |a: Ohms, b: Ohms| ring::cross(a, b, x);
    let branch = spot.spur_m * (pair.0 + pair.1) / 1000.0;
    let band = if let (Some(a), Some(b)) = measured {
        let reading = at(Ohms::clamped(a), Ohms::clamped(b));
        // A quarter of each end's error, then the agreement the trade asks for.
        let by = range::RING_AGREEMENT_OHM.max(0.04 * reading + 0.02);
        Band::at(
            reading,
            format!("ends {a} and {b} Ω as measured, {:.0} % round", x * 100.0),
        )
        .widen("cross readings agree within 0.05 Ω", by, by)
    } else {
        let b = if second == TestKind::RingRn {
            planned.rn
        } else {
            planned.r2
        };
        Band::at(
            at(planned.r1, b),
            format!(
                "{} m ring at {} °C, {:.0} % round",
                circuit.length.m,
                job.ambient_c,
                x * 100.0
            ),
        )
        .under_maximum()
        .length(circuit.length.basis)
        .terminations(circuit.points.len() / 2)
        .instrument(&instrument)
    };
    let band = if branch > 0.0 {
        let share = range::length_share(circuit.length.basis);
        let mut longer = band.widen(
            format!("spur of {} m adds {branch:.3} Ω in full", spot.spur_m),
            branch * (range::UNDER_MAXIMUM + share),
            branch * share,
        );
        longer.nominal += branch;
        longer.low += branch;
        longer.high += branch;
        longer
    } else {
        band
    };
    from_band(band, &instrument, sources)
}
