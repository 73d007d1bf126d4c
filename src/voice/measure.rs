//! How well a voice hears, through exactly the live pipeline.
//!
//! It promises the same figures for the same recordings and voice: nothing is random and nothing is
//! left out silently. What was trained on is left out unless asked for. It leaves out judging
//! whether the figures are good.

mod md5;
pub mod sets;
pub mod tables;
pub mod trade;

use std::{
    fs,
    path::Path,
    time::{Duration, Instant},
};

use super::{
    front::{Front, FrontEvent, Steps, activity::Settings, resample::RATE},
    hearing::{Fit, Hearing},
    recogniser::RecogniserError,
};
use crate::speech::{Context, Meaning, parse::same};
use sets::{Clip, Condition, Set};

/// What became of one utterance (or of a clip in which none was noticed).
#[derive(Debug, Clone, PartialEq)]
pub struct Row {
    /// Name of the set.
    pub set: String,
    /// Whether the voice was trained on it.
    pub trained: bool,
    /// The condition's name.
    pub condition: String,
    /// What could be said.
    pub context: Context,
    /// File name of the clip.
    pub clip: String,
    /// Whether it ought to have been understood.
    pub ours: bool,
    /// What was said, if anything is written down.
    pub transcript: String,
    /// What was heard, whether it was taken or not.
    pub heard: String,
    /// Whether the likeliest words mean what was said, whether they were taken or not.
    pub understood: bool,
    /// How it came out.
    pub outcome: Outcome,
    /// How it was explained; nothing when no utterance was noticed.
    pub fit: Option<Fit>,
    /// Seconds of the clip, without the room around it.
    pub seconds: f64,
}

impl Row {
    /// How much it is like something that may be said; nothing is as unlike as can be.
    #[must_use]
    pub fn likeness(&self) -> f64 {
        match &self.fit {
            Some(fit) if !fit.ways.is_empty() && !self.heard.is_empty() => fit.likeness(),
            _ => f64::NEG_INFINITY,
        }
    }

    /// Clips fall into two halves by the digest of their names: limits are chosen on the first
    /// and judged on the second.
    #[must_use]
    pub fn judged(&self) -> bool {
        md5::last_digit(&self.clip) % 2 == 1
    }
}

/// How a clip came out.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Outcome {
    /// The meaning is the one that was said.
    Right,
    /// Several meanings, the right one among them: the tool asks.
    Asked,
    /// Another meaning.
    Wrong,
    /// Nothing.
    Nothing,
}

/// What was measured.
#[derive(Debug, Default)]
pub struct Measured {
    /// A row an utterance.
    pub rows: Vec<Row>,
    /// Seconds of sound heard.
    pub sound: f64,
    /// Seconds of it that were cut out as utterances and decoded.
    pub decoded: f64,
    /// Processor seconds it took.
    pub cpu: f64,
}

/// How to listen.
#[derive(Debug, Clone, Copy, Default)]
pub struct How {
    /// Steps of the front that are taken.
    pub steps: Steps,
    /// Whether the voice activity cuts; without, a clip is one utterance, as with a held key.
    pub uncut: bool,
}

/// Hears the clips of a set that are asked for in one context; appends what came of them. Noise is
/// mixed into what ought to be understood only.
///
/// # Errors
/// [`RecogniserError`].
pub fn hear(
    hearing: &Hearing,
    context: Context,
    set: &Set,
    (label, condition): (&str, Condition),
    noises: &[Vec<f32>],
    how: How,
    into: &mut Measured,
) -> Result<(), RecogniserError> {
    let clips = set.ours.iter().chain(&set.others).enumerate();
    for (index, clip) in clips.filter(|(_, clip)| clip.context == context) {
        let ours = !matches!(clip.meaning, Meaning::Nothing(_));
        if !ours && condition != Condition::Clean {
            continue;
        }
        let Some(sound) = sets::sound(&clip.path) else {
            continue;
        };
        let seconds = sound.len() as f64 / f64::from(RATE);
        let sound = condition.applied(&sound, index, noises);
        let before = cpu();
        let mut utterances = heard(hearing, context, &sound, how, into)?;
        into.cpu += cpu() - before;
        into.sound += sound.len() as f64 / f64::from(RATE);
        // The first that means something decides, as in `hear`.
        let first = utterances
            .iter()
            .position(|(_, meaning)| !matches!(meaning, Meaning::Nothing(_)))
            .unwrap_or_default();
        if ours && !utterances.is_empty() {
            utterances = vec![utterances.swap_remove(first)];
        }
        let mut utterances: Vec<_> = utterances
            .into_iter()
            .map(|(fit, meaning)| (Some(fit), meaning))
            .collect();
        if utterances.is_empty() {
            utterances.push((None, Meaning::Nothing(String::new())));
        }
        let each = seconds / utterances.len() as f64;
        for (fit, meaning) in utterances {
            into.rows
                .push(row(hearing, set, label, clip, fit, &meaning, each));
        }
    }
    Ok(())
}

