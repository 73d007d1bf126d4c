//! The session as lines of text, for pipes and dumb terminals.
//!
//! Every line is written at once, so that whoever reads the other end knows what is on disk.

use std::io::Write;

use crate::session::{Event, State, transcript::Transcript};

/// Writes a transcript.
pub struct Plain<W> {
    out: W,
    transcript: Transcript,
    echo: bool,
}

impl<W: Write> Plain<W> {
    /// A transcript of that many columns; `echo` prints the keys taken, where the terminal does
    /// not show them itself.
    pub fn new(out: W, width: usize, echo: bool) -> Self {
        Self {
            out,
            transcript: Transcript::new(width),
            echo,
        }
    }

    fn print(&mut self, lines: &[String]) {
        let mut text = String::new();
        for line in lines {
            if self.echo || !line.starts_with(">> keys") {
                text.push_str(line);
                text.push('\n');
            }
        }
        // Nobody reads any more: the session goes on to its orderly end by its own signals.
        let _ = self.out.write_all(text.as_bytes());
        let _ = self.out.flush();
    }

    /// An event is about to be taken.
    pub fn event(&mut self, event: &Event) {
        let lines = self.transcript.event(event);
        self.print(&lines);
    }

    /// The session after it.
    pub fn state(&mut self, state: &State, event: &Event) {
        let lines = self.transcript.state(state, event);
        self.print(&lines);
    }
}
