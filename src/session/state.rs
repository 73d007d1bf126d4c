//! The state of a session and the one function that moves it.
//!
//! Promises: [`step`] is a function of its arguments. While a record waits for the journal's
//! answer, what happens meanwhile is held and taken up afterwards, so nothing is lost.

use std::{
    collections::{BTreeMap, BTreeSet, VecDeque},
    sync::Arc,
};

use crate::domain::{
    place::{BoardId, CircuitNo, PointNo},
    plan::Job,
    record::{EntryNo, Record, Work},
    standing::Standing,
    test::{Stage, Target},
};

use super::{
    effect::{Effect, Tone},
    event::{Event, StopCause},
    prompt::Prompt,
    settings::Settings,
    trade, utter,
};

/// What a session is given and never changes.
#[derive(Debug, Clone)]
pub struct Setup {
    /// The plan.
    pub job: Job,
    /// Who tests.
    pub tester: String,
    /// Settings.
    pub settings: Settings,
    /// Name and digest of the voice, or `None`: keypad only.
    pub voice: Option<String>,
    /// Version of the program.
    pub program: String,
    /// The work was left long enough, or the clock is so doubtful, that isolation must be proved
    /// again before anything else.
    pub away: bool,
    /// What stands on the first screen: why there is no voice, why there is no sound.
    pub remark: String,
    /// The test at which the log breaks off, when a session is taken up again.
    pub resume_at: Option<Target>,
    /// Every test the job needs, in order.
    required: Vec<Target>,
    /// Which of them need a temporary work, by their place in `required`.
    needed_by: BTreeMap<Work, Vec<usize>>,
}

impl Setup {
    /// A setup; works out once which tests are needed.
    #[must_use]
    pub fn new(job: Job, tester: &str, settings: Settings) -> Self {
        let required = trade::required(&job);
        let mut needed_by: BTreeMap<Work, Vec<usize>> = BTreeMap::new();
        for (at, target) in required.iter().enumerate() {
            for work in trade::works_needed(&job, target) {
                needed_by.entry(work).or_default().push(at);
            }
        }
        Self {
            job,
            tester: tester.into(),
            settings,
            voice: None,
            program: env!("CARGO_PKG_VERSION").into(),
            away: false,
            remark: String::new(),
            resume_at: None,
            required,
            needed_by,
        }
    }

    /// Every test the job needs, in order.
    #[must_use]
    pub fn required(&self) -> &[Target] {
        &self.required
    }

    /// The tests that need a temporary work.
    pub(super) fn needing(&self, work: &Work) -> impl Iterator<Item = &Target> {
        let at = self.needed_by.get(work).map_or(&[][..], Vec::as_slice);
        at.iter().filter_map(|at| self.required.get(*at))
    }
}

/// How the ear is doing.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum EarState {
    /// There is none: keypad only.
    None,
    /// The microphone is open.
    Listening,
    /// A key opens it for one utterance.
    OnKey,
    /// The key was pressed: it waits for speech.
    Asked,
    /// Somebody speaks.
    Speech,
    /// The microphone went away.
    Lost,
}

/// Where the tester stands.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub(super) struct Here {
    pub stage: Option<Stage>,
    pub board: Option<BoardId>,
    pub circuit: Option<CircuitNo>,
    pub point: Option<PointNo>,
}

/// A record on its way to the journal.
#[derive(Debug, Clone)]
pub(super) struct Pending {
    pub record: Record,
    /// A reading that failed: once kept, earlier tests it may have influenced are done again.
    pub failed: bool,
}

