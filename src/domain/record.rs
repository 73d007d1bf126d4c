//! What the log says: one event each, in the words of the trade.
//!
//! Promises: everything in it is text, whole numbers and exact decimals; nothing is overwritten, a
//! change names what it changes. The journal adds number, time and checksum; it leaves out how it
//! is written to disk.

use serde::{Deserialize, Serialize};

use super::{
    expect::Verdict,
    place::{BoardId, CircuitNo},
    test::{Stage, Target},
};

/// Number of an entry in its journal, from 1.
pub type EntryNo = u64;

/// Where a value came from.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
#[allow(missing_docs)]
pub enum Entered {
    Voice,
    Keypad,
}

/// The range that stood on the screen when the reading was taken, as shown.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub struct ExpectedShown {
    /// Lowest, as text.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub low: Option<String>,
    /// Highest, as text.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub high: Option<String>,
    /// Limit with its sign: `>=1`, `<=1.09`.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub limit: Option<String>,
    /// Unit word.
    pub unit: String,
    /// Rule or source, with its edition.
    pub source: String,
}

/// A finding as kept.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize)]
pub struct FindingKept {
    /// Its kind.
    pub code: String,
    /// The sentence.
    pub text: String,
}

/// One hypothesis as kept.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize)]
pub struct AlternativeKept {
    /// The words.
    pub words: String,
    /// The value or meaning as text.
    pub meaning: String,
    /// Margin to the best, two decimals, as text.
    pub margin: String,
}

/// A reading that was affirmed.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub struct ReadingKept {
    /// Which test, where.
    pub target: Target,
    /// The figure as said: `0.50`, `>299`, `open`; `yes` or `no` for ticked tests.
    pub value: String,
    /// Unit word; absent for ticked tests and open.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub unit: Option<String>,
    /// Bound word (`exact`, `above`, `below`, `open`, `over-range`, `ticked`).
    pub bound: String,
    /// True when the unit was not said but taken from the test in hand.
    #[serde(default)]
    pub unit_assumed: bool,
    /// The range shown.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub expected: Option<ExpectedShown>,
    /// How it lay to the range.
    pub verdict: Verdict,
    /// Findings at that moment, most likely first.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub findings: Vec<FindingKept>,
    /// Voice or keypad.
    pub entered: Entered,
    /// Words heard (voice).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub heard: Option<String>,
    /// Margin between the best two hypotheses, as text (voice).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub margin: Option<String>,
    /// Other hypotheses (voice).
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub alternatives: Vec<AlternativeKept>,
    /// How it was affirmed: voice or keypad.
    pub confirmed: Entered,
    /// Who affirmed.
    pub by: String,
    /// Kept as found although out of range: the reason.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub kept_as_found: Option<String>,
    /// The entry this one replaces.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub corrects: Option<EntryNo>,
    /// Utterance clip: file name beside the log.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub clip: Option<String>,
    /// Digest of the clip (BLAKE3, hex).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub clip_digest: Option<String>,
}

/// Kinds of temporary work that must be undone before a circuit can close.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum WorkKind {
    /// Line-cpc link at the board for R1+R2.
    LineEarthLink,
    /// Ring cross-connection line-neutral.
    CrossLineNeutral,
    /// Ring cross-connection line-cpc.
    CrossLineEarth,
    /// Ring conductors out of their terminals.
    RingLegsOut,
    /// A bonding or main earthing conductor off at one end.
    EarthOff,
    /// Loads, lamps, electronics or surge protection disconnected.
    LoadsOut,
    /// Live conductors joined for the insulation test.
    LivesJoined,
    /// A null taken with the long lead still set.
    LongLeadNull,
    /// Electrode disconnected from the installation.
    ElectrodeOff,
}

impl WorkKind {
    /// In plain words, as on the list: "line-cpc link at the board".
    #[must_use]
    pub fn words(self) -> &'static str {
        match self {
            WorkKind::LineEarthLink => "line-cpc link at the board",
            WorkKind::CrossLineNeutral => "ring cross-link line-neutral",
            WorkKind::CrossLineEarth => "ring cross-link line-cpc",
            WorkKind::RingLegsOut => "ring legs out of terminals",
            WorkKind::EarthOff => "protective conductor off at one end",
            WorkKind::LoadsOut => "loads, lamps, electronics out",
            WorkKind::LivesJoined => "line and neutral joined",
            WorkKind::LongLeadNull => "long lead still nulled",
            WorkKind::ElectrodeOff => "earth electrode disconnected",
        }
    }
}

