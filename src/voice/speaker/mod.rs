//! Read-back through loudspeaker or headset: prompts from built-in clips, and short tones.
//!
//! Promises: speaking never blocks; a new prompt takes the place of the old one at once; whether
//! anything sounds is known ([`Speaker::sounding`]), so that the recogniser need not hear the tool's
//! own voice; without a sound device there is no speaker and everything else goes on.
//! It leaves out what is said when: the session decides.

pub mod clips;
pub mod phrase;
pub mod tone;

use std::{
    collections::VecDeque,
    sync::{
        Arc, Mutex, MutexGuard, PoisonError,
        atomic::{AtomicBool, Ordering},
    },
};

use cpal::{
    FromSample, SampleFormat, SizedSample,
    traits::{DeviceTrait, HostTrait, StreamTrait},
};

pub use tone::Tone;

use super::quiet::quietly;
use clips::{CLIPS, RATE};
use phrase::Phrasebook;

/// Silence between clips, in samples: words, not a rush.
const GAP: usize = RATE as usize / 14;

/// Why nothing can be said aloud.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("no sound out ({0}): prompts stand on the screen only")]
pub struct SpeakerError(pub String);

/// What waits to sound, at [`RATE`].
#[derive(Debug, Default)]
struct Queue {
    samples: VecDeque<f32>,
}

/// A loudspeaker.
pub struct Speaker {
    queue: Arc<Mutex<Queue>>,
    mouth: Arc<AtomicBool>,
    voice: Prompter,
    // Sound stops when it is dropped.
    _stream: cpal::Stream,
}

/// Texts to samples: what a speaker plays, without a speaker.
#[derive(Debug, Clone)]
pub struct Prompter {
    book: Phrasebook,
    volume: f32,
}

impl Prompter {
    /// At a volume from 0 to 1.
    #[must_use]
    pub fn new(volume: f32) -> Self {
        Self {
            book: Phrasebook::new(CLIPS.iter().map(|(name, _)| *name)),
            volume: volume.clamp(0.0, 1.0),
        }
    }

    /// The samples that say a text, at [`RATE`]; empty when there are no clips for it.
    #[must_use]
    pub fn say(&self, text: &str) -> Vec<f32> {
        let mut out = Vec::new();
        for at in self.book.clips(text) {
            let Some((_, flac)) = CLIPS.get(at) else {
                continue;
            };
            out.extend(clips::samples(flac).iter().map(|s| s * self.volume));
            out.extend(std::iter::repeat_n(0.0, GAP));
        }
        out
    }

    /// The samples of a tone.
    #[must_use]
    pub fn tone(&self, tone: Tone) -> Vec<f32> {
        tone.samples().iter().map(|s| s * self.volume).collect()
    }
}

impl Speaker {
    /// Opens the default sound device at a volume from 0 to 1.
    ///
    /// # Errors
    /// [`SpeakerError`] with the device's own reason.
    pub fn open(volume: f32) -> Result<Self, SpeakerError> {
        let queue = Arc::new(Mutex::new(Queue::default()));
        let mouth = Arc::new(AtomicBool::new(false));
        let stream = quietly(|| open(&queue, &mouth)).map_err(SpeakerError)?;
        Ok(Self {
            queue,
            mouth,
            voice: Prompter::new(volume),
            _stream: stream,
        })
    }

    fn queue(&self) -> MutexGuard<'_, Queue> {
        self.queue.lock().unwrap_or_else(PoisonError::into_inner)
    }

    /// Says a text; what was being said is dropped.
    pub fn say(&self, text: &str) {
        let samples = self.voice.say(text);
        let mut queue = self.queue();
        queue.samples.clear();
        queue.samples.extend(samples);
        self.mouth
            .store(!queue.samples.is_empty(), Ordering::Relaxed);
    }

    /// Sounds a tone, ahead of what is being said.
    pub fn tone(&self, tone: Tone) {
        let tone = self.voice.tone(tone);
        let mut queue = self.queue();
        for sample in tone.into_iter().rev() {
            queue.samples.push_front(sample);
        }
        self.mouth.store(true, Ordering::Relaxed);
    }

    /// Plays samples at [`RATE`] after what is being said.
    pub fn play(&self, samples: impl IntoIterator<Item = f32>) {
        self.queue().samples.extend(samples);
    }

    /// Drops what is being said.
    pub fn hush(&self) {
        self.queue().samples.clear();
    }

    /// True while anything sounds, for whoever must not hear it.
    #[must_use]
    pub fn mouth(&self) -> Arc<AtomicBool> {
        Arc::clone(&self.mouth)
    }

    /// Whether anything sounds.
    #[must_use]
    pub fn sounding(&self) -> bool {
        !self.queue().samples.is_empty()
    }
}

