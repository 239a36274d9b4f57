//! From walking numbers to the numbers of the user's list.

use super::faults::{SideIdx, VertexIdx};

/// How the walk relates to the list the user gave: the same, or from the first vertex the other way round.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Numbering {
    pub(super) n: usize,
    pub(super) reversed: bool,
}

impl Numbering {
    pub(super) fn vertex(self, k: usize) -> VertexIdx {
        VertexIdx(if self.reversed { (self.n - k % self.n) % self.n } else { k % self.n })
    }

    pub(super) fn side(self, k: usize) -> SideIdx {
        SideIdx(if self.reversed { self.n - 1 - k % self.n } else { k % self.n })
    }

    /// Two sides in the order of the user's list.
    pub(super) fn side_pair(self, a: usize, b: usize) -> (SideIdx, SideIdx) {
        let (a, b) = (self.side(a), self.side(b));
        (a.min(b), a.max(b))
    }
}
