//! What moves a whole radial: another size, another length, a stray path, a slip of unit or point.

use super::{At, Series};
use crate::domain::{
    conductor::{EQUAL_PAIRS, FLAT_PAIRS, of_size},
    findings::{
        plausible::{self, prior},
        weigh::{Ballot, Prediction, Seen, words},
    },
    plan::{Conductor, Material},
};

/// Resistances of a stray path as shares of the conductor up to where it touches.
const STRAYS: [f64; 10] = [0.03, 0.08, 0.16, 0.28, 0.42, 0.6, 0.85, 1.2, 1.8, 3.0];

/// Other sizes that could be there in place of the planned ones: the words and mΩ/m at 20 °C.
pub(crate) fn other_pairs(line: Option<f64>, cpc: f64) -> Vec<(String, f64, f64)> {
    let rate = |mm2: f64| {
        of_size(
            mm2,
            Material::Copper,
            crate::domain::conductor::usual_class(mm2),
        )
        .map_or(0.0, |r| r.milliohm_per_m())
    };
    match line {
        Some(line) => FLAT_PAIRS
            .into_iter()
            .chain(EQUAL_PAIRS)
            .filter(|pair| *pair != (line, cpc) && (0.15..=7.0).contains(&(pair.0 / line)))
            .map(|(l, c)| (format!("{l}/{c} mm²"), rate(l), rate(c)))
            .collect(),
        None => [1.0, 1.5, 2.5, 4.0, 6.0, 10.0, 16.0, 25.0]
            .into_iter()
            .filter(|mm2| *mm2 != cpc && (0.25..=4.0).contains(&(mm2 / cpc)))
            .map(|mm2| (format!("{mm2} mm²"), 0.0, rate(mm2)))
            .collect(),
    }
}

/// Cross-section of a copper conductor; others are not compared.
pub(crate) fn copper_mm2(conductor: Conductor) -> Option<f64> {
    match conductor {
        Conductor::Size {
            mm2,
            material: Material::Copper,
            ..
        } => Some(mm2),
        _ => None,
    }
}

pub(super) fn sizes<'a>(series: &'a Series, ballot: &mut Ballot<'a>) {
    let planned: Option<Vec<f64>> = series.cores.iter().map(|c| copper_mm2(*c)).collect();
    let others = match planned.as_deref() {
        Some([line, cpc]) => other_pairs(Some(*line), *cpc),
        Some([cpc]) => other_pairs(None, *cpc),
        _ => return,
    };
    // Rates in the plan are at ambient, those of the table at 20 °C: the factor is the same.
    let table: f64 = series
        .cores
        .iter()
        .filter_map(|c| crate::domain::conductor::rate(*c).ok())
        .map(|r| r.milliohm_per_m())
        .sum();
    let warm = series.rate() / table.max(1e-9);
    let (favour, _) = plausible::favours(series.basis);
    let count = others.len() as f64;
    for (name, line, cpc) in others {
        let rate = (line + cpc) * warm;
        let fit = series.plain(rate, 1.0, true).log_likelihood(&series.seen) - count.ln();
        ballot.add(
            "wrong-size",
            prior("wrong-size") + favour + fit,
            move || {
                words(
                    format!("{name} fits these readings, not the size of the plan"),
                    "read the marking on the sheath, measure a strand",
                )
            },
        );
    }
}

pub(super) fn lengths<'a>(series: &'a Series, ballot: &mut Ballot<'a>) {
    let (_, favour) = plausible::favours(series.basis);
    let steps = 48;
    for step in 0..=steps {
        // Evenly spaced in the logarithm from a quarter to four times.
        let stretch = 0.25 * 16.0_f64.powf(f64::from(step) / f64::from(steps));
        let share = crate::domain::range::length_share(series.basis);
        if (stretch - 1.0).abs() < share {
            continue;
        }
        let fit = series
            .plain(series.rate(), stretch, false)
            .log_likelihood(&series.seen)
            - f64::from(steps / 2).ln();
        let metres = series.whole_m * stretch;
        let by = (metres - series.whole_m).abs();
        let code = if stretch > 1.0 { "longer" } else { "shorter" };
        let word = if stretch > 1.0 { "longer" } else { "shorter" };
        ballot.add(code, prior(code) + favour + fit, move || {
            words(
                format!("about {metres:.0} m of cable, {by:.0} m {word} than stated"),
                "measure the run, or correct the length in the plan",
            )
        });
    }
}

