//! When somebody speaks: a state machine over frames of ten milliseconds.
//!
//! A frame counts as voice when it stands out of the noise floor, which is the quietest the sound
//! has been of late. A run of voice begins an utterance, a pause ends it; what was said just before
//! the run is kept (soft consonants come first). It promises the same cuts however the sound
//! arrives, never a stretch longer than [`LONGEST`], and that a steady noise, however loud, stops
//! counting as voice once it has lasted. It leaves out what the sound is: that is the recogniser's.

use std::collections::VecDeque;

use super::level::level;

/// Samples a frame, at 16 kHz.
pub const FRAME: usize = 160;
/// Longest utterance, in frames (12 s); a longer one is cut there.
pub const LONGEST: usize = 1_200;

/// The settings, in dB and frames.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Settings {
    /// How far over the floor a frame begins an utterance.
    pub begin: f32,
    /// How far over the floor a frame keeps it going.
    pub keep: f32,
    /// Quieter than this is never voice, in dBFS.
    pub quietest: f32,
    /// Frames of voice, within twice as many, that begin an utterance.
    pub onset: usize,
    /// Frames without voice that end it.
    pub pause: usize,
    /// Frames kept from before the onset.
    pub before: usize,
    /// Frames kept after the last voice.
    pub after: usize,
    /// Least frames of voice in an utterance.
    pub least: usize,
}

impl Default for Settings {
    fn default() -> Self {
        Self {
            begin: 9.0,
            keep: 6.0,
            quietest: -58.0,
            onset: 5,
            pause: 70,
            before: 30,
            after: 30,
            least: 8,
        }
    }
}

/// What a frame brought about.
#[derive(Debug, Clone, PartialEq)]
pub enum Cut {
    /// Somebody began to speak.
    Began,
    /// A pause that may be the end of an utterance: here it is as it would be. When the pause goes
    /// on, the same sound comes as [`Cut::Ended`].
    Likely(Vec<f32>, usize),
    /// An utterance is over; here it is, with the number of its loud frames (see [`loud`]).
    Ended(Vec<f32>, usize),
    /// What had begun was too short to be speech.
    Dropped,
}

/// How many of some frames are loud: within 15 dB of the loudest. In quiet that is most of speech,
/// and in noise it is still speech, while the noise between words is not counted.
#[must_use]
pub fn loud(levels: &[f32]) -> usize {
    let loudest = levels.iter().copied().fold(-120.0, f32::max);
    levels
        .iter()
        .filter(|level| **level > loudest - 15.0)
        .count()
}

/// Frames over which the floor looks back: three seconds.
const MEMORY: usize = 300;
/// Frames before the floor is believed: one second. A recording may begin with speech.
const TRUSTED: usize = 100;
/// The floor until then, in dBFS: a room.
const ROOM: f32 = -50.0;

/// The state machine.
#[derive(Debug, Clone)]
pub struct Activity {
    settings: Settings,
    part: Vec<f32>,
    /// Levels of the last frames, for the floor; smoothed over three.
    levels: VecDeque<f32>,
    last_two: [f32; 2],
    seen: usize,
    /// Whether each of the last frames was voice.
    recent: VecDeque<bool>,
    /// Sound from before an utterance.
    before: VecDeque<f32>,
    speaking: Option<Speaking>,
}

#[derive(Debug, Clone)]
struct Speaking {
    sound: Vec<f32>,
    frames: usize,
    voiced: usize,
    since_voice: usize,
    /// The level of each frame.
    levels: Vec<f32>,
}

impl Activity {
    /// Nobody has spoken yet.
    #[must_use]
    pub fn new(settings: Settings) -> Self {
        Self {
            settings,
            part: Vec::with_capacity(FRAME),
            levels: VecDeque::with_capacity(MEMORY),
            last_two: [ROOM; 2],
            seen: 0,
            recent: VecDeque::new(),
            before: VecDeque::new(),
            speaking: None,
        }
    }

    /// Whether an utterance is under way.
    #[must_use]
    pub fn speaking(&self) -> bool {
        self.speaking.is_some()
    }

    /// The noise floor in dBFS.
    #[must_use]
    pub fn floor(&self) -> f32 {
        let quietest = self.levels.iter().copied().fold(0.0, f32::min);
        if self.seen < TRUSTED {
            quietest.min(ROOM)
        } else {
            quietest
        }
    }

