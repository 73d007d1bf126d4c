//! Boards of a job file and how they feed one another.
//!
//! Promises: board names and the circuits of a board are unique, every feed leads to a
//! distribution circuit of another board and back to an origin. It leaves out the circuits
//! themselves (`circuit`).

use std::ops::Range;

use crate::domain::{
    place::{BoardId, CircuitNo},
    plan::{Board, CircuitKind, Supply},
};

use super::{
    circuit,
    error::Mistakes,
    fields::{At, Fields},
    suggest,
};

/// Where a board's feed stands in the file.
struct Place {
    feed: Option<Range<usize>>,
    /// The board was read without a mistake, so what it lacks it really lacks.
    whole: bool,
}

/// The boards, in the order of the file.
pub(super) fn boards(
    document: &mut Fields<'_>,
    supply: &Supply,
    mistakes: &mut Mistakes<'_>,
) -> Vec<Board> {
    let mut boards: Vec<Board> = Vec::new();
    let mut places: Vec<Place> = Vec::new();
    let mut all_read = true;
    if !document.has("board") {
        document.missing(
            "board",
            "at least one [[board]] with its circuits",
            mistakes,
        );
    }
    for mut f in document.tables("board", "a board", mistakes) {
        let before = mistakes.count();
        let read = board(&mut f, supply, &boards, mistakes);
        f.done(mistakes);
        match read {
            Some((board, feed)) => {
                boards.push(board);
                places.push(Place {
                    feed,
                    whole: mistakes.count() == before,
                });
            }
            None => all_read = false,
        }
    }
    feeds(&boards, &places, all_read, mistakes);
    boards
}

fn board(
    f: &mut Fields<'_>,
    supply: &Supply,
    before: &[Board],
    mistakes: &mut Mistakes<'_>,
) -> Option<(Board, Option<Range<usize>>)> {
    let id = f
        .needed_text("id", "the name painted on it: id = \"DB1\"", mistakes)
        .and_then(|at| board_id(&at, mistakes));
    if let Some(At { value: id, span }) = &id {
        f.name = format!("board {id}");
        if before.iter().any(|board| &board.id == id) {
            mistakes.add(
                span,
                format!("two boards are called {id}"),
                "give each its own name",
            );
        }
    }
    let place = f.text_or_empty("place", mistakes);
    let feed = f.text("fed-from", mistakes);
    let fed_from = feed.as_ref().and_then(|at| {
        let read = feed_of(&at.value);
        if read.is_none() {
            mistakes.add(
                &at.span,
                format!("`{}` names no circuit of a board", at.value),
                "write board and circuit with a slash: fed-from = \"MSB/3\"",
            );
        }
        read
    });
    let zdb_ohm = f
        .number("zdb-ohm", 0.001, 2000.0, mistakes)
        .map(|at| at.value);
    let surge_protection = f.flag("surge-protection", false, mistakes);
    let has_circuits = f.has("circuit");
    let label = id
        .as_ref()
        .map_or_else(|| "?".to_string(), |at| at.value.to_string());
    let circuits = circuit::circuits(f, &label, supply, mistakes);
    if !has_circuits {
        f.missing(
            "circuit",
            "at least one [[board.circuit]] below the board",
            mistakes,
        );
    }
    Some((
        Board {
            id: id?.value,
            place,
            fed_from,
            zdb_ohm,
            surge_protection,
            circuits,
        },
        feed.map(|at| at.span),
    ))
}

/// A board's name, or a mistake that offers the name in capitals.
pub(super) fn board_id(at: &At<String>, mistakes: &mut Mistakes<'_>) -> Option<At<BoardId>> {
    match BoardId::new(&at.value) {
        Ok(value) => Some(At {
            value,
            span: at.span.clone(),
        }),
        Err(wrong) => {
            let tidy: String = at
                .value
                .to_uppercase()
                .chars()
                .filter(char::is_ascii_alphanumeric)
                .collect();
            let right = match BoardId::new(&tidy) {
                Ok(_) => format!("did you mean `{tidy}`? {}", wrong.right),
                Err(_) => wrong.right.into(),
            };
            mistakes.add(
                &at.span,
                format!("`{}` is not a {}", wrong.text, wrong.what),
                right,
            );
            None
        }
    }
}

/// `MSB/3`.
pub(super) fn feed_of(text: &str) -> Option<(BoardId, CircuitNo)> {
    let (board, circuit) = text.split_once('/')?;
    Some((
        BoardId::new(board.trim()).ok()?,
        circuit.trim().parse().ok()?,
    ))
}

/// Checks that every feed leads somewhere it can come from.
fn feeds(boards: &[Board], places: &[Place], all_read: bool, mistakes: &mut Mistakes<'_>) {
    let names: Vec<&str> = boards.iter().map(|b| b.id.as_str()).collect();
    for (board, place) in boards.iter().zip(places) {
        let (Some((from, no)), Some(span)) = (&board.fed_from, &place.feed) else {
            continue;
        };
        let Some((feeder, feeder_place)) = boards.iter().zip(places).find(|(b, _)| &b.id == from)
        else {
            if !all_read {
                continue;
            }
            mistakes.add(
                span,
                format!(
                    "{} is fed from {from}, which is no board of this job",
                    board.id
                ),
                suggest::with_suggestion(
                    from.as_str(),
                    &names,
                    &format!(
                        "the boards are {}; leave `fed-from` out when the feeder is not yours",
                        names.join(", ")
                    ),
                ),
            );
            continue;
        };
        let circuits: Vec<String> = feeder
            .circuits
            .iter()
            .filter(|c| c.kind == CircuitKind::Distribution)
            .map(|c| c.no.to_string())
            .collect();
        let distribution = match circuits.as_slice() {
            [] => format!("{from} has no circuit of kind \"distribution\""),
            some => format!("distribution circuits of {from}: {}", some.join(", ")),
        };
        match feeder.circuits.iter().find(|c| c.no == *no) {
            None if !feeder_place.whole => {}
            None => mistakes.add(
                span,
                format!("{from} has no circuit {no}, which should feed {}", board.id),
                distribution,
            ),
            Some(c) if c.kind != CircuitKind::Distribution => mistakes.add(
                span,
                format!(
                    "{from}/{no} feeds {} but is no distribution circuit",
                    board.id
                ),
                distribution,
            ),
            Some(_) if comes_back(boards, board) => mistakes.add(
                span,
                format!("{} feeds itself through {from}", board.id),
                "one board must be the origin, without `fed-from`",
            ),
            Some(_) => {}
        }
    }
}

/// Whether following the feeds from a board leads back to it.
fn comes_back(boards: &[Board], start: &Board) -> bool {
    let mut at = start;
    for _ in 0..boards.len() {
        let Some((from, _)) = &at.fed_from else {
            return false;
        };
        if *from == start.id {
            return true;
        }
        match boards.iter().find(|b| &b.id == from) {
            Some(next) => at = next,
            None => return false,
        }
    }
    // More steps than boards: a loop further up, reported at its own boards.
    false
}
