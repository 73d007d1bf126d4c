//! The table of phones of a base: how each sound is numbered in the acoustic model.
//!
//! A line is `NAME POSITION ID FIRST_TID STATES`. A phone has one id in each position of a word,
//! and each of its states two transition ids: state j loops on `FIRST_TID + 2j` and is left by
//! `FIRST_TID + 2j + 1`. It promises that ids run from 1 without a gap, that transition ids do not
//! overlap, and that every phone comes in all four positions.

use std::{collections::BTreeMap, str::FromStr};

/// Where in a word a phone stands.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Position {
    /// First of several.
    Begin,
    /// Last of several.
    End,
    /// Between.
    Internal,
    /// The whole word.
    Singleton,
    /// No part of a word: silence, noise.
    Nonword,
}

impl Position {
    /// The word libvosk uses in `word_boundary.int`, also used in `phones.txt`.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Position::Begin => "begin",
            Position::End => "end",
            Position::Internal => "internal",
            Position::Singleton => "singleton",
            Position::Nonword => "nonword",
        }
    }

    /// The position of phone `index` of a word of `length` phones.
    #[must_use]
    pub fn of(index: usize, length: usize) -> Self {
        match (index, length) {
            (_, 1) => Position::Singleton,
            (0, _) => Position::Begin,
            (i, n) if i + 1 == n => Position::End,
            _ => Position::Internal,
        }
    }

    fn from_word(word: &str) -> Option<Self> {
        [
            Position::Begin,
            Position::End,
            Position::Internal,
            Position::Singleton,
            Position::Nonword,
        ]
        .into_iter()
        .find(|p| p.word() == word)
    }
}

/// One phone in one position.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Phone {
    /// Number of the phone, from 1.
    pub id: u32,
    /// Transition id of the loop in its first state.
    pub first: u32,
    /// How many states it has.
    pub states: u32,
}

impl Phone {
    /// Transition id of the loop in state `state`, from 0.
    #[must_use]
    pub fn stay(self, state: u32) -> u32 {
        self.first + 2 * state
    }

    /// Transition id that belongs to entering state `state`, from 0. (Kaldi counts it as the way
    /// out; the graph carries it ahead of the loop, which is what its decoders call reordered.)
    #[must_use]
    pub fn enter(self, state: u32) -> u32 {
        self.first + 2 * state + 1
    }
}

/// Why a phone table is wrong.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum PhoneTableError {
    /// Not five fields of the right kind.
    #[error("line {line}: `{text}` is not NAME POSITION ID FIRST_TID STATES")]
    Line {
        /// From 1.
        line: usize,
        /// The line.
        text: String,
    },
    /// Numbers out of step.
    #[error(
        "line {line}: id or transition id is out of step (expected id {id}, transition {first})"
    )]
    OutOfStep {
        /// From 1.
        line: usize,
        /// The id that was due.
        id: u32,
        /// The transition id that was due.
        first: u32,
    },
    /// SIL, or NSN, or a position of a phone is missing.
    #[error("phone {name} is missing in position {position}")]
    Missing {
        /// Its name.
        name: String,
        /// The position.
        position: &'static str,
    },
}

/// The phones of a base.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct PhoneTable {
    phones: BTreeMap<(String, Position), Phone>,
    order: Vec<(String, Position)>,
    silence: Phone,
    filler: Phone,
    transitions: u32,
}

impl PhoneTable {
    /// The phone of silence.
    #[must_use]
    pub fn silence(&self) -> Phone {
        self.silence
    }

    /// The phone of noise and of talk that no grammar covers (NSN).
    #[must_use]
    pub fn filler(&self) -> Phone {
        self.filler
    }

    /// A phone by name ("AA") in a position.
    #[must_use]
    pub fn get(&self, name: &str, position: Position) -> Option<Phone> {
        self.phones.get(&(name.to_owned(), position)).copied()
    }

    /// Names of the phones words are made of, sorted, each once.
    #[must_use]
    pub fn names(&self) -> Vec<&str> {
        let mut names: Vec<&str> = self
            .order
            .iter()
            .filter(|(_, position)| *position == Position::Singleton)
            .map(|(name, _)| name.as_str())
            .collect();
        names.sort_unstable();
        names
    }

