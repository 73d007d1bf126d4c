//! `handsfull plan check --say`: the sounds guessed or given for a job's places, read aloud.
//!
//! Promises: one line says what is spoken; what cannot be spoken is said in one line, after the
//! sounds stood on the screen. It leaves out how sounds become sound (`voice::aloud`).

use std::{
    fs::File,
    io::BufWriter,
    path::Path,
    thread,
    time::{Duration, Instant},
};

use hound::{SampleFormat, WavSpec, WavWriter};

use super::{super::own_words, Failure, Kind, lay};
use crate::{
    app::settings,
    domain::plan::Job,
    voice::{
        aloud::{self, Spoken},
        speaker::{Speaker, clips},
    },
};

/// Silence after each name, in parts of a second.
const PAUSE: u32 = 2;

/// Speaks them, or writes them to a new WAV file.
pub(super) fn run(job: &Job, to: Option<&Path>, width: usize) -> Result<(), Failure> {
    let mut all: Option<Spoken> = None;
    let mut names = Vec::new();
    for name in &job.place_names {
        let Some(sounds) = own_words::unsure(name)? else {
            continue;
        };
        let mut one = aloud::spoken(&sounds)
            .map_err(|e| Failure::new(Kind::Device, format!("{e}; the sounds stand above")))?;
        one.samples
            .extend(std::iter::repeat_n(0, (one.rate / PAUSE) as usize));
        names.push(format!("\"{}\"", name.name));
        match &mut all {
            Some(all) => all.samples.extend(one.samples),
            None => all = Some(one),
        }
    }
    let Some(sound) = all else {
        lay::print("Nothing to say: no sounds are guessed or given.\n");
        return Ok(());
    };
    let what = names.join(", ");
    match to {
        Some(file) => {
            write(&sound, file)?;
            lay::print(&lay::wrapped(
                &format!("Spoken into {}: {what}.", file.display()),
                0,
                width,
            ));
        }
        None => {
            let (settings, _) = settings::load().map_err(|e| Failure::new(Kind::Input, e))?;
            let speaker = Speaker::open(1.0).map_err(|e| {
                Failure::new(
                    Kind::Device,
                    format!("no sound out ({}); --to FILE.wav writes it", e.0),
                )
            })?;
            lay::print(&lay::wrapped(&format!("Speaking: {what}."), 0, width));
            play(&speaker, &sound, f32::from(settings.volume) / 100.0);
        }
    }
    Ok(())
}

/// Plays to the end, or as long as it would take: a device that stalls must not hold the command.
fn play(speaker: &Speaker, sound: &Spoken, volume: f32) {
    let samples = sound.for_speaker();
    let length = Duration::from_secs_f32(samples.len() as f32 / clips::RATE as f32);
    speaker.play(samples.into_iter().map(|s| s * volume));
    let end = Instant::now() + length + Duration::from_secs(2);
    while speaker.sounding() && Instant::now() < end {
        thread::sleep(Duration::from_millis(20));
    }
}

/// Writes a new file; one that is there is never written over.
fn write(sound: &Spoken, path: &Path) -> Result<(), Failure> {
    let failed = |why: String| {
        Failure::new(
            Kind::Input,
            format!("{}: cannot be written: {why}", path.display()),
        )
    };
    let spec = WavSpec {
        channels: 1,
        sample_rate: sound.rate,
        bits_per_sample: 16,
        sample_format: SampleFormat::Int,
    };
    let file = File::create_new(path).map_err(|e| failed(e.to_string()))?;
    let mut out = WavWriter::new(BufWriter::new(file), spec).map_err(|e| failed(e.to_string()))?;
    for sample in &sound.samples {
        out.write_sample(*sample)
            .map_err(|e| failed(e.to_string()))?;
    }
    out.finalize().map_err(|e| failed(e.to_string()))
}
