//! Rows to the tables that are printed, in the plain form that documents take.
//!
//! It promises that every row is counted once, and that speakers the voice was trained on stand on
//! lines of their own. It leaves out which rows there are.

use std::{collections::BTreeMap, fmt};

use super::{Outcome, Row, sets::is_digit};

/// A table.
#[derive(Debug, Clone)]
pub struct Table(Vec<Vec<String>>);

impl Table {
    fn new<T: Into<String>>(header: impl IntoIterator<Item = T>) -> Self {
        Self(vec![header.into_iter().map(Into::into).collect()])
    }

    fn line<T: Into<String>>(&mut self, cells: impl IntoIterator<Item = T>) {
        self.0.push(cells.into_iter().map(Into::into).collect());
    }
}

impl fmt::Display for Table {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (index, row) in self.0.iter().enumerate() {
            writeln!(f, "| {} |", row.join(" | "))?;
            if index == 0 {
                writeln!(f, "|{}", "---|".repeat(row.len()))?;
            }
        }
        Ok(())
    }
}

/// Figures of clips that ought to have been understood.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq)]
pub struct Tally {
    /// Clips.
    pub clips: usize,
    /// Those whose likeliest words mean what was said.
    pub understood: usize,
    /// Those that came out right.
    pub right: usize,
    /// Those that were asked about.
    pub asked: usize,
    /// Those that came out as something else.
    pub wrong: usize,
}

impl Tally {
    fn add(&mut self, row: &Row) {
        self.clips += 1;
        self.understood += usize::from(row.understood);
        match row.outcome {
            Outcome::Right => self.right += 1,
            Outcome::Asked => self.asked += 1,
            Outcome::Wrong => self.wrong += 1,
            Outcome::Nothing => {}
        }
    }

    fn share(self, of: usize) -> f64 {
        100.0 * of as f64 / self.clips.max(1) as f64
    }
}

/// Tallies by line and condition; lines of one kind are added up on a line of their own.
#[must_use]
pub fn tallies(rows: &[Row]) -> BTreeMap<String, BTreeMap<String, Tally>> {
    let mut all: BTreeMap<String, BTreeMap<String, Tally>> = BTreeMap::new();
    for row in rows.iter().filter(|row| row.ours) {
        let kind = row.set.split('_').next().unwrap_or_default();
        let several = rows
            .iter()
            .any(|other| other.ours && other.set != row.set && other.set.starts_with(kind));
        let together = (several && row.set.contains('_')).then(|| format!("{kind}: all"));
        for line in [Some(line(row)), together].into_iter().flatten() {
            let conditions = all.entry(line).or_default();
            conditions
                .entry(row.condition.clone())
                .or_default()
                .add(row);
        }
    }
    all
}

/// People who said single digits said other words, too; those are two things.
fn line(row: &Row) -> String {
    let known = if row.trained { ", trained on" } else { "" };
    let digits = if is_digit(&row.transcript) {
        ": single digits"
    } else {
        ""
    };
    format!("{}{digits}{known}", row.set)
}

/// What was understood: a line a set, a column a condition; the cell is the share whose likeliest
/// words mean what was said, and in brackets how clips came out: right, asked about, wrong.
#[must_use]
pub fn understood(rows: &[Row], conditions: &[String]) -> Table {
    let head = ["set".to_owned(), "clips".to_owned()];
    let mut table = Table::new(head.into_iter().chain(conditions.iter().cloned()));
    for (line, by_condition) in tallies(rows) {
        let clips = by_condition.values().map(|tally| tally.clips).max();
        let mut cells = vec![line, clips.unwrap_or_default().to_string()];
        cells.extend(conditions.iter().map(|condition| {
            by_condition.get(condition).map_or("–".into(), |t| {
                format!(
                    "{:.1} ({:.0} / {:.0} / {:.0})",
                    t.share(t.understood),
                    t.share(t.right),
                    t.share(t.asked),
                    t.share(t.wrong)
                )
            })
        }));
        table.line(cells);
    }
    table
}

