//! What the session asks of the trade, in one place: names only, no decisions.

pub(super) use crate::domain::{
    assess::assess,
    expected::expected,
    outlook::before_energising,
    reminders::{connections, reminders},
    sequence::{influenced_by, multiphase, required, works_in_the_way, works_needed},
};
