//! `handsfull reckon`: any figure of the trade on the command line, without a job.
//!
//! Options are long, one quantity each, with the unit in the name. `--json` prints one object with
//! at least `value`, `unit`, `low`, `high` and `source` (full precision, `null` where there is
//! none). It compares with limits; it never calls anything safe.

use clap::{Args as ClapArgs, Subcommand};

use super::failure::{Failure, Kind};
use answer::Answer;

mod answer;
mod cables;
mod earth;
mod given;
mod insulation;
mod live;
mod rings;

/// Answer a question of the trade without a job
///
/// Each subcommand reckons one thing from options that carry their unit in the name, says by which
/// rule and source, and with --json prints one JSON object with full-precision figures.
///
///   handsfull reckon r1r2 --line-mm2 2.5 --cpc-mm2 1.5 --length-m 30 --temperature-c 10
///   handsfull reckon ring --line-mm2 4 --cpc-mm2 1.5 --length-m 100 --position 0.5
///   handsfull reckon insulation --parallel-megohm '5,20,10,>999'
///   handsfull reckon zs --device B --rated-a 32 --ze-ohm 0.35 --r1r2-ohm 0.59
///
/// It compares figures with limits and calls nothing safe: local rules and competent persons
/// decide.
#[derive(Debug, ClapArgs)]
#[command(verbatim_doc_comment)]
pub struct Args {
    #[command(subcommand)]
    question: Question,
    /// One JSON object in place of words
    #[arg(long, global = true)]
    json: bool,
}

#[derive(Debug, Subcommand)]
enum Question {
    /// Resistance per metre of a conductor, or of a length of it
    Conductor(cables::ConductorArgs),
    /// R1+R2 of a radial: line and protective conductor in series
    R1r2(cables::R1r2Args),
    /// R2 alone, by length, or from a display less the lead
    R2(cables::R2Args),
    /// A bonding or earthing conductor, end to end
    Bond(cables::BondArgs),
    /// A ring: its ends, and the cross-connected readings at a position
    Ring(rings::RingArgs),
    /// A spur of a ring: its length from a reading, or its reading from a length
    Spur(rings::SpurArgs),
    /// Insulation: minimum and test voltage, several circuits in parallel
    Insulation(insulation::InsulationArgs),
    /// Zs: predicted, and the maximum of the protective device, warm and cold
    Zs(live::ZsArgs),
    /// Voltage drop, from cable and length or from measured resistances
    Drop(live::DropArgs),
    /// A resistance taken from one conductor temperature to another
    Temperature(cables::TemperatureArgs),
    /// Longest permissible length for a device, or the length of a resistance
    Length(live::LengthArgs),
    /// Earth electrode: highest resistance for an RCD, or largest RCD for a resistance
    Electrode(earth::ElectrodeArgs),
    /// RCD: shortest and longest disconnection time
    Rcd(earth::RcdArgs),
    /// Prospective fault current from a loop impedance
    FaultCurrent(earth::FaultCurrentArgs),
}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] of kind usage that names the option, what is wrong with it and what is right.
pub fn run(args: &Args) -> Result<(), Failure> {
    let answer: Answer = match &args.question {
        Question::Conductor(q) => q.answer(),
        Question::R1r2(q) => q.answer(),
        Question::R2(q) => q.answer(),
        Question::Bond(q) => q.answer(),
        Question::Ring(q) => q.answer(),
        Question::Spur(q) => q.answer(),
        Question::Insulation(q) => q.answer(),
        Question::Zs(q) => q.answer(),
        Question::Drop(q) => q.answer(),
        Question::Temperature(q) => q.answer(),
        Question::Length(q) => q.answer(),
        Question::Electrode(q) => q.answer(),
        Question::Rcd(q) => q.answer(),
        Question::FaultCurrent(q) => q.answer(),
    }?;
    if args.json {
        println!("{}", answer.json());
    } else {
        print!("{}", answer.text());
    }
    Ok(())
}

/// A usage failure: which option, what is wrong (with what is right in it).
fn wrong(option: &str, what: impl std::fmt::Display) -> Failure {
    Failure::new(Kind::Usage, format!("{option}: {what}"))
        .hint("`handsfull reckon --help` lists the questions, `reckon QUESTION --help` the options")
}
