//! Any usual rate to 16 kHz, in pieces.
//!
//! A windowed sinc in polyphase form (the textbook construction: Crochiere & Rabiner, Multirate
//! Digital Signal Processing, 1983), Kaiser window. It promises the same output however the input
//! is cut into pieces, a flat pass band to nine tenths of the lower Nyquist frequency, and at
//! least 60 dB of rejection of what would fold back. It leaves out mixing channels down.

use std::f64::consts::PI;

/// The rate everything behind the front works at, in hertz.
pub const RATE: u32 = 16_000;

/// Rates that are taken, in hertz. Below, consonants are gone; above, it is no microphone.
pub const RATES: std::ops::RangeInclusive<u32> = 8_000..=192_000;

/// Zero crossings of the sinc on each side.
const CROSSINGS: f64 = 16.0;
/// Kaiser's beta: about 60 dB in the stop band.
const BETA: f64 = 6.0;

/// A streaming converter from one rate to [`RATE`].
#[derive(Debug, Clone)]
pub struct Resampler {
    /// `phases` rows of `taps` coefficients.
    table: Vec<f32>,
    taps: usize,
    up: usize,
    down: usize,
    /// Input not yet done with; its first `taps - 1` samples are the past.
    held: Vec<f32>,
    /// Which phase the next output has, counted from the first sample of `held`.
    phase: usize,
}

impl Resampler {
    /// A converter, or `None` when the rate is outside [`RATES`].
    #[must_use]
    pub fn new(rate: u32) -> Option<Self> {
        if !RATES.contains(&rate) {
            return None;
        }
        let divisor = gcd(rate, RATE);
        let (up, down) = ((RATE / divisor) as usize, (rate / divisor) as usize);
        if up == 1 && down == 1 {
            return Some(Self {
                table: vec![1.0],
                taps: 1,
                up,
                down,
                held: Vec::new(),
                phase: 0,
            });
        }
        // Times in input samples; the sinc is as wide as the lower of the two rates asks.
        let cutoff = 0.95 * f64::from(rate.min(RATE)) / f64::from(rate);
        let half = CROSSINGS / cutoff;
        let taps = 2 * half.ceil() as usize + 1;
        let mut table = Vec::with_capacity(up * taps);
        for phase in 0..up {
            let shift = phase as f64 / up as f64;
            let row: Vec<f64> = (0..taps)
                .map(|k| {
                    let t = k as f64 - (taps - 1) as f64 / 2.0 - shift;
                    cutoff * sinc(cutoff * t) * kaiser(t / (half + 1.0))
                })
                .collect();
            // Each phase passes a steady value unchanged.
            let sum: f64 = row.iter().sum();
            table.extend(row.iter().map(|c| (c / sum) as f32));
        }
        Some(Self {
            // Half a filter of silence ahead, so that the output lines up with the input.
            held: vec![0.0; (taps - 1) / 2],
            table,
            taps,
            up,
            down,
            phase: 0,
        })
    }

    /// Takes a piece of sound and appends what can be said of it to `out`.
    pub fn push(&mut self, piece: &[f32], out: &mut Vec<f32>) {
        if self.taps == 1 {
            out.extend_from_slice(piece);
            return;
        }
        self.held.extend_from_slice(piece);
        let mut at = self.phase / self.up;
        while at + self.taps <= self.held.len() {
            let row = (self.phase % self.up) * self.taps;
            let coefficients = &self.table[row..row + self.taps];
            let window = &self.held[at..at + self.taps];
            out.push(coefficients.iter().zip(window).map(|(c, x)| c * x).sum());
            self.phase += self.down;
            at = self.phase / self.up;
        }
        let done = at.min(self.held.len());
        self.held.drain(..done);
        self.phase -= done * self.up;
    }

    /// The rest, once the sound is over.
    pub fn finish(&mut self, out: &mut Vec<f32>) {
        if self.taps > 1 {
            let tail = vec![0.0; self.taps / 2];
            self.push(&tail, out);
        }
    }
}

fn gcd(a: u32, b: u32) -> u32 {
    if b == 0 { a } else { gcd(b, a % b) }
}

fn sinc(x: f64) -> f64 {
    if x.abs() < 1e-9 {
        1.0
    } else {
        (PI * x).sin() / (PI * x)
    }
}

fn kaiser(x: f64) -> f64 {
    if x.abs() >= 1.0 {
        0.0
    } else {
        bessel(BETA * (1.0 - x * x).sqrt()) / bessel(BETA)
    }
}

/// The modified Bessel function of the first kind, order zero, by its power series.
fn bessel(x: f64) -> f64 {
    let mut term = 1.0;
    let mut sum = 1.0;
    for k in 1..40 {
        term *= (x / (2.0 * f64::from(k))).powi(2);
        sum += term;
    }
    sum
}

#[cfg(test)]
mod tests {
    use super::*;

    fn tone(rate: u32, hertz: f64, seconds: f64) -> Vec<f32> {
        (0..(f64::from(rate) * seconds) as usize)
            .map(|n| (2.0 * PI * hertz * n as f64 / f64::from(rate)).sin() as f32)
            .collect()
    }

    fn converted(rate: u32, sound: &[f32]) -> Vec<f32> {
        let mut resampler = Resampler::new(rate).expect("a usual rate");
        let mut out = Vec::new();
        resampler.push(sound, &mut out);
        resampler.finish(&mut out);
        out
    }

    #[track_caller]
    fn follows(rate: u32, hertz: f64) {
        let out = converted(rate, &tone(rate, hertz, 0.5));
        assert!(
            out.len().abs_diff(8_000) <= 1,
            "{rate}: {} samples",
            out.len()
        );
        let due = tone(RATE, hertz, 0.5);
        let worst = out[1_000..7_000]
            .iter()
            .zip(&due[1_000..7_000])
            .map(|(a, b)| (a - b).abs())
            .fold(0.0, f32::max);
        assert!(worst < 0.004, "{rate} Hz, tone {hertz}: off by {worst}");
    }

    #[test]
    fn a_tone_keeps_its_shape_and_place_at_every_usual_rate() {
        for rate in [
            8_000, 11_025, 16_000, 22_050, 32_000, 44_100, 48_000, 96_000,
        ] {
            for hertz in [100.0, 1_000.0, 3_000.0] {
                follows(rate, hertz);
            }
        }
    }

    #[test]
    fn what_would_fold_back_is_gone() {
        let out = converted(48_000, &tone(48_000, 10_000.0, 0.5));
        let loudest = out[500..7_500].iter().fold(0.0_f32, |m, x| m.max(x.abs()));
        assert!(loudest < 0.001, "{loudest}");
    }

    #[test]
    fn pieces_do_not_matter() {
        let sound = tone(44_100, 440.0, 0.3);
        let whole = converted(44_100, &sound);
        let mut resampler = Resampler::new(44_100).expect("a usual rate");
        let mut out = Vec::new();
        for piece in sound.chunks(37) {
            resampler.push(piece, &mut out);
        }
        resampler.finish(&mut out);
        assert_eq!(out, whole);
    }

    #[test]
    fn rates_no_microphone_has_are_refused() {
        assert!(Resampler::new(4_000).is_none());
        assert!(Resampler::new(400_000).is_none());
    }
}
