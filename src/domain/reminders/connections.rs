//! How to connect links and probes for a test, in plain words.
//!
//! Promises: two to five short lines, in the order of the hands: what goes in or off, where the
//! probes go, what to watch. It leaves out why (the reminders) and what to expect.

use crate::domain::{
    plan::{Circuit, CircuitKind, Job, Point},
    record::WorkKind,
    sequence::{test_voltage, works_needed},
    test::{Between, Target, TestKind},
};

/// How a test is connected.
#[must_use]
pub fn connections(job: &Job, target: &Target) -> Vec<String> {
    let circuit = target
        .board
        .as_ref()
        .zip(target.circuit)
        .and_then(|(board, no)| job.circuit(board, no));
    let at = place(target, circuit);
    let name = target.name.as_deref().unwrap_or("this conductor");
    match target.test {
        TestKind::Leads => lines(&[
            "Probe tip to probe tip, firmly.",
            "Null. Read what remains.",
        ]),
        TestKind::MainEarth => {
            let mut out = lines(&[
                "Supply off and locked.",
                "Main earthing conductor off at one end.",
                "One probe on each end of it.",
            ]);
            long_lead(job, target, &mut out);
            out
        }
        TestKind::Bonding => {
            let mut out = vec![
                format!("Bond {name} off at one end."),
                "One probe on each end of it; at the clamp, on the metal of the pipe or frame."
                    .into(),
            ];
            long_lead(job, target, &mut out);
            out
        }
        TestKind::R1R2 => r1r2(circuit, &at),
        TestKind::R2 => vec![
            "Long lead on the earth terminal of the board, nulled.".into(),
            format!("Probe on the cpc at {at}."),
        ],
        TestKind::RingR1 => ends("line"),
        TestKind::RingRn => ends("neutral"),
        TestKind::RingR2 => ends("cpc"),
        TestKind::RingLineNeutral => vec![
            "At the board: leg one line with leg two neutral, leg two line with leg one neutral."
                .into(),
            format!("Probes on L and N at {at}."),
        ],
        TestKind::RingLineEarth => vec![
            "At the board: leg one line with leg two cpc, leg two line with leg one cpc.".into(),
            format!("Probes on L and E at {at}."),
        ],
        TestKind::Insulation(between) => insulation(job, target, between),
        TestKind::Separation => separation(job, target, circuit),
        TestKind::Polarity => polarity(circuit),
        TestKind::Electrode => vec![
            format!("Electrode {name} off the installation."),
            "Instrument on the electrode; spikes in line, about 10 m and 20 m out.".into(),
            "Move the middle spike a little both ways: three readings that agree.".into(),
        ],
        TestKind::Ze => lines(&[
            "Main switch off and locked.",
            "Earthing conductor off the earth terminal.",
            "Probes on incoming line and the earthing conductor. Then back on at once.",
        ]),
        TestKind::Zs => vec![format!(
            "Plug or probes on L and E (N where asked) at {at}."
        )],
        TestKind::FaultCurrent => {
            let mut out = lines(&[
                "At the incoming terminals: L to N, then L to E.",
                "Keep the larger.",
            ]);
            if job.supply.three_phase {
                out.push("Three-phase: twice the largest L to N, or measured L to L.".into());
            }
            out
        }
        TestKind::RcdTime => rcd("rated current"),
        TestKind::RcdTimeFive => rcd("five times rated current"),
        TestKind::RcdHalf => vec![
            "Plug or probes on L and E downstream of the RCD.".into(),
            "Half rated current, both half-waves: must not trip.".into(),
        ],
        TestKind::PhaseSequence => vec![
            format!("Indicator on L1, L2, L3 {}.", whereabouts(target)),
            "Same direction as at the origin.".into(),
        ],
        TestKind::Functional => lines(&[
            "RCD test buttons, switches, interlocks, emergency stops.",
            "Indications of surge and arc protection.",
        ]),
    }
}

fn lines(texts: &[&str]) -> Vec<String> {
    texts.iter().map(|text| (*text).to_string()).collect()
}

/// "point 3 (window)", "the far end".
fn place(target: &Target, circuit: Option<&Circuit>) -> String {
    let Some(no) = target.point else {
        return "the point".into();
    };
    let point: Option<&Point> = circuit.and_then(|c| c.points.iter().find(|p| p.no == no));
    match point {
        Some(point) if !point.name.is_empty() => format!("point {no}, {}", point.name),
        _ => format!("point {no}"),
    }
}

