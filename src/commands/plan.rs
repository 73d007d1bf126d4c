//! `handsfull plan`: write, check or show a job file

use clap::Args as ClapArgs;

use super::failure::{Failure, Kind};

/// write, check or show a job file
#[derive(Debug, ClapArgs)]
pub struct Args {}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(_args: &Args) -> Result<(), Failure> {
    Err(Failure::new(Kind::Usage, "`plan` is being built"))
}
