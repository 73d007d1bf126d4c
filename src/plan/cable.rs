//! Conductors, lengths and cables of a job file.
//!
//! Promises: a size is one of IEC 60228; defaults are those of ordinary installation cable
//! (copper, solid up to 4 mm² and stranded above, neutral as line, 70 °C thermoplastic, length
//! scaled from the drawing). It leaves out resistances: those are the physics'.

use crate::domain::conductor as table;
use crate::domain::plan::{
    Cable, CircuitKind, Class, Conductor, Insulation, Length, LengthBasis, Material, Run,
};

use super::{
    error::Mistakes,
    fields::{At, Fields},
};

/// Longest length taken without doubt, in metres: ten kilometres is a slip of units.
const LONGEST_M: f64 = 10_000.0;

/// A conductor of its own (bond, main earth): `mm2`, `material`, `class` or `milliohm-per-m`, and
/// its length.
pub(super) fn run(f: &mut Fields<'_>, mistakes: &mut Mistakes<'_>) -> Option<Run> {
    let (material, class) = make(f, mistakes);
    let given = f.has("mm2") || f.has("milliohm-per-m");
    let conductor = conductor(f, "mm2", "milliohm-per-m", material, class, mistakes);
    if !given {
        f.missing("mm2", "its size: mm2 = 10", mistakes);
    }
    let length = length(f, mistakes);
    Some(Run {
        conductor: conductor?,
        length: length?,
    })
}

/// Material and class of the conductors of a table.
fn make(f: &mut Fields<'_>, mistakes: &mut Mistakes<'_>) -> (Material, Option<Class>) {
    let material = f.choice("material", mistakes).unwrap_or(Material::Copper);
    let class = f
        .number("class", 1.0, 5.0, mistakes)
        .and_then(|at| match at.value {
            1.0 => Some(Class::One),
            2.0 => Some(Class::Two),
            5.0 if material == Material::Copper => Some(Class::Five),
            5.0 => {
                mistakes.add(
                    &at.span,
                    "aluminium has no class 5 in IEC 60228",
                    "use class = 1 or class = 2",
                );
                None
            }
            other => {
                mistakes.add(
                    &at.span,
                    format!("class {other} is none of the conductor classes used here"),
                    "use 1 (solid), 2 (stranded) or 5 (flexible)",
                );
                None
            }
        });
    (material, class)
}

/// A conductor under one of two keys: a size or a resistance per metre.
fn conductor(
    f: &mut Fields<'_>,
    size_key: &'static str,
    given_key: &'static str,
    material: Material,
    class: Option<Class>,
    mistakes: &mut Mistakes<'_>,
) -> Option<Conductor> {
    let both = f.has(size_key) && f.has(given_key);
    let size = f.number(size_key, 0.0, 1.0e6, mistakes);
    let given = f.number(given_key, 0.0001, 10_000.0, mistakes);
    if let (true, Some(at)) = (both, &given) {
        mistakes.add(
            &at.span,
            format!("{} gives both `{size_key}` and `{given_key}`", f.name),
            "keep one of them",
        );
    }
    if let Some(at) = given {
        return Some(Conductor::Given {
            milliohm_per_m: at.value,
        });
    }
    let At { value: mm2, span } = size?;
    if !checked_size(mm2, material) {
        mistakes.add(
            &span,
            format!("{mm2} mm² is no size of IEC 60228{}", of(material)),
            near_sizes(mm2, material),
        );
        return None;
    }
    Some(Conductor::Size {
        mm2,
        material,
        class: class.unwrap_or(usual_class(mm2)),
    })
}

/// Solid up to 4 mm², stranded above: what installation cable is made of. The two classes have
/// the same resistance up to 150 mm² (IEC 60228:2004 tables 1 and 2).
pub(super) fn usual_class(mm2: f64) -> Class {
    if mm2 <= 4.0 { Class::One } else { Class::Two }
}

