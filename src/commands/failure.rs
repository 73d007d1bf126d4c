//! Errors at the edge: one clear line, a hint, an exit code.
//!
//! Library errors become a [`Failure`] here and nowhere deeper; the exit codes are documented in
//! the README.

use std::{fmt, process::ExitCode};

/// Kinds of failure, each with its exit code.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Kind {
    /// It ran, but what was looked for was not found in order (`verify`, `plan check`): 1.
    Findings,
    /// Wrong arguments: 2.
    Usage,
    /// A file is missing or wrong: 3.
    Input,
    /// Sound, recogniser or terminal is missing: 4.
    Device,
    /// The log could not be written: 5.
    Log,
    /// Another session holds the job: 6.
    Busy,
}

/// What is told to the user: what is wrong and where, then what to do.
#[derive(Debug, Clone)]
pub struct Failure {
    kind: Kind,
    message: String,
    hint: Option<String>,
}

impl Failure {
    /// A failure with its message: what is wrong, where.
    pub fn new(kind: Kind, message: impl fmt::Display) -> Self {
        Self {
            kind,
            message: message.to_string(),
            hint: None,
        }
    }

    /// Adds what to do.
    #[must_use]
    pub fn hint(mut self, hint: impl fmt::Display) -> Self {
        self.hint = Some(hint.to_string());
        self
    }

    /// Its kind.
    #[must_use]
    pub fn kind(&self) -> Kind {
        self.kind
    }

    /// Its exit code.
    #[must_use]
    pub fn code(&self) -> ExitCode {
        ExitCode::from(match self.kind {
            Kind::Findings => 1,
            Kind::Usage => 2,
            Kind::Input => 3,
            Kind::Device => 4,
            Kind::Log => 5,
            Kind::Busy => 6,
        })
    }
}

impl fmt::Display for Failure {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "handsfull: {}", self.message)?;
        match &self.hint {
            Some(hint) => write!(f, "\n  {hint}"),
            None => Ok(()),
        }
    }
}

impl std::error::Error for Failure {}
