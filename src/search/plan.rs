//! The plan of a ranking: which candidate sets are looked at, in parcels that threads can share.
//!
//! The parcels depend on the part and the setup alone, never on the number of threads; each draws from a random stream
//! of its own. So any number of threads finds the same list.

use super::families::{self, Family, choose};
use super::order::SiteSet;
use super::rank::Cancelled;
use super::screen::Screen;
use super::tally::Tally;
use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::{Rng, SeedableRng};
use rayon::prelude::*;
use std::ops::Range;

/// Parts the work is cut into at least, each followed by a word to the observer. Threads wait for one another at the end
/// of each, so few are better; one is a second's work at most.
const BATCHES: u64 = 8;
/// Candidate sets in one batch, at most, about.
const BATCH: u64 = 2_000_000;
/// Candidate sets in one parcel, about: a small part of a batch, so that threads end it together.
const PARCEL: u64 = 4096;
/// Parcels in which single draws are handed out, at most.
const MOST_PARCELS: u64 = 10_000;
/// Families beyond this are not written down.
const MOST_FAMILIES: u64 = 1_000_000;

/// How the candidate sets of one ranking are gone through.
pub(super) struct Plan {
    parcels: Vec<Parcel>,
    total: u64,
    complete: bool,
}

struct Parcel {
    /// Candidate sets in it, about.
    sets: u64,
    work: Work,
}

enum Work {
    /// Every set of every family that begins with these two stretches, the first finger on these sites.
    Every { begin: [u32; 2], first: Range<usize> },
    /// Sets of one family, one from each of these strata of `of` equal ones.
    Strata { family: Family, strata: Range<u64>, of: u64 },
    /// Pairs of parallel jaws on one run: so many of them, evenly.
    Jaws { family: Family, take: usize },
    /// Sets drawn one by one from all, the first finger of each from one of these strata of `of` equal ones of all sites.
    Draws { strata: Range<u64>, of: u64 },
}

impl Plan {
    /// Every set where they number at most `budget`, else a sample of about so many.
    pub(super) fn of(screen: &Screen, budget: u64) -> Result<Self, Cancelled> {
        let fingers = screen.scene.setup().hand.fingers.get();
        if screen.sites.are_paired() {
            return Ok(jaws(screen, budget));
        }
        let kept = screen.sites.kept();
        let free = (fingers - kept) as u128;
        let sets = choose((screen.sites.len() - kept) as u128, free);
        if sets <= u128::from(budget) {
            return Ok(Self { parcels: everything(screen, fingers), total: sets as u64, complete: true });
        }
        let stretches = (screen.sites.group_count() - kept) as u128;
        let families = choose((stretches + free).saturating_sub(1), free);
        let parcels = if families <= u128::from(budget.min(MOST_FAMILIES)) {
            strata(screen, fingers, budget)?
        } else {
            let parcels = budget.div_ceil(PARCEL).min(MOST_PARCELS);
            // The budget is at most 1e10, so the product fits.
            let cut = |i: u64| i * budget / parcels;
            let parcel = |strata: Range<u64>| Parcel {
                sets: strata.end - strata.start,
                work: Work::Draws { strata, of: budget },
            };
            (0..parcels).map(|i| parcel(cut(i)..cut(i + 1))).collect()
        };
        let total = parcels.iter().map(|parcel| parcel.sets).sum();
        Ok(Self { parcels, total, complete: false })
    }

    /// Candidate sets that will be looked at, gaps between fingers not regarded.
    pub(super) fn total(&self) -> u64 {
        self.total
    }

    /// True when every candidate set is looked at.
    pub(super) fn is_complete(&self) -> bool {
        self.complete
    }

