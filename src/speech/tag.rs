//! Tags of the grammar files: the literals from which a meaning is put together.
//!
//! SRGS leaves the text of a tag to the tag format; ours is `semantics/1.0-literals`, and the
//! literals of a phrase are read in the order of speaking. Promises: a tag that is not listed here
//! is refused when the grammar is compiled, so no phrase can be understood half.
//! It leaves out how tags make a meaning (see `sense`).
//!
//! | tag | means |
//! |---|---|
//! | `58` `0.5` `.` `DB` | text added to the open slot: the figure, a way, a board, ... |
//! | `above` `below` | the bound of the figure |
//! | `open` `over-range` | a reading without a figure |
//! | `unit:ohm` | a unit, by its word in files |
//! | `board` `circuit` `line` `point` | opens that slot of a place |
//! | `own:boiler house` | a name of the job's own |
//! | `reason` `pick` `digits` | opens the slot of a reason code, the n-th of a list, part of a figure |
//! | `reply:affirm` `control:back` | a reply or command without parts |
//! | `test:r1r2` `stage:insulation` | takes up a test or a stage |
//! | `correction` | what follows replaces the last value |
//! | `spur` | the point is the one on a spur off the point named |
//! | `same` | the same value as at the point named |
//! | `leave-out:2` `keep-for:4` | the n-th of the session's reasons, said in words |

use crate::domain::{
    reading::Unit,
    test::{Stage, TestKind},
};

use super::meaning::{Control, Reply};

/// One tag.
#[derive(Debug, Clone, PartialEq, Eq, Hash)]
pub enum Tag {
    /// Text for the open slot.
    Text(String),
    /// The figure is a lower limit.
    Above,
    /// The figure is an upper limit.
    Below,
    /// An open circuit.
    Open,
    /// Beyond the instrument's range.
    OverRange,
    /// The unit of the reading.
    Unit(Unit),
    /// Opens a slot.
    Slot(Slot),
    /// A name of the job's own.
    Own(String),
    /// A whole reply.
    Reply(Reply),
    /// A whole command.
    Control(Control),
    /// What follows replaces the last value.
    Correction,
    /// The point is the one on a spur off the point named.
    Spur,
    /// The same value as at the point named.
    Same,
}

/// Where text tags go.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[allow(missing_docs)] // the names are the slots
pub enum Slot {
    Figure,
    Board,
    Circuit,
    Line,
    Point,
    Reason,
    Pick,
    Digits,
}

impl Tag {
    /// Reads a tag; `None` when it is none of the list above.
    #[must_use]
    pub fn parse(text: &str) -> Option<Tag> {
        if let Some((kind, name)) = text.split_once(':') {
            return match kind {
                "unit" => Unit::ALL
                    .into_iter()
                    .find(|u| u.word() == name)
                    .map(Tag::Unit),
                "own" => Some(Tag::Own(name.into())),
                "reply" => reply(name).map(Tag::Reply),
                "control" => control(name).map(Tag::Control),
                "test" => TestKind::try_from(name.to_owned())
                    .ok()
                    .map(|test| Tag::Control(Control::Test(test))),
                "stage" => Stage::ALL
                    .into_iter()
                    .find(|stage| stage_word(*stage) == name)
                    .map(|stage| Tag::Control(Control::Stage(stage))),
                "leave-out" => ordinal(name).map(|n| Tag::Control(Control::LeaveOut(n))),
                "keep-for" => ordinal(name).map(|n| Tag::Control(Control::KeepFor(n))),
                _ => None,
            };
        }
        Some(match text {
            "above" => Tag::Above,
            "below" => Tag::Below,
            "open" => Tag::Open,
            "over-range" => Tag::OverRange,
            "correction" => Tag::Correction,
            "spur" => Tag::Spur,
            "same" => Tag::Same,
            "board" => Tag::Slot(Slot::Board),
            "circuit" => Tag::Slot(Slot::Circuit),
            "line" => Tag::Slot(Slot::Line),
            "point" => Tag::Slot(Slot::Point),
            "reason" => Tag::Slot(Slot::Reason),
            "pick" => Tag::Slot(Slot::Pick),
            "digits" => Tag::Slot(Slot::Digits),
            _ => {
                let plain = |c: char| c.is_ascii_digit() || c.is_ascii_uppercase() || c == '.';
                if text.is_empty() || !text.chars().all(plain) {
                    return None;
                }
                Tag::Text(text.into())
            }
        })
    }
}

/// The stage as a word in files and JSON.
#[must_use]
pub fn stage_word(stage: Stage) -> &'static str {
    match stage {
        Stage::Isolation => "isolation",
        Stage::Instrument => "instrument",
        Stage::Nulling => "nulling",
        Stage::Bonding => "bonding",
        Stage::Continuity => "continuity",
        Stage::Ring => "ring",
        Stage::Insulation => "insulation",
        Stage::Separation => "separation",
        Stage::Polarity => "polarity",
        Stage::Electrode => "electrode",
        Stage::CloseUp => "close-up",
        Stage::Energise => "energise",
        Stage::Live => "live",
    }
}

/// One figure from 1.
fn ordinal(name: &str) -> Option<u8> {
    name.parse().ok().filter(|n| (1..=9).contains(n))
}

fn reply(name: &str) -> Option<Reply> {
    [
        Reply::Affirm,
        Reply::Negative,
        Reply::KeepAsFound,
        Reply::MeasureAgain,
        Reply::Done,
    ]
    .into_iter()
    .find(|reply| reply.word() == name)
}

fn control(name: &str) -> Option<Control> {
    Control::PLAIN
        .into_iter()
        .find(|control| control.word() == name)
}
