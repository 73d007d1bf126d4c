//! A broken-off interview on disk: questions and answers as TOML, one pair a table.
//!
//! Promises: the file is replaced whole, so that it is never half written; answers are taken up
//! only as far as they belong to the same questions. It leaves out when it is saved (the command
//! does so after every answer).

use std::{
    fs, io,
    io::Write,
    path::{Path, PathBuf},
};

use serde::{Deserialize, Serialize};

use super::{Step, step};

/// Answers so far, beside the file they will become.
#[derive(Debug)]
pub struct Draft {
    path: PathBuf,
    kept: Kept,
}

/// Why a draft could not be read or written.
#[derive(Debug, thiserror::Error)]
pub enum DraftError {
    /// Reading or writing failed.
    #[error("{file}: {why}")]
    Disk {
        /// The draft.
        file: String,
        /// Why.
        why: io::Error,
    },
    /// The file is no draft.
    #[error("{file}: not a draft of an interview: {why}")]
    NotADraft {
        /// The draft.
        file: String,
        /// Why.
        why: String,
    },
}

#[derive(Debug, Default, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct Kept {
    #[serde(default)]
    answer: Vec<Answer>,
}

#[derive(Debug, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct Answer {
    question: String,
    text: String,
}

impl Draft {
    /// Opens the draft of a job file (`FILE.draft`), empty when there is none.
    ///
    /// # Errors
    /// [`DraftError`] when it is there but cannot be read.
    pub fn open(job_file: &Path) -> Result<Self, DraftError> {
        let mut name = job_file.as_os_str().to_owned();
        name.push(".draft");
        let path = PathBuf::from(name);
        let kept = match fs::read_to_string(&path) {
            Ok(text) => toml::from_str(&text).map_err(|why| DraftError::NotADraft {
                file: path.display().to_string(),
                why: why.message().to_string(),
            })?,
            Err(why) if why.kind() == io::ErrorKind::NotFound => Kept::default(),
            Err(why) => {
                return Err(DraftError::Disk {
                    file: path.display().to_string(),
                    why,
                });
            }
        };
        let mut draft = Self { path, kept };
        draft.keep_what_fits();
        Ok(draft)
    }

    /// Drops answers from the first one that does not belong to the question it would answer.
    fn keep_what_fits(&mut self) {
        for at in 0..self.kept.answer.len() {
            let before = self.answers();
            let fits = match step(&before[..at]).0 {
                Step::Ask(question) => question.id == self.kept.answer[at].question,
                Step::Refused(..) | Step::Done(_) => false,
            };
            let taken = fits && step(&before[..=at]).1 == at + 1;
            if !taken {
                self.kept.answer.truncate(at);
                return;
            }
        }
    }

    /// Where it lies.
    #[must_use]
    pub fn path(&self) -> &Path {
        &self.path
    }

    /// The answers so far.
    #[must_use]
    pub fn answers(&self) -> Vec<String> {
        self.kept.answer.iter().map(|a| a.text.clone()).collect()
    }

    /// Adds an answer and saves.
    ///
    /// # Errors
    /// [`DraftError::Disk`] when it cannot be saved.
    pub fn push(&mut self, question: &str, text: &str) -> Result<(), DraftError> {
        self.kept.answer.push(Answer {
            question: question.into(),
            text: text.into(),
        });
        self.save()
    }

    /// Takes the last answer back and saves; gives it, so that it can be offered again.
    ///
    /// # Errors
    /// [`DraftError::Disk`] when it cannot be saved.
    pub fn pop(&mut self) -> Result<Option<String>, DraftError> {
        let last = self.kept.answer.pop().map(|a| a.text);
        self.save()?;
        Ok(last)
    }

    fn save(&self) -> Result<(), DraftError> {
        let disk = |why| DraftError::Disk {
            file: self.path.display().to_string(),
            why,
        };
        let text =
            toml::to_string(&self.kept).map_err(|why| disk(io::Error::other(why.to_string())))?;
        let folder = match self.path.parent() {
            Some(folder) if !folder.as_os_str().is_empty() => folder,
            _ => Path::new("."),
        };
        let mut file = tempfile::NamedTempFile::new_in(folder).map_err(disk)?;
        file.write_all(text.as_bytes()).map_err(disk)?;
        file.as_file().sync_all().map_err(disk)?;
        file.persist(&self.path).map_err(|why| disk(why.error))?;
        Ok(())
    }

    /// Removes it once the job file stands.
    ///
    /// # Errors
    /// [`DraftError::Disk`] when it cannot be removed.
    pub fn remove(self) -> Result<(), DraftError> {
        match fs::remove_file(&self.path) {
            Err(why) if why.kind() != io::ErrorKind::NotFound => Err(DraftError::Disk {
                file: self.path.display().to_string(),
                why,
            }),
            _ => Ok(()),
        }
    }
}
