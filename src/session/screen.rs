//! The screen as a pure function of the state.
//!
//! Promises: 40 x 15 is enough and nothing essential is off it; wider and taller screens are used;
//! no meaning is carried by colour or weight alone; the test, its place, the range, what was heard
//! or typed, what can be pressed and said, level and links are always there. It leaves out
//! how a line is drawn.

use super::{
    prompt::{Candidate, DeadStep, Entry, Gate, Prompt},
    state::{EarState, State},
    utter,
    wrap::{cut, wrap},
};

/// How much a line matters. Terminals may draw it bold or dim; the words say it all the same.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Weight {
    /// Ordinary.
    Plain,
    /// The question, the place.
    Strong,
    /// Keys, words, status.
    Dim,
    /// Something is wrong or out of range; the text says what.
    Alarm,
}

/// One line of the screen.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Line {
    /// At most the width asked for.
    pub text: String,
    /// How much it matters.
    pub weight: Weight,
}

/// The parts of a screen before it is laid out.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct View {
    /// Place, and how much is open.
    pub place: String,
    /// The test or what stands in its stead.
    pub title: String,
    /// The expected range, or empty.
    pub range: String,
    /// What to read: connections, reminders, lists.
    pub body: Vec<String>,
    /// What happened last.
    pub notice: String,
    /// Words heard, digits typed.
    pub input: String,
    /// The question.
    pub question: String,
    /// What can be pressed.
    pub press: String,
    /// What can be said.
    pub say: String,
    /// Ear, level, links.
    pub status: String,
    /// The reading is out of range, or something is wrong.
    pub alarm: bool,
    /// The body is all there is to read: it takes the whole screen.
    pub full: bool,
}

/// The screen, exactly `height` lines of at most `width` characters.
#[must_use]
pub fn screen(state: &State, width: usize, height: usize) -> Vec<Line> {
    let view = view(state);
    let line = |text: &str, weight| Line {
        text: cut(text, width),
        weight,
    };
    if view.full {
        let head = format!("{}  {}", view.title, view.press);
        let mut lines = vec![line(&head, Weight::Strong)];
        lines.extend(view.body.iter().map(|text| line(text, Weight::Plain)));
        lines.resize(height.saturating_sub(1), line("", Weight::Plain));
        lines.push(line(&view.status, Weight::Dim));
        lines.truncate(height);
        return lines;
    }
    let mut top = vec![
        line(&view.place, Weight::Strong),
        line(&view.title, Weight::Strong),
    ];
    if !view.range.is_empty() {
        top.extend(
            wrap(&view.range, width)
                .iter()
                .take(2)
                .map(|l| line(l, Weight::Plain)),
        );
    }
    let mut bottom = Vec::new();
    let loud = if view.alarm {
        Weight::Alarm
    } else {
        Weight::Plain
    };
    bottom.extend(
        wrap(&view.notice, width)
            .iter()
            .take(2)
            .map(|l| line(l, loud)),
    );
    bottom.push(line(&view.input, Weight::Plain));
    bottom.extend(
        wrap(&view.question, width)
            .iter()
            .take(2)
            .map(|l| line(l, Weight::Strong)),
    );
    bottom.push(line(&view.press, Weight::Dim));
    bottom.push(line(&view.say, Weight::Dim));
    bottom.push(line(&view.status, Weight::Dim));

    // On a screen too low for everything the question and the keys stay, the rest gives way.
    let room = height.saturating_sub(bottom.len());
    top.truncate(room);
    let room = room - top.len();
    let mut body: Vec<Line> = view
        .body
        .iter()
        .flat_map(|text| wrap(text, width.saturating_sub(1)))
        .map(|text| line(&format!(" {text}"), Weight::Plain))
        .collect();
    if body.len() > room {
        body.truncate(room);
        if let Some(last) = body.last_mut() {
            *last = line(" ... more: * 5", Weight::Dim);
        }
    }
    body.resize(room, line("", Weight::Plain));
    top.extend(body);
    let over = bottom.len().saturating_sub(height);
    top.extend(bottom.into_iter().skip(over));
    top
}

/// The parts of the screen.
#[must_use]
pub fn view(state: &State) -> View {
    let mut view = View {
        place: place(state),
        notice: state.notice.clone(),
        status: status(state),
        ..View::default()
    };
    base(state, &mut view);
    over(state, &mut view);
    if view.input.is_empty() && !state.heard.is_empty() {
        view.input = format!("heard: {}", state.heard);
    }
    view
}

