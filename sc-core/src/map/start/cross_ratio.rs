//! Prevertices from the cross-ratios of the triangulation's quadrilaterals.

use super::split::SplitOutline;
use crate::map::gap_line::GapLine;
use crate::map::side_integrals::{RuleSet, side_integrals};
use crate::outline::Point;

/// Four corners on two facing sides are in a channel if they span this many times its width.
const CHANNEL_ASPECT: f64 = 2.0;

/// One step of the placing of prevertices: from the triangle `(a, b, c)` across its edge `(a, b)` to `d` between them.
#[derive(Debug, Clone, Copy)]
struct Placement {
    a: usize,
    b: usize,
    c: usize,
    d: usize,
    /// Where the `ln` lengths of the edges `ab`, `bc`, `ca` are kept, and where `ad`, `db` go.
    ab: usize,
    bc: usize,
    ca: usize,
    ad: usize,
    db: usize,
}

/// A start for the parameter problem of a split outline, its last corner sent to infinity.
#[derive(Debug, Clone)]
pub(crate) struct CrossRatioStart {
    /// Corners in the order of the prevertices; the last goes to infinity.
    points: Vec<Point>,
    exponents: Vec<f64>,
    placements: Vec<Placement>,
    /// Slot of the `ln` length of side `k`.
    side_slot: Vec<usize>,
    n_slots: usize,
    /// `ln` cross-ratios of the polygon's own corners.
    wanted: Vec<f64>,
    /// The present guess of the prevertices' cross-ratios.
    guess: Vec<f64>,
    /// Whether a cross-ratio belongs to a quadrilateral of a long channel, whose guess is as good as it gets: there
    /// the image hardly moves with the cross-ratio, and the simple iteration would crawl.
    in_channel: Vec<bool>,
    /// Outward directions of the sides.
    directions: Vec<Point>,
}

impl CrossRatioStart {
    /// `at_infinity` is the corner (of the split outline) that goes to infinity.
    pub(crate) fn new(outline: &SplitOutline, at_infinity: usize) -> CrossRatioStart {
        let n = outline.corners.len();
        let rotate = |corner: usize| (corner + n - at_infinity - 1) % n;
        let points: Vec<Point> = (0..n).map(|k| outline.corners[(at_infinity + 1 + k) % n]).collect();
        let exponents: Vec<f64> =
            (0..n - 1).map(|k| outline.alpha[(at_infinity + 1 + k) % n] - 1.0).collect();
        let directions = (0..n)
            .map(|k| {
                let side = points[(k + 1) % n] - points[k];
                side / side.norm()
            })
            .collect();
        let triangles = &outline.triangles;
        // Start on the triangle of the side that leaves the corner at infinity: all its other corners are finite.
        let (root, first) = triangles.on_side[at_infinity];
        let mut placements = Vec::with_capacity(n - 3);
        let mut side_slot = vec![usize::MAX; n];
        let mut n_slots = 3;
        // (triangle, position of its first corner, slots of its three edges from that corner on)
        let mut stack = vec![(root, first, [0, 1, 2])];
        let mut entered = vec![false; triangles.corners.len()];
        entered[root] = true;
        while let Some((t, i0, slots)) = stack.pop() {
            for e in 0..3 {
                let i = (i0 + e) % 3;
                let (a, b) = (triangles.corners[t][i], triangles.corners[t][(i + 1) % 3]);
                let Some(next) = triangles.across[t][i] else {
                    side_slot[rotate(a)] = slots[e];
                    continue;
                };
                if entered[next] {
                    continue;
                }
                entered[next] = true;
                let c = triangles.corners[t][(i + 2) % 3];
                // In the next triangle the edge runs from b to a; the corner after a is d.
                let j = (0..3).find(|&j| triangles.corners[next][j] == b).unwrap_or(0);
                let d = triangles.corners[next][(j + 2) % 3];
                let (ad, db) = (n_slots, n_slots + 1);
                n_slots += 2;
                placements.push(Placement {
                    a: rotate(a),
                    b: rotate(b),
                    c: rotate(c),
                    d: rotate(d),
                    ab: slots[e],
                    bc: slots[(e + 1) % 3],
                    ca: slots[(e + 2) % 3],
                    ad,
                    db,
                });
                stack.push((next, j, [slots[e], ad, db]));
            }
        }
        let wanted: Vec<f64> = placements.iter().map(|p| p.ln_cross_ratio(&points)).collect();
        let channel: Vec<Option<f64>> = placements
            .iter()
            .map(|p| channel_guess(outline, [p.a, p.b, p.c, p.d].map(|k| (at_infinity + 1 + k) % n)))
            .collect();
        CrossRatioStart {
            guess: channel.iter().zip(&wanted).map(|(c, w)| c.unwrap_or(*w)).collect(),
            in_channel: channel.iter().map(Option::is_some).collect(),
            points,
            exponents,
            placements,
            side_slot,
            n_slots,
            wanted,
            directions,
        }
    }

