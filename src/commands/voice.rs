//! `handsfull voice`: build, show or adopt a voice

use clap::Args as ClapArgs;

use super::failure::{Failure, Kind};

/// build, show or adopt a voice
#[derive(Debug, ClapArgs)]
pub struct Args {}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(_args: &Args) -> Result<(), Failure> {
    Err(Failure::new(Kind::Usage, "`voice` is being built"))
}
