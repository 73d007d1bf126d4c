//! What a step asks the edges to do, as data.
//!
//! Promises: a step does nothing itself. A [`Record`] counts only after the journal answered with
//! `Event::Kept`. It leaves out how each effect is carried out.

use crate::{domain::record::Record, speech::meaning::Context};

/// Short tones, distinct by pitch and number, never the only sign.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Tone {
    /// Listening begins.
    Listening,
    /// Understood.
    Understood,
    /// Not understood, or refused here.
    Refused,
    /// Outside the expected range.
    OutOfRange,
    /// On disk.
    Saved,
}

impl Tone {
    /// Which of several tones of one step is sounded: the one that asks most of the tester.
    #[must_use]
    pub fn weight(self) -> u8 {
        match self {
            Tone::Listening => 0,
            Tone::Understood => 1,
            Tone::Saved => 2,
            Tone::Refused => 3,
            Tone::OutOfRange => 4,
        }
    }
}

/// One thing for an edge to do.
#[derive(Debug, Clone, PartialEq)]
pub enum Effect {
    /// The screen changed: render the state again.
    Show,
    /// Say this aloud; what was being said is dropped.
    Say(String),
    /// Sound a tone.
    Tone(Tone),
    /// Append to the journal and sync, then answer `Kept` or `NotKept`.
    Keep(Box<Record>),
    /// From now on these utterances may be expected.
    Listen(Context),
    /// Stop listening (true) or go on (false): standby.
    Pause(bool),
    /// Listen to one utterance now (hold-to-talk).
    Talk,
    /// End the program: everything affirmed is on disk.
    Quit,
}
