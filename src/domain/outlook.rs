//! What is still in doubt before anyone closes a switch: from the plan and the dead readings kept.
//!
//! Predicted Zs at operating temperature against the device's maximum, longest permissible length,
//! disconnection time class, voltage drop, readings outside their ranges, sources that could not
//! be checked. An empty list is no statement that a circuit is safe; it says that none of these
//! doubts was found.

use super::{
    assess, conductor, drop,
    expect::{Source, Verdict},
    expected::{self, live},
    kept::{Kept, Value},
    loops,
    place::{BoardId, CircuitNo},
    plan::{Circuit, CircuitKind, Earthing, Job},
    quantity::{Celsius, Round, show},
    temperature::{self, From20, To20},
    test::{Target, TestKind},
};

/// One outstanding doubt.
#[derive(Debug, Clone, PartialEq)]
pub struct Doubt {
    /// Its kind as a word: "loop-too-high".
    pub code: &'static str,
    /// The board it concerns; `None`: the whole job.
    pub board: Option<BoardId>,
    /// The circuit it concerns.
    pub circuit: Option<CircuitNo>,
    /// One sentence with its numbers.
    pub text: String,
    /// What to do about it, one short sentence.
    pub check: String,
    /// True where the figures speak against energising, false where something is merely unknown
    /// or a guidance value is passed.
    pub against: bool,
    /// Sources used.
    pub sources: Vec<Source>,
}

/// The doubts of a whole job, those of the supply first, then circuit by circuit.
#[must_use]
pub fn before_energising(job: &Job, kept: &Kept) -> Vec<Doubt> {
    let mut doubts = Vec::new();
    supply(job, kept, &mut doubts);
    out_of_range(job, kept, &mut doubts);
    for board in &job.boards {
        for circuit in &board.circuits {
            if !matches!(circuit.kind, CircuitKind::Selv | CircuitKind::Pelv) {
                of_circuit(job, kept, &board.id, circuit, &mut doubts);
            }
        }
    }
    doubts
}

fn supply(job: &Job, kept: &Kept, doubts: &mut Vec<Doubt>) {
    let measured = kept.iter().any(|(t, _)| t.test == TestKind::Ze);
    let whole_job = |code, text: String, check: &str, sources| Doubt {
        code,
        board: None,
        circuit: None,
        text,
        check: check.into(),
        against: false,
        sources,
    };
    if !measured {
        let text = match job.supply.ze_ohm {
            Some(ze) => format!("Ze {ze} Ω is declared, not measured"),
            None => "Ze is not known: no loop impedance can be predicted".into(),
        };
        doubts.push(whole_job(
            "ze-not-measured",
            text,
            "measure Ze at the origin with the earthing conductor off, then reconnect",
            Vec::new(),
        ));
    }
    if let Some((guide, source)) = loops::ze_guide(job.supply.earthing)
        && let Some(ze) = job.supply.ze_ohm
        && ze > guide
    {
        doubts.push(whole_job(
            "ze-above-guide",
            format!("declared Ze {ze} Ω is above the guide figure {guide} Ω"),
            "ask the supplier before relying on it",
            vec![source],
        ));
    }
}

/// Readings that were kept although they lie outside their range.
fn out_of_range(job: &Job, kept: &Kept, doubts: &mut Vec<Doubt>) {
    for (target, value) in kept.iter() {
        let (text, against) = match value {
            Value::Ticked(true) => continue,
            Value::Ticked(false) => (format!("{target}: not in order"), true),
            Value::Reading(reading) => {
                let expected = expected::expected(job, target, kept);
                let verdict = assess::verdict(target, &expected, reading);
                if !verdict.questioned() {
                    continue;
                }
                let how = match verdict {
                    Verdict::Below => "below what was expected",
                    Verdict::Above => "above what was expected",
                    Verdict::Open => "open",
                    Verdict::NotOpen => "not open",
                    _ => "beyond its limit",
                };
                (
                    format!("{target}: {reading} is {how}"),
                    matches!(verdict, Verdict::BeyondLimit | Verdict::Open),
                )
            }
        };
        doubts.push(Doubt {
            code: "reading-outside",
            board: target.board.clone(),
            circuit: target.circuit,
            text,
            check: "find out why, repeat the test and those it may have influenced".into(),
            against,
            sources: Vec::new(),
        });
    }
}

