//! Irregular sections made here: random simple polygons with random electrodes, the same on every machine.

use num_complex::Complex64;
use rand_pcg::Pcg64;
use rand_pcg::rand_core::{Rng, SeedableRng};

use crate::held_section::{HeldSection, finite};
use crate::rational::{RationalProblem, SideData};

/// A generated section.
#[derive(Debug, Clone)]
pub struct IrregularCase {
    /// `irregular_` and its number, sides and electrodes.
    pub name: String,
    /// Vertices, counter-clockwise, with three decimals.
    pub vertices: Vec<Complex64>,
    /// Value on each held side, `None` on insulated ones; side `k` leaves vertex `k`.
    pub held: Vec<Option<f64>>,
}

impl IrregularCase {
    /// The case as a problem for rational least squares.
    #[must_use]
    pub fn problem(&self) -> RationalProblem {
        let side = |held: &Option<f64>| held.map_or(SideData::Insulated, SideData::Held);
        RationalProblem { vertices: self.vertices.clone(), sides: self.held.iter().map(side).collect() }
    }

    /// The case as a section for the program; each electrode is a run of sides.
    #[must_use]
    pub fn section(&self) -> HeldSection {
        HeldSection::by_run(finite(&self.vertices), &self.held)
    }

    /// Points inside, spread evenly over the section, at least `least_clearance` from the outline.
    ///
    /// # Panics
    /// If there is hardly any room at that clearance.
    #[must_use]
    pub fn interior_points(&self, count: usize, least_clearance: f64) -> Vec<Complex64> {
        let mut random = Uniform::new(271_828);
        let trials = (0..10_000 * count).map(|_| Complex64::new(10.0 * random.next(), 10.0 * random.next()));
        let fits =
            |z: &Complex64| contains(&self.vertices, *z) && clearance(&self.vertices, *z) >= least_clearance;
        let points: Vec<Complex64> = trials.filter(fits).take(count).collect();
        assert_eq!(points.len(), count, "{}: points found and points wanted", self.name);
        points
    }

    /// Distance of a point from the outline.
    #[must_use]
    pub fn clearance(&self, z: Complex64) -> f64 {
        clearance(&self.vertices, z)
    }

    /// Three points inside, well away from the outline.
    #[must_use]
    pub fn probes(&self) -> Vec<Complex64> {
        let mut candidates: Vec<(f64, Complex64)> = Vec::new();
        for i in 0..40 {
            for j in 0..40 {
                let z = Complex64::new(0.25 * f64::from(i) + 0.125, 0.25 * f64::from(j) + 0.125);
                if contains(&self.vertices, z) {
                    candidates.push((clearance(&self.vertices, z), z));
                }
            }
        }
        candidates.sort_by(|a, b| b.0.total_cmp(&a.0));
        let mut probes: Vec<Complex64> = Vec::new();
        for &(_, z) in &candidates {
            if probes.len() < 3 && probes.iter().all(|p| (z - p).norm() > 1.5) {
                probes.push(z);
            }
        }
        probes
    }
}

/// Source of the coordinates: 53 random bits to a number in `[0, 1)`.
pub(crate) struct Uniform(Pcg64);

impl Uniform {
    pub(crate) fn new(state: u64) -> Uniform {
        Uniform(Pcg64::seed_from_u64(state))
    }

    /// One of many independent sequences with one first state.
    pub(crate) fn stream(state: u128, stream: u128) -> Uniform {
        Uniform(Pcg64::new(state, stream))
    }

    /// A number between two others.
    pub(crate) fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * self.next()
    }

    fn next(&mut self) -> f64 {
        (self.0.next_u64() >> 11) as f64 / (1_u64 << 53) as f64
    }

    /// One of `0 … count − 1`.
    pub(crate) fn index(&mut self, count: usize) -> usize {
        ((self.next() * count as f64) as usize).min(count.saturating_sub(1))
    }
}

fn cross(a: Complex64, b: Complex64) -> f64 {
    a.re * b.im - a.im * b.re
}

pub(crate) fn segments_cross(a: Complex64, b: Complex64, c: Complex64, d: Complex64) -> bool {
    cross(b - a, c - a) * cross(b - a, d - a) < 0.0 && cross(d - c, a - c) * cross(d - c, b - c) < 0.0
}

fn segment_distance(z: Complex64, a: Complex64, b: Complex64) -> f64 {
    let along = b - a;
    let t = (((z - a) * along.conj()).re / along.norm_sqr()).clamp(0.0, 1.0);
    (z - a - along * t).norm()
}

fn clearance(vertices: &[Complex64], z: Complex64) -> f64 {
    let n = vertices.len();
    (0..n).map(|k| segment_distance(z, vertices[k], vertices[(k + 1) % n])).fold(f64::MAX, f64::min)
}

pub(crate) fn contains(vertices: &[Complex64], z: Complex64) -> bool {
    let n = vertices.len();
    (0..n).fold(false, |inside, k| {
        let (a, b) = (vertices[k], vertices[(k + 1) % n]);
        let crosses =
            (a.im > z.im) != (b.im > z.im) && z.re < a.re + (z.im - a.im) / (b.im - a.im) * (b.re - a.re);
        inside != crosses
    })
}

