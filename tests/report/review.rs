//! `handsfull review` and `handsfull verify` on the joinery, 40 columns wide.

use std::fs;

use handsfull::{
    domain::record::Record,
    journal::{Journal, Log, Places},
};

use crate::{
    joinery::{Bench, handsfull},
    records::at,
};

#[track_caller]
fn said(bench: &Bench, args: &[&str]) -> String {
    let done = handsfull(bench.folder.path(), args);
    let text = String::from_utf8(done.stdout).expect("text");
    let errors = String::from_utf8(done.stderr).expect("text");
    assert!(done.status.success(), "{args:?}\n{text}\n{errors}");
    text
}

#[track_caller]
fn refused(bench: &Bench, args: &[&str], code: i32) -> String {
    let done = handsfull(bench.folder.path(), args);
    assert_eq!(done.status.code(), Some(code), "{args:?}");
    let out = String::from_utf8(done.stdout).expect("text");
    out + &String::from_utf8(done.stderr).expect("text")
}

#[test]
fn by_circuit_every_test_has_its_value_its_range_and_its_entry() {
    let bench = Bench::worked();
    insta::assert_snapshot!(said(&bench, &["review", "joinery.toml"]));
}

#[test]
fn by_time_every_entry_is_a_line() {
    let bench = Bench::worked();
    insta::assert_snapshot!(said(
        &bench,
        &["review", "joinery.log.toml", "--by", "time"]
    ));
}

#[test]
fn spoken_shows_what_was_heard_against_what_was_kept() {
    let bench = Bench::worked();
    insta::assert_snapshot!(said(
        &bench,
        &[
            "review",
            "joinery.toml",
            "--spoken",
            "--corrections",
            "--low-margin"
        ]
    ));
}

#[test]
fn filters_show_what_they_ask_for_and_never_hide_what_is_open() {
    let bench = Bench::worked();
    let text = said(&bench, &["review", "joinery.toml", "--keypad"]);
    assert!(text.contains("keypad"), "{text}");
    assert!(!text.contains("voice"), "{text}");
    let out = said(&bench, &["review", "joinery.toml", "--out-of-range"]);
    assert!(out.contains("beyond the limit"), "{out}");
    for text in [text, out] {
        assert!(text.contains("Open ("), "{text}");
        assert!(text.contains("Temporary works IN (1)"), "{text}");
    }
}

#[test]
fn nothing_is_wider_than_the_screen() {
    let bench = Bench::worked();
    for args in [
        &["review", "joinery.toml"][..],
        &["review", "joinery.toml", "--by", "time"],
        &["review", "joinery.toml", "--spoken"],
    ] {
        let text = said(&bench, args);
        for line in text.lines() {
            assert!(line.chars().count() <= 40, "{line}");
        }
    }
}

#[test]
fn a_log_is_reviewed_without_its_job_file_too() {
    let bench = Bench::worked();
    fs::remove_file(bench.path()).expect("there");
    let text = said(&bench, &["review", "joinery.log.toml"]);
    assert!(text.contains("No job file beside the log"), "{text}");
    assert!(text.contains("0.42 Ω"), "{text}");
}

#[test]
fn an_amendment_is_a_new_entry_with_reason_and_name() {
    let bench = Bench::worked();
    let no = entry_of(&bench, "0.23");
    let before = fs::read_to_string(bench.log()).expect("text");
    let text = said(
        &bench,
        &[
            "review",
            "joinery.toml",
            "--amend",
            &no.to_string(),
            "--value",
            "230 mΩ",
            "--reason",
            "display was in milliohms",
            "--name",
            "B. Mate",
        ],
    );
    assert!(text.contains("amended to 230"), "{text}");
    let after = fs::read_to_string(bench.log()).expect("text");
    assert!(after.starts_with(&before), "nothing before it is touched");
    let last = Log::open(&bench.log()).expect("a log").entries.pop();
    let Some(Record::Amended {
        corrects,
        value,
        unit,
        reason,
        by,
    }) = last.map(|e| e.record)
    else {
        panic!("no amendment");
    };
    assert_eq!(corrects, no);
    assert_eq!((value.as_str(), unit.as_deref()), ("230", Some("milliohm")));
    assert_eq!(reason, "display was in milliohms");
    assert_eq!(by, "B. Mate");
    // It stands for the value now; the old entry does not count and cannot be amended again.
    let again = [
        "review",
        "joinery.toml",
        "--amend",
        &no.to_string(),
        "--value",
        "1",
    ];
    let text = refused(&bench, &again, 2);
    assert!(text.contains("does not count any more"), "{text}");
}

