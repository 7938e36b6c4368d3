//! The proved best: for each family the best placement anywhere on its stretches, and how much better any could be.
//!
//! Branch and bound (Land & Doig 1960) over boxes of placements. A *box* gives each finger of a family an interval of its
//! stretch. What prunes what, cheapest first, and why nothing better is lost:
//!
//! - *Families by directions* ([`cover`]). A score is at most the reach of the wrench set in any one direction, whatever the
//!   placement; a family whose stretches together leave a direction open cannot beat the list. Bits, no torques.
//! - *Families by their forces* ([`gauge`]). What does not positively span the plane never closes; the quality is at most
//!   the distance to the nearest side of the force polygon. Forces do not depend on the placement.
//! - *Boxes by covering contacts* ([`rail`], [`gauge`]). A finger anywhere in an interval has its generators in the hull of
//!   those at the two ends, which are those of a wider pad. Every score grows with the wrench set, so the score of the covering
//!   pads bounds the box. It is never farther from the truth than half the longest interval over l (quality), or half of
//!   it (placement), so the bounds close in as boxes are cut.
//! - *Boxes by floors, loads and gaps*. A floor, or a load, that the covering contacts do not keep is kept nowhere in the box; two
//!   fingers that are too near in its middle by more than they can move are too near everywhere.
//! - *Boxes by relabelling*. Two fingers on one stretch in falling order are the same grasp in rising order.
//! - *Boxes by turning directions* ([`tilt`]). Near a best placement the facets of the wrench set pull in different directions; a
//!   mix of them bounds a box to the second order of its width, where covering contacts do to the first.
//! - *The list*. A box is dropped when its bound is not above the family's own best by more than the gap, nor above the
//!   last of the list by more than the gap. What is dropped is remembered by its bound: the largest of them is part of what
//!   is stated in the end.
//!
//! # The first row
//! A gap of a hundredth alone would let a sampler find a grasp a little better than the first row. So what might hold a better
//! one is not dropped but put aside, and in the end cut further until the first row is within a millionth of the best
//! there is, or a third more boxes have been looked at than before. [`Proved::polished`] says which: where it is true no other
//! search finds a better grasp, by more than that millionth; where it is false one may, within the gap.
//!
//! # The same on any number of threads
//! Work is done in rounds. A round's families are chosen, and the level they have to beat is fixed, before it begins; they
//! are settled each by itself, and put together in order when all are done.
//!
//! # What stays open
//! Under loads the friction needed of a finger on an arc is bounded by closure alone; that gap may stay open, and then shows.

mod cover;
mod gauge;
mod goal;
mod improve;
mod loads;
mod plot;
mod rail;
mod rounds;
mod start;
#[cfg(test)]
#[allow(clippy::unwrap_used, reason = "a test that cannot go on has failed")]
mod tests;
mod tilt;

use super::families::Family;
use super::order::Key;
use super::rank::{Cancel, Cancelled, Listed};
use super::scene::{Scene, Spot};
use crate::hand::{Closing, JawRun};
use goal::Goal;
use rail::{Gaps, Rail};
use rounds::Search;

/// The best of one family.
#[derive(Debug, Clone, PartialEq)]
pub struct ProvedGrasp {
    /// The grasp, assessed and confirmed.
    pub listed: Listed,
    /// Its score on the key: quality, quality per finger, friction coefficient, mm, N, or multiple of the load.
    pub value: f64,
    /// No placement of this family scores better than this.
    pub bound: f64,
}

/// What a search for the proved best came to. Scores and bounds are in the key's unit; bounds lie above scores where more is
/// better, below where less is.
#[derive(Debug, Clone, PartialEq)]
pub struct Proved {
    /// The best grasp of each of the best families, best first.
    pub grasps: Vec<ProvedGrasp>,
    /// No placement on any family scores better than this; nothing where no placement is a grasp at all.
    pub best_bound: Option<f64>,
    /// No placement of a family that is not in the list scores better than this; nothing where all that are grasps are in it.
    pub rest_bound: Option<f64>,
    /// How much better than the first row any placement can be, as a part of its score. Infinite when nothing is listed and
    /// something may be there.
    pub best_gap: f64,
    /// How much better than its row a family in the list can be, at most, as a part of the best score or of its own where
    /// that is larger (near 0 of a small score, see [`prove`]); than the first row, any family; than the last row of a full list, any family that is not in it. Infinite
    /// when the list is not full and a family may be missing that reaches this part of the best score.
    pub gap: f64,
    /// That gap is no wider than was asked for.
    pub proved: bool,
    /// All was settled before the budget ended.
    pub complete: bool,
    /// Boxes looked at.
    pub boxes: u64,
    /// Families told apart by their directions; those of beginnings excluded together count once.
    pub families: u64,
    /// Families of which something had to be cut.
    pub opened: u64,
    /// Placements scored on the way.
    pub scored: u64,
    /// Those closed among them.
    pub closed: u64,
    /// No placement anywhere scores better than the first row by more than a millionth of it.
    pub polished: bool,
    /// Grasps whose two ways of scoring disagree; they are left out of the list.
    pub inconclusive: u64,
}

