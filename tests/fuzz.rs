//! Every reader of a file, given bytes nobody wrote on purpose: none may panic, hang or take
//! gigabytes.
//!
//! `HANDSFULL_FUZZ` is the number of cases per reader (2 000 without it), `HANDSFULL_SEED` which
//! ones. Half the cases are valid files hurt in a few places, the others are made of the files'
//! own pieces in any order, or of any bytes.

#[path = "support/records.rs"]
mod records;

use std::time::{Duration, Instant};

use handsfull::{
    journal::{Log, text},
    plan,
    speech::{grammar, lexicon::Lexicon},
    voice::source::{Piece, Source, wav::Wav},
};
use records::{Chance, at, varied};

fn number(name: &str, otherwise: u64) -> u64 {
    let given = std::env::var(name).ok();
    given.and_then(|n| n.parse().ok()).unwrap_or(otherwise)
}

/// Hurts a file in one to four places.
fn hurt(seed: &[u8], pieces: &[&[u8]], chance: &mut Chance) -> Vec<u8> {
    let mut bytes = seed.to_vec();
    for _ in 0..=chance.below(4) {
        let n = bytes.len() as u64;
        if n == 0 {
            break;
        }
        let at = usize::try_from(chance.below(n)).expect("small");
        let to = (at + usize::try_from(chance.below(40)).expect("small")).min(bytes.len());
        match chance.below(7) {
            0 | 1 => bytes[at] ^= 1 << chance.below(8),
            2 => bytes[at] = u8::try_from(chance.below(256)).expect("a byte"),
            3 => drop(bytes.drain(at..to)),
            4 => {
                let copy = bytes[at..to].to_vec();
                bytes.splice(at..at, copy);
            }
            5 => {
                let piece = pick(pieces, chance);
                bytes.splice(at..at, piece.iter().copied());
            }
            _ => bytes.truncate(at),
        }
    }
    bytes
}

fn pick<'a>(pieces: &[&'a [u8]], chance: &mut Chance) -> &'a [u8] {
    match pieces.len() as u64 {
        0 => b"",
        n => pieces[usize::try_from(chance.below(n)).expect("small")],
    }
}

fn made(pieces: &[&[u8]], chance: &mut Chance) -> Vec<u8> {
    let mut bytes = vec![];
    for _ in 0..chance.below(12) {
        if chance.below(6) == 0 {
            let any =
                (0..chance.below(9)).map(|_| u8::try_from(chance.below(256)).expect("a byte"));
            bytes.extend(any.collect::<Vec<u8>>());
        } else {
            bytes.extend_from_slice(pick(pieces, chance));
        }
    }
    bytes
}

/// Runs the cases; says how many bytes-level cases there were and the slowest.
fn run(what: &str, seeds: &[Vec<u8>], share: u64, read: impl Fn(&[u8])) {
    let cases = number("HANDSFULL_FUZZ", 2000) / share;
    let mut chance = Chance(number("HANDSFULL_SEED", 11));
    let lines: Vec<&[u8]> = seeds
        .iter()
        .flat_map(|seed| seed.split_inclusive(|b| *b == b'\n'))
        .collect();
    let mut slowest = Duration::ZERO;
    for case in 0..cases {
        let bytes = if case % 2 == 0 {
            let seed = &seeds[usize::try_from(chance.below(seeds.len() as u64)).expect("small")];
            hurt(seed, &lines, &mut chance)
        } else {
            made(&lines, &mut chance)
        };
        let began = Instant::now();
        read(&bytes);
        slowest = slowest.max(began.elapsed());
    }
    println!("{what}: {cases} cases, the slowest {slowest:?}");
}

fn small_log() -> Vec<u8> {
    let header = text::Header {
        format: text::FORMAT,
        journal: "0123456789ab".into(),
        job: "mill".into(),
        first: 1,
        joins: vec![],
    };
    let (mut out, mut check) = text::head(&header, at(0)).expect("laid out");
    let mut chance = Chance(5);
    for no in 1..=2 {
        let record = varied(no, &mut chance);
        let (entry, next) = text::entry(no, at(1), &record, &check).expect("laid out");
        out.push_str(&entry);
        check = next;
    }
    out.into_bytes()
}

#[test]
fn no_bytes_make_the_reader_of_logs_panic() {
    let log = small_log();
    let whole = Log::read(&log[..]).expect("memory");
    run("logs", &[log], 1, |bytes| {
        let read = Log::read(bytes).expect("memory can be read");
        // Whatever is handed out as holding was kept: these two entries and no others.
        for entry in &read.entries {
            assert!(whole.entries.iter().any(|e| e.record == entry.record));
        }
        let _ = handsfull::journal::replay::standing(&read);
    });
}

#[test]
fn no_bytes_make_the_reader_of_job_files_panic() {
    let seeds = [
        include_bytes!("fixtures/garden.toml").to_vec(),
        include_bytes!("fixtures/barn.toml").to_vec(),
    ];
    run("job files", &seeds, 4, |bytes| {
        if let Ok(text) = std::str::from_utf8(bytes) {
            if let Ok(job) = plan::parse(text, "fuzz.toml") {
                let _ = handsfull::domain::sequence::required(&job);
            }
        } else {
            let text = String::from_utf8_lossy(bytes);
            let _ = plan::parse(&text, "fuzz.toml");
        }
    });
}

#[test]
fn no_bytes_make_the_reader_of_grammars_panic() {
    let seeds: Vec<Vec<u8>> = ["ohms.abnf", "tick.abnf", "control.abnf"]
        .into_iter()
        .filter_map(handsfull::speech::library::text)
        .map(|text| text.as_bytes().to_vec())
        .collect();
    assert_eq!(seeds.len(), 3, "the grammars of the tool");
    run("grammars", &seeds, 2, |bytes| {
        let _ = grammar::parse("fuzz.abnf", &String::from_utf8_lossy(bytes));
    });
}

#[test]
fn no_bytes_make_the_reader_of_pronunciations_panic() {
    let seeds = [b"ohm  OW M\nzero Z IY R OW # the digit\nnine N AY N\n".to_vec()];
    run("pronunciations", &seeds, 1, |bytes| {
        let _ = Lexicon::parse("fuzz.dict", &String::from_utf8_lossy(bytes));
    });
}

fn small_wav(float: bool) -> Vec<u8> {
    let spec = hound::WavSpec {
        channels: if float { 1 } else { 2 },
        sample_rate: 16_000,
        bits_per_sample: if float { 32 } else { 16 },
        sample_format: if float {
            hound::SampleFormat::Float
        } else {
            hound::SampleFormat::Int
        },
    };
    let mut bytes = std::io::Cursor::new(vec![]);
    let mut out = hound::WavWriter::new(&mut bytes, spec).expect("memory");
    for i in 0..40_i16 {
        if float {
            out.write_sample(f32::from(i) / 50.0).expect("memory");
        } else {
            out.write_sample(i * 700).expect("memory");
        }
    }
    out.finalize().expect("memory");
    bytes.into_inner()
}

#[test]
fn no_bytes_make_the_reader_of_recordings_panic() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("fuzz.wav");
    run(
        "recordings",
        &[small_wav(false), small_wav(true)],
        4,
        |bytes| {
            std::fs::write(&path, bytes).expect("written");
            let Ok(mut wav) = Wav::open(&path) else {
                return;
            };
            // A header may promise hours; a hundred pieces are ten seconds.
            for _ in 0..100 {
                match wav.read() {
                    Piece::Sound(_) | Piece::Nothing => {}
                    Piece::End | Piece::Lost(_) => break,
                }
            }
        },
    );
}
