//! From a base, a word list with pronunciations and word graphs to the folders libvosk reads.
//!
//! It promises the same bytes for the same inputs. The acoustic model and the graph of all words
//! (`HCLr.fst`) are shared by every context; only the grammar (`Gr.fst`) differs. It leaves out
//! what may be said (`grammars/`, `speech`) and decoding (`recogniser`).

pub mod folder;
pub mod grammar_graph;
pub mod lexicon_graph;
pub mod phones;

use std::collections::BTreeMap;

use rustfst::{fst_impls::VectorFst, fst_traits::SerializableFst, semirings::TropicalWeight};

use phones::{PhoneTable, Position};

/// A weighted automaton as OpenFst's `vector`/`standard` type.
pub type Automaton = VectorFst<TropicalWeight>;

/// The garbage word of general models: speech or noise that no grammar covers. Ours has none: it
/// tells such sound by how much better sounds without any grammar explain it (see `hearing`).
pub const GARBAGE: &str = "[unk]";

/// Words with their pronunciations, each a list of CMUdict phones without stress.
pub type Pronunciations = BTreeMap<String, Vec<Vec<String>>>;

/// Why a voice could not be built.
#[derive(Debug, thiserror::Error)]
pub enum BuildError {
    /// A grammar holds a word nobody said how to pronounce.
    #[error("no pronunciation for {}: add a line to grammars/pronunciations.txt", words.join(", "))]
    Unpronounced {
        /// The words, sorted.
        words: Vec<String>,
    },
    /// A pronunciation holds something that is no phone.
    #[error("`{word}` is pronounced with `{phone}`, which is no phone of this voice")]
    NoPhone {
        /// The word.
        word: String,
        /// What stands there.
        phone: String,
    },
    /// A word graph points outside itself.
    #[error("the word graph of {context} has no state {state}")]
    BrokenGraph {
        /// Name of the context.
        context: String,
        /// The missing state.
        state: usize,
    },
    /// The automata library gave up.
    #[error("the graph of {context} could not be made: {reason}")]
    Automaton {
        /// Name of the context, or "the word list".
        context: String,
        /// What the library said.
        reason: String,
    },
}

/// Numbers of the words, as `words.txt` gives them: 0 is no word, then the words in order, then
/// the sounds.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct WordIds(BTreeMap<String, u32>);

impl WordIds {
    /// Numbers for these words.
    #[must_use]
    pub fn new<'a>(words: impl IntoIterator<Item = &'a str>) -> Self {
        let mut ids = BTreeMap::new();
        for word in words {
            let next = ids.len() as u32 + 1;
            ids.entry(word.to_owned()).or_insert(next);
        }
        Self(ids)
    }

    /// Numbers for the words and the sounds of a voice.
    #[must_use]
    pub fn of(words: &Pronunciations, table: &PhoneTable) -> Self {
        let sounds = lexicon_graph::sounds(table);
        let sounds = sounds.iter().map(|(word, _)| word.as_str());
        Self::new(words.keys().map(String::as_str).chain(sounds))
    }

    /// Reads a `words.txt`; lines that are not `WORD NUMBER` are passed over.
    #[must_use]
    pub fn read(text: &str) -> Self {
        Self(
            text.lines()
                .filter_map(|line| {
                    let (word, id) = line.rsplit_once(' ')?;
                    Some((word.to_owned(), id.trim().parse().ok()?))
                })
                .filter(|(word, id)| *id != 0 && !word.is_empty())
                .collect(),
        )
    }

    /// The number of a word.
    #[must_use]
    pub fn get(&self, word: &str) -> Option<u32> {
        self.0.get(word).copied()
    }

    /// `words.txt`.
    #[must_use]
    pub fn text(&self) -> String {
        let mut lines: Vec<(u32, &str)> = self.0.iter().map(|(w, id)| (*id, w.as_str())).collect();
        lines.sort_unstable();
        std::iter::once("<eps> 0\n".to_owned())
            .chain(lines.iter().map(|(id, word)| format!("{word} {id}\n")))
            .collect()
    }
}

