//! Expected R1+R2 and R2 along a radial: by length, and nearer by the points already read.

use super::{figure, from_band, rate_at_ambient, sibling, tested_cores, unknown};
use crate::domain::{
    conductor,
    expect::{Expected, Source},
    kept::Kept,
    layout::{self, Spot},
    plan::{Circuit, CircuitKind, Conductor, InstrumentRange, Job},
    range::{self, Band},
    reading::Unit,
    temperature,
    test::{Target, TestKind},
};

/// What is read, along which circuit.
struct Run<'a> {
    job: &'a Job,
    circuit: &'a Circuit,
    test: TestKind,
    cores: Vec<Conductor>,
    /// mΩ/m of the cores together, at the ambient and at 20 °C.
    rate: f64,
    at_20: f64,
    instrument: InstrumentRange,
}

pub(super) fn expected(job: &Job, target: &Target, circuit: &Circuit, kept: &Kept) -> Expected {
    let run = match Run::new(job, circuit, target.test) {
        Ok(run) => run,
        Err(reason) => return unknown(Unit::Ohm, reason),
    };
    let spots = layout::spots(circuit);
    // Without a point the furthest one is meant: that is what the schedule records.
    let spot = match target.point {
        Some(no) => spots.iter().find(|spot| spot.no == no),
        None => spots
            .iter()
            .max_by(|a, b| a.path_m().total_cmp(&b.path_m())),
    };
    let Some(spot) = spot else {
        return unknown(Unit::Ohm, "no such point in the plan");
    };
    let band = run.nearer(run.band(spot), spot, &spots, target, kept);
    let mut sources: Vec<Source> = run.cores.iter().map(|c| conductor::source(*c)).collect();
    sources.dedup();
    sources.push(temperature::rule_source(job.rules.temperature));
    from_band(band, &run.instrument, sources)
}

impl<'a> Run<'a> {
    fn new(job: &'a Job, circuit: &'a Circuit, test: TestKind) -> Result<Self, String> {
        let cores = tested_cores(circuit, test)?;
        let (mut rate, mut at_20) = (0.0, 0.0);
        for core in &cores {
            rate += rate_at_ambient(job, *core)?;
            at_20 += conductor::rate(*core)
                .map_err(|e| e.to_string())?
                .milliohm_per_m();
        }
        Ok(Self {
            job,
            circuit,
            test,
            cores,
            rate,
            at_20,
            instrument: range::continuity_of(job),
        })
    }

    /// The range by length alone.
    fn band(&self, spot: &Spot) -> Band {
        let words: Vec<String> = self.cores.iter().map(|c| conductor::words(*c)).collect();
        let mut band = Band::at(
            spot.path_m() * self.rate / 1000.0,
            format!(
                "{:.1} m x {:.2} mΩ/m at 20 °C ({})",
                spot.path_m(),
                self.at_20,
                words.join(" + ")
            ),
        )
        .note(format!(
            "at {} °C: {:.2} mΩ/m",
            self.job.ambient_c, self.rate
        ))
        .under_maximum()
        .length(self.circuit.length.basis);
        if spot.off_m > 0.0 {
            let off = spot.off_m * self.rate / 1000.0;
            band = band.widen(format!("position ±{:.1} m", spot.off_m), off, off);
        }
        band = band.terminations(spot.passed);
        if self.switched() {
            let line = rate_at_ambient(self.job, self.circuit.cable.line).unwrap_or(0.0);
            let drop = range::SWITCH_DROP_M * 2.0 * line / 1000.0;
            let what = format!("switch drop of up to {} m", range::SWITCH_DROP_M);
            band = band.widen(what, 0.0, drop);
        }
        band.instrument(&self.instrument)
    }

    /// Lighting read through its switches.
    fn switched(&self) -> bool {
        self.circuit.kind == CircuitKind::Lighting && self.test == TestKind::R1R2
    }

    /// Narrows a range by the furthest point already read that fits its own: what copper, length
    /// and instrument did there they do here. Where both ranges have nothing in common the one by
    /// length stands; the findings look at the series anyway.
    fn nearer(
        &self,
        band: Band,
        spot: &Spot,
        spots: &[Spot],
        target: &Target,
        kept: &Kept,
    ) -> Band {
        if self.switched() {
            return band;
        }
        let known = spots
            .iter()
            .filter(|other| other.no != spot.no && other.path_m() * 3.0 >= spot.path_m())
            .filter_map(|other| {
                let place = Target {
                    point: Some(other.no),
                    ..sibling(target, self.test, false)
                };
                let ohm = figure(kept, &place)?;
                let own = self.band(other);
                (ohm >= own.low && ohm <= own.high).then_some((other, ohm))
            })
            .max_by(|a, b| a.0.path_m().total_cmp(&b.0.path_m()));
        let Some((other, ohm)) = known else {
            return band;
        };
        let ratio = spot.path_m() / other.path_m();
        let centre = ohm * ratio;
        let digits = self.instrument.accuracy_digits * range::step(&self.instrument);
        // Stated positions wander about the stretch that the run as a whole may have.
        let share = 0.6 * range::length_share(self.circuit.length.basis);
        let apart = (spot.path_m() - other.path_m()).abs();
        let metres = spot.off_m + other.off_m * ratio + share * apart + 0.5;
        let by = digits * (1.0 + ratio) + metres * self.rate / 1000.0 + 0.02 + 0.01 * centre;
        let (low, high) = (band.low.max(centre - by), band.high.min(centre + by));
        if low >= high || (low <= band.low && high >= band.high) {
            return band;
        }
        let mut near = band;
        near.nominal = centre.clamp(low, high);
        near.why.push(crate::domain::expect::Contribution {
            what: format!(
                "point {} read {ohm} Ω: here {centre:.2} ± {by:.2} Ω by the ratio of lengths",
                other.no
            ),
            low: near.low - low,
            high: high - near.high,
        });
        (near.low, near.high) = (low, high);
        near
    }
}
