//! Reads a log entry by entry and says of each whether it holds.
//!
//! Promises: any bytes are read to their end without a panic; an entry is handed out only when its
//! check follows from the one before (or the entry after proves it); memory stays that of a few
//! entries. It leaves out repair (`recover`) and what entries add up to (`replay`).

use std::{
    collections::VecDeque,
    io::{self, BufRead},
};

use blake3::Hash;
use serde::Deserialize;

use super::{
    problem::{Problem, Trouble},
    scan::{Block, Kind, Scanner},
    text::{self, Header, Joins},
};
use crate::domain::{
    moment::Moment,
    record::{EntryNo, Record},
    standing::Entry,
};

/// The entries of one handheld within a log.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Chain {
    /// Its name; empty when the head cannot be read.
    pub journal: String,
    /// Reference of the job; empty when the head cannot be read.
    pub job: String,
    /// When it began.
    pub begun: Option<Moment>,
    /// Whether its head matches its check.
    pub holds: bool,
    /// Its own number of its first entry.
    pub first: EntryNo,
    /// The journals a join took in.
    pub joins: Vec<Joins>,
    /// Entries of the log before it.
    pub start: EntryNo,
    /// How many entries it has; grows while the log is read.
    pub entries: EntryNo,
    /// The check of its newest entry that holds, or of its head.
    pub check: String,
    /// Offset of its head in the file.
    pub from: u64,
    /// Offset after its newest block that holds; grows while the log is read.
    pub to: u64,
}

/// What the reader hands out, in the order of the file.
#[derive(Debug, Clone, PartialEq, Eq)]
#[allow(clippy::large_enum_variant)] // entries are most of what is handed out
pub enum Item {
    /// A journal begins.
    Chain(Chain),
    /// An entry that holds, with its check: its number in the log, and the numbers in it, count
    /// over all journals.
    Entry(Entry, Hash),
    /// Something does not hold.
    Problem(Problem),
}

/// An entry as it stands in the file.
#[derive(Deserialize)]
struct EntryFile {
    no: EntryNo,
    time: toml::value::Datetime,
    #[serde(flatten)]
    record: Record,
}

/// The outer keys alone, for an entry whose event this program does not know.
#[derive(Deserialize)]
struct NumberOnly {
    no: EntryNo,
}

/// An entry whose own check does not follow: the next one may still prove its lines.
struct Doubtful {
    block: Block,
    /// What its check should be.
    computed: String,
    parsed: Result<EntryFile, Trouble>,
}

/// Reads item after item.
pub struct Reader<R> {
    scanner: Scanner<R>,
    chains: Vec<Chain>,
    ready: VecDeque<Item>,
    doubtful: Option<Doubtful>,
    /// What the check of a damaged head should be: the first entry may prove it.
    head: Option<String>,
    /// The check the next entry must follow from.
    before: Option<String>,
    /// The number of the block before, whether it holds or not.
    last_seen: EntryNo,
    /// The number of the newest entry that holds.
    last_held: EntryNo,
    /// Checks of the entries that hold, newest last: enough to know a copied tail.
    recent: VecDeque<String>,
    held_end: u64,
    held_ended: bool,
    held_line: usize,
    done: bool,
}

/// How many entries back a copied tail is recognised as such; beyond it, copies are merely broken.
const RECENT: usize = 4096;

impl<R: BufRead> Reader<R> {
    /// Begins to read.
    pub fn new(reader: R) -> Self {
        Self {
            scanner: Scanner::new(reader),
            chains: Vec::new(),
            ready: VecDeque::new(),
            doubtful: None,
            head: None,
            before: None,
            last_seen: 0,
            last_held: 0,
            recent: VecDeque::new(),
            held_end: 0,
            held_ended: true,
            held_line: 0,
            done: false,
        }
    }

    /// The journals met so far.
    #[must_use]
    pub fn chains(&self) -> &[Chain] {
        &self.chains
    }