/// What two voices understood of the same: first → second.
#[must_use]
pub fn beside(first: &[Row], second: &[Row], conditions: &[String]) -> Table {
    let (first, second) = (tallies(first), tallies(second));
    let head = ["set".to_owned(), "clips".to_owned()];
    let mut table = Table::new(head.into_iter().chain(conditions.iter().cloned()));
    for (line, by_condition) in &second {
        let clips = by_condition.values().map(|tally| tally.clips).max();
        let mut cells = vec![line.clone(), clips.unwrap_or_default().to_string()];
        cells.extend(conditions.iter().map(|condition| {
            let share = |tally: Option<&Tally>| {
                tally.map_or("–".into(), |t| format!("{:.1}", t.share(t.understood)))
            };
            let before = first.get(line).and_then(|line| line.get(condition));
            format!("{} → {}", share(before), share(by_condition.get(condition)))
        }));
        table.line(cells);
    }
    table
}

/// What ought to have been nothing: how much of it was taken for something at two limits.
#[must_use]
pub fn refused(rows: &[Row], open: f64, held: f64) -> Table {
    let mut table = Table::new([
        "set",
        "minutes",
        "utterances",
        "taken, open",
        "in ten minutes",
        "taken, held",
        "in ten minutes",
    ]);
    let mut sets: BTreeMap<String, Vec<&Row>> = BTreeMap::new();
    for row in rows.iter().filter(|row| !row.ours) {
        sets.entry(line(row)).or_default().push(row);
        let all = if row.trained {
            "all, trained on"
        } else {
            "all"
        };
        sets.entry(all.to_owned()).or_default().push(row);
    }
    for (set, rows) in sets {
        let minutes = rows.iter().map(|row| row.seconds).sum::<f64>() / 60.0;
        let taken = |limit: f64| rows.iter().filter(|row| row.likeness() >= limit).count();
        let rate = |taken: usize| format!("{:.1}", 10.0 * taken as f64 / minutes.max(0.01));
        table.line([
            set,
            format!("{minutes:.1}"),
            rows.iter()
                .filter(|row| row.fit.is_some())
                .count()
                .to_string(),
            taken(open).to_string(),
            rate(taken(open)),
            taken(held).to_string(),
            rate(taken(held)),
        ]);
    }
    table
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::speech::Context;

    fn row(set: &str, said: &str, understood: bool, outcome: Outcome) -> Row {
        Row {
            set: set.into(),
            trained: false,
            condition: "clean".into(),
            context: Context::Digits,
            clip: format!("{said}.wav"),
            ours: true,
            transcript: said.into(),
            heard: said.into(),
            understood,
            outcome,
            fit: None,
            seconds: 1.0,
        }
    }

    #[test]
    fn every_clip_is_counted_and_sets_of_one_kind_are_added_up() {
        let rows = [
            row("readings_a", "one point two", true, Outcome::Right),
            row("readings_b", "one point two", true, Outcome::Nothing),
            row("readings_b", "two point two", false, Outcome::Wrong),
            row("people", "five", true, Outcome::Asked),
        ];
        let table = understood(&rows, &["clean".into()]).to_string();
        let lines: Vec<&str> = table.lines().collect();
        assert_eq!(
            lines[2],
            "| people: single digits | 1 | 100.0 (0 / 100 / 0) |"
        );
        assert_eq!(lines[3], "| readings: all | 3 | 66.7 (33 / 0 / 33) |");
        assert_eq!(lines[4], "| readings_a | 1 | 100.0 (100 / 0 / 0) |");
        assert_eq!(lines[5], "| readings_b | 2 | 50.0 (0 / 0 / 50) |");
        let two = beside(&rows[2..], &rows[..3], &["clean".into()]).to_string();
        assert!(two.contains("| readings_b | 2 | 0.0 → 50.0 |"), "{two}");
    }

    #[test]
    fn what_ought_to_be_nothing_is_counted_by_minute() {
        let mut noise = row("noise", "", false, Outcome::Nothing);
        noise.ours = false;
        noise.transcript = String::new();
        noise.seconds = 60.0;
        let table = refused(&[noise.clone(), noise], 2.0, 1.0).to_string();
        assert!(
            table.contains("| noise | 2.0 | 0 | 0 | 0.0 | 0 | 0.0 |"),
            "{table}"
        );
    }
}