/// How far a search is.
#[derive(Debug, Clone, PartialEq)]
pub struct Proving {
    /// Boxes looked at.
    pub boxes: u64,
    /// Most that will be.
    pub budget: u64,
    /// The best score so far.
    pub best: Option<f64>,
    /// What none can beat, as far as it is known.
    pub bound: Option<f64>,
    /// The gap between the two, as a part of the best score.
    pub gap: Option<f64>,
    /// The best so far, when a snapshot was due.
    pub grasps: Option<Vec<Listed>>,
}

/// Placements looked at.
#[derive(Debug, Clone, Copy, Default)]
struct Tally {
    /// Those whose fingers keep their gaps.
    scored: u64,
    /// Those closed among them.
    closed: u64,
}

impl Tally {
    fn add(&mut self, other: Self) {
        self.scored += other.scored;
        self.closed += other.closed;
    }
}

/// What stays the same for all families.
struct Setting<'a> {
    scene: &'a Scene,
    goal: Goal,
    gaps: Gaps<'a>,
    /// One for each place.
    rails: Vec<Rail<'a>>,
    fingers: usize,
    /// Fingers that stay: so many rails at the beginning are single positions, and every family has them.
    kept: usize,
}

impl<'a> Setting<'a> {
    fn new(scene: &'a Scene, key: Key, gap: f64) -> Self {
        // Every place of a scene lies on one of its edges, so none is left out and the numbers stay the same.
        let rails = (0..scene.places().len()).filter_map(|stretch| Rail::new(scene, stretch)).collect();
        let (goal, gaps) = (Goal::new(scene, key, gap), Gaps::of(&scene.setup().hand));
        Self { scene, goal, gaps, rails, fingers: scene.setup().hand.fingers.get(), kept: scene.kept().len() }
    }

    /// Rails the next finger of a family may be on, once some have theirs, the last of them on rail `last`.
    fn following(&self, have: usize, last: usize) -> std::ops::Range<usize> {
        if have < self.kept { have..have + 1 } else { last..self.rails.len() }
    }

    /// The run of a family of parallel jaws.
    fn run(&self, family: &Family) -> Option<&'a JawRun> {
        let parallel = self.scene.setup().hand.closing == Closing::Parallel;
        parallel.then(|| &self.scene.jaw_runs()[family.stretches()[0] as usize])
    }
}

/// What is asked of a search.
#[derive(Debug, Clone, Copy)]
pub struct Ask<'a> {
    /// What grasps are sorted by.
    pub key: Key,
    /// Families in the list, at least one.
    pub want: usize,
    /// How much better than its row a family may be in the end, as a part of the best score.
    pub gap: f64,
    /// Boxes looked at, at most.
    pub budget: u64,
    /// Placements known already: a sampler's best, or the list at another setting. The search begins with those that are grasps
    /// here, so it never ends below the best of them.
    pub known: &'a [Vec<Spot>],
}

/// Finds the best placement of each of the best families, and proves it. `observe` is called from time to time, from the
/// calling thread. Runs on rayon's current pool; results do not depend on the number of threads.
///
/// A placement counts when a ranking would list it: closed, gaps kept, no floor undercut, every load held. Where a score
/// is near 0 no relative gap can be reached; there the gap is told as a part of a small score instead (1e-4 for qualities,
/// 1e-4 of the torque scale for the placement, a hundredth of the friction there is).
///
/// # Errors
/// [`Cancelled`] when told to stop.
pub fn prove(
    scene: &Scene,
    ask: &Ask<'_>,
    cancel: &Cancel,
    observe: &(dyn Fn(Proving) + Sync),
) -> Result<Proved, Cancelled> {
    prove_or(scene, ask, cancel, observe, 0, &|| Ok(Vec::new()))
}

/// [`prove`], with the best `snapshot_rows` so far in some of its [`Proving`], and with placements from elsewhere where the
/// budget ends before the gap is reached.
pub(super) fn prove_or(
    scene: &Scene,
    ask: &Ask<'_>,
    cancel: &Cancel,
    observe: &(dyn Fn(Proving) + Sync),
    snapshot_rows: usize,
    when_spent: &dyn Fn() -> Result<Vec<Vec<Spot>>, Cancelled>,
) -> Result<Proved, Cancelled> {
    let setting = Setting::new(scene, ask.key, ask.gap);
    let mut search = Search::new(&setting, ask.want.max(1), ask.budget, cancel, snapshot_rows);
    search.start(ask.known)?;
    search.first_looks(observe)?;
    search.settle(observe)?;
    search.spent = search.is_spent();
    search.polish(observe)?;
    if search.spent {
        search.know(&when_spent()?)?;
    }
    search.finish()
}
