//! Questions about electrodes, residual current devices and fault current.

use clap::{Args as ClapArgs, ValueEnum};

use super::{answer::Answer, given, wrong};
use crate::{
    commands::failure::Failure,
    domain::{
        expect::Source,
        loops,
        plan::ElectrodeRule,
        reading::Unit,
        residual::{self, Multiple},
    },
};

#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
enum LimitWord {
    /// 50 V over the rated residual current
    FiftyVolt,
    /// 200 Ω, above which it may not be stable
    TwoHundredOhm,
}

#[derive(Debug, ClapArgs)]
pub(super) struct ElectrodeArgs {
    /// Rated residual current, mA: the answer is the highest resistance
    #[arg(long, allow_negative_numbers = true)]
    rcd_ma: Option<f64>,
    /// Resistance of the electrode, ohm: alone, the answer is the largest residual current
    #[arg(long, allow_negative_numbers = true)]
    electrode_ohm: Option<f64>,
    /// Touch voltage, V: 50, or 25 in special places
    #[arg(long, default_value_t = 50.0, allow_negative_numbers = true)]
    touch_v: f64,
    /// Which limit
    #[arg(long, value_enum, default_value = "fifty-volt")]
    limit: LimitWord,
}

#[derive(Debug, ClapArgs)]
pub(super) struct RcdArgs {
    /// Rated residual current, mA
    #[arg(long, default_value_t = 30.0, allow_negative_numbers = true)]
    rcd_ma: f64,
    /// Test current over the rated one: 1, 2 or 5 (and 0.5, at which it must not trip)
    #[arg(long, default_value_t = 1.0, allow_negative_numbers = true)]
    multiple: f64,
    /// Time-delayed type (S)
    #[arg(long)]
    delayed: bool,
    /// A time as measured, ms
    #[arg(long, allow_negative_numbers = true)]
    time_ms: Option<f64>,
}

#[derive(Debug, ClapArgs)]
pub(super) struct FaultCurrentArgs {
    /// Loop impedance, ohm (line to neutral or line to earth)
    #[arg(long, allow_negative_numbers = true)]
    z_ohm: Option<f64>,
    /// A line to neutral fault current as measured, kA, to double for three phases
    #[arg(long, allow_negative_numbers = true)]
    line_neutral_ka: Option<f64>,
    /// Breaking capacity of the device, kA, to compare; alone, the answer is the lowest impedance
    #[arg(long, allow_negative_numbers = true)]
    breaking_ka: Option<f64>,
    /// Nominal voltage to earth, V
    #[arg(long, default_value_t = 230.0, allow_negative_numbers = true)]
    u0_v: f64,
    /// Three-phase: twice the single-phase value
    #[arg(long)]
    three_phase: bool,
}

/// A rated residual current.
pub(super) fn rated_ma(value: f64) -> Result<f64, Failure> {
    if (1.0..=30_000.0).contains(&value) {
        Ok(value)
    } else {
        Err(wrong(
            "--rcd-ma",
            format!("{value} mA cannot be a rated residual current; it must be 1 to 30000 mA"),
        ))
    }
}

fn kiloamp(option: &str, value: f64) -> Result<f64, Failure> {
    if value > 0.0 && value <= 1000.0 {
        Ok(value)
    } else {
        Err(wrong(
            option,
            format!("{value} kA must be above 0 and at most 1000"),
        ))
    }
}

impl ElectrodeArgs {
    pub(super) fn answer(&self) -> Result<Answer, Failure> {
        let touch = given::volts("--touch-v", self.touch_v)?.v();
        let electrode = self
            .electrode_ohm
            .map(|ohm| given::some_ohms("--electrode-ohm", ohm))
            .transpose()?;
        let Some(ma) = self.rcd_ma else {
            let Some(electrode) = electrode else {
                return Err(wrong("--rcd-ma", "give --rcd-ma or --electrode-ohm"));
            };
            return Ok(Answer::new(
                "electrode",
                "largest rated residual current",
                touch / electrode.ohm() * 1000.0,
                Unit::Milliamp,
            )
            .source(Source {
                text: format!("{touch} V / RA, BS 7671:2018 411.5.3"),
                checked: true,
            }));
        };
        let ma = rated_ma(ma)?;
        let fifty = residual::fifty_volt_ohm(ma, touch);
        let rule = match self.limit {
            LimitWord::FiftyVolt => ElectrodeRule::FiftyVolts,
            LimitWord::TwoHundredOhm => ElectrodeRule::TwoHundredOhm,
        };
        let (ohm, source) = match rule {
            ElectrodeRule::FiftyVolts => (fifty, residual::electrode_limit(rule, ma).1),
            ElectrodeRule::TwoHundredOhm => {
                (fifty.min(200.0), residual::electrode_limit(rule, ma).1)
            }
        };
        let mut answer = Answer::new("electrode", "highest resistance", ohm, Unit::Ohm)
            .ends(None, Some(ohm))
            .with("fifty_volt_limit", fifty)
            .with("touch_v", touch)
            .line("above 200 Ω an electrode may not be stable; both limits are in use")
            .source(source);
        if let Some(electrode) = electrode {
            answer = answer.with("electrode", electrode.ohm()).verdict(
                "verdict",
                "electrode",
                electrode.ohm() <= ohm,
            );
        }
        Ok(answer)
    }
}

