//! The demonstration, run as a user runs it: real recogniser, real session, real log.
//!
//! It needs libvosk in `models/` (fetched by `models-download.sh`); without it, it says so loudly and
//! checks that the program says so in one line, too.

use std::{
    path::{Path, PathBuf},
    process::{Command, Output},
};

fn handsfull(arguments: &[&str], cache: &Path) -> Output {
    Command::new(env!("CARGO_BIN_EXE_handsfull"))
        .args(arguments)
        .env("XDG_CACHE_HOME", cache)
        .output()
        .expect("the program runs")
}

fn text(bytes: &[u8]) -> String {
    String::from_utf8_lossy(bytes).into_owned()
}

#[test]
fn the_rehearsal_ends_with_a_true_log_and_its_review() {
    let folder = tempfile::tempdir().expect("a folder");
    let cache = PathBuf::from(env!("CARGO_TARGET_TMPDIR")).join("voice-cache");
    let job = folder.path().join("quince-lane.toml");
    let to = folder.path().to_str().expect("a name");
    let out = handsfull(&["rehearse", "--to", to], &cache);
    let (said, complaint) = (text(&out.stdout), text(&out.stderr));
    if out.status.code() == Some(4) {
        eprintln!("SKIPPED, no recogniser: run ./models-download.sh. It said: {complaint}");
        assert!(complaint.contains("keypad only"), "{complaint}");
        return;
    }
    assert!(out.status.success(), "{said}\n{complaint}");
    for line in said.lines() {
        assert!(line.chars().count() <= 40 || line.contains('/'), "{line:?}");
    }
    // What the demonstration must show: a questioned value measured again, a misheard one
    // refused, a correction, the link still in, keys in between.
    for shown in [
        "ABOVE the range",
        "Measure again",
        "not kept",
        "TAKE OUT",
        ">> keys:",
        "\"circuit one\"",
        "STILL IN",
        "corrects: #",
    ] {
        assert!(said.contains(shown), "{shown} is missing in\n{said}");
    }
    let log = std::fs::read_to_string(folder.path().join("quince-lane.log.toml")).expect("a log");
    // Only values that the scripted display showed may stand in the log.
    let shown = [
        "0.00", "0.02", "0.25", "0.26", "0.78", "0.46", "0.53", ">999",
    ];
    let mut kept = 0;
    for line in log.lines().filter_map(|l| l.strip_prefix("value = ")) {
        assert!(shown.contains(&line.trim_matches('"')), "{line}");
        kept += 1;
    }
    assert_eq!(kept, 8, "eight values affirmed\n{log}");
    let verified = handsfull(&["verify", job.to_str().expect("a name")], &cache);
    assert!(verified.status.success(), "{}", text(&verified.stdout));
}