fn entry_of(bench: &Bench, value: &str) -> u64 {
    let log = Log::open(&bench.log()).expect("a log");
    let found = log
        .entries
        .iter()
        .find(|e| matches!(&e.record, Record::Reading(r) if r.value == value));
    found.expect("kept").no
}

#[test]
fn an_amendment_that_cannot_be_is_refused_and_keeps_nothing() {
    let bench = Bench::worked();
    let no = entry_of(&bench, "0.23").to_string();
    let tick = entry_of(&bench, "yes").to_string();
    let before = fs::read(bench.log()).expect("bytes");
    let amend = |no: &str, rest: &[&str]| {
        let mut args = vec!["review", "joinery.toml", "--amend", no];
        args.extend(rest);
        refused(&bench, &args, 2)
    };
    let why = ["--reason", "x", "--name", "y"];
    for (no, value, says) in [
        (no.as_str(), "about half", "is not a reading"),
        (&no, "5 ms", "is read in Ω"),
        (&tick, "0.5", "yes or no"),
        ("1", "0.5", "holds no value"),
        ("999", "0.5", "no entry 999"),
    ] {
        let text = amend(no, &[&["--value", value][..], &why].concat());
        assert!(text.contains(says), "{value}: {text}");
    }
    let text = amend(&no, &["--value", "0.5"]);
    assert!(text.contains("--reason is missing"), "{text}");
    let text = amend(&no, &["--value", "0.5", "--reason", " ", "--name", "y"]);
    assert!(text.contains("--reason is empty"), "{text}");
    assert_eq!(fs::read(bench.log()).expect("bytes"), before);
}

#[test]
fn a_note_goes_in_and_shows() {
    let bench = Bench::worked();
    let no = entry_of(&bench, "0.23").to_string();
    let args = [
        "review",
        "joinery.toml",
        "--note",
        "plate renewed",
        "--about",
        &no,
        "--name",
        "B. Mate",
    ];
    said(&bench, &args);
    let text = said(&bench, &["review", "joinery.toml"]);
    assert!(text.contains("plate renewed (B. Mate)"), "{text}");
}

#[test]
fn while_a_session_holds_the_job_it_can_be_reviewed_but_not_amended() {
    let bench = Bench::worked();
    let (journal, _) = Journal::open(&bench.path(), &bench.job.reference, at(9999)).expect("opens");
    said(&bench, &["review", "joinery.toml"]);
    let text = said(&bench, &["verify", "joinery.toml"]);
    assert!(text.contains("a session holds it now"), "{text}");
    let args = ["review", "joinery.toml", "--note", "x", "--name", "y"];
    let text = refused(&bench, &args, 6);
    assert!(text.contains("another session holds this job"), "{text}");
    drop(journal);
}

#[test]
fn a_log_that_holds_is_said_to_hold() {
    let bench = Bench::worked();
    let text = said(&bench, &["verify", "joinery.toml"]);
    assert!(
        text.contains("journal 0123456789ab of job JOINERY-1"),
        "{text}"
    );
    assert!(text.ends_with("All of it holds.\n"), "{text}");
    let check = Log::open(&bench.log())
        .expect("a log")
        .check(5)
        .expect("there");
    let text = said(&bench, &["verify", "joinery.toml", "--holds", &check[..12]]);
    assert!(text.contains("entry 5, and all before it"), "{text}");
}

