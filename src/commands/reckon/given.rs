//! Options that several questions share, checked into domain types.

use clap::{Args as ClapArgs, ValueEnum};

use super::wrong;
use crate::{
    commands::failure::Failure,
    domain::{
        conductor,
        expect::Source,
        plan::{Class, Conductor, InstrumentRange, LengthBasis, Material, TemperatureRule},
        quantity::{Amps, Celsius, Metres, MilliohmPerMetre, Ohms, QuantityError, Volts},
        range,
        temperature::{self, From20},
    },
};

#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
pub(super) enum MaterialWord {
    Copper,
    Aluminium,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
pub(super) enum RuleWord {
    /// 1 + 0.004 (t - 20)
    Simplified,
    /// The exact formula of IEC 60228
    Exact,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
pub(super) enum BasisWord {
    /// Measured along the run: ±2 %
    Measured,
    /// Scaled from a drawing: ±10 %
    Drawing,
    /// Guessed: ±20 %
    Guess,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
pub(super) enum ClassWord {
    /// Solid
    #[value(name = "1")]
    One,
    /// Stranded
    #[value(name = "2")]
    Two,
    /// Flexible
    #[value(name = "5")]
    Five,
}

impl From<MaterialWord> for Material {
    fn from(word: MaterialWord) -> Self {
        match word {
            MaterialWord::Copper => Material::Copper,
            MaterialWord::Aluminium => Material::Aluminium,
        }
    }
}

impl From<RuleWord> for TemperatureRule {
    fn from(word: RuleWord) -> Self {
        match word {
            RuleWord::Simplified => TemperatureRule::Simplified,
            RuleWord::Exact => TemperatureRule::Exact,
        }
    }
}

impl From<ClassWord> for Class {
    fn from(word: ClassWord) -> Self {
        match word {
            ClassWord::One => Class::One,
            ClassWord::Two => Class::Two,
            ClassWord::Five => Class::Five,
        }
    }
}

impl From<BasisWord> for LengthBasis {
    fn from(word: BasisWord) -> Self {
        match word {
            BasisWord::Measured => LengthBasis::Measured,
            BasisWord::Drawing => LengthBasis::Drawing,
            BasisWord::Guess => LengthBasis::Guess,
        }
    }
}

/// Material and class of the conductors.
#[derive(Debug, ClapArgs)]
pub(super) struct Metal {
    /// Conductor material
    #[arg(long, value_enum, default_value = "copper")]
    pub(super) material: MaterialWord,
    /// IEC 60228 class: 1 solid, 2 stranded, 5 flexible [default: 1 up to 4 mm², else 2; both are
    /// the same up to 150 mm²]
    #[arg(long, value_enum)]
    pub(super) class: Option<ClassWord>,
}

/// Temperature of the conductors and the rule for it.
#[derive(Debug, ClapArgs)]
pub(super) struct Warmth {
    /// Temperature of the conductors, °C
    #[arg(long, default_value_t = 20.0, allow_negative_numbers = true)]
    pub(super) temperature_c: f64,
    /// Temperature rule
    #[arg(long, value_enum, default_value = "simplified")]
    pub(super) rule: RuleWord,
}

/// How well the length is known and what the instrument can do.
#[derive(Debug, ClapArgs)]
pub(super) struct Doubt {
    /// How well the length is known
    #[arg(long, value_enum, default_value = "measured")]
    pub(super) length_basis: BasisWord,
    /// Instrument accuracy, percent of reading
    #[arg(long, default_value_t = 3.0, allow_negative_numbers = true)]
    pub(super) accuracy_percent: f64,
    /// Instrument accuracy, digits of the last place
    #[arg(long, default_value_t = 2.0, allow_negative_numbers = true)]
    pub(super) accuracy_digits: f64,
    /// Smallest step of the instrument, ohm
    #[arg(long, default_value_t = 0.01, allow_negative_numbers = true)]
    pub(super) resolution_ohm: f64,
}

impl Metal {
    /// The class asked for, or the usual one of a size.
    pub(super) fn class_of(&self, mm2: f64) -> Class {
        self.class
            .map_or_else(|| conductor::usual_class(mm2), Class::from)
    }

