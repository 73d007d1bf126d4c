//! How words are pronounced: the pronunciation file, names of places added, words looked up.
//!
//! Promises: sounds are those of the CMU Pronouncing Dictionary's set, without stress; a word that
//! is missing is named together with the grammar that says it. It leaves out the numbering of
//! sounds in a voice (the voice knows that) and sound itself.
//!
//! File format: `word  S OUN DS`, a line a pronunciation; `#` begins a comment.

use std::{collections::BTreeMap, fmt};

use super::{
    guess::{guess, without_r},
    word_graph::WordGraph,
};

/// The pronunciation file built into the tool.
const BUILT_IN: &str = include_str!("../../grammars/pronunciations.txt");
const FILE: &str = "pronunciations.txt";

/// The sounds, as the CMU Pronouncing Dictionary names them.
pub const PHONES: [&str; 39] = [
    "AA", "AE", "AH", "AO", "AW", "AY", "B", "CH", "D", "DH", "EH", "ER", "EY", "F", "G", "HH",
    "IH", "IY", "JH", "K", "L", "M", "N", "NG", "OW", "OY", "P", "R", "S", "SH", "T", "TH", "UH",
    "UW", "V", "W", "Y", "Z", "ZH",
];

/// One sound.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Phone(u8);

impl Phone {
    /// A sound by its name.
    #[must_use]
    pub fn named(name: &str) -> Option<Phone> {
        let at = PHONES.iter().position(|phone| *phone == name)?;
        u8::try_from(at).ok().map(Phone)
    }

    /// Its name.
    #[must_use]
    pub fn name(self) -> &'static str {
        PHONES[usize::from(self.0)]
    }

    /// Whether it is a vowel: those of the CMU Pronouncing Dictionary begin with A, E, I, O or U.
    #[must_use]
    pub fn is_vowel(self) -> bool {
        self.name().starts_with(['A', 'E', 'I', 'O', 'U'])
    }
}

impl fmt::Display for Phone {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.name())
    }
}

/// The sounds of one word, at least one.
pub type Pronunciation = Vec<Phone>;

/// What is wrong with a pronunciation file, or what it lacks.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[allow(missing_docs)] // the fields are named in the messages
pub enum LexiconError {
    #[error(
        "{file}:{line}: `{text}` is no sound; the sounds are those of the CMU dictionary, such as AA, TH, ZH"
    )]
    NoSound {
        file: String,
        line: usize,
        text: String,
    },
    #[error("{file}:{line}: `{word}` has no sounds; write the word, then its sounds")]
    Silent {
        file: String,
        line: usize,
        word: String,
    },
    #[error(
        "`{word}`, said in {grammar}, has no pronunciation; add it to grammars/pronunciations.txt"
    )]
    NotCovered { word: String, grammar: String },
    #[error(
        "the place name `{name}` has {words} words but its pronunciation `{say}` has {said}; separate words with /"
    )]
    OtherLength {
        name: String,
        words: usize,
        say: String,
        said: usize,
    },
}

/// Pronunciations by word, in the order of the file.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Lexicon {
    words: BTreeMap<String, Vec<Pronunciation>>,
}

impl Lexicon {
    /// The file built into the tool.
    ///
    /// # Errors
    /// [`LexiconError`] when the file is wrong (a test keeps that from happening).
    pub fn built_in() -> Result<Lexicon, LexiconError> {
        Lexicon::parse(FILE, BUILT_IN)
    }

    /// Reads a pronunciation file; `file` is its name for messages.
    ///
    /// # Errors
    /// [`LexiconError`] with the line that is wrong.
    pub fn parse(file: &str, text: &str) -> Result<Lexicon, LexiconError> {
        let mut lexicon = Lexicon::default();
        for (n, line) in text.lines().enumerate() {
            let line = line.split('#').next().unwrap_or_default();
            let mut parts = line.split_whitespace();
            let Some(word) = parts.next() else { continue };
            let sounds = sounds(parts).map_err(|text| LexiconError::NoSound {
                file: file.into(),
                line: n + 1,
                text,
            })?;
            if sounds.is_empty() {
                return Err(LexiconError::Silent {
                    file: file.into(),
                    line: n + 1,
                    word: word.into(),
                });
            }
            lexicon.add(word, sounds);
        }
        Ok(lexicon)
    }

    /// Adds a pronunciation of a word, after those it has.
    pub fn add(&mut self, word: &str, sounds: Pronunciation) {
        let known = self.words.entry(word.into()).or_default();
        if !known.contains(&sounds) {
            known.push(sounds);
        }
    }

