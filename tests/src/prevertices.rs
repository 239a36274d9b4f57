//! Quantities of the map alone, from the prevertices and the scale that the program hands out.
//!
//! Prevertices `x` are known by the logarithms of their distances; the vertex sent to infinity drops out of every
//! quantity here, which all have as many factors with it above as below, so its distances count as one.

use num_complex::Complex64;
use sc_core::map::{HalfPlaneMap, InverseError, Preimage};

use crate::held_section::walking_vertex;

/// The prevertices of a map, by the numbers of the listed vertices.
#[derive(Debug, Clone, Copy)]
pub struct Prevertices<'a> {
    map: &'a HalfPlaneMap,
}

impl<'a> Prevertices<'a> {
    /// The prevertices of a map.
    #[must_use]
    pub fn of(map: &'a HalfPlaneMap) -> Prevertices<'a> {
        Prevertices { map }
    }

    fn n(&self) -> usize {
        self.map.outline().n()
    }

    fn line_index(&self, vertex: usize) -> usize {
        self.map.line_index_of(walking_vertex(self.map.outline(), vertex))
    }

    fn ln_between(&self, p: usize, q: usize) -> f64 {
        if p + 1 == self.n() || q + 1 == self.n() { 0.0 } else { self.map.line().ln_distance(p, q) }
    }

    /// `ln |x_a − x_b|`, zero if one of them is at infinity.
    fn ln_distance(&self, a: usize, b: usize) -> f64 {
        self.ln_between(self.line_index(a), self.line_index(b))
    }

    /// `λ = (x₂ − x₁)(x₄ − x₃) / ((x₃ − x₁)(x₄ − x₂))`, or `1 − λ = (x₃ − x₂)(x₄ − x₁) / (…)`.
    #[must_use]
    pub fn cross_ratio(&self, [a, b, c, d]: [usize; 4], complement: bool) -> f64 {
        let below = self.ln_distance(a, c) + self.ln_distance(b, d);
        let above = if complement {
            self.ln_distance(b, c) + self.ln_distance(a, d)
        } else {
            self.ln_distance(a, b) + self.ln_distance(c, d)
        };
        (above - below).exp()
    }

    /// The elliptic modulus `k` with the four prevertices at −1, 1, 1/k, −1/k: `λ = 4k/(1 + k)²`.
    ///
    /// Then `√(1 − λ) = (1 − k)/(1 + k)`, and `1 − λ` is as well known as `λ`.
    #[must_use]
    pub fn elliptic_modulus(&self, vertices: [usize; 4]) -> f64 {
        let root = self.cross_ratio(vertices, true).sqrt();
        // (1 − √(1−λ)) = λ/(1 + √(1−λ)) keeps the digits of a small λ.
        self.cross_ratio(vertices, false) / (1.0 + root).powi(2)
    }

    /// `|t_numerator / t_denominator|` with one prevertex at 0 and another at infinity.
    #[must_use]
    pub fn ratio(&self, numerator: usize, denominator: usize, zero: usize, infinity: usize) -> f64 {
        let above = self.ln_distance(numerator, zero) + self.ln_distance(denominator, infinity);
        let below = self.ln_distance(denominator, zero) + self.ln_distance(numerator, infinity);
        (above - below).exp()
    }

    /// `(1/π) ln[(AC·BD) / (AD·BC)]`: difference of potential between contacts D and C for a unit current from A to B.
    #[must_use]
    pub fn transfer_resistance(&self, [a, b, c, d]: [usize; 4]) -> f64 {
        let above = self.ln_distance(a, c) + self.ln_distance(b, d);
        let below = self.ln_distance(a, d) + self.ln_distance(b, c);
        (above - below) / std::f64::consts::PI
    }

    /// `|C|` in `f′(t) = C ∏ (t − t_k)^(α_k − 1)`, product without `infinity`, with three prevertices at 0, 1 and ∞.
    ///
    /// The new variable is `t = (x − x₀)(x₁ − x_I) / ((x − x_I)(x₁ − x₀))`; with `B = |x₀ − x_I||x₁ − x_I|/|x₁ − x₀|`
    /// the distances are `|t − s| = B |x − y| / (|x − x_I||y − x_I|)` and `C = C₀ B^{α_I} ∏ |x_k − x_I|^(α_k − 1)`.
    /// If `x_I` is infinity already, `C = C₀ |x₁ − x₀|^(1 + Σ(α_k − 1))`, the sum over all finite prevertices.
    #[must_use]
    pub fn map_constant(&self, zero: usize, one: usize, infinity: usize) -> f64 {
        let exponents = self.map.exponents();
        let i = self.line_index(infinity);
        let own = self.map.ln_scale();
        if i + 1 == self.n() {
            let sum: f64 = exponents.iter().sum();
            return (own + self.ln_distance(zero, one) * (1.0 + sum)).exp();
        }
        let ln_b =
            self.ln_distance(zero, infinity) + self.ln_distance(one, infinity) - self.ln_distance(zero, one);
        let others = (0..exponents.len()).filter(|&k| k != i);
        let product: f64 = others.map(|k| exponents[k] * self.ln_between(k, i)).sum();
        (own + ln_b * (1.0 + exponents[i]) + product).exp()
    }

    /// A quarter of the length of the image of some sides under the map to the half-plane that is `z + O(1)` at the
    /// one vertex at infinity of the outline, which has the angle −π; `None` without such a vertex.
    ///
    /// With that prevertex at infinity `f′ → C`, and the image is `|C|` times the distance on the line. Otherwise
    /// `f ≈ −R/(x − x_I)` near its prevertex, `R = |C| ∏ |x_I − x_k|^(α_k − 1)`, and distances are
    /// `R |x_a − x_b| / (|x_a − x_I||x_b − x_I|)`.
    #[must_use]
    pub fn logarithmic_capacity(&self, sides: &[usize]) -> Option<f64> {
        let outline = self.map.outline();
        let n = self.n();
        let away = (0..n).find(|&k| outline.point(k).is_none())?;
        let (first, last) = (*sides.first()?, *sides.last()?);
        let (a, b) = (self.line_index(first), self.line_index((last + 1) % n));
        let i = self.map.line_index_of(away);
        let ln_image = if i + 1 == n {
            self.map.ln_scale() + self.ln_between(a, b)
        } else {
            let exponents = self.map.exponents();
            let others = (0..exponents.len()).filter(|&k| k != i);
            let product: f64 = others.map(|k| exponents[k] * self.ln_between(k, i)).sum();
            self.map.ln_scale() + product + self.ln_between(a, b)
                - self.ln_between(a, i)
                - self.ln_between(b, i)
        };
        Some(0.25 * ln_image.exp())
    }

    /// `|f′(0)|` of the map of the unit disc that takes 0 to `z`: `2 Im ζ |f′(ζ)|` with `f(ζ) = z`.
    ///
    /// # Errors
    /// [`InverseError`] if `z` has no preimage.
    pub fn conformal_radius(&self, z: Complex64) -> Result<f64, InverseError> {
        let Preimage { at, .. } = self.map.inverse(z)?;
        // f′(ζ)(ζ − x_anchor), and Im ζ = |ζ − x_anchor| sin(angle)
        Ok(2.0 * self.map.log_derivative(at).norm() * at.ln_offset.im.sin())
    }

    /// Harmonic measure at `z` of the boundary from one vertex anticlockwise to another: the angle under which their
    /// prevertices are seen from `ζ`, over π.
    ///
    /// # Errors
    /// [`InverseError`] if `z` has no preimage.
    pub fn harmonic_measure(&self, z: Complex64, from: usize, to: usize) -> Result<f64, InverseError> {
        let Preimage { at, .. } = self.map.inverse(z)?;
        let (a, b) = (self.line_index(from), self.line_index(to));
        let gaps = self.map.line().log_gaps();
        let beside =
            [at.anchor.checked_sub(1), Some(at.anchor)].into_iter().flatten().filter_map(|g| gaps.get(g));
        let ln_unit = beside.copied().fold(f64::INFINITY, f64::min);
        // All lengths in anchor units, so that none leaves the range of numbers before its share is lost anyhow.
        let from_left = |p: usize| {
            let distance = (self.map.line().ln_distance(p, at.anchor) - ln_unit).exp();
            let shift = match p.cmp(&at.anchor) {
                std::cmp::Ordering::Less => distance,
                std::cmp::Ordering::Equal => 0.0,
                std::cmp::Ordering::Greater => -distance,
            };
            at.offset() + shift
        };
        let last = self.n() - 1;
        let angle = match (a == last, b == last) {
            // From −∞ up to x_b, and from x_a to +∞.
            (true, _) => from_left(b).arg(),
            (_, true) => from_left(a).im.atan2(-from_left(a).re),
            _ => {
                let (low, high) = (a.min(b), a.max(b));
                let width = (self.map.line().ln_distance(low, high) - ln_unit).exp();
                let seen = from_left(low);
                let between = (width * seen.im).atan2(seen.norm_sqr() - width * seen.re);
                if a < b { between } else { std::f64::consts::PI - between }
            }
        };
        Ok(angle / std::f64::consts::PI)
    }
}
