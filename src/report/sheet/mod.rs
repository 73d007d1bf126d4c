//! The schedule of results: what was measured, against which range, what is open, for a signature.
//!
//! Promises: every value of the log that counts is in it with its qualifier, its range, its limit
//! and where the limit comes from; sources that were not checked against the standard are marked;
//! it never says more of an installation than what was measured. HTML for paper, CSV and JSON for
//! other programs; all three say the same. It leaves out where they are written.

mod build;
mod cells;
pub mod csv;
pub mod html;
pub mod json;
pub mod model;
mod plan_words;
mod plot;

pub use build::schedule;
pub use model::Schedule;
