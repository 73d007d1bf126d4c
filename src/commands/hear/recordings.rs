//! The WAV half of `hear`: every recording through exactly what a microphone goes through.
//!
//! It promises a JSON line for every file, in order, also for one that cannot be read (with the
//! reason), whatever the others are; each trouble is one line on standard error too.

use std::{
    path::{Path, PathBuf},
    sync::Arc,
};

use super::{
    super::{
        failure::{Failure, Kind},
        voice::lexicon,
    },
    json,
};
use crate::{
    speech::{Context, Heard, Meaning, Phrases},
    voice::{
        front::{Front, FrontEvent, activity::Settings},
        hearing::Hearing,
        ready,
        recogniser::RecogniserError,
        source::{Piece, Source, wav::Wav},
    },
};

/// Seconds of a recording that are heard: an utterance is no lecture.
const LONGEST: f64 = 600.0;

/// Hears recordings and prints a line each.
///
/// # Errors
/// A [`Failure`] of kind device when there is no recogniser, of kind input when some file could
/// not be heard whole.
pub(super) fn hear(
    context: Context,
    voice: Option<&Path>,
    files: &[PathBuf],
) -> Result<(), Failure> {
    let device = |e: &dyn std::fmt::Display| Failure::new(Kind::Device, e);
    let phrases = Phrases::with_places(&[]).map_err(|e| Failure::new(Kind::Input, e))?;
    let hearing = ready::ready(Arc::new(phrases), &lexicon()?, voice).map_err(|e| device(&e))?;
    hearing.prepare(context).map_err(|e| device(&e))?;
    let mut troubled = 0;
    for file in files {
        let (all, trouble) = recording(&hearing, context, file).map_err(|e| device(&e))?;
        if let Some(trouble) = &trouble {
            eprintln!("handsfull: {trouble}");
            troubled += 1;
        }
        let (heard, more) = first_meaning(all, trouble.as_deref());
        let name = file.display().to_string();
        println!(
            "{}",
            json::line_with_more(&[("file", &name)], &heard, &more)
        );
    }
    match troubled {
        0 => Ok(()),
        1 => Err(Failure::new(
            Kind::Input,
            "1 recording could not be heard whole",
        )),
        n => Err(Failure::new(
            Kind::Input,
            format!("{n} recordings could not be heard whole"),
        )),
    }
}

/// Every utterance of a recording, and what is wrong with the recording.
fn recording(
    hearing: &Hearing,
    context: Context,
    file: &Path,
) -> Result<(Vec<Heard>, Option<String>), RecogniserError> {
    let mut wav = match Wav::open(file) {
        Ok(wav) => wav,
        Err(error) => return Ok((Vec::new(), Some(error.to_string()))),
    };
    let Some(mut front) = Front::new(wav.rate(), Settings::default()) else {
        let trouble = format!("{}: {} samples a second", file.display(), wav.rate());
        return Ok((Vec::new(), Some(trouble)));
    };
    let mut trouble = None;
    let mut all = Vec::new();
    let mut samples = 0;
    loop {
        let mut events = Vec::new();
        let over = match wav.read() {
            Piece::Sound(sound) => {
                samples += sound.len();
                front.push(&sound, &mut events);
                samples as f64 > LONGEST * f64::from(wav.rate())
            }
            Piece::Nothing => false,
            Piece::End => true,
            Piece::Lost(why) => {
                trouble = Some(why);
                true
            }
        };
        if over {
            front.finish(&mut events);
        }
        for event in events {
            if let FrontEvent::Utterance(utterance) = event {
                all.push(hearing.hear(context, &utterance)?);
            }
        }
        if over {
            break;
        }
    }
    if trouble.is_none() && wav.seconds() > LONGEST + 1.0 && samples as f64 > LONGEST {
        trouble = Some(format!(
            "{}: lasts {:.0} minutes; only the first {:.0} were heard",
            file.display(),
            wav.seconds() / 60.0,
            LONGEST / 60.0
        ));
    }
    Ok((all, trouble))
}

/// The first utterance that has a meaning decides; the others follow in their order.
fn first_meaning(mut all: Vec<Heard>, trouble: Option<&str>) -> (Heard, Vec<Heard>) {
    if all.is_empty() {
        let why = trouble.unwrap_or("nobody spoke in it");
        let heard = Heard {
            hypotheses: Vec::new(),
            meaning: Meaning::Nothing(why.to_owned()),
            clip: None,
        };
        return (heard, all);
    }
    let at = all
        .iter()
        .position(|heard| !matches!(heard.meaning, Meaning::Nothing(_)))
        .unwrap_or_default();
    let heard = all.remove(at);
    (heard, all)
}
