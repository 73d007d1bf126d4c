//! What is odd about a job although nothing in it is wrong.
//!
//! Promises: a notice never stops a job; it names the place and the oddity. It leaves out design
//! checks that need the physics (loop impedance, voltage drop).

use crate::domain::plan::{Board, Circuit, CircuitKind, Conductor, Earthing, Job};

/// Something worth telling.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Notice {
    /// One sentence.
    pub text: String,
}

/// Every oddity of a job, in the order of the plan.
pub(super) fn oddities(job: &Job) -> Vec<Notice> {
    let mut told = Vec::new();
    let mut tell = |text: String| told.push(Notice { text });
    if job.supply.ze_ohm.is_none() {
        tell("[supply] gives no ze-ohm: Zs cannot be predicted before energising".into());
    }
    if job.supply.main_earth.is_none() {
        tell("[supply] gives no main-earth: its test has no expected range".into());
    }
    if job.supply.earthing == Earthing::Tt {
        for (board, circuit) in circuits(job) {
            if circuit.device.rcd.is_none() && !extra_low(circuit) {
                tell(format!(
                    "{}/{}: TT without an RCD; disconnection then rests on the electrode alone",
                    board.id, circuit.no
                ));
            }
        }
    }
    for board in &job.boards {
        if board.fed_from.is_none() && board.id != job.boards[0].id {
            tell(format!(
                "{}: no `fed-from`; it is taken as a second origin",
                board.id
            ));
        }
    }
    for (board, circuit) in circuits(job) {
        for text in of_circuit(job, board, circuit) {
            tell(format!("{}/{}: {text}", board.id, circuit.no));
        }
    }
    told
}

fn circuits(job: &Job) -> impl Iterator<Item = (&Board, &Circuit)> {
    job.boards
        .iter()
        .flat_map(|board| board.circuits.iter().map(move |circuit| (board, circuit)))
}

fn extra_low(circuit: &Circuit) -> bool {
    matches!(circuit.kind, CircuitKind::Selv | CircuitKind::Pelv)
}

fn of_circuit(job: &Job, board: &Board, circuit: &Circuit) -> Vec<String> {
    let mut told = Vec::new();
    let size = |conductor: &Conductor| match conductor {
        Conductor::Size { mm2, .. } => Some(*mm2),
        Conductor::Given { .. } => None,
    };
    let line = size(&circuit.cable.line);
    let cpc = circuit.cable.cpc.as_ref().and_then(size);
    if let (Some(line), Some(cpc)) = (line, cpc)
        && cpc > line
    {
        told.push(format!(
            "the protective conductor ({cpc} mm²) is larger than the line ({line} mm²); were \
             they swapped?"
        ));
    }
    if circuit.kind == CircuitKind::Ring && circuit.points.len() == 1 {
        told.push("a ring with one point".into());
    }
    if circuit.kind == CircuitKind::Ring && circuit.three_phase {
        told.push("a three-phase ring".into());
    }
    if circuit.kind == CircuitKind::Ring && circuit.long_lead {
        told.push("`long-lead` does nothing on a ring: r2 is measured end to end".into());
    }
    if circuit.kind == CircuitKind::Selv && circuit.cable.cpc.is_some() {
        told.push("SELV with a protective conductor; SELV is not earthed. Is it PELV?".into());
    }
    if circuit.kind == CircuitKind::Distribution
        && !job
            .boards
            .iter()
            .any(|b| b.fed_from.as_ref() == Some(&(board.id.clone(), circuit.no)))
    {
        told.push("a distribution circuit that feeds no board of this job".into());
    }
    if let Some(design) = circuit.design_a
        && design > circuit.device.rated_a
    {
        told.push(format!(
            "design current {design} A above the device's {} A",
            circuit.device.rated_a
        ));
    }
    if circuit.length.m > 500.0 {
        told.push(format!("a run of {} m is unusually long", circuit.length.m));
    }
    let mains: Vec<f64> = circuit
        .points
        .iter()
        .filter(|p| p.spur_m.is_none())
        .filter_map(|p| p.at_m)
        .collect();
    if mains.windows(2).any(|pair| pair[1] < pair[0]) {
        told.push("points do not stand in the order of their `at-m`".into());
    }
    told
}
