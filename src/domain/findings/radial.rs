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
    expect::Finding,
    plan::{Conductor, InstrumentRange, LengthBasis},
};

pub(crate) mod stretched;

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
    stretched::sizes(series, &mut ballot);
    stretched::lengths(series, &mut ballot);
    if series.stray {
        stretched::strays(series, &run, &mut ballot);
    }
    stretched::slips(series, &plain, &mut ballot);
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