    /// Offset after the newest block that holds: what comes later is a damaged tail.
    #[must_use]
    pub fn held_end(&self) -> u64 {
        self.held_end
    }

    /// Whether that block ends with a line feed.
    #[must_use]
    pub fn held_ended(&self) -> bool {
        self.held_ended
    }

    /// The line that block begins with; 0 when none holds.
    #[must_use]
    pub fn held_line(&self) -> usize {
        self.held_line
    }

    /// The next item; `None` at the end.
    ///
    /// # Errors
    /// The reader's own I/O errors.
    pub fn next_item(&mut self) -> io::Result<Option<Item>> {
        while self.ready.is_empty() && !self.done {
            match self.scanner.next()? {
                Some(block) => self.take(block),
                None => {
                    self.settle_doubt(None);
                    self.done = true;
                }
            }
        }
        Ok(self.ready.pop_front())
    }

    fn take(&mut self, block: Block) {
        let head = match block.kind {
            Kind::Journal => true,
            Kind::Entry => false,
            // A damaged header line must not cost more than what stands under it.
            Kind::Unheaded if block.check.is_some() => self.chains.is_empty(),
            Kind::Unheaded => {
                self.problem(block.line, None, Trouble::Stray);
                return;
            }
        };
        if head {
            self.settle_doubt(None);
            self.take_head(&block);
        } else {
            self.take_entry(block);
        }
    }

    fn problem(&mut self, line: usize, entry: Option<EntryNo>, trouble: Trouble) {
        self.ready.push_back(Item::Problem(Problem {
            line,
            entry,
            trouble,
        }));
    }

    fn take_head(&mut self, block: &Block) {
        #[derive(Deserialize)]
        struct HeadFile {
            #[serde(flatten)]
            header: Header,
            begun: toml::value::Datetime,
        }
        let computed = text::seal("", &block.lines);
        let holds = block.check.as_ref() == Some(&computed);
        let head: Option<HeadFile> = body(&block.lines, text::JOURNAL);
        let start = self.chains.last().map_or(0, |c| c.start + c.entries);
        let (header, begun) = match head {
            Some(head) => (Some(head.header), head.begun.to_string().parse().ok()),
            None => (None, None),
        };
        if let Some(format) = header.as_ref().map(|h| h.format)
            && format != text::FORMAT
        {
            self.problem(block.line, None, Trouble::Newer(format));
        }
        if !holds {
            self.problem(block.line, None, Trouble::Head);
        }
        let (journal, job, first, joins) = match header {
            Some(h) => (h.journal, h.job, h.first.max(1), h.joins),
            None => (String::new(), String::new(), 1, vec![]),
        };
        self.before.clone_from(&block.check);
        self.last_seen = first - 1;
        self.last_held = first - 1;
        self.head = (!holds).then(|| computed.clone());
        if holds {
            self.hold(block, &computed);
        }
        let chain = Chain {
            journal,
            job,
            begun,
            holds,
            first,
            joins,
            start,
            entries: 0,
            check: computed,
            from: block.start,
            to: block.end,
        };
        self.chains.push(chain.clone());
        self.ready.push_back(Item::Chain(chain));
    }

    fn take_entry(&mut self, block: Block) {
        if self.chains.is_empty() {
            // Entries without a head: nothing they could follow from.
            self.problem(block.line, None, Trouble::Broken);
            return;
        }
        let parsed = parse(&block.lines);
        let number = number(&parsed, &block);
        let follows = |before: Option<&String>| {
            let computed = text::seal(before?, &block.lines);
            (block.check.as_ref() == Some(&computed)).then_some(computed)
        };
        if let Some(check) = follows(self.before.as_ref()) {
            self.settle_doubt(None);
            self.held(&block, check, parsed);
            return;
        }
        let head = self.head.take();
        let repaired = self.doubtful.as_ref().map(|d| d.computed.clone()).or(head);
        if let Some(check) = follows(repaired.as_ref()) {
            self.settle_doubt(Some(()));
            self.held(&block, check, parsed);
            return;
        }
        self.settle_doubt(None);
        if let Some(check) = &block.check
            && self.recent.contains(check)
        {
            self.problem(block.line, number, Trouble::Duplicate);
            return;
        }
        let computed = text::seal(self.before.as_deref().unwrap_or(""), &block.lines);
        self.before.clone_from(&block.check);
        self.doubtful = Some(Doubtful {
            block,
            computed,
            parsed,
        });
    }

