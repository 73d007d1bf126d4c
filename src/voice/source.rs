//! Where sound comes from: one trait over microphone, recording, paced recording and silence.
//!
//! It promises that a broken recording is told about in one line and that what could be read of it
//! is still delivered. It leaves out every treatment of the sound (`front`).

pub mod microphone;
pub mod wav;

/// What a source gave.
#[derive(Debug, Clone, PartialEq)]
pub enum Piece {
    /// Mono sound, -1 to 1, at the source's rate.
    Sound(Vec<f32>),
    /// Nothing yet; ask again.
    Nothing,
    /// The end of a recording.
    End,
    /// The source is gone or broken; the text says how.
    Lost(String),
}

/// A source of sound.
pub trait Source {
    /// Its rate in hertz.
    fn rate(&self) -> u32;
    /// The next piece; waits a tenth of a second at the most.
    fn read(&mut self) -> Piece;
    /// Samples lost since this was last asked, because nobody fetched them in time.
    fn dropped(&mut self) -> u64 {
        0
    }
    /// What to call it.
    fn name(&self) -> String;
}
