//! The review at the van: what was kept, how it got there, what is open.
//!
//! Promises: fits any width from 20 columns; the same text for a screen and a pipe; by circuit, by
//! time, or as heard; filters only ever hide values, never what is open.

use std::collections::BTreeMap;

use super::{
    Integrity,
    events::{event, work_words},
    history::{History, Shown},
    page::Page,
    words,
};
use crate::domain::{
    kept::Value,
    plan::Job,
    record::{Entered, Record},
    standing::{Entry, Standing},
    test::Target,
    words::Worded,
};

/// In which order, and how much of each value.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Order {
    /// Target by target, in working order.
    #[default]
    Circuit,
    /// Entry by entry.
    Time,
    /// What was heard against what was kept.
    Spoken,
}

/// Which values are shown; several together show what any of them asks for.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Filter {
    /// Corrected on the spot, amended, or replaced.
    pub corrections: bool,
    /// Not within the expected range.
    pub out_of_range: bool,
    /// Heard with a margin below this.
    pub low_margin: Option<f64>,
    /// Keyed in.
    pub keypad: bool,
}

impl Filter {
    /// Whether anything is filtered at all.
    #[must_use]
    pub fn any(&self) -> bool {
        self.corrections || self.out_of_range || self.low_margin.is_some() || self.keypad
    }

    fn shows(&self, shown: &Shown) -> bool {
        let margin = shown.measured.margin.as_deref();
        !self.any()
            || self.corrections && (shown.corrects().is_some() || !shown.counts)
            || self.out_of_range && shown.verdict.questioned()
            || self.low_margin.is_some_and(|least| {
                margin
                    .and_then(|m| m.parse::<f64>().ok())
                    .is_some_and(|m| m < least)
            })
            || self.keypad && shown.amends.is_none() && shown.measured.entered == Entered::Keypad
    }
}

/// What a review is made from.
#[derive(Debug, Clone, Copy)]
pub struct Material<'a> {
    /// The plan, where the job file was found.
    pub job: Option<&'a Job>,
    /// The required tests, in working order; empty without a plan.
    pub required: &'a [Target],
    /// The entries that hold.
    pub entries: &'a [Entry],
    /// What they add up to.
    pub standing: &'a Standing,
    /// What is known of the log.
    pub integrity: &'a Integrity,
}

/// Lays the review out.
#[must_use]
pub fn review(material: &Material, order: Order, filter: &Filter, width: usize) -> String {
    let history = History::of(material.entries, material.standing);
    let mut page = Page::new(width);
    head(&mut page, material);
    match order {
        Order::Circuit => by_circuit(&mut page, material, &history, filter),
        Order::Time => by_time(&mut page, material, &history, filter),
        Order::Spoken => spoken(&mut page, material, &history, filter),
    }
    tail(&mut page, material);
    page.finish()
}

fn head(page: &mut Page, material: &Material) {
    if let Some(job) = material.job {
        page.line(0, &format!("{}: {}", job.reference, job.title));
    }
    page.line(0, &format!("Log: {}", material.integrity.statement()));
    for problem in &material.integrity.problems {
        page.line(2, problem);
    }
}

/// `#12`, with the handheld's letter where there are several.
pub(super) fn number(material: &Material, entry: &Entry) -> String {
    if material.integrity.journals.len() < 2 {
        return format!("#{}", entry.no);
    }
    let letter = u32::try_from(entry.chain)
        .ok()
        .and_then(|n| char::from_u32('A' as u32 + n))
        .filter(char::is_ascii_uppercase);
    match letter {
        Some(letter) => format!("#{}{letter}", entry.no),
        None => format!("#{}/{}", entry.no, entry.chain + 1),
    }
}

fn by_circuit(page: &mut Page, material: &Material, history: &History, filter: &Filter) {
    let mut targets: Vec<&Target> = material.required.iter().collect();
    let also: Vec<&Target> = history
        .targets()
        .filter(|t| !material.required.contains(t))
        .collect();
    targets.extend(also);
    let mut places: Vec<Vec<&Target>> = vec![];
    let mut index = BTreeMap::new();
    for target in targets {
        let at = *index
            .entry((target.board.clone(), target.circuit))
            .or_insert_with(|| {
                places.push(vec![]);
                places.len() - 1
            });
        places[at].push(target);
    }
    // Circuits in the order of the plan; those it does not know come last, as they were met.
    places.sort_by_key(|place| place.first().map(|first| in_plan(material.job, first)));
    for place in places {
        let mut lines = vec![];
        for target in place.iter().copied() {
            values(&mut lines, material, history, filter, target);
        }
        let Some(first) = place.first().filter(|_| !lines.is_empty()) else {
            continue;
        };
        page.heading(&heading(material.job, first));
        for (indent, line) in lines {
            page.line(indent, &line);
        }
    }
}

