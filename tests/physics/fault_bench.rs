//! Simulated circuits with what is done to them, read in working order.

use handsfull::domain::{
    assess::assess,
    conductor,
    expect::Assessment,
    expected::expected,
    kept::{Kept, Value},
    plan::{Circuit, CircuitKind, Job, LengthBasis},
    range,
    reading::Reading,
    test::{Between, Target, TestKind},
};

use crate::{
    jobs::{self, circuit, copper, target},
    simulate::{Building, Copper, Dice, Meter, Piece, real_lengths},
};

pub const PAIRS: [(f64, f64); 5] = [(1.5, 1.0), (2.5, 1.5), (4.0, 1.5), (6.0, 2.5), (2.5, 2.5)];

pub fn rates(pair: (f64, f64)) -> [f64; 3] {
    [pair.0, pair.0, pair.1].map(|mm2| {
        conductor::rate(copper(mm2))
            .expect("in the table")
            .milliohm_per_m()
    })
}

/// What came of one simulated circuit: what the tester was told last, if anything was raised.
pub struct Outcome {
    pub told: Option<Assessment>,
}

/// Reads a circuit in working order and gives what the tester was told last: readings are assessed
/// from the last one back, each with what had been kept before it, until one raises something.
pub fn read_all(job: &Job, kept: &mut Kept, readings: Vec<(Target, Reading)>) -> Outcome {
    let mut states = vec![kept.clone()];
    for (place, reading) in &readings {
        kept.keep(place.clone(), Value::Reading(reading.clone()), 1);
        states.push(kept.clone());
    }
    for ((place, reading), before) in readings.iter().zip(&states).rev() {
        let range = expected(job, place, before);
        let assessment = assess(job, place, &range, reading, before);
        if assessment.questioned() {
            return Outcome {
                told: Some(assessment),
            };
        }
    }
    Outcome { told: None }
}

/// A circuit of random size and length with its stated positions, ends included.
pub struct Ground {
    pub circuit: Circuit,
    pub stated: Vec<f64>,
    pub pair: (f64, f64),
}

pub fn ground(dice: &mut Dice, kind: CircuitKind, basis: LengthBasis) -> Ground {
    let points = 4 + dice.index(6);
    let m = if kind == CircuitKind::Ring {
        dice.uniform(40.0, 110.0)
    } else {
        dice.uniform(18.0, 60.0)
    };
    let pair = dice.pick(&PAIRS);
    let mut circuit = circuit(1, kind, pair, m, points);
    circuit.length.basis = basis;
    let steps = if kind == CircuitKind::Ring {
        points + 1
    } else {
        points
    };
    let mut stated: Vec<f64> = (1..steps)
        .map(|i| m * (i as f64 + dice.uniform(-0.25, 0.25)) / steps as f64)
        .collect();
    stated.push(m);
    // Half of the plans state positions, the others leave them to be spread evenly.
    if dice.chance(0.5) {
        for (point, at) in circuit.points.iter_mut().zip(&stated) {
            point.at_m = Some((at * 10.0).round() / 10.0);
        }
    }
    Ground {
        circuit,
        stated,
        pair,
    }
}

pub fn lengths(dice: &mut Dice, ground: &Ground, stretch: f64) -> Vec<f64> {
    let share = range::length_share(ground.circuit.length.basis);
    let all = if stretch == 1.0 {
        dice.uniform(1.0 - 0.7 * share, 1.0 + 0.7 * share)
    } else {
        stretch
    };
    real_lengths(dice, &ground.stated, all, 0.3 * share)
}

pub fn basis(dice: &mut Dice) -> LengthBasis {
    dice.pick(&[
        LengthBasis::Measured,
        LengthBasis::Drawing,
        LengthBasis::Guess,
    ])
}

/// Another circuit of the job read before, with the same meter and leads.
pub fn proved(dice: &mut Dice, meter: &Meter, kept: &mut Kept) -> Circuit {
    let other = circuit(2, CircuitKind::Fixed, (2.5, 1.5), 12.0, 1);
    let real = Copper::new(dice, rates((2.5, 1.5)));
    let ohm = 12.0 * (real.0[0] + real.0[2]);
    let reading = meter.show(dice, Some(ohm));
    kept.keep(
        target(TestKind::R1R2, 2, Some(1)),
        Value::Reading(reading),
        1,
    );
    other
}

