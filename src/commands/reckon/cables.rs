//! Questions about conductors: by length, by lead, with a stray path beside, at a temperature.

use clap::Args as ClapArgs;

use super::{
    answer::Answer,
    given::{self, Doubt, MaterialWord, Metal, RuleWord, Warmth},
    wrong,
};
use crate::{
    commands::failure::Failure,
    domain::{
        conductor,
        plan::Conductor,
        quantity::Metres,
        range::Band,
        reading::Unit,
        temperature::{self, From20, To20},
    },
};

#[derive(Debug, ClapArgs)]
pub(super) struct ConductorArgs {
    /// Cross-section, mm²
    #[arg(long, allow_negative_numbers = true)]
    mm2: f64,
    /// Length, m; without it the answer is per metre
    #[arg(long, allow_negative_numbers = true)]
    length_m: Option<f64>,
    #[command(flatten)]
    metal: Metal,
    #[command(flatten)]
    warmth: Warmth,
}

#[derive(Debug, ClapArgs)]
pub(super) struct R1r2Args {
    /// Line conductor, mm²
    #[arg(long, allow_negative_numbers = true)]
    line_mm2: Option<f64>,
    /// Protective conductor, mm²
    #[arg(long, allow_negative_numbers = true)]
    cpc_mm2: Option<f64>,
    /// Line conductor by resistance, mΩ/m at 20 °C, in place of a size
    #[arg(long, allow_negative_numbers = true)]
    line_milliohm_per_m: Option<f64>,
    /// Protective conductor by resistance, mΩ/m at 20 °C (armour, conduit), in place of a size
    #[arg(long, allow_negative_numbers = true)]
    cpc_milliohm_per_m: Option<f64>,
    /// Length of the run, m
    #[arg(long, allow_negative_numbers = true)]
    length_m: f64,
    /// Material of the protective conductor, where it differs from the line
    #[arg(long, value_enum)]
    cpc_material: Option<MaterialWord>,
    /// Points passed on the way (their terminations are in series)
    #[arg(long, default_value_t = 0)]
    points_passed: u16,
    #[command(flatten)]
    metal: Metal,
    #[command(flatten)]
    warmth: Warmth,
    #[command(flatten)]
    doubt: Doubt,
}

#[derive(Debug, ClapArgs)]
pub(super) struct R2Args {
    /// Protective conductor, mm²
    #[arg(long, allow_negative_numbers = true)]
    cpc_mm2: Option<f64>,
    /// Protective conductor by resistance, mΩ/m at 20 °C (armour, conduit)
    #[arg(long, allow_negative_numbers = true)]
    cpc_milliohm_per_m: Option<f64>,
    /// Length, m
    #[arg(long, allow_negative_numbers = true)]
    length_m: Option<f64>,
    /// What the instrument shows with the long lead in series, ohm; the answer is then R2 as
    /// measured, beside what was expected if size and length are given
    #[arg(long, allow_negative_numbers = true)]
    display_ohm: Option<f64>,
    /// Resistance of the lead, ohm, when it was not nulled
    #[arg(long, default_value_t = 0.0, allow_negative_numbers = true)]
    lead_ohm: f64,
    /// A stray path beside the conductor, ohm: what would then be read
    #[arg(long, allow_negative_numbers = true)]
    parallel_ohm: Option<f64>,
    #[command(flatten)]
    metal: Metal,
    #[command(flatten)]
    warmth: Warmth,
    #[command(flatten)]
    doubt: Doubt,
}

