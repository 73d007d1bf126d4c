//! Draws the session's screen on a terminal: only lines that changed, from the top left corner.
//!
//! Promises: no colour at all; weight is bold, dim or reverse, and with NO_COLOR nothing but
//! bold. It leaves out what the lines say.

use std::io::{self, Write};

use crossterm::{
    cursor, queue,
    style::{Attribute, Print, SetAttribute},
    terminal::{self, Clear, ClearType},
};

use crate::session::{
    State,
    screen::{Line, Weight, screen},
};

/// A screen that remembers what it shows.
pub struct Screen<W: Write> {
    out: W,
    shown: Vec<Line>,
    size: (u16, u16),
    plain: bool,
}

impl<W: Write> Screen<W> {
    /// A screen on that terminal; `plain` leaves out dim and reverse (NO_COLOR).
    pub fn new(out: W, plain: bool) -> Self {
        Self {
            out,
            shown: Vec::new(),
            size: (0, 0),
            plain,
        }
    }

    /// Forgets what stands there: it is drawn anew.
    pub fn forget(&mut self) {
        self.shown.clear();
        self.size = (0, 0);
    }

    /// Shows a state.
    ///
    /// # Errors
    /// When the terminal cannot be written to.
    pub fn show(&mut self, state: &State) -> io::Result<()> {
        let (width, height) = terminal::size().unwrap_or((40, 15));
        self.show_at(state, width.max(1), height.max(1))
    }

    fn show_at(&mut self, state: &State, width: u16, height: u16) -> io::Result<()> {
        let lines = screen(state, usize::from(width), usize::from(height));
        if (width, height) != self.size {
            self.size = (width, height);
            self.shown.clear();
            queue!(self.out, Clear(ClearType::All))?;
        }
        for (row, line) in lines.iter().enumerate() {
            if self.shown.get(row) == Some(line) {
                continue;
            }
            let row = u16::try_from(row).unwrap_or(u16::MAX);
            queue!(self.out, cursor::MoveTo(0, row))?;
            if let Some(attribute) = self.attribute(line.weight) {
                queue!(self.out, SetAttribute(attribute))?;
            }
            queue!(
                self.out,
                Print(&line.text),
                SetAttribute(Attribute::Reset),
                Clear(ClearType::UntilNewLine)
            )?;
        }
        self.shown = lines;
        self.out.flush()
    }

    fn attribute(&self, weight: Weight) -> Option<Attribute> {
        match weight {
            Weight::Plain => None,
            Weight::Strong => Some(Attribute::Bold),
            Weight::Dim if self.plain => None,
            Weight::Dim => Some(Attribute::Dim),
            Weight::Alarm if self.plain => Some(Attribute::Bold),
            Weight::Alarm => Some(Attribute::Reverse),
        }
    }
}
