//! The order of grasps: a key, then fixed tie-breaks; total, and independent of threads.
//!
//! Scores are compared in whole quanta well above rounding, so that grasps that are equal in truth (along a plateau, or
//! after the part was turned) are equal here, and the later tie-breaks decide: less friction needed, more placement
//! tolerance, more room on the stretch (the middle of a plateau), then the site numbers.

use super::setup::Setup;
use crate::hand::FingerCount;
use std::cmp::Ordering;
use std::collections::{BTreeMap, HashMap};

/// What grasps are sorted by.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Key {
    /// Quality with a limit on the total normal force; largest first.
    Quality,
    /// Quality with a limit on each finger; largest first.
    QualityPerFinger,
    /// Friction needed; smallest first.
    Friction,
    /// Placement tolerance; largest first.
    Placement,
    /// Squeeze needed for every load case; smallest first. Needs load cases.
    Squeeze,
    /// Load margin; largest first. Needs load cases and a force limit.
    LoadMargin,
}

impl Key {
    /// All keys, in the order they are offered.
    pub const ALL: [Self; 6] =
        [Self::Quality, Self::QualityPerFinger, Self::Friction, Self::Placement, Self::Squeeze, Self::LoadMargin];

    /// The word used on the command line and in files.
    pub fn word(self) -> &'static str {
        match self {
            Self::Quality => "quality",
            Self::QualityPerFinger => "quality_per_finger",
            Self::Friction => "friction",
            Self::Placement => "placement",
            Self::Squeeze => "squeeze",
            Self::LoadMargin => "load_margin",
        }
    }

    /// The squeeze tells it: the needed one, or its share of the limit.
    pub(super) fn is_by_squeeze(self) -> bool {
        matches!(self, Self::Squeeze | Self::LoadMargin)
    }

    /// Whether grasps can be sorted by it under a setup: the squeeze needs load cases, the load margin a force limit too.
    pub fn is_told_by(self, setup: &Setup) -> bool {
        match self {
            Self::Quality | Self::QualityPerFinger | Self::Friction | Self::Placement => true,
            Self::Squeeze => !setup.loads.is_empty(),
            Self::LoadMargin => !setup.loads.is_empty() && setup.hand.force_limit_n.is_some(),
        }
    }

    /// True where a larger score is the better one.
    pub fn more_is_better(self) -> bool {
        !matches!(self, Self::Friction | Self::Squeeze)
    }

    /// The key of a word.
    pub fn from_word(word: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|key| key.word() == word)
    }
}

/// Quantum of qualities and of lengths over the torque scale.
const SCORE_QUANTUM: f64 = 1e-10;
/// Quantum of friction needed, as a factor on the setup's friction. Wider: it comes from a root finder.
pub(super) const FRICTION_QUANTUM: f64 = 1e-8;

/// A score in quanta.
pub(super) fn quanta(score: f64) -> i64 {
    (score / SCORE_QUANTUM).round() as i64
}

/// The least score that is rounded to so many quanta.
pub(super) fn below(quanta: i64) -> f64 {
    (quanta as f64 - 0.5) * SCORE_QUANTUM
}

/// Quantum of a squeeze, as a part of the largest load: it comes from a linear program.
const SQUEEZE_QUANTUM: f64 = 1e-8;

/// Minus a squeeze in quanta, so that larger is better; `size_n` is the largest load, or the limit for the load margin.
pub(super) fn squeeze_quanta(squeeze_n: f64, size_n: f64) -> i64 {
    -((squeeze_n / size_n / SQUEEZE_QUANTUM).round() as i64)
}

/// The largest squeeze that is rounded to so many quanta, N.
pub(super) fn squeeze_above(quanta: i64, size_n: f64) -> f64 {
    (0.5 - quanta as f64) * SQUEEZE_QUANTUM * size_n
}

/// A friction factor in quanta.
pub(super) fn friction_quanta(factor: f64) -> i64 {
    (factor / FRICTION_QUANTUM).round() as i64
}

/// The sites of a candidate set, ascending.
pub(super) type SiteSet = [u32; FingerCount::MOST];

/// A closed candidate set with what decides its place.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Candidate {
    /// Quanta of the key, larger is better.
    pub key: i64,
    /// Quanta of friction needed.
    pub friction: i64,
    /// Quanta of placement tolerance over l.
    pub placement: i64,
    /// Quanta of room over l.
    pub room: i64,
    /// Sites; entries past the number of fingers are 0.
    pub sites: SiteSet,
}

impl Ord for Candidate {
    /// Less means better: sorting puts the best first.
    fn cmp(&self, other: &Self) -> Ordering {
        (other.key.cmp(&self.key))
            .then(self.friction.cmp(&other.friction))
            .then(other.placement.cmp(&self.placement))
            .then(other.room.cmp(&self.room))
            .then(self.sites.cmp(&other.sites))
    }
}

impl PartialOrd for Candidate {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

/// The best candidates so far, at most a fixed number, and at most one for each group.
///
/// A group is what a list shows once: a family, or a single candidate set. A newcomer behind the bar is turned away at
/// the cost of one comparison; only the few that pass pay for keeping the list in order.
#[derive(Debug, Clone)]
pub(super) struct Top {
    most: usize,
    /// In order, with each one's group.
    list: BTreeMap<Candidate, SiteSet>,
    groups: HashMap<SiteSet, Candidate>,
    /// Nothing behind this is wanted, however short the list.
    bar: Option<Candidate>,
}

impl Top {
    pub(super) fn new(most: usize) -> Self {
        Self { most, list: BTreeMap::new(), groups: HashMap::new(), bar: None }
    }

    /// An empty list that takes only what this one would still take.
    pub(super) fn above(&self) -> Self {
        Self { bar: self.worst().copied(), ..Self::new(self.most) }
    }

    /// The candidate a newcomer has to beat.
    pub(super) fn worst(&self) -> Option<&Candidate> {
        if self.list.len() < self.most { self.bar.as_ref() } else { self.list.last_key_value().map(|(worst, _)| worst) }
    }

    pub(super) fn offer(&mut self, candidate: Candidate, group: SiteSet) {
        if self.most == 0 || self.worst().is_some_and(|worst| candidate >= *worst) {
            return;
        }
        if let Some(same) = self.groups.insert(group, candidate) {
            if same <= candidate {
                self.groups.insert(group, same);
                return;
            }
            self.list.remove(&same);
        }
        self.list.insert(candidate, group);
        if self.list.len() > self.most
            && let Some((_, last)) = self.list.pop_last()
        {
            self.groups.remove(&last);
        }
    }

    pub(super) fn merge(mut self, other: Self) -> Self {
        for (candidate, group) in other.list {
            self.offer(candidate, group);
        }
        self
    }

    /// Best first.
    pub(super) fn candidates(&self) -> impl Iterator<Item = &Candidate> {
        self.list.keys()
    }
}
