//! Which terminal key stands for which key of the tool.
//!
//! Promises: the numeric keypad works as it is; other keys can be added by name, so a foot switch
//! or a gloved hand can have its own. Letters are passed on in lower case.

use std::collections::BTreeMap;

use crossterm::event::{KeyCode, KeyModifiers};

use crate::session::Key;

/// A name that is no key.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[allow(missing_docs)] // the fields are named in the messages
pub enum KeymapError {
    #[error(
        "`{0}` is no key of the tool; use 0 to 9, point, enter, plus, minus, star, slash, erase, \
         leave or talk"
    )]
    NoKey(String),
    #[error(
        "`{0}` is no key of a terminal; use one character, F1 to F24, Enter, Space, Tab, Up, ..."
    )]
    NoStroke(String),
}

/// Terminal keys to keys of the tool.
#[derive(Debug, Clone)]
pub struct Keymap {
    strokes: BTreeMap<String, Key>,
}

impl Default for Keymap {
    fn default() -> Self {
        let mut strokes = BTreeMap::new();
        let mut add = |name: &str, key| {
            strokes.insert(name.to_owned(), key);
        };
        for digit in 0..=9_u8 {
            add(&digit.to_string(), Key::Digit(digit));
        }
        for (name, key) in [
            (".", Key::Point),
            // The decimal key of many keypads gives a comma.
            (",", Key::Point),
            ("Enter", Key::Enter),
            ("+", Key::Plus),
            ("-", Key::Minus),
            ("*", Key::Star),
            ("/", Key::Slash),
            ("Backspace", Key::Erase),
            ("Delete", Key::Erase),
            ("Esc", Key::Leave),
            ("Space", Key::Talk),
        ] {
            add(name, key);
        }
        Self { strokes }
    }
}

impl Keymap {
    /// The key of the tool with that name in the settings file.
    ///
    /// # Errors
    /// [`KeymapError::NoKey`].
    pub fn key_named(name: &str) -> Result<Key, KeymapError> {
        Ok(match name {
            "point" => Key::Point,
            "enter" => Key::Enter,
            "plus" => Key::Plus,
            "minus" => Key::Minus,
            "star" => Key::Star,
            "slash" => Key::Slash,
            "erase" => Key::Erase,
            "leave" => Key::Leave,
            "talk" => Key::Talk,
            digit => match digit.parse() {
                Ok(n @ 0..=9) => Key::Digit(n),
                _ => return Err(KeymapError::NoKey(name.into())),
            },
        })
    }

    /// Lets a terminal key stand for a key of the tool.
    ///
    /// # Errors
    /// [`KeymapError::NoStroke`].
    pub fn add(&mut self, stroke: &str, key: Key) -> Result<(), KeymapError> {
        const NAMES: [&str; 16] = [
            "Enter",
            "Space",
            "Tab",
            "Esc",
            "Backspace",
            "Delete",
            "Insert",
            "Up",
            "Down",
            "Left",
            "Right",
            "Home",
            "End",
            "PageUp",
            "PageDown",
            "KeypadBegin",
        ];
        let function = stroke
            .strip_prefix('F')
            .and_then(|n| n.parse::<u8>().ok())
            .is_some_and(|n| (1..=24).contains(&n));
        if stroke.chars().count() == 1 || NAMES.contains(&stroke) || function {
            self.strokes.insert(stroke.into(), key);
            Ok(())
        } else {
            Err(KeymapError::NoStroke(stroke.into()))
        }
    }

    /// The key a terminal key of that name stands for.
    #[must_use]
    pub fn named(&self, stroke: &str) -> Option<Key> {
        self.strokes.get(stroke).copied().or_else(|| {
            let mut letters = stroke.chars().flat_map(char::to_lowercase);
            match (letters.next(), letters.next()) {
                (Some(c), None) if c.is_ascii_alphabetic() || c == '?' => Some(Key::Letter(c)),
                _ => None,
            }
        })
    }

    /// The key a terminal key stands for; control and alt combinations stand for none, but for
    /// control-C, which asks whether to end.
    #[must_use]
    pub fn key(&self, code: KeyCode, modifiers: KeyModifiers) -> Option<Key> {
        if modifiers.contains(KeyModifiers::CONTROL) {
            return (code == KeyCode::Char('c')).then_some(Key::Letter('q'));
        }
        if modifiers.contains(KeyModifiers::ALT) {
            return None;
        }
        let name = match code {
            KeyCode::Char(' ') => "Space".into(),
            KeyCode::Char(c) => c.to_string(),
            KeyCode::F(n) => format!("F{n}"),
            other => format!("{other:?}"),
        };
        self.named(&name)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(code: KeyCode, expected: Option<Key>) {
        assert_eq!(Keymap::default().key(code, KeyModifiers::NONE), expected);
    }

    #[test]
    fn the_keypad_works_as_it_is() {
        check(KeyCode::Char('7'), Some(Key::Digit(7)));
        check(KeyCode::Char('.'), Some(Key::Point));
        check(KeyCode::Char(','), Some(Key::Point));
        check(KeyCode::Enter, Some(Key::Enter));
        check(KeyCode::Char('*'), Some(Key::Star));
        check(KeyCode::Char('Y'), Some(Key::Letter('y')));
        check(KeyCode::Char('?'), Some(Key::Letter('?')));
        check(KeyCode::Backspace, Some(Key::Erase));
        check(KeyCode::Char('é'), None);
        check(KeyCode::F(5), None);
    }

    #[test]
    fn control_c_asks_to_end_and_other_combinations_do_nothing() {
        let map = Keymap::default();
        assert_eq!(
            map.key(KeyCode::Char('c'), KeyModifiers::CONTROL),
            Some(Key::Letter('q'))
        );
        assert_eq!(map.key(KeyCode::Char('1'), KeyModifiers::CONTROL), None);
        assert_eq!(map.key(KeyCode::Enter, KeyModifiers::ALT), None);
    }

    #[test]
    fn keys_can_be_added_by_name() {
        let mut map = Keymap::default();
        map.add("F5", Key::Talk).expect("a key");
        assert_eq!(map.key(KeyCode::F(5), KeyModifiers::NONE), Some(Key::Talk));
        assert!(map.add("F25", Key::Talk).is_err());
        assert!(map.add("Shift", Key::Talk).is_err());
    }
}
