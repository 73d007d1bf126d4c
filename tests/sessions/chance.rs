//! Random events, sensible and not: what must hold whatever happens.

use handsfull::{
    domain::{
        place::{BoardId, CircuitNo, Place, PointNo},
        plan::Job,
        reading::Reading,
        record::{Record, Work},
        standing::Standing,
        test::{Between, Stage, TestKind},
    },
    session::{
        Event, Key, Prompt, Settings, Setup, State, StopCause,
        prompt::{Choice, DeadStep},
        screen::screen,
    },
    speech::meaning::{Control, Heard, Hypothesis, Meaning, Reply},
};
use proptest::prelude::*;

use super::bench::{Bench, job};

/// What a finger, a mouth or the world may do.
#[derive(Debug, Clone)]
enum Deed {
    Key(Key),
    Hear(Meaning),
    /// What the prompt asks for, so that deep prompts are reached.
    Sensible,
    World(Event),
    /// The journal refuses the next record.
    DiskFull,
}

fn key() -> impl Strategy<Value = Key> {
    prop_oneof![
        (0..=9_u8).prop_map(Key::Digit),
        Just(Key::Point),
        Just(Key::Enter),
        Just(Key::Plus),
        Just(Key::Minus),
        Just(Key::Star),
        Just(Key::Slash),
        Just(Key::Erase),
        Just(Key::Leave),
        Just(Key::Talk),
        Just(Key::LineEnd),
        proptest::char::range('a', 'z').prop_map(Key::Letter),
        Just(Key::Letter('?')),
    ]
}

fn reading() -> impl Strategy<Value = Meaning> {
    prop_oneof![
        (0..400_u32).prop_map(|n| format!("{}.{:02}", n / 100, n % 100)),
        (1..1000_u32).prop_map(|n| format!(">{n}")),
        Just("open".to_owned()),
        Just("over-range".to_owned()),
        Just("5 ms".to_owned()),
        Just("200 MΩ".to_owned()),
    ]
    .prop_map(|text| Meaning::Reading(text.parse::<Reading>().expect("a reading")))
}

fn place() -> impl Strategy<Value = Meaning> {
    let board = prop_oneof![
        Just(None),
        Just(BoardId::new("DB1").ok()),
        Just(BoardId::new("DB2").ok()),
        Just(BoardId::new("GB").ok()),
        Just(BoardId::new("XX").ok())
    ];
    let circuit = proptest::option::of(0..6_u16);
    let point = proptest::option::of(0..7_u16);
    let name = prop_oneof![4 => Just(None), 1 => Just(Some("machine room".to_owned()))];
    (board, circuit, point, name).prop_map(|(board, circuit, point, name)| {
        Meaning::Place(Place {
            board,
            circuit: circuit.and_then(|n| CircuitNo::new(n, None).ok()),
            point: point.map(PointNo),
            spur: point == Some(3),
            name,
        })
    })
}

fn meaning() -> impl Strategy<Value = Meaning> {
    let reply = prop_oneof![
        Just(Reply::Affirm),
        Just(Reply::Negative),
        (0..8_u8).prop_map(Reply::Pick),
        Just(Reply::KeepAsFound),
        Just(Reply::MeasureAgain),
        Just(Reply::Done),
    ]
    .prop_map(Meaning::Reply);
    let plain = (0..Control::PLAIN.len()).prop_map(|n| Control::PLAIN[n].clone());
    let other = prop_oneof![
        Just(Control::Correction(None)),
        reading().prop_map(|m| Control::Correction(Some(Box::new(m)))),
        place().prop_map(|m| Control::Correction(Some(Box::new(m)))),
        Just(Control::Test(TestKind::R1R2)),
        Just(Control::Test(TestKind::RingR2)),
        Just(Control::Test(TestKind::Insulation(Between::LineNeutral))),
        Just(Control::Test(TestKind::Zs)),
        Just(Control::Stage(Stage::Insulation)),
        Just(Control::Stage(Stage::Live)),
        (0..9_u8).prop_map(Control::Reason),
        (0..9_u8).prop_map(Control::LeaveOut),
        (0..9_u8).prop_map(Control::KeepFor),
        (0..9_u16).prop_map(|n| Control::SameAs(PointNo(n))),
    ];
    prop_oneof![
        4 => reading(),
        2 => place(),
        4 => reply,
        3 => plain.prop_map(Meaning::Control),
        2 => other.prop_map(Meaning::Control),
        1 => Just(Meaning::Nothing("noise".into())),
        1 => (reading(), reading()).prop_map(|(a, b)| Meaning::Ambiguous(vec![a, b])),
        1 => (reading(), place()).prop_map(|(a, b)| Meaning::Ambiguous(vec![a, b])),
        1 => Just(Meaning::Ambiguous(vec![
            Meaning::Reply(Reply::Affirm),
            Meaning::Reply(Reply::Negative)
        ])),
    ]
}

