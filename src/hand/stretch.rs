//! Stretches: the parts of each edge where a finger may stand, in closed form.

use super::pad::Pad;
use super::pin::Path;
use super::{Hand, Tip};
use crate::part::{Edge, EdgeId, Outline, Part};
use rayon::prelude::*;
use rstar::primitives::{GeomWithData, Rectangle};
use rstar::{AABB, RTree};

/// A maximal interval of an edge where a finger may be.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Stretch {
    /// Edge, numbered as in the file.
    pub edge: EdgeId,
    /// Start, mm from the edge's first vertex.
    pub from_mm: f64,
    /// End, mm from the edge's first vertex; may equal the start.
    pub to_mm: f64,
}

impl Stretch {
    /// Length, mm.
    pub fn length_mm(&self) -> f64 {
        self.to_mm - self.from_mm
    }

    /// Distance from a position to the nearer end, mm; negative outside.
    pub fn room_mm(&self, along_mm: f64) -> f64 {
        (along_mm - self.from_mm).min(self.to_mm - along_mm)
    }
}

/// A finger that only grazes an edge is not stopped by it: what stops it reaches farther in by this fraction of the
/// finger's size, well above rounding and well below any drawing's precision.
pub(super) const GRAZE: f64 = 1e-9;

/// An edge shorter than what its two ends keep free by no more than this fraction is exactly as long.
const EXACT: f64 = 1e-12;

/// All stretches of a part for the fingers of a hand, in order of edge and position. A position is that of the pin's
/// contact, or of the middle of the pad.
pub fn stretches(part: &Part, hand: &Hand) -> Vec<Stretch> {
    let outline = part.outline();
    let neighbours = Neighbours::of(outline, reach_mm(hand));
    let on_edge = |(index, edge): (usize, &Edge)| {
        let mut free = Vec::new();
        let Some(body) = Body::on(edge, hand) else { return free };
        let half_face_mm = body.half_face_mm();
        let Some((from, to)) = between_ends(edge.length_mm(), hand.corner_clearance_mm + half_face_mm) else {
            return free;
        };
        let mut blocked: Vec<(f64, f64)> = part
            .keep_outs()
            .iter()
            .filter(|keep_out| keep_out.edge == edge.id())
            .map(|keep_out| (keep_out.from_mm - half_face_mm, keep_out.to_mm + half_face_mm))
            .collect();
        for other in neighbours.of_edge(edge).filter(|&other| other != index) {
            body.block(&outline.edges()[other], &mut blocked);
        }
        free_intervals(from, to, &mut blocked, |from_mm, to_mm| {
            free.push(Stretch { edge: edge.id(), from_mm, to_mm });
        });
        free
    };
    outline.edges().par_iter().enumerate().map(on_edge).collect::<Vec<_>>().concat()
}

/// The stretch a position lies on, if any; a hair outside still counts, so that a position that went through a file
/// in decimal is found again.
pub fn stretch_around(stretches: &[Stretch], edge: EdgeId, along_mm: f64) -> Option<&Stretch> {
    let first = stretches.partition_point(|stretch| stretch.edge < edge);
    stretches[first..]
        .iter()
        .take_while(|stretch| stretch.edge == edge)
        .find(|stretch| stretch.room_mm(along_mm) >= -1e-9 * (1.0 + stretch.to_mm.abs()))
}

