//! The schedule as CSV (RFC 4180): a line a test, UTF-8, CR LF, a header line.
//!
//! Promises: every test of the schedule is one line, measured or not; figures stand exactly as
//! entered, so a spreadsheet that turns `0.50` into a number is at fault itself.

use super::model::{Row, Schedule};

/// The columns and what they hold, in their order.
pub const COLUMNS: [(&str, &str); 28] = [
    ("job", "reference of the job"),
    ("board", "board, empty for tests of the whole job"),
    (
        "circuit",
        "number of the circuit on its board, such as 7 or 4L2",
    ),
    ("circuit_name", "what the circuit feeds"),
    (
        "test",
        "kind of test as a word: r1r2, insulation-lives-earth",
    ),
    ("title", "kind of test as a tester names it"),
    (
        "point",
        "number of the point along the run, where it is read at one",
    ),
    ("point_name", "the point's name in the plan"),
    ("name", "bonding conductor or electrode"),
    ("test_voltage_v", "d.c. test voltage of an insulation test"),
    (
        "state",
        "measured, not-measured, left-out, to-repeat, undecided, unreadable",
    ),
    (
        "value",
        "figure as entered, with sign: 0.50, >299, open; confirmed, NOT confirmed",
    ),
    (
        "unit",
        "ohm, megohm, ... ; empty for open and for confirmed",
    ),
    (
        "verdict",
        "in-range, below, above, open, not-open, beyond-limit, unknown",
    ),
    (
        "expected_low",
        "lowest expected at the time, in expected_unit",
    ),
    ("expected_high", "highest expected at the time"),
    ("limit", "limit of the rules with its sign: >=1, <=1.09"),
    ("expected_unit", "unit of the three before"),
    ("source", "where range and limit come from"),
    (
        "source_checked",
        "false: not checked against the standard itself",
    ),
    ("entry", "number of the log's entry that holds the value"),
    ("time", "when it was entered, RFC 3339"),
    ("entered", "voice, keypad, amended"),
    ("by", "who stands for it"),
    ("heard", "words heard"),
    ("kept_as_found", "out of range and kept: why"),
    ("corrects", "number of the entry it replaced"),
    ("remark", "why there is no value"),
];

/// The whole schedule as CSV.
///
/// # Errors
/// [`csv::Error`], which writing to memory does not give.
pub fn write(schedule: &Schedule) -> Result<Vec<u8>, csv::Error> {
    let mut out = csv::WriterBuilder::new()
        .terminator(csv::Terminator::CRLF)
        .from_writer(Vec::new());
    out.write_record(COLUMNS.map(|(name, _)| name))?;
    let job = &schedule.job.reference;
    for row in &schedule.results {
        out.write_record(line(job, "", "", "", row))?;
    }
    for board in &schedule.boards {
        for row in &board.results {
            out.write_record(line(job, &board.id, "", "", row))?;
        }
        for circuit in &board.circuits {
            for row in &circuit.results {
                out.write_record(line(job, &board.id, &circuit.no, &circuit.name, row))?;
            }
        }
    }
    out.into_inner()
        .map_err(|e| csv::Error::from(e.into_error()))
}

fn line(job: &str, board: &str, no: &str, name: &str, row: &Row) -> [String; 28] {
    let text = |field: &Option<String>| field.clone().unwrap_or_default();
    fn number<T: ToString>(field: Option<T>) -> String {
        field.map(|n| n.to_string()).unwrap_or_default()
    }
    [
        job.into(),
        board.into(),
        no.into(),
        name.into(),
        row.test.clone(),
        row.title.clone(),
        number(row.point),
        text(&row.point_name),
        text(&row.name),
        number(row.test_voltage_v),
        row.state.into(),
        text(&row.value),
        text(&row.unit),
        row.verdict.unwrap_or_default().into(),
        text(&row.expected_low),
        text(&row.expected_high),
        text(&row.limit),
        text(&row.expected_unit),
        text(&row.source),
        number(row.source_checked),
        number(row.entry),
        text(&row.time),
        row.entered.unwrap_or_default().into(),
        text(&row.by),
        text(&row.heard),
        text(&row.kept_as_found),
        number(row.corrects),
        text(&row.state_words),
    ]
}
