//! Polygons through scattered points, jagged polygons, stars.

use std::f64::consts::PI;

use num_complex::Complex64;

use super::draw::Draw;
use crate::generate::segments_cross;

/// A closed path through random points, untangled: wherever two sides cross, the stretch between them is walked the
/// other way. Each such step shortens the path, so it comes to an end.
pub(super) fn untangled(draw: &mut Draw, n: usize) -> Vec<Complex64> {
    let mut z: Vec<Complex64> =
        (0..n).map(|_| Complex64::new(draw.between(0.0, 1.0), draw.between(0.0, 1.0))).collect();
    loop {
        let mut crossed = false;
        for i in 0..n {
            for j in i + 2..n {
                if segments_cross(z[i], z[i + 1], z[j], z[(j + 1) % n]) {
                    z[i + 1..=j].reverse();
                    crossed = true;
                }
            }
        }
        if !crossed {
            break;
        }
    }
    let area: f64 = (0..n).map(|k| (z[k].conj() * z[(k + 1) % n]).im).sum();
    if area < 0.0 {
        z.reverse();
    }
    z
}

/// Sharpest corner of jagged polygons.
const SHARPEST: f64 = 0.01 * PI;

/// A regular polygon with teeth on its sides, outward and inward, their tips (or the roots between) as sharp as 0.01π.
///
/// An outward tooth stays above its side, an inward one in the triangle of its side and the centre.
pub(super) fn jagged(draw: &mut Draw, n: usize) -> Vec<Complex64> {
    let sides = draw.whole(3, 6);
    let corner = |k: usize| Complex64::from_polar(1.0, 2.0 * PI * k as f64 / sides as f64);
    let teeth = (n.saturating_sub(sides) / 3).max(1);
    let mut z = Vec::new();
    for k in 0..sides {
        let (a, b) = (corner(k), corner(k + 1));
        let length = (b - a).norm();
        let along = (b - a) / length;
        z.push(a);
        let mine = teeth / sides + usize::from(k < teeth % sides);
        for slot in 0..mine {
            let width = length / mine as f64;
            let middle = (slot as f64 + 0.5) * width;
            let room = middle.min(length - middle) * (0.5 * PI - PI / sides as f64).tan();
            let tip = draw.log_between(SHARPEST, 0.4 * PI);
            let base = width * draw.between(0.2, 0.9);
            let (highest, direction) = if draw.chance(0.6) { (1.5, -1.0) } else { (0.8 * room, 1.0) };
            let height = (0.5 * base / (0.5 * tip).tan()).min(highest);
            let half = height * (0.5 * tip).tan();
            let normal = Complex64::i() * along * direction;
            z.push(a + along * (middle - half));
            z.push(a + along * middle + normal * height);
            z.push(a + along * (middle + half));
        }
    }
    z
}

/// A star: far and near corners in turn round a centre, the tips no sharper than about 0.01π.
pub(super) fn star(draw: &mut Draw, n: usize) -> Vec<Complex64> {
    let tips = (n / 2).max(3);
    let half = PI / tips as f64;
    let slope = (0.5 * SHARPEST).tan() * 1.5;
    let least = slope / (half.sin() + slope * half.cos());
    let near = draw.log_between(least.max(0.03), 0.9);
    let ragged = draw.between(0.0, 0.25);
    (0..2 * tips)
        .map(|k| {
            let angle = half * (k as f64 + ragged * draw.between(-1.0, 1.0));
            let radius = if k % 2 == 0 { 1.0 } else { near };
            Complex64::from_polar(radius * draw.between(1.0 - ragged, 1.0), angle)
        })
        .collect()
}
