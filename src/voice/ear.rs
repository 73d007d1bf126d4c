//! Live listening on a thread of its own: sound in, events out.
//!
//! It promises that listening never holds up the caller, that a microphone that goes away is told
//! about and looked for again until it is back, and that the tool does not hear itself. It leaves
//! out what the session does with what was heard.

use std::{
    sync::{
        Arc,
        atomic::{AtomicBool, Ordering},
        mpsc::{Receiver, Sender, TryRecvError, channel},
    },
    thread::{self, JoinHandle},
    time::{Duration, Instant},
};

use super::{
    front::{Front, FrontEvent, Utterance, activity::Settings},
    hearing::{Fit, Hearing},
    recogniser::RecogniserError,
    source::{Piece, Source},
};
use crate::speech::{Context, Heard, Meaning};

/// What the ear tells.
#[derive(Debug, Clone, PartialEq)]
pub enum VoiceEvent {
    /// Input level in dBFS, about ten times a second.
    Level(f32),
    /// Somebody began to speak, or stopped.
    Speaking(bool),
    /// An utterance with its meaning, and its sound (16 kHz, mono) for keeping.
    Heard(Heard, Vec<i16>),
    /// Milliseconds of sound that were lost because the machine was too slow.
    Dropped(u64),
    /// What began like speech was too short to be any, or silence while the key was down.
    NoSpeech,
    /// Nothing is listened to, because the tool itself sounds; or listening goes on.
    Deaf(bool),
    /// The source is gone; how, in words. It is looked for again.
    Lost(String),
    /// The source is there (again); its name.
    Found(String),
    /// A recording is over.
    Over,
}

/// What the ear is told.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Order {
    Context(Context),
    HoldToTalk(bool),
    Press,
    Release,
    Once,
    Pause(bool),
}

/// Opens the source; called again whenever it was lost.
pub type Opener = Box<dyn FnMut() -> Result<Box<dyn Source>, String> + Send>;

/// How long until a lost source is looked for again.
const AGAIN: Duration = Duration::from_secs(2);
/// How long the room is given to fall silent after the tool spoke.
const ECHO: Duration = Duration::from_millis(250);

/// The ear of a session. Dropping it ends the thread.
#[derive(Debug)]
pub struct Ear {
    orders: Option<Sender<Order>>,
    thread: Option<JoinHandle<()>>,
}

impl Ear {
    /// Starts listening. `mouth` is true while the tool itself can be heard.
    #[must_use]
    pub fn start(
        hearing: Arc<Hearing>,
        open: Opener,
        context: Context,
        mouth: Arc<AtomicBool>,
    ) -> (Self, Receiver<VoiceEvent>) {
        let (orders, taken) = channel();
        let (tell, events) = channel();
        let listener = Listener {
            hearing,
            open,
            context,
            mouth,
            orders: taken,
            tell,
            hold: false,
            asked: false,
            paused: false,
            muted_until: None,
            guess: None,
            guessing: Arc::default(),
        };
        let thread = thread::Builder::new()
            .name("ear".into())
            .spawn(move || listener.run())
            .ok();
        let ear = Self {
            orders: Some(orders),
            thread,
        };
        (ear, events)
    }

    /// What may be said from now on.
    pub fn listen_for(&self, context: Context) {
        self.order(Order::Context(context));
    }

    /// Listens only while the key is held (or once, see [`Ear::once`]), or always.
    pub fn hold_to_talk(&self, on: bool) {
        self.order(Order::HoldToTalk(on));
    }

    /// The key went down.
    pub fn press(&self) {
        self.order(Order::Press);
    }

    /// The key went up.
    pub fn release(&self) {
        self.order(Order::Release);
    }

    /// With hold-to-talk: listens to one utterance, for terminals that tell no key's release.
    pub fn once(&self) {
        self.order(Order::Once);
    }

    /// Stops listening, or goes on.
    pub fn pause(&self, pause: bool) {
        self.order(Order::Pause(pause));
    }

    fn order(&self, order: Order) {
        if let Some(orders) = &self.orders {
            // A thread that ended has said why.
            let _gone = orders.send(order);
        }
    }
}

impl Drop for Ear {
    fn drop(&mut self) {
        self.orders = None;
        if let Some(thread) = self.thread.take() {
            let _ended = thread.join();
        }
    }
}

