//! Reads one TOML table key by key and notes every mistake on the way.
//!
//! Promises: a getter that notes a mistake still returns something of its type, so that the rest
//! of the file is examined too; the caller throws the result away when any mistake was noted.
//! [`Fields::done`] names the keys nobody asked for. It leaves out what the values mean.

use std::ops::Range;

use rust_decimal::Decimal;
use toml::{
    Spanned,
    de::{DeTable, DeValue},
};

use crate::domain::words::Worded;

use super::{error::Mistakes, suggest};

/// One table being read.
pub(super) struct Fields<'a> {
    /// What the table is, for messages: "circuit 3 of DB1".
    pub(super) name: String,
    table: DeTable<'a>,
    span: Range<usize>,
    asked: Vec<&'static str>,
}

/// A value with its place in the file.
pub(super) struct At<T> {
    pub(super) value: T,
    pub(super) span: Range<usize>,
}

/// The whole document; `None` when the text is no TOML (the syntax mistakes are noted).
pub(super) fn document<'a>(text: &'a str, mistakes: &mut Mistakes<'_>) -> Option<Fields<'a>> {
    let (table, errors) = DeTable::parse_recoverable(text);
    for error in &errors {
        mistakes.add(
            &error.span().unwrap_or(text.len()..text.len()),
            error.message(),
            "mend the line as TOML: `key = value`, text in double quotes, one value a key",
        );
    }
    // After a syntax mistake the recovered table is full of holes that are nobody's mistakes.
    errors.is_empty().then(|| Fields {
        name: "the file".into(),
        // A missing section is reported where the file begins.
        span: 0..0,
        table: table.into_inner(),
        asked: Vec::new(),
    })
}

