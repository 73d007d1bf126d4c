//! `handsfull review`: show what was kept, how it got there, and what is open

use clap::Args as ClapArgs;

use super::failure::{Failure, Kind};

/// show what was kept, how it got there, and what is open
#[derive(Debug, ClapArgs)]
pub struct Args {}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(_args: &Args) -> Result<(), Failure> {
    Err(Failure::new(Kind::Usage, "`review` is being built"))
}