fn place(state: &State) -> String {
    let open = state.open().count();
    let name = match (&state.here.board, state.here.circuit) {
        (Some(board), Some(no)) => {
            let name = state
                .job()
                .circuit(board, no)
                .map_or("", |c| c.name.as_str());
            format!("{board}/{no} {name}")
        }
        (Some(board), None) => format!("{board} {}", state.job().reference),
        _ => state.job().reference.clone(),
    };
    // The count stands first where it cannot be cut off.
    format!("[{open} open] {name}")
}

fn status(state: &State) -> String {
    let ear = match state.ear {
        EarState::None => "keypad only".to_owned(),
        EarState::Lost => "MIC GONE, keys only".to_owned(),
        _ if state.stack.iter().any(|p| matches!(p, Prompt::Standby)) => "standby".to_owned(),
        _ if state.deaf => "mic waits: tool speaks".to_owned(),
        EarState::Asked => format!("mic {} SPEAK", meter(state.level)),
        EarState::OnKey => format!("mic {} on key", meter(state.level)),
        EarState::Listening => format!("mic {} open", meter(state.level)),
        EarState::Speech => format!("mic {} HEARING", meter(state.level)),
    };
    match state.standing.works_in.len() {
        0 => ear,
        n => format!("{ear} | IN: {n}, take out"),
    }
}

/// A level meter of eight steps in plain characters.
fn meter(level: u8) -> String {
    let full = usize::from(level.min(100)) * 8 / 100;
    format!("[{}{}]", "#".repeat(full), ".".repeat(8 - full))
}

/// The step of the work.
fn base(state: &State, view: &mut View) {
    match state.stack.first() {
        Some(Prompt::Gate(gate)) => gate_view(gate, view),
        Some(Prompt::Dead(dead)) => {
            view.title = format!("Prove {} dead", dead.board);
            view.body = vec![
                format!("Between {}.", dead.pairs()),
                match (dead.method, dead.number.as_str()) {
                    (None, _) => "Indicator proved before and after.".into(),
                    (Some(method), _) if dead.step == DeadStep::Number => {
                        format!("Indicator on a {method}.")
                    }
                    (Some(method), "") => format!("Indicator on a {method}."),
                    (Some(method), no) => format!("Indicator no. {no} on a {method}."),
                },
            ];
            view.question = utter::dead_question(dead.step, dead.pairs());
            (view.press, view.say) = match dead.step {
                DeadStep::Method => ("1  2   * menu".into(), "first, second".into()),
                DeadStep::Number => (
                    "digits, ENTER (may be empty)  - back".into(),
                    "the number, done".into(),
                ),
                _ => (
                    "ENTER yes   - no   * menu".into(),
                    "affirm, negative".into(),
                ),
            };
            if dead.step == DeadStep::Number {
                view.input = format!("typed: {}_", dead.number);
            }
        }
        Some(Prompt::Fit(work)) => {
            let (head, question) = utter::in_words(work.kind);
            view.title = head.into();
            view.body = vec![utter::work_text(work)];
            if let Some(target) = state.wanted() {
                view.body
                    .push(format!("For: {}", utter::target_text(&target)));
            }
            view.question = question.into();
            view.press = "ENTER done   - later   * menu".into();
            view.say = "done, negative, skip".into();
        }
        Some(Prompt::TakeOut(work)) => out_view(work, view),
        Some(Prompt::Hold(hold)) => {
            view.title = format!("Discharge {}/{}", hold.board, hold.circuit);
            let held = state.now.saturating_sub(hold.since) / 1000;
            view.body = vec![
                "Probes stay on. The conductors may hold a charge that shocks.".into(),
                "Read the volts: below 50 V?".into(),
            ];
            view.input = format!("held {held} s");
            view.question = "Discharged?".into();
            view.press = "ENTER discharged   * menu".into();
            view.say = "done".into();
        }
        Some(Prompt::Ask(ask)) => {
            view.title = utter::target_text(&ask.target);
            if let (Some(_), Some(rest)) = (&ask.target.circuit, view.title.split_once(' ')) {
                view.title = rest.1.to_owned();
            }
            let ticked = ask.target.test.unit().is_none();
            if !ticked {
                view.range = utter::range_text(&ask.expected);
            }
            view.body.clone_from(&ask.connections);
            if let Some((no, value)) = &ask.stands {
                view.body.insert(
                    0,
                    format!("Entry {no} holds {value}; a new one replaces it."),
                );
            }
            let draft = state.drafts.get(&ask.target);
            if let Some(draft) = draft {
                view.input = format!("typed: {draft}_");
            }
            if ticked {
                view.question = "In order?".into();
                view.press = "ENTER in order   - not   * menu".into();
                view.say = "affirm, negative, skip".into();
            } else {
                let unit = ask.target.test.unit().map_or("", |u| u.symbol());
                view.question = format!("Reading in {unit}?");
                view.press = match draft {
                    None => "0-9 .  + over  - under  / open  * menu",
                    Some(_) => "ENTER read back   - rubs out   * menu",
                }
                .into();
                view.say = if ask.by_digit {
                    "one digit, point, affirm, disregard"
                } else {
                    "the reading, say again, next, skip"
                }
                .into();
            }
        }
        _ => {
            view.title = "Nothing is left to do".into();
            let left = state.standing.skipped.len();
            let open = state.open().count();
            view.body = vec![
                format!(
                    "{} values kept, {left} left out, {open} open.",
                    state.standing.kept.iter().count()
                ),
                "What is open or left out stands in the review.".into(),
            ];
            view.question = "End the session?".into();
            view.press = "ENTER end   * menu".into();
            view.say = "affirm, circuit ..., list open".into();
        }
    }
}

