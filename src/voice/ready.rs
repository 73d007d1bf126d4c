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
        folder::{Built, FolderError, Recipe, is_built},
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
        None => known_or_built(&phrases, lexicon)?,
    };
    Ok(Hearing::new(Recogniser::open(&folder)?, phrases).pronounced(lexicon))
}

/// The voice in the cache, built if need be.
///
/// Compiling every grammar and reading the base only to learn that the voice is there takes a
/// second and 60 MB on the machines this is for. So the voice that was last built by this very
/// program for these very phrases is noted, and only when there is no such note is it looked into.
fn known_or_built(phrases: &Phrases, lexicon: &Lexicon) -> Result<PathBuf, VoiceError> {
    let root = cache();
    let named = named_base();
    let note = note(phrases, lexicon, named.as_deref()).map(|key| root.join(format!("{key}.note")));
    let noted = note.as_ref().and_then(|note| fs::read_to_string(note).ok());
    if let Some(digest) = noted {
        let folder = root.join(digest.trim());
        if is_built(&folder, digest.trim()) {
            return Ok(folder);
        }
    }
    let recipe = recipe(Base::from(named.as_deref())?, phrases, lexicon);
    let built = cached(&recipe)?;
    if let Some(note) = note {
        // Without the note the next start takes a second longer.
        let _unnoted = fs::write(note, recipe.digest());
    }
    Ok(built.folder)
}

/// What a voice depends on, without looking into it: the program, the base it may be told to use,
/// the grammars with the job's own names, the pronunciations.
fn note(phrases: &Phrases, lexicon: &Lexicon, base: Option<&Path>) -> Option<String> {
    let stamp = |path: &Path| {
        let data = fs::metadata(path).ok()?;
        Some(format!("{:?} {:?}", data.len(), data.modified().ok()?))
    };
    let mut hasher = blake3::Hasher::new();
    hasher.update(stamp(&env::current_exe().ok()?)?.as_bytes());
    if let Some(base) = base {
        hasher.update(stamp(&base.join("am/final.mdl"))?.as_bytes());
        hasher.update(base.as_os_str().as_encoded_bytes());
    }
    hasher.update(format!("{:?} {lexicon:?}", phrases.library()).as_bytes());
    Some(hasher.finalize().to_hex()[..16].to_owned())
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
    // A note whose voice is gone says nothing any more.
    for note in fs::read_dir(root).into_iter().flatten().flatten() {
        let path = note.path();
        if path.extension().is_some_and(|e| e == "note") {
            let digest = fs::read_to_string(&path).unwrap_or_default();
            if !root.join(digest.trim()).is_dir() {
                let _stays = fs::remove_file(path);
            }
        }
    }
}
