//! Short tones, made here: told apart by number and direction, not by pitch alone.
//!
//! Promises: none is longer than a third of a second; each begins and ends softly. They are never
//! the only sign: the screen says the same. Which tone means what is common practice, no source.

use super::clips::RATE;

/// What a tone tells.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Tone {
    /// One short, middle: listening begins.
    Listening,
    /// Two, rising: understood.
    Understood,
    /// Two, falling: not understood, or refused here.
    Refused,
    /// Three, alike and low: outside the expected range.
    OutOfRange,
    /// One, high and soft: on disk.
    Saved,
}

impl Tone {
    /// Every tone.
    pub const ALL: [Tone; 5] = [
        Tone::Listening,
        Tone::Understood,
        Tone::Refused,
        Tone::OutOfRange,
        Tone::Saved,
    ];

    /// Pitch in hertz and length in milliseconds of each beep.
    fn beeps(self) -> &'static [(f32, u32)] {
        match self {
            Tone::Listening => &[(740.0, 90)],
            Tone::Understood => &[(660.0, 70), (990.0, 90)],
            Tone::Refused => &[(660.0, 90), (440.0, 140)],
            Tone::OutOfRange => &[(392.0, 80), (392.0, 80), (392.0, 80)],
            Tone::Saved => &[(1320.0, 60)],
        }
    }

    /// Its samples at [`RATE`], from -1 to 1.
    #[must_use]
    pub fn samples(self) -> Vec<f32> {
        let mut out = Vec::new();
        for (pitch, ms) in self.beeps() {
            let n = RATE * ms / 1000;
            let edge = (RATE / 100) as f32;
            for i in 0..n {
                let soft = (i as f32 / edge).min((n - i) as f32 / edge).min(1.0);
                let phase = std::f32::consts::TAU * pitch * i as f32 / RATE as f32;
                out.push(0.25 * soft * phase.sin());
            }
            out.extend(std::iter::repeat_n(0.0, (RATE / 40) as usize));
        }
        out
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn tones_are_short_soft_and_unlike_each_other() {
        for tone in Tone::ALL {
            let samples = tone.samples();
            assert!(samples.len() <= RATE as usize / 3 + 800, "{tone:?}");
            assert!(samples.iter().all(|s| s.abs() <= 0.25), "{tone:?}");
            for other in Tone::ALL {
                assert!(
                    tone == other || samples != other.samples(),
                    "{tone:?} {other:?}"
                );
            }
        }
    }
}
