//! Findings of a radial: R1+R2 or R2 read along the run, or one conductor end to end.
//!
//! The whole series is weighed under each explanation. A joint lifts every point beyond it by the
//! same ohms, a lead lifts all, a length or a size stretches all, a stray path presses the points
//! near it down, an open ends the run.

use super::{
    plausible::{self, prior},
    weigh::{Ballot, Prediction, Seen, words},
};
use crate::domain::{
    conductor::{EQUAL_PAIRS, FLAT_PAIRS, of_size},
    expect::Finding,
    plan::{Conductor, InstrumentRange, LengthBasis, Material},
};

/// A place where the series was read.
#[derive(Debug, Clone, Copy)]
pub(crate) struct At {
    /// How the place is called: "point 3".
    pub(crate) no: u16,
    /// Metres along the run.
    pub(crate) at_m: f64,
    /// Metres of planned branch.
    pub(crate) spur_m: f64,
    /// How far the position may be off, m.
    pub(crate) off_m: f64,
    /// Points passed.
    pub(crate) passed: usize,
}

/// A series of readings with what is known of the cable.
#[derive(Debug)]
pub(crate) struct Series<'a> {
    pub(crate) at: Vec<At>,
    pub(crate) seen: Vec<Seen>,
    /// Index of the reading in hand.
    pub(crate) newest: usize,
    /// Conductors in series.
    pub(crate) cores: Vec<Conductor>,
    /// mΩ/m of each at the ambient.
    pub(crate) rates: Vec<f64>,
    pub(crate) basis: LengthBasis,
    /// Metres of the whole run.
    pub(crate) whole_m: f64,
    pub(crate) instrument: &'a InstrumentRange,
    /// Extra spread of every point, Ω: switch drops of lighting.
    pub(crate) switch_ohm: f64,
    /// What earlier readings say for or against un-nulled leads (log).
    pub(crate) leads: f64,
    /// The conductor may touch other metalwork (protective and bonding conductors).
    pub(crate) stray: bool,
}

/// Spreads of a joint's size, ohm.
const JOINTS: [f64; 5] = [0.08, 0.3, 1.2, 6.0, 40.0];
/// Resistances of a stray path as shares of the conductor up to where it touches.
const STRAYS: [f64; 10] = [0.03, 0.08, 0.16, 0.28, 0.42, 0.6, 0.85, 1.2, 1.8, 3.0];

impl Series<'_> {
    fn rate(&self) -> f64 {
        self.rates.iter().sum()
    }

    /// The prediction without fault for a cable of `rate` mΩ/m and `stretch` times the length.
    fn plain(&self, rate: f64, stretch: f64, length_known: bool) -> Prediction {
        let share = if length_known {
            plausible::length_spread(self.basis)
        } else {
            0.0
        };
        let mean: Vec<f64> = self
            .at
            .iter()
            .map(|a| {
                let metres = (a.at_m + a.spur_m) * stretch;
                metres * rate / 1000.0 * plausible::COPPER_MEAN
                    + 0.006
                    + 0.001 * a.passed as f64
                    + self.switch_ohm
            })
            .collect();
        let common = (plausible::COPPER_SPREAD.powi(2)
            + plausible::gain_spread(self.instrument).powi(2)
            + share * share)
            .sqrt();
        self.around(mean, rate, common)
    }

    fn around(&self, mean: Vec<f64>, rate: f64, common: f64) -> Prediction {
        let length_share = plausible::length_spread(self.basis);
        let own = self
            .at
            .iter()
            .zip(&mean)
            .map(|(a, ohm)| {
                // Stated positions wander about the stretch that all share.
                let wander = 0.6 * a.off_m + 0.25 * length_share * (a.at_m + a.spur_m);
                let position = wander * rate / 1000.0;
                plausible::own_variance(self.instrument, *ohm)
                    + position * position
                    + self.switch_ohm * self.switch_ohm
            })
            .collect();
        Prediction {
            shared: vec![mean.iter().map(|ohm| ohm * common).collect()],
            mean,
            own,
        }
    }

    /// Ones for the places beyond the run's place number `from`.
    fn beyond(&self, metres: f64) -> Vec<bool> {
        self.at.iter().map(|a| a.at_m >= metres - 1e-9).collect()
    }

    fn run(&self) -> Vec<At> {
        let mut run: Vec<At> = self
            .at
            .iter()
            .filter(|a| a.spur_m == 0.0)
            .copied()
            .collect();
        run.sort_by(|a, b| a.at_m.total_cmp(&b.at_m));
        if run.is_empty() {
            run.clone_from(&self.at);
        }
        run
    }

    fn ohms(&self, index: usize) -> f64 {
        match self.seen[index] {
            Seen::Ohm(ohm) => ohm,
            Seen::Open => f64::INFINITY,
        }
    }

    /// Name of the stretch that ends at a place.
    fn stretch(&self, run: &[At], index: usize) -> String {
        let to = run[index].no;
        match index.checked_sub(1).map(|before| run[before].no) {
            Some(from) => format!("between points {from} and {to}"),
            None if to == 0 => "in the conductor or at its ends".into(),
            None => format!("between the board and point {to}"),
        }
    }
}

