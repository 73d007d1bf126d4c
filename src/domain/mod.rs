//! The trade: quantities, the plan of a job, its tests, what to expect, what was found.
//!
//! Pure: everything here is a function of its arguments. It leaves out files, clocks and screens.

pub mod assess;
pub mod conductor;
pub mod drop;
pub mod expect;
pub mod expected;
pub mod findings;
pub mod insulation;
pub mod kept;
pub mod layout;
pub mod loops;
pub mod moment;
pub mod network;
pub mod outlook;
pub mod place;
pub mod plan;
pub mod quantity;
pub mod range;
pub mod reading;
pub mod record;
pub mod reminders;
pub mod residual;
pub mod ring;
pub mod sequence;
pub mod standing;
pub mod temperature;
pub mod test;
pub mod words;
