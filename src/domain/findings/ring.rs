//! Findings of a ring: ends and cross-connected readings weighed together.
//!
//! An open core shows in its end and doubles the cross readings; a joint shows in its end; a bridge
//! lowers all ends and leaves a hump; a leg linked to its own other core leaves a hill that falls
//! to nothing at the board; a spur lifts one point. Each explanation predicts every reading of the
//! series through `wiring`.

use super::{
    plausible::{self, prior},
    weigh::{Ballot, Prediction, Seen, words},
    wiring::{Spot, What, Wiring},
};
use crate::domain::{
    expect::Finding,
    plan::{Cable, InstrumentRange, LengthBasis},
    range,
};

mod broken;
mod lifted;
mod stretched;

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
    broken::opens(series, &planned, &mut ballot);
    broken::links(series, &planned, &mut ballot);
    lifted::joints(series, &planned, &plain, &mut ballot);
    lifted::branches(series, &planned, &plain, &mut ballot);
    lifted::bridges(series, &planned, &mut ballot);
    stretched::cables(series, &mut ballot);
    stretched::offsets(series, &plain, &mut ballot);
    stretched::slips(series, &plain, &mut ballot);
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
