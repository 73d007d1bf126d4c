//! Questions about rings: ends, cross-connected readings at a position, spurs.

use clap::Args as ClapArgs;

use super::{
    answer::Answer,
    given::{self, Doubt, Metal, Warmth},
    wrong,
};
use crate::{
    commands::failure::Failure,
    domain::{
        conductor,
        expect::Source,
        plan::Conductor,
        quantity::Ohms,
        range::Band,
        reading::Unit,
        ring::{self, Ends},
    },
};

#[derive(Debug, ClapArgs)]
pub(super) struct RingArgs {
    /// Line conductor, mm²
    #[arg(long, allow_negative_numbers = true)]
    line_mm2: Option<f64>,
    /// Neutral conductor, mm²; the same as the line unless given
    #[arg(long, allow_negative_numbers = true)]
    neutral_mm2: Option<f64>,
    /// Protective conductor, mm²
    #[arg(long, allow_negative_numbers = true)]
    cpc_mm2: Option<f64>,
    /// Length of the whole loop, m
    #[arg(long, allow_negative_numbers = true)]
    length_m: Option<f64>,
    /// Line end to end as measured, ohm, in place of size and length
    #[arg(long, allow_negative_numbers = true)]
    r1_ohm: Option<f64>,
    /// Neutral end to end as measured, ohm; the same as r1 unless given
    #[arg(long, allow_negative_numbers = true)]
    rn_ohm: Option<f64>,
    /// Protective conductor end to end as measured, ohm
    #[arg(long, allow_negative_numbers = true)]
    r2_ohm: Option<f64>,
    /// Where on the ring: 0 and 1 are the board, 0.5 is half way round
    #[arg(long, default_value_t = 0.5, allow_negative_numbers = true)]
    position: f64,
    /// A spur from that position, m; its readings are added
    #[arg(long, allow_negative_numbers = true)]
    spur_m: Option<f64>,
    #[command(flatten)]
    metal: Metal,
    #[command(flatten)]
    warmth: Warmth,
    #[command(flatten)]
    doubt: Doubt,
}

#[derive(Debug, ClapArgs)]
pub(super) struct SpurArgs {
    /// Cross-connected reading of the ring at the point the spur leaves, ohm
    #[arg(long, allow_negative_numbers = true)]
    ring_ohm: f64,
    /// Reading at the end of the spur, ohm: the answer is the length of the spur
    #[arg(long, allow_negative_numbers = true)]
    reading_ohm: Option<f64>,
    /// Length of the spur, m: the answer is the reading at its end
    #[arg(long, allow_negative_numbers = true)]
    spur_m: Option<f64>,
    /// Line conductor of the spur, mm²
    #[arg(long, allow_negative_numbers = true)]
    line_mm2: f64,
    /// The other conductor of the reading, mm²: the protective one for L-E, the neutral for L-N
    #[arg(long, allow_negative_numbers = true)]
    cpc_mm2: f64,
    #[command(flatten)]
    metal: Metal,
    #[command(flatten)]
    warmth: Warmth,
}

fn position(x: f64) -> Result<f64, Failure> {
    if (0.0..=1.0).contains(&x) {
        Ok(x)
    } else {
        Err(wrong(
            "--position",
            format!("{x} is not on the ring; it must be 0 to 1, 0.5 is half way round"),
        ))
    }
}

impl RingArgs {
    pub(super) fn answer(&self) -> Result<Answer, Failure> {
        let x = position(self.position)?;
        let measured = self.r1_ohm.is_some() || self.rn_ohm.is_some() || self.r2_ohm.is_some();
        let (ends, sources, what) = if measured {
            self.by_ends()?
        } else {
            self.by_length()?
        };
        let nominal = ends.line_earth(x);
        let band = Band::at(nominal, format!("{what}, {:.0} % round", x * 100.0));
        let band = if measured {
            let by = crate::domain::range::RING_AGREEMENT_OHM;
            band.widen("cross readings agree within 0.05 Ω", by, by)
        } else {
            band.under_maximum()
                .length(self.doubt.length_basis.into())
                .terminations(0)
                .instrument(&self.doubt.instrument()?)
        };
        let mut answer = Answer::new(
            "ring",
            format!("L-E cross-connected, {:.0} % round", x * 100.0),
            nominal,
            Unit::Ohm,
        )
        .band(&band)
        .figure("r1", "r1 line end to end", ends.r1.ohm(), Unit::Ohm)
        .figure("rn", "rn neutral end to end", ends.rn.ohm(), Unit::Ohm)
        .figure("r2", "r2 cpc end to end", ends.r2.ohm(), Unit::Ohm)
        .figure("line_neutral", "L-N here", ends.line_neutral(x), Unit::Ohm)
        .with("line_earth", nominal)
        .figure(
            "line_earth_at_board",
            "L-E at the board",
            ends.line_earth(0.0),
            Unit::Ohm,
        )
        .figure(
            "line_earth_at_middle",
            "L-E half way round, R1+R2",
            ends.line_earth(0.5),
            Unit::Ohm,
        )
        .with("line_neutral_at_board", ends.line_neutral(0.0))
        .with("line_neutral_at_middle", ends.line_neutral(0.5))
        .with("quarter_line_neutral", (ends.r1 + ends.rn).ohm() / 4.0)
        .with("r1r2", ends.r1r2())
        .with("ratio_r2_r1", ends.r2.ohm() / ends.r1.ohm())
        .with("position", x)
        .with("temperature_c", self.warmth.temperature_c);
        if let Some(m) = self.spur_m {
            answer = self.spur(answer, &ends, x, m)?;
        }
        for source in sources {
            answer = answer.source(source);
        }
        Ok(answer.source(Source {
            text: "IET Wiring Matters 89 (March 2022): reading by position on a ring".into(),
            checked: true,
        }))
    }

