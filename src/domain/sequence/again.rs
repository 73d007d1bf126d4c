//! What a failed test asks to be done again.
//!
//! Rule: after a failure it is mended, then that test and every earlier one it may have
//! influenced are repeated (UK practice; textbook statement of BS 7671 clause 643.1). Mending
//! opens joints, so what was measured through those joints no longer stands. It leaves out when
//! the repetition is done (the session).

use crate::domain::{
    plan::Job,
    test::{Stage, Target, TestKind},
};

use super::required;

/// Earlier required tests which a failure may have influenced, in working order. The failed test
/// itself is not among them: it is open as it is.
#[must_use]
pub fn influenced_by(job: &Job, failed: &Target) -> Vec<Target> {
    let all = required(job);
    let end = all
        .iter()
        .position(|target| target == failed)
        .unwrap_or(all.len());
    all[..end]
        .iter()
        .filter(|earlier| influenced(failed, earlier))
        .cloned()
        .collect()
}

fn influenced(failed: &Target, earlier: &Target) -> bool {
    let same_circuit = failed.circuit.is_some()
        && failed.circuit == earlier.circuit
        && failed.board == earlier.board;
    match failed.test {
        // Leads come first; a bond or electrode is a conductor of its own.
        TestKind::Leads | TestKind::MainEarth | TestKind::Bonding | TestKind::Electrode => false,
        // The fault lies between this point and the one before it: both were read through it.
        TestKind::R1R2 | TestKind::R2 => {
            same_circuit
                && earlier.test == failed.test
                && matches!(
                    (failed.point, earlier.point),
                    (Some(f), Some(e)) if e.0 + 1 == f.0
                )
        }
        // Every reading on a ring sees the whole ring.
        TestKind::RingR1
        | TestKind::RingRn
        | TestKind::RingR2
        | TestKind::RingLineNeutral
        | TestKind::RingLineEarth => same_circuit && earlier.test.stage() == Stage::Ring,
        // The fault may lie anywhere along the circuit; mending it opens joints there.
        TestKind::Insulation(_) | TestKind::Separation | TestKind::Polarity | TestKind::Zs => {
            same_circuit && earlier.test.stage() < Stage::Energise
        }
        // A borrowed or leaking neutral is mended in the circuit's wiring.
        TestKind::RcdTime | TestKind::RcdTimeFive | TestKind::RcdHalf => {
            same_circuit
                && matches!(
                    earlier.test.stage(),
                    Stage::Insulation | Stage::Polarity | Stage::Live
                )
        }
        TestKind::Ze => earlier.test == TestKind::MainEarth,
        // A loop impedance out of order at a board is mended in what feeds it.
        TestKind::FaultCurrent => earlier.test == TestKind::Ze,
        TestKind::PhaseSequence => same_circuit && earlier.test == TestKind::Polarity,
        TestKind::Functional => false,
    }
}
