//! Questions about insulation: the rule of a circuit, and several resistances in parallel with
//! over-range displays kept as bounds.

use clap::{Args as ClapArgs, ValueEnum};

use super::{answer::Answer, wrong};
use crate::{
    commands::failure::Failure,
    domain::{
        insulation::{self, Span, Voltage},
        reading::{Bound, Reading, Unit},
    },
};

#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
enum KindWord {
    /// SELV and PELV: 250 V, 0.5 MΩ
    ExtraLow,
    /// Up to 500 V: 500 V, 1 MΩ
    Low,
    /// Above 500 V: 1000 V, 1 MΩ
    Above500,
    /// Up to 500 V, electronics or surge protection stay in: 250 V, 1 MΩ
    Electronics,
}

#[derive(Debug, ClapArgs)]
pub(super) struct InsulationArgs {
    /// Resistances in parallel, MΩ, comma between; `>999` (in quotes) is a display over range
    #[arg(long, value_delimiter = ',', allow_hyphen_values = true)]
    parallel_megohm: Vec<String>,
    /// What the circuit is
    #[arg(long, value_enum, default_value = "low")]
    kind: KindWord,
    /// Below this it is investigated although it meets the minimum, MΩ
    #[arg(long, default_value_t = 2.0, allow_negative_numbers = true)]
    investigate_below_megohm: f64,
}

fn part(text: &str) -> Result<Span, Failure> {
    let option = "--parallel-megohm";
    let reading: Reading = text.trim().parse().map_err(|error| wrong(option, error))?;
    if matches!(reading.bound(), Bound::Open | Bound::OverRange) {
        return Err(wrong(
            option,
            format!("`{text}` needs the instrument's ceiling: write '>999' for over 999 MΩ"),
        ));
    }
    Span::of(&reading).ok_or_else(|| wrong(option, format!("`{text}` is no insulation resistance")))
}

impl InsulationArgs {
    pub(super) fn answer(&self) -> Result<Answer, Failure> {
        let rule = insulation::rule(match self.kind {
            KindWord::ExtraLow => Voltage::ExtraLow,
            KindWord::Low => Voltage::Low,
            KindWord::Above500 => Voltage::Above500,
            KindWord::Electronics => Voltage::LowWithElectronics,
        });
        let investigate = self.investigate_below_megohm;
        if !(0.0..=1e6).contains(&investigate) {
            return Err(wrong(
                "--investigate-below-megohm",
                format!("{investigate} must be 0 to 1000000 megohm"),
            ));
        }
        let minimum = rule.minimum_megohm;
        if self.parallel_megohm.is_empty() {
            return Ok(Answer::new("insulation", "minimum", minimum, Unit::Megohm)
                .ends(Some(minimum), None)
                .with("test_v", rule.test_v.into())
                .line(format!("test at {} V d.c.", rule.test_v))
                .source(rule.source));
        }
        let parts: Vec<Span> = self
            .parallel_megohm
            .iter()
            .map(|text| part(text))
            .collect::<Result<_, _>>()?;
        let all = insulation::parallel(&parts);
        let exact = (all.low - all.high).abs() <= f64::EPSILON * all.low;
        let what = if exact {
            "all in parallel"
        } else {
            "all in parallel, at least"
        };
        let words = if all.high < minimum {
            "below minimum"
        } else if all.low < minimum {
            "not shown to meet the minimum"
        } else if all.low < investigate {
            "meets the minimum, investigate"
        } else {
            "meets the minimum"
        };
        let mut answer = Answer::new("insulation", what, all.low, Unit::Megohm)
            .ends(Some(all.low), all.high.is_finite().then_some(all.high))
            .with("minimum", minimum)
            .with("investigate_below", investigate)
            .with("test_v", rule.test_v.into())
            .with("parts", parts.len() as f64)
            .word("bound", if exact { "exact" } else { "above" })
            .word("verdict", words)
            .line(format!("{words} ({minimum} MΩ at {} V d.c.)", rule.test_v))
            .source(rule.source);
        if !all.high.is_finite() {
            answer = answer.line("no upper end: every part is over range");
        }
        Ok(answer)
    }
}
