//! The job's own names of places, which the recogniser learns.
//!
//! Promises: a name is lower-case words, unique, and calls a board or circuit that exists. It
//! leaves out how a name is pronounced (the voice's business).

use crate::domain::{
    place::CircuitNo,
    plan::{Job, PlaceName},
};

use super::{board, error::Mistakes, fields::Fields};

/// Reads every `[[place]]`.
pub(super) fn names(
    document: &mut Fields<'_>,
    job: &Job,
    mistakes: &mut Mistakes<'_>,
) -> Vec<PlaceName> {
    let mut names: Vec<PlaceName> = Vec::new();
    // A circuit may be missing only because its own mistakes kept it out.
    let whole = mistakes.count() == 0;
    for mut f in document.tables("place", "a place", mistakes) {
        let name = f.needed_text(
            "name",
            "the words said for it: name = \"boiler house\"",
            mistakes,
        );
        if let Some(at) = &name {
            f.name = format!("place `{}`", at.value);
            let words = at
                .value
                .chars()
                .all(|c| c.is_alphabetic() || c == ' ' || c == '\'' || c == '-');
            if !words && !at.value.is_empty() {
                mistakes.add(
                    &at.span,
                    format!("`{}` cannot be learnt as spoken words", at.value),
                    "use letters, spaces, apostrophes and hyphens; write numbers as words",
                );
            }
            if names.iter().any(|n| n.name == at.value.to_lowercase()) {
                mistakes.add(
                    &at.span,
                    format!("two places are called `{}`", at.value.to_lowercase()),
                    "give each its own name",
                );
            }
        }
        let say = f.texts("say", mistakes);
        let calls = f.has("board") || f.has("circuit");
        let called_board = f
            .text("board", mistakes)
            .and_then(|at| board::board_id(&at, mistakes));
        let circuit = f.text("circuit", mistakes);
        let (mut board_id, mut circuit_no) = (None, None);
        if let Some(at) = called_board {
            if whole && job.board(&at.value).is_none() {
                mistakes.add(
                    &at.span,
                    format!("board {} is no board of this job", at.value),
                    "name one of the job's boards",
                );
            }
            board_id = Some(at.value);
        }
        if let Some(at) = circuit {
            // `circuit = "DB1/7"`, or a number beside `board`.
            let read = board::feed_of(&at.value).or_else(|| {
                let no: CircuitNo = at.value.parse().ok()?;
                Some((board_id.clone()?, no))
            });
            match read {
                Some((on, no)) if job.circuit(&on, no).is_some() => {
                    board_id = Some(on);
                    circuit_no = Some(no);
                }
                Some(_) if !whole => {}
                _ => mistakes.add(
                    &at.span,
                    format!("`{}` is no circuit of this job", at.value),
                    "write board and circuit with a slash: circuit = \"DB1/7\"",
                ),
            }
        }
        if !calls {
            f.missing(
                "circuit",
                "what it calls: circuit = \"DB1/7\" or board = \"DB1\"",
                mistakes,
            );
        }
        f.done(mistakes);
        if let Some(at) = name {
            names.push(PlaceName {
                name: at.value.to_lowercase(),
                say: say.into_iter().map(|s| s.value).collect(),
                board: board_id,
                circuit: circuit_no,
            });
        }
    }
    names
}
