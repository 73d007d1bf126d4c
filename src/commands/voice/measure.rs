//! `handsfull voice measure`: the tables of how well a voice hears.

use std::{fmt, fs, path::PathBuf, sync::Arc};

use clap::Args as ClapArgs;

use super::{
    super::failure::{Failure, Kind},
    lexicon,
};
use crate::{
    speech::{Context, Phrases},
    voice::{
        front::Steps,
        hearing::Hearing,
        measure::sets::{self, Condition, Set},
        measure::{self, Measured, Outcome, Row, Score},
        ready,
    },
};

/// Measure how well a voice hears recordings
#[derive(Debug, ClapArgs)]
pub(super) struct Args {
    /// Folder of sets: subfolders with recordings and a manifest.tsv (path, transcript, speaker)
    #[arg(long, value_name = "DIR")]
    speech: PathBuf,
    /// What may be said
    #[arg(long, value_name = "NAME", default_value = "all")]
    context: String,
    /// A built voice in place of the embedded one
    #[arg(long, value_name = "DIR")]
    voice: Option<PathBuf>,
    /// Another built voice to measure beside it
    #[arg(long, value_name = "DIR")]
    compare: Option<PathBuf>,
    /// clean, +DB (over recorded noise), -DB (quieter)
    #[arg(
        long,
        value_name = "LIST",
        value_delimiter = ',',
        allow_hyphen_values = true,
        default_value = "clean"
    )]
    conditions: Vec<String>,
    /// Only sets whose name contains this
    #[arg(long, value_name = "TEXT", default_value = "")]
    only: String,
    /// At most this many clips of a set and kind, evenly spread
    #[arg(long, value_name = "N")]
    most: Option<usize>,
    /// Speakers the voice was trained on, too
    #[arg(long)]
    everyone: bool,
    /// Write a line for every utterance
    #[arg(long, value_name = "FILE")]
    csv: Option<PathBuf>,
    /// Show what was misheard
    #[arg(long)]
    misses: bool,
    /// Leave steps of the front out: high-pass, level, noise, cutting
    #[arg(long, value_name = "LIST", value_delimiter = ',')]
    without: Vec<String>,
}

/// Limits of likeness whose trade-off is shown.
const LIMITS: [f64; 11] = [1.4, 1.7, 1.95, 2.2, 2.45, 2.7, 2.85, 3.0, 3.25, 3.5, 4.0];

pub(super) fn run(args: &Args) -> Result<(), Failure> {
    let context = super::super::hear::context(&args.context)?;
    let conditions: Vec<(String, Condition)> = args
        .conditions
        .iter()
        .map(|name| {
            Condition::named(name)
                .map(|condition| (name.clone(), condition))
                .ok_or_else(|| Failure::new(Kind::Usage, format!("no condition `{name}`")))
        })
        .collect::<Result<_, _>>()?;
    let phrases = Arc::new(Phrases::with_places(&[]).map_err(|e| Failure::new(Kind::Input, e))?);
    let mut all = sets::below(&args.speech, &phrases, context, args.everyone);
    if all.is_empty() {
        let what = format!("{}: no folder with a manifest.tsv", args.speech.display());
        return Err(Failure::new(Kind::Input, what));
    }
    let noises = noises(&all);
    all.retain(|set| set.name.contains(&args.only));
    if let Some(most) = args.most {
        for set in &mut all {
            thin(&mut set.ours, most);
            thin(&mut set.others, most);
        }
    }
    let mut csv = String::from(
        "voice,condition,set,clip,ours,transcript,heard,outcome,sounds,worse,margin,likeness,second,loud,words,any\n",
    );
    for voice in [
        Some(args.voice.as_deref()),
        args.compare.as_deref().map(Some),
    ]
    .into_iter()
    .flatten()
    {
        let hearing = ready::ready(Arc::clone(&phrases), &lexicon()?, voice)
            .map_err(|e| Failure::new(Kind::Device, e))?;
        let job = Job {
            name: voice.map_or("embedded".into(), |v| v.display().to_string()),
            hearing,
            context,
            noises: &noises,
            misses: args.misses,
            without: &args.without,
        };
        job.measure(&all, &conditions, &mut csv)
            .map_err(|e| Failure::new(Kind::Device, e))?;
    }
    match &args.csv {
        Some(path) => fs::write(path, csv)
            .map_err(|e| Failure::new(Kind::Input, format!("{}: {e}", path.display()))),
        None => Ok(()),
    }
}

/// The recordings of the sets called noise, to be mixed in.
fn noises(all: &[Set]) -> Vec<Vec<f32>> {
    all.iter()
        .filter(|set| set.name.starts_with("noise"))
        .flat_map(|set| &set.others)
        .filter_map(|clip| sets::sound(&clip.path))
        .filter(|sound| sound.iter().any(|x| x.abs() > 1e-3))
        .collect()
}

fn thin<T>(clips: &mut Vec<T>, most: usize) {
    let total = clips.len();
    let mut index = 0;
    clips.retain(|_| {
        let keep = index * most / total.max(1) != (index + 1) * most / total.max(1);
        index += 1;
        keep || total <= most
    });
}

struct Job<'a> {
    name: String,
    hearing: Hearing,
    context: Context,
    noises: &'a [Vec<f32>],
    misses: bool,
    without: &'a [String],
}

