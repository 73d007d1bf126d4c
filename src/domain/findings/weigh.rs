//! Weighing of explanations: log-likelihood of a series of readings under each, and the ballot
//! that ranks them.
//!
//! Errors that all readings share (gain of the instrument, quality of the copper, length) and those
//! of each reading (last digits, position) are kept apart: a shared error moves a series as one
//! and must not look like a joint. Everything is Gaussian with a low-rank covariance, so that the
//! size of a fault is integrated over and not fitted: an explanation that can explain anything
//! loses to one that says what was seen.

use crate::domain::expect::Finding;

/// What one reading showed.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum Seen {
    /// A figure, ohm.
    Ohm(f64),
    /// No continuity.
    Open,
}

/// What an explanation predicts for a series: a mean for each reading (infinite: open), the
/// variance of each reading's own error, and the shared errors, each as a vector of what one
/// standard deviation of it does to every reading.
#[derive(Debug, Clone, Default)]
pub(crate) struct Prediction {
    pub(crate) mean: Vec<f64>,
    pub(crate) own: Vec<f64>,
    pub(crate) shared: Vec<Vec<f64>>,
}

/// A reading shows open although a value was predicted: a bad contact of the probe.
const OPEN_BY_CHANCE: f64 = -16.0;
/// A reading shows a value although open was predicted: hardly ever.
const VALUE_BY_CHANCE: f64 = -20.0;

impl Prediction {
    /// Log-likelihood of what was seen.
    pub(crate) fn log_likelihood(&self, seen: &[Seen]) -> f64 {
        self.weigh(seen).0
    }

    /// Whether the series lies so close that no explanation beside it need be tried.
    pub(crate) fn close(&self, seen: &[Seen]) -> bool {
        !seen.contains(&Seen::Open) && self.weigh(seen).1 < CLOSE
    }

    /// Log-likelihood and squared distance.
    fn weigh(&self, seen: &[Seen]) -> (f64, f64) {
        let mut total = 0.0;
        let mut rows = Vec::with_capacity(seen.len());
        for (index, one) in seen.iter().enumerate() {
            match (one, self.mean[index].is_finite()) {
                (Seen::Open, true) => total += OPEN_BY_CHANCE,
                (Seen::Open, false) => {}
                (Seen::Ohm(_), false) => total += VALUE_BY_CHANCE,
                (Seen::Ohm(_), true) => rows.push(index),
            }
        }
        if rows.is_empty() {
            return (total, 0.0);
        }
        let count = rows.len();
        let mut residual = Vec::with_capacity(count);
        let mut covariance = vec![0.0; count * count];
        for (a, &i) in rows.iter().enumerate() {
            if let Seen::Ohm(value) = seen[i] {
                residual.push(value - self.mean[i]);
            }
            for (b, &j) in rows.iter().enumerate().take(a + 1) {
                let shared: f64 = self.shared.iter().map(|f| f[i] * f[j]).sum();
                covariance[a * count + b] = shared + if a == b { self.own[i] } else { 0.0 };
            }
        }
        let (log, square) = gaussian(&mut covariance, &residual);
        (total + log, square)
    }

    /// The same with one more shared error.
    pub(crate) fn with(&self, shared: Vec<f64>) -> Self {
        let mut more = self.clone();
        more.shared.push(shared);
        more
    }
}

/// Log density of a zero-mean Gaussian and the squared distance; the lower triangle of the covariance becomes its Cholesky
/// factor.
fn gaussian(covariance: &mut [f64], residual: &[f64]) -> (f64, f64) {
    let count = residual.len();
    let mut log_determinant = 0.0;
    let mut square = 0.0;
    let mut white = vec![0.0; count];
    for i in 0..count {
        for j in 0..=i {
            let mut sum = covariance[i * count + j];
            for k in 0..j {
                sum -= covariance[i * count + k] * covariance[j * count + k];
            }
            if i == j {
                let root = sum.max(1e-12).sqrt();
                covariance[i * count + i] = root;
                log_determinant += 2.0 * root.ln();
            } else {
                covariance[i * count + j] = sum / covariance[j * count + j];
            }
        }
        let known: f64 = (0..i).map(|k| covariance[i * count + k] * white[k]).sum();
        white[i] = (residual[i] - known) / covariance[i * count + i];
        square += white[i] * white[i];
    }
    let constant = count as f64 * (2.0 * std::f64::consts::PI).ln();
    (-0.5 * (square + log_determinant + constant), square)
}

