//! `handsfull voice`: build, show or adopt a voice; measure it.

mod measure;

use std::path::{Path, PathBuf};

use clap::{Args as ClapArgs, Subcommand};

use super::failure::{Failure, Kind};
use crate::{
    speech::{Context, Phrases, lexicon::Lexicon},
    voice::{adopt, base::Base, ready},
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
    /// Lay the grammars over a general Vosk model with a dynamic graph
    Adopt {
        /// The model's folder
        #[arg(value_name = "DIR")]
        model: PathBuf,
        /// The new voice's folder, for `hear --voice`; MODEL-adopted otherwise
        #[arg(long, value_name = "DIR")]
        out: Option<PathBuf>,
    },
    /// Measure how well a voice hears recordings, through the live pipeline
    Measure(measure::Args),
}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(args: &Args) -> Result<(), Failure> {
    match &args.what {
        What::Build { out, base } => build(out.as_deref(), base.as_deref()),
        What::Adopt { model, out } => adopt(model, out.as_deref()),
        What::Measure(args) => measure::run(args),
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

fn adopt(model: &Path, out: Option<&Path>) -> Result<(), Failure> {
    let beside = || {
        let name = model.file_name().unwrap_or_default().to_string_lossy();
        model.with_file_name(format!("{name}-adopted"))
    };
    let out = out.map_or_else(beside, Path::to_owned);
    let phrases = Phrases::plain();
    let contexts: Vec<_> = Context::EVERY
        .into_iter()
        .map(|context| (context.name().to_owned(), phrases.word_graph(context)))
        .collect();
    let adopted = adopt::adopt(model, &contexts, &out).map_err(|e| Failure::new(Kind::Input, e))?;
    for (context, words) in &adopted.missing {
        println!(
            "{context}: not in the model, what needs them falls away: {}",
            words.join(", ")
        );
    }
    for context in &adopted.empty {
        println!("{context}: nothing of it is left");
    }
    println!(
        "adopted into {}; try: handsfull hear --voice {0} FILE.wav",
        adopted.folder.display()
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
