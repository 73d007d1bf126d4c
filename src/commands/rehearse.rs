//! `handsfull rehearse`: work an invented job from recorded utterances

use clap::Args as ClapArgs;

use super::failure::{Failure, Kind};

/// work an invented job from recorded utterances
#[derive(Debug, ClapArgs)]
pub struct Args {}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(_args: &Args) -> Result<(), Failure> {
    Err(Failure::new(Kind::Usage, "`rehearse` is being built"))
}
