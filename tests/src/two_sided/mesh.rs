//! Triangles of a closed polygon, refined by bisection.

use std::collections::HashMap;

use num_complex::Complex64;
use spade::{
    AngleLimit, ConstrainedDelaunayTriangulation, InsertionError, Point2, RefinementParameters,
    Triangulation as _,
};

use super::NoBounds;
use super::cut::Closed;
use crate::generate::contains;

/// No triangle of the first mesh is larger than this part of the section.
const FIRST: usize = 500;

/// Triangles whose nodes are places of the closed section: the two faces of a wall have their own.
#[derive(Debug)]
pub(super) struct Mesh {
    points: Vec<Complex64>,
    triangles: Vec<[usize; 3]>,
    /// Side of the polygon by the boundary edge, walked with the section on the left.
    boundary: HashMap<(usize, usize), usize>,
    /// Triangle to the left of an edge.
    left: HashMap<(usize, usize), usize>,
}

impl Mesh {
    pub(super) fn new(closed: &Closed) -> Result<Mesh, NoBounds> {
        let failed = |_: InsertionError| NoBounds::Triangulation;
        let centre = closed.points.iter().sum::<Complex64>() / closed.points.len() as f64;
        let mut triangulation: ConstrainedDelaunayTriangulation<Point2<f64>> =
            ConstrainedDelaunayTriangulation::new();
        let mut handles = Vec::new();
        for z in closed.points.iter().map(|z| z - centre) {
            handles.push(triangulation.insert(Point2::new(z.re, z.im)).map_err(failed)?);
        }
        for k in 0..handles.len() {
            let (from, to) = (handles[k], handles[(k + 1) % handles.len()]);
            // A side that touches others crosses none; spade splits it at the vertices on it.
            if !triangulation.can_add_constraint(from, to) {
                return Err(NoBounds::Triangulation);
            }
            triangulation.add_constraint(from, to);
        }
        // By area alone: needles outside, between sides and their hull, would draw points without end by their angles.
        let area = closed.area();
        let limits = RefinementParameters::<f64>::new()
            .with_angle_limit(AngleLimit::from_deg(0.0))
            .with_max_allowed_area(area / FIRST as f64)
            .with_max_additional_vertices(4 * FIRST);
        triangulation.refine(limits);
        let mut corners: Vec<[usize; 3]> = Vec::new();
        let mut walls: HashMap<(usize, usize), bool> = HashMap::new();
        for face in triangulation.inner_faces() {
            let middle = face.center();
            if !contains(&closed.points, Complex64::new(middle.x, middle.y) + centre) {
                continue;
            }
            corners.push(face.vertices().map(|vertex| vertex.fix().index()));
            for edge in face.adjacent_edges() {
                let ends = edge.vertices().map(|vertex| vertex.fix().index());
                walls.insert((ends[0], ends[1]), edge.is_constraint_edge());
            }
        }
        let places: Vec<Complex64> = triangulation
            .vertices()
            .map(|vertex| Complex64::new(vertex.position().x, vertex.position().y) + centre)
            .collect();
        let mut mesh = Mesh::torn(&corners, &places, &walls);
        mesh.name_sides(closed);
        let covered: f64 = (0..mesh.triangles.len()).map(|t| mesh.area(t)).sum();
        if (covered - area).abs() > 1e-9 * area.abs() {
            return Err(NoBounds::Area { covered, area });
        }
        Ok(mesh)
    }

    /// Triangles that hang together only across edges that are no walls.
    fn torn(corners: &[[usize; 3]], places: &[Complex64], walls: &HashMap<(usize, usize), bool>) -> Mesh {
        let at: HashMap<(usize, usize), (usize, usize)> = corners
            .iter()
            .enumerate()
            .flat_map(|(t, c)| (0..3).map(move |i| ((c[i], c[(i + 1) % 3]), (t, i))))
            .collect();
        // Corner i of triangle t is number 3t + i; corners that are one place get one root.
        let mut root: Vec<usize> = (0..3 * corners.len()).collect();
        fn find(root: &mut [usize], mut x: usize) -> usize {
            while root[x] != x {
                root[x] = root[root[x]];
                x = root[x];
            }
            x
        }
        for (&(a, b), &(t, i)) in &at {
            if walls[&(a, b)] {
                continue;
            }
            if let Some(&(u, j)) = at.get(&(b, a)) {
                for (x, y) in [(3 * t + i, 3 * u + (j + 1) % 3), (3 * t + (i + 1) % 3, 3 * u + j)] {
                    let (x, y) = (find(&mut root, x), find(&mut root, y));
                    root[x.max(y)] = x.min(y);
                }
            }
        }
        let mut number: HashMap<usize, usize> = HashMap::new();
        let mut points = Vec::new();
        let mut triangles = Vec::new();
        for (t, c) in corners.iter().enumerate() {
            let nodes = [0, 1, 2].map(|i| {
                *number.entry(find(&mut root, 3 * t + i)).or_insert_with(|| {
                    points.push(places[c[i]]);
                    points.len() - 1
                })
            });
            triangles.push(nodes);
        }
        let mut mesh = Mesh { points, triangles, boundary: HashMap::new(), left: HashMap::new() };
        for t in 0..mesh.triangles.len() {
            mesh.enter(t);
        }
        mesh
    }