/// The sizes of IEC 60228 held for a material.
pub(super) fn sizes(material: Material) -> Vec<f64> {
    table::sizes(material, Class::Two)
}

/// Whether the table has that size.
fn checked_size(mm2: f64, material: Material) -> bool {
    sizes(material).contains(&mm2)
}

fn of(material: Material) -> &'static str {
    match material {
        Material::Copper => "",
        Material::Aluminium => " for aluminium",
    }
}

/// The sizes on either side, for the message.
fn near_sizes(mm2: f64, material: Material) -> String {
    let sizes = sizes(material);
    let below = sizes.iter().rev().find(|s| **s < mm2);
    let above = sizes.iter().find(|s| **s > mm2);
    match (below, above) {
        (Some(below), Some(above)) => format!("the nearest are {below} and {above}"),
        (Some(only), None) => format!("the largest is {only}"),
        (None, Some(only)) => format!("the smallest is {only}"),
        (None, None) => "use a size of IEC 60228".into(),
    }
}

/// `length-m` with `length-basis`.
pub(super) fn length(f: &mut Fields<'_>, mistakes: &mut Mistakes<'_>) -> Option<Length> {
    let basis = f
        .choice("length-basis", mistakes)
        .unwrap_or(LengthBasis::Drawing);
    if !f.has("length-m") {
        f.number("length-m", 0.1, LONGEST_M, mistakes);
        f.missing("length-m", "its length in metres: length-m = 24", mistakes);
        return None;
    }
    let m = f.number("length-m", 0.1, LONGEST_M, mistakes)?.value;
    Some(Length { m, basis })
}

/// The cable of a circuit.
pub(super) fn cable(
    f: &mut Fields<'_>,
    kind: CircuitKind,
    mistakes: &mut Mistakes<'_>,
) -> Option<Cable> {
    let (material, class) = make(f, mistakes);
    let has_line = f.has("line-mm2");
    let line = sized(f, "line-mm2", material, class, mistakes);
    if !has_line {
        f.missing("line-mm2", "the size of the line: line-mm2 = 2.5", mistakes);
    }
    let neutral = sized(f, "neutral-mm2", material, class, mistakes).or(line);
    let cpc_material = f.choice("cpc-material", mistakes).unwrap_or(material);
    let cpc_given = f.has("cpc-mm2") || f.has("cpc-milliohm-per-m");
    // A class that suits the line may not exist for another metal in the protective conductor.
    let cpc_class = class.filter(|c| *c != Class::Five || cpc_material == Material::Copper);
    let cpc = conductor(
        f,
        "cpc-mm2",
        "cpc-milliohm-per-m",
        cpc_material,
        cpc_class,
        mistakes,
    );
    if !cpc_given && !matches!(kind, CircuitKind::Selv | CircuitKind::Pelv) {
        f.missing(
            "cpc-mm2",
            "the protective conductor: cpc-mm2 = 1.5, or cpc-milliohm-per-m for armour or conduit",
            mistakes,
        );
    }
    let insulation = f
        .choice("insulation", mistakes)
        .unwrap_or(Insulation::Thermoplastic70);
    Some(Cable {
        line: line?,
        neutral: neutral?,
        cpc,
        insulation,
    })
}

/// A conductor that is given by size only.
fn sized(
    f: &mut Fields<'_>,
    key: &'static str,
    material: Material,
    class: Option<Class>,
    mistakes: &mut Mistakes<'_>,
) -> Option<Conductor> {
    let At { value: mm2, span } = f.number(key, 0.0, 1.0e6, mistakes)?;
    if checked_size(mm2, material) {
        return Some(Conductor::Size {
            mm2,
            material,
            class: class.unwrap_or(usual_class(mm2)),
        });
    }
    mistakes.add(
        &span,
        format!("{mm2} mm² is no size of IEC 60228{}", of(material)),
        near_sizes(mm2, material),
    );
    None
}
