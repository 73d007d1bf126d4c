//! From raw sound to utterances: rate, rumble, voice activity, level.
//!
//! Pure: sound in, events out, the same for a microphone and a recording. Two ways of listening:
//! open (a pause ends an utterance) and held (a key does). It leaves out where sound comes from
//! (`source`) and what was said (`recogniser`).

pub mod activity;
pub mod highpass;
pub mod level;
pub mod resample;

use std::collections::VecDeque;

use activity::{Activity, Cut, FRAME, LONGEST, Settings};
use highpass::HighPass;
use resample::{RATE, Resampler};

/// What the front noticed.
#[derive(Debug, Clone, PartialEq)]
pub enum FrontEvent {
    /// How loud it was over the last tenth of a second, in dBFS.
    Level(f32),
    /// Somebody began to speak, or the key went down.
    Began,
    /// What had begun was nothing.
    Dropped,
    /// A pause that may be the end: what the utterance is if it is. Whoever has time may begin to
    /// recognise it.
    Likely(Utterance),
    /// An utterance, ready for the recogniser.
    Utterance(Utterance),
}

/// One utterance.
#[derive(Debug, Clone, PartialEq)]
pub struct Utterance {
    /// 16 kHz, level set, a little noise mixed in: for the recogniser.
    pub samples: Vec<i16>,
    /// 16 kHz as it was recorded: for keeping.
    pub clip: Vec<i16>,
    /// Seconds of it that are loud: see [`activity::loud`].
    pub loud: f32,
    /// Whether a key was held for it.
    pub held: bool,
}

/// Which steps are taken; all of them unless it is being measured what each is worth.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Steps {
    /// Rumble is filtered out.
    pub high_pass: bool,
    /// The level is set.
    pub level: bool,
    /// A little noise is mixed in, and put around.
    pub noise: bool,
}

impl Default for Steps {
    fn default() -> Self {
        Self {
            high_pass: true,
            level: true,
            noise: true,
        }
    }
}

impl Utterance {
    fn of(sound: &[f32], loud: usize, steps: Steps) -> Self {
        let clip = sound
            .iter()
            .map(|x| (x * 32_767.0).round().clamp(-32_768.0, 32_767.0) as i16)
            .collect();
        Self {
            samples: level::normalised(sound, steps),
            loud: (loud * FRAME) as f32 / RATE as f32,
            held: false,
            clip,
        }
    }

    /// Its length in seconds, without the noise around it.
    #[must_use]
    pub fn seconds(&self) -> f32 {
        self.clip.len() as f32 / RATE as f32
    }
}

/// Sound kept from before the key went down: people press and speak at once (0.25 s).
const BEFORE_KEY: usize = RATE as usize / 4;

/// The front of one source of sound.
#[derive(Debug)]
pub struct Front {
    resampler: Resampler,
    high_pass: HighPass,
    activity: Activity,
    listening: Listening,
    steps: Steps,
    tenth: Vec<f32>,
    recent: VecDeque<f32>,
    work: Vec<f32>,
}

#[derive(Debug)]
enum Listening {
    Open,
    /// Open until one utterance is over.
    Once,
    /// Waiting for the key.
    Idle,
    /// The key is down; the sound since.
    Held(Vec<f32>),
}

impl Front {
    /// A front for sound at `rate` hertz, or `None` when no such rate is taken
    /// (see [`resample::RATES`]).
    #[must_use]
    pub fn new(rate: u32, settings: Settings) -> Option<Self> {
        Some(Self {
            resampler: Resampler::new(rate)?,
            high_pass: HighPass::new(RATE),
            activity: Activity::new(settings),
            listening: Listening::Open,
            steps: Steps::default(),
            tenth: Vec::new(),
            recent: VecDeque::new(),
            work: Vec::new(),
        })
    }

    /// Leaves steps out, to measure what they are worth.
    #[must_use]
    pub fn with(mut self, steps: Steps) -> Self {
        self.steps = steps;
        self
    }

