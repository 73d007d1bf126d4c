//! The tests of an initial verification, the stages they belong to, and where one is done.
//!
//! Order: IEC 60364-6 / UK practice (see [`Stage`]). It leaves out which tests a circuit needs
//! (`sequence`) and what to expect (`expect`).

use std::fmt;

use serde::{Deserialize, Serialize};

use super::{
    place::{BoardId, CircuitNo, PointNo},
    reading::Unit,
};

/// The stages of the work, in the order in which they are done.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
#[allow(missing_docs)] // the names are the stages
pub enum Stage {
    Isolation,
    Instrument,
    Nulling,
    Bonding,
    Continuity,
    Ring,
    Insulation,
    Separation,
    Polarity,
    Electrode,
    CloseUp,
    /// The gate of its own before any live test.
    Energise,
    Live,
}

/// Between which conductors a test is made (IEC 60445 names).
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
#[allow(missing_docs)] // the names say it
pub enum Between {
    LineNeutral,
    LineEarth,
    NeutralEarth,
    /// Line and neutral joined, to earth.
    LivesEarth,
    L1L2,
    L2L3,
    L1L3,
    L1Neutral,
    L2Neutral,
    L3Neutral,
    L1Earth,
    L2Earth,
    L3Earth,
    /// SELV/PELV circuit to other circuits.
    OtherCircuits,
}

impl Between {
    /// Whether one end is the neutral alone.
    #[must_use]
    pub fn to_neutral(self) -> bool {
        matches!(
            self,
            Between::LineNeutral
                | Between::NeutralEarth
                | Between::L1Neutral
                | Between::L2Neutral
                | Between::L3Neutral
        )
    }
}

/// A kind of test. In files it is [`TestKind::word`]: `r1r2`, `insulation-line-neutral`, ...
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(try_from = "String", into = "String")]
pub enum TestKind {
    /// Resistance of the leads, to be nulled or subtracted (once a stage).
    Leads,
    /// Main earthing conductor, end to end, one end off.
    MainEarth,
    /// A protective bonding conductor, end to end, one end off.
    Bonding,
    /// R1+R2: line and protective conductor linked at the board, read at a point.
    R1R2,
    /// R2: protective conductor alone, by long lead.
    R2,
    /// Ring, end to end: line.
    RingR1,
    /// Ring, end to end: neutral.
    RingRn,
    /// Ring, end to end: protective conductor.
    RingR2,
    /// Ring, line and neutral cross-connected, read L-N at a point.
    RingLineNeutral,
    /// Ring, line and protective conductor cross-connected, read L-E at a point.
    RingLineEarth,
    /// Insulation resistance.
    Insulation(Between),
    /// Separation of SELV/PELV from other circuits, by insulation resistance.
    Separation,
    /// Polarity (ticked).
    Polarity,
    /// Resistance of the earth electrode.
    Electrode,
    /// External earth fault loop impedance.
    Ze,
    /// Earth fault loop impedance at a point.
    Zs,
    /// Prospective fault current, in kiloamps.
    FaultCurrent,
    /// RCD disconnection time at the rated residual current.
    RcdTime,
    /// RCD disconnection time at five times the rated residual current.
    RcdTimeFive,
    /// RCD does not trip at half the rated residual current (ticked).
    RcdHalf,
    /// Phase sequence (ticked).
    PhaseSequence,
    /// Function of RCD button, switches, interlocks (ticked).
    Functional,
}

/// Where a test is done. Job-level tests (main earth, bonding, Ze) have no circuit.
#[derive(Debug, Clone, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub struct Target {
    /// The kind of test.
    pub test: TestKind,
    /// The board, where the test belongs to one.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub board: Option<BoardId>,
    /// The circuit, where the test belongs to one.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub circuit: Option<CircuitNo>,
    /// The point, where the test is read at one.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub point: Option<PointNo>,
    /// The bonding conductor's name in the plan, for [`TestKind::Bonding`]; the electrode's, for
    /// [`TestKind::Electrode`].
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub name: Option<String>,
}

impl Stage {
    /// Every stage, in order.
    pub const ALL: [Stage; 13] = [
        Stage::Isolation,
        Stage::Instrument,
        Stage::Nulling,
        Stage::Bonding,
        Stage::Continuity,
        Stage::Ring,
        Stage::Insulation,
        Stage::Separation,
        Stage::Polarity,
        Stage::Electrode,
        Stage::CloseUp,
        Stage::Energise,
        Stage::Live,
    ];