    /// Adds the words of a place name: as given (`say`: the sounds of each word, words separated by
    /// `/`), else from the file, else by a guess from the spelling.
    ///
    /// # Errors
    /// [`LexiconError`] when `say` has other sounds or another number of words.
    pub fn add_name(&mut self, name: &str, say: &[String]) -> Result<(), LexiconError> {
        let words = super::spelling::words(name);
        for given in say {
            let parts: Vec<&str> = given.split('/').collect();
            if parts.len() != words.len() {
                return Err(LexiconError::OtherLength {
                    name: name.into(),
                    words: words.len(),
                    say: given.clone(),
                    said: parts.len(),
                });
            }
            for (word, part) in words.iter().zip(parts) {
                let sounds =
                    sounds(part.split_whitespace()).map_err(|text| LexiconError::NoSound {
                        file: format!("place name {name}"),
                        line: 1,
                        text,
                    })?;
                if !sounds.is_empty() {
                    self.add(word, sounds);
                }
            }
        }
        for word in &words {
            if !self.words.contains_key(word) {
                let sounds = guess(word);
                if !sounds.is_empty() {
                    self.add(word, without_r(&sounds));
                    self.add(word, sounds);
                }
            }
        }
        Ok(())
    }

    /// Pronunciations of a word, the commonest first; empty when it is not known.
    #[must_use]
    pub fn get(&self, word: &str) -> &[Pronunciation] {
        self.words.get(word).map_or(&[], Vec::as_slice)
    }

    /// Every word with its pronunciations, in order.
    pub fn iter(&self) -> impl Iterator<Item = (&str, &[Pronunciation])> {
        self.words
            .iter()
            .map(|(word, sounds)| (word.as_str(), sounds.as_slice()))
    }

    /// Checks that every word of a graph is covered; `grammar` names it in the message.
    ///
    /// # Errors
    /// [`LexiconError::NotCovered`] with the first word that is not.
    pub fn covers(&self, graph: &WordGraph, grammar: &str) -> Result<(), LexiconError> {
        match graph
            .words()
            .into_iter()
            .find(|word| !self.words.contains_key(*word))
        {
            None => Ok(()),
            Some(word) => Err(LexiconError::NotCovered {
                word: word.into(),
                grammar: grammar.into(),
            }),
        }
    }
}

/// Names of sounds to sounds; the name that is none is the error.
fn sounds<'a>(names: impl Iterator<Item = &'a str>) -> Result<Pronunciation, String> {
    names
        .map(|name| Phone::named(name).ok_or_else(|| name.to_owned()))
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::speech::{Context, Phrases};

    #[test]
    fn every_word_of_every_grammar_is_covered_and_no_word_is_left_over() {
        let lexicon = Lexicon::built_in().expect("the built-in file");
        let mut said = std::collections::BTreeSet::new();
        for context in Context::EVERY {
            let graph = Phrases::plain().word_graph(context);
            lexicon.covers(&graph, context.name()).expect("covered");
            said.extend(graph.words().into_iter().map(str::to_owned));
        }
        let unused: Vec<&str> = lexicon
            .iter()
            .map(|(word, _)| word)
            .filter(|word| !said.contains(*word))
            .collect();
        assert!(unused.is_empty(), "said nowhere: {unused:?}");
    }

    #[test]
    fn a_missing_word_is_named_with_its_grammar() {
        let graph = Phrases::plain().word_graph(Context::Confirm);
        let mut lexicon = Lexicon::built_in().expect("the built-in file");
        lexicon.words.remove("affirm");
        let error = lexicon.covers(&graph, "confirm").expect_err("affirm");
        assert_eq!(
            error.to_string(),
            "`affirm`, said in confirm, has no pronunciation; add it to grammars/pronunciations.txt"
        );
    }

    #[test]
    fn a_wrong_sound_is_named_with_its_line() {
        let error = Lexicon::parse("p.txt", "one W AH N\ntwo T OO\n").expect_err("OO");
        assert!(error.to_string().starts_with("p.txt:2: `OO` is no sound"));
        let error = Lexicon::parse("p.txt", "one\n").expect_err("silent");
        assert!(
            error
                .to_string()
                .starts_with("p.txt:1: `one` has no sounds")
        );
    }

    #[test]
    fn a_name_is_said_as_given_or_as_guessed() {
        let mut lexicon = Lexicon::built_in().expect("the built-in file");
        lexicon
            .add_name("boiler house", &["B OY L AH / HH AW S".into()])
            .expect("two words each");
        assert_eq!(lexicon.get("house")[0].len(), 3);
        lexicon.add_name("mezzanine", &[]).expect("a guess");
        assert!(!lexicon.get("mezzanine").is_empty());
        let error = lexicon
            .add_name("plant room", &["P L AA N T".into()])
            .expect_err("one word said");
        assert!(
            error.to_string().contains("separate words with /"),
            "{error}"
        );
    }
}
