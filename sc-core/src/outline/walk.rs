//! The walk around an outline with coincident points made one, and every side cut where the outline touches it.
//!
//! Two tolerances are at work. Points closer than `same` (1e-9 of the section's size) are one point, by
//! convention. A vertex lies on a side that is not its own if it is within `rounding` of it, or if it is within
//! `same` *and* runs along it: a wall face split by a vertex that was typed with ten digits is still that wall,
//! while a wall that ends 1e-12 short of a side is a gap and stays one.

use super::{Point, Vertex, cross, dot, heading};

/// The two distances that decide whether points are one.
#[derive(Debug, Clone, Copy)]
pub(super) struct Tolerances {
    /// Points closer than this are the same point.
    pub(super) same: f64,
    /// What rounding of the coordinates amounts to.
    pub(super) rounding: f64,
}

/// A vertex of the walk, by index into [`Walk::nodes`] or [`Walk::headings`].
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Corner {
    Node(usize),
    Away { arriving: usize, leaving: usize },
}

/// How a side runs, by index into [`Walk::nodes`] and [`Walk::headings`].
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Course {
    Between {
        from: usize,
        to: usize,
    },
    Outward {
        from: usize,
        heading: usize,
    },
    Inward {
        to: usize,
        heading: usize,
    },
    /// Both ends at infinity, or no length: a fault reported elsewhere.
    Nowhere,
}

/// A point that was moved, in walking numbers.
#[derive(Debug, Clone, Copy)]
pub(super) enum Move {
    ToVertex { vertex: usize, onto: usize, distance: f64 },
    ToSide { vertex: usize, onto: usize, distance: f64 },
}

/// The walk. An *end* is a node, or `nodes.len() + heading` for the far end of a side to infinity.
#[derive(Debug, Clone)]
pub(super) struct Walk {
    pub(super) corners: Vec<Corner>,
    pub(super) nodes: Vec<Point>,
    /// The first vertex at each node.
    pub(super) owner: Vec<usize>,
    /// Distinct headings in `[0, 360)`, and their unit vectors.
    pub(super) headings: Vec<f64>,
    pub(super) units: Vec<Point>,
    pub(super) courses: Vec<Course>,
    /// The ends along each side, both its own and those that touch it.
    pub(super) chains: Vec<Vec<usize>>,
    pub(super) moves: Vec<Move>,
}

impl Walk {
    /// Merges, projects and cuts. The coordinates must be finite.
    pub(super) fn new(vertices: &[Vertex], tolerances: Tolerances) -> Self {
        let mut walk = Self {
            corners: Vec::with_capacity(vertices.len()),
            nodes: Vec::new(),
            owner: Vec::new(),
            headings: Vec::new(),
            units: Vec::new(),
            courses: Vec::new(),
            chains: Vec::new(),
            moves: Vec::new(),
        };
        for (k, &vertex) in vertices.iter().enumerate() {
            let corner = match vertex {
                Vertex::At(p) => Corner::Node(walk.node(k, p, tolerances)),
                Vertex::Away { arriving, leaving } => {
                    Corner::Away { arriving: walk.heading(arriving), leaving: walk.heading(leaving) }
                }
            };
            walk.corners.push(corner);
        }
        let n = walk.corners.len();
        walk.courses =
            (0..n).map(|k| walk.course_between(walk.corners[k], walk.corners[(k + 1) % n])).collect();
        walk.cut(tolerances);
        walk
    }

    /// The node at `p`, new if there is none yet.
    fn node(&mut self, vertex: usize, p: Point, tolerances: Tolerances) -> usize {
        let known = self.nodes.iter().position(|q| {
            let d = q - p;
            d.re.abs() <= tolerances.same && d.im.abs() <= tolerances.same && {
                let distance = d.norm();
                distance < tolerances.same || distance <= 0.0
            }
        });
        if let Some(node) = known {
            let distance = (self.nodes[node] - p).norm();
            if distance > tolerances.rounding {
                self.moves.push(Move::ToVertex { vertex, onto: self.owner[node], distance });
            }
            return node;
        }
        self.nodes.push(p);
        self.owner.push(vertex);
        self.nodes.len() - 1
    }

    fn heading(&mut self, degrees: f64) -> usize {
        let reduced = heading::reduce(degrees);
        let tolerance = heading::rounding(degrees);
        if let Some(i) = self.headings.iter().position(|&h| heading::apart(h, reduced) <= tolerance) {
            return i;
        }
        self.headings.push(reduced);
        self.units.push(heading::unit(reduced));
        self.headings.len() - 1
    }

    fn course_between(&self, from: Corner, to: Corner) -> Course {
        match (from, to) {
            (Corner::Node(from), Corner::Node(to)) if from != to => Course::Between { from, to },
            (Corner::Node(from), Corner::Away { arriving, .. }) => {
                Course::Outward { from, heading: arriving }
            }
            (Corner::Away { leaving, .. }, Corner::Node(to)) => Course::Inward { to, heading: leaving },
            _ => Course::Nowhere,
        }
    }

    /// The end beyond all nodes in the direction of a heading.
    pub(super) fn far_end(&self, heading: usize) -> usize {
        self.nodes.len() + heading
    }

    /// Direction from a node to an end: the difference of points, or the unit vector of a heading.
    pub(super) fn toward(&self, node: usize, end: usize) -> Point {
        match end.checked_sub(self.nodes.len()) {
            Some(heading) => self.units[heading],
            None => self.nodes[end] - self.nodes[node],
        }
    }

