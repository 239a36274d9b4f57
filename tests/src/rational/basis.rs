//! The trial functions: polynomials made orthogonal on the samples, and simple poles outside the section.

use num_complex::Complex64;

use super::geometry::{LocalPoint, Polygon};

/// Polynomials `p_0 = 1, p_1, …` orthogonal on the sample points, kept as an Arnoldi recurrence.
///
/// # Source
/// Brubeck, Nakatsukasa and Trefethen, SIAM Review 63 (2021) 405-415 (Vandermonde with Arnoldi), from memory.
#[derive(Debug, Clone)]
struct Recurrence {
    centre: Complex64,
    scale: f64,
    /// Column `k` holds the projections on `p_0 … p_k` and the norm of the remainder.
    columns: Vec<Vec<Complex64>>,
}

impl Recurrence {
    fn new(points: &[Complex64], weights: &[f64], degree: usize) -> Recurrence {
        let total: f64 = weights.iter().sum();
        let centre = points.iter().zip(weights).map(|(z, w)| z * w).sum::<Complex64>() / total;
        let scale = points.iter().map(|z| (z - centre).norm()).fold(f64::MIN_POSITIVE, f64::max);
        let inner = |a: &[Complex64], b: &[Complex64]| -> Complex64 {
            (0..a.len()).map(|i| a[i].conj() * b[i] * weights[i]).sum::<Complex64>() / total
        };
        let mut basis = vec![vec![Complex64::new(1.0, 0.0); points.len()]];
        let mut columns: Vec<Vec<Complex64>> = Vec::with_capacity(degree);
        for k in 0..degree {
            let mut next: Vec<Complex64> =
                (0..points.len()).map(|i| (points[i] - centre) / scale * basis[k][i]).collect();
            let mut column = vec![Complex64::default(); k + 2];
            for _ in 0..2 {
                // Twice is enough to be orthogonal to working precision.
                for (j, previous) in basis.iter().enumerate() {
                    let projection = inner(previous, &next);
                    column[j] += projection;
                    next.iter_mut().zip(previous).for_each(|(x, p)| *x -= projection * p);
                }
            }
            let norm = inner(&next, &next).re.sqrt();
            if norm.is_nan() || norm <= 1e-14 {
                break;
            }
            column[k + 1] = Complex64::new(norm, 0.0);
            next.iter_mut().for_each(|x| *x /= norm);
            basis.push(next);
            columns.push(column);
        }
        Recurrence { centre, scale, columns }
    }

    /// Values and derivatives of all polynomials at `z`.
    fn eval(&self, z: Complex64, values: &mut Vec<Complex64>, slopes: &mut Vec<Complex64>) {
        let x = (z - self.centre) / self.scale;
        let first = values.len();
        values.push(Complex64::new(1.0, 0.0));
        slopes.push(Complex64::default());
        for (k, column) in self.columns.iter().enumerate() {
            let mut value = x * values[first + k];
            let mut slope = values[first + k] / self.scale + x * slopes[first + k];
            for j in 0..=k {
                value -= column[j] * values[first + j];
                slope -= column[j] * slopes[first + j];
            }
            values.push(value / column[k + 1].re);
            slopes.push(slope / column[k + 1].re);
        }
    }
}

/// All trial functions; the unknown analytic function is a complex combination of them.
#[derive(Debug, Clone)]
pub(super) struct Basis {
    recurrence: Recurrence,
    /// Poles and the distance of each from its corner, which makes the function of order one there.
    poles: Vec<(LocalPoint, f64)>,
    powers: Vec<CornerPowers>,
}

/// Powers `((z − v)/(z − p))^s` of a corner `v`, with the segment from `v` to `p`, outside the section, as cut.
#[derive(Debug, Clone)]
pub(super) struct CornerPowers {
    pub(super) corner: usize,
    pub(super) end: Complex64,
    pub(super) exponents: Vec<f64>,
}

impl Basis {
    pub(super) fn new(
        points: &[Complex64],
        weights: &[f64],
        degree: usize,
        poles: Vec<(LocalPoint, f64)>,
        powers: Vec<CornerPowers>,
    ) -> Basis {
        Basis { recurrence: Recurrence::new(points, weights, degree), poles, powers }
    }

    pub(super) fn len(&self) -> usize {
        self.recurrence.columns.len()
            + 1
            + self.poles.len()
            + self.powers.iter().map(|powers| powers.exponents.len()).sum::<usize>()
    }

    /// Values and derivatives at `point`; the first function is the constant.
    pub(super) fn eval(&self, polygon: &Polygon, point: LocalPoint) -> (Vec<Complex64>, Vec<Complex64>) {
        let mut values = Vec::with_capacity(self.len());
        let mut slopes = Vec::with_capacity(self.len());
        self.recurrence.eval(polygon.position(point), &mut values, &mut slopes);
        for &(pole, distance) in &self.poles {
            let inverse = polygon.difference(point, pole).inv();
            values.push(distance * inverse);
            slopes.push(-distance * inverse * inverse);
        }
        for powers in &self.powers {
            let vertex = LocalPoint { corner: powers.corner, offset: Complex64::default() };
            let end = LocalPoint { corner: powers.corner, offset: powers.end };
            let (from_vertex, from_end) = (polygon.difference(point, vertex), polygon.difference(point, end));
            if from_vertex.norm_sqr() > 0.0 {
                let logarithm = (from_vertex / from_end).ln();
                let rate = from_vertex.inv() - from_end.inv();
                for &exponent in &powers.exponents {
                    let value = (exponent * logarithm).exp();
                    values.push(value);
                    slopes.push(exponent * value * rate);
                }
            } else {
                // At the vertex the powers vanish; the slope, which may be infinite, is not asked for there.
                values.resize(values.len() + powers.exponents.len(), Complex64::default());
                slopes.resize(slopes.len() + powers.exponents.len(), Complex64::default());
            }
        }
        (values, slopes)
    }
}
