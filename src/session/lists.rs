//! Lists to pick from and text to read: what is open, what is in, why, help, reasons.
//!
//! Promises: every list has a way out that changes nothing. Reasons are fixed phrases, so that a
//! log can be searched for them.

use crate::domain::{
    expect::Expected,
    test::{Target, TestKind},
};

use super::{
    act::How,
    effect::Effect,
    gates::{PAGE_COLUMNS, PAGE_LINES, is_live},
    prompt::{Choice, List, Page, Prompt, paginate},
    state::State,
    utter,
};

/// Why a test is left out.
pub(super) const SKIP: [&str; 6] = [
    "no access",
    "does not apply here",
    "agreed limit of the work",
    "instrument not at hand",
    "equipment cannot be disconnected",
    "other reason, note at the van",
];

/// Why a value out of range is kept; true: a fault, so the test is done again after the repair.
pub(super) const KEEP: [(&str, bool); 6] = [
    ("measured twice, reads the same", false),
    ("length or cable differs from the plan", false),
    ("parallel path known", false),
    ("fault, to be put right", true),
    ("instrument or leads in doubt", true),
    ("other reason, note at the van", false),
];

impl State {
    pub(super) fn list(
        &mut self,
        title: &str,
        items: Vec<(String, Choice)>,
        out: &mut Vec<Effect>,
    ) {
        self.push(
            Prompt::List(List {
                title: title.into(),
                items,
                page: 0,
            }),
            out,
        );
    }

    pub(super) fn page(&mut self, title: &str, lines: &[String], out: &mut Vec<Effect>) {
        if matches!(self.top(), Prompt::Page(page) if page.title == title) {
            return self.pop(out);
        }
        self.push(
            Prompt::Page(Page {
                title: title.into(),
                pages: paginate(lines, PAGE_COLUMNS, PAGE_LINES),
                page: 0,
            }),
            out,
        );
    }

    pub(super) fn boards(&mut self, out: &mut Vec<Effect>) {
        let items = self
            .job()
            .boards
            .iter()
            .map(|b| (b.id.to_string(), Choice::Board(b.id.clone())))
            .collect();
        self.list("Which board?", items, out);
    }

    pub(super) fn tests(&mut self, out: &mut Vec<Effect>) {
        let mut kinds: Vec<TestKind> = Vec::new();
        let (board, circuit) = (&self.here.board, self.here.circuit);
        let here = |t: &&Target| (&t.board, t.circuit) == (board, circuit) || t.board.is_none();
        for target in self.setup.required().iter().filter(here) {
            if !kinds.contains(&target.test) {
                kinds.push(target.test);
            }
        }
        let items = kinds
            .into_iter()
            .map(|kind| (kind.title(), Choice::Test(kind)))
            .collect();
        self.list("Which test?", items, out);
    }

    pub(super) fn keep_reasons(&mut self, out: &mut Vec<Effect>) {
        let items = KEEP
            .map(|(reason, fault)| (reason.to_owned(), Choice::Keep(reason, fault)))
            .into();
        self.list(&self.keep_title(), items, out);
    }

    /// The list of reasons names the value: it is the last look before it is kept.
    fn keep_title(&self) -> String {
        let value = self.questioned().map(|c| c.entry.to_string());
        format!("Keep {} as found: why?", value.unwrap_or_default())
    }

    /// A reason for keeping, said in words: picked in the list; at the question it asks once more.
    pub(super) fn keep_for(&mut self, n: u8, how: &How, out: &mut Vec<Effect>) {
        let reason = usize::from(n).checked_sub(1).and_then(|n| KEEP.get(n));
        match (self.top(), reason) {
            (Prompt::List(list), Some((reason, fault)))
                if list
                    .items
                    .iter()
                    .any(|(_, c)| matches!(c, Choice::Keep(r, _) if r == reason)) =>
            {
                self.choose(Choice::Keep(reason, *fault), how, out);
            }
            (Prompt::Question(_), Some((reason, fault))) => {
                let items = vec![((*reason).to_owned(), Choice::Keep(reason, *fault))];
                self.list(&self.keep_title(), items, out);
            }
            _ => self.refuse("Nothing is kept as found here.", out),
        }
    }

