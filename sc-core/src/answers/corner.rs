//! The leading singularity of the gradient at a vertex.

use super::bounded::Bounded;

/// What meets at a vertex.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub enum CornerKind {
    /// Both sides held at one level, or both insulated.
    Alike,
    /// A held and an insulated side.
    HeldMeetsInsulated,
    /// Two sides held at different levels.
    Jump,
    /// A vertex at infinity, where no power of the distance applies; exponent 1 and coefficient 0 stand for none.
    AtInfinity,
}

/// The gradient near a vertex: `|∇φ| ≈ coefficient · r^exponent` for small distance `r`.
///
/// ```text
/// exponent = 1/α − 1 (alike),   1/(2α) − 1 (held meets insulated),   −1 (jump; coefficient |jump|/(α π))
/// ```
/// The unit of the coefficient is level · length^−(1 + exponent). A negative exponent with a coefficient that is not
/// zero means that the gradient is infinite at the vertex.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Corner {
    /// Walking index of the vertex.
    pub vertex: usize,
    /// Interior angle over π.
    pub alpha: f64,
    /// What meets there.
    pub kind: CornerKind,
    /// Power of the distance.
    pub exponent: f64,
    /// Its factor.
    pub coefficient: Bounded,
}

impl Corner {
    /// Exponents nearer to zero than this are taken as zero: the gradient is finite at the vertex.
    const FLAT: f64 = 1e-9;

    /// Whether the gradient grows without bound toward the vertex.
    pub fn is_singular(&self) -> bool {
        self.exponent < -Self::FLAT && self.coefficient.value > self.coefficient.error
    }

    /// Whether the gradient tends to a value that is neither zero nor infinite.
    pub fn is_regular(&self) -> bool {
        self.exponent.abs() <= Self::FLAT
    }
}
