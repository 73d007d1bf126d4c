//! Where the points of a circuit lie along its run, as far as the plan says.
//!
//! Points without a position are spread evenly between those that have one (the board is at zero,
//! the end of a radial or the other leg of a ring at the whole length), with the uncertainty that
//! goes with it. It leaves out resistance.

use super::{
    place::PointNo,
    plan::{Circuit, CircuitKind},
};

/// A point on the run.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Spot {
    /// Its number.
    pub no: PointNo,
    /// Metres along the run (of a ring: along the loop from leg 1).
    pub at_m: f64,
    /// Metres of branch, zero on the run.
    pub spur_m: f64,
    /// How far `at_m` may be off, m.
    pub off_m: f64,
    /// Points of the run passed on the way.
    pub passed: usize,
}

impl Spot {
    /// Metres of cable from the board to the point of a radial.
    #[must_use]
    pub fn path_m(&self) -> f64 {
        self.at_m + self.spur_m
    }
}

/// The points of a circuit, in the order of the plan.
#[must_use]
pub fn spots(circuit: &Circuit) -> Vec<Spot> {
    let whole = circuit.length.m;
    let ring = circuit.kind == CircuitKind::Ring;
    let on_run: Vec<Option<f64>> = circuit
        .points
        .iter()
        .filter(|point| point.spur_m.is_none())
        .map(|point| point.at_m)
        .collect();
    let placed = spread(&on_run, whole, ring);
    let mut next = 0_usize;
    circuit
        .points
        .iter()
        .map(|point| {
            if let Some(spur_m) = point.spur_m {
                // A branch without a stated start leaves from the point before it.
                let (before_m, before_off) = next
                    .checked_sub(1)
                    .and_then(|index| placed.get(index))
                    .copied()
                    .unwrap_or((0.0, whole / 4.0));
                Spot {
                    no: point.no,
                    at_m: point.at_m.unwrap_or(before_m).clamp(0.0, whole),
                    spur_m,
                    off_m: if point.at_m.is_some() {
                        0.5
                    } else {
                        before_off
                    },
                    passed: next,
                }
            } else {
                let (at_m, off_m) = placed.get(next).copied().unwrap_or((whole, 0.0));
                next += 1;
                Spot {
                    no: point.no,
                    at_m,
                    spur_m: 0.0,
                    off_m,
                    passed: next - 1,
                }
            }
        })
        .collect()
}

/// Position and its uncertainty for each point of the run.
fn spread(given: &[Option<f64>], whole: f64, ring: bool) -> Vec<(f64, f64)> {
    let count = given.len();
    // Anchors: the board, every stated point, and the far end.
    let mut anchors = vec![(0_usize, 0.0_f64)];
    for (index, at) in given.iter().enumerate() {
        if let Some(at) = at {
            anchors.push((index + 1, at.clamp(0.0, whole)));
        }
    }
    let end = if ring { count + 1 } else { count };
    if anchors.last().is_none_or(|last| last.0 < end) {
        anchors.push((end, whole));
    }
    (1..=count)
        .map(|index| {
            let after = anchors
                .iter()
                .copied()
                .find(|anchor| anchor.0 >= index)
                .unwrap_or((end, whole));
            if after.0 == index {
                return (after.1, if given[index - 1].is_some() { 0.5 } else { 0.0 });
            }
            let before = anchors
                .iter()
                .copied()
                .rev()
                .find(|anchor| anchor.0 < index)
                .unwrap_or((0, 0.0));
            let steps = (after.0 - before.0) as f64;
            let gap = (after.1 - before.1) / steps;
            let at = before.1 + gap * (index - before.0) as f64;
            (at, 0.6 * gap.abs())
        })
        .collect()
}
