//! `handsfull plan show`: boards, circuits, the tests of each in order, what each should read.
//!
//! Ranges are those before any reading was taken; in the field they grow narrower with the
//! readings kept.

use std::path::Path;

use super::{Failure, Kind, lay, read};
use crate::domain::{
    conductor,
    expect::Expected,
    expected::expected,
    kept::Kept,
    plan::{Board, Circuit, CircuitKind, Job},
    sequence,
    test::{Stage, Target, TestKind},
    words::Worded,
};

/// Shows a job or one circuit of it.
pub(super) fn run(file: &Path, circuit: Option<&str>, width: usize) -> Result<(), Failure> {
    let job = read(file)?.job;
    let out = match circuit {
        None => whole(&job, width),
        Some(text) => {
            let (board, circuit) = find(&job, text)?;
            let tests = sequence::required(&job);
            of_circuit(&job, board, circuit, &tests, width)
        }
    };
    lay::print(&out);
    Ok(())
}

fn find<'a>(job: &'a Job, text: &str) -> Result<(&'a Board, &'a Circuit), Failure> {
    let named = |board: &Board, circuit: &Circuit| {
        let (b, c) = (board.id.to_string(), circuit.no.to_string());
        // The board may be left out where there is only one.
        text.eq_ignore_ascii_case(&format!("{b}/{c}"))
            || (job.boards.len() == 1 && text.eq_ignore_ascii_case(&c))
    };
    let all = || {
        job.boards
            .iter()
            .flat_map(|board| board.circuits.iter().map(move |circuit| (board, circuit)))
    };
    all()
        .find(|(board, circuit)| named(board, circuit))
        .ok_or_else(|| {
            let names: Vec<String> = all().map(|(b, c)| format!("{}/{}", b.id, c.no)).collect();
            Failure::new(Kind::Usage, format!("`{text}` is no circuit of this job"))
                .hint(format!("the circuits are {}", names.join(", ")))
        })
}

fn whole(job: &Job, width: usize) -> String {
    let mut out = lay::wrapped(&format!("{}  {}", job.reference, job.title), 0, width);
    let phases = if job.supply.three_phase { 3 } else { 1 };
    let mut facts = format!(
        "{}, {} V, {phases} phase{}, conductors at {} °C. Rules: {}, temperature {}, cold loop \
         {}, electrode {}.",
        job.supply.earthing.word(),
        job.supply.u0_v,
        if phases == 1 { "" } else { "s" },
        job.ambient_c,
        job.rules.edition,
        job.rules.temperature.word(),
        job.rules.cold_loop.word(),
        job.rules.electrode.word(),
    );
    for source in &job.supply.other_sources {
        facts.push_str(&format!(" Other source: {source}."));
    }
    out.push_str(&lay::wrapped(&facts, 2, width));
    let tests = sequence::required(job);
    let mine: Vec<&Target> = tests.iter().filter(|t| t.board.is_none()).collect();
    out.push('\n');
    out.push_str(&listed(job, &mine, width));
    for board in &job.boards {
        out.push('\n');
        let mut head = format!("Board {}", board.id);
        if !board.place.is_empty() {
            head.push_str(&format!(", {}", board.place));
        }
        if let Some((from, no)) = &board.fed_from {
            head.push_str(&format!(", fed from {from}/{no}"));
        }
        out.push_str(&lay::wrapped(&head, 0, width));
        for circuit in &board.circuits {
            out.push('\n');
            out.push_str(&of_circuit(job, board, circuit, &tests, width));
        }
        let mine: Vec<&Target> = tests
            .iter()
            .filter(|t| t.board.as_ref() == Some(&board.id) && t.circuit.is_none())
            .collect();
        if !mine.is_empty() {
            out.push('\n');
            out.push_str(&listed(job, &mine, width));
        }
    }
    out
}

