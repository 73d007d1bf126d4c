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
    for token in text.replace('’', "'").split_whitespace() {
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

/// Units written as symbols after a figure (SI; case matters: M is mega, m is milli).
const SYMBOLS: [(&str, &str); 16] = [
    ("MΩ", "megohms"),
    ("mΩ", "milliohms"),
    ("kΩ", "kilohms"),
    ("GΩ", "gigohms"),
    ("Ω", "ohms"),
    ("kA", "kiloamps"),
    ("mA", "milliamps"),
    ("A", "amps"),
    ("mV", "millivolts"),
    ("V", "volts"),
    ("ms", "milliseconds"),
    ("s", "seconds"),
    ("Hz", "hertz"),
    ("%", "percent"),
    ("m", "metres"),
    ("°C", "degrees celsius"),
];

/// A figure written together with its unit, or a unit symbol by itself that is no letter.
fn figure_and_unit(token: &str) -> Option<(&str, &'static str)> {
    SYMBOLS.iter().find_map(|(symbol, words)| {
        let figure = token.strip_suffix(symbol)?;
        let lone = figure.is_empty() && symbol.chars().any(|c| !c.is_ascii_alphabetic());
        let after_figure = figure.ends_with(|c: char| c.is_ascii_digit());
        (lone || after_figure).then_some((figure, *words))
    })
}

/// One token between spaces: hyphens, figures, signs.
fn split(token: &str, out: &mut Vec<String>) {
    // The ohm sign and the capital omega look alike.
    let token = token.replace('\u{2126}', "Ω");
    if let Some((figure, unit)) = figure_and_unit(&token) {
        split(figure, out);
        out.extend(unit.split_whitespace().map(Into::into));
        return;
    }
    let token = token.to_lowercase();
    let token = token.as_str();
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
    // 26ms, 0.58ohms: the letters that end it are one word.
    let figure = token.trim_end_matches(|c: char| c.is_ascii_alphabetic());
    if mixed
        && figure.len() < token.len()
        && !figure.contains(|c: char| c.is_ascii_alphabetic())
        && figure.ends_with(|c: char| c.is_ascii_digit())
    {
        split(figure, out);
        out.push(token[figure.len()..].into());
        return;
    }
    // C7 is circuit seven.
    if let Some(way) = token.strip_prefix('c')
        && !way.is_empty()
        && way.chars().all(|c| c.is_ascii_digit())
    {
        out.push("circuit".into());
        split(way, out);
        return;
    }
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

/// Short words that follow a board and are no letters.
const NOT_LETTERS: [&str; 6] = ["one", "two", "six", "ten", "way", "and"];

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
            let word = words[at].clone();
            let letters = (1..=3).contains(&word.len())
                && !NOT_LETTERS.contains(&word.as_str())
                && word.chars().all(|c| c.is_ascii_lowercase());
            if letters {
                let said = word
                    .chars()
                    .map(|c| LETTERS[c as usize - 'a' as usize].to_owned());
                words.splice(at..=at, said);
                at += word.len();
            } else if word == "dash"
                || DIGITS.contains(&word.as_str())
                || LETTERS.contains(&word.as_str())
            {
                at += 1;
            } else {
                break;
            }
        }
    }
    words
}
