//! A field session with a paced recording in place of the microphone: voice in, log out.
//!
//! It needs libvosk in `models/`; without it, it says so loudly and checks that the keypad still works.

use std::{
    fs,
    io::Write,
    path::Path,
    process::{Command, Stdio},
};

use handsfull::{rehearsal, voice::speaker::clips};

/// Keys up to the first bond, then two utterances.
const KEYS: &str = "\n\n\n\n1\n4711\n\n\n\n\n\n\n\n0.00\n\n\n\n\n\n0.02\n\n\n\nhear\nhear\n";

fn recording(path: &Path) {
    let spec = hound::WavSpec {
        channels: 1,
        sample_rate: clips::RATE,
        bits_per_sample: 16,
        sample_format: hound::SampleFormat::Int,
    };
    let mut wav = hound::WavWriter::create(path, spec).expect("a file");
    let mut put = |samples: &[i16]| {
        for sample in samples {
            wav.write_sample(*sample).expect("written");
        }
    };
    let silence = |seconds: usize| vec![0_i16; seconds * clips::RATE as usize];
    let clip = |name| clips::decode(rehearsal::clip(name).expect("a clip")).expect("decoded");
    // The read-back needs its time before it is answered.
    for part in [
        silence(3),
        clip("bond"),
        silence(4),
        clip("affirm"),
        silence(2),
    ] {
        put(&part);
    }
    wav.finalize().expect("whole");
}

#[test]
fn a_reading_is_spoken_read_back_affirmed_and_kept_with_its_clip() {
    let folder = tempfile::tempdir().expect("a folder");
    let job = folder.path().join("lane.toml");
    fs::write(&job, rehearsal::JOB).expect("a job");
    let wav = folder.path().join("day.wav");
    recording(&wav);
    let mut child = Command::new(env!("CARGO_BIN_EXE_handsfull"))
        .arg("field")
        .arg(&job)
        .arg("--text-only")
        .arg("--wav")
        .arg(&wav)
        .env(
            "XDG_CACHE_HOME",
            Path::new(env!("CARGO_TARGET_TMPDIR")).join("voice-cache"),
        )
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the program runs");
    let mut keys = child.stdin.take().expect("a pipe");
    keys.write_all(KEYS.as_bytes()).expect("keys");
    drop(keys);
    let out = child.wait_with_output().expect("an end");
    let complaint = String::from_utf8_lossy(&out.stderr).into_owned();
    let said = String::from_utf8_lossy(&out.stdout).into_owned();
    assert!(out.status.success(), "{complaint}");
    let log = fs::read_to_string(folder.path().join("lane.log.toml")).expect("a log");
    if complaint.contains("keypad only") {
        eprintln!("SKIPPED, no recogniser: run ./models-download.sh. It said: {complaint}");
        assert!(log.contains("value = \"0.00\""), "the keypad works\n{log}");
        return;
    }
    assert!(said.contains(">> \"affirm\""), "{said}");
    assert!(
        log.contains("heard = \"point oh two ohms\""),
        "{log}\n{said}"
    );
    assert!(log.contains("confirmed = \"voice\""), "{log}");
    let clips = fs::read_dir(folder.path().join("lane.clips")).expect("clips");
    assert_eq!(clips.count(), 2, "an utterance each");
}
