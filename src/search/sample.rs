//! Sampling: the candidate sets of the sites scored by the kernel, the best listed and confirmed.

use super::order::{Candidate, Key};
use super::plan::Plan;
use super::rank::{Cancel, Cancelled, Listed, Listing, Progress, Ranking};
use super::scene::{Scene, Spot};
use super::screen::Screen;
use super::sites::Sites;
use super::tally::Tally;
use crate::mechanics::Verdict;
use rayon::prelude::*;
use std::sync::Arc;

/// Ranks the candidate sets of a scene's sites and lists the best `most`.
///
/// All sets are looked at while they number at most the setup's budget; above it a stratified sample drawn from the
/// setup's seed. `observe` is called from time to time, from the calling thread. Runs on rayon's current pool; results
/// do not depend on the number of threads.
///
/// # Errors
/// [`Cancelled`] when told to stop.
pub fn sample(
    scene: &Scene,
    key: Key,
    listing: Listing,
    most: usize,
    cancel: &Cancel,
    observe: &(dyn Fn(Progress) + Sync),
) -> Result<Ranking, Cancelled> {
    sample_with_snapshots(scene, key, listing, most, scene.setup().search.budget, cancel, observe, 0)
}

/// [`sample`] of at most `budget` sets, with the best `snapshot_rows` so far in some of its [`Progress`].
#[expect(clippy::too_many_arguments, reason = "what is asked for, how, and who listens")]
pub(super) fn sample_with_snapshots(
    scene: &Scene,
    key: Key,
    listing: Listing,
    most: usize,
    budget: u64,
    cancel: &Cancel,
    observe: &(dyn Fn(Progress) + Sync),
    snapshot_rows: usize,
) -> Result<Ranking, Cancelled> {
    let sites = Sites::of(scene);
    let screen = Screen::new(scene, &sites, key, listing, cancel);
    let plan = Plan::of(&screen, budget)?;
    // The list is filled a little beyond `most`, so that grasps found inconclusive leave no hole.
    let mut tally = Tally::new(most + most / 8 + 8);
    for (number, batch) in plan.batches().into_iter().enumerate() {
        tally = plan.run(batch, &screen, tally)?;
        // Early snapshots change the list most; later ones would cost more than they tell.
        let due = snapshot_rows > 0 && (number + 1).is_power_of_two();
        let snapshot = due.then(|| Arc::new(listed(&screen, &tally, snapshot_rows.min(most), false)));
        observe(Progress { done: tally.examined.min(plan.total()), total: plan.total(), gap: None, snapshot });
        if cancel.is_cancelled() {
            return Err(Cancelled);
        }
    }
    Ok(listed(&screen, &tally, most, plan.is_complete()))
}

/// The places of the best of a sample of families, unconfirmed: good to begin with. With `snapshot_rows`, the best so many
/// confirmed too.
pub(super) fn leads(
    scene: &Scene,
    key: Key,
    most: usize,
    budget: u64,
    cancel: &Cancel,
    snapshot_rows: usize,
) -> Result<(Vec<Vec<Spot>>, Option<Ranking>), Cancelled> {
    let sites = Sites::of(scene);
    let screen = Screen::new(scene, &sites, key, Listing::Families, cancel);
    let plan = Plan::of(&screen, budget)?;
    let batches = plan.batches().into_iter();
    let tally = { batches }.try_fold(Tally::new(most), |tally, batch| plan.run(batch, &screen, tally))?;
    let fingers = scene.setup().hand.fingers.get();
    let spots =
        |candidate: &Candidate| candidate.sites[..fingers].iter().map(|&site| sites.spot(scene, site)).collect();
    let all = tally.sorted().iter().map(spots).collect();
    let snapshot = (snapshot_rows > 0).then(|| listed(&screen, &tally, snapshot_rows, false));
    Ok((all, snapshot))
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
        (doubts.is_empty() && assessment.verdict == Verdict::Closed).then_some(Listed {
            grasp,
            family,
            assessment,
            bound: None,
        })
    };
    let mut ranking = Ranking {
        proof: None,
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
