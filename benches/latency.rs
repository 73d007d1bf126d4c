//! From the end of speech to the start of the read-back, through the real pipeline at the pace of
//! speech: front end, recogniser with the committed voice, session, read-back clips up to the moment
//! their samples would be handed to a sound device. And what listening to a quiet room costs.
//!
//! Prints; judges nothing. Without libvosk it says so and ends. `HANDSFULL_ROUNDS` is how often
//! the seven recorded readings are said in each way of listening (6 without it: 42 utterances).

use std::{
    sync::{
        Arc, Mutex,
        atomic::{AtomicBool, Ordering},
        mpsc::{RecvTimeoutError, Sender, channel},
    },
    thread,
    time::{Duration, Instant},
};

use handsfull::{
    domain::standing::Standing,
    plan, rehearsal,
    session::{self, Effect, Event, Key, Prompt, Settings, Setup, State, screen::screen},
    speech::{Context, Phrases, lexicon::Lexicon},
    voice::{
        ear::{Ear, VoiceEvent},
        hearing::Hearing,
        ready,
        source::{Piece, Source},
        speaker::{Prompter, clips},
    },
};

const SAID: [&str; 7] = [
    "bond",
    "lights",
    "lights-again",
    "lights-slam",
    "r1r2-first",
    "r1r2-second",
    "r1r2-slip",
];
/// A piece as a microphone gives it: ten milliseconds.
const PIECE: usize = clips::RATE as usize / 100;
/// From the end of speech to the second press of the key; a guess at a thumb.
const THUMB: Duration = Duration::from_millis(100);

/// A room with somebody in it who speaks when told to.
struct Room {
    began: Instant,
    given: u64,
    dice: u32,
    line: Arc<Mutex<Vec<f32>>>,
    saying: bool,
    ended: Sender<Instant>,
    over: Arc<AtomicBool>,
}

impl Room {
    /// Quiet noise at about -62 dBFS.
    fn noise(&mut self) -> f32 {
        self.dice = self
            .dice
            .wrapping_mul(1_664_525)
            .wrapping_add(1_013_904_223);
        ((self.dice >> 8) as f32 / 8_388_608.0 - 1.0) * 0.0014
    }
}

impl Source for Room {
    fn rate(&self) -> u32 {
        clips::RATE
    }

    fn read(&mut self) -> Piece {
        if self.over.load(Ordering::Relaxed) {
            return Piece::End;
        }
        self.given += 1;
        let due = self.began + Duration::from_millis(10 * self.given);
        thread::sleep(due.saturating_duration_since(Instant::now()));
        let line = Arc::clone(&self.line);
        let mut line = line
            .lock()
            .unwrap_or_else(std::sync::PoisonError::into_inner);
        let n = line.len().min(PIECE);
        let mut piece: Vec<f32> = line.drain(..n).collect();
        let over = self.saying && line.is_empty();
        self.saying = !line.is_empty();
        drop(line);
        for sample in &mut piece {
            *sample += self.noise();
        }
        while piece.len() < PIECE {
            piece.push(self.noise());
        }
        if over {
            // Its last sample leaves the microphone now.
            let _ = self.ended.send(Instant::now());
        }
        Piece::Sound(piece)
    }

    fn name(&self) -> String {
        "room".into()
    }
}

/// A clip up to its last audible sample: where speech ends.
fn speech(name: &str) -> Vec<f32> {
    let samples = rehearsal::clip(name)
        .map(clips::samples)
        .unwrap_or_default();
    let loudest = samples.iter().fold(0.0_f32, |m, s| m.max(s.abs()));
    let last = samples.iter().rposition(|s| s.abs() > loudest * 0.02);
    samples[..last.map_or(0, |at| at + 1)].to_vec()
}

/// The session at a reading in ohms.
fn at_reading() -> State {
    let text = include_str!("../tests/sessions/jobs/radial.toml");
    let job = plan::parse(text, "radial.toml").expect("a job");
    let mut setup = Setup::new(job, "A. Tester", Settings::default());
    setup.voice = Some("bench".into());
    let (state, _) = session::begin(setup, Standing::new());
    let mut state = take(state, Event::Kept(1)).0;
    while !matches!(state.top(), Prompt::Ask(_)) {
        let key = match state.top() {
            Prompt::Dead(dead) if dead.method.is_none() => Key::Digit(1),
            _ => Key::Enter,
        };
        state = take(state, Event::Key(key)).0;
    }
    state
}

/// Takes an event and answers every record; what is to be said at the end.
fn take(state: State, event: Event) -> (State, Option<String>) {
    let (mut state, mut effects) = session::step(state, event);
    let mut said = None;
    loop {
        for effect in &effects {
            if let Effect::Say(text) = effect {
                said = Some(text.clone());
            }
        }
        if !effects.iter().any(|e| matches!(e, Effect::Keep(_))) {
            return (state, said);
        }
        let no = state.standing().last + 1;
        (state, effects) = session::step(state, Event::Kept(no));
    }
}

fn load() -> String {
    let text = std::fs::read_to_string("/proc/loadavg").unwrap_or_default();
    text.split_whitespace().next().unwrap_or("?").to_owned()
}

/// Processor time of this process, in hundredths of a second.
fn ticks() -> u64 {
    let stat = std::fs::read_to_string("/proc/self/stat").unwrap_or_default();
    let after = stat.rsplit_once(')').map_or("", |(_, rest)| rest);
    // After the name come the state and ten more; then user and system time.
    let fields = after.split_whitespace().skip(11).take(2);
    fields.filter_map(|f| f.parse::<u64>().ok()).sum()
}

