//! Which tests a job needs, in working order; the temporary works each stands on; what a failure
//! asks to be done again; the voltage of an insulation test.
//!
//! Promises: stages follow UK order and IEC 60364-6 clause 6.4.3.1 (continuity before insulation,
//! because insulation tested first could miss a core that is not connected); within a stage the
//! work goes board by board in the order of the plan, circuit by circuit, and along the points of
//! a circuit before it moves on; live tests are there only when the job asks for them. It leaves
//! out what to expect (`expected`) and what to say (`reminders`).

mod again;
mod voltage;
mod works;

pub use again::influenced_by;
pub use voltage::{TestVoltage, test_voltage, voltage_class};
pub use works::{MAIN_EARTH, works_in_the_way, works_needed};

use super::{
    layout::{self, Spot},
    place::{BoardId, PointNo},
    plan::{Board, Circuit, CircuitKind, Earthing, Job},
    test::{Between, Stage, Target, TestKind},
};

/// Every required test of a job, in working order, each once.
#[must_use]
pub fn required(job: &Job) -> Vec<Target> {
    let mut all = vec![at_job(TestKind::Leads)];
    all.extend(bonding(job));
    // Stage by stage: the sort is stable, so board, circuit and point order stay as built.
    let mut circuits: Vec<Target> = job
        .boards
        .iter()
        .flat_map(|board| {
            board
                .circuits
                .iter()
                .flat_map(|circuit| dead(job, board, circuit))
        })
        .collect();
    circuits.sort_by_key(|target| target.test.stage());
    all.extend(circuits);
    if job.supply.earthing == Earthing::Tt {
        all.extend(job.supply.electrodes.iter().map(|name| Target {
            name: Some(name.clone()),
            ..at_job(TestKind::Electrode)
        }));
    }
    if job.rules.live_tests {
        all.push(at_job(TestKind::Ze));
        for board in &job.boards {
            all.extend(live(job, board));
        }
    }
    all
}

/// The required tests of one stage, in working order.
#[must_use]
pub fn of_stage(job: &Job, stage: Stage) -> Vec<Target> {
    required(job)
        .into_iter()
        .filter(|target| target.test.stage() == stage)
        .collect()
}

/// The stages a job goes through: those with tests, and the ones that are gates of their own
/// (isolation, instrument, close-up; the live gate when there are live tests).
#[must_use]
pub fn stages(job: &Job) -> Vec<Stage> {
    let tests = required(job);
    Stage::ALL
        .into_iter()
        .filter(|stage| match stage {
            Stage::Isolation | Stage::Instrument | Stage::CloseUp => true,
            Stage::Energise => job.rules.live_tests,
            other => tests.iter().any(|target| target.test.stage() == *other),
        })
        .collect()
}

/// The point where the loop impedance of a circuit is highest: its end, the middle of a ring, or
/// the longest spur. Points without a place in the plan lie where `layout` puts them.
#[must_use]
pub fn furthest_point(circuit: &Circuit) -> PointNo {
    let whole = circuit.length.m;
    let reach = |spot: &Spot| -> f64 {
        if circuit.kind == CircuitKind::Ring {
            // The loop seen from x is x(l - x)/l of it; a spur adds in full.
            spot.at_m * (whole - spot.at_m) / whole + spot.spur_m
        } else {
            spot.path_m()
        }
    };
    let mut best: Option<(PointNo, f64)> = None;
    for spot in layout::spots(circuit) {
        let here = reach(&spot);
        // Ties go to the later point of a radial (its end) and the earlier of a ring.
        let further = match best {
            None => true,
            Some((_, far)) if circuit.kind == CircuitKind::Ring => here > far,
            Some((_, far)) => here >= far,
        };
        if further {
            best = Some((spot.no, here));
        }
    }
    best.map_or(PointNo(1), |(no, _)| no)
}

/// Whether the circuit works at extra-low voltage (SELV or PELV).
#[must_use]
pub fn extra_low(kind: CircuitKind) -> bool {
    matches!(kind, CircuitKind::Selv | CircuitKind::Pelv)
}

fn at_job(test: TestKind) -> Target {
    Target {
        test,
        board: None,
        circuit: None,
        point: None,
        name: None,
    }
}

fn at_board(test: TestKind, board: &BoardId) -> Target {
    Target {
        board: Some(board.clone()),
        ..at_job(test)
    }
}

fn at_circuit(test: TestKind, board: &Board, circuit: &Circuit) -> Target {
    Target {
        circuit: Some(circuit.no),
        ..at_board(test, &board.id)
    }
}

