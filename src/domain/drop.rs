//! Voltage drop from resistances: measured ones where they are kept, else by length.
//!
//! Resistive only: above 16 mm² the reactance counts and a table value should be given instead.

use super::{
    conductor,
    expect::Source,
    expected::{self, live},
    kept::Kept,
    place::BoardId,
    plan::{Circuit, CircuitKind, Job},
    quantity::Celsius,
    temperature::{self, From20, To20},
    test::{Target, TestKind},
};

/// A voltage drop.
#[derive(Debug, Clone, PartialEq)]
pub struct Drop {
    /// Volts; line to neutral, or line to line for three phases.
    pub volts: f64,
    /// Percent of the nominal voltage.
    pub percent: f64,
    /// What it rests on.
    pub how: String,
}

/// Guide value in percent from the origin of a public supply.
#[must_use]
pub fn guide(lighting: bool) -> (f64, Source) {
    (
        if lighting { 3.0 } else { 5.0 },
        Source {
            text: "BS 7671:2018 appendix 4 section 6.4, public supply: 3 % lighting, 5 % other; a \
                   guide value"
                .into(),
            checked: true,
        },
    )
}

/// Volts over a conductor loop: single-phase out and back (`loop_ohm` = R1+Rn), balanced
/// three-phase √3 times one conductor (`loop_ohm` = R1).
#[must_use]
pub fn volts(amps: f64, loop_ohm: f64, three_phase: bool) -> f64 {
    let form = if three_phase { 3.0_f64.sqrt() } else { 1.0 };
    form * amps * loop_ohm
}

/// The drop to the furthest point of a circuit at operating temperature.
#[must_use]
pub fn of_circuit(
    job: &Job,
    kept: &Kept,
    board: &BoardId,
    circuit: &Circuit,
    amps: f64,
) -> Option<Drop> {
    let cable = circuit.cable;
    let line = conductor::rate(cable.line).ok()?.milliohm_per_m();
    let neutral = conductor::rate(cable.neutral).ok()?.milliohm_per_m();
    let material = conductor::material(cable.line);
    let rule = job.rules.temperature;
    let hot = From20::to(
        rule,
        material,
        Celsius::clamped(temperature::operating_c(cable.insulation)),
    );
    let from_ambient = To20::from(rule, material, expected::ambient(job)).then(hot);
    let target = Target {
        test: TestKind::Zs,
        board: Some(board.clone()),
        circuit: Some(circuit.no),
        point: None,
        name: None,
    };
    let end = |test| expected::figure(kept, &expected::sibling(&target, test, false));
    let (one, both, how) = if let (CircuitKind::Ring, Some(r1), Some(rn)) =
        (circuit.kind, end(TestKind::RingR1), end(TestKind::RingRn))
    {
        // A ring shares the current between its legs: a quarter at an evenly shared load.
        (
            r1 * from_ambient / 4.0,
            (r1 + rn) * from_ambient / 4.0,
            "ring ends as measured".to_owned(),
        )
    } else if let (Some(cpc), Some((r, how))) = (
        cable.cpc.and_then(|c| conductor::rate(c).ok()),
        live::circuit_r1r2(job, &target, circuit, kept),
    ) {
        // R1 is the line's share of R1+R2, by the ratio of the cores.
        let r1 = r * from_ambient * line / (line + cpc.milliohm_per_m());
        (r1, r1 * (1.0 + neutral / line), how)
    } else {
        let metres = circuit.length.m / 1000.0 * hot.factor();
        (metres * line, metres * (line + neutral), "by length".into())
    };
    let (loop_ohm, nominal) = if circuit.three_phase {
        (one, job.supply.u0_v * 3.0_f64.sqrt())
    } else {
        (both, job.supply.u0_v)
    };
    let volts = volts(amps, loop_ohm, circuit.three_phase);
    Some(Drop {
        volts,
        percent: 100.0 * volts / nominal,
        how,
    })
}