/// A session.
#[derive(Debug, Clone)]
pub struct State {
    pub(super) setup: Arc<Setup>,
    pub(super) standing: Standing,
    /// Prompts lying on one another; the last is on top. Never empty.
    pub(super) stack: Vec<Prompt>,
    pub(super) here: Here,
    /// The test called by name; done before the next in order.
    pub(super) called: Option<Target>,
    /// Tests passed over in this session, the longest ago first; true: behind all others, false:
    /// behind the others of their stage.
    pub(super) passed: Vec<(Target, bool)>,
    /// Works the tester said are still in: asked again later, not at every step.
    pub(super) left_in: BTreeSet<Work>,
    /// Circuits that may hold a charge from an insulation test.
    pub(super) charged: BTreeSet<(BoardId, CircuitNo)>,
    /// Boards whose isolation must be proved again (see [`Setup::away`]).
    pub(super) lapsed: BTreeSet<BoardId>,
    /// Acknowledgements before this entry do not count for them; the session's beginning when
    /// nothing else.
    pub(super) lapsed_at: Option<EntryNo>,
    /// Tests whose prompt stood on the screen, for "back".
    pub(super) trail: Vec<Target>,
    /// Half-typed input, each with the test it was typed for.
    pub(super) drafts: BTreeMap<Target, String>,
    /// Records to keep, the first of them with the journal when `awaiting`.
    pub(super) pending: VecDeque<Pending>,
    pub(super) awaiting: bool,
    /// Records the journal could not keep and that were let go of, and not made good since.
    pub(super) unkept: Vec<Record>,
    /// The step of the work changes once the last pending record is kept.
    pub(super) move_on: bool,
    /// A work came out: stages may close elsewhere than where the tester is.
    pub(super) look_everywhere: bool,
    /// Events that came while waiting for the journal.
    pub(super) held: VecDeque<Event>,
    pub(super) ear: EarState,
    /// The tool itself sounds: nothing else is heard.
    pub(super) deaf: bool,
    /// Milliseconds of sound lost in this session, and how many of them the log knows of.
    pub(super) lost_ms: (u64, u64),
    pub(super) level: u8,
    pub(super) now: u64,
    /// What happened last, for the screen: "kept as entry 12".
    pub(super) notice: String,
    /// Words heard last.
    pub(super) heard: String,
    /// What was said last, for "say again".
    pub(super) spoken: String,
    /// The end was asked for; nothing is taken any more once true and nothing is pending.
    pub(super) ending: bool,
    pub(super) ended: bool,
}

/// Begins a session on what the log already holds. The first effect keeps that it began.
#[must_use]
pub fn begin(setup: Setup, standing: Standing) -> (State, Vec<Effect>) {
    let lapsed = if setup.away {
        setup.job.boards.iter().map(|b| b.id.clone()).collect()
    } else {
        BTreeSet::new()
    };
    let ear = match (&setup.voice, setup.settings.hold_to_talk) {
        (None, _) => EarState::None,
        (Some(_), true) => EarState::OnKey,
        (Some(_), false) => EarState::Listening,
    };
    let opened = Record::SessionOpened {
        by: setup.tester.clone(),
        job: setup.job.reference.clone(),
        program: setup.program.clone(),
        resumed: standing.last > 0,
        voice: setup.voice.clone().unwrap_or_else(|| "keypad only".into()),
    };
    let notice = setup.remark.clone();
    let mut state = State {
        setup: Arc::new(setup),
        stack: vec![Prompt::Finish],
        here: Here::default(),
        called: None,
        passed: Vec::new(),
        left_in: BTreeSet::new(),
        charged: BTreeSet::new(),
        lapsed,
        lapsed_at: None,
        trail: Vec::new(),
        drafts: BTreeMap::new(),
        pending: VecDeque::new(),
        awaiting: false,
        unkept: Vec::new(),
        move_on: false,
        look_everywhere: false,
        held: VecDeque::new(),
        ear,
        deaf: false,
        lost_ms: (0, 0),
        level: 0,
        now: 0,
        notice,
        heard: String::new(),
        spoken: String::new(),
        ending: false,
        ended: false,
        standing,
    };
    state.charged = state.charges();
    state.here.board = state.setup.job.boards.first().map(|b| b.id.clone());
    if let Some(target) = state.setup.resume_at.clone() {
        state.here = Here {
            stage: Some(target.test.stage()),
            board: target.board.clone().or(state.here.board),
            circuit: target.circuit,
            point: target.point,
        };
    }
    let mut out = Vec::new();
    state.keep(opened, &mut out);
    (state, out)
}

/// Takes one event.
#[must_use]
pub fn step(mut state: State, event: Event) -> (State, Vec<Effect>) {
    let mut out = Vec::new();
    state.take(event, &mut out);
    (state, out)
}

