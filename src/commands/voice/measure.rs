//! `handsfull voice measure`: the tables of how well a voice hears.

use std::{
    fs,
    path::{Path, PathBuf},
    sync::Arc,
    time::Duration,
};

use clap::Args as ClapArgs;

use super::{
    super::failure::{Failure, Kind},
    lexicon,
};
use crate::{
    speech::{Context, Phrases},
    voice::{
        base::Base,
        front::Steps,
        hearing::{Hearing, Limits},
        measure::{
            self, How, Measured, Outcome, Row,
            sets::{self, Condition, Set},
            tables, trade,
        },
        ready,
    },
};

/// Measure how well a voice hears recordings
#[derive(Debug, ClapArgs)]
pub(super) struct Args {
    /// Folder of sets: subfolders with recordings and a manifest.tsv (path, transcript, speaker);
    /// may be given again
    #[arg(long, value_name = "DIR", required = true)]
    speech: Vec<PathBuf>,
    /// What may be said; otherwise each clip is heard where it would be asked for, and what ought to
    /// be nothing is heard where readings are
    #[arg(long, value_name = "NAME")]
    context: Option<String>,
    /// A built voice, or a base, in place of the embedded one
    #[arg(long, value_name = "DIR")]
    voice: Option<PathBuf>,
    /// An earlier built voice, or base, to measure beside it
    #[arg(long, value_name = "DIR")]
    compare: Option<PathBuf>,
    /// clean, +DB (over recorded noise), -DB (quieter)
    #[arg(
        long,
        value_name = "LIST",
        value_delimiter = ',',
        allow_hyphen_values = true,
        default_value = "clean,+10,+5,-20"
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
    /// Write what the limit trades, as trade.csv and trade.svg
    #[arg(long, value_name = "DIR")]
    trade: Option<PathBuf>,
    /// Show what was misheard
    #[arg(long)]
    misses: bool,
    /// Leave steps of the front out: high-pass, level, noise, cutting
    #[arg(long, value_name = "LIST", value_delimiter = ',')]
    without: Vec<String>,
}

/// The condition shown beside quiet in the trade.
const NOISY: &str = "+10";

pub(super) fn run(args: &Args) -> Result<(), Failure> {
    let context = match &args.context {
        Some(name) => Some(super::super::hear::context(name)?),
        None => None,
    };
    let conditions: Vec<Condition> = args
        .conditions
        .iter()
        .map(|name| {
            Condition::named(name)
                .ok_or_else(|| Failure::new(Kind::Usage, format!("no condition `{name}`")))
        })
        .collect::<Result<_, _>>()?;
    let phrases = Arc::new(Phrases::with_places(&[]).map_err(|e| Failure::new(Kind::Input, e))?);
    let mut all = Vec::new();
    for folder in &args.speech {
        let here = sets::below(folder, &phrases, context, args.everyone);
        if here.is_empty() {
            let what = format!("{}: no folder with a manifest.tsv", folder.display());
            return Err(Failure::new(Kind::Input, what));
        }
        all.extend(here);
    }
    let noises = noises(&all);
    all.retain(|set| set.name.contains(&args.only));
    if let Some(most) = args.most {
        for set in &mut all {
            thin(&mut set.ours, most);
            thin(&mut set.others, most);
        }
    }
    let job = Job {
        args,
        phrases,
        sets: &all,
        noises: &noises,
        conditions: &conditions,
    };
    // Ours first: what memory it takes shows best before another was open.
    let ours = job.measure(args.voice.as_deref())?;
    let mut csv = String::from(HEADER);
    job.tell(&ours, &mut csv);
    if let Some(folder) = &args.compare {
        let first = job.measure(Some(folder))?;
        job.tell(&first, &mut csv);
        println!(
            "\n{} → {}\n\n{}",
            first.name,
            ours.name,
            tables::beside(&first.measured.rows, &ours.measured.rows, &args.conditions)
        );
    }
    let write = |path: &Path, text: &str| {
        fs::write(path, text)
            .map_err(|e| Failure::new(Kind::Input, format!("{}: {e}", path.display())))
    };
    if let Some(path) = &args.csv {
        write(path, &csv)?;
    }
    if let Some(folder) = &args.trade {
        let rows = &ours.measured.rows;
        let points = [false, true].map(|half| trade::curve(rows, half, NOISY));
        let points = points.concat();
        let Limits { open, held } = Limits::default();
        write(&folder.join("trade.csv"), &trade::csv(&points, NOISY))?;
        let drawing = trade::svg(&points, NOISY, &[("open", open), ("held", held)]);
        write(&folder.join("trade.svg"), &drawing)?;
    }
    Ok(())
}

/// The recordings of the sets called noise that no training heard, to be mixed in.
fn noises(all: &[Set]) -> Vec<Vec<f32>> {
    all.iter()
        .filter(|set| set.name.starts_with("noise") && !set.trained)
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
    args: &'a Args,
    phrases: Arc<Phrases>,
    sets: &'a [Set],
    noises: &'a [Vec<f32>],
    conditions: &'a [Condition],
}

/// What was measured of one voice.
struct Voice {
    name: String,
    opening: Duration,
    memory: f64,
    size: Option<u64>,
    measured: Measured,
}

