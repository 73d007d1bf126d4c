//! Opening a log that may be damaged: what is found, what is set aside, what is said.
//!
//! Promises: bytes are set aside beside the log and synced before they are cut from it; entries
//! that hold are never touched; what does not hold in the middle stays where it is and counts for
//! nothing. Every repair is entered into the log as an incident. Killed at any point, opening
//! again does the rest.

use std::{
    collections::BTreeSet,
    fs::{self, File, OpenOptions},
    io::{self, BufReader, Read, Seek, SeekFrom, Write},
    os::unix::fs::OpenOptionsExt,
    path::{Path, PathBuf},
};

use super::{
    error::JournalError,
    lock::Witness,
    places::Places,
    problem::{Problem, Trouble},
    read::{Item, Log, Reader},
    replay::Replay,
    text::{self, Header},
};
use crate::domain::{
    moment::Moment,
    record::{EntryNo, Record},
    standing::Standing,
};

/// What opening a log brought to light.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Recovery {
    /// Where the job stands by the entries that hold.
    pub standing: Standing,
    /// What does not hold.
    pub problems: Vec<Problem>,
    /// The damaged tail, set aside in this file.
    pub set_aside: Option<PathBuf>,
    /// True when there was no log, or nothing in it held.
    pub begun: bool,
    /// Sentences for the tester, each entered into the log as an incident.
    pub incidents: Vec<String>,
}

/// A log as it was found.
#[derive(Debug, Default)]
pub(super) struct Found {
    pub last: EntryNo,
    pub check: String,
    pub time: Option<Moment>,
    /// Offset after the newest block that holds.
    pub length: u64,
    exists: bool,
    /// Bytes after `length`.
    tail: u64,
    /// The tail is blank: an append that broke off after its first byte.
    blank: bool,
    /// Line of the newest block that holds.
    line: usize,
    /// The newest block lacks its line feed.
    unended: bool,
    standing: Standing,
    problems: Vec<Problem>,
    told: BTreeSet<String>,
}

/// Reads the log of a job without changing anything.
pub(super) fn examine(
    places: &Places,
    job: &str,
    witness: Option<&Witness>,
) -> Result<Found, JournalError> {
    let path = places.log();
    let mut file = match File::open(&path) {
        Ok(file) => file,
        Err(e) if e.kind() == io::ErrorKind::NotFound => {
            return Ok(Found {
                problems: lost(witness, 0, None).into_iter().collect(),
                ..Found::default()
            });
        }
        Err(e) => return Err(JournalError::io("open the log", &path)(e)),
    };
    let reading = |e| JournalError::io("read the log", &path)(e);
    let length = file.metadata().map_err(reading)?.len();
    let mut found = Found {
        exists: true,
        ..Found::default()
    };
    let mut replay = Replay::new();
    let mut reader = Reader::new(BufReader::new(&file));
    let mut seen = None;
    while let Some(item) = reader.next_item().map_err(reading)? {
        if let Item::Entry(entry, check) = &item {
            found.time = Some(entry.time);
            if witness.is_some_and(|w| w.no == entry.no) {
                seen = Some(check.to_hex().to_string());
            }
            if let Record::Incident { what } = &entry.record {
                found.told.insert(what.clone());
            }
        }
        replay.take(&item);
        if let Item::Problem(problem) = item {
            found.problems.push(problem);
        }
    }
    found.length = reader.held_end();
    found.line = reader.held_line();
    found.unended = !reader.held_ended();
    let chains = reader.chains().to_vec();
    drop(reader);
    found.standing = replay.standing();
    found.tail = length.saturating_sub(found.length);
    found.blank = blank(&mut file, found.length).map_err(reading)?;
    if chains.is_empty() && length > 0 && !is_torn_head(&mut file).map_err(reading)? {
        return Err(JournalError::NotALog { path });
    }
    if let Some(format) = found.problems.iter().find_map(|p| match p.trouble {
        Trouble::Newer(format) => Some(format),
        _ => None,
    }) {
        return Err(JournalError::Newer { path, format });
    }
    if let Some(chain) = chains.iter().find(|c| c.holds && c.job != job) {
        return Err(JournalError::OtherJob {
            path,
            expected: job.into(),
            found: chain.job.clone(),
        });
    }
    if let Some(chain) = chains.last() {
        found.last = chain.start + chain.entries;
        found.check.clone_from(&chain.check);
        // Numbers in new entries must mean the same in the chain as in the log.
        if chain.start + 1 != chain.first {
            return Err(JournalError::HandJoined { path });
        }
    }
    found
        .problems
        .extend(lost(witness, found.last, seen.as_deref()));
    Ok(found)
}

