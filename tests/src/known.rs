//! Sections whose conductance is known beforehand, as many as one likes.
//!
//! - *Self-dual*: a section with an axis of symmetry through two of its vertices, where reflection takes held sides to
//!   insulated ones. Reflection leaves the conductance as it is, exchange of held and insulated sides inverts it, so it
//!   is one. The halves are mirrored exactly in binary arithmetic, so that it is one for what the program reads.
//! - *Rectangles* turned by a Pythagorean angle, with whole numbers for corners: the aspect ratio, exactly.
//! - *Regular polygons* with two runs of sides held: the prevertices are roots of unity (Trefethen 1984, cited from
//!   memory), so the cross-ratio is a ratio of sines. The coordinates of the corners are rounded.

use std::f64::consts::PI;

use num_complex::Complex64;

use crate::generate::Uniform;
use crate::held_section::{HeldSection, finite};

/// A section with its conductance.
#[derive(Debug, Clone)]
pub struct KnownSection {
    /// Kind of section.
    pub family: Family,
    /// The section, with levels 1 and 0.
    pub section: HeldSection,
    /// Conductance between the levels.
    pub conductance: f64,
    /// Bound on the relative change of the conductance by the rounding of the coordinates.
    pub rounding: f64,
    /// The potential at every point, where it is linear: `φ(z) = Re (a + b z)`.
    pub linear: Option<(f64, Complex64)>,
}

/// Kinds of sections with a known conductance.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Family {
    /// Quadrilateral symmetric about a diagonal.
    Kite,
    /// Self-dual, star-shaped about a point of the axis.
    Star,
    /// Self-dual, with a comb on either side of the axis.
    Comb,
    /// Self-dual, with a wall of no thickness on either side of the axis.
    Walls,
    /// Turned rectangle, some of its sides cut by flat vertices.
    Rectangle,
    /// Regular polygon.
    Regular,
}

impl Family {
    /// All of them.
    pub const ALL: [Family; 6] =
        [Family::Kite, Family::Star, Family::Comb, Family::Walls, Family::Rectangle, Family::Regular];
}

/// The known section of a number, of the families in turn, the same on every machine.
#[must_use]
pub fn known(number: u32) -> KnownSection {
    let random = &mut Uniform::new(u64::from(number) + 5_000_000);
    let family = Family::ALL[number as usize % Family::ALL.len()];
    match family {
        Family::Kite => self_dual(random, family, kite),
        Family::Star => self_dual(random, family, star),
        Family::Comb => self_dual(random, family, comb),
        Family::Walls => self_dual(random, family, walls),
        Family::Rectangle => rectangle(random),
        Family::Regular => regular(random),
    }
}

/// Half an outline above the real axis, from its right end on the axis to its left end.
type Half = Vec<Complex64>;

/// Two corners of the axis and one beside it, for a kite or a dart.
fn kite(random: &mut Uniform) -> Half {
    let reach = random.between(0.5, 4.0);
    vec![
        Complex64::new(reach, 0.0),
        Complex64::new(random.between(-2.0, 0.9 * reach), random.between(0.1, 3.0)),
        Complex64::new(-random.between(0.1, 0.4), 0.0),
    ]
}

/// Corners at growing angles.
fn star(random: &mut Uniform) -> Half {
    let m = 2 + random.index(10);
    let steps: Vec<f64> = (0..m).map(|_| random.between(0.3, 1.0)).collect();
    let total: f64 = steps.iter().sum();
    let mut angle = 0.0;
    let mut half = vec![Complex64::new(random.between(0.2, 1.5), 0.0)];
    for step in &steps[..m - 1] {
        angle += PI * step / total;
        half.push(Complex64::from_polar(random.between(0.2, 1.5), angle));
    }
    half.push(Complex64::new(-random.between(0.2, 1.5), 0.0));
    half
}

/// Teeth of random width and depth.
fn comb(random: &mut Uniform) -> Half {
    let teeth = 1 + random.index(4);
    let mut x = 0.0;
    let mut half = vec![Complex64::new(0.0, 0.0)];
    for tooth in 0..teeth {
        let top = random.between(0.5, 3.0);
        half.push(Complex64::new(x, top));
        x -= random.between(0.2, 1.0);
        half.push(Complex64::new(x, top));
        if tooth + 1 < teeth {
            let floor = random.between(0.05, 0.4);
            half.push(Complex64::new(x, floor));
            x -= random.between(0.2, 1.0);
            half.push(Complex64::new(x, floor));
        }
    }
    half.push(Complex64::new(x, 0.0));
    half
}

/// A box with walls hanging from its top.
fn walls(random: &mut Uniform) -> Half {
    let (count, height) = (1 + random.index(2), random.between(0.5, 2.0));
    let mut x = 0.0;
    let mut half = vec![Complex64::new(0.0, 0.0), Complex64::new(0.0, height)];
    for _ in 0..count {
        x -= random.between(0.3, 1.0);
        let tip = height * random.between(0.1, 0.9);
        half.extend([height, tip, height].map(|y| Complex64::new(x, y)));
    }
    x -= random.between(0.3, 1.0);
    half.extend([Complex64::new(x, height), Complex64::new(x, 0.0)]);
    half
}

