//! Failing disks: what is not kept must leave no trace, and what is kept must stay.

use std::fs;

use super::*;
use crate::journal::Log;

/// A file that fails as it is told.
#[derive(Debug)]
struct Failing {
    bytes: std::sync::Arc<std::sync::Mutex<Vec<u8>>>,
    /// Bytes that still fit.
    room: usize,
    sync_fails: bool,
    cut_fails: bool,
}

impl Medium for Failing {
    fn append(&mut self, bytes: &[u8]) -> io::Result<()> {
        let fits = bytes.len().min(self.room);
        self.room -= fits;
        let mut all = self.bytes.lock().expect("no test panics while it writes");
        all.extend_from_slice(&bytes[..fits]);
        if fits < bytes.len() {
            return Err(io::ErrorKind::StorageFull.into());
        }
        Ok(())
    }

    fn sync(&mut self) -> io::Result<()> {
        if self.sync_fails {
            return Err(io::Error::other("the card was pulled"));
        }
        Ok(())
    }

    fn cut(&mut self, length: u64) -> io::Result<()> {
        if self.cut_fails {
            return Err(io::Error::other("the card was pulled"));
        }
        let mut all = self.bytes.lock().expect("no test panics while it writes");
        all.truncate(usize::try_from(length).expect("short"));
        Ok(())
    }

    fn length(&mut self) -> io::Result<u64> {
        let all = self.bytes.lock().expect("no test panics while it writes");
        Ok(all.len() as u64)
    }
}

fn at(seconds: u32) -> Moment {
    format!(
        "2026-03-02T09:{:02}:{:02}+01:00",
        seconds / 60,
        seconds % 60
    )
    .parse()
    .expect("a time")
}

fn note(text: &str) -> Record {
    Record::Note {
        target: None,
        text: text.into(),
        by: "R. Lark".into(),
    }
}

struct Bench {
    _folder: tempfile::TempDir,
    journal: Journal,
    bytes: std::sync::Arc<std::sync::Mutex<Vec<u8>>>,
}

impl Bench {
    fn new(room: usize, sync_fails: bool, cut_fails: bool) -> Self {
        let folder = tempfile::tempdir().expect("a folder");
        let path = folder.path().join("mill.toml");
        let (mut journal, _) =
            Journal::open_as(&path, "mill", at(0), Some("0123456789ab")).expect("opens");
        let head = fs::read(journal.places().log()).expect("there");
        let bytes = std::sync::Arc::new(std::sync::Mutex::new(head));
        journal.medium = Box::new(Failing {
            bytes: bytes.clone(),
            room,
            sync_fails,
            cut_fails,
        });
        Self {
            _folder: folder,
            journal,
            bytes,
        }
    }

    fn log(&self) -> Log {
        let bytes = self.bytes.lock().expect("no test panics while it writes");
        Log::read(&bytes[..]).expect("memory")
    }
}

#[test]
fn a_full_disk_at_any_byte_leaves_the_log_as_it_was() {
    let whole = {
        let mut bench = Bench::new(usize::MAX, false, false);
        let before = bench.bytes.lock().expect("free").len();
        bench.journal.append(&note("first"), at(1)).expect("kept");
        bench.bytes.lock().expect("free").len() - before
    };
    for room in 0..whole {
        let mut bench = Bench::new(room, false, false);
        let before = bench.bytes.lock().expect("free").clone();
        let error = bench
            .journal
            .append(&note("first"), at(1))
            .expect_err("the disk is full");
        assert!(
            matches!(error, JournalError::NotKept { no: 1, .. }),
            "{error}"
        );
        assert_eq!(*bench.bytes.lock().expect("free"), before);
        assert_eq!(bench.journal.last(), 0);
    }
}

#[test]
fn a_failed_sync_keeps_nothing_and_the_next_entry_takes_its_number() {
    let mut bench = Bench::new(usize::MAX, true, false);
    assert!(bench.journal.append(&note("first"), at(1)).is_err());
    bench.journal.medium = Box::new(Failing {
        bytes: bench.bytes.clone(),
        room: usize::MAX,
        sync_fails: false,
        cut_fails: false,
    });
    let no = bench.journal.append(&note("again"), at(2)).expect("kept");
    assert_eq!(no, 1);
    let log = bench.log();
    assert_eq!(log.problems, vec![]);
    assert_eq!(log.entries.len(), 1);
    assert_eq!(log.entries[0].record, note("again"));
}

#[test]
fn when_it_cannot_be_taken_back_nothing_more_is_written() {
    let mut bench = Bench::new(40, false, true);
    assert!(bench.journal.append(&note("first"), at(1)).is_err());
    let error = bench
        .journal
        .append(&note("second"), at(2))
        .expect_err("stuck");
    assert!(matches!(error, JournalError::Stuck { .. }), "{error}");
    // What half stands there is not taken for an entry.
    assert!(bench.log().entries.is_empty());
}

#[test]
fn a_log_another_program_wrote_to_is_not_written_to_again() {
    let mut bench = Bench::new(usize::MAX, false, false);
    bench.bytes.lock().expect("free").extend(b"# by hand\n");
    let error = bench
        .journal
        .append(&note("first"), at(1))
        .expect_err("changed");
    assert!(matches!(error, JournalError::Changed { .. }), "{error}");
}

#[test]
fn a_clock_set_back_is_entered_before_the_entry() {
    let mut bench = Bench::new(usize::MAX, false, false);
    bench.journal.append(&note("first"), at(90)).expect("kept");
    let no = bench.journal.append(&note("second"), at(30)).expect("kept");
    assert_eq!(no, 3);
    let log = bench.log();
    assert_eq!(log.problems, vec![]);
    let Record::Incident { what } = &log.entries[1].record else {
        panic!("{:?}", log.entries[1]);
    };
    assert!(what.starts_with("clock went back by 60 s"), "{what}");
    assert_eq!(log.entries[2].time, at(30), "times stay as the clock said");
    // One second is no incident: clocks are trimmed.
    bench.journal.append(&note("third"), at(29)).expect("kept");
    assert_eq!(bench.journal.last(), 4);
}

#[test]
fn an_entry_longer_than_any_may_be_is_refused() {
    let mut bench = Bench::new(usize::MAX, false, false);
    let error = bench
        .journal
        .append(&note(&"x".repeat(LONGEST)), at(1))
        .expect_err("too long");
    assert!(matches!(error, JournalError::TooLong { .. }), "{error}");
    assert_eq!(
        bench.journal.append(&note("short"), at(2)).expect("kept"),
        1
    );
}

#[test]
fn a_full_device_is_an_error_and_not_a_panic() {
    let Ok(full) = OpenOptions::new().write(true).open("/dev/full") else {
        eprintln!("SKIPPED: no /dev/full here");
        return;
    };
    let mut bench = Bench::new(usize::MAX, false, false);
    bench.journal.length = 0;
    bench.journal.medium = Box::new(full);
    let error = bench
        .journal
        .append(&note("first"), at(1))
        .expect_err("full");
    let JournalError::NotKept { source, .. } = &error else {
        panic!("{error}");
    };
    assert_eq!(source.kind(), io::ErrorKind::StorageFull);
}
