//! Families: which stretches a grasp touches, how many candidate sets each family has, and the n-th of them.
//!
//! A family is an ascending tuple of stretches, one for each finger; a stretch may appear more than once. Its candidate
//! sets are the choices of one site for each finger, all different. They are numbered, so that a part of them can be
//! drawn evenly without writing any down.

use super::order::SiteSet;
use super::sites::Sites;
use crate::hand::FingerCount;

/// An ascending tuple of stretches.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub(super) struct Family {
    stretches: [u32; FingerCount::MOST],
    fingers: u8,
}

/// `n` choose `k`, saturating.
pub(super) fn choose(n: u128, k: u128) -> u128 {
    if k > n {
        return 0;
    }
    let mut value: u128 = 1;
    for i in 0..k {
        // value * (n - i) is divisible by i + 1: it counts i + 1 subsets times i + 1.
        let Some(product) = value.checked_mul(n - i) else { return u128::MAX };
        value = product / (i + 1);
    }
    value
}

impl Family {
    pub(super) fn new(stretches: &[u32]) -> Self {
        let mut family = Self { stretches: [0; FingerCount::MOST], fingers: stretches.len() as u8 };
        family.stretches[..stretches.len()].copy_from_slice(stretches);
        family
    }

    pub(super) fn stretches(&self) -> &[u32] {
        &self.stretches[..usize::from(self.fingers)]
    }

    /// What tells this family from others of as many fingers.
    pub(super) fn group(&self) -> SiteSet {
        self.stretches
    }

    /// Runs of equal stretches: stretch and how many fingers stand on it.
    fn runs(&self) -> impl Iterator<Item = (usize, usize)> {
        self.stretches().chunk_by(|a, b| a == b).map(|run| (run[0] as usize, run.len()))
    }

    /// Number of candidate sets, gaps between fingers not regarded.
    pub(super) fn count(&self, sites: &Sites) -> u128 {
        self.runs().map(|(stretch, k)| choose(sites.on(stretch).len() as u128, k as u128)).fold(1, u128::saturating_mul)
    }

    /// The candidate set of a number below [`Family::count`].
    pub(super) fn nth(&self, sites: &Sites, mut number: u128) -> SiteSet {
        let mut set = SiteSet::default();
        let mut at = 0;
        for (stretch, k) in self.runs() {
            let range = sites.on(stretch);
            let count = choose(range.len() as u128, k as u128);
            let mut rest = number % count;
            number /= count;
            // Unrank a k-subset: the first element is the largest one whose smaller-first subsets do not reach `rest`.
            let mut from = 0;
            for chosen in 0..k {
                let left = (k - chosen - 1) as u128;
                let n = range.len();
                if left == 0 {
                    from += rest as usize;
                } else {
                    // Sets whose first element lies below `at`.
                    let whole = choose((n - from) as u128, left + 1);
                    let below = |at: usize| whole - choose((n - at) as u128, left + 1);
                    let (mut low, mut high) = (from, n);
                    while high - low > 1 {
                        let middle = low + (high - low) / 2;
                        if below(middle) <= rest { low = middle } else { high = middle }
                    }
                    rest -= below(low);
                    from = low;
                }
                set[at] = (range.start + from) as u32;
                at += 1;
                from += 1;
            }
        }
        set
    }
}

/// Calls `visit` with every family that starts with the two given stretches, has every finger that is kept and at least one
/// candidate set. Stops when `visit` returns false.
pub(super) fn beginning_with(
    first: [u32; 2],
    fingers: usize,
    sites: &Sites,
    visit: &mut dyn FnMut(&Family) -> bool,
) -> bool {
    let mut stretches = [0; FingerCount::MOST];
    stretches[..2].copy_from_slice(&first);
    let has_kept = |(finger, on): (usize, &u32)| finger >= sites.kept() || *on == finger as u32;
    if !first.iter().enumerate().all(has_kept) {
        return true;
    }
    extend(&mut stretches, 2, fingers, sites, visit)
}

fn extend(
    stretches: &mut SiteSet,
    have: usize,
    fingers: usize,
    sites: &Sites,
    visit: &mut dyn FnMut(&Family) -> bool,
) -> bool {
    if have == fingers {
        let family = Family::new(&stretches[..fingers]);
        return family.count(sites) == 0 || visit(&family);
    }
    // Fingers that are kept come first, each on a place of its own.
    let next = if have < sites.kept() {
        have as u32..have as u32 + 1
    } else {
        stretches[have - 1]..sites.group_count() as u32
    };
    for next in next {
        stretches[have] = next;
        if !extend(stretches, have + 1, fingers, sites, visit) {
            return false;
        }
    }
    true
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::part::{Part, PartDescription};
    use crate::search::{Scene, Setup};
    use std::collections::BTreeSet;
    use std::sync::Arc;

    /// Pascal's rule and known values of the binomial coefficient.
    #[test]
    fn choose_counts_subsets() {
        assert_eq!(choose(200, 3), 1_313_400);
        assert_eq!(choose(4, 0), 1);
        assert_eq!(choose(2, 3), 0);
        assert_eq!(choose(60, 30), choose(59, 29) + choose(59, 30));
        assert_eq!(choose(u128::MAX, 2), u128::MAX);
    }

    #[test]
    fn every_number_gives_another_set_of_its_family() {
        let square = PartDescription::bare("square", vec![vec![[0.0, 0.0], [4.0, 0.0], [4.0, 4.0], [0.0, 4.0]]]);
        let mut setup = Setup::default();
        setup.search.spacing_mm = Some(1.0);
        let scene = Scene::new(Arc::new(Part::new(square).unwrap()), setup).unwrap();
        let sites = Sites::of(&scene);
        assert_eq!(sites.len(), 20);
        let mut total = 0;
        for first in 0..4 {
            for second in first..4 {
                beginning_with([first, second], 3, &sites, &mut |family| {
                    let count = family.count(&sites);
                    let sets: BTreeSet<_> = (0..count).map(|n| family.nth(&sites, n)).collect();
                    assert_eq!(sets.len() as u128, count);
                    for set in sets {
                        assert!(set[0] < set[1] && set[1] < set[2]);
                        let on: Vec<_> = set[..3].iter().map(|&s| sites.get(s).stretch).collect();
                        assert_eq!(on, family.stretches());
                    }
                    total += count;
                    true
                });
            }
        }
        assert_eq!(total, choose(20, 3));
    }
}
