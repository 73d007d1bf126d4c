//! Entries that hold no value, as sentences.

use super::words;
use crate::domain::{
    place::{BoardId, CircuitNo},
    record::{Record, Work},
};

/// An entry that holds no value, as a sentence.
#[must_use]
pub fn event(record: &Record) -> String {
    match record {
        Record::SessionOpened {
            by, voice, resumed, ..
        } => format!(
            "session {} by {by}, {voice}",
            if *resumed { "taken up" } else { "begun" }
        ),
        Record::SessionClosed { open: 0 } => "session closed, nothing open".into(),
        Record::SessionClosed { open } => format!("session closed, {open} open"),
        Record::Acknowledged {
            stage,
            board,
            circuit,
            reminders,
            by,
            entered,
        } => format!(
            "{}{}: reminders acknowledged by {by} ({}): {}",
            stage.title(),
            place(board.as_ref(), *circuit),
            words::entered(*entered),
            reminders.join("; ")
        ),
        Record::ProvedDead { board, with, by } => {
            format!("{board} proved dead by {by} with {with}")
        }
        Record::Skipped { target, reason, by } => format!("{target}: left out, {reason} ({by})"),
        Record::Repeat { target, because } => {
            format!("{target}: to be done again, because of #{because}")
        }
        Record::WorkIn { work, by } => format!("in: {} ({by})", work_words(work)),
        Record::WorkOut { work, by } => format!("out: {} ({by})", work_words(work)),
        Record::StageClosed {
            stage,
            board,
            circuit,
        } => format!(
            "{}{}: closed",
            stage.title(),
            place(board.as_ref(), *circuit)
        ),
        Record::Note { target, text, by } => match target {
            Some(target) => format!("note on {target}: {text} ({by})"),
            None => format!("note: {text} ({by})"),
        },
        Record::Decided {
            target,
            takes,
            reason,
            by,
        } => format!("{target}: #{takes} counts, {reason} ({by})"),
        Record::Incident { what } => format!("incident: {what}"),
        // Shown with their values where they can be.
        Record::Amended {
            corrects, value, ..
        } => format!("amended #{corrects} to {value}"),
        Record::Reading(reading) => format!("{}: {}", reading.target, reading.value),
    }
}

fn place(board: Option<&BoardId>, circuit: Option<CircuitNo>) -> String {
    match (board, circuit) {
        (Some(board), Some(circuit)) => format!(", {board}/{circuit}"),
        (Some(board), None) => format!(", {board}"),
        (None, Some(circuit)) => format!(", circuit {circuit}"),
        (None, None) => String::new(),
    }
}

/// A temporary work with its place: `line-cpc link at the board, DB1/7`.
#[must_use]
pub fn work_words(work: &Work) -> String {
    let mut text = work.kind.words().to_owned();
    if let Some(name) = &work.name {
        text.push_str(&format!(", {name}"));
    }
    text + &place(work.board.as_ref(), work.circuit)
}
