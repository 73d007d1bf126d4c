//! Readings along a circuit against the band that was expected, as a small drawing.
//!
//! Promises: readable in black and white: the band is hatched, a value within it a full dot, one
//! outside an open square with its figure; nothing of the log gets into the drawing but figures and
//! point numbers, and those are escaped. Floats are drawing positions only.

use std::fmt::Write as _;

use rust_decimal::prelude::ToPrimitive;

use super::model::Plot;
use crate::{
    domain::{
        kept::Value,
        reading::Unit,
        test::{Target, TestKind},
    },
    report::history::{History, Shown},
};

const WIDTH: f64 = 300.0;
const HEIGHT: f64 = 130.0;
const LEFT: f64 = 34.0;
const RIGHT: f64 = 10.0;
const TOP: f64 = 14.0;
const BOTTOM: f64 = 20.0;

struct Dot {
    point: u16,
    ohm: f64,
    figure: String,
    low: Option<f64>,
    high: Option<f64>,
    within: bool,
}

/// The drawings worth making of a circuit: series of at least three readings.
pub(super) fn plots(place: &str, history: &History, targets: &[&Target]) -> Vec<Plot> {
    [
        TestKind::R1R2,
        TestKind::R2,
        TestKind::RingLineNeutral,
        TestKind::RingLineEarth,
    ]
    .into_iter()
    .filter_map(|test| {
        let mut dots: Vec<Dot> = targets
            .iter()
            .filter(|target| target.test == test)
            .filter_map(|target| dot(history.counting(target)?))
            .collect();
        dots.sort_by_key(|dot| dot.point);
        (dots.len() >= 3).then(|| {
            let title = format!("{}, {place}, along the points", test.title());
            Plot {
                svg: draw(&title, &dots),
                title,
            }
        })
    })
    .collect()
}

fn dot(shown: &Shown) -> Option<Dot> {
    let Some(Value::Reading(reading)) = &shown.value else {
        return None;
    };
    let own = shown.target.test.unit()?;
    let expected = shown.expected;
    let scale = expected
        .and_then(|e| Unit::ALL.into_iter().find(|u| u.word() == e.unit))
        .map_or(1.0, |unit| 10_f64.powi(unit.base().1));
    let end = |text: Option<&String>| Some(text?.parse::<f64>().ok()? * scale);
    Some(Dot {
        point: shown.target.point?.0,
        ohm: reading.in_base(own)?.to_f64()?,
        figure: reading.figure(),
        low: end(expected.and_then(|e| e.low.as_ref())),
        high: end(expected.and_then(|e| e.high.as_ref())),
        within: !shown.verdict.questioned(),
    })
}

fn draw(title: &str, dots: &[Dot]) -> String {
    let top = dots
        .iter()
        .flat_map(|d| [Some(d.ohm), d.high])
        .flatten()
        .fold(0.01_f64, f64::max)
        * 1.08;
    let step = (WIDTH - LEFT - RIGHT) / dots.len() as f64;
    let x = |at: usize| LEFT + step * (at as f64 + 0.5);
    let y = |ohm: f64| HEIGHT - BOTTOM - ohm / top * (HEIGHT - TOP - BOTTOM);
    let mut svg = format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 {WIDTH} {HEIGHT}\" role=\"img\">\
         <title>{}</title>",
        escape(title)
    );
    // Each point has its own band: a spur, or the middle of a ring, reads higher by nature.
    for (at, dot) in dots.iter().enumerate() {
        if let (Some(low), Some(high)) = (dot.low, dot.high) {
            let (left, right) = (x(at) - step * 0.42, x(at) + step * 0.42);
            let _ = write!(
                svg,
                "<rect x=\"{left:.1}\" y=\"{:.1}\" width=\"{:.1}\" height=\"{:.1}\" \
                 class=\"band\"/>",
                y(high),
                right - left,
                (y(low) - y(high)).max(0.5)
            );
        }
    }
    let floor = HEIGHT - BOTTOM;
    let _ = write!(
        svg,
        "<path d=\"M{LEFT} {TOP}V{floor}H{:.1}\" class=\"axis\"/>",
        WIDTH - RIGHT
    );
    let _ = write!(
        svg,
        "<text x=\"{:.1}\" y=\"{:.1}\" text-anchor=\"end\">{:.2}</text>\
         <text x=\"{:.1}\" y=\"{:.1}\" text-anchor=\"end\">0</text>\
         <text x=\"2\" y=\"9\">Ω</text>",
        LEFT - 3.0,
        TOP + 4.0,
        top / 1.08,
        LEFT - 3.0,
        floor + 3.0
    );
    // Many points: not every number fits under the axis.
    let every = dots.len().div_ceil(12);
    for (at, dot) in dots.iter().enumerate() {
        let (cx, cy) = (x(at), y(dot.ohm));
        if dot.within {
            let _ = write!(svg, "<circle cx=\"{cx:.1}\" cy=\"{cy:.1}\" r=\"2.6\"/>");
        } else {
            let _ = write!(
                svg,
                "<rect x=\"{:.1}\" y=\"{:.1}\" width=\"6\" height=\"6\" class=\"out\"/>\
                 <text x=\"{cx:.1}\" y=\"{:.1}\" text-anchor=\"middle\">{}</text>",
                cx - 3.0,
                cy - 3.0,
                (cy - 5.0).max(8.0),
                escape(&dot.figure)
            );
        }
        if at % every == 0 {
            let _ = write!(
                svg,
                "<text x=\"{cx:.1}\" y=\"{:.1}\" text-anchor=\"middle\">{}</text>",
                floor + 10.0,
                dot.point
            );
        }
    }
    let _ = write!(
        svg,
        "<text x=\"{:.1}\" y=\"{:.1}\" text-anchor=\"end\">point</text></svg>",
        WIDTH - 2.0,
        HEIGHT - 1.0
    );
    svg
}

fn escape(text: &str) -> String {
    text.replace('&', "&amp;")
        .replace('<', "&lt;")
        .replace('>', "&gt;")
        .replace('"', "&quot;")
}
