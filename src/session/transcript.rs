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
    notice: Vec<String>,
}

impl Transcript {
    /// A transcript of that many columns.
    #[must_use]
    pub fn new(width: usize) -> Self {
        Self {
            width,
            keys: String::new(),
            last: Vec::new(),
            notice: Vec::new(),
        }
    }

    /// Takes note of an event before the step that takes it; gives the lines to print, if any.
    pub fn event(&mut self, event: &Event) -> Vec<String> {
        match event {
            Event::Key(Key::LineEnd) => Vec::new(),
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
        let mut notice = Vec::new();
        add(&mut notice, self.width, &view.notice, "* ");
        let mut lines = Vec::new();
        if state.ended() {
            let kept = state.standing().kept.iter().count();
            let open = state.open().count();
            let text = format!("Session ended. {kept} values kept, {open} tests open.");
            add(&mut lines, self.width, &text, "");
        } else {
            add(&mut lines, self.width, &view.place, "");
            add(&mut lines, self.width, &view.title, "");
            add(&mut lines, self.width, &view.range, "");
            for text in &view.body {
                add(&mut lines, self.width, text, "  ");
            }
            add(&mut lines, self.width, &view.question, "? ");
        }
        // Digits being typed change the input line only: they are printed with their enter.
        let same = lines == self.last;
        if same && (notice.is_empty() || notice == self.notice) {
            self.notice = notice;
            return Vec::new();
        }
        let mut new = self.keys();
        if !new.is_empty() || !self.last.is_empty() {
            new.push(String::new());
        }
        new.extend(notice.iter().cloned());
        if !same {
            // At the same prompt only what changed is printed again, and the question.
            let question = lines.iter().position(|l| l.starts_with("? ")).unwrap_or(0);
            let same_place = self.last.len() > 1 && lines.len() > 1 && self.last[..2] == lines[..2];
            let known = |at: usize, line: &String| {
                at < question && (at == 0 || same_place) && self.last.contains(line)
            };
            let fresh = lines.iter().enumerate().filter(|(at, l)| !known(*at, l));
            new.extend(fresh.map(|(_, line)| line.clone()));
        }
        self.last = lines;
        self.notice = notice;
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

fn add(lines: &mut Vec<String>, width: usize, text: &str, indent: &str) {
    if !text.is_empty() {
        let width = width.saturating_sub(indent.len());
        lines.extend(wrap(text, width).iter().map(|l| format!("{indent}{l}")));
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
        Key::LineEnd => String::new(),
        Key::Letter(c) => c.to_string(),
    }
}