    fn by_ends(&self) -> Result<(Ends, Vec<Source>, String), Failure> {
        let (Some(r1), Some(r2)) = (self.r1_ohm, self.r2_ohm) else {
            return Err(wrong(
                "--r1-ohm",
                "give --r1-ohm and --r2-ohm together (and --rn-ohm if it differs from r1)",
            ));
        };
        let ends = Ends {
            r1: given::some_ohms("--r1-ohm", r1)?,
            rn: given::some_ohms("--rn-ohm", self.rn_ohm.unwrap_or(r1))?,
            r2: given::some_ohms("--r2-ohm", r2)?,
        };
        Ok((ends, Vec::new(), "ends as measured".into()))
    }

    fn conductors(&self) -> Result<[Conductor; 3], Failure> {
        let line = self.metal.conductor("line", self.line_mm2, None)?;
        let neutral = self.metal.maybe("neutral", self.neutral_mm2, None)?;
        let cpc = self.metal.conductor("cpc", self.cpc_mm2, None)?;
        Ok([line, neutral.unwrap_or(line), cpc])
    }

    fn by_length(&self) -> Result<(Ends, Vec<Source>, String), Failure> {
        let Some(m) = self.length_m else {
            return Err(wrong(
                "--length-m",
                "missing; give the length of the loop, or the ends as measured",
            ));
        };
        let length = given::metres("--length-m", m)?;
        let cores = self.conductors()?;
        let core = |c: Conductor| -> Result<Ohms, Failure> {
            Ok(self.warmth.factor(c)?.apply(length.of(given::rate(c)?)))
        };
        let ends = Ends {
            r1: core(cores[0])?,
            rn: core(cores[1])?,
            r2: core(cores[2])?,
        };
        let mut sources: Vec<Source> = cores.map(conductor::source).to_vec();
        sources.push(self.warmth.source());
        let what = format!(
            "{m} m ring of {} / {} at {} °C",
            conductor::words(cores[0]),
            conductor::words(cores[2]),
            self.warmth.temperature_c
        );
        Ok((ends, sources, what))
    }

    fn spur(&self, answer: Answer, ends: &Ends, x: f64, m: f64) -> Result<Answer, Failure> {
        let length = given::metres("--spur-m", m)?;
        let [line, neutral, cpc] = self.conductors()?;
        let branch = |other: Conductor| -> Result<f64, Failure> {
            let both = [line, other].map(|c| {
                Ok::<f64, Failure>(
                    self.warmth
                        .factor(c)?
                        .apply(length.of(given::rate(c)?))
                        .ohm(),
                )
            });
            let [a, b] = both;
            Ok(a? + b?)
        };
        let line_earth = ends.line_earth(x) + branch(cpc)?;
        Ok(answer
            .figure(
                "spur_line_earth",
                &format!("L-E at the end of the {m} m spur"),
                line_earth,
                Unit::Ohm,
            )
            .with("spur_line_neutral", ends.line_neutral(x) + branch(neutral)?))
    }
}

impl SpurArgs {
    pub(super) fn answer(&self) -> Result<Answer, Failure> {
        let ring = given::ohms("--ring-ohm", self.ring_ohm)?.ohm();
        let line = self.metal.conductor("line", Some(self.line_mm2), None)?;
        let cpc = self.metal.conductor("cpc", Some(self.cpc_mm2), None)?;
        let rate = given::rate(line)?.milliohm_per_m() * self.warmth.factor(line)?.factor()
            + given::rate(cpc)?.milliohm_per_m() * self.warmth.factor(cpc)?.factor();
        let answer = match (self.reading_ohm, self.spur_m) {
            (Some(reading), None) => {
                let over = given::ohms("--reading-ohm", reading)?.ohm() - ring;
                if over < 0.0 {
                    return Err(wrong(
                        "--reading-ohm",
                        format!("{reading} ohm is below the ring's {ring} ohm; a spur adds"),
                    ));
                }
                // Two displays, each within two digits of 0.01 Ω.
                let doubt = 0.04;
                Answer::new(
                    "spur",
                    "length of the spur",
                    ring::spur_length_m(over, rate),
                    Unit::Metre,
                )
                .ends(
                    Some(ring::spur_length_m((over - doubt).max(0.0), rate)),
                    Some(ring::spur_length_m(
                        (over + doubt) / (1.0 - crate::domain::range::UNDER_MAXIMUM),
                        rate,
                    )),
                )
                .figure("over", "over the ring by", over, Unit::Ohm)
            }
            (None, Some(m)) => {
                let branch = given::metres("--spur-m", m)?.m() * rate / 1000.0;
                Answer::new("spur", "reading at its end", ring + branch, Unit::Ohm).figure(
                    "over",
                    "the branch adds in full",
                    branch,
                    Unit::Ohm,
                )
            }
            _ => {
                return Err(wrong(
                    "--reading-ohm",
                    "give either --reading-ohm (for the length) or --spur-m (for the reading)",
                ));
            }
        };
        Ok(answer
            .with("milliohm_per_m", rate)
            .source(conductor::source(line))
            .source(self.warmth.source()))
    }
}