pub(super) fn strays<'a>(series: &'a Series, run: &[At], ballot: &mut Ballot<'a>) {
    let rate = series.rate();
    let earth = series.rates.last().copied().unwrap_or(rate);
    let plain = series.plain(rate, 1.0, true);
    let places = (run.len() * STRAYS.len()) as f64;
    // A protective conductor alone that reads low usually touches metalwork.
    let favour = if series.cores.len() == 1 { 1.5 } else { 0.0 };
    for place in run {
        let at = place.at_m * earth / 1000.0 * plausible::COPPER_MEAN;
        for share in STRAYS {
            let stray = share * at;
            let mean: Vec<f64> = series
                .at
                .iter()
                .zip(&plain.mean)
                .map(|(a, healthy)| {
                    let own = a.at_m * earth / 1000.0 * plausible::COPPER_MEAN;
                    let lower = if own <= at {
                        // Out along the conductor, or on to the stray path and back by it.
                        let other = at - own + stray;
                        own * other / (own + other).max(1e-9)
                    } else {
                        at * stray / (at + stray).max(1e-9) + own - at
                    };
                    healthy - own + lower
                })
                .collect();
            let common = (plausible::COPPER_SPREAD.powi(2)
                + plausible::gain_spread(series.instrument).powi(2)
                + plausible::length_spread(series.basis).powi(2))
            .sqrt();
            let mut pressed = series.around(mean, rate, common);
            // The stray path is a guess on a coarse grid; let the points it touches breathe.
            for (own, (low, high)) in pressed
                .own
                .iter_mut()
                .zip(pressed.mean.iter().zip(&plain.mean))
            {
                let slack = 0.07 * (high - low);
                *own += slack * slack;
            }
            let fit = pressed.log_likelihood(&series.seen) - places.ln();
            let no = place.no;
            ballot.add("parallel-path", prior("parallel-path") + favour + fit, move || {
                let where_ = if no == 0 { String::new() } else { format!(" near point {no}") };
                words(
                    format!("a parallel path of about {stray:.2} Ω{where_}"),
                    "take the conductor off at one end and part it from other metalwork, read again",
                )
            });
        }
    }
}

pub(super) fn slips<'a>(series: &'a Series, plain: &Prediction, ballot: &mut Ballot<'a>) {
    for (power, code) in [
        (-6, "unit-slip"),
        (-3, "unit-slip"),
        (3, "unit-slip"),
        (6, "unit-slip"),
        (-2, "point-slip"),
        (-1, "point-slip"),
        (1, "point-slip"),
        (2, "point-slip"),
    ] {
        let factor = 10_f64.powi(power);
        let newest = series.ohms(series.newest);
        if !newest.is_finite() || newest <= 0.0 {
            return;
        }
        for all in [false, true] {
            let count = if all { series.seen.len() } else { 1 };
            if all && count == 1 {
                continue;
            }
            let meant: Vec<Seen> = series
                .seen
                .iter()
                .enumerate()
                .map(|(i, seen)| match seen {
                    Seen::Ohm(ohm) if all || i == series.newest => Seen::Ohm(ohm * factor),
                    other => *other,
                })
                .collect();
            // What was shown is a stretched scale of what was meant.
            let fit = plain.log_likelihood(&meant) + count as f64 * factor.ln();
            let right = newest * factor;
            ballot.add(code, prior(code) + fit, move || {
                if code == "unit-slip" {
                    words(
                        format!(
                            "unit slip: {right:.2} Ω would fit, 10^{power} of what was entered"
                        ),
                        "read the unit on the display again",
                    )
                } else {
                    words(
                        format!("decimal point: {right:.2} Ω would fit what was expected"),
                        "read the display again, digit by digit",
                    )
                }
            });
        }
    }
}