    /// A reason for leaving out, said in words: picked in the list; elsewhere it asks once more.
    pub(super) fn leave_out_for(&mut self, n: u8, how: &How, out: &mut Vec<Effect>) {
        let Some(reason) = usize::from(n).checked_sub(1).and_then(|n| SKIP.get(n)) else {
            return self.refuse("There is no such reason.", out);
        };
        let listed = |list: &List| {
            list.items
                .iter()
                .any(|(_, c)| matches!(c, Choice::Skip(r) if r == reason))
        };
        if matches!(self.top(), Prompt::List(list) if listed(list)) {
            return self.choose(Choice::Skip(reason), how, out);
        }
        let asked = |p: &Prompt| matches!(p, Prompt::Confirm(_) | Prompt::Question(_));
        if self.stack.iter().any(asked) {
            return self.refuse("Answer first: keep this value, or measure again.", out);
        }
        self.skip_reasons(out);
        if let Some(Prompt::List(list)) = self.stack.last_mut()
            && listed(list)
        {
            list.items = vec![((*reason).to_owned(), Choice::Skip(reason))];
            out.push(Effect::Listen(self.context()));
        }
    }

    pub(super) fn skip_reasons(&mut self, out: &mut Vec<Effect>) {
        match self.stack.first() {
            Some(Prompt::Ask(_)) => {
                self.pop_all();
                let items = SKIP
                    .map(|reason| (reason.to_owned(), Choice::Skip(reason)))
                    .into();
                self.list("Leave this test out: why?", items, out);
            }
            // A test whose link cannot be fitted can be left out as well.
            Some(Prompt::Fit(_)) => match self.wanted() {
                Some(target) => {
                    let ask = self.ask(&target);
                    self.stack.insert(0, ask);
                    self.stack.truncate(1);
                    self.skip_reasons(out);
                }
                None => self.refuse("There is no test to leave out here.", out),
            },
            _ => self.refuse("There is no test to leave out here.", out),
        }
    }

    pub(super) fn list_open(&mut self, out: &mut Vec<Effect>) {
        let here = (&self.here.board, self.here.circuit);
        let mut open: Vec<&Target> = self.open().collect();
        // Those of the circuit in hand first; live ones, which stay shut until then, last.
        open.sort_by_key(|t| (is_live(t.test), (&t.board, t.circuit) != here));
        let title = match open.len() {
            0 => "Nothing is open.".to_owned(),
            n => format!("Open: {n}. Pick one to go there."),
        };
        let items: Vec<_> = open
            .into_iter()
            .map(|t| {
                let again = self.standing.repeats.contains_key(t);
                let text = format!(
                    "{}{}",
                    utter::target_text(t),
                    if again { " AGAIN" } else { "" }
                );
                (text, Choice::Target(t.clone()))
            })
            .collect();
        self.list(&title, items, out);
    }

    pub(super) fn list_links(&mut self, out: &mut Vec<Effect>) {
        let works = &self.standing.works_in;
        let title = match works.len() {
            0 => "No link or work is in.".to_owned(),
            n => format!("In: {n}. Pick one that came out."),
        };
        let items = works
            .iter()
            .map(|w| (utter::work_text(w), Choice::Out(w.clone())))
            .collect();
        self.list(&title, items, out);
    }

    pub(super) fn why(&mut self, out: &mut Vec<Effect>) {
        match self.stack.first() {
            Some(Prompt::Ask(ask)) => {
                let mut lines = ask.connections.clone();
                lines.extend(why_lines(&ask.expected));
                if let Some(Prompt::Confirm(c) | Prompt::Question(c)) = self.stack.last() {
                    for finding in &c.assessment.findings {
                        lines.push(format!("{}. Check: {}", finding.text, finding.check));
                    }
                }
                self.page("How and why", &lines, out);
            }
            _ => self.refuse("No range is asked about here.", out),
        }
    }

    pub(super) fn help(&mut self, out: &mut Vec<Effect>) {
        let pages = [utter::KEYS, utter::WORDS]
            .map(|page| page.map(str::to_owned).into())
            .into();
        if matches!(self.top(), Prompt::Page(page) if page.title == utter::HELP) {
            return self.pop(out);
        }
        self.push(
            Prompt::Page(Page {
                title: utter::HELP.into(),
                pages,
                page: 0,
            }),
            out,
        );
    }
}

/// The range taken apart.
fn why_lines(expected: &Expected) -> Vec<String> {
    let mut lines = Vec::new();
    if let Some(unknown) = &expected.unknown {
        lines.push(format!("No range: {unknown}."));
    }
    for part in &expected.why {
        lines.push(format!(
            "{}: -{:.3} +{:.3} {}",
            part.what, part.low, part.high, expected.unit
        ));
    }
    if let Some(limit) = &expected.limit {
        let word = if limit.minimum { "least" } else { "most" };
        lines.push(format!(
            "Limit: {word} {} {} ({})",
            limit.value, expected.unit, limit.source.text
        ));
    }
    for source in &expected.sources {
        let mark = if source.checked { "" } else { " (not checked)" };
        lines.push(format!("Source: {}{mark}", source.text));
    }
    lines
}
