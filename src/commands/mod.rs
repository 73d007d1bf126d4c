//! One file a command; arguments as typed, then what they mean.

pub mod failure;
pub mod field;
pub mod hear;
pub mod join;
mod logbook;
mod own_words;
pub mod plan;
pub mod reckon;
pub mod rehearse;
pub mod review;
pub mod sheet;
pub mod soundcheck;
pub mod verify;
pub mod voice;

use std::process::ExitCode;

use clap::{Parser, Subcommand};

/// Voice and keypad field assistant for dead verification of low-voltage installations.
///
/// It tells the next test and the range to expect, takes the reading by voice or keypad, reads it
/// back and keeps it in the job's log. It is not a safety device: local rules and competent
/// persons decide.
#[derive(Debug, Parser)]
#[command(name = "handsfull", version, disable_help_subcommand = true)]
struct Cli {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Write, check or show a job file
    Plan(plan::Args),
    /// Work a job: next test, expected range, reading by voice or keypad
    Field(field::Args),
    /// Work an invented job from recorded utterances
    Rehearse(rehearse::Args),
    /// Run recordings or typed words through the live pipeline, one JSON line each
    Hear(hear::Args),
    /// Answer a question of the trade without a job
    Reckon(reckon::Args),
    /// Show what was kept, how it got there, and what is open
    Review(review::Args),
    /// Write the schedule of results
    Sheet(sheet::Args),
    /// Say what holds of a job's log
    Verify(verify::Args),
    /// Merge the logs of several handhelds on one job
    Join(join::Args),
    /// Build, show or adopt a voice
    Voice(voice::Args),
    /// Try microphone and voice before work
    Soundcheck(soundcheck::Args),
}

/// Parses the command line, runs the command, prints its error, gives its exit code.
#[must_use]
pub fn main() -> ExitCode {
    let cli = Cli::parse();
    let done = match &cli.command {
        Command::Plan(args) => plan::run(args),
        Command::Field(args) => field::run(args),
        Command::Rehearse(args) => rehearse::run(args),
        Command::Hear(args) => hear::run(args),
        Command::Reckon(args) => reckon::run(args),
        Command::Review(args) => review::run(args),
        Command::Sheet(args) => sheet::run(args),
        Command::Verify(args) => verify::run(args),
        Command::Join(args) => join::run(args),
        Command::Voice(args) => voice::run(args),
        Command::Soundcheck(args) => soundcheck::run(args),
    };
    match done {
        Ok(()) => ExitCode::SUCCESS,
        Err(failure) => {
            eprintln!("{failure}");
            failure.code()
        }
    }
}
