//! Joints, spurs and bridges of a ring: what lifts or lowers some readings and not others.

use super::{CORE_NAMES, RingSeries, excess};
use crate::domain::findings::{
    plausible::prior,
    weigh::{Ballot, Prediction, Seen, words},
    wiring::{Spot, What, Wiring},
};

/// Lengths of a bridge as shares of the arc it bridges.
const SHARES: [f64; 6] = [0.12, 0.22, 0.35, 0.5, 0.72, 1.0];

/// Multiples by which a size found from the ends is varied.
const AROUND: [f64; 3] = [0.85, 1.0, 1.15];

pub(super) fn joints<'a>(
    series: &'a RingSeries,
    planned: &Wiring,
    plain: &Prediction,
    ballot: &mut Ballot<'a>,
) {
    let stretches = series.stretches();
    let placed = series.what.iter().any(|w| matches!(w, What::Cross(..)));
    // The stretch common to all ends is taken out first: the other cores say what it is.
    for (core, core_name) in CORE_NAMES.into_iter().enumerate() {
        let sizes: Vec<f64> = match series.ohm(What::End(core)) {
            Some(end) => {
                let others: Vec<f64> = (0..3)
                    .filter(|c| *c != core)
                    .filter_map(|c| Some(series.ohm(What::End(c))? / planned.whole[c]))
                    .collect();
                let scale = if others.is_empty() {
                    1.0
                } else {
                    others.iter().copied().fold(f64::INFINITY, f64::min)
                };
                let over = end - scale * planned.whole[core];
                if over < 0.03 {
                    continue;
                }
                AROUND.iter().map(|a| a * over).collect()
            }
            None if series.is_open(What::End(core)) == Some(true) => continue,
            None => vec![0.1, 0.3, 1.0, 4.0],
        };
        for (x, name) in &stretches {
            for ohm in &sizes {
                let mut wiring = planned.clone();
                wiring.joints.push((core, *x, *ohm));
                // Sizes are spread over some three decades before the ends speak.
                let penalty = (3.0 * stretches.len() as f64 * 12.0).ln();
                let fit = series.fit(&wiring, true) - penalty;
                let (ohm, name) = (*ohm, name.clone());
                let place = if placed {
                    format!(", likely {name}")
                } else {
                    String::new()
                };
                ballot.add("high-joint", prior("high-joint") + fit, move || {
                    words(
                        format!("{core_name}: a joint about {ohm:.2} Ω too high{place}"),
                        "remake the terminals of that core from point to point, watch the end",
                    )
                });
            }
        }
    }
    // Terminals of one point alone: a branch of resistance in one core.
    let count = series.spots.len() as f64;
    for spot in 0..series.spots.len() {
        for (core, core_name) in CORE_NAMES.into_iter().enumerate() {
            let touched: Vec<f64> = series
                .what
                .iter()
                .map(|w| match *w {
                    What::Cross(other, Some(s)) if s == spot && (core == 0 || core == other) => 0.4,
                    _ => 0.0,
                })
                .collect();
            let over = excess(series, plain, &touched);
            if over < 0.03 {
                continue;
            }
            let fit = plain.with(touched).log_likelihood(&series.seen) - (3.0 * count).ln();
            let no = series.spots[spot].no;
            ballot.add("high-joint", prior("high-joint") - 1.5 + fit, move || {
                words(
                    format!("about {over:.2} Ω too high at point {no} alone, {core_name} terminal"),
                    "press the probes again, then tighten that point's terminals",
                )
            });
        }
    }
}

pub(super) fn branches<'a>(
    series: &'a RingSeries,
    planned: &Wiring,
    plain: &Prediction,
    ballot: &mut Ballot<'a>,
) {
    let count = series.spots.len() as f64;
    for spot in 0..series.spots.len() {
        let touched: Vec<f64> = series
            .what
            .iter()
            .map(|w| f64::from(u8::from(matches!(w, What::Cross(_, Some(s)) if *s == spot))))
            .collect();
        let over = excess(series, plain, &touched);
        if over < 0.02 {
            continue;
        }
        let no = series.spots[spot].no;
        for metres in [1.5, 2.5, 4.0, 6.0, 8.0, 10.0, 13.0, 16.0, 20.0, 25.0, 30.0] {
            let mut wiring = planned.clone();
            wiring.extra_m.push((spot, metres));
            let mut prediction = series.predict(&wiring, true);
            // The grid of lengths is coarse: let the branch breathe by a seventh.
            prediction.shared.push(
                series
                    .what
                    .iter()
                    .map(|w| match *w {
                        What::Cross(other, Some(s)) if s == spot => {
                            0.14 * metres * (wiring.per_m[0] + wiring.per_m[other])
                        }
                        _ => 0.0,
                    })
                    .collect(),
            );
            let fit = prediction.log_likelihood(&series.seen) - (11.0 * count).ln();
            ballot.add("spur", prior("spur") + fit, move || {
                words(
                    format!("point {no} on a spur of about {metres} m"),
                    "follow the cable to that point; record its reading, the branch adds in full",
                )
            });
        }
    }
}

pub(super) fn bridges<'a>(series: &'a RingSeries, planned: &Wiring, ballot: &mut Ballot<'a>) {
    if series.seen.contains(&Seen::Open) {
        return;
    }
    let mut run: Vec<Spot> = series
        .spots
        .iter()
        .filter(|s| s.spur_m == 0.0)
        .copied()
        .collect();
    run.sort_by(|a, b| a.x.total_cmp(&b.x));
    let pairs = (run.len() * run.len().saturating_sub(1)) as f64 / 2.0;
    for (index, from) in run.iter().enumerate() {
        for to in run.iter().skip(index + 1) {
            let arc_m = (to.x - from.x) * series.whole_m;
            for share in SHARES {
                let metres = (share * arc_m).max(1.0);
                let mut wiring = planned.clone();
                wiring.bridge = Some((from.x, to.x, metres));
                let fit = series.fit(&wiring, true) - (SHARES.len() as f64 * pairs).ln();
                let (a, b) = (from.no, to.no);
                ballot.add("bridge", prior("bridge") + fit, move || {
                    words(
                        format!("a cable bridges points {a} and {b}: a ring inside the ring"),
                        "look for three cables at those points",
                    )
                });
                // A second ring joined at two points reads the same from this ring's ends.
                ballot.add("second-ring", prior("second-ring") + fit, move || {
                    words(
                        format!("another ring joined at points {a} and {b}"),
                        "read between the legs of the two circuits: they must be open",
                    )
                });
            }
        }
    }
}
