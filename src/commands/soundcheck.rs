//! `handsfull soundcheck`: try microphone and voice before work

use clap::Args as ClapArgs;

use super::failure::{Failure, Kind};

/// try microphone and voice before work
#[derive(Debug, ClapArgs)]
pub struct Args {}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(_args: &Args) -> Result<(), Failure> {
    Err(Failure::new(Kind::Usage, "`soundcheck` is being built"))
}