    /// How many phones, positions counted.
    #[must_use]
    pub fn len(&self) -> usize {
        self.order.len()
    }

    /// Never true of a table that was read.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.order.is_empty()
    }

    /// A transition id the model does not use, for `disambig_tid.int`.
    #[must_use]
    pub fn unused_transition(&self) -> u32 {
        self.transitions + 1
    }

    /// `word_boundary.int`: a line `ID POSITION` a phone. The filler counts as a whole word there,
    /// because it stands as one in the graph.
    #[must_use]
    pub fn word_boundaries(&self) -> String {
        let filler = self.filler.id as usize;
        self.order
            .iter()
            .zip(1..)
            .map(|((_, position), id)| {
                let whole = id == filler;
                let position = if whole {
                    Position::Singleton
                } else {
                    *position
                };
                format!("{id} {}\n", position.word())
            })
            .collect()
    }
}

impl FromStr for PhoneTable {
    type Err = PhoneTableError;

    fn from_str(text: &str) -> Result<Self, Self::Err> {
        let mut phones = BTreeMap::new();
        let mut order = Vec::new();
        let mut due = 1;
        for (index, text) in text.lines().enumerate() {
            let line = index + 1;
            let wrong = || PhoneTableError::Line {
                line,
                text: text.to_owned(),
            };
            let fields: Vec<&str> = text.split_whitespace().collect();
            let [name, position, numbers @ ..] = fields.as_slice() else {
                return Err(wrong());
            };
            let position = Position::from_word(position).ok_or_else(wrong)?;
            let numbers: Vec<u32> = numbers.iter().filter_map(|n| n.parse().ok()).collect();
            let [id, first, states] = numbers[..] else {
                return Err(wrong());
            };
            let expected = u32::try_from(line).map_err(|_| wrong())?;
            if id != expected || first != due || !(1..=8).contains(&states) {
                return Err(PhoneTableError::OutOfStep {
                    line,
                    id: expected,
                    first: due,
                });
            }
            due = first + 2 * states;
            let key = ((*name).to_owned(), position);
            phones.insert(key.clone(), Phone { id, first, states });
            order.push(key);
        }
        let find = |name: &str, position: Position| {
            phones
                .get(&(name.to_owned(), position))
                .copied()
                .ok_or_else(|| PhoneTableError::Missing {
                    name: name.to_owned(),
                    position: position.word(),
                })
        };
        for (name, position) in &order {
            if *position != Position::Nonword {
                for other in [
                    Position::Begin,
                    Position::End,
                    Position::Internal,
                    Position::Singleton,
                ] {
                    find(name, other)?;
                }
            }
        }
        Ok(Self {
            silence: find("SIL", Position::Nonword)?,
            filler: find("NSN", Position::Nonword)?,
            transitions: due - 1,
            phones,
            order,
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const SMALL: &str = "SIL nonword 1 1 1\nNSN nonword 2 3 1\nAA begin 3 5 2\nAA end 4 9 2\n\
                         AA internal 5 13 2\nAA singleton 6 17 2\n";

    #[test]
    fn a_table_with_several_states_is_numbered_as_kaldi_counts() {
        let table: PhoneTable = SMALL.parse().expect("a table");
        let phone = table.get("AA", Position::End).expect("in the table");
        assert_eq!((phone.stay(1), phone.enter(1)), (11, 12));
        assert_eq!(table.unused_transition(), 21);
        assert!(
            table
                .word_boundaries()
                .starts_with("1 nonword\n2 singleton\n3 begin\n")
        );
    }

    #[track_caller]
    fn refused(text: &str, part: &str) {
        let error = text.parse::<PhoneTable>().expect_err("wrong");
        assert!(error.to_string().contains(part), "{error}");
    }

    #[test]
    fn a_table_that_does_not_hold_together_is_refused() {
        refused("SIL nonword 1 1", "line 1");
        refused("SIL nonword 1 1 1\nNSN nonword 3 3 1\n", "out of step");
        refused("SIL nonword 1 1 1\nNSN nonword 2 5 1\n", "transition 3");
        refused("SIL nonword 1 1 1\n", "NSN");
        let cut = SMALL.rsplit_once("AA singleton").expect("there").0;
        refused(cut, "singleton");
    }
}
