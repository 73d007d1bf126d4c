//! Keys, signals and what the ear sends, as one stream of events.
//!
//! Promises: nothing blocks longer than a tick, so keys and voice are live together; enter held
//! down counts once; suspend and resume leave the terminal as it was; TERM and HUP become events.
//! It leaves out what events mean.

use std::{
    io,
    sync::{
        Arc,
        atomic::{AtomicBool, Ordering},
        mpsc::Receiver,
    },
    time::{Duration, Instant},
};

use crossterm::{
    cursor,
    event::{self, Event as Terminal, KeyCode, KeyEventKind, KeyModifiers},
    execute,
    terminal::{self, EnterAlternateScreen, LeaveAlternateScreen},
};
use rustix::event::{PollFd, PollFlags, Timespec, poll};
use signal_hook::{
    consts::{SIGCONT, SIGHUP, SIGTERM, SIGTSTP},
    flag,
    low_level::emulate_default_handler,
};

use super::keymap::Keymap;
use crate::session::{Event, Key, StopCause};

/// How long one wait lasts. Long enough to idle cheaply, short enough that speech is not held up.
const WAIT: Duration = Duration::from_millis(30);

/// Time between two ticks.
const TICK: Duration = Duration::from_millis(250);

/// A second enter within this time of the last is the key held down, not an answer.
const HELD: Duration = Duration::from_millis(150);

/// The signals that concern a session, as flags.
#[derive(Debug, Clone)]
pub struct Signals {
    term: Arc<AtomicBool>,
    hup: Arc<AtomicBool>,
    stop: Arc<AtomicBool>,
    cont: Arc<AtomicBool>,
}

impl Signals {
    /// Takes the signals over for the life of the program.
    ///
    /// # Errors
    /// When a handler cannot be set.
    pub fn take() -> io::Result<Self> {
        let flagged = |signal| {
            let flag = Arc::new(AtomicBool::new(false));
            flag::register(signal, Arc::clone(&flag)).map(|_| flag)
        };
        Ok(Self {
            term: flagged(SIGTERM)?,
            hup: flagged(SIGHUP)?,
            stop: flagged(SIGTSTP)?,
            cont: flagged(SIGCONT)?,
        })
    }

    /// Whether the program is asked to end, and why.
    #[must_use]
    pub fn ending(&self) -> Option<StopCause> {
        if self.term.swap(false, Ordering::Relaxed) {
            Some(StopCause::Power)
        } else if self.hup.swap(false, Ordering::Relaxed) {
            Some(StopCause::HangUp)
        } else {
            None
        }
    }
}

/// A terminal in raw mode on its other screen; given back when dropped.
pub struct Raw;

impl Raw {
    /// Takes the terminal.
    ///
    /// # Errors
    /// When it is none.
    pub fn enter() -> io::Result<Self> {
        terminal::enable_raw_mode()?;
        let entered = Self;
        execute!(io::stdout(), EnterAlternateScreen, cursor::Hide)?;
        Ok(entered)
    }

    fn leave() {
        // Giving back is best effort: the terminal may be gone.
        let _ = execute!(io::stdout(), cursor::Show, LeaveAlternateScreen);
        let _ = terminal::disable_raw_mode();
    }
}

impl Drop for Raw {
    fn drop(&mut self) {
        Self::leave();
    }
}

/// The stream of events of a session at a terminal.
pub struct Keyboard {
    keymap: Keymap,
    signals: Signals,
    ear: Option<Receiver<Event>>,
    began: Instant,
    ticked: Duration,
    entered: Option<Instant>,
    /// Something was read just now: there may be more.
    more: bool,
    /// The terminal must be drawn anew.
    redraw: bool,
}

impl Keyboard {
    /// A stream from the terminal, the signals, and the ear where there is one.
    #[must_use]
    pub fn new(keymap: Keymap, signals: Signals, ear: Option<Receiver<Event>>) -> Self {
        Self {
            keymap,
            signals,
            ear,
            began: Instant::now(),
            ticked: Duration::ZERO,
            entered: None,
            more: false,
            redraw: false,
        }
    }