fn of_circuit(job: &Job, kept: &Kept, board: &BoardId, circuit: &Circuit, doubts: &mut Vec<Doubt>) {
    let doubt = |code, against, text: String, check: &str, sources| Doubt {
        code,
        board: Some(board.clone()),
        circuit: Some(circuit.no),
        text,
        check: check.into(),
        against,
        sources,
    };
    let target = Target {
        test: TestKind::Zs,
        board: Some(board.clone()),
        circuit: Some(circuit.no),
        point: None,
        name: None,
    };
    if circuit.cable.cpc.is_none() {
        doubts.push(doubt(
            "no-protective-conductor",
            true,
            "the plan gives this circuit no protective conductor".into(),
            "settle how it is protected before it is energised",
            Vec::new(),
        ));
        return;
    }
    let (limit, sources) = match live::loop_limit(job, circuit) {
        Ok(found) => found,
        Err(reason) => {
            doubts.push(doubt(
                "no-loop-limit",
                false,
                format!("no maximum Zs can be given: {reason}"),
                "look the device up in the standard in force",
                Vec::new(),
            ));
            return;
        }
    };
    for source in sources.iter().filter(|source| !source.checked) {
        doubts.push(doubt(
            "limit-not-checked",
            false,
            format!(
                "the maximum Zs {} Ω rests on an unchecked table",
                show(limit, 2, Round::Down)
            ),
            "compare it with the standard in force",
            vec![source.clone()],
        ));
    }
    if job.supply.earthing == Earthing::Tt && circuit.device.rcd.is_none() {
        doubts.push(doubt(
            "tt-without-rcd",
            true,
            "TT supply and no residual current device in the plan".into(),
            "an overcurrent device alone rarely disconnects in TT",
            Vec::new(),
        ));
    }
    let Some((r, how)) = live::circuit_r1r2(job, &target, circuit, kept) else {
        doubts.push(doubt(
            "r1r2-unknown",
            false,
            "R1+R2 is neither measured nor can it be reckoned".into(),
            "measure R1+R2 at the furthest point",
            sources,
        ));
        return;
    };
    if how.contains("not measured") {
        doubts.push(doubt(
            "r1r2-not-measured",
            false,
            format!(
                "R1+R2 {} Ω is reckoned by length, not measured",
                show(r, 2, Round::Nearest)
            ),
            "measure R1+R2 at the furthest point",
            Vec::new(),
        ));
    }
    let hot = hot_factor(job, circuit);
    if let Some((ze, ze_how)) = live::external(job, &target, kept) {
        let zs = ze + r * hot;
        let (seconds, _) =
            loops::disconnection(job.supply.earthing, circuit.kind, circuit.device.rated_a);
        if zs > limit {
            doubts.push(doubt(
                "loop-too-high",
                true,
                format!(
                    "predicted Zs {} Ω at operating temperature ({ze_how} + {} Ω x {hot:.2}) is \
                     above {} Ω for {seconds} s",
                    show(zs, 2, Round::Up),
                    show(r, 2, Round::Nearest),
                    show(limit, 2, Round::Down),
                ),
                "check the joints, the device and the length before energising",
                sources.clone(),
            ));
        }
        length(job, circuit, ze, limit, &mut |text| {
            doubts.push(doubt(
                "longer-than-permissible",
                true,
                text,
                "shorten, enlarge the conductors, or change the device",
                sources.clone(),
            ));
        });
    }
    voltage_drop(job, kept, board, circuit, doubts);
}

/// Factor from the ambient of the job to the operating temperature of the cable.
fn hot_factor(job: &Job, circuit: &Circuit) -> f64 {
    let material = conductor::material(circuit.cable.line);
    let hot = Celsius::clamped(temperature::operating_c(circuit.cable.insulation));
    To20::from(job.rules.temperature, material, expected::ambient(job)).then(From20::to(
        job.rules.temperature,
        material,
        hot,
    ))
}

/// The longest permissible length of the planned cable, and the planned length against it.
fn length(job: &Job, circuit: &Circuit, ze: f64, limit: f64, found: &mut dyn FnMut(String)) {
    let Some(cpc) = circuit.cable.cpc else {
        return;
    };
    let (Ok(line), Ok(earth)) = (conductor::rate(circuit.cable.line), conductor::rate(cpc)) else {
        return;
    };
    let material = conductor::material(circuit.cable.line);
    let hot = Celsius::clamped(temperature::operating_c(circuit.cable.insulation));
    let factor = From20::to(job.rules.temperature, material, hot).factor();
    let rate = (line + earth).milliohm_per_m() * factor / 1000.0;
    let share = if circuit.kind == CircuitKind::Ring {
        4.0
    } else {
        1.0
    };
    let longest = (limit - ze).max(0.0) / rate * share;
    if circuit.length.m > longest {
        found(format!(
            "{} m of cable; at most {} m keep Zs within {} Ω",
            circuit.length.m,
            show(longest, 0, Round::Down),
            show(limit, 2, Round::Down)
        ));
    }
}

fn voltage_drop(
    job: &Job,
    kept: &Kept,
    board: &BoardId,
    circuit: &Circuit,
    doubts: &mut Vec<Doubt>,
) {
    let Some(amps) = circuit.design_a else {
        return;
    };
    let Some(found) = drop::of_circuit(job, kept, board, circuit, amps) else {
        return;
    };
    let lighting = circuit.kind == CircuitKind::Lighting;
    let (share, source) = drop::guide(lighting);
    if found.percent > share {
        doubts.push(Doubt {
            code: "drop-above-guide",
            board: Some(board.clone()),
            circuit: Some(circuit.no),
            text: format!(
                "voltage drop {} V, {} % at {amps} A ({}) is above the guide value of {share} %",
                show(found.volts, 1, Round::Up),
                show(found.percent, 1, Round::Up),
                found.how
            ),
            check: "a guide value: what the equipment needs governs".into(),
            against: false,
            sources: vec![source],
        });
    }
}
