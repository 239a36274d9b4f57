//! Random numbers of one case: the same on every machine, and independent of every other case.

use crate::generate::Uniform;

/// First state of every case's sequence; the cases differ by their stream.
const FIRST_STATE: u128 = 0x1869_0425_1851_0120_1926_0715;

/// The random numbers of one case.
pub(super) struct Draw(Uniform);

impl Draw {
    /// The sequence of a family's case.
    pub(super) fn new(family: usize, index: usize) -> Draw {
        let stream = ((family as u128 + 1) << 64) | index as u128;
        Draw(Uniform::stream(FIRST_STATE, stream))
    }

    /// Uniform in `[low, high)`.
    pub(super) fn between(&mut self, low: f64, high: f64) -> f64 {
        self.0.between(low, high)
    }

    /// Uniform in its logarithm.
    pub(super) fn log_between(&mut self, low: f64, high: f64) -> f64 {
        self.between(low.ln(), high.ln()).exp()
    }

    /// One of `low ..= high`.
    pub(super) fn whole(&mut self, low: usize, high: usize) -> usize {
        low + self.0.index(high.saturating_sub(low) + 1)
    }

    /// One of `low ..= high`, uniform in the logarithm.
    pub(super) fn log_whole(&mut self, low: usize, high: usize) -> usize {
        (self.log_between(low as f64, high as f64 + 1.0) as usize).clamp(low, high)
    }

    /// True with a probability.
    pub(super) fn chance(&mut self, probability: f64) -> bool {
        self.0.between(0.0, 1.0) < probability
    }

    /// One of `0 .. count`.
    pub(super) fn index(&mut self, count: usize) -> usize {
        self.0.index(count)
    }

    /// `count` numbers that grow from `from` to `to` (both left out) with gaps of random size, none below a
    /// twentieth of the largest.
    pub(super) fn rising(&mut self, count: usize, from: f64, to: f64) -> Vec<f64> {
        let gaps: Vec<f64> = (0..=count).map(|_| self.between(0.05, 1.0)).collect();
        let whole: f64 = gaps.iter().sum();
        let mut sum = 0.0;
        gaps[..count]
            .iter()
            .map(|gap| {
                sum += gap;
                from + (to - from) * sum / whole
            })
            .collect()
    }
}