    /// Ranges of parcels of about equal work.
    pub(super) fn batches(&self) -> Vec<Range<usize>> {
        let most = (self.total / BATCHES).min(BATCH);
        let mut batches = Vec::new();
        let (mut from, mut sets) = (0, 0);
        for (index, parcel) in self.parcels.iter().enumerate() {
            sets += parcel.sets;
            if sets > most || index + 1 == self.parcels.len() {
                batches.push(from..index + 1);
                (from, sets) = (index + 1, 0);
            }
        }
        batches
    }

    /// Runs one batch on top of the tally so far.
    pub(super) fn run(&self, batch: Range<usize>, screen: &Screen, tally: Tally) -> Result<Tally, Cancelled> {
        let fresh = || Ok(tally.fresh());
        let one = |so_far: Result<Tally, Cancelled>, index: usize| {
            let mut so_far = so_far?;
            self.parcels[index].run(index as u64, screen, &mut so_far)?;
            Ok(so_far)
        };
        let part = batch.into_par_iter().fold(fresh, one).reduce(fresh, |a, b| Ok(a?.merge(b?)))?;
        Ok(tally.merge(part))
    }
}

impl Parcel {
    fn run(&self, index: u64, screen: &Screen, tally: &mut Tally) -> Result<(), Cancelled> {
        match &self.work {
            Work::Every { begin, first } => {
                let mut result = Ok(());
                let fingers = screen.scene.setup().hand.fingers.get();
                families::beginning_with(*begin, fingers, screen.sites, &mut |family| {
                    result = screen.every(family, first.clone(), tally);
                    result.is_ok()
                });
                result
            }
            Work::Strata { family, strata, of } => {
                let mut random = random(screen, index);
                screen.sample(family, strata.clone(), *of, &mut || unit(&mut random), tally)
            }
            Work::Jaws { family, take } => screen.jaws(family, *take, tally),
            Work::Draws { strata, of } => draw(strata.clone(), *of, &mut random(screen, index), screen, tally),
        }
    }
}

/// All placements of parallel jaws, run after run; above the budget a share of each run, evenly along it.
fn jaws(screen: &Screen, budget: u64) -> Plan {
    let sites = screen.sites;
    let runs = sites.group_count() / 2;
    let all = (sites.len() / 2) as u64;
    let complete = all <= budget;
    let parcel = |run: usize| {
        let here = sites.on(2 * run).len();
        let take = if complete { here } else { (here as u64 * budget / all).max(1) as usize };
        let family = Family::new(&[2 * run as u32, 2 * run as u32 + 1]);
        Parcel { sets: take as u64, work: Work::Jaws { family, take } }
    };
    let parcels: Vec<Parcel> = (0..runs).map(parcel).collect();
    Plan { total: parcels.iter().map(|parcel| parcel.sets).sum(), parcels, complete }
}

/// All sets with every finger that is kept, cut by the first two stretches and, where those alone are too much, by sites of the first finger.
fn everything(screen: &Screen, fingers: usize) -> Vec<Parcel> {
    let sites = screen.sites;
    let stretches = sites.group_count();
    let k = fingers as u128;
    // Sites on a stretch and those after it.
    let from: Vec<u128> = (0..=stretches).map(|s| (sites.len() - sites.on_or_end(s)) as u128).collect();
    let mut parcels = Vec::new();
    for a in 0..stretches {
        let on_a = sites.on(a);
        if on_a.is_empty() {
            continue;
        }
        let n = on_a.len() as u128;
        for b in a..stretches {
            let sets = if a == b {
                choose(from[a], k) - choose(from[a + 1], k) - n * choose(from[a + 1], k - 1)
            } else {
                n * (choose(from[b], k - 1) - choose(from[b + 1], k - 1))
            };
            let pieces = (sets as u64).div_ceil(PARCEL).clamp(1, n as u64) as usize;
            for piece in 0..pieces {
                let cut = |i: usize| on_a.start + i * on_a.len() / pieces;
                let work = Work::Every { begin: [a as u32, b as u32], first: cut(piece)..cut(piece + 1) };
                parcels.push(Parcel { sets: sets as u64 / pieces as u64, work });
            }
        }
    }
    parcels
}

