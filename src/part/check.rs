//! The rules of an outline. Crossing and touching are decided by exact predicates (Shewchuk 1997, crate `robust`).

use super::edge::{Edge, EdgeId};
use super::fault::{PartFault, PartFaults, Touch};
use super::mass;
use super::sweep;
use nalgebra::Point2;
use robust::{Coord, orient2d};
use rstar::primitives::{GeomWithData, Rectangle};
use rstar::{AABB, RTree};
use std::cmp::Ordering;
use std::collections::BTreeMap;

/// Coordinates farther from the origin than this are refused: beyond it the predicates could overflow and a
/// position has fewer than seven digits below a millimetre.
pub(super) const FARTHEST_MM: f64 = 1e9;
/// Smallest part, mm across (a nanometre).
const SMALLEST_MM: f64 = 1e-6;
/// Two vertices closer than this fraction of the part are the same vertex written twice.
const SAME_VERTEX: f64 = 1e-13;
/// A ring whose area is below this fraction of its bounding square encloses nothing.
const LEAST_AREA: f64 = 1e-12;
/// Vertices the checks take: a drawing with more is a scan, not a part.
const MOST_VERTICES: usize = 250_000;
/// Faults listed before giving up.
const MOST_FAULTS: usize = 20;

pub(super) type Ring = Vec<[f64; 2]>;

/// Collects faults up to a limit.
#[derive(Default)]
struct Faults(Vec<PartFault>);

impl Faults {
    /// Notes a fault; false when the list is full.
    fn note(&mut self, fault: PartFault) -> bool {
        if self.0.len() < MOST_FAULTS {
            self.0.push(fault);
            return true;
        }
        if self.0.len() == MOST_FAULTS {
            self.0.push(PartFault::AndMore);
        }
        false
    }

    fn settle(self) -> Result<(), PartFaults> {
        if self.0.is_empty() { Ok(()) } else { Err(PartFaults(self.0)) }
    }
}

/// Checks everything but areas and returns the rings without their repeated closing vertices.
pub(super) fn cleaned(rings: &[Ring], bulges: &BTreeMap<EdgeId, f64>, unit_mm: f64) -> Result<Vec<Ring>, PartFaults> {
    let rings = numbers(rings, bulges, unit_mm)?;
    let mut faults = Faults::default();
    vertices(&rings, bulges, &mut faults);
    // A repeated vertex makes its neighbours touch; crossings are looked for once each ring is sound by itself.
    faults.settle()?;
    let traced = Traced::of(&rings, bulges);
    let mut faults = Faults::default();
    meetings(&traced, &mut faults);
    faults.settle()?;
    let mut faults = Faults::default();
    nesting(&traced.rings, &mut faults);
    faults.settle()?;
    Ok(rings)
}

/// Rings with arcs drawn as chords, and the edge each chord belongs to.
struct Traced {
    rings: Vec<Ring>,
    /// Edge of each chord; empty where there is no arc, and chords are edges.
    owners: Vec<Vec<usize>>,
}

/// Largest rise of an arc above the chords that stand for it, as a part of the drawing's size.
const TRACE: f64 = 2e-6;
/// Most chords for one arc.
const MOST_CHORDS: usize = 1024;

impl Traced {
    fn of(rings: &[Ring], bulges: &BTreeMap<EdgeId, f64>) -> Self {
        if bulges.is_empty() {
            return Self { rings: rings.to_vec(), owners: vec![Vec::new(); rings.len()] };
        }
        let sagitta = TRACE * size(&rings[0]);
        let mut traced = Self { rings: Vec::new(), owners: Vec::new() };
        for (number, ring) in rings.iter().enumerate() {
            let (mut chords, mut owners) = (Vec::new(), Vec::new());
            for (i, &[x, y]) in ring.iter().enumerate() {
                chords.push([x, y]);
                owners.push(i);
                let id = EdgeId { ring: number, edge: i };
                let Some(&bulge) = bulges.get(&id) else { continue };
                let [x1, y1] = ring[(i + 1) % ring.len()];
                // Positions relative to the vertex, as for the part itself, so that far coordinates lose no digits.
                let arc = Edge::new(id, Point2::origin(), Point2::new(x1 - x, y1 - y), bulge, 1.0);
                let ends: Vec<f64> = arc.chords(sagitta, MOST_CHORDS).collect();
                for &along in &ends[..ends.len() - 1] {
                    let p = arc.point_at(along);
                    chords.push([x + p.x, y + p.y]);
                    owners.push(i);
                }
            }
            traced.rings.push(chords);
            traced.owners.push(owners);
        }
        traced
    }

