//! The loop that joins the pure session with its edges; the only place that sees everything.
//!
//! Promises: one loop for the field, for rehearsals and for tests: only the edges differ, and each
//! is a small trait. A record counts when the ledger has answered; effects are carried out in the
//! order in which they came. It leaves out what the session decides.

pub mod clock;
pub mod ledger;
pub mod listening;
pub mod settings;
pub mod sound;

use crate::{
    domain::{
        record::{EntryNo, Record},
        standing::{Entry, Standing},
        test::Target,
    },
    session::{self, Effect, Event, Setup, State, StopCause, Tone},
    speech::meaning::Context,
};

/// Where events come from.
pub trait Events {
    /// The next event; waits for one, but not longer than a tick. `None`: there will be no more.
    fn next(&mut self) -> Option<Event>;
}

/// Where the session is shown.
pub trait Show {
    /// An event is about to be taken.
    fn event(&mut self, event: &Event);
    /// The session after it.
    fn state(&mut self, state: &State, event: &Event);
}

/// Where records go.
pub trait Ledger {
    /// Keeps a record; gives its number only when it is on the medium.
    ///
    /// # Errors
    /// Why it could not be kept, in words for the tester.
    fn keep(&mut self, record: Record) -> Result<EntryNo, String>;
}

/// What the session says and listens to. All of it may be nothing.
pub trait Voice {
    /// Says a text; what was being said is dropped.
    fn say(&mut self, _text: &str) {}
    /// Sounds a tone.
    fn tone(&mut self, _tone: Tone) {}
    /// What may be said from now on.
    fn listen(&mut self, _context: Context) {}
    /// Stops listening, or goes on.
    fn pause(&mut self, _pause: bool) {}
    /// Listens to one utterance (hold-to-talk).
    fn talk(&mut self) {}
}

/// No sound at all: keypad only.
#[derive(Debug, Clone, Copy, Default)]
pub struct Silent;

impl Voice for Silent {}

/// The edges of one session.
pub struct Edges<'a> {
    /// Events in.
    pub events: &'a mut dyn Events,
    /// Screen out.
    pub show: &'a mut dyn Show,
    /// Records out.
    pub ledger: &'a mut dyn Ledger,
    /// Sound out, and the ear's orders.
    pub voice: &'a mut dyn Voice,
}

/// Runs a session to its end; gives the last state.
pub fn run(setup: Setup, standing: Standing, edges: &mut Edges<'_>) -> State {
    let (state, effects) = session::begin(setup, standing);
    let mut state = edges.carry_out(state, effects);
    edges.show.state(&state, &Event::Redraw);
    while !state.ended() {
        let event = edges
            .events
            .next()
            .unwrap_or(Event::Stop(StopCause::EndOfInput));
        edges.show.event(&event);
        let (next, effects) = session::step(state, event.clone());
        state = edges.carry_out(next, effects);
        edges.show.state(&state, &event);
    }
    state
}

impl Edges<'_> {
    /// Carries out effects; the ledger's answer is taken at once, before any other event.
    fn carry_out(&mut self, mut state: State, effects: Vec<Effect>) -> State {
        let mut waiting = std::collections::VecDeque::from(effects);
        // One tone a step, and after what is said was handed over: saying drops what was sounding,
        // and a tone goes ahead of what is being said.
        let mut tone: Option<Tone> = None;
        while let Some(effect) = waiting.pop_front() {
            match effect {
                Effect::Keep(record) => {
                    let answer = match self.ledger.keep(*record) {
                        Ok(no) => Event::Kept(no),
                        Err(why) => Event::NotKept(why),
                    };
                    let (next, more) = session::step(state, answer);
                    state = next;
                    waiting.extend(more);
                }
                Effect::Say(text) => self.voice.say(&text),
                Effect::Tone(new) if tone.is_none_or(|t| t.weight() < new.weight()) => {
                    tone = Some(new);
                }
                Effect::Tone(_) => {}
                Effect::Listen(context) => self.voice.listen(context),
                Effect::Pause(pause) => self.voice.pause(pause),
                Effect::Talk => self.voice.talk(),
                // The state is shown after every step.
                Effect::Show | Effect::Quit => {}
            }
        }
        if let Some(tone) = tone {
            self.voice.tone(tone);
        }
        state
    }
}

/// The test at which a log breaks off: where the tester stood.
#[must_use]
pub fn breaks_off_at(entries: &[Entry]) -> Option<Target> {
    entries.iter().rev().find_map(|entry| match &entry.record {
        Record::Reading(reading) => Some(reading.target.clone()),
        Record::Skipped { target, .. } => Some(target.clone()),
        _ => None,
    })
}

/// How long a session may be left before isolation must be proved again, seconds. The bound is
/// ours: long enough for a crash or a battery change, too short for a lunch with the lock out of
/// sight.
const LONG_S: i64 = 30 * 60;

/// Whether the work was left so long that isolation must be proved again: more than half an hour
/// since the last entry of work, or a clock that went back.
#[must_use]
pub fn left_long(entries: &[Entry], now: crate::domain::moment::Moment) -> bool {
    let worked = entries.iter().rev().find(|entry| {
        !matches!(
            entry.record,
            Record::SessionOpened { .. } | Record::SessionClosed { .. } | Record::Incident { .. }
        )
    });
    worked.is_some_and(|entry| {
        let since = now.seconds_since(entry.time);
        !(0..=LONG_S).contains(&since)
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Writes down what it is told.
    #[derive(Default)]
    struct Told(Vec<String>);

    impl Voice for Told {
        fn say(&mut self, text: &str) {
            self.0.push(text.into());
        }
        fn tone(&mut self, tone: Tone) {
            self.0.push(format!("{tone:?}"));
        }
    }

    struct Nothing;

    impl Events for Nothing {
        fn next(&mut self) -> Option<Event> {
            None
        }
    }
    impl Show for Nothing {
        fn event(&mut self, _event: &Event) {}
        fn state(&mut self, _state: &State, _event: &Event) {}
    }
    impl Ledger for Nothing {
        fn keep(&mut self, _record: Record) -> Result<EntryNo, String> {
            Ok(1)
        }
    }

    #[test]
    fn one_tone_a_step_sounds_and_saying_something_does_not_drop_it() {
        let job = crate::plan::parse(crate::plan::EXAMPLE, "example").expect("a job");
        let setup = Setup::new(job, "A. Tester", session::Settings::default());
        let (state, _) = session::begin(setup, Standing::new());
        let mut told = Told::default();
        let mut edges = Edges {
            events: &mut Nothing,
            show: &mut Nothing,
            ledger: &mut Nothing,
            voice: &mut told,
        };
        edges.carry_out(
            state,
            vec![
                Effect::Tone(Tone::Understood),
                Effect::Tone(Tone::OutOfRange),
                Effect::Say("zero decimal nine".into()),
            ],
        );
        // A speaker drops what sounds when it is told to say something: the tone comes after.
        assert_eq!(told.0, ["zero decimal nine", "OutOfRange"]);
    }
}