/// Before a circuit read with un-nulled leads nothing was read with them, or their resistance was
/// noted and not taken off.
pub fn unproved(dice: &mut Dice, meter: &Meter) -> Kept {
    let mut kept = Kept::new();
    if dice.chance(0.5) {
        let mut place = target(TestKind::Leads, 1, None);
        (place.board, place.circuit) = (None, None);
        kept.keep(place, Value::Reading(meter.show(dice, Some(0.0))), 1);
    }
    kept
}

/// Readings of R1+R2 or R2 at every point of a radial.
pub fn radial(
    dice: &mut Dice,
    meter: &Meter,
    building: &Building,
    test: TestKind,
) -> Vec<(Target, Reading)> {
    let [line, _, earth] = &building.terminals;
    let linked = building.linked(&[(line[0], earth[0])]);
    (1..line.len())
        .map(|place| {
            let ohm = if test == TestKind::R2 {
                building.between(earth[0], earth[place])
            } else {
                linked.between(line[place], earth[place])
            };
            let point = u16::try_from(place).ok();
            (target(test, 1, point), meter.show(dice, ohm))
        })
        .collect()
}

#[derive(Clone, Copy, PartialEq)]
pub enum Link {
    Crossed,
    OwnLeg,
}

/// Readings of a ring: three ends, then L-N and L-E at every socket; `swap` exchanges two cores in
/// one socket's terminals, `spur` is a socket at the end of a branch.
pub fn ring(
    dice: &mut Dice,
    meter: &Meter,
    building: &Building,
    links: [Link; 2],
    swap: Option<(usize, usize, usize)>,
    spur: Option<(usize, [handsfull::domain::network::Node; 3])>,
) -> Vec<(Target, Reading)> {
    let last = building.terminals[0].len() - 1;
    let mut out = Vec::new();
    for (core, test) in [TestKind::RingR1, TestKind::RingRn, TestKind::RingR2]
        .into_iter()
        .enumerate()
    {
        let ends = &building.terminals[core];
        let ohm = building.between(ends[0], ends[last]);
        out.push((target(test, 1, None), meter.show(dice, ohm)));
    }
    for (other, test) in [(1, TestKind::RingLineNeutral), (2, TestKind::RingLineEarth)] {
        let (line, second) = (&building.terminals[0], &building.terminals[other]);
        let linked = building.linked(&match links[other - 1] {
            Link::Crossed => [(line[0], second[last]), (line[last], second[0])],
            Link::OwnLeg => [(line[0], second[0]), (line[last], second[last])],
        });
        for place in 1..last {
            let core = |wanted: usize| match (spur, swap) {
                (Some((at, ends)), _) if at == place => ends[wanted],
                (_, Some((at, a, b))) if at == place && wanted == a => building.terminals[b][place],
                (_, Some((at, a, b))) if at == place && wanted == b => building.terminals[a][place],
                _ => building.terminals[wanted][place],
            };
            let ohm = linked.between(core(0), core(other));
            let point = u16::try_from(place).ok();
            out.push((target(test, 1, point), meter.show(dice, ohm)));
        }
    }
    out
}

pub const CROSSED: [Link; 2] = [Link::Crossed, Link::Crossed];

/// One simulated case of a kind of fault; gives the outcome.
pub type Case = fn(&mut Dice) -> Outcome;

pub fn radial_case(
    dice: &mut Dice,
    basis: LengthBasis,
    test: TestKind,
    stretch: f64,
    real_pair: Option<(f64, f64)>,
    pieces: impl Fn(&mut Dice, usize) -> Vec<Piece>,
    offset: f64,
) -> Outcome {
    let ground = ground(dice, CircuitKind::Radial, basis);
    finish_radial(dice, ground, test, stretch, real_pair, pieces, offset)
}

pub fn finish_radial(
    dice: &mut Dice,
    ground: Ground,
    test: TestKind,
    stretch: f64,
    real_pair: Option<(f64, f64)>,
    pieces: impl Fn(&mut Dice, usize) -> Vec<Piece>,
    offset: f64,
) -> Outcome {
    let mut meter = Meter::new(dice);
    let mut kept = Kept::new();
    let other = proved(dice, &meter, &mut kept);
    if offset != 0.0 {
        meter.offset = offset;
        kept = unproved(dice, &meter);
    }
    let real = Copper::new(dice, rates(real_pair.unwrap_or(ground.pair)));
    let metres = lengths(dice, &ground, stretch);
    let pieces = pieces(dice, metres.len());
    let building = Building::new(dice, real, &metres, &pieces);
    let readings = radial(dice, &meter, &building, test);
    let job = jobs::job(vec![ground.circuit, other]);
    read_all(&job, &mut kept, readings)
}

