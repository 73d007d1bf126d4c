//! Findings of a ring: ends and cross-connected readings weighed together.
//!
//! An open core shows in its end and doubles the cross readings; a joint shows in its end; a bridge
//! lowers all ends and leaves a hump; a leg linked to its own other core leaves a hill that falls
//! to nothing at the board; a spur lifts one point. Each explanation predicts every reading of the
//! series through `wiring`.

use super::{
    plausible::{self, prior},
    radial::{copper_mm2, other_pairs},
    weigh::{Ballot, Prediction, Seen, words},
    wiring::{Spot, What, Wiring},
};
use crate::domain::{
    expect::Finding,
    plan::{Cable, InstrumentRange, LengthBasis},
    range,
};

/// Everything read on one ring.
#[derive(Debug)]
pub(crate) struct RingSeries<'a> {
    pub(crate) spots: Vec<Spot>,
    pub(crate) what: Vec<What>,
    pub(crate) seen: Vec<Seen>,
    pub(crate) newest: usize,
    pub(crate) cable: Cable,
    /// mΩ/m of line, neutral, protective conductor at the ambient.
    pub(crate) rates: [f64; 3],
    pub(crate) whole_m: f64,
    pub(crate) basis: LengthBasis,
    pub(crate) instrument: &'a InstrumentRange,
    /// What earlier readings say for or against un-nulled leads (log).
    pub(crate) leads: f64,
}

const CORE_NAMES: [&str; 3] = ["line", "neutral", "protective conductor"];

impl RingSeries<'_> {
    fn wiring(&self, rates: [f64; 3], stretch: f64) -> Wiring {
        let per_m = rates.map(|r| r / 1000.0 * plausible::COPPER_MEAN);
        Wiring {
            whole: per_m.map(|r| r * self.whole_m * stretch + 0.006),
            per_m,
            joints: Vec::new(),
            extra_m: Vec::new(),
            own_leg: [false; 2],
            bridge: None,
        }
    }

    fn planned(&self) -> Wiring {
        self.wiring(self.rates, 1.0)
    }

    /// The prediction of a wiring. `length_known`: the stated length speaks.
    fn predict(&self, wiring: &Wiring, length_known: bool) -> Prediction {
        let mean: Vec<f64> = self
            .what
            .iter()
            .map(|w| wiring.read(*w, &self.spots))
            .collect();
        let finite = |v: f64| if v.is_finite() { v } else { 0.0 };
        let length = if length_known {
            plausible::length_spread(self.basis)
        } else {
            0.0
        };
        let common = (plausible::COPPER_SPREAD.powi(2)
            + plausible::gain_spread(self.instrument).powi(2)
            + length * length)
            .sqrt();
        let mut shared = vec![
            mean.iter()
                .map(|m| finite(*m) * common)
                .collect::<Vec<f64>>(),
        ];
        for core in 0..3 {
            // How much of each reading is made of this core: its share of the loop.
            let part = |w: &What| match *w {
                What::End(c) => f64::from(u8::from(c == core)),
                What::Cross(other, _) if core == 0 || core == other => {
                    wiring.whole[core] / (wiring.whole[0] + wiring.whole[other])
                }
                What::Cross(..) => 0.0,
            };
            shared.push(
                self.what
                    .iter()
                    .zip(&mean)
                    .map(|(w, m)| part(w) * finite(*m) * plausible::CORE_SPREAD)
                    .collect(),
            );
        }
        let own = self
            .what
            .iter()
            .zip(&mean)
            .map(|(w, m)| {
                let mut variance = plausible::own_variance(self.instrument, finite(*m));
                if let What::Cross(_, Some(spot)) = *w {
                    // What a wrong position does to this reading, by moving it.
                    let off = self.spots[spot].off;
                    let moved = (self.spots[spot].x + off).min(1.0);
                    let change = wiring.read_at(*w, moved, &self.spots) - m;
                    if change.is_finite() {
                        variance += 0.4 * change * change;
                    }
                    let branch = self.spots[spot].spur_m
                        * range::length_share(self.basis)
                        * 0.6
                        * (wiring.per_m[0] + wiring.per_m[2]);
                    variance += branch * branch;
                }
                variance
            })
            .collect();
        Prediction { mean, own, shared }
    }

    fn fit(&self, wiring: &Wiring, length_known: bool) -> f64 {
        self.predict(wiring, length_known)
            .log_likelihood(&self.seen)
    }

    /// Mid-points of the stretches between neighbours, with their words.
    fn stretches(&self) -> Vec<(f64, String)> {
        let mut run: Vec<&Spot> = self.spots.iter().filter(|s| s.spur_m == 0.0).collect();
        run.sort_by(|a, b| a.x.total_cmp(&b.x));
        let mut out = Vec::with_capacity(run.len() + 1);
        for index in 0..=run.len() {
            let before = index.checked_sub(1).map(|i| run[i]);
            let after = run.get(index);
            let middle = (before.map_or(0.0, |s| s.x) + after.map_or(1.0, |s| s.x)) / 2.0;
            let name = |s: Option<&&Spot>, leg: &str| {
                s.map_or_else(
                    || format!("the board ({leg})"),
                    |s| format!("point {}", s.no),
                )
            };
            out.push((
                middle,
                format!(
                    "between {} and {}",
                    name(before.as_ref(), "leg 1"),
                    name(after, "leg 2")
                ),
            ));
        }
        out
    }

    fn ohm(&self, what: What) -> Option<f64> {
        let index = self.what.iter().position(|w| *w == what)?;
        match self.seen[index] {
            Seen::Ohm(ohm) => Some(ohm),
            Seen::Open => None,
        }
    }

    fn is_open(&self, what: What) -> Option<bool> {
        let index = self.what.iter().position(|w| *w == what)?;
        Some(self.seen[index] == Seen::Open)
    }
}

