//! The folders of a built voice, on disk.
//!
//! ```text
//! VOICE/am, VOICE/conf            the base, once
//! VOICE/graph                     HCLr.fst, words.txt, ... once
//! VOICE/contexts/NAME             what libvosk opens: links to the above, and graph/Gr.fst
//! VOICE/built.txt                 written last: the digest of everything that went in
//! ```
//! It promises that a voice folder is whole or absent (built beside, then renamed), and that the
//! same inputs give the same bytes. It leaves out which contexts there are.

use std::{
    fs, io,
    path::{Path, PathBuf},
};

use super::{
    BuildError, Pronunciations, WordIds, grammar_graph,
    lexicon_graph::{self, Costs},
    to_bytes,
};
use crate::{
    speech::word_graph::{Arc, State, WordGraph},
    voice::{base::Base, build::phones::PhoneTable},
};

/// Raised whenever the bytes built from the same inputs change.
const BUILDER: &str = "handsfull voice 3";

/// The context in which any sound may follow any other: the measure of how well an utterance fits
/// what may be said.
pub const ANYTHING: &str = "anything";

/// Everything a voice is built from.
#[derive(Debug, Clone)]
pub struct Recipe {
    /// The acoustic part.
    pub base: Base,
    /// Every word with its pronunciations.
    pub words: Pronunciations,
    /// What may be said, by name of the context.
    pub contexts: Vec<(String, WordGraph)>,
    /// Costs of the word graph.
    pub costs: Costs,
}

/// Why a voice folder could not be made.
#[derive(Debug, thiserror::Error)]
pub enum FolderError {
    /// The inputs do not fit together.
    #[error(transparent)]
    Build(#[from] BuildError),
    /// The disk.
    #[error("the voice cannot be written to {}: {source}", path.display())]
    Write {
        /// Where.
        path: PathBuf,
        /// What the system said.
        source: io::Error,
    },
}

/// What was built.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Built {
    /// The voice folder.
    pub folder: PathBuf,
    /// Whether it had been there before.
    pub was_there: bool,
}

impl Recipe {
    /// A digest of everything that goes in: two recipes with the same digest build the same bytes.
    #[must_use]
    pub fn digest(&self) -> String {
        let mut hasher = blake3::Hasher::new();
        let mut part = |bytes: &[u8]| {
            hasher.update(&(bytes.len() as u64).to_le_bytes());
            hasher.update(bytes);
        };
        part(BUILDER.as_bytes());
        for (name, bytes) in self.base.files() {
            part(name.as_bytes());
            part(bytes);
        }
        part(self.base.phones().word_boundaries().as_bytes());
        part(format!("{:?}", self.costs).as_bytes());
        for (word, ways) in &self.words {
            part(format!("{word} {ways:?}").as_bytes());
        }
        for (name, graph) in &self.contexts {
            part(name.as_bytes());
            part(&(graph.start as u64).to_le_bytes());
            for state in &graph.states {
                part(format!("{:?}", state.stop).as_bytes());
                for arc in &state.arcs {
                    part(arc.word.as_deref().unwrap_or_default().as_bytes());
                    part(&arc.cost.to_le_bytes());
                    part(&(arc.to as u64).to_le_bytes());
                }
            }
        }
        hasher.finalize().to_hex()[..16].to_owned()
    }

    /// Numbers of the words.
    #[must_use]
    pub fn ids(&self) -> WordIds {
        WordIds::of(&self.words, self.base.phones())
    }

    /// Builds the voice into `folder` unless it is there already.
    ///
    /// # Errors
    /// [`FolderError`]; what was there before is left as it was.
    pub fn build_into(&self, folder: &Path) -> Result<Built, FolderError> {
        let digest = self.digest();
        let done = |was_there| Built {
            folder: folder.to_owned(),
            was_there,
        };
        if is_built(folder, &digest) {
            return Ok(done(true));
        }
        let write = |path: &Path| {
            let path = path.to_owned();
            move |source| FolderError::Write { path, source }
        };
        let parent = folder
            .parent()
            .filter(|p| !p.as_os_str().is_empty())
            .unwrap_or(Path::new("."));
        fs::create_dir_all(parent).map_err(write(parent))?;
        let beside = tempfile::Builder::new()
            .prefix(".voice-")
            .tempdir_in(parent)
            .map_err(write(parent))?;
        self.write(beside.path(), &digest)?;
        // An older voice of that name gives way; another process may have been faster.
        if folder.exists() && !is_built(folder, &digest) {
            fs::remove_dir_all(folder).map_err(write(folder))?;
        }
        match fs::rename(beside.path(), folder) {
            Ok(()) => {
                let _gone = beside.keep();
                Ok(done(false))
            }
            Err(_) if is_built(folder, &digest) => Ok(done(true)),
            Err(source) => Err(write(folder)(source)),
        }
    }

