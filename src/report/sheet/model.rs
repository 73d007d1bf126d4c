//! What stands on a schedule. The JSON export is these types as they are: see
//! `schedule.schema.json`.

use serde::Serialize;

use crate::report::Integrity;

/// Version of the export: rises when a key changes its meaning or goes.
pub const FORMAT: u32 = 1;

/// What the schedule says of itself, at its head and its end.
pub const CAUTION: &str = "This schedule says what was measured, against which range, and what is \
     open. It does not say that the installation is safe. Whether it may be energised or used is \
     for a competent person to decide, under local rules.";

/// A whole schedule.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Schedule {
    /// [`FORMAT`].
    pub format: u32,
    /// Program and version.
    pub program: String,
    /// [`CAUTION`].
    pub caution: &'static str,
    /// The job.
    pub job: JobHead,
    /// The rules chosen where sources disagree.
    pub rules: Rules,
    /// The supply as declared.
    pub supply: Supply,
    /// The instruments.
    pub instruments: Vec<Instrument>,
    /// Tests of the whole job: leads, main earth, bonding, electrodes, Ze.
    pub results: Vec<Row>,
    /// Boards in working order.
    pub boards: Vec<Board>,
    /// Values that are not within their range, with what they most likely mean.
    pub findings: Vec<Finding>,
    /// Required tests without a value that counts, a sentence each.
    pub open: Vec<String>,
    /// Tests left out, a sentence each, with reason and name.
    pub left_out: Vec<String>,
    /// Temporary works that were put in and not taken out.
    pub works_in: Vec<String>,
    /// Amendments.
    pub amendments: Vec<Amendment>,
    /// Notes and incidents, a sentence each.
    pub notes: Vec<String>,
    /// Where limits and conductor values come from.
    pub sources: Vec<SourceShown>,
    /// Time of the first entry of the log; empty when there is none.
    pub from: String,
    /// Time of the last entry.
    pub to: String,
    /// What holds of the log.
    pub integrity: IntegrityShown,
}

/// The job as in its plan.
#[derive(Debug, Clone, PartialEq, Serialize)]
#[allow(missing_docs)] // named as in the plan
pub struct JobHead {
    pub reference: String,
    pub title: String,
    pub address: String,
    pub client: String,
    pub testers: Vec<String>,
    /// °C.
    pub ambient_c: f64,
}

/// Rules, in words.
#[derive(Debug, Clone, PartialEq, Serialize)]
#[allow(missing_docs)] // named as in the plan
pub struct Rules {
    pub edition: String,
    pub temperature: &'static str,
    pub cold_loop: &'static str,
    pub electrode: &'static str,
}

/// The supply as declared.
#[derive(Debug, Clone, PartialEq, Serialize)]
#[allow(missing_docs)] // named as in the plan
pub struct Supply {
    pub earthing: &'static str,
    pub u0_v: f64,
    pub phases: u8,
    pub ze_ohm: Option<f64>,
    pub fault_ka: Option<f64>,
    pub main_earth: Option<String>,
    pub electrodes: Vec<String>,
    pub other_sources: Vec<String>,
}

/// An instrument.
#[derive(Debug, Clone, PartialEq, Serialize)]
#[allow(missing_docs)] // named as in the plan
pub struct Instrument {
    pub description: String,
    pub serial: String,
    pub calibrated: String,
}

/// A board.
#[derive(Debug, Clone, PartialEq, Serialize)]
#[allow(missing_docs)] // named as in the plan
pub struct Board {
    pub id: String,
    pub place: String,
    pub fed_from: Option<String>,
    pub zdb_ohm: Option<f64>,
    pub surge_protection: bool,
    /// Tests of the board itself.
    pub results: Vec<Row>,
    pub circuits: Vec<Circuit>,
}

/// A circuit: a row of the schedule, and every value behind it.
#[derive(Debug, Clone, PartialEq, Serialize)]
#[allow(missing_docs)] // named as in the plan
pub struct Circuit {
    pub no: String,
    pub name: String,
    pub kind: &'static str,
    pub three_phase: bool,
    pub points: usize,
    /// `2.5 mm²`, `16 mm² aluminium`, `1.2 mΩ/m`.
    pub line: String,
    pub cpc: Option<String>,
    pub length_m: f64,
    pub length_basis: &'static str,
    /// `B32`, `BS 88-2 63`.
    pub device: String,
    pub rcd_ma: Option<f64>,
    /// The columns of the row.
    pub columns: Columns,
    /// Every value.
    pub results: Vec<Row>,
    /// Readings along the circuit; in the HTML only.
    #[serde(skip)]
    pub plots: Vec<Plot>,
}