    /// Decides about the entry in doubt: `proved` when the entry after it follows from its lines.
    fn settle_doubt(&mut self, proved: Option<()>) {
        let Some(doubt) = self.doubtful.take() else {
            return;
        };
        let number = number(&doubt.parsed, &doubt.block);
        if proved.is_some() {
            self.problem(doubt.block.line, number, Trouble::CheckChanged);
            self.held(&doubt.block, doubt.computed, doubt.parsed);
            return;
        }
        self.gap(doubt.block.line, number);
        let trouble = if doubt.block.check.is_none() {
            Trouble::Torn
        } else {
            Trouble::Broken
        };
        self.problem(doubt.block.line, number, trouble);
    }

    /// Says which numbers are missing before this one, and goes on counting from it.
    fn gap(&mut self, line: usize, number: Option<EntryNo>) {
        let expected = self.last_seen.saturating_add(1);
        match number {
            // A wild number is a sign of damage itself, not of a million lost entries.
            Some(no) if no > expected && no - expected < 1_000_000 => {
                self.problem(line, Some(no), Trouble::Missing(expected, no - 1));
                self.last_seen = no;
            }
            _ => self.last_seen = expected,
        }
    }

    fn held(&mut self, block: &Block, check: String, parsed: Result<EntryFile, Trouble>) {
        let number = number(&parsed, block);
        let Some(no) = number.filter(|no| *no > self.last_held) else {
            let trouble = parsed.err().unwrap_or(Trouble::OutOfOrder);
            self.problem(block.line, number, trouble);
            self.hold(block, &check);
            return;
        };
        if no != self.last_seen.saturating_add(1) && no > self.last_seen {
            self.gap(block.line, Some(no));
        }
        self.last_seen = no;
        self.last_held = no;
        self.hold(block, &check);
        let at = self.chains.len() - 1;
        let (start, first) = (self.chains[at].start, self.chains[at].first);
        let position = (start + 1).saturating_add(no - first);
        self.chains[at].entries = (no - first).saturating_add(1);
        let digest = Hash::from_hex(&check).unwrap_or(Hash::from_bytes([0; 32]));
        self.chains[at].check = check;
        match parsed.and_then(|e| Ok((moment(&e.time)?, e.record))) {
            Err(trouble) => self.problem(block.line, Some(no), trouble),
            Ok((time, record)) => {
                let missing = std::cell::Cell::new(None);
                let record = record.with_entries(|named| {
                    self.resolve(at, named).unwrap_or_else(|| {
                        missing.set(Some(named));
                        0
                    })
                });
                if let Some(named) = missing.get() {
                    self.problem(block.line, Some(no), Trouble::NoSuchEntry(named));
                }
                let entry = Entry {
                    no: position,
                    chain: at,
                    time,
                    record,
                };
                self.ready.push_back(Item::Entry(entry, digest));
            }
        }
    }

    fn hold(&mut self, block: &Block, check: &str) {
        self.before = Some(check.to_owned());
        self.held_end = block.end;
        if block.kind == Kind::Entry
            && let Some(chain) = self.chains.last_mut()
        {
            chain.to = block.end;
        }
        self.held_ended = block.ended;
        self.held_line = block.line;
        if self.recent.len() == RECENT {
            self.recent.pop_front();
        }
        self.recent.push_back(check.to_owned());
    }

