//! The physics against the world: published cases, laws, libraries, and simulated faults.

mod cases;
mod command;
mod fault_bench;
mod faults;
mod jobs;
mod oracle;
mod properties;
mod ranges;
mod simulate;
