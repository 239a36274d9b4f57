use super::*;
use crate::answers::SolveOptions;
use crate::outline::{Outline, Vertex};
use crate::potential::Section;

fn solved(points: &[(f64, f64)], electrodes: &[Option<usize>], levels: &[f64]) -> Solution {
    let vertices: Vec<Vertex> = points.iter().map(|&(x, y)| Vertex::at(x, y)).collect();
    let outline = Outline::new(&vertices).unwrap().value;
    let (section, _) = Section::new(outline, electrodes, levels).unwrap();
    Solution::solve(section, &SolveOptions::default()).unwrap()
}

fn square() -> Solution {
    let corners = [(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)];
    solved(&corners, &[None, Some(0), None, Some(1)], &[0.0, 1.0])
}

fn ell() -> Solution {
    let corners = [(0.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, 1.0), (1.0, 2.0), (0.0, 2.0)];
    solved(&corners, &[None, Some(1), None, None, Some(0), None], &[0.0, 1.0])
}

/// A layer with a floor from x = 4 to 6 and a cutoff wall in its middle; both beds are held.
fn cutoff() -> Solution {
    let corners = [
        (0.0, -3.0),
        (10.0, -3.0),
        (10.0, 0.0),
        (6.0, 0.0),
        (5.0, 0.0),
        (5.0, -1.5),
        (5.0, 0.0),
        (4.0, 0.0),
        (0.0, 0.0),
    ];
    let mut electrodes = [None; 9];
    electrodes[2] = Some(0);
    electrodes[7] = Some(1);
    solved(&corners, &electrodes, &[3.0, 7.0])
}

/// Every point of an equipotential has its value at an independent probe, and lies in the section.
fn assert_on_value(solution: &Solution, net: &FlowNet) {
    let mut seen = 0;
    let size = solution.section().outline().size();
    for line in &net.equipotentials {
        assert!(line.points.len() > 1, "{line:?}");
        for &z in &line.points[1..line.points.len() - 1] {
            let probe = solution.probe(z).unwrap();
            let off = (probe.potential.value - line.value).abs();
            assert!(off <= 1e-8 * solution.section().range(), "φ = {} off by {off} at {z}", line.value);
            seen += 1;
        }
    }
    for line in &net.flow_lines {
        assert!(line.points.len() > 1, "{line:?}");
        for &z in &line.points[1..line.points.len() - 1] {
            let probe = solution.probe(z).unwrap();
            let off = (probe.stream.value - line.value).abs();
            assert!(off <= 1e-8 * solution.section().range(), "ψ = {} off by {off} at {z}", line.value);
            seen += 1;
        }
    }
    for z in net.equipotentials.iter().chain(&net.flow_lines).flat_map(|l| &l.points) {
        let inside = solution.section().outline().contains(*z);
        let outside = inside == crate::outline::Containment::Outside;
        assert!(!outside || solution.section().outline().nearest_boundary(*z).distance < 1e-12 * size, "{z}");
    }
    assert!(seen > 0);
}

fn sides_of(line: &NetLine) -> (usize, usize) {
    match (line.start, line.end) {
        (Terminus::Side(a), Terminus::Side(b)) => (a.min(b), a.max(b)),
        other => panic!("{other:?} for {}", line.value),
    }
}

#[test]
fn the_net_of_a_square_is_straight() {
    let solution = square();
    let net = solution.flow_net(&FlowNetOptions::default());
    assert_eq!((net.equipotentials.len(), net.flow_lines.len()), (9, 9));
    for line in &net.equipotentials {
        assert_eq!(sides_of(line), (0, 2));
        assert!(line.points.iter().all(|z| (z.re - (1.0 - line.value)).abs() < 1e-10), "{line:?}");
    }
    for (i, line) in net.flow_lines.iter().enumerate() {
        assert_eq!(sides_of(line), (1, 3));
        let y = line.points[0].im;
        assert!(line.points.iter().all(|z| (z.im - y).abs() < 1e-10), "{line:?}");
        assert!((y - (1.0 - 0.1 * (i + 1) as f64)).abs() < 1e-10);
        assert!(!line.beside_part_channel);
    }
    assert_on_value(&solution, &net);
}

#[test]
fn channels_over_drops_is_the_shape_factor() {
    for solution in [square(), ell(), cutoff()] {
        let net = solution.flow_net(&FlowNetOptions { drops: 12, ..FlowNetOptions::default() });
        let s = solution.shape_factor().unwrap().value;
        assert!((net.n_channels / net.n_drops as f64 - s).abs() < 1e-14 * s);
        // Drawn lines agree: one less than the channels, the last of them partial.
        let drawn = net.flow_lines.len() as f64;
        assert!(
            drawn <= net.n_channels && drawn >= net.n_channels - 1.0 - 1e-6,
            "{drawn} {}",
            net.n_channels
        );
    }
}

