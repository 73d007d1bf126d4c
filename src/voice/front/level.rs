//! One loudness for every utterance, and a floor of noise under it.
//!
//! The recogniser was trained on speech of ordinary level; a whisper far from the microphone and a
//! shout into it are brought there. Digital silence wrecks it, so a little noise, always the same,
//! is mixed in. It promises the same samples for the same sound.

use super::Steps;

/// Level of the loudest tenth of a second that an utterance is brought to, in dBFS.
const TARGET: f32 = -16.0;
/// Most that is amplified, in dB: beyond, there is only noise to amplify.
const MOST: f32 = 40.0;
/// Standard deviation of the noise, in steps of 16-bit sound.
const FLOOR: f32 = 15.0;
/// Noise alone before and after the utterance, in samples (0.3 s).
const MARGIN: usize = 4_800;

/// Level of a stretch of sound in dBFS: 0 for a square wave at full scale.
#[must_use]
pub fn level(sound: &[f32]) -> f32 {
    if sound.is_empty() {
        return -120.0;
    }
    let power = sound.iter().map(|x| x * x).sum::<f32>() / sound.len() as f32;
    (10.0 * power.max(1e-12).log10()).max(-120.0)
}

/// Level of the loudest tenth of a second.
#[must_use]
pub fn loudest(sound: &[f32]) -> f32 {
    const TENTH: usize = 1_600;
    if sound.len() <= TENTH {
        return level(sound);
    }
    (0..=(sound.len() - TENTH) / (TENTH / 4))
        .map(|k| level(&sound[k * TENTH / 4..k * TENTH / 4 + TENTH]))
        .fold(-120.0, f32::max)
}

/// The utterance as the recogniser is given it: level set, noise mixed in, noise around it.
#[must_use]
pub fn normalised(sound: &[f32], steps: Steps) -> Vec<i16> {
    let decibels = if steps.level {
        (TARGET - loudest(sound)).min(MOST)
    } else {
        0.0
    };
    let gain = 10_f32.powf(decibels / 20.0);
    let floor = if steps.noise { FLOOR } else { 0.0 };
    let mut noise = Noise::new();
    let silence = std::iter::repeat_n(&0.0_f32, MARGIN);
    silence
        .clone()
        .chain(sound)
        .chain(silence)
        .map(|x| {
            let sample = x * gain * 32_767.0 + noise.next() * floor;
            sample.round().clamp(-32_768.0, 32_767.0) as i16
        })
        .collect()
}

/// Gaussian noise from a fixed seed: SplitMix64 (Steele, Lea & Flood 2014) through the method of
/// Box and Muller (1958).
#[derive(Debug, Clone)]
pub struct Noise {
    state: u64,
    kept: Option<f32>,
}

impl Default for Noise {
    fn default() -> Self {
        Self::new()
    }
}

impl Noise {
    /// The one sequence there is.
    #[must_use]
    pub fn new() -> Self {
        Self {
            state: 0x5EED,
            kept: None,
        }
    }

    fn uniform(&mut self) -> f32 {
        self.state = self.state.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut z = self.state;
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        ((z ^ (z >> 31)) >> 40) as f32 / (1u64 << 24) as f32
    }

    /// The next number, of mean 0 and deviation 1.
    #[allow(clippy::should_implement_trait)] // it never ends, so it is no iterator
    pub fn next(&mut self) -> f32 {
        if let Some(kept) = self.kept.take() {
            return kept;
        }
        let radius = (-2.0 * (1.0 - self.uniform()).ln()).sqrt();
        let angle = std::f32::consts::TAU * self.uniform();
        self.kept = Some(radius * angle.sin());
        radius * angle.cos()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_quiet_and_a_loud_voice_come_out_alike() {
        let sound: Vec<f32> = (0..16_000).map(|n| (n as f32 * 0.1).sin()).collect();
        let at = |gain: f32| {
            let scaled: Vec<f32> = sound.iter().map(|x| x * gain).collect();
            let out = normalised(&scaled, Steps::default());
            let back: Vec<f32> = out.iter().map(|x| f32::from(*x) / 32_768.0).collect();
            loudest(&back)
        };
        for gain in [0.02, 0.2, 0.9] {
            assert!((at(gain) - TARGET).abs() < 0.2, "{gain}: {}", at(gain));
        }
    }

    #[test]
    fn silence_becomes_the_floor_and_no_more() {
        let out = normalised(&[0.0; 1_600], Steps::default());
        assert_eq!(out.len(), 1_600 + 2 * MARGIN);
        let power = out.iter().map(|x| f32::from(*x).powi(2)).sum::<f32>() / out.len() as f32;
        assert!((power.sqrt() - FLOOR).abs() < 0.5, "{}", power.sqrt());
    }
}