#[allow(clippy::too_many_arguments)] // a case is the sum of its ingredients
pub fn ring_case(
    dice: &mut Dice,
    basis: LengthBasis,
    stretch: f64,
    real_pair: Option<(f64, f64)>,
    pieces: impl Fn(&mut Dice, usize) -> Vec<Piece>,
    links: [Link; 2],
    offset: f64,
    more: impl Fn(&mut Dice, &mut Building, Copper, &[f64]) -> Extra,
) -> Outcome {
    let ground = ground(dice, CircuitKind::Ring, basis);
    let mut meter = Meter::new(dice);
    let mut kept = Kept::new();
    let other = proved(dice, &meter, &mut kept);
    if offset != 0.0 {
        meter.offset = offset;
        kept = unproved(dice, &meter);
    }
    let real = Copper::new(dice, rates(real_pair.unwrap_or(ground.pair)));
    let metres = lengths(dice, &ground, stretch);
    let pieces = pieces(dice, metres.len());
    let mut building = Building::new(dice, real, &metres, &pieces);
    let extra = more(dice, &mut building, real, &metres);
    let readings = ring(dice, &meter, &building, links, extra.swap, extra.spur);
    let job = jobs::job(vec![ground.circuit, other]);
    read_all(&job, &mut kept, readings)
}

#[derive(Default)]
pub struct Extra {
    pub swap: Option<(usize, usize, usize)>,
    pub spur: Option<(usize, [handsfull::domain::network::Node; 3])>,
}

pub fn whole(_: &mut Dice, _: usize) -> Vec<Piece> {
    Vec::new()
}

pub fn nothing(_: &mut Dice, _: &mut Building, _: Copper, _: &[f64]) -> Extra {
    Extra::default()
}

pub fn one(dice: &mut Dice, count: usize, piece: Piece) -> Vec<Piece> {
    let mut pieces = vec![Piece::Whole; count];
    pieces[dice.index(count)] = piece;
    pieces
}

/// A pair of another size that changes the loop by a quarter or more.
pub fn other_pair(dice: &mut Dice, planned: (f64, f64)) -> (f64, f64) {
    let sum = |pair| rates(pair)[0] + rates(pair)[2];
    loop {
        let pair = dice.pick(&[
            (1.0, 1.0),
            (1.5, 1.0),
            (2.5, 1.5),
            (4.0, 1.5),
            (6.0, 2.5),
            (2.5, 2.5),
            (4.0, 4.0),
        ]);
        let ratio: f64 = sum(pair) / sum(planned);
        if !(0.8..=1.25).contains(&ratio) && (0.3..=3.5).contains(&ratio) {
            return pair;
        }
    }
}

pub fn insulating(
    dice: &mut Dice,
    line_neutral: f64,
    line_earth: f64,
    neutral_earth: f64,
) -> Outcome {
    insulating_at(dice, line_neutral, line_earth, neutral_earth, false)
}

pub fn insulating_at(
    dice: &mut Dice,
    line_neutral: f64,
    line_earth: f64,
    neutral_earth: f64,
    surge: bool,
) -> Outcome {
    use handsfull::domain::network::Network;
    // Three conductors and the resistances between them, in megohm.
    let mut net = Network::new();
    let n = net.nodes(3);
    net.join(n[0], n[1], line_neutral);
    net.join(n[0], n[2], line_earth);
    net.join(n[1], n[2], neutral_earth);
    let meter = Meter::new(dice);
    let readings = [
        (Between::LineNeutral, 0, 1),
        (Between::LineEarth, 0, 2),
        (Between::NeutralEarth, 1, 2),
    ]
    .into_iter()
    .map(|(between, a, b)| {
        let megohm = net.between(n[a], n[b]).unwrap_or(f64::INFINITY);
        (
            target(TestKind::Insulation(between), 1, None),
            meter.show_megohm(dice, megohm),
        )
    })
    .collect();
    let mut job = jobs::job(vec![circuit(1, CircuitKind::Radial, (2.5, 1.5), 30.0, 4)]);
    job.boards[0].surge_protection = surge;
    read_all(&job, &mut Kept::new(), readings)
}

pub fn good(dice: &mut Dice) -> f64 {
    dice.decades(60.0, 20_000.0)
}
