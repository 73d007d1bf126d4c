//! Everything that can happen to a session, as one closed type.
//!
//! Promises: time, sound, keys and the journal's answers reach the session through [`Event`] only,
//! so that a recorded list of events replays a whole day. It leaves out where events come from.

use crate::{domain::record::EntryNo, speech::meaning::Heard};

/// One key, after remapping. The first eight kinds are the numeric keypad and reach everything;
/// the rest are a convenience.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Key {
    /// `0` to `9`.
    Digit(u8),
    /// The decimal point.
    Point,
    /// Enter.
    Enter,
    /// `+`
    Plus,
    /// `-`
    Minus,
    /// `*`
    Star,
    /// `/`
    Slash,
    /// Rubs out the last character typed.
    Erase,
    /// Leaves what lies over the prompt (escape).
    Leave,
    /// Listens to one utterance (hold-to-talk).
    Talk,
    /// A letter, in lower case, or `?`.
    Letter(char),
    /// The end of a line of keys, where keys come in lines: enter where a figure is being typed,
    /// nothing anywhere else, so that picking a line never affirms what comes after it.
    LineEnd,
}

/// Why the session is asked to end from outside.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum StopCause {
    /// The battery or the system asks programs to end (TERM).
    Power,
    /// The terminal went away (HUP).
    HangUp,
    /// The end of scripted input.
    EndOfInput,
}

/// What can happen.
#[derive(Debug, Clone, PartialEq)]
pub enum Event {
    /// A key.
    Key(Key),
    /// An utterance, decoded and decided.
    Heard(Heard),
    /// Milliseconds since the session began.
    Tick(u64),
    /// Input level, 0 to 100.
    Level(u8),
    /// Somebody is speaking now, or no longer.
    Speaking(bool),
    /// The tool itself sounds, or no longer: what is said meanwhile is not listened to.
    Deaf(bool),
    /// Milliseconds of sound that were lost because the machine was too slow.
    SoundLost(u64),
    /// Something began like speech and was too short to be any.
    NoSpeech,
    /// The microphone is gone.
    DeviceLost,
    /// The microphone is back.
    DeviceFound,
    /// The wall clock jumped; how, in words.
    ClockChanged(String),
    /// So long has passed, asleep or by the clock, that isolation must be proved again.
    LeftLong,
    /// The session is asked to end.
    Stop(StopCause),
    /// The terminal was resized or the program continued: show again.
    Redraw,
    /// The journal holds the record, on disk, under this number.
    Kept(EntryNo),
    /// The journal could not keep it; the reason.
    NotKept(String),
}
