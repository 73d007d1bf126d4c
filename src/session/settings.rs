//! What the tester may set for the session.
//!
//! Pure data with its defaults; reading the settings file is the edge's business.

/// Settings of a session.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Settings {
    /// Loudness of the read-back, 0 to 100.
    pub volume: u8,
    /// No sound out at all.
    pub text_only: bool,
    /// Clips of utterances are kept beside the log.
    pub keep_clips: bool,
    /// A key opens the microphone for one utterance; otherwise it is open all the time.
    pub hold_to_talk: bool,
}

impl Default for Settings {
    fn default() -> Self {
        Self {
            volume: 80,
            text_only: false,
            keep_clips: true,
            hold_to_talk: false,
        }
    }
}