/// Ranks what a series most likely means.
pub(crate) fn findings(series: &Series, questioned: bool) -> Vec<Finding> {
    let plain = series.plain(series.rate(), 1.0, true);
    let seen = &series.seen;
    if !questioned && plain.close(seen) {
        return Vec::new();
    }
    let mut ballot = Ballot::new(plain.log_likelihood(seen));
    let run = series.run();
    opens(series, &plain, &run, &mut ballot);
    joints(series, &plain, &run, &mut ballot);
    lead(series, &plain, &mut ballot);
    sizes(series, &mut ballot);
    lengths(series, &mut ballot);
    if series.stray {
        strays(series, &run, &mut ballot);
    }
    slips(series, &plain, &mut ballot);
    let nothing = Prediction {
        mean: plain.mean.clone(),
        own: plain.mean.iter().map(|m| 4.0 * m * m + 25.0).collect(),
        shared: Vec::new(),
    };
    ballot.add(
        "unexplained",
        prior("unexplained") + nothing.log_likelihood(seen),
        || {
            words(
                "no single fault explains all the readings",
                "repeat the reading, then the ones before it",
            )
        },
    );
    ballot.findings(questioned)
}

fn opens<'a>(series: &'a Series, plain: &Prediction, run: &[At], ballot: &mut Ballot<'a>) {
    let seen = &series.seen;
    if !seen.contains(&Seen::Open) {
        return;
    }
    let places = run.len() as f64;
    for index in 0..run.len() {
        let mut broken = plain.clone();
        for (mean, cut) in broken.mean.iter_mut().zip(series.beyond(run[index].at_m)) {
            if cut {
                *mean = f64::INFINITY;
            }
        }
        let fit = broken.log_likelihood(seen) - places.ln();
        let stretch = series.stretch(run, index);
        let first = index == 0;
        let place = stretch.clone();
        ballot.add("open", prior("open") + fit, move || {
            words(
                format!("open {place}"),
                if first {
                    "look at the link and the switches first, then at the first terminals"
                } else {
                    "open the two points and look for a core out of its terminal"
                },
            )
        });
        ballot.add("cut-cable", prior("cut-cable") + fit, move || {
            words(
                format!("cable cut {stretch}"),
                "read another core beyond the place: all of them are open if it is cut",
            )
        });
    }
    if series.at.len() < 2 {
        return;
    }
    for index in 0..series.at.len() {
        let mut alone = plain.clone();
        alone.mean[index] = f64::INFINITY;
        let fit = alone.log_likelihood(seen) - (series.at.len() as f64).ln();
        let no = series.at[index].no;
        ballot.add("reversed", prior("reversed") + fit, move || {
            words(
                format!("conductors reversed at point {no}: only that point is open"),
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

fn joints<'a>(series: &'a Series, plain: &Prediction, run: &[At], ballot: &mut Ballot<'a>) {
    let seen = &series.seen;
    let over = |mask: &[bool]| {
        // Mean excess beyond the place over mean excess before it.
        let mean = |side: bool| {
            let excess: Vec<f64> = (0..seen.len())
                .filter(|i| mask[*i] == side && series.ohms(*i).is_finite())
                .map(|i| series.ohms(i) - plain.mean[i])
                .collect();
            if excess.is_empty() {
                0.0
            } else {
                excess.iter().sum::<f64>() / excess.len() as f64
            }
        };
        mean(true) - mean(false)
    };
    let places = (run.len() * JOINTS.len()) as f64;
    for index in 0..run.len() {
        let mask = series.beyond(run[index].at_m);
        let ohm = over(&mask);
        if ohm <= 0.02 {
            continue;
        }
        for spread in JOINTS {
            let joint = mask.iter().map(|b| if *b { spread } else { 0.0 }).collect();
            // One-sided: a joint only adds, so the positive half counts double.
            let fit = plain.with(joint).log_likelihood(seen) - places.ln() + 2.0_f64.ln();
            let stretch = series.stretch(run, index);
            ballot.add("high-joint", prior("high-joint") + fit, move || {
                words(
                    format!("a joint about {ohm:.2} Ω too high {stretch}"),
                    "open both ends of that stretch, remake and tighten the terminals",
                )
            });
        }
    }
    if series.at.len() < 2 {
        return;
    }
    // One point alone reads high: a branch the plan does not show, or its own terminals.
    for index in 0..series.at.len() {
        let mask: Vec<bool> = (0..series.at.len()).map(|i| i == index).collect();
        let ohm = over(&mask);
        if ohm <= 0.02 {
            continue;
        }
        let no = series.at[index].no;
        let metres = ohm * 1000.0 / series.rate();
        for spread in [3.0, 10.0] {
            let mut branch = vec![0.0; series.at.len()];
            branch[index] = spread * series.rate() / 1000.0;
            let fit = plain.with(branch).log_likelihood(seen) - (2.0 * series.at.len() as f64).ln();
            ballot.add("spur", prior("spur") - 2.5 + fit, move || {
                words(
                    format!("point {no} on a branch of about {metres:.0} m"),
                    "follow the cable to that point; the branch adds in full",
                )
            });
        }
        let mut own = vec![0.0; series.at.len()];
        own[index] = 0.5;
        let fit = plain.with(own).log_likelihood(seen) - (series.at.len() as f64).ln();
        ballot.add("high-joint", prior("high-joint") - 1.5 + fit, move || {
            words(
                format!("about {ohm:.2} Ω too high at point {no} alone"),
                "press the probes again, then tighten that point's terminals",
            )
        });
    }
}

fn lead<'a>(series: &'a Series, plain: &Prediction, ballot: &mut Ballot<'a>) {
    let count = series.seen.len();
    // The size of the offset is that of a lead: 0.05 to 0.6 Ω, seldom more.
    let penalty = series.leads;
    let offset: f64 = {
        let all: Vec<f64> = (0..count)
            .filter(|i| series.ohms(*i).is_finite())
            .map(|i| series.ohms(i) - plain.mean[i])
            .collect();
        all.iter().sum::<f64>() / all.len().max(1) as f64
    };
    for spread in [0.12, 0.35] {
        let fit = plain.with(vec![spread; count]).log_likelihood(&series.seen) - 2.0_f64.ln();
        ballot.add(
            "lead-not-nulled",
            prior("lead-not-nulled") + penalty + fit,
            move || {
                if offset >= 0.0 {
                    words(
                        format!("leads not nulled: every reading about {offset:.2} Ω too high"),
                        "join the leads: the display must fall to 0.00; null and repeat",
                    )
                } else {
                    words(
                        format!(
                            "null left over from longer leads: every reading about {:.2} Ω too low",
                            -offset
                        ),
                        "join the leads, null again with the ones in use, repeat",
                    )
                }
            },
        );
    }
}

/// Other sizes that could be there in place of the planned ones: the words and mΩ/m at 20 °C.
pub(crate) fn other_pairs(line: Option<f64>, cpc: f64) -> Vec<(String, f64, f64)> {
    let rate = |mm2: f64| {
        of_size(
            mm2,
            Material::Copper,
            crate::domain::conductor::usual_class(mm2),
        )
        .map_or(0.0, |r| r.milliohm_per_m())
    };
    match line {
        Some(line) => FLAT_PAIRS
            .into_iter()
            .chain(EQUAL_PAIRS)
            .filter(|pair| *pair != (line, cpc) && (0.15..=7.0).contains(&(pair.0 / line)))
            .map(|(l, c)| (format!("{l}/{c} mm²"), rate(l), rate(c)))
            .collect(),
        None => [1.0, 1.5, 2.5, 4.0, 6.0, 10.0, 16.0, 25.0]
            .into_iter()
            .filter(|mm2| *mm2 != cpc && (0.25..=4.0).contains(&(mm2 / cpc)))
            .map(|mm2| (format!("{mm2} mm²"), 0.0, rate(mm2)))
            .collect(),
    }
}

/// Cross-section of a copper conductor; others are not compared.
pub(crate) fn copper_mm2(conductor: Conductor) -> Option<f64> {
    match conductor {
        Conductor::Size {
            mm2,
            material: Material::Copper,
            ..
        } => Some(mm2),
        _ => None,
    }
}

fn sizes<'a>(series: &'a Series, ballot: &mut Ballot<'a>) {
    let planned: Option<Vec<f64>> = series.cores.iter().map(|c| copper_mm2(*c)).collect();
    let others = match planned.as_deref() {
        Some([line, cpc]) => other_pairs(Some(*line), *cpc),
        Some([cpc]) => other_pairs(None, *cpc),
        _ => return,
    };
    // Rates in the plan are at ambient, those of the table at 20 °C: the factor is the same.
    let table: f64 = series
        .cores
        .iter()
        .filter_map(|c| crate::domain::conductor::rate(*c).ok())
        .map(|r| r.milliohm_per_m())
        .sum();
    let warm = series.rate() / table.max(1e-9);
    let (favour, _) = plausible::favours(series.basis);
    let count = others.len() as f64;
    for (name, line, cpc) in others {
        let rate = (line + cpc) * warm;
        let fit = series.plain(rate, 1.0, true).log_likelihood(&series.seen) - count.ln();
        ballot.add(
            "wrong-size",
            prior("wrong-size") + favour + fit,
            move || {
                words(
                    format!("{name} fits these readings, not the size of the plan"),
                    "read the marking on the sheath, measure a strand",
                )
            },
        );
    }
}

fn lengths<'a>(series: &'a Series, ballot: &mut Ballot<'a>) {
    let (_, favour) = plausible::favours(series.basis);
    let steps = 48;
    for step in 0..=steps {
        // Evenly spaced in the logarithm from a quarter to four times.
        let stretch = 0.25 * 16.0_f64.powf(f64::from(step) / f64::from(steps));
        let share = crate::domain::range::length_share(series.basis);
        if (stretch - 1.0).abs() < share {
            continue;
        }
        let fit = series
            .plain(series.rate(), stretch, false)
            .log_likelihood(&series.seen)
            - f64::from(steps / 2).ln();
        let metres = series.whole_m * stretch;
        let by = (metres - series.whole_m).abs();
        let code = if stretch > 1.0 { "longer" } else { "shorter" };
        let word = if stretch > 1.0 { "longer" } else { "shorter" };
        ballot.add(code, prior(code) + favour + fit, move || {
            words(
                format!("about {metres:.0} m of cable, {by:.0} m {word} than stated"),
                "measure the run, or correct the length in the plan",
            )
        });
    }
}

