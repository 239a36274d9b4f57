//! Whether a walk bounds one section on its left: no crossings, and every turn the sharpest left one at hand.
//!
//! Cut at all points where it touches itself, an outline that does not cross itself is a connected plane graph
//! (on the sphere, with one more node at infinity). It bounds a section on its left exactly if it walks around
//! a face of that graph: each piece is run over at most once in each direction, and at each visit of a node no
//! other piece leaves into the sector between the arriving and the leaving piece. That covers walls of no
//! thickness (pieces run over once in each direction) without a case of their own.

use std::collections::{BTreeSet, HashMap};

use super::faults::OutlineFault;
use super::numbering::Numbering;
use super::walk::{Corner, Walk, span};
use super::{Point, cross, turn};

/// A stretch of a side between neighbouring ends of its chain.
#[derive(Debug, Clone, Copy)]
struct Piece {
    side: usize,
    from: usize,
    to: usize,
}

/// Where the walk passes through a node.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Place {
    Vertex(usize),
    Side(usize),
}

/// One passage of the walk through a node.
#[derive(Debug, Clone, Copy)]
struct Visit {
    place: Place,
    /// The ends before and after.
    before: usize,
    after: usize,
}

/// The cut walk as a plane graph.
#[derive(Debug)]
pub(super) struct Arrangement<'a> {
    walk: &'a Walk,
    numbering: Numbering,
    pieces: Vec<Piece>,
    /// The side that runs over each directed piece.
    darts: HashMap<(usize, usize), usize>,
    visits: Vec<Vec<Visit>>,
    overlaps: BTreeSet<(usize, usize)>,
}

/// A segment, or a half-line if it has no end.
#[derive(Debug, Clone, Copy)]
struct Line {
    start: Point,
    direction: Point,
    end: Option<Point>,
}

impl Line {
    /// Positive for a point on the left; exact for a segment.
    fn side_of(self, p: Point) -> f64 {
        match self.end {
            Some(end) => turn(self.start, end, p),
            None => cross(self.direction, p - self.start),
        }
    }

    /// Whether the ends of `other` are on different sides of the line through this one.
    fn splits(self, other: Line) -> bool {
        let near = self.side_of(other.start);
        let far = match other.end {
            Some(end) => self.side_of(end),
            None => cross(self.direction, other.direction),
        };
        (near > 0.0 && far < 0.0) || (near < 0.0 && far > 0.0)
    }
}

impl<'a> Arrangement<'a> {
    pub(super) fn new(walk: &'a Walk, numbering: Numbering) -> Self {
        let mut pieces = Vec::new();
        let mut darts = HashMap::new();
        let mut overlaps = BTreeSet::new();
        let mut visits = vec![Vec::new(); walk.nodes.len()];
        for (side, chain) in walk.chains.iter().enumerate() {
            for ends in chain.windows(2) {
                let (from, to) = (ends[0], ends[1]);
                pieces.push(Piece { side, from, to });
                if let Some(other) = darts.insert((from, to), side)
                    && other != side
                {
                    overlaps.insert((other.min(side), other.max(side)));
                }
            }
            for ends in chain.windows(3) {
                visits[ends[1]].push(Visit { place: Place::Side(side), before: ends[0], after: ends[2] });
            }
        }
        let n = walk.corners.len();
        for (k, corner) in walk.corners.iter().enumerate() {
            let Corner::Node(node) = *corner else { continue };
            let before = walk.chains[(k + n - 1) % n].iter().rev().nth(1);
            let after = walk.chains[k].get(1);
            if let (Some(&before), Some(&after)) = (before, after) {
                visits[node].push(Visit { place: Place::Vertex(k), before, after });
            }
        }
        Self { walk, numbering, pieces, darts, visits, overlaps }
    }

    /// Whether a piece is run over in both directions.
    fn retraced(&self, a: usize, b: usize) -> bool {
        self.darts.contains_key(&(a, b)) && self.darts.contains_key(&(b, a))
    }

    /// Whether the walk turns straight back at vertex `k`: the tip of a wall of no thickness.
    pub(super) fn turns_back(&self, k: usize) -> bool {
        let Corner::Node(node) = self.walk.corners[k] else { return false };
        self.visits[node].iter().any(|v| v.place == Place::Vertex(k) && v.before == v.after)
    }

    fn is_far(&self, end: usize) -> bool {
        end >= self.walk.nodes.len()
    }

    /// A piece as it is drawn, from its finite end.
    fn line(&self, piece: Piece) -> Line {
        let (from, to) =
            if self.is_far(piece.from) { (piece.to, piece.from) } else { (piece.from, piece.to) };
        Line {
            start: self.walk.nodes[from],
            direction: self.walk.toward(from, to),
            end: self.walk.nodes.get(to).copied(),
        }
    }

