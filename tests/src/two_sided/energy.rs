//! Piecewise linear functions of little energy.

use num_complex::Complex64;

use super::cut::{Closed, Kind, Side};
use super::mesh::Mesh;

/// Relative energy that the iteration may leave; what it leaves only widens the bounds.
const ENOUGH: f64 = 1e-8;
/// Iterations; a mesh of n triangles needs a few times √n.
const ITERATIONS: usize = 4000;

/// What is prescribed at a node.
#[derive(Debug, Clone, Copy, PartialEq)]
enum At {
    Free,
    Given(f64),
    /// The same unknown value for all nodes of an end.
    Shared(usize),
}

/// What is prescribed at all nodes.
#[derive(Debug)]
pub(super) struct Values(Vec<At>);

impl Values {
    /// One on the first held run, zero on the second.
    pub(super) fn potential(closed: &Closed, mesh: &Mesh) -> Values {
        Values::new(closed, mesh, |side| match side {
            Side::Held(run) => Some(if run == 0 { 1.0 } else { 0.0 }),
            Side::Insulated(_) => None,
        })
    }

    /// One on the first insulated run, zero on the second.
    pub(super) fn stream(closed: &Closed, mesh: &Mesh) -> Values {
        Values::new(closed, mesh, |side| match side {
            Side::Insulated(gap) => Some(if gap == 0 { 1.0 } else { 0.0 }),
            Side::Held(_) => None,
        })
    }

    fn new(closed: &Closed, mesh: &Mesh, value: impl Fn(Side) -> Option<f64>) -> Values {
        let mut values = vec![At::Free; mesh.points().len()];
        for ((a, b), side) in mesh.boundary() {
            let at = match closed.kinds[side] {
                Kind::Held(run) => value(Side::Held(run)).map(At::Given),
                Kind::Insulated(gap) => value(Side::Insulated(gap)).map(At::Given),
                Kind::Cut { end, between } => {
                    Some(between.into_iter().find_map(&value).map_or(At::Shared(end), At::Given))
                }
            };
            // A given value takes precedence over a shared one where a cut meets its side.
            for node in [a, b] {
                match (at, values[node]) {
                    (Some(At::Shared(_)), At::Given(_)) | (None, _) => {}
                    (Some(at), _) => values[node] = at,
                }
            }
        }
        Values(values)
    }
}

/// A trial function by its values at the nodes.
#[derive(Debug)]
pub(super) struct Trial {
    at: Vec<f64>,
}

impl Trial {
    pub(super) fn new() -> Trial {
        Trial { at: Vec::new() }
    }

    /// Takes the function over to a mesh with more nodes, each halfway along an edge.
    pub(super) fn carry_over(&mut self, parents: &[(usize, usize)]) {
        for &(a, b) in parents {
            self.at.push(0.5 * (self.at[a] + self.at[b]));
        }
    }

