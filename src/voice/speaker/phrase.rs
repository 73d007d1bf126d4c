//! Text of a prompt to the clips that say it.
//!
//! Promises: the same text gives the same clips; numbers are said digit by digit, boards in the ICAO
//! alphabet, units in full; of a sentence that is mostly without clips (a reminder, a name) nothing
//! is said, it stands on the screen. It leaves out sound.

use std::collections::HashMap;

/// The phrases there are clips of, by their words.
#[derive(Debug, Clone, Default)]
pub struct Phrasebook {
    phrases: HashMap<Vec<String>, usize>,
    longest: usize,
}

impl Phrasebook {
    /// From the names of clips (`within-the-range`), numbered as they come.
    pub fn new<'a>(names: impl Iterator<Item = &'a str>) -> Self {
        let mut book = Self::default();
        for (at, name) in names.enumerate() {
            // `x-ray` is one word and written with its dash in a text, too: it splits alike.
            let words: Vec<String> = name.split('-').map(str::to_owned).collect();
            book.longest = book.longest.max(words.len());
            book.phrases.insert(words, at);
        }
        book
    }

    /// The clips that say a text, in order; sentences mostly without clips are left out.
    #[must_use]
    pub fn clips(&self, text: &str) -> Vec<usize> {
        let mut clips = Vec::new();
        for sentence in sentences(text) {
            let words = words(sentence);
            let (found, covered) = self.cover(&words);
            if covered * 2 > words.len() {
                clips.extend(found);
            }
        }
        clips
    }

    /// The longest phrases from the left, and how many words they cover.
    fn cover(&self, words: &[String]) -> (Vec<usize>, usize) {
        let (mut clips, mut covered, mut at) = (Vec::new(), 0, 0);
        while at < words.len() {
            let longest = self.longest.min(words.len() - at);
            let hit = (1..=longest)
                .rev()
                .find_map(|n| self.phrases.get(&words[at..at + n]).map(|clip| (n, *clip)));
            match hit {
                Some((n, clip)) => {
                    clips.push(clip);
                    covered += n;
                    at += n;
                }
                None => at += 1,
            }
        }
        (clips, covered)
    }
}

/// Cuts at full stops, question marks and colons that end a word; a point in a figure does not.
fn sentences(text: &str) -> impl Iterator<Item = &str> {
    let mut rest = text;
    std::iter::from_fn(move || {
        if rest.is_empty() {
            return None;
        }
        let end = rest
            .char_indices()
            .find(|(at, c)| {
                matches!(c, '.' | '?' | '!' | ':')
                    && rest[at + 1..]
                        .chars()
                        .next()
                        .is_none_or(char::is_whitespace)
            })
            .map_or(rest.len(), |(at, _)| at + 1);
        let (sentence, after) = rest.split_at(end);
        rest = after.trim_start();
        Some(sentence)
    })
}

/// A sentence as words to be said.
fn words(sentence: &str) -> Vec<String> {
    let mut words = Vec::new();
    for token in sentence.split_whitespace() {
        let token = token.trim_matches(|c: char| matches!(c, ',' | '?' | '!' | ':' | '(' | ')'));
        let token = token.strip_suffix('.').unwrap_or(token);
        say_token(token, &mut words);
    }
    words
}

fn push(words: &mut Vec<String>, text: &str) {
    words.extend(
        text.split([' ', '-'])
            .filter(|w| !w.is_empty())
            .map(str::to_owned),
    );
}

fn say_token(token: &str, words: &mut Vec<String>) {
    if let Some(fixed) = fixed(token) {
        push(words, fixed);
        return;
    }
    if let Some((board, circuit)) = token.split_once('/')
        && is_board(board)
    {
        letters(board, words);
        if circuit.starts_with(|c: char| c.is_ascii_digit()) {
            push(words, "circuit");
            let (way, line) = circuit.split_once('L').unwrap_or((circuit, ""));
            figure(way, words);
            if !line.is_empty() {
                push(words, "line");
                figure(line, words);
            }
        }
        return;
    }
    if let Some((way, line)) = token.split_once('L')
        && [way, line]
            .iter()
            .all(|t| !t.is_empty() && t.chars().all(|c| c.is_ascii_digit()))
    {
        figure(way, words);
        push(words, "line");
        figure(line, words);
        return;
    }
    let digits = token.trim_start_matches(['>', '<']);
    if !digits.is_empty() && digits.chars().all(|c| c.is_ascii_digit() || c == '.') {
        figure(token, words);
        return;
    }
    if token.len() > 1 && is_board(token) {
        letters(token, words);
        return;
    }
    push(words, &token.to_lowercase());
}

