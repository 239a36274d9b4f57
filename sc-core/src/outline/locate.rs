//! Where a point lies: inside the section, on a side or outside, and which side is nearest.

use super::{Outline, Point, Side, Vertex, cross, dot, heading, turn};

/// Where a point lies with respect to a section.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Containment {
    /// In the open section.
    Inside,
    /// On a side of the walk, within rounding; on a wall of no thickness, one of its two faces.
    OnSide(usize),
    /// Outside the closed section.
    Outside,
}

/// The point of the boundary nearest to a given one.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Nearest {
    /// The side, in walking order; of the two faces of a wall the one that faces the given point.
    pub side: usize,
    /// Distance along the side from its start; on a side from infinity, from its finite end, not positive.
    pub s: f64,
    /// Distance of the given point from the boundary.
    pub distance: f64,
    /// The nearest point of the boundary.
    pub foot: Point,
}

impl Outline {
    /// Where `z` lies; a point that is no number is outside.
    ///
    /// The winding number, with the far arcs that close an outline through infinity, on exact predicates.
    pub fn contains(&self, z: Point) -> Containment {
        if !(z.re.is_finite() && z.im.is_finite()) {
            return Containment::Outside;
        }
        let nearest = self.nearest_boundary(z);
        if nearest.distance <= 4.0 * f64::EPSILON * largest(z).max(self.magnitude()) {
            return Containment::OnSide(nearest.side);
        }
        if self.winding(z) == 0 { Containment::Outside } else { Containment::Inside }
    }

    /// The nearest point of the boundary; of equally near sides the one with `z` on its left.
    pub fn nearest_boundary(&self, z: Point) -> Nearest {
        let rounding = 4.0 * f64::EPSILON * largest(z).max(self.magnitude());
        let mut best: Option<(Nearest, f64)> = None;
        for side in 0..self.n() {
            let (candidate, left) = self.nearest_on(side, z);
            let better = best.is_none_or(|(b, b_left)| {
                candidate.distance < b.distance - rounding
                    || (candidate.distance <= b.distance + rounding && left > 0.0 && b_left <= 0.0)
                    || (candidate.distance < b.distance && (left > 0.0) == (b_left > 0.0))
            });
            if better {
                best = Some((candidate, left));
            }
        }
        // An outline has sides; the default is never used.
        best.map_or(Nearest { side: 0, s: 0.0, distance: f64::INFINITY, foot: z }, |(b, _)| b)
    }

    /// The distance `s` along a side of a point on it, as in [`Nearest::s`].
    pub(crate) fn distance_along(&self, side: usize, z: Point) -> f64 {
        self.nearest_on(side, z).0.s
    }

    /// The nearest point of one side, and how far to the left of its line `z` lies.
    fn nearest_on(&self, side: usize, z: Point) -> (Nearest, f64) {
        let (start, direction, length, sign) = match self.side(side) {
            Side::Between(a, b) => (a, (b - a) / (b - a).norm(), (b - a).norm(), 1.0),
            Side::Outward(a, d) => (a, d, f64::INFINITY, 1.0),
            Side::Inward(a, d) => (a, d, f64::INFINITY, -1.0),
        };
        let along = dot(direction, z - start).clamp(0.0, length);
        let foot = match self.side(side) {
            Side::Between(_, b) if along >= length => b,
            _ => start + direction * along,
        };
        let left = sign * cross(direction, z - start);
        (Nearest { side, s: sign * along + 0.0, distance: (z - foot).norm(), foot }, left)
    }

    fn magnitude(&self) -> f64 {
        self.vertices.iter().filter_map(Vertex::point).fold(0.0, |m, p| m.max(largest(p)))
    }

    /// How often the closed walk goes around `z`: signed crossings of the half-line from `z` toward `+x`.
    pub(super) fn winding(&self, z: Point) -> i32 {
        let y = z.im;
        let mut winding = 0;
        for k in 0..self.n() {
            winding += match self.side(k) {
                Side::Between(a, b) => {
                    if a.im <= y && y < b.im {
                        i32::from(turn(a, b, z) > 0.0)
                    } else if b.im <= y && y < a.im {
                        -i32::from(turn(a, b, z) < 0.0)
                    } else {
                        0
                    }
                }
                Side::Outward(a, d) => half_line(a, d, z),
                Side::Inward(a, d) => -half_line(a, d, z),
            };
            if let Vertex::Away { arriving, leaving } = self.vertices[k] {
                winding += self.far_arc(k, arriving, leaving, y);
            }
        }
        winding
    }

    /// Crossings of the far arc of a vertex at infinity, from its arriving to its leaving side, counter-clockwise.
    fn far_arc(&self, k: usize, arriving: f64, leaving: f64, y: f64) -> i32 {
        let height = |side: usize| match self.side(side) {
            Side::Between(a, _) | Side::Outward(a, _) | Side::Inward(a, _) => a.im,
        };
        let (low, high) = (height(k + self.n() - 1), height(k));
        let (from, to) = (heading::reduce(arriving), heading::reduce(leaving));
        let full_turn = self.alpha[k] < -1.5 && heading::apart(from, to) < 90.0;
        match (from <= 0.0, to <= 0.0) {
            // From +x around to +x: in a channel only what lies between; else what is open above, and below.
            (true, true) if full_turn => i32::from(low <= y) + i32::from(y < high),
            (true, true) => i32::from(low <= y && y < high),
            (true, false) => i32::from(low <= y),
            (false, true) => i32::from(y < high),
            (false, false) => i32::from(to < from || (full_turn && to <= from)),
        }
    }
}

/// Signed crossings of the half-line from `z` toward `+x` by the side from `a` to infinity along `d`.
fn half_line(a: Point, d: Point, z: Point) -> i32 {
    let left = cross(d, z - a);
    if d.im > 0.0 && a.im <= z.im {
        i32::from(left > 0.0)
    } else if d.im < 0.0 && z.im < a.im {
        -i32::from(left < 0.0)
    } else {
        0
    }
}

/// The larger coordinate in absolute value.
fn largest(p: Point) -> f64 {
    p.re.abs().max(p.im.abs())
}
