//! What moves a whole ring: another size, another length, metalwork beside the protective
//! conductor, leads, a slip of unit or point.

use super::{RingSeries, excess};
use crate::domain::{
    findings::{
        plausible::{self, prior},
        radial::stretched::{copper_mm2, other_pairs},
        weigh::{Ballot, Prediction, Seen, words},
        wiring::What,
    },
    range,
};

pub(super) fn cables<'a>(series: &'a RingSeries, ballot: &mut Ballot<'a>) {
    let (size_favour, length_favour) = plausible::favours(series.basis);
    let sizes = (
        copper_mm2(series.cable.line),
        series.cable.cpc.and_then(copper_mm2),
    );
    if let (Some(line), Some(cpc)) = sizes {
        let table =
            crate::domain::conductor::rate(series.cable.line).map_or(1.0, |r| r.milliohm_per_m());
        let warm = series.rates[0] / table;
        let others = other_pairs(Some(line), cpc);
        let count = others.len() as f64;
        for (name, l, c) in others {
            let wiring = series.wiring([l * warm, l * warm, c * warm], 1.0);
            let fit = series.fit(&wiring, true) - count.ln();
            ballot.add(
                "wrong-size",
                prior("wrong-size") + size_favour + fit,
                move || {
                    words(
                        format!("{name} fits these readings, not the size of the plan"),
                        "read the marking on the sheath, measure a strand",
                    )
                },
            );
        }
    }
    let share = range::length_share(series.basis);
    let steps = 40;
    for step in 0..=steps {
        let stretch = 0.3 * (10.0_f64).powf(f64::from(step) / f64::from(steps));
        if (stretch - 1.0).abs() < share {
            continue;
        }
        let wiring = series.wiring(series.rates, stretch);
        let mut prediction = series.predict(&wiring, false);
        // Half a step of the grid either way.
        let slack = 0.03;
        prediction
            .shared
            .push(prediction.mean.iter().map(|m| m * slack).collect());
        let fit = prediction.log_likelihood(&series.seen) - f64::from(steps / 2).ln();
        let metres = series.whole_m * stretch;
        let by = (metres - series.whole_m).abs();
        let code = if stretch > 1.0 { "longer" } else { "shorter" };
        ballot.add(code, prior(code) + length_favour + fit, move || {
            words(
                format!("about {metres:.0} m of cable in the loop, {by:.0} m {code} than stated"),
                "measure the run, or correct the length in the plan",
            )
        });
    }
    // Metalwork beside the protective conductor lowers it alone.
    for step in 1..10 {
        let factor = f64::from(step) / 10.0;
        let mut wiring = series.planned();
        wiring.whole[2] *= factor;
        let mut prediction = series.predict(&wiring, true);
        prediction.shared.push(
            series
                .what
                .iter()
                .zip(&prediction.mean)
                .map(|(w, m)| match w {
                    What::End(2) => 0.06 / factor * m,
                    What::Cross(2, _) => 0.04 * m,
                    _ => 0.0,
                })
                .collect(),
        );
        // Where the metalwork touches is not known: cross readings wander with it.
        for (own, (w, m)) in prediction
            .own
            .iter_mut()
            .zip(series.what.iter().zip(&prediction.mean))
        {
            if matches!(w, What::Cross(2, _)) {
                let slack = 0.25 * (1.0 - factor) * m;
                *own += slack * slack;
            }
        }
        let fit = prediction.log_likelihood(&series.seen) - 9.0_f64.ln();
        ballot.add("parallel-path", prior("parallel-path") + fit, || {
            words(
                "metalwork in parallel with the protective conductor",
                "part boxes and conduit from other metalwork, read r2 again",
            )
        });
    }
}

pub(super) fn offsets<'a>(series: &'a RingSeries, plain: &Prediction, ballot: &mut Ballot<'a>) {
    let penalty = series.leads;
    let count = series.seen.len();
    let offset = excess(series, plain, &vec![1.0; count]);
    for spread in [0.12, 0.35] {
        let fit = plain.with(vec![spread; count]).log_likelihood(&series.seen) - 2.0_f64.ln();
        ballot.add(
            "lead-not-nulled",
            prior("lead-not-nulled") + penalty + fit,
            move || {
                words(
                    format!("every reading off by about the same {offset:+.2} Ω: leads not nulled"),
                    "join the leads: the display must fall to 0.00; null and repeat",
                )
            },
        );
    }
}

pub(super) fn slips<'a>(series: &'a RingSeries, plain: &Prediction, ballot: &mut Ballot<'a>) {
    let Seen::Ohm(newest) = series.seen[series.newest] else {
        return;
    };
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
        let mut meant = series.seen.clone();
        meant[series.newest] = Seen::Ohm(newest * factor);
        let right = newest * factor;
        let fit = plain.log_likelihood(&meant) + factor.ln();
        ballot.add(code, prior(code) + fit, move || {
            words(
                format!("slip: {right:.2} Ω would fit, 10^{power} of what was entered"),
                "read display and unit again, digit by digit",
            )
        });
    }
}
