//! Phrases to meanings, context by context: the one place that knows what may be said.
//!
//! Promises: understanding, recogniser graphs and help all come from the same compiled grammar.
//! It leaves out choosing between several hypotheses (see `decide`).

use std::{collections::BTreeMap, fmt, sync::OnceLock};

use crate::domain::place::Place;

use super::{
    grammar::GrammarError,
    help,
    library::{Library, file_of},
    meaning::{Context, Control, Meaning},
    net::Net,
    parse::{Parsed, parse},
    spelling,
    word_graph::WordGraph,
};

/// Why a job's own name of a place cannot be used.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[allow(missing_docs)] // the fields are named in the messages
pub enum PhraseError {
    #[error("the place name `{name}` cannot be said; use words of letters, such as `boiler house`")]
    NotWords { name: String },
    #[error("the place name `{name}` already means something; choose another")]
    Taken { name: String },
    #[error("the place name `{name}` is given twice; leave one of them out")]
    Twice { name: String },
    #[error(transparent)]
    Grammar(#[from] GrammarError),
}

/// What may be said in every context, with or without a job's own names of places.
pub struct Phrases {
    library: Library,
    own: BTreeMap<String, Place>,
    /// Compiled when first asked for: a session uses two or three of them.
    nets: BTreeMap<Context, OnceLock<Net>>,
}

impl fmt::Debug for Phrases {
    /// The names only: the grammars would fill pages.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("Phrases")
            .field("own", &self.own)
            .finish_non_exhaustive()
    }
}

