//! Sections that reach infinity: layers, half-planes with pits, wedges, closed channels, junctions.

use std::f64::consts::PI;

use num_complex::Complex64;
use sc_core::outline::Vertex;

use super::draw::Draw;

fn at(x: f64, y: f64) -> Complex64 {
    Complex64::new(x, y)
}

/// A ground line from left to right with sheet piles, floors, steps, banks and flat vertices.
///
/// Its heights are within −0.45 and 0.3; sheet piles reach down to between `deepest` and the ground.
fn ground(draw: &mut Draw, features: usize, deepest: f64) -> Vec<Complex64> {
    let mut line = Vec::new();
    let mut height = 0.0;
    for k in 0..features {
        // Each feature keeps to its own unit of the length.
        let (left, right) = (k as f64 + draw.between(0.1, 0.4), k as f64 + draw.between(0.6, 0.9));
        let middle = 0.5 * (left + right);
        let other = draw.between(-0.45, 0.3);
        match draw.index(7) {
            0 => line.push(at(middle, height)),
            1 => {
                line.extend([at(left, height), at(right, other)]);
                height = other;
            }
            2 => {
                line.extend([at(middle, height), at(middle, other)]);
                height = other;
            }
            3 => {
                let floor = height.min(other) - 0.02;
                line.extend([at(left, height), at(left, floor), at(right, floor), at(right, height)]);
            }
            4 | 5 => {
                // A sheet pile, with the ground at another height beyond it one time in three.
                let beyond = if draw.chance(0.33) { other } else { height };
                let low = height.min(beyond);
                let tip = deepest + (low - deepest) * draw.log_between(1e-3, 0.95);
                line.extend([at(middle, height), at(middle, tip), at(middle, beyond)]);
                height = beyond;
            }
            _ => {
                let tip = deepest + (height - deepest) * draw.log_between(1e-2, 0.95);
                let tip = at(draw.between(left, right), tip);
                let root = at(middle, height);
                line.extend([root, tip, root]);
            }
        }
    }
    line
}

/// A bottom from left to right between −1.5 and −0.7, stepped or sloping.
fn stepped(draw: &mut Draw, features: usize) -> Vec<Complex64> {
    let mut line = Vec::new();
    let mut height = -1.0;
    for k in 0..features {
        let x = k as f64 + draw.between(0.1, 0.4);
        let next = draw.between(-1.5, -0.7);
        let run = if draw.chance(0.5) { 0.0 } else { draw.between(0.05, 0.5) };
        line.extend([at(x, height), at(x + run, next)]);
        height = next;
    }
    line
}

fn finite(points: Vec<Complex64>) -> impl DoubleEndedIterator<Item = Vertex> {
    points.into_iter().map(Vertex::At)
}

/// An unbounded section of about `n` sides.
pub(super) fn unbounded(draw: &mut Draw, n: usize) -> Vec<Vertex> {
    let features = (n / 4).max(2);
    match draw.index(6) {
        0 | 1 => {
            let (bottom, top) = layer(draw, features);
            let left = std::iter::once(Vertex::away(180.0));
            let right = [Vertex::away(0.0)];
            left.chain(finite(bottom)).chain(right).chain(finite(top).rev()).collect()
        }
        2 => {
            let (mut bottom, mut top) = layer(draw, features);
            bottom.insert(0, at(0.0, bottom[0].im));
            top.insert(0, at(0.0, 0.0));
            finite(bottom).chain([Vertex::away(0.0)]).chain(finite(top).rev()).collect()
        }
        3 => {
            let top = with_flat_ends(ground(draw, features, -2.0), features);
            let level = Vertex::Away { arriving: 180.0, leaving: 0.0 };
            std::iter::once(level).chain(finite(top).rev()).collect()
        }
        4 => wedge(draw, n),
        _ => junction(draw, n),
    }
}

