//! Clips at the van: heard once more, written out, run through the present voice.

use std::{
    path::Path,
    thread,
    time::{Duration, Instant},
};

use super::{
    super::{
        failure::{Failure, Kind},
        logbook::Logbook,
    },
    no_value, print,
};
use crate::{
    domain::{
        kept::Value,
        reading::Unit,
        record::{ReadingKept, Record},
        standing::value_of,
        test::Target,
    },
    journal::clips::{ClipError, Clips, Keeping, RATE},
    report::words,
    speech::meaning::{Context, Control, Heard, Meaning},
    voice::speaker::{Speaker, clips::RATE as SPEAKER_RATE},
};

fn clips(book: &Logbook) -> Clips {
    Clips::new(book.inspection.places.clips(), Keeping::default())
}

fn failure(error: &ClipError) -> Failure {
    let failure = Failure::new(Kind::Input, error);
    match error {
        ClipError::Io { source, .. } if source.kind() == std::io::ErrorKind::NotFound => {
            failure.hint("clips go by age and size; the words heard are still in the log")
        }
        _ => failure,
    }
}

/// The samples of a reading's clip.
fn load(book: &Logbook, reading: &ReadingKept) -> Option<Result<Vec<i16>, ClipError>> {
    let file = reading.clip.as_deref()?;
    Some(clips(book).load(file, reading.clip_digest.as_deref()))
}

/// Plays the clip of an entry, or writes it as a WAV file.
pub(super) fn play(book: &Logbook, no: u64, to: Option<&Path>) -> Result<(), Failure> {
    let Some(entry) = book.inspection.log.entry(no) else {
        return Err(book.no_entry(no));
    };
    let Record::Reading(reading) = &entry.record else {
        return Err(no_value(book, no));
    };
    let samples = match load(book, reading) {
        Some(samples) => samples.map_err(|e| failure(&e))?,
        None => {
            return Err(Failure::new(Kind::Input, format!("entry {no} has no clip"))
                .hint("clips are kept of spoken readings, unless they are switched off"));
        }
    };
    let Some(to) = to else {
        return aloud(reading, &samples);
    };
    write_wav(to, &samples).map_err(|e| {
        Failure::new(
            Kind::Input,
            format!("{}: cannot be written: {e}", to.display()),
        )
    })?;
    let seconds = samples.len() as f64 / f64::from(RATE);
    print(&format!(
        "{}: {seconds:.1} s, heard as \"{}\"\n",
        to.display(),
        reading.heard.as_deref().unwrap_or_default()
    ))
}

/// Plays samples and waits until they have sounded.
fn aloud(reading: &ReadingKept, samples: &[i16]) -> Result<(), Failure> {
    let speaker = Speaker::open(1.0).map_err(|e| {
        Failure::new(Kind::Device, e).hint("--to FILE writes the clip as WAV instead")
    })?;
    print(&format!(
        "heard as \"{}\"\n",
        reading.heard.as_deref().unwrap_or_default()
    ))?;
    debug_assert_eq!(RATE, SPEAKER_RATE, "both are 16 kHz");
    speaker.play(samples.iter().map(|s| f32::from(*s) / 32_768.0));
    // A device that stops taking sound must not hold the review up for ever.
    let seconds = samples.len() as f64 / f64::from(RATE) + 2.0;
    let until = Instant::now() + Duration::from_secs_f64(seconds);
    while speaker.sounding() && Instant::now() < until {
        thread::sleep(Duration::from_millis(20));
    }
    Ok(())
}

fn write_wav(path: &Path, samples: &[i16]) -> Result<(), hound::Error> {
    let spec = hound::WavSpec {
        channels: 1,
        sample_rate: RATE,
        bits_per_sample: 16,
        sample_format: hound::SampleFormat::Int,
    };
    let mut out = hound::WavWriter::create(path, spec)?;
    for sample in samples {
        out.write_sample(*sample)?;
    }
    out.finalize()
}

/// What the present voice hears in a clip, or why it cannot be asked.
pub(super) type Ear<'a> = dyn Fn(Context, &[i16]) -> Result<Heard, String> + 'a;

/// Runs every clip through the present voice; shows where it hears something else than what was
/// kept. Nothing is changed: a value that was affirmed stands, whatever is heard today.
pub(super) fn listen_again(book: &Logbook, ear: &Ear) -> Result<(), Failure> {
    let clips = clips(book);
    let mut tally = Tally::default();
    for entry in &book.inspection.log.entries {
        let Record::Reading(reading) = &entry.record else {
            continue;
        };
        let Some(file) = &reading.clip else { continue };
        match clips.load(file, reading.clip_digest.as_deref()) {
            Err(ClipError::Io { source, .. }) if source.kind() == std::io::ErrorKind::NotFound => {
                tally.gone += 1;
            }
            Err(e) => print(&format!("#{} {e}\n", entry.no))?,
            Ok(samples) => {
                let heard = ear(context_of(&reading.target), &samples)
                    .map_err(|e| Failure::new(Kind::Device, e))?;
                tally.heard += 1;
                if let Some(line) = differs(reading, &heard) {
                    tally.differ += 1;
                    print(&format!("#{} {}: {line}\n", entry.no, reading.target))?;
                }
            }
        }
    }
    print(&format!(
        "{} clips heard again, {} heard differently from what was kept, {} no longer there\n",
        tally.heard, tally.differ, tally.gone
    ))
}

#[derive(Default)]
struct Tally {
    heard: usize,
    differ: usize,
    gone: usize,
}

/// What may be said where this test is read.
fn context_of(target: &Target) -> Context {
    match target.test.unit() {
        None => Context::Tick,
        Some(Unit::Ohm) => Context::Ohms,
        Some(Unit::Megohm) => Context::Insulation,
        Some(_) => Context::Live,
    }
}

/// The difference in words; `None` when today's hearing gives the value that was kept.
fn differs(reading: &ReadingKept, heard: &Heard) -> Option<String> {
    // By their text: 0.50 and 0.5 are equal numbers and different readings.
    let kept = value_of(reading).map(|kept| words::value(&kept));
    let own = reading.target.test.unit();
    let said = |meaning: &Meaning| match meaning {
        Meaning::Reading(now) => {
            let now = match own {
                Some(unit) => now.clone().or_unit(unit),
                None => now.clone(),
            };
            Some(now.to_string())
        }
        Meaning::Control(Control::Confirmed) => Some(words::value(&Value::Ticked(true))),
        Meaning::Control(Control::NotConfirmed) => Some(words::value(&Value::Ticked(false))),
        _ => None,
    };
    let meaning = match &heard.meaning {
        // "Correction zero point five" says the value too.
        Meaning::Control(Control::Correction(Some(corrected))) => corrected,
        other => other,
    };
    let now = match meaning {
        Meaning::Ambiguous(all) if all.iter().any(|one| said(one) == kept) => {
            format!("{} meanings, the kept one among them", all.len())
        }
        Meaning::Ambiguous(all) => format!("{} meanings, none of them the kept one", all.len()),
        Meaning::Nothing(why) => format!("nothing ({why})"),
        one => match said(one) {
            now if now == kept => return None,
            Some(now) => now,
            None => "no reading".into(),
        },
    };
    let text = words::raw(&reading.value, reading.unit.as_deref());
    Some(format!(
        "kept {text}, heard now \"{}\": {now}",
        heard.words()
    ))
}

#[cfg(test)]
#[path = "clip_tests.rs"]
mod tests;
