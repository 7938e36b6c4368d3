//! Ranking: every candidate set scored by the kernel, the best of each family listed and confirmed.

use super::order::Key;
use super::scene::{Grasp, Scene};
use crate::mechanics::Assessment;
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
    /// Grasps whose two ways of scoring disagree; they are left out of the list.
    pub inconclusive: u64,
    /// False when the budget made it a sample, or the ranking is not done yet.
    pub complete: bool,
    /// Families with at least one closed grasp above the floors.
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
/// `observe` is called from time to time, from any thread. Results do not depend on the number of threads.
///
/// # Errors
/// [`Cancelled`] when told to stop.
pub fn rank(
    _scene: &Scene,
    _key: Key,
    _listing: Listing,
    _most: usize,
    _cancel: &Cancel,
    _observe: &(dyn Fn(Progress) + Sync),
) -> Result<Ranking, Cancelled> {
    Ok(Ranking::default())
}
