//! `handsfull join`: two handhelds, one job.

use std::{fs, path::Path};

use handsfull::{
    domain::{record::Record, test::TestKind},
    journal::{Journal, Log, replay},
};

use crate::{
    joinery::{FIXTURE, handsfull, target},
    records::{BY, at, kept},
};

/// A handheld: its own folder with the same job file.
struct Handheld {
    folder: tempfile::TempDir,
}

impl Handheld {
    fn new(journal: &str, values: &[(u16, &str)]) -> Self {
        let handheld = Self {
            folder: tempfile::tempdir().expect("a folder"),
        };
        fs::write(handheld.folder.path().join("joinery.toml"), FIXTURE).expect("written");
        handheld.work(journal, values);
        handheld
    }

    fn work(&self, journal: &str, values: &[(u16, &str)]) {
        let path = self.folder.path().join("joinery.toml");
        let (mut journal, _) =
            Journal::open_as(&path, "JOINERY-1", at(1), Some(journal)).expect("opens");
        for (point, value) in values {
            let target = target(TestKind::R1R2, Some(2), Some(*point), None);
            let record = Record::Reading(Box::new(kept(target, value)));
            journal.append(&record, at(2)).expect("kept");
        }
    }

    fn log(&self) -> String {
        let path = self.folder.path().join("joinery.log.toml");
        path.display().to_string()
    }
}

fn run(at: &Path, args: &[&str]) -> (Option<i32>, String) {
    let done = handsfull(at, args);
    let text = [done.stdout, done.stderr].concat();
    (done.status.code(), String::from_utf8(text).expect("text"))
}

fn counts(folder: &Path, log: &str, point: u16) -> Option<String> {
    let log = Log::open(&folder.join(log)).expect("a log");
    assert_eq!(log.problems, vec![]);
    let standing = replay::standing(&log);
    standing
        .kept
        .reading(&target(TestKind::R1R2, Some(2), Some(point), None))
        .map(ToString::to_string)
}

const JOINED: &str = "joinery.joined.log.toml";

#[test]
fn two_logs_become_one_that_holds_and_a_person_decides_where_they_differ() {
    let one = Handheld::new("aaaaaaaaaaaa", &[(1, "0.23"), (2, "0.40")]);
    let two = Handheld::new("bbbbbbbbbbbb", &[(2, "0.44"), (3, "0.58")]);
    let here = one.folder.path();
    let (code, said) = run(here, &["join", "joinery.toml", &two.log()]);
    assert_eq!(code, Some(1), "{said}");
    assert!(said.contains("A journal aaaaaaaaaaaa: 2 entries"), "{said}");
    assert!(said.contains("#2  0.40 Ω"), "{said}");
    assert!(said.contains("#3  0.44 Ω"), "{said}");
    assert!(
        said.contains("1 test is open until a person decides"),
        "{said}"
    );

    // Each chain is there byte for byte.
    let joined = fs::read_to_string(here.join(JOINED)).expect("there");
    for log in [one.log(), two.log()] {
        assert!(joined.contains(&fs::read_to_string(log).expect("text")));
    }
    let (code, said) = run(here, &["verify", JOINED]);
    assert_eq!(code, Some(0), "{said}");
    assert_eq!(counts(here, JOINED, 1).as_deref(), Some("0.23 Ω"));
    assert_eq!(counts(here, JOINED, 2), None);
    assert_eq!(counts(here, JOINED, 3).as_deref(), Some("0.58 Ω"));
    let (_, review) = run(here, &["review", JOINED]);
    assert!(review.contains("not decided"), "{review}");
    assert!(review.contains("#3B"), "{review}");

    let take = |no: &str| {
        run(
            here,
            &[
                "join",
                JOINED,
                "--take",
                no,
                "--reason",
                "leads not nulled",
                "--name",
                BY,
            ],
        )
    };
    let (code, said) = take("1");
    assert_eq!(code, Some(2), "{said}");
    assert!(said.contains("not one to decide about"), "{said}");
    let (code, said) = take("3");
    assert_eq!(code, Some(0), "{said}");
    assert_eq!(counts(here, JOINED, 2).as_deref(), Some("0.44 Ω"));
    let (code, said) = run(here, &["verify", JOINED]);
    assert_eq!(code, Some(0), "{said}");
}

