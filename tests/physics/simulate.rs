//! A simulated installation: every core of every piece of cable is a resistor of the nodal solver,
//! the instrument has a gain, last digits and steps. It shares no formula with the findings.

use handsfull::domain::{
    network::{Network, Node},
    reading::Reading,
};
use rust_decimal::Decimal;

/// Deterministic numbers (SplitMix64, public domain algorithm by S. Vigna).
pub struct Dice(u64);

impl Dice {
    pub fn new(seed: u64) -> Self {
        Self(seed)
    }

    fn next(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        z ^ (z >> 31)
    }

    /// Uniform in `low..high`.
    pub fn uniform(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * (self.next() >> 11) as f64 / (1_u64 << 53) as f64
    }

    /// Uniform in the logarithm.
    pub fn decades(&mut self, low: f64, high: f64) -> f64 {
        self.uniform(low.ln(), high.ln()).exp()
    }

    /// One of `0..count`.
    pub fn index(&mut self, count: usize) -> usize {
        (self.next() % count.max(1) as u64) as usize
    }

    pub fn chance(&mut self, share: f64) -> bool {
        self.uniform(0.0, 1.0) < share
    }

    pub fn pick<T: Copy>(&mut self, from: &[T]) -> T {
        from[self.index(from.len())]
    }
}

/// The instrument of one day: its gain error stays, its last digits do not.
pub struct Meter {
    gain: f64,
    pub offset: f64,
}

impl Meter {
    pub fn new(dice: &mut Dice) -> Self {
        Self {
            gain: dice.uniform(0.97, 1.03),
            offset: 0.0,
        }
    }

    /// What it shows for a resistance, ohm; `None`: no continuity.
    pub fn show(&self, dice: &mut Dice, ohm: Option<f64>) -> Reading {
        let Some(ohm) = ohm.filter(|ohm| *ohm < 1e4) else {
            return Reading::open();
        };
        let shown = ohm * self.gain + self.offset + dice.uniform(-0.02, 0.02);
        let places = if shown < 20.0 { 2 } else { 1 };
        figure(shown.max(0.0), places)
    }

    /// What its insulation function shows, MΩ, with a ceiling of 999.
    pub fn show_megohm(&self, dice: &mut Dice, megohm: f64) -> Reading {
        if megohm > 999.0 {
            return ">999".parse().expect("a reading");
        }
        let shown = megohm * self.gain + dice.uniform(-0.02, 0.02);
        let places = if shown < 10.0 {
            2
        } else if shown < 100.0 {
            1
        } else {
            0
        };
        figure(shown.max(0.0), places)
    }
}

pub fn figure(value: f64, places: usize) -> Reading {
    format!("{value:.places$}").parse().expect("a reading")
}

/// The same figure times a power of ten, as if the unit or the point had been missed.
pub fn slipped(reading: &Reading, power: i32) -> Reading {
    let value = reading.value().unwrap_or(Decimal::ZERO);
    let ten = Decimal::from(10_i64.pow(power.unsigned_abs()));
    let moved = if power < 0 { value / ten } else { value * ten };
    Reading::new(moved, reading.bound(), None).expect("in bounds")
}

/// Cores of the copper world: per metre ohm of line, neutral, protective conductor.
#[derive(Clone, Copy)]
pub struct Copper(pub [f64; 3]);

impl Copper {
    /// Real cable: up to 8 % under the maximum, the cores of one drum within 1.5 % of each other.
    pub fn new(dice: &mut Dice, table: [f64; 3]) -> Self {
        let drum = dice.uniform(0.93, 0.995);
        Self(table.map(|rate| rate / 1000.0 * drum * dice.uniform(0.985, 1.005)))
    }
}

/// A circuit as it hangs in the building: terminals of every core at every place.
pub struct Building {
    net: Network,
    /// `[core][place]`; the last place of a ring is the end of leg 2.
    pub terminals: [Vec<Node>; 3],
}

/// What is done to one piece of cable between places `i` and `i + 1`.
#[derive(Clone, Copy, PartialEq)]
pub enum Piece {
    Whole,
    /// These cores do not arrive.
    Open([bool; 3]),
    /// Ohm more in a core.
    Joint(usize, f64),
    /// Two cores change places.
    Crossed(usize, usize),
}

impl Building {
    /// Places in a row with the given lengths of cable between them; place 0 is the board.
    pub fn new(dice: &mut Dice, copper: Copper, lengths: &[f64], pieces: &[Piece]) -> Self {
        let mut net = Network::new();
        let terminals = [0, 1, 2].map(|_| net.nodes(lengths.len() + 1));
        let mut building = Self { net, terminals };
        for (index, length) in lengths.iter().enumerate() {
            let piece = pieces.get(index).copied().unwrap_or(Piece::Whole);
            for core in 0..3 {
                let contact = dice.uniform(0.0, 0.002);
                let ohm = copper.0[core] * length + contact;
                let (ohm, to) = match piece {
                    Piece::Open(cores) if cores[core] => continue,
                    Piece::Joint(which, more) if which == core => (ohm + more, core),
                    Piece::Crossed(a, b) if core == a => (ohm, b),
                    Piece::Crossed(a, b) if core == b => (ohm, a),
                    _ => (ohm, core),
                };
                building.net.join(
                    building.terminals[core][index],
                    building.terminals[to][index + 1],
                    ohm,
                );
            }
        }
        building
    }

    /// A branch of cable from a place; gives the terminals at its end.
    pub fn branch(&mut self, copper: Copper, place: usize, metres: f64) -> [Node; 3] {
        [0, 1, 2].map(|core| {
            let end = self.net.node();
            self.net
                .join(self.terminals[core][place], end, copper.0[core] * metres);
            end
        })
    }

    /// A switch in the line of a place, some metres away: its terminal is beyond the drop.
    pub fn switch(&mut self, copper: Copper, place: usize, metres: f64) {
        let lamp = self.net.node();
        let ohm = 2.0 * metres * copper.0[0];
        self.net.join(self.terminals[0][place], lamp, ohm);
        self.terminals[0][place] = lamp;
    }

    /// A cable between two places.
    pub fn bridge(&mut self, copper: Copper, from: usize, to: usize, metres: f64) {
        for core in 0..3 {
            self.net.join(
                self.terminals[core][from],
                self.terminals[core][to],
                copper.0[core] * metres,
            );
        }
    }

    pub fn join(&mut self, a: Node, b: Node, ohm: f64) {
        self.net.join(a, b, ohm);
    }

    pub fn between(&self, a: Node, b: Node) -> Option<f64> {
        self.net.between(a, b)
    }

    /// The same building with more links, for one test.
    pub fn linked(&self, links: &[(Node, Node)]) -> Self {
        let mut net = self.net.clone();
        for (a, b) in links {
            net.join(*a, *b, 0.0);
        }
        Self {
            net,
            terminals: self.terminals.clone(),
        }
    }
}

/// Lengths of the pieces of a run whose stated positions are `stated` and whose real length is
/// about `stretch` of the stated one, each piece off by up to `own`.
pub fn real_lengths(dice: &mut Dice, stated: &[f64], stretch: f64, own: f64) -> Vec<f64> {
    let mut before = 0.0;
    stated
        .iter()
        .map(|at| {
            let piece = (at - before) * stretch * dice.uniform(1.0 - own, 1.0 + own);
            before = *at;
            piece.max(0.2)
        })
        .collect()
}
