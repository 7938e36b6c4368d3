//! Loops nested by containment: even depth is material, odd depth a hole.

use super::chain::Loop;
use super::measure::Measure;
use rstar::primitives::{GeomWithData, Rectangle};
use rstar::{AABB, RTree};

/// A part in a drawing: an outer loop and its holes, by number.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Region {
    /// The loop around it.
    pub(super) outer: usize,
    /// Loops of its holes.
    pub(super) holes: Vec<usize>,
}

/// Parts of a set of loops, the largest first. Loops are taken not to cross; whether they do is for the checks of a part
/// to say.
pub(super) fn regions(loops: &[Loop], measures: &[Measure], tell: &mut dyn FnMut(u64, u64)) -> Vec<Region> {
    let envelope = |number: usize| {
        let bounds = measures[number].bounds;
        Rectangle::from_corners([bounds.x0, bounds.y0], [bounds.x1, bounds.y1])
    };
    let tree = RTree::bulk_load((0..loops.len()).map(|i| GeomWithData::new(envelope(i), i)).collect());
    // For each loop those around it. One vertex decides, since loops do not cross.
    let around: Vec<Vec<usize>> = (0..loops.len())
        .map(|number| {
            if number % 256 == 0 {
                tell(number as u64, loops.len() as u64);
            }
            let point = loops[number].vertices[0];
            let at = AABB::from_point([point.x, point.y]);
            tree.locate_in_envelope_intersecting(at)
                .map(|candidate| candidate.data)
                .filter(|&outer| {
                    // What is around is larger; the rest is not worth the look.
                    outer != number
                        && measures[outer].area.abs() > measures[number].area.abs()
                        && loops[outer].contains(point)
                })
                .collect()
        })
        .collect();
    let mut regions: Vec<Region> = Vec::new();
    let mut region_of = vec![None; loops.len()];
    let larger_first = |a: usize, b: usize| {
        let (p, q) = (measures[a].bounds, measures[b].bounds);
        measures[b]
            .area
            .abs()
            .total_cmp(&measures[a].area.abs())
            .then(p.x0.total_cmp(&q.x0))
            .then(p.y0.total_cmp(&q.y0))
    };
    let mut outers: Vec<usize> = (0..loops.len()).filter(|&number| around[number].len().is_multiple_of(2)).collect();
    outers.sort_by(|&a, &b| larger_first(a, b));
    for outer in outers {
        region_of[outer] = Some(regions.len());
        regions.push(Region { outer, holes: Vec::new() });
    }
    for number in 0..loops.len() {
        if around[number].len().is_multiple_of(2) {
            continue;
        }
        // The one right around it is the deepest, which is the smallest.
        let parent = around[number].iter().copied().max_by_key(|&outer| around[outer].len());
        if let Some(region) = parent.and_then(|parent| region_of[parent]) {
            regions[region].holes.push(number);
        }
    }
    for region in &mut regions {
        region.holes.sort_by(|&a, &b| larger_first(a, b));
    }
    regions
}