#[test]
fn what_does_not_hold_is_named_with_its_line_and_the_exit_code_is_1() {
    let bench = Bench::worked();
    let text = fs::read_to_string(bench.log()).expect("text");
    // The entry begins with its header, a line before its number.
    let line = text.lines().position(|l| l == "no = 7").expect("entry 7");
    fs::write(bench.log(), text.replacen("0.42", "0.45", 1)).expect("written");
    let said = refused(&bench, &["verify", "joinery.toml"], 1);
    assert!(
        said.contains(&format!("line {line}, entry 7: does not match its check")),
        "{said}"
    );
    assert!(said.contains("1 thing does not hold"), "{said}");
    let review = handsfull(bench.folder.path(), &["review", "joinery.toml"]);
    let review = String::from_utf8(review.stdout).expect("text");
    assert!(review.contains("does NOT hold"), "{review}");
    let no = ["verify", "joinery.toml", "--holds", "00000000000000"];
    assert!(refused(&bench, &no, 1).contains("no entry has the check"));
    let no = ["verify", "joinery.toml", "--holds", "xyz"];
    assert!(refused(&bench, &no, 2).contains("is not a check"));
}

#[test]
fn a_clip_that_was_changed_is_found_and_one_that_is_gone_is_only_said() {
    let mut bench = Bench::new();
    let places = Places::of(&bench.path());
    let clips = handsfull::journal::clips::Clips::new(places.clips(), Default::default());
    let saved = clips.save(&[3; 4000]).expect("saved").expect("kept");
    let target = crate::joinery::target(handsfull::domain::test::TestKind::Leads, None, None, None);
    let mut kept = bench.reading(target, "0.00");
    kept.clip = Some(saved.file.clone());
    kept.clip_digest = Some(saved.digest);
    let no = bench.put(Record::Reading(Box::new(kept)));
    bench.close();
    assert!(said(&bench, &["verify", "joinery.toml"]).contains("1 clip there and unchanged"));
    let wav = bench.folder.path().join("out.wav");
    let (no, out) = (no.to_string(), wav.display().to_string());
    said(
        &bench,
        &["review", "joinery.toml", "--play", &no, "--to", &out],
    );
    let samples = hound::WavReader::open(&wav)
        .expect("a WAV")
        .into_samples::<i16>();
    assert!(samples.map(|s| s.expect("a sample")).eq([3; 4000]));

    let path = places.clips().join(&saved.file);
    fs::write(&path, b"other").expect("written");
    let text = refused(&bench, &["verify", "joinery.toml"], 1);
    assert!(text.contains("is not the one that was recorded"), "{text}");
    fs::remove_file(&path).expect("there");
    let text = said(&bench, &["verify", "joinery.toml"]);
    assert!(text.contains("1 no longer there"), "{text}");

    // What was refused is kept beside the log too, and is looked at by its name.
    let refused_one = clips.save(&[5; 4000]).expect("saved").expect("kept");
    let text = said(&bench, &["verify", "joinery.toml"]);
    assert!(
        text.contains("1 clip more of commands and refused hearings"),
        "{text}"
    );
    fs::write(places.clips().join(&refused_one.file), b"other").expect("written");
    let text = refused(&bench, &["verify", "joinery.toml"], 1);
    assert!(text.contains("which no entry names"), "{text}");
}

#[test]
fn what_is_no_log_is_said_plainly() {
    let bench = Bench::new();
    fs::write(bench.folder.path().join("other.log.toml"), "a = 1\n").expect("written");
    for (args, says) in [
        (&["verify", "none.toml"][..], "there is no log"),
        (&["review", "none.toml"], "there is no log"),
        (&["verify", "other.toml"], "is not a handsfull log"),
    ] {
        let text = refused(&bench, args, 3);
        assert!(text.contains(says), "{text}");
    }
}
