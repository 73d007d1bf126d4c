//! Samples to words: libvosk over a built voice, one model a context.
//!
//! It promises a fresh recogniser for every utterance (its running mean and its memory are those of
//! that utterance alone), the whole utterance in one piece (so that no endpoint inside it drops
//! what came before), and hypotheses with their costs, cheapest first. Models are opened when first
//! needed and the least recently used is closed again. It leaves out what the words mean.

use std::{
    collections::HashMap,
    fs,
    panic::{AssertUnwindSafe, catch_unwind},
    path::{Path, PathBuf},
    sync::{Arc, Mutex, PoisonError},
};

use rustfst::fst_traits::SerializableFst;
use vosk::{CompleteResult, Model, Recognizer};

use super::{
    build::{Automaton, WordIds, folder::context_folder, grammar_graph, lexicon_graph::FILLER},
    front::resample::RATE,
    vosk_link,
};

/// Models kept open. A session alternates between a reading's context and its confirmation.
const KEPT: usize = 3;
/// Hypotheses asked for.
const ALTERNATIVES: u16 = 8;

/// Why nothing can be recognised.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum RecogniserError {
    /// No library.
    #[error(transparent)]
    Link(#[from] vosk_link::LinkError),
    /// The folder is not one libvosk opens.
    #[error("keypad only: the voice in {} cannot be opened", folder.display())]
    Model {
        /// Which folder.
        folder: PathBuf,
    },
    /// The library failed on this utterance.
    #[error("the recogniser failed on this utterance of {seconds} s")]
    Failed {
        /// Its length.
        seconds: usize,
    },
}

/// One way to understand an utterance.
#[derive(Debug, Clone, PartialEq)]
pub struct Way {
    /// Words, separated by single spaces; empty when nothing was heard.
    pub words: String,
    /// Cost in nats, sound and grammar together; less is likelier.
    pub cost: f64,
    /// How long the words last, without the silences between, in seconds.
    pub seconds: f32,
}

/// A voice, opened.
pub struct Recogniser {
    folder: PathBuf,
    /// Most recently used last.
    open: Mutex<Vec<(String, Arc<Model>)>>,
    /// Grammars by context, for what sentences cost along them.
    grammars: Mutex<HashMap<String, Option<Arc<Weighed>>>>,
}

/// A grammar as the recogniser obeys it.
struct Weighed {
    automaton: Automaton,
    words: WordIds,
}

impl std::fmt::Debug for Recogniser {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Recogniser")
            .field("folder", &self.folder)
            .finish_non_exhaustive()
    }
}

impl Recogniser {
    /// Opens a built voice.
    ///
    /// # Errors
    /// [`RecogniserError::Link`] without the library. A context's model is opened when first used.
    pub fn open(folder: &Path) -> Result<Self, RecogniserError> {
        vosk_link::load()?;
        Ok(Self {
            folder: folder.to_owned(),
            open: Mutex::default(),
            grammars: Mutex::default(),
        })
    }

    /// Whether the voice has a context of that name.
    #[must_use]
    pub fn has(&self, context: &str) -> bool {
        context_folder(&self.folder, context)
            .join("graph/Gr.fst")
            .is_file()
    }

    /// Opens a context's model ahead of its first use.
    ///
    /// # Errors
    /// [`RecogniserError::Model`] when its folder is missing or broken.
    pub fn prepare(&self, context: &str) -> Result<(), RecogniserError> {
        self.model(context).map(drop)
    }

    /// What the context's grammar alone makes words cost, in nats; `None` when they are not of it.
    #[must_use]
    pub fn grammar_cost(&self, context: &str, words: &str) -> Option<f64> {
        let mut grammars = self.grammars.lock().unwrap_or_else(PoisonError::into_inner);
        let weighed = grammars
            .entry(context.to_owned())
            .or_insert_with(|| weighed(&context_folder(&self.folder, context)).map(Arc::new))
            .clone()?;
        grammar_graph::cost(&weighed.automaton, &weighed.words, words).map(f64::from)
    }

    fn model(&self, context: &str) -> Result<Arc<Model>, RecogniserError> {
        let mut open = self.open.lock().unwrap_or_else(PoisonError::into_inner);
        if let Some(at) = open.iter().position(|(name, _)| name == context) {
            let entry = open.remove(at);
            let model = Arc::clone(&entry.1);
            open.push(entry);
            return Ok(model);
        }
        let folder = context_folder(&self.folder, context);
        // The library reads missing files as empty ones; ask for the one that matters.
        let model = folder
            .join("graph/Gr.fst")
            .is_file()
            .then(|| folder.to_str().and_then(Model::new))
            .flatten()
            .ok_or(RecogniserError::Model { folder })?;
        let model = Arc::new(model);
        if open.len() == KEPT {
            open.remove(0);
        }
        open.push((context.to_owned(), Arc::clone(&model)));
        Ok(model)
    }

    /// The ways to understand samples (16 kHz) in a context, cheapest first, each string of words
    /// once.
    ///
    /// # Errors
    /// [`RecogniserError::Model`] when the context cannot be opened, [`RecogniserError::Failed`]
    /// when the library gives up.
    pub fn decode(&self, context: &str, samples: &[i16]) -> Result<Vec<Way>, RecogniserError> {
        let model = self.model(context)?;
        let failed = || RecogniserError::Failed {
            seconds: samples.len() / RATE as usize,
        };
        // The crate panics on results it cannot parse; one utterance is lost, not the session.
        catch_unwind(AssertUnwindSafe(|| {
            let mut recogniser = Recognizer::new(&model, RATE as f32)?;
            recogniser.set_max_alternatives(ALTERNATIVES);
            recogniser.set_words(true);
            recogniser.accept_waveform(samples).ok()?;
            Some(ways(recogniser.final_result()))
        }))
        .ok()
        .flatten()
        .ok_or_else(failed)
    }
}

fn weighed(folder: &Path) -> Option<Weighed> {
    let grammar = fs::read(folder.join("graph/Gr.fst")).ok()?;
    let words = fs::read_to_string(folder.join("graph/words.txt")).ok()?;
    Some(Weighed {
        automaton: Automaton::load(&grammar).ok()?,
        words: WordIds::read(&words),
    })
}

fn ways(result: CompleteResult<'_>) -> Vec<Way> {
    let mut ways: Vec<Way> = match result {
        CompleteResult::Multiple(many) => many
            .alternatives
            .iter()
            .map(|a| Way {
                words: a.text.trim().to_owned(),
                cost: -f64::from(a.confidence),
                seconds: a
                    .result
                    .iter()
                    .filter(|word| word.word != FILLER)
                    .map(|word| word.end - word.start)
                    .sum(),
            })
            .collect(),
        CompleteResult::Single(one) => vec![Way {
            words: one.text.trim().to_owned(),
            cost: 0.0,
            seconds: one.result.iter().map(|w| w.end - w.start).sum(),
        }],
    };
    ways.sort_by(|a, b| a.cost.total_cmp(&b.cost));
    let mut seen = Vec::new();
    ways.retain(|way| {
        let new = !seen.contains(&way.words);
        seen.push(way.words.clone());
        new
    });
    ways
}
