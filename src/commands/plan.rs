//! `handsfull plan`: write, check or show a job file.
//!
//! It leaves out what a job means (the domain) and how its file is read (`crate::plan`).

mod check;
mod lay;
mod new;
mod say;
mod show;

use std::path::PathBuf;

use clap::{Args as ClapArgs, Subcommand};

use super::failure::{Failure, Kind};
use crate::plan::{self, Loaded, PlanError};

/// write, check or show a job file
#[derive(Debug, ClapArgs)]
pub struct Args {
    #[command(subcommand)]
    what: What,
}

#[derive(Debug, Subcommand)]
enum What {
    /// Ask for everything a job needs and write its file
    ///
    /// An empty answer takes what stands in brackets; `back` goes one question back. What was
    /// answered is kept in FILE.draft until the file is written, so Ctrl-C loses nothing: the same
    /// command goes on where it stopped. On a pipe it takes one answer a line.
    New {
        /// Where to write it
        file: PathBuf,
    },
    /// Say what is wrong with a job file, or what it holds
    Check {
        /// Job file
        file: PathBuf,
        /// Columns; the terminal's when left out
        #[arg(long, value_name = "COLUMNS")]
        width: Option<usize>,
        /// Also speak the places whose sounds were guessed or given (needs espeak-ng)
        #[arg(long)]
        say: bool,
        /// Write what is spoken to a new WAV file instead
        #[arg(long, value_name = "FILE", requires = "say")]
        to: Option<PathBuf>,
    },
    /// Show boards, circuits, their tests in order and what each should read
    Show {
        /// Job file
        file: PathBuf,
        /// Only this circuit: DB1/7
        #[arg(long, value_name = "BOARD/CIRCUIT")]
        circuit: Option<String>,
        /// Columns; the terminal's when left out
        #[arg(long, value_name = "COLUMNS")]
        width: Option<usize>,
    },
    /// Print a complete job file with comments, to start from
    Example,
}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(args: &Args) -> Result<(), Failure> {
    match &args.what {
        What::New { file } => new::run(file),
        What::Check {
            file,
            width,
            say,
            to,
        } => {
            let width = lay::width(*width);
            let job = check::run(file, width)?;
            if *say {
                say::run(&job, to.as_deref(), width)?;
            }
            Ok(())
        }
        What::Show {
            file,
            circuit,
            width,
        } => show::run(file, circuit.as_deref(), lay::width(*width)),
        What::Example => {
            lay::print(plan::EXAMPLE);
            Ok(())
        }
    }
}

/// Reads a job file; its mistakes become the failure's text.
pub(super) fn read(file: &std::path::Path) -> Result<Loaded, Failure> {
    plan::read(file).map_err(|wrong| {
        let failure = Failure::new(Kind::Input, &wrong);
        match wrong {
            PlanError::Unreadable { .. } => failure.hint(
                "`handsfull plan new FILE` makes a job file, `handsfull plan example` prints one",
            ),
            PlanError::Wrong { .. } => failure,
        }
    })
}
