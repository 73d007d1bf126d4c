//! `handsfull plan new`: puts the interview's questions and writes the file.
//!
//! Promises: every accepted answer is on disk before the next question; Ctrl-C, a closed terminal
//! or the end of a pipe lose nothing; an existing file is never overwritten. It leaves out which
//! questions there are (`crate::plan::interview`).

use std::{
    io::{self, BufRead, IsTerminal, Write},
    path::Path,
    sync::{
        Arc,
        atomic::{AtomicBool, Ordering},
    },
};

use rustyline::{DefaultEditor, error::ReadlineError};
use signal_hook::consts::SIGINT;

use super::{Failure, Kind, check::summary, lay};
use crate::plan::{
    self,
    interview::{self, Draft, DraftError, Question, Step},
    write::to_toml,
};

/// Runs the interview.
pub(super) fn run(file: &Path) -> Result<(), Failure> {
    if file.exists() {
        return Err(
            Failure::new(Kind::Input, format!("{} is there already", file.display()))
                .hint("name another file; `handsfull plan check` looks at this one"),
        );
    }
    let mut draft = Draft::open(file).map_err(|wrong| of_draft(&wrong))?;
    let mut asker = Asker::new(&draft)?;
    let width = lay::width(None);
    lay::print(&greeting(&draft, width));
    let mut before: Option<String> = None;
    loop {
        let answers = draft.answers();
        match interview::next(&answers) {
            Step::Done(job) => {
                write_out(file, &to_toml(&job))?;
                draft.remove().map_err(|wrong| of_draft(&wrong))?;
                lay::print(&lay::wrapped(
                    &format!("{} is written. {}", file.display(), summary(&job)),
                    0,
                    width,
                ));
                return Ok(());
            }
            Step::Ask(question) => {
                let line = asker.ask(&question, before.take(), width, &draft)?;
                let answer = line.trim();
                if answer.eq_ignore_ascii_case("back") {
                    before = draft.pop().map_err(|wrong| of_draft(&wrong))?;
                    continue;
                }
                let mut with = answers;
                with.push(answer.to_string());
                match interview::step(&with) {
                    (Step::Refused(_, why), used) if used < with.len() => {
                        lay::print(&lay::wrapped(&format!("Not that: {why}."), 2, width));
                        before = Some(answer.to_string());
                    }
                    _ => draft
                        .push(&question.id, answer)
                        .map_err(|wrong| of_draft(&wrong))?,
                }
            }
            // The draft keeps only answers that were taken; one that no longer is falls away.
            Step::Refused(..) => {
                draft.pop().map_err(|wrong| of_draft(&wrong))?;
            }
        }
    }
}

fn greeting(draft: &Draft, width: usize) -> String {
    let mut text = String::from(
        "Enter takes what stands in brackets. `back` goes one question back. Ctrl-C stops; the \
         same command goes on.",
    );
    match draft.answers().len() {
        0 => {}
        n => text.push_str(&format!(
            " Taken up again after {n} answers kept in {}.",
            draft.path().display()
        )),
    }
    lay::wrapped(&text, 0, width)
}

/// Puts the file in place whole, and only where none is.
fn write_out(file: &Path, text: &str) -> Result<(), Failure> {
    // The interview cannot give a job that does not load; if it ever did, no file is better than
    // a wrong one, and the answers stay in the draft.
    plan::parse(text, &file.display().to_string())
        .map_err(|wrong| Failure::new(Kind::Input, wrong))?;
    let folder = match file.parent() {
        Some(folder) if !folder.as_os_str().is_empty() => folder,
        _ => Path::new("."),
    };
    let failed = |why: io::Error| {
        Failure::new(
            Kind::Input,
            format!("{}: cannot be written: {why}", file.display()),
        )
        .hint("the answers are kept in the draft beside it")
    };
    let mut temporary = tempfile::NamedTempFile::new_in(folder).map_err(failed)?;
    temporary.write_all(text.as_bytes()).map_err(failed)?;
    temporary.as_file().sync_all().map_err(failed)?;
    temporary
        .persist_noclobber(file)
        .map_err(|why| failed(why.error))?;
    Ok(())
}

fn of_draft(wrong: &DraftError) -> Failure {
    Failure::new(Kind::Input, wrong).hint("the draft is a plain file: mend it or remove it")
}

/// Where answers come from.
enum Asker {
    /// With a flag that Ctrl-C raises between two questions, when the editor does not take keys.
    Terminal(Box<DefaultEditor>, Arc<AtomicBool>),
    Pipe(io::StdinLock<'static>),
}

impl Asker {
    fn new(draft: &Draft) -> Result<Self, Failure> {
        if !io::stdin().is_terminal() || !io::stdout().is_terminal() {
            return Ok(Asker::Pipe(io::stdin().lock()));
        }
        let mut editor = DefaultEditor::new().map_err(|why| {
            Failure::new(Kind::Device, format!("the terminal cannot be used: {why}"))
                .hint("answers may also come line by line on standard input")
        })?;
        for answer in draft.answers() {
            let _ = editor.add_history_entry(answer);
        }
        let stop = Arc::new(AtomicBool::new(false));
        // Without it Ctrl-C between questions would end the program before it said where the
        // answers are.
        signal_hook::flag::register(SIGINT, Arc::clone(&stop)).map_err(|why| {
            Failure::new(Kind::Device, format!("signals cannot be handled: {why}"))
        })?;
        Ok(Asker::Terminal(Box::new(editor), stop))
    }

    /// Puts a question and gives the line answered.
    fn ask(
        &mut self,
        question: &Question,
        before: Option<String>,
        width: usize,
        draft: &Draft,
    ) -> Result<String, Failure> {
        let mut shown = lay::wrapped(&question.text, 0, width);
        shown.push_str(&lay::wrapped(&question.help, 2, width));
        lay::print(&shown);
        let prompt = match &question.default {
            Some(default) => format!("[{default}] > "),
            None => "> ".to_string(),
        };
        let stopped = |why: &str| {
            let kept = if draft.answers().is_empty() {
                "nothing was answered yet".to_string()
            } else {
                format!("what was answered is kept in {}", draft.path().display())
            };
            Failure::new(
                Kind::Findings,
                format!("{why} before the plan was complete; {kept}"),
            )
            .hint("the same command goes on where this stopped")
        };
        match self {
            Asker::Terminal(_, stop) if stop.load(Ordering::Relaxed) => Err(stopped("stopped")),
            Asker::Terminal(editor, _) => {
                let initial = before.unwrap_or_default();
                match editor.readline_with_initial(&prompt, (&initial, "")) {
                    Ok(line) => {
                        let _ = editor.add_history_entry(&line);
                        Ok(line)
                    }
                    Err(ReadlineError::Interrupted) => Err(stopped("stopped")),
                    Err(ReadlineError::Eof) => Err(stopped("the input ended")),
                    Err(why) => Err(stopped(&format!("the terminal failed ({why})"))),
                }
            }
            Asker::Pipe(input) => {
                lay::print(&prompt);
                let mut line = String::new();
                match input.read_line(&mut line) {
                    Ok(0) => Err(stopped("the input ended")),
                    Ok(_) => {
                        // What was piped in is shown as if typed, so that a kept transcript reads.
                        lay::print(&format!("{}\n", line.trim_end()));
                        Ok(line)
                    }
                    Err(why) => Err(stopped(&format!("the input cannot be read ({why})"))),
                }
            }
        }
    }
}
