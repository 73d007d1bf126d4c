//! Words to meaning, meaning to words, grammar files to decoding grammars.
//!
//! Pure: it is given the words (or the text of a grammar file) and gives back what they mean.
//! It leaves out sound, recognisers and the question whether a value is plausible.

pub mod meaning;
