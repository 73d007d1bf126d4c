//! One broken file for every mistake the loader knows, each provoking its message.
//!
//! A file of `tests/errors` ends with the messages it must provoke, as comments: `#! line:column:
//! what | right`. All of them, in order, and no other.

use std::{fs, path::Path};

use handsfull::plan::{self, PlanError};

fn folder() -> std::path::PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/errors")
}

/// What loading a text says, in the form of the expectations.
fn said(text: &str) -> Vec<String> {
    match plan::parse(text, "x.toml") {
        Ok(_) => vec!["nothing is wrong".into()],
        Err(PlanError::Wrong { mistakes, .. }) => mistakes
            .iter()
            .map(|m| format!("#! {}:{}: {} | {}", m.line, m.column, m.what, m.right))
            .collect(),
        Err(other) => vec![other.to_string()],
    }
}

#[test]
fn every_broken_file_provokes_its_messages_and_no_other() {
    let mut files: Vec<_> = fs::read_dir(folder())
        .expect("tests/errors")
        .flatten()
        .map(|entry| entry.path())
        .filter(|path| path.extension().is_some_and(|e| e == "toml"))
        .collect();
    files.sort();
    assert!(files.len() > 50, "only {} broken files", files.len());
    let mut wrong = String::new();
    for path in files {
        let text = fs::read_to_string(&path).expect("a broken file");
        let expected: Vec<String> = text
            .lines()
            .filter(|line| line.starts_with("#! "))
            .map(str::to_string)
            .collect();
        let said = said(&text);
        if said != expected || said.is_empty() {
            let name = path.file_name().expect("a name").to_string_lossy();
            wrong.push_str(&format!("== {name}\n{}\n", said.join("\n")));
        }
    }
    assert!(wrong.is_empty(), "these said something else:\n{wrong}");
}

#[test]
fn a_file_that_cannot_be_read_says_why() {
    #[track_caller]
    fn check(path: &Path, part: &str) {
        match plan::load(path) {
            Err(wrong @ PlanError::Unreadable { .. }) => {
                assert!(wrong.to_string().contains(part), "{wrong}");
            }
            other => panic!("{other:?}"),
        }
    }
    let folder = tempfile::tempdir().expect("a folder");
    check(&folder.path().join("none.toml"), "there is no such file");
    check(folder.path(), "it is a folder");
    let bytes = folder.path().join("bytes.toml");
    fs::write(&bytes, [0x66, 0xff, 0xfe, 0x00]).expect("a file");
    check(&bytes, "it is not text in UTF-8");
}

#[test]
fn the_message_names_file_line_and_column() {
    let wrong = plan::parse("[job]\ntitel = \"x\"\n", "shed.toml").expect_err("it is wrong");
    let text = wrong.to_string();
    assert!(text.starts_with("shed.toml: "), "{text}");
    assert!(
        text.contains("shed.toml:2:1: [job] has an unknown key `titel`\n  did you mean `title`?"),
        "{text}"
    );
}