    fn write(&self, folder: &Path, digest: &str) -> Result<(), FolderError> {
        let put = |name: &str, bytes: &[u8]| put(&folder.join(name), bytes);
        for (name, bytes) in self.base.files() {
            match name {
                "conf/model.conf" => put(name, &[bytes, b"\n", WHOLE.as_bytes()].concat())?,
                _ => put(name, bytes)?,
            }
        }
        let ids = self.ids();
        let table = self.base.phones();
        let words = lexicon_graph::build(&self.words, &ids, table, self.costs)?;
        put("graph/HCLr.fst", &to_bytes(&words, "the word list")?)?;
        put("graph/words.txt", ids.text().as_bytes())?;
        let unused = format!("{}\n", table.unused_transition());
        put("graph/disambig_tid.int", unused.as_bytes())?;
        let boundaries = table.word_boundaries();
        put("graph/phones/word_boundary.int", boundaries.as_bytes())?;
        let anything = (ANYTHING.to_owned(), any_sounds(table));
        for (name, graph) in self.contexts.iter().chain([&anything]) {
            let grammar = grammar_graph::build(graph, &ids, None, name)?;
            if !grammar.missing.is_empty() {
                return Err(BuildError::Unpronounced {
                    words: grammar.missing,
                }
                .into());
            }
            let bytes = to_bytes(&grammar.automaton, name)?;
            let context = folder.join("contexts").join(name);
            lay_out(&context, Path::new("../.."), &bytes)?;
        }
        self.narrow_anything(&context_folder(folder, ANYTHING))?;
        put("built.txt", format!("{digest}\n").as_bytes())
    }

    /// Gives that context settings of its own; in Kaldi's option files the last line wins.
    fn narrow_anything(&self, context: &Path) -> Result<(), FolderError> {
        let conf = context.join("conf");
        fs::remove_file(&conf)
            .or_else(|_| fs::remove_dir_all(&conf))
            .map_err(|source| FolderError::Write {
                path: conf.clone(),
                source,
            })?;
        for (name, bytes) in self.base.files() {
            match name.strip_prefix("conf/") {
                Some("model.conf") => {
                    let own = [bytes, b"\n", WHOLE.as_bytes(), NARROW.as_bytes()].concat();
                    put(&conf.join("model.conf"), &own)?;
                }
                Some(file) => put(&conf.join(file), bytes)?,
                None => {}
            }
        }
        Ok(())
    }
}

/// Settings of every context, after those of the base; in Kaldi's option files the last line wins.
///
/// Utterances come whole, so the network may be given half a second at a time: the same result to
/// the last digit, an eighth less work than in pieces of a fifth of a second. Longer pieces save
/// more, but a model then takes twice as long to open, and contexts are opened as they are needed.
/// The lattice is kept small: on 87 phrases at +10 dB the likeliest words were the same with a beam
/// of 6, for a third more work, and for four times the work on eight seconds of music.
const WHOLE: &str = "--frames-per-chunk=51\n--max-active=2000\n--lattice-beam=4.0\n";

/// Settings of the decoder where any sound may follow any other: only the best path matters, and a
/// lattice of all the others would not fit into memory.
const NARROW: &str = "--beam=9.0\n--lattice-beam=0.1\n--max-active=400\n--min-active=50\n";

/// Where libvosk opens a context of a voice folder.
#[must_use]
pub fn context_folder(folder: &Path, context: &str) -> PathBuf {
    folder.join("contexts").join(context)
}

/// Whether a folder holds the voice of that digest, whole.
#[must_use]
pub fn is_built(folder: &Path, digest: &str) -> bool {
    fs::read_to_string(folder.join("built.txt")).is_ok_and(|text| text.trim() == digest)
}

/// Cost of each sound where any may follow any other. Without one, staying in a sound and entering
/// it again would cost the same, and the lattice would hold every mixture of the two.
pub const SOUND: f32 = 0.5;

fn any_sounds(table: &PhoneTable) -> WordGraph {
    let arcs = lexicon_graph::sounds(table)
        .into_iter()
        .map(|(word, _)| Arc {
            word: Some(word),
            cost: SOUND,
            to: 0,
        })
        .collect();
    WordGraph {
        start: 0,
        states: vec![State {
            arcs,
            stop: Some(0.0),
        }],
    }
}

/// A context's folder: everything linked from `shared` (relative to the context's folder), the
/// grammar its own.
fn lay_out(context: &Path, shared: &Path, grammar: &[u8]) -> Result<(), FolderError> {
    let graph = context.join("graph");
    put(&graph.join("Gr.fst"), grammar)?;
    for name in ["am", "conf"] {
        link(&shared.join(name), &context.join(name))?;
    }
    for name in ["HCLr.fst", "words.txt", "disambig_tid.int", "phones"] {
        link(
            &Path::new("..").join(shared).join("graph").join(name),
            &graph.join(name),
        )?;
    }
    Ok(())
}

/// A symbolic link; where the file system has none (a memory card), a copy.
pub(crate) fn link(target: &Path, at: &Path) -> Result<(), FolderError> {
    if std::os::unix::fs::symlink(target, at).is_ok() {
        return Ok(());
    }
    let from = at
        .parent()
        .map_or_else(|| target.into(), |p| p.join(target));
    copy(&from, at)
}

fn copy(from: &Path, to: &Path) -> Result<(), FolderError> {
    let fail = |source| FolderError::Write {
        path: to.to_owned(),
        source,
    };
    if !from.is_dir() {
        return fs::copy(from, to).map(drop).map_err(fail);
    }
    fs::create_dir_all(to).map_err(fail)?;
    for entry in fs::read_dir(from).map_err(fail)? {
        let entry = entry.map_err(fail)?;
        copy(&entry.path(), &to.join(entry.file_name()))?;
    }
    Ok(())
}

pub(crate) fn put(path: &Path, bytes: &[u8]) -> Result<(), FolderError> {
    let made = path.parent().map_or(Ok(()), fs::create_dir_all);
    made.and_then(|()| fs::write(path, bytes))
        .map_err(|source| FolderError::Write {
            path: path.to_owned(),
            source,
        })
}
