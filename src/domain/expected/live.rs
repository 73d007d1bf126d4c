//! Expected values and limits of the live tests and of earth electrodes.

use super::{circuit_of, figure, note, rate_at_ambient, sibling, unknown};
use crate::domain::{
    expect::{Expected, Limit, Source},
    kept::Kept,
    layout,
    loops::{self, Disconnection},
    plan::{Circuit, CircuitKind, Earthing, Job},
    quantity::{Round, show},
    reading::Unit,
    residual::{self, Multiple},
    test::{Target, TestKind},
};

/// Loop resistance of the circuit at a point, cold, and how it is known.
pub(crate) fn circuit_r1r2(
    job: &Job,
    target: &Target,
    circuit: &Circuit,
    kept: &Kept,
) -> Option<(f64, String)> {
    if circuit.kind == CircuitKind::Ring {
        let at_point = figure(kept, &sibling(target, TestKind::RingLineEarth, true));
        let ends = (
            figure(kept, &sibling(target, TestKind::RingR1, false)),
            figure(kept, &sibling(target, TestKind::RingR2, false)),
        );
        if let (Some(_), Some(value)) = (target.point, at_point) {
            return Some((value, "R1+R2 as measured at the point".into()));
        }
        let highest = highest(kept, target, TestKind::RingLineEarth);
        if let Some(value) = highest {
            return Some((value, "R1+R2 as measured, highest of the ring".into()));
        }
        if let (Some(r1), Some(r2)) = ends {
            return Some(((r1 + r2) / 4.0, "(r1+r2)/4 as measured".into()));
        }
    } else {
        let at_point = figure(kept, &sibling(target, TestKind::R1R2, true));
        if let (Some(_), Some(value)) = (target.point, at_point) {
            return Some((value, "R1+R2 as measured at the point".into()));
        }
        if target.point.is_none()
            && let Some(value) = highest(kept, target, TestKind::R1R2)
        {
            return Some((value, "R1+R2 as measured, highest".into()));
        }
    }
    let cpc = circuit.cable.cpc?;
    let rate = rate_at_ambient(job, circuit.cable.line).ok()? + rate_at_ambient(job, cpc).ok()?;
    let metres = match target.point {
        Some(no) => layout::spots(circuit)
            .into_iter()
            .find(|spot| spot.no == no)
            .map(|spot| (spot.at_m, spot.spur_m))?,
        None => (circuit.length.m, 0.0),
    };
    let run = if circuit.kind == CircuitKind::Ring {
        circuit.length.m / 4.0
    } else {
        metres.0
    };
    Some((
        (run + metres.1) * rate / 1000.0,
        "R1+R2 by length, not measured".into(),
    ))
}

/// The highest plain figure of a series.
fn highest(kept: &Kept, target: &Target, test: TestKind) -> Option<f64> {
    let (board, circuit) = (target.board.as_ref()?, target.circuit?);
    kept.series(test, board, circuit)
        .filter_map(|(t, _)| figure(kept, t))
        .max_by(f64::total_cmp)
}

/// External impedance as measured, else at the board, else as declared.
pub(crate) fn external(job: &Job, target: &Target, kept: &Kept) -> Option<(f64, String)> {
    let measured = kept
        .iter()
        .find_map(|(t, _)| (t.test == TestKind::Ze).then(|| figure(kept, t)).flatten());
    let board = target.board.as_ref().and_then(|id| job.board(id));
    let zdb = board.and_then(|b| b.zdb_ohm);
    if let Some(z) = zdb {
        return Some((z, format!("loop impedance at the board {z} Ω as given")));
    }
    if let Some(board) = board
        && let Some((feeder_board, feeder)) = &board.fed_from
    {
        // The impedance at a sub-board is that of its own supply plus its feeder.
        let feeder_target = Target {
            test: TestKind::Zs,
            board: Some(feeder_board.clone()),
            circuit: Some(*feeder),
            point: None,
            name: None,
        };
        if feeder_board != &board.id {
            let circuit = circuit_of(job, &feeder_target)?;
            let (before, how) = external(job, &feeder_target, kept)?;
            let (own, feeder_how) = circuit_r1r2(job, &feeder_target, circuit, kept)?;
            return Some((before + own, format!("{how}; feeder {feeder_how}")));
        }
    }
    match (measured, job.supply.ze_ohm) {
        (Some(z), _) => Some((z, format!("Ze {z} Ω as measured"))),
        (None, Some(z)) => Some((z, format!("Ze {z} Ω as declared"))),
        (None, None) => None,
    }
}