impl Job<'_> {
    /// Opens a voice: the one inside the program, a built one, or one built from a base.
    fn open(&self, folder: Option<&Path>) -> Result<(Hearing, Option<u64>), Failure> {
        let base = folder.filter(|folder| folder.join("phones.txt").is_file());
        let mut built = folder.map(Path::to_owned);
        let mut size = None;
        if base.is_some() || folder.is_none() {
            let named = ready::named_base();
            let base = Base::from(base.or(named.as_deref()));
            let base = base.map_err(|e| Failure::new(Kind::Input, e))?;
            let recipe = ready::recipe(base, &self.phrases, &lexicon()?);
            let voice = ready::cached(&recipe).map_err(|e| Failure::new(Kind::Input, e))?;
            size = Some(measure::size(&voice.folder));
            built = Some(voice.folder);
        }
        let hearing = ready::ready(Arc::clone(&self.phrases), &lexicon()?, built.as_deref())
            .map_err(|e| Failure::new(Kind::Device, e))?;
        Ok((hearing, size))
    }

    fn measure(&self, folder: Option<&Path>) -> Result<Voice, Failure> {
        let (hearing, size) = self.open(folder)?;
        let with = |step: &str| !self.args.without.iter().any(|w| w == step);
        let how = How {
            steps: Steps {
                high_pass: with("high-pass"),
                level: with("level"),
                noise: with("noise"),
            },
            uncut: !with("cutting"),
        };
        measure::forget_peak();
        let device = |e| Failure::new(Kind::Device, e);
        let opening = measure::opening(&hearing, Context::Ohms).map_err(device)?;
        let mut measured = Measured::default();
        // Context by context: few are kept open.
        for context in Context::EVERY {
            for set in self.sets {
                for (label, condition) in self.args.conditions.iter().zip(self.conditions) {
                    let condition = (label.as_str(), *condition);
                    measure::hear(
                        &hearing,
                        context,
                        set,
                        condition,
                        self.noises,
                        how,
                        &mut measured,
                    )
                    .map_err(device)?;
                }
            }
        }
        let named = folder.map(|folder| folder.display().to_string());
        Ok(Voice {
            name: named.unwrap_or_else(|| "embedded".into()),
            opening,
            memory: measure::peak_memory(),
            size,
            measured,
        })
    }

    fn tell(&self, voice: &Voice, csv: &mut String) {
        let rows = &voice.measured.rows;
        for row in rows {
            csv.push_str(&line(&voice.name, row));
            if self.args.misses && missed(row) {
                println!(
                    "{}: {} `{}` heard `{}` ({:?}, {:.2})",
                    row.condition,
                    row.clip,
                    row.transcript,
                    row.heard,
                    row.outcome,
                    row.likeness()
                );
            }
        }
        let Limits { open, held } = Limits::default();
        println!(
            "\nVoice: {}\n\nMeant what was said, in % (came out right / asked about / wrong; else \
             nothing; open listening)\n\n{}\nOught to be nothing, at likeness {open} (open) and \
             {held} (held)\n\n{}",
            voice.name,
            tables::understood(rows, &self.args.conditions),
            tables::refused(rows, open, held)
        );
        let Measured {
            sound,
            decoded,
            cpu,
            ..
        } = voice.measured;
        println!(
            "opened in {} ms; real-time factor {:.4} of all sound ({sound:.0} s), {:.4} of \
             utterances ({decoded:.0} s); peak memory {:.0} MB{}",
            voice.opening.as_millis(),
            cpu / sound.max(0.1),
            cpu / decoded.max(0.1),
            voice.memory,
            voice.size.map_or_else(String::new, |bytes| format!(
                "; {:.1} MB on disk",
                bytes as f64 / 1e6
            )),
        );
    }
}

fn missed(row: &Row) -> bool {
    match row.outcome {
        Outcome::Right => false,
        Outcome::Nothing => row.ours,
        Outcome::Asked | Outcome::Wrong => true,
    }
}

const HEADER: &str = "voice,condition,set,trained,context,clip,half,ours,transcript,heard,understood,\
                      outcome,likeness,sounds,worse,lead,fill,pace,phones,loud,fillers,any,seconds\n";

fn line(voice: &str, row: &Row) -> String {
    let fit = row.fit.as_ref().filter(|fit| !fit.ways.is_empty());
    let figures = fit.map_or_else(
        || ",,,,,,,,,".to_owned(),
        |fit| {
            format!(
                "{:.3},{},{:.3},{:.3},{:.3},{:.4},{},{:.2},{},{:.2}",
                row.likeness(),
                fit.sounds(),
                fit.worse(),
                fit.lead.min(99.0),
                fit.fill(),
                fit.pace(),
                fit.phones,
                fit.loud,
                fit.fillers(),
                fit.anything.seconds
            )
        },
    );
    format!(
        "{voice},{},{},{},{},{},{},{},{},{},{},{:?},{figures},{:.2}\n",
        row.condition,
        row.set,
        row.trained,
        row.context.name(),
        row.clip,
        u8::from(row.judged()),
        row.ours,
        row.transcript,
        row.heard,
        row.understood,
        row.outcome,
        row.seconds
    )
}
