//! Recordings to measure on: folders with a `manifest.tsv` (path, transcript, speaker).
//!
//! WAV and FLAC. A clip whose transcript can be said ought to be understood, in the context in which
//! it would be asked for; one without a transcript, or with no word of the grammar of readings in it,
//! ought to be nothing there. What lies between (our words in an order nobody says) proves neither
//! and is left out. What the voice was trained on is left out, or told apart where noise is short.

use std::{
    collections::BTreeSet,
    fs,
    path::{Path, PathBuf},
};

use super::{super::front::level::Noise, md5};
use crate::{
    speech::{Context, Meaning, Phrases},
    voice::{
        front::resample::{RATE, Resampler},
        source::{Piece, Source, wav::Wav},
    },
};

/// Sets of which only a tenth of the speakers was kept out of training (`lab/align.py`).
const PARTLY_TRAINED: [&str; 2] = ["an4", "speech_commands"];
/// Sets trained on as a whole.
const TRAINED: [&str; 1] = ["natospell_timkahn"];
/// Sets of noise: a fifth of the clips was kept out of training, and one whose licence did not
/// allow it (`lab/augment.py`).
const NOISE: &str = "noise";
const NOISE_KEPT_OUT: &str = "helicopter.wav";

/// One recording.
#[derive(Debug, Clone)]
pub struct Clip {
    /// Where it is.
    pub path: PathBuf,
    /// What is said, or nothing.
    pub transcript: String,
    /// What may be said when it is asked for.
    pub context: Context,
    /// What it means there, or nothing that may be said.
    pub meaning: Meaning,
}

/// One folder of recordings.
#[derive(Debug, Clone)]
pub struct Set {
    /// The folder's name.
    pub name: String,
    /// Whether the voice was trained on these clips.
    pub trained: bool,
    /// Clips that ought to be understood.
    pub ours: Vec<Clip>,
    /// Clips that ought to be nothing.
    pub others: Vec<Clip>,
}

/// Every set below a folder, by name: each clip in the context given or else in the one in which
/// it would be asked for. `everyone` takes the speakers trained on, too.
#[must_use]
pub fn below(
    folder: &Path,
    phrases: &Phrases,
    context: Option<Context>,
    everyone: bool,
) -> Vec<Set> {
    let mut folders: Vec<PathBuf> = fs::read_dir(folder)
        .map(|entries| entries.flatten().map(|e| e.path()).collect())
        .unwrap_or_default();
    folders.sort();
    let graph = phrases.word_graph(context.unwrap_or(READINGS[0]));
    let reader = Reader {
        phrases,
        context,
        vocabulary: graph.words().into_iter().collect(),
        everyone,
    };
    folders.iter().flat_map(|path| reader.sets(path)).collect()
}

/// The contexts in which readings are asked for; most often it is the first.
const READINGS: [Context; 3] = [Context::Ohms, Context::Insulation, Context::Live];

const DIGITS: [&str; 10] = [
    "zero", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine",
];

/// Whether it is one of the ten digits.
#[must_use]
pub fn is_digit(word: &str) -> bool {
    DIGITS.contains(&word)
}

struct Reader<'a> {
    phrases: &'a Phrases,
    context: Option<Context>,
    vocabulary: BTreeSet<&'a str>,
    everyone: bool,
}

impl Reader<'_> {
    /// The sets of a folder: one, or two where it holds noise that was trained on and noise that
    /// was not.
    fn sets(&self, folder: &Path) -> Vec<Set> {
        let named = folder.file_name().and_then(|name| name.to_str());
        let manifest = fs::read_to_string(folder.join("manifest.tsv"));
        let (Some(name), Ok(manifest)) = (named, manifest) else {
            return Vec::new();
        };
        let set = |trained| Set {
            name: name.to_owned(),
            trained,
            ours: Vec::new(),
            others: Vec::new(),
        };
        let (mut kept_out, mut trained) = (set(false), set(true));
        for line in manifest.lines().skip(1) {
            let mut fields = line.split('\t');
            let (Some(path), Some(text)) = (fields.next(), fields.next()) else {
                continue;
            };
            let path = folder.join(path);
            let known = was_trained_on(name, &path, fields.next().unwrap_or_default());
            if known && !self.everyone && !name.starts_with(NOISE) {
                continue;
            }
            let set = if known { &mut trained } else { &mut kept_out };
            let clip = self.clip(path, text);
            match clip.meaning {
                Meaning::Nothing(_) => {
                    let mut words = clip.transcript.split_whitespace();
                    if !words.any(|word| self.vocabulary.contains(word)) {
                        set.others.push(clip);
                    }
                }
                _ => set.ours.push(clip),
            }
        }
        [kept_out, trained]
            .into_iter()
            .filter(|set| !set.ours.is_empty() || !set.others.is_empty())
            .collect()
    }

    fn clip(&self, path: PathBuf, text: &str) -> Clip {
        // The ICAO's own spellings of two of its words.
        let transcript = text
            .to_lowercase()
            .replace("alfa", "alpha")
            .replace("juliett", "juliet");
        let (context, meaning) = self.asked(&transcript);
        Clip {
            path,
            transcript,
            context,
            meaning,
        }
    }

    /// Where it would be asked for: digits digit by digit, a reading by its kind of test, the
    /// rest where anything may be said.
    fn asked(&self, transcript: &str) -> (Context, Meaning) {
        let mut contexts = match self.context {
            Some(context) => vec![context],
            None if transcript.split_whitespace().all(is_digit) => {
                vec![Context::Digits, READINGS[0]]
            }
            None => [&READINGS[..], &[Context::All]].concat(),
        };
        contexts.retain(|_| !transcript.is_empty());
        for context in contexts {
            let meaning = self.phrases.understand(context, transcript);
            if !matches!(meaning, Meaning::Nothing(_)) {
                return (context, meaning);
            }
        }
        let pending = self.context.unwrap_or(READINGS[0]);
        (pending, Meaning::Nothing("nobody says that".into()))
    }
}

