//! What a ranking has counted and kept so far.

use super::order::{Candidate, Top};
use std::collections::HashSet;

/// Counts and the best of what was screened.
#[derive(Debug, Clone)]
pub(super) struct Tally {
    pub examined: u64,
    pub closed: u64,
    /// Those among them that fall below a floor.
    pub below_floors: u64,
    /// Closed sets that came in question for the list and were turned away because a load is not held.
    pub not_held: u64,
    /// Families with a closed grasp above the floors, other than those in `spread`; loads are not asked.
    pub families: usize,
    /// Families with such a grasp whose sets are spread over several parcels, by their hash: a million families
    /// fit in a few megabytes, and two of them collide once in ten million rankings.
    pub spread: HashSet<u64>,
    pub top: Top,
}

impl Tally {
    pub(super) fn new(most: usize) -> Self {
        Self {
            examined: 0,
            closed: 0,
            below_floors: 0,
            not_held: 0,
            families: 0,
            spread: HashSet::new(),
            top: Top::new(most),
        }
    }

    /// An empty tally for a thread to fill, that need not keep what this one would not.
    pub(super) fn fresh(&self) -> Self {
        Self { top: self.top.above(), ..Self::new(0) }
    }

    pub(super) fn merge(mut self, mut other: Self) -> Self {
        if self.spread.len() < other.spread.len() {
            std::mem::swap(&mut self.spread, &mut other.spread);
        }
        self.spread.extend(other.spread);
        Self {
            examined: self.examined + other.examined,
            closed: self.closed + other.closed,
            below_floors: self.below_floors + other.below_floors,
            not_held: self.not_held + other.not_held,
            families: self.families + other.families,
            spread: self.spread,
            top: self.top.merge(other.top),
        }
    }

    /// Families with a closed grasp above the floors.
    pub(super) fn families(&self) -> usize {
        self.families + self.spread.len()
    }

    /// The list, best first.
    pub(super) fn sorted(&self) -> Vec<Candidate> {
        self.top.candidates().copied().collect()
    }
}