#[derive(Debug, ClapArgs)]
pub(super) struct BondArgs {
    /// Cross-section, mm²
    #[arg(long, allow_negative_numbers = true)]
    mm2: Option<f64>,
    /// By resistance, mΩ/m at 20 °C, in place of a size
    #[arg(long, allow_negative_numbers = true)]
    milliohm_per_m: Option<f64>,
    /// Length, m
    #[arg(long, allow_negative_numbers = true)]
    length_m: Option<f64>,
    /// A stray path beside the conductor, ohm: what would then be read
    #[arg(long, allow_negative_numbers = true)]
    parallel_ohm: Option<f64>,
    /// Supplementary bonding: current that operates the device within 5 s, A; limit 50 V / Ia
    #[arg(long, allow_negative_numbers = true)]
    operating_a: Option<f64>,
    #[command(flatten)]
    metal: Metal,
    #[command(flatten)]
    warmth: Warmth,
    #[command(flatten)]
    doubt: Doubt,
}

#[derive(Debug, ClapArgs)]
pub(super) struct TemperatureArgs {
    /// Resistance, ohm; without it the answer is the factor
    #[arg(long, allow_negative_numbers = true)]
    ohm: Option<f64>,
    /// Temperature at which the resistance holds, °C
    #[arg(long, default_value_t = 20.0, allow_negative_numbers = true)]
    from_c: f64,
    /// Temperature to take it to, °C
    #[arg(long, default_value_t = 20.0, allow_negative_numbers = true)]
    to_c: f64,
    /// Conductor material
    #[arg(long, value_enum, default_value = "copper")]
    material: MaterialWord,
    /// Temperature rule
    #[arg(long, value_enum, default_value = "simplified")]
    rule: RuleWord,
}

/// One core over a length: at 20 °C and at the temperature, ohm.
fn core(conductor: Conductor, length: Metres, warmth: &Warmth) -> Result<(f64, f64), Failure> {
    let cold = length.of(given::rate(conductor)?);
    let warm = warmth.factor(conductor)?.apply(cold);
    Ok((cold.ohm(), warm.ohm()))
}

/// The expected range of conductors in series.
fn band(nominal: f64, what: String, doubt: &Doubt, passed: usize) -> Result<Band, Failure> {
    Ok(Band::at(nominal, what)
        .under_maximum()
        .length(doubt.length_basis.into())
        .terminations(passed)
        .instrument(&doubt.instrument()?))
}

/// A stray path beside a resistance.
fn beside(ohm: f64, stray: Option<f64>) -> Result<Option<f64>, Failure> {
    stray
        .map(|stray| {
            let stray = given::some_ohms("--parallel-ohm", stray)?.ohm();
            Ok(ohm * stray / (ohm + stray))
        })
        .transpose()
}

impl ConductorArgs {
    pub(super) fn answer(&self) -> Result<Answer, Failure> {
        let conductor = self
            .metal
            .maybe("", Some(self.mm2), None)
            .map_err(|_| {
                let error = conductor::of_size(
                    self.mm2,
                    self.metal.material.into(),
                    self.metal.class_of(self.mm2),
                );
                error.map_or_else(|e| wrong("--mm2", e), |_| wrong("--mm2", "not held"))
            })?
            .ok_or_else(|| wrong("--mm2", "missing"))?;
        let at_20 = given::rate(conductor)?.milliohm_per_m();
        let factor = self.warmth.factor(conductor)?.factor();
        let what = format!(
            "{} at {} °C",
            conductor::words(conductor),
            self.warmth.temperature_c
        );
        let answer = match self.length_m {
            None => Answer::new(
                "conductor",
                what + ", per metre",
                at_20 * factor,
                Unit::Milliohm,
            ),
            Some(m) => {
                let length = given::metres("--length-m", m)?;
                let ohm = length.m() * at_20 * factor / 1000.0;
                Answer::new("conductor", format!("{m} m of {what}"), ohm, Unit::Ohm)
            }
        };
        Ok(answer
            .with("milliohm_per_m_at_20", at_20)
            .with("milliohm_per_m", at_20 * factor)
            .with("factor", factor)
            .source(conductor::source(conductor))
            .source(self.warmth.source()))
    }
}

