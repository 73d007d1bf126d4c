//! Loudspeaker and ear as one edge of the session.
//!
//! Promises: without sound out or in everything else goes on, and one line says so; while the
//! loudspeaker sounds the ear is told. It leaves out how a text becomes sound and sound a meaning.

use std::sync::{Arc, atomic::AtomicBool};

use super::Voice;
use crate::{
    session::{Settings, Tone},
    speech::meaning::Context,
    voice::{
        ear::Ear,
        speaker::{self, Speaker},
    },
};

/// A loudspeaker, or none; an ear, or none.
pub struct Sound {
    speaker: Option<Speaker>,
    ear: Option<Ear>,
}

impl Sound {
    /// Opens the loudspeaker, unless the settings want text only; the second value says why there
    /// is none.
    #[must_use]
    pub fn start(settings: &Settings) -> (Self, Option<String>) {
        if settings.text_only || settings.volume == 0 {
            let silent = Self {
                speaker: None,
                ear: None,
            };
            return (silent, None);
        }
        match Speaker::open(f32::from(settings.volume) / 100.0) {
            Ok(speaker) => (
                Self {
                    speaker: Some(speaker),
                    ear: None,
                },
                None,
            ),
            Err(why) => {
                let silent = Self {
                    speaker: None,
                    ear: None,
                };
                (silent, Some(why.to_string()))
            }
        }
    }

    /// True while the tool itself can be heard.
    #[must_use]
    pub fn mouth(&self) -> Arc<AtomicBool> {
        self.speaker
            .as_ref()
            .map_or_else(Arc::default, Speaker::mouth)
    }

    /// Gives it an ear.
    pub fn listen_with(&mut self, ear: Ear) {
        self.ear = Some(ear);
    }
}

impl Voice for Sound {
    fn say(&mut self, text: &str) {
        if let Some(speaker) = &self.speaker {
            speaker.say(text);
        }
    }

    fn tone(&mut self, tone: Tone) {
        if let Some(speaker) = &self.speaker {
            speaker.tone(match tone {
                Tone::Listening => speaker::Tone::Listening,
                Tone::Understood => speaker::Tone::Understood,
                Tone::Refused => speaker::Tone::Refused,
                Tone::OutOfRange => speaker::Tone::OutOfRange,
                Tone::Saved => speaker::Tone::Saved,
            });
        }
    }

    fn listen(&mut self, context: Context) {
        if let Some(ear) = &self.ear {
            ear.listen_for(context);
        }
    }

    fn pause(&mut self, pause: bool) {
        // The ear stays open: "resume" must be heard, and the session takes nothing else meanwhile.
        if let (true, Some(speaker)) = (pause, &self.speaker) {
            speaker.hush();
        }
    }

    fn talk(&mut self) {
        // Whoever presses wants to speak: the tool falls silent for it.
        if let Some(speaker) = &self.speaker {
            speaker.hush();
        }
        if let Some(ear) = &self.ear {
            ear.once();
        }
    }
}