/// Marks of the trade as they are said. Symbols keep their case: `mΩ` is not `MΩ`.
fn fixed(token: &str) -> Option<&'static str> {
    Some(match token {
        "Ω" | "ohm" => "ohms",
        "mΩ" | "milliohm" => "milliohms",
        "kΩ" | "kilohm" => "kilohms",
        "MΩ" | "megohm" => "megohms",
        "V" | "volt" => "volts",
        "A" | "amp" => "amps",
        "mA" | "milliamp" => "milliamps",
        "kA" | "kiloamp" => "kiloamps",
        "ms" | "millisecond" => "milliseconds",
        "s" | "second" => "seconds",
        "Hz" => "hertz",
        "%" => "percent",
        "R1+R2" => "r one plus r two",
        "r1" | "R1" => "r one",
        "rn" | "Rn" => "r n",
        "r2" | "R2" => "r two",
        "L-N" => "line to neutral",
        "L-E" => "line to earth",
        "N-E" => "neutral to earth",
        "L+N-E" => "lives to earth",
        "L1-L2" => "line one to line two",
        "L2-L3" => "line two to line three",
        "L1-L3" => "line one to line three",
        "L1-N" => "line one to neutral",
        "L2-N" => "line two to neutral",
        "L3-N" => "line three to neutral",
        "L1-E" => "line one to earth",
        "L2-E" => "line two to earth",
        "L3-E" => "line three to earth",
        "line-cpc" => "line c p c",
        "cpc" => "c p c",
        "Ze" => "z e",
        "Zs" => "z s",
        "RCD" => "r c d",
        "SELV" => "s e l v",
        "PELV" => "p e l v",
        "Protective" => "protective",
        "TAKE" => "take",
        "OUT" => "out",
        "PUT" => "put",
        "BACK" => "back",
        "CLEAR" => "clear",
        "THE" => "the",
        "NULL" => "null",
        "BELOW" => "below",
        "ABOVE" => "above",
        "OPEN" => "open",
        "NOT" => "not",
        "BEYOND" => "beyond",
        "LIMIT" => "limit",
        "STILL" => "still",
        "IN" => "in",
        "pt" => "point",
        "min" => "minimum",
        "max" => "maximum",
        "AFFIRM" => "affirm",
        "1" => "one",
        "2" => "two",
        "3" => "three",
        _ => return None,
    })
}

fn is_board(token: &str) -> bool {
    (1..=8).contains(&token.len())
        && token
            .chars()
            .all(|c| c.is_ascii_uppercase() || c.is_ascii_digit())
        && token.starts_with(|c: char| c.is_ascii_uppercase())
}

fn letters(board: &str, words: &mut Vec<String>) {
    const ALPHABET: [&str; 26] = [
        "alpha", "bravo", "charlie", "delta", "echo", "foxtrot", "golf", "hotel", "india",
        "juliett", "kilo", "lima", "mike", "november", "oscar", "papa", "quebec", "romeo",
        "sierra", "tango", "uniform", "victor", "whiskey", "x-ray", "yankee", "zulu",
    ];
    for c in board.chars() {
        match u8::try_from(c).ok().and_then(|b| b.checked_sub(b'A')) {
            Some(n) if usize::from(n) < ALPHABET.len() => push(words, ALPHABET[usize::from(n)]),
            _ => figure(&c.to_string(), words),
        }
    }
}

fn figure(text: &str, words: &mut Vec<String>) {
    for c in text.chars() {
        push(
            words,
            match c {
                '>' => "greater than",
                '<' => "less than",
                '.' => "decimal",
                '0' => "zero",
                '1' => "one",
                '2' => "two",
                '3' => "three",
                '4' => "four",
                '5' => "five",
                '6' => "six",
                '7' => "seven",
                '8' => "eight",
                '9' => "nine",
                _ => "",
            },
        );
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::voice::speaker::clips;

    #[track_caller]
    fn check(text: &str, expected: &str) {
        let names: Vec<&str> = clips::CLIPS.iter().map(|(name, _)| *name).collect();
        let book = Phrasebook::new(names.iter().copied());
        let said: Vec<&str> = book.clips(text).into_iter().map(|at| names[at]).collect();
        assert_eq!(said.join(" "), expected);
    }

    #[test]
    fn values_are_said_digit_by_digit_with_unit_place_and_question() {
        check(
            "zero decimal five eight ohm. DB1/7 R1+R2 pt 3. ABOVE the range. Affirm?",
            "zero decimal five eight ohms delta bravo one circuit seven r-one-plus-r-two \
             point three above-the-range affirm",
        );
        check(
            "Expect: 0.37 to 0.54 Ω",
            "expect zero decimal three seven to zero decimal five four ohms",
        );
        check(">999 MΩ", "greater-than nine nine nine megohms");
        check("4L2", "four line two");
    }

    #[test]
    fn symbols_that_differ_by_case_are_told_apart() {
        check("5 mΩ", "five milliohms");
        check("5 MΩ", "five megohms");
    }

    #[test]
    fn a_name_in_a_sentence_is_left_to_the_screen() {
        check(
            "DB1 Protective bonding water",
            "delta bravo one protective-bonding",
        );
    }

    #[test]
    fn a_sentence_without_clips_is_not_said_in_scraps() {
        check("Parallel metalwork pulls a reading down.", "");
    }

    #[test]
    fn what_the_session_asks_can_be_said_whole() {
        for text in [
            "Fit before the test: line-cpc link at the board, DB1/3. Is it in?",
            "TAKE OUT: ring cross-link line-neutral, DB1/2. Is it out?",
            "PUT BACK: loads, lamps, electronics out, DB1/1. Is it back, as it was, tight?",
            "CLEAR THE NULL: long lead still nulled. Nulled again, short leads?",
            "Keep as found, or measure again?",
            "Hold the probes on until discharged. Discharged?",
            "NOT OPEN, open was expected",
        ] {
            let names: Vec<&str> = clips::CLIPS.iter().map(|(name, _)| *name).collect();
            let book = Phrasebook::new(names.iter().copied());
            for sentence in sentences(text) {
                let words = words(sentence);
                let (_, covered) = book.cover(&words);
                assert_eq!(covered, words.len(), "{sentence}: {words:?}");
            }
        }
    }
}
