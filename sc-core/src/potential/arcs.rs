//! The boundary as arcs of held sides with insulated gaps between them, along the line of prevertices.

use super::section::Section;
use crate::map::HalfPlaneMap;

/// Sides are numbered along the line: side `k` leaves line point `k`; `n − 2` runs to infinity and `n − 1` comes back.
#[derive(Debug, Clone)]
pub(crate) struct Arcs {
    pub(crate) n: usize,
    /// Electrode of each side, in line order.
    pub(crate) electrode: Vec<Option<usize>>,
    /// Insulated gaps as (first side, last side), cyclic, in walking order; empty if every side is held.
    pub(crate) gaps: Vec<(usize, usize)>,
}

impl Arcs {
    pub(crate) fn new(section: &Section, map: &HalfPlaneMap) -> Arcs {
        let n = section.outline().n();
        let electrode: Vec<Option<usize>> =
            (0..n).map(|k| section.electrode_of_side(map.vertex_of(k))).collect();
        Arcs { n, electrode, gaps: Vec::new() }.with_gaps()
    }

    /// The same with its gaps read anew from the electrodes.
    pub(crate) fn with_gaps(mut self) -> Arcs {
        let (n, electrode) = (self.n, &self.electrode);
        self.gaps = (0..n)
            .filter(|&first| electrode[first].is_none() && electrode[(first + n - 1) % n].is_some())
            .map(|first| {
                let length = (0..n).take_while(|i| electrode[(first + i) % n].is_none()).count();
                (first, (first + length - 1) % n)
            })
            .collect();
        self
    }

    /// Exponent of `W'` from the conditions alone at line point `j` (or at infinity, `j = n − 1`): −1/2 where held
    /// meets insulated.
    pub(crate) fn is_end(&self, j: usize) -> bool {
        self.electrode[j].is_some() != self.electrode[(j + self.n - 1) % self.n].is_some()
    }

    /// Whether two different electrodes meet at line point `j`.
    pub(crate) fn is_junction(&self, j: usize) -> bool {
        matches!((self.electrode[(j + self.n - 1) % self.n], self.electrode[j]), (Some(a), Some(b)) if a != b)
    }

    /// Whether a gap passes or ends at infinity.
    pub(crate) fn meets_infinity(&self, gap: (usize, usize)) -> bool {
        gap.1 < gap.0 || gap.1 >= self.n - 2 || gap.0 == self.n - 1
    }
}