#[test]
fn lines_of_an_ell_end_where_they_should() {
    let solution = ell();
    let net = solution.flow_net(&FlowNetOptions { drops: 11, ..FlowNetOptions::default() });
    assert_eq!(net.equipotentials.len(), 10);
    for line in &net.equipotentials {
        let (a, b) = sides_of(line);
        assert!([0, 5].contains(&a) || [0, 5].contains(&b), "{a} {b}");
        assert!([2, 3].contains(&a) || [2, 3].contains(&b), "{a} {b}");
    }
    for line in &net.flow_lines {
        assert_eq!(sides_of(line), (1, 4));
    }
    assert_on_value(&solution, &net);
    let last: Vec<bool> = net.flow_lines.iter().map(|l| l.beside_part_channel).collect();
    assert_eq!(last.iter().filter(|b| **b).count(), 1);
}

#[test]
fn a_line_through_two_corners_of_a_symmetric_ell_is_straight() {
    let solution = ell();
    let net = solution.flow_net(&FlowNetOptions { drops: 2, ..FlowNetOptions::default() });
    let [line] = &net.equipotentials[..] else { panic!("{:?}", net.equipotentials) };
    // A value that differs from that of the corners by rounding crosses beside them, and is still one line.
    for ulps in [-40.0, -3.0, 2.0, 9.0, 300.0] {
        let value = 0.5 * (1.0 + ulps * f64::EPSILON);
        assert_eq!(solution.equipotentials(&[value], &FlowNetOptions::default()).len(), 1, "{ulps}");
    }
    let (a, b) = (line.points[0], line.points[line.points.len() - 1]);
    assert!((a - b).norm() > 1.4, "{a} {b}");
    // In the right-angled corner φ is quadratic: 1e-11 of it is 3e-6 of the distance.
    assert!(line.points.iter().all(|z| (z.re - z.im).abs() < 3e-6), "{:?}", line.points);
}

#[test]
fn lines_pass_below_a_cutoff_wall() {
    let solution = cutoff();
    let net = solution.flow_net(&FlowNetOptions { drops: 10, ..FlowNetOptions::default() });
    assert_on_value(&solution, &net);
    for line in &net.flow_lines {
        assert_eq!(sides_of(line), (2, 7));
    }
    // Each equipotential joins the base of the layer or an end of it to the floor or a face of the wall.
    for line in &net.equipotentials {
        let (a, b) = sides_of(line);
        assert!(
            [0, 1, 8].contains(&a) && [3, 4, 5, 6].contains(&b) || [3, 4, 5, 6].contains(&a) && b == 8,
            "{a} {b}"
        );
    }
}

#[test]
fn three_electrodes_have_all_their_lines() {
    let corners =
        [(1.0, 0.0), (2.0, 0.0), (2.0, 2.0), (3.0, 2.0), (3.0, 3.0), (0.0, 3.0), (0.0, 2.0), (1.0, 2.0)];
    let mut electrodes = [None; 8];
    electrodes[0] = Some(0);
    electrodes[3] = Some(1);
    electrodes[5] = Some(2);
    for levels in [[1.0, 0.0, 0.0], [0.0, 1.0, 0.3], [0.45, 1.0, 0.0], [0.5, 1.0, 0.0]] {
        let solution = solved(&corners, &electrodes, &levels);
        let net = solution.flow_net(&FlowNetOptions { drops: 10, ..FlowNetOptions::default() });
        assert_on_value(&solution, &net);
        for line in net.equipotentials.iter().chain(&net.flow_lines) {
            assert_ne!(line.end, Terminus::StepLimit, "{levels:?} {}", line.value);
        }
    }
}

#[test]
fn equipotentials_fan_out_where_levels_touch() {
    let corners = [(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)];
    let solution = solved(&corners, &[Some(0), Some(0), Some(0), Some(1)], &[0.0, 1.0]);
    let net = solution.flow_net(&FlowNetOptions { drops: 5, ..FlowNetOptions::default() });
    let ends: Vec<_> = net.equipotentials.iter().map(|l| (l.start, l.end, l.points.len())).collect();
    assert_eq!(net.equipotentials.len(), 4, "{ends:?}");
    assert!(net.n_channels.is_infinite());
    assert!(!net.flow_lines.is_empty() && net.flow_lines.len() < 60, "{}", net.flow_lines.len());
    for line in &net.equipotentials {
        assert!(matches!((line.start, line.end), (Terminus::Vertex(_), Terminus::Vertex(_))), "{line:?}");
        let n = line.points.len();
        assert!((line.points[0].re.abs() + line.points[n - 1].re.abs()) < 1e-12);
    }
    assert_on_value(&solution, &net);
}

#[test]
fn a_section_without_flow_has_an_empty_net() {
    let corners = [(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)];
    let solution = solved(&corners, &[Some(0), None, Some(0), None], &[2.0]);
    let net = solution.flow_net(&FlowNetOptions::default());
    assert!(net.equipotentials.is_empty() && net.flow_lines.is_empty());
    assert!(net.n_channels.abs() < f64::MIN_POSITIVE);
}

