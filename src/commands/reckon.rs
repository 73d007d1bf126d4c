//! `handsfull reckon`: answer a question of the trade without a job

use clap::Args as ClapArgs;

use super::failure::{Failure, Kind};

/// answer a question of the trade without a job
#[derive(Debug, ClapArgs)]
pub struct Args {}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(_args: &Args) -> Result<(), Failure> {
    Err(Failure::new(Kind::Usage, "`reckon` is being built"))
}