/// A candidate's words, made only for those that reach the list.
pub(crate) struct Words {
    pub(crate) text: String,
    pub(crate) check: String,
}

type Speak<'a> = Box<dyn Fn() -> Words + 'a>;

struct Candidate<'a> {
    code: &'static str,
    log_sum: f64,
    best: f64,
    speak: Speak<'a>,
}

/// The explanations with their log weights. Several ways of the same kind (a joint at each of ten
/// places) add up; the likeliest of them lends its words.
pub(crate) struct Ballot<'a> {
    healthy: f64,
    candidates: Vec<Candidate<'a>>,
}

/// Log of the plausibility of no fault before anything is read.
const HEALTHY_PRIOR: f64 = -0.03;
/// Inside its range a reading raises an alarm only when "no fault" is at most this likely (log of
/// six in ten).
const ALARM: f64 = -0.5;
/// A series this close to the prediction (squared distance) cannot raise one: no fault of ours is
/// plausible enough to make up for it.
const CLOSE: f64 = 6.0;
/// Shares of the weight below this are not shown.
const SHOWN: f64 = 0.004;

impl<'a> Ballot<'a> {
    /// A ballot that knows how well no fault at all explains the readings.
    pub(crate) fn new(healthy: f64) -> Self {
        Self {
            healthy: healthy + HEALTHY_PRIOR,
            candidates: Vec::new(),
        }
    }

    /// Adds an explanation: its log prior plus log-likelihood.
    pub(crate) fn add(
        &mut self,
        code: &'static str,
        log_weight: f64,
        speak: impl Fn() -> Words + 'a,
    ) {
        if !log_weight.is_finite() {
            return;
        }
        match self.candidates.iter_mut().find(|c| c.code == code) {
            Some(known) => {
                known.log_sum = log_add(known.log_sum, log_weight);
                if log_weight > known.best {
                    known.best = log_weight;
                    known.speak = Box::new(speak);
                }
            }
            None => self.candidates.push(Candidate {
                code,
                log_sum: log_weight,
                best: log_weight,
                speak: Box::new(speak),
            }),
        }
    }

    /// The ranking. Nothing when the reading is in its range and no fault is at all likely.
    pub(crate) fn findings(mut self, questioned: bool) -> Vec<Finding> {
        let faults = self
            .candidates
            .iter()
            .map(|c| c.log_sum)
            .fold(f64::NEG_INFINITY, log_add);
        let healthy_share = self.healthy - log_add(self.healthy, faults);
        if !questioned && healthy_share > ALARM {
            return Vec::new();
        }
        self.candidates
            .sort_by(|a, b| b.log_sum.total_cmp(&a.log_sum));
        self.candidates
            .iter()
            .map(|c| (c, (c.log_sum - faults).exp()))
            .filter(|(_, weight)| *weight > SHOWN)
            .take(6)
            .map(|(c, weight)| {
                let words = (c.speak)();
                Finding {
                    code: c.code,
                    text: words.text,
                    check: words.check,
                    weight,
                }
            })
            .collect()
    }
}

fn log_add(a: f64, b: f64) -> f64 {
    let (high, low) = if a > b { (a, b) } else { (b, a) };
    if low == f64::NEG_INFINITY {
        high
    } else {
        high + (low - high).exp().ln_1p()
    }
}

/// Words of a candidate.
pub(crate) fn words(text: impl Into<String>, check: impl Into<String>) -> Words {
    Words {
        text: text.into(),
        check: check.into(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_density_is_that_of_a_normal_law() {
        // One reading, variance 0.25 + 0.75: standard normal at 1 is ln 0.24197 (any table).
        let one = Prediction {
            mean: vec![2.0],
            own: vec![0.25],
            shared: vec![vec![0.75_f64.sqrt()]],
        };
        assert!((one.log_likelihood(&[Seen::Ohm(3.0)]) - 0.241_970_7_f64.ln()).abs() < 1e-6);
    }

    #[test]
    fn a_shared_error_moves_a_series_as_one() {
        let both = Prediction {
            mean: vec![1.0, 1.0],
            own: vec![1e-4, 1e-4],
            shared: vec![vec![0.1, 0.1]],
        };
        let together = both.log_likelihood(&[Seen::Ohm(1.1), Seen::Ohm(1.1)]);
        let apart = both.log_likelihood(&[Seen::Ohm(1.1), Seen::Ohm(0.9)]);
        assert!(together > apart + 50.0);
    }
}