/// Bottom and top of a layer; the piles end a thousandth of their room above a flat bottom, well above a stepped one.
fn layer(draw: &mut Draw, features: usize) -> (Vec<Complex64>, Vec<Complex64>) {
    if draw.chance(0.5) {
        let mut bottom: Vec<Complex64> = vec![at(draw.between(0.2, 0.8), -1.0)];
        if draw.chance(0.5) {
            bottom.push(at(draw.between(1.0, features as f64), -1.0));
        }
        (bottom, with_flat_ends(ground(draw, features, -1.0), features))
    } else {
        let half = features.div_ceil(2);
        let top = with_flat_ends(ground(draw, half, -0.65), half);
        (stepped(draw, half), top)
    }
}

/// At least four vertices: flat ones are put before and behind.
fn with_flat_ends(mut line: Vec<Complex64>, features: usize) -> Vec<Complex64> {
    let height = line.last().map_or(0.0, |z| z.im);
    line.insert(0, at(0.02, line.first().map_or(0.0, |z| z.im)));
    line.push(at(features as f64 + 0.02, height));
    line
}

/// A wedge with an uneven apex, its opening anything from 20° to 330° about the downward direction, or the plane
/// outside a half-strip with an uneven end.
fn wedge(draw: &mut Draw, n: usize) -> Vec<Vertex> {
    if draw.chance(0.2) {
        let around = Vertex::Away { arriving: 0.0, leaving: 360.0 };
        let uneven = draw.between(0.0, 1.0);
        let ys = draw.rising(n.saturating_sub(3).max(2), -1.0, 1.0);
        let mut end = vec![at(0.0, -1.0)];
        end.extend(ys.into_iter().map(|y| at(uneven * draw.between(-1.0, 0.0), y)));
        end.push(at(0.0, 1.0));
        return std::iter::once(around).chain(finite(end)).collect();
    }
    let features = (n / 4).clamp(2, 8);
    let top = with_flat_ends(ground(draw, features, -1.0), features);
    // The legs fall by these angles below the level; a leg that rises opens the wedge.
    let (left, right) = (draw.between(-75.0, 80.0), draw.between(-75.0, 80.0));
    let ends = Vertex::Away { arriving: 180.0 + left, leaving: -right };
    std::iter::once(ends).chain(finite(top).rev()).collect()
}

/// Three to six channels that meet round a centre, seen from which no corner hides another.
fn junction(draw: &mut Draw, n: usize) -> Vec<Vertex> {
    let channels = draw.whole(3, 6);
    let even = 360.0 / channels as f64;
    let square = channels <= 4 && draw.chance(0.4);
    let corners = (n / channels).saturating_sub(1).clamp(1, 5);
    let headings: Vec<f64> = (0..channels)
        .map(|k| if square { 90.0 * k as f64 } else { even * (k as f64 + 0.3 * draw.between(-0.5, 0.5)) })
        .collect();
    // The corners of neighbouring channels, seen from the centre, are at most a third of their headings' distance
    // off: 42° less a third, on either side, is free.
    let widest = 0.6 * (0.3 * even.min(90.0)).to_radians().tan();
    let widths: Vec<f64> = (0..channels).map(|_| widest * draw.log_between(0.05, 1.0)).collect();
    let mut out = Vec::new();
    for k in 0..channels {
        let next = (k + 1) % channels;
        let face = |channel: usize, side: f64| {
            let along = Complex64::from_polar(1.0, headings[channel].to_radians());
            along * at(1.0, side * widths[channel])
        };
        let (first, last) = (face(k, 1.0), face(next, -1.0));
        out.push(Vertex::away(headings[k]));
        out.push(Vertex::At(first));
        let opening = (last / first).arg().rem_euclid(2.0 * PI);
        for angle in draw.rising(corners - 1, 0.0, opening) {
            out.push(Vertex::At(first * Complex64::from_polar(draw.between(0.3, 1.2), angle)));
        }
        out.push(Vertex::At(last));
    }
    out
}
