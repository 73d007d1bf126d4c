//! A ring as it may be wired: segments, joints, opens, spurs, links, a bridge, and what every
//! test of the ring would then read.
//!
//! Closed forms: two paths in parallel, and a star in place of the triangle that a bridge makes.
//! The nodal solver gives the same (see the tests). All resistances are at the ambient of the job.

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
    /// Joints of core `c` between two fractions of the loop.
    fn joints_within(&self, c: usize, from: f64, to: f64) -> f64 {
        self.joints
            .iter()
            .filter(|j| j.0 == c && j.1 >= from && j.1 < to)
            .map(|j| j.2)
            .sum()
    }

    /// Ohm of core `c` between two fractions, without a bridge.
    fn piece(&self, c: usize, from: f64, to: f64) -> f64 {
        self.whole[c] * (to - from) + self.joints_within(c, from, to)
    }

    /// Core `c` seen from fraction `x`: ohm back to the start of leg 1, on to the end of leg 2, and
    /// the stem between `x` and where the two part (nothing without a bridge).
    fn seen_from(&self, c: usize, x: f64) -> (f64, f64, f64) {
        const END: f64 = 1.0 + 1e-9;
        let Some((p, q, metres)) = self.bridge else {
            return (self.piece(c, 0.0, x), self.piece(c, x, END), 0.0);
        };
        let bridge = metres * self.per_m[c];
        let (before, after) = (self.piece(c, 0.0, p), self.piece(c, q, END));
        if x <= p || x >= q {
            let arc = self.piece(c, p, q);
            let both = arc * bridge / (arc + bridge);
            return if x <= p {
                let back = self.piece(c, 0.0, x);
                (back, before - back + both + after, 0.0)
            } else {
                let on = self.piece(c, x, END);
                (before + both + after - on, on, 0.0)
            };
        }
        // Inside the bridged arc: the triangle of both parts and the bridge becomes a star
        // (Kennelly 1899) whose centre is where the two ways part.
        let (one, two) = (self.piece(c, p, x), self.piece(c, x, q));
        let round = one + two + bridge;
        (
            before + one * bridge / round,
            after + two * bridge / round,
            one * two / round,
        )
    }

    /// What a test reads, ohm; infinite: open.
    pub(crate) fn read(&self, what: What, spots: &[Spot]) -> f64 {
        let x = match what {
            What::Cross(_, Some(spot)) => spots[spot].x,
            _ => 0.0,
        };
        self.read_at(what, x, spots)
    }

    /// The same with the spot moved to fraction `x`.
    pub(crate) fn read_at(&self, what: What, x: f64, spots: &[Spot]) -> f64 {
        match what {
            What::End(c) => {
                let (back, on, _) = self.seen_from(c, 0.0);
                back + on
            }
            What::Cross(other, spot) => {
                let (back, on, stem) = self.seen_from(0, x);
                let (other_back, other_on, other_stem) = self.seen_from(other, x);
                let (one, two) = if self.own_leg[other - 1] {
                    (back + other_back, on + other_on)
                } else {
                    (back + other_on, on + other_back)
                };
                parallel(one, two)
                    + stem
                    + other_stem
                    + spot.map_or(0.0, |s| self.branch(other, s, spots))
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

#[cfg(test)]
mod tests {
    use super::*;
    use crate::domain::network::{Network, Node};

    /// The same ring in the nodal solver, every stretch a resistor.
    fn solved(wiring: &Wiring, other: usize, x: f64) -> f64 {
        let mut net = Network::new();
        let (p, q, metres) = wiring.bridge.unwrap_or((0.3, 0.7, f64::INFINITY));
        let mut stops = vec![0.0, p, q, x, 1.0];
        for joint in &wiring.joints {
            stops.extend([joint.1 - 1e-9, joint.1 + 1e-9]);
        }
        stops.sort_by(f64::total_cmp);
        let mut core = |c: usize| -> (Node, Node, Node) {
            let nodes = net.nodes(stops.len());
            for i in 1..stops.len() {
                let joint: f64 = wiring
                    .joints
                    .iter()
                    .filter(|j| j.0 == c && stops[i - 1] < j.1 && j.1 < stops[i])
                    .map(|j| j.2)
                    .sum();
                let ohm = wiring.whole[c] * (stops[i] - stops[i - 1]) + joint;
                net.join(nodes[i - 1], nodes[i], ohm);
            }
            let at = |s: f64| nodes[stops.iter().position(|t| *t == s).unwrap_or(0)];
            net.join(at(p), at(q), metres * wiring.per_m[c]);
            (nodes[0], nodes[stops.len() - 1], at(x))
        };
        let (line_start, line_end, line) = core(0);
        let (start, end, second) = core(other);
        if wiring.own_leg[other - 1] {
            net.join(line_start, start, 0.0);
            net.join(line_end, end, 0.0);
        } else {
            net.join(line_start, end, 0.0);
            net.join(line_end, start, 0.0);
        }
        net.between(line, second).unwrap_or(f64::INFINITY)
    }

    fn ring() -> Wiring {
        Wiring {
            whole: [0.4446, 0.4446, 0.726],
            per_m: [0.00741, 0.00741, 0.0121],
            joints: Vec::new(),
            extra_m: Vec::new(),
            own_leg: [false; 2],
            bridge: None,
        }
    }

    #[track_caller]
    fn agrees(wiring: &Wiring) {
        for step in 1..20 {
            let x = f64::from(step) / 20.0 + 0.003;
            let spots = [Spot {
                no: 1,
                x,
                spur_m: 0.0,
                off: 0.0,
            }];
            for other in [1, 2] {
                let closed = wiring.read(What::Cross(other, Some(0)), &spots);
                let net = solved(wiring, other, x);
                let same = closed == net || (closed - net).abs() < 1e-5;
                assert!(same, "{closed} is not {net} at {x}");
            }
        }
    }

    #[test]
    fn closed_forms_are_what_the_solver_finds() {
        agrees(&ring());
        let mut own_leg = ring();
        own_leg.own_leg = [true, true];
        agrees(&own_leg);
        let mut bridged = ring();
        bridged.bridge = Some((0.3, 0.7, 4.0));
        agrees(&bridged);
        bridged.own_leg = [true, false];
        agrees(&bridged);
        let mut joint = ring();
        joint.joints = vec![(0, 0.41, 0.2), (2, 0.77, 1.5)];
        agrees(&joint);
        let mut open = ring();
        open.joints = vec![(0, 0.41, f64::INFINITY)];
        agrees(&open);
        open.joints.push((1, 0.61, f64::INFINITY));
        agrees(&open);
    }

    #[test]
    fn a_bridge_lowers_all_ends() {
        // 60 m ring 2.5/1.5, 4 m of cable between sockets at 0.3 and 0.7: 0.292/0.292/0.477, by
        // the nodal solver of the fact sheet behind this project.
        let mut bridged = ring();
        bridged.bridge = Some((0.3, 0.7, 4.0));
        assert!((bridged.read(What::End(0), &[]) - 0.292).abs() < 0.001);
        assert!((bridged.read(What::End(2), &[]) - 0.477).abs() < 0.001);
    }
}