/// Whether training heard it: see `lab/README.md`.
fn was_trained_on(set: &str, path: &Path, speaker: &str) -> bool {
    if set.starts_with(NOISE) {
        let name = path.file_name().unwrap_or_default().to_string_lossy();
        return name != NOISE_KEPT_OUT && !md5::last_digit(&name).is_multiple_of(5);
    }
    TRAINED.contains(&set) || PARTLY_TRAINED.contains(&set) && md5::last_digit(speaker) != 0
}

/// A recording at 16 kHz, -1 to 1; nothing when it cannot be read.
#[must_use]
pub fn sound(path: &Path) -> Option<Vec<f32>> {
    let (rate, raw) = if path.extension().is_some_and(|e| e == "flac") {
        let mut reader = claxon::FlacReader::open(path).ok()?;
        let info = reader.streaminfo();
        let full = (1_i64 << (info.bits_per_sample - 1)) as f32;
        let samples: Vec<f32> = reader
            .samples()
            .step_by(info.channels as usize)
            .map(|s| s.map(|s| s as f32 / full))
            .collect::<Result<_, _>>()
            .ok()?;
        (info.sample_rate, samples)
    } else {
        let mut wav = Wav::open(path).ok()?;
        let mut samples = Vec::new();
        while let Piece::Sound(piece) = wav.read() {
            samples.extend(piece);
        }
        (wav.rate(), samples)
    };
    let mut out = Vec::new();
    let mut resampler = Resampler::new(rate)?;
    resampler.push(&raw, &mut out);
    resampler.finish(&mut out);
    Some(out)
}

/// How a clip is made worse before it is heard.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Condition {
    /// Not at all.
    Clean,
    /// Recorded noise so many dB below it.
    Noise(f32),
    /// So many dB quieter.
    Quieter(f32),
}

impl Condition {
    /// `clean`, `+10` (dB over noise), `-20` (dB of level).
    #[must_use]
    pub fn named(text: &str) -> Option<Self> {
        let number = || text[1..].parse::<f32>().ok();
        match text.chars().next()? {
            '+' => number().map(Self::Noise),
            '-' => number().map(Self::Quieter),
            _ => (text == "clean").then_some(Self::Clean),
        }
    }

    /// The clip under this condition, with 0.6 s of room before and 1 s after it; a clip that is
    /// longer than the room's noise hears the noise again. The same every time.
    #[must_use]
    pub fn applied(self, clip: &[f32], index: usize, noises: &[Vec<f32>]) -> Vec<f32> {
        let peak = clip.iter().fold(1e-6_f32, |m, x| m.max(x.abs()));
        let gain = match self {
            Self::Quieter(by) => 0.5 * 10_f32.powf(-by / 20.0),
            _ => 0.5,
        } / peak;
        let mut out = vec![0.0; RATE as usize * 6 / 10];
        out.extend(clip.iter().map(|x| x * gain));
        out.resize(out.len() + RATE as usize, 0.0);
        // A room's hiss, 15 steps of 16-bit sound; digital silence is no room.
        let mut hiss = Noise::new();
        for sample in &mut out {
            *sample += hiss.next() * 15.0 / 32_768.0;
        }
        if let (Self::Noise(below), false) = (self, noises.is_empty()) {
            let noise = &noises[index % noises.len()];
            let loud: Vec<f32> = clip
                .iter()
                .filter(|x| x.abs() > 0.02 * peak)
                .map(|x| x * gain)
                .collect();
            let scale = rms(&loud) * 10_f32.powf(-below / 20.0) / rms(noise).max(1e-6);
            let start = (index * 7_919) % noise.len();
            for (sample, n) in out.iter_mut().zip(noise.iter().cycle().skip(start)) {
                *sample += n * scale;
            }
        }
        let most = out.iter().fold(0.95_f32, |m, x| m.max(x.abs()));
        out.iter().map(|x| x * 0.95 / most).collect()
    }
}

fn rms(sound: &[f32]) -> f32 {
    (sound.iter().map(|x| x * x).sum::<f32>() / sound.len().max(1) as f32).sqrt()
}
