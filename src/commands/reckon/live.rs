//! Questions about loops: Zs against the device, longest length, voltage drop.

use clap::{Args as ClapArgs, ValueEnum};

use super::{
    answer::Answer,
    given::{self, Metal, RuleWord, Warmth},
    wrong,
};
use crate::{
    commands::failure::Failure,
    domain::{
        conductor, drop,
        loops::{self, Disconnection, Maximum},
        plan::{ColdLoopRule, DeviceType},
        quantity::{Round, show},
        reading::Unit,
        residual,
        temperature::{From20, To20},
    },
};

#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
enum DeviceWord {
    /// Circuit-breaker or RCBO, characteristic B
    #[value(name = "B", alias = "b")]
    B,
    /// Characteristic C
    #[value(name = "C", alias = "c")]
    C,
    /// Characteristic D
    #[value(name = "D", alias = "d")]
    D,
    /// Fuse gG
    #[value(name = "BS88-2", aliases = ["bs88-2", "bs-88-2"])]
    Bs88_2,
    /// Fuse
    #[value(name = "BS88-3", aliases = ["bs88-3", "bs-88-3"])]
    Bs88_3,
    /// Semi-enclosed fuse
    #[value(name = "BS3036", aliases = ["bs3036", "bs-3036"])]
    Bs3036,
    /// Fuse, withdrawn
    #[value(name = "BS1361", aliases = ["bs1361", "bs-1361"])]
    Bs1361,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
enum ColdWord {
    /// 0.8 of the tabulated value (UK)
    FourFifths,
    /// Two thirds of U0/Ia (IEC 60364-6)
    TwoThirds,
}

/// The protective device.
#[derive(Debug, ClapArgs)]
pub(super) struct DeviceGiven {
    /// Type of the protective device
    #[arg(long, value_enum)]
    device: DeviceWord,
    /// Its rated current, A
    #[arg(long, allow_negative_numbers = true)]
    rated_a: f64,
    /// Nominal voltage to earth, V
    #[arg(long, default_value_t = 230.0, allow_negative_numbers = true)]
    u0_v: f64,
    /// Disconnection time, s: 0.4 or 5
    #[arg(long, default_value_t = 0.4, allow_negative_numbers = true)]
    time_s: f64,
}

impl DeviceGiven {
    fn maximum(&self) -> Result<Maximum, Failure> {
        let kind = match self.device {
            DeviceWord::B => DeviceType::B,
            DeviceWord::C => DeviceType::C,
            DeviceWord::D => DeviceType::D,
            DeviceWord::Bs88_2 => DeviceType::Bs88_2,
            DeviceWord::Bs88_3 => DeviceType::Bs88_3,
            DeviceWord::Bs3036 => DeviceType::Bs3036,
            DeviceWord::Bs1361 => DeviceType::Bs1361,
        };
        let time = if (self.time_s - 0.4).abs() < 1e-9 {
            Disconnection::FourTenths
        } else if (self.time_s - 5.0).abs() < 1e-9 {
            Disconnection::FiveSeconds
        } else {
            return Err(wrong(
                "--time-s",
                format!("{} s is not held; it must be 0.4 or 5", self.time_s),
            ));
        };
        let u0 = given::volts("--u0-v", self.u0_v)?.v();
        loops::maximum(kind, self.rated_a, u0, time).map_err(|e| wrong("--rated-a", e))
    }
}

#[derive(Debug, ClapArgs)]
pub(super) struct ZsArgs {
    #[command(flatten)]
    device: DeviceGiven,
    /// External loop impedance, ohm (it is not corrected for temperature)
    #[arg(long, allow_negative_numbers = true)]
    ze_ohm: Option<f64>,
    /// R1+R2 of the circuit, ohm, at --r1r2-temperature-c
    #[arg(long, allow_negative_numbers = true)]
    r1r2_ohm: Option<f64>,
    /// Temperature at which R1+R2 holds, °C
    #[arg(long, default_value_t = 20.0, allow_negative_numbers = true)]
    r1r2_temperature_c: f64,
    /// Operating temperature to predict for, °C: 70 thermoplastic, 90 thermosetting
    #[arg(long, default_value_t = 70.0, allow_negative_numbers = true)]
    operating_c: f64,
    /// Predict for the temperature of the reading: no correction
    #[arg(long)]
    cold: bool,
    /// A Zs measured cold, ohm, to compare with the cold limit
    #[arg(long, allow_negative_numbers = true)]
    measured_ohm: Option<f64>,
    /// How a cold measurement is compared
    #[arg(long, value_enum, default_value = "four-fifths")]
    cold_rule: ColdWord,
    /// TT: rated residual current, mA; the limit is then 50 V over it
    #[arg(long, allow_negative_numbers = true)]
    rcd_ma: Option<f64>,
    /// Temperature rule
    #[arg(long, value_enum, default_value = "simplified")]
    rule: RuleWord,
    /// Conductor material
    #[arg(long, value_enum, default_value = "copper")]
    material: given::MaterialWord,
}

impl ZsArgs {
    pub(super) fn answer(&self) -> Result<Answer, Failure> {
        let maximum = self.device.maximum()?;
        let cold_rule = match self.cold_rule {
            ColdWord::FourFifths => ColdLoopRule::FourFifths,
            ColdWord::TwoThirds => ColdLoopRule::TwoThirds,
        };
        let (limit, cold_limit, mut sources) = match self.rcd_ma {
            Some(ma) => {
                let ohm = residual::fifty_volt_ohm(super::earth::rated_ma(ma)?, 50.0);
                let rule = crate::domain::plan::ElectrodeRule::FiftyVolts;
                (ohm, ohm, vec![residual::electrode_limit(rule, ma).1])
            }
            None => (
                maximum.ohm,
                loops::cold(maximum.ohm, cold_rule),
                vec![maximum.source.clone(), loops::cold_source(cold_rule)],
            ),
        };
        let reading_c = given::celsius("--r1r2-temperature-c", self.r1r2_temperature_c)?;
        let operating = given::celsius("--operating-c", self.operating_c)?;
        let (rule, material) = (self.rule.into(), self.material.into());
        let factor = if self.cold {
            1.0
        } else {
            To20::from(rule, material, reading_c).then(From20::to(rule, material, operating))
        };
        let ze = self
            .ze_ohm
            .map(|z| given::ohms("--ze-ohm", z))
            .transpose()?;
        let r = self
            .r1r2_ohm
            .map(|r| given::ohms("--r1r2-ohm", r))
            .transpose()?;
        let mut answer = match (ze, r) {
            (Some(ze), Some(r)) => {
                let predicted = ze.ohm() + r.ohm() * factor;
                let what = if self.cold {
                    "Zs predicted, cold (no correction)".to_owned()
                } else {
                    format!(
                        "Zs predicted at {} °C (Ze + R1+R2 x {factor:.3})",
                        self.operating_c
                    )
                };
                sources.push(crate::domain::temperature::rule_source(rule));
                Answer::new("zs", what, predicted, Unit::Ohm)
                    .ends(None, Some(limit))
                    .with("predicted", predicted)
                    .with("predicted_cold", ze.ohm() + r.ohm())
                    .with("factor", factor)
                    .word(
                        "corrected_to",
                        if self.cold {
                            "temperature of the reading".into()
                        } else {
                            format!("{} °C", self.operating_c)
                        },
                    )
                    .verdict(
                        "verdict",
                        "predicted against the maximum",
                        predicted <= if self.cold { cold_limit } else { limit },
                    )
                    .verdict(
                        "cold_verdict",
                        "Ze + R1+R2 as read against the cold limit",
                        ze.ohm() + r.ohm() <= cold_limit,
                    )
            }
            (None, None) => {
                Answer::new("zs", "maximum Zs", limit, Unit::Ohm).ends(None, Some(limit))
            }
            _ => {
                return Err(wrong(
                    "--r1r2-ohm",
                    "give --ze-ohm and --r1r2-ohm together, or neither for the limits alone",
                ));
            }
        };
        answer = answer
            .figure("limit", "maximum of the device", limit, Unit::Ohm)
            .figure(
                "cold_limit",
                "limit of a cold measurement",
                cold_limit,
                Unit::Ohm,
            )
            .word("limit_shown", show(limit, 2, Round::Down).to_string())
            .word(
                "cold_limit_shown",
                show(cold_limit, 2, Round::Down).to_string(),
            )
            .with("time_s", self.device.time_s);
        if let Some(measured) = self.measured_ohm {
            let measured = given::ohms("--measured-ohm", measured)?.ohm();
            answer = answer.with("measured", measured).verdict(
                "measured_verdict",
                "measured against the cold limit",
                measured <= cold_limit,
            );
        }
        for source in sources {
            answer = answer.source(source);
        }
        Ok(answer)
    }
}

#[derive(Debug, ClapArgs)]
pub(super) struct LengthArgs {
    /// A resistance to turn into a length, ohm (with the conductors; no device is needed)
    #[arg(long, allow_negative_numbers = true)]
    ohm: Option<f64>,
    /// One conductor, mm², for --ohm
    #[arg(long, allow_negative_numbers = true)]
    mm2: Option<f64>,
    /// Line conductor, mm²
    #[arg(long, allow_negative_numbers = true)]
    line_mm2: Option<f64>,
    /// Protective conductor, mm²
    #[arg(long, allow_negative_numbers = true)]
    cpc_mm2: Option<f64>,
    /// Type of the protective device
    #[arg(long, value_enum)]
    device: Option<DeviceWord>,
    /// Its rated current, A
    #[arg(long, allow_negative_numbers = true)]
    rated_a: Option<f64>,
    /// External loop impedance, ohm
    #[arg(long, allow_negative_numbers = true)]
    ze_ohm: Option<f64>,
    /// A ring: the answer is the length of the whole loop
    #[arg(long)]
    ring: bool,
    /// Nominal voltage to earth, V
    #[arg(long, default_value_t = 230.0, allow_negative_numbers = true)]
    u0_v: f64,
    /// Disconnection time, s: 0.4 or 5
    #[arg(long, default_value_t = 0.4, allow_negative_numbers = true)]
    time_s: f64,
    /// Operating temperature for the loop, °C: 70 thermoplastic, 90 thermosetting
    #[arg(long, default_value_t = 70.0, allow_negative_numbers = true)]
    operating_c: f64,
    #[command(flatten)]
    metal: Metal,
    #[command(flatten)]
    warmth: Warmth,
}

impl LengthArgs {
    pub(super) fn answer(&self) -> Result<Answer, Failure> {
        let mut conductors = Vec::new();
        for (option, mm2) in [
            ("", self.mm2),
            ("line", self.line_mm2),
            ("cpc", self.cpc_mm2),
        ] {
            conductors.extend(self.metal.maybe(option, mm2, None)?);
        }
        if conductors.is_empty() {
            return Err(wrong(
                "--line-mm2",
                "give --line-mm2 and --cpc-mm2, or --mm2 for one conductor",
            ));
        }
        let mut at_20 = 0.0;
        for conductor in &conductors {
            at_20 += given::rate(*conductor)?.milliohm_per_m();
        }
        let source = conductor::source(conductors[0]);
        if let Some(ohm) = self.ohm {
            let ohm = given::ohms("--ohm", ohm)?.ohm();
            let rate = at_20 * self.warmth.factor(conductors[0])?.factor();
            let length = ohm * 1000.0 / rate * if self.ring { 4.0 } else { 1.0 };
            return Ok(Answer::new(
                "length",
                format!(
                    "length that reads {ohm} Ω at {} °C",
                    self.warmth.temperature_c
                ),
                length,
                Unit::Metre,
            )
            .ends(
                Some(length),
                Some(length / (1.0 - crate::domain::range::UNDER_MAXIMUM)),
            )
            .with("milliohm_per_m", rate)
            .source(source)
            .source(self.warmth.source()));
        }
        let (Some(device), Some(rated_a), Some(ze)) = (self.device, self.rated_a, self.ze_ohm)
        else {
            return Err(wrong(
                "--device",
                "give --device, --rated-a and --ze-ohm, or --ohm",
            ));
        };
        if conductors.len() < 2 {
            return Err(wrong("--cpc-mm2", "missing; the loop has two conductors"));
        }
        let device = DeviceGiven {
            device,
            rated_a,
            u0_v: self.u0_v,
            time_s: self.time_s,
        };
        let maximum = device.maximum()?;
        let ze = given::ohms("--ze-ohm", ze)?.ohm();
        let hot = given::celsius("--operating-c", self.operating_c)?;
        let rule = self.warmth.rule.into();
        let factor = From20::to(rule, self.metal.material.into(), hot).factor();
        let left = maximum.ohm - ze;
        if left <= 0.0 {
            return Err(wrong(
                "--ze-ohm",
                format!(
                    "{ze} ohm leaves nothing of the maximum {:.2} ohm",
                    maximum.ohm
                ),
            ));
        }
        let share = if self.ring { 4.0 } else { 1.0 };
        let length = left / (at_20 * factor / 1000.0) * share;
        Ok(Answer::new(
            "length",
            format!("longest permissible length at {} °C", self.operating_c),
            length,
            Unit::Metre,
        )
        .ends(None, Some(length))
        .figure("limit", "maximum Zs", maximum.ohm, Unit::Ohm)
        .with("milliohm_per_m_at_20", at_20)
        .with("factor", factor)
        .line("by earth fault loop alone; voltage drop may ask for less")
        .source(maximum.source)
        .source(source)
        .source(self.warmth.source()))
    }
}

#[derive(Debug, ClapArgs)]
pub(super) struct DropArgs {
    /// Design current, A
    #[arg(long, allow_negative_numbers = true)]
    current_a: f64,
    /// Line conductor, mm²
    #[arg(long, allow_negative_numbers = true)]
    line_mm2: Option<f64>,
    /// Neutral conductor, mm²; the same as the line unless given
    #[arg(long, allow_negative_numbers = true)]
    neutral_mm2: Option<f64>,
    /// Length of the run, or of the whole loop of a ring, m
    #[arg(long, allow_negative_numbers = true)]
    length_m: Option<f64>,
    /// Tabulated drop, mV per ampere and metre, with --length-m
    #[arg(long, allow_negative_numbers = true)]
    millivolt_per_a_m: Option<f64>,
    /// Measured R1+Rn, ohm at --temperature-c, in place of cable and length (of a ring: r1+rn end
    /// to end)
    #[arg(long, allow_negative_numbers = true)]
    r1rn_ohm: Option<f64>,
    /// Operating temperature, °C
    #[arg(long, default_value_t = 70.0, allow_negative_numbers = true)]
    operating_c: f64,
    /// A ring with its load evenly shared: a quarter of the loop
    #[arg(long)]
    ring: bool,
    /// Balanced three-phase load: the answer is line to line
    #[arg(long)]
    three_phase: bool,
    /// Lighting: guide value 3 % in place of 5 %
    #[arg(long)]
    lighting: bool,
    /// Nominal voltage to neutral, V
    #[arg(long, default_value_t = 230.0, allow_negative_numbers = true)]
    u0_v: f64,
    #[command(flatten)]
    metal: Metal,
    #[command(flatten)]
    warmth: Warmth,
}

impl DropArgs {
    pub(super) fn answer(&self) -> Result<Answer, Failure> {
        let amps = given::amps("--current-a", self.current_a)?.a();
        let u0 = given::volts("--u0-v", self.u0_v)?.v();
        let hot = given::celsius("--operating-c", self.operating_c)?;
        let (rule, material) = (self.warmth.rule.into(), self.metal.material.into());
        let hot_factor = From20::to(rule, material, hot);
        let share = if self.ring { 0.25 } else { 1.0 };
        let length = self
            .length_m
            .map(|m| given::metres("--length-m", m))
            .transpose()?;
        let nominal = if self.three_phase {
            u0 * 3.0_f64.sqrt()
        } else {
            u0
        };
        let (volts, what) = if let Some(r) = self.r1rn_ohm {
            let r = given::ohms("--r1rn-ohm", r)?.ohm()
                * To20::from(rule, material, self.warmth.celsius()?).then(hot_factor);
            // Balanced phases leave the neutral idle: one of the two cores counts.
            let r = if self.three_phase { r / 2.0 } else { r };
            (
                drop::volts(amps, r * share, self.three_phase),
                "from measured resistance".to_owned(),
            )
        } else if let Some(millivolt) = self.millivolt_per_a_m {
            if !(millivolt > 0.0 && millivolt <= 1000.0) {
                return Err(wrong(
                    "--millivolt-per-a-m",
                    format!("{millivolt} must be above 0 and at most 1000"),
                ));
            }
            let length = length.ok_or_else(|| wrong("--length-m", "missing"))?;
            // A table value already holds the form of the supply and the temperature.
            (
                millivolt * amps * length.m() * share / 1000.0,
                format!("{millivolt} mV/A/m over {} m", length.m()),
            )
        } else {
            let length = length.ok_or_else(|| {
                wrong(
                    "--length-m",
                    "give --line-mm2 and --length-m, or --r1rn-ohm",
                )
            })?;
            let line = self.metal.conductor("line", self.line_mm2, None)?;
            let neutral = self.metal.maybe("neutral", self.neutral_mm2, None)?;
            let one = given::rate(line)?.milliohm_per_m();
            let other = given::rate(neutral.unwrap_or(line))?.milliohm_per_m();
            let rate = if self.three_phase { one } else { one + other };
            let r = length.m() * rate / 1000.0 * hot_factor.factor() * share;
            (
                drop::volts(amps, r, self.three_phase),
                format!("{} m of {}", length.m(), conductor::words(line)),
            )
        };
        let percent = 100.0 * volts / nominal;
        let (guide, source) = drop::guide(self.lighting);
        Ok(Answer::new(
            "drop",
            format!("voltage drop at {} °C, {what}", self.operating_c),
            volts,
            Unit::Volt,
        )
        .ends(None, Some(nominal * guide / 100.0))
        .figure("percent", "of the nominal voltage", percent, Unit::Percent)
        .with("limit_percent", guide)
        .with("limit_v", nominal * guide / 100.0)
        .verdict("verdict", "guide value", percent <= guide)
        .line("a guide value: what the equipment needs governs")
        .source(source)
        .source(self.warmth.source()))
    }
}
