//! The ear as an edge of the session: what it tells becomes events, utterances become clips.
//!
//! Promises: a microphone that goes away becomes an event, never an end; a clip that cannot be saved
//! costs the clip, not the reading. It leaves out how sound becomes meaning (`voice`).

use std::{
    path::PathBuf,
    sync::{
        Arc,
        atomic::AtomicBool,
        mpsc::{Receiver, Sender, channel},
    },
    thread,
};

use crate::{
    journal::clips::Clips,
    session::Event,
    speech::{Context, Phrases, lexicon::Lexicon},
    voice::{
        ear::{Ear, Opener, VoiceEvent},
        ready,
        source::{Source, microphone::Microphone, wav::Wav},
    },
};

/// Where the ear listens, and with which voice.
#[derive(Debug, Clone, Default)]
pub struct Where {
    /// A recording in place of the microphone, played at the pace of speech.
    pub wav: Option<PathBuf>,
    /// A microphone by its name; the default one when left out.
    pub microphone: Option<String>,
    /// A voice folder in place of the embedded voice.
    pub voice: Option<PathBuf>,
    /// Listens only when told to.
    pub hold_to_talk: bool,
}

/// Starts to listen; the ear ends when it is dropped.
///
/// # Errors
/// One line that begins with "keypad only": no recogniser, no voice, no such recording.
pub fn start(
    place: &Where,
    phrases: Arc<Phrases>,
    lexicon: &Lexicon,
    clips: Clips,
    mouth: Arc<AtomicBool>,
) -> Result<(Ear, Receiver<Event>), String> {
    let hearing =
        ready::ready(phrases, lexicon, place.voice.as_deref()).map_err(|e| e.to_string())?;
    if let Some(wav) = &place.wav {
        // Told now and once, not as a microphone that might come back.
        Wav::open(wav).map_err(|e| format!("keypad only: {e}"))?;
    }
    let (ear, told) = Ear::start(Arc::new(hearing), opener(place), Context::All, mouth);
    ear.hold_to_talk(place.hold_to_talk);
    let (send, events) = channel();
    thread::spawn(move || pass_on(&told, &send, &clips));
    Ok((ear, events))
}

fn opener(place: &Where) -> Opener {
    match (place.wav.clone(), place.microphone.clone()) {
        (Some(wav), _) => Box::new(move || {
            let wav = Wav::open(&wav).map_err(|e| e.to_string())?.paced();
            Ok(Box::new(wav) as Box<dyn Source>)
        }),
        (None, name) => Box::new(move || {
            let microphone = Microphone::open(name.as_deref()).map_err(|e| e.to_string())?;
            Ok(Box::new(microphone) as Box<dyn Source>)
        }),
    }
}

/// Until either end is gone.
fn pass_on(told: &Receiver<VoiceEvent>, send: &Sender<Event>, clips: &Clips) {
    let mut lost = false;
    for event in told {
        let event = match event {
            VoiceEvent::Level(level) => Event::Level(percent(level)),
            VoiceEvent::Speaking(on) => Event::Speaking(on),
            VoiceEvent::Heard(mut heard, samples) => {
                heard.clip = clips.save(&samples).ok().flatten().map(|saved| saved.file);
                Event::Heard(heard)
            }
            VoiceEvent::Lost(_) => {
                lost = true;
                Event::DeviceLost
            }
            VoiceEvent::Found(_) if lost => {
                lost = false;
                Event::DeviceFound
            }
            VoiceEvent::Found(_) => continue,
            VoiceEvent::Dropped(ms) => Event::SoundLost(ms),
            VoiceEvent::NoSpeech => Event::NoSpeech,
            VoiceEvent::Deaf(on) => Event::Deaf(on),
            VoiceEvent::Over => return,
        };
        if send.send(event).is_err() {
            return;
        }
    }
}

/// A level in dBFS as the meter shows it: -60 dB and less is 0, 0 dB is 100.
fn percent(level: f32) -> u8 {
    ((level + 60.0) / 60.0 * 100.0).clamp(0.0, 100.0) as u8
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_meter_runs_from_silence_to_full_scale() {
        for (level, shown) in [(-90.0, 0), (-60.0, 0), (-30.0, 50), (0.0, 100), (3.0, 100)] {
            assert_eq!(percent(level), shown, "{level} dBFS");
        }
    }
}
