//! How well a voice hears, through exactly the live pipeline.
//!
//! It promises the same figures for the same recordings and voice: nothing is random and nothing is
//! left out silently. What was trained on is left out unless asked for. It leaves out judging
//! whether the figures are good.

mod md5;
pub mod sets;

use std::{
    fs,
    time::{Duration, Instant},
};

use super::{
    front::{Front, FrontEvent, Steps, activity::Settings, resample::RATE},
    hearing::Hearing,
    recogniser::RecogniserError,
};
use crate::speech::{Context, Meaning, parse::same};
use sets::{Clip, Condition};

/// What became of one utterance (or of a clip in which none was noticed).
#[derive(Debug, Clone, PartialEq)]
pub struct Row {
    /// Name of the set.
    pub set: String,
    /// File name of the clip.
    pub clip: String,
    /// Whether it ought to have been understood.
    pub ours: bool,
    /// What was said, if anything is written down.
    pub transcript: String,
    /// What was heard, whether it was taken or not.
    pub heard: String,
    /// How it came out.
    pub outcome: Outcome,
    /// Sounds in it.
    pub sounds: usize,
    /// How much worse the grammar explained each sound, in nats.
    pub worse: f64,
    /// How far behind the next hypothesis of another meaning lies, in nats.
    pub margin: f64,
    /// How much it is like something that may be said.
    pub likeness: f64,
    /// The second hypothesis.
    pub second: String,
    /// Seconds that are loud, that the words fill, that any sounds fill.
    pub seconds: [f32; 3],
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

/// Figures of one set under one condition.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Score {
    /// Clips that ought to have been understood.
    pub clips: usize,
    /// Those of which the words were heard exactly.
    pub words: usize,
    /// Those that came out right, asked, wrong.
    pub right: usize,
    /// See [`Outcome::Asked`].
    pub asked: usize,
    /// See [`Outcome::Wrong`].
    pub wrong: usize,
    /// Seconds of sound that ought to have been nothing.
    pub other_seconds: f64,
    /// Utterances in it that were taken for something.
    pub accepted: usize,
}

/// What was measured.
#[derive(Debug, Default)]
pub struct Measured {
    /// A row an utterance.
    pub rows: Vec<Row>,
    /// Seconds of sound heard.
    pub sound: f64,
    /// Processor seconds it took.
    pub cpu: f64,
    /// Steps of the front that are taken.
    pub steps: Steps,
    /// Whether the voice activity cuts; without, a clip is one utterance, as with a held key.
    pub uncut: bool,
}

/// Hears clips; appends what came of them.
///
/// # Errors
/// [`RecogniserError`].
pub fn hear(
    hearing: &Hearing,
    context: Context,
    set: &str,
    clips: &[Clip],
    condition: Condition,
    noises: &[Vec<f32>],
    into: &mut Measured,
) -> Result<Score, RecogniserError> {
    let mut score = Score::default();
    for (index, clip) in clips.iter().enumerate() {
        let Some(sound) = sets::sound(&clip.path) else {
            continue;
        };
        let ours = !matches!(clip.meaning, Meaning::Nothing(_));
        let seconds = sound.len() as f64 / f64::from(RATE);
        let sound = condition.applied(&sound, index, noises);
        let before = cpu();
        let mut utterances = heard(hearing, context, &sound, into)?;
        into.cpu += cpu() - before;
        into.sound += sound.len() as f64 / f64::from(RATE);
        // The first that means something decides, as in `hear`.
        let first = utterances
            .iter()
            .position(|(_, _, meaning)| !matches!(meaning, Meaning::Nothing(_)))
            .unwrap_or_default();
        if ours && !utterances.is_empty() {
            utterances = vec![utterances.swap_remove(first)];
        }
        if utterances.is_empty() {
            utterances.push((
                Fit::default(),
                String::new(),
                Meaning::Nothing(String::new()),
            ));
        }
        score.clips += usize::from(ours);
        score.other_seconds += if ours { 0.0 } else { seconds };
        for (fit, words, meaning) in utterances {
            let outcome = outcome(&meaning, &clip.meaning);
            match outcome {
                Outcome::Right => score.right += 1,
                Outcome::Asked => score.asked += 1,
                Outcome::Wrong if ours => score.wrong += 1,
                Outcome::Wrong => score.accepted += 1,
                Outcome::Nothing => {}
            }
            score.words += usize::from(ours && words == clip.transcript);
            into.rows.push(Row {
                set: set.to_owned(),
                clip: clip
                    .path
                    .file_name()
                    .unwrap_or_default()
                    .to_string_lossy()
                    .into_owned(),
                ours,
                transcript: clip.transcript.clone(),
                heard: words,
                outcome,
                sounds: fit.sounds,
                worse: fit.worse,
                margin: fit.margin,
                likeness: fit.likeness,
                second: fit.second,
                seconds: fit.seconds,
            });
        }
    }
    Ok(score)
}

#[derive(Default)]
struct Fit {
    sounds: usize,
    worse: f64,
    margin: f64,
    likeness: f64,
    second: String,
    seconds: [f32; 3],
}

fn heard(
    hearing: &Hearing,
    context: Context,
    sound: &[f32],
    how: &Measured,
) -> Result<Vec<(Fit, String, Meaning)>, RecogniserError> {
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
            let fit = hearing.fit(context, &utterance)?;
            let meaning = hearing.meaning(context, &fit).meaning;
            let words = fit.ways.first().map_or("", |way| &way.words).to_owned();
            let second = fit.lead.min(99.0);
            let fit = Fit {
                seconds: [
                    fit.loud,
                    fit.ways.first().map_or(0.0, |way| way.seconds),
                    fit.anything.seconds,
                ],
                sounds: fit.sounds(),
                worse: if fit.ways.is_empty() {
                    99.0
                } else {
                    fit.worse()
                },
                margin: second,
                likeness: if fit.ways.is_empty() {
                    -99.0
                } else {
                    fit.likeness()
                },
                second: fit.ways.get(1).map_or("", |way| &way.words).to_owned(),
            };
            all.push((fit, words, meaning));
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

/// What the limit on likeness trades: for each limit the share of right clips that would be lost,
/// in percent, and the false accepts a minute.
#[must_use]
pub fn trade(rows: &[Row], other_seconds: f64, limits: &[f64]) -> Vec<(f64, f64, f64)> {
    let right: Vec<&Row> = rows
        .iter()
        .filter(|row| row.ours && row.heard == row.transcript)
        .collect();
    limits
        .iter()
        .map(|limit| {
            let lost = right.iter().filter(|row| row.likeness < *limit).count();
            let accepted = rows
                .iter()
                .filter(|row| !row.ours && !row.heard.is_empty() && row.likeness >= *limit)
                .count();
            (
                *limit,
                100.0 * lost as f64 / right.len().max(1) as f64,
                60.0 * accepted as f64 / other_seconds.max(1.0),
            )
        })
        .collect()
}