fn strays<'a>(series: &'a Series, run: &[At], ballot: &mut Ballot<'a>) {
    let rate = series.rate();
    let earth = series.rates.last().copied().unwrap_or(rate);
    let plain = series.plain(rate, 1.0, true);
    let places = (run.len() * STRAYS.len()) as f64;
    // A protective conductor alone that reads low usually touches metalwork.
    let favour = if series.cores.len() == 1 { 1.5 } else { 0.0 };
    for place in run {
        let at = place.at_m * earth / 1000.0 * plausible::COPPER_MEAN;
        for share in STRAYS {
            let stray = share * at;
            let mean: Vec<f64> = series
                .at
                .iter()
                .zip(&plain.mean)
                .map(|(a, healthy)| {
                    let own = a.at_m * earth / 1000.0 * plausible::COPPER_MEAN;
                    let lower = if own <= at {
                        // Out along the conductor, or on to the stray path and back by it.
                        let other = at - own + stray;
                        own * other / (own + other).max(1e-9)
                    } else {
                        at * stray / (at + stray).max(1e-9) + own - at
                    };
                    healthy - own + lower
                })
                .collect();
            let common = (plausible::COPPER_SPREAD.powi(2)
                + plausible::gain_spread(series.instrument).powi(2)
                + plausible::length_spread(series.basis).powi(2))
            .sqrt();
            let mut pressed = series.around(mean, rate, common);
            // The stray path is a guess on a coarse grid; let the points it touches breathe.
            for (own, (low, high)) in pressed
                .own
                .iter_mut()
                .zip(pressed.mean.iter().zip(&plain.mean))
            {
                let slack = 0.07 * (high - low);
                *own += slack * slack;
            }
            let fit = pressed.log_likelihood(&series.seen) - places.ln();
            let no = place.no;
            ballot.add("parallel-path", prior("parallel-path") + favour + fit, move || {
                let where_ = if no == 0 { String::new() } else { format!(" near point {no}") };
                words(
                    format!("a parallel path of about {stray:.2} Ω{where_}"),
                    "take the conductor off at one end and part it from other metalwork, read again",
                )
            });
        }
    }
}

fn slips<'a>(series: &'a Series, plain: &Prediction, ballot: &mut Ballot<'a>) {
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
        let newest = series.ohms(series.newest);
        if !newest.is_finite() || newest <= 0.0 {
            return;
        }
        for all in [false, true] {
            let count = if all { series.seen.len() } else { 1 };
            if all && count == 1 {
                continue;
            }
            let meant: Vec<Seen> = series
                .seen
                .iter()
                .enumerate()
                .map(|(i, seen)| match seen {
                    Seen::Ohm(ohm) if all || i == series.newest => Seen::Ohm(ohm * factor),
                    other => *other,
                })
                .collect();
            // What was shown is a stretched scale of what was meant.
            let fit = plain.log_likelihood(&meant) + count as f64 * factor.ln();
            let right = newest * factor;
            ballot.add(code, prior(code) + fit, move || {
                if code == "unit-slip" {
                    words(
                        format!(
                            "unit slip: {right:.2} Ω would fit, 10^{power} of what was entered"
                        ),
                        "read the unit on the display again",
                    )
                } else {
                    words(
                        format!("decimal point: {right:.2} Ω would fit what was expected"),
                        "read the display again, digit by digit",
                    )
                }
            });
        }
    }
}