/// One temporary work.
#[derive(Debug, Clone, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub struct Work {
    /// What.
    pub kind: WorkKind,
    /// Board, where it belongs to one.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub board: Option<BoardId>,
    /// Circuit, where it belongs to one.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub circuit: Option<CircuitNo>,
    /// Name, for bonds and electrodes.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub name: Option<String>,
}

/// One event of the log.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize)]
#[serde(
    tag = "event",
    rename_all = "kebab-case",
    rename_all_fields = "kebab-case"
)]
pub enum Record {
    /// A session began or went on.
    SessionOpened {
        /// Who tests.
        by: String,
        /// Reference of the job.
        job: String,
        /// Version of the program.
        program: String,
        /// True when earlier entries were found and taken up.
        resumed: bool,
        /// Name and digest of the voice in use, or "keypad only".
        voice: String,
    },
    /// A session ended in order.
    SessionClosed {
        /// Number of points still open.
        open: u32,
    },
    /// The reminders of a stage were acknowledged.
    Acknowledged {
        /// The stage.
        stage: Stage,
        /// Board or circuit it was for, where it was.
        #[serde(default, skip_serializing_if = "Option::is_none")]
        board: Option<BoardId>,
        /// See `board`.
        #[serde(default, skip_serializing_if = "Option::is_none")]
        circuit: Option<CircuitNo>,
        /// The reminders as shown.
        reminders: Vec<String>,
        /// Who acknowledged.
        by: String,
        /// Voice or keypad.
        entered: Entered,
    },
    /// Isolation and proving dead, with the instruments' details.
    ProvedDead {
        /// The board.
        board: BoardId,
        /// The voltage indicator, and how it was proved before and after.
        with: String,
        /// Who.
        by: String,
    },
    /// A reading was affirmed.
    Reading(Box<ReadingKept>),
    /// A test was left out with a reason.
    Skipped {
        /// Which.
        target: Target,
        /// Why.
        reason: String,
        /// Who.
        by: String,
    },
    /// A test is to be done again, because of what happened after it.
    Repeat {
        /// Which.
        target: Target,
        /// The entry whose failure asks for it.
        because: EntryNo,
    },
    /// A temporary work went in.
    WorkIn {
        /// Which.
        work: Work,
        /// Who.
        by: String,
    },
    /// A temporary work came out.
    WorkOut {
        /// Which.
        work: Work,
        /// Who.
        by: String,
    },
    /// A stage of a circuit or of the job closed with its works out.
    StageClosed {
        /// The stage.
        stage: Stage,
        /// Board, where it belongs to one.
        #[serde(default, skip_serializing_if = "Option::is_none")]
        board: Option<BoardId>,
        /// Circuit, where it belongs to one.
        #[serde(default, skip_serializing_if = "Option::is_none")]
        circuit: Option<CircuitNo>,
    },
    /// A note.
    Note {
        /// About which test, if any.
        #[serde(default, skip_serializing_if = "Option::is_none")]
        target: Option<Target>,
        /// The text.
        text: String,
        /// Who.
        by: String,
    },
    /// At the van: a value is amended; the old entry stays.
    Amended {
        /// The entry amended.
        corrects: EntryNo,
        /// The new value, as in [`ReadingKept::value`].
        value: String,
        /// Unit word.
        #[serde(default, skip_serializing_if = "Option::is_none")]
        unit: Option<String>,
        /// Why.
        reason: String,
        /// Who.
        by: String,
    },
    /// After a join: of the values several handhelds kept for one target, this one counts.
    Decided {
        /// The target measured several times.
        target: Target,
        /// The entry whose value counts.
        takes: EntryNo,
        /// Why.
        reason: String,
        /// Who decided.
        by: String,
    },
    /// Something outside happened: microphone lost or found, clock changed, tail set aside.
    Incident {
        /// What, in a sentence.
        what: String,
    },
}

impl Record {
    /// The same record with every entry number it names put through `to`.
    #[must_use]
    pub fn with_entries(mut self, to: impl Fn(EntryNo) -> EntryNo) -> Self {
        match &mut self {
            Record::Reading(reading) => {
                if let Some(no) = &mut reading.corrects {
                    *no = to(*no);
                }
            }
            Record::Repeat { because: no, .. }
            | Record::Amended { corrects: no, .. }
            | Record::Decided { takes: no, .. } => *no = to(*no),
            Record::SessionOpened { .. }
            | Record::SessionClosed { .. }
            | Record::Acknowledged { .. }
            | Record::ProvedDead { .. }
            | Record::Skipped { .. }
            | Record::WorkIn { .. }
            | Record::WorkOut { .. }
            | Record::StageClosed { .. }
            | Record::Note { .. }
            | Record::Incident { .. } => {}
        }
        self
    }
}
