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
    hearing::Hearing,
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
            paused: false,
            muted_until: None,
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
    paused: bool,
    muted_until: Option<Instant>,
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
        loop {
            let mut events = match self.take_orders(Some(&mut front)) {
                Ok(events) => events,
                Err(()) => return End::Quit,
            };
            let piece = source.read();
            let over = piece == Piece::End;
            match piece {
                Piece::Sound(sound) if self.deaf() => {
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
        if self.mouth.load(Ordering::Relaxed) {
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
                Order::HoldToTalk(on) => self.hold = on,
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
                Order::Once => front.once(),
                Order::Pause(_) => front.forget(),
                Order::Context(_) => {}
            }
        }
    }

    fn tell(&self, event: FrontEvent) -> Result<(), ()> {
        let told = match event {
            FrontEvent::Level(level) => VoiceEvent::Level(level),
            FrontEvent::Began | FrontEvent::Dropped => return Ok(()),
            FrontEvent::Utterance(utterance) => {
                // Decoding takes a moment: whoever watches should know that speech was noticed.
                let Utterance { clip, .. } = &utterance;
                let heard = self.hearing.hear(self.context, &utterance);
                let heard = heard.unwrap_or_else(|error| Heard {
                    hypotheses: Vec::new(),
                    meaning: Meaning::Nothing(error.to_string()),
                    clip: None,
                });
                VoiceEvent::Heard(heard, clip.clone())
            }
        };
        self.tell.send(told).map_err(drop)
    }
}
