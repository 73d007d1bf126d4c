//! `handsfull review`: show what was kept, how it got there, and what is open; amend and note.

mod amend;
mod clip;
mod ear;
mod pager;

use std::{io::IsTerminal, path::PathBuf};

use clap::{Args as ClapArgs, ValueEnum};

use super::{
    failure::{Failure, Kind},
    logbook::{self, Logbook},
};
use crate::report::review::{self, Filter, Order};

/// Show what was kept, how it got there, and what is open
///
/// Without an option: circuit by circuit, in working order. Values that were corrected stay listed
/// below the one that counts. Amendments and notes are new entries of the log; nothing is
/// overwritten.
#[derive(Debug, ClapArgs)]
pub struct Args {
    /// Job file (NAME.toml) or its log (NAME.log.toml)
    job: PathBuf,
    /// In which order
    #[arg(long, value_enum, default_value_t = By::Circuit)]
    by: By,
    /// What was heard against what was kept, value by value
    #[arg(long, conflicts_with = "by")]
    spoken: bool,
    /// Only values that were corrected, amended or replaced
    #[arg(long)]
    corrections: bool,
    /// Only values that are not within the expected range
    #[arg(long)]
    out_of_range: bool,
    /// Only values heard with a margin below this
    #[arg(long, value_name = "BELOW", num_args = 0..=1, default_missing_value = "5")]
    low_margin: Option<f64>,
    /// Only values keyed in
    #[arg(long)]
    keypad: bool,
    /// Play the clip of this entry (or write it with --to)
    #[arg(long, value_name = "ENTRY")]
    play: Option<u64>,
    /// Write the clip of --play to this WAV file instead of playing it
    #[arg(long, value_name = "FILE", requires = "play")]
    to: Option<PathBuf>,
    /// Run every clip through the present voice; show where today's hearing differs from the value
    /// kept
    #[arg(long)]
    listen_again: bool,
    /// Amend the value of this entry: asks for value, reason and name, unless they are given
    #[arg(long, value_name = "ENTRY", conflicts_with_all = ["play", "listen_again"])]
    amend: Option<u64>,
    /// Amend: the right value, such as 0.85, ">299", "1.2 kΩ", open, yes, no
    #[arg(long, requires = "amend", allow_hyphen_values = true)]
    value: Option<String>,
    /// Amend: why
    #[arg(long, requires = "amend")]
    reason: Option<String>,
    /// Enter a note
    #[arg(long, value_name = "TEXT", conflicts_with_all = ["play", "listen_again", "amend"])]
    note: Option<String>,
    /// Note: about the test of this entry
    #[arg(long, value_name = "ENTRY", requires = "note")]
    about: Option<u64>,
    /// Amend or note: who
    #[arg(long, value_name = "NAME")]
    name: Option<String>,
}

/// The orders a review can have.
#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
enum By {
    /// Target by target, in working order
    Circuit,
    /// Entry by entry
    Time,
}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(args: &Args) -> Result<(), Failure> {
    let book = Logbook::open(&args.job)?;
    if let Some(no) = args.amend {
        return amend::value(&book, no, args);
    }
    if let Some(text) = &args.note {
        return amend::note(&book, text, args);
    }
    if let Some(no) = args.play {
        return clip::play(&book, no, args.to.as_deref());
    }
    if args.listen_again {
        let ear = ear::open(&book)?;
        return clip::listen_again(&book, &*ear);
    }
    let order = match args.by {
        _ if args.spoken => Order::Spoken,
        By::Circuit => Order::Circuit,
        By::Time => Order::Time,
    };
    let filter = Filter {
        corrections: args.corrections,
        out_of_range: args.out_of_range,
        low_margin: args.low_margin,
        keypad: args.keypad,
    };
    let text = review::review(&book.material(), order, &filter, width());
    pager::show(&text)
}

/// Columns of the screen; for a pipe those asked for by `COLUMNS`, or 80.
fn width() -> usize {
    if std::io::stdout().is_terminal()
        && let Ok((columns, _)) = crossterm::terminal::size()
        && columns > 0
    {
        return usize::from(columns);
    }
    std::env::var("COLUMNS")
        .ok()
        .and_then(|columns| columns.parse().ok())
        .filter(|columns| *columns > 0)
        .unwrap_or(80)
}

/// The one message for "no such value in that entry".
fn no_value(book: &Logbook, no: u64) -> Failure {
    if book.inspection.log.entry(no).is_none() {
        return book.no_entry(no);
    }
    Failure::new(Kind::Usage, format!("entry {no} holds no value"))
        .hint("`handsfull review` shows the entries of values as #N")
}

use logbook::print;