impl Phrases {
    /// What may be said without a job.
    ///
    /// # Panics
    /// When a built-in grammar is wrong, which the tests rule out.
    #[must_use]
    pub fn plain() -> &'static Phrases {
        static PLAIN: OnceLock<Phrases> = OnceLock::new();
        PLAIN.get_or_init(|| match Phrases::with_places(&[]) {
            Ok(phrases) => phrases,
            Err(error) => panic!("a built-in grammar is wrong: {error}"),
        })
    }

    /// What may be said in a job with names of its own: each name with what it stands for.
    ///
    /// # Errors
    /// [`PhraseError`] for a name that is not words, that means something already, or comes twice.
    pub fn with_places(names: &[(String, Place)]) -> Result<Phrases, PhraseError> {
        let mut library = Library::built_in()?;
        let mut own = BTreeMap::new();
        let mut said = Vec::new();
        for (name, place) in names {
            let words = spelling::words(name);
            let sayable = |word: &String| {
                word.starts_with(|c: char| c.is_ascii_lowercase())
                    && word
                        .chars()
                        .all(|c| c.is_ascii_lowercase() || c == '\'' || c == '-')
            };
            if words.is_empty() || !words.iter().all(sayable) {
                return Err(PhraseError::NotWords { name: name.clone() });
            }
            let joined = words.join(" ");
            let known = Phrases::plain().understand(Context::All, &joined);
            if !matches!(known, Meaning::Nothing(_)) {
                return Err(PhraseError::Taken { name: joined });
            }
            let named = Place {
                name: Some(joined.clone()),
                ..place.clone()
            };
            if own.insert(joined.clone(), named).is_some() {
                return Err(PhraseError::Twice { name: joined });
            }
            said.push(words);
        }
        library.weave(&said);
        let nets = Context::EVERY
            .map(|context| (context, OnceLock::new()))
            .into();
        Ok(Phrases { library, own, nets })
    }

    /// The meaning of words in a context: one, several ([`Meaning::Ambiguous`]) or none
    /// ([`Meaning::Nothing`], which says why).
    #[must_use]
    pub fn understand(&self, context: Context, words: &str) -> Meaning {
        let words = spelling::words(words);
        let words: Vec<&str> = words.iter().map(String::as_str).collect();
        if words.is_empty() {
            return Meaning::Nothing("nothing was said".into());
        }
        if words.contains(&UNKNOWN) {
            return Meaning::Nothing("noise or other talk, no phrase of this prompt".into());
        }
        match parse(self.net(context), &words) {
            Parsed::Meanings(found) => {
                let mut meanings: Vec<Meaning> = found
                    .into_iter()
                    .map(|(_, meaning)| self.with_own(meaning))
                    .collect();
                if meanings.len() == 1 {
                    meanings.remove(0)
                } else {
                    Meaning::Ambiguous(meanings)
                }
            }
            Parsed::Senseless(why) => Meaning::Nothing(why),
            Parsed::Left {
                understood,
                next,
                whole,
            } => {
                let elsewhere = context != Context::All
                    && matches!(parse(self.net(Context::All), &words), Parsed::Meanings(_));
                Meaning::Nothing(if elsewhere {
                    format!("\"{}\" is not asked for here", words.join(" "))
                } else {
                    why_left(&words, understood, &next, whole)
                })
            }
        }
    }

    /// What may be said in a context, for a recogniser.
    #[must_use]
    pub fn word_graph(&self, context: Context) -> WordGraph {
        WordGraph::of(self.net(context))
    }

    /// What can be said in a context, for the screen: lines of at most 38 columns.
    #[must_use]
    pub fn help(&self, context: Context) -> Vec<String> {
        let mut lines = help::lines(&self.library, &file_of(context));
        lines.extend(self.own.keys().map(|name| help::line(name)));
        lines
    }

    /// The grammar files, with the names woven in.
    #[must_use]
    pub fn library(&self) -> &Library {
        &self.library
    }

    /// The compiled network of a context.
    ///
    /// # Panics
    /// When a built-in grammar is wrong, which the tests rule out.
    #[must_use]
    pub fn net(&self, context: Context) -> &Net {
        self.nets[&context].get_or_init(|| {
            match Net::compile(&self.library, &file_of(context), None) {
                Ok(net) => net,
                Err(error) => panic!("a built-in grammar is wrong: {error}"),
            }
        })
    }

    /// A place called by a name of the job's own, with what the name stands for.
    fn with_own(&self, meaning: Meaning) -> Meaning {
        match meaning {
            Meaning::Place(place) => {
                let known = place.name.as_ref().and_then(|name| self.own.get(name));
                Meaning::Place(known.cloned().unwrap_or(place))
            }
            Meaning::Control(Control::Correction(Some(inner))) => {
                Meaning::Control(Control::Correction(Some(Box::new(self.with_own(*inner)))))
            }
            other => other,
        }
    }
}

/// What a recogniser writes for noise and for talk outside the grammar.
pub const UNKNOWN: &str = "[unk]";

/// The most continuations a message names.
const SHOWN: usize = 5;

fn why_left(words: &[&str], understood: usize, next: &[String], whole: bool) -> String {
    let so_far = words[..understood].join(" ");
    match words.get(understood) {
        Some(&"minus") if understood == 0 => {
            "a figure below zero is a null left over from other leads: null again".into()
        }
        Some(word) if understood == 0 => format!("no phrase of this prompt begins with \"{word}\""),
        Some(word) if ["zero", "nought"].contains(&so_far.as_str()) && digit(word) => {
            format!("after \"{so_far}\" say the point: \"{so_far} point {word}\"")
        }
        Some(word) if whole => format!("\"{so_far}\" was understood, \"{word}\" after it was not"),
        Some(word) => format!("\"{word}\" cannot follow \"{so_far}\"; {}", listed(next)),
        None => format!("\"{so_far}\" is not finished; {}", listed(next)),
    }
}

fn digit(word: &str) -> bool {
    ('0'..='9').any(|c| spelling::digit_word(c) == Some(word)) || word == "oh" || word == "nought"
}

fn listed(next: &[String]) -> String {
    let shown = next[..next.len().min(SHOWN)].join(", ");
    match next.len().saturating_sub(SHOWN) {
        0 => format!("it goes on with {shown}"),
        more => format!("it goes on with {shown} or {more} others"),
    }
}