fn deed() -> impl Strategy<Value = Deed> {
    let world = prop_oneof![
        Just(Event::DeviceLost),
        Just(Event::DeviceFound),
        (0..100_u64).prop_map(|n| Event::Tick(n * 1000)),
        (0..=100_u8).prop_map(Event::Level),
        any::<bool>().prop_map(Event::Speaking),
        Just(Event::Redraw),
        Just(Event::ClockChanged("back by an hour".into())),
        Just(Event::LeftLong),
        any::<bool>().prop_map(Event::Deaf),
        Just(Event::SoundLost(400)),
        Just(Event::NoSpeech),
        Just(Event::Kept(7)),
        Just(Event::NotKept("stray".into())),
    ];
    prop_oneof![
        6 => key().prop_map(Deed::Key),
        6 => meaning().prop_map(Deed::Hear),
        14 => Just(Deed::Sensible),
        1 => world.prop_map(Deed::World),
        1 => Just(Deed::DiskFull),
    ]
}

fn heard(meaning: Meaning) -> Event {
    Event::Heard(Heard {
        hypotheses: vec![Hypothesis {
            words: "words".into(),
            meaning: meaning.clone(),
            margin: 0.0,
        }],
        meaning,
        clip: None,
    })
}

/// The figure half typed, as the screen shows it.
fn typed(state: &State) -> Option<String> {
    screen(state, 40, 15)
        .iter()
        .find_map(|l| l.text.strip_prefix("typed: ").map(str::to_owned))
}

/// What a tester with nothing but the numeric keypad would press.
fn sensible_keys(state: &State) -> Vec<Key> {
    match state.top() {
        Prompt::Ask(ask) if ask.target.test.unit().is_none() => vec![Key::Enter],
        Prompt::Ask(ask) => {
            let expected = &ask.expected;
            let value = expected.low.or(expected.high).map(|v| v.to_string());
            let mut keys = Vec::new();
            // A half-typed figure is rubbed out; minus does that until nothing is left, and once
            // more makes "less than", which a further one takes away.
            if let Some(typed) = typed(state) {
                let whole = typed.starts_with('o');
                let n = if whole { 1 } else { typed.chars().count() - 1 };
                keys.extend(std::iter::repeat_n(Key::Minus, n));
            }
            for c in value.unwrap_or_else(|| "1.00".into()).chars() {
                keys.push(match c {
                    '.' => Key::Point,
                    d => Key::Digit(d.to_digit(10).unwrap_or(0) as u8),
                });
            }
            keys.push(Key::Enter);
            keys
        }
        Prompt::Dead(dead) if dead.step == DeadStep::Method => vec![Key::Digit(1)],
        Prompt::Question(_) => vec![Key::Digit(1)],
        Prompt::List(list) => {
            let reason = list
                .items
                .iter()
                .any(|(_, c)| matches!(c, Choice::Keep(..) | Choice::Skip(_)));
            vec![if reason { Key::Digit(1) } else { Key::Minus }]
        }
        Prompt::Page(_) | Prompt::Call(_) => vec![Key::Minus, Key::Minus],
        Prompt::Menu => vec![Key::Star],
        Prompt::StopAsk => vec![Key::Minus],
        _ => vec![Key::Enter],
    }
}

