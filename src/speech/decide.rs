//! Several hypotheses of a recogniser to one decision: keep, ask, or nothing.
//!
//! Promises: two hypotheses that differ in value and lie close together are never settled by a
//! guess; the expected range plays no part, because a fault reading lies outside it by nature.
//! It leaves out where hypotheses come from and how their costs are scaled.

use super::{
    meaning::{Context, Control, Heard, Hypothesis, Meaning},
    parse::same,
    phrases::{Phrases, UNKNOWN},
};
use crate::domain::reading::{Bound, Reading};

/// How close a rival may come before the tool asks. Costs are the recogniser's own log-likelihood
/// differences; the defaults suit the built-in voice's scale and are meant to be set from
/// measurements of the voice in use.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Margins {
    /// A rival of another value closer than this makes the tool ask.
    pub different: f64,
    /// The same for words one sound apart (fifteen and fifty, five and nine), a dropped "point" or
    /// a dropped repetition.
    pub confusable: f64,
    /// Noise or other talk closer than this to the best hypothesis makes it nothing.
    pub noise: f64,
    /// The most meanings asked about.
    pub most: usize,
}

impl Default for Margins {
    /// Differences of 2 and 3; noise only where it is the best; three meanings (keys 1 to 3).
    ///
    /// Measured with the embedded voice on open recordings of digits, strings and letters: a best
    /// hypothesis that was wrong had the truth within 1.9 (10 of 11 times), one that was right had
    /// its rival within 1.7 or not before 4.1.
    fn default() -> Self {
        Self {
            different: 2.0,
            confusable: 3.0,
            noise: 0.0,
            most: 3,
        }
    }
}

/// Words that are one or two sounds apart: phoneme edit distance 1 for teens and tens, 2 (of 3
/// sounds) for the digits, in the CMU Pronouncing Dictionary; oh, nought and four by their British
/// forms.
const CONFUSABLE: [(&str, &str); 17] = [
    ("thirteen", "thirty"),
    ("fourteen", "forty"),
    ("fifteen", "fifty"),
    ("sixteen", "sixty"),
    ("seventeen", "seventy"),
    ("eighteen", "eighty"),
    ("nineteen", "ninety"),
    ("five", "nine"),
    ("four", "five"),
    ("one", "nine"),
    ("one", "four"),
    ("oh", "four"),
    ("nought", "four"),
    ("nought", "nine"),
    ("line", "nine"),
    ("seven", "eleven"),
    ("under", "hundred"),
];

/// Decides among hypotheses: words and how much less likely than the best (0 for the best, never
/// negative), the best first.
#[must_use]
pub fn decide(
    phrases: &Phrases,
    context: Context,
    hypotheses: &[(String, f64)],
    margins: &Margins,
) -> Heard {
    let best_words = hypotheses.first().map_or("", |(words, _)| words.as_str());
    let noise = hypotheses
        .iter()
        .any(|(words, margin)| *margin <= margins.noise && unknown(words));
    let mut known: Vec<Hypothesis> = Vec::new();
    for (words, margin) in hypotheses {
        let meaning = phrases.understand(context, words);
        // Two ways of saying the same thing are one hypothesis.
        if !known.iter().any(|h| same(&h.meaning, &meaning)) {
            known.push(Hypothesis {
                words: words.clone(),
                meaning,
                margin: *margin,
            });
        }
    }
    let meaning = match (noise, known.first()) {
        (_, None) => Meaning::Nothing("nothing was heard".into()),
        (true, _) if !unknown(best_words) => {
            Meaning::Nothing("it may have been noise or other talk".into())
        }
        (_, Some(best)) => settled(context, best, &known[1..], margins),
    };
    // The best stays first even when it means nothing: its words are shown and logged.
    let (first, rest) = known.split_at(known.len().min(1));
    let hypotheses = first
        .iter()
        .chain(
            rest.iter()
                .filter(|h| !matches!(h.meaning, Meaning::Nothing(_))),
        )
        .cloned()
        .collect();
    Heard {
        hypotheses,
        meaning,
        clip: None,
    }
}

fn unknown(words: &str) -> bool {
    words.split_whitespace().any(|word| word == UNKNOWN)
}

fn settled(
    context: Context,
    best: &Hypothesis,
    rivals: &[Hypothesis],
    margins: &Margins,
) -> Meaning {
    if matches!(best.meaning, Meaning::Nothing(_)) {
        return best.meaning.clone();
    }
    let mut found = flat(&best.meaning);
    for rival in rivals {
        let limit = if confusable(&best.words, &rival.words) {
            margins.confusable
        } else {
            margins.different
        };
        if rival.margin - best.margin >= limit {
            continue;
        }
        for meaning in flat(&rival.meaning) {
            if !found.iter().any(|known| no_rival(context, known, &meaning)) {
                found.push(meaning);
            }
        }
    }
    if found.len() == 1 {
        found.remove(0)
    } else {
        found.truncate(margins.most);
        Meaning::Ambiguous(found)
    }
}

/// The single meanings of a meaning; none for nothing.
fn flat(meaning: &Meaning) -> Vec<Meaning> {
    match meaning {
        Meaning::Ambiguous(all) => all.clone(),
        Meaning::Nothing(_) => Vec::new(),
        one => vec![one.clone()],
    }
}

