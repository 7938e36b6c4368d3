//! Ranking: the best grasp of each family, proved, or single grasps of the sites.
//!
//! A ranking of families is a proof ([`best`]): it finds the best placement of each family anywhere on its stretches. Where
//! its budget ends before the gap is reached, the sampler looks as well, and the better of both is listed with the gap that
//! is left. Where it lists nothing, the sampler tells what becomes of the candidate sets: open, below a floor, a load not held.

use super::best::{self, Ask, Proved, Proving};
use super::order::Key;
use super::sample::{self, sample_with_snapshots};
use super::scene::{Grasp, Scene, Spot};
use crate::mechanics::Assessment;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

/// Gap of a ranking that nobody asked another of, as a part of the score.
pub const USUAL_GAP: f64 = 0.01;

/// Candidate sets of the budget that one box of a proof counts for: about as long a look, measured.
const SETS_A_BOX: u64 = 8;
/// The same with load cases: a few programs more.
const SETS_A_BOX_WITH_LOADS: u64 = 16;
/// The same by friction: the programs are solved again at every friction tried.
const SETS_A_BOX_BY_FRICTION_WITH_LOADS: u64 = 256;

/// Candidate sets of the budget that one box counts for.
fn sets_a_box(scene: &Scene, key: Key) -> u64 {
    match (scene.cases().is_empty(), key) {
        (true, _) => SETS_A_BOX,
        (false, Key::Friction) => SETS_A_BOX_BY_FRICTION_WITH_LOADS,
        (false, _) => SETS_A_BOX_WITH_LOADS,
    }
}

/// What a ranking lists.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Listing {
    /// The best grasp of each family (tuple of stretches).
    Families,
    /// Single grasps, however many of one family.
    Members,
}

/// A grasp in a ranking, assessed and confirmed.
#[derive(Debug, Clone, PartialEq)]
pub struct Listed {
    /// Where the fingers stand.
    pub grasp: Grasp,
    /// The stretches they stand on (indices into [`Scene::places`], ascending): the family.
    pub family: Vec<usize>,
    /// Every score.
    pub assessment: Assessment,
    /// No placement of its family scores better than this on the key the list is sorted by, in that key's unit; nothing
    /// where only sites were looked at.
    pub bound: Option<f64>,
}

/// The outcome of a ranking, or of as much of it as is done.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Ranking {
    /// How far the list is from the best there is; nothing where only sites were looked at.
    pub proof: Option<Proof>,
    /// Sites candidate sets were made of; 0 where none were needed.
    pub sites: usize,
    /// Candidate sets looked at: sets of sites, or the placements a proof scored.
    pub examined: u64,
    /// Those closed among them.
    pub closed: u64,
    /// Closed sets hidden because they fall below a floor.
    pub below_floors: u64,
    /// Closed sets that came in question for the list but do not hold every load within the limit.
    pub not_held: u64,
    /// Grasps whose two ways of scoring disagree; they are left out of the list.
    pub inconclusive: u64,
    /// False when the budget made it a sample, or the ranking is not done yet.
    pub complete: bool,
    /// Families with at least one closed grasp above the floors; of those in the list every load is held too. A proof does
    /// not count those that cannot come into the list.
    pub families: usize,
    /// The list, best first.
    pub grasps: Vec<Listed>,
}

/// How far the list of a ranking is from the best grasps anywhere on the outline. Scores and bounds are in the key's unit.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Proof {
    /// No placement scores better than this; nothing where no placement is a grasp at all.
    pub best_bound: Option<f64>,
    /// How much better than the first row any placement can be, as a part of its score; infinite where nothing is listed and
    /// something may be there.
    pub gap: f64,
    /// That gap is no wider than was asked for.
    pub proved: bool,
    /// How much better than its row any family of the list can be, as a part of the best score; see [`Proved::gap`]. Infinite
    /// while a family may be missing.
    pub list_gap: f64,
    /// That gap, too, is no wider than was asked for.
    pub list_proved: bool,
}

impl Proof {
    fn of(proved: &Proved, asked: f64) -> Self {
        let reached = proved.best_gap <= asked * (1.0 + 1e-6) + 1e-6;
        Self {
            best_bound: proved.best_bound,
            gap: proved.best_gap,
            proved: reached || proved.proved,
            list_gap: proved.gap,
            list_proved: proved.proved,
        }
    }
}

/// How far a ranking is.
#[derive(Debug, Clone)]
pub struct Progress {
    /// Candidate sets looked at.
    pub done: u64,
    /// Candidate sets in all; for a proof those of its budget, which it seldom needs.
    pub total: u64,
    /// How much better than the best so far any placement can be, as a part of its score; nothing while that is not known.
    pub gap: Option<f64>,
    /// The best so far, when a snapshot was due.
    pub snapshot: Option<Arc<Ranking>>,
}

/// Tells a running ranking to stop.
#[derive(Debug, Clone, Default)]
pub struct Cancel(Arc<AtomicBool>);

