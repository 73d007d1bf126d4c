//! The session as plain text, for pipes, dumb terminals, rehearsals and tests.
//!
//! Promises: what a tester would read on the small screen, in order, once: a new prompt is printed
//! whole, a repeated one only where it changed. It leaves out level and listening state, which
//! change all the time.

use super::{
    event::{Event, Key},
    screen::view,
    state::State,
    wrap::wrap,
};

/// Prints a session as it goes on.
#[derive(Debug, Clone)]
pub struct Transcript {
    width: usize,
    keys: String,
    last: Vec<String>,
}

impl Transcript {
    /// A transcript of that many columns.
    #[must_use]
    pub fn new(width: usize) -> Self {
        Self {
            width,
            keys: String::new(),
            last: Vec::new(),
        }
    }

    /// Takes note of an event before the step that takes it; gives the lines to print, if any.
    pub fn event(&mut self, event: &Event) -> Vec<String> {
        match event {
            Event::Key(key) => {
                if !self.keys.is_empty() {
                    self.keys.push(' ');
                }
                self.keys.push_str(&key_text(*key));
                Vec::new()
            }
            Event::Heard(heard) => {
                let mut lines = self.keys();
                let words = match heard.words() {
                    "" => "(nothing understood)",
                    words => words,
                };
                lines.extend(wrap(&format!(">> \"{words}\""), self.width));
                lines
            }
            Event::DeviceLost => vec![">> (microphone unplugged)".into()],
            Event::DeviceFound => vec![">> (microphone plugged in)".into()],
            Event::Stop(_) => self.keys(),
            _ => Vec::new(),
        }
    }

    /// The lines to print after a step; nothing while a record is on its way or keys are typed.
    pub fn state(&mut self, state: &State, event: &Event) -> Vec<String> {
        if state.awaiting()
            || matches!(event, Event::Tick(_) | Event::Level(_) | Event::Speaking(_))
        {
            return Vec::new();
        }
        let view = view(state);
        let mut lines = Vec::new();
        let mut add = |text: &str, indent: &str| {
            if !text.is_empty() {
                let width = self.width.saturating_sub(indent.len());
                lines.extend(wrap(text, width).iter().map(|l| format!("{indent}{l}")));
            }
        };
        add(&view.notice, "* ");
        add(&view.place, "");
        add(&view.title, "");
        add(&view.range, "");
        for text in &view.body {
            add(text, "  ");
        }
        add(&view.question, "? ");
        // Digits being typed change the input line only: they are printed with their enter.
        if lines == self.last {
            return Vec::new();
        }
        let mut new = self.keys();
        if !new.is_empty() || !self.last.is_empty() {
            new.push(String::new());
        }
        // Place and title are not printed again while the tester stays there.
        let same_place = self.last.contains(&view.place) && self.last.contains(&view.title);
        new.extend(lines.iter().filter(|l| !(same_place && **l == view.place)).cloned());
        self.last = lines;
        new
    }

    /// Keys typed and not yet printed.
    pub fn keys(&mut self) -> Vec<String> {
        if self.keys.is_empty() {
            return Vec::new();
        }
        let keys = std::mem::take(&mut self.keys);
        wrap(&format!(">> keys: {keys}"), self.width)
    }
}

fn key_text(key: Key) -> String {
    match key {
        Key::Digit(d) => d.to_string(),
        Key::Point => ".".into(),
        Key::Enter => "ENTER".into(),
        Key::Plus => "+".into(),
        Key::Minus => "-".into(),
        Key::Star => "*".into(),
        Key::Slash => "/".into(),
        Key::Erase => "ERASE".into(),
        Key::Leave => "ESC".into(),
        Key::Talk => "TALK".into(),
        Key::Letter(c) => c.to_string(),
    }
}
