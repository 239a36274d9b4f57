//! Faces of random plane graphs on a square grid: outlines with walls of every kind, traced without the code under test.

use proptest::collection::vec;
use proptest::prelude::*;

use super::super::{Outline, OutlineFault, Point, Vertex};
use super::{assert_closed, cases};

/// Nodes along one side of the grid.
const M: usize = 5;
const STEPS: [(i32, i32); 4] = [(1, 0), (0, 1), (-1, 0), (0, -1)];

/// Grid edges: the one toward +x and the one toward +y at every node.
struct Graph(Vec<[bool; 2]>);

impl Graph {
    fn has(&self, (x, y): (i32, i32), direction: usize) -> bool {
        let (dx, dy) = STEPS[direction];
        let end = (x + dx, y + dy);
        let within = |(x, y): (i32, i32)| 0 <= x && x < M as i32 && 0 <= y && y < M as i32;
        let ((x, y), axis) = if direction < 2 { ((x, y), direction) } else { (end, direction - 2) };
        within((x, y)) && within(end) && self.0[y as usize * M + x as usize][axis]
    }

    /// The walk around the face on the left of an edge: at each node the first edge clockwise from the one behind.
    /// Nodes with their interior angles in units of π/2.
    fn face(&self, start: (i32, i32), direction: usize) -> Vec<((i32, i32), usize)> {
        let (mut node, mut heading) = (start, direction);
        let mut walk = Vec::new();
        loop {
            let (dx, dy) = STEPS[heading];
            node = (node.0 + dx, node.1 + dy);
            let quarters = (1..=4).find(|q| self.has(node, (heading + 2 + 4 - q) % 4)).unwrap();
            heading = (heading + 2 + 4 - quarters) % 4;
            walk.push((node, quarters));
            if node == start && heading == direction {
                return walk;
            }
        }
    }
}

fn area(walk: &[((i32, i32), usize)]) -> i32 {
    (0..walk.len())
        .map(|k| {
            let ((a, _), (b, _)) = (walk[k], walk[(k + 1) % walk.len()]);
            a.0 * b.1 - a.1 * b.0
        })
        .sum()
}

proptest! {
    #![proptest_config(cases(3000))]

    #[test]
    fn faces_of_plane_graphs_are_accepted_with_their_angles(
        edges in vec(prop::array::uniform2(prop::bool::weighted(0.7)), M * M),
        x in 0..M as i32,
        y in 0..M as i32,
        direction in 0..4_usize,
        kept in vec(any::<bool>(), 4 * M * M),
        angle in prop_oneof![Just(0.0), 0.0..std::f64::consts::TAU],
        stretch in 0.1..10.0_f64,
    ) {
        let graph = Graph(edges);
        prop_assume!(graph.has((x, y), direction));
        let walk = graph.face((x, y), direction);
        prop_assume!(area(&walk) > 0);
        // Flat vertices are kept or dropped at random, so that the faces of a wall are cut differently.
        let walk: Vec<_> = walk.iter().zip(&kept).filter(|&(&(_, q), &kept)| q != 2 || kept).map(|(w, _)| *w).collect();
        let turn = Point::from_polar(stretch, angle);
        let list: Vec<Vertex> =
            walk.iter().map(|&((x, y), _)| Vertex::At(Point::new(f64::from(x), f64::from(y)) * turn)).collect();
        match Outline::new(&list) {
            Ok(warned) => {
                prop_assert!(warned.warnings.is_empty());
                assert_closed(&warned.value);
                for (&a, &(_, quarters)) in warned.value.alpha().iter().zip(&walk) {
                    let tolerance = if quarters % 2 == 0 && quarters != 0 || angle == 0.0 { 0.0 } else { 1e-14 };
                    prop_assert!((a - 0.5 * quarters as f64).abs() <= tolerance, "{a} for {quarters} quarters");
                }
            }
            // The one thing that a face may do and an outline may not.
            Err(faults) => prop_assert!(
                faults.0.iter().all(|f| {
                    matches!(f, OutlineFault::VerticesTouch { .. } | OutlineFault::VertexOnSide { .. })
                }),
                "{faults}"
            ),
        }
    }
}
