//! The tester of a rehearsal: takes the script's steps and answers what the session asks.
//!
//! Promises: it affirms a value only when it is the one on the (scripted) display. It sees of the
//! session what a tester sees: the prompt on top. It leaves out recogniser and screen.

use std::{cell::RefCell, collections::VecDeque, rc::Rc};

use super::script::{Script, Step};
use crate::{
    app::Events,
    session::{Event, Key, Prompt, State},
    speech::meaning::Heard,
    terminal::{
        keymap::Keymap,
        script::{Step as Keyed, steps as keyed},
    },
};

/// What the tester sees of the prompt on top.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub enum Seen {
    /// A reading is asked for; the target in words.
    Ask(String),
    /// A value is read back.
    ReadBack(String),
    /// A list to pick from: the values, where they are values.
    List(Vec<String>),
    /// Anything else.
    #[default]
    Other,
}

/// The view shared between the loop's screen and the player.
pub type Sight = Rc<RefCell<Seen>>;

/// Looks at a state as the tester does.
#[must_use]
pub fn look(state: &State) -> Seen {
    match state.top() {
        Prompt::Ask(ask) => Seen::Ask(ask.target.to_string()),
        Prompt::Confirm(candidate) => Seen::ReadBack(figure(&candidate.entry.to_string())),
        Prompt::List(list) => Seen::List(list.items.iter().map(|(text, _)| figure(text)).collect()),
        _ => Seen::Other,
    }
}

/// The figure of a value's text: what stands before the unit.
fn figure(text: &str) -> String {
    text.split_whitespace()
        .next()
        .unwrap_or_default()
        .to_owned()
}

/// What is heard of an utterance, and what the onlooker is told.
pub trait Stage {
    /// Plays an utterance into the recogniser.
    ///
    /// # Errors
    /// Why it could not be heard at all (no recogniser), in words.
    fn utter(&mut self, clip: &str) -> Result<Heard, String>;
    /// Tells the onlooker something.
    fn tell(&mut self, text: &str);
}

/// A reading on its way: what the display shows, what is left to try.
struct Try {
    meant: String,
    left: VecDeque<String>,
    affirm_by_key: bool,
}

/// The tester.
pub struct Player<'a> {
    steps: VecDeque<Step>,
    waiting: VecDeque<Event>,
    reading: Option<Try>,
    sight: Sight,
    stage: &'a mut dyn Stage,
    keymap: Keymap,
    /// Why the rehearsal broke off, if it did.
    pub broke_off: Option<String>,
}

impl<'a> Player<'a> {
    /// A tester with a script, eyes and a stage.
    pub fn new(script: Script, sight: Sight, stage: &'a mut dyn Stage) -> Self {
        Self {
            steps: script.step.into(),
            waiting: VecDeque::new(),
            reading: None,
            sight,
            stage,
            keymap: Keymap::default(),
            broke_off: None,
        }
    }

    fn keys(&mut self, line: &str) {
        for step in keyed(line, &self.keymap) {
            match step {
                Keyed::Key(key) => self.waiting.push_back(Event::Key(key)),
                other => self.broke_off = Some(format!("`{line}` is not keys: {other:?}")),
            }
        }
    }

    fn utter(&mut self, clip: &str) -> Option<Event> {
        match self.stage.utter(clip) {
            Ok(heard) => Some(Event::Heard(heard)),
            Err(why) => {
                self.broke_off = Some(why);
                None
            }
        }
    }

    /// The next step of the script.
    fn begin(&mut self) -> Option<Event> {
        let step = self.steps.pop_front()?;
        let seen = self.sight.borrow().clone();
        if let Some(at) = &step.at
            && !matches!(&seen, Seen::Ask(target) if target.starts_with(at.as_str()))
        {
            self.broke_off = Some(format!("expected to be asked for {at}, found {seen:?}"));
            return None;
        }
        if let Some(note) = &step.note {
            self.stage.tell(note);
        }
        if let Some(lines) = &step.keys {
            for line in lines.lines() {
                self.keys(line);
            }
            return self.next();
        }
        let clip = step.say.unwrap_or_default();
        if let Some(meant) = step.meant {
            self.reading = Some(Try {
                meant,
                left: step.again.into(),
                affirm_by_key: step.affirm_by_key,
            });
        }
        self.utter(&clip)
    }

    /// Answers what stands on the screen while a reading is on its way.
    fn answer(&mut self, mut reading: Try) -> Option<Event> {
        let seen = self.sight.borrow().clone();
        match seen {
            Seen::ReadBack(value) if value == reading.meant => {
                // The reading is through; what comes after is the script's again.
                if reading.affirm_by_key {
                    Some(Event::Key(Key::Enter))
                } else {
                    self.utter("affirm")
                }
            }
            Seen::ReadBack(value) => {
                let text = format!("the display shows {}, not {value}", reading.meant);
                self.stage.tell(&text);
                self.reading = Some(reading);
                self.utter("negative")
            }
            Seen::List(items) => {
                let at = items.iter().position(|item| *item == reading.meant);
                self.reading = Some(reading);
                match at.and_then(|at| u8::try_from(at + 1).ok()) {
                    Some(line) => Some(Event::Key(Key::Digit(line))),
                    None => Some(Event::Key(Key::Leave)),
                }
            }
            Seen::Ask(_) | Seen::Other => {
                let again = reading.left.pop_front();
                let keyed = reading.meant.clone();
                self.reading = Some(reading);
                match again {
                    Some(clip) => self.utter(&clip),
                    None => {
                        self.stage.tell("not heard rightly: keyed");
                        self.keys(&keyed);
                        self.waiting.pop_front()
                    }
                }
            }
        }
    }
}

impl Events for Player<'_> {
    fn next(&mut self) -> Option<Event> {
        if self.broke_off.is_some() {
            return None;
        }
        if let Some(event) = self.waiting.pop_front() {
            return Some(event);
        }
        match self.reading.take() {
            Some(reading) => self.answer(reading),
            None => self.begin(),
        }
    }
}
