//! `handsfull verify`: say what holds of a job's log

use clap::Args as ClapArgs;

use super::failure::{Failure, Kind};

/// say what holds of a job's log
#[derive(Debug, ClapArgs)]
pub struct Args {}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(_args: &Args) -> Result<(), Failure> {
    Err(Failure::new(Kind::Usage, "`verify` is being built"))
}