fn of_circuit(
    job: &Job,
    board: &Board,
    circuit: &Circuit,
    tests: &[Target],
    width: usize,
) -> String {
    let mut head = format!("{}/{}", board.id, circuit.no);
    if !circuit.name.is_empty() {
        head.push_str(&format!("  {}", circuit.name));
    }
    let mut out = lay::wrapped(&head, 0, width);
    out.push_str(&lay::wrapped(&made_of(circuit), 2, width));
    let mine: Vec<&Target> = tests
        .iter()
        .filter(|t| t.board.as_ref() == Some(&board.id) && t.circuit == Some(circuit.no))
        .collect();
    out.push_str(&listed(job, &mine, width));
    out
}

/// Cable, length, device in one line.
fn made_of(circuit: &Circuit) -> String {
    let cable = &circuit.cable;
    let mut text = format!(
        "{}{}, line {}",
        circuit.kind.word(),
        match (circuit.three_phase, circuit.without_neutral) {
            (true, true) => ", three phases without neutral",
            (true, false) => ", three phases",
            _ => "",
        },
        conductor::words(cable.line),
    );
    if cable.neutral != cable.line {
        text.push_str(&format!(", neutral {}", conductor::words(cable.neutral)));
    }
    match cable.cpc {
        Some(cpc) => text.push_str(&format!(", cpc {}", conductor::words(cpc))),
        None => text.push_str(", no cpc"),
    }
    text.push_str(&format!(
        ", {} m{} ({}), {}",
        circuit.length.m,
        if circuit.kind == CircuitKind::Ring {
            " of loop"
        } else {
            ""
        },
        circuit.length.basis.word(),
        circuit.device.label(),
    ));
    if let Some(rcd) = &circuit.device.rcd {
        text.push_str(&format!(
            ", RCD {} mA{}",
            rcd.rated_ma,
            if rcd.delayed { " delayed" } else { "" }
        ));
    }
    if circuit.electronics {
        text.push_str(", electronics stay connected");
    }
    text
}

/// Tests in order, their stage above them where it changes.
fn listed(job: &Job, tests: &[&Target], width: usize) -> String {
    let kept = Kept::new();
    let mut out = String::new();
    let mut stage: Option<Stage> = None;
    let mut test: Option<TestKind> = None;
    for target in tests {
        let now = target.test.stage();
        if stage != Some(now) {
            out.push_str(&lay::wrapped(now.title(), 2, width));
            stage = Some(now);
        }
        let mut label = target.test.title();
        if let Some(name) = &target.name {
            label.push_str(&format!(", {name}"));
        }
        let mut indent = 4;
        if let Some(point) = target.point {
            // The points of one test stand together under its title.
            if test != Some(target.test) {
                out.push_str(&lay::wrapped(&label, indent, width));
            }
            indent = 6;
            label = format!("point {point}");
            let circuit = target
                .board
                .as_ref()
                .zip(target.circuit)
                .and_then(|(board, no)| job.circuit(board, no));
            let name = circuit
                .and_then(|c| c.points.iter().find(|p| p.no == point))
                .map_or("", |p| p.name.as_str());
            if !name.is_empty() {
                label.push_str(&format!(", {name}"));
            }
        }
        test = Some(target.test);
        let value = match target.test.unit() {
            None => "ticked".into(),
            Some(_) => range(&expected(job, target, &kept)),
        };
        out.push_str(&lay::pair(&label, &value, indent, width));
    }
    out
}

/// A range as text, its limit behind it.
fn range(expected: &Expected) -> String {
    let unit = expected.unit.symbol();
    let mut text = match (expected.low, expected.high) {
        _ if expected.unknown.is_some() => {
            let why = expected.unknown.as_deref().unwrap_or_default();
            format!("no range: {why}")
        }
        _ if expected.open => "open".into(),
        (Some(low), Some(high)) => format!("{low} to {high} {unit}"),
        (Some(low), None) => format!("{low} {unit} or more"),
        (None, Some(high)) => format!("{high} {unit} or less"),
        (None, None) => String::new(),
    };
    if let Some(limit) = &expected.limit {
        if !text.is_empty() {
            text.push_str(", ");
        }
        text.push_str(&format!(
            "{} {} {unit}",
            if limit.minimum { "min" } else { "max" },
            limit.value,
        ));
        if !limit.source.checked {
            text.push_str(" (not checked against the standard)");
        }
    }
    text
}