impl State {
    pub(super) fn take(&mut self, event: Event, out: &mut Vec<Effect>) {
        if self.ended {
            return;
        }
        match event {
            Event::Kept(no) => self.kept(no, out),
            Event::NotKept(why) => self.not_kept(why, out),
            Event::Tick(now) => {
                let shown = matches!(self.top(), Prompt::Hold(_)) && now / 1000 != self.now / 1000;
                self.now = now;
                if shown {
                    out.push(Effect::Show);
                }
            }
            Event::Level(level) => {
                if level != self.level {
                    self.level = level;
                    out.push(Effect::Show);
                }
            }
            Event::Redraw => out.push(Effect::Show),
            other if self.awaiting => self.held.push_back(other),
            Event::Speaking(on) => self.speaking(on, out),
            Event::Deaf(on) => {
                self.deaf = on;
                out.push(Effect::Show);
            }
            Event::SoundLost(ms) => self.sound_lost(ms, out),
            Event::NoSpeech => self.no_speech(out),
            Event::DeviceLost => {
                if !matches!(self.ear, EarState::None | EarState::Lost) {
                    self.ear = EarState::Lost;
                    self.note("Microphone gone: keys only.");
                    self.keep_incident("microphone lost", out);
                }
            }
            Event::DeviceFound => {
                if self.ear == EarState::Lost {
                    self.ear = self.rest();
                    self.note("Microphone is back.");
                    self.keep_incident("microphone found", out);
                }
            }
            Event::ClockChanged(how) => self.keep_incident(&format!("clock changed: {how}"), out),
            Event::LeftLong => self.left_long(out),
            Event::Stop(cause) => self.stop(cause, out),
            Event::Key(key) => {
                // What was said about the last key or word does not stand beside the next.
                self.notice.clear();
                self.heard.clear();
                self.key(key, out);
            }
            Event::Heard(heard) => {
                if self.ear == EarState::Asked {
                    self.ear = self.rest();
                }
                if !matches!(self.top(), Prompt::Standby) {
                    self.notice.clear();
                }
                self.hear(heard, out);
            }
        }
    }

    /// The prompt on top.
    #[must_use]
    pub fn top(&self) -> &Prompt {
        // The stack is never empty: it begins with one prompt and only overlays are popped.
        self.stack.last().unwrap_or(&Prompt::Finish)
    }

    /// Whether the session has ended.
    #[must_use]
    pub fn ended(&self) -> bool {
        self.ended
    }

    /// What the log adds up to.
    #[must_use]
    pub fn standing(&self) -> &Standing {
        &self.standing
    }

    /// What the session was given.
    #[must_use]
    pub fn setup(&self) -> &Setup {
        &self.setup
    }

    /// How the ear is doing.
    #[must_use]
    pub fn ear(&self) -> EarState {
        self.ear
    }

    /// Records that were to be kept, could not be, and were not made good since.
    #[must_use]
    pub fn unkept(&self) -> &[Record] {
        &self.unkept
    }

    /// A record waits for the journal's answer.
    #[must_use]
    pub fn awaiting(&self) -> bool {
        self.awaiting
    }

    pub(super) fn job(&self) -> &Job {
        &self.setup.job
    }

    pub(super) fn rest(&self) -> EarState {
        if self.setup.settings.hold_to_talk {
            EarState::OnKey
        } else {
            EarState::Listening
        }
    }

    fn speaking(&mut self, on: bool, out: &mut Vec<Effect>) {
        let next = match (self.ear, on) {
            (EarState::Listening | EarState::OnKey | EarState::Asked, true) => EarState::Speech,
            (EarState::Speech, false) => self.rest(),
            (same, _) => same,
        };
        if next != self.ear {
            self.ear = next;
            out.push(Effect::Show);
        }
    }