/// The body of a finger while it runs along an edge.
enum Body<'a> {
    Pin(Path<'a>),
    Pad(Pad<'a>),
}

impl<'a> Body<'a> {
    /// Nothing where the finger cannot touch the edge anywhere.
    fn on(edge: &'a Edge, hand: &Hand) -> Option<Self> {
        match hand.tip {
            Tip::Pin => Path::of(edge, hand.pin_radius_mm).map(Body::Pin),
            Tip::Pad => Pad::of(edge, hand).map(Body::Pad),
        }
    }

    /// How far the contact reaches along the edge on either side of its position, mm.
    fn half_face_mm(&self) -> f64 {
        match self {
            Body::Pin(_) => 0.0,
            Body::Pad(pad) => pad.half_face_mm,
        }
    }

    /// Adds the intervals on which the finger meets another edge.
    fn block(&self, other: &Edge, blocked: &mut Vec<(f64, f64)>) {
        match self {
            Body::Pin(path) => path.block(other, blocked),
            Body::Pad(pad) => pad.block(other, blocked),
        }
    }
}

/// How far a finger's body reaches from its contact, mm; 0 for one without a body, which nothing can stop.
fn reach_mm(hand: &Hand) -> f64 {
    match hand.tip {
        Tip::Pin => 2.0 * hand.pin_radius_mm,
        Tip::Pad if hand.pad_depth_mm > 0.0 => (hand.pad_width_mm / 2.0).hypot(hand.pad_depth_mm),
        Tip::Pad => 0.0,
    }
}

/// What is left of an edge when both its ends are kept free; one point where that is exactly its length.
fn between_ends(length_mm: f64, kept_mm: f64) -> Option<(f64, f64)> {
    let (from, to) = (kept_mm, length_mm - kept_mm);
    if from <= to {
        return Some((from, to));
    }
    (from - to <= EXACT * length_mm).then_some((length_mm / 2.0, length_mm / 2.0))
}

/// Shortest piece left between two obstacles that is still a place to stand, mm.
pub(super) const SHORTEST_MM: f64 = 1e-9;

/// Emits what is left of `[from, to]` when open intervals are taken out. The single points left between two
/// obstacles, or between an obstacle and a corner, are no place for a finger; an edge cut to one point by the corner
/// clearance alone is.
fn free_intervals(from: f64, to: f64, blocked: &mut [(f64, f64)], mut emit: impl FnMut(f64, f64)) {
    blocked.sort_by(|a, b| a.0.total_cmp(&b.0));
    let mut at = from;
    let mut cut = false;
    for &mut (start, end) in blocked {
        if end <= at {
            continue;
        }
        if start >= to {
            break;
        }
        if start - at > SHORTEST_MM {
            emit(at, start);
        }
        at = end;
        cut = true;
    }
    if !cut || to - at > SHORTEST_MM {
        emit(at, to);
    }
}

/// Edges near each edge, by a tree of their boxes; empty for fingers without a body.
struct Neighbours {
    reach_mm: f64,
    tree: RTree<GeomWithData<Rectangle<[f64; 2]>, usize>>,
}

impl Neighbours {
    fn of(outline: &Outline, reach_mm: f64) -> Self {
        let boxed = |(i, edge): (usize, &Edge)| {
            let (low, high) = edge.bounds();
            GeomWithData::new(Rectangle::from_corners([low.x, low.y], [high.x, high.y]), i)
        };
        let boxes = if reach_mm > 0.0 { outline.edges().iter().enumerate().map(boxed).collect() } else { Vec::new() };
        Self { reach_mm, tree: RTree::bulk_load(boxes) }
    }

    /// Numbers of the edges that may be within reach of a finger on an edge, that edge included.
    fn of_edge(&self, edge: &Edge) -> impl Iterator<Item = usize> {
        let (low, high) = edge.bounds();
        let r = self.reach_mm;
        let near = AABB::from_corners([low.x - r, low.y - r], [high.x + r, high.y + r]);
        self.tree.locate_in_envelope_intersecting(near).map(|other| other.data)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::part::PartDescription;

    fn part(rings: Vec<Vec<[f64; 2]>>) -> Part {
        Part::new(PartDescription::bare("test", rings)).unwrap()
    }

    fn with_radius(pin_radius_mm: f64) -> Hand {
        Hand { pin_radius_mm, ..Hand::default() }
    }

    /// Elementary geometry: a disc of radius r in a right inner corner touches both sides at r from the corner.
    #[test]
    fn an_inner_corner_keeps_a_pin_off_by_its_radius() {
        let ell = part(vec![vec![[0.0, 0.0], [120.0, 0.0], [120.0, 40.0], [40.0, 40.0], [40.0, 120.0], [0.0, 120.0]]]);
        let found = stretches(&ell, &with_radius(3.0));
        let on = |edge| {
            let all: Vec<_> = found.iter().filter(|s| s.edge == EdgeId { ring: 0, edge }).collect();
            assert_eq!(all.len(), 1);
            (all[0].from_mm, all[0].to_mm)
        };
        let (from, to) = on(2);
        assert!(from.abs() < 1e-6 && (to - 77.0).abs() < 1e-6, "{from} {to}");
        let (from, to) = on(3);
        assert!((from - 3.0).abs() < 1e-6 && (to - 80.0).abs() < 1e-6, "{from} {to}");
        assert_eq!(on(0), (0.0, 120.0));
    }

    /// A pin wider than a slot cannot enter it; a pin that just fits can.
    #[test]
    fn a_slot_admits_only_pins_that_fit() {
        let slotted = part(vec![vec![
            [0.0, 0.0],
            [50.0, 0.0],
            [50.0, 30.0],
            [30.0, 30.0],
            [30.0, 10.0],
            [20.0, 10.0],
            [20.0, 30.0],
            [0.0, 30.0],
        ]]);
        let floor = EdgeId { ring: 0, edge: 4 };
        let on_floor = |r: f64| stretches(&slotted, &with_radius(r)).into_iter().filter(|s| s.edge == floor).count();
        assert_eq!(on_floor(4.0), 1);
        assert_eq!(on_floor(5.5), 0);
    }

    #[test]
    fn a_keep_out_and_clearance_cut_an_edge() {
        let mut described =
            PartDescription::bare("plate", vec![vec![[0.0, 0.0], [80.0, 0.0], [80.0, 40.0], [0.0, 40.0]]]);
        described.keep_outs.push(crate::part::KeepOutDescription {
            ring: 0,
            edge: 0,
            from: Some(30.0),
            to: Some(50.0),
            reason: "seal".into(),
        });
        let plate = Part::new(described).unwrap();
        let hand = Hand { corner_clearance_mm: 2.0, ..Hand::default() };
        let first: Vec<_> = stretches(&plate, &hand).into_iter().filter(|s| s.edge.edge == 0).collect();
        assert_eq!(first.iter().map(|s| (s.from_mm, s.to_mm)).collect::<Vec<_>>(), [(2.0, 30.0), (50.0, 78.0)]);
        assert!(stretch_around(&stretches(&plate, &hand), EdgeId { ring: 0, edge: 0 }, 40.0).is_none());
        assert!(stretch_around(&stretches(&plate, &hand), EdgeId { ring: 0, edge: 0 }, 30.0).is_some());
    }
}
