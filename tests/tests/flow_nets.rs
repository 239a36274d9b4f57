//! Flow nets of the simple polygons of `reference-data/simple-300.json`, up to 230 decades of crowding: every line
//! ends on the boundary, each value has one equipotential, and the channels agree with the shape factor.

use rayon::prelude::*;
use sc_core::answers::{FlowNetOptions, Solution, SolveOptions, Terminus, suitable_drops};
use sc_core::outline::{Outline, Vertex};
use sc_core::potential::Section;
use sc_tests::reference::load_simple_300;

#[test]
fn every_line_of_crowded_polygons_ends_on_the_boundary() {
    let polygons = load_simple_300();
    // A sample, with the longest channel of all (the sixteenth) in it.
    let sample: Vec<_> = polygons.iter().skip(5).step_by(10).collect();
    let lines: usize = sample
        .par_iter()
        .map(|polygon| {
            let vertices: Vec<Vertex> = polygon.vertices.iter().map(|v| Vertex::at(v[0], v[1])).collect();
            let outline = Outline::new(&vertices).unwrap().value;
            let mut electrodes = vec![None; vertices.len()];
            electrodes[polygon.held[0]] = Some(0);
            electrodes[polygon.held[1]] = Some(1);
            let (section, _) = Section::new(outline, &electrodes, &[1.0, 0.0]).unwrap();
            let options = SolveOptions { check: false, ..SolveOptions::default() };
            let solution = Solution::solve(section, &options).unwrap();
            let s = solution.shape_factor().unwrap().value;
            let drops = suitable_drops(s);
            let net = solution.flow_net(&FlowNetOptions { drops, ..FlowNetOptions::default() });
            assert_eq!(net.equipotentials.len(), drops - 1, "{}", polygon.id);
            let channels = s * drops as f64;
            let whole = net.flow_lines.len() as f64;
            assert!(whole <= channels + 1e-6 && channels - 1.0 - 1e-5 <= whole, "{} {channels}", polygon.id);
            for line in net.equipotentials.iter().chain(&net.flow_lines) {
                let on_side = matches!(line.end, Terminus::Side(_));
                assert!(on_side, "{} {} ends at {:?}", polygon.id, line.value, line.end);
            }
            // Values at independent probes, in the middle of each line.
            for line in &net.equipotentials {
                let z = line.points[line.points.len() / 2];
                // A line of two points has no point inside the section.
                if line.points.len() > 2 {
                    let probe = solution.probe(z).unwrap();
                    let off = (probe.potential.value - line.value).abs();
                    assert!(off <= 1e-8, "{} {} off by {off} at {z}", polygon.id, line.value);
                }
            }
            net.equipotentials.len() + net.flow_lines.len()
        })
        .sum();
    assert_eq!(sample.len(), 30);
    assert!(lines > 400, "{lines}");
}
