//! The constrained Delaunay triangulation of a (weakly simple) polygon, by corner of the walk.
//!
//! Two faces of a wall of no thickness meet at the same points of the plane but are different corners; a triangle
//! knows corners, not points.

use crate::outline::Point;
use spade::{ConstrainedDelaunayTriangulation, Point2, Triangulation as _};
use std::collections::HashMap;
use thiserror::Error;

/// Why no start can be made for an outline.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum StartError {
    /// The triangulation does not fit the outline: sides cross or overlap beyond what rounding allows.
    #[error("the outline cannot be triangulated: {reason}")]
    Triangulation {
        /// What was found.
        reason: &'static str,
    },
    /// Splitting sides did not come to an end.
    #[error(
        "the sides were split into more than {limit} pieces: the section is too long and thin for its detail"
    )]
    TooManyPieces {
        /// The bound on the pieces.
        limit: usize,
    },
}

/// Triangles of a polygon, named by the corners of its walk, and who is beside whom.
#[derive(Debug, Clone)]
pub(crate) struct Triangles {
    /// Corners in counter-clockwise order, which is also their order along the walk.
    pub(crate) corners: Vec<[usize; 3]>,
    /// The triangle across the edge from corner `i` to corner `i+1`, if that edge is no side.
    pub(crate) across: Vec<[Option<usize>; 3]>,
    /// For each side, its triangle and the position of the side's first corner there.
    pub(crate) on_side: Vec<(usize, usize)>,
}

/// Triangulates the polygon with the given corners, interior on the left.
pub(crate) fn triangulate(corners: &[Point]) -> Result<Triangles, StartError> {
    let fault = |reason| StartError::Triangulation { reason };
    let n = corners.len();
    let mut place: HashMap<(u64, u64), usize> = HashMap::with_capacity(n);
    let mut points: Vec<Point2<f64>> = Vec::with_capacity(n);
    let at: Vec<usize> = corners
        .iter()
        .map(|p| {
            // −0 and 0 are one place.
            *place.entry(((p.re + 0.0).to_bits(), (p.im + 0.0).to_bits())).or_insert_with(|| {
                points.push(Point2::new(p.re + 0.0, p.im + 0.0));
                points.len() - 1
            })
        })
        .collect();
    let mut edges: Vec<[usize; 2]> = (0..n).map(|k| [at[k], at[(k + 1) % n]]).collect();
    edges.iter_mut().for_each(|e| e.sort_unstable());
    edges.sort_unstable();
    edges.dedup();
    let mut conflict = false;
    let cdt = ConstrainedDelaunayTriangulation::<Point2<f64>>::try_bulk_load_cdt(points, edges, |_| {
        conflict = true
    })
    .map_err(|_| fault("a coordinate is outside the range that exact predicates can hold"))?;
    if conflict {
        return Err(fault("two sides cross"));
    }
    let handle: Vec<_> = cdt.fixed_vertices().collect();
    // Walk round every corner, from its leaving side to its arriving side, and name the corner in each face.
    let mut name_in_face: HashMap<(usize, usize), usize> = HashMap::with_capacity(3 * n);
    let mut faces: Vec<usize> = Vec::with_capacity(n);
    let mut side_face = vec![usize::MAX; n];
    for k in 0..n {
        let first = cdt
            .get_edge_from_neighbors(handle[at[k]], handle[at[(k + 1) % n]])
            .ok_or(fault("a side is missing, so another one overlaps it"))?;
        let mut edge = first;
        for turn in 0..=3 * n {
            let face =
                edge.face().as_inner().ok_or(fault("the interior is not on the left of every side"))?;
            let f = face.fix().index();
            if turn == 0 {
                side_face[k] = f;
            }
            faces.push(f);
            name_in_face.insert((f, at[k]), k);
            edge = edge.ccw();
            if edge.is_constraint_edge() {
                break;
            }
        }
    }
    faces.sort_unstable();
    faces.dedup();
    let number: HashMap<usize, usize> = faces.iter().enumerate().map(|(i, &f)| (f, i)).collect();
    let mut out = Triangles {
        corners: vec![[usize::MAX; 3]; faces.len()],
        across: vec![[None; 3]; faces.len()],
        on_side: vec![(usize::MAX, 0); n],
    };
    for face in cdt.inner_faces() {
        let Some(&t) = number.get(&face.fix().index()) else { continue };
        for (i, edge) in face.adjacent_edges().into_iter().enumerate() {
            let corner = name_in_face
                .get(&(face.fix().index(), edge.from().fix().index()))
                .copied()
                .ok_or(fault("a triangle reaches a corner from outside"))?;
            out.corners[t][i] = corner;
            if edge.is_constraint_edge() {
                out.on_side[corner] = (t, i);
            } else {
                let other = edge.rev().face().fix().index();
                out.across[t][i] = Some(*number.get(&other).ok_or(fault("the interior leaks out"))?);
            }
        }
    }
    // A simple polygon with n corners has n − 2 triangles: the check that nothing was lost or counted twice.
    if out.corners.len() != n - 2 || out.on_side.iter().any(|s| s.0 == usize::MAX) {
        return Err(fault("the triangles do not fill the outline"));
    }
    Ok(out)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn points(list: &[(f64, f64)]) -> Vec<Point> {
        list.iter().map(|&(x, y)| Point::new(x, y)).collect()
    }

    #[test]
    fn l_shape_has_four_triangles() {
        let t =
            triangulate(&points(&[(1.0, 2.0), (0.0, 2.0), (0.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, 1.0)]))
                .unwrap();
        assert_eq!(t.corners.len(), 4);
    }

    #[test]
    fn the_two_faces_of_a_wall_are_told_apart() {
        // A square with a wall from the middle of its top to its centre: seven corners, five triangles.
        let t = triangulate(&points(&[
            (-1.0, -1.0),
            (1.0, -1.0),
            (1.0, 1.0),
            (0.0, 1.0),
            (0.0, 0.0),
            (0.0, 1.0),
            (-1.0, 1.0),
        ]))
        .unwrap();
        assert_eq!(t.corners.len(), 5);
        assert_ne!(t.on_side[3].0, t.on_side[4].0);
    }

    #[test]
    fn crossing_sides_are_refused() {
        assert!(triangulate(&points(&[(0.0, 0.0), (1.0, 1.0), (1.0, 0.0), (0.0, 1.0)])).is_err());
    }
}
