//! `handsfull voice`: build, show or adopt a voice; measure it.

use std::{collections::BTreeMap, path::PathBuf, sync::Arc};

use clap::{Args as ClapArgs, Subcommand};

use super::failure::{Failure, Kind};
use crate::{
    speech::{Context, Phrases},
    voice::{
        base::Base,
        build::{folder::Recipe, lexicon_graph::Costs},
    },
};

/// build, show or adopt a voice
#[derive(Debug, ClapArgs)]
pub struct Args {
    #[command(subcommand)]
    what: What,
}

#[derive(Debug, Subcommand)]
enum What {
    /// Build the voice's decoding graphs from the grammars
    Build {
        /// Where to; the user's cache otherwise
        #[arg(long)]
        out: Option<PathBuf>,
        /// Another acoustic part than the one inside the program
        #[arg(long, env = "HANDSFULL_BASE")]
        base: Option<PathBuf>,
    },
    /// Probe
    Probe {
        /// Voice
        #[arg(long)]
        voice: PathBuf,
        /// Context
        #[arg(long)]
        context: String,
        /// file with paths
        list: PathBuf,
    },
}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(args: &Args) -> Result<(), Failure> {
    match &args.what {
        What::Build { out, base } => {
            let phrases = Phrases::plain();
            let text = std::fs::read_to_string(std::env::var("HANDSFULL_LEXICON").unwrap()).unwrap();
            let mut words = BTreeMap::new();
            for l in text.lines() {
                let mut p = l.split_whitespace().map(str::to_owned);
                let w = p.next().unwrap();
                words.entry(w).or_insert_with(Vec::new).push(p.collect::<Vec<_>>());
            }
            let contexts: Vec<_> = Context::EVERY.iter().map(|c| (c.name().to_owned(), phrases.word_graph(*c))).collect();
            let mut missing: Vec<_> = contexts.iter().flat_map(|(_, g)| g.words().into_iter().map(str::to_owned)).filter(|w| !words.contains_key(w)).collect();
            missing.sort(); missing.dedup();
            if !missing.is_empty() { println!("MISSING {}", missing.join(" ")); return Ok(()); }
            for (n, g) in &contexts { println!("{n} {} states {} arcs", g.states.len(), g.states.iter().map(|s| s.arcs.len()).sum::<usize>()); }
            let t = std::time::Instant::now();
            let recipe = Recipe { base: Base::from(base.as_deref()).unwrap(), words, contexts, costs: Costs::default() };
            let b = recipe.build_into(out.as_deref().unwrap()).map_err(|e| Failure::new(Kind::Input, e))?;
            println!("{b:?} {:?}", t.elapsed());
            Ok(())
        }
        What::Probe { voice, context, list } => {
            use crate::voice::{front::{Front, FrontEvent, activity::Settings}, source::{Piece, Source, wav::Wav}, recogniser::Recogniser, hearing::Hearing};
            let context = *Context::EVERY.iter().find(|c| c.name() == context).unwrap();
            let h = Hearing::new(Recogniser::open(voice).unwrap(), Arc::new(Phrases::with_places(&[]).unwrap()));
            h.prepare(context).unwrap();
            let mut audio = 0.0; let t0 = std::time::Instant::now();
            for path in std::fs::read_to_string(list).unwrap().lines() {
                let mut wav = match Wav::open(std::path::Path::new(path)) { Ok(w) => w, Err(e) => { eprintln!("{e}"); continue } };
                let mut front = Front::new(wav.rate(), Settings::default()).unwrap();
                let mut events = Vec::new();
                while let Piece::Sound(s) = wav.read() { front.push(&s, &mut events); }
                front.finish(&mut events);
                audio += wav.seconds();
                let mut n = 0;
                for e in &events { if let FrontEvent::Utterance(u) = e {
                    let tt = std::time::Instant::now(); let f = h.fit(context, u).unwrap(); if tt.elapsed().as_secs_f32() > 0.5 { eprintln!("slow {path} {:?} {}", tt.elapsed(), f.seconds); } n += 1;
                    println!("{path}\t{:.2}\t{:.2}\t{}\t{}", f.seconds, f.anything.cost, f.anything.words, f.ways.iter().map(|w| format!("{}|{:.2}", w.words, w.cost)).collect::<Vec<_>>().join("\t"));
                } }
                if n == 0 { println!("{path}\t0"); }
            }
            eprintln!("audio {audio:.1} s, took {:.2} s", t0.elapsed().as_secs_f32());
            Ok(())
        }
    }
}