fn gate_view(gate: &Gate, view: &mut View) {
    view.title = gate.stage.title().into();
    view.body = gate.pages.get(gate.page).cloned().unwrap_or_default();
    let (page, pages) = (gate.page + 1, gate.pages.len());
    if page < pages {
        view.question = format!("Read and understood? ({page} of {pages})");
        view.press = "ENTER next page   - back   * menu".into();
        view.say = "next, done".into();
    } else {
        view.question = match &gate.board {
            Some(board) => format!("{board}: all of this is so?"),
            None => "All of this is so?".into(),
        };
        view.press = "ENTER acknowledge   - no   * menu".into();
        view.say = "done, negative".into();
    }
}

fn out_view(work: &crate::domain::record::Work, view: &mut View) {
    let (head, question) = utter::out_words(work.kind);
    view.title = head.into();
    view.range.clear();
    view.body = vec![utter::work_text(work)];
    view.question = question.into();
    view.press = "ENTER done   - not yet   * menu".into();
    view.say = match head {
        "TAKE OUT" => "done, link removed, negative",
        _ => "done, negative",
    }
    .into();
}

/// What lies over the step of the work.
fn over(state: &State, view: &mut View) {
    let Some(top) = state.stack.last().filter(|_| state.stack.len() > 1) else {
        return;
    };
    match top {
        Prompt::Confirm(candidate) => confirm_view(candidate, view),
        Prompt::Question(candidate) => {
            view.alarm = true;
            view.body = findings(candidate);
            let lies = match verdict(candidate) {
                "within the range" => "in range, but in doubt",
                other => other,
            };
            view.input = format!("{}: {lies}", candidate.entry);
            view.question = "Keep as found, or measure again?".into();
            view.press = "1 keep as found  2 again  * menu".into();
            view.say = "keep as found, measure again".into();
        }
        Prompt::List(list) => {
            view.range.clear();
            view.title = list.title.clone();
            view.body = list
                .shown()
                .map(|(n, (text, _))| cut(&format!("{n} {text}"), super::gates::PAGE_COLUMNS))
                .collect();
            view.question = match list.pages() {
                1 if list.items.len() == 1 => "This one?".into(),
                1 => String::new(),
                n => format!("Page {} of {n}", list.page + 1),
            };
            view.press = match (list.items.len(), list.pages()) {
                (0, _) => "- back".into(),
                (1, _) => "ENTER or 1 yes   - no".into(),
                (_, 1) => "1-6 pick   - none".into(),
                _ => "1-6 pick   + next page   - none".into(),
            };
            view.say = list_words(list);
        }
        Prompt::Page(page) => {
            view.range.clear();
            view.title.clone_from(&page.title);
            view.body = page.pages.get(page.page).cloned().unwrap_or_default();
            view.question = format!("Page {} of {}", page.page + 1, page.pages.len());
            view.press = "ENTER next page   - close".into();
            view.say = "next, back, disregard".into();
            if page.title == utter::HELP {
                view.full = true;
                view.title = if page.page == 0 { "Keys" } else { "Words" }.into();
                view.press = if page.page == 0 {
                    "ENTER words   - close"
                } else {
                    "ENTER close"
                }
                .into();
            }
        }
        Prompt::Menu => {
            view.range.clear();
            view.title = "Menu".into();
            view.body = utter::MENU.map(Into::into).into();
            view.question = "Which?".into();
            view.press = "a key of the list   * close".into();
            view.say = "the words, or disregard".into();
        }
        Prompt::Call(text) => {
            view.range.clear();
            view.title = "Call a circuit".into();
            view.body = vec![
                "7: circuit 7 of this board".into(),
                "4.2: way 4, line 2".into(),
                "7+3: circuit 7, point 3".into(),
            ];
            view.input = format!("typed: {text}_");
            view.question = "Which circuit?".into();
            view.press = "digits, ENTER  / boards  - back".into();
            view.say = "circuit ..., board ..., disregard".into();
        }
        Prompt::Standby => {
            view.title = "STANDBY: not listening".into();
            view.range.clear();
            view.body = vec!["Only \"resume\" or a key goes on.".into()];
            view.question = "Go on?".into();
            view.press = "ENTER go on".into();
            view.say = "resume".into();
        }
        Prompt::Trouble(why) => {
            view.alarm = true;
            view.range.clear();
            view.title = "NOT KEPT".into();
            view.body = vec![
                why.clone(),
                "What was kept before is on disk.".into(),
                "Dropped means: it will be asked again.".into(),
            ];
            view.question = "Try again?".into();
            view.press = "ENTER try again   - drop it".into();
            view.say = "affirm, negative".into();
        }
        Prompt::StopAsk => {
            view.range.clear();
            view.title = "End the session?".into();
            view.body = vec![
                "Everything affirmed is kept.".into(),
                "What is not affirmed will be asked again.".into(),
            ];
            let works = state
                .standing
                .works_in
                .iter()
                .map(|w| format!("STILL IN: {}", utter::work_text(w)));
            view.body.extend(works);
            view.question = "End now?".into();
            view.press = "ENTER end   - go on".into();
            view.say = "affirm, negative".into();
        }
        Prompt::TakeOut(work) => out_view(work, view),
        Prompt::Fit(work) => {
            view.range.clear();
            view.title = "Onto the list of works".into();
            view.body = vec![utter::work_text(work)];
            view.question = utter::in_words(work.kind).1.into();
            view.press = "ENTER done   - no".into();
            view.say = "done, negative".into();
        }
        _ => {}
    }
}

