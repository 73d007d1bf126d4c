//! What was heard as one JSON object: the lines of `hear`.
//!
//! Promises: keys come in a fixed order; decimals are text, as said; what does not apply is left
//! out. Keys: `heard`, `kind` (`reading`, `circuit`, `reply`, `control`, `ambiguous`, `nothing`),
//! then as they apply
//!
//! | key | of | holds |
//! |---|---|---|
//! | `value` | readings, corrections, picks, reasons, digits | `0.50`, `299`; the number; the digits |
//! | `unit` | readings | `ohm`, `milliohm`, `megohm`, ...; absent when not said |
//! | `bound` | readings | `exact`, `above`, `below`, `open`, `over-range` |
//! | `board` `circuit` `line` `point` `name` | places | `DB1`, `15` or `4L2`, `L2`, `3`, a name of the job |
//! | `command` | replies, control | `affirm`, `say-again`, `correction`, `test`, ... |
//! | `test` `stage` | `test`, `stage` commands | `r1r2`, `insulation` |
//! | `alternatives` | ambiguous | the same keys, with `margin` (0: as likely as the best) |
//! | `why` | nothing | the reason in words |
//! | `more` | recordings | what else was heard in it, in its order, with the same keys |

use serde_json::{Map, Value, json};

use crate::{
    domain::{place::Place, reading::Reading},
    speech::{Control, Heard, Meaning, Reply, parse::same, tag::stage_word},
};

type Object = Map<String, Value>;

/// The object of one utterance. `before` (such as the file's name) comes first.
#[must_use]
pub fn line(before: &[(&str, &str)], heard: &Heard) -> String {
    Value::Object(utterance(before, heard)).to_string()
}

/// As [`line`], with what else a recording held.
#[must_use]
pub fn line_with_more(before: &[(&str, &str)], heard: &Heard, more: &[Heard]) -> String {
    let mut object = utterance(before, heard);
    if !more.is_empty() {
        let more = more.iter().map(|h| Value::Object(utterance(&[], h)));
        object.insert("more".into(), more.collect());
    }
    Value::Object(object).to_string()
}

fn utterance(before: &[(&str, &str)], heard: &Heard) -> Object {
    let mut object = Object::new();
    for (key, value) in before {
        put(&mut object, key, *value);
    }
    put(&mut object, "heard", heard.words());
    describe(&mut object, &heard.meaning);
    if let Meaning::Ambiguous(all) = &heard.meaning {
        let alternatives: Vec<Value> = all
            .iter()
            .map(|meaning| alternative(heard, meaning))
            .collect();
        object.insert("alternatives".into(), Value::Array(alternatives));
    }
    object
}

fn put(object: &mut Object, key: &str, value: impl Into<Value>) {
    object.insert(key.into(), value.into());
}

/// One of several meanings, with the words it came from and how far behind it lies.
fn alternative(heard: &Heard, meaning: &Meaning) -> Value {
    let from = heard.hypotheses.iter().find(|h| match &h.meaning {
        Meaning::Ambiguous(all) => all.iter().any(|one| same(one, meaning)),
        one => same(one, meaning),
    });
    let mut object = Object::new();
    put(&mut object, "heard", from.map_or("", |h| h.words.as_str()));
    describe(&mut object, meaning);
    // Three decimals are more than a margin is worth.
    let margin = (from.map_or(0.0, |h| h.margin) * 1000.0).round() / 1000.0;
    put(&mut object, "margin", json!(margin));
    Value::Object(object)
}

fn describe(object: &mut Object, meaning: &Meaning) {
    match meaning {
        Meaning::Reading(reading) => {
            put(object, "kind", "reading");
            describe_reading(object, reading);
        }
        Meaning::Place(place) => {
            put(object, "kind", "circuit");
            describe_place(object, place);
        }
        Meaning::Reply(reply) => {
            put(object, "kind", "reply");
            put(object, "command", reply.word());
            if let Reply::Pick(n) = reply {
                put(object, "value", n.to_string());
            }
        }
        Meaning::Control(control) => {
            put(object, "kind", "control");
            put(object, "command", control.word());
            match control {
                Control::Correction(Some(inner)) => match inner.as_ref() {
                    Meaning::Reading(reading) => describe_reading(object, reading),
                    Meaning::Place(place) => describe_place(object, place),
                    _ => {}
                },
                Control::Test(test) => put(object, "test", test.word()),
                Control::Stage(stage) => put(object, "stage", stage_word(*stage)),
                Control::Reason(n) => put(object, "value", n.to_string()),
                Control::Digits(digits) => put(object, "value", digits.as_str()),
                Control::SameAs(point) => put(object, "point", point.to_string()),
                Control::LeaveOut(n) | Control::KeepFor(n) => put(object, "value", n.to_string()),
                _ => {}
            }
        }
        Meaning::Ambiguous(_) => put(object, "kind", "ambiguous"),
        Meaning::Nothing(why) => {
            put(object, "kind", "nothing");
            put(object, "why", why.as_str());
        }
    }
}

fn describe_reading(object: &mut Object, reading: &Reading) {
    if let Some(value) = reading.value() {
        put(object, "value", value.to_string());
    }
    if let Some(unit) = reading.unit() {
        put(object, "unit", unit.word());
    }
    put(object, "bound", reading.bound().word());
}

fn describe_place(object: &mut Object, place: &Place) {
    if let Some(board) = &place.board {
        put(object, "board", board.as_str());
    }
    if let Some(circuit) = place.circuit {
        put(object, "circuit", circuit.to_string());
        if let Some(line) = circuit.line() {
            put(object, "line", line.to_string());
        }
    }
    if let Some(point) = place.point {
        put(object, "point", point.to_string());
    }
    if let Some(name) = &place.name {
        put(object, "name", name.as_str());
    }
}