    /// Exponents `α − 1` of the finite prevertices.
    pub(crate) fn exponents(&self) -> &[f64] {
        &self.exponents
    }

    /// `ln` lengths of the sides, in the order of the integrals of [`side_integrals`].
    pub(crate) fn ln_lengths(&self) -> Vec<f64> {
        let n = self.points.len();
        (0..n).map(|k| (self.points[(k + 1) % n] - self.points[k]).norm().ln()).collect()
    }

    /// The gaps that the present cross-ratios stand for.
    ///
    /// From a placed triangle `(a, b, c)` the prevertex `d` between `a` and `b` has `(d−a)/(b−d) = r` with
    /// `r = ρ |c−a|/|c−b|`; every gap comes out as a product, without a subtraction.
    pub(crate) fn line(&self) -> GapLine {
        let n = self.points.len();
        let infinity = n - 1;
        let mut ln_length = vec![0.0; self.n_slots];
        for (p, &rho) in self.placements.iter().zip(&self.guess) {
            let (ad, db) = if p.a == infinity {
                (f64::INFINITY, ln_length[p.bc] - rho)
            } else if p.b == infinity {
                (rho + ln_length[p.ca], f64::INFINITY)
            } else {
                let ln_r = if p.c == infinity { rho } else { rho + ln_length[p.ca] - ln_length[p.bc] };
                // ln r/(1+r) and ln 1/(1+r) without overflow.
                let near = -((-ln_r.abs()).exp().ln_1p());
                let (toward_a, toward_b) = if ln_r > 0.0 { (near, near - ln_r) } else { (near + ln_r, near) };
                (ln_length[p.ab] + toward_a, ln_length[p.ab] + toward_b)
            };
            ln_length[p.ad] = ad;
            ln_length[p.db] = db;
        }
        GapLine::new((0..n - 2).map(|k| ln_length[self.side_slot[k]]).collect())
    }

    /// One sweep of `ln ρ ← ln ρ + (wanted − obtained)`; returns the largest change.
    pub(crate) fn sweep(&mut self, rules: &RuleSet) -> f64 {
        let ln = side_integrals(&self.line(), rules, false).ln;
        let high = ln.iter().copied().fold(f64::NEG_INFINITY, f64::max);
        let n = self.points.len();
        let mut image = Vec::with_capacity(n);
        let mut w = Point::new(0.0, 0.0);
        for k in 0..n {
            image.push(w);
            w += self.directions[k] * (ln[k] - high).exp();
        }
        let mut largest = 0.0_f64;
        let free = self.placements.iter().zip(&mut self.guess).zip(&self.wanted).zip(&self.in_channel);
        for ((p, guess), wanted) in free.filter(|(_, fixed)| !**fixed).map(|(f, _)| f) {
            let change = wanted - p.ln_cross_ratio(&image);
            // An image so crowded that corners coincide says nothing of this quadrilateral.
            if change.is_finite() {
                *guess += change;
                largest = largest.max(change.abs());
            }
        }
        largest
    }
}

