//! Keys to acts: ten digits, point, enter, plus, minus, star and slash reach everything.
//!
//! One rule a prompt; letters are a convenience and never the only way. Everywhere: enter is yes
//! or done, `-` is no or back off, `/` repeats, `*` opens the menu. Where a figure is typed, `+`,
//! `-` and `/` in front of it are bounds.

use crate::{
    domain::{record::Entered, test::TestKind},
    speech::meaning::Control,
};

use super::{
    act::{Act, How},
    effect::Effect,
    entry::{Typed, type_key},
    event::Key,
    prompt::{DeadStep, Entry, Prompt},
    state::State,
};

impl State {
    pub(super) fn key(&mut self, key: Key, out: &mut Vec<Effect>) {
        let how = How::keypad();
        if key == Key::Talk {
            return self.talk(out);
        }
        if key == Key::LineEnd {
            if self.typing_now() {
                self.key(Key::Enter, out);
            }
            return;
        }
        if let Key::Letter(letter) = key {
            return match letter_act(letter) {
                Some(act) => self.act(act, &how, out),
                None => self.refuse(format!("`{letter}` does nothing; ? shows the keys."), out),
            };
        }
        match self.top() {
            Prompt::Ask(ask) if ask.target.test.unit().is_some() => {
                let test = ask.target.test;
                self.typing(key, test, out);
            }
            // A digit over a read-back begins another figure; what was read back is dropped.
            Prompt::Confirm(c)
                if matches!(key, Key::Digit(_) | Key::Point) && c.target.test.unit().is_some() =>
            {
                let (target, text) = (c.target.clone(), c.entry.to_string());
                let test = target.test;
                self.drafts.remove(&target);
                self.pop_all();
                self.note(format!("{text} not kept."));
                out.push(Effect::Listen(self.context()));
                self.typing(key, test, out);
            }
            Prompt::Call(_) => self.calling(key, out),
            Prompt::Dead(dead) if dead.step == DeadStep::Number => self.numbering(key, out),
            Prompt::Menu => match menu_act(key) {
                Some(act) => {
                    self.pop(out);
                    self.act(act, &how, out);
                }
                None => self.refuse("Not on the menu.", out),
            },
            Prompt::Ask(_) => {
                let act = match key {
                    Key::Digit(1) | Key::Enter => Act::Value(Entry::Tick(true)),
                    Key::Digit(0) | Key::Minus => Act::Value(Entry::Tick(false)),
                    other => common(other),
                };
                self.act(act, &how, out);
            }
            _ => self.act(common(key), &how, out),
        }
    }

    /// A figure or a number is half typed.
    fn typing_now(&self) -> bool {
        match self.top() {
            Prompt::Ask(ask) => self.drafts.contains_key(&ask.target),
            Prompt::Call(text) => !text.is_empty(),
            Prompt::Dead(dead) => dead.step == DeadStep::Number && !dead.number.is_empty(),
            _ => false,
        }
    }

    fn typing(&mut self, key: Key, test: TestKind, out: &mut Vec<Effect>) {
        let Some(Prompt::Ask(ask)) = self.stack.first() else {
            return;
        };
        let target = ask.target.clone();
        let mut draft = self.drafts.remove(&target).unwrap_or_default();
        let typed = type_key(&mut draft, key, test);
        if !draft.is_empty() && !matches!(typed, Typed::Done(_)) {
            self.drafts.insert(target, draft);
        }
        match typed {
            Typed::Changed => out.push(Effect::Show),
            Typed::Refused(why) => self.refuse(why, out),
            Typed::Done(reading) => {
                self.act(Act::Value(Entry::Reading(reading)), &How::keypad(), out);
            }
            Typed::NotTyping => match key {
                // An empty enter must not mean "yes" here: there is nothing to say yes to.
                Key::Enter => self.act(Act::Command(Control::SayAgain), &How::keypad(), out),
                Key::Leave => self.act(Act::Command(Control::Disregard), &How::keypad(), out),
                other => self.act(common(other), &How::keypad(), out),
            },
        }
    }