impl Job<'_> {
    fn measure(
        &self,
        all: &[Set],
        conditions: &[(String, Condition)],
        csv: &mut String,
    ) -> Result<(), crate::voice::recogniser::RecogniserError> {
        let opening = measure::opening(&self.hearing, self.context)?;
        let with = |step: &str| !self.without.iter().any(|w| w == step);
        let mut measured = Measured {
            steps: Steps {
                high_pass: with("high-pass"),
                level: with("level"),
                noise: with("noise"),
            },
            uncut: !with("cutting"),
            ..Measured::default()
        };
        let mut understood = table(&[
            "set",
            "condition",
            "clips",
            "words exact %",
            "right %",
            "asked %",
            "wrong %",
            "nothing %",
        ]);
        let mut refused = table(&[
            "set",
            "condition",
            "minutes",
            "taken for something",
            "a minute",
        ]);
        let mut other_seconds = 0.0;
        for (label, condition) in conditions {
            for set in all {
                let from = measured.rows.len();
                let ours = self.hear(set, &set.ours, *condition, &mut measured)?;
                if ours.clips > 0 {
                    understood.add_row(understood_row(&set.name, label, &ours));
                }
                // Noise over noise says nothing.
                if matches!(condition, Condition::Clean) && !set.others.is_empty() {
                    let others = self.hear(set, &set.others, *condition, &mut measured)?;
                    other_seconds += others.other_seconds;
                    refused.add_row(refused_row(&set.name, label, &others));
                }
                for row in &measured.rows[from..] {
                    csv.push_str(&line(&self.name, label, row));
                    if self.misses && missed(row) {
                        println!(
                            "{label}: {} `{}` heard `{}` ({:?})",
                            row.clip, row.transcript, row.heard, row.outcome
                        );
                    }
                }
            }
        }
        println!(
            "\nVoice: {}, context {}\n\n{understood}\n\n{refused}\n",
            self.name,
            self.context.name()
        );
        if other_seconds > 0.0 {
            let mut trade = table(&["least likeness", "right lost %", "taken a minute"]);
            for (limit, lost, taken) in measure::trade(&measured.rows, other_seconds, &LIMITS) {
                trade.add_row([
                    format!("{limit:.2}"),
                    format!("{lost:.1}"),
                    format!("{taken:.2}"),
                ]);
            }
            println!("{trade}\n");
        }
        println!(
            "opened in {} ms; real-time factor {:.4} ({:.0} s of sound); peak memory {:.0} MB",
            opening.as_millis(),
            measured.cpu / measured.sound.max(0.1),
            measured.sound,
            measure::peak_memory()
        );
        Ok(())
    }

    fn hear(
        &self,
        set: &Set,
        clips: &[sets::Clip],
        condition: Condition,
        measured: &mut Measured,
    ) -> Result<Score, crate::voice::recogniser::RecogniserError> {
        measure::hear(
            &self.hearing,
            self.context,
            &set.name,
            clips,
            condition,
            self.noises,
            measured,
        )
    }
}

/// A table in the plain form that documents take.
struct Table(Vec<Vec<String>>);

impl Table {
    fn add_row(&mut self, row: impl Into<Vec<String>>) {
        self.0.push(row.into());
    }
}

impl fmt::Display for Table {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (index, row) in self.0.iter().enumerate() {
            writeln!(f, "| {} |", row.join(" | "))?;
            if index == 0 {
                writeln!(f, "|{}", "---|".repeat(row.len()))?;
            }
        }
        Ok(())
    }
}

fn table(header: &[&str]) -> Table {
    Table(vec![header.iter().map(|h| (*h).to_owned()).collect()])
}

fn understood_row(set: &str, condition: &str, score: &Score) -> Vec<String> {
    let share = |n: usize| format!("{:.1}", 100.0 * n as f64 / score.clips.max(1) as f64);
    let nothing = score.clips - score.right - score.asked - score.wrong;
    vec![
        set.into(),
        condition.into(),
        score.clips.to_string(),
        share(score.words),
        share(score.right),
        share(score.asked),
        share(score.wrong),
        share(nothing),
    ]
}

fn refused_row(set: &str, condition: &str, score: &Score) -> Vec<String> {
    let taken = score.accepted;
    let minutes = score.other_seconds / 60.0;
    vec![
        set.into(),
        condition.into(),
        format!("{minutes:.1}"),
        taken.to_string(),
        format!("{:.2}", taken as f64 / minutes.max(0.01)),
    ]
}

fn missed(row: &Row) -> bool {
    match row.outcome {
        Outcome::Right => false,
        Outcome::Nothing => row.ours,
        Outcome::Asked | Outcome::Wrong => true,
    }
}

fn line(voice: &str, condition: &str, row: &Row) -> String {
    format!(
        "{voice},{condition},{},{},{},{},{},{:?},{},{:.3},{:.3},{:.3},{},{:.2},{:.2},{:.2}\n",
        row.set,
        row.clip,
        row.ours,
        row.transcript,
        row.heard,
        row.outcome,
        row.sounds,
        row.worse,
        row.margin,
        row.likeness,
        row.second,
        row.seconds[0],
        row.seconds[1],
        row.seconds[2]
    )
}
