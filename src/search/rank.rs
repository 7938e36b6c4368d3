//! Ranking: every candidate set scored by the kernel, the best of each family listed and confirmed.

use super::order::{Candidate, Key};
use super::plan::Plan;
use super::scene::{Grasp, Scene};
use super::screen::Screen;
use super::sites::Sites;
use super::tally::Tally;
use crate::mechanics::{Assessment, Verdict};
use rayon::prelude::*;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

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
    /// The stretches they stand on (indices into [`Scene::stretches`], ascending): the family.
    pub family: Vec<usize>,
    /// Every score.
    pub assessment: Assessment,
}

/// The outcome of a ranking, or of as much of it as is done.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Ranking {
    /// Sites candidate sets were made of.
    pub sites: usize,
    /// Candidate sets looked at.
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
    /// Families with at least one closed grasp above the floors; of those in the list every load is held too.
    pub families: usize,
    /// The list, best first.
    pub grasps: Vec<Listed>,
}

/// How far a ranking is.
#[derive(Debug, Clone)]
pub struct Progress {
    /// Candidate sets looked at.
    pub done: u64,
    /// Candidate sets in all.
    pub total: u64,
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

/// Ranks the candidate sets of a scene and lists the best `most`.
///
/// All sets are looked at while they number at most the setup's budget; above it a stratified sample drawn from the
/// setup's seed. `observe` is called from time to time, from the calling thread. Runs on rayon's current pool; results
/// do not depend on the number of threads.
///
/// # Errors
/// [`Cancelled`] when told to stop.
pub fn rank(
    scene: &Scene,
    key: Key,
    listing: Listing,
    most: usize,
    cancel: &Cancel,
    observe: &(dyn Fn(Progress) + Sync),
) -> Result<Ranking, Cancelled> {
    rank_with_snapshots(scene, key, listing, most, cancel, observe, 0)
}

/// [`rank`], with the best `snapshot_rows` so far in some of its [`Progress`].
pub(super) fn rank_with_snapshots(
    scene: &Scene,
    key: Key,
    listing: Listing,
    most: usize,
    cancel: &Cancel,
    observe: &(dyn Fn(Progress) + Sync),
    snapshot_rows: usize,
) -> Result<Ranking, Cancelled> {
    let sites = Sites::of(scene);
    let screen = Screen::new(scene, &sites, key, listing, cancel);
    let plan = Plan::of(&screen)?;
    // The list is filled a little beyond `most`, so that grasps found inconclusive leave no hole.
    let mut tally = Tally::new(most + most / 8 + 8);
    for (number, batch) in plan.batches().into_iter().enumerate() {
        tally = plan.run(batch, &screen, tally)?;
        // Early snapshots change the list most; later ones would cost more than they tell.
        let due = snapshot_rows > 0 && (number + 1).is_power_of_two();
        let snapshot = due.then(|| Arc::new(listed(&screen, &tally, snapshot_rows.min(most), false)));
        observe(Progress { done: tally.examined.min(plan.total()), total: plan.total(), snapshot });
        if cancel.is_cancelled() {
            return Err(Cancelled);
        }
    }
    Ok(listed(&screen, &tally, most, plan.is_complete()))
}

/// Assesses and confirms the first rows.
fn listed(screen: &Screen, tally: &Tally, most: usize, complete: bool) -> Ranking {
    let candidates = tally.sorted();
    let fingers = screen.scene.setup().hand.fingers.get();
    let read = |candidate: &Candidate| {
        let sites = &candidate.sites[..fingers];
        let spots: Vec<_> = sites.iter().map(|&site| screen.sites.spot(screen.scene, site)).collect();
        let grasp = screen.scene.grasp(&spots).ok()?;
        let (assessment, doubts) = screen.scene.assess_for_list(&grasp);
        let family = sites.iter().map(|&site| screen.sites.get(site).stretch as usize).collect();
        (doubts.is_empty() && assessment.verdict == Verdict::Closed).then_some(Listed { grasp, family, assessment })
    };
    let mut ranking = Ranking {
        sites: screen.sites.len(),
        examined: tally.examined,
        closed: tally.closed,
        below_floors: tally.below_floors,
        not_held: tally.not_held,
        inconclusive: 0,
        complete,
        families: tally.families(),
        grasps: Vec::new(),
    };
    let mut rest = &candidates[..];
    while ranking.grasps.len() < most && !rest.is_empty() {
        let (now, later) = rest.split_at(rest.len().min(most - ranking.grasps.len()));
        let rows: Vec<Option<Listed>> = now.par_iter().map(read).collect();
        ranking.inconclusive += rows.iter().filter(|row| row.is_none()).count() as u64;
        ranking.grasps.extend(rows.into_iter().flatten());
        rest = later;
    }
    ranking
}
