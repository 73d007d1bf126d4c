//! The loudspeaker as an edge of the session.
//!
//! Promises: without sound out everything else goes on, and one line says so. It leaves out how a
//! text becomes sound.

use super::Voice;
use crate::{
    session::{Settings, Tone},
    voice::speaker::{self, Speaker},
};

/// A loudspeaker, or none.
pub struct Sound {
    speaker: Option<Speaker>,
}

impl Sound {
    /// Opens the loudspeaker, unless the settings want text only; the second value says why there
    /// is none.
    #[must_use]
    pub fn start(settings: &Settings) -> (Self, Option<String>) {
        if settings.text_only || settings.volume == 0 {
            return (Self { speaker: None }, None);
        }
        match Speaker::open(f32::from(settings.volume) / 100.0) {
            Ok(speaker) => (
                Self {
                    speaker: Some(speaker),
                },
                None,
            ),
            Err(why) => (Self { speaker: None }, Some(why.to_string())),
        }
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

    fn pause(&mut self, pause: bool) {
        if let (true, Some(speaker)) = (pause, &self.speaker) {
            speaker.hush();
        }
    }
}
