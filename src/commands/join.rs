//! `handsfull join`: merge the logs of several handhelds on one job

use clap::Args as ClapArgs;

use super::failure::{Failure, Kind};

/// merge the logs of several handhelds on one job
#[derive(Debug, ClapArgs)]
pub struct Args {}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(_args: &Args) -> Result<(), Failure> {
    Err(Failure::new(Kind::Usage, "`join` is being built"))
}
