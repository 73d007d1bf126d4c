//! Temperature of conductors, with the direction in the type.
//!
//! Two tables are in use in the trade that look alike and run opposite ways: one takes tabulated
//! 20 °C values to the temperature of the day, the other takes a reading of the day to 20 °C.
//! Here [`From20`] and [`To20`] are different types and neither can stand in for the other.

use super::{
    expect::Source,
    plan::{Insulation, Material, TemperatureRule},
    quantity::{Celsius, Ohms},
};

/// Factor that takes a resistance at 20 °C to another temperature.
#[derive(Debug, Clone, Copy, PartialEq, PartialOrd)]
pub struct From20(f64);

/// Factor that takes a resistance at some temperature to 20 °C.
#[derive(Debug, Clone, Copy, PartialEq, PartialOrd)]
pub struct To20(f64);

/// Resistance change per kelvin, referred to 20 °C.
#[must_use]
pub fn coefficient(rule: TemperatureRule, material: Material) -> f64 {
    match (rule, material) {
        (TemperatureRule::Simplified, _) => 0.004,
        // IEC 60228:2004 annex (adopted as GOST 22483-2021 annex B) prints each factor in two forms,
        // 1/(1 + 0.00393 (t - 20)) and 254.5/(234.5 + t) for copper, 0.00403 and 248/(228 + t) for
        // aluminium. They differ by a ten-thousandth; the decimal form is the one in wide use.
        (TemperatureRule::Exact, Material::Copper) => 0.00393,
        (TemperatureRule::Exact, Material::Aluminium) => 0.00403,
    }
}

/// The rule in words, for output.
#[must_use]
pub fn rule_source(rule: TemperatureRule) -> Source {
    Source {
        text: match rule {
            TemperatureRule::Simplified => {
                "1 + 0.004 (t - 20): simplified rule, IEC 60228 factor table and UK guidance"
            }
            TemperatureRule::Exact => {
                "IEC 60228 annex, exact: 1 + 0.00393 (t - 20) copper, 1 + 0.00403 (t - 20) aluminium"
            }
        }
        .into(),
        checked: true,
    }
}

impl From20 {
    /// The factor of a temperature.
    #[must_use]
    pub fn to(rule: TemperatureRule, material: Material, t: Celsius) -> Self {
        Self(1.0 + coefficient(rule, material) * (t.c() - 20.0))
    }

    /// The number.
    #[must_use]
    pub fn factor(self) -> f64 {
        self.0
    }

    /// Applies it to a resistance at 20 °C.
    #[must_use]
    pub fn apply(self, at_20: Ohms) -> Ohms {
        at_20 * self.0
    }

    /// The way back.
    #[must_use]
    pub fn inverse(self) -> To20 {
        To20(1.0 / self.0)
    }
}

impl To20 {
    /// The factor of a temperature.
    #[must_use]
    pub fn from(rule: TemperatureRule, material: Material, t: Celsius) -> Self {
        From20::to(rule, material, t).inverse()
    }

    /// The number.
    #[must_use]
    pub fn factor(self) -> f64 {
        self.0
    }

    /// Applies it to a resistance at the temperature it was made for.
    #[must_use]
    pub fn apply(self, measured: Ohms) -> Ohms {
        measured * self.0
    }

    /// From one temperature to another: the factor by way of 20 °C.
    #[must_use]
    pub fn then(self, onward: From20) -> f64 {
        self.0 * onward.0
    }
}

/// The temperature a conductor may reach in service.
#[must_use]
pub fn operating_c(insulation: Insulation) -> f64 {
    match insulation {
        Insulation::Thermoplastic70 => 70.0,
        Insulation::Thermosetting90 => 90.0,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(c: f64, rule: TemperatureRule, material: Material, factor: f64) {
        let t = Celsius::new(c).expect("in bounds");
        let got = From20::to(rule, material, t).factor();
        assert!(
            (got - factor).abs() < 1.5e-4,
            "{c} °C: {got} is not {factor}"
        );
    }

    #[test]
    fn factors_are_those_of_the_published_formulas() {
        use Material::{Aluminium, Copper};
        use TemperatureRule::{Exact, Simplified};
        // UK guidance: 1.20 at 70 °C and 1.28 at 90 °C from 20 °C (IET community thread 21734).
        check(70.0, Simplified, Copper, 1.20);
        check(90.0, Simplified, Copper, 1.28);
        check(10.0, Simplified, Aluminium, 0.96);
        // GOST 22483-2021 (IEC 60228) annex B formulas.
        check(70.0, Exact, Copper, 304.5 / 254.5);
        check(70.0, Exact, Aluminium, 298.0 / 248.0);
        check(0.0, Exact, Copper, 0.9214);
        check(0.0, Exact, Aluminium, 0.9194);
    }

    #[test]
    fn the_way_to_20_is_the_kt_table_of_iec_60228() {
        // IEC 60228 table of factors k_t, as printed in a cable maker's copy (uecables.com/471).
        for (c, k) in [
            (5.0, 1.064),
            (10.0, 1.042),
            (15.0, 1.020),
            (25.0, 0.980),
            (30.0, 0.962),
            (40.0, 0.926),
        ] {
            let t = Celsius::new(c).expect("in bounds");
            let got = To20::from(TemperatureRule::Simplified, Material::Copper, t).factor();
            assert!((got - k).abs() < 5.1e-4, "{c} °C: {got} is not {k}");
        }
    }

    #[test]
    fn ten_to_seventy_degrees_is_the_five_quarters_behind_the_four_fifths_rule() {
        // IET community thread 21734: 1.20 / 0.96 = 1.25.
        let rule = TemperatureRule::Simplified;
        let cold = To20::from(
            rule,
            Material::Copper,
            Celsius::new(10.0).expect("in bounds"),
        );
        let hot = From20::to(
            rule,
            Material::Copper,
            Celsius::new(70.0).expect("in bounds"),
        );
        assert!((cold.then(hot) - 1.25).abs() < 1e-12);
    }
}
