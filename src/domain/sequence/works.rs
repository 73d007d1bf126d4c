//! Temporary works: what must be in for a test, and what must not be in with it.
//!
//! Promises: a work has one identity (kind, board, circuit, name) wherever it is named, so that
//! what went in can be matched with what came out. It leaves out keeping the list (the session).

use crate::domain::{
    place::BoardId,
    plan::{Circuit, Job},
    record::{Work, WorkKind},
    test::{Between, Target, TestKind},
};

/// The name under which the main earthing conductor stands on the list of works.
pub const MAIN_EARTH: &str = "main earthing conductor";

/// Longer than this, a run needs the long lead (common practice, no source: ordinary leads are
/// about 1.2 m each).
const REACH_M: f64 = 2.0;

/// The works that must be in for a test.
#[must_use]
pub fn works_needed(job: &Job, target: &Target) -> Vec<Work> {
    let here = |kind| Work {
        kind,
        board: target.board.clone(),
        circuit: target.circuit,
        name: None,
    };
    let named = |kind, name: &str| Work {
        kind,
        board: None,
        circuit: None,
        name: Some(name.into()),
    };
    match target.test {
        TestKind::MainEarth => {
            let long = job.supply.main_earth.is_some_and(|r| r.length.m > REACH_M);
            with_long_lead(named(WorkKind::EarthOff, MAIN_EARTH), long)
        }
        TestKind::Bonding => {
            let name = target.name.as_deref().unwrap_or_default();
            let bond = job.bonds.iter().find(|bond| bond.name == name);
            let long = bond.is_some_and(|bond| bond.run.length.m > REACH_M);
            with_long_lead(named(WorkKind::EarthOff, name), long)
        }
        TestKind::R1R2 => vec![here(WorkKind::LineEarthLink)],
        TestKind::R2 => vec![here(WorkKind::LongLeadNull)],
        TestKind::RingR1 | TestKind::RingRn | TestKind::RingR2 => vec![here(WorkKind::RingLegsOut)],
        TestKind::RingLineNeutral => {
            vec![
                here(WorkKind::RingLegsOut),
                here(WorkKind::CrossLineNeutral),
            ]
        }
        TestKind::RingLineEarth => {
            vec![here(WorkKind::RingLegsOut), here(WorkKind::CrossLineEarth)]
        }
        TestKind::Insulation(between) => {
            let joined = matches!(between, Between::LivesEarth | Between::OtherCircuits);
            insulation(job, target, joined)
        }
        TestKind::Separation => insulation(job, target, true),
        TestKind::Electrode => vec![Work {
            name: target.name.clone(),
            ..here(WorkKind::ElectrodeOff)
        }],
        TestKind::Ze => vec![named(WorkKind::EarthOff, MAIN_EARTH)],
        TestKind::Leads
        | TestKind::Polarity
        | TestKind::Zs
        | TestKind::FaultCurrent
        | TestKind::RcdTime
        | TestKind::RcdTimeFive
        | TestKind::RcdHalf
        | TestKind::PhaseSequence
        | TestKind::Functional => Vec::new(),
    }
}

/// The works among those that are in which would falsify a test, and must come out before it:
/// other links of the same circuit, joined lives between lives, a long-lead null with short leads.
#[must_use]
pub fn works_in_the_way(job: &Job, target: &Target, in_place: &[Work]) -> Vec<Work> {
    let needed = works_needed(job, target);
    let same_circuit = |work: &Work| work.board == target.board && work.circuit == target.circuit;
    in_place
        .iter()
        .filter(|work| !needed.contains(work))
        .filter(|work| match work.kind {
            WorkKind::LineEarthLink
            | WorkKind::CrossLineNeutral
            | WorkKind::CrossLineEarth
            | WorkKind::LivesJoined
            | WorkKind::RingLegsOut => same_circuit(work) && target.circuit.is_some(),
            // The null sits in the instrument: it falsifies every low reading, wherever taken.
            WorkKind::LongLeadNull => reads_continuity(target.test),
            // One at a time; and a protective conductor that is off falsifies earth readings.
            WorkKind::EarthOff => !matches!(target.test, TestKind::Leads),
            WorkKind::LoadsOut | WorkKind::ElectrodeOff => false,
        })
        .cloned()
        .collect()
}

fn reads_continuity(test: TestKind) -> bool {
    matches!(
        test,
        TestKind::Leads
            | TestKind::MainEarth
            | TestKind::Bonding
            | TestKind::R1R2
            | TestKind::R2
            | TestKind::RingR1
            | TestKind::RingRn
            | TestKind::RingR2
            | TestKind::RingLineNeutral
            | TestKind::RingLineEarth
    )
}

fn with_long_lead(off: Work, long: bool) -> Vec<Work> {
    let mut works = vec![off];
    if long {
        // One null serves every bond: its identity has no name.
        works.push(Work {
            kind: WorkKind::LongLeadNull,
            board: None,
            circuit: None,
            name: None,
        });
    }
    works
}

fn insulation(job: &Job, target: &Target, joined: bool) -> Vec<Work> {
    let mut works = Vec::new();
    let Some((board, circuit)) = circuit_of(job, target) else {
        return works;
    };
    if job.board(board).is_some_and(|b| b.surge_protection) {
        // Once a board, not once a circuit.
        works.push(Work {
            kind: WorkKind::LoadsOut,
            board: Some(board.clone()),
            circuit: None,
            name: Some("surge protection".into()),
        });
    }
    if !circuit.electronics {
        works.push(Work {
            kind: WorkKind::LoadsOut,
            board: Some(board.clone()),
            circuit: Some(circuit.no),
            name: None,
        });
    }
    if joined {
        works.push(Work {
            kind: WorkKind::LivesJoined,
            board: Some(board.clone()),
            circuit: Some(circuit.no),
            name: None,
        });
    }
    works
}

fn circuit_of<'a>(job: &'a Job, target: &'a Target) -> Option<(&'a BoardId, &'a Circuit)> {
    let board = target.board.as_ref()?;
    Some((board, job.circuit(board, target.circuit?)?))
}