/// Where a target's place stands in the plan: the job before its boards, a board before its
/// circuits.
pub(super) fn in_plan(job: Option<&Job>, target: &Target) -> (usize, usize) {
    let Some(id) = &target.board else {
        return (0, 0);
    };
    let boards = job.map_or(&[][..], |job| &job.boards);
    let Some(board) = boards.iter().position(|board| board.id == *id) else {
        return (usize::MAX, 0);
    };
    let circuits = &boards[board].circuits;
    let circuit = target.circuit.map(|no| {
        circuits
            .iter()
            .position(|circuit| circuit.no == no)
            .unwrap_or(circuits.len())
    });
    (board + 1, circuit.map_or(0, |at| at + 1))
}

/// The place a target belongs to, with what the plan says of it.
fn heading(job: Option<&Job>, target: &Target) -> String {
    let (Some(board), circuit) = (&target.board, target.circuit) else {
        return "The job".into();
    };
    let Some(no) = circuit else {
        return format!("Board {board}");
    };
    match job.and_then(|job| job.circuit(board, no)) {
        Some(circuit) => format!(
            "{board}/{no} {} ({}, {}{})",
            circuit.name,
            circuit.kind.word(),
            circuit.device.kind.word(),
            circuit.device.rated_a
        ),
        None => format!("{board}/{no}"),
    }
}

fn values(
    lines: &mut Vec<(usize, String)>,
    material: &Material,
    history: &History,
    filter: &Filter,
    target: &Target,
) {
    let mut title = target.test.title();
    if let Some(name) = &target.name {
        title.push_str(&format!(", {name}"));
    }
    if let Some(point) = target.point {
        title.push_str(&format!(", point {point}"));
    }
    let all: Vec<&Shown> = history
        .of_target(target)
        .filter(|s| filter.shows(s))
        .collect();
    if all.is_empty() {
        if !filter.any() {
            lines.push((2, format!("{title}: {}", state(material, target))));
        }
        return;
    }
    match all.iter().find(|s| s.counts) {
        Some(shown) => lines.push((2, format!("{title}: {}", shown.text))),
        None => lines.push((2, format!("{title}: {}", state(material, target)))),
    }
    for shown in all {
        lines.push((4, sentence(material, shown)));
        for finding in &shown.measured.findings {
            if shown.amends.is_none() {
                lines.push((6, finding.text.clone()));
            }
        }
    }
}

/// Where a target without a value that counts stands.
#[must_use]
pub(super) fn state(material: &Material, target: &Target) -> String {
    let standing = material.standing;
    if let Some(value) = standing.kept.value(target) {
        return words::value(value);
    }
    if let Some(several) = standing.undecided.get(target) {
        let values: Vec<String> = several
            .iter()
            .map(|(no, value)| format!("{} (#{no})", words::value(value)))
            .collect();
        return format!("not decided between {}", values.join(" and "));
    }
    if let Some(because) = standing.repeats.get(target) {
        return format!("to be done again, because of #{because}");
    }
    if let Some(left) = standing.skipped.get(target) {
        return format!("left out: {} ({})", left.reason, left.by);
    }
    if material.required.contains(target) {
        "not measured".into()
    } else {
        "no value that counts".into()
    }
}

/// Everything about one value but its target.
fn sentence(material: &Material, shown: &Shown) -> String {
    let number = number(material, shown.entry);
    let range = shown.expected.map_or_else(
        || "no range".to_owned(),
        |expected| format!("expected {}", words::range(expected)),
    );
    let mut text = match shown.amends {
        Some((no, reason, by)) => format!(
            "{number} amended #{no} to {}: {reason} ({by}); {range}",
            shown.text
        ),
        None => format!(
            "{number} {}{}; {range}",
            if shown.counts {
                String::new()
            } else {
                format!("{} ", shown.text)
            },
            words::entered(shown.measured.entered),
        ),
    };
    if shown.target.test.unit().is_some() {
        text.push_str(&format!(", {}", words::lies(shown.verdict)));
    }
    if shown.amends.is_none() {
        if let Some(reason) = &shown.measured.kept_as_found {
            text.push_str(&format!("; kept as found: {reason}"));
        }
        if let Some(no) = shown.measured.corrects {
            text.push_str(&format!("; corrects #{no}"));
        }
    }
    if !shown.counts {
        text.push_str("; does not count");
    }
    text
}

fn by_time(page: &mut Page, material: &Material, history: &History, filter: &Filter) {
    let mut day = String::new();
    for entry in material.entries {
        let shown = history.entry(entry.no);
        let hide = match shown {
            Some(shown) => !filter.shows(shown),
            None => filter.any(),
        };
        if hide {
            continue;
        }
        let minute = entry.time.minute();
        let date = minute.get(..10).unwrap_or_default();
        if date != day {
            page.heading(date);
            day = date.to_owned();
        }
        let number = number(material, entry);
        let text = match shown {
            Some(shown) => value_line(shown),
            None => event(&entry.record),
        };
        page.line(0, &format!("{number} {} {text}", entry.time.clock()));
    }
}