/// What the witness knows better than the log.
pub(super) fn lost(
    witness: Option<&Witness>,
    last: EntryNo,
    seen: Option<&str>,
) -> Option<Problem> {
    let witness = witness?;
    let trouble = if witness.no > last {
        Trouble::Lost(witness.no)
    } else if seen.is_some_and(|check| check != witness.check) {
        Trouble::Replaced
    } else {
        return None;
    };
    Some(Problem {
        line: 0,
        entry: Some(last.min(witness.no)),
        trouble,
    })
}

/// Brings a log into a state that can go on: sets a damaged tail aside, begins what is not there.
pub(super) fn mend(
    places: &Places,
    job: &str,
    now: Moment,
    name: Option<&str>,
    mut found: Found,
) -> Result<(Found, Recovery), JournalError> {
    let path = places.log();
    let mut recovery = Recovery {
        standing: std::mem::take(&mut found.standing),
        problems: std::mem::take(&mut found.problems),
        ..Recovery::default()
    };
    if found.exists && found.tail > 0 {
        if !found.blank {
            let aside = set_aside(places, found.length)?;
            recovery.incidents.push(format!(
                "damaged end of the log ({} bytes) set aside in {}",
                found.tail,
                file_name(&aside)
            ));
            recovery.set_aside = Some(aside);
        }
        let file = OpenOptions::new()
            .write(true)
            .open(&path)
            .map_err(JournalError::io("open the log for writing", &path))?;
        file.set_len(found.length)
            .and_then(|()| file.sync_all())
            .map_err(JournalError::io("cut the damaged end from the log", &path))?;
    }
    if found.length == 0 {
        let (check, length) = begin(places, job, now, name)?;
        recovery.begun = true;
        found.last = 0;
        found.check = check;
        found.length = length;
        found.unended = false;
    }
    if found.unended {
        let mut file = OpenOptions::new()
            .append(true)
            .open(&path)
            .map_err(JournalError::io("open the log for writing", &path))?;
        file.write_all(b"\n")
            .and_then(|()| file.sync_all())
            .map_err(JournalError::io("end the last line of the log", &path))?;
        found.length += 1;
    }
    // What lies in the tail has just been told as a whole; what stays in the log is told once.
    let middle = recovery
        .problems
        .iter()
        .filter(|p| p.line <= found.line)
        .map(|p| format!("found in the log: {p}"))
        .filter(|what| !found.told.contains(what));
    recovery.incidents.extend(middle);
    Ok((found, recovery))
}

/// Writes the head of a new journal; the file appears whole or not at all.
fn begin(
    places: &Places,
    job: &str,
    now: Moment,
    name: Option<&str>,
) -> Result<(String, u64), JournalError> {
    let path = places.log();
    let header = Header {
        format: text::FORMAT,
        journal: name.map_or_else(|| random_name(job, now), str::to_owned),
        job: job.into(),
        first: 1,
        joins: vec![],
    };
    let (text, check) =
        text::head(&header, now).map_err(|e| JournalError::io("begin the log", &path)(e.into()))?;
    whole(&path, places.folder(), text.as_bytes())
        .map_err(JournalError::io("begin the log", &path))?;
    Ok((check, text.len() as u64))
}

/// Writes a file so that it appears whole or not at all, readable by its owner only.
///
/// # Errors
/// The file system's; nothing is left behind then but what stood there.
pub fn whole(path: &Path, folder: &Path, bytes: &[u8]) -> io::Result<()> {
    let mut file = tempfile::Builder::new()
        .prefix(".handsfull-")
        .tempfile_in(folder)?;
    file.write_all(bytes)?;
    file.as_file().sync_all()?;
    file.persist(path)?;
    File::open(folder)?.sync_all()
}

