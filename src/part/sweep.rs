//! Whether any two edges meet, by a sweep from left to right (Shamos & Hoey 1976) with exact predicates.
//!
//! Time grows as n log n whatever the shape; testing every pair of boxes that overlap is quadratic on a comb of long
//! slanting teeth. The sweep stops at the first meeting it finds.

use super::check::{Ring, meet, turn};
use super::edge::EdgeId;
use std::cell::Cell;
use std::cmp::Ordering;
use std::collections::BTreeSet;
use std::ops::Bound;

/// An edge from its lexicographically smaller end to its larger one.
#[derive(Debug, Clone, Copy)]
struct Segment<'a> {
    left: [f64; 2],
    right: [f64; 2],
    id: EdgeId,
    /// Set when two segments cannot be told above and below one another: they meet.
    met: &'a Cell<Option<(EdgeId, EdgeId)>>,
}

fn before(a: [f64; 2], b: [f64; 2]) -> Ordering {
    // Adding 0 turns -0 into 0, which is the same place.
    (a[0] + 0.0).total_cmp(&(b[0] + 0.0)).then((a[1] + 0.0).total_cmp(&(b[1] + 0.0)))
}

impl Segment<'_> {
    /// Order from below to above of two segments that are on the sweep line at once. Only segments that do not meet, or
    /// share one end, have an order that lasts.
    fn below(&self, other: &Self) -> Ordering {
        if self.id == other.id {
            return Ordering::Equal;
        }
        // Seen from the segment that began earlier, on which side does the later one begin?
        let (early, late, flip) = match before(self.left, other.left) {
            Ordering::Greater => (other, self, true),
            _ => (self, other, false),
        };
        let side = match turn(early.left, early.right, late.left) {
            Ordering::Equal => turn(early.left, early.right, late.right),
            side => side,
        };
        // A point on the left of the early segment is above it.
        let early_first = side.reverse();
        match if flip { early_first.reverse() } else { early_first } {
            Ordering::Equal => {
                self.met.set(Some((self.id.min(other.id), self.id.max(other.id))));
                self.id.cmp(&other.id)
            }
            order => order,
        }
    }
}

impl PartialEq for Segment<'_> {
    fn eq(&self, other: &Self) -> bool {
        self.id == other.id
    }
}
impl Eq for Segment<'_> {}
impl PartialOrd for Segment<'_> {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}
impl Ord for Segment<'_> {
    fn cmp(&self, other: &Self) -> Ordering {
        self.below(other)
    }
}

/// True when the edges are neighbours in their ring and so share a vertex by right.
pub(super) fn neighbours(rings: &[Ring], a: EdgeId, b: EdgeId) -> bool {
    let n = rings[a.ring].len();
    a.ring == b.ring && ((a.edge + 1) % n == b.edge || (b.edge + 1) % n == a.edge)
}

/// A pair of edges that meet other than neighbours at their vertex; nothing when there is none. Rings must be free of
/// repeated vertices and spikes.
pub(super) fn first_meeting(rings: &[Ring]) -> Option<(EdgeId, EdgeId)> {
    let met = Cell::new(None);
    let mut segments = Vec::new();
    for (ring, vertices) in rings.iter().enumerate() {
        for edge in 0..vertices.len() {
            let (a, b) = (vertices[edge], vertices[(edge + 1) % vertices.len()]);
            let (left, right) = if before(a, b) == Ordering::Less { (a, b) } else { (b, a) };
            segments.push(Segment { left, right, id: EdgeId { ring, edge }, met: &met });
        }
    }
    if let Some(pair) = shared_vertex(rings) {
        return Some(pair);
    }
    // Ends come before beginnings at the same point, so that neighbours in a chain are never on the line together.
    let mut events: Vec<(bool, usize)> = (0..segments.len()).flat_map(|i| [(false, i), (true, i)]).collect();
    let point = |&(begins, i): &(bool, usize)| if begins { segments[i].left } else { segments[i].right };
    events.sort_by(|a, b| before(point(a), point(b)).then(a.0.cmp(&b.0)).then(a.1.cmp(&b.1)));
    let clash = |a: &Segment, b: &Segment| {
        !neighbours(rings, a.id, b.id) && meet([a.left, a.right], [b.left, b.right]).is_some()
    };
    #[expect(clippy::mutable_key_type, reason = "the cell is a note to this function and takes no part in the order")]
    let mut line: BTreeSet<Segment> = BTreeSet::new();
    for (begins, i) in events {
        let segment = segments[i];
        let below = line.range((Bound::Unbounded, Bound::Excluded(segment))).next_back().copied();
        let above = line.range((Bound::Excluded(segment), Bound::Unbounded)).next().copied();
        let pairs = if begins {
            line.insert(segment);
            [below.map(|b| (b, segment)), above.map(|a| (segment, a))]
        } else {
            line.remove(&segment);
            [below.zip(above), None]
        };
        if let Some((a, b)) = pairs.into_iter().flatten().find(|(a, b)| clash(a, b)) {
            return Some((a.id.min(b.id), a.id.max(b.id)));
        }
        if let Some(pair) = met.take() {
            return Some(pair);
        }
    }
    None
}

/// Two vertices at one point, as a pair of edges that start there.
fn shared_vertex(rings: &[Ring]) -> Option<(EdgeId, EdgeId)> {
    let mut vertices: Vec<([f64; 2], EdgeId)> = rings
        .iter()
        .enumerate()
        .flat_map(|(ring, all)| all.iter().enumerate().map(move |(edge, &p)| (p, EdgeId { ring, edge })))
        .collect();
    vertices.sort_by(|a, b| before(a.0, b.0).then(a.1.cmp(&b.1)));
    vertices.windows(2).find(|pair| before(pair[0].0, pair[1].0) == Ordering::Equal).map(|pair| (pair[0].1, pair[1].1))
}