fn measure(hearing: &Arc<Hearing>, by_key: bool, rounds: usize) {
    let line = Arc::new(Mutex::new(Vec::new()));
    let over = Arc::new(AtomicBool::new(false));
    let (ended, ends) = channel();
    let mut room = Some(Room {
        began: Instant::now(),
        given: 0,
        dice: 7,
        line: Arc::clone(&line),
        saying: false,
        ended,
        over: Arc::clone(&over),
    });
    let open = move || {
        let room = room.take().ok_or("once only")?;
        Ok(Box::new(room) as Box<dyn Source>)
    };
    let before = load();
    let (ear, told) = Ear::start(
        Arc::clone(hearing),
        Box::new(open),
        Context::Ohms,
        Arc::default(),
    );
    ear.hold_to_talk(by_key);
    thread::sleep(Duration::from_millis(1500));
    let prompter = Prompter::new(0.8);
    let mut state = at_reading();
    let (mut times, mut understood, mut lost) = (Vec::new(), 0, 0);
    for name in SAID.iter().cycle().take(rounds * SAID.len()) {
        if by_key {
            ear.once();
        }
        while told.try_recv().is_ok() {}
        *line
            .lock()
            .unwrap_or_else(std::sync::PoisonError::into_inner) = speech(name);
        let end = ends.recv().unwrap_or_else(|_| Instant::now());
        let mut pressed = !by_key;
        loop {
            if !pressed && end.elapsed() >= THUMB {
                ear.once();
                pressed = true;
            }
            let event = match told.recv_timeout(Duration::from_millis(5)) {
                Ok(VoiceEvent::Heard(heard, _)) => Event::Heard(heard),
                Ok(_) => continue,
                Err(RecvTimeoutError::Timeout) if end.elapsed() < Duration::from_secs(5) => {
                    continue;
                }
                Err(_) => {
                    lost += 1;
                    break;
                }
            };
            let (next, said) = take(state, event);
            // Both the screen and the samples stand when the read-back starts.
            let lines = screen(&next, 40, 15);
            let samples = prompter.say(&said.unwrap_or_default());
            times.push(end.elapsed());
            understood += usize::from(matches!(next.top(), Prompt::Confirm(_)));
            assert!(!lines.is_empty() && !samples.is_empty());
            state = next;
            break;
        }
        // Not kept: the same reading is asked for again.
        while !matches!(state.top(), Prompt::Ask(_)) {
            state = take(state, Event::Key(Key::Minus)).0;
        }
        thread::sleep(Duration::from_millis(600));
    }
    over.store(true, Ordering::Relaxed);
    drop(ear);
    times.sort();
    let at = |p: usize| times.get((times.len() * p / 100).min(times.len().saturating_sub(1)));
    println!(
        "{}: {} utterances, {understood} read back, {lost} without an answer; p50 {:?}, p95 {:?}, \
         worst {:?} (load {before} before, {} after)",
        if by_key {
            "push-to-talk"
        } else {
            "open listening"
        },
        times.len(),
        at(50).copied().unwrap_or_default(),
        at(95).copied().unwrap_or_default(),
        at(100).copied().unwrap_or_default(),
        load(),
    );
}

/// Listening to a quiet room for a minute.
fn idle(hearing: &Arc<Hearing>) {
    let (ended, _ends) = channel();
    let over = Arc::new(AtomicBool::new(false));
    let mut room = Some(Room {
        began: Instant::now(),
        given: 0,
        dice: 7,
        line: Arc::default(),
        saying: false,
        ended,
        over: Arc::clone(&over),
    });
    let open = move || {
        let room = room.take().ok_or("once only")?;
        Ok(Box::new(room) as Box<dyn Source>)
    };
    let (ear, told) = Ear::start(
        Arc::clone(hearing),
        Box::new(open),
        Context::Ohms,
        Arc::default(),
    );
    thread::sleep(Duration::from_secs(2));
    let (mut state, before, began) = (at_reading(), ticks(), Instant::now());
    while began.elapsed() < Duration::from_secs(60) {
        if let Ok(VoiceEvent::Level(level)) = told.recv_timeout(Duration::from_millis(250)) {
            let percent = ((level + 60.0) / 60.0 * 100.0).clamp(0.0, 100.0) as u8;
            state = take(state, Event::Level(percent)).0;
            assert_eq!(screen(&state, 40, 15).len(), 15);
        }
    }
    let used = ticks() - before;
    over.store(true, Ordering::Relaxed);
    drop(ear);
    println!(
        "idle: {:.1} % of one core over 60 s of a quiet room (load {})",
        used as f64 / 60.0,
        load()
    );
}

fn main() {
    // `cargo test --benches` runs this too, with arguments of its own: it has nothing to test.
    if std::env::args().any(|a| a == "--test") {
        return;
    }
    let lexicon = Lexicon::built_in().expect("the built-in pronunciations");
    let phrases = Arc::new(Phrases::with_places(&[]).expect("the built-in grammars"));
    let began = Instant::now();
    let hearing = match ready::ready(phrases, &lexicon, None) {
        Ok(hearing) => Arc::new(hearing),
        Err(why) => return println!("nothing measured: {why}"),
    };
    println!("the voice was ready after {:?}", began.elapsed());
    let rounds = std::env::var("HANDSFULL_ROUNDS").ok();
    let rounds = rounds.and_then(|n| n.parse().ok()).unwrap_or(6);
    measure(&hearing, true, rounds);
    measure(&hearing, false, rounds);
    idle(&hearing);
    let status = std::fs::read_to_string("/proc/self/status").unwrap_or_default();
    for line in status.lines().filter(|l| l.starts_with("VmHWM")) {
        println!("peak memory: {}", line.trim_start_matches("VmHWM:").trim());
    }
}
