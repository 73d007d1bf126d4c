//! Mistakes of a job file and where they stand.
//!
//! Promises: line and column count from 1, columns in characters; mistakes come in the order of
//! the file. It leaves out colours and exit codes (the command's business).

use std::{fmt, io, ops::Range};

use super::notices::Notice;

/// One mistake.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Mistake {
    /// Line, from 1.
    pub line: usize,
    /// Column in characters, from 1.
    pub column: usize,
    /// What is wrong.
    pub what: String,
    /// What would be right.
    pub right: String,
}

/// Why a job file gives no job.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum PlanError {
    /// The file cannot be read at all.
    #[error("{file}: cannot be read: {why}")]
    Unreadable {
        /// The file as named.
        file: String,
        /// Why.
        why: String,
    },
    /// The file has mistakes; at least one.
    #[error("{}", listed(.file, .mistakes))]
    Wrong {
        /// The file as named.
        file: String,
        /// All of them, in the order of the file.
        mistakes: Vec<Mistake>,
    },
}

/// Collects mistakes and notices while a file is read.
pub(super) struct Mistakes<'a> {
    text: &'a str,
    list: Vec<(usize, Mistake)>,
    told: Vec<Notice>,
}

impl<'a> Mistakes<'a> {
    pub(super) fn new(text: &'a str) -> Self {
        Self {
            text,
            list: Vec::new(),
            told: Vec::new(),
        }
    }

    /// Notes a mistake at a byte range of the text.
    pub(super) fn add(
        &mut self,
        span: &Range<usize>,
        what: impl Into<String>,
        right: impl Into<String>,
    ) {
        let (line, column) = position(self.text, span.start);
        self.list.push((
            span.start,
            Mistake {
                line,
                column,
                what: what.into(),
                right: right.into(),
            },
        ));
    }

    /// How many were noted so far: tells a part that was read whole from one with holes, whose
    /// absence elsewhere is no mistake of its own.
    pub(super) fn count(&self) -> usize {
        self.list.len()
    }

    /// Notes something worth telling that is no mistake.
    pub(super) fn tell(&mut self, what: impl Into<String>) {
        self.told.push(Notice { text: what.into() });
    }

    /// The mistakes in the order of the file, and the notices.
    pub(super) fn into_parts(mut self) -> (Vec<Mistake>, Vec<Notice>) {
        self.list.sort_by_key(|(start, _)| *start);
        let list = self.list.into_iter().map(|(_, mistake)| mistake).collect();
        (list, self.told)
    }
}

/// Line and column of a byte offset; an offset inside a character counts as that character.
fn position(text: &str, offset: usize) -> (usize, usize) {
    let before: Vec<char> = text
        .char_indices()
        .take_while(|(at, _)| *at < offset)
        .map(|(_, c)| c)
        .collect();
    let line = before.iter().filter(|c| **c == '\n').count() + 1;
    let column = before.iter().rev().take_while(|c| **c != '\n').count() + 1;
    (line, column)
}

fn listed(file: &str, mistakes: &[Mistake]) -> String {
    let count = match mistakes.len() {
        1 => "1 mistake".to_string(),
        n => format!("{n} mistakes"),
    };
    let mut out = format!("{file}: {count}");
    for m in mistakes {
        out.push_str(&format!(
            "\n{file}:{}:{}: {}\n  {}",
            m.line, m.column, m.what, m.right
        ));
    }
    out
}

impl fmt::Display for Mistake {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "line {}, column {}: {}; {}",
            self.line, self.column, self.what, self.right
        )
    }
}

/// An input error in words a tester reads.
pub(super) fn plain(why: &io::Error) -> String {
    match why.kind() {
        io::ErrorKind::NotFound => "there is no such file".into(),
        io::ErrorKind::PermissionDenied => "no permission to read it".into(),
        io::ErrorKind::IsADirectory => "it is a folder".into(),
        _ => why.to_string(),
    }
}