/// Whether two meanings would be kept as the same value: zeros at the end and a unit that was not
/// said make no difference worth a question.
fn no_rival(context: Context, a: &Meaning, b: &Meaning) -> bool {
    match (a, b) {
        (Meaning::Reading(a), Meaning::Reading(b)) => same_value(context, a, b),
        (
            Meaning::Control(Control::Correction(Some(a))),
            Meaning::Control(Control::Correction(Some(b))),
        ) => no_rival(context, a, b),
        _ => same(a, b),
    }
}

fn same_value(context: Context, a: &Reading, b: &Reading) -> bool {
    let unit = |r: &Reading| r.unit().or(context.unit());
    let units_agree = match (unit(a), unit(b)) {
        (Some(a), Some(b)) => a == b,
        // Not said and not known from the context: the other hypothesis only adds it.
        _ => true,
    };
    a.bound() == b.bound() && a.value() == b.value() && (units_agree || a.bound() == Bound::Open)
}

/// Whether two word strings differ only in words that are easily taken for each other, in a dropped
/// "point", or in a dropped repetition.
#[must_use]
pub fn confusable(a: &str, b: &str) -> bool {
    let a: Vec<&str> = a.split_whitespace().collect();
    let b: Vec<&str> = b.split_whitespace().collect();
    if a.len() == b.len() {
        return a.iter().zip(&b).all(|(x, y)| x == y || alike(x, y));
    }
    let without_point = |words: &[&str]| -> Vec<String> {
        words
            .iter()
            .filter(|word| !matches!(**word, "point" | "decimal"))
            .map(|word| (*word).to_owned())
            .collect()
    };
    let once = |mut words: Vec<String>| {
        words.dedup();
        words
    };
    let (pointless_a, pointless_b) = (without_point(&a), without_point(&b));
    pointless_a == pointless_b || once(pointless_a) == once(pointless_b)
}

fn alike(a: &str, b: &str) -> bool {
    CONFUSABLE
        .iter()
        .any(|(x, y)| (*x == a && *y == b) || (*x == b && *y == a))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(context: Context, hypotheses: &[(&str, f64)], expected: &str) {
        let hypotheses: Vec<(String, f64)> = hypotheses
            .iter()
            .map(|(words, margin)| ((*words).to_owned(), *margin))
            .collect();
        let heard = decide(Phrases::plain(), context, &hypotheses, &Margins::default());
        assert_eq!(brief(&heard.meaning), expected);
    }

    fn brief(meaning: &Meaning) -> String {
        match meaning {
            Meaning::Reading(r) => r.to_string(),
            Meaning::Ambiguous(all) => all.iter().map(brief).collect::<Vec<_>>().join(" or "),
            Meaning::Nothing(_) => "nothing".into(),
            other => format!("{other:?}"),
        }
    }

    #[test]
    fn a_clear_best_is_kept() {
        check(
            Context::Ohms,
            &[("zero point five", 0.0), ("zero point six", 9.0)],
            "0.5",
        );
    }

    #[test]
    fn a_close_rival_of_another_value_is_asked_about() {
        check(
            Context::Ohms,
            &[("zero point five", 0.0), ("zero point six", 1.0)],
            "0.5 or 0.6",
        );
    }

    #[test]
    fn words_one_sound_apart_are_asked_about_from_further_away() {
        check(
            Context::Insulation,
            &[("fifteen megohms", 0.0), ("fifty megohms", 2.5)],
            "15 MΩ or 50 MΩ",
        );
        check(
            Context::Insulation,
            &[("fifteen megohms", 0.0), ("sixteen megohms", 2.5)],
            "15 MΩ",
        );
    }

    #[test]
    fn a_dropped_point_and_a_dropped_repetition_are_asked_about() {
        check(
            Context::Ohms,
            &[("one two five", 0.0), ("one point two five", 2.5)],
            "125 or 1.25",
        );
        check(
            Context::Ohms,
            &[("zero point two two", 0.0), ("zero point two", 2.5)],
            "0.22 or 0.2",
        );
    }

    #[test]
    fn another_wording_or_a_unit_not_said_is_no_rival() {
        check(
            Context::Ohms,
            &[
                ("zero point five eight ohms", 0.0),
                ("zero point five eight", 0.1),
                ("nought point five eight", 0.2),
            ],
            "0.58 Ω",
        );
        check(
            Context::Ohms,
            &[
                ("zero point five eight", 0.0),
                ("zero point five eight megohms", 0.1),
            ],
            "0.58 or 0.58 MΩ",
        );
    }

    #[test]
    fn noise_is_nothing() {
        check(Context::Ohms, &[("[unk]", 0.0), ("zero", 0.1)], "nothing");
        check(Context::Ohms, &[("zero", 0.0), ("[unk]", 0.0)], "nothing");
        check(Context::Ohms, &[], "nothing");
    }

    #[test]
    fn a_phrase_with_two_meanings_stays_ambiguous_however_clear_its_sound() {
        check(
            Context::Ohms,
            &[("one thirty seven", 0.0), ("open circuit", 50.0)],
            "137 or 1.37",
        );
    }
}