    /// Finds the side that each edge with nothing beyond it is part of: the nearest of those that run its way.
    fn name_sides(&mut self, closed: &Closed) {
        let n = closed.points.len();
        let edges: Vec<(usize, usize)> =
            self.left.keys().copied().filter(|&(a, b)| !self.left.contains_key(&(b, a))).collect();
        for (a, b) in edges {
            let (p, q) = (self.points[a], self.points[b]);
            let off = |k: usize| {
                let (from, to) = (closed.points[k], closed.points[(k + 1) % n]);
                let along = to - from;
                let runs = ((q - p) * along.conj()).re > 0.0;
                let distance = |z: Complex64| {
                    let t = (((z - from) * along.conj()).re / along.norm_sqr()).clamp(0.0, 1.0);
                    (z - from - along * t).norm()
                };
                if runs { distance(p).max(distance(q)) } else { f64::INFINITY }
            };
            let side = (0..n).min_by(|&j, &k| off(j).total_cmp(&off(k))).unwrap_or(0);
            self.boundary.insert((a, b), side);
        }
    }

    pub(super) fn points(&self) -> &[Complex64] {
        &self.points
    }

    pub(super) fn triangles(&self) -> &[[usize; 3]] {
        &self.triangles
    }

    /// Boundary edges, each with the side it is part of.
    pub(super) fn boundary(&self) -> impl Iterator<Item = ((usize, usize), usize)> {
        self.boundary.iter().map(|(&edge, &side)| (edge, side))
    }

    pub(super) fn area(&self, t: usize) -> f64 {
        let [a, b, c] = self.triangles[t].map(|i| self.points[i]);
        0.5 * ((b - a).conj() * (c - a)).im
    }

    fn enter(&mut self, t: usize) {
        let c = self.triangles[t];
        for i in 0..3 {
            self.left.insert((c[i], c[(i + 1) % 3]), t);
        }
    }

    /// The longest edge of a triangle; of equal ones the same from either side.
    fn longest(&self, t: usize) -> (usize, usize) {
        let c = self.triangles[t];
        let mut best = (c[0], c[1]);
        let mut best_key = (f64::NEG_INFINITY, 0, 0);
        for i in 0..3 {
            let (a, b) = (c[i], c[(i + 1) % 3]);
            let (low, high) = (a.min(b), a.max(b));
            let key = ((self.points[high] - self.points[low]).norm_sqr(), low, high);
            if key > best_key {
                (best, best_key) = ((a, b), key);
            }
        }
        best
    }

    /// Bisects the marked triangles, and others that have to follow; the ends of the edge on which each new node lies.
    pub(super) fn refine(&mut self, marked: &[usize]) -> Vec<(usize, usize)> {
        let mut parents = Vec::new();
        let before: Vec<[usize; 3]> = marked.iter().map(|&t| self.triangles[t]).collect();
        for (&t, &corners) in marked.iter().zip(&before) {
            // Walk along longest edges to one that is the longest on both sides or lies on the boundary, and come
            // back; each step is to a triangle with a longer edge, so the walk ends.
            while self.triangles[t] == corners {
                let mut at = t;
                loop {
                    let edge = self.longest(at);
                    match self.left.get(&(edge.1, edge.0)) {
                        Some(&beyond) if self.longest(beyond) != (edge.1, edge.0) => at = beyond,
                        _ => {
                            self.bisect(edge);
                            parents.push(edge);
                            break;
                        }
                    }
                }
            }
        }
        parents
    }

    fn bisect(&mut self, (a, b): (usize, usize)) {
        let middle = self.points.len();
        self.points.push(0.5 * (self.points[a] + self.points[b]));
        for (a, b) in [(a, b), (b, a)] {
            if let Some(side) = self.boundary.remove(&(a, b)) {
                self.boundary.insert((a, middle), side);
                self.boundary.insert((middle, b), side);
            }
            let Some(t) = self.left.remove(&(a, b)) else { continue };
            let apex = self.triangles[t].into_iter().find(|&c| c != a && c != b).unwrap_or(a);
            self.triangles[t] = [a, middle, apex];
            self.enter(t);
            self.triangles.push([middle, b, apex]);
            self.enter(self.triangles.len() - 1);
        }
    }
}