    fn owner(&self, chord: EdgeId) -> EdgeId {
        match self.owners[chord.ring].get(chord.edge) {
            Some(&edge) => EdgeId { ring: chord.ring, edge },
            None => chord,
        }
    }
}

/// Vertices of a ring, a closing one that repeats the first not counted.
#[expect(clippy::float_cmp, reason = "a closing vertex repeats the first digit for digit")]
pub(super) fn vertex_count(ring: &Ring) -> usize {
    match ring.as_slice() {
        [first, .., last] if first == last => ring.len() - 1,
        _ => ring.len(),
    }
}

/// Finite numbers within range, enough of them, and the closing vertex dropped.
fn numbers(rings: &[Ring], bulges: &BTreeMap<EdgeId, f64>, unit_mm: f64) -> Result<Vec<Ring>, PartFaults> {
    let mut faults = Faults::default();
    let have = rings.iter().map(Vec::len).sum();
    if have > MOST_VERTICES {
        return Err(PartFaults(vec![PartFault::TooManyVertices { have, most: MOST_VERTICES }]));
    }
    if rings.is_empty() {
        return Err(PartFaults(vec![PartFault::NoRing]));
    }
    for (number, ring) in rings.iter().enumerate() {
        for (vertex, point) in ring.iter().enumerate() {
            if !point.iter().all(|x| x.is_finite()) {
                faults.note(PartFault::NotFinite { ring: number, vertex });
            } else if let Some(&value) = point.iter().find(|&&x| (x * unit_mm).abs() > FARTHEST_MM) {
                faults.note(PartFault::TooFar { ring: number, vertex, value });
            }
        }
    }
    let mut cleaned: Vec<Ring> = rings.to_vec();
    for (number, ring) in cleaned.iter_mut().enumerate() {
        ring.truncate(vertex_count(ring));
        // Two vertices make a ring when an arc leads from one to the other.
        let curved = bulges.range(EdgeId { ring: number, edge: 0 }..EdgeId { ring: number + 1, edge: 0 }).next();
        if ring.len() < if curved.is_some() { 2 } else { 3 } {
            faults.note(PartFault::TooFewVertices { ring: number, have: ring.len() });
        }
    }
    faults.settle()?;
    let size_mm = size(&cleaned[0]) * unit_mm;
    if size_mm < SMALLEST_MM {
        return Err(PartFaults(vec![PartFault::TooSmall { size_mm, least_mm: SMALLEST_MM }]));
    }
    Ok(cleaned)
}

/// Larger side of a ring's bounding box.
fn size(ring: &Ring) -> f64 {
    let side = |axis: usize| {
        let (low, high) = ring
            .iter()
            .fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), p| (low.min(p[axis]), high.max(p[axis])));
        high - low
    };
    side(0).max(side(1))
}

/// No repeated vertex and no spike.
fn vertices(rings: &[Ring], bulges: &BTreeMap<EdgeId, f64>, faults: &mut Faults) {
    let same = SAME_VERTEX * size(&rings[0]);
    for (number, ring) in rings.iter().enumerate() {
        let n = ring.len();
        let curved = |edge: usize| bulges.contains_key(&EdgeId { ring: number, edge });
        for vertex in 0..n {
            let (u, v, w) = (ring[(vertex + n - 1) % n], ring[vertex], ring[(vertex + 1) % n]);
            if (v[0] - u[0]).abs() <= same && (v[1] - u[1]).abs() <= same {
                faults.note(PartFault::RepeatedVertex { ring: number, vertex, before: (vertex + n - 1) % n });
            } else if !curved(vertex) && !curved((vertex + n - 1) % n) && turns_back(u, v, w) {
                faults.note(PartFault::Spike { ring: number, vertex });
            }
        }
    }
}

/// True when u, v, w lie on one line with u and w on the same side of v.
fn turns_back(u: [f64; 2], v: [f64; 2], w: [f64; 2]) -> bool {
    let same_side = |axis: usize| {
        let (a, b) = (u[axis].total_cmp(&v[axis]), w[axis].total_cmp(&v[axis]));
        a == b && a != Ordering::Equal
    };
    turn(u, v, w) == Ordering::Equal && (same_side(0) || same_side(1))
}

