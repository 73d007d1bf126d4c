//! `handsfull sheet`: write the schedule of results as HTML, CSV, JSON.

use std::{
    fs,
    io::Write,
    path::{Path, PathBuf},
};

use clap::Args as ClapArgs;

use super::{
    failure::{Failure, Kind},
    logbook::{self, Logbook},
};
use crate::report::sheet::{self, csv, html, json};

/// Write the schedule of results
///
/// Without an option: one HTML file beside the job, to be printed on A4 landscape and signed. It
/// says what was measured, against which range, and what is open; it does not call an installation
/// safe.
#[derive(Debug, ClapArgs)]
pub struct Args {
    /// Job file (NAME.toml) or its log (NAME.log.toml)
    #[arg(required_unless_present_any = ["schema", "columns"])]
    job: Option<PathBuf>,
    /// Write HTML to this file; - is standard output
    #[arg(long, value_name = "FILE")]
    html: Option<PathBuf>,
    /// Write CSV (RFC 4180, a line a test) to this file; - is standard output
    #[arg(long, value_name = "FILE")]
    csv: Option<PathBuf>,
    /// Write JSON to this file; - is standard output
    #[arg(long, value_name = "FILE")]
    json: Option<PathBuf>,
    /// Print the JSON Schema of the JSON and do nothing else
    #[arg(long, exclusive = true)]
    schema: bool,
    /// Print the columns of the CSV and do nothing else
    #[arg(long, exclusive = true)]
    columns: bool,
}

/// Runs the command.
///
/// # Errors
/// A [`Failure`] with its exit code.
pub fn run(args: &Args) -> Result<(), Failure> {
    if args.schema {
        return logbook::print(json::SCHEMA);
    }
    if args.columns {
        let lines: String = csv::COLUMNS
            .iter()
            .map(|(name, holds)| format!("{name:<16}{holds}\n"))
            .collect();
        return logbook::print(&lines);
    }
    let path = args.job.as_deref().unwrap_or(Path::new(""));
    let book = Logbook::open(path)?;
    let Some(job) = &book.job else {
        let places = &book.inspection.places;
        return Err(Failure::new(
            Kind::Input,
            format!("{}: there is no job file", places.job().display()),
        )
        .hint("a schedule needs the plan; put the job file beside its log"));
    };
    for problem in &book.integrity.problems {
        eprintln!("handsfull: {problem}");
    }
    let schedule = sheet::schedule(job, &book.material());
    let built = |e: &dyn std::fmt::Display| {
        Failure::new(Kind::Input, format!("the schedule cannot be laid out: {e}"))
    };
    let default = (args.html.is_none() && args.csv.is_none() && args.json.is_none())
        .then(|| book.inspection.places.sheet("html"));
    if let Some(file) = args.html.as_ref().or(default.as_ref()) {
        let text = html::write(&schedule).map_err(|e| built(&e))?;
        put(file, text.as_bytes())?;
    }
    if let Some(file) = &args.csv {
        let bytes = csv::write(&schedule).map_err(|e| built(&e))?;
        put(file, &bytes)?;
    }
    if let Some(file) = &args.json {
        let bytes = json::write(&schedule).map_err(|e| built(&e))?;
        put(file, &bytes)?;
    }
    eprintln!(
        "handsfull: {} open, {} not within range, {} temporary works in; {}",
        schedule.open.len(),
        schedule.findings.len(),
        schedule.works_in.len(),
        schedule.integrity.statement
    );
    Ok(())
}

/// Writes a file that appears whole or not at all, or standard output.
fn put(file: &Path, bytes: &[u8]) -> Result<(), Failure> {
    let failed = |e: std::io::Error| {
        Failure::new(
            Kind::Input,
            format!("{}: cannot be written: {e}", file.display()),
        )
        .hint("name another file with --html, --csv or --json")
    };
    if file == Path::new("-") {
        return match std::io::stdout().lock().write_all(bytes) {
            Err(e) if e.kind() != std::io::ErrorKind::BrokenPipe => Err(failed(e)),
            _ => Ok(()),
        };
    }
    let folder = match file.parent() {
        Some(folder) if !folder.as_os_str().is_empty() => folder,
        _ => Path::new("."),
    };
    // A place that is no plain file (a pipe, /dev/null) cannot be renamed over.
    if fs::metadata(file).is_ok_and(|about| !about.is_file()) {
        fs::write(file, bytes).map_err(failed)?;
    } else {
        let mut out = tempfile::Builder::new()
            .prefix(".handsfull-")
            .tempfile_in(folder)
            .map_err(failed)?;
        out.write_all(bytes)
            .and_then(|()| out.as_file().sync_all())
            .map_err(failed)?;
        out.persist(file).map_err(|e| failed(e.error))?;
    }
    eprintln!("handsfull: wrote {}", file.display());
    Ok(())
}
