//! No list of vertices and levels makes the program panic, hang or answer with something that is no number.

use num_complex::Complex64;
use proptest::collection::vec;
use proptest::prelude::*;
use sc_core::answers::{Gradient, Solution, SolveOptions};
use sc_core::outline::{Outline, Vertex};
use sc_core::potential::Section;

fn config(cases: u32) -> ProptestConfig {
    ProptestConfig { cases, failure_persistence: None, max_shrink_iters: 200, ..ProptestConfig::default() }
}

/// Any double at all, or something sensible.
fn wild() -> impl Strategy<Value = Vertex> {
    prop_oneof![
        (any::<f64>(), any::<f64>()).prop_map(|(x, y)| Vertex::at(x, y)),
        (any::<f64>(), any::<f64>()).prop_map(|(arriving, leaving)| Vertex::Away { arriving, leaving }),
        (-10.0..10.0, -10.0..10.0).prop_map(|(x, y)| Vertex::at(x, y)),
    ]
}

/// Points of a small grid, some moved by one of three amounts.
fn near_grid(moves: [f64; 3]) -> impl Strategy<Value = Vertex> {
    let [a, b, c] = moves;
    let off = move || prop_oneof![6 => Just(0.0), 1 => Just(a), 1 => Just(b), 1 => Just(c)];
    (0..4_i32, 0..4_i32, off(), off())
        .prop_map(|(i, j, dx, dy)| Vertex::at(f64::from(i) + dx, f64::from(j) + dy))
}

/// A level or none on each of twelve sides; odd levels among them.
fn conditions() -> impl Strategy<Value = Vec<Option<usize>>> {
    vec(prop_oneof![3 => Just(None), 2 => (0..3_usize).prop_map(Some)], 12)
}

/// The electrodes that hold a side, renumbered so that each has one, with their levels.
fn sound(electrodes: &[Option<usize>], levels: [f64; 3]) -> (Vec<Option<usize>>, Vec<f64>) {
    let used: Vec<usize> = (0..3).filter(|e| electrodes.contains(&Some(*e))).collect();
    let number = |e: usize| used.iter().position(|&u| u == e);
    (electrodes.iter().map(|e| e.and_then(number)).collect(), used.iter().map(|&e| levels[e]).collect())
}

/// Asks everything; every number is one, every bound is one that can be believed.
fn ask_everything(solution: &Solution) -> Result<(), String> {
    let outline = solution.section().outline();
    // At the end of a needle the prevertices of a side are closer than numbers can say.
    let needle = outline.alpha().iter().any(|&alpha| alpha < 0.02);
    let number = |what: &str, value: f64, error: f64| {
        let sound = !value.is_nan() && error >= 0.0;
        if sound { Ok(()) } else { Err(format!("{what}: {value} ± {error} in {outline:?}")) }
    };
    for &entry in solution.matrix().values.iter().flatten() {
        number("matrix", entry, solution.matrix().error)?;
    }
    if let Some(g) = solution.shape_factor() {
        number("shape factor", g.value, g.error)?;
    }
    for side in 0..outline.n() {
        let flux = solution.side_flux(side);
        number("flux", flux.value, flux.error)?;
        let corner = solution.corner(side);
        number("corner", corner.coefficient.value, corner.coefficient.error)?;
        let Some(length) = outline.side_length(side) else { continue };
        for part in [0.0, 1e-6, 0.5, 1.0] {
            match solution.probe_on_side(side, part * length) {
                Ok(probe) => number("potential on a side", probe.potential.value, probe.potential.error)?,
                Err(_) if needle => {}
                Err(why) => return Err(format!("{why} in {outline:?}")),
            }
        }
        if let Ok(flux) = solution.part_flux(side, 0.25 * length, 0.75 * length) {
            number("flux of a part", flux.value, flux.error)?;
        }
    }
    let grid = (0..64).map(|i| Complex64::new(0.05 + 0.5 * f64::from(i % 8), 0.07 + 0.5 * f64::from(i / 8)));
    let points: Vec<Complex64> = grid.collect();
    for probe in solution.probe_many(&points).into_iter().flatten() {
        number("potential", probe.potential.value, probe.potential.error)?;
        if let Gradient::Finite { components: [x, y], error } = probe.gradient {
            number("gradient", x + y, error)?;
        }
    }
    Ok(())
}

/// Solves what is sound of a list with conditions and asks everything of it.
fn put(list: &[Vertex], electrodes: &[Option<usize>], levels: [f64; 3]) -> Result<(), String> {
    let Ok(outline) = Outline::new(list) else { return Ok(()) };
    let (electrodes, levels) = sound(&electrodes[..list.len()], levels);
    let Ok((section, _)) = Section::new(outline.value, &electrodes, &levels) else { return Ok(()) };
    match Solution::solve(section, &SolveOptions::default()) {
        Ok(solution) => ask_everything(&solution),
        Err(why) if why.to_string().is_empty() => Err(format!("no reason: {why:?}")),
        Err(_) => Ok(()),
    }
}

proptest! {
    #![proptest_config(config(3000))]

    #[test]
    fn wild_lists_and_levels_are_answered_or_refused(
        list in vec(wild(), 0..8),
        electrodes in vec(prop_oneof![Just(None), any::<usize>().prop_map(Some), (0..3_usize).prop_map(Some)], 0..9),
        levels in vec(any::<f64>(), 0..4),
    ) {
        let Ok(outline) = Outline::new(&list) else { return Ok(()) };
        let Ok((section, _)) = Section::new(outline.value, &electrodes, &levels) else { return Ok(()) };
        if let Err(why) = Solution::solve(section, &SolveOptions::default()) {
            prop_assert!(!why.to_string().is_empty());
        }
    }
}

proptest! {
    #![proptest_config(config(2000))]

    #[test]
    fn lists_near_a_grid_are_solved_or_say_why_not(
        list in vec(near_grid([0.03, -0.05, 0.2]), 3..12),
        electrodes in conditions(),
        levels in (-2.0..2.0_f64, 0.0..1.0_f64, Just(1.0)),
    ) {
        put(&list, &electrodes, [levels.0, levels.1, levels.2]).map_err(TestCaseError::fail)?;
    }

    #[test]
    fn lists_with_needles_and_narrow_gaps_are_solved_or_say_why_not(
        list in vec(near_grid([1e-3, -3e-3, 0.03]), 3..12),
        electrodes in conditions(),
        levels in (-2.0..2.0_f64, 0.0..1.0_f64, Just(1.0)),
    ) {
        put(&list, &electrodes, [levels.0, levels.1, levels.2]).map_err(TestCaseError::fail)?;
    }
}
