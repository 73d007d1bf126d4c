//! Clips at the van: heard once more, written out, run through the present voice.

use std::path::Path;

use super::{
    super::{
        failure::{Failure, Kind},
        logbook::Logbook,
    },
    no_value, print,
};
use crate::{
    domain::record::{ReadingKept, Record},
    journal::clips::{ClipError, Clips, Keeping, RATE},
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
        return Err(
            Failure::new(Kind::Device, "clips cannot be played here yet")
                .hint("--to FILE writes the clip as WAV"),
        );
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

/// Runs every clip through the present voice.
pub(super) fn listen_again(_book: &Logbook) -> Result<(), Failure> {
    Err(Failure::new(Kind::Device, "no voice is built in yet"))
}