/// What a tester with nothing but a voice would say.
fn sensible_words(state: &State) -> Meaning {
    match state.top() {
        Prompt::Ask(ask) if ask.target.test.unit().is_none() => {
            Meaning::Control(Control::Confirmed)
        }
        Prompt::Ask(ask) if ask.by_digit && typed(state).is_some() => Meaning::Reply(Reply::Done),
        Prompt::Ask(ask) => {
            let value = ask.expected.low.or(ask.expected.high);
            let text = value.map_or("1.00".into(), |v| v.to_string());
            Meaning::Reading(text.parse().expect("a reading"))
        }
        Prompt::Dead(dead) if dead.step == DeadStep::Method => Meaning::Reply(Reply::Pick(1)),
        Prompt::Question(_) => Meaning::Reply(Reply::KeepAsFound),
        Prompt::List(list) => {
            let reason = list
                .items
                .iter()
                .any(|(_, c)| matches!(c, Choice::Keep(..) | Choice::Skip(_)));
            if reason {
                Meaning::Control(Control::Reason(1))
            } else {
                Meaning::Control(Control::Disregard)
            }
        }
        Prompt::Page(_) | Prompt::Menu | Prompt::Call(_) => Meaning::Control(Control::Disregard),
        Prompt::Standby => Meaning::Control(Control::Resume),
        Prompt::StopAsk => Meaning::Reply(Reply::Negative),
        _ => Meaning::Reply(Reply::Affirm),
    }
}

/// A bench that checks every record against what led to it.
struct Watched {
    bench: Bench,
    seen: usize,
    standing: Standing,
    affirmed: Vec<String>,
}

impl Watched {
    fn new(plan: &Job) -> Self {
        let mut setup = Setup::new(plan.clone(), "A. Tester", Settings::default());
        setup.voice = Some("test voice".into());
        let bench = Bench::with_muted(setup, Standing::new(), Vec::new());
        Self {
            bench,
            seen: 0,
            standing: Standing::new(),
            affirmed: Vec::new(),
        }
    }

    fn take(&mut self, event: Event) {
        let yes = matches!(
            &event,
            Event::Key(Key::Enter | Key::Letter('y'))
                | Event::Heard(Heard {
                    meaning: Meaning::Reply(Reply::Affirm | Reply::Done),
                    ..
                })
        );
        if let (true, Prompt::Confirm(c)) = (yes, self.bench.state().top()) {
            self.affirmed.push(format!("{} = {}", c.target, c.entry));
        }
        self.bench.take(event);
        while self.seen < self.bench.records.len() {
            let record = self.bench.records[self.seen].clone();
            self.seen += 1;
            self.check(&record);
            self.standing.apply(self.seen as u64, &record);
        }
    }

    fn check(&self, record: &Record) {
        match record {
            Record::Reading(reading) => {
                let value = handsfull::domain::standing::value_of(reading).expect("a value");
                let text = match value {
                    handsfull::domain::kept::Value::Reading(r) => r.to_string(),
                    handsfull::domain::kept::Value::Ticked(true) => "in order".into(),
                    handsfull::domain::kept::Value::Ticked(false) => "NOT in order".into(),
                };
                let kept = format!("{} = {text}", reading.target);
                assert!(self.affirmed.contains(&kept), "{kept} was never affirmed");
                if reading.verdict.questioned() || !reading.findings.is_empty() {
                    assert!(
                        reading.kept_as_found.is_some(),
                        "{kept}: kept without a reason"
                    );
                }
                self.acknowledged(&reading.target);
            }
            Record::StageClosed {
                stage,
                board,
                circuit,
            } => {
                let here = |w: &&Work| w.board == *board && w.circuit == *circuit;
                if circuit.is_some() {
                    let left = self.standing.works_in.iter().find(here);
                    assert!(
                        left.is_none(),
                        "{stage:?} of {board:?}/{circuit:?} closed with {left:?} in"
                    );
                }
            }
            Record::Acknowledged {
                stage: stage @ (Stage::CloseUp | Stage::Energise),
                ..
            } => assert!(
                self.standing.works_in.is_empty(),
                "{stage:?} with {:?} in",
                self.standing.works_in
            ),
            _ => {}
        }
    }

    fn acknowledged(&self, target: &handsfull::domain::test::Target) {
        let has = |stage: Stage| {
            self.standing
                .acknowledged
                .keys()
                .any(|(s, board, circuit)| {
                    *s == stage
                        && circuit.is_none()
                        && (board.is_none() || target.board.is_none() || *board == target.board)
                })
        };
        let stage = target.test.stage();
        assert!(
            has(stage),
            "{target}: the reminders of its stage were not acknowledged"
        );
        if stage == Stage::Live {
            assert!(
                has(Stage::Energise),
                "{target}: the live gate was not passed"
            );
        } else {
            assert!(
                has(Stage::Isolation),
                "{target}: isolation was not acknowledged"
            );
            let proved = match &target.board {
                Some(board) => self.standing.proved_dead.contains_key(board),
                None => !self.standing.proved_dead.is_empty(),
            };
            assert!(proved, "{target}: not proved dead");
        }
    }

