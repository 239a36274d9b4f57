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

/// The unit of a running sum is raised when a gap is `e^300` of it.
const RAISE: f64 = 300.0;

/// A running sum of gaps, `e^unit · total`.
#[derive(Default)]
struct Outward {
    unit: Option<f64>,
    total: f64,
}

impl Outward {
    fn add(&mut self, y: f64) {
        let unit = match self.unit {
            Some(unit) if y < unit + RAISE => unit,
            Some(unit) => {
                self.total *= (unit - y).exp();
                y
            }
            None => y,
        };
        self.unit = Some(unit);
        self.total += (y - unit).exp();
    }

    fn ln(&self) -> f64 {
        self.unit.unwrap_or(0.0) + self.total.ln()
    }
}

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
        let mut out = vec![f64::NEG_INFINITY; self.n_points()];
        self.ln_distances_where(anchor, |_| true, &mut out);
        out
    }

    /// The same for the points that `wanted` picks; the others are left as they are. `out` has one place per point.
    pub(crate) fn ln_distances_where(&self, anchor: usize, wanted: impl Fn(usize) -> bool, out: &mut [f64]) {
        let n = self.n_points();
        // Plain sums outward from the anchor, in a unit that is raised when a gap would leave the range of `f64`.
        let mut sum = Outward::default();
        for j in anchor + 1..n {
            sum.add(self.log_gaps[j - 1]);
            if wanted(j) {
                out[j] = sum.ln();
            }
        }
        sum = Outward::default();
        for j in (0..anchor).rev() {
            sum.add(self.log_gaps[j]);
            if wanted(j) {
                out[j] = sum.ln();
            }
        }
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
