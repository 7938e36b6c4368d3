//! Force closure: can the fingers balance every load, however small their number and whatever its direction?
//!
//! Closed iff the generators positively span the wrench space: rank 3, and some `lambda > 0` with `W lambda = 0`
//! (Trinkle 1992 for the quantitative form, see [`super::program::closure`]).

use super::MARGINAL;
use super::force_polygon::PlanarScore;
use super::quality;
use super::wrench::Wrenches;

/// Whether a grasp is closed.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Verdict {
    /// Every load can be balanced by large enough finger forces.
    Closed,
    /// Some load cannot be balanced however hard the fingers press.
    Open,
    /// On the boundary to within 1e-9: not to be relied on, and never called closed.
    Marginal,
}

impl Verdict {
    /// The word for it.
    pub fn word(self) -> &'static str {
        match self {
            Self::Closed => "closed",
            Self::Open => "open",
            Self::Marginal => "marginal",
        }
    }

    /// The verdict on a grasp whose kernel score is known.
    pub fn of(wrenches: &Wrenches, score: &PlanarScore) -> Self {
        if score.signed_quality > MARGINAL {
            return Self::Closed;
        }
        // The facets of an open hull may all pass close to 0 while the hull itself does not.
        let (reach, _) = quality::least_reach(wrenches.generators());
        if reach < -MARGINAL || rank(wrenches) < 3 { Self::Open } else { Self::Marginal }
    }
}

/// Rank of W, counting singular values above 1e-9 of the largest.
pub fn rank(wrenches: &Wrenches) -> usize {
    if wrenches.generators().is_empty() {
        return 0;
    }
    let values = wrenches.matrix().singular_values();
    let largest = values.max();
    values.iter().filter(|&&value| value > 1e-9 * largest).count()
}
