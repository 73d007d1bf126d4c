//! From what may be said to a voice that hears it: finds or builds the folders, opens them.
//!
//! Built voices are kept in the user's cache under the digest of everything that went in, so that a
//! program, a grammar or a job's own names that changed never meet an old graph. It promises that
//! every failure is one line beginning with "keypad only". It leaves out the job.

use std::{
    env, fs,
    path::{Path, PathBuf},
    sync::Arc,
    time::SystemTime,
};

use super::{
    base::{BASE_VARIABLE, Base, BaseError},
    build::{
        Pronunciations,
        folder::{Built, FolderError, Recipe},
        lexicon_graph::Costs,
    },
    hearing::Hearing,
    recogniser::{Recogniser, RecogniserError},
};
use crate::speech::{Context, Phrases, lexicon::Lexicon};

/// Built voices kept in the cache; each is some 13 MB.
const KEPT: usize = 6;

/// Why there is no voice.
#[derive(Debug, thiserror::Error)]
pub enum VoiceError {
    /// No acoustic part.
    #[error(transparent)]
    Base(#[from] BaseError),
    /// Not built.
    #[error("keypad only: {0}")]
    Folder(#[from] FolderError),
    /// Not opened.
    #[error(transparent)]
    Recogniser(#[from] RecogniserError),
}

/// What a voice is made from: the grammars of every context, their pronunciations, the acoustic
/// part.
#[must_use]
pub fn recipe(base: Base, phrases: &Phrases, lexicon: &Lexicon) -> Recipe {
    let contexts: Vec<_> = Context::EVERY
        .into_iter()
        .map(|context| (context.name().to_owned(), phrases.word_graph(context)))
        .collect();
    // Words nobody can say at any prompt only make the graph larger.
    let mut words = Pronunciations::new();
    for word in contexts.iter().flat_map(|(_, graph)| graph.words()) {
        let ways = lexicon.get(word);
        words.entry(word.to_owned()).or_insert_with(|| {
            ways.iter()
                .map(|way| way.iter().map(|phone| phone.name().to_owned()).collect())
                .collect()
        });
    }
    Recipe {
        base,
        words,
        contexts,
        costs: Costs::default(),
    }
}

/// Builds the voice of a recipe into the cache, unless it is there.
///
/// # Errors
/// [`FolderError`].
pub fn cached(recipe: &Recipe) -> Result<Built, FolderError> {
    let root = cache();
    let built = recipe.build_into(&root.join(recipe.digest()))?;
    if !built.was_there {
        forget_oldest(&root, &built.folder);
    }
    Ok(built)
}

/// A voice that hears these phrases: the folder named, or the embedded base (or the one that
/// `HANDSFULL_BASE` names) built into the cache.
///
/// # Errors
/// [`VoiceError`], one line.
pub fn ready(
    phrases: Arc<Phrases>,
    lexicon: &Lexicon,
    folder: Option<&Path>,
) -> Result<Hearing, VoiceError> {
    // The library first: without it there is nothing to build for.
    super::vosk_link::load().map_err(RecogniserError::from)?;
    let folder = match folder {
        Some(folder) => folder.to_owned(),
        None => {
            let base = Base::from(named_base().as_deref())?;
            cached(&recipe(base, &phrases, lexicon))?.folder
        }
    };
    Ok(Hearing::new(Recogniser::open(&folder)?, phrases))
}

/// The base the environment names.
#[must_use]
pub fn named_base() -> Option<PathBuf> {
    env::var_os(BASE_VARIABLE)
        .filter(|path| !path.is_empty())
        .map(PathBuf::from)
}

fn cache() -> PathBuf {
    let named = |variable: &str| {
        env::var_os(variable)
            .filter(|path| !path.is_empty())
            .map(PathBuf::from)
    };
    named("XDG_CACHE_HOME")
        .or_else(|| named("HOME").map(|home| home.join(".cache")))
        .unwrap_or_else(env::temp_dir)
        .join("handsfull")
        .join("voice")
}

/// Keeps the cache from growing with every grammar that ever was. What cannot be removed stays.
fn forget_oldest(root: &Path, newest: &Path) {
    let Ok(entries) = fs::read_dir(root) else {
        return;
    };
    let mut voices: Vec<(SystemTime, PathBuf)> = entries
        .flatten()
        .filter(|entry| entry.path().join("built.txt").is_file() && entry.path() != newest)
        .filter_map(|entry| Some((entry.metadata().ok()?.modified().ok()?, entry.path())))
        .collect();
    voices.sort();
    let surplus = (voices.len() + 1).saturating_sub(KEPT);
    for (_, path) in voices.into_iter().take(surplus) {
        let _stays = fs::remove_dir_all(path);
    }
}
