//! `handsfull hear`: run recordings (or typed words) through the live pipeline, one JSON line each

use clap::Args as ClapArgs;

use super::failure::{Failure, Kind};

/// run recordings (or typed words) through the live pipeline, one JSON line each
#[derive(Debug, ClapArgs)]
pub struct Args {}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(_args: &Args) -> Result<(), Failure> {
    Err(Failure::new(Kind::Usage, "`hear` is being built"))
}