struct Listener {
    hearing: Arc<Hearing>,
    open: Opener,
    context: Context,
    mouth: Arc<AtomicBool>,
    orders: Receiver<Order>,
    tell: Sender<VoiceEvent>,
    hold: bool,
    /// One utterance was asked for by key and is not over.
    asked: bool,
    paused: bool,
    muted_until: Option<Instant>,
    guess: Option<Guess>,
    /// One more holder a guess that runs.
    guessing: Arc<()>,
}

/// An utterance that is being recognised while the pause after it is waited for.
struct Guess {
    context: Context,
    samples: Vec<i16>,
    answer: Receiver<Result<Fit, RecogniserError>>,
}

impl Guess {
    /// How the utterance was explained, when it is the one that was guessed. How long it was loud,
    /// and by a key, is known at its end only.
    fn fit(self, context: Context, utterance: &Utterance) -> Option<Fit> {
        if self.context != context || self.samples != utterance.samples {
            return None;
        }
        let mut fit = self.answer.recv().ok()?.ok()?;
        // Without a measure of any sounds its length is taken from the utterance, too.
        if fit.anything.words.is_empty() && fit.loud != utterance.loud {
            return None;
        }
        (fit.loud, fit.held) = (utterance.loud, utterance.held);
        Some(fit)
    }
}

/// Why a loop ended.
enum End {
    /// Nobody listens to the ear any more.
    Quit,
    /// The source is gone; how.
    Lost(String),
}

impl Listener {
    fn run(mut self) {
        if let Err(error) = self.hearing.prepare(self.context) {
            let _gone = self.tell.send(VoiceEvent::Lost(error.to_string()));
            return;
        }
        let mut told = String::new();
        loop {
            let end = match (self.open)() {
                Ok(source) => {
                    told.clear();
                    self.listen(source)
                }
                Err(why) => End::Lost(why),
            };
            match end {
                End::Quit => return,
                End::Lost(why) => {
                    // Each trouble is told once, however often it is tried again.
                    if why != told && self.tell.send(VoiceEvent::Lost(why.clone())).is_err() {
                        return;
                    }
                    told = why;
                }
            }
            let until = Instant::now() + AGAIN;
            while Instant::now() < until {
                if self.take_orders(None).is_err() {
                    return;
                }
                thread::sleep(Duration::from_millis(50));
            }
        }
    }

    fn listen(&mut self, mut source: Box<dyn Source>) -> End {
        let rate = source.rate();
        let Some(mut front) = Front::new(rate, Settings::default()) else {
            return End::Lost(format!("{}: {rate} samples a second", source.name()));
        };
        front.hold_to_talk(self.hold);
        if self.tell.send(VoiceEvent::Found(source.name())).is_err() {
            return End::Quit;
        }
        let mut speaking = false;
        let mut deaf = false;
        loop {
            let mut events = match self.take_orders(Some(&mut front)) {
                Ok(events) => events,
                Err(()) => return End::Quit,
            };
            let piece = source.read();
            let over = piece == Piece::End;
            if self.deaf() != deaf {
                deaf = !deaf;
                if self.tell.send(VoiceEvent::Deaf(deaf)).is_err() {
                    return End::Quit;
                }
            }
            match piece {
                Piece::Sound(sound) if deaf => {
                    front.forget();
                    drop(sound);
                }
                Piece::Sound(sound) => front.push(&sound, &mut events),
                Piece::Nothing => {}
                Piece::End => front.finish(&mut events),
                Piece::Lost(why) => return End::Lost(why),
            }
            let dropped = source.dropped();
            if dropped > 0 {
                let lost = VoiceEvent::Dropped(dropped * 1_000 / u64::from(rate));
                if self.tell.send(lost).is_err() {
                    return End::Quit;
                }
            }
            for event in events {
                if self.tell(event).is_err() {
                    return End::Quit;
                }
            }
            if front.speaking() != speaking {
                speaking = front.speaking();
                if self.tell.send(VoiceEvent::Speaking(speaking)).is_err() {
                    return End::Quit;
                }
            }
            if over {
                let _gone = self.tell.send(VoiceEvent::Over);
                return End::Quit;
            }
        }
    }