    /// Takes sound at 16 kHz; appends what it brought about.
    pub fn push(&mut self, sound: &[f32], cuts: &mut Vec<Cut>) {
        for sample in sound {
            self.part.push(*sample);
            if self.part.len() == FRAME {
                let frame = std::mem::take(&mut self.part);
                cuts.extend(self.frame(&frame));
                self.part = frame;
                self.part.clear();
            }
        }
    }

    /// The sound is over: ends what is under way.
    pub fn finish(&mut self) -> Option<Cut> {
        let rest = std::mem::take(&mut self.part);
        if let Some(speaking) = &mut self.speaking {
            speaking.sound.extend(rest);
        }
        self.end()
    }

    /// Forgets what is under way and what was before it (the tool itself spoke); the floor stays.
    pub fn forget(&mut self) {
        self.part.clear();
        self.recent.clear();
        self.before.clear();
        self.speaking = None;
    }

    fn frame(&mut self, frame: &[f32]) -> Option<Cut> {
        let now = level(frame);
        let smooth = (now + self.last_two[0] + self.last_two[1]) / 3.0;
        self.last_two = [now, self.last_two[0]];
        if self.seen >= 2 {
            if self.levels.len() == MEMORY {
                self.levels.pop_front();
            }
            self.levels.push_back(smooth);
        }
        self.seen += 1;
        let over = now - self.floor();
        let audible = now > self.settings.quietest;
        match &mut self.speaking {
            None => self.wait(frame, audible && over > self.settings.begin),
            Some(speaking) => {
                speaking.sound.extend_from_slice(frame);
                speaking.frames += 1;
                speaking.levels.push(smooth);
                if audible && over > self.settings.keep {
                    speaking.voiced += 1;
                    speaking.since_voice = 0;
                } else {
                    speaking.since_voice += 1;
                }
                let over =
                    speaking.since_voice >= self.settings.pause || speaking.frames >= LONGEST;
                if over {
                    return self.end();
                }
                // From here on only silence is added, and cut off again at the end.
                let likely = speaking.since_voice == self.settings.after
                    && speaking.voiced >= self.settings.least;
                likely.then(|| Cut::Likely(speaking.sound.clone(), loud(&speaking.levels)))
            }
        }
    }

    fn wait(&mut self, frame: &[f32], voice: bool) -> Option<Cut> {
        let window = 2 * self.settings.onset;
        if self.recent.len() == window {
            self.recent.pop_front();
        }
        self.recent.push_back(voice);
        self.before.extend(frame);
        let keep = (self.settings.before + window) * FRAME;
        let surplus = self.before.len().saturating_sub(keep);
        self.before.drain(..surplus);
        let voiced = self.recent.iter().filter(|v| **v).count();
        if voiced < self.settings.onset {
            return None;
        }
        self.recent.clear();
        let sound: Vec<f32> = std::mem::take(&mut self.before).into();
        self.speaking = Some(Speaking {
            sound,
            frames: 0,
            voiced,
            since_voice: 0,
            levels: vec![self.last_two[0]; voiced],
        });
        Some(Cut::Began)
    }