fn whereabouts(target: &Target) -> String {
    match (&target.board, target.circuit) {
        (Some(board), Some(circuit)) => format!("at the end of {board}/{circuit}"),
        (Some(board), None) => format!("at {board}"),
        _ => "at the origin".into(),
    }
}

fn long_lead(job: &Job, target: &Target, out: &mut Vec<String>) {
    if works_needed(job, target)
        .iter()
        .any(|work| work.kind == WorkKind::LongLeadNull)
    {
        out.push("Long lead: nulled with it, cleared after.".into());
    }
}

fn r1r2(circuit: Option<&Circuit>, at: &str) -> Vec<String> {
    let mut out = vec!["At the board: link line to cpc of this circuit.".to_string()];
    out.push(format!("Probes on L and E at {at}."));
    if let Some(circuit) = circuit {
        if circuit.three_phase {
            out.push("Each line in turn; keep the highest.".into());
        }
        if circuit.kind == CircuitKind::Lighting {
            out.push("Switch on and off: it must open and close.".into());
        }
    }
    out
}

fn ends(core: &str) -> Vec<String> {
    vec![
        "Both legs out of their terminals.".into(),
        format!("One probe on each end of the {core}."),
    ]
}

fn insulation(job: &Job, target: &Target, between: Between) -> Vec<String> {
    let (one, other) = match between {
        Between::LineNeutral => ("line", "neutral"),
        Between::LineEarth => ("line", "earth"),
        Between::NeutralEarth => ("neutral", "earth"),
        Between::LivesEarth => ("the joined lives", "earth"),
        Between::L1L2 => ("L1", "L2"),
        Between::L2L3 => ("L2", "L3"),
        Between::L1L3 => ("L1", "L3"),
        Between::L1Neutral => ("L1", "neutral"),
        Between::L2Neutral => ("L2", "neutral"),
        Between::L3Neutral => ("L3", "neutral"),
        Between::L1Earth => ("L1", "earth"),
        Between::L2Earth => ("L2", "earth"),
        Between::L3Earth => ("L3", "earth"),
        Between::OtherCircuits => ("this circuit's lives", "the other circuits' lives"),
    };
    let mut out = Vec::new();
    if between == Between::LivesEarth {
        let without = target
            .board
            .as_ref()
            .zip(target.circuit)
            .and_then(|(board, no)| job.circuit(board, no))
            .is_some_and(|circuit| circuit.without_neutral);
        out.push(
            if without {
                "Lines joined; there is no neutral."
            } else {
                "Lives joined, neutral with them."
            }
            .into(),
        );
    }
    out.push(format!("Probes on {one} and {other}."));
    volts(job, target, &mut out);
    out
}

fn separation(job: &Job, target: &Target, circuit: Option<&Circuit>) -> Vec<String> {
    let mut out = lines(&[
        "This circuit's lives joined; the other circuits' lives joined.",
        "Probes between the two.",
    ]);
    volts(job, target, &mut out);
    if circuit.is_some_and(|c| c.kind == CircuitKind::Selv) {
        out.push("SELV: its reading to earth is a test of its own.".into());
    }
    out
}

fn volts(job: &Job, target: &Target, out: &mut Vec<String>) {
    if let Some(voltage) = test_voltage(job, target) {
        out.push(format!(
            "{} V d.c. Wait for a steady figure; hold until discharged.",
            voltage.volts
        ));
    }
}

fn polarity(circuit: Option<&Circuit>) -> Vec<String> {
    match circuit {
        Some(circuit) if circuit.long_lead => {
            lines(&["Not proved by the long lead: link line to cpc, or look at every point."])
        }
        Some(circuit) if circuit.kind == CircuitKind::Ring => {
            lines(&["From the line-earth readings at every point, or by looking."])
        }
        _ => lines(&["From the R1+R2 readings at every point, or by looking."]),
    }
}

fn rcd(at: &str) -> Vec<String> {
    vec![
        "Plug or probes on L and E downstream of the RCD.".into(),
        format!("Instrument at {at}, both half-waves. Keep the longer time."),
    ]
}
