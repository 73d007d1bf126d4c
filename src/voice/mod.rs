//! Sound in and out: microphone or recording to meaning, and prompts to the loudspeaker.
//!
//! The way in: `source` -> `front` (rate, level, voice activity) -> `recogniser` -> `speech`.
//! `build` makes the model folders the recogniser reads, `base` is the trained acoustic part,
//! `vosk_link` finds the library. It leaves out what the words mean and what is done with them.

pub mod adopt;
pub mod aloud;
pub mod base;
pub mod build;
pub mod ear;
pub mod front;
pub mod hearing;
pub mod measure;
pub mod quiet;
pub mod ready;
pub mod recogniser;
pub mod soundcheck;
pub mod source;
pub mod speaker;
pub mod vosk_link;
