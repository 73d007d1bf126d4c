//! Utterance to meaning: the recogniser, the test whether it was speech of ours at all, `speech`.
//!
//! It promises that what does not sound like anything that may be said comes back as nothing, with
//! a reason, and never as a number. The test is a likelihood ratio: the utterance is decoded twice,
//! once along the context's grammar and once along any sounds at all; when the grammar explains
//! the sounds much worse, it was not meant for it. It leaves out capturing sound.

use std::{collections::HashMap, sync::Arc};

use super::{
    build::{
        folder::{ANYTHING, SOUND},
        lexicon_graph::FILLER,
    },
    front::Utterance,
    recogniser::{Recogniser, RecogniserError, Way},
};
use crate::speech::{
    Context, Heard, Hypothesis, Margins, Meaning, Phrases, decide, lexicon::Lexicon, parse::same,
};

/// When an utterance counts as none of ours.
///
/// The likeness is `0.25 · lead + 3.6 · fill + 17.6 · pace − worse`: see [`Fit`] for the four. The
/// weights are a logistic regression over 616 clips that were heard right (in quiet and at +10 dB,
/// of speakers and voices the base was not trained on) and 98 utterances of noise and foreign
/// words; what each limit loses and lets through stands in `src/voice/measure/RESULTS.md`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Limits {
    /// Least likeness in open listening.
    pub open: f64,
    /// Least likeness when a key said that it was meant for us.
    pub held: f64,
}

impl Default for Limits {
    fn default() -> Self {
        Self {
            open: 3.3,
            held: 1.95,
        }
    }
}

/// How well an utterance was explained.
#[derive(Debug, Clone, PartialEq)]
pub struct Fit {
    /// Ways along the grammar, cheapest first.
    pub ways: Vec<Way>,
    /// What the grammar alone makes the first of them cost.
    pub grammar: f64,
    /// The likeliest sounds without any grammar, and their cost without what each sound costs.
    pub anything: Way,
    /// Seconds of the utterance that are loud.
    pub loud: f32,
    /// Whether a key was held for it.
    pub held: bool,
    /// How far behind the next hypothesis of another meaning lies, in nats; infinite when there is
    /// none.
    pub lead: f64,
    /// Phones of the words of the first way.
    pub phones: usize,
}

impl Fit {
    /// How many sounds there were.
    #[must_use]
    pub fn sounds(&self) -> usize {
        self.anything.words.split_whitespace().count() - self.fillers()
    }

    /// How many stretches were noise, or talk of other words, rather than sounds of speech.
    #[must_use]
    pub fn fillers(&self) -> usize {
        let sounds = self.anything.words.split_whitespace();
        sounds.filter(|sound| *sound == FILLER).count()
    }

    /// How much worse the grammar explains each sound than any sounds do, in nats; what the
    /// grammar itself costs is not counted.
    #[must_use]
    pub fn worse(&self) -> f64 {
        let best = self.ways.first().map_or(f64::INFINITY, |way| way.cost);
        (best - self.grammar - self.anything.cost) / self.sounds().max(2) as f64
    }
}

impl Fit {
    /// How long the words last against how long it is loud: noise is loud throughout, and a word
    /// squeezed into it is short.
    #[must_use]
    pub fn fill(&self) -> f64 {
        let words = self.ways.first().map_or(0.0, |way| way.seconds);
        f64::from(words / self.loud.max(0.05))
    }

    /// Seconds a phone of the words lasts: nobody says "papa" in a fifth of a second.
    #[must_use]
    pub fn pace(&self) -> f64 {
        let words = self.ways.first().map_or(0.0, |way| way.seconds);
        f64::from(words) / self.phones.max(1) as f64
    }

    /// How much the utterance is like something that may be said: see [`Limits`].
    #[must_use]
    pub fn likeness(&self) -> f64 {
        0.25 * self.lead.min(6.0) + 3.6 * self.fill().min(0.4) + 17.6 * self.pace().min(0.12)
            - self.worse()
    }
}

/// A voice, with what may be said.
#[derive(Debug)]
pub struct Hearing {
    recogniser: Recogniser,
    phrases: Arc<Phrases>,
    /// Phones of each word, at the least.
    lengths: HashMap<String, usize>,
    /// When an utterance counts as none of ours.
    pub limits: Limits,
    /// How close a rival may come before the tool asks.
    pub margins: Margins,
}

impl Hearing {
    /// Over an opened voice that was built from these phrases.
    #[must_use]
    pub fn new(recogniser: Recogniser, phrases: Arc<Phrases>) -> Self {
        Self {
            recogniser,
            phrases,
            lengths: HashMap::new(),
            limits: Limits::default(),
            margins: Margins::default(),
        }
    }

    /// Tells it how many phones words have; without, each counts as three.
    #[must_use]
    pub fn pronounced(mut self, lexicon: &Lexicon) -> Self {
        self.lengths = lexicon
            .iter()
            .filter_map(|(word, ways)| Some((word.to_owned(), ways.iter().map(Vec::len).min()?)))
            .collect();
        self
    }

    fn phones(&self, words: &str) -> usize {
        words
            .split_whitespace()
            .map(|word| self.lengths.get(word).copied().unwrap_or(3))
            .sum()
    }

    /// Opens what a context needs ahead of its first use.
    ///
    /// # Errors
    /// [`RecogniserError`].
    pub fn prepare(&self, context: Context) -> Result<(), RecogniserError> {
        if self.recogniser.has(ANYTHING) {
            self.recogniser.prepare(ANYTHING)?;
        }
        self.recogniser.prepare(context.name())
    }

