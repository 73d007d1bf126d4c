//! What a try of microphone and voice tells: pure, figures in, advice out.
//!
//! It promises plain advice that names what to move. The limits are common practice, no source,
//! unless noted. It leaves out capturing and showing.

use std::collections::BTreeSet;

/// The phrases to say: every digit and decimal word, each unit of dead tests, replies, a circuit,
/// a board, and the pairs that are easily mistaken.
pub const PHRASES: [&str; 12] = [
    "zero point five eight ohms",
    "one point two seven",
    "nought point oh nine",
    "greater than nine nine nine megohms",
    "three hundred and sixty megohms",
    "fifteen megohms",
    "fifty megohms",
    "open circuit",
    "circuit one four",
    "board delta bravo one",
    "affirm",
    "negative",
];

/// How one phrase went.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Try {
    /// What was to be said.
    pub phrase: String,
    /// What was heard, each time; empty when nothing was noticed.
    pub heard: Vec<String>,
    /// Whether it was understood in the end.
    pub understood: bool,
}

/// A whole try.
#[derive(Debug, Clone, PartialEq)]
pub struct SoundCheck {
    /// Level of the room in dBFS.
    pub floor: f32,
    /// Level of speech in dBFS, the loudest tenths of a second.
    pub speech: f32,
    /// The phrases.
    pub tries: Vec<Try>,
}

impl SoundCheck {
    /// Phrases understood.
    #[must_use]
    pub fn understood(&self) -> usize {
        self.tries.iter().filter(|t| t.understood).count()
    }

    /// Phrases understood at once.
    #[must_use]
    pub fn at_once(&self) -> usize {
        self.tries
            .iter()
            .filter(|t| t.understood && t.heard.len() == 1)
            .count()
    }

    /// Words this person is missed on: in phrases that were missed or had to be said again, heard
    /// as something else, and in no phrase that was understood at once.
    #[must_use]
    pub fn missed_words(&self) -> Vec<String> {
        let words = |t: &Try| {
            t.phrase
                .split_whitespace()
                .map(str::to_owned)
                .collect::<Vec<_>>()
        };
        let good: BTreeSet<String> = self
            .tries
            .iter()
            .filter(|t| t.understood && t.heard.len() == 1)
            .flat_map(words)
            .collect();
        let mut missed = BTreeSet::new();
        for one in self
            .tries
            .iter()
            .filter(|t| !t.understood || t.heard.len() > 1)
        {
            let heard: BTreeSet<&str> = one
                .heard
                .iter()
                .filter(|h| **h != one.phrase)
                .flat_map(|h| h.split_whitespace())
                .collect();
            missed.extend(
                words(one)
                    .into_iter()
                    .filter(|w| !good.contains(w) && !heard.contains(w.as_str())),
            );
        }
        missed.into_iter().collect()
    }

    /// What to do, most pressing first; never empty.
    #[must_use]
    pub fn advice(&self) -> Vec<String> {
        let mut advice = Vec::new();
        let over = self.speech - self.floor;
        if self.tries.iter().all(|t| t.heard.is_empty()) {
            advice.push("nothing was heard: is this the microphone, is it switched on?".into());
            return advice;
        }
        if self.speech > -6.0 {
            advice.push("too loud: turn the input down, or move the microphone to the side".into());
        } else if self.speech < -40.0 {
            advice.push("too quiet: two fingers from the corner of the mouth".into());
        }
        if over < 15.0 {
            advice.push(format!(
                "speech is only {over:.0} dB over the room: nearer to the mouth, a windshield, or hold to talk"
            ));
        }
        let missed = self.missed_words();
        if !missed.is_empty() {
            advice.push(format!("missed: {}; key these in", missed.join(", ")));
        }
        let share = self.understood() * 100 / self.tries.len().max(1);
        if share < 75 {
            advice.push("fewer than three in four understood: work from the keypad".into());
        }
        if advice.is_empty() {
            advice.push("good to go".into());
        }
        advice
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn check(floor: f32, speech: f32, tries: &[(&str, &[&str], bool)]) -> SoundCheck {
        SoundCheck {
            floor,
            speech,
            tries: tries
                .iter()
                .map(|(phrase, heard, understood)| Try {
                    phrase: (*phrase).into(),
                    heard: heard.iter().map(|h| (*h).into()).collect(),
                    understood: *understood,
                })
                .collect(),
        }
    }

    #[test]
    fn words_that_were_missed_are_named() {
        let one = check(
            -60.0,
            -20.0,
            &[
                ("fifteen megohms", &["fifty megohms"], false),
                ("fifty megohms", &["fifty megohms"], true),
            ],
        );
        assert_eq!(one.missed_words(), ["fifteen"]);
        assert_eq!((one.understood(), one.at_once()), (1, 1));
        assert!(one.advice()[0].contains("fifteen"), "{:?}", one.advice());
    }

    #[test]
    fn advice_says_what_to_move() {
        let good = [("affirm", &["affirm"][..], true)];
        assert_eq!(check(-60.0, -20.0, &good).advice(), ["good to go"]);
        assert!(check(-60.0, -3.0, &good).advice()[0].starts_with("too loud"));
        assert!(check(-70.0, -45.0, &good).advice()[0].starts_with("too quiet"));
        assert!(check(-30.0, -20.0, &good).advice()[0].contains("10 dB"));
        let nothing = check(-60.0, -60.0, &[("affirm", &[], false)]);
        assert!(nothing.advice()[0].starts_with("nothing was heard"));
    }
}