/// Mirrors half an outline, holds a first stretch of it and the mirror image of the rest, and lays the axis along one
/// of the four directions in which reflection is exact.
fn self_dual(random: &mut Uniform, family: Family, half: fn(&mut Uniform) -> Half) -> KnownSection {
    let upper = half(random);
    let m = upper.len() - 1;
    let mut points = upper.clone();
    points.extend(upper[1..m].iter().rev().map(|z| z.conj()));
    let n = points.len();
    // Side k of the upper half and side n − 1 − k are images of one another.
    let first = 1 + random.index(m - 1);
    let held: Vec<Option<f64>> = (0..n)
        .map(|k| if k < m { (k < first).then_some(1.0) } else { (n - 1 - k >= first).then_some(0.0) })
        .collect();
    let shift = Complex64::new(random.between(-2.0, 2.0).round(), 0.0);
    let direction = random.index(4);
    let placed = points.into_iter().map(|z| {
        // A shift along the axis keeps the symmetry, whatever its rounding.
        let z = z + shift;
        match direction {
            0 => z,
            1 => Complex64::new(-z.im, z.re),
            // About the diagonals reflection exchanges x and y.
            2 => Complex64::new(z.re - z.im, z.re + z.im),
            _ => Complex64::new(-z.re - z.im, z.re - z.im),
        }
    });
    let section = HeldSection::by_level(finite(&placed.collect::<Vec<_>>()), &held);
    KnownSection { family, section, conductance: 1.0, rounding: 0.0, linear: None }
}

/// Whole numbers of two perpendicular vectors of one whole length.
const TRIPLES: [(f64, f64); 6] =
    [(1.0, 0.0), (3.0, 4.0), (12.0, -5.0), (-8.0, 15.0), (-20.0, -21.0), (7.0, 24.0)];

fn rectangle(random: &mut Uniform) -> KnownSection {
    let (p, q) = TRIPLES[random.index(TRIPLES.len())];
    let along = Complex64::new(p, q);
    // A thousandth of a side is the shortest part; everything is a whole number.
    let (length, width) = (1 + random.index(40), 1 + random.index(8));
    let corner = Complex64::new(random.index(2000) as f64 - 1000.0, random.index(2000) as f64 - 1000.0);
    let lengths = [
        (along, length),
        (along * Complex64::i(), width),
        (-along, length),
        (-along * Complex64::i(), width),
    ];
    let (mut points, mut held) = (Vec::new(), Vec::new());
    let mut here = corner;
    for (k, (direction, count)) in lengths.into_iter().enumerate() {
        let level = [None, Some(0.0), None, Some(1.0)][k];
        let steps = 1000 * count;
        let mut cuts: Vec<usize> = (0..random.index(3)).map(|_| 1 + random.index(steps - 1)).collect();
        cuts.push(0);
        cuts.sort_unstable();
        cuts.dedup();
        points.extend(cuts.iter().map(|&cut| here + direction * cut as f64));
        held.extend(cuts.iter().map(|_| level));
        here += direction * steps as f64;
    }
    // From 1 at the start of the first side to 0 at its end.
    let slope = -along.conj() / (along.norm_sqr() * 1000.0 * length as f64);
    let start = 1.0 - (slope * corner).re;
    KnownSection {
        family: Family::Rectangle,
        section: HeldSection::by_level(finite(&points), &held),
        conductance: width as f64 / length as f64,
        rounding: 0.0,
        linear: Some((start, slope)),
    }
}

fn regular(random: &mut Uniform) -> KnownSection {
    let n = 4 + random.index(14);
    let points: Vec<Complex64> =
        (0..n).map(|k| Complex64::from_polar(1.0, 2.0 * PI * k as f64 / n as f64)).collect();
    // Four different vertices in order: ends of the two runs.
    let mut ends: Vec<usize> = Vec::new();
    while ends.len() < 4 {
        let k = random.index(n);
        if !ends.contains(&k) {
            ends.push(k);
        }
    }
    ends.sort_unstable();
    let held: Vec<Option<f64>> = (0..n)
        .map(|k| {
            if (ends[0]..ends[1]).contains(&k) {
                Some(1.0)
            } else if (ends[2]..ends[3]).contains(&k) {
                Some(0.0)
            } else {
                None
            }
        })
        .collect();
    let chord = |a: usize, b: usize| (PI * (b - a) as f64 / n as f64).sin();
    let whole = chord(ends[0], ends[2]) * chord(ends[1], ends[3]);
    let lambda = chord(ends[0], ends[1]) * chord(ends[2], ends[3]) / whole;
    let rest = chord(ends[1], ends[2]) * chord(ends[0], ends[3]) / whole;
    // G = K(λ)/K(1 − λ), K(m) = π / (2 M(1, √(1 − m))).
    let conductance = mean(rest.sqrt()).recip() * mean(lambda.sqrt());
    KnownSection {
        family: Family::Regular,
        section: HeldSection::by_level(finite(&points), &held),
        conductance,
        // Each corner is off by ε/2 or so, a side by (ε/2)/sin(π/n) of itself; measured, not proved.
        rounding: 0.5 * f64::EPSILON * n as f64,
        linear: None,
    }
}

/// Arithmetic–geometric mean of 1 and a positive number; seven steps reach rounding for ratios down to 1e-8.
fn mean(b: f64) -> f64 {
    let (mut a, mut b) = (1.0_f64, b);
    for _ in 0..12 {
        (a, b) = (0.5 * (a + b), (a * b).sqrt());
    }
    a
}