/// A name no other handheld has: 48 bits of a digest over things that differ between them.
pub(super) fn random_name(job: &str, now: Moment) -> String {
    use std::hash::{BuildHasher, RandomState};
    // The standard library seeds it from the system's source of randomness.
    let chance = RandomState::new().hash_one(std::process::id());
    let digest = blake3::hash(format!("{job} {now} {chance}").as_bytes());
    digest.to_hex()[..12].to_owned()
}

/// Copies everything from `from` on into a file beside the log, synced, and gives its path. A
/// tail that was set aside before (and not cut, because of a kill) is not copied twice.
fn set_aside(places: &Places, from: u64) -> Result<PathBuf, JournalError> {
    let path = places.log();
    let reading = |e| JournalError::io("read the damaged end of the log", &path)(e);
    let mut file = File::open(&path).map_err(reading)?;
    file.seek(SeekFrom::Start(from)).map_err(reading)?;
    for n in 1..=u32::MAX {
        let aside = places.damaged(n);
        let writing = |e| JournalError::io("set the damaged end of the log aside", &aside)(e);
        let opened = OpenOptions::new()
            .write(true)
            .create_new(true)
            .mode(0o600)
            .open(&aside);
        match opened {
            Ok(mut out) => {
                io::copy(&mut file, &mut out).map_err(writing)?;
                out.sync_all().map_err(writing)?;
                File::open(places.folder())
                    .and_then(|folder| folder.sync_all())
                    .map_err(writing)?;
                return Ok(aside);
            }
            Err(e) if e.kind() == io::ErrorKind::AlreadyExists => {
                if same_tail(&path, from, &aside).map_err(writing)? {
                    return Ok(aside);
                }
            }
            Err(e) => return Err(writing(e)),
        }
    }
    Err(JournalError::io(
        "set the damaged end of the log aside",
        &path,
    )(io::Error::other("too many damaged files")))
}

fn same_tail(log: &Path, from: u64, aside: &Path) -> io::Result<bool> {
    let tail = fs::metadata(log)?.len().saturating_sub(from);
    if fs::metadata(aside)?.len() != tail {
        return Ok(false);
    }
    let mut file = File::open(log)?;
    file.seek(SeekFrom::Start(from))?;
    let digest = |reader: &mut dyn Read| -> io::Result<blake3::Hash> {
        let mut hasher = blake3::Hasher::new();
        hasher.update_reader(reader)?;
        Ok(hasher.finalize())
    };
    Ok(digest(&mut file)? == digest(&mut File::open(aside)?)?)
}

fn blank(file: &mut File, from: u64) -> io::Result<bool> {
    file.seek(SeekFrom::Start(from))?;
    let mut buffer = [0; 4096];
    loop {
        match file.read(&mut buffer)? {
            0 => return Ok(true),
            n if buffer[..n].iter().all(u8::is_ascii_whitespace) => {}
            _ => return Ok(false),
        }
    }
}

/// Whether a file without any whole header line is what a cut log begins with, rather than some
/// other file that happens to have a log's name.
fn is_torn_head(file: &mut File) -> io::Result<bool> {
    let mut start = [0; text::JOURNAL.len()];
    file.seek(SeekFrom::Start(0))?;
    let mut got = 0;
    while got < start.len() {
        match file.read(&mut start[got..])? {
            0 => break,
            n => got += n,
        }
    }
    Ok(text::JOURNAL.as_bytes().starts_with(&start[..got]) || start.iter().all(|b| *b == 0))
}

fn file_name(path: &Path) -> String {
    path.file_name()
        .map(|name| name.to_string_lossy().into_owned())
        .unwrap_or_default()
}

impl Log {
    /// Reads a log from its file, without locking or changing it.
    ///
    /// # Errors
    /// [`JournalError::Io`]; [`JournalError::NotALog`] when no journal begins in it.
    pub fn open(path: &Path) -> Result<Self, JournalError> {
        let file = File::open(path).map_err(JournalError::io("open the log", path))?;
        let log =
            Log::read(BufReader::new(file)).map_err(JournalError::io("read the log", path))?;
        if log.chains.is_empty() {
            return Err(JournalError::NotALog { path: path.into() });
        }
        Ok(log)
    }
}
