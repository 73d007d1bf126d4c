//! An answer of `reckon`, as words and as JSON.

use serde_json::{Map, Value, json};

use crate::domain::{
    expect::Source,
    quantity::{Round, show},
    range::Band,
    reading::Unit,
};

/// An answer.
#[derive(Debug)]
pub(super) struct Answer {
    question: &'static str,
    what: String,
    value: f64,
    unit: Option<Unit>,
    low: Option<f64>,
    high: Option<f64>,
    sources: Vec<Source>,
    extras: Map<String, Value>,
    lines: Vec<String>,
}

impl Answer {
    /// An answer whose value has a unit.
    pub(super) fn new(
        question: &'static str,
        what: impl Into<String>,
        value: f64,
        unit: Unit,
    ) -> Self {
        Self {
            question,
            what: what.into(),
            value,
            unit: Some(unit),
            low: None,
            high: None,
            sources: Vec::new(),
            extras: Map::new(),
            lines: Vec::new(),
        }
    }

    /// An answer that is a plain number.
    pub(super) fn factor(question: &'static str, what: impl Into<String>, value: f64) -> Self {
        Self {
            unit: None,
            ..Self::new(question, what, value, Unit::Ohm)
        }
    }

    /// Range with the steps that lead to it.
    pub(super) fn band(mut self, band: &Band) -> Self {
        self.low = Some(band.low);
        self.high = Some(band.high);
        let steps: Vec<Value> = band
            .why
            .iter()
            .map(|c| json!({"what": c.what, "low": c.low, "high": c.high}))
            .collect();
        self.extras.insert("why".into(), Value::Array(steps));
        for c in &band.why {
            self.lines.push(if c.low == 0.0 && c.high == 0.0 {
                c.what.clone()
            } else {
                format!("{}: -{:.3} +{:.3}", c.what, c.low, c.high)
            });
        }
        self
    }

    /// Lowest and highest, where known.
    pub(super) fn ends(mut self, low: Option<f64>, high: Option<f64>) -> Self {
        self.low = low;
        self.high = high;
        self
    }

    /// A source.
    pub(super) fn source(mut self, source: Source) -> Self {
        if !self.sources.contains(&source) {
            self.sources.push(source);
        }
        self
    }

    /// A named figure beside the value.
    pub(super) fn with(mut self, name: &str, value: f64) -> Self {
        self.extras.insert(name.into(), number(Some(value)));
        self
    }

    /// A named figure beside the value, shown with its unit as well.
    pub(super) fn figure(mut self, name: &str, words: &str, value: f64, unit: Unit) -> Self {
        self.lines.push(format!("{words}: {} {unit}", short(value)));
        self.with(name, value)
    }

    /// A named text beside the value.
    pub(super) fn word(mut self, name: &str, text: impl Into<String>) -> Self {
        self.extras.insert(name.into(), Value::String(text.into()));
        self
    }

    /// A line of explanation.
    pub(super) fn line(mut self, text: impl Into<String>) -> Self {
        self.lines.push(text.into());
        self
    }

    /// A named comparison with a limit, in words that call nothing safe.
    pub(super) fn verdict(mut self, name: &str, words: &str, within: bool) -> Self {
        let verdict = if within {
            "within limit"
        } else {
            "above limit"
        };
        self.lines.push(format!("{words}: {verdict}"));
        self.extras
            .insert(name.into(), Value::String(verdict.into()));
        self
    }

    /// One JSON object.
    pub(super) fn json(&self) -> String {
        let mut object = Map::new();
        object.insert("question".into(), self.question.into());
        object.insert("what".into(), self.what.clone().into());
        object.insert("value".into(), number(Some(self.value)));
        object.insert(
            "unit".into(),
            self.unit.map_or(Value::Null, |unit| unit.word().into()),
        );
        object.insert("low".into(), number(self.low));
        object.insert("high".into(), number(self.high));
        let mut sources: Vec<String> = self.sources.iter().map(ToString::to_string).collect();
        if sources.is_empty() {
            sources.push("arithmetic on the figures given".into());
        }
        object.insert("source".into(), sources.join("; ").into());
        object.insert(
            "source_checked".into(),
            self.sources.iter().all(|source| source.checked).into(),
        );
        object.extend(self.extras.clone());
        Value::Object(object).to_string()
    }

    /// Some lines of words.
    pub(super) fn text(&self) -> String {
        let unit = self
            .unit
            .map_or_else(String::new, |unit| format!(" {unit}"));
        let mut text = format!("{}: {}{unit}\n", self.what, short(self.value));
        match (self.low, self.high) {
            (Some(low), Some(high)) => {
                let places = match self.unit {
                    Some(Unit::Millisecond | Unit::Milliamp) => 0,
                    Some(Unit::Metre) => 1,
                    _ => 2,
                };
                text += &format!(
                    "  expect {} to {}{unit}\n",
                    show(low, places, Round::Down),
                    show(high, places, Round::Up)
                );
            }
            (Some(low), None) => text += &format!("  at least {}{unit}\n", short(low)),
            (None, Some(high)) => text += &format!("  at most {}{unit}\n", short(high)),
            (None, None) => {}
        }
        for line in &self.lines {
            text += &format!("  {line}\n");
        }
        for source in &self.sources {
            text += &format!("  source: {source}\n");
        }
        text
    }
}

/// JSON has no infinity: what has no end is `null`.
fn number(value: Option<f64>) -> Value {
    value
        .and_then(serde_json::Number::from_f64)
        .map_or(Value::Null, Value::Number)
}

/// Enough places to read, none too many: four significant figures, at least two decimals.
fn short(value: f64) -> String {
    if !value.is_finite() {
        return "no end".into();
    }
    let places = if value.abs() >= 100.0 {
        1
    } else if value.abs() >= 1.0 {
        3
    } else {
        4
    };
    show(value, places, Round::Nearest).normalize().to_string()
}
