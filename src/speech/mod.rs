//! Words to meaning, meaning to words, grammar files to decoding grammars.
//!
//! Pure: it is given the words (or the text of a grammar file) and gives back what they mean.
//! It leaves out sound, recognisers and the question whether a value is plausible.
//!
//! A phrase's way: `spelling` (typed text to words) → `parse` (words along the compiled grammar,
//! all ways) → `sense` (tags to meaning) → `decide` (several hypotheses to one decision). The files
//! under `grammars/` are the only place that says what may be said: `net` compiles them for
//! understanding, `word_graph` for recognisers, `help` for the screen.

pub mod decide;
pub mod grammar;
pub mod guess;
pub mod help;
pub mod lexicon;
pub mod library;
pub mod meaning;
pub mod net;
pub mod parse;
pub mod phrases;
pub mod say;
pub mod sense;
pub mod spelling;
pub mod tag;
pub mod word_graph;

pub use decide::{Margins, decide};
pub use meaning::{Context, Control, Heard, Hypothesis, Meaning, Reply};
pub use phrases::Phrases;

/// The meaning of words in a context, without a job's own names: see [`Phrases::understand`].
#[must_use]
pub fn understand(context: Context, words: &str) -> Meaning {
    Phrases::plain().understand(context, words)
}

/// What can be said in a context, in lines of at most 38 columns: see [`Phrases::help`].
#[must_use]
pub fn help(context: Context) -> Vec<String> {
    Phrases::plain().help(context)
}