/// Exact side of w from the line u to v: Greater = left, Less = right, Equal = on it.
pub(super) fn turn(u: [f64; 2], v: [f64; 2], w: [f64; 2]) -> Ordering {
    let coord = |p: [f64; 2]| Coord { x: p[0], y: p[1] };
    orient2d(coord(u), coord(v), coord(w)).partial_cmp(&0.0).unwrap_or(Ordering::Equal)
}

/// How two segments meet, exactly.
pub(super) fn meet(a: [[f64; 2]; 2], b: [[f64; 2]; 2]) -> Option<Touch> {
    let (b0, b1) = (turn(a[0], a[1], b[0]), turn(a[0], a[1], b[1]));
    if b0 == b1 && b0 != Ordering::Equal {
        return None;
    }
    let (a0, a1) = (turn(b[0], b[1], a[0]), turn(b[0], b[1], a[1]));
    if a0 == a1 && a0 != Ordering::Equal {
        return None;
    }
    if [a0, a1, b0, b1].iter().all(|&side| side != Ordering::Equal) {
        return Some(Touch::Cross);
    }
    let on = |side: Ordering, s: [[f64; 2]; 2], p: [f64; 2]| {
        side == Ordering::Equal
            && (0..2).all(|axis| s[0][axis].min(s[1][axis]) <= p[axis] && p[axis] <= s[0][axis].max(s[1][axis]))
    };
    let touches = on(b0, a, b[0]) || on(b1, a, b[1]) || on(a0, b, a[0]) || on(a1, b, a[1]);
    touches.then_some(Touch::Touch)
}

/// Pairs of edges tested for the list of meetings once it is known that there is one.
const MOST_PAIRS: usize = 20_000_000;

/// No two edges meet but neighbours at their shared vertex.
fn meetings(traced: &Traced, faults: &mut Faults) {
    let rings = &traced.rings;
    let Some(first) = sweep::first_meeting(rings) else { return };
    let mut boxes = Vec::with_capacity(rings.iter().map(Vec::len).sum());
    for (ring, vertices) in rings.iter().enumerate() {
        for edge in 0..vertices.len() {
            let (p, q) = (vertices[edge], vertices[(edge + 1) % vertices.len()]);
            boxes.push(GeomWithData::new(Rectangle::from_corners(p, q), EdgeId { ring, edge }));
        }
    }
    let segment = |id: EdgeId| {
        let ring = &rings[id.ring];
        [ring[id.edge], ring[(id.edge + 1) % ring.len()]]
    };
    let mut found = BTreeMap::new();
    let mut note = |a: EdgeId, b: EdgeId, how: Touch| {
        let (a, b) = (traced.owner(a), traced.owner(b));
        found.entry((a.min(b), a.max(b))).or_insert(how);
        found.len()
    };
    note(first.0, first.1, meet(segment(first.0), segment(first.1)).unwrap_or(Touch::Touch));
    let tree = RTree::bulk_load(boxes);
    let mut tested = 0;
    'all: for (ring, vertices) in rings.iter().enumerate() {
        for edge in 0..vertices.len() {
            let a = EdgeId { ring, edge };
            let [p, q] = segment(a);
            for other in tree.locate_in_envelope_intersecting(AABB::from_corners(p, q)) {
                let b = other.data;
                if b <= a || sweep::neighbours(rings, a, b) || (a, b) == first {
                    continue;
                }
                tested += 1;
                let listed = meet(segment(a), segment(b)).map_or(0, |how| note(a, b, how));
                if tested > MOST_PAIRS || listed > 4 * MOST_FAULTS {
                    break 'all;
                }
            }
        }
    }
    for ((a, b), how) in found {
        if !faults.note(PartFault::Meet { a, b, how }) {
            break;
        }
    }
}

