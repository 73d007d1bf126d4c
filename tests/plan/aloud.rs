//! `handsfull plan check --say`: guessed names of places, read aloud by espeak-ng.

use std::{fs, path::PathBuf, process::Command as Program};

use assert_cmd::Command;

fn handsfull() -> Command {
    Command::cargo_bin("handsfull").expect("the program is built")
}

/// A fixture with a name no dictionary holds.
fn job(folder: &tempfile::TempDir) -> PathBuf {
    let text = include_str!("../fixtures/workshop.toml");
    assert!(text.contains("name = \"machine room\""));
    let path = folder.path().join("job.toml");
    let text = text.replace("name = \"machine room\"", "name = \"quern loft\"");
    fs::write(&path, text).expect("written");
    path
}

#[test]
fn without_the_program_the_sounds_stand_and_one_line_names_the_package() {
    let folder = tempfile::tempdir().expect("a folder");
    let done = handsfull()
        .args(["plan", "check", "--say"])
        .arg(job(&folder))
        .env("PATH", folder.path())
        .output()
        .expect("it runs");
    let out = String::from_utf8_lossy(&done.stdout).replace('\n', " ");
    let err = String::from_utf8_lossy(&done.stderr);
    assert_eq!(done.status.code(), Some(4), "{err}");
    assert!(out.contains("K W ER N"), "{out}");
    assert!(err.contains("Debian package espeak-ng"), "{err}");
    assert_eq!(err.trim_end().lines().count(), 1, "{err}");
}

#[test]
fn with_the_program_a_wav_with_sound_in_it_is_written_and_never_written_over() {
    if let Err(why) = Program::new("espeak-ng").arg("--version").output() {
        eprintln!("SKIPPED: espeak-ng did not run ({why}); Debian package espeak-ng");
        return;
    }
    let folder = tempfile::tempdir().expect("a folder");
    let wav = folder.path().join("said.wav");
    let mut run = handsfull();
    run.args(["plan", "check", "--say"])
        .arg(job(&folder))
        .arg("--to")
        .arg(&wav);
    let done = run.output().expect("it runs");
    let out = String::from_utf8_lossy(&done.stdout).replace('\n', " ");
    assert_eq!(done.status.code(), Some(0), "{done:?}");
    assert!(out.contains("\"quern loft\"."), "{out}");
    let mut sound = hound::WavReader::open(&wav).expect("a WAV");
    let loudest = sound
        .samples::<i16>()
        .map(|s| s.expect("a sample").unsigned_abs())
        .max();
    assert!(loudest > Some(3_000), "{loudest:?}");
    assert_eq!(run.output().expect("it runs").status.code(), Some(3));
}