    fn end(&mut self) -> Option<Cut> {
        let mut speaking = self.speaking.take()?;
        let surplus = speaking.since_voice.saturating_sub(self.settings.after) * FRAME;
        // The sound that is not kept may be the beginning of the next utterance.
        let cut = speaking.sound.len() - surplus.min(speaking.sound.len());
        let tail = speaking.sound.split_off(cut);
        let keep = self.settings.before * FRAME;
        self.before.extend(&tail[tail.len().saturating_sub(keep)..]);
        // By now the floor may be known better than when it began.
        let loudest = speaking.levels.iter().copied().fold(-120.0, f32::max);
        let stands_out = loudest - self.floor() > self.settings.begin;
        if speaking.voiced < self.settings.least || !stands_out {
            return Some(Cut::Dropped);
        }
        Some(Cut::Ended(speaking.sound, loud(&speaking.levels)))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::voice::front::level::Noise;

    /// Noise at one level (dBFS) for some hundredths of a second, piece after piece.
    fn sound(pieces: &[(f32, usize)]) -> Vec<f32> {
        let mut noise = Noise::new();
        let mut out = Vec::new();
        for (level, frames) in pieces {
            let gain = 10_f32.powf(level / 20.0);
            out.extend((0..frames * FRAME).map(|_| noise.next() * gain));
        }
        out
    }

    fn cuts(sound: &[f32]) -> Vec<Cut> {
        let mut activity = Activity::new(Settings::default());
        let mut cuts = Vec::new();
        activity.push(sound, &mut cuts);
        cuts.extend(activity.finish());
        cuts
    }

    /// Lengths of the utterances in frames.
    fn lengths(cuts: &[Cut]) -> Vec<usize> {
        cuts.iter()
            .filter_map(|cut| match cut {
                Cut::Ended(sound, _) => Some(sound.len() / FRAME),
                _ => None,
            })
            .collect()
    }

    #[test]
    fn an_utterance_is_cut_with_what_came_just_before_and_after() {
        let found = cuts(&sound(&[(-65.0, 200), (-25.0, 60), (-65.0, 200)]));
        assert_eq!(found.first(), Some(&Cut::Began));
        let lengths = lengths(&found);
        assert_eq!(lengths.len(), 1);
        assert!((115..=125).contains(&lengths[0]), "{lengths:?}"); // 30 + 60 + 30
    }

    #[test]
    fn a_short_pause_does_not_end_it_and_a_long_one_does() {
        let joined = cuts(&sound(&[
            (-65.0, 150),
            (-25.0, 40),
            (-65.0, 50),
            (-25.0, 40),
            (-65.0, 150),
        ]));
        assert_eq!(lengths(&joined).len(), 1);
        let apart = cuts(&sound(&[
            (-65.0, 150),
            (-25.0, 40),
            (-65.0, 90),
            (-25.0, 40),
            (-65.0, 150),
        ]));
        assert_eq!(lengths(&apart).len(), 2);
    }

    #[test]
    fn a_recording_that_begins_and_ends_with_speech_is_kept_whole() {
        let found = cuts(&sound(&[(-20.0, 50)]));
        assert_eq!(lengths(&found), [50]);
    }

    #[test]
    fn steady_noise_is_nobody_speaking() {
        for level in [-65.0, -45.0, -25.0] {
            let found = cuts(&sound(&[(level, 1_000)]));
            assert_eq!(lengths(&found), [0; 0], "{level}");
        }
    }

    #[test]
    fn a_click_is_dropped_and_a_flood_is_cut() {
        let click = cuts(&sound(&[(-65.0, 150), (-20.0, 3), (-65.0, 150)]));
        assert_eq!(lengths(&click), [0; 0]);
        // Talk without a pause: bursts that leave the floor low.
        let burst = [(-20.0, 20), (-60.0, 10)].repeat(100);
        let flood = lengths(&cuts(&sound(&burst)));
        assert!(flood.iter().all(|n| *n <= LONGEST + 40), "{flood:?}");
        assert!(flood.len() >= 2);
    }

    #[test]
    fn pieces_do_not_matter() {
        let all = sound(&[
            (-65.0, 100),
            (-25.0, 60),
            (-65.0, 100),
            (-30.0, 70),
            (-65.0, 30),
        ]);
        let whole = cuts(&all);
        let mut activity = Activity::new(Settings::default());
        let mut pieces = Vec::new();
        for piece in all.chunks(123) {
            activity.push(piece, &mut pieces);
        }
        pieces.extend(activity.finish());
        assert_eq!(pieces, whole);
    }

    #[test]
    fn a_pause_gives_ahead_exactly_what_its_end_gives() {
        // Speech, a pause long enough for a guess and no more, speech, a real end.
        let cuts = cuts(&sound(&[
            (-70.0, 150),
            (-20.0, 40),
            (-70.0, 40),
            (-20.0, 30),
            (-70.0, 90),
        ]));
        let likely: Vec<&Vec<f32>> = cuts
            .iter()
            .filter_map(|cut| match cut {
                Cut::Likely(sound, _) => Some(sound),
                _ => None,
            })
            .collect();
        let ended: Vec<&Vec<f32>> = cuts
            .iter()
            .filter_map(|cut| match cut {
                Cut::Ended(sound, _) => Some(sound),
                _ => None,
            })
            .collect();
        assert_eq!((likely.len(), ended.len()), (2, 1));
        assert_eq!(likely[1], ended[0]);
        assert!(likely[0].len() < likely[1].len());
    }
}