/// The `ln` cross-ratio of the prevertices of four corners `(a, b, c, d)` that lie on two facing sides, if they are far
/// apart against the distance of the sides.
///
/// Between two lines that meet at the angle `θ` in `O` the sector's map `ζ = ±exp((π/θ) ln r)` holds, `r` the distance
/// from `O`; between parallel lines at distance `h`, `ζ = ±exp(π x/h)`. Away from the ends of the stretch the error
/// falls as `exp(−π × distance/h)`.
fn channel_guess(outline: &SplitOutline, corners: [usize; 4]) -> Option<f64> {
    let n = outline.corners.len();
    let sides_of = |k: usize| {
        let before = outline.side[(k + n - 1) % n];
        [before, outline.side[k]]
    };
    // Two sides that carry all four corners.
    let candidates: Vec<usize> = corners.iter().flat_map(|&k| sides_of(k)).collect();
    let (first, second) = candidates.iter().enumerate().find_map(|(i, &p)| {
        candidates[i + 1..]
            .iter()
            .find(|&&q| {
                q != p && corners.iter().all(|&k| sides_of(k).contains(&p) || sides_of(k).contains(&q))
            })
            .map(|&q| (p, q))
    })?;
    let span = |side: usize| {
        let k = outline.side.iter().position(|&s| s == side)?;
        let last = outline.side.iter().rposition(|&s| s == side)?;
        // A side that wraps round the end of the list starts after its last other piece.
        let start =
            if k == 0 && last == n - 1 { outline.side.iter().rposition(|&s| s != side)? + 1 } else { k };
        let a = outline.corners[start % n];
        Some((
            a,
            (outline.corners[(start + 1) % n] - a).unscale((outline.corners[(start + 1) % n] - a).norm()),
        ))
    };
    let ((p, u), (q, v)) = (span(first)?, span(second)?);
    // The second side runs back: u and −v point the same way along the channel.
    let axis = {
        let sum = u - v;
        if sum.norm() < 1.0 { return None } else { sum / sum.norm() }
    };
    let origin = outline.corners[corners[0]];
    let along = |z: Point| ((z - origin) * axis.conj()).re;
    // Distance of the lines as a function of the place along the axis: h(x) = h_0 + slope x.
    let across = |z: Point, d: Point, x: f64| {
        let t = (x - along(z)) / (d * axis.conj()).re;
        ((z + d * t - origin) * axis.conj()).im
    };
    let height = |x: f64| across(q, -v, x) - across(p, u, x);
    let xs: Vec<f64> = corners.iter().map(|&k| along(outline.corners[k])).collect();
    let (low, high) = xs.iter().fold((f64::INFINITY, f64::NEG_INFINITY), |m, &x| (m.0.min(x), m.1.max(x)));
    let (h_low, h_high) = (height(low), height(high));
    let smallest = h_low.min(h_high);
    if !(smallest > 0.0 && high - low > CHANNEL_ASPECT * h_low.max(h_high)) {
        return None;
    }
    // π ∫ dx/h from the low end: for a linear h, Δx ln(h/h_low)/(h − h_low).
    let xi = |x: f64| {
        let (d, h) = (x - low, height(x));
        let r = (h - h_low) / h_low;
        let mean = if r.abs() < 1e-6 { 1.0 - 0.5 * r } else { r.ln_1p() / r };
        std::f64::consts::PI * d / h_low * mean
    };
    let place: Vec<(f64, bool)> =
        corners.iter().zip(&xs).map(|(&k, &x)| (xi(x), sides_of(k).contains(&first))).collect();
    let ln = |i: usize, j: usize| {
        let ((s, on), (t, other)) = (place[i], place[j]);
        let ratio = (-(s - t).abs()).exp();
        s.max(t) + if on == other { (-ratio).ln_1p() } else { ratio.ln_1p() }
    };
    let [a, b, c, d] = [0, 1, 2, 3];
    let value = ln(d, a) + ln(c, b) - ln(d, b) - ln(c, a);
    value.is_finite().then_some(value)
}

impl Placement {
    /// `ln |(d−a)(c−b)/((d−b)(c−a))|`
    fn ln_cross_ratio(&self, w: &[Point]) -> f64 {
        let ln = |p: usize, q: usize| 0.5 * (w[p] - w[q]).norm_sqr().ln();
        ln(self.d, self.a) + ln(self.c, self.b) - ln(self.d, self.b) - ln(self.c, self.a)
    }
}
