//! Spirals, needles and channels.

use std::f64::consts::PI;

use num_complex::Complex64;

use super::draw::Draw;

/// A channel wound round a centre: corners on `p` rays, on each ray the faces one pitch apart from turn to turn.
///
/// Between two rays all faces are chords in the same order as on the rays, so none cross.
pub(super) fn spiral(draw: &mut Draw, n: usize) -> Vec<Complex64> {
    let rays = draw.whole(3, 8);
    let corners = (n / 2).max(3);
    let width = draw.log_between(0.2, 0.95);
    let first = 0.5 * width + draw.log_between(0.02, 2.0);
    let face = |k: usize, offset: f64| {
        let turns = k as f64 / rays as f64;
        Complex64::from_polar(first + turns + offset, 2.0 * PI * turns)
    };
    let outer = (0..corners).map(|k| face(k, 0.5 * width));
    let inner = (0..corners).rev().map(|k| face(k, -0.5 * width));
    outer.chain(inner).collect()
}

/// A thin body between two tips, or a tip and a blunt end, with uneven faces; the tips are no sharper than 0.01π.
pub(super) fn needle(draw: &mut Draw, n: usize) -> Vec<Complex64> {
    let blunt = draw.chance(0.3);
    let tip = draw.log_between(0.01 * PI, 0.15 * PI);
    let slope = (0.5 * tip).tan();
    let uneven = draw.between(1.0, 2.5);
    let half_width = |x: f64| slope * if blunt { x } else { x.min(1.0 - x) };
    let inner = n.saturating_sub(if blunt { 3 } else { 2 });
    let below = draw.whole(1, inner.max(3) - 2);
    let above = inner.max(3) - below;
    let mut z = vec![Complex64::new(0.0, 0.0)];
    let mut face = |count: usize, sign: f64| -> Vec<Complex64> {
        let xs = draw.rising(count, 0.0, 1.0);
        xs.into_iter().map(|x| Complex64::new(x, sign * half_width(x) * draw.between(1.0, uneven))).collect()
    };
    z.extend(face(below, -1.0));
    let top = face(above, 1.0);
    if blunt {
        z.push(Complex64::new(1.0, -half_width(1.0)));
        z.push(Complex64::new(1.0, half_width(1.0)));
    } else {
        z.push(Complex64::new(1.0, 0.0));
    }
    z.extend(top.into_iter().rev());
    z
}

/// A channel up to 300 times as long as wide: straight with uneven walls, folded, or zigzag.
pub(super) fn channel(draw: &mut Draw, n: usize) -> Vec<Complex64> {
    let length = draw.log_between(5.0, 300.0);
    match draw.index(3) {
        0 => uneven(draw, n, length),
        1 => {
            let legs = (n / 4).clamp(2, 48);
            let leg = (length / legs as f64).max(1.3);
            let pitch = 1.0 + draw.log_between(0.05, 3.0);
            thickened(&folded(legs, leg, pitch))
        }
        _ => {
            let legs = (n / 2).saturating_sub(1).max(2);
            let steepest = draw.between(0.05, 0.27) * PI;
            let mut path = vec![Complex64::new(0.0, 0.0)];
            for k in 0..legs {
                // At 50° a leg of five widths clears the mitres of both its ends.
                let shortest = 5.0_f64.max(length / legs as f64);
                let sign = if k % 2 == 0 { 1.0 } else { -1.0 };
                let step = Complex64::from_polar(
                    shortest * draw.between(1.0, 2.0),
                    sign * steepest * draw.between(0.1, 1.0),
                );
                path.push(path[k] + step);
            }
            thickened(&path)
        }
    }
}

fn uneven(draw: &mut Draw, n: usize, length: f64) -> Vec<Complex64> {
    let inner = n.saturating_sub(4).max(1);
    let below = draw.whole(0, inner);
    let depth = draw.between(0.0, 0.45);
    let mut face = |count: usize, sign: f64| -> Vec<Complex64> {
        let xs = draw.rising(count, 0.0, length);
        xs.into_iter().map(|x| Complex64::new(x, sign * (0.5 - depth * draw.between(0.0, 1.0)))).collect()
    };
    let (bottom, top) = (face(below, -1.0), face(inner - below, 1.0));
    let mut z = vec![Complex64::new(0.0, -0.5)];
    z.extend(bottom);
    z.extend([Complex64::new(length, -0.5), Complex64::new(length, 0.5)]);
    z.extend(top.into_iter().rev());
    z.push(Complex64::new(0.0, 0.5));
    z
}

/// Middle line of a folded channel.
fn folded(legs: usize, leg: f64, pitch: f64) -> Vec<Complex64> {
    (0..legs)
        .flat_map(|k| {
            let x = pitch * k as f64;
            let (from, to) = if k % 2 == 0 { (0.0, leg) } else { (leg, 0.0) };
            [Complex64::new(x, from), Complex64::new(x, to)]
        })
        .collect()
}

/// The channel of width one about a path, its bends mitred.
fn thickened(path: &[Complex64]) -> Vec<Complex64> {
    let m = path.len();
    let unit = |k: usize| (path[k + 1] - path[k]) / (path[k + 1] - path[k]).norm();
    let offset = |k: usize| {
        let (before, after) = (unit(k.max(1) - 1), unit(k.min(m - 2)));
        let middle = before + after;
        // The mitre reaches the faces of both legs: its part along their common normal is one half.
        Complex64::i() * middle / middle.norm_sqr()
    };
    let right = (0..m).map(|k| path[k] - offset(k));
    let left = (0..m).rev().map(|k| path[k] + offset(k));
    right.chain(left).collect()
}