#[test]
fn profile_along_a_side_of_a_square_is_linear() {
    let profile = square().along_side(0, 5).unwrap();
    let phi: Vec<f64> = profile.iter().map(|p| p.potential.value).collect();
    for (p, want) in phi.iter().zip([1.0, 0.75, 0.5, 0.25, 0.0]) {
        assert!((p - want).abs() < 1e-12, "{phi:?}");
    }
    assert!(square().along_side(9, 5).is_err());
}

fn solved_vertices(vertices: &[Vertex], electrodes: &[Option<usize>], levels: &[f64]) -> Solution {
    let outline = Outline::new(vertices).unwrap().value;
    let (section, _) = Section::new(outline, electrodes, levels).unwrap();
    Solution::solve(section, &SolveOptions::default()).unwrap()
}

#[test]
fn a_sheet_pile_to_half_the_layer_has_half_as_many_channels_as_drops() {
    // q/(kH) = 1/2 exactly, by the symmetry that exchanges held and insulated sides.
    let at = Vertex::at;
    let vertices =
        [Vertex::away(0.0), at(0.0, 0.0), at(0.0, -0.5), at(0.0, 0.0), Vertex::away(180.0), at(0.0, -1.0)];
    let solution = solved_vertices(&vertices, &[Some(0), None, None, Some(1), None, None], &[0.0, 1.0]);
    let net = solution.flow_net(&FlowNetOptions::default());
    assert!((net.n_channels - 5.0).abs() < 1e-9, "{}", net.n_channels);
    assert_eq!((net.equipotentials.len(), net.flow_lines.len()), (9, 4));
    for line in &net.equipotentials {
        // The one in the middle ends at the flat vertex of the base.
        let base = [Terminus::Side(4), Terminus::Side(5), Terminus::Vertex(5)];
        let wall = [Terminus::Side(1), Terminus::Side(2), Terminus::Vertex(2)];
        let ends = [line.start, line.end];
        assert!(ends.iter().any(|e| base.contains(e)) && ends.iter().any(|e| wall.contains(e)), "{ends:?}");
    }
    for line in &net.flow_lines {
        assert_eq!(sides_of(line), (0, 3));
    }
    assert_on_value(&solution, &net);
}

#[test]
fn a_stepped_channel_between_two_levels_has_lines_from_end_to_end() {
    let at = Vertex::at;
    let vertices = [Vertex::away(0.0), at(0.0, 1.0), at(0.0, 2.0), Vertex::away(180.0), at(0.0, 0.0)];
    let solution = solved_vertices(&vertices, &[Some(0), Some(0), Some(0), Some(1), Some(1)], &[1.0, 0.0]);
    let net = solution.flow_net(&FlowNetOptions { drops: 4, ..FlowNetOptions::default() });
    let ends: Vec<_> = net.equipotentials.iter().map(|l| (l.start, l.end, l.points.len())).collect();
    assert_eq!(net.equipotentials.len(), 3, "{ends:?}");
    for line in &net.equipotentials {
        assert!(matches!((line.start, line.end), (Terminus::Vertex(_), Terminus::Vertex(_))), "{ends:?}");
        let x = line.points.iter().map(|z| z.re);
        assert!(x.clone().fold(f64::INFINITY, f64::min) < -2.0 && x.fold(f64::NEG_INFINITY, f64::max) > 2.0);
    }
    assert!(net.flow_lines.len() > 4 && net.flow_lines.len() < 100, "{}", net.flow_lines.len());
    assert!(net.flow_lines.iter().all(|l| matches!(l.end, Terminus::Side(_))));
    assert_on_value(&solution, &net);
}

#[test]
fn a_floor_on_a_half_plane_has_confocal_lines() {
    // Equipotentials are hyperbolas and flow lines ellipses with their foci at the ends of the floor.
    let vertices =
        [Vertex::Away { arriving: 180.0, leaving: 0.0 }, Vertex::at(1.0, 0.0), Vertex::at(-1.0, 0.0)];
    let solution = solved_vertices(&vertices, &[Some(0), None, Some(1)], &[0.0, 1.0]);
    let net = solution.flow_net(&FlowNetOptions { drops: 6, ..FlowNetOptions::default() });
    assert_eq!(net.equipotentials.len(), 5);
    for line in &net.equipotentials {
        // φ = 1 − arccos(−x/…)…: |r₁ − r₂| is the same all along the line.
        let difference = |z: &Point| (z + 1.0).norm() - (z - 1.0).norm();
        let wanted = difference(&line.points[0]);
        assert!(line.points.iter().all(|z| (difference(z) - wanted).abs() < 1e-8), "{line:?}");
    }
    assert!(net.flow_lines.len() > 1, "{}", net.flow_lines.len());
    for line in &net.flow_lines {
        let sum = |z: &Point| (z + 1.0).norm() + (z - 1.0).norm();
        let wanted = sum(&line.points[0]);
        assert!(line.points.iter().all(|z| (sum(z) - wanted).abs() < 1e-7 * wanted), "{line:?}");
    }
}
