//! `handsfull voice`: build, show or adopt a voice; measure it.

use std::path::{Path, PathBuf};

use clap::{Args as ClapArgs, Subcommand};

use super::failure::{Failure, Kind};
use crate::{
    speech::{Context, Phrases, lexicon::Lexicon},
    voice::{base::Base, ready},
};

/// Build, show or adopt a voice
#[derive(Debug, ClapArgs)]
pub struct Args {
    #[command(subcommand)]
    what: What,
}

#[derive(Debug, Subcommand)]
enum What {
    /// Build the voice's decoding graphs from the grammars
    Build {
        /// Where to; the user's cache otherwise, where every command looks for it
        #[arg(long, value_name = "DIR")]
        out: Option<PathBuf>,
        /// Another acoustic part than the one inside the program (see also HANDSFULL_BASE)
        #[arg(long, value_name = "DIR")]
        base: Option<PathBuf>,
    },
}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(args: &Args) -> Result<(), Failure> {
    match &args.what {
        What::Build { out, base } => build(out.as_deref(), base.as_deref()),
    }
}

fn build(out: Option<&Path>, base: Option<&Path>) -> Result<(), Failure> {
    let named = ready::named_base();
    let base = Base::from(base.or(named.as_deref())).map_err(|e| Failure::new(Kind::Input, e))?;
    let lexicon = lexicon()?;
    let recipe = ready::recipe(base, Phrases::plain(), &lexicon);
    let built = match out {
        Some(folder) => recipe.build_into(folder),
        None => ready::cached(&recipe),
    }
    .map_err(|e| Failure::new(Kind::Input, e))?;
    println!(
        "{} {}: {} words, {} contexts, digest {}",
        if built.was_there {
            "there already:"
        } else {
            "built"
        },
        built.folder.display(),
        recipe.words.len(),
        Context::EVERY.len(),
        recipe.digest(),
    );
    Ok(())
}

/// The built-in pronunciations.
///
/// # Errors
/// A [`Failure`]; a test of the lexicon keeps it from happening.
pub fn lexicon() -> Result<Lexicon, Failure> {
    Lexicon::built_in().map_err(|e| Failure::new(Kind::Input, e))
}