impl<'a> Fields<'a> {
    /// Takes a key out; remembers that it was asked for.
    fn take(&mut self, key: &'static str) -> Option<Spanned<DeValue<'a>>> {
        self.asked.push(key);
        self.table.remove(key)
    }

    /// Whether the key is there.
    pub(super) fn has(&self, key: &str) -> bool {
        self.table.contains_key(key)
    }

    /// The place of the table, for mistakes that concern it as a whole.
    pub(super) fn span(&self) -> &Range<usize> {
        &self.span
    }

    /// Notes that a key is missing.
    pub(super) fn missing(&self, key: &str, right: &str, mistakes: &mut Mistakes<'_>) {
        // A misspelt key shows up twice otherwise: as unknown and as missing.
        let spare: Vec<&str> = self
            .table
            .keys()
            .map(|k| k.get_ref().as_ref())
            .filter(|k| !self.asked.contains(k))
            .collect();
        if suggest::nearest(key, &spare).is_none() {
            mistakes.add(
                &self.span,
                format!("{} has no `{key}`", self.name),
                format!("add {right}"),
            );
        }
    }

    /// A text; surrounding spaces are dropped.
    pub(super) fn text(
        &mut self,
        key: &'static str,
        mistakes: &mut Mistakes<'_>,
    ) -> Option<At<String>> {
        let found = self.take(key)?;
        let span = found.span();
        match found.into_inner() {
            DeValue::String(text) => {
                if let Some(bad) = text.chars().find(|c| c.is_control()) {
                    mistakes.add(
                        &span,
                        format!("`{key}` holds the control character {bad:?}"),
                        "write it on one line, without tabs or other control characters",
                    );
                }
                Some(At {
                    value: text.trim().to_string(),
                    span,
                })
            }
            other => {
                mistakes.add(
                    &span,
                    format!("`{key}` is {}, not text", described(&other)),
                    format!("write it in double quotes: {key} = \"...\""),
                );
                None
            }
        }
    }

    /// A text that may be left out or empty.
    pub(super) fn text_or_empty(
        &mut self,
        key: &'static str,
        mistakes: &mut Mistakes<'_>,
    ) -> String {
        self.text(key, mistakes)
            .map(|t| t.value)
            .unwrap_or_default()
    }

    /// A text that must be there and not empty.
    pub(super) fn needed_text(
        &mut self,
        key: &'static str,
        right: &str,
        mistakes: &mut Mistakes<'_>,
    ) -> Option<At<String>> {
        if !self.has(key) {
            self.asked.push(key);
            self.missing(key, right, mistakes);
            return None;
        }
        let text = self.text(key, mistakes)?;
        if text.value.is_empty() {
            mistakes.add(
                &text.span,
                format!("`{key}` is empty"),
                format!("write {right}"),
            );
        }
        Some(text)
    }

    /// A text or a list of texts.
    pub(super) fn texts(
        &mut self,
        key: &'static str,
        mistakes: &mut Mistakes<'_>,
    ) -> Vec<At<String>> {
        let Some(found) = self.take(key) else {
            return Vec::new();
        };
        let span = found.span();
        let items = match found.into_inner() {
            DeValue::Array(items) => items.into_iter().collect(),
            single => vec![Spanned::new(span, single)],
        };
        let mut texts = Vec::new();
        for item in items {
            let span = item.span();
            match item.into_inner() {
                DeValue::String(text)
                    if !text.trim().is_empty() && !text.chars().any(char::is_control) =>
                {
                    texts.push(At {
                        value: text.trim().to_string(),
                        span,
                    });
                }
                other => mistakes.add(
                    &span,
                    format!("`{key}` holds {}, not text", described(&other)),
                    format!("write a list of texts: {key} = [\"...\", \"...\"]"),
                ),
            }
        }
        texts
    }

    /// A yes or no; `otherwise` when left out.
    pub(super) fn flag(
        &mut self,
        key: &'static str,
        otherwise: bool,
        mistakes: &mut Mistakes<'_>,
    ) -> bool {
        let Some(found) = self.take(key) else {
            return otherwise;
        };
        if let DeValue::Boolean(yes) = found.get_ref() {
            return *yes;
        }
        mistakes.add(
            &found.span(),
            format!("`{key}` is {}, not yes or no", described(found.get_ref())),
            format!("write {key} = true or {key} = false"),
        );
        otherwise
    }

    /// A number exactly as written; integer, float or text.
    pub(super) fn decimal(
        &mut self,
        key: &'static str,
        mistakes: &mut Mistakes<'_>,
    ) -> Option<At<Decimal>> {
        let found = self.take(key)?;
        let span = found.span();
        match decimal_of(found.get_ref()) {
            Some(value) => Some(At { value, span }),
            None => {
                mistakes.add(
                    &span,
                    format!(
                        "`{key}` is {}, not a plain number",
                        described(found.get_ref())
                    ),
                    format!("write it with a point, without unit: {key} = 2.5"),
                );
                None
            }
        }
    }

    /// A number between two bounds, both allowed.
    pub(super) fn number(
        &mut self,
        key: &'static str,
        low: f64,
        high: f64,
        mistakes: &mut Mistakes<'_>,
    ) -> Option<At<f64>> {
        let At { value, span } = self.decimal(key, mistakes)?;
        // Through text: the nearest double of what was written, without a detour in decimals.
        let value: f64 = value.to_string().parse().unwrap_or(f64::NAN);
        if (low..=high).contains(&value) {
            Some(At { value, span })
        } else {
            mistakes.add(
                &span,
                format!("`{key}` of {} is {value}", self.name),
                format!("it must lie between {low} and {high}"),
            );
            None
        }
    }

    /// A word of a closed list.
    pub(super) fn choice<T: Worded>(
        &mut self,
        key: &'static str,
        mistakes: &mut Mistakes<'_>,
    ) -> Option<T> {
        let At { value, span } = self.text(key, mistakes)?;
        let member = T::from_word(&value);
        if member.is_none() {
            let words: Vec<&str> = T::WORDS.iter().map(|(word, _)| *word).collect();
            mistakes.add(
                &span,
                format!("`{value}` is no {}", T::WHAT),
                suggest::with_suggestion(&value, &words, &format!("use {}", either(&words))),
            );
        }
        member
    }

    /// A table under a key.
    pub(super) fn table(
        &mut self,
        key: &'static str,
        name: &str,
        mistakes: &mut Mistakes<'_>,
    ) -> Option<Fields<'a>> {
        let found = self.take(key)?;
        inner(found, key, name, mistakes)
    }