/// A closed path through random points of a 10 by 10 square, uncrossed by reversing stretches of it.
///
/// Each reversal shortens the path, so the loop ends; the bound is for safety. `None` when corners are sharper
/// than 0.15π (either way) or sides come nearer than 0.5 to a vertex of another: such sections test the limits
/// of double precision, not a method.
fn simple_polygon(random: &mut Uniform, n: usize) -> Option<Vec<Complex64>> {
    let decimals = |x: f64| (1000.0 * x).round() / 1000.0;
    let mut z: Vec<Complex64> = (0..n)
        .map(|_| Complex64::new(decimals(10.0 * random.next()), decimals(10.0 * random.next())))
        .collect();
    for _ in 0..1000 {
        let crossing = (0..n)
            .flat_map(|i| (i + 2..n).map(move |j| (i, j)))
            .find(|&(i, j)| segments_cross(z[i], z[i + 1], z[j], z[(j + 1) % n]));
        match crossing {
            Some((i, j)) => z[i + 1..=j].reverse(),
            None => break,
        }
    }
    let area: f64 = (0..n).map(|k| cross(z[k] - z[0], z[(k + 1) % n] - z[0])).sum();
    if area < 0.0 {
        z.reverse();
    }
    let pi = std::f64::consts::PI;
    let sound = (0..n).all(|k| {
        let (before, here, after) = (z[(k + n - 1) % n], z[k], z[(k + 1) % n]);
        let angle = ((before - here) / (after - here)).arg().rem_euclid(2.0 * pi);
        let others = (0..n).filter(|&j| j != k && (j + 1) % n != k);
        let apart = others.map(|j| segment_distance(here, z[j], z[(j + 1) % n])).fold(f64::MAX, f64::min);
        angle > 0.15 * pi && angle < 1.85 * pi && apart > 0.5
    });
    sound.then_some(z)
}

/// A polygon of `n` sides with random electrodes, if this trial yields a sound one.
fn trial(random: &mut Uniform, number: usize, n: usize, electrodes: usize) -> Option<IrregularCase> {
    let vertices = simple_polygon(random, n)?;
    let mut held: Vec<Option<f64>> = vec![None; n];
    let mut placed = 0;
    for _ in 0..1000 {
        let first = random.index(n);
        let free = |k: usize| held[k % n].is_none();
        if placed < electrodes && free(first + n - 1) && free(first) && free(first + 1) {
            held[first] = Some(placed as f64);
            placed += 1;
        }
    }
    // Some electrodes take the next side as well, where an insulated one still remains after it.
    for k in 0..n {
        if held[k].is_some() && held[(k + n - 1) % n].is_none() && random.index(3) == 0 {
            let next = (k + 1) % n;
            if held[next].is_none() && held[(k + 2) % n].is_none() && n > 2 * electrodes + 1 {
                held[next] = held[k];
            }
        }
    }
    let name = format!("irregular_{number}_{n}_sides_{electrodes}_electrodes");
    (placed == electrodes).then_some(IrregularCase { name, vertices, held })
}

/// Ten irregular sections of 5 to 9 sides: seven with two electrodes, three with three.
///
/// Electrodes are single sides or two neighbouring ones, never touching another electrode.
#[must_use]
pub fn irregular_ten() -> Vec<IrregularCase> {
    let mut random = Uniform::new(1869);
    let mut cases: Vec<IrregularCase> = Vec::new();
    // About one polygon in ten is sound; ten thousand trials are more than will ever be drawn.
    for _ in 0..10_000 {
        let number = cases.len();
        if number == 10 {
            break;
        }
        let electrodes = if number % 3 == 2 { 3 } else { 2 };
        let n = (5 + number % 5).max(2 * electrodes + 1);
        cases.extend(trial(&mut random, number, n, electrodes));
    }
    cases
}

/// The irregular section of this number, of 4 to 12 sides and two or three electrodes, the same on every machine.
///
/// # Panics
/// If no sound polygon is found in many times the number of trials that are needed.
#[must_use]
pub fn irregular(number: u32) -> IrregularCase {
    let mut random = Uniform::new(u64::from(number) + 1_000_000);
    let electrodes = 2 + random.index(2);
    let n = (4 + random.index(9)).max(2 * electrodes);
    // One polygon in a few is sound at 4 sides, one in a thousand at 12.
    (0..1_000_000)
        .find_map(|_| trial(&mut random, number as usize, n, electrodes))
        .unwrap_or_else(|| panic!("no sound polygon of {n} sides for number {number}"))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ten_sections_are_simple_and_have_their_electrodes() {
        let cases = irregular_ten();
        assert_eq!(cases.len(), 10);
        for case in &cases {
            let n = case.vertices.len();
            assert!((5..=9).contains(&n), "{}", case.name);
            for i in 0..n {
                for j in i + 2..n {
                    let (a, b) = (case.vertices[i], case.vertices[i + 1]);
                    let (c, d) = (case.vertices[j], case.vertices[(j + 1) % n]);
                    assert!(!segments_cross(a, b, c, d), "{}: sides {i} and {j} cross", case.name);
                }
            }
            let electrodes = case.problem().electrodes().len();
            assert!(case.name.ends_with(&format!("{electrodes}_electrodes")), "{}", case.name);
            assert_eq!(case.probes().len(), 3, "{}", case.name);
        }
        assert_eq!(cases.iter().filter(|case| case.name.ends_with("3_electrodes")).count(), 3);
    }
}
