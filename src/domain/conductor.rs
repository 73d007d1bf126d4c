//! Conductors: resistance per metre at 20 °C by size, material and class, and the cables of the
//! trade.
//!
//! Figures are the maxima of IEC 60228:2004 tables 1 to 3 as read in makers' copies of the tables,
//! so good copper usually reads a few per cent lower. It leaves out temperature (`temperature`)
//! and metal-coated copper.

use super::{
    expect::Source,
    plan::{Class, Conductor, Material},
    quantity::{MilliohmPerMetre, QuantityError},
};

/// A conductor the tables do not hold.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[allow(missing_docs)] // the fields are named in the messages
pub enum ConductorError {
    #[error(
        "no {material} conductor of {mm2} mm² class {class} in IEC 60228:2004; sizes held are {sizes}"
    )]
    NoSuchSize {
        mm2: f64,
        material: &'static str,
        class: u8,
        sizes: String,
    },
    #[error(transparent)]
    Rate(#[from] QuantityError),
}

/// Size in mm², then copper class 1, class 2, class 5 and aluminium class 1/2, mΩ/m at 20 °C;
/// zero: not in the tables. Class 5 of 50 mm² is lower than class 2 in the standard too.
const IEC_60228: [(f64, f64, f64, f64, f64); 19] = [
    (0.5, 36.0, 36.0, 39.0, 0.0),
    (0.75, 24.5, 24.5, 26.0, 0.0),
    (1.0, 18.1, 18.1, 19.5, 0.0),
    (1.5, 12.1, 12.1, 13.3, 0.0),
    (2.5, 7.41, 7.41, 7.98, 0.0),
    (4.0, 4.61, 4.61, 4.95, 0.0),
    (6.0, 3.08, 3.08, 3.30, 0.0),
    (10.0, 1.83, 1.83, 1.91, 3.08),
    (16.0, 1.15, 1.15, 1.21, 1.91),
    (25.0, 0.727, 0.727, 0.780, 1.20),
    (35.0, 0.524, 0.524, 0.554, 0.868),
    (50.0, 0.387, 0.387, 0.386, 0.641),
    (70.0, 0.268, 0.268, 0.272, 0.443),
    (95.0, 0.193, 0.193, 0.206, 0.320),
    (120.0, 0.153, 0.153, 0.161, 0.253),
    (150.0, 0.124, 0.124, 0.129, 0.206),
    (185.0, 0.101, 0.0991, 0.106, 0.164),
    (240.0, 0.0775, 0.0754, 0.0801, 0.125),
    (300.0, 0.0620, 0.0601, 0.0641, 0.100),
];

/// Flat twin-and-earth pairs (line mm², cpc mm²), BS 6004 sizes, and the older 2.5/1.0 that still
/// turns up (common practice, no source for the last).
pub const FLAT_PAIRS: [(f64, f64); 8] = [
    (1.0, 1.0),
    (1.5, 1.0),
    (2.5, 1.0),
    (2.5, 1.5),
    (4.0, 1.5),
    (6.0, 2.5),
    (10.0, 4.0),
    (16.0, 6.0),
];

/// Pairs of equal singles in conduit or trunking.
pub const EQUAL_PAIRS: [(f64, f64); 6] = [
    (1.5, 1.5),
    (2.5, 2.5),
    (4.0, 4.0),
    (6.0, 6.0),
    (10.0, 10.0),
    (16.0, 16.0),
];

/// The material as a word.
#[must_use]
pub fn material_word(material: Material) -> &'static str {
    match material {
        Material::Copper => "copper",
        Material::Aluminium => "aluminium",
    }
}

/// The class as its number.
#[must_use]
pub fn class_number(class: Class) -> u8 {
    match class {
        Class::One => 1,
        Class::Two => 2,
        Class::Five => 5,
    }
}

/// The usual class of fixed wiring: solid to 4 mm², stranded above (common practice, no source).
/// The table holds the same resistance for both up to 150 mm².
#[must_use]
pub fn usual_class(mm2: f64) -> Class {
    if mm2 <= 4.0 { Class::One } else { Class::Two }
}

fn column(row: &(f64, f64, f64, f64, f64), material: Material, class: Class) -> f64 {
    match (material, class) {
        (Material::Copper, Class::One) => row.1,
        (Material::Copper, Class::Two) => row.2,
        (Material::Copper, Class::Five) => row.3,
        (Material::Aluminium, Class::One | Class::Two) => row.4,
        (Material::Aluminium, Class::Five) => 0.0,
    }
}

/// The sizes held for a material and class, mm², rising.
#[must_use]
pub fn sizes(material: Material, class: Class) -> Vec<f64> {
    IEC_60228
        .iter()
        .filter(|row| column(row, material, class) > 0.0)
        .map(|row| row.0)
        .collect()
}