impl R1r2Args {
    pub(super) fn answer(&self) -> Result<Answer, Failure> {
        let length = given::metres("--length-m", self.length_m)?;
        let line = self
            .metal
            .conductor("line", self.line_mm2, self.line_milliohm_per_m)?;
        let cpc_metal = Metal {
            material: self.cpc_material.unwrap_or(self.metal.material),
            class: self.metal.class,
        };
        let cpc = cpc_metal.conductor("cpc", self.cpc_mm2, self.cpc_milliohm_per_m)?;
        let (r1_cold, r1) = core(line, length, &self.warmth)?;
        let (r2_cold, r2) = core(cpc, length, &self.warmth)?;
        let words = format!("{} + {}", conductor::words(line), conductor::words(cpc));
        let band = band(
            r1 + r2,
            format!(
                "{} m of {words} at {} °C",
                self.length_m, self.warmth.temperature_c
            ),
            &self.doubt,
            self.points_passed.into(),
        )?;
        let what = format!("R1+R2 at {} °C", self.warmth.temperature_c);
        Ok(Answer::new("r1r2", what, r1 + r2, Unit::Ohm)
            .band(&band)
            .figure("r1", "R1", r1, Unit::Ohm)
            .figure("r2", "R2", r2, Unit::Ohm)
            .with("r1r2_at_20", r1_cold + r2_cold)
            .with("factor", (r1 + r2) / (r1_cold + r2_cold))
            .with("milliohm_per_m", (r1 + r2) / length.m() * 1000.0)
            .with(
                "milliohm_per_m_at_20",
                (r1_cold + r2_cold) / length.m() * 1000.0,
            )
            .with("ratio_r2_r1", r2 / r1)
            .with("temperature_c", self.warmth.temperature_c)
            .source(conductor::source(line))
            .source(conductor::source(cpc))
            .source(self.warmth.source()))
    }
}

impl R2Args {
    pub(super) fn answer(&self) -> Result<Answer, Failure> {
        let cpc = self
            .metal
            .maybe("cpc", self.cpc_mm2, self.cpc_milliohm_per_m)?;
        let lead = given::ohms("--lead-ohm", self.lead_ohm)?.ohm();
        let expected = match (cpc, self.length_m) {
            (Some(cpc), Some(m)) => {
                let (cold, warm) = core(cpc, given::metres("--length-m", m)?, &self.warmth)?;
                let words = conductor::words(cpc);
                let what = format!("{m} m of {words} at {} °C", self.warmth.temperature_c);
                Some((cold, warm, band(warm, what, &self.doubt, 0)?, cpc))
            }
            _ if self.display_ohm.is_none() => {
                return Err(wrong(
                    "--length-m",
                    "give --cpc-mm2 (or --cpc-milliohm-per-m) and --length-m, or --display-ohm",
                ));
            }
            _ => None,
        };
        let temperature = self.warmth.temperature_c;
        let mut answer = if let Some(display) = self.display_ohm {
            let measured = given::ohms("--display-ohm", display)?.ohm() - lead;
            if measured < 0.0 {
                return Err(wrong(
                    "--lead-ohm",
                    format!("{lead} ohm is more than the display of {display} ohm"),
                ));
            }
            Answer::new("r2", "R2 as measured, less the lead", measured, Unit::Ohm)
                .with("display", display)
                .with("lead", lead)
        } else {
            let warm = expected.as_ref().map_or(0.0, |e| e.1);
            match beside(warm, self.parallel_ohm)? {
                Some(both) => Answer::new(
                    "r2",
                    format!("R2 at {temperature} °C with the stray path beside it"),
                    both,
                    Unit::Ohm,
                ),
                None => Answer::new("r2", format!("R2 at {temperature} °C"), warm, Unit::Ohm),
            }
        };
        if let Some((cold, warm, band, cpc)) = expected {
            answer = answer
                .band(&band)
                .figure("r2", "R2 by length", warm, Unit::Ohm)
                .with("r2_at_20", cold)
                .with("display_with_lead", warm + lead)
                .source(conductor::source(cpc))
                .source(self.warmth.source());
        }
        Ok(answer)
    }
}

