//! How each value got there: the readings and amendments of a log, by target.
//!
//! Promises: everything that was kept is in it, what counts and what was replaced, in the order of
//! the log.

use std::collections::BTreeMap;

use crate::domain::{
    assess,
    expect::{Expected, Limit, Source, Verdict},
    kept::Value,
    reading::{Reading, Unit},
    record::{EntryNo, ExpectedShown, ReadingKept, Record},
    standing::{Entry, Standing, read_value, value_of},
    test::Target,
};

use super::words;

/// A value that was kept for a target at some time.
#[derive(Debug, Clone)]
pub struct Shown<'a> {
    /// Its entry.
    pub entry: &'a Entry,
    /// What was tested.
    pub target: &'a Target,
    /// The value as printed.
    pub text: String,
    /// The value, where it can be read.
    pub value: Option<Value>,
    /// The range it was compared with.
    pub expected: Option<&'a ExpectedShown>,
    /// How it lay to it.
    pub verdict: Verdict,
    /// The reading as measured: of this entry, or the one an amendment goes back to.
    pub measured: &'a ReadingKept,
    /// For an amendment: the entry it corrects, why, who.
    pub amends: Option<(EntryNo, &'a str, &'a str)>,
    /// It is the value that counts.
    pub counts: bool,
}

impl Shown<'_> {
    /// The entry it replaces, whether by amendment or by a correction on the spot.
    #[must_use]
    pub fn corrects(&self) -> Option<EntryNo> {
        match self.amends {
            Some((no, _, _)) => Some(no),
            None => self.measured.corrects,
        }
    }

    /// Who stands for it.
    #[must_use]
    pub fn by(&self) -> &str {
        match self.amends {
            Some((_, _, by)) => by,
            None => &self.measured.by,
        }
    }
}

/// All values of a log.
#[derive(Debug, Default)]
pub struct History<'a> {
    shown: Vec<Shown<'a>>,
    targets: BTreeMap<&'a Target, Vec<usize>>,
    entries: BTreeMap<EntryNo, usize>,
}

impl<'a> History<'a> {
    /// The values in these entries; `standing` says which count.
    #[must_use]
    pub fn of(entries: &'a [Entry], standing: &Standing) -> Self {
        let mut history = Self::default();
        for entry in entries {
            let shown = match &entry.record {
                Record::Reading(reading) => Shown {
                    entry,
                    target: &reading.target,
                    text: words::raw(&reading.value, reading.unit.as_deref()),
                    value: value_of(reading),
                    expected: reading.expected.as_ref(),
                    verdict: reading.verdict,
                    measured: reading,
                    amends: None,
                    counts: false,
                },
                Record::Amended {
                    corrects,
                    value,
                    unit,
                    reason,
                    by,
                } => {
                    let Some(old) = history.entry(*corrects) else {
                        continue;
                    };
                    let read = read_value(value, unit.as_deref(), old.target);
                    Shown {
                        entry,
                        target: old.target,
                        text: words::raw(value, unit.as_deref()),
                        verdict: amended(old, read.as_ref()),
                        value: read,
                        expected: old.expected,
                        measured: old.measured,
                        amends: Some((*corrects, reason, by)),
                        counts: false,
                    }
                }
                _ => continue,
            };
            history.take(shown, standing);
        }
        history
    }

    fn take(&mut self, mut shown: Shown<'a>, standing: &Standing) {
        let no = shown.entry.no;
        shown.counts = standing.kept.entry(shown.target) == Some(no);
        let at = self.shown.len();
        self.targets.entry(shown.target).or_default().push(at);
        self.entries.insert(no, at);
        self.shown.push(shown);
    }

    /// Every value, in the order of the log.
    pub fn iter(&self) -> impl Iterator<Item = &Shown<'a>> {
        self.shown.iter()
    }

    /// Every value of a target, in the order of the log.
    pub fn of_target(&self, target: &Target) -> impl Iterator<Item = &Shown<'a>> {
        let places = self.targets.get(target).map_or(&[][..], Vec::as_slice);
        places.iter().map(|at| &self.shown[*at])
    }

    /// The value that counts for a target.
    #[must_use]
    pub fn counting(&self, target: &Target) -> Option<&Shown<'a>> {
        self.of_target(target).find(|shown| shown.counts)
    }

    /// The value in that entry.
    #[must_use]
    pub fn entry(&self, no: EntryNo) -> Option<&Shown<'a>> {
        self.entries.get(&no).map(|at| &self.shown[*at])
    }

    /// Every target that has a value.
    pub fn targets(&self) -> impl Iterator<Item = &'a Target> {
        self.targets.keys().copied()
    }
}

/// How an amended value lies to the range its measurement was compared with.
fn amended(old: &Shown, value: Option<&Value>) -> Verdict {
    match (old.expected, value) {
        (Some(shown), Some(Value::Reading(reading))) => {
            let open = old.verdict == Verdict::NotOpen
                || shown.low.is_none()
                    && shown.high.is_none()
                    && shown.limit.is_none()
                    && old.measured.value == "open"
                    && old.verdict == Verdict::InRange;
            match as_expected(shown, open) {
                Some(expected) => assess::verdict(old.target, &expected, reading),
                None => Verdict::Unknown,
            }
        }
        (_, Some(Value::Ticked(true))) => Verdict::InRange,
        (_, Some(Value::Ticked(false))) => Verdict::BeyondLimit,
        _ => Verdict::Unknown,
    }
}

/// A range as it was shown, made comparable again.
fn as_expected(shown: &ExpectedShown, open: bool) -> Option<Expected> {
    let figure = |text: &str| text.parse::<Reading>().ok()?.value();
    let end = |text: &Option<String>| text.as_deref().and_then(figure);
    let limit = shown.limit.as_deref().and_then(|text| {
        let (minimum, figures) = match text.strip_prefix(">=") {
            Some(figures) => (true, figures),
            None => (false, text.strip_prefix("<=")?),
        };
        Some(Limit {
            value: figure(figures)?,
            minimum,
            source: Source {
                text: shown.source.clone(),
                checked: false,
            },
        })
    });
    let (low, high) = (end(&shown.low), end(&shown.high));
    let known = open || low.is_some() || high.is_some() || limit.is_some();
    Some(Expected {
        unit: Unit::ALL.into_iter().find(|u| u.word() == shown.unit)?,
        low,
        nominal: None,
        high,
        open,
        limit,
        why: vec![],
        sources: vec![],
        unknown: (!known).then(|| "no range was shown".into()),
    })
}