    /// Sides that cross or run over one another.
    pub(super) fn crossings(&self) -> Vec<OutlineFault> {
        let mut faults: Vec<OutlineFault> = (self.overlaps.iter())
            .map(|&(a, b)| {
                let (first, second) = self.numbering.side_pair(a, b);
                OutlineFault::SidesOverlap { first, second }
            })
            .collect();
        let boxes: Vec<(Point, Point)> = (self.pieces.iter())
            .map(|&p| {
                let line = self.line(p);
                span(line.start, line.direction, if line.end.is_some() { 1.0 } else { f64::INFINITY }, 0.0)
            })
            .collect();
        let mut order: Vec<usize> = (0..self.pieces.len()).collect();
        order.sort_by(|&a, &b| boxes[a].0.re.total_cmp(&boxes[b].0.re));
        let mut seen = BTreeSet::new();
        for (i, &a) in order.iter().enumerate() {
            for &b in order[i + 1..].iter().take_while(|&&b| boxes[b].0.re <= boxes[a].1.re) {
                if boxes[a].0.im > boxes[b].1.im || boxes[b].0.im > boxes[a].1.im {
                    continue;
                }
                let (p, q) = (self.pieces[a], self.pieces[b]);
                let pair = self.numbering.side_pair(p.side, q.side);
                if let Some(at) = self.crossing(p, q)
                    && seen.insert(pair)
                {
                    let (first, second) = pair;
                    faults.push(OutlineFault::SidesCross { first, second, x: at.re, y: at.im });
                }
            }
        }
        faults
    }

    /// Where two pieces without a common node cross.
    fn crossing(&self, p: Piece, q: Piece) -> Option<Point> {
        if [p.from, p.to].iter().any(|&e| !self.is_far(e) && (e == q.from || e == q.to)) {
            return None;
        }
        let (p, q) = (self.line(p), self.line(q));
        if !(p.splits(q) && q.splits(p)) {
            return None;
        }
        let at =
            p.start + p.direction * (cross(q.start - p.start, q.direction) / cross(p.direction, q.direction));
        Some(if at.re.is_finite() && at.im.is_finite() { at } else { p.start })
    }

    /// Points where the outline meets itself without a wall of no thickness.
    pub(super) fn touches(&self) -> Vec<OutlineFault> {
        let mut faults = Vec::new();
        for (node, visits) in self.visits.iter().enumerate() {
            let shared = |v: &Visit| self.shared(node, v.before) || self.shared(node, v.after);
            if visits.len() > 1 && !visits.iter().any(shared) {
                self.touch(visits, &mut faults);
            }
        }
        faults
    }

    /// Whether more than one side runs over the piece, in whatever direction.
    fn shared(&self, node: usize, end: usize) -> bool {
        let (out, back) = (self.darts.get(&(node, end)), self.darts.get(&(end, node)));
        let overlaps = |side: Option<&usize>| {
            side.is_some_and(|s| self.overlaps.iter().any(|&(a, b)| a == *s || b == *s))
        };
        (out.is_some() && back.is_some()) || overlaps(out) || overlaps(back)
    }

    /// Reports every visit of a node against the first vertex there.
    fn touch(&self, visits: &[Visit], faults: &mut Vec<OutlineFault>) {
        let vertices = visits.iter().filter_map(|v| match v.place {
            Place::Vertex(k) => Some(self.numbering.vertex(k)),
            Place::Side(_) => None,
        });
        let Some(first) = vertices.min() else { return };
        for visit in visits {
            match visit.place {
                Place::Vertex(k) if self.numbering.vertex(k) != first => {
                    faults.push(OutlineFault::VerticesTouch { first, second: self.numbering.vertex(k) });
                }
                Place::Vertex(_) => {}
                Place::Side(side) => {
                    faults
                        .push(OutlineFault::VertexOnSide { vertex: first, side: self.numbering.side(side) });
                }
            }
        }
    }

    /// Visits that leave something in their sector. Meaningful only without crossings, overlaps and touches.
    pub(super) fn faces(&self) -> Vec<OutlineFault> {
        let mut faults = Vec::new();
        for (node, visits) in self.visits.iter().enumerate() {
            let ends = self.ends_around(node);
            let failing: Vec<Visit> =
                visits.iter().copied().filter(|v| next_around(&ends, v.after) != Some(v.before)).collect();
            if failing.is_empty() {
                continue;
            }
            if failing.iter().any(|v| v.before == v.after) {
                // A tip with something else at its point: it touches the far side, or another wall.
                self.touch(visits, &mut faults);
                continue;
            }
            let mut retraced = false;
            for end in failing.iter().flat_map(|v| [v.before, v.after]) {
                if self.retraced(node, end) {
                    retraced = true;
                    faults.push(self.without_width(node, end));
                }
            }
            if !retraced {
                self.touch(visits, &mut faults);
            }
        }
        let mut unique: Vec<OutlineFault> = Vec::new();
        for fault in faults {
            if !unique.contains(&fault) {
                unique.push(fault);
            }
        }
        unique
    }

