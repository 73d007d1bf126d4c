//! The graph of all words: from transition ids of the acoustic model to words, in a loop.
//!
//! libvosk composes it with a grammar as it decodes. A word is a chain of its phones; its label
//! stands on the first arc, so that the grammar can refuse it before anything is spent on it.
//! Between words, at the start and at the end a silence is possible. Each sound is a word too. It
//! promises arcs sorted by word, which the composition needs.

use rustfst::{
    algorithms::tr_sort,
    prelude::{MutableFst, OLabelCompare, Semiring, Tr},
    semirings::TropicalWeight,
};

use super::{
    Automaton, BuildError, Pronunciations, WordIds, automaton_error, check_pronunciations,
    phones::{Phone, PhoneTable, Position},
};

/// Costs of the graph, in nats.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Costs {
    /// How likely a silence is between two words (0 to 1).
    pub silence: f32,
}

impl Default for Costs {
    fn default() -> Self {
        Self { silence: 0.5 }
    }
}

/// The filler as a word of its own: noise, and talk that is none of our words.
pub const FILLER: &str = "[NSN]";

/// Every sound as a word of its own, in brackets: `[AA]`, ..., `[NSN]`. A grammar of all of them in
/// any order says how well an utterance is explained by any sounds at all.
#[must_use]
pub fn sounds(table: &PhoneTable) -> Vec<(String, Phone)> {
    let phone = |name: &str| table.get(name, Position::Singleton);
    table
        .names()
        .iter()
        .filter_map(|name| Some((format!("[{name}]"), phone(name)?)))
        .chain([(FILLER.to_owned(), table.filler())])
        .collect()
}

struct Builder {
    automaton: Automaton,
}

impl Builder {
    fn state(&mut self) -> usize {
        self.automaton.add_state()
    }

    fn arc(&mut self, from: usize, input: u32, word: u32, cost: f32, to: usize) {
        let arc = Tr::new(input as _, word as _, TropicalWeight::new(cost), to as _);
        // Every state number here came from `state`.
        let added = self.automaton.add_tr(from as _, arc);
        debug_assert!(added.is_ok(), "states are made before arcs");
    }

    /// A phone's states after `from`; gives the last.
    fn phone(&mut self, from: usize, phone: Phone, word: u32, cost: f32) -> usize {
        let mut at = from;
        for state in 0..phone.states {
            let next = self.state();
            let (word, cost) = if state == 0 { (word, cost) } else { (0, 0.0) };
            self.arc(at, phone.enter(state), word, cost, next);
            self.arc(next, phone.stay(state), 0, 0.0, next);
            at = next;
        }
        at
    }
}

/// Builds the graph.
///
/// # Errors
/// [`BuildError::NoPhone`] or [`BuildError::Unpronounced`] when a pronunciation is wrong.
pub fn build(
    words: &Pronunciations,
    ids: &WordIds,
    table: &PhoneTable,
    costs: Costs,
) -> Result<Automaton, BuildError> {
    check_pronunciations(words, table)?;
    let mut b = Builder {
        automaton: Automaton::new(),
    };
    let start = b.state();
    let hub = b.state(); // ready for a word; also where everything may end
    let end = b.state(); // after a word
    for from in [start, end] {
        let silence = b.phone(from, table.silence(), 0, -costs.silence.ln());
        b.arc(silence, 0, 0, 0.0, hub);
        b.arc(from, 0, 0, -(1.0 - costs.silence).ln(), hub);
    }
    for (word, ways) in words {
        let id = id_of(ids, word)?;
        let mut seen: Vec<&[String]> = Vec::new();
        for way in ways.iter().filter(|way| !way.is_empty()) {
            if seen.contains(&way.as_slice()) {
                continue;
            }
            seen.push(way);
            let mut at = hub;
            for (index, name) in way.iter().enumerate() {
                let phone = phone_of(table, word, name, Position::of(index, way.len()))?;
                at = b.phone(at, phone, if index == 0 { id } else { 0 }, 0.0);
            }
            b.arc(at, 0, 0, 0.0, end);
        }
    }
    for (word, phone) in sounds(table) {
        let at = b.phone(hub, phone, id_of(ids, &word)?, 0.0);
        b.arc(at, 0, 0, 0.0, end);
    }
    let fail = |error: &dyn ToString| automaton_error("the word list", &error.to_string());
    b.automaton.set_start(start as _).map_err(|e| fail(&e))?;
    b.automaton
        .set_final(hub as _, TropicalWeight::one())
        .map_err(|e| fail(&e))?;
    tr_sort(&mut b.automaton, OLabelCompare {});
    Ok(b.automaton)
}

fn id_of(ids: &WordIds, word: &str) -> Result<u32, BuildError> {
    ids.get(word).ok_or_else(|| BuildError::Unpronounced {
        words: vec![word.to_owned()],
    })
}

fn phone_of(
    table: &PhoneTable,
    word: &str,
    name: &str,
    position: Position,
) -> Result<Phone, BuildError> {
    table
        .get(name, position)
        .ok_or_else(|| BuildError::NoPhone {
            word: word.to_owned(),
            phone: name.to_owned(),
        })
}

#[cfg(test)]
mod tests {
    use super::*;
    use rustfst::prelude::{CoreFst, ExpandedFst, Trs};

    fn table() -> PhoneTable {
        include_str!("../base/phones.txt").parse().expect("a table")
    }

    fn words(list: &[(&str, &str)]) -> Pronunciations {
        let mut words = Pronunciations::new();
        for (word, way) in list {
            words
                .entry((*word).to_owned())
                .or_default()
                .push(way.split(' ').map(str::to_owned).collect());
        }
        words
    }

    #[test]
    fn arcs_are_sorted_by_word_and_a_word_stands_on_its_first_arc() {
        let words = words(&[("two", "T UW"), ("oh", "OW"), ("two", "T UW")]);
        let ids = WordIds::of(&words, &table());
        let graph = build(&words, &ids, &table(), Costs::default()).expect("built");
        let mut labelled = 0;
        for state in 0..graph.num_states() {
            let arcs = graph.get_trs(state as _).expect("a state");
            let labels: Vec<_> = arcs.trs().iter().map(|a| a.olabel).collect();
            assert!(labels.is_sorted(), "state {state}");
            labelled += labels.iter().filter(|l| **l != 0).count();
        }
        // "two" is given twice the same way and counts once; then "oh", and the 40 sounds.
        assert_eq!(labelled, 2 + 40);
    }

    #[test]
    fn a_pronunciation_with_a_sound_nobody_makes_is_named() {
        let words = words(&[("ohm", "OW QQ")]);
        let ids = WordIds::of(&words, &table());
        let error = build(&words, &ids, &table(), Costs::default()).expect_err("QQ");
        assert_eq!(
            error.to_string(),
            "`ohm` is pronounced with `QQ`, which is no phone of this voice"
        );
    }
}
