//! Points of the real axis held as logarithms of the gaps between them.
//!
//! Every difference of two points is a sum of positive gaps, so it has full relative accuracy however crowded
//! the points are. Distances are returned as logarithms: gaps may differ by more than the range of `f64`.

/// Points `x_0 < x_1 < …` known only by `y_i = ln(x_{i+1} − x_i)`.
///
/// The absolute position and the unit are free (`ζ → aζ + b` leaves every map unchanged in kind), so the line
/// does not have them.
#[derive(Debug, Clone, PartialEq)]
pub struct GapLine {
    log_gaps: Vec<f64>,
}

/// Beyond this spread of `y` plain sums of gaps would leave the range of `f64`.
const PLAIN_SPREAD: f64 = 600.0;

impl GapLine {
    /// A line of `log_gaps.len() + 1` points.
    pub fn new(log_gaps: Vec<f64>) -> GapLine {
        GapLine { log_gaps }
    }

    /// `y_i = ln(x_{i+1} − x_i)`.
    pub fn log_gaps(&self) -> &[f64] {
        &self.log_gaps
    }

    /// Number of points.
    pub fn n_points(&self) -> usize {
        self.log_gaps.len() + 1
    }

    /// `ln |x_j − x_anchor|` for every point `j`; `−∞` at the anchor itself.
    pub fn ln_distances(&self, anchor: usize) -> Vec<f64> {
        let n = self.n_points();
        let mut out = vec![f64::NEG_INFINITY; n];
        let (low, high) = self.spread();
        if high - low < PLAIN_SPREAD {
            // One exponential a gap, then plain sums outward from the anchor.
            let base = 0.5 * (low + high);
            let mut sum = 0.0;
            for j in anchor + 1..n {
                sum += (self.log_gaps[j - 1] - base).exp();
                out[j] = sum.ln() + base;
            }
            sum = 0.0;
            for j in (0..anchor).rev() {
                sum += (self.log_gaps[j] - base).exp();
                out[j] = sum.ln() + base;
            }
        } else {
            for j in anchor + 1..n {
                out[j] = ln_add(out[j - 1], self.log_gaps[j - 1]);
            }
            for j in (0..anchor).rev() {
                out[j] = ln_add(out[j + 1], self.log_gaps[j]);
            }
        }
        out
    }

    /// `ln(x_b − x_a)` for `a < b`.
    pub fn ln_distance(&self, a: usize, b: usize) -> f64 {
        ln_sum(&self.log_gaps[a.min(b)..a.max(b)])
    }

    /// A line with one point for each group of points of this one, in order: a single point, or the middle of a
    /// cluster. Groups are non-empty and ascending; points outside all groups are dropped, their gaps merged.
    pub fn gathered(&self, groups: &[Vec<usize>]) -> GapLine {
        // Half the width of a cluster on either side of its middle.
        let half = |g: &[usize]| match g {
            [first, .., last] => self.ln_distance(*first, *last) - std::f64::consts::LN_2,
            _ => f64::NEG_INFINITY,
        };
        let log_gaps = groups
            .windows(2)
            .map(|w| match (w[0].last(), w[1].first()) {
                (Some(&a), Some(&b)) => ln_add(ln_add(self.ln_distance(a, b), half(&w[0])), half(&w[1])),
                _ => 0.0,
            })
            .collect();
        GapLine { log_gaps }
    }

    /// Smallest and largest `y`.
    pub fn spread(&self) -> (f64, f64) {
        let low = self.log_gaps.iter().copied().fold(f64::INFINITY, f64::min);
        let high = self.log_gaps.iter().copied().fold(f64::NEG_INFINITY, f64::max);
        if low <= high { (low, high) } else { (0.0, 0.0) }
    }
}

/// `ln(e^a + e^b)` without overflow.
pub(crate) fn ln_add(a: f64, b: f64) -> f64 {
    let (low, high) = if a < b { (a, b) } else { (b, a) };
    if low == f64::NEG_INFINITY { high } else { high + (low - high).exp().ln_1p() }
}

/// `ln Σ e^{y_i}` without overflow; `−∞` for an empty list.
pub(crate) fn ln_sum(y: &[f64]) -> f64 {
    let high = y.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    if high == f64::NEG_INFINITY {
        return high;
    }
    high + y.iter().map(|v| (v - high).exp()).sum::<f64>().ln()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn distances_are_sums_of_gaps() {
        let line = GapLine::new(vec![2.0_f64.ln(), 3.0_f64.ln(), 5.0_f64.ln()]);
        let d: Vec<f64> = line.ln_distances(1).iter().map(|v| v.exp()).collect();
        for (got, want) in d.iter().zip([2.0, 0.0, 3.0, 8.0]) {
            assert!((got - want).abs() < 1e-14);
        }
        assert!((line.ln_distance(0, 3).exp() - 10.0).abs() < 1e-13);
        let gathered = line.gathered(&[vec![0], vec![1, 2], vec![3]]);
        assert!((gathered.log_gaps()[0].exp() - 3.5).abs() < 1e-13);
        assert!((gathered.log_gaps()[1].exp() - 6.5).abs() < 1e-13);
    }

    #[test]
    fn gaps_of_a_thousand_decades_neither_overflow_nor_vanish() {
        let line = GapLine::new(vec![0.0, -2302.0, 1000.0]);
        let d = line.ln_distances(1);
        for (got, want) in [(d[0], 0.0), (d[2], -2302.0), (d[3], 1000.0)] {
            assert!((got - want).abs() < 1e-12, "{got} {want}");
        }
    }
}
