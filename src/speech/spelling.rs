//! Typed text to the words of the grammars: case, hyphens, figures, other spellings.
//!
//! Promises: words of the grammars come back unchanged, so what a recogniser writes goes through
//! as it is. It leaves out what the words mean; it never drops a word.

use std::sync::OnceLock;

/// `typed = words`, one a line; `#` begins a comment.
const SPELLINGS: &str = include_str!("../../grammars/spellings.txt");

const DIGITS: [&str; 10] = [
    "zero", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine",
];

/// The ICAO alphabet as the grammars spell it, A to Z.
pub(super) const LETTERS: [&str; 26] = [
    "alpha", "bravo", "charlie", "delta", "echo", "foxtrot", "golf", "hotel", "india", "juliet",
    "kilo", "lima", "mike", "november", "oscar", "papa", "quebec", "romeo", "sierra", "tango",
    "uniform", "victor", "whiskey", "x-ray", "yankee", "zulu",
];

/// The word for a digit character.
pub(super) fn digit_word(c: char) -> Option<&'static str> {
    Some(DIGITS[c.to_digit(10)? as usize])
}

/// What was typed or recognised, in the words of the grammars.
#[must_use]
pub fn words(text: &str) -> Vec<String> {
    let mut raw = Vec::new();
    for token in text.to_lowercase().replace('’', "'").split_whitespace() {
        split(token, &mut raw);
    }
    board_letters(respelled(raw))
}

/// Lower case and single spaces, nothing else: what is shown as heard.
#[must_use]
pub fn tidied(text: &str) -> String {
    text.to_lowercase()
        .split_whitespace()
        .collect::<Vec<_>>()
        .join(" ")
}

/// One token between spaces: hyphens, figures, signs.
fn split(token: &str, out: &mut Vec<String>) {
    if token == super::phrases::UNKNOWN || token == "x-ray" {
        out.push(token.into());
        return;
    }
    let token = token.trim_matches(|c| matches!(c, ',' | ';' | ':' | '!' | '?' | '"' | '(' | ')'));
    let token = token.trim_end_matches('.');
    let mut word = String::new();
    let finish = |word: &mut String, out: &mut Vec<String>| {
        if !word.is_empty() {
            out.push(std::mem::take(word));
        }
    };
    let mixed = token.chars().any(|c| c.is_ascii_digit());
    for c in token.chars() {
        match c {
            '-' | '/' => finish(&mut word, out),
            '+' => {
                finish(&mut word, out);
                out.push("plus".into());
            }
            '>' => out.extend(["greater".into(), "than".into()]),
            '<' => out.extend(["less".into(), "than".into()]),
            '.' if mixed => {
                finish(&mut word, out);
                out.push("point".into());
            }
            // "c.p.c." is three letters.
            '.' => finish(&mut word, out),
            _ => match digit_word(c) {
                Some(digit) => {
                    finish(&mut word, out);
                    out.push(digit.into());
                }
                // Letters beside figures are said one by one: DB1, R1, 4L2.
                None if mixed && c.is_ascii_alphabetic() => out.push(c.into()),
                None => word.push(c),
            },
        }
    }
    finish(&mut word, out);
}

/// Other spellings replaced, longest first.
fn respelled(raw: Vec<String>) -> Vec<String> {
    let mut out = Vec::with_capacity(raw.len());
    let mut at = 0;
    while at < raw.len() {
        let entry = table()
            .iter()
            .find(|(typed, _)| raw[at..].starts_with_words(typed));
        match entry {
            Some((typed, words)) => {
                out.extend(words.iter().map(|word| (*word).to_owned()));
                at += typed.len();
            }
            None => {
                out.push(raw[at].clone());
                at += 1;
            }
        }
    }
    out
}

trait StartsWithWords {
    fn starts_with_words(&self, words: &[&str]) -> bool;
}

impl StartsWithWords for [String] {
    fn starts_with_words(&self, words: &[&str]) -> bool {
        self.len() >= words.len() && self.iter().zip(words).all(|(a, b)| a == b)
    }
}

type Table = Vec<(Vec<&'static str>, Vec<&'static str>)>;

fn table() -> &'static Table {
    static TABLE: OnceLock<Table> = OnceLock::new();
    TABLE.get_or_init(|| {
        let mut table: Table = SPELLINGS
            .lines()
            .filter(|line| !line.starts_with('#'))
            .filter_map(|line| line.split_once('='))
            .map(|(typed, words)| {
                (
                    typed.split_whitespace().collect(),
                    words.split_whitespace().collect(),
                )
            })
            .collect();
        table.sort_by_key(|(typed, _)| std::cmp::Reverse(typed.len()));
        table
    })
}

/// Letters typed after "board" are said in the ICAO alphabet; "d b" is said as it is.
fn board_letters(mut words: Vec<String>) -> Vec<String> {
    let mut at = 0;
    while at < words.len() {
        if words[at] != "board" {
            at += 1;
            continue;
        }
        at += 1;
        while at < words.len() {
            if words[at] == "d" && words.get(at + 1).is_some_and(|next| next == "b") {
                at += 2;
                continue;
            }
            let mut chars = words[at].chars();
            match (chars.next(), chars.next()) {
                (Some(c @ 'a'..='z'), None) => {
                    words[at] = LETTERS[c as usize - 'a' as usize].into();
                }
                _ if DIGITS.contains(&words[at].as_str())
                    || LETTERS.contains(&words[at].as_str()) => {}
                _ => break,
            }
            at += 1;
        }
    }
    words
}