/// Maximum resistance at 20 °C of a size.
///
/// # Errors
/// [`ConductorError::NoSuchSize`] names the sizes that are held.
pub fn of_size(
    mm2: f64,
    material: Material,
    class: Class,
) -> Result<MilliohmPerMetre, ConductorError> {
    let found = IEC_60228
        .iter()
        .find(|row| (row.0 - mm2).abs() < 1e-9)
        .map(|row| column(row, material, class))
        .filter(|rate| *rate > 0.0);
    match found {
        Some(rate) => Ok(MilliohmPerMetre::new(rate)?),
        None => Err(ConductorError::NoSuchSize {
            mm2,
            material: material_word(material),
            class: class_number(class),
            sizes: {
                let held = sizes(material, class);
                if held.is_empty() {
                    "none (aluminium is held in classes 1 and 2)".into()
                } else {
                    let words: Vec<String> = held.iter().map(ToString::to_string).collect();
                    words.join(", ")
                }
            },
        }),
    }
}

/// Resistance per metre at 20 °C of a conductor of the plan.
///
/// # Errors
/// [`ConductorError`] for a size the tables do not hold or a rate that is none.
pub fn rate(conductor: Conductor) -> Result<MilliohmPerMetre, ConductorError> {
    match conductor {
        Conductor::Size {
            mm2,
            material,
            class,
        } => of_size(mm2, material, class),
        Conductor::Given { milliohm_per_m } => Ok(MilliohmPerMetre::new(milliohm_per_m)?),
    }
}

/// The material that rules the temperature law; a given rate (armour, conduit) follows copper's
/// simplified figure, which differs from steel's by less than the ambient is known.
#[must_use]
pub fn material(conductor: Conductor) -> Material {
    match conductor {
        Conductor::Size { material, .. } => material,
        Conductor::Given { .. } => Material::Copper,
    }
}

/// Where the rate of a conductor comes from.
#[must_use]
pub fn source(conductor: Conductor) -> Source {
    match conductor {
        Conductor::Size { .. } => table_source(),
        Conductor::Given { milliohm_per_m } => Source {
            text: format!("{milliohm_per_m} mΩ/m at 20 °C given in the plan"),
            checked: false,
        },
    }
}

/// The source of the table. Read in several makers' copies that agree, not in the standard.
#[must_use]
pub fn table_source() -> Source {
    Source {
        text: "IEC 60228:2004 tables 1-3, maximum at 20 °C".into(),
        checked: true,
    }
}

/// A conductor in words: "2.5 mm² copper", "3.1 mΩ/m given".
#[must_use]
pub fn words(conductor: Conductor) -> String {
    match conductor {
        Conductor::Size {
            mm2,
            material,
            class,
        } => {
            let flex = if class == Class::Five { " flex" } else { "" };
            format!("{mm2} mm² {}{flex}", material_word(material))
        }
        Conductor::Given { milliohm_per_m } => format!("{milliohm_per_m} mΩ/m given"),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn an_unknown_size_is_refused_with_the_sizes_that_are_held() {
        let error = of_size(700.0, Material::Copper, Class::One).map_err(|e| e.to_string());
        assert!(
            error
                .as_ref()
                .is_err_and(|e| e.contains("700 mm²") && e.contains("0.5, 0.75, 1, 1.5"))
        );
        assert!(of_size(2.5, Material::Aluminium, Class::One).is_err());
        assert!(of_size(16.0, Material::Aluminium, Class::Five).is_err());
        assert!(of_size(f64::NAN, Material::Copper, Class::One).is_err());
    }

    #[test]
    fn every_pair_of_the_trade_is_in_the_table() {
        for (line, cpc) in FLAT_PAIRS.into_iter().chain(EQUAL_PAIRS) {
            assert!(of_size(line, Material::Copper, Class::One).is_ok());
            assert!(of_size(cpc, Material::Copper, Class::One).is_ok());
        }
    }

    #[test]
    fn a_bigger_conductor_of_one_class_never_has_more_resistance() {
        for (material, class) in [
            (Material::Copper, Class::One),
            (Material::Copper, Class::Two),
            (Material::Copper, Class::Five),
            (Material::Aluminium, Class::Two),
        ] {
            let rates: Vec<f64> = sizes(material, class)
                .into_iter()
                .filter_map(|mm2| of_size(mm2, material, class).ok())
                .map(MilliohmPerMetre::milliohm_per_m)
                .collect();
            assert!(rates.windows(2).all(|pair| pair[0] > pair[1]));
        }
    }
}
