//! Findings of the live tests, of electrodes and of leads: few figures, plain rules.

use crate::domain::{
    expect::{Expected, Finding, Verdict},
    expected,
    plan::{Circuit, Earthing, Job},
    reading::{Bound, Reading, Unit},
    test::{Target, TestKind},
};

fn finding(code: &'static str, weight: f64, text: String, check: &str) -> Finding {
    Finding {
        code,
        text,
        check: check.into(),
        weight,
    }
}

pub(crate) fn findings(
    job: &Job,
    target: &Target,
    circuit: Option<&Circuit>,
    expected: &Expected,
    reading: &Reading,
    verdict: Verdict,
) -> Vec<Finding> {
    if !verdict.questioned() {
        return Vec::new();
    }
    let value = expected::in_unit(reading, expected.unit);
    let nominal: Option<f64> = expected.nominal.and_then(|n| n.try_into().ok());
    let over = value.zip(nominal).map(|(v, n)| v - n);
    let mut found = match target.test {
        TestKind::Zs => loop_findings(job, circuit, over, verdict),
        TestKind::Ze => vec![finding(
            "supply-high",
            0.7,
            match over {
                Some(over) => format!("Ze {over:+.2} Ω against what was declared"),
                None => "Ze above the guide figure of this earthing".into(),
            },
            "check the test connections and the means of earthing, then ask the supplier",
        )],
        TestKind::Electrode => vec![
            finding(
                "dry-or-short-electrode",
                0.7,
                "electrode resistance too high: dry or poor soil, too little of it in the ground"
                    .into(),
                "drive deeper or add electrodes, test again in a dry season",
            ),
            finding(
                "auxiliary-electrode",
                0.3,
                "auxiliary electrodes too close or badly driven".into(),
                "move the middle electrode by a tenth of the span each way: readings must agree",
            ),
        ],
        TestKind::RcdTime | TestKind::RcdTimeFive => rcd_findings(verdict),
        TestKind::FaultCurrent => vec![finding(
            "fault-current-differs",
            0.7,
            "fault current does not fit the loop impedance known here".into(),
            "repeat line to neutral and line to earth; record the larger",
        )],
        TestKind::Leads => vec![
            finding(
                "lead-joint",
                0.6,
                "leads above what leads are: a bad clip, probe or fuse".into(),
                "clean and re-seat the plugs, change the leads",
            ),
            finding(
                "open",
                0.4,
                "a broken lead or a blown fuse in it".into(),
                "try each lead by itself",
            ),
        ],
        _ => Vec::new(),
    };
    if let Some(slip) = unit_slip(value, nominal, reading, expected.unit) {
        found.insert(0, slip);
    }
    found
}

fn loop_findings(
    job: &Job,
    circuit: Option<&Circuit>,
    over: Option<f64>,
    verdict: Verdict,
) -> Vec<Finding> {
    let by = over.filter(|o| *o > 0.0).map_or_else(String::new, |o| {
        format!(" by about {o:.2} Ω over Ze and the dead readings")
    });
    let mut found = Vec::new();
    if verdict == Verdict::Open {
        found.push(finding(
            "open",
            0.8,
            "no loop: protective conductor open, or the residual current device tripped".into(),
            "isolate, prove dead, repeat the dead continuity test",
        ));
        return found;
    }
    if job.supply.earthing == Earthing::Tt {
        found.push(finding(
            "dry-or-short-electrode",
            0.5,
            format!("loop too high{by}: the electrode governs in TT"),
            "measure the electrode by itself",
        ));
    }
    found.push(finding(
        "high-joint",
        0.6,
        format!("loop too high{by}: a joint, or a protective conductor worse than when dead"),
        "isolate, prove dead, compare R1+R2 with the dead reading",
    ));
    if circuit.is_some_and(|c| c.device.rcd.is_some_and(|r| r.rated_ma <= 30.0)) {
        found.push(finding(
            "no-trip-scatter",
            0.3,
            "a no-trip loop test scatters by up to 0.2 Ω".into(),
            "repeat it three times and compare",
        ));
    }
    found
}

fn rcd_findings(verdict: Verdict) -> Vec<Finding> {
    match verdict {
        Verdict::Below => vec![finding(
            "not-delayed",
            0.8,
            "faster than a time-delayed type may be: another type, or another device tripped"
                .into(),
            "read the type on the device and see which one opened",
        )],
        _ => vec![
            finding(
                "slow-device",
                0.7,
                "device too slow or not tripping".into(),
                "press its test button, repeat in the other half-wave, then replace it",
            ),
            finding(
                "standing-leakage",
                0.3,
                "leakage of the loads on the circuit spoils the test".into(),
                "disconnect the loads and repeat",
            ),
        ],
    }
}

/// Off by a power of a thousand: the unit, not the circuit.
fn unit_slip(
    value: Option<f64>,
    nominal: Option<f64>,
    reading: &Reading,
    unit: Unit,
) -> Option<Finding> {
    if reading.bound() != Bound::Exact {
        return None;
    }
    let (value, nominal) = (value?, nominal?);
    [1e-6, 1e-3, 1e3, 1e6].into_iter().find_map(|factor| {
        let meant = value * factor;
        ((0.7 * nominal)..=(1.4 * nominal))
            .contains(&meant)
            .then(|| {
                finding(
                    "unit-slip",
                    1.0,
                    format!("unit slip: {meant:.2} {unit} would fit what was expected"),
                    "read the unit on the display again",
                )
            })
    })
}
