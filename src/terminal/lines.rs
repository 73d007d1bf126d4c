//! Lines of keys as a stream of events: from a pipe, a file, or a dumb terminal.
//!
//! A thread reads the lines, so that the ear and the signals are live while it waits. It leaves
//! out what spoken words mean: the caller gives the function that understands them.

use std::{
    collections::VecDeque,
    io::BufRead,
    sync::mpsc::{Receiver, RecvTimeoutError, sync_channel},
    thread,
    time::{Duration, Instant},
};

use super::{
    keyboard::Signals,
    keymap::Keymap,
    script::{Step, steps},
};
use crate::session::{Event, Key};

/// How long one wait lasts.
const WAIT: Duration = Duration::from_millis(20);

/// How long `hear` waits for an utterance before the script goes on.
const PATIENCE: Duration = Duration::from_secs(30);

/// The stream of events of a session driven by lines.
pub struct Lines {
    keymap: Keymap,
    signals: Signals,
    lines: Receiver<String>,
    ear: Option<Receiver<Event>>,
    understand: Box<dyn FnMut(&str) -> Event>,
    waiting: VecDeque<Step>,
    began: Instant,
    ticked: u64,
    hearing: Option<Instant>,
    over: bool,
}

impl Lines {
    /// A stream from a reader of lines; `understand` turns the words of a `say:` line into what
    /// the ear would have sent.
    pub fn new(
        reader: impl BufRead + Send + 'static,
        keymap: Keymap,
        signals: Signals,
        ear: Option<Receiver<Event>>,
        understand: Box<dyn FnMut(&str) -> Event>,
    ) -> Self {
        let (send, lines) = sync_channel(16);
        thread::spawn(move || {
            for line in reader.lines() {
                // Text that is no UTF-8 is no keys; the end of the session ends the thread.
                let Ok(line) = line else { break };
                if send.send(line).is_err() {
                    break;
                }
            }
        });
        Self {
            keymap,
            signals,
            lines,
            ear,
            understand,
            waiting: VecDeque::new(),
            began: Instant::now(),
            ticked: 0,
            hearing: None,
            over: false,
        }
    }

    /// The next event; `None` when the lines are over and the ear has nothing more.
    pub fn next_event(&mut self) -> Option<Event> {
        loop {
            if let Some(cause) = self.signals.ending() {
                return Some(Event::Stop(cause));
            }
            if let Some(event) = self.heard() {
                return Some(event);
            }
            let seconds = self.began.elapsed().as_secs();
            if seconds > self.ticked {
                self.ticked = seconds;
                return Some(Event::Tick(seconds * 1000));
            }
            if self.hearing.is_some_and(|since| since.elapsed() < PATIENCE) {
                thread::sleep(WAIT);
                continue;
            }
            self.hearing = None;
            match self.waiting.pop_front() {
                Some(Step::Key(key)) => return Some(Event::Key(key)),
                Some(Step::Say(words)) => return Some((self.understand)(&words)),
                Some(Step::Hear) => {
                    self.hearing = self.ear.is_some().then(Instant::now);
                    continue;
                }
                // A letter that means nothing is refused by the session, with a line that says so.
                Some(Step::Unknown(text)) => {
                    let c = text.chars().find(|c| !c.is_ascii_digit()).unwrap_or('?');
                    return Some(Event::Key(Key::Letter(c)));
                }
                None => {}
            }
            if self.over {
                return None;
            }
            match self.lines.recv_timeout(WAIT) {
                Ok(line) => self.waiting.extend(steps(&line, &self.keymap)),
                Err(RecvTimeoutError::Timeout) => {}
                Err(RecvTimeoutError::Disconnected) => self.over = true,
            }
        }
    }

    fn heard(&mut self) -> Option<Event> {
        let event = self.ear.as_ref()?.try_recv().ok()?;
        if matches!(event, Event::Heard(_) | Event::DeviceLost) {
            self.hearing = None;
        }
        Some(event)
    }
}
