//! `handsfull soundcheck`: try microphone and voice before work.
//!
//! Shows the level, has a dozen phrases said, tells how many were understood, which words were
//! missed and what to move; with a job, keeps that beside it.

use std::{
    fs::OpenOptions,
    io::{IsTerminal, Write},
    path::{Path, PathBuf},
    sync::{
        Arc,
        mpsc::{Receiver, RecvTimeoutError},
    },
    time::{Duration, Instant},
};

use clap::Args as ClapArgs;
use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};

use super::{
    failure::{Failure, Kind},
    own_words,
};
use crate::{
    speech::{Context, Heard, Meaning, Phrases, parse::same},
    voice::{
        ear::{Ear, Opener, VoiceEvent},
        ready,
        soundcheck::{PHRASES, SoundCheck, Try},
        source::{Source, microphone::Microphone, wav::Wav},
    },
};

/// Try microphone and voice before work
#[derive(Debug, ClapArgs)]
pub struct Args {
    /// Try the names of places of this job, too, and keep the outcome beside its file
    #[arg(long, value_name = "JOB")]
    job: Option<PathBuf>,
    /// The microphone, such as alsa:hw:1; the default one otherwise
    #[arg(long, value_name = "NAME")]
    microphone: Option<String>,
    /// A recording in place of the microphone
    #[arg(long, value_name = "FILE", conflicts_with = "microphone")]
    wav: Option<PathBuf>,
    /// Only show the level, for this many seconds
    #[arg(long, value_name = "SECONDS")]
    level: Option<u64>,
}

/// How long is waited for a phrase.
const PATIENCE: Duration = Duration::from_secs(10);
/// How often a phrase may be said; a recording says each once.
const TRIES: usize = 2;

/// Names of places that are tried.
const NAMES: usize = 6;

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(args: &Args) -> Result<(), Failure> {
    let job = args.job.as_deref().map(super::plan::read).transpose()?;
    let job = job.map(|loaded| loaded.job);
    let phrases = Arc::new(own_words::phrases(job.as_ref())?);
    let (lexicon, troubles) = own_words::pronounced(job.as_ref())?;
    for trouble in troubles {
        println!("{trouble}");
    }
    let hearing = ready::ready(Arc::clone(&phrases), &lexicon, None)
        .map_err(|e| Failure::new(Kind::Device, e))?;
    let open = opener(args)?;
    let (_ear, events) = Ear::start(Arc::new(hearing), open, Context::All, Arc::default());
    let mut desk = Desk::new(events, if args.wav.is_some() { 1 } else { TRIES });
    desk.wait_for_source()?;
    println!("Be silent for a moment.");
    desk.watch(Duration::from_secs(2));
    desk.floor = desk.quietest();
    if let Some(seconds) = args.level {
        println!("Speak; the meter shows the level.");
        desk.watch(Duration::from_secs(seconds));
        return Ok(());
    }
    let names = job.iter().flat_map(|job| &job.place_names);
    let names = names.map(|place| place.name.as_str()).take(NAMES);
    let all: Vec<&str> = PHRASES.into_iter().chain(names).collect();
    let check = desk.check(&all, &phrases);
    desk.meter.finish_and_clear();
    report(&check);
    match &args.job {
        Some(job) => keep(job, &check),
        None => Ok(()),
    }
}

fn opener(args: &Args) -> Result<Opener, Failure> {
    if let Some(path) = args.wav.clone() {
        // A bad file is told now rather than looked for again and again.
        Wav::open(&path).map_err(|e| Failure::new(Kind::Input, e))?;
        return Ok(Box::new(move || {
            let wav = Wav::open(&path).map_err(|e| e.to_string())?;
            Ok(Box::new(wav.paced()) as Box<dyn Source>)
        }));
    }
    let name = args.microphone.clone();
    Ok(Box::new(move || {
        let microphone = Microphone::open(name.as_deref()).map_err(|e| e.to_string())?;
        Ok(Box::new(microphone) as Box<dyn Source>)
    }))
}

/// The events of the ear, with the meter they move.
struct Desk {
    events: Receiver<VoiceEvent>,
    meter: ProgressBar,
    levels: Vec<f32>,
    floor: f32,
    over: bool,
    tries: usize,
}

impl Desk {
    fn new(events: Receiver<VoiceEvent>, tries: usize) -> Self {
        let target = if std::io::stderr().is_terminal() {
            ProgressDrawTarget::stderr()
        } else {
            ProgressDrawTarget::hidden()
        };
        let meter = ProgressBar::with_draw_target(Some(60), target);
        if let Ok(style) = ProgressStyle::with_template("[{bar:24}] {msg}") {
            meter.set_style(style.progress_chars("=> "));
        }
        Self {
            events,
            meter,
            levels: Vec::new(),
            floor: -60.0,
            over: false,
            tries,
        }
    }