/// Ranks what the readings of a ring most likely mean.
pub(crate) fn findings(series: &RingSeries, questioned: bool) -> Vec<Finding> {
    let planned = series.planned();
    let plain = series.predict(&planned, true);
    if !questioned && plain.close(&series.seen) {
        return Vec::new();
    }
    let mut ballot = Ballot::new(plain.log_likelihood(&series.seen));
    opens(series, &planned, &mut ballot);
    links(series, &planned, &mut ballot);
    joints(series, &planned, &plain, &mut ballot);
    branches(series, &planned, &plain, &mut ballot);
    bridges(series, &planned, &mut ballot);
    cables(series, &mut ballot);
    offsets(series, &plain, &mut ballot);
    slips(series, &plain, &mut ballot);
    let nothing = Prediction {
        own: plain.mean.iter().map(|m| 4.0 * m * m + 4.0).collect(),
        mean: plain.mean.clone(),
        shared: Vec::new(),
    };
    ballot.add(
        "unexplained",
        prior("unexplained") + nothing.log_likelihood(&series.seen),
        || {
            words(
                "no single fault explains all the readings",
                "repeat the ends, then the cross readings one by one",
            )
        },
    );
    ballot.findings(questioned)
}

fn opens<'a>(series: &'a RingSeries, planned: &Wiring, ballot: &mut Ballot<'a>) {
    let stretches = series.stretches();
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
                    format!("{core_name} open, likely {name}"),
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
        let text = format!("cable cut {name}");
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
            let text = format!("{} and {} crossed {name}", CORE_NAMES[a], CORE_NAMES[b]);
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

fn links<'a>(series: &'a RingSeries, planned: &Wiring, ballot: &mut Ballot<'a>) {
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

/// Lengths of a bridge as shares of the arc it bridges.
const SHARES: [f64; 6] = [0.12, 0.22, 0.35, 0.5, 0.72, 1.0];

/// Multiples by which a size found from the ends is varied.
const AROUND: [f64; 3] = [0.85, 1.0, 1.15];

