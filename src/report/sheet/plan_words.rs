//! What the plan says of conductors, devices and rules, in the words of a schedule.

use crate::domain::{
    plan::{ColdLoopRule, Conductor, Device, ElectrodeRule, Material, Run, TemperatureRule},
    words::Worded,
};

/// `2.5 mm²`, `16 mm² aluminium`, `1.2 mΩ/m`.
pub(super) fn conductor(conductor: Conductor) -> String {
    match conductor {
        Conductor::Size {
            mm2,
            material: Material::Copper,
            ..
        } => format!("{mm2} mm²"),
        Conductor::Size { mm2, material, .. } => format!("{mm2} mm² {}", material.word()),
        Conductor::Given { milliohm_per_m } => format!("{milliohm_per_m} mΩ/m"),
    }
}

/// `16 mm², 1.8 m (measured)`.
pub(super) fn run(run: Run) -> String {
    format!(
        "{}, {} m ({})",
        conductor(run.conductor),
        run.length.m,
        run.length.basis.word()
    )
}

/// `B32`; fuses have a space: `BS 88-2 63`.
pub(super) fn device(device: Device) -> String {
    let kind = device.kind.word();
    let space = if kind.len() > 1 { " " } else { "" };
    format!("{kind}{space}{}", device.rated_a)
}

pub(super) fn temperature(rule: TemperatureRule) -> &'static str {
    match rule {
        TemperatureRule::Simplified => "1 + 0.004 (t - 20), copper and aluminium",
        TemperatureRule::Exact => "IEC 60228 annex: 0.00393 copper, 0.00403 aluminium",
    }
}

pub(super) fn cold_loop(rule: ColdLoopRule) -> &'static str {
    match rule {
        ColdLoopRule::FourFifths => "measured cold: 0.8 of the tabulated Zs",
        ColdLoopRule::TwoThirds => "measured cold: 2/3 of U0/Ia",
    }
}

pub(super) fn electrode(rule: ElectrodeRule) -> &'static str {
    match rule {
        ElectrodeRule::FiftyVolts => "electrode: 50 V / rated residual current",
        ElectrodeRule::TwoHundredOhm => "electrode: 200 Ω, above which it may not be stable",
    }
}
