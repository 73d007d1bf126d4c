//! handsfull: from an electrician's probes into a record one can trust, hands on the probes.
//!
//! The map, from the inside out (an arrow reads "is known by"):
//! `domain` -> `speech` -> `session`; `journal` and `report` know `domain` only; the edges
//! (`plan`, `voice`, `terminal`) know what they carry and never each other; `app` and `commands`
//! see everything.
//! `domain`, `speech` and `session` are pure: no file, clock, environment, thread or printing.

pub mod app;
pub mod commands;
pub mod domain;
pub mod journal;
pub mod plan;
pub mod rehearsal;
pub mod report;
pub mod session;
pub mod speech;
pub mod terminal;
pub mod voice;