#[test]
fn an_amendment_after_the_join_names_the_entry_of_the_other_handheld() {
    let one = Handheld::new("aaaaaaaaaaaa", &[(1, "0.23")]);
    let two = Handheld::new("bbbbbbbbbbbb", &[(3, "0.58")]);
    let here = one.folder.path();
    run(here, &["join", "joinery.toml", &two.log()]);
    let args = [
        "review", JOINED, "--amend", "2", "--value", "0.60", "--reason", "r", "--name", BY,
    ];
    let (code, said) = run(here, &args);
    assert_eq!(code, Some(0), "{said}");
    assert_eq!(counts(here, JOINED, 3).as_deref(), Some("0.60 Ω"));

    // A third handheld comes in: the amendment still means the same entry, wherever it now stands.
    let three = Handheld::new("cccccccccccc", &[(2, "0.41"), (2, "0.42")]);
    let joined = here.join(JOINED).display().to_string();
    let there = three.folder.path();
    let (code, said) = run(there, &["join", "joinery.toml", &joined]);
    assert_eq!(code, Some(0), "{said}");
    assert_eq!(counts(there, JOINED, 1).as_deref(), Some("0.23 Ω"));
    assert_eq!(counts(there, JOINED, 2).as_deref(), Some("0.42 Ω"));
    assert_eq!(counts(there, JOINED, 3).as_deref(), Some("0.60 Ω"));
}

#[test]
fn a_decision_does_not_reach_a_handheld_that_came_later() {
    let one = Handheld::new("aaaaaaaaaaaa", &[(1, "0.23")]);
    let two = Handheld::new("bbbbbbbbbbbb", &[(1, "0.25")]);
    let here = one.folder.path();
    run(here, &["join", "joinery.toml", &two.log()]);
    run(
        here,
        &["join", JOINED, "--take", "1", "--reason", "r", "--name", BY],
    );
    assert_eq!(counts(here, JOINED, 1).as_deref(), Some("0.23 Ω"));
    let three = Handheld::new("cccccccccccc", &[(1, "0.29")]);
    let joined = here.join(JOINED).display().to_string();
    let (code, said) = run(three.folder.path(), &["join", "joinery.toml", &joined]);
    assert_eq!(code, Some(1), "{said}");
    assert!(said.contains("0.23 Ω") && said.contains("0.29 Ω"), "{said}");
}

#[test]
fn the_same_journal_twice_adds_nothing_and_a_longer_copy_takes_its_place() {
    let one = Handheld::new("aaaaaaaaaaaa", &[(1, "0.23")]);
    let here = one.folder.path();
    let copy = tempfile::tempdir().expect("a folder");
    let copied = copy.path().join("joinery.log.toml");
    fs::copy(one.log(), &copied).expect("copied");
    let copied = copied.display().to_string();
    let (code, said) = run(here, &["join", "joinery.toml", &copied]);
    assert_eq!(code, Some(3), "{said}");
    assert!(said.contains("nothing to join"), "{said}");
    // The handheld went on; the copy is older. With a second one there is something to join.
    one.work("aaaaaaaaaaaa", &[(3, "0.58")]);
    let two = Handheld::new("bbbbbbbbbbbb", &[(2, "0.41")]);
    let (code, said) = run(
        here,
        &["join", &copied, &two.log(), &one.log(), "--into", JOINED],
    );
    assert_eq!(code, Some(0), "{said}");
    assert!(said.contains("goes on to its entry 2 here"), "{said}");
    assert_eq!(counts(here, JOINED, 3).as_deref(), Some("0.58 Ω"));
}

#[test]
fn a_copy_that_went_on_in_both_places_is_kept_twice_and_differences_wait() {
    let one = Handheld::new("aaaaaaaaaaaa", &[(1, "0.23")]);
    let other = tempfile::tempdir().expect("a folder");
    fs::copy(one.log(), other.path().join("joinery.log.toml")).expect("copied");
    let other = Handheld { folder: other };
    one.work("aaaaaaaaaaaa", &[(2, "0.40")]);
    other.work("aaaaaaaaaaaa", &[(2, "0.44")]);
    let here = one.folder.path();
    let (code, said) = run(here, &["join", "joinery.toml", &other.log()]);
    assert_eq!(code, Some(1), "{said}");
    assert!(
        said.contains("went on in both places; the first 1"),
        "{said}"
    );
    assert_eq!(counts(here, JOINED, 1).as_deref(), Some("0.23 Ω"));
    assert_eq!(counts(here, JOINED, 2), None);
}

#[test]
fn logs_of_other_jobs_and_a_joined_log_in_the_way_are_refused() {
    let one = Handheld::new("aaaaaaaaaaaa", &[(1, "0.23")]);
    let two = Handheld::new("bbbbbbbbbbbb", &[(3, "0.58")]);
    let here = one.folder.path();
    let quay = two.folder.path().join("quay.toml");
    drop(Journal::open(&quay, "QUAY-9", at(1)).expect("opens"));
    let (code, said) = run(here, &["join", "joinery.toml", &quay.display().to_string()]);
    assert_eq!(code, Some(3), "{said}");
    assert!(said.contains("QUAY-9"), "{said}");
    assert_eq!(run(here, &["join", "joinery.toml", &two.log()]).0, Some(0));
    let (code, said) = run(here, &["join", "joinery.toml", &two.log()]);
    assert_eq!(code, Some(2), "{said}");
    assert!(said.contains("is there already"), "{said}");
}