    /// Open listening, or only while the key is held.
    pub fn hold_to_talk(&mut self, on: bool) {
        self.activity.forget();
        self.listening = if on { Listening::Idle } else { Listening::Open };
    }

    /// Listens to one utterance; only with hold-to-talk, and while the key is not down.
    pub fn once(&mut self) {
        if matches!(self.listening, Listening::Idle) {
            self.activity.forget();
            self.listening = Listening::Once;
        }
    }

    /// The one utterance is over now, without waiting for the pause.
    pub fn enough(&mut self, events: &mut Vec<FrontEvent>) {
        if matches!(self.listening, Listening::Once) {
            self.listening = Listening::Idle;
            let steps = self.steps;
            events.extend(self.activity.finish().map(|cut| event(cut, steps)));
        }
    }

    /// The key went down (only with hold-to-talk).
    pub fn press(&mut self, events: &mut Vec<FrontEvent>) {
        if matches!(self.listening, Listening::Idle) {
            let before: Vec<f32> = self.recent.iter().copied().collect();
            self.listening = Listening::Held(before);
            events.push(FrontEvent::Began);
        }
    }

    /// The key went up.
    pub fn release(&mut self, events: &mut Vec<FrontEvent>) {
        if let Listening::Held(sound) = &mut self.listening {
            let sound = std::mem::take(sound);
            self.listening = Listening::Idle;
            events.push(held(&sound, self.steps));
        }
    }

    /// Forgets what is under way (the tool itself speaks now).
    pub fn forget(&mut self) {
        self.activity.forget();
        self.recent.clear();
        if let Listening::Held(sound) = &mut self.listening {
            sound.clear();
        }
    }

    /// Whether an utterance is under way.
    #[must_use]
    pub fn speaking(&self) -> bool {
        self.activity.speaking() || matches!(self.listening, Listening::Held(_))
    }

    /// The noise floor in dBFS.
    #[must_use]
    pub fn floor(&self) -> f32 {
        self.activity.floor()
    }

    /// Takes mono sound (-1 to 1) at the source's rate; appends what it brought about.
    pub fn push(&mut self, sound: &[f32], events: &mut Vec<FrontEvent>) {
        let mut work = std::mem::take(&mut self.work);
        self.resampler.push(sound, &mut work);
        self.take(&mut work, events);
        work.clear();
        self.work = work;
    }

    /// The sound is over.
    pub fn finish(&mut self, events: &mut Vec<FrontEvent>) {
        let mut work = Vec::new();
        self.resampler.finish(&mut work);
        self.take(&mut work, events);
        self.release(events);
        let steps = self.steps;
        events.extend(self.activity.finish().map(|cut| event(cut, steps)));
    }

    fn take(&mut self, sound: &mut [f32], events: &mut Vec<FrontEvent>) {
        // Broken drivers deliver numbers that are none; they must not poison the filter.
        for sample in sound.iter_mut() {
            *sample = if sample.is_finite() {
                sample.clamp(-1.0, 1.0)
            } else {
                0.0
            };
        }
        if self.steps.high_pass {
            self.high_pass.run(sound);
        }
        for sample in sound.iter() {
            self.tenth.push(*sample);
            if self.tenth.len() == 10 * FRAME {
                events.push(FrontEvent::Level(level::level(&self.tenth)));
                self.tenth.clear();
            }
        }
        match &mut self.listening {
            Listening::Open | Listening::Once => {
                let mut cuts = Vec::new();
                self.activity.push(sound, &mut cuts);
                let ended = cuts.iter().any(|cut| matches!(cut, Cut::Ended(..)));
                let steps = self.steps;
                events.extend(cuts.into_iter().map(|cut| event(cut, steps)));
                if ended && matches!(self.listening, Listening::Once) {
                    self.listening = Listening::Idle;
                }
            }
            Listening::Idle => {
                self.recent.extend(sound.iter());
                let surplus = self.recent.len().saturating_sub(BEFORE_KEY);
                self.recent.drain(..surplus);
            }
            Listening::Held(held_sound) => {
                held_sound.extend_from_slice(sound);
                if held_sound.len() > LONGEST * FRAME {
                    let whole = std::mem::take(held_sound);
                    self.listening = Listening::Idle;
                    events.push(held(&whole, self.steps));
                }
            }
        }
    }
}

