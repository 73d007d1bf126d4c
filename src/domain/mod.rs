//! The trade: quantities, the plan of a job, its tests, what to expect, what was found.
//!
//! Pure: everything here is a function of its arguments. It leaves out files, clocks and screens.

pub mod expect;
pub mod kept;
pub mod moment;
pub mod place;
pub mod plan;
pub mod reading;
pub mod record;
pub mod standing;
pub mod reminders;
pub mod sequence;
pub mod test;
pub mod words;