/// A drawing.
#[derive(Debug, Clone, PartialEq)]
pub struct Plot {
    /// What it shows, for readers that do not see it.
    pub title: String,
    /// The drawing itself.
    pub svg: String,
}

/// The columns of a circuit's row: the value that matters most of each kind.
#[derive(Debug, Clone, PartialEq, Serialize)]
#[allow(missing_docs)] // named after the quantities
pub struct Columns {
    pub r1: Cell,
    pub rn: Cell,
    pub r2: Cell,
    /// Highest R1+R2, or R2 by long lead.
    pub r1_r2: Cell,
    /// Lowest between live conductors.
    pub insulation_live: Cell,
    /// Lowest between live conductors and earth.
    pub insulation_earth: Cell,
    pub polarity: Cell,
    /// Highest.
    pub zs: Cell,
    /// Longest at the rated residual current.
    pub rcd_time: Cell,
    pub functional: Cell,
}

/// One cell.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Cell {
    /// `measured`, `partly` (some points have no value), `open` (none has), `left-out`,
    /// `not-required`.
    pub state: &'static str,
    /// The figure with its sign, without unit; for ticked tests `confirmed`, `NOT confirmed`.
    pub value: Option<String>,
    /// Unit word.
    pub unit: Option<String>,
    /// Marks of all values behind the cell, see the legend.
    pub marks: Vec<&'static str>,
    /// The entry the value comes from.
    pub entry: Option<u64>,
}

/// One test with its value, or why it has none.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Row {
    /// The kind of test as a word: `r1r2`, `insulation-lives-earth`.
    pub test: String,
    /// The test as a tester names it.
    pub title: String,
    /// Point, where it is read at one.
    pub point: Option<u16>,
    /// The point's name in the plan.
    pub point_name: Option<String>,
    /// The bonding conductor or electrode.
    pub name: Option<String>,
    /// d.c. test voltage of an insulation test.
    pub test_voltage_v: Option<u16>,
    /// `measured`, `not-measured`, `left-out`, `to-repeat`, `undecided`, `unreadable`.
    pub state: &'static str,
    /// The state in words when there is no value.
    pub state_words: Option<String>,
    /// The figure as said or keyed, zeros and sign included.
    pub value: Option<String>,
    /// Unit word.
    pub unit: Option<String>,
    /// Value and unit as printed.
    pub printed: Option<String>,
    /// How it lies to the range, as a word of the log: `in-range`, `above`, ...
    pub verdict: Option<&'static str>,
    /// The same in words.
    pub lies: Option<&'static str>,
    /// The same as a mark.
    pub mark: &'static str,
    /// Lowest expected.
    pub expected_low: Option<String>,
    /// Highest expected.
    pub expected_high: Option<String>,
    /// Limit with its sign.
    pub limit: Option<String>,
    /// Unit word of the three.
    pub expected_unit: Option<String>,
    /// The range as printed.
    pub expected: Option<String>,
    /// Where range and limit come from.
    pub source: Option<String>,
    /// False where that source was not checked against the standard.
    pub source_checked: Option<bool>,
    /// The entry the value comes from.
    pub entry: Option<u64>,
    /// When it was entered, RFC 3339.
    pub time: Option<String>,
    /// `voice`, `keypad`, or `amended`.
    pub entered: Option<&'static str>,
    /// Who stands for it.
    pub by: Option<String>,
    /// The words heard.
    pub heard: Option<String>,
    /// Kept although out of range: why.
    pub kept_as_found: Option<String>,
    /// The entry it replaced.
    pub corrects: Option<u64>,
}

/// A value out of its range.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Finding {
    /// Its entry.
    pub entry: u64,
    /// Where and which test.
    pub target: String,
    /// The value as printed.
    pub value: String,
    /// How it lies to the range.
    pub lies: &'static str,
    /// The range as printed.
    pub expected: String,
    /// What it most likely means, the likeliest first.
    pub meanings: Vec<String>,
    /// Kept as found: why.
    pub kept_as_found: Option<String>,
}

/// An amendment.
#[derive(Debug, Clone, PartialEq, Serialize)]
#[allow(missing_docs)] // the names say it
pub struct Amendment {
    pub entry: u64,
    pub time: String,
    pub target: String,
    pub corrects: u64,
    pub from: String,
    pub to: String,
    pub reason: String,
    pub by: String,
}

/// A source.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct SourceShown {
    /// Document, table or law.
    pub text: String,
    /// False where it was not checked against the document itself.
    pub checked: bool,
}

/// What holds of the log, with its statement.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct IntegrityShown {
    /// In one sentence.
    pub statement: String,
    /// The parts of it.
    #[serde(flatten)]
    pub parts: Integrity,
}
