//! Reads single answers: numbers, yes and no, words of closed lists, lists.
//!
//! Promises: an error is one clause that says what would be right. It leaves out the questions.

use crate::domain::{
    plan::{Conductor, Material, Rcd},
    words::Worded,
};

use super::super::{
    cable::{sizes, usual_class},
    fields::either,
    suggest,
};

/// The word for "nothing" and for the end of a list.
pub(super) const NONE: &str = "none";
/// Ends a list of questions.
pub(super) const DONE: &str = "done";

/// Any text.
pub(super) fn text(answer: &str) -> Result<String, String> {
    Ok(answer.to_string())
}

/// Any text, or empty for `none`.
pub(super) fn text_or_none(answer: &str) -> Result<String, String> {
    Ok(if is_none(answer) {
        String::new()
    } else {
        answer.to_string()
    })
}

/// Whether the answer says "nothing".
pub(super) fn is_none(answer: &str) -> bool {
    answer.eq_ignore_ascii_case(NONE) || answer == "-"
}

/// Whether the answer ends a list.
pub(super) fn is_done(answer: &str) -> bool {
    answer.eq_ignore_ascii_case(DONE) || is_none(answer)
}

/// Yes or no.
pub(super) fn yes_no(answer: &str) -> Result<bool, String> {
    match answer.to_lowercase().as_str() {
        "y" | "yes" => Ok(true),
        "n" | "no" => Ok(false),
        _ => Err("answer yes or no".into()),
    }
}

/// A number between two bounds, with a point or a comma; a unit after it is not taken.
pub(super) fn number(low: f64, high: f64) -> impl Fn(&str) -> Result<f64, String> {
    move |answer| {
        let plain = answer.replace(',', ".");
        let figure = plain
            .chars()
            .all(|c| c.is_ascii_digit() || matches!(c, '.' | '-'));
        match plain.parse::<f64>() {
            Ok(value) if figure && (low..=high).contains(&value) => Ok(value),
            Ok(_) if figure => Err(format!("it must lie between {low} and {high}")),
            _ => Err(format!(
                "`{answer}` is not a number; write it without unit, such as 2.5"
            )),
        }
    }
}

/// As [`number`], or nothing.
pub(super) fn number_or_none(low: f64, high: f64) -> impl Fn(&str) -> Result<Option<f64>, String> {
    move |answer| {
        if is_none(answer) {
            Ok(None)
        } else {
            number(low, high)(answer).map(Some)
        }
    }
}

/// A conductor by its cross-section of IEC 60228: copper, or aluminium where `al` follows.
pub(super) fn conductor(answer: &str) -> Result<Conductor, String> {
    let lower = answer.to_lowercase();
    let aluminium = lower
        .strip_suffix("aluminium")
        .or_else(|| lower.strip_suffix("al"));
    let (figure, material) = match aluminium {
        Some(figure) => (figure.trim_end(), Material::Aluminium),
        None => (answer, Material::Copper),
    };
    let mm2 = number(0.0, 1000.0)(figure)?;
    let held = sizes(material);
    if held.contains(&mm2) {
        return Ok(Conductor::Size {
            mm2,
            material,
            class: usual_class(mm2),
        });
    }
    let sizes: Vec<String> = held.iter().map(f64::to_string).collect();
    Err(format!(
        "{mm2} mm² is no size of IEC 60228{}; the sizes are {}",
        if material == Material::Aluminium {
            " for aluminium"
        } else {
            ""
        },
        sizes.join(", ")
    ))
}

/// An RCD: its rated residual current in mA, with `s` or `delayed` where it is time-delayed.
pub(super) fn rcd(answer: &str) -> Result<Option<Rcd>, String> {
    if is_none(answer) {
        return Ok(None);
    }
    let lower = answer.to_lowercase();
    let late = lower
        .strip_suffix("delayed")
        .or_else(|| lower.strip_suffix('s'));
    let rated_ma = number(1.0, 30_000.0)(late.unwrap_or(answer).trim_end())?;
    Ok(Some(Rcd {
        rated_ma,
        delayed: late.is_some(),
    }))
}

/// An instrument's accuracy: percent of the reading and digits of the last place, `3 + 2`.
pub(super) fn accuracy(answer: &str) -> Result<(f64, f64), String> {
    let right = || "write percent and digits with a plus between: 3 + 2".to_string();
    let (percent, digits) = answer.split_once('+').ok_or_else(right)?;
    let percent = percent.trim().trim_end_matches('%').trim_end();
    Ok((
        number(0.0, 50.0)(percent)?,
        number(0.0, 100.0)(digits.trim())?,
    ))
}

/// A word of a closed list.
pub(super) fn word<T: Worded>(answer: &str) -> Result<T, String> {
    let words = words::<T>();
    T::from_word(answer).ok_or_else(|| {
        let right = format!("use {}", either(&words));
        format!(
            "`{answer}` is no {}; {}",
            T::WHAT,
            suggest::with_suggestion(answer, &words, &right)
        )
    })
}

/// The words of a closed list.
pub(super) fn words<T: Worded>() -> Vec<&'static str> {
    T::WORDS.iter().map(|(word, _)| *word).collect()
}

/// Texts with commas between; none of them empty.
pub(super) fn texts(answer: &str) -> Result<Vec<String>, String> {
    if is_none(answer) {
        return Ok(Vec::new());
    }
    let items: Vec<String> = answer.split(',').map(|t| t.trim().to_string()).collect();
    if items.iter().any(String::is_empty) {
        Err("there is an empty name between commas".into())
    } else {
        Ok(items)
    }
}