fn event(cut: Cut, steps: Steps) -> FrontEvent {
    match cut {
        Cut::Began => FrontEvent::Began,
        Cut::Dropped => FrontEvent::Dropped,
        Cut::Likely(sound, loud) => FrontEvent::Likely(Utterance::of(&sound, loud, steps)),
        Cut::Ended(sound, loud) => FrontEvent::Utterance(Utterance::of(&sound, loud, steps)),
    }
}

/// A held key says where speech is, but not that there is any: silence is still nothing.
fn held(sound: &[f32], steps: Steps) -> FrontEvent {
    let settings = Settings::default();
    let levels: Vec<f32> = sound.chunks(FRAME).map(level::level).collect();
    let voiced = levels
        .iter()
        .filter(|level| **level > settings.quietest)
        .count();
    if voiced < settings.least {
        FrontEvent::Dropped
    } else {
        FrontEvent::Utterance(Utterance {
            held: true,
            ..Utterance::of(sound, activity::loud(&levels), steps)
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn tone(frames: usize, gain: f32) -> Vec<f32> {
        (0..frames * FRAME)
            .map(|n| (n as f32 * 0.3).sin() * gain)
            .collect()
    }

    fn utterances(events: &[FrontEvent]) -> usize {
        events
            .iter()
            .filter(|e| matches!(e, FrontEvent::Utterance(_)))
            .count()
    }

    #[test]
    fn with_the_key_only_what_is_said_while_it_is_down_counts() {
        let mut front = Front::new(RATE, Settings::default()).expect("16 kHz");
        front.hold_to_talk(true);
        let mut events = Vec::new();
        front.push(&tone(100, 0.3), &mut events);
        assert_eq!(utterances(&events), 0);
        front.press(&mut events);
        front.push(&tone(50, 0.3), &mut events);
        front.release(&mut events);
        front.push(&tone(100, 0.3), &mut events);
        front.finish(&mut events);
        let found: Vec<_> = events
            .iter()
            .filter_map(|e| match e {
                FrontEvent::Utterance(u) => Some(u.seconds()),
                _ => None,
            })
            .collect();
        assert_eq!(found, [0.75]); // a quarter of a second from before the key
    }

    #[test]
    fn one_utterance_can_be_asked_for() {
        let mut front = Front::new(RATE, Settings::default()).expect("16 kHz");
        front.hold_to_talk(true);
        let mut events = Vec::new();
        let said = [tone(60, 0.3), vec![0.0; 32_000]].concat();
        front.push(&said, &mut events);
        assert_eq!(utterances(&events), 0);
        front.once();
        front.push(&said, &mut events);
        front.push(&said, &mut events);
        assert_eq!(utterances(&events), 1);
    }

    #[test]
    fn a_key_held_in_silence_is_nothing() {
        let mut front = Front::new(RATE, Settings::default()).expect("16 kHz");
        front.hold_to_talk(true);
        let mut events = Vec::new();
        front.press(&mut events);
        front.push(&[0.0; 16_000], &mut events);
        front.release(&mut events);
        assert_eq!(utterances(&events), 0);
        assert!(events.contains(&FrontEvent::Dropped));
    }

    #[test]
    fn numbers_that_are_none_do_no_harm() {
        let mut front = Front::new(RATE, Settings::default()).expect("16 kHz");
        let mut events = Vec::new();
        front.push(&[f32::NAN; 1_600], &mut events);
        front.push(&[0.0; 16_000], &mut events);
        front.push(&tone(60, 0.3), &mut events);
        front.push(&[0.0; 32_000], &mut events);
        front.finish(&mut events);
        assert_eq!(utterances(&events), 1);
    }
}
