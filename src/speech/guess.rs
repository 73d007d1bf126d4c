//! A pronunciation guessed from the spelling, for names of places that no dictionary holds.
//!
//! Promises: some pronunciation for every word of letters. It leaves out stress and exceptions.

use super::lexicon::{Phone, Pronunciation};

/// Spellings and their usual sounds, the longest that fits first.
const SPELLINGS: [(&str, &str); 50] = [
    ("tion", "SH AH N"),
    ("igh", "AY"),
    ("tch", "CH"),
    ("ch", "CH"),
    ("sh", "SH"),
    ("th", "TH"),
    ("ph", "F"),
    ("ck", "K"),
    ("ng", "NG"),
    ("qu", "K W"),
    ("wh", "W"),
    ("ee", "IY"),
    ("ea", "IY"),
    ("oo", "UW"),
    ("ou", "AW"),
    ("ow", "OW"),
    ("oa", "OW"),
    ("oi", "OY"),
    ("oy", "OY"),
    ("ai", "EY"),
    ("ay", "EY"),
    ("au", "AO"),
    ("aw", "AO"),
    ("ar", "AA"),
    ("er", "ER"),
    ("ir", "ER"),
    ("ur", "ER"),
    ("or", "AO"),
    ("a", "AE"),
    ("b", "B"),
    ("c", "K"),
    ("d", "D"),
    ("e", "EH"),
    ("f", "F"),
    ("g", "G"),
    ("h", "HH"),
    ("i", "IH"),
    ("j", "JH"),
    ("k", "K"),
    ("l", "L"),
    ("m", "M"),
    ("n", "N"),
    ("o", "AO"),
    ("p", "P"),
    ("r", "R"),
    ("s", "S"),
    ("t", "T"),
    ("u", "AH"),
    ("v", "V"),
    ("w", "W"),
];

/// A guess at how a word is said.
#[must_use]
pub fn guess(word: &str) -> Pronunciation {
    let mut rest = word;
    let mut sounds = Vec::new();
    while let Some(first) = rest.chars().next() {
        let entry = SPELLINGS
            .iter()
            .find(|(spelling, _)| rest.starts_with(spelling));
        let (taken, said) = match entry {
            Some((spelling, said)) => (spelling.len(), *said),
            None => (
                first.len_utf8(),
                match first {
                    'x' => "K S",
                    'y' => "IY",
                    'z' => "Z",
                    _ => "",
                },
            ),
        };
        sounds.extend(said.split_whitespace().filter_map(Phone::named));
        rest = &rest[taken..];
    }
    sounds
}