impl RcdArgs {
    pub(super) fn answer(&self) -> Result<Answer, Failure> {
        let ma = rated_ma(self.rcd_ma)?;
        let near = |m: f64| (self.multiple - m).abs() < 1e-9;
        if near(0.5) {
            return Ok(Answer::new(
                "rcd",
                "test current at which it must not trip",
                ma / 2.0,
                Unit::Milliamp,
            )
            .source(Source {
                text: "BS EN 61008/61009; not required since BS 7671:2018+A2:2022".into(),
                checked: true,
            }));
        }
        let multiple = if near(1.0) {
            Multiple::One
        } else if near(2.0) {
            Multiple::Two
        } else if near(5.0) {
            Multiple::Five
        } else {
            return Err(wrong(
                "--multiple",
                format!("{} is not held; it must be 0.5, 1, 2 or 5", self.multiple),
            ));
        };
        let times = residual::times(multiple, self.delayed);
        let mut answer = Answer::new(
            "rcd",
            "longest disconnection time",
            times.high_ms,
            Unit::Millisecond,
        )
        .ends(times.low_ms, Some(times.high_ms))
        .with("test_ma", ma * self.multiple)
        .line(format!("at {} mA", ma * self.multiple))
        .source(times.source);
        if let Some(time) = self.time_ms {
            if !(0.0..=100_000.0).contains(&time) {
                return Err(wrong("--time-ms", format!("{time} must be 0 to 100000 ms")));
            }
            let early = times.low_ms.is_some_and(|low| time < low);
            answer = answer.with("time", time);
            answer = if early {
                answer
                    .word("verdict", "below limit")
                    .line("as measured: below limit, it trips too early")
            } else {
                answer.verdict("verdict", "as measured", time <= times.high_ms)
            };
        }
        Ok(answer)
    }
}

impl FaultCurrentArgs {
    pub(super) fn answer(&self) -> Result<Answer, Failure> {
        let u0 = given::volts("--u0-v", self.u0_v)?.v();
        let breaking = self
            .breaking_ka
            .map(|ka| kiloamp("--breaking-ka", ka))
            .transpose()?;
        let single = match (self.z_ohm, self.line_neutral_ka, breaking) {
            (Some(z), None, _) => loops::fault_ka(u0, given::some_ohms("--z-ohm", z)?.ohm(), false),
            (None, Some(ka), _) => kiloamp("--line-neutral-ka", ka)?,
            (None, None, Some(ka)) => {
                let share = if self.three_phase { 2.0 } else { 1.0 };
                return Ok(Answer::new(
                    "fault-current",
                    "lowest loop impedance for the breaking capacity",
                    share * u0 / ka / 1000.0,
                    Unit::Ohm,
                )
                .source(source()));
            }
            _ => {
                return Err(wrong(
                    "--z-ohm",
                    "give --z-ohm or --line-neutral-ka (one of both), or --breaking-ka alone",
                ));
            }
        };
        let value = if self.three_phase {
            2.0 * single
        } else {
            single
        };
        let mut answer = Answer::new(
            "fault-current",
            "prospective fault current",
            value,
            Unit::Kiloamp,
        )
        .with("single_phase", single)
        .with("three_phase_doubled", 2.0 * single)
        .with("three_phase_root_three", 3.0_f64.sqrt() * single)
        .line("record the larger of line to neutral and line to earth")
        .source(source());
        if let Some(breaking) = breaking {
            answer = answer.with("breaking", breaking).verdict(
                "verdict",
                "breaking capacity",
                value <= breaking,
            );
        }
        Ok(answer)
    }
}

fn source() -> Source {
    Source {
        text: "U0/Z; three-phase doubled by trade practice".into(),
        checked: true,
    }
}