fn joints<'a>(
    series: &'a RingSeries,
    planned: &Wiring,
    plain: &Prediction,
    ballot: &mut Ballot<'a>,
) {
    let stretches = series.stretches();
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
                ballot.add("high-joint", prior("high-joint") + fit, move || {
                    words(
                        format!("{core_name}: a joint about {ohm:.2} Ω too high, likely {name}"),
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

/// Mean excess of the readings that a fault touches.
fn excess(series: &RingSeries, plain: &Prediction, touched: &[f64]) -> f64 {
    let all: Vec<f64> = (0..touched.len())
        .filter(|i| touched[*i] > 0.0)
        .filter_map(|i| match series.seen[i] {
            Seen::Ohm(ohm) => Some(ohm - plain.mean[i]),
            Seen::Open => None,
        })
        .collect();
    if all.is_empty() {
        0.0
    } else {
        all.iter().sum::<f64>() / all.len() as f64
    }
}

fn branches<'a>(
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

fn bridges<'a>(series: &'a RingSeries, planned: &Wiring, ballot: &mut Ballot<'a>) {
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

fn cables<'a>(series: &'a RingSeries, ballot: &mut Ballot<'a>) {
    let (size_favour, length_favour) = plausible::favours(series.basis);
    let sizes = (
        copper_mm2(series.cable.line),
        series.cable.cpc.and_then(copper_mm2),
    );
    if let (Some(line), Some(cpc)) = sizes {
        let table =
            crate::domain::conductor::rate(series.cable.line).map_or(1.0, |r| r.milliohm_per_m());
        let warm = series.rates[0] / table;
        let others = other_pairs(Some(line), cpc);
        let count = others.len() as f64;
        for (name, l, c) in others {
            let wiring = series.wiring([l * warm, l * warm, c * warm], 1.0);
            let fit = series.fit(&wiring, true) - count.ln();
            ballot.add(
                "wrong-size",
                prior("wrong-size") + size_favour + fit,
                move || {
                    words(
                        format!("{name} fits these readings, not the size of the plan"),
                        "read the marking on the sheath, measure a strand",
                    )
                },
            );
        }
    }
    let share = range::length_share(series.basis);
    let steps = 40;
    for step in 0..=steps {
        let stretch = 0.3 * (10.0_f64).powf(f64::from(step) / f64::from(steps));
        if (stretch - 1.0).abs() < share {
            continue;
        }
        let wiring = series.wiring(series.rates, stretch);
        let mut prediction = series.predict(&wiring, false);
        // Half a step of the grid either way.
        let slack = 0.03;
        prediction
            .shared
            .push(prediction.mean.iter().map(|m| m * slack).collect());
        let fit = prediction.log_likelihood(&series.seen) - f64::from(steps / 2).ln();
        let metres = series.whole_m * stretch;
        let by = (metres - series.whole_m).abs();
        let code = if stretch > 1.0 { "longer" } else { "shorter" };
        ballot.add(code, prior(code) + length_favour + fit, move || {
            words(
                format!("about {metres:.0} m of cable in the loop, {by:.0} m {code} than stated"),
                "measure the run, or correct the length in the plan",
            )
        });
    }
    // Metalwork beside the protective conductor lowers it alone.
    for step in 1..10 {
        let factor = f64::from(step) / 10.0;
        let mut wiring = series.planned();
        wiring.whole[2] *= factor;
        let mut prediction = series.predict(&wiring, true);
        prediction.shared.push(
            series
                .what
                .iter()
                .zip(&prediction.mean)
                .map(|(w, m)| match w {
                    What::End(2) => 0.06 / factor * m,
                    What::Cross(2, _) => 0.04 * m,
                    _ => 0.0,
                })
                .collect(),
        );
        // Where the metalwork touches is not known: cross readings wander with it.
        for (own, (w, m)) in prediction
            .own
            .iter_mut()
            .zip(series.what.iter().zip(&prediction.mean))
        {
            if matches!(w, What::Cross(2, _)) {
                let slack = 0.25 * (1.0 - factor) * m;
                *own += slack * slack;
            }
        }
        let fit = prediction.log_likelihood(&series.seen) - 9.0_f64.ln();
        ballot.add("parallel-path", prior("parallel-path") + fit, || {
            words(
                "metalwork in parallel with the protective conductor",
                "part boxes and conduit from other metalwork, read r2 again",
            )
        });
    }
}

fn offsets<'a>(series: &'a RingSeries, plain: &Prediction, ballot: &mut Ballot<'a>) {
    let penalty = series.leads;
    let count = series.seen.len();
    let offset = excess(series, plain, &vec![1.0; count]);
    for spread in [0.12, 0.35] {
        let fit = plain.with(vec![spread; count]).log_likelihood(&series.seen) - 2.0_f64.ln();
        ballot.add(
            "lead-not-nulled",
            prior("lead-not-nulled") + penalty + fit,
            move || {
                words(
                    format!("every reading off by about the same {offset:+.2} Ω: leads not nulled"),
                    "join the leads: the display must fall to 0.00; null and repeat",
                )
            },
        );
    }
}

fn slips<'a>(series: &'a RingSeries, plain: &Prediction, ballot: &mut Ballot<'a>) {
    let Seen::Ohm(newest) = series.seen[series.newest] else {
        return;
    };
    for (power, code) in [
        (-6, "unit-slip"),
        (-3, "unit-slip"),
        (3, "unit-slip"),
        (6, "unit-slip"),
        (-2, "point-slip"),
        (-1, "point-slip"),
        (1, "point-slip"),
        (2, "point-slip"),
    ] {
        let factor = 10_f64.powi(power);
        let mut meant = series.seen.clone();
        meant[series.newest] = Seen::Ohm(newest * factor);
        let right = newest * factor;
        let fit = plain.log_likelihood(&meant) + factor.ln();
        ballot.add(code, prior(code) + fit, move || {
            words(
                format!("slip: {right:.2} Ω would fit, 10^{power} of what was entered"),
                "read display and unit again, digit by digit",
            )
        });
    }
}
