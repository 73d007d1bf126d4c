//! What the limit on likeness trades: readings lost against false accepts, as figures and a drawing.
//!
//! It promises that the half the limit was chosen on and the half it is judged on are told apart.
//! It leaves out choosing: that is done by eye, and the choice stands in `hearing`.

use std::fmt::Write as _;

use super::Row;

/// One limit, on one half of the clips.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Point {
    /// The limit.
    pub limit: f64,
    /// Whether it is the half that judges.
    pub judged: bool,
    /// Understood clips that would be lost: in quiet, in noise; in percent.
    pub lost: [f64; 2],
    /// False accepts in ten minutes.
    pub taken: f64,
}

/// The curve of a half, from loose to strict. `noisy` names the condition shown beside quiet.
#[must_use]
pub fn curve(rows: &[Row], judged: bool, noisy: &str) -> Vec<Point> {
    let half = || {
        rows.iter()
            .filter(move |row| row.judged() == judged && !row.trained)
    };
    let seconds: f64 = half().filter(|row| !row.ours).map(|row| row.seconds).sum();
    let lost = |condition: &str, limit: f64| {
        let right: Vec<&Row> = half()
            .filter(|row| row.understood && row.condition == condition)
            .collect();
        let lost = right.iter().filter(|row| row.likeness() < limit).count();
        100.0 * lost as f64 / right.len().max(1) as f64
    };
    (0..=LIMITS)
        .map(|step| {
            let limit = f64::from(step) / 10.0;
            let taken = half()
                .filter(|row| !row.ours && row.likeness() >= limit)
                .count();
            Point {
                limit,
                judged,
                lost: [lost("clean", limit), lost(noisy, limit)],
                taken: 600.0 * taken as f64 / seconds.max(1.0),
            }
        })
        .collect()
}

/// Limits are tried up to this many tenths.
const LIMITS: u32 = 50;

/// The points as lines of a table of commas.
#[must_use]
pub fn csv(points: &[Point], noisy: &str) -> String {
    let mut out = format!("half,limit,lost clean %,lost {noisy} %,taken in ten minutes\n");
    for point in points {
        let half = if point.judged { "judged" } else { "chosen" };
        let Point {
            limit, lost, taken, ..
        } = point;
        let _never = writeln!(
            out,
            "{half},{limit:.1},{:.1},{:.1},{taken:.2}",
            lost[0], lost[1]
        );
    }
    out
}

const WIDTH: f64 = 480.0;
const HEIGHT: f64 = 300.0;
/// The drawing ends at this many false accepts in ten minutes, and at this share of lost readings.
const MOST_TAKEN: f64 = 20.0;
const MOST_LOST: f64 = 50.0;

/// The curve of the half that judges, with the limits that were chosen marked on it.
#[must_use]
pub fn svg(points: &[Point], noisy: &str, chosen: &[(&str, f64)]) -> String {
    let x = |taken: f64| 50.0 + taken.min(MOST_TAKEN) / MOST_TAKEN * (WIDTH - 70.0);
    let y = |lost: f64| HEIGHT - 40.0 - lost.min(MOST_LOST) / MOST_LOST * (HEIGHT - 60.0);
    let mut out = format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 {WIDTH} {HEIGHT}\" \
         font-family=\"sans-serif\" font-size=\"11\">\n\
         <rect width=\"{WIDTH}\" height=\"{HEIGHT}\" fill=\"white\"/>\n"
    );
    for step in 0..=4 {
        let (taken, lost) = (
            f64::from(step) * MOST_TAKEN / 4.0,
            f64::from(step) * MOST_LOST / 4.0,
        );
        let _never = writeln!(
            out,
            "<path d=\"M{0:.0} {1:.0}V20M50 {2:.0}H{3:.0}\" stroke=\"#ddd\" fill=\"none\"/>\
             <text x=\"{0:.0}\" y=\"{4:.0}\" text-anchor=\"middle\">{taken}</text>\
             <text x=\"44\" y=\"{2:.0}\" text-anchor=\"end\">{lost} %</text>",
            x(taken),
            y(0.0),
            y(lost),
            WIDTH - 20.0,
            HEIGHT - 26.0,
        );
    }
    let judged: Vec<&Point> = points.iter().filter(|point| point.judged).collect();
    for (index, (name, colour)) in [("in quiet", "#06c"), (noisy, "#c40")]
        .into_iter()
        .enumerate()
    {
        let line: Vec<String> = judged
            .iter()
            .map(|point| format!("{:.1},{:.1}", x(point.taken), y(point.lost[index])))
            .collect();
        let at = 30.0 + 14.0 * index as f64;
        let _never = writeln!(
            out,
            "<polyline points=\"{}\" fill=\"none\" stroke=\"{colour}\" stroke-width=\"1.5\"/>\
             <text x=\"{:.0}\" y=\"{at:.0}\" fill=\"{colour}\" text-anchor=\"end\">{name}</text>",
            line.join(" "),
            WIDTH - 24.0,
        );
        for (label, limit) in chosen {
            let near = |point: &&&Point| (point.limit - limit).abs() < 0.051;
            if let Some(point) = judged.iter().find(near) {
                let (cx, cy) = (x(point.taken), y(point.lost[index]));
                let _never = writeln!(
                    out,
                    "<circle cx=\"{cx:.1}\" cy=\"{cy:.1}\" r=\"4\" fill=\"{colour}\"/>\
                     <text x=\"{:.1}\" y=\"{:.1}\">{label}</text>",
                    cx + 7.0,
                    cy - 5.0,
                );
            }
        }
    }
    let _never = writeln!(
        out,
        "<text x=\"{:.0}\" y=\"{:.0}\" text-anchor=\"middle\">taken for something in ten minutes of \
         noise and talk</text>\
         <text x=\"14\" y=\"{2:.0}\" text-anchor=\"middle\" transform=\"rotate(-90 14 {2:.0})\">\
         understood, yet lost</text>\n</svg>",
        WIDTH / 2.0,
        HEIGHT - 8.0,
        HEIGHT / 2.0,
    );
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_drawing_marks_what_was_chosen() {
        let points: Vec<Point> = (0..3)
            .map(|n| Point {
                limit: f64::from(n),
                judged: true,
                lost: [f64::from(n), f64::from(2 * n)],
                taken: 10.0 - f64::from(n),
            })
            .collect();
        let drawing = svg(&points, "+10", &[("open", 2.0), ("nowhere", 4.0)]);
        assert_eq!(drawing.matches("<circle").count(), 2);
        assert_eq!(drawing.matches(">open</text>").count(), 2);
        assert!(!drawing.contains("nowhere"));
        let table = csv(&points, "+10");
        assert_eq!(table.lines().nth(2), Some("judged,1.0,1.0,2.0,9.00"));
    }
}
