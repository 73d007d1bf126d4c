//! What is kept comes back, and one session at a time keeps it.

use std::{fs, os::unix::fs::PermissionsExt};

use handsfull::{
    domain::record::Record,
    journal::{Journal, JournalError, Log, replay},
};

use crate::records::{Chance, at, note, reading, varied};

#[test]
fn what_was_kept_is_read_back_and_adds_up_to_the_same_standing() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("mill.toml");
    let mut kept = vec![];
    let mut standing = handsfull::domain::standing::Standing::new();
    let mut chance = Chance(7);
    for session in 0..3 {
        let (mut journal, recovery) = Journal::open(&path, "mill", at(session)).expect("opens");
        assert_eq!(recovery.begun, session == 0);
        assert_eq!(recovery.problems, vec![]);
        assert_eq!(recovery.standing, standing);
        for _ in 0..100 {
            let record = varied(journal.last() + 1, &mut chance);
            let no = journal
                .append(&record, at(100 * session + 3))
                .expect("kept");
            standing.apply(no, &record);
            kept.push(record);
            assert_eq!(no, kept.len() as u64);
        }
    }
    let log = Log::open(&folder.path().join("mill.log.toml")).expect("a log");
    assert_eq!(log.problems, vec![]);
    let read: Vec<Record> = log.entries.iter().map(|e| e.record.clone()).collect();
    assert_eq!(read, kept);
    assert_eq!(replay::standing(&log), standing);
}

#[test]
fn any_toml_reader_reads_the_log() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("mill.toml");
    let (mut journal, _) = Journal::open(&path, "mill", at(0)).expect("opens");
    let mut chance = Chance(3);
    for _ in 0..50 {
        let record = varied(journal.last() + 1, &mut chance);
        journal.append(&record, at(1)).expect("kept");
    }
    let text = fs::read_to_string(folder.path().join("mill.log.toml")).expect("text");
    let table: toml::Table = toml::from_str(&text).expect("TOML");
    assert_eq!(table["entry"].as_array().map(Vec::len), Some(50));
    assert_eq!(table["journal"][0]["job"].as_str(), Some("mill"));
}

#[test]
fn only_the_owner_reads_the_log_and_the_lock() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("mill.toml");
    let (mut journal, _) = Journal::open(&path, "mill", at(0)).expect("opens");
    journal.append(&note("x"), at(1)).expect("kept");
    for name in ["mill.log.toml", "mill.lock"] {
        let mode = fs::metadata(folder.path().join(name)).expect("there");
        assert_eq!(mode.permissions().mode() & 0o777, 0o600, "{name}");
    }
    let names: Vec<_> = fs::read_dir(folder.path()).expect("a folder").collect();
    assert_eq!(names.len(), 2, "nothing else is left lying about");
}

#[test]
fn a_second_session_is_refused_and_the_first_goes_on() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("mill.toml");
    let (mut first, _) = Journal::open(&path, "mill", at(0)).expect("opens");
    let second = Journal::open(&path, "mill", at(1));
    assert!(matches!(second, Err(JournalError::Busy { .. })));
    assert_eq!(first.append(&note("still here"), at(2)).expect("kept"), 1);
    drop(first);
    let (third, recovery) = Journal::open(&path, "mill", at(3)).expect("free again");
    assert_eq!((third.last(), recovery.problems), (1, vec![]));
}

#[test]
fn a_log_of_another_job_or_no_log_at_all_is_left_alone() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("mill.toml");
    drop(Journal::open(&path, "mill", at(0)).expect("opens"));
    let error = Journal::open(&path, "quay", at(1)).expect_err("another job");
    assert!(error.to_string().contains("`mill`"), "{error}");

    let other = folder.path().join("shed.log.toml");
    fs::write(&other, "title = \"shopping\"\n").expect("written");
    let error = Journal::open(&other, "shed", at(1)).expect_err("no log");
    assert!(matches!(error, JournalError::NotALog { .. }), "{error}");
    assert_eq!(
        fs::read_to_string(&other).expect("still there"),
        "title = \"shopping\"\n"
    );
}

#[test]
fn a_log_of_a_newer_format_is_not_written_to() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("mill.toml");
    drop(Journal::open(&path, "mill", at(0)).expect("opens"));
    let log = folder.path().join("mill.log.toml");
    let text = fs::read_to_string(&log).expect("text");
    fs::write(&log, text.replace("format = 1", "format = 2")).expect("written");
    let error = Journal::open(&path, "mill", at(1)).expect_err("newer");
    assert!(error.to_string().contains("format 2"), "{error}");
}

#[test]
fn a_folder_moved_to_another_machine_goes_on() {
    let folder = tempfile::tempdir().expect("a folder");
    let here = folder.path().join("here");
    let there = folder.path().join("there");
    fs::create_dir(&here).expect("made");
    let (mut journal, _) = Journal::open(&here.join("mill.toml"), "mill", at(0)).expect("opens");
    journal.append(&reading(7, 1, "0.50"), at(1)).expect("kept");
    drop(journal);
    fs::rename(&here, &there).expect("moved");
    let (mut journal, recovery) =
        Journal::open(&there.join("mill.toml"), "mill", at(2)).expect("opens");
    assert_eq!((recovery.problems, recovery.begun), (vec![], false));
    assert_eq!(journal.append(&note("moved"), at(3)).expect("kept"), 2);
}

#[test]
fn a_read_only_folder_is_an_error_that_says_so() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("mill.toml");
    drop(Journal::open(&path, "mill", at(0)).expect("opens"));
    let set = |mode| fs::set_permissions(folder.path(), fs::Permissions::from_mode(mode));
    set(0o500).expect("set");
    fs::remove_file(folder.path().join("mill.lock")).ok();
    let opened = Journal::open(&path, "mill", at(1));
    set(0o700).expect("set");
    match opened {
        Err(error) => assert!(error.to_string().contains("lock"), "{error}"),
        // The superuser may write anywhere: nothing to see here then.
        Ok(_) => eprintln!("SKIPPED: this user may write to read-only folders"),
    }
}
