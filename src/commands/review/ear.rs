//! The present voice as a function from a clip to what it hears.

use std::sync::Arc;

use super::{
    super::{
        failure::{Failure, Kind},
        logbook::Logbook,
        own_words,
    },
    clip::Ear,
};
use crate::{
    speech::Context,
    voice::{
        front::{Front, FrontEvent, activity::Settings, resample::RATE},
        ready,
    },
};

/// Opens the voice, with the job's own names of places as in the field.
///
/// # Errors
/// A [`Failure`] of kind device when there is no recogniser or no voice.
pub(super) fn open(book: &Logbook) -> Result<Box<Ear<'static>>, Failure> {
    let device = |e: &dyn std::fmt::Display| Failure::new(Kind::Device, e);
    let phrases = own_words::phrases(book.job.as_ref())?;
    // Sounds that cannot be used are guessed; the field told about them.
    let (lexicon, _told) = own_words::pronounced(book.job.as_ref())?;
    let hearing = ready::ready(Arc::new(phrases), &lexicon, None).map_err(|e| device(&e))?;
    Ok(Box::new(move |context: Context, samples: &[i16]| {
        let mut front = Front::new(RATE, Settings::default()).ok_or("16 kHz is not taken")?;
        // A clip is one utterance already: it goes in as if the talk key had been held.
        front.hold_to_talk(true);
        let mut events = Vec::new();
        front.press(&mut events);
        let sound: Vec<f32> = samples.iter().map(|s| f32::from(*s) / 32_768.0).collect();
        front.push(&sound, &mut events);
        front.finish(&mut events);
        let utterance = events.into_iter().find_map(|event| match event {
            FrontEvent::Utterance(utterance) => Some(utterance),
            _ => None,
        });
        let utterance = utterance.ok_or("the clip holds no sound")?;
        hearing.hear(context, &utterance).map_err(|e| e.to_string())
    }))
}