impl Cancel {
    /// Asks the ranking to stop; it does within a few thousand candidate sets.
    pub fn cancel(&self) {
        self.0.store(true, Ordering::Relaxed);
    }

    /// True once asked.
    pub fn is_cancelled(&self) -> bool {
        self.0.load(Ordering::Relaxed)
    }
}

/// A ranking was told to stop.
#[derive(Debug, Clone, Copy, PartialEq, Eq, thiserror::Error)]
#[error("stopped")]
pub struct Cancelled;

/// Candidate sets sampled before a proof: good placements to begin with, and among equals those with the best tie-breaks.
const FIRST_SETS: u64 = 100_000;

/// Families looked for, however few are listed: of those that are equal on the key the tie-breaks choose, and a short list is
/// the beginning of a longer one.
const LEAST_WANTED: usize = 64;

/// What is wanted of a ranking.
#[derive(Debug, Clone, Copy)]
pub struct Wanted<'a> {
    /// What grasps are sorted by.
    pub key: Key,
    /// The best of each family, or single grasps.
    pub listing: Listing,
    /// Rows, at most.
    pub most: usize,
    /// How much better than its row a family may be, as a part of the best score.
    pub gap: f64,
    /// Placements to begin with, such as the list at another friction: they shorten the proof. What is proved holds with any;
    /// which of several grasps within the gap is listed may depend on them.
    pub known: &'a [Vec<Spot>],
}

impl Wanted<'static> {
    /// So many of the best families by a key, within the usual gap.
    pub fn families(key: Key, most: usize) -> Self {
        Self { key, listing: Listing::Families, most, gap: USUAL_GAP, known: &[] }
    }
}

/// Ranks the grasps of a scene and lists the best. `observe` is called from time to time, from the calling thread. Runs on
/// rayon's current pool; results do not depend on the number of threads.
///
/// # Errors
/// [`Cancelled`] when told to stop.
pub fn rank(
    scene: &Scene,
    wanted: &Wanted<'_>,
    cancel: &Cancel,
    observe: &(dyn Fn(Progress) + Sync),
) -> Result<Ranking, Cancelled> {
    rank_with_snapshots(scene, wanted, cancel, observe, 0)
}

/// [`rank`], with the best `snapshot_rows` so far in some of its [`Progress`].
pub(super) fn rank_with_snapshots(
    scene: &Scene,
    wanted: &Wanted<'_>,
    cancel: &Cancel,
    observe: &(dyn Fn(Progress) + Sync),
    snapshot_rows: usize,
) -> Result<Ranking, Cancelled> {
    let &Wanted { key, listing, most, gap, known } = wanted;
    let sets = scene.setup().search.budget;
    let sampled =
        |most, sets, observe, rows| sample_with_snapshots(scene, key, listing, most, sets, cancel, observe, rows);
    if listing == Listing::Members {
        return sampled(most, sets, observe, snapshot_rows);
    }
    let spots = |ranking: Ranking| ranking.grasps.into_iter().map(|listed| listed.grasp.spots);
    let mut begin = known.to_vec();
    let first_sets = sets.min(FIRST_SETS);
    let (first, snapshot) =
        sample::leads(scene, key, most.max(LEAST_WANTED), first_sets, cancel, snapshot_rows.min(most))?;
    begin.extend(first);
    if snapshot.is_some() {
        observe(Progress { done: first_sets, total: sets, gap: None, snapshot: snapshot.map(Arc::new) });
    }
    let sets_a_box = sets_a_box(scene, key);
    let budget = (sets / sets_a_box).max(1);
    let ask = Ask { key, want: most.max(LEAST_WANTED), gap, budget, known: &begin };
    let tell = |proving: Proving| {
        let Proving { boxes, budget, gap, .. } = proving;
        let snapshot =
            proving.grasps.map(|grasps| Arc::new(Ranking { families: grasps.len(), grasps, ..Ranking::default() }));
        observe(Progress { done: boxes * sets_a_box, total: budget * sets_a_box, gap, snapshot });
    };
    let more = || Ok(spots(sampled(most, sets, observe, 0)?).collect());
    let proved = best::prove_or(scene, &ask, cancel, &tell, snapshot_rows.min(most), &more)?;
    let proof = Proof::of(&proved, gap);
    if proved.grasps.is_empty() {
        let told = sampled(1, sets, observe, 0)?;
        let complete = told.complete || proved.complete;
        return Ok(Ranking { proof: Some(proof), complete, grasps: Vec::new(), ..told });
    }
    let families = proved.grasps.len();
    let rows = proved.grasps.into_iter().take(most).map(|row| Listed { bound: Some(row.bound), ..row.listed });
    let grasps: Vec<Listed> = rows.collect();
    Ok(Ranking {
        proof: Some(proof),
        examined: proved.scored,
        closed: proved.closed,
        inconclusive: proved.inconclusive,
        complete: proved.complete,
        families,
        grasps,
        ..Ranking::default()
    })
}
