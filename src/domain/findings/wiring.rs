//! A ring as it may be wired: segments, joints, opens, spurs, links, a bridge, and what every
//! test of the ring would then read.
//!
//! Loops without a bridge are closed forms (two paths in parallel); a bridge goes to the nodal
//! solver. All resistances are at the ambient of the job.

use crate::domain::network::Network;

/// Which reading of a ring.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum What {
    /// End to end: core 0 line, 1 neutral, 2 protective.
    End(usize),
    /// Cross-connected, line to core 1 or 2, at a spot; `None`: at the board.
    Cross(usize, Option<usize>),
}

/// A spot of the ring.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Spot {
    /// Its number in the plan.
    pub(crate) no: u16,
    /// Fraction of the loop.
    pub(crate) x: f64,
    /// Metres of branch.
    pub(crate) spur_m: f64,
    /// Fraction of the loop by which `x` may be off.
    pub(crate) off: f64,
}

/// A ring as wired.
#[derive(Debug, Clone)]
pub(crate) struct Wiring {
    /// End-to-end ohm of each whole core without faults.
    pub(crate) whole: [f64; 3],
    /// Ohm per metre of branch of each core.
    pub(crate) per_m: [f64; 3],
    /// Joint: core, fraction of the loop, ohm (infinite: open). Several may stand.
    pub(crate) joints: Vec<(usize, f64, f64)>,
    /// Extra metres of branch at spots.
    pub(crate) extra_m: Vec<(usize, f64)>,
    /// Leg-to-own-leg link in place of the cross link, for the test against core 1 and core 2.
    pub(crate) own_leg: [bool; 2],
    /// A cable from fraction to fraction, metres.
    pub(crate) bridge: Option<(f64, f64, f64)>,
}

impl Wiring {
    /// Ohm of core `c` from the start of leg 1 to fraction `x`.
    fn up_to(&self, c: usize, x: f64) -> f64 {
        let joints: f64 = self
            .joints
            .iter()
            .filter(|j| j.0 == c && j.1 < x)
            .map(|j| j.2)
            .sum();
        self.whole[c] * x + joints
    }

    /// Ohm of core `c` from fraction `x` to the end of leg 2.
    fn onward(&self, c: usize, x: f64) -> f64 {
        let joints: f64 = self
            .joints
            .iter()
            .filter(|j| j.0 == c && j.1 >= x)
            .map(|j| j.2)
            .sum();
        self.whole[c] * (1.0 - x) + joints
    }

    /// What a test reads, ohm; infinite: open.
    pub(crate) fn read(&self, what: What, spots: &[Spot]) -> f64 {
        if self.bridge.is_some() {
            return self.solve(what, spots);
        }
        match what {
            What::End(c) => self.up_to(c, 1.0) + self.onward(c, 1.0),
            What::Cross(other, spot) => {
                let x = spot.map_or(0.0, |s| spots[s].x);
                let (back, on) = (self.up_to(0, x), self.onward(0, x));
                let (other_back, other_on) = (self.up_to(other, x), self.onward(other, x));
                let (one, two) = if self.own_leg[other - 1] {
                    (back + other_back, on + other_on)
                } else {
                    (back + other_on, on + other_back)
                };
                parallel(one, two) + spot.map_or(0.0, |s| self.branch(other, s, spots))
            }
        }
    }

    fn branch(&self, other: usize, spot: usize, spots: &[Spot]) -> f64 {
        let extra: f64 = self
            .extra_m
            .iter()
            .filter(|e| e.0 == spot)
            .map(|e| e.1)
            .sum();
        (spots[spot].spur_m + extra) * (self.per_m[0] + self.per_m[other])
    }

    fn solve(&self, what: What, spots: &[Spot]) -> f64 {
        let Some((from, to, metres)) = self.bridge else {
            return f64::INFINITY;
        };
        let mut net = Network::new();
        let x = match what {
            What::Cross(_, Some(spot)) => spots[spot].x,
            _ => 0.0,
        };
        // Each core: the board at both ends, the two ends of the bridge, and the spot read.
        let mut stops = [0.0, from, to, x, 1.0];
        stops.sort_by(f64::total_cmp);
        let mut core = |c: usize| {
            let nodes = net.nodes(stops.len());
            for i in 1..stops.len() {
                let ohm = self.up_to(c, stops[i]) - self.up_to(c, stops[i - 1]);
                net.join(nodes[i - 1], nodes[i], ohm);
            }
            let at = |fraction: f64| {
                let index = stops.iter().position(|s| (*s - fraction).abs() < 1e-12);
                nodes[index.unwrap_or(0)]
            };
            net.join(at(from), at(to), metres * self.per_m[c]);
            (nodes[0], nodes[stops.len() - 1], at(x))
        };
        match what {
            What::End(c) => {
                let (start, end, _) = core(c);
                net.between(start, end).unwrap_or(f64::INFINITY)
            }
            What::Cross(other, spot) => {
                let (line_start, line_end, line) = core(0);
                let (other_start, other_end, second) = core(other);
                if self.own_leg[other - 1] {
                    net.join(line_start, other_start, 0.0);
                    net.join(line_end, other_end, 0.0);
                } else {
                    net.join(line_start, other_end, 0.0);
                    net.join(line_end, other_start, 0.0);
                }
                net.between(line, second).unwrap_or(f64::INFINITY)
                    + spot.map_or(0.0, |s| self.branch(other, s, spots))
            }
        }
    }
}

fn parallel(a: f64, b: f64) -> f64 {
    match (a.is_finite(), b.is_finite()) {
        (true, true) if a + b > 0.0 => a * b / (a + b),
        (true, true) => 0.0,
        (true, false) => a,
        (false, true) => b,
        (false, false) => f64::INFINITY,
    }
}
