//! The field session as a pure state machine: an event in, a new state and effects out.
//!
//! Promises:
//! - nothing reaches the log unless it was read back and affirmed ([`Prompt::Confirm`]);
//! - a reading is taken only after its stage's reminders were acknowledged;
//! - a circuit closes only with its temporary works out;
//! - a record counts when the journal has answered, not before;
//! - every prompt can be left by the numeric keypad alone and by voice alone.
//!
//! The map: `event` and `effect` are the two ends; `prompt` is what can stand on the screen;
//! `keys` and `hear` turn an event into an act, `act` carries it out, `flow` chooses what comes
//! next, `keep` waits for the journal; `screen` and `transcript` show. It leaves out sound, files,
//! terminals and clocks: time comes with events.

mod act;
mod calls;
mod command;
mod dead;
pub mod effect;
mod entry;
pub mod event;
mod flow;
mod gates;
mod hear;
mod keep;
mod keys;
mod lists;
pub mod prompt;
pub mod screen;
pub mod settings;
mod state;
mod trade;
pub mod transcript;
mod utter;
pub mod wrap;

pub use effect::{Effect, Tone};
pub use event::{Event, Key, StopCause};
pub use prompt::Prompt;
pub use settings::Settings;
pub use state::{EarState, Setup, State, begin, step};