fn value_line(shown: &Shown) -> String {
    match shown.amends {
        Some((no, reason, by)) => format!(
            "amended #{no}, {}: {} ({reason}, {by})",
            shown.target, shown.text
        ),
        None => format!(
            "{}: {} ({}{})",
            shown.target,
            shown.text,
            words::entered(shown.measured.entered),
            match shown.target.test.unit() {
                Some(_) => format!(", {}", words::lies(shown.verdict)),
                None => String::new(),
            }
        ),
    }
}

fn spoken(page: &mut Page, material: &Material, history: &History, filter: &Filter) {
    for shown in history.iter().filter(|s| filter.shows(s)) {
        let number = number(material, shown.entry);
        page.gap();
        page.line(0, &format!("{number} {}", shown.target));
        if let Some((no, reason, by)) = shown.amends {
            let text = format!("amended #{no} to {}: {reason} ({by})", shown.text);
            page.line(2, &text);
            continue;
        }
        let measured = shown.measured;
        match (&measured.heard, measured.entered) {
            (Some(heard), _) => page.line(2, &format!("heard: {heard}")),
            (None, Entered::Keypad) => page.line(2, "keyed in"),
            (None, Entered::Voice) => page.line(2, "heard: words not kept"),
        }
        for other in &measured.alternatives {
            page.line(
                2,
                &format!(
                    "or: {} ({}), {} behind",
                    other.words, other.meaning, other.margin
                ),
            );
        }
        if let Some(margin) = &measured.margin {
            page.line(2, &format!("margin: {margin}"));
        }
        if let Some(expected) = shown.expected {
            let text = format!("expected: {}", words::range(expected));
            page.line(2, &text);
        }
        let lies = match shown.target.test.unit() {
            Some(_) => format!(", {}", words::lies(shown.verdict)),
            None => String::new(),
        };
        page.line(2, &format!("kept: {}{lies}", shown.text));
        let how = words::entered(measured.confirmed);
        page.line(2, &format!("affirmed: {how}, {}", measured.by));
        if let Some(reason) = &measured.kept_as_found {
            page.line(2, &format!("kept as found: {reason}"));
        }
        if let Some(no) = measured.corrects {
            page.line(2, &format!("corrects: #{no}"));
        }
        if let Some(clip) = &measured.clip {
            page.line(2, &format!("clip: {clip}"));
        }
    }
}

/// What is open, left out, in the way: shown whatever the order and the filter.
fn tail(page: &mut Page, material: &Material) {
    let open = open_targets(material);
    let standing = material.standing;
    list(
        page,
        "Open",
        open.iter()
            .map(|target| format!("{target}: {}", state(material, target))),
    );
    list(
        page,
        "Left out",
        standing
            .skipped
            .iter()
            .map(|(target, left)| format!("{target}: {} ({})", left.reason, left.by)),
    );
    list(
        page,
        "Temporary works IN",
        standing.works_in.iter().map(work_words),
    );
    list(
        page,
        "Not readable",
        standing
            .unreadable
            .iter()
            .map(|no| format!("#{no}: its value cannot be read and does not count")),
    );
    let notes = material
        .entries
        .iter()
        .filter(|entry| matches!(entry.record, Record::Note { .. }))
        .map(|entry| format!("{} {}", number(material, entry), event(&entry.record)));
    list(page, "Notes", notes);
    page.gap();
    if material.job.is_none() {
        page.line(
            0,
            "No job file beside the log: which tests are required is not known here.",
        );
    }
    page.line(
        0,
        "This says what was measured and what is open. Whether the installation may be energised \
         is for a competent person to decide, under local rules.",
    );
}

/// Required tests without a value that counts and not left out, and all that wait for a decision.
#[must_use]
pub fn open_targets(material: &Material) -> Vec<Target> {
    let standing = material.standing;
    let mut open: Vec<Target> = material
        .required
        .iter()
        .filter(|t| standing.kept.value(t).is_none() && !standing.skipped.contains_key(t))
        .cloned()
        .collect();
    let waiting = standing.undecided.keys().chain(standing.repeats.keys());
    for target in waiting {
        if !open.contains(target) {
            open.push(target.clone());
        }
    }
    // A ticked test that was not in order stays open, though it has a value.
    for (target, value) in standing.kept.iter() {
        if *value == Value::Ticked(false) {
            open.push(target.clone());
        }
    }
    open
}

fn list(page: &mut Page, title: &str, items: impl Iterator<Item = String>) {
    let items: Vec<String> = items.collect();
    if items.is_empty() {
        return;
    }
    page.heading(&format!("{title} ({})", items.len()));
    for item in items {
        page.line(2, &item);
    }
}