/// The highest Zs a circuit may have by its device or, in TT, by its residual current device.
pub(crate) fn loop_limit(job: &Job, circuit: &Circuit) -> Result<(f64, Vec<Source>), String> {
    let device = circuit.device;
    if job.supply.earthing == Earthing::Tt
        && let Some(rcd) = device.rcd
    {
        let (ohm, source) = residual::electrode_limit(job.rules.electrode, rcd.rated_ma);
        return Ok((ohm, vec![source]));
    }
    let (_, time) = loops::disconnection(job.supply.earthing, circuit.kind, device.rated_a);
    let maximum = loops::maximum(device.kind, device.rated_a, job.supply.u0_v, time)
        .or_else(|error| {
            // A fuse whose 0.4 s figure is not held: the 5 s one would be too generous.
            if time == Disconnection::FiveSeconds {
                loops::maximum(
                    device.kind,
                    device.rated_a,
                    job.supply.u0_v,
                    Disconnection::FourTenths,
                )
            } else {
                Err(error)
            }
        })
        .map_err(|e| e.to_string())?;
    Ok((maximum.ohm, vec![maximum.source]))
}

pub(super) fn zs(job: &Job, target: &Target, circuit: &Circuit, kept: &Kept) -> Expected {
    let tt_with_rcd = job.supply.earthing == Earthing::Tt && circuit.device.rcd.is_some();
    let (limit, mut sources) = match loop_limit(job, circuit) {
        Ok((ohm, sources)) => {
            // The touch-voltage rule holds as it is; device tables are for warm conductors.
            let cold = if tt_with_rcd {
                ohm
            } else {
                loops::cold(ohm, job.rules.cold_loop)
            };
            (Some(cold), sources)
        }
        Err(reason) => return unknown(Unit::Ohm, reason),
    };
    if !tt_with_rcd {
        sources.push(loops::cold_source(job.rules.cold_loop));
    }
    let predicted = external(job, target, kept).zip(circuit_r1r2(job, target, circuit, kept));
    let mut why = Vec::new();
    let (nominal, high) = match &predicted {
        Some(((ze, ze_how), (r, r_how))) => {
            let sum = ze + r;
            why.push(note(format!("{ze_how} + {r:.3} Ω {r_how}, cold")));
            why.push(note(
                "parallel paths may make it lower; that is no failure".into(),
            ));
            (Some(sum), Some(sum * 1.1 + 0.05))
        }
        None => {
            why.push(note(
                "no external impedance known yet: no prediction".into(),
            ));
            (None, None)
        }
    };
    Expected {
        low: None,
        nominal: nominal.map(|v| show(v, 2, Round::Nearest)),
        high: high.map(|v| show(v, 2, Round::Up)),
        limit: limit.map(|value| Limit {
            value: show(value, 2, Round::Down),
            minimum: false,
            source: sources[0].clone(),
        }),
        why,
        sources,
        unknown: None,
        ..unknown(Unit::Ohm, "")
    }
}

pub(super) fn ze(job: &Job) -> Expected {
    let guide = loops::ze_guide(job.supply.earthing);
    let mut why = vec![note(
        "supply off, main earthing conductor off at one end, reconnected at once".into(),
    )];
    if let Some(declared) = job.supply.ze_ohm {
        why.push(note(format!("declared {declared} Ω")));
    }
    Expected {
        nominal: job.supply.ze_ohm.map(|v| show(v, 2, Round::Nearest)),
        high: guide.as_ref().map(|(ohm, _)| show(*ohm, 2, Round::Down)),
        limit: None,
        why,
        sources: guide.into_iter().map(|(_, source)| source).collect(),
        unknown: None,
        ..unknown(Unit::Ohm, "")
    }
}

