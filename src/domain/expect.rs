//! What a test should read, and what a reading that is off most likely means: the types.
//!
//! The physics that fills them stands in `expected` and `findings`. A range has two ends and its
//! reasons; a verdict compares, it never calls a circuit safe.

use rust_decimal::Decimal;
use serde::{Deserialize, Serialize};

use super::reading::Unit;

/// Where a limit or a value comes from.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize)]
pub struct Source {
    /// The document, table or law with its edition: "IEC 60228:2004 table 1".
    pub text: String,
    /// False where copies of the source disagree, or only memory speaks for the value: shown
    /// wherever the value is printed. True is no claim that a bought standard was read; it means
    /// that several published copies agree, or that the value is arithmetic.
    pub checked: bool,
}

/// One contribution to a range, for `why`.
#[derive(Debug, Clone, PartialEq)]
pub struct Contribution {
    /// What: "length ±10 % (drawing)".
    pub what: String,
    /// What it takes from the low end, in the unit of the range.
    pub low: f64,
    /// What it adds to the high end.
    pub high: f64,
}

/// What is expected before the reading is taken.
#[derive(Debug, Clone, PartialEq)]
pub struct Expected {
    /// The unit of the three figures.
    pub unit: Unit,
    /// Lowest, rounded as the instrument shows it; `None`: no lower end.
    pub low: Option<Decimal>,
    /// Nominal.
    pub nominal: Option<Decimal>,
    /// Highest; `None`: no upper end (insulation).
    pub high: Option<Decimal>,
    /// An open circuit is what is expected.
    pub open: bool,
    /// A limit of a standard beside the range (minimum insulation, maximum loop impedance), and
    /// whether it is a minimum.
    pub limit: Option<Limit>,
    /// The steps that lead to the range.
    pub why: Vec<Contribution>,
    /// Sources used.
    pub sources: Vec<Source>,
    /// Set when no range can be given, with the reason ("no length in the plan").
    pub unknown: Option<String>,
}

/// A limit of a standard.
#[derive(Debug, Clone, PartialEq)]
pub struct Limit {
    /// The figure, in the unit of the expected range.
    pub value: Decimal,
    /// True: readings must not be lower. False: must not be higher.
    pub minimum: bool,
    /// Where it comes from.
    pub source: Source,
}

/// How a reading lies to its range.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Verdict {
    /// Within the expected range.
    InRange,
    /// Lower than expected.
    Below,
    /// Higher than expected.
    Above,
    /// Open where a value was expected.
    Open,
    /// A value where an open circuit was expected.
    NotOpen,
    /// Within the range but beyond the standard's limit, or beyond both.
    BeyondLimit,
    /// No range could be given.
    Unknown,
}

impl Verdict {
    /// Whether the tester must be asked before it is kept.
    #[must_use]
    pub fn questioned(self) -> bool {
        !matches!(self, Verdict::InRange | Verdict::Unknown)
    }
}

/// What a reading most likely means.
#[derive(Debug, Clone, PartialEq)]
pub struct Finding {
    /// The kind, as a word for the log ("high-joint").
    pub code: &'static str,
    /// One sentence with its numbers: "a joint about 0.20 Ω too high between point 3 and 4".
    pub text: String,
    /// What to check next, one short sentence.
    pub check: String,
    /// Relative weight, the largest first; the ranking is what counts.
    pub weight: f64,
}

/// The comparison of one reading with what was expected.
#[derive(Debug, Clone, PartialEq)]
pub struct Assessment {
    /// How it lies.
    pub verdict: Verdict,
    /// Ranked, most likely first; empty when nothing is wrong.
    pub findings: Vec<Finding>,
}

impl Assessment {
    /// Whether the tester must be asked before the reading is kept: it lies outside its range, or
    /// the series it belongs to hints at a fault although it lies inside.
    #[must_use]
    pub fn questioned(&self) -> bool {
        self.verdict.questioned() || !self.findings.is_empty()
    }
}

impl std::fmt::Display for Source {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(&self.text)?;
        if self.checked {
            Ok(())
        } else {
            f.write_str(" [not checked against the standard]")
        }
    }
}
