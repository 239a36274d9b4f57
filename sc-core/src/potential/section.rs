//! A section: an outline and what holds on each of its sides.

use crate::outline::{Outline, SideIdx};
use thiserror::Error;

/// What is wrong with the conditions of a section. Sides in the user's own numbering.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum SectionFault {
    /// Every side needs a condition.
    #[error("{given} conditions for {sides} sides")]
    Count {
        /// Conditions given.
        given: usize,
        /// Sides of the outline.
        sides: usize,
    },
    /// A side names an electrode that has no level.
    #[error("side {side} is held by electrode {electrode}, but only {levels} levels are given")]
    UnknownElectrode {
        /// The side.
        side: SideIdx,
        /// The electrode it names.
        electrode: usize,
        /// Number of levels.
        levels: usize,
    },
    /// A level is not a finite number.
    #[error("the level of electrode {electrode} is not a finite number")]
    Level {
        /// The electrode.
        electrode: usize,
    },
    /// An electrode has no side.
    #[error("no side is held by electrode {electrode}")]
    NoSide {
        /// The electrode.
        electrode: usize,
    },
    /// Nothing is held.
    #[error("no side is held, so nothing fixes the level")]
    NothingHeld,
}

/// What is answered, but perhaps not what was meant.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum SectionWarning {
    /// All levels are equal.
    #[error("all held sides have the same value {level}, so nothing flows")]
    AllEqual {
        /// The common level.
        level: f64,
    },
    /// Two neighbouring held sides have different levels.
    #[error("held sides {first} and {second} meet at different values, so the flux between them is infinite")]
    TouchingLevels {
        /// The side that arrives.
        first: SideIdx,
        /// The side that leaves.
        second: SideIdx,
    },
}

/// An outline with, for each side, the electrode that holds it, or none if it is insulated.
#[derive(Debug, Clone)]
pub struct Section {
    outline: Outline,
    /// By walking index.
    electrode: Vec<Option<usize>>,
    levels: Vec<f64>,
    group: Vec<usize>,
    n_groups: usize,
}

impl Section {
    /// Puts conditions on an outline.
    ///
    /// # Arguments
    /// * `electrodes` - for each side, in the order the outline was *given*, the electrode holding it, or `None` if
    ///   the side is insulated.
    /// * `levels` - the value of each electrode.
    ///
    /// # Errors
    /// All faults of the conditions.
    pub fn new(
        outline: Outline,
        electrodes: &[Option<usize>],
        levels: &[f64],
    ) -> Result<(Section, Vec<SectionWarning>), Vec<SectionFault>> {
        let n = outline.n();
        let mut faults = Vec::new();
        if electrodes.len() != n {
            faults.push(SectionFault::Count { given: electrodes.len(), sides: n });
        }
        for (k, electrode) in electrodes.iter().enumerate() {
            if let Some(electrode) = *electrode
                && electrode >= levels.len()
            {
                let levels = levels.len();
                faults.push(SectionFault::UnknownElectrode { side: SideIdx(k), electrode, levels });
            }
        }
        for (electrode, level) in levels.iter().enumerate() {
            if !level.is_finite() {
                faults.push(SectionFault::Level { electrode });
            }
            if !electrodes.contains(&Some(electrode)) {
                faults.push(SectionFault::NoSide { electrode });
            }
        }
        if electrodes.iter().all(Option::is_none) {
            faults.push(SectionFault::NothingHeld);
        }
        if !faults.is_empty() {
            return Err(faults);
        }
        let electrode: Vec<Option<usize>> = (0..n).map(|k| electrodes[outline.given_side(k).0]).collect();
        let (group, n_groups) = tie_touching_equals(&electrode, levels);
        let section = Section { outline, electrode, levels: levels.to_vec(), group, n_groups };
        let warnings = section.warnings();
        Ok((section, warnings))
    }

    fn warnings(&self) -> Vec<SectionWarning> {
        let mut out = Vec::new();
        if let Some(&level) = self.levels.first()
            && self.levels.iter().all(|l| same(*l, level))
        {
            out.push(SectionWarning::AllEqual { level });
        }
        let n = self.outline.n();
        for k in 0..n {
            let next = (k + 1) % n;
            if let (Some(a), Some(b)) = (self.level_of_side(k), self.level_of_side(next))
                && !same(a, b)
            {
                let (first, second) = (self.outline.given_side(k), self.outline.given_side(next));
                out.push(SectionWarning::TouchingLevels { first, second });
            }
        }
        out
    }