    /// Whether what comes in now is not to be listened to.
    fn deaf(&mut self) -> bool {
        let sounding = self.mouth.load(Ordering::Relaxed);
        if self.asked {
            // By key: the tool fell silent for it, and only the short tone that says so is not
            // listened to. People press and speak at once.
            self.muted_until = None;
            return sounding || self.paused;
        }
        if sounding {
            self.muted_until = Some(Instant::now() + ECHO);
        }
        let muted = self.muted_until.is_some_and(|until| Instant::now() < until);
        if !muted {
            self.muted_until = None;
        }
        muted || self.paused
    }

    /// `Err` when the ear was dropped.
    fn take_orders(&mut self, mut front: Option<&mut Front>) -> Result<Vec<FrontEvent>, ()> {
        let mut events = Vec::new();
        loop {
            let order = match self.orders.try_recv() {
                Ok(order) => order,
                Err(TryRecvError::Empty) => return Ok(events),
                Err(TryRecvError::Disconnected) => return Err(()),
            };
            match order {
                Order::Context(context) => {
                    self.context = context;
                    // Opened now, so that the utterance need not wait; a failure shows then.
                    let _later = self.hearing.prepare(context);
                }
                Order::HoldToTalk(on) => {
                    self.hold = on;
                    self.asked = false;
                }
                Order::Pause(pause) => self.paused = pause,
                Order::Press | Order::Release | Order::Once => {}
            }
            let Some(front) = front.as_deref_mut() else {
                continue;
            };
            match order {
                Order::HoldToTalk(on) => front.hold_to_talk(on),
                Order::Press => front.press(&mut events),
                Order::Release => front.release(&mut events),
                // A second press ends what the first began.
                Order::Once if self.asked => {
                    let before = events.len();
                    front.enough(&mut events);
                    let said = |e: &FrontEvent| matches!(e, FrontEvent::Utterance(_));
                    if !events[before..].iter().any(said) {
                        self.asked = false;
                        events.truncate(before);
                        events.push(FrontEvent::Dropped);
                    }
                }
                Order::Once => {
                    front.once();
                    self.asked = self.hold;
                }
                Order::Pause(_) => front.forget(),
                Order::Context(_) => {}
            }
        }
    }

    /// Recognises ahead, on a thread of its own: the same sound in the same context gives the same
    /// answer, so nothing but time is gained or lost. Two at the most: one that speech overtook may
    /// still be running on a slow machine.
    fn begin_guess(&mut self, utterance: Utterance) {
        if Arc::strong_count(&self.guessing) > 2 {
            return;
        }
        let running = Arc::clone(&self.guessing);
        let (send, answer) = channel();
        let (hearing, context) = (Arc::clone(&self.hearing), self.context);
        let samples = utterance.samples.clone();
        let begun = thread::Builder::new().name("guess".into()).spawn(move || {
            // Nobody waits for it any more when speech went on.
            let _unwanted = send.send(hearing.fit(context, &utterance));
            drop(running);
        });
        self.guess = begun.is_ok().then_some(Guess {
            context,
            samples,
            answer,
        });
    }

    fn tell(&mut self, event: FrontEvent) -> Result<(), ()> {
        let told = match event {
            FrontEvent::Level(level) => VoiceEvent::Level(level),
            FrontEvent::Likely(utterance) => {
                self.begin_guess(utterance);
                return Ok(());
            }
            // Told by `Speaking`.
            FrontEvent::Began => return Ok(()),
            // A knock before the words: it goes on listening.
            FrontEvent::Dropped if self.asked => return Ok(()),
            FrontEvent::Dropped => VoiceEvent::NoSpeech,
            FrontEvent::Utterance(utterance) => {
                self.asked = false;
                let guessed = self.guess.take();
                let guessed = guessed.and_then(|g| g.fit(self.context, &utterance));
                let heard = match guessed {
                    Some(fit) => Ok(self.hearing.meaning(self.context, &fit)),
                    None => self.hearing.hear(self.context, &utterance),
                };
                // A failure of the recogniser is told like a mishearing.
                let heard = heard.unwrap_or_else(|error| Heard {
                    hypotheses: Vec::new(),
                    meaning: Meaning::Nothing(error.to_string()),
                    clip: None,
                });
                VoiceEvent::Heard(heard, utterance.clip)
            }
        };
        self.tell.send(told).map_err(drop)
    }
}