    /// The stage in plain words.
    #[must_use]
    pub fn title(self) -> &'static str {
        match self {
            Stage::Isolation => "Isolation, proving dead",
            Stage::Instrument => "Instrument and leads",
            Stage::Nulling => "Leads nulled",
            Stage::Bonding => "Main earth and bonding",
            Stage::Continuity => "Continuity of protective conductors",
            Stage::Ring => "Ring final circuits",
            Stage::Insulation => "Insulation resistance",
            Stage::Separation => "SELV and PELV separation",
            Stage::Polarity => "Polarity",
            Stage::Electrode => "Earth electrode",
            Stage::CloseUp => "Close-up",
            Stage::Energise => "Before energising",
            Stage::Live => "Live tests",
        }
    }
}

impl Between {
    /// Every pair.
    pub const ALL: [Between; 14] = [
        Between::LineNeutral,
        Between::LineEarth,
        Between::NeutralEarth,
        Between::LivesEarth,
        Between::L1L2,
        Between::L2L3,
        Between::L1L3,
        Between::L1Neutral,
        Between::L2Neutral,
        Between::L3Neutral,
        Between::L1Earth,
        Between::L2Earth,
        Between::L3Earth,
        Between::OtherCircuits,
    ];

    /// The pair as a word in files.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Between::LineNeutral => "line-neutral",
            Between::LineEarth => "line-earth",
            Between::NeutralEarth => "neutral-earth",
            Between::LivesEarth => "lives-earth",
            Between::L1L2 => "l1-l2",
            Between::L2L3 => "l2-l3",
            Between::L1L3 => "l1-l3",
            Between::L1Neutral => "l1-neutral",
            Between::L2Neutral => "l2-neutral",
            Between::L3Neutral => "l3-neutral",
            Between::L1Earth => "l1-earth",
            Between::L2Earth => "l2-earth",
            Between::L3Earth => "l3-earth",
            Between::OtherCircuits => "other-circuits",
        }
    }

    /// The terminals, as a tester writes them.
    #[must_use]
    pub fn label(self) -> &'static str {
        match self {
            Between::LineNeutral => "L-N",
            Between::LineEarth => "L-E",
            Between::NeutralEarth => "N-E",
            Between::LivesEarth => "L+N-E",
            Between::L1L2 => "L1-L2",
            Between::L2L3 => "L2-L3",
            Between::L1L3 => "L1-L3",
            Between::L1Neutral => "L1-N",
            Between::L2Neutral => "L2-N",
            Between::L3Neutral => "L3-N",
            Between::L1Earth => "L1-E",
            Between::L2Earth => "L2-E",
            Between::L3Earth => "L3-E",
            Between::OtherCircuits => "to other circuits",
        }
    }
}

impl TestKind {
    /// Every kind of test.
    #[must_use]
    pub fn all() -> Vec<TestKind> {
        let mut kinds = vec![
            TestKind::Leads,
            TestKind::MainEarth,
            TestKind::Bonding,
            TestKind::R1R2,
            TestKind::R2,
            TestKind::RingR1,
            TestKind::RingRn,
            TestKind::RingR2,
            TestKind::RingLineNeutral,
            TestKind::RingLineEarth,
        ];
        kinds.extend(Between::ALL.map(TestKind::Insulation));
        kinds.extend([
            TestKind::Separation,
            TestKind::Polarity,
            TestKind::Electrode,
            TestKind::Ze,
            TestKind::Zs,
            TestKind::FaultCurrent,
            TestKind::RcdTime,
            TestKind::RcdTimeFive,
            TestKind::RcdHalf,
            TestKind::PhaseSequence,
            TestKind::Functional,
        ]);
        kinds
    }

    /// The kind as a word in files: `r1r2`, `ring-line-earth`, `insulation-lives-earth`, ...
    #[must_use]
    pub fn word(self) -> String {
        match self {
            TestKind::Leads => "leads".into(),
            TestKind::MainEarth => "main-earth".into(),
            TestKind::Bonding => "bonding".into(),
            TestKind::R1R2 => "r1r2".into(),
            TestKind::R2 => "r2".into(),
            TestKind::RingR1 => "ring-r1".into(),
            TestKind::RingRn => "ring-rn".into(),
            TestKind::RingR2 => "ring-r2".into(),
            TestKind::RingLineNeutral => "ring-line-neutral".into(),
            TestKind::RingLineEarth => "ring-line-earth".into(),
            TestKind::Insulation(between) => format!("insulation-{}", between.word()),
            TestKind::Separation => "separation".into(),
            TestKind::Polarity => "polarity".into(),
            TestKind::Electrode => "electrode".into(),
            TestKind::Ze => "ze".into(),
            TestKind::Zs => "zs".into(),
            TestKind::FaultCurrent => "fault-current".into(),
            TestKind::RcdTime => "rcd-time".into(),
            TestKind::RcdTimeFive => "rcd-time-five".into(),
            TestKind::RcdHalf => "rcd-half".into(),
            TestKind::PhaseSequence => "phase-sequence".into(),
            TestKind::Functional => "functional".into(),
        }
    }

