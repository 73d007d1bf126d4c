//! Takes the rumble off: handling noise, wind, a steady offset.
//!
//! A second-order Butterworth high-pass (bilinear transform; coefficients as in R. Bristow-Johnson,
//! Audio EQ Cookbook, a W3C note). It promises less than 1 dB loss from 120 Hz up, where voices
//! begin.

use std::f64::consts::{FRAC_1_SQRT_2, PI};

/// Corner, in hertz.
const CORNER: f64 = 70.0;

/// The filter and its memory.
#[derive(Debug, Clone)]
pub struct HighPass {
    b: [f64; 3],
    a: [f64; 2],
    x: [f64; 2],
    y: [f64; 2],
}

impl HighPass {
    /// A filter at rest, for sound at `rate` hertz.
    #[must_use]
    pub fn new(rate: u32) -> Self {
        let w = 2.0 * PI * CORNER / f64::from(rate);
        let alpha = w.sin() / (2.0 * FRAC_1_SQRT_2);
        let a0 = 1.0 + alpha;
        let side = f64::midpoint(1.0, w.cos()) / a0;
        Self {
            b: [side, -2.0 * side, side],
            a: [-2.0 * w.cos() / a0, (1.0 - alpha) / a0],
            x: [0.0; 2],
            y: [0.0; 2],
        }
    }

    /// Filters in place.
    pub fn run(&mut self, sound: &mut [f32]) {
        for sample in sound {
            let x = f64::from(*sample);
            let y = self.b[0] * x + self.b[1] * self.x[0] + self.b[2] * self.x[1]
                - self.a[0] * self.y[0]
                - self.a[1] * self.y[1];
            self.x = [x, self.x[0]];
            self.y = [y, self.y[0]];
            *sample = y as f32;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn gain(hertz: f64) -> f32 {
        let mut sound: Vec<f32> = (0..32_000)
            .map(|n| (2.0 * PI * hertz * f64::from(n) / 16_000.0).sin() as f32)
            .collect();
        HighPass::new(16_000).run(&mut sound);
        let peak = sound[16_000..].iter().fold(0.0_f32, |m, x| m.max(x.abs()));
        20.0 * peak.log10()
    }

    #[test]
    fn rumble_goes_and_voices_stay() {
        assert!(gain(10.0) < -30.0);
        assert!(gain(120.0) > -1.0);
        assert!(gain(1_000.0) > -0.05);
    }

    #[test]
    fn an_offset_dies_away() {
        let mut sound = vec![0.5; 16_000];
        HighPass::new(16_000).run(&mut sound);
        assert!(sound[8_000..].iter().all(|x| x.abs() < 1e-4));
    }
}
