//! Sections with held and insulated sides, in the numbering of their own list, handed to the program under test.

use num_complex::Complex64;
use sc_core::answers::{Solution, SolveError, SolveOptions};
use sc_core::outline::{Outline, OutlineFaults, Vertex};
use sc_core::potential::{Section, SectionFault};
use thiserror::Error;

/// An outline with a level, or none, on each side; side `k` leaves vertex `k`.
#[derive(Debug, Clone)]
pub struct HeldSection {
    /// The vertices as listed.
    pub vertices: Vec<Vertex>,
    /// The electrode on each side, `None` where insulated.
    pub electrodes: Vec<Option<usize>>,
    /// The level of each electrode.
    pub levels: Vec<f64>,
}

/// Why a section of a check was not answered.
#[derive(Debug, Clone, PartialEq, Error)]
pub enum Refused {
    /// By its outline.
    #[error("outline: {0}")]
    Outline(#[from] OutlineFaults),
    /// By its conditions.
    #[error("conditions: {0:?}")]
    Conditions(Vec<SectionFault>),
    /// By the solver.
    #[error("solution: {0}")]
    Solution(#[from] SolveError),
}

impl HeldSection {
    /// A section where all sides at one level are one electrode; electrodes in the order of their levels.
    #[must_use]
    pub fn by_level(vertices: Vec<Vertex>, held: &[Option<f64>]) -> HeldSection {
        let mut levels: Vec<f64> = held.iter().copied().flatten().collect();
        levels.sort_by(f64::total_cmp);
        levels.dedup_by(|a, b| a.total_cmp(b).is_eq());
        let electrode = |level: f64| levels.iter().position(|l| l.total_cmp(&level).is_eq());
        let electrodes = held.iter().map(|level| level.and_then(electrode)).collect();
        HeldSection { vertices, electrodes, levels }
    }

    /// A section where each run of neighbouring sides at one level is an electrode, in the order of their least side.
    #[must_use]
    pub fn by_run(vertices: Vec<Vertex>, held: &[Option<f64>]) -> HeldSection {
        let n = held.len();
        let same = |a: usize, b: usize| match (held[a], held[b]) {
            (Some(u), Some(v)) => u.total_cmp(&v).is_eq(),
            _ => false,
        };
        let mut electrodes: Vec<Option<usize>> = vec![None; n];
        let mut levels: Vec<f64> = Vec::new();
        for k in 0..n {
            let Some(level) = held[k] else { continue };
            electrodes[k] = if k > 0 && same(k, k - 1) {
                electrodes[k - 1]
            } else {
                levels.push(level);
                Some(levels.len() - 1)
            };
        }
        // A run through the start of the list ends in the last electrode, which is the first.
        if n > 1 && same(n - 1, 0) && electrodes[n - 1] != electrodes[0] {
            let last = electrodes[n - 1];
            electrodes.iter_mut().filter(|e| **e == last).for_each(|e| *e = Some(0));
            levels.pop();
        }
        HeldSection { vertices, electrodes, levels }
    }

    /// A bounded section with two held sides, at 1 and at 0.
    #[must_use]
    pub fn between(points: &[Complex64], one: usize, zero: usize) -> HeldSection {
        let mut held = vec![None; points.len()];
        held[one] = Some(1.0);
        held[zero] = Some(0.0);
        HeldSection::by_level(finite(points), &held)
    }

    /// The level of each side.
    #[must_use]
    pub fn held(&self) -> Vec<Option<f64>> {
        self.electrodes.iter().map(|electrode| electrode.map(|e| self.levels[e])).collect()
    }

    /// The section as the program takes it.
    ///
    /// # Errors
    /// [`Refused`] with all faults.
    pub fn section(&self) -> Result<Section, Refused> {
        let outline = Outline::new(&self.vertices)?.value;
        let (section, _) =
            Section::new(outline, &self.electrodes, &self.levels).map_err(Refused::Conditions)?;
        Ok(section)
    }

    /// The solution at the program's own settings.
    ///
    /// # Errors
    /// [`Refused`] by whoever refused it.
    pub fn solve(&self) -> Result<Solution, Refused> {
        self.solve_with(&SolveOptions::default())
    }

    /// The solution at other settings.
    ///
    /// # Errors
    /// [`Refused`] by whoever refused it.
    pub fn solve_with(&self, options: &SolveOptions) -> Result<Solution, Refused> {
        Ok(Solution::solve(self.section()?, options)?)
    }
}

/// A list of points as vertices.
#[must_use]
pub fn finite(points: &[Complex64]) -> Vec<Vertex> {
    points.iter().map(|&point| Vertex::At(point)).collect()
}

/// The walking index of a side of the list.
///
/// # Panics
/// If the list has no such side.
#[must_use]
pub fn walking_side(outline: &Outline, given: usize) -> usize {
    let found = (0..outline.n()).find(|&k| outline.given_side(k).0 == given);
    found.unwrap_or_else(|| panic!("there is no side {given}"))
}

/// The walking index of a vertex of the list.
///
/// # Panics
/// If the list has no such vertex.
#[must_use]
pub fn walking_vertex(outline: &Outline, given: usize) -> usize {
    let found = (0..outline.n()).find(|&k| outline.given_vertex(k).0 == given);
    found.unwrap_or_else(|| panic!("there is no vertex {given}"))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_run_through_the_start_of_the_list_is_one_electrode() {
        let held = [Some(1.0), None, Some(0.0), Some(0.0), None, Some(1.0)];
        let section = HeldSection::by_run(Vec::new(), &held);
        assert_eq!(section.electrodes, [Some(0), None, Some(1), Some(1), None, Some(0)]);
        assert_eq!(section.levels, [1.0, 0.0]);
        assert_eq!(section.held(), held);
    }

    #[test]
    fn sides_at_one_level_are_one_electrode_wherever_they_are() {
        let held = [Some(1.0), None, Some(0.0), None, Some(1.0), None];
        let section = HeldSection::by_level(Vec::new(), &held);
        assert_eq!(section.electrodes, [Some(1), None, Some(0), None, Some(1), None]);
        assert_eq!(section.levels, [0.0, 1.0]);
    }
}
