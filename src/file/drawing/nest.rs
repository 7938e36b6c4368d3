//! Loops nested by containment: even depth is material, odd depth a hole.

use super::chain::Loop;
use super::fault::{Fault, fault};
use super::measure::{Measure, edge_bounds};
use kurbo::{Point, Rect};
use rstar::primitives::{GeomWithData, Rectangle};
use rstar::{AABB, RTree};
use std::cell::{Cell, OnceCell};

/// Loops within loops.
const DEEPEST: usize = 256;
/// Edges looked at before it is given up.
const MOST_LOOKS: usize = 500_000_000;
/// Loops with more edges than this get a tree over them.
const FEW_EDGES: usize = 64;

/// A part in a drawing: an outer loop and its holes, by number.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Region {
    /// The loop around it.
    pub(super) outer: usize,
    /// Loops of its holes.
    pub(super) holes: Vec<usize>,
}

type Boxes = RTree<GeomWithData<Rectangle<[f64; 2]>, usize>>;

fn boxes(bounds: impl Iterator<Item = Rect>) -> Boxes {
    let one = |(i, b): (usize, Rect)| GeomWithData::new(Rectangle::from_corners([b.x0, b.y0], [b.x1, b.y1]), i);
    RTree::bulk_load(bounds.enumerate().map(one).collect())
}

/// Asks which points are inside a loop.
struct Inside<'a> {
    shape: &'a Loop,
    edges: OnceCell<Boxes>,
}

impl Inside<'_> {
    /// True when a point is inside; it is taken not to be on the loop. Counts the edges looked at.
    fn contains(&self, point: Point, looks: &Cell<usize>) -> bool {
        let n = self.shape.vertices.len();
        let mut inside = false;
        let mut look = |edge: usize| {
            looks.set(looks.get() + 1);
            inside ^= self.shape.flips(edge, point);
        };
        if n <= FEW_EDGES {
            (0..n).for_each(look);
        } else {
            let edges = self.edges.get_or_init(|| boxes((0..n).map(|edge| edge_bounds(self.shape.edge(edge)))));
            // Only what reaches the ray from the point to +x counts.
            let ray = AABB::from_corners([point.x, point.y], [f64::MAX, point.y]);
            edges.locate_in_envelope_intersecting(ray).for_each(|edge| look(edge.data));
        }
        inside
    }
}

/// Parts of a set of loops, the largest first. Loops are taken not to cross; whether they do is for the checks of a part
/// to say.
///
/// # Errors
/// One fault: loops too deep in one another, or too many whose boxes overlap.
pub(super) fn regions(
    loops: &[Loop],
    measures: &[Measure],
    tell: &mut dyn FnMut(u64, u64),
) -> Result<Vec<Region>, Fault> {
    let tree = boxes(measures.iter().map(|measure| measure.bounds));
    let insides: Vec<Inside<'_>> = loops.iter().map(|shape| Inside { shape, edges: OnceCell::new() }).collect();
    let looks = Cell::new(0);
    // For each loop those around it. One vertex decides, since loops do not cross.
    let mut around: Vec<Vec<usize>> = Vec::with_capacity(loops.len());
    for (number, shape) in loops.iter().enumerate() {
        if number.is_multiple_of(256) {
            tell(number as u64, loops.len() as u64);
        }
        let point = shape.vertices[0];
        let mut outers = Vec::new();
        for candidate in tree.locate_in_envelope_intersecting(AABB::from_point([point.x, point.y])) {
            let outer = candidate.data;
            looks.set(looks.get() + 1);
            // What is around is larger; the rest is not worth the look.
            if measures[outer].area.abs() > measures[number].area.abs() && insides[outer].contains(point, &looks) {
                outers.push(outer);
            }
            if outers.len() > DEEPEST {
                return Err(fault(format!(
                    "loops lie in one another more than {DEEPEST} deep; leave layers out with --layer"
                )));
            }
            if looks.get() > MOST_LOOKS {
                return Err(fault(
                    "its loops are too many and too close to be told apart; leave layers out with --layer",
                ));
            }
        }
        around.push(outers);
    }
    Ok(gathered(measures, &around))
}

/// Loops at even depth with the holes right inside them.
fn gathered(measures: &[Measure], around: &[Vec<usize>]) -> Vec<Region> {
    let mut regions: Vec<Region> = Vec::new();
    let mut region_of = vec![None; around.len()];
    let larger_first = |a: usize, b: usize| {
        let (p, q) = (measures[a].bounds, measures[b].bounds);
        measures[b]
            .area
            .abs()
            .total_cmp(&measures[a].area.abs())
            .then(p.x0.total_cmp(&q.x0))
            .then(p.y0.total_cmp(&q.y0))
    };
    let is_outer = |number: &usize| around[*number].len().is_multiple_of(2);
    let mut outers: Vec<usize> = (0..around.len()).filter(is_outer).collect();
    outers.sort_by(|&a, &b| larger_first(a, b));
    for outer in outers {
        region_of[outer] = Some(regions.len());
        regions.push(Region { outer, holes: Vec::new() });
    }
    for number in (0..around.len()).filter(|number| !is_outer(number)) {
        // The one right around it is the deepest.
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