    /// Whether the screen was lost (resized, suspended) since last asked.
    pub fn take_redraw(&mut self) -> bool {
        std::mem::take(&mut self.redraw)
    }

    /// The next event; `None` when the terminal is gone.
    pub fn next_event(&mut self) -> Option<Event> {
        loop {
            if let Some(cause) = self.signals.ending() {
                return Some(Event::Stop(cause));
            }
            if self.signals.stop.swap(false, Ordering::Relaxed) {
                self.suspend();
                return Some(Event::Redraw);
            }
            if self.signals.cont.swap(false, Ordering::Relaxed) {
                self.redraw = true;
                return Some(Event::Redraw);
            }
            if let Some(event) = self.ear.as_ref().and_then(|ear| ear.try_recv().ok()) {
                return Some(event);
            }
            // The wait is ours: a terminal that hung up must not be read, its reader never returns.
            let wait = if self.more { Duration::ZERO } else { WAIT };
            if hung_up_within(wait) {
                return Some(Event::Stop(StopCause::HangUp));
            }
            self.more = false;
            match event::poll(Duration::ZERO) {
                Ok(true) => {
                    // Several keys may have come at once; the next need not wait.
                    self.more = true;
                    if let Some(event) = self.read() {
                        return event;
                    }
                }
                Ok(false) => {}
                Err(e) if e.kind() == io::ErrorKind::Interrupted => {}
                Err(_) => return None,
            }
            let now = self.began.elapsed();
            if now.saturating_sub(self.ticked) >= TICK {
                self.ticked = now;
                return Some(Event::Tick(millis(now)));
            }
        }
    }

    /// What the terminal sent; the outer `None` when it means nothing here.
    fn read(&mut self) -> Option<Option<Event>> {
        match event::read() {
            Err(_) => Some(None),
            Ok(Terminal::Resize(..)) => {
                self.redraw = true;
                Some(Some(Event::Redraw))
            }
            Ok(Terminal::Key(key)) if key.kind != KeyEventKind::Release => {
                if key.code == KeyCode::Char('z') && key.modifiers == KeyModifiers::CONTROL {
                    self.suspend();
                    return Some(Some(Event::Redraw));
                }
                let key = self.keymap.key(key.code, key.modifiers)?;
                if key != Key::Enter {
                    // Another key in between: the next enter is a new press.
                    self.entered = None;
                } else if self.is_held() {
                    return None;
                }
                Some(Some(Event::Key(key)))
            }
            Ok(_) => None,
        }
    }

    /// An enter that follows the last one faster than a finger: the key is held down. It must not
    /// affirm what was put on the screen in between.
    fn is_held(&mut self) -> bool {
        let now = Instant::now();
        let held = self.entered.is_some_and(|last| now - last < HELD);
        self.entered = Some(now);
        held
    }

    fn suspend(&mut self) {
        Raw::leave();
        // Stops here until the shell continues it.
        let _ = emulate_default_handler(SIGTSTP);
        self.signals.cont.store(false, Ordering::Relaxed);
        let _ = terminal::enable_raw_mode();
        let _ = execute!(io::stdout(), EnterAlternateScreen, cursor::Hide);
        self.redraw = true;
    }
}

/// Waits for keys at standard input; whether the terminal is gone.
fn hung_up_within(wait: Duration) -> bool {
    let stdin = rustix::stdio::stdin();
    let mut polled = [PollFd::new(&stdin, PollFlags::IN)];
    let wait = Timespec {
        tv_sec: wait.as_secs().try_into().unwrap_or_default(),
        tv_nsec: wait.subsec_nanos().into(),
    };
    let gone = PollFlags::HUP | PollFlags::ERR | PollFlags::NVAL;
    // A signal that interrupts the wait is looked at by whoever called.
    poll(&mut polled, Some(&wait)).is_ok() && polled[0].revents().intersects(gone)
}

fn millis(time: Duration) -> u64 {
    u64::try_from(time.as_millis()).unwrap_or(u64::MAX)
}