fn bonding(job: &Job) -> Vec<Target> {
    let mut list = vec![at_job(TestKind::MainEarth)];
    list.extend(job.bonds.iter().map(|bond| Target {
        name: Some(bond.name.clone()),
        ..at_job(TestKind::Bonding)
    }));
    list
}

/// The dead tests of one circuit.
fn dead(job: &Job, board: &Board, circuit: &Circuit) -> Vec<Target> {
    let here = |test| at_circuit(test, board, circuit);
    let each_point = |test| {
        circuit.points.iter().map(move |point| Target {
            point: Some(point.no),
            ..at_circuit(test, board, circuit)
        })
    };
    let mut list = Vec::new();
    match circuit.kind {
        CircuitKind::Ring => {
            list.extend([TestKind::RingR1, TestKind::RingRn, TestKind::RingR2].map(here));
            list.extend(each_point(TestKind::RingLineNeutral));
            list.extend(each_point(TestKind::RingLineEarth));
        }
        _ if circuit.cable.cpc.is_none() || circuit.kind == CircuitKind::Selv => {}
        _ if circuit.long_lead => list.extend(each_point(TestKind::R2)),
        _ => list.extend(each_point(TestKind::R1R2)),
    }
    list.extend(
        insulation_pairs(job, circuit)
            .into_iter()
            .map(|between| here(TestKind::Insulation(between))),
    );
    if extra_low(circuit.kind) {
        list.push(here(TestKind::Separation));
    } else {
        list.push(here(TestKind::Polarity));
    }
    list
}

/// Between which conductors the insulation of a circuit is tested (IEC 60364-6 clause 6.4.3.3:
/// between live conductors, and between live conductors and earth, the lives joined if wanted).
#[must_use]
pub fn insulation_pairs(job: &Job, circuit: &Circuit) -> Vec<Between> {
    // Electronics that stay connected would be hurt by, or hide, a test between lives.
    let mut pairs = match (circuit.electronics, circuit.three_phase) {
        (true, _) => return electronics_pairs(circuit),
        (false, true) => vec![
            Between::L1L2,
            Between::L2L3,
            Between::L1L3,
            Between::L1Neutral,
            Between::L2Neutral,
            Between::L3Neutral,
        ],
        (false, false) => vec![Between::LineNeutral],
    };
    match (circuit.kind, job.rules.insulation_separately) {
        // PELV may have a live conductor earthed on purpose; its separation is what counts.
        (CircuitKind::Pelv, _) => {}
        (_, false) => pairs.push(Between::LivesEarth),
        (_, true) if circuit.three_phase => pairs.extend([
            Between::L1Earth,
            Between::L2Earth,
            Between::L3Earth,
            Between::NeutralEarth,
        ]),
        (_, true) => pairs.extend([Between::LineEarth, Between::NeutralEarth]),
    }
    if circuit.without_neutral {
        pairs.retain(|pair| !pair.to_neutral());
    }
    pairs
}

fn electronics_pairs(circuit: &Circuit) -> Vec<Between> {
    match circuit.kind {
        CircuitKind::Pelv => Vec::new(),
        _ => vec![Between::LivesEarth],
    }
}

/// The live tests at one board and its circuits.
fn live(job: &Job, board: &Board) -> Vec<Target> {
    let mut list = Vec::new();
    for circuit in &board.circuits {
        if extra_low(circuit.kind) {
            continue;
        }
        let here = |test| at_circuit(test, board, circuit);
        list.push(Target {
            point: Some(furthest_point(circuit)),
            ..here(TestKind::Zs)
        });
        if circuit.device.rcd.is_some() {
            list.push(here(TestKind::RcdTime));
            if job.rules.rcd_five_times {
                list.push(here(TestKind::RcdTimeFive));
            }
            if job.rules.rcd_half {
                list.push(here(TestKind::RcdHalf));
            }
        }
    }
    list.push(at_board(TestKind::FaultCurrent, &board.id));
    if multiphase(job, board) {
        list.push(at_board(TestKind::PhaseSequence, &board.id));
    }
    list.extend(
        board
            .circuits
            .iter()
            // A distribution circuit's sequence is taken at the board it feeds.
            .filter(|c| c.three_phase && c.kind != CircuitKind::Distribution)
            .map(|circuit| at_circuit(TestKind::PhaseSequence, board, circuit)),
    );
    list.push(at_board(TestKind::Functional, &board.id));
    list
}

/// Whether three phases arrive at a board.
#[must_use]
pub fn multiphase(job: &Job, board: &Board) -> bool {
    match &board.fed_from {
        None => job.supply.three_phase,
        Some((from, no)) => job.circuit(from, *no).is_some_and(|c| c.three_phase),
    }
}
