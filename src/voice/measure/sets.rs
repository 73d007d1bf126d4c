//! Recordings to measure on: folders with a `manifest.tsv` (path, transcript, speaker).
//!
//! WAV and FLAC. A clip whose transcript can be said in the context ought to be understood; one
//! without, or with no word of the context's grammar in it, ought to be nothing. What lies between
//! (our words in an order nobody says) proves neither and is left out.

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

/// Sets of which only a tenth of the speakers was kept out of training.
const PARTLY_TRAINED: [&str; 2] = ["an4", "speech_commands"];

/// One recording.
#[derive(Debug, Clone)]
pub struct Clip {
    /// Where it is.
    pub path: PathBuf,
    /// What is said, or nothing.
    pub transcript: String,
    /// What that means in the context, or nothing that may be said.
    pub meaning: Meaning,
}

/// One folder of recordings.
#[derive(Debug, Clone)]
pub struct Set {
    /// The folder's name.
    pub name: String,
    /// Clips that ought to be understood.
    pub ours: Vec<Clip>,
    /// Clips that ought to be nothing.
    pub others: Vec<Clip>,
}

/// Every set below a folder, by name. `everyone` takes the speakers trained on, too.
#[must_use]
pub fn below(folder: &Path, phrases: &Phrases, context: Context, everyone: bool) -> Vec<Set> {
    let mut folders: Vec<PathBuf> = fs::read_dir(folder)
        .map(|entries| entries.flatten().map(|e| e.path()).collect())
        .unwrap_or_default();
    folders.sort();
    let graph = phrases.word_graph(context);
    let vocabulary: BTreeSet<&str> = graph.words().into_iter().collect();
    folders
        .iter()
        .filter_map(|path| set(path, phrases, context, &vocabulary, everyone))
        .collect()
}

fn set(
    folder: &Path,
    phrases: &Phrases,
    context: Context,
    vocabulary: &BTreeSet<&str>,
    everyone: bool,
) -> Option<Set> {
    let manifest = fs::read_to_string(folder.join("manifest.tsv")).ok()?;
    let name = folder.file_name()?.to_str()?.to_owned();
    let partly = !everyone && PARTLY_TRAINED.contains(&name.as_str());
    let (mut ours, mut others) = (Vec::new(), Vec::new());
    for line in manifest.lines().skip(1) {
        let mut fields = line.split('\t');
        let (Some(path), Some(text)) = (fields.next(), fields.next()) else {
            continue;
        };
        if partly && md5::last_digit(fields.next().unwrap_or_default()) != 0 {
            continue;
        }
        // The ICAO's own spellings of two of its words.
        let transcript = text
            .to_lowercase()
            .replace("alfa", "alpha")
            .replace("juliett", "juliet");
        let meaning = phrases.understand(context, &transcript);
        let clip = Clip {
            path: folder.join(path),
            transcript,
            meaning,
        };
        match clip.meaning {
            Meaning::Nothing(_) => {
                let mut words = clip.transcript.split_whitespace();
                if !words.any(|word| vocabulary.contains(word)) {
                    others.push(clip);
                }
            }
            _ => ours.push(clip),
        }
    }
    Some(Set { name, ours, others })
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
