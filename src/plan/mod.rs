//! The job file: TOML in, a checked [`Job`] out; what is wrong is named with its line.
//!
//! Promises: every mistake of a file is reported at once, each with line and column, what is
//! wrong and what would be right; what a file leaves out gets a documented default, and defaults
//! that matter are told as [`Notice`]s; [`write::to_toml`] writes a file that loads back equal.
//! It leaves out what to do with the job: sequence, ranges and reminders are the domain's.

mod board;
mod cable;
mod circuit;
mod error;
mod fields;
mod head;
pub mod interview;
mod notices;
mod place;
mod suggest;
pub mod write;

use std::path::Path;

pub use error::{Mistake, PlanError};
pub use notices::Notice;

use crate::domain::plan::Job;

/// A complete job file with comments: every key there is, in an invented scenario.
pub const EXAMPLE: &str = include_str!("example.toml");

/// A job and what should be said about its file although nothing in it is wrong.
#[derive(Debug, Clone, PartialEq)]
pub struct Loaded {
    /// The job.
    pub job: Job,
    /// Defaults that matter and oddities, in the order of the file.
    pub notices: Vec<Notice>,
}

/// Reads a job file.
///
/// # Errors
/// [`PlanError::Unreadable`] when the file cannot be read as text, [`PlanError::Wrong`] with every
/// mistake in it.
pub fn load(path: &Path) -> Result<Job, PlanError> {
    read(path).map(|loaded| loaded.job)
}

/// Reads a job file, with its notices.
///
/// # Errors
/// As [`load`].
pub fn read(path: &Path) -> Result<Loaded, PlanError> {
    let bytes = std::fs::read(path).map_err(|why| PlanError::Unreadable {
        file: path.display().to_string(),
        why: error::plain(&why),
    })?;
    let text = String::from_utf8(bytes).map_err(|_| PlanError::Unreadable {
        file: path.display().to_string(),
        why: "it is not text in UTF-8".into(),
    })?;
    examine(&text, &path.display().to_string())
}

/// Reads a job from text; `file_name` is used in messages only.
///
/// # Errors
/// [`PlanError::Wrong`] with every mistake in the text.
pub fn parse(text: &str, file_name: &str) -> Result<Job, PlanError> {
    examine(text, file_name).map(|loaded| loaded.job)
}

/// Reads a job from text, with its notices.
///
/// # Errors
/// As [`parse`].
pub fn examine(text: &str, file_name: &str) -> Result<Loaded, PlanError> {
    let mut mistakes = error::Mistakes::new(text);
    let job = fields::document(text, &mut mistakes)
        .map(|mut document| head::job(&mut document, &mut mistakes));
    let (list, told) = mistakes.into_parts();
    match job {
        Some(job) if list.is_empty() => {
            let mut notices = told;
            notices.extend(notices::oddities(&job));
            Ok(Loaded { job, notices })
        }
        _ => Err(PlanError::Wrong {
            file: file_name.into(),
            mistakes: list,
        }),
    }
}
