//! The voltage of an insulation test.
//!
//! Promises: the figure and where it comes from. It leaves out the minimum that goes with it
//! (`expected`).

use crate::domain::{
    expect::Source,
    plan::{Circuit, Job},
    test::{Target, TestKind},
};

use super::extra_low;

/// A d.c. test voltage and its source.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct TestVoltage {
    /// Volts d.c.
    pub volts: u16,
    /// Where it comes from.
    pub source: Source,
}

/// The voltage of a test; `None` for tests that are no insulation test.
///
/// 250 V for SELV and PELV, 500 V up to a nominal 500 V, 1000 V above; 250 V where electronics
/// stay connected. The separation of an extra-low-voltage circuit is tested at its own 250 V.
#[must_use]
pub fn test_voltage(job: &Job, target: &Target) -> Option<TestVoltage> {
    if !matches!(target.test, TestKind::Insulation(_) | TestKind::Separation) {
        return None;
    }
    let circuit = job.circuit(target.board.as_ref()?, target.circuit?)?;
    let table = "IEC 60364-6:2016 table 6.1, BS 7671:2018 table 64";
    let (volts, text) = if extra_low(circuit.kind) {
        (250, format!("{table}: SELV, PELV"))
    } else if circuit.electronics {
        (
            250,
            "BS 7671:2018 regulation 643.3.3: electronics stay connected".into(),
        )
    } else if nominal_v(job, circuit) <= 500.0 {
        (500, format!("{table}: up to 500 V"))
    } else {
        (1000, format!("{table}: above 500 V"))
    };
    Some(TestVoltage {
        volts,
        source: Source {
            text,
            // The three voltages were read in copies of the tables; the table numbers and the
            // regulation number are from memory.
            checked: false,
        },
    })
}

/// Voltage between the live conductors of a circuit.
fn nominal_v(job: &Job, circuit: &Circuit) -> f64 {
    if circuit.three_phase {
        job.supply.u0_v * 3.0_f64.sqrt()
    } else {
        job.supply.u0_v
    }
}