/// The automaton in OpenFst's binary form.
///
/// # Errors
/// [`BuildError::Automaton`] if the library refuses.
pub fn to_bytes(automaton: &Automaton, context: &str) -> Result<Vec<u8>, BuildError> {
    let mut bytes = Vec::new();
    automaton
        .store(&mut bytes)
        .map_err(|error| automaton_error(context, &error))?;
    Ok(bytes)
}

fn automaton_error(context: &str, error: &impl ToString) -> BuildError {
    BuildError::Automaton {
        context: context.to_owned(),
        reason: error.to_string(),
    }
}

/// Checks that every pronunciation is made of phones of this base.
///
/// # Errors
/// [`BuildError::NoPhone`], or [`BuildError::Unpronounced`] for a word with an empty list.
pub fn check_pronunciations(words: &Pronunciations, table: &PhoneTable) -> Result<(), BuildError> {
    let silent: Vec<String> = words
        .iter()
        .filter(|(_, ways)| ways.iter().all(Vec::is_empty))
        .map(|(word, _)| word.clone())
        .collect();
    if !silent.is_empty() {
        return Err(BuildError::Unpronounced { words: silent });
    }
    for (word, ways) in words {
        for phone in ways.iter().flatten() {
            if table.get(phone, Position::Singleton).is_none() {
                return Err(BuildError::NoPhone {
                    word: word.clone(),
                    phone: phone.clone(),
                });
            }
        }
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;
    use rustfst::prelude::{MutableFst, Semiring, Tr};

    /// The layout as OpenFst documents it for its `vector` type, written out by hand: magic,
    /// type names, version 2, flags, properties, start, states, arcs; then per state the final
    /// weight, the arc count and the arcs.
    #[test]
    fn an_automaton_is_stored_byte_for_byte_as_openfst_lays_it_out() {
        let mut automaton = Automaton::new();
        automaton.add_states(2);
        automaton.set_start(0).expect("state 0");
        let arc = Tr::new(7, 9, TropicalWeight::new(0.5), 1);
        automaton.add_tr(0, arc).expect("state 0");
        automaton
            .set_final(1, TropicalWeight::one())
            .expect("state 1");
        let bytes = to_bytes(&automaton, "test").expect("stored");

        let mut due = Vec::new();
        due.extend(2_125_659_606_i32.to_le_bytes());
        for name in ["vector", "standard"] {
            due.extend((name.len() as i32).to_le_bytes());
            due.extend(name.as_bytes());
        }
        due.extend(2_i32.to_le_bytes()); // version
        due.extend(0_i32.to_le_bytes()); // no symbol tables
        let properties = due.len()..due.len() + 8; // hints only; the library's own business
        due.extend([0; 8]);
        for number in [0_i64, 2, 1] {
            due.extend(number.to_le_bytes());
        }
        due.extend(f32::INFINITY.to_le_bytes());
        due.extend(1_i64.to_le_bytes());
        due.extend(7_i32.to_le_bytes());
        due.extend(9_i32.to_le_bytes());
        due.extend(0.5_f32.to_le_bytes());
        due.extend(1_i32.to_le_bytes());
        due.extend(0_f32.to_le_bytes());
        due.extend(0_i64.to_le_bytes());

        let mut stored = bytes.clone();
        // Bits 0 and 1 of the properties say "expanded" and "mutable"; both must be set.
        assert_eq!(stored[properties.start] & 3, 3);
        stored[properties].fill(0);
        assert_eq!(stored, due);
        assert_eq!(Automaton::load(&bytes).expect("read back"), automaton);
    }

    #[test]
    fn words_keep_their_numbers_through_words_txt() {
        let ids = WordIds::new(["zero", "one"]);
        assert_eq!(ids.text(), "<eps> 0\nzero 1\none 2\n");
        assert_eq!(WordIds::read(&ids.text()), ids);
    }
}
