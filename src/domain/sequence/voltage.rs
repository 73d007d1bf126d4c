//! The voltage of an insulation test.
//!
//! Promises: the figure and where it comes from. It leaves out the minimum that goes with it
//! (`expected`).

use crate::domain::{
    expect::Source,
    insulation::{self, Voltage},
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
/// The separation of an extra-low-voltage circuit is tested at its own 250 V.
#[must_use]
pub fn test_voltage(job: &Job, target: &Target) -> Option<TestVoltage> {
    if !matches!(target.test, TestKind::Insulation(_) | TestKind::Separation) {
        return None;
    }
    let circuit = job.circuit(target.board.as_ref()?, target.circuit?)?;
    let rule = insulation::rule(voltage_class(job, circuit));
    Some(TestVoltage {
        volts: rule.test_v,
        source: rule.source,
    })
}

/// What decides the test voltage of a circuit. Surge protection is taken out, so it decides
/// nothing; electronics that stay in do.
#[must_use]
pub fn voltage_class(job: &Job, circuit: &Circuit) -> Voltage {
    if extra_low(circuit.kind) {
        Voltage::ExtraLow
    } else if circuit.electronics {
        Voltage::LowWithElectronics
    } else if nominal_v(job, circuit) > 500.0 {
        Voltage::Above500
    } else {
        Voltage::Low
    }
}

/// Voltage between the live conductors of a circuit.
fn nominal_v(job: &Job, circuit: &Circuit) -> f64 {
    if circuit.three_phase {
        job.supply.u0_v * 3.0_f64.sqrt()
    } else {
        job.supply.u0_v
    }
}