    /// The fault of a retraced piece with no section on its left: a spike if its sides meet at the tip.
    fn without_width(&self, node: usize, end: usize) -> OutlineFault {
        let n = self.walk.corners.len();
        let out = self.darts.get(&(node, end)).copied().unwrap_or_default();
        let back = self.darts.get(&(end, node)).copied().unwrap_or_default();
        for (arriving, leaving) in [(out, back), (back, out)] {
            if (arriving + 1) % n == leaving && self.turns_back(leaving) {
                return OutlineFault::Spike { vertex: self.numbering.vertex(leaving) };
            }
        }
        let (first, second) = self.numbering.side_pair(out, back);
        OutlineFault::NoWidth { first, second }
    }

    /// The ends joined to a node, counter-clockwise.
    fn ends_around(&self, node: usize) -> Vec<usize> {
        let mut ends: Vec<(f64, usize)> = Vec::new();
        for end in self.visits[node].iter().flat_map(|v| [v.before, v.after]) {
            if ends.iter().all(|&(_, e)| e != end) {
                let d = self.walk.toward(node, end);
                ends.push((d.im.atan2(d.re), end));
            }
        }
        // Neighbouring directions differ by far more than atan2 rounds: nearer ones would have been cut.
        ends.sort_by(|a, b| a.0.total_cmp(&b.0));
        ends.into_iter().map(|(_, end)| end).collect()
    }

    /// Faults at the vertices at infinity: other sides between, or equal headings the wrong way round.
    pub(super) fn faces_at_infinity(&self, alpha: &[f64]) -> Vec<OutlineFault> {
        let origin = self.walk.nodes.first().copied().unwrap_or_default();
        let place = |(node, end): (usize, usize)| {
            let heading = end - self.walk.nodes.len();
            (self.walk.headings[heading], cross(self.walk.units[heading], self.walk.nodes[node] - origin))
        };
        let far_pieces = self.pieces.iter().filter_map(|p| match (self.is_far(p.from), self.is_far(p.to)) {
            (false, true) => Some((p.from, p.to)),
            (true, false) => Some((p.to, p.from)),
            _ => None,
        });
        let mut around: Vec<(usize, usize)> = far_pieces.collect::<BTreeSet<_>>().into_iter().collect();
        around.sort_by(|&a, &b| {
            let (a, b) = (place(a), place(b));
            a.0.total_cmp(&b.0).then(a.1.total_cmp(&b.1))
        });
        let n = self.walk.corners.len();
        let mut faults = Vec::new();
        for (k, corner) in self.walk.corners.iter().enumerate() {
            let Corner::Away { arriving, leaving } = *corner else { continue };
            let last = self.walk.chains[(k + n - 1) % n].iter().rev().nth(1);
            let first = self.walk.chains[k].get(1);
            let (Some(&last), Some(&first)) = (last, first) else { continue };
            let out = (last, self.walk.far_end(arriving));
            let back = (first, self.walk.far_end(leaving));
            let vertex = self.numbering.vertex(k);
            if arriving == leaving {
                // The section lies between the two sides only if the second is on the left of the first.
                let between = place(back).1 > place(out).1;
                let needed = if between { 0.0 } else { -2.0 };
                if (alpha[k] - needed).abs() > 1.0 {
                    let heading = self.walk.headings[arriving];
                    faults.push(OutlineFault::WrongSideAtInfinity {
                        vertex,
                        heading,
                        alpha: alpha[k],
                        needed,
                    });
                    continue;
                }
            }
            if next_around(&around, out) != Some(back) {
                let (arriving, leaving) = (self.walk.headings[arriving], self.walk.headings[leaving]);
                faults.push(OutlineFault::CrowdedAtInfinity { vertex, arriving, leaving });
            }
        }
        faults
    }

    /// Whether the walk leaves no area because it retraces every piece.
    pub(super) fn is_tree(&self) -> bool {
        self.pieces.iter().all(|p| self.darts.contains_key(&(p.to, p.from)))
    }
}

/// The element after `item` in a cyclic order.
fn next_around<T: PartialEq + Copy>(cycle: &[T], item: T) -> Option<T> {
    let i = cycle.iter().position(|&x| x == item)?;
    cycle.get((i + 1) % cycle.len()).copied()
}