    /// Finite start (finite end of a side from infinity), direction and length of a course.
    fn line(&self, course: Course) -> Option<(Point, Point, f64)> {
        match course {
            Course::Between { from, to } => {
                let v = self.nodes[to] - self.nodes[from];
                Some((self.nodes[from], v / v.norm(), v.norm()))
            }
            Course::Outward { from, heading } => Some((self.nodes[from], self.units[heading], f64::INFINITY)),
            Course::Inward { to, heading } => Some((self.nodes[to], self.units[heading], f64::INFINITY)),
            Course::Nowhere => None,
        }
    }

    /// Distance along a course and off it, if the node's foot is strictly within it.
    fn along_and_off(&self, course: Course, node: usize) -> Option<(f64, f64)> {
        let (start, direction, length) = self.line(course)?;
        let d = self.nodes[node] - start;
        let along = dot(direction, d);
        (0.0 < along && along < length).then(|| (along, cross(direction, d).abs()))
    }

    fn ends(course: Course) -> [Option<usize>; 2] {
        match course {
            Course::Between { from, to } => [Some(from), Some(to)],
            Course::Outward { from: node, .. } | Course::Inward { to: node, .. } => [Some(node), None],
            Course::Nowhere => [None, None],
        }
    }

    fn heading_of(course: Course) -> Option<usize> {
        match course {
            Course::Outward { heading, .. } | Course::Inward { heading, .. } => Some(heading),
            _ => None,
        }
    }

    /// Whether a side other than `side` that ends at `node` overlaps it, within `same`, along a stretch.
    fn runs_along(&self, side: usize, node: usize, sides_at: &[Vec<usize>], same: f64) -> bool {
        let course = self.courses[side];
        let near = |c: Course, m: usize| {
            Self::ends(c).contains(&Some(m)) || self.along_and_off(c, m).is_some_and(|(_, off)| off < same)
        };
        sides_at[node].iter().any(|&own| {
            let own_course = self.courses[own];
            own != side
                && own_course != Course::Nowhere
                && (Self::ends(own_course).iter().flatten().any(|&m| m != node && near(course, m))
                    || Self::ends(course).iter().flatten().any(|&m| m != node && near(own_course, m))
                    || (Self::heading_of(course).is_some()
                        && Self::heading_of(course) == Self::heading_of(own_course)))
        })
    }

    /// Fills [`Self::chains`], and moves the nodes that run along a side onto it.
    fn cut(&mut self, tolerances: Tolerances) {
        let n = self.corners.len();
        let mut sides_at = vec![Vec::new(); self.nodes.len()];
        for (k, corner) in self.corners.iter().enumerate() {
            if let Corner::Node(node) = *corner {
                sides_at[node].extend([(k + n - 1) % n, k]);
            }
        }
        let mut landing: Vec<Option<(usize, f64, Point)>> = vec![None; self.nodes.len()];
        let mut chains = Vec::with_capacity(n);
        for side in 0..n {
            let course = self.courses[side];
            let Some((start, direction, length)) = self.line(course) else {
                chains.push(Vec::new());
                continue;
            };
            let own = Self::ends(course);
            let (low, high) = span(start, direction, length, tolerances.same);
            let mut on: Vec<(f64, usize)> = Vec::new();
            for (node, p) in self.nodes.iter().enumerate() {
                if p.re < low.re
                    || p.re > high.re
                    || p.im < low.im
                    || p.im > high.im
                    || own.contains(&Some(node))
                {
                    continue;
                }
                let Some((along, off)) = self.along_and_off(course, node) else { continue };
                let lies_on = off <= tolerances.rounding
                    || (off < tolerances.same && self.runs_along(side, node, &sides_at, tolerances.same));
                if !lies_on {
                    continue;
                }
                on.push((along, node));
                if off > tolerances.rounding && landing[node].is_none() {
                    landing[node] = Some((side, off, start + direction * along));
                }
            }
            on.sort_by(|a, b| a.0.total_cmp(&b.0));
            let between = on.into_iter().map(|(_, node)| node);
            chains.push(match course {
                Course::Between { from, to } => [from].into_iter().chain(between).chain([to]).collect(),
                Course::Outward { from, heading } => {
                    [from].into_iter().chain(between).chain([self.far_end(heading)]).collect()
                }
                Course::Inward { to, heading } => {
                    [self.far_end(heading)].into_iter().chain(between.rev()).chain([to]).collect()
                }
                Course::Nowhere => Vec::new(),
            });
        }
        self.chains = chains;
        for (node, landing) in landing.into_iter().enumerate() {
            if let Some((onto, distance, foot)) = landing {
                self.nodes[node] = foot;
                self.moves.push(Move::ToSide { vertex: self.owner[node], onto, distance });
            }
        }
    }
}

/// Bounding box of a course, widened by `margin`.
pub(super) fn span(start: Point, direction: Point, length: f64, margin: f64) -> (Point, Point) {
    let reach = |from: f64, d: f64| {
        // 0 · ∞ is no number: a side to infinity along an axis has no extent across it.
        let to = if d.abs() > 0.0 { from + d * length } else { from };
        (from.min(to) - margin, from.max(to) + margin)
    };
    let (x0, x1) = reach(start.re, direction.re);
    let (y0, y1) = reach(start.im, direction.im);
    (Point::new(x0, y0), Point::new(x1, y1))
}
