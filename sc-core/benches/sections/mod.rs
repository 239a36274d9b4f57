//! The sections of the benches.
#![allow(dead_code, reason = "each bench uses some of them")]

use sc_core::outline::{Containment, Outline, Point, Vertex};
use sc_core::potential::Section;

/// A section between two held sides, at 1 and at 0.
pub(crate) fn between(vertices: &[Vertex], one: usize, zero: usize) -> Section {
    let outline = Outline::new(vertices).expect("the outline is sound").value;
    let electrode = |k: usize| if k == one { Some(0) } else { (k == zero).then_some(1) };
    let electrodes: Vec<Option<usize>> = (0..vertices.len()).map(electrode).collect();
    Section::new(outline, &electrodes, &[1.0, 0.0]).expect("the conditions are sound").0
}

fn finite(points: &[(f64, f64)]) -> Vec<Vertex> {
    points.iter().map(|&(x, y)| Vertex::at(x, y)).collect()
}

/// Three unit squares as an L, its exact shape factor 1/√3 (after Gaier 1972).
pub(crate) fn ell() -> Section {
    between(&finite(&[(1.0, 2.0), (0.0, 2.0), (0.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, 1.0)]), 0, 2)
}

/// A comb: teeth of width 1 and length 5, a unit apart, on a back of thickness 1; from end to end.
pub(crate) fn comb(teeth: usize) -> Section {
    let width = 2.0 * teeth as f64 - 1.0;
    let mut points = vec![(0.0, 0.0), (width, 0.0)];
    for tooth in (0..teeth).rev() {
        let left = 2.0 * tooth as f64;
        points.extend([(left + 1.0, 6.0), (left, 6.0)]);
        if tooth > 0 {
            points.extend([(left, 1.0), (left - 1.0, 1.0)]);
        }
    }
    let last = points.len() - 1;
    between(&finite(&points), 1, last)
}

/// A long rectangle, from one long side to the other; its prevertices crowd as exp(−π · aspect).
pub(crate) fn rectangle(aspect: f64) -> Section {
    between(&finite(&[(0.0, 0.0), (aspect, 0.0), (aspect, 1.0), (0.0, 1.0)]), 0, 2)
}

/// Twelve sides, re-entrant corners, no symmetry.
pub(crate) fn twelve_sides() -> Section {
    let points = [
        (0.0, 0.0),
        (7.0, -0.5),
        (9.5, 1.0),
        (9.0, 3.0),
        (6.5, 2.5),
        (6.0, 4.0),
        (8.5, 5.5),
        (7.0, 7.0),
        (4.0, 6.5),
        (3.5, 4.0),
        (2.0, 4.5),
        (-0.5, 3.0),
    ];
    between(&finite(&points), 0, 7)
}

/// A layer of depth 1 with a sheet pile; from the bed on one side to the bed on the other.
pub(crate) fn sheet_pile(depth: f64) -> Section {
    let vertices = [
        Vertex::away(0.0),
        Vertex::at(0.0, 0.0),
        Vertex::at(0.0, -depth),
        Vertex::at(0.0, 0.0),
        Vertex::away(180.0),
        Vertex::at(0.0, -1.0),
    ];
    between(&vertices, 0, 3)
}

/// A weir on a layer of depth 12, with a cutoff under either end of its floor.
pub(crate) fn weir() -> Section {
    let vertices = [
        Vertex::away(0.0),
        Vertex::at(18.0, 0.0),
        Vertex::at(18.0, -4.5),
        Vertex::at(18.0, -0.5),
        Vertex::at(0.0, -0.5),
        Vertex::at(0.0, -6.0),
        Vertex::at(0.0, 0.0),
        Vertex::away(180.0),
        Vertex::at(9.0, -12.0),
    ];
    between(&vertices, 0, 6)
}

/// Numbers in [0, 1): a Weyl sequence whose terms are mixed (the finaliser of SplitMix64, Steele, Lea and Flood 2014).
struct Uniform(u64);

