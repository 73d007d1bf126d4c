//! The format as documented, read by a program that shares nothing with ours.

use std::{fs, process::Command};

use handsfull::journal::Journal;

use crate::records::{Chance, at, varied};

const DOCUMENT: &str = include_str!("../../src/journal/FORMAT.md");

/// The reader that stands in the document, word for word.
fn reader() -> &'static str {
    let (_, rest) = DOCUMENT.split_once("```python\n").expect("a reader");
    rest.split_once("```").expect("its end").0
}

#[test]
fn the_documented_reader_finds_every_check_and_every_change() {
    let python = std::env::var_os("HANDSFULL_PYTHON").unwrap_or_else(|| "python3".into());
    let has = Command::new(&python)
        .args(["-c", "import blake3"])
        .output()
        .is_ok_and(|done| done.status.success());
    if !has {
        eprintln!("SKIPPED: no blake3 in {python:?} (set HANDSFULL_PYTHON to one that has it)");
        return;
    }
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("mill.toml");
    let (mut journal, _) = Journal::open(&path, "mill", at(0)).expect("opens");
    let mut chance = Chance(9);
    for _ in 0..40 {
        let record = varied(journal.last() + 1, &mut chance);
        journal.append(&record, at(1)).expect("kept");
    }
    let log = folder.path().join("mill.log.toml");
    let run = || {
        let done = Command::new(&python)
            .args(["-c", reader()])
            .arg(&log)
            .output()
            .expect("it runs");
        let errors = String::from_utf8_lossy(&done.stderr).into_owned();
        assert!(done.status.success(), "{errors}");
        String::from_utf8(done.stdout).expect("text")
    };
    let said = run();
    assert_eq!(said.lines().count(), 41, "{said}");
    assert!(!said.contains("DOES NOT HOLD"), "{said}");
    let text = fs::read_to_string(&log).expect("text");
    fs::write(&log, text.replace("\r", "").replace('\n', "\r\n")).expect("written");
    assert!(!run().contains("DOES NOT HOLD"), "line ends are no change");
    fs::write(&log, text.replacen("R. Lark", "R. Dark", 1)).expect("written");
    assert_eq!(run().matches("DOES NOT HOLD").count(), 1);
}