    /// How well an utterance is explained in a context.
    ///
    /// # Errors
    /// [`RecogniserError`].
    pub fn fit(&self, context: Context, utterance: &Utterance) -> Result<Fit, RecogniserError> {
        if !self.recogniser.has(ANYTHING) {
            return self.fit_by_garbage_word(context, utterance);
        }
        let anything = self.recogniser.decode(ANYTHING, &utterance.samples)?;
        let mut anything = anything.into_iter().next().unwrap_or(Way {
            words: String::new(),
            cost: 0.0,
            seconds: 0.0,
        });
        anything.cost -= anything.words.split_whitespace().count() as f64 * f64::from(SOUND);
        let mut fit = Fit {
            ways: Vec::new(),
            grammar: 0.0,
            anything,
            loud: utterance.loud,
            held: utterance.held,
            lead: f64::INFINITY,
            phones: 0,
        };
        // Not a sound in it: not worth the search.
        if fit.sounds() == 0 {
            return Ok(fit);
        }
        fit.ways = self.recogniser.decode(context.name(), &utterance.samples)?;
        let best = fit.ways.first().map_or("", |way| way.words.as_str());
        fit.grammar = self
            .recogniser
            .grammar_cost(context.name(), best)
            .unwrap_or_default();
        fit.phones = self.phones(best);
        fit.lead = self.lead(context, &fit.ways);
        Ok(fit)
    }

    /// An adopted model has no measure of any sounds; its garbage word competes in the grammar.
    fn fit_by_garbage_word(
        &self,
        context: Context,
        utterance: &Utterance,
    ) -> Result<Fit, RecogniserError> {
        let ways = self.recogniser.decode(context.name(), &utterance.samples)?;
        Ok(Fit {
            ways,
            grammar: 0.0,
            // Nothing is likelier than the grammar then: every utterance passes.
            anything: Way {
                words: String::new(),
                cost: f64::INFINITY,
                seconds: utterance.loud,
            },
            loud: utterance.loud,
            held: utterance.held,
            lead: f64::INFINITY,
            phones: 0,
        })
    }

    /// What words mean in a context.
    #[must_use]
    pub fn understand(&self, context: Context, words: &str) -> Meaning {
        self.phrases.understand(context, words)
    }

    /// What an utterance means in a context.
    ///
    /// # Errors
    /// [`RecogniserError`].
    pub fn hear(&self, context: Context, utterance: &Utterance) -> Result<Heard, RecogniserError> {
        let fit = self.fit(context, utterance)?;
        Ok(self.meaning(context, &fit))
    }

    /// What an utterance that was explained so means.
    #[must_use]
    pub fn meaning(&self, context: Context, fit: &Fit) -> Heard {
        let nothing = |why: &str, hypotheses| Heard {
            hypotheses,
            meaning: Meaning::Nothing(why.to_owned()),
            clip: None,
        };
        let Some(best) = fit.ways.first().filter(|way| !way.words.is_empty()) else {
            return nothing("there was sound, but no words", Vec::new());
        };
        let least = if fit.held {
            self.limits.held
        } else {
            self.limits.open
        };
        if fit.likeness() < least {
            let why = "it did not sound like anything that can be said here";
            // What it came nearest to is shown, with the reason it was not taken.
            let nearest = Hypothesis {
                words: best.words.clone(),
                meaning: Meaning::Nothing(why.to_owned()),
                margin: 0.0,
            };
            return nothing(why, vec![nearest]);
        }
        let hypotheses: Vec<(String, f64)> = fit
            .ways
            .iter()
            .map(|way| (way.words.clone(), way.cost - best.cost))
            .collect();
        decide(&self.phrases, context, &hypotheses, &self.margins)
    }

    fn lead(&self, context: Context, ways: &[Way]) -> f64 {
        let Some((best, rest)) = ways.split_first() else {
            return 0.0;
        };
        let due = self.phrases.understand(context, &best.words);
        rest.iter()
            .find(|way| {
                let other = self.phrases.understand(context, &way.words);
                !matches!(other, Meaning::Nothing(_)) && !alike(&due, &other)
            })
            .map_or(f64::INFINITY, |way| way.cost - best.cost)
    }
}

/// The same meaning, or the same figure with and without its unit.
fn alike(a: &Meaning, b: &Meaning) -> bool {
    match (a, b) {
        (Meaning::Reading(a), Meaning::Reading(b)) => {
            a.value() == b.value() && a.bound() == b.bound()
        }
        _ => same(a, b),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    #[test]
    fn a_fit_is_judged_by_sounds_and_not_by_how_rare_a_phrase_is() {
        let fit = Fit {
            ways: vec![Way {
                words: "seven".into(),
                cost: -90.0,
                seconds: 0.4,
            }],
            grammar: 5.0,
            anything: Way {
                words: "[S] [EH] [V] [AH] [N]".into(),
                cost: -100.0,
                seconds: 0.4,
            },
            loud: 0.5,
            held: false,
            lead: 3.0,
            phones: 5,
        };
        assert_eq!(fit.sounds(), 5);
        assert!((fit.worse() - 1.0).abs() < 1e-9);
        assert!((fit.fill() - 0.8).abs() < 1e-6);
        assert!((fit.pace() - 0.08).abs() < 1e-6);
        let due = 0.25 * 3.0 + 3.6 * 0.4 + 17.6 * 0.08 - 1.0;
        assert!((fit.likeness() - due).abs() < 1e-6);
    }
}