    /// The next event within a time; the level moves the meter on the way.
    fn next(&mut self, until: Instant) -> Option<VoiceEvent> {
        loop {
            let left = until.checked_duration_since(Instant::now())?;
            match self.events.recv_timeout(left) {
                Ok(VoiceEvent::Level(level)) => {
                    self.levels.push(level);
                    self.meter
                        .set_position((level + 60.0).clamp(0.0, 60.0) as u64);
                    self.meter.set_message(format!("{level:.0} dB"));
                }
                Ok(VoiceEvent::Dropped(milliseconds)) => {
                    self.meter
                        .println(format!("{milliseconds} ms of sound were lost"));
                }
                Ok(VoiceEvent::Over) => self.over = true,
                Ok(event) => return Some(event),
                Err(RecvTimeoutError::Timeout) => return None,
                Err(RecvTimeoutError::Disconnected) => {
                    self.over = true;
                    return None;
                }
            }
        }
    }

    fn wait_for_source(&mut self) -> Result<(), Failure> {
        match self.next(Instant::now() + PATIENCE) {
            Some(VoiceEvent::Found(name)) => {
                println!("Microphone: {name}");
                Ok(())
            }
            Some(VoiceEvent::Lost(why)) => Err(Failure::new(Kind::Device, why)
                .hint("everything works from the keypad; plug a microphone in and try again")),
            _ => Err(Failure::new(Kind::Device, "the microphone does not answer")),
        }
    }

    fn watch(&mut self, how_long: Duration) {
        let until = Instant::now() + how_long;
        while !self.over && self.next(until).is_some() {}
    }

    fn quietest(&self) -> f32 {
        self.levels.iter().copied().fold(0.0, f32::min)
    }

    fn check(&mut self, all: &[&str], phrases: &Phrases) -> SoundCheck {
        let mut tries = Vec::new();
        for phrase in all {
            println!("Say: {phrase}");
            tries.push(self.one(phrase, phrases));
            if self.over {
                break;
            }
        }
        let mut levels = self.levels.clone();
        levels.sort_by(f32::total_cmp);
        // Speech fills a good part of the time; its loud tenths are near the top.
        let speech = levels
            .get(levels.len() * 95 / 100)
            .copied()
            .unwrap_or(-120.0);
        SoundCheck {
            floor: self.floor,
            speech,
            tries,
        }
    }

    fn one(&mut self, phrase: &str, phrases: &Phrases) -> Try {
        let due = phrases.understand(Context::All, phrase);
        let mut one = Try {
            phrase: phrase.to_owned(),
            heard: Vec::new(),
            understood: false,
        };
        while one.heard.len() < self.tries && !one.understood {
            let until = Instant::now() + PATIENCE;
            let heard = loop {
                match self.next(until) {
                    Some(VoiceEvent::Heard(heard, _)) => break heard,
                    Some(_) => {}
                    None => return one,
                }
            };
            one.understood = same(&heard.meaning, &due);
            println!("  {}", told(&heard, one.understood));
            one.heard.push(heard.words().to_owned());
        }
        one
    }
}

/// What was heard, and why it does not count when it does not.
fn told(heard: &Heard, understood: bool) -> String {
    let words = heard.words();
    if understood {
        return format!("ok: {words}");
    }
    let why = match &heard.meaning {
        Meaning::Nothing(why) if words.is_empty() => return format!("heard nothing: {why}"),
        Meaning::Nothing(why) => why.as_str(),
        Meaning::Ambiguous(_) => "close to another, it would be asked about",
        _ => return format!("heard: {words}"),
    };
    format!("heard: {words} ({why})")
}

fn report(check: &SoundCheck) {
    println!(
        "Understood {} of {} ({} at once). Room {:.0} dB, speech {:.0} dB.",
        check.understood(),
        check.tries.len(),
        check.at_once(),
        check.floor,
        check.speech
    );
    for line in check.advice() {
        println!("- {line}");
    }
}

/// Appends the outcome to `JOB.soundcheck.toml`.
fn keep(job: &Path, check: &SoundCheck) -> Result<(), Failure> {
    let path = job.with_extension("soundcheck.toml");
    let mut text = format!(
        "[[soundcheck]]\nat = \"{}\"\nroom-db = {:.0}\nspeech-db = {:.0}\nunderstood = {}\nof = {}\n",
        jiff::ZonedDateTime::now().strftime("%Y-%m-%dT%H:%M:%S%:z"),
        check.floor,
        check.speech,
        check.understood(),
        check.tries.len()
    );
    let missed: Vec<String> = check
        .missed_words()
        .iter()
        .map(|w| format!("\"{w}\""))
        .collect();
    text.push_str(&format!("missed = [{}]\n\n", missed.join(", ")));
    let written = OpenOptions::new()
        .create(true)
        .append(true)
        .open(&path)
        .and_then(|mut file| {
            file.write_all(text.as_bytes())
                .and_then(|()| file.sync_data())
        });
    written.map_err(|e| Failure::new(Kind::Log, format!("{}: {e}", path.display())))?;
    println!("Kept in {}.", path.display());
    Ok(())
}