/// Every hole inside the outer ring and outside every other hole. The rings are known not to meet, so one vertex
/// decides for its ring.
fn nesting(rings: &[Ring], faults: &mut Faults) {
    let boxes: Vec<_> = rings.iter().map(|ring| AABB::from_points(ring.iter())).collect();
    let holes = RTree::bulk_load(
        (1..rings.len()).map(|ring| GeomWithData::new(Rectangle::from_aabb(boxes[ring]), ring)).collect(),
    );
    for (number, ring) in rings.iter().enumerate().skip(1) {
        if !inside(&rings[0], ring[0]) {
            faults.note(PartFault::HoleOutside { ring: number });
        }
        let around = holes.locate_all_at_point(ring[0]);
        let mut outers: Vec<usize> = around.map(|hole| hole.data).filter(|&outer| outer != number).collect();
        outers.sort_unstable();
        if let Some(outer) = outers.into_iter().find(|&outer| inside(&rings[outer], ring[0])) {
            faults.note(PartFault::HoleInHole { ring: number, outer });
        }
    }
}

/// Exact point in ring, by the parity of crossings with a ray to +x; the point is known not to be on the ring.
fn inside(ring: &Ring, p: [f64; 2]) -> bool {
    let mut inside = false;
    for (i, &a) in ring.iter().enumerate() {
        let b = ring[(i + 1) % ring.len()];
        let (low, high) = if a[1] <= b[1] { (a, b) } else { (b, a) };
        if low[1] <= p[1] && p[1] < high[1] && turn(low, high, p) == Ordering::Greater {
            inside = !inside;
        }
    }
    inside
}

/// Every ring encloses an area its numbers can carry.
pub(super) fn areas(rings: &[Vec<Edge>]) -> Result<(), PartFaults> {
    let mut faults = Faults::default();
    for (number, ring) in rings.iter().enumerate() {
        let area_mm2 = mass::signed_area(ring).abs();
        let first = ring[0].start();
        let span = ring.iter().fold(0.0_f64, |far, edge| far.max(edge.farthest_from(first)));
        if !(area_mm2 > LEAST_AREA * span * span) {
            faults.note(PartFault::NoArea { ring: number, area_mm2 });
        }
    }
    faults.settle()
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    /// Every pair tested: the definition, quadratic.
    fn any_pair_meets(rings: &[Ring]) -> bool {
        let edges: Vec<EdgeId> = rings
            .iter()
            .enumerate()
            .flat_map(|(ring, vertices)| (0..vertices.len()).map(move |edge| EdgeId { ring, edge }))
            .collect();
        let segment = |id: EdgeId| {
            let ring = &rings[id.ring];
            [ring[id.edge], ring[(id.edge + 1) % ring.len()]]
        };
        edges.iter().enumerate().any(|(i, &a)| {
            edges[i + 1..].iter().any(|&b| !sweep::neighbours(rings, a, b) && meet(segment(a), segment(b)).is_some())
        })
    }

    fn sound(rings: &[Ring]) -> bool {
        let mut faults = Faults::default();
        vertices(rings, &BTreeMap::new(), &mut faults);
        faults.0.is_empty()
    }

    proptest! {
        #![proptest_config(ProptestConfig::with_cases(2000))]
        /// On a coarse grid touching, collinear and shared points are the normal case.
        #[test]
        fn the_sweep_finds_a_meeting_iff_there_is_one(
            a in prop::collection::vec((0u8..7, 0u8..7), 3..9),
            b in prop::collection::vec((0u8..7, 0u8..7), 3..6),
        ) {
            let ring = |points: &[(u8, u8)]| points.iter().map(|&(x, y)| [f64::from(x), f64::from(y)]).collect::<Ring>();
            for rings in [vec![ring(&a)], vec![ring(&a), ring(&b)]] {
                if sound(&rings) {
                    let pair = sweep::first_meeting(&rings);
                    prop_assert_eq!(pair.is_some(), any_pair_meets(&rings), "{:?}", rings);
                }
            }
        }

        /// Star shapes never meet themselves, in whatever order their radii come.
        #[test]
        fn a_star_shape_passes(radii in prop::collection::vec(1.0f64..9.0, 3..60), turn in 0.0f64..7.0) {
            let n = radii.len() as f64;
            let at = |(i, r): (usize, &f64)| {
                let angle = turn + i as f64 / n * std::f64::consts::TAU;
                [r * angle.cos(), r * angle.sin()]
            };
            let rings = vec![radii.iter().enumerate().map(at).collect::<Ring>()];
            prop_assert_eq!(sweep::first_meeting(&rings), None);
        }
    }
}
