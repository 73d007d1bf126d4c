//! `handsfull field`: work a job: next test, expected range, reading by voice or keypad

use clap::Args as ClapArgs;

use super::failure::{Failure, Kind};

/// work a job: next test, expected range, reading by voice or keypad
#[derive(Debug, ClapArgs)]
pub struct Args {}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(_args: &Args) -> Result<(), Failure> {
    Err(Failure::new(Kind::Usage, "`field` is being built"))
}
