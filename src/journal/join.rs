//! Several handhelds on one job: their journals in one log, each chain byte for byte as it was.
//!
//! Promises: nothing of a journal is rewritten, so every check still holds; a copy of a journal
//! that is there already adds nothing; copies that went on separately both stay, and where they
//! differ a person decides. It leaves out who decides what: that is an entry of its own.

use super::{
    read::{Chain, Log},
    recover::random_name,
    text::{self, Header, Joins},
};
use crate::domain::moment::Moment;

/// A log that goes into a join.
#[derive(Debug)]
pub struct Source<'a> {
    /// Its name, for messages.
    pub name: String,
    /// Its bytes.
    pub bytes: &'a [u8],
    /// What was read from them.
    pub log: &'a Log,
}

/// A joined log.
#[derive(Debug)]
pub struct Joined {
    /// The file.
    pub bytes: Vec<u8>,
    /// The journals in it: name, entries.
    pub journals: Vec<(String, u64)>,
    /// What should be known, a sentence each.
    pub notes: Vec<String>,
}

/// Why logs cannot be joined.
#[derive(Debug, thiserror::Error)]
#[allow(missing_docs)] // the fields are named in the messages
pub enum JoinError {
    #[error("{name}: is the log of job `{found}`, not of `{expected}`")]
    OtherJob {
        name: String,
        expected: String,
        found: String,
    },
    #[error("{name}: the head of a journal does not hold; it cannot be told apart from others")]
    NoHead { name: String },
    #[error("there is only one journal in these logs: nothing to join")]
    OnlyOne,
    #[error("the head of the joined log cannot be laid out: {why}")]
    NotLaidOut { why: String },
}

struct Piece<'a> {
    chain: &'a Chain,
    checks: Vec<blake3::Hash>,
    bytes: &'a [u8],
    /// A join in the same log stands on it: it must stay as long as it was then.
    stood_on: bool,
}

/// Joins logs of the same job; `name` is the name of the journal that the join begins (random
/// when `None`).
///
/// # Errors
/// [`JoinError`].
pub fn join(sources: &[Source], now: Moment, name: Option<&str>) -> Result<Joined, JoinError> {
    let job = sources
        .iter()
        .find_map(|s| s.log.chains.first())
        .map(|chain| chain.job.clone())
        .unwrap_or_default();
    let mut pieces: Vec<Piece> = vec![];
    let mut notes = vec![];
    for source in sources {
        for (at, chain) in source.log.chains.iter().enumerate() {
            if !chain.holds {
                return Err(JoinError::NoHead {
                    name: source.name.clone(),
                });
            }
            if chain.job != job {
                return Err(JoinError::OtherJob {
                    name: source.name.clone(),
                    expected: job,
                    found: chain.job.clone(),
                });
            }
            let piece = piece(source, at);
            add(&mut pieces, piece, &source.name, &mut notes);
        }
        let end = source.log.chains.last().map_or(0, |c| c.to);
        let tail = source.bytes.get(index(end)..).unwrap_or_default();
        if tail.iter().any(|b| !b.is_ascii_whitespace()) {
            notes.push(format!(
                "{}: its damaged end ({} bytes) is left where it is",
                source.name,
                tail.len()
            ));
        }
    }
    if pieces.len() < 2 {
        return Err(JoinError::OnlyOne);
    }
    let mut bytes = vec![];
    for piece in &pieces {
        if !bytes.is_empty() {
            bytes.push(b'\n');
        }
        bytes.extend_from_slice(piece.bytes);
        if bytes.last() != Some(&b'\n') {
            bytes.push(b'\n');
        }
    }
    let total: u64 = pieces.iter().map(|p| p.chain.entries).sum();
    let header = Header {
        format: text::FORMAT,
        journal: name.map_or_else(|| random_name(&job, now), str::to_owned),
        job,
        first: total + 1,
        joins: pieces.iter().map(joins).collect(),
    };
    let (head, _) =
        text::head(&header, now).map_err(|e| JoinError::NotLaidOut { why: e.to_string() })?;
    bytes.push(b'\n');
    bytes.extend_from_slice(head.as_bytes());
    Ok(Joined {
        bytes,
        journals: pieces
            .iter()
            .map(|p| (p.chain.journal.clone(), p.chain.entries))
            .collect(),
        notes,
    })
}

fn joins(piece: &Piece) -> Joins {
    Joins {
        journal: piece.chain.journal.clone(),
        entries: piece.chain.entries,
        check: piece.chain.check.clone(),
    }
}

fn piece<'a>(source: &Source<'a>, at: usize) -> Piece<'a> {
    let chain = &source.log.chains[at];
    let checks = source
        .log
        .entries
        .iter()
        .zip(&source.log.checks)
        .filter(|(entry, _)| entry.chain == at)
        .map(|(_, check)| *check)
        .collect();
    let stood_on = source
        .log
        .chains
        .iter()
        .any(|c| c.joins.iter().any(|j| j.journal == chain.journal));
    Piece {
        chain,
        checks,
        bytes: source
            .bytes
            .get(index(chain.from)..index(chain.to))
            .unwrap_or_default(),
        stood_on,
    }
}

fn index(offset: u64) -> usize {
    usize::try_from(offset).unwrap_or(usize::MAX)
}

/// Takes a journal in, unless it is there already.
fn add<'a>(pieces: &mut Vec<Piece<'a>>, new: Piece<'a>, from: &str, notes: &mut Vec<String>) {
    let journal = &new.chain.journal;
    for old in pieces
        .iter_mut()
        .filter(|old| old.chain.journal == *journal)
    {
        if old.checks.starts_with(&new.checks) {
            notes.push(format!(
                "{from}: journal {journal} is there already, up to its entry {}",
                old.chain.entries
            ));
            return;
        }
        if new.checks.starts_with(&old.checks) && !old.stood_on {
            notes.push(format!(
                "{from}: journal {journal} goes on to its entry {} here",
                new.chain.entries
            ));
            *old = new;
            return;
        }
    }
    if let Some(old) = pieces.iter().find(|old| old.chain.journal == *journal) {
        let same = old
            .checks
            .iter()
            .zip(&new.checks)
            .take_while(|(a, b)| a == b)
            .count();
        notes.push(format!(
            "{from}: journal {journal} was copied and went on in both places; the first {same} \
             entries are the same, both copies are kept"
        ));
    }
    pieces.push(new);
}