pub(super) fn electrode(job: &Job) -> Expected {
    // The largest residual current device of the job decides: it needs the most fault current.
    let rated = job
        .boards
        .iter()
        .flat_map(|board| &board.circuits)
        .filter_map(|circuit| circuit.device.rcd)
        .map(|rcd| rcd.rated_ma)
        .max_by(f64::total_cmp);
    let Some(rated) = rated else {
        return unknown(
            Unit::Ohm,
            "no residual current device in the plan, so no limit for the electrode",
        );
    };
    let (ohm, source) = residual::electrode_limit(job.rules.electrode, rated);
    Expected {
        high: Some(show(200.0_f64.min(ohm), 0, Round::Down)),
        limit: Some(Limit {
            value: show(ohm, 0, Round::Down),
            minimum: false,
            source: source.clone(),
        }),
        why: vec![
            note(format!("largest residual current device {rated} mA")),
            note("above 200 Ω an electrode may not be stable".into()),
        ],
        sources: vec![source],
        unknown: None,
        ..unknown(Unit::Ohm, "")
    }
}

pub(super) fn fault_current(job: &Job, target: &Target, kept: &Kept) -> Expected {
    let Some((z, how)) = external(job, target, kept).filter(|(z, _)| *z > 0.0) else {
        return match job.supply.fault_ka {
            Some(ka) => Expected {
                nominal: Some(show(ka, 2, Round::Nearest)),
                why: vec![note(format!("declared {ka} kA"))],
                unknown: None,
                ..unknown(Unit::Kiloamp, "")
            },
            None => unknown(
                Unit::Kiloamp,
                "neither external impedance nor fault current known",
            ),
        };
    };
    let three = job.supply.three_phase;
    let at = |z: f64| loops::fault_ka(job.supply.u0_v, z, three);
    // A loop tester's last digits (0.03 Ω) decide here; line to neutral may also be lower than
    // line to earth, so the upper end is generous.
    let upper = (z * 0.5 - 0.03).max(0.005);
    Expected {
        low: Some(show(at(z * 1.1 + 0.03), 2, Round::Down)),
        nominal: Some(show(at(z), 2, Round::Nearest)),
        high: Some(show(at(upper), 2, Round::Up)),
        why: vec![
            note(format!("{} V over {how}", job.supply.u0_v)),
            note(
                if three {
                    "three-phase: twice the line to neutral value"
                } else {
                    "record the larger of L-N and L-E"
                }
                .into(),
            ),
        ],
        sources: vec![Source {
            text: "U0/Z; three-phase doubled by trade practice".into(),
            checked: true,
        }],
        unknown: None,
        ..unknown(Unit::Kiloamp, "")
    }
}

pub(super) fn rcd_time(test: TestKind, circuit: Option<&Circuit>) -> Expected {
    let Some(rcd) = circuit.and_then(|c| c.device.rcd) else {
        return unknown(
            Unit::Millisecond,
            "the plan gives this circuit no residual current device",
        );
    };
    let multiple = if test == TestKind::RcdTimeFive {
        Multiple::Five
    } else {
        Multiple::One
    };
    let times = residual::times(multiple, rcd.delayed);
    Expected {
        low: times.low_ms.map(|ms| show(ms, 0, Round::Nearest)),
        high: Some(show(times.high_ms, 0, Round::Nearest)),
        limit: Some(Limit {
            value: show(times.high_ms, 0, Round::Nearest),
            minimum: false,
            source: times.source.clone(),
        }),
        why: vec![note(format!(
            "{} mA{}, a time equal to the limit is within it",
            rcd.rated_ma,
            if rcd.delayed { ", time-delayed" } else { "" }
        ))],
        sources: vec![times.source],
        unknown: None,
        ..unknown(Unit::Millisecond, "")
    }
}