    /// Lowers the energy as far as need be, from the present values; returns it.
    pub(super) fn minimise(&mut self, mesh: &Mesh, values: &Values) -> f64 {
        let n = mesh.points().len();
        self.at.resize(n, 0.5);
        // Unknown of each node, none where its value is given.
        let mut shared: Vec<(usize, usize)> = Vec::new();
        let mut unknowns = 0;
        let unknown: Vec<Option<usize>> = values
            .0
            .iter()
            .map(|at| {
                let known = match *at {
                    At::Given(_) => return None,
                    At::Free => None,
                    At::Shared(end) => shared.iter().find(|(e, _)| *e == end).map(|&(_, u)| u),
                };
                let u = known.unwrap_or(unknowns);
                if known.is_none() {
                    unknowns += 1;
                    if let At::Shared(end) = *at {
                        shared.push((end, u));
                    }
                }
                Some(u)
            })
            .collect();
        let mut x = vec![0.0; unknowns];
        for (node, at) in values.0.iter().enumerate() {
            match (*at, unknown[node]) {
                (At::Given(value), _) => self.at[node] = value,
                (_, Some(u)) => x[u] = self.at[node],
                _ => {}
            }
        }
        let edges = conductances(mesh);
        let spread = |x: &[f64], given: &[f64]| -> Vec<f64> {
            (0..n).map(|node| unknown[node].map_or(given[node], |u| x[u])).collect()
        };
        let gradient = |nodal: &[f64]| -> Vec<f64> {
            let mut out = vec![0.0; unknowns];
            for &(a, b, w) in &edges {
                let flow = w * (nodal[a] - nodal[b]);
                if let Some(u) = unknown[a] {
                    out[u] += flow;
                }
                if let Some(u) = unknown[b] {
                    out[u] -= flow;
                }
            }
            out
        };
        let mut diagonal = vec![0.0; unknowns];
        for &(a, b, w) in &edges {
            if unknown[a] != unknown[b] {
                for u in [unknown[a], unknown[b]].into_iter().flatten() {
                    diagonal[u] += w;
                }
            }
        }
        let nothing = vec![0.0; n];
        let energy =
            |nodal: &[f64]| edges.iter().map(|&(a, b, w)| w * (nodal[a] - nodal[b]).powi(2)).sum::<f64>();
        // Conjugate gradients; each step lowers the energy by α r·z.
        let dot = |a: &[f64], b: &[f64]| a.iter().zip(b).map(|(a, b)| a * b).sum::<f64>();
        let mut r: Vec<f64> = gradient(&spread(&x, &self.at)).iter().map(|g| -g).collect();
        let scaled = |r: &[f64]| -> Vec<f64> { r.iter().zip(&diagonal).map(|(r, d)| r / d).collect() };
        let mut z = scaled(&r);
        let mut p = z.clone();
        let mut rz = dot(&r, &z);
        let start = energy(&spread(&x, &self.at));
        let mut quiet = 0;
        for _ in 0..ITERATIONS {
            if rz <= 0.0 {
                break;
            }
            let ap = gradient(&spread(&p, &nothing));
            let alpha = rz / dot(&p, &ap);
            x.iter_mut().zip(&p).for_each(|(x, p)| *x += alpha * p);
            r.iter_mut().zip(&ap).for_each(|(r, a)| *r -= alpha * a);
            // Quiet for long enough is done: single steps may be small.
            quiet = if alpha * rz <= ENOUGH * start { quiet + 1 } else { 0 };
            if quiet > 50 {
                break;
            }
            z = scaled(&r);
            let next = dot(&r, &z);
            let beta = next / rz;
            rz = next;
            p.iter_mut().zip(&z).for_each(|(p, z)| *p = z + beta * *p);
        }
        self.at = spread(&x, &self.at);
        energy(&self.at)
    }

    /// Gradient on a triangle.
    fn gradient(&self, mesh: &Mesh, t: usize) -> Complex64 {
        let nodes = mesh.triangles()[t];
        let [a, b, c] = nodes.map(|i| mesh.points()[i]);
        let [u, v, w] = nodes.map(|i| self.at[i]);
        Complex64::i() * ((c - b) * u + (a - c) * v + (b - a) * w) / (2.0 * mesh.area(t))
    }
}

/// Edges with the weights that make up the energy: half the cotangents of the angles opposite.
fn conductances(mesh: &Mesh) -> Vec<(usize, usize, f64)> {
    let mut edges = Vec::with_capacity(3 * mesh.triangles().len());
    for nodes in mesh.triangles() {
        for i in 0..3 {
            let [a, b, c] = [nodes[i], nodes[(i + 1) % 3], nodes[(i + 2) % 3]];
            let [p, q] = [a, b].map(|k| mesh.points()[k] - mesh.points()[c]);
            let product = p.conj() * q;
            edges.push((a, b, 0.5 * product.re / product.im));
        }
    }
    edges
}

/// `∫|∇φ − J∇ψ|²` of each triangle, `ψ` scaled to a flux and `J` a quarter turn.
pub(super) fn misfit(mesh: &Mesh, potential: &Trial, stream: &Trial, flux: f64) -> Vec<f64> {
    // Gap 0 follows run 0 counter-clockwise: from the inside ψ rises across the current in this sense.
    let turned = Complex64::new(0.0, flux);
    let of = |sign: f64| -> Vec<f64> {
        (0..mesh.triangles().len())
            .map(|t| {
                let difference = potential.gradient(mesh, t) - sign * turned * stream.gradient(mesh, t);
                mesh.area(t) * difference.norm_sqr()
            })
            .collect()
    };
    let (with, against) = (of(1.0), of(-1.0));
    if with.iter().sum::<f64>() <= against.iter().sum::<f64>() { with } else { against }
}
