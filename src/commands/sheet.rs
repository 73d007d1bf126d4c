//! `handsfull sheet`: write the schedule of results

use clap::Args as ClapArgs;

use super::failure::{Failure, Kind};

/// write the schedule of results
#[derive(Debug, ClapArgs)]
pub struct Args {}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(_args: &Args) -> Result<(), Failure> {
    Err(Failure::new(Kind::Usage, "`sheet` is being built"))
}