    /// The handheld slept, or the clock says so: what was locked off may no longer be. What was not
    /// affirmed is asked again.
    fn left_long(&mut self, out: &mut Vec<Effect>) {
        self.lapsed = self.job().boards.iter().map(|b| b.id.clone()).collect();
        self.lapsed_at = Some(self.standing.last + 1);
        if self.stack.iter().any(|p| matches!(p, Prompt::Standby)) {
            out.push(Effect::Pause(false));
        }
        self.note("Left for long: isolation is proved again.");
        // A record that waits after trouble stays before the tester.
        if self.pending.is_empty() {
            self.advance(out);
        }
    }

    /// Sound was lost: one line, and in the log once it is half a second and at each doubling.
    fn sound_lost(&mut self, ms: u64, out: &mut Vec<Effect>) {
        self.lost_ms.0 = self.lost_ms.0.saturating_add(ms);
        let (all, told) = self.lost_ms;
        let seconds = |ms: u64| format!("{}.{} s", ms / 1000, ms % 1000 / 100);
        self.refuse(
            format!(
                "{} of sound lost ({} in all): say it again.",
                seconds(ms),
                seconds(all)
            ),
            out,
        );
        if all >= 500 && all >= told.saturating_mul(2) {
            self.lost_ms.1 = all;
            let what = format!("sound lost, machine too slow: {} in all", seconds(all));
            self.keep_incident(&what, out);
        }
    }

    /// What began like speech was none. Told where it was asked for by a key; with the microphone
    /// open only where the line is free, for every knock begins like speech.
    fn no_speech(&mut self, out: &mut Vec<Effect>) {
        if self.ear == EarState::Asked {
            self.ear = self.rest();
        }
        if self.setup.settings.hold_to_talk {
            self.refuse("No words heard. Press and say it again.", out);
        } else if self.notice.is_empty() && !matches!(self.top(), Prompt::Standby) {
            self.note("A sound too short to be words.");
            out.push(Effect::Show);
        }
    }

    pub(super) fn note(&mut self, text: impl Into<String>) {
        self.notice = text.into();
    }

    /// Not here, or not understood: a tone, a line, and the prompt stays.
    pub(super) fn refuse(&mut self, text: impl Into<String>, out: &mut Vec<Effect>) {
        self.note(text);
        out.push(Effect::Tone(Tone::Refused));
        out.push(Effect::Show);
    }

    pub(super) fn say(&mut self, text: String, out: &mut Vec<Effect>) {
        if text.is_empty() {
            return;
        }
        self.spoken.clone_from(&text);
        out.push(Effect::Say(text));
    }

    /// Puts a prompt on top.
    pub(super) fn push(&mut self, prompt: Prompt, out: &mut Vec<Effect>) {
        self.stack.push(prompt);
        self.shown(out);
    }

    /// Takes the top prompt off; the step of the work itself stays.
    pub(super) fn pop(&mut self, out: &mut Vec<Effect>) {
        if self.stack.len() > 1 {
            self.stack.pop();
        }
        self.shown(out);
    }

    /// Takes everything off down to the step of the work.
    pub(super) fn pop_all(&mut self) {
        self.stack.truncate(1);
    }

    /// Another step of the work; everything that lay over the old one is gone.
    pub(super) fn replace(&mut self, prompt: Prompt, out: &mut Vec<Effect>) {
        self.stack.clear();
        self.stack.push(prompt);
        self.shown(out);
    }

    fn shown(&mut self, out: &mut Vec<Effect>) {
        out.push(Effect::Show);
        out.push(Effect::Listen(self.context()));
        let text = utter::prompt(self);
        self.say(text, out);
    }

    fn stop(&mut self, cause: StopCause, out: &mut Vec<Effect>) {
        let why = match cause {
            StopCause::Power => Some("asked to end (power or system)"),
            StopCause::HangUp => Some("the terminal went away"),
            StopCause::EndOfInput => None,
        };
        self.end(why, out);
    }

    /// Ends: what is not affirmed stays out of the log.
    pub(super) fn end(&mut self, why: Option<&str>, out: &mut Vec<Effect>) {
        if let Some(why) = why {
            self.queue(Record::Incident { what: why.into() });
        }
        let open = u32::try_from(self.open().count()).unwrap_or(u32::MAX);
        self.ending = true;
        self.keep(Record::SessionClosed { open }, out);
    }
}