fn row(
    hearing: &Hearing,
    set: &Set,
    label: &str,
    clip: &Clip,
    fit: Option<Fit>,
    meaning: &Meaning,
    seconds: f64,
) -> Row {
    let best = fit.as_ref().and_then(|fit| fit.ways.first());
    let heard = best.map_or_else(String::new, |way| way.words.clone());
    let name = clip.path.file_name().unwrap_or_default();
    let ours = !matches!(clip.meaning, Meaning::Nothing(_));
    Row {
        set: set.name.clone(),
        trained: set.trained,
        condition: label.to_owned(),
        context: clip.context,
        clip: name.to_string_lossy().into_owned(),
        ours,
        transcript: clip.transcript.clone(),
        understood: ours && same(&hearing.understand(clip.context, &heard), &clip.meaning),
        outcome: outcome(meaning, &clip.meaning),
        heard,
        fit,
        seconds,
    }
}

fn heard(
    hearing: &Hearing,
    context: Context,
    sound: &[f32],
    how: How,
    into: &mut Measured,
) -> Result<Vec<(Fit, Meaning)>, RecogniserError> {
    let Some(front) = Front::new(RATE, Settings::default()) else {
        return Ok(Vec::new());
    };
    let mut front = front.with(how.steps);
    let mut events = Vec::new();
    if how.uncut {
        front.hold_to_talk(true);
        front.press(&mut events);
    }
    for piece in sound.chunks(RATE as usize / 10) {
        front.push(piece, &mut events);
    }
    front.finish(&mut events);
    let mut all = Vec::new();
    for event in events {
        if let FrontEvent::Utterance(utterance) = event {
            into.decoded += f64::from(utterance.seconds());
            let fit = hearing.fit(context, &utterance)?;
            let meaning = hearing.meaning(context, &fit).meaning;
            all.push((fit, meaning));
        }
    }
    Ok(all)
}

fn outcome(got: &Meaning, due: &Meaning) -> Outcome {
    let agree = |got: &Meaning| match due {
        Meaning::Ambiguous(all) => all.iter().any(|one| same(got, one)),
        one => same(got, one),
    };
    match got {
        Meaning::Nothing(_) => Outcome::Nothing,
        got if same(got, due) => Outcome::Right,
        Meaning::Ambiguous(all) if all.iter().any(agree) => Outcome::Asked,
        _ => Outcome::Wrong,
    }
}

/// How long opening a context takes.
///
/// # Errors
/// [`RecogniserError`].
pub fn opening(hearing: &Hearing, context: Context) -> Result<Duration, RecogniserError> {
    let start = Instant::now();
    hearing.prepare(context)?;
    Ok(start.elapsed())
}

/// Processor seconds of this process so far, from the kernel (hundredths).
fn cpu() -> f64 {
    let stat = fs::read_to_string("/proc/self/stat").unwrap_or_default();
    let after = stat.rsplit_once(')').map_or("", |(_, rest)| rest);
    let ticks: f64 = after
        .split_whitespace()
        .skip(11)
        .take(2)
        .filter_map(|t| t.parse::<f64>().ok())
        .sum();
    ticks / 100.0
}

/// Forgets how much memory was used so far, so that [`peak_memory`] tells of what follows; where
/// the kernel does not allow it, the peak is that of the whole process.
pub fn forget_peak() {
    let _stays = fs::write("/proc/self/clear_refs", "5");
}

/// Bytes of the files below a folder; links are not followed.
#[must_use]
pub fn size(folder: &Path) -> u64 {
    let entries = fs::read_dir(folder).into_iter().flatten().flatten();
    entries
        .map(|entry| match entry.metadata() {
            Ok(data) if data.is_dir() => size(&entry.path()),
            Ok(data) if data.is_file() => data.len(),
            _ => 0,
        })
        .sum()
}

/// The most memory this process has used, in megabytes.
#[must_use]
pub fn peak_memory() -> f64 {
    let status = fs::read_to_string("/proc/self/status").unwrap_or_default();
    status
        .lines()
        .find_map(|line| {
            line.strip_prefix("VmHWM:")?
                .split_whitespace()
                .next()?
                .parse::<f64>()
                .ok()
        })
        .unwrap_or_default()
        / 1_024.0
}