    /// A conductor given by size or by resistance per metre; exactly one of both.
    pub(super) fn conductor(
        &self,
        option: &str,
        mm2: Option<f64>,
        milliohm_per_m: Option<f64>,
    ) -> Result<Conductor, Failure> {
        self.maybe(option, mm2, milliohm_per_m)?.ok_or_else(|| {
            wrong(
                &format!("--{option}-mm2"),
                format!("missing; give the size in mm², or --{option}-milliohm-per-m"),
            )
        })
    }

    /// The same where it may be left out.
    pub(super) fn maybe(
        &self,
        option: &str,
        mm2: Option<f64>,
        milliohm_per_m: Option<f64>,
    ) -> Result<Option<Conductor>, Failure> {
        let conductor = match (mm2, milliohm_per_m) {
            (Some(_), Some(_)) => {
                return Err(wrong(
                    &format!("--{option}-milliohm-per-m"),
                    format!("stands beside --{option}-mm2; give one of both"),
                ));
            }
            (Some(mm2), None) => Conductor::Size {
                mm2,
                material: self.material.into(),
                class: self.class_of(mm2),
            },
            (None, Some(milliohm_per_m)) => Conductor::Given { milliohm_per_m },
            (None, None) => return Ok(None),
        };
        let name = match conductor {
            Conductor::Size { .. } => format!("--{option}-mm2"),
            Conductor::Given { .. } => format!("--{option}-milliohm-per-m"),
        };
        conductor::rate(conductor).map_err(|error| wrong(&name, error))?;
        Ok(Some(conductor))
    }
}

impl Warmth {
    /// The temperature, checked.
    pub(super) fn celsius(&self) -> Result<Celsius, Failure> {
        celsius("--temperature-c", self.temperature_c)
    }

    /// The factor from 20 °C for a conductor.
    pub(super) fn factor(&self, conductor: Conductor) -> Result<From20, Failure> {
        Ok(From20::to(
            self.rule.into(),
            conductor::material(conductor),
            self.celsius()?,
        ))
    }

    /// The rule as a source.
    pub(super) fn source(&self) -> Source {
        temperature::rule_source(self.rule.into())
    }
}

impl Doubt {
    /// The instrument, checked.
    pub(super) fn instrument(&self) -> Result<InstrumentRange, Failure> {
        for (option, value, high) in [
            ("--accuracy-percent", self.accuracy_percent, 50.0),
            ("--accuracy-digits", self.accuracy_digits, 100.0),
            ("--resolution-ohm", self.resolution_ohm, 100.0),
        ] {
            if !(0.0..=high).contains(&value) {
                return Err(wrong(option, format!("{value} must be 0 to {high}")));
            }
        }
        Ok(InstrumentRange {
            resolution: rust_decimal::Decimal::try_from(self.resolution_ohm)
                .map_err(|error| wrong("--resolution-ohm", error))?,
            accuracy_percent: self.accuracy_percent,
            accuracy_digits: self.accuracy_digits,
            ..range::usual_continuity()
        })
    }
}

/// Milliohm per metre at 20 °C of a conductor that was checked before.
pub(super) fn rate(conductor: Conductor) -> Result<MilliohmPerMetre, Failure> {
    conductor::rate(conductor).map_err(|error| wrong("--mm2", error))
}

fn checked<T>(option: &str, made: Result<T, QuantityError>) -> Result<T, Failure> {
    made.map_err(|error| wrong(option, error))
}

/// A length above nothing.
pub(super) fn metres(option: &str, value: f64) -> Result<Metres, Failure> {
    if value == 0.0 {
        return Err(wrong(option, "0 metre is no length; it must be above 0"));
    }
    checked(option, Metres::new(value))
}

/// A temperature.
pub(super) fn celsius(option: &str, value: f64) -> Result<Celsius, Failure> {
    checked(option, Celsius::new(value))
}

/// A resistance.
pub(super) fn ohms(option: &str, value: f64) -> Result<Ohms, Failure> {
    checked(option, Ohms::new(value))
}

/// A resistance above nothing.
pub(super) fn some_ohms(option: &str, value: f64) -> Result<Ohms, Failure> {
    if value == 0.0 {
        return Err(wrong(option, "0 ohm cannot be here; it must be above 0"));
    }
    ohms(option, value)
}

/// A current.
pub(super) fn amps(option: &str, value: f64) -> Result<Amps, Failure> {
    checked(option, Amps::new(value))
}

/// A voltage.
pub(super) fn volts(option: &str, value: f64) -> Result<Volts, Failure> {
    checked(option, Volts::new(value))
}
