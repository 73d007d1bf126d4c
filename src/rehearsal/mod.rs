//! The demonstration: an invented job worked from recorded utterances through the field's loop.
//!
//! Promises: utterances go through front end, recogniser and meaning like a microphone's; the
//! player only acts the tester, who knows what the display shows, affirms that value and no other,
//! and repeats or keys it when it was heard wrongly. Nothing is taken from a list of results: with
//! another voice the session may go another way and still ends in a true log.
//! It leaves out the loop itself (`app`) and the recogniser (handed in).

pub mod player;
pub mod script;

/// The job file, invented.
pub const JOB: &str = include_str!("job.toml");
/// What the tester does, step by step.
pub const SCRIPT: &str = include_str!("script.toml");

macro_rules! clips {
    ($($name:literal),* $(,)?) => {
        /// Recorded utterances by name, as FLAC (16 kHz, mono).
        pub const CLIPS: &[(&str, &[u8])] = &[
            $(($name, include_bytes!(concat!("clips/", $name, ".flac")))),*
        ];
    };
}

clips!(
    "affirm",
    "bond",
    "circuit-one",
    "circuit-three",
    "correction",
    "done",
    "insulation",
    "lights",
    "lights-again",
    "lights-slam",
    "list-open",
    "measure-again",
    "negative",
    "r1r2-first",
    "r1r2-second",
    "r1r2-slip",
    "stop",
);

/// A recorded utterance.
#[must_use]
pub fn clip(name: &str) -> Option<&'static [u8]> {
    CLIPS
        .iter()
        .find(|(n, _)| *n == name)
        .map(|(_, flac)| *flac)
}
