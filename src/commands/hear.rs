//! `handsfull hear`: what recordings or typed words mean, one JSON line each.
//!
//! This is what one runs on a clip that was misheard. It leaves out the job: places are given as
//! said, whether or not they exist.

pub mod json;
mod recordings;

use std::path::PathBuf;

use clap::Args as ClapArgs;

use super::failure::{Failure, Kind};
use crate::speech::{Context, Heard, Margins, Phrases, decide, spelling};

/// Run recordings (or typed words) through the live pipeline, one JSON line each
#[derive(Debug, ClapArgs)]
pub struct Args {
    /// What may be said: ohms, insulation, live, tick, confirm, question, pick, gate, digits or all
    #[arg(long, value_name = "NAME", default_value = "all")]
    context: String,
    /// Words to be understood as if they had been heard; may be given several times
    #[arg(long, value_name = "WORDS")]
    text: Vec<String>,
    /// A built voice (see `voice build --out` and `voice adopt`) in place of the embedded one
    #[arg(long, value_name = "DIR")]
    voice: Option<PathBuf>,
    /// Recordings (WAV)
    #[arg(value_name = "FILE")]
    files: Vec<PathBuf>,
}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(args: &Args) -> Result<(), Failure> {
    let context = context(&args.context)?;
    if args.text.is_empty() && args.files.is_empty() {
        return Err(Failure::new(Kind::Usage, "nothing to hear")
            .hint("give recordings (WAV), or --text \"zero point five eight ohms\""));
    }
    for text in &args.text {
        println!("{}", json::line(&[], &heard(context, text)));
    }
    if args.files.is_empty() {
        return Ok(());
    }
    recordings::hear(context, args.voice.as_deref(), &args.files)
}

/// A context by its name.
///
/// # Errors
/// A [`Failure`] that lists the names.
pub fn context(name: &str) -> Result<Context, Failure> {
    Context::EVERY
        .into_iter()
        .find(|context| context.name() == name)
        .ok_or_else(|| {
            let names: Vec<&str> = Context::EVERY.iter().map(|c| c.name()).collect();
            Failure::new(Kind::Usage, format!("there is no context `{name}`"))
                .hint(format!("the contexts are {}", names.join(", ")))
        })
}

/// Typed words as if the recogniser had been sure of them.
fn heard(context: Context, text: &str) -> Heard {
    decide(
        Phrases::plain(),
        context,
        &[(spelling::tidied(text), 0.0)],
        &Margins::default(),
    )
}