    fn calling(&mut self, key: Key, out: &mut Vec<Effect>) {
        let Some(Prompt::Call(text)) = self.stack.last_mut() else {
            return;
        };
        match key {
            Key::Digit(d) if text.len() < 9 => text.push(char::from(b'0' + d.min(9))),
            Key::Point if text.len() < 9 => text.push('.'),
            Key::Plus if text.len() < 9 => text.push('+'),
            Key::Minus | Key::Erase if !text.is_empty() => {
                text.pop();
            }
            Key::Slash => return self.boards(out),
            Key::Enter => {
                let text = text.clone();
                return self.call_typed(&text, out);
            }
            Key::Minus | Key::Erase | Key::Leave => return self.pop(out),
            Key::Star => return self.push(Prompt::Menu, out),
            _ => return self.refuse("That does not fit there.", out),
        }
        out.push(Effect::Show);
    }

    fn numbering(&mut self, key: Key, out: &mut Vec<Effect>) {
        let Some(Prompt::Dead(dead)) = self.stack.last_mut() else {
            return;
        };
        match key {
            Key::Digit(d) if dead.number.len() < 12 => {
                dead.number.push(char::from(b'0' + d.min(9)));
                out.push(Effect::Show);
            }
            Key::Minus | Key::Erase if !dead.number.is_empty() => {
                dead.number.pop();
                out.push(Effect::Show);
            }
            other => self.act(common(other), &How::keypad(), out),
        }
    }
}

/// What a key means where no figure is typed.
fn common(key: Key) -> Act {
    match key {
        Key::Enter => Act::Yes,
        Key::Minus => Act::No,
        Key::Digit(n) => Act::Pick(n),
        Key::Plus => Act::Command(Control::Next),
        Key::Slash => Act::Command(Control::SayAgain),
        Key::Star => Act::Menu,
        Key::Leave | Key::Erase => Act::Command(Control::Disregard),
        Key::Point | Key::Talk | Key::Letter(_) | Key::LineEnd => Act::Nothing,
    }
}

/// The menu behind `*`. `utter::MENU` prints it.
fn menu_act(key: Key) -> Option<Act> {
    Some(match key {
        Key::Digit(1) => Act::CallCircuit,
        Key::Digit(2) => Act::CallTest,
        Key::Digit(3) => Act::Command(Control::ListOpen),
        Key::Digit(4) => Act::Command(Control::ListLinks),
        Key::Digit(5) => Act::Command(Control::Why),
        Key::Digit(6) => Act::Command(Control::Correction(None)),
        Key::Digit(7) => Act::Command(Control::Skip),
        Key::Digit(8) => Act::Command(Control::Standby),
        Key::Digit(9) => Act::Command(Control::Stop),
        Key::Digit(0) => Act::Command(Control::Help),
        Key::Point => Act::Command(Control::Note),
        Key::Plus => Act::Command(Control::Next),
        Key::Minus => Act::Command(Control::Back),
        Key::Slash => Act::Command(Control::SayAgain),
        Key::Enter => Act::Talk,
        Key::Star | Key::Leave | Key::Erase => Act::Nothing,
        _ => return None,
    })
}

fn letter_act(letter: char) -> Option<Act> {
    Some(match letter {
        'y' => Act::Yes,
        'n' => Act::No,
        '?' | 'h' => Act::Command(Control::Help),
        'o' => Act::Command(Control::ListOpen),
        'l' => Act::Command(Control::ListLinks),
        'w' => Act::Command(Control::Why),
        's' => Act::Command(Control::Skip),
        'b' => Act::Command(Control::Back),
        'x' => Act::Command(Control::Next),
        'c' => Act::CallCircuit,
        't' => Act::CallTest,
        'r' => Act::Command(Control::SayAgain),
        'd' => Act::Command(Control::Disregard),
        'e' => Act::Command(Control::Correction(None)),
        'p' => Act::Command(Control::Standby),
        'q' => Act::Command(Control::Stop),
        'm' => Act::Menu,
        _ => return None,
    })
}

impl How {
    /// By key.
    pub(super) fn keypad() -> Self {
        Self {
            entered: Entered::Keypad,
            heard: None,
        }
    }
}
