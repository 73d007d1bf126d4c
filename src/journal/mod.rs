//! The log of a job: append-only TOML, each entry sealed and chained to the one before.
//!
//! Promises: an entry counts when one append and one sync have both succeeded, and only then does
//! [`Journal::append`] return its number; nothing that was appended is ever rewritten; whatever
//! does not hold is set aside or left where it is, and said. The format stands in `FORMAT.md`
//! beside this file. It leaves out what the entries mean (`domain::standing`) and how they are
//! shown (`report`). It knows `domain` only.

pub mod clips;
pub mod error;
pub mod inspect;
pub mod join;
mod lock;
mod medium;
pub mod places;
pub mod problem;
pub mod read;
mod recover;
pub mod replay;
mod scan;
mod store;
pub mod text;

pub use error::JournalError;
pub use inspect::{Inspection, inspect};
pub use places::Places;
pub use problem::{Problem, Trouble};
pub use read::{Chain, Item, Log, Reader};
pub use recover::{Recovery, whole};
pub use store::Journal;
