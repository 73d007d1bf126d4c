//! The field session through pipes: lines of keys in, a transcript out.

use assert_cmd::Command;

use super::tty::{job_folder, log};

/// Lines up to the first reading: four pages of isolation, the indicator on a proving unit without
/// a number, proved, dead, proved again, two pages about the instrument, two about nulling.
const TO_READING: &str = "\n\n\n\n1\n\n\n\n\n\n\n\n\n";

fn field(folder: &std::path::Path, lines: &str) -> assert_cmd::assert::Assert {
    Command::cargo_bin("handsfull")
        .expect("the program")
        .args(["field", "--keypad-only"])
        .arg(folder.join("shed.toml"))
        .env("HOME", folder)
        .env_remove("XDG_CONFIG_HOME")
        .write_stdin(lines.to_owned())
        .assert()
}

#[test]
fn lines_of_keys_make_a_transcript_and_a_log() {
    let folder = job_folder();
    let done = field(folder.path(), &format!("{TO_READING}0.02\n\n")).success();
    let text = String::from_utf8_lossy(&done.get_output().stdout).into_owned();
    for part in [
        "Lead resistance",
        "? 0.02 Ω, right?",
        "* Kept: 0.02 Ω",
        "Session ended.",
    ] {
        assert!(text.contains(part), "no `{part}`:\n{text}");
    }
    assert!(text.lines().all(|l| l.chars().count() <= 40), "{text}");
    assert!(!text.contains('\x1b'));
    assert!(log(folder.path()).contains("value = \"0.02\""));
}

#[test]
fn the_end_of_the_lines_keeps_nothing_that_was_not_affirmed() {
    let folder = job_folder();
    field(folder.path(), &format!("{TO_READING}0.02\n")).success();
    let text = log(folder.path());
    assert!(!text.contains("value = \"0.02\"") && text.contains("session-closed"));
}

#[test]
fn words_of_a_script_go_through_the_grammars() {
    let folder = job_folder();
    let lines = format!("{TO_READING}say: nought point oh two\nsay: affirm\n");
    let done = field(folder.path(), &lines).success();
    let text = String::from_utf8_lossy(&done.get_output().stdout).into_owned();
    assert!(text.contains("* Kept: 0.02 Ω"), "{text}");
    assert!(log(folder.path()).contains("heard = \"nought point oh two\""));
}

#[test]
fn what_is_missing_or_wrong_is_one_clear_line() {
    let folder = job_folder();
    Command::cargo_bin("handsfull")
        .expect("the program")
        .args(["field", "no-such-job.toml"])
        .assert()
        .code(3);
    std::fs::create_dir_all(folder.path().join(".config/handsfull")).expect("a folder");
    let settings = folder.path().join(".config/handsfull/settings.toml");
    std::fs::write(settings, "loudness = 3\n").expect("settings");
    let done = field(folder.path(), "").code(3);
    let text = String::from_utf8_lossy(&done.get_output().stderr).into_owned();
    assert!(text.contains("loudness"), "{text}");
}

/// A log that cannot grow any further stands in for a full disk: `/dev/full` cannot be a log, a
/// file size limit can.
#[cfg(target_os = "linux")]
#[test]
fn what_a_full_disk_kept_out_of_the_log_is_told_and_is_a_failure() {
    let folder = job_folder();
    field(folder.path(), TO_READING).success();
    let size = log(folder.path()).len();
    let program = assert_cmd::cargo::cargo_bin("handsfull");
    // In blocks of 512 bytes; room for the beginning of the session and no more.
    let script = format!(
        "trap '' XFSZ; ulimit -f {}; exec \"$0\" field --keypad-only \"$1\"",
        (size + 300).div_ceil(512)
    );
    let mut lines = String::new();
    for _ in 0..12 {
        lines.push_str("0.02\n\n-\n");
    }
    let done = Command::new("sh")
        .args(["-c", &script])
        .arg(&program)
        .arg(folder.path().join("shed.toml"))
        .env("HOME", folder.path())
        .env_remove("XDG_CONFIG_HOME")
        .write_stdin(lines)
        .assert()
        .code(5);
    let out = done.get_output();
    let told = String::from_utf8_lossy(&out.stderr).into_owned();
    assert!(told.contains("NOT KEPT:"), "{told}");
    assert!(told.contains("could not be written to the log"), "{told}");
    // What the log holds is whole.
    Command::cargo_bin("handsfull")
        .expect("the program")
        .arg("verify")
        .arg(folder.path().join("shed.toml"))
        .assert()
        .success();
}