    /// The number in this log of what a journal calls entry `no`.
    fn resolve(&self, chain: usize, no: EntryNo) -> Option<EntryNo> {
        let own = &self.chains[chain];
        if no >= own.first {
            let at = no - own.first;
            return (at < own.entries).then(|| own.start + 1 + at);
        }
        // A join counts over the journals it took in, in their order.
        let mut left = no.checked_sub(1)?;
        for joined in &own.joins {
            if left < joined.entries {
                let earlier = &self.chains[..chain];
                let same = |c: &&Chain| c.journal == joined.journal && left < c.entries;
                return earlier
                    .iter()
                    .filter(same)
                    .find(|c| c.check == joined.check)
                    .or_else(|| earlier.iter().find(same))
                    .map(|c| c.start + 1 + left);
            }
            left -= joined.entries;
        }
        None
    }
}

/// Reads the lines of a block below its header line.
fn body<T: serde::de::DeserializeOwned>(lines: &[u8], header: &str) -> Option<T> {
    let text = std::str::from_utf8(lines.get(header.len()..)?).ok()?;
    toml::from_str(text).ok()
}

fn parse(lines: &[u8]) -> Result<EntryFile, Trouble> {
    let unreadable = |why: String| Trouble::Unreadable(why);
    if lines.len() > text::LONGEST {
        return Err(unreadable("too long".into()));
    }
    let text = lines
        .get(text::ENTRY.len()..)
        .and_then(|rest| std::str::from_utf8(rest).ok())
        .ok_or_else(|| unreadable("not UTF-8 text".into()))?;
    toml::from_str(text).map_err(|e| unreadable(one_line(e.message())))
}

fn number(parsed: &Result<EntryFile, Trouble>, block: &Block) -> Option<EntryNo> {
    match parsed {
        Ok(entry) => Some(entry.no),
        Err(_) => body::<NumberOnly>(&block.lines, text::ENTRY).map(|e| e.no),
    }
}

fn moment(time: &toml::value::Datetime) -> Result<Moment, Trouble> {
    let text = time.to_string();
    text.parse()
        .map_err(|_| Trouble::Unreadable(format!("`{text}` is not a time with offset")))
}

fn one_line(message: &str) -> String {
    message.lines().collect::<Vec<_>>().join(" ")
}

/// A whole log in memory, for review and schedule.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Log {
    /// Its journals.
    pub chains: Vec<Chain>,
    /// The entries that hold.
    pub entries: Vec<Entry>,
    /// Their checks, in the same order.
    pub checks: Vec<Hash>,
    /// What does not hold.
    pub problems: Vec<Problem>,
}

impl Log {
    /// Reads a log to its end.
    ///
    /// # Errors
    /// The reader's own I/O errors.
    pub fn read(reader: impl BufRead) -> io::Result<Self> {
        let mut log = Log::default();
        let mut reader = Reader::new(reader);
        while let Some(item) = reader.next_item()? {
            match item {
                Item::Entry(entry, check) => {
                    log.entries.push(entry);
                    log.checks.push(check);
                }
                Item::Problem(problem) => log.problems.push(problem),
                Item::Chain(_) => {}
            }
        }
        log.chains = reader.chains().to_vec();
        Ok(log)
    }

    /// The entry of that number, if it holds.
    #[must_use]
    pub fn entry(&self, no: EntryNo) -> Option<&Entry> {
        self.at(no).map(|at| &self.entries[at])
    }

    /// The check of the entry of that number, if it holds.
    #[must_use]
    pub fn check(&self, no: EntryNo) -> Option<String> {
        self.at(no).map(|at| self.checks[at].to_hex().to_string())
    }

    /// Number of the newest entry, whether it can be read or not; 0 when there is none.
    #[must_use]
    pub fn last(&self) -> EntryNo {
        self.chains.last().map_or(0, |c| c.start + c.entries)
    }

    fn at(&self, no: EntryNo) -> Option<usize> {
        // Numbers rise through the file, over all its journals.
        self.entries.binary_search_by_key(&no, |e| e.no).ok()
    }
}