    fn do_it(&mut self, deed: &Deed) {
        match deed {
            Deed::Key(key) => self.take(Event::Key(*key)),
            Deed::Hear(meaning) => self.take(heard(meaning.clone())),
            Deed::Sensible => {
                for key in sensible_keys(self.bench.state()) {
                    self.take(Event::Key(key));
                }
            }
            Deed::World(event) => self.take(event.clone()),
            Deed::DiskFull => self.bench.refusals = 1,
        }
    }
}

fn plan(which: u8) -> Job {
    job(match which % 4 {
        0 => include_str!("../fixtures/workshop.toml"),
        1 => include_str!("../fixtures/press-hall.toml"),
        2 => include_str!("../fixtures/barn.toml"),
        _ => include_str!("../fixtures/garden.toml"),
    })
}

proptest! {
    #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn nothing_is_kept_unaffirmed_unacknowledged_or_with_a_link_in(
        which in 0..4_u8,
        deeds in prop::collection::vec(deed(), 0..250),
    ) {
        let mut watched = Watched::new(&plan(which));
        for deed in &deeds {
            watched.do_it(deed);
            let lines = screen(watched.bench.state(), 40, 15);
            prop_assert_eq!(lines.len(), 15);
            prop_assert!(lines.iter().all(|l| l.text.chars().count() <= 40));
        }
    }

    #[test]
    fn every_state_can_be_left_by_keypad_alone_and_by_voice_alone(
        which in 0..4_u8,
        deeds in prop::collection::vec(deed(), 0..120),
    ) {
        let mut watched = Watched::new(&plan(which));
        for deed in &deeds {
            watched.do_it(deed);
        }
        let state = watched.bench.state().clone();
        prop_assert!(ends(state.clone(), by_key), "by keypad: {:?}", state.top());
        prop_assert!(ends(state.clone(), by_voice), "by voice: {:?}", state.top());
        let (after, _) = handsfull::session::step(state, Event::Stop(StopCause::Power));
        prop_assert!(settled(after).ended());
    }

    #[test]
    fn from_every_state_the_job_can_be_finished_by_keypad_alone_and_by_voice_alone(
        deeds in prop::collection::vec(deed(), 0..60),
        voice in any::<bool>(),
    ) {
        let mut watched = Watched::new(&plan(3));
        for deed in &deeds {
            watched.do_it(deed);
        }
        watched.bench.refusals = 0;
        for _ in 0..2_000 {
            let state = watched.bench.state();
            if state.ended() || matches!(state.top(), Prompt::Finish) {
                break;
            }
            if voice {
                let words = sensible_words(state);
                watched.take(heard(words));
            } else {
                for key in sensible_keys(state) {
                    watched.take(Event::Key(key));
                }
            }
        }
        let state = watched.bench.state();
        prop_assert!(
            state.ended() || matches!(state.top(), Prompt::Finish),
            "stuck at {:?}", state.top()
        );
    }
}

/// Answers every record that is on its way.
fn settled(mut state: State) -> State {
    let mut no = state.standing().last;
    while state.awaiting() {
        no += 1;
        state = handsfull::session::step(state, Event::Kept(no)).0;
    }
    state
}

fn ends(mut state: State, way: fn(&State) -> Vec<Event>) -> bool {
    for _ in 0..12 {
        if state.ended() {
            return true;
        }
        for event in way(&state) {
            state = settled(handsfull::session::step(state, event).0);
        }
    }
    state.ended()
}

fn by_key(state: &State) -> Vec<Event> {
    match state.top() {
        Prompt::StopAsk | Prompt::Finish | Prompt::Standby => vec![Event::Key(Key::Enter)],
        Prompt::Menu => vec![Event::Key(Key::Digit(9))],
        _ => vec![Event::Key(Key::Star)],
    }
}

fn by_voice(state: &State) -> Vec<Event> {
    vec![heard(match state.top() {
        Prompt::StopAsk | Prompt::Finish => Meaning::Reply(Reply::Affirm),
        Prompt::Standby => Meaning::Control(Control::Resume),
        _ => Meaning::Control(Control::Stop),
    })]
}
