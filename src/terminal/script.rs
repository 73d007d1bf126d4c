//! Lines of keys from a pipe, or from a terminal that cannot move its cursor.
//!
//! One line: the keys in it, then enter if a figure is being typed. An empty line is enter.
//! `#` begins a remark. `say: WORDS` are words as heard, for scripts and tests: they go through the
//! same grammars as speech, but not through a recogniser. `hear` waits for the next utterance of
//! the ear. Spaces between keys are left out.

use crate::session::Key;

use super::keymap::Keymap;

/// One thing a line asks for.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Step {
    /// A key.
    Key(Key),
    /// Words, as if heard.
    Say(String),
    /// Wait for an utterance.
    Hear,
    /// No key and no order; the text as it stands.
    Unknown(String),
}

/// What a line of a script asks for, in order.
#[must_use]
pub fn steps(line: &str, keymap: &Keymap) -> Vec<Step> {
    let line = line.trim();
    if line.starts_with('#') {
        return Vec::new();
    }
    if let Some(words) = line.strip_prefix("say:") {
        return vec![Step::Say(words.trim().to_lowercase())];
    }
    if line == "hear" {
        return vec![Step::Hear];
    }
    if line.is_empty() {
        return vec![Step::Key(Key::Enter)];
    }
    let mut steps = Vec::new();
    for c in line.chars().filter(|c| !c.is_whitespace()) {
        match keymap.named(&c.to_string()) {
            Some(key) => steps.push(Step::Key(key)),
            None => return vec![Step::Unknown(line.into())],
        }
    }
    steps.push(Step::Key(Key::LineEnd));
    steps
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(line: &str, expected: &[Step]) {
        assert_eq!(steps(line, &Keymap::default()), expected);
    }

    #[test]
    fn a_line_is_its_keys() {
        use Key::{Digit, LineEnd, Point, Star};
        check("", &[Step::Key(Key::Enter)]);
        check("0.5", &[Digit(0), Point, Digit(5), LineEnd].map(Step::Key));
        check("* 4", &[Star, Digit(4), LineEnd].map(Step::Key));
        check("# remark", &[]);
        check("say: Affirm ", &[Step::Say("affirm".into())]);
        check("hear", &[Step::Hear]);
        check("0.5€", &[Step::Unknown("0.5€".into())]);
    }
}