fn open(queue: &Arc<Mutex<Queue>>, mouth: &Arc<AtomicBool>) -> Result<cpal::Stream, String> {
    let device = cpal::default_host()
        .default_output_device()
        .ok_or("there is no output device")?;
    let config = device.default_output_config().map_err(|e| e.to_string())?;
    let format = config.sample_format();
    let config: cpal::StreamConfig = config.into();
    let stream = match format {
        SampleFormat::F32 => run::<f32>(&device, config, queue, mouth),
        SampleFormat::I16 => run::<i16>(&device, config, queue, mouth),
        SampleFormat::I32 => run::<i32>(&device, config, queue, mouth),
        SampleFormat::U16 => run::<u16>(&device, config, queue, mouth),
        SampleFormat::U8 => run::<u8>(&device, config, queue, mouth),
        other => return Err(format!("its sample format {other} is not known here")),
    }?;
    stream.play().map_err(|e| e.to_string())?;
    Ok(stream)
}

fn run<T>(
    device: &cpal::Device,
    config: cpal::StreamConfig,
    queue: &Arc<Mutex<Queue>>,
    mouth: &Arc<AtomicBool>,
) -> Result<cpal::Stream, String>
where
    T: SizedSample + FromSample<f32>,
{
    let channels = usize::from(config.channels).max(1);
    let mut player = Player::new(config.sample_rate);
    let (queue, mouth) = (Arc::clone(queue), Arc::clone(mouth));
    device
        .build_output_stream(
            config,
            move |data: &mut [T], _: &cpal::OutputCallbackInfo| {
                let mut queue = queue.lock().unwrap_or_else(PoisonError::into_inner);
                for frame in data.chunks_mut(channels) {
                    let value = player.next(&mut queue.samples);
                    frame.fill(T::from_sample(value));
                }
                mouth.store(!queue.samples.is_empty(), Ordering::Relaxed);
            },
            // A device that goes away falls silent; the screen says everything all the same.
            |_| {},
            None,
        )
        .map_err(|e| e.to_string())
}

/// Reads the queue at the device's rate, straight lines between samples.
struct Player {
    step: f32,
    at: f32,
    now: f32,
    then: f32,
}

impl Player {
    fn new(rate: u32) -> Self {
        Self {
            step: RATE as f32 / rate.max(1) as f32,
            at: 1.0,
            now: 0.0,
            then: 0.0,
        }
    }

    fn next(&mut self, samples: &mut VecDeque<f32>) -> f32 {
        while self.at >= 1.0 {
            self.now = self.then;
            self.then = samples.pop_front().unwrap_or(0.0);
            self.at -= 1.0;
        }
        let value = self.now + (self.then - self.now) * self.at;
        self.at += self.step;
        value
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_faster_device_gets_more_samples_of_the_same_sound() {
        let mut queue: VecDeque<f32> = (0..1600).map(|i| (i as f32 / 50.0).sin()).collect();
        let mut player = Player::new(48_000);
        let mut out = Vec::new();
        while !queue.is_empty() {
            out.push(player.next(&mut queue));
        }
        assert!((4790..=4805).contains(&out.len()), "{}", out.len());
        let jump = out
            .windows(2)
            .map(|w| (w[1] - w[0]).abs())
            .fold(0.0, f32::max);
        assert!(jump < 0.02, "{jump}");
    }

    #[test]
    fn without_a_sound_card_there_is_a_plain_line() {
        // Where there is a card this opens it and says nothing.
        if let Err(error) = Speaker::open(0.0) {
            assert!(error.to_string().contains("screen only"), "{error}");
        }
    }

    #[test]
    fn what_has_no_clips_is_silence() {
        assert!(Prompter::new(1.0).say("The kettle boils.").is_empty());
        assert!(!Prompter::new(1.0).say("zero decimal five").is_empty());
    }
}
