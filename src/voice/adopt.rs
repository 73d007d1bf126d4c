//! Our grammars over a general model with a dynamic graph.
//!
//! Such a model ships `graph/HCLr.fst`, a grammar `Gr.fst` and a word list; a folder that links
//! everything but holds our `Gr.fst` obeys our grammars. It promises to list the words the model
//! lacks, and that the branches that need them fall away without anything else breaking. Whether
//! sound was meant for us is told by the model's own garbage word there, where it has one.

use std::{
    fs,
    path::{Path, PathBuf},
};

use super::build::{
    BuildError, GARBAGE, WordIds,
    folder::{FolderError, context_folder, link, put},
    grammar_graph, to_bytes,
};
use crate::speech::word_graph::WordGraph;

/// Cost of the garbage word against a whole grammar, in nats. Common practice, no source: no such
/// model could be tried here.
const GARBAGE_COST: f32 = 12.0;

/// Why a model cannot be adopted.
#[derive(Debug, thiserror::Error)]
pub enum AdoptError {
    /// A file is not there.
    #[error("{} is no model with a dynamic graph: it has no {missing}", model.display())]
    NotDynamic {
        /// The model's folder.
        model: PathBuf,
        /// What was looked for.
        missing: &'static str,
    },
    /// Nothing of a grammar is left.
    #[error(transparent)]
    Build(#[from] BuildError),
    /// The disk.
    #[error(transparent)]
    Folder(#[from] FolderError),
}

/// What was adopted.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Adopted {
    /// The voice folder.
    pub folder: PathBuf,
    /// For each context, the words the model lacks.
    pub missing: Vec<(String, Vec<String>)>,
    /// Contexts of which nothing is left.
    pub empty: Vec<String>,
}

/// Lays the grammars over a model; the new voice folder is made whole or not at all.
///
/// # Errors
/// [`AdoptError`].
pub fn adopt(
    model: &Path,
    contexts: &[(String, WordGraph)],
    folder: &Path,
) -> Result<Adopted, AdoptError> {
    // A voice that was built here has its Gr.fst context by context; ours takes its place anyway.
    for missing in ["am", "conf", "graph/HCLr.fst", "graph/disambig_tid.int"] {
        if !model.join(missing).exists() {
            return Err(AdoptError::NotDynamic {
                model: model.to_owned(),
                missing,
            });
        }
    }
    let ids = words(model)?;
    let model = fs::canonicalize(model).map_err(|source| FolderError::Write {
        path: model.to_owned(),
        source,
    })?;
    let fail = |source| FolderError::Write {
        path: folder.to_owned(),
        source,
    };
    let parent = folder
        .parent()
        .filter(|p| !p.as_os_str().is_empty())
        .unwrap_or(Path::new("."));
    fs::create_dir_all(parent).map_err(fail)?;
    let beside = tempfile::Builder::new()
        .prefix(".adopt-")
        .tempdir_in(parent)
        .map_err(fail)?;
    let mut adopted = Adopted {
        folder: folder.to_owned(),
        missing: Vec::new(),
        empty: Vec::new(),
    };
    for (name, graph) in contexts {
        let Ok(grammar) = grammar_graph::build(graph, &ids, Some(GARBAGE_COST), name) else {
            adopted.empty.push(name.clone());
            continue;
        };
        if !grammar.missing.is_empty() {
            adopted.missing.push((name.clone(), grammar.missing));
        }
        let context = context_folder(beside.path(), name);
        put(
            &context.join("graph/Gr.fst"),
            &to_bytes(&grammar.automaton, name)?,
        )?;
        link_all(&model, &context, "graph")?;
        link_all(&model.join("graph"), &context.join("graph"), "Gr.fst")?;
    }
    if adopted.empty.len() == contexts.len() {
        return Err(BuildError::Automaton {
            context: "every context".into(),
            reason: "the model has none of the words".into(),
        }
        .into());
    }
    put(&beside.path().join("built.txt"), b"adopted\n")?;
    if folder.exists() {
        fs::remove_dir_all(folder).map_err(fail)?;
    }
    fs::rename(beside.path(), folder).map_err(fail)?;
    let _kept = beside.keep();
    Ok(adopted)
}

/// The words of a model: its `words.txt`, or the symbol table inside its `Gr.fst`.
fn words(model: &Path) -> Result<WordIds, AdoptError> {
    let text = ["graph/words.txt", "words.txt"]
        .iter()
        .find_map(|name| fs::read_to_string(model.join(name)).ok());
    if let Some(text) = text {
        return Ok(WordIds::read(&text));
    }
    let grammar = fs::read(model.join("graph/Gr.fst")).unwrap_or_default();
    symbols(&grammar).ok_or_else(|| AdoptError::NotDynamic {
        model: model.to_owned(),
        missing: "graph/words.txt",
    })
}

/// OpenFst's symbol table inside an automaton: magic, name, available key, size, then pairs of a
/// text and a number. Found by its magic, since what stands before it depends on the type.
fn symbols(bytes: &[u8]) -> Option<WordIds> {
    const MAGIC: [u8; 4] = 2_125_658_996_i32.to_le_bytes();
    let at = bytes.windows(4).position(|w| w == MAGIC)?;
    let mut rest = bytes.get(at + 4..)?;
    let mut take = |n: usize| -> Option<&[u8]> {
        let (head, tail) = rest.split_at_checked(n)?;
        rest = tail;
        Some(head)
    };
    let length = |bytes: &[u8]| -> Option<usize> {
        usize::try_from(i32::from_le_bytes(bytes.try_into().ok()?)).ok()
    };
    let name = length(take(4)?)?;
    take(name)?;
    take(8)?;
    let size = i64::from_le_bytes(take(8)?.try_into().ok()?);
    let mut text = String::new();
    for _ in 0..size {
        let n = length(take(4)?)?;
        let word = std::str::from_utf8(take(n)?).ok()?.to_owned();
        let id = i64::from_le_bytes(take(8)?.try_into().ok()?);
        text.push_str(&format!("{word} {id}\n"));
    }
    Some(WordIds::read(&text))
}

/// Links everything in a folder but one entry.
fn link_all(from: &Path, to: &Path, but: &str) -> Result<(), FolderError> {
    let fail = |source| FolderError::Write {
        path: from.to_owned(),
        source,
    };
    fs::create_dir_all(to).map_err(fail)?;
    for entry in fs::read_dir(from).map_err(fail)? {
        let entry = entry.map_err(fail)?;
        if entry.file_name() != but {
            link(&entry.path(), &to.join(entry.file_name()))?;
        }
    }
    Ok(())
}

/// Whether a voice folder is an adopted one (it has no measure of any sounds).
#[must_use]
pub fn has_garbage_word(folder: &Path, context: &str) -> bool {
    let path = context_folder(folder, context).join("graph/words.txt");
    fs::read_to_string(path).is_ok_and(|text| WordIds::read(&text).get(GARBAGE).is_some())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::speech::word_graph::{Arc, State};

    fn graph(words: &[&str]) -> WordGraph {
        let arcs = words
            .iter()
            .map(|w| Arc {
                word: Some((*w).to_owned()),
                cost: 0.0,
                to: 0,
            })
            .collect();
        WordGraph {
            start: 1,
            states: vec![
                State {
                    arcs: vec![],
                    stop: Some(0.0),
                },
                State { arcs, stop: None },
            ],
        }
    }

    fn model(words: &str) -> tempfile::TempDir {
        let folder = tempfile::tempdir().expect("a folder");
        for name in ["am/final.mdl", "conf/model.conf", "graph/HCLr.fst"] {
            put(&folder.path().join(name), b"x").expect("written");
        }
        put(&folder.path().join("graph/disambig_tid.int"), b"1\n").expect("written");
        put(&folder.path().join("graph/words.txt"), words.as_bytes()).expect("written");
        folder
    }

    #[test]
    fn words_a_model_lacks_are_listed_and_their_branches_fall_away() {
        let model = model("<eps> 0\none 1\ntwo 2\n[unk] 3\n");
        let out = model.path().join("adopted");
        let contexts = [
            ("ohms".to_owned(), graph(&["one", "megohm"])),
            ("tick".to_owned(), graph(&["correct"])),
        ];
        let adopted = adopt(model.path(), &contexts, &out).expect("adopted");
        assert_eq!(
            adopted.missing,
            [("ohms".into(), vec!["megohm".to_owned()])]
        );
        assert_eq!(adopted.empty, ["tick"]);
        assert!(out.join("contexts/ohms/graph/HCLr.fst").exists());
        assert!(has_garbage_word(&out, "ohms"));
    }

    #[test]
    fn a_folder_that_is_no_such_model_is_told() {
        let empty = tempfile::tempdir().expect("a folder");
        let error = adopt(empty.path(), &[], &empty.path().join("out")).expect_err("no model");
        assert!(error.to_string().contains("it has no am"), "{error}");
    }

    #[test]
    fn a_symbol_table_inside_a_grammar_is_read() {
        let mut bytes = vec![1, 2, 3];
        bytes.extend(2_125_658_996_i32.to_le_bytes());
        bytes.extend(1_i32.to_le_bytes());
        bytes.push(b't');
        bytes.extend(2_i64.to_le_bytes());
        bytes.extend(2_i64.to_le_bytes());
        for (word, id) in [("<eps>", 0_i64), ("one", 1)] {
            bytes.extend((word.len() as i32).to_le_bytes());
            bytes.extend(word.as_bytes());
            bytes.extend(id.to_le_bytes());
        }
        assert_eq!(symbols(&bytes), Some(WordIds::new(["one"])));
        assert_eq!(symbols(&bytes[..bytes.len() - 3]), None);
    }
}
