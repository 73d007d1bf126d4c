//! Opens, cut cables, crossed and reversed cores, and links on the wrong legs of a ring.

use super::{CORE_NAMES, RingSeries};
use crate::domain::findings::{
    plausible::prior,
    weigh::{Ballot, Seen, words},
    wiring::{What, Wiring},
};

pub(super) fn opens<'a>(series: &'a RingSeries, planned: &Wiring, ballot: &mut Ballot<'a>) {
    // Ends alone say that a core is open, not where; only cross readings tell places apart.
    let placed = series.what.iter().any(|w| matches!(w, What::Cross(..)));
    let stretches: Vec<(f64, String)> = series
        .stretches()
        .into_iter()
        .map(|(x, name)| {
            (
                x,
                if placed {
                    format!(", likely {name}")
                } else {
                    String::new()
                },
            )
        })
        .collect();
    let places = stretches.len() as f64;
    let broken = |cuts: &[(usize, f64)]| {
        let mut wiring = planned.clone();
        for (core, x) in cuts {
            wiring.joints.push((*core, *x, f64::INFINITY));
        }
        series.fit(&wiring, true)
    };
    let open_ends = (0..3)
        .filter(|c| series.is_open(What::End(*c)) == Some(true))
        .count();
    let any_open = series.seen.contains(&Seen::Open);
    for (core, core_name) in CORE_NAMES.into_iter().enumerate() {
        if series.is_open(What::End(core)) == Some(false) {
            continue;
        }
        for (x, name) in &stretches {
            let fit = broken(&[(core, *x)]) - (3.0 * places).ln();
            let name = name.clone();
            ballot.add("one-core-open", prior("one-core-open") + fit, move || {
                words(
                    format!("{core_name} open{name}"),
                    "half the ring by taking the cable out at a middle point, read each half",
                )
            });
        }
    }
    if !any_open {
        return;
    }
    let whole = |core: usize| series.is_open(What::End(core)) == Some(false);
    for (x, name) in &stretches {
        if (0..3).any(whole) {
            break;
        }
        let fit = broken(&[(0, *x), (1, *x), (2, *x)]) - places.ln();
        let text = format!("cable cut or not joined{name}");
        ballot.add("cut-cable", prior("cut-cable") + 1.0 + fit, move || {
            words(
                text.clone(),
                "all cores are open: look for a cable not joined, or damage",
            )
        });
    }
    // Two cores crossed within one cable read as both open there.
    for (a, b) in [(0, 1), (0, 2), (1, 2)] {
        if whole(a) || whole(b) {
            continue;
        }
        for (x, name) in &stretches {
            let fit = broken(&[(a, *x), (b, *x)]) - (3.0 * places).ln();
            let text = format!(
                "{} and {} crossed in one cable{name}",
                CORE_NAMES[a], CORE_NAMES[b]
            );
            ballot.add("reversed", prior("reversed") + fit, move || {
                words(
                    text.clone(),
                    "check the colours in both terminals of that stretch",
                )
            });
        }
        if open_ends >= 2 || series.is_open(What::End(a)).is_none() {
            for (x, _) in &stretches {
                for (y, _) in &stretches {
                    if (x - y).abs() < 1e-9 {
                        continue;
                    }
                    let fit = broken(&[(a, *x), (b, *y)]) - (3.0 * places * places).ln();
                    ballot.add("open", prior("open") - 1.5 + fit, move || {
                        words(
                            format!(
                                "{} and {} open at different places",
                                CORE_NAMES[a], CORE_NAMES[b]
                            ),
                            "find the first break with the ring halved, then repeat the ends",
                        )
                    });
                }
            }
        }
    }
    if open_ends == 3 {
        let fit = broken(&[(0, 0.5), (1, 0.5), (2, 0.5)]);
        ballot.add("second-ring", prior("second-ring") + fit, || {
            words(
                "legs of two different rings taken for one",
                "pair the legs again: read each leg against every other leg",
            )
        });
    }
    // One point alone open: a core in the wrong terminal there, or out of it.
    for spot in 0..series.spots.len() {
        for other in [1, 2] {
            let mut alone = series.predict(planned, true);
            for (mean, what) in alone.mean.iter_mut().zip(&series.what) {
                if *what == What::Cross(other, Some(spot)) {
                    *mean = f64::INFINITY;
                }
            }
            let fit = alone.log_likelihood(&series.seen) - (2.0 * series.spots.len() as f64).ln();
            let no = series.spots[spot].no;
            ballot.add("reversed", prior("reversed") + fit, move || {
                words(
                    format!("conductors reversed at point {no}: only its reading is open"),
                    "open the point, check which core is in which terminal",
                )
            });
            ballot.add("open", prior("open") - 1.5 + fit, move || {
                words(
                    format!("a core out of its terminal at point {no} alone"),
                    "open the point and look at its terminals",
                )
            });
        }
    }
}

pub(super) fn links<'a>(series: &'a RingSeries, planned: &Wiring, ballot: &mut Ballot<'a>) {
    for own_leg in [[true, false], [false, true], [true, true]] {
        let mut wiring = planned.clone();
        wiring.own_leg = own_leg;
        ballot.add(
            "own-leg-link",
            prior("own-leg-link") - 3.0_f64.ln() + series.fit(&wiring, true),
            || {
                words(
                    "each leg linked to its own other core: readings fall to nothing at the board",
                    "swap one pair of ends at the board, so that legs cross, and read again",
                )
            },
        );
    }
}
