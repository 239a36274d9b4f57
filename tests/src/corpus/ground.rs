//! Beds surveyed under a flat top, and sections with walls of no thickness.

use num_complex::Complex64;

use super::draw::Draw;

fn at(x: f64, y: f64) -> Complex64 {
    Complex64::new(x, y)
}

/// A flat top cut in a few parts over a noisy bottom: white noise, a wandering line, or steps.
///
/// The top is at zero and the bottom never above −0.1, and both run on in x, so they cannot meet.
pub(super) fn bed(draw: &mut Draw, n: usize) -> Vec<Complex64> {
    let parts = draw.whole(1, (n / 5).clamp(1, 6));
    let bottom = n.saturating_sub(parts + 3);
    let length = draw.log_between(1.0, 20.0);
    let noise = draw.log_between(1e-3, 0.5);
    let xs = draw.rising(bottom, 0.0, length);
    let kind = draw.index(3);
    let mut depth = 1.0;
    let mut z = vec![at(0.0, -1.0)];
    for (k, &x) in xs.iter().enumerate() {
        let change = noise * draw.between(-1.0, 1.0);
        match kind {
            0 => z.push(at(x, -(1.0 + change))),
            1 => {
                depth = f64::clamp(depth + 0.5 * change, 0.1, 3.0);
                z.push(at(x, -depth));
            }
            _ => {
                // Two corners at one x: a step.
                let x = xs[k - k % 2];
                if k % 2 == 1 {
                    depth = 1.0 + change + 0.01 * noise;
                }
                z.push(at(x, -depth));
            }
        }
    }
    z.push(at(length, -1.0));
    z.push(at(length, 0.0));
    let cuts = draw.rising(parts - 1, 0.0, length);
    z.extend(cuts.into_iter().rev().map(|x| at(x, 0.0)));
    z.push(at(0.0, 0.0));
    z
}

/// The line of a wall from its root down to its tip (heights fall if `down`, else rise), within `room` of its root.
fn wall(draw: &mut Draw, root: Complex64, length: f64, down: bool, room: f64) -> Vec<Complex64> {
    let sign = if down { -1.0 } else { 1.0 };
    let tip = |lean: f64| root + at(lean, sign * length);
    match draw.index(4) {
        0 | 1 => vec![tip(0.0)],
        2 => vec![tip(room * draw.between(-1.0, 1.0))],
        _ => {
            let kinks = draw.whole(1, 2);
            let heights = draw.rising(kinks, 0.0, length);
            let mut line: Vec<Complex64> =
                heights.into_iter().map(|h| root + at(room * draw.between(-1.0, 1.0), sign * h)).collect();
            line.push(tip(room * draw.between(-1.0, 1.0)));
            line
        }
    }
}

/// Out along one face of a wall and back along the other, the root at both ends.
fn both_faces(root: Complex64, line: &[Complex64]) -> Vec<Complex64> {
    let out = std::iter::once(root).chain(line.iter().copied());
    let back = line.iter().rev().skip(1).copied();
    out.chain(back).chain([root]).collect()
}

/// A box with one to three walls of no thickness, each in its own stretch of the length, some beside a step of the
/// ground; the gap beyond a wall is at least a thousandth of the depth.
pub(super) fn walled(draw: &mut Draw, n: usize) -> Vec<Complex64> {
    let count = draw.whole(1, 3);
    let length = draw.log_between(1.0, 10.0);
    let stretch = length / count as f64;
    let noisy = draw.chance(0.3);
    let mut bottom = vec![at(0.0, -1.0)];
    let mut top = vec![at(0.0, 0.0)];
    let mut ground = 0.0;
    for w in 0..count {
        let x = stretch * (w as f64 + draw.between(0.35, 0.65));
        let room = 0.3 * stretch;
        let gap = if noisy { draw.log_between(0.25, 0.8) } else { draw.log_between(1e-3, 0.8) };
        let long = 1.0 - gap;
        if draw.chance(0.65) {
            if draw.chance(0.25) {
                // A vertical wall that is bare on one face down to the lower ground.
                let beyond = if ground < 0.0 { 0.0 } else { -draw.between(0.03, 0.32) };
                top.extend([at(x, ground), at(x, -long.max(0.45)), at(x, beyond)]);
                ground = beyond;
            } else {
                let root = at(x, ground);
                let line = wall(draw, root, ground + long.max(0.1 - ground), true, room);
                top.extend(both_faces(root, &line));
            }
        } else {
            let root = at(x, -1.0);
            let line = wall(draw, root, (long + ground).max(0.05), false, room);
            bottom.extend(both_faces(root, &line));
        }
    }
    bottom.push(at(length, -1.0));
    top.push(at(length, ground));
    let more = n.saturating_sub(bottom.len() + top.len());
    if noisy {
        roughen(draw, &mut bottom, more);
    } else {
        // Flat vertices on the first part of the bottom, which no wall stands on.
        let cuts = draw.rising(more.min(8), 0.0, 0.3 * stretch);
        bottom.splice(1..1, cuts.into_iter().map(|x| at(x, -1.0)));
    }
    top.reverse();
    bottom.extend(top);
    bottom
}

/// Puts more vertices into the level parts of a bottom, up or down by a tenth.
fn roughen(draw: &mut Draw, bottom: &mut Vec<Complex64>, more: usize) {
    let level: Vec<usize> = (0..bottom.len() - 1)
        .filter(|&k| bottom[k].im.total_cmp(&bottom[k + 1].im).is_eq() && bottom[k].re < bottom[k + 1].re)
        .collect();
    let each = more / level.len().max(1);
    for &k in level.iter().rev() {
        let xs = draw.rising(each, bottom[k].re, bottom[k + 1].re);
        // Below the line only: a wall standing beside may lean over it.
        let rough: Vec<Complex64> =
            xs.into_iter().map(|x| at(x, -1.0 - 0.1 * draw.between(0.01, 1.0))).collect();
        bottom.splice(k + 1..k + 1, rough);
    }
}
