//! Circuits of a job file: kind, device, cable, length, points.
//!
//! Promises: numbers are unique on their board, every circuit has at least one point, points lie
//! on the run. It leaves out whether the design is good: the notices say what is odd.

use rust_decimal::{Decimal, prelude::ToPrimitive};
use toml::de::DeValue;

use crate::domain::{
    place::{CircuitNo, PointNo},
    plan::{Circuit, CircuitKind, Device, DeviceType, Length, LengthBasis, Point, Rcd, Supply},
    words::Worded,
};

use super::{
    cable,
    error::Mistakes,
    fields::{At, Fields, decimal_of, described, inner},
    suggest,
};

/// More points than any circuit has: a slip, and a bound on the work it makes.
const MOST_POINTS: u16 = 200;

/// The circuits of a board, in order of their ways.
pub(super) fn circuits(
    f: &mut Fields<'_>,
    board: &str,
    supply: &Supply,
    mistakes: &mut Mistakes<'_>,
) -> Vec<Circuit> {
    let mut list: Vec<Circuit> = Vec::new();
    let mut taken: Vec<CircuitNo> = Vec::new();
    for mut f in f.tables("circuit", &format!("a circuit of {board}"), mistakes) {
        let no = number(&mut f, mistakes);
        if let Some(At { value: no, span }) = &no {
            f.name = format!("circuit {no} of {board}");
            if taken.contains(no) {
                mistakes.add(
                    span,
                    format!("{board} has two circuits {no}"),
                    "give each its own number; single-phase circuits of one way are 4L1, 4L2, 4L3",
                );
            }
            taken.push(*no);
        }
        let circuit = circuit(&mut f, no.map(|at| at.value), supply, mistakes);
        f.done(mistakes);
        list.extend(circuit);
    }
    list.sort_by_key(|circuit| circuit.no);
    list
}

fn number(f: &mut Fields<'_>, mistakes: &mut Mistakes<'_>) -> Option<At<CircuitNo>> {
    if !f.has("no") {
        f.any("no");
        f.missing("no", "its number: no = 7, or no = \"4L2\"", mistakes);
        return None;
    }
    let found = f.any("no")?;
    let text = match found.get_ref() {
        DeValue::Integer(i) => i.to_string(),
        DeValue::String(s) => s.trim().to_string(),
        other => described(other),
    };
    match text.parse() {
        Ok(value) => Some(At {
            value,
            span: found.span(),
        }),
        Err(wrong) => {
            let wrong: crate::domain::place::PlaceError = wrong;
            mistakes.add(
                &found.span(),
                format!("`{text}` is not a {}", wrong.what),
                wrong.right,
            );
            None
        }
    }
}

fn circuit(
    f: &mut Fields<'_>,
    no: Option<CircuitNo>,
    supply: &Supply,
    mistakes: &mut Mistakes<'_>,
) -> Option<Circuit> {
    let name = f.text_or_empty("name", mistakes);
    let has_kind = f.has("kind");
    let kind: Option<CircuitKind> = f.choice("kind", mistakes);
    if !has_kind {
        let words: Vec<&str> = CircuitKind::WORDS.iter().map(|(word, _)| *word).collect();
        f.missing(
            "kind",
            &format!("what it is: kind = one of {}", words.join(", ")),
            mistakes,
        );
    }
    // Without a kind the rest is still examined, as the kind that asks for everything.
    let assumed = kind.unwrap_or(CircuitKind::Radial);
    let three_phase = phases(f, no, supply, mistakes);
    let without_neutral = !f.flag("neutral", true, mistakes);
    if without_neutral && !three_phase {
        f.missing(
            "phases",
            "a circuit without neutral has three: phases = 3",
            mistakes,
        );
    }
    let cable = cable::cable(f, assumed, mistakes);
    let length = cable::length(f, mistakes);
    let device = device(f, mistakes);
    let limit = length.unwrap_or(Length {
        m: f64::INFINITY,
        basis: LengthBasis::Drawing,
    });
    let points = points(f, limit.m, assumed, mistakes);
    let electronics = f.flag("electronics", false, mistakes);
    let long_lead = f.flag("long-lead", false, mistakes);
    let design_a = f
        .number("design-a", 0.01, 6300.0, mistakes)
        .map(|at| at.value);
    Some(Circuit {
        no: no?,
        name,
        kind: kind?,
        three_phase,
        without_neutral: without_neutral && three_phase,
        cable: cable?,
        length: length?,
        device: device?,
        points,
        electronics,
        long_lead,
        design_a,
    })
}

/// `phases = 3`; one phase when left out.
fn phases(
    f: &mut Fields<'_>,
    no: Option<CircuitNo>,
    supply: &Supply,
    mistakes: &mut Mistakes<'_>,
) -> bool {
    let Some(At { value, span }) = f.decimal("phases", mistakes) else {
        return false;
    };
    let three = value == Decimal::from(3);
    if !three && value != Decimal::ONE {
        mistakes.add(
            &span,
            format!("a circuit of {value} phases"),
            "write phases = 1 or phases = 3",
        );
    } else if three && !supply.three_phase {
        mistakes.add(
            &span,
            format!("{} is three-phase on a single-phase supply", f.name),
            "write phases = 3 in [supply], or drop it here",
        );
    } else if let (true, Some(no)) = (three, no.filter(|no| no.line().is_some())) {
        mistakes.add(
            &span,
            format!("circuit {no} has one line in its number and three phases"),
            format!("number it {}, or drop `phases`", no.way()),
        );
    }
    three
}