/// A part of each family that may close: one set each, and the rest of the budget by size.
fn strata(screen: &Screen, fingers: usize, budget: u64) -> Result<Vec<Parcel>, Cancelled> {
    let stretches = screen.sites.group_count() as u32;
    let parts: Vec<Result<Vec<Family>, Cancelled>> = (0..stretches)
        .into_par_iter()
        .map(|a| {
            let mut found = Vec::new();
            for b in a..stretches {
                if screen.cancel.is_cancelled() {
                    return Err(Cancelled);
                }
                families::beginning_with([a, b], fingers, screen.sites, &mut |family| {
                    if screen.may_close(family) {
                        found.push(*family);
                    }
                    true
                });
            }
            Ok(found)
        })
        .collect();
    let mut all = Vec::new();
    for part in parts {
        all.extend(part?);
    }
    let sizes: Vec<u128> = all.iter().map(|family| family.count(screen.sites)).collect();
    let whole: f64 = sizes.iter().map(|&size| size as f64).sum();
    let spare = budget.saturating_sub(all.len() as u64) as f64;
    let mut parcels = Vec::new();
    for (family, size) in all.into_iter().zip(sizes) {
        let share = 1 + (spare * size as f64 / whole) as u64;
        let of = u64::try_from(size).map_or(share, |size| share.min(size));
        let pieces = of.div_ceil(PARCEL).min(MOST_PARCELS);
        for piece in 0..pieces {
            let strata = piece * of / pieces..(piece + 1) * of / pieces;
            parcels.push(Parcel { sets: strata.end - strata.start, work: Work::Strata { family, strata, of } });
        }
    }
    Ok(parcels)
}

/// Times a draw is repeated while fingers stand too near to one another.
pub(super) const TRIES: usize = 16;

/// Draws single sets, all sites alike; one finger of each goes evenly round the outline. A set drawn twice counts twice
/// and is listed once.
fn draw(
    strata: Range<u64>,
    of: u64,
    random: &mut ChaCha8Rng,
    screen: &Screen,
    tally: &mut Tally,
) -> Result<(), Cancelled> {
    let fingers = screen.scene.setup().hand.fingers.get();
    // Fingers that are kept come first, and so do their sites.
    let kept = screen.sites.kept();
    let sites = (screen.sites.len() - kept) as f64;
    for stratum in strata {
        let mut set = SiteSet::default();
        // Fingers that stand too near to one another are drawn again, a few times: the budget is for sets that can be.
        for _ in 0..TRIES {
            set = SiteSet::default();
            set[..kept].iter_mut().zip(0..).for_each(|(site, number)| *site = number);
            let even = (stratum as f64 + unit(random)) / of as f64 * sites;
            set[kept] = kept as u32 + even.min(sites - 1.0) as u32;
            let mut have = kept + 1;
            while have < fingers {
                let site = kept as u32 + (unit(random) * sites) as u32;
                if !set[..have].contains(&site) {
                    set[have] = site;
                    have += 1;
                }
            }
            if screen.keeps_gaps(&set[..fingers]) {
                break;
            }
        }
        set[..fingers].sort_unstable();
        let mut on = SiteSet::default();
        for (stretch, &site) in on.iter_mut().zip(&set[..fingers]) {
            *stretch = screen.sites.get(site).stretch;
        }
        screen.one(&Family::new(&on[..fingers]), set, tally)?;
    }
    if screen.cancel.is_cancelled() { Err(Cancelled) } else { Ok(()) }
}

fn random(screen: &Screen, stream: u64) -> ChaCha8Rng {
    let mut random = ChaCha8Rng::seed_from_u64(screen.scene.setup().search.seed);
    random.set_stream(stream);
    random
}

/// Uniform in [0, 1), 53 bits.
fn unit(random: &mut ChaCha8Rng) -> f64 {
    (random.next_u64() >> 11) as f64 / (1u64 << 53) as f64
}