    /// The tables of a list under a key; one table alone counts as a list of one.
    pub(super) fn tables(
        &mut self,
        key: &'static str,
        name: &str,
        mistakes: &mut Mistakes<'_>,
    ) -> Vec<Fields<'a>> {
        let Some(found) = self.take(key) else {
            return Vec::new();
        };
        let span = found.span();
        match found.into_inner() {
            DeValue::Array(items) => items
                .into_iter()
                .filter_map(|item| inner(item, key, name, mistakes))
                .collect(),
            single => inner(Spanned::new(span, single), key, name, mistakes)
                .into_iter()
                .collect(),
        }
    }

    /// The raw value under a key, for the few keys with several forms.
    pub(super) fn any(&mut self, key: &'static str) -> Option<Spanned<DeValue<'a>>> {
        self.take(key)
    }

    /// Names every key that nobody asked for.
    pub(super) fn done(self, mistakes: &mut Mistakes<'_>) {
        self.rest(mistakes);
    }

    /// As [`Fields::done`], for a table that is read by reference.
    pub(super) fn rest(&self, mistakes: &mut Mistakes<'_>) {
        for key in self.table.keys() {
            let word: &str = key.get_ref();
            mistakes.add(
                &key.span(),
                format!("{} has an unknown key `{word}`", self.name),
                suggest::with_suggestion(
                    word,
                    &self.asked,
                    &format!("known here: {}", self.asked.join(", ")),
                ),
            );
        }
    }
}

/// The fields of a value that should be a table.
pub(super) fn inner<'a>(
    found: Spanned<DeValue<'a>>,
    key: &str,
    name: &str,
    mistakes: &mut Mistakes<'_>,
) -> Option<Fields<'a>> {
    let span = found.span();
    match found.into_inner() {
        DeValue::Table(table) => Some(Fields {
            name: name.into(),
            table,
            span,
            asked: Vec::new(),
        }),
        other => {
            mistakes.add(
                &span,
                format!("`{key}` is {}, not a table", described(&other)),
                format!("write [{key}] or [[{key}]] with its keys below, or {{ key = value }}"),
            );
            None
        }
    }
}

/// A number as written; underscores between digits are TOML's and fall away.
pub(super) fn decimal_of(value: &DeValue<'_>) -> Option<Decimal> {
    let text = match value {
        DeValue::Integer(i) if i.radix() == 10 => i.as_str(),
        DeValue::Float(f) => f.as_str(),
        DeValue::String(s) => s.trim(),
        _ => return None,
    };
    let plain = text
        .strip_prefix(['+', '-'])
        .unwrap_or(text)
        .chars()
        .all(|c| c.is_ascii_digit() || c == '.' || c == '_');
    let text = text.replace('_', "");
    plain
        .then(|| Decimal::from_str_exact(text.trim_start_matches('+')).ok())
        .flatten()
}

/// What a value is, in words.
pub(super) fn described(value: &DeValue<'_>) -> String {
    match value {
        DeValue::String(text) if text.chars().count() <= 24 => format!("the text {text:?}"),
        DeValue::String(_) => "a text".into(),
        DeValue::Integer(i) => format!("the number {i}"),
        DeValue::Float(f) => format!("the number {f}"),
        DeValue::Boolean(yes) => yes.to_string(),
        DeValue::Datetime(when) => format!("the date {when}"),
        DeValue::Array(_) => "a list".into(),
        DeValue::Table(_) => "a table".into(),
    }
}

/// "`a`, `b` or `c`".
pub(super) fn either(words: &[&str]) -> String {
    match words {
        [] => String::new(),
        [one] => format!("`{one}`"),
        [firsts @ .., last] => {
            let firsts: Vec<String> = firsts.iter().map(|w| format!("`{w}`")).collect();
            format!("{} or `{last}`", firsts.join(", "))
        }
    }
}