impl Uniform {
    fn next(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let a = (self.0 ^ (self.0 >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        let b = (a ^ (a >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((b ^ (b >> 31)) >> 11) as f64 / (1_u64 << 53) as f64
    }
}

/// Ten simple polygons of 40 sides through random points of a square, `forty_a` to `forty_j`; the first side is held
/// at 1, the one opposite in the list at 0.
pub(crate) fn forty() -> Vec<(String, Section)> {
    ('a'..='j')
        .zip(1..)
        .map(|(letter, number)| {
            let mut random = Uniform(number * 1_000_003);
            // A few dozen trials each; the bound is for safety.
            let found = (0..10_000).find_map(|_| simple_polygon(&mut random, 40));
            (format!("forty_{letter}"), between(&finite(&found.expect("a polygon is found")), 0, 20))
        })
        .collect()
}

/// A closed path through random points, uncrossed by reversing stretches of it: every reversal shortens the path, so
/// the loop ends. `None` where a side passes a vertex of another closer than 1/500 of the square.
fn simple_polygon(random: &mut Uniform, n: usize) -> Option<Vec<(f64, f64)>> {
    let mut z: Vec<Point> = (0..n).map(|_| Point::new(10.0 * random.next(), 10.0 * random.next())).collect();
    let cross = |a: Point, b: Point| a.re * b.im - a.im * b.re;
    for _ in 0..10_000 {
        let crosses = |i: usize, j: usize| {
            let (a, b, c, d) = (z[i], z[i + 1], z[j], z[(j + 1) % n]);
            cross(b - a, c - a) * cross(b - a, d - a) < 0.0 && cross(d - c, a - c) * cross(d - c, b - c) < 0.0
        };
        let crossing = (0..n).flat_map(|i| (i + 2..n).map(move |j| (i, j))).find(|&(i, j)| crosses(i, j));
        match crossing {
            Some((i, j)) => z[i + 1..=j].reverse(),
            None => break,
        }
    }
    let area: f64 = (0..n).map(|k| cross(z[k] - z[0], z[(k + 1) % n] - z[0])).sum();
    if area < 0.0 {
        z.reverse();
    }
    let apart = |k: usize, j: usize| {
        let (a, along) = (z[j], z[(j + 1) % n] - z[j]);
        let t = (((z[k] - a) * along.conj()).re / along.norm_sqr()).clamp(0.0, 1.0);
        (z[k] - a - along * t).norm()
    };
    let sound = (0..n).all(|k| (0..n).filter(|&j| j != k && (j + 1) % n != k).all(|j| apart(k, j) > 0.02));
    sound.then(|| z.iter().map(|z| (z.re, z.im)).collect())
}

/// Points inside a section, evenly spread over its bounding box (the R₂ sequence of the plastic number).
pub(crate) fn points_inside(outline: &Outline, count: usize) -> Vec<Point> {
    let corners: Vec<Point> = (0..outline.n()).filter_map(|k| outline.point(k)).collect();
    let (mut low, mut high) = (corners[0], corners[0]);
    for z in corners {
        low = Point::new(low.re.min(z.re), low.im.min(z.im));
        high = Point::new(high.re.max(z.re), high.im.max(z.im));
    }
    (0_u32..)
        .map(|i| {
            let (u, v) = (f64::from(i) * 0.754_877_666_246_692_8, f64::from(i) * 0.569_840_290_998_053_3);
            Point::new(low.re + (high.re - low.re) * u.fract(), low.im + (high.im - low.im) * v.fract())
        })
        .filter(|&z| outline.contains(z) == Containment::Inside)
        .take(count)
        .collect()
}

/// Points 1e-9 of its shorter side from a corner, on the bisector, corner after corner.
pub(crate) fn points_at_corners(outline: &Outline, count: usize) -> Vec<Point> {
    let n = outline.n();
    (0..count)
        .filter_map(|i| {
            let k = i % n;
            let length = outline.side_length(k)?.min(outline.side_length(k + n - 1)?);
            let half = 0.5 * std::f64::consts::PI * outline.alpha()[k];
            // Not all at one distance: the hundred and first point is not the first again.
            let distance = 1e-9 * length * (1.0 + i as f64 / count as f64);
            Some(outline.point(k)? + outline.side_direction(k) * Point::from_polar(distance, half))
        })
        .collect()
}

/// A pool of a given number of threads.
pub(crate) fn pool(threads: usize) -> rayon::ThreadPool {
    rayon::ThreadPoolBuilder::new().num_threads(threads).build().expect("threads can be started")
}