/// `device = "B32"` or `device = "BS 88-2 32"`, with `rcd-ma` and `rcd-delayed`.
fn device(f: &mut Fields<'_>, mistakes: &mut Mistakes<'_>) -> Option<Device> {
    let rcd_ma = f.number("rcd-ma", 1.0, 30_000.0, mistakes);
    let has_delayed = f.has("rcd-delayed");
    let delayed = f.flag("rcd-delayed", false, mistakes);
    if has_delayed && rcd_ma.is_none() {
        mistakes.add(
            f.span(),
            format!("{} has `rcd-delayed` but no `rcd-ma`", f.name),
            "add the rated residual current: rcd-ma = 100",
        );
    }
    let At { value, span } = f.needed_text(
        "device",
        "type and rating of the protective device: device = \"B32\"",
        mistakes,
    )?;
    match device_of(&value) {
        Ok((kind, rated_a)) => Some(Device {
            kind,
            rated_a,
            rcd: rcd_ma.map(|at| Rcd {
                rated_ma: at.value,
                delayed,
            }),
        }),
        Err(right) => {
            if !value.is_empty() {
                mistakes.add(&span, format!("`{value}` is no protective device"), right);
            }
            None
        }
    }
}

/// Type and rated current out of `B32`, `C 16`, `BS 88-2 32`; what would be right otherwise.
pub(super) fn device_of(text: &str) -> Result<(DeviceType, f64), String> {
    let words: Vec<&str> = DeviceType::WORDS.iter().map(|(word, _)| *word).collect();
    let right = format!(
        "write the type and the rated current in amps, such as \"B32\" or \"BS 88-2 32\"; \
         the types are {}",
        words.join(", ")
    );
    let upper = text.trim().to_uppercase();
    // The longest word that fits: "BS 88-2" also begins with "B".
    let Some((kind, rest)) = DeviceType::WORDS
        .iter()
        .filter_map(|(word, kind)| Some((*kind, upper.strip_prefix(word)?)))
        .min_by_key(|(_, rest)| rest.len())
    else {
        let first: String = upper.chars().take_while(|c| !c.is_whitespace()).collect();
        return Err(suggest::with_suggestion(&first, &words, &right));
    };
    let amps = rest.trim().trim_end_matches('A').trim();
    let plain = amps.chars().all(|c| c.is_ascii_digit() || c == '.');
    match amps.parse::<f64>() {
        // The largest fuse of the tables is 1250 A; 6300 A leaves room for air circuit-breakers.
        Ok(rated) if plain && (0.5..=6300.0).contains(&rated) => Ok((kind, rated)),
        _ => Err(right),
    }
}

fn points(
    f: &mut Fields<'_>,
    length_m: f64,
    kind: CircuitKind,
    mistakes: &mut Mistakes<'_>,
) -> Vec<Point> {
    let none = |no: u16| Point {
        no: PointNo(no),
        name: String::new(),
        at_m: None,
        spur_m: None,
    };
    let right = "write how many, points = 6, or a list, points = [\"hall\", { name = \"porch\", \
                 at-m = 12, spur-m = 3 }]";
    let Some(found) = f.any("points") else {
        // One appliance, one far board: one point. Elsewhere the number must be known.
        if !matches!(kind, CircuitKind::Fixed | CircuitKind::Distribution) {
            f.missing("points", &format!("its points: {right}"), mistakes);
        }
        return vec![none(1)];
    };
    let span = found.span();
    let wrong = |what: String, mistakes: &mut Mistakes<'_>| {
        mistakes.add(&span, what, right);
        vec![none(1)]
    };
    match found.into_inner() {
        DeValue::Array(items) => {
            let count = items.len();
            if count == 0 || count > usize::from(MOST_POINTS) {
                return wrong(format!("{count} points"), mistakes);
            }
            (1..)
                .zip(items)
                .map(|(no, item)| point(none(no), item, length_m, mistakes))
                .collect()
        }
        value @ (DeValue::Integer(_) | DeValue::Float(_) | DeValue::String(_)) => {
            match decimal_of(&value).filter(|n| n.is_integer()) {
                Some(n) => match n.to_u16().filter(|n| (1..=MOST_POINTS).contains(n)) {
                    Some(n) => (1..=n).map(none).collect(),
                    None => wrong(format!("{n} points"), mistakes),
                },
                None => wrong(format!("`points` is {}", described(&value)), mistakes),
            }
        }
        other => wrong(format!("`points` is {}", described(&other)), mistakes),
    }
}

fn point(
    mut point: Point,
    item: toml::Spanned<DeValue<'_>>,
    length_m: f64,
    mistakes: &mut Mistakes<'_>,
) -> Point {
    if let DeValue::String(name) = item.get_ref() {
        if name.chars().any(char::is_control) {
            mistakes.add(
                &item.span(),
                "a point's name holds a control character",
                "write it on one line, without tabs",
            );
        }
        point.name = name.trim().to_string();
        return point;
    }
    let name = format!("point {}", point.no);
    if !matches!(item.get_ref(), DeValue::Table(_)) {
        mistakes.add(
            &item.span(),
            format!("{name} is {}", described(item.get_ref())),
            "write its name in quotes, or { name = \"porch\", at-m = 12 }",
        );
        return point;
    }
    let Some(mut f) = inner(item, "points", &name, mistakes) else {
        return point;
    };
    point.name = f.text_or_empty("name", mistakes);
    if let Some(At { value, span }) = f.number("at-m", 0.0, 10_000.0, mistakes) {
        if value > length_m {
            mistakes.add(
                &span,
                format!("{name} lies at {value} m on a run of {length_m} m"),
                "measure along the run from the board; the run must reach its points",
            );
        }
        point.at_m = Some(value);
    }
    point.spur_m = f
        .number("spur-m", 0.1, 10_000.0, mistakes)
        .map(|at| at.value);
    f.done(mistakes);
    point
}