    /// The stage in which the test is done.
    #[must_use]
    pub fn stage(self) -> Stage {
        match self {
            TestKind::Leads => Stage::Nulling,
            TestKind::MainEarth | TestKind::Bonding => Stage::Bonding,
            TestKind::R1R2 | TestKind::R2 => Stage::Continuity,
            TestKind::RingR1
            | TestKind::RingRn
            | TestKind::RingR2
            | TestKind::RingLineNeutral
            | TestKind::RingLineEarth => Stage::Ring,
            TestKind::Insulation(_) => Stage::Insulation,
            TestKind::Separation => Stage::Separation,
            TestKind::Polarity => Stage::Polarity,
            TestKind::Electrode => Stage::Electrode,
            TestKind::Ze
            | TestKind::Zs
            | TestKind::FaultCurrent
            | TestKind::RcdTime
            | TestKind::RcdTimeFive
            | TestKind::RcdHalf
            | TestKind::PhaseSequence
            | TestKind::Functional => Stage::Live,
        }
    }

    /// The unit the instrument shows for this test; `None` for ticked tests.
    #[must_use]
    pub fn unit(self) -> Option<Unit> {
        match self {
            TestKind::Insulation(_) | TestKind::Separation => Some(Unit::Megohm),
            TestKind::FaultCurrent => Some(Unit::Kiloamp),
            TestKind::RcdTime | TestKind::RcdTimeFive => Some(Unit::Millisecond),
            TestKind::Polarity
            | TestKind::RcdHalf
            | TestKind::PhaseSequence
            | TestKind::Functional => None,
            _ => Some(Unit::Ohm),
        }
    }

    /// The test as a tester names it, short enough for a 40-column screen.
    #[must_use]
    pub fn title(self) -> String {
        match self {
            TestKind::Leads => "Lead resistance".into(),
            TestKind::MainEarth => "Main earthing conductor".into(),
            TestKind::Bonding => "Protective bonding".into(),
            TestKind::R1R2 => "R1+R2".into(),
            TestKind::R2 => "R2 (long lead)".into(),
            TestKind::RingR1 => "Ring r1, line end to end".into(),
            TestKind::RingRn => "Ring rn, neutral end to end".into(),
            TestKind::RingR2 => "Ring r2, cpc end to end".into(),
            TestKind::RingLineNeutral => "Ring L-N, cross-connected".into(),
            TestKind::RingLineEarth => "Ring L-E, cross-connected".into(),
            TestKind::Insulation(between) => format!("Insulation {}", between.label()),
            TestKind::Separation => "Separation, insulation".into(),
            TestKind::Polarity => "Polarity".into(),
            TestKind::Electrode => "Earth electrode".into(),
            TestKind::Ze => "Ze".into(),
            TestKind::Zs => "Zs".into(),
            TestKind::FaultCurrent => "Prospective fault current".into(),
            TestKind::RcdTime => "RCD time at rated current".into(),
            TestKind::RcdTimeFive => "RCD time at five times".into(),
            TestKind::RcdHalf => "RCD at half: does not trip".into(),
            TestKind::PhaseSequence => "Phase sequence".into(),
            TestKind::Functional => "Functional checks".into(),
        }
    }
}

/// A word that names no kind of test.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("`{0}` is not a kind of test; `r1r2` and `insulation-line-neutral` are two")]
pub struct UnknownTest(pub String);

impl TryFrom<String> for TestKind {
    type Error = UnknownTest;
    fn try_from(word: String) -> Result<Self, Self::Error> {
        TestKind::all()
            .into_iter()
            .find(|kind| kind.word() == word)
            .ok_or(UnknownTest(word))
    }
}

impl From<TestKind> for String {
    fn from(kind: TestKind) -> Self {
        kind.word()
    }
}

impl fmt::Display for Target {
    /// `R1+R2, DB1/7, point 3`
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.test.title())?;
        if let Some(name) = &self.name {
            write!(f, ", {name}")?;
        }
        match (&self.board, self.circuit) {
            (Some(board), Some(circuit)) => write!(f, ", {board}/{circuit}")?,
            (Some(board), None) => write!(f, ", {board}")?,
            (None, Some(circuit)) => write!(f, ", circuit {circuit}")?,
            (None, None) => {}
        }
        match self.point {
            Some(point) => write!(f, ", point {point}"),
            None => Ok(()),
        }
    }
}
