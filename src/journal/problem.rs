//! What does not hold in a log, with its line: for `verify`, for recovery, for the schedule.

use std::fmt;

use crate::domain::record::EntryNo;

/// One thing that does not hold.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Problem {
    /// Line of the file, from 1.
    pub line: usize,
    /// The entry's own number in its journal, where one could be read.
    pub entry: Option<EntryNo>,
    /// What it is.
    pub trouble: Trouble,
}

/// The kinds of trouble.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Trouble {
    /// Text that belongs to no entry.
    Stray,
    /// It breaks off: no check line.
    Torn,
    /// The lines are not those that were sealed, or not after what stood before them.
    Broken,
    /// The check line was changed; the entry after proves the lines.
    CheckChanged,
    /// A copy of an entry that stands already.
    Duplicate,
    /// Numbers that are missing before this entry: first and last.
    Missing(EntryNo, EntryNo),
    /// Sealed, but numbered as if it stood elsewhere.
    OutOfOrder,
    /// Sealed, but this program cannot read what it says.
    Unreadable(String),
    /// The head of the journal does not hold.
    Head,
    /// It names an entry the log does not have.
    NoSuchEntry(EntryNo),
    /// The witness beside the log saw entries that are gone: the last one it saw.
    Lost(EntryNo),
    /// The witness beside the log saw another entry under this number.
    Replaced,
    /// A head of an unknown format.
    Newer(u64),
}

impl Problem {
    /// Whether the value of the entry does not count.
    #[must_use]
    pub fn excludes(&self) -> bool {
        !matches!(
            self.trouble,
            Trouble::CheckChanged
                | Trouble::Duplicate
                | Trouble::Stray
                | Trouble::Head
                | Trouble::NoSuchEntry(_)
        )
    }
}

impl fmt::Display for Problem {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "line {}", self.line)?;
        if let Some(no) = self.entry {
            write!(f, ", entry {no}")?;
        }
        f.write_str(": ")?;
        match &self.trouble {
            Trouble::Stray => f.write_str("text that belongs to no entry; it counts for nothing"),
            Trouble::Torn => f.write_str("breaks off before its check; it does not count"),
            Trouble::Broken => f.write_str(
                "does not match its check: changed, or not what followed the entry before; it \
                 does not count",
            ),
            Trouble::CheckChanged => f.write_str(
                "its check line was changed; the entry after it proves the lines, so it counts",
            ),
            Trouble::Duplicate => {
                f.write_str("a copy of an entry that stands already; it counts once")
            }
            Trouble::Missing(from, to) if from == to => write!(f, "entry {from} is missing here"),
            Trouble::Missing(from, to) => write!(f, "entries {from} to {to} are missing here"),
            Trouble::OutOfOrder => {
                f.write_str("its number does not follow the one before; it does not count")
            }
            Trouble::Unreadable(why) => write!(f, "cannot be read ({why}); it does not count"),
            Trouble::Head => f.write_str("the head of the journal does not match its check"),
            Trouble::NoSuchEntry(no) => write!(f, "names entry {no}, which is not in the log"),
            Trouble::Lost(last) => write!(
                f,
                "the log ends here, but entry {last} had been kept: the end is lost"
            ),
            Trouble::Replaced => {
                f.write_str("is not the entry that had been kept under this number")
            }
            Trouble::Newer(format) => {
                write!(f, "written in format {format}, which is not known here")
            }
        }
    }
}
