//! Utterance to meaning: the recogniser, the test whether it was speech of ours at all, `speech`.
//!
//! It promises that what does not sound like anything that may be said comes back as nothing, with
//! a reason, and never as a number. The test is a likelihood ratio: the utterance is decoded twice,
//! once along the context's grammar and once along any sounds at all; when the grammar explains
//! each stretch of sound much worse, it was not meant for it. It leaves out capturing sound.

use std::sync::Arc;

use super::{
    build::folder::ANYTHING,
    front::Utterance,
    recogniser::{Recogniser, RecogniserError, Way},
};
use crate::speech::{Context, Heard, Meaning, Phrases};

/// How well an utterance was explained.
#[derive(Debug, Clone, PartialEq)]
pub struct Fit {
    /// Ways along the grammar, cheapest first.
    pub ways: Vec<Way>,
    /// Any sounds at all: the likeliest.
    pub anything: Way,
    /// Length of the utterance in seconds.
    pub seconds: f32,
}

impl Fit {
    /// How much worse the grammar explains the utterance than any sounds do, in nats a second.
    #[must_use]
    pub fn excess(&self) -> f64 {
        let best = self.ways.first().map_or(f64::INFINITY, |way| way.cost);
        (best - self.anything.cost) / f64::from(self.seconds.max(0.3))
    }
}

/// A voice, with what may be said.
#[derive(Debug)]
pub struct Hearing {
    recogniser: Recogniser,
    phrases: Arc<Phrases>,
}

impl Hearing {
    /// Over an opened voice that was built from these phrases.
    #[must_use]
    pub fn new(recogniser: Recogniser, phrases: Arc<Phrases>) -> Self {
        Self { recogniser, phrases }
    }

    /// Opens what a context needs ahead of its first use.
    ///
    /// # Errors
    /// [`RecogniserError`].
    pub fn prepare(&self, context: Context) -> Result<(), RecogniserError> {
        self.recogniser.prepare(ANYTHING)?;
        self.recogniser.prepare(context.name())
    }

    /// How well an utterance is explained in a context.
    ///
    /// # Errors
    /// [`RecogniserError`].
    pub fn fit(&self, context: Context, utterance: &Utterance) -> Result<Fit, RecogniserError> {
        let ways = self.recogniser.decode(context.name(), &utterance.samples)?;
        let anything = self.recogniser.decode(ANYTHING, &utterance.samples)?;
        Ok(Fit {
            ways,
            anything: anything.into_iter().next().unwrap_or(Way { words: String::new(), cost: f64::INFINITY }),
            seconds: utterance.seconds(),
        })
    }
}
