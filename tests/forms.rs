//! Every form in which a reading, a place, a reply or a command may be said, as sound.
//!
//! `forms/manifest.tsv` names each recording, the context it belongs to and the words. Two natural
//! voices say them that no voice here was ever trained on: a British man and an American woman of
//! Kokoro-82M (Apache-2.0), made by `src/voice/lab/utterances.py`. What the sound means must be
//! what the words mean; the words' meanings have their own tables in `phrases.rs`. Skipped, loudly,
//! without libvosk.

use std::{
    collections::BTreeMap,
    fs,
    path::{Path, PathBuf},
    process::Command,
};

use hound::{SampleFormat, WavSpec, WavWriter};
use serde_json::Value;

/// Least share understood of each voice, in percent; the test prints what it is.
const FLOOR: usize = 80;

struct Form {
    voice: String,
    file: String,
    context: String,
    words: String,
}

fn forms(folder: &Path) -> Vec<Form> {
    let manifest = fs::read_to_string(folder.join("manifest.tsv")).expect("the manifest");
    let form = |line: &str| {
        let columns: Vec<&str> = line.split('\t').collect();
        let [file, context, words] = columns[..] else {
            panic!("three columns in `{line}`");
        };
        Form {
            voice: file.split('/').next().unwrap_or_default().to_owned(),
            file: file.to_owned(),
            context: context.to_owned(),
            words: words.to_owned(),
        }
    };
    manifest.lines().skip(1).map(form).collect()
}

/// A FLAC as a WAV, which is what `hear` takes.
fn as_wav(flac: &Path, wav: &Path) {
    let mut reader = claxon::FlacReader::open(flac).expect("a FLAC");
    let spec = WavSpec {
        channels: 1,
        sample_rate: reader.streaminfo().sample_rate,
        bits_per_sample: 16,
        sample_format: SampleFormat::Int,
    };
    let mut writer = WavWriter::create(wav, spec).expect("created");
    for sample in reader.samples() {
        let sample = sample.expect("a sample");
        writer
            .write_sample(i16::try_from(sample).expect("sixteen bits"))
            .expect("written");
    }
    writer.finalize().expect("finished");
}

/// The JSON lines of `hear`, without what differs between sound and words that mean the same;
/// nothing when there is no recogniser.
fn hear(context: &str, args: &[String]) -> Option<Vec<Value>> {
    let output = Command::new(env!("CARGO_BIN_EXE_handsfull"))
        .env(
            "XDG_CACHE_HOME",
            Path::new(env!("CARGO_TARGET_TMPDIR")).join("cache"),
        )
        .args(["hear", "--context", context])
        .args(args)
        .output()
        .expect("the program runs");
    if output.status.code() == Some(4) {
        eprintln!(
            "SKIPPED: every form as sound: {}",
            String::from_utf8_lossy(&output.stderr).trim()
        );
        return None;
    }
    let text = String::from_utf8(output.stdout).expect("text");
    let lines = text.lines().map(|line| {
        let mut line: Value = serde_json::from_str(line).expect("a JSON line");
        if let Some(keys) = line.as_object_mut() {
            keys.remove("file");
            keys.remove("heard");
        }
        line
    });
    Some(lines.collect())
}

#[test]
fn every_form_is_understood_from_two_voices() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/forms");
    let work = tempfile::tempdir().expect("a folder");
    let mut by_context: BTreeMap<String, Vec<Form>> = BTreeMap::new();
    for form in forms(&folder) {
        by_context
            .entry(form.context.clone())
            .or_default()
            .push(form);
    }
    let mut shares: BTreeMap<String, (usize, usize)> = BTreeMap::new();
    for (context, forms) in &by_context {
        let files: Vec<PathBuf> = (0..forms.len())
            .map(|n| work.path().join(format!("{context}-{n}.wav")))
            .collect();
        for (form, wav) in forms.iter().zip(&files) {
            as_wav(&folder.join(&form.file), wav);
        }
        let paths: Vec<String> = files.iter().map(|f| f.display().to_string()).collect();
        let Some(heard) = hear(context, &paths) else {
            return;
        };
        let words: Vec<String> = forms
            .iter()
            .flat_map(|form| ["--text".to_owned(), form.words.clone()])
            .collect();
        let meant = hear(context, &words).expect("words need no recogniser");
        assert_eq!((heard.len(), meant.len()), (forms.len(), forms.len()));
        for ((form, heard), meant) in forms.iter().zip(heard).zip(meant) {
            assert_ne!(
                meant["kind"], "nothing",
                "`{}` means nothing in {context}",
                form.words
            );
            let share = shares.entry(form.voice.clone()).or_default();
            share.1 += 1;
            if heard == meant {
                share.0 += 1;
            } else {
                println!("{}: `{}` came out as {heard}", form.voice, form.words);
            }
        }
    }
    assert_eq!(shares.len(), 2, "two voices");
    for (voice, (right, all)) in &shares {
        println!("{voice}: {right} of {all} forms understood");
    }
    for (voice, (right, all)) in shares {
        assert!(all >= 30, "{voice} says only {all} forms");
        assert!(
            right * 100 >= all * FLOOR,
            "{voice}: {right} of {all} understood"
        );
    }
}