    /// The outline.
    pub fn outline(&self) -> &Outline {
        &self.outline
    }

    /// The electrode holding a side (walking index).
    pub fn electrode_of_side(&self, side: usize) -> Option<usize> {
        self.electrode[side]
    }

    /// The level of a side (walking index), if it is held.
    pub fn level_of_side(&self, side: usize) -> Option<f64> {
        self.electrode[side].map(|e| self.levels[e])
    }

    /// Levels of the electrodes.
    pub fn levels(&self) -> &[f64] {
        &self.levels
    }

    /// The group of an electrode: electrodes that touch at the same level are one conductor.
    pub fn group_of(&self, electrode: usize) -> usize {
        self.group[electrode]
    }

    /// Number of groups.
    pub fn n_groups(&self) -> usize {
        self.n_groups
    }

    /// Level of a group.
    pub fn level_of_group(&self, group: usize) -> f64 {
        self.group.iter().position(|&g| g == group).map_or(0.0, |e| self.levels[e])
    }

    /// Largest less smallest level.
    pub fn range(&self) -> f64 {
        let high = self.levels.iter().copied().fold(f64::NEG_INFINITY, f64::max);
        let low = self.levels.iter().copied().fold(f64::INFINITY, f64::min);
        high - low
    }

    /// The two levels, lower first, if there are exactly two distinct ones.
    pub fn two_levels(&self) -> Option<(f64, f64)> {
        let mut sorted = self.levels.clone();
        sorted.sort_by(f64::total_cmp);
        sorted.dedup_by(|a, b| same(*a, *b));
        match sorted[..] {
            [low, high] => Some((low, high)),
            _ => None,
        }
    }
}

/// Exact equality is meant: levels are data, not results.
#[allow(clippy::float_cmp, reason = "levels are data, compared as given")]
fn same(a: f64, b: f64) -> bool {
    a == b
}

fn tie_touching_equals(electrode: &[Option<usize>], levels: &[f64]) -> (Vec<usize>, usize) {
    let n = electrode.len();
    let mut group: Vec<usize> = (0..levels.len()).collect();
    for k in 0..n {
        if let (Some(a), Some(b)) = (electrode[k], electrode[(k + 1) % n])
            && same(levels[a], levels[b])
        {
            let (keep, drop) = (group[a].min(group[b]), group[a].max(group[b]));
            group.iter_mut().filter(|g| **g == drop).for_each(|g| *g = keep);
        }
    }
    // Number the groups in the order of their first electrode.
    let mut seen: Vec<usize> = Vec::new();
    for g in &mut group {
        let position = seen.iter().position(|s| s == g).unwrap_or_else(|| {
            seen.push(*g);
            seen.len() - 1
        });
        *g = position;
    }
    (group, seen.len())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::outline::Vertex;

    fn square() -> Outline {
        let at = |x, y| Vertex::at(x, y);
        Outline::new(&[at(0.0, 0.0), at(1.0, 0.0), at(1.0, 1.0), at(0.0, 1.0)]).unwrap().value
    }

    #[test]
    fn all_faults_are_reported_at_once() {
        let faults = Section::new(square(), &[Some(0), None, Some(5), None], &[f64::NAN, 2.0]).unwrap_err();
        assert_eq!(faults.len(), 3, "{faults:?}");
        assert_eq!(Section::new(square(), &[None; 4], &[]).unwrap_err(), vec![SectionFault::NothingHeld]);
    }

    #[test]
    fn touching_electrodes_of_one_level_are_one_group() {
        let (section, warnings) =
            Section::new(square(), &[Some(0), Some(1), None, Some(2)], &[1.0, 1.0, 0.0]).unwrap();
        assert_eq!(section.n_groups(), 2);
        assert_eq!(section.group_of(1), section.group_of(0));
        // Sides 3 (at 0) and 0 (at 1) touch.
        assert_eq!(warnings.len(), 1);
        assert_eq!(section.two_levels(), Some((0.0, 1.0)));
    }
}
