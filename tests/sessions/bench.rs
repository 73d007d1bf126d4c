//! A session on the bench: events in by hand, records into a list, the transcript out.

use handsfull::{
    domain::{plan::Job, record::Record, standing::Standing},
    session::{self, Effect, Event, Key, Prompt, Settings, Setup, State, transcript::Transcript},
    speech::meaning::{Heard, Hypothesis, Meaning},
    terminal::{
        keymap::Keymap,
        script::{Step, steps},
    },
};

/// A session with everything it has kept.
#[allow(dead_code)] // not every test looks at everything
pub struct Bench {
    state: Option<State>,
    /// The journal refuses the next records, as many as this.
    pub refusals: usize,
    pub records: Vec<Record>,
    pub said: Vec<String>,
    pub quit: bool,
    pub text: String,
    /// No transcript is written.
    pub mute: bool,
    transcript: Transcript,
}

/// A job from the fixtures of this folder.
pub fn job(text: &str) -> Job {
    handsfull::plan::parse(text, "test.toml").expect("a job")
}

impl Bench {
    /// Begins a session with a voice on an empty log.
    pub fn new(job: Job) -> Self {
        let mut setup = Setup::new(job, "A. Tester", Settings::default());
        setup.voice = Some("test voice".into());
        setup.program = "0.0.0".into();
        Self::with(setup, Standing::new())
    }

    pub fn with(setup: Setup, standing: Standing) -> Self {
        let (state, effects) = session::begin(setup, standing);
        let mut bench = Self {
            state: Some(state),
            refusals: 0,
            records: Vec::new(),
            said: Vec::new(),
            quit: false,
            text: String::new(),
            mute: false,
            transcript: Transcript::new(40),
        };
        bench.carry_out(effects);
        bench.show(&Event::Redraw);
        bench
    }

    /// Like [`Bench::with`], without a transcript, going on with the records of an earlier session.
    pub fn with_muted(setup: Setup, standing: Standing, records: Vec<Record>) -> Self {
        let (state, effects) = session::begin(setup, standing);
        let mut bench = Self {
            state: Some(state),
            refusals: 0,
            records,
            said: Vec::new(),
            quit: false,
            text: String::new(),
            mute: true,
            transcript: Transcript::new(40),
        };
        bench.carry_out(effects);
        bench
    }

    fn carry_out(&mut self, effects: Vec<Effect>) {
        let mut waiting = std::collections::VecDeque::from(effects);
        while let Some(effect) = waiting.pop_front() {
            match effect {
                Effect::Keep(record) => {
                    let answer = if self.refusals > 0 {
                        self.refusals -= 1;
                        Event::NotKept("the disk is full".into())
                    } else {
                        self.records.push(*record);
                        Event::Kept(self.records.len() as u64)
                    };
                    waiting.extend(self.step(answer));
                }
                Effect::Say(text) if !self.mute => self.said.push(text),
                Effect::Quit => self.quit = true,
                _ => {}
            }
        }
    }

    fn step(&mut self, event: Event) -> Vec<Effect> {
        let state = self.state.take().expect("a state between steps");
        let (state, effects) = session::step(state, event);
        self.state = Some(state);
        effects
    }

    pub fn state(&self) -> &State {
        self.state.as_ref().expect("a state between steps")
    }

    fn show(&mut self, event: &Event) {
        if self.mute {
            return;
        }
        let state = self.state.as_ref().expect("a state between steps");
        for line in self.transcript.state(state, event) {
            self.text.push_str(&line);
            self.text.push('\n');
        }
    }

    /// Takes one event.
    pub fn take(&mut self, event: Event) {
        if !self.mute {
            for line in self.transcript.event(&event) {
                self.text.push_str(&line);
                self.text.push('\n');
            }
        }
        let effects = self.step(event.clone());
        self.carry_out(effects);
        self.show(&event);
    }

    /// Lines of keys and `say:` lines, as on a pipe.
    pub fn script(&mut self, text: &str) {
        for line in text.lines() {
            for step in steps(line, &Keymap::default()) {
                match step {
                    Step::Key(key) => self.take(Event::Key(key)),
                    Step::Say(words) => self.say(&words),
                    Step::Hear | Step::Unknown(_) => panic!("not for the bench: {line}"),
                }
            }
        }
    }

    /// Words as heard in the context of the prompt.
    pub fn say(&mut self, words: &str) {
        let meaning = handsfull::speech::understand(self.state().context(), words);
        self.hear(words, meaning);
    }

    /// Words with the meaning the ear decided on.
    pub fn hear(&mut self, words: &str, meaning: Meaning) {
        self.take(Event::Heard(Heard {
            hypotheses: vec![Hypothesis {
                words: words.into(),
                meaning: meaning.clone(),
                margin: 0.0,
            }],
            meaning,
            clip: None,
        }));
    }

    /// Presses enter through gates, proving dead and works until a reading is asked for; gives the
    /// number of presses.
    pub fn reach_reading(&mut self) -> usize {
        for presses in 0..200 {
            match self.state().top() {
                Prompt::Ask(_) | Prompt::Finish => return presses,
                Prompt::Dead(dead) if dead.method.is_none() => {
                    self.take(Event::Key(Key::Digit(1)));
                }
                _ => self.take(Event::Key(Key::Enter)),
            }
        }
        panic!("no reading is asked for:\n{}", self.text);
    }
}