impl BondArgs {
    pub(super) fn answer(&self) -> Result<Answer, Failure> {
        let limit = self
            .operating_a
            .map(|a| given::amps("--operating-a", a).map(|a| 50.0 / a.a()))
            .transpose()?;
        let conductor = match (self.mm2, self.milliohm_per_m) {
            (Some(mm2), None) => {
                let material = self.metal.material.into();
                let class = self.metal.class_of(mm2);
                conductor::of_size(mm2, material, class).map_err(|e| wrong("--mm2", e))?;
                Some(Conductor::Size {
                    mm2,
                    material,
                    class,
                })
            }
            (None, Some(milliohm_per_m)) => {
                let given = Conductor::Given { milliohm_per_m };
                conductor::rate(given).map_err(|e| wrong("--milliohm-per-m", e))?;
                Some(given)
            }
            (Some(_), Some(_)) => {
                return Err(wrong("--milliohm-per-m", "stands beside --mm2; give one"));
            }
            (None, None) => None,
        };
        let (Some(conductor), Some(m)) = (conductor, self.length_m) else {
            return match limit {
                Some(ohm) => Ok(Answer::new(
                    "bond",
                    "supplementary bonding, highest resistance",
                    ohm,
                    Unit::Ohm,
                )
                .ends(None, Some(ohm))
                .source(supplementary())),
                None => Err(wrong("--mm2", "give --mm2 and --length-m")),
            };
        };
        let (cold, warm) = core(conductor, given::metres("--length-m", m)?, &self.warmth)?;
        let words = conductor::words(conductor);
        let temperature = self.warmth.temperature_c;
        let band = band(
            warm,
            format!("{m} m of {words} at {temperature} °C"),
            &self.doubt,
            0,
        )?;
        let mut answer = match beside(warm, self.parallel_ohm)? {
            Some(both) => Answer::new("bond", "with the stray path beside it", both, Unit::Ohm),
            None => Answer::new("bond", format!("bond at {temperature} °C"), warm, Unit::Ohm),
        }
        .band(&band)
        .with("alone", warm)
        .with("at_20", cold)
        .line("no fixed limit: 0.05 Ω is a rule of thumb for short runs")
        .source(conductor::source(conductor))
        .source(self.warmth.source());
        if let Some(limit) = limit {
            answer = answer
                .figure("limit", "limit 50 V / Ia", limit, Unit::Ohm)
                .verdict("verdict", "supplementary bonding", warm <= limit)
                .source(supplementary());
        }
        Ok(answer)
    }
}

fn supplementary() -> crate::domain::expect::Source {
    crate::domain::expect::Source {
        text: "BS 7671:2018 415.2.2, R <= 50 V / Ia".into(),
        checked: true,
    }
}

impl TemperatureArgs {
    pub(super) fn answer(&self) -> Result<Answer, Failure> {
        let from = given::celsius("--from-c", self.from_c)?;
        let to = given::celsius("--to-c", self.to_c)?;
        let (rule, material) = (self.rule.into(), self.material.into());
        let factor = To20::from(rule, material, from).then(From20::to(rule, material, to));
        let way = format!("{} °C to {} °C", self.from_c, self.to_c);
        let answer = match self.ohm {
            Some(ohm) => {
                let ohm = given::ohms("--ohm", ohm)?.ohm();
                Answer::new(
                    "temperature",
                    format!("{ohm} Ω from {way}"),
                    ohm * factor,
                    Unit::Ohm,
                )
                .line(format!("factor {factor:.4}"))
            }
            None => Answer::factor("temperature", format!("factor from {way}"), factor),
        };
        Ok(answer
            .with("factor", factor)
            .with("from_c", self.from_c)
            .with("to_c", self.to_c)
            .with("per_kelvin_at_20", temperature::coefficient(rule, material))
            .source(temperature::rule_source(rule)))
    }
}