/// What may be said at a list; reasons by their own words.
fn list_words(list: &super::prompt::List) -> String {
    use super::prompt::Choice;
    let says = match (list.items.len(), list.items.first()) {
        (0, _) => "back",
        (1, _) => "affirm, negative",
        (_, Some((_, Choice::Keep(..)))) => "measured twice, fault found, first, ...",
        (_, Some((_, Choice::Skip(_)))) => "no access, no instrument, first, ...",
        _ => "first, second, next, back",
    };
    says.into()
}

fn verdict(candidate: &Candidate) -> &'static str {
    match candidate.entry {
        // A tick has no range; its words say how it is.
        Entry::Tick(_) => "",
        Entry::Reading(_) => utter::verdict_text(candidate.assessment.verdict),
    }
}

fn confirm_view(candidate: &Candidate, view: &mut View) {
    let off = candidate.assessment.verdict.questioned();
    view.alarm = candidate.assessment.questioned();
    view.body = candidate
        .heard
        .iter()
        .map(|words| format!("Heard: {words}"))
        .collect();
    if matches!(candidate.entry, Entry::Reading(_)) {
        let doubt = findings(candidate).into_iter().next();
        if off {
            view.body.push(format!("! {}", verdict(candidate)));
        } else if doubt.is_some() {
            // The series hints at a fault although this reading lies in its range.
            view.body.push("! within the range, but:".into());
        }
        view.body.extend(doubt);
    }
    view.input = format!("= {}", candidate.entry);
    view.question = match &candidate.entry {
        Entry::Reading(reading) => format!("{reading}, right?"),
        Entry::Tick(true) => "In order, right?".into(),
        Entry::Tick(false) => "NOT in order, right?".into(),
    };
    view.press = "ENTER affirm   - negative   * menu".into();
    view.say = "affirm, negative, say again".into();
}

fn findings(candidate: &Candidate) -> Vec<String> {
    let mut lines = Vec::new();
    for finding in candidate.assessment.findings.iter().take(3) {
        lines.push(format!("{}. Check: {}", finding.text, finding.check));
    }
    if lines.is_empty() && matches!(candidate.entry, Entry::Tick(false)) {
        lines.push("Not in order: note what is wrong, put it right, test again.".into());
    }
    lines
}
