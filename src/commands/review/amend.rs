//! Amendments and notes at the van: new entries with reason and name, nothing overwritten.

use std::io::IsTerminal;

use jiff::ZonedDateTime;
use rustyline::{DefaultEditor, error::ReadlineError};

use super::{
    super::{
        failure::{Failure, Kind},
        logbook::{self, Logbook},
    },
    Args, no_value, print,
};
use crate::{
    domain::{
        kept::Value,
        moment::Moment,
        reading::Reading,
        record::{EntryNo, Record},
        test::Target,
    },
    journal::Journal,
    report::history::{History, Shown},
};

/// Amends the value in an entry.
pub(super) fn value(book: &Logbook, no: EntryNo, args: &Args) -> Result<(), Failure> {
    let history = History::of(&book.inspection.log.entries, &book.standing);
    let shown = history.entry(no).ok_or_else(|| no_value(book, no))?;
    if !shown.counts {
        let failure = Failure::new(Kind::Usage, format!("entry {no} does not count any more"));
        return Err(match history.counting(shown.target) {
            Some(newer) => failure.hint(format!(
                "the value that counts for {} is in entry {}",
                shown.target, newer.entry.no
            )),
            None => failure.hint(format!("{} is open: measure it again", shown.target)),
        });
    }
    let mut ask = Ask::new(args);
    let (value, unit) = loop {
        let text = ask.value(shown, args.value.as_deref())?;
        match read(&text, shown.target) {
            Ok(read) => break read,
            Err(why) if ask.interactive() => print(&format!("{why}\n"))?,
            Err(why) => return Err(Failure::new(Kind::Usage, why)),
        }
    };
    let reason = ask.line("Reason", "", args.reason.as_deref(), "--reason")?;
    let name = ask.line("Name", shown.by(), args.name.as_deref(), "--name")?;
    let record = Record::Amended {
        corrects: no,
        value: value.clone(),
        unit,
        reason,
        by: name,
    };
    let entry = keep(book, &record)?;
    print(&format!(
        "entry {entry} kept: {}: {} amended to {value}; entry {no} stays in the log\n",
        shown.target, shown.text
    ))
}

/// Enters a note.
pub(super) fn note(book: &Logbook, text: &str, args: &Args) -> Result<(), Failure> {
    let target = match args.about {
        None => None,
        Some(no) => {
            let history = History::of(&book.inspection.log.entries, &book.standing);
            let shown = history.entry(no).ok_or_else(|| no_value(book, no))?;
            Some(shown.target.clone())
        }
    };
    let mut ask = Ask::new(args);
    let text = ask.line("Note", "", Some(text), "--note")?;
    let by = ask.line("Name", &book.standing.by, args.name.as_deref(), "--name")?;
    let entry = keep(book, &Record::Note { target, text, by })?;
    print(&format!("entry {entry} kept\n"))
}

fn keep(book: &Logbook, record: &Record) -> Result<EntryNo, Failure> {
    let now = Moment::from(&ZonedDateTime::now());
    let log = book.inspection.places.log();
    let (mut journal, recovery) =
        Journal::open(&log, &book.reference(), now).map_err(|e| logbook::failure(&e))?;
    for incident in &recovery.incidents {
        eprintln!("handsfull: {incident}");
    }
    journal
        .append(record, now)
        .map_err(|e| logbook::failure(&e))
}

/// A typed value for a target, as it goes into the log: figure and unit word.
fn read(text: &str, target: &Target) -> Result<(String, Option<String>), String> {
    let text = text.trim();
    let Some(own) = target.test.unit() else {
        return match text.to_lowercase().as_str() {
            "yes" | "y" => Ok(("yes".into(), None)),
            "no" | "n" => Ok(("no".into(), None)),
            _ => Err(format!("`{text}`: {target} is confirmed or not: yes or no")),
        };
    };
    let reading: Reading = text.parse().map_err(|e| format!("{e}"))?;
    if let Some(unit) = reading.unit()
        && unit.base().0 != own.base().0
    {
        return Err(format!("`{text}`: {target} is read in {own}"));
    }
    let reading = reading.or_unit(own);
    let unit = reading.unit().map(|unit| unit.word().to_owned());
    Ok((reading.figure(), unit))
}

/// Asks for what was not given on the command line, when there is somebody to ask.
struct Ask {
    editor: Option<DefaultEditor>,
}

impl Ask {
    fn new(args: &Args) -> Self {
        let complete = match args.amend {
            Some(_) => args.value.is_some() && args.reason.is_some() && args.name.is_some(),
            None => args.name.is_some(),
        };
        let editor = if complete || !std::io::stdin().is_terminal() {
            None
        } else {
            DefaultEditor::new().ok()
        };
        Self { editor }
    }

    fn interactive(&self) -> bool {
        self.editor.is_some()
    }

    /// The value; asked for with the one that stands as the default.
    fn value(&mut self, shown: &Shown, given: Option<&str>) -> Result<String, Failure> {
        // A given value that was refused is asked for: `given` must not loop.
        if let (Some(text), false) = (given, self.interactive()) {
            return Ok(text.to_owned());
        }
        let stands = match &shown.value {
            Some(Value::Reading(reading)) => reading.to_string(),
            Some(Value::Ticked(true)) => "yes".into(),
            Some(Value::Ticked(false)) => "no".into(),
            None => String::new(),
        };
        if self.interactive() {
            print(&format!("{}: {}\n", shown.target, shown.text))?;
        }
        self.line("Value", given.unwrap_or(&stands), None, "--value")
    }

    /// A line that must not be empty; the default is there to be edited.
    fn line(
        &mut self,
        what: &str,
        default: &str,
        given: Option<&str>,
        option: &str,
    ) -> Result<String, Failure> {
        if let Some(text) = given {
            let text = text.trim();
            if text.is_empty() {
                return Err(Failure::new(Kind::Usage, format!("{option} is empty")));
            }
            return Ok(text.to_owned());
        }
        let Some(editor) = &mut self.editor else {
            return Err(Failure::new(
                Kind::Usage,
                format!("{option} is missing, and there is nobody to ask"),
            )
            .hint("give --value, --reason and --name, or run it on a terminal"));
        };
        loop {
            match editor.readline_with_initial(&format!("{what}: "), (default, "")) {
                Ok(text) if text.trim().is_empty() => print(&format!("{what} is needed\n"))?,
                Ok(text) => return Ok(text.trim().to_owned()),
                Err(ReadlineError::Interrupted | ReadlineError::Eof) => {
                    return Err(Failure::new(Kind::Usage, "nothing amended, nothing kept"));
                }
                Err(e) => {
                    return Err(Failure::new(Kind::Device, format!("cannot ask: {e}")));
                }
            }
        }
    }
}
