//! Stretches: the parts of each edge where a pin may stand, in closed form.
//!
//! A pin of radius r that touches edge e at p has its centre at p - r n. While p runs along e the centre runs along a
//! parallel line, or along a concentric circle where e is an arc, and it meets another edge f exactly while it is closer
//! to f than r. The distance changes from above r to below only where the centre's path crosses the curve at distance r
//! from f: two lines or two concentric circles beside it, and a circle round each end. All those crossings are in closed
//! form; between two of them one look decides. Nothing is sampled, so nothing thin is missed.

use super::Hand;
use crate::part::{Arc, Edge, EdgeId, Outline, Part};
use nalgebra::{Point2, Vector2};
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

/// A pin that only grazes an edge is not stopped by it: what stops it is closer by this fraction of the radius, well
/// above rounding and well below any drawing's precision.
const GRAZE: f64 = 1e-9;

/// All stretches of a part for the pins of a hand, in order of edge and position.
pub fn stretches(part: &Part, hand: &Hand) -> Vec<Stretch> {
    let outline = part.outline();
    let neighbours = Neighbours::of(outline, hand.pin_radius_mm);
    let on_edge = |(index, edge): (usize, &Edge)| {
        let mut free = Vec::new();
        let from = hand.corner_clearance_mm;
        let to = edge.length_mm() - hand.corner_clearance_mm;
        if from > to {
            return free;
        }
        let mut blocked: Vec<(f64, f64)> = part
            .keep_outs()
            .iter()
            .filter(|keep_out| keep_out.edge == edge.id())
            .map(|keep_out| (keep_out.from_mm, keep_out.to_mm))
            .collect();
        neighbours.block(outline, index, &mut blocked);
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

/// True when two pins with these contact points and inward normals keep the hand's gap.
pub fn apart(hand: &Hand, a: (Point2<f64>, Vector2<f64>), b: (Point2<f64>, Vector2<f64>)) -> bool {
    let r = hand.pin_radius_mm;
    let least = 2.0 * r + hand.gap_mm;
    let between = (a.0 - a.1 * r) - (b.0 - b.1 * r);
    // Touching is allowed up to rounding of the positions themselves.
    between.norm() >= least * (1.0 - 1e-12)
}

/// Shortest piece left between two obstacles that is still a place to stand, mm.
const SHORTEST_MM: f64 = 1e-9;

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

/// Edges near each edge, by a tree of their boxes; empty for point fingers, which nothing can stop.
struct Neighbours {
    radius: f64,
    tree: RTree<GeomWithData<Rectangle<[f64; 2]>, usize>>,
}

impl Neighbours {
    fn of(outline: &Outline, radius: f64) -> Self {
        let boxed = |(i, edge): (usize, &Edge)| {
            let (low, high) = edge.bounds();
            GeomWithData::new(Rectangle::from_corners([low.x, low.y], [high.x, high.y]), i)
        };
        let boxes = if radius > 0.0 { outline.edges().iter().enumerate().map(boxed).collect() } else { Vec::new() };
        Self { radius, tree: RTree::bulk_load(boxes) }
    }

    /// Adds the intervals of edge `index` that each other edge forbids.
    fn block(&self, outline: &Outline, index: usize, blocked: &mut Vec<(f64, f64)>) {
        if self.radius <= 0.0 {
            return;
        }
        let path = Path::of(&outline.edges()[index], self.radius);
        if !path.fits() {
            blocked.push((f64::NEG_INFINITY, f64::INFINITY));
            return;
        }
        let (low, high) = path.edge.bounds();
        let r = 2.0 * self.radius;
        let near = AABB::from_corners([low.x - r, low.y - r], [high.x + r, high.y + r]);
        for other in self.tree.locate_in_envelope_intersecting(near) {
            if other.data != index {
                path.block(&outline.edges()[other.data], blocked);
            }
        }
    }
}

/// The way of a pin's centre while the pin runs along an edge.
struct Path<'a> {
    edge: &'a Edge,
    radius: f64,
    /// The circle the centre runs on, where the edge is an arc: the arc's own, and its radius for the centre.
    round: Option<(Arc, f64)>,
}

impl<'a> Path<'a> {
    fn of(edge: &'a Edge, radius: f64) -> Self {
        let round = edge.arc().map(|arc| (arc, if arc.convex { arc.radius + radius } else { arc.radius - radius }));
        Self { edge, radius, round }
    }

    /// False for a pin thicker than the hollow it should touch.
    fn fits(&self) -> bool {
        self.round.is_none_or(|(_, radius)| radius > -GRAZE * self.radius)
    }

    fn centre(&self, along_mm: f64) -> Point2<f64> {
        self.edge.point_at(along_mm) - self.edge.normal_at(along_mm) * self.radius
    }

    /// Adds the intervals on which the pin meets another edge.
    fn block(&self, other: &Edge, blocked: &mut Vec<(f64, f64)>) {
        let r = self.radius * (1.0 - GRAZE);
        let length = self.edge.length_mm();
        let mut cuts = vec![0.0, length];
        self.cross_circle(other.start(), r, &mut cuts);
        self.cross_circle(other.end(), r, &mut cuts);
        match other.arc() {
            Some(arc) => {
                self.cross_circle(arc.centre, arc.radius + r, &mut cuts);
                self.cross_circle(arc.centre, arc.radius - r, &mut cuts);
            }
            None => {
                let along = other.direction_at(0.0);
                let beside = Vector2::new(-along.y, along.x) * r;
                self.cross_line(other.start() + beside, along, &mut cuts);
                self.cross_line(other.start() - beside, along, &mut cuts);
            }
        }
        cuts.retain(|cut| (0.0..=length).contains(cut));
        cuts.sort_by(f64::total_cmp);
        for pair in cuts.windows(2) {
            if pair[0] < pair[1] && other.distance_to(self.centre((pair[0] + pair[1]) / 2.0)) < r {
                blocked.push((pair[0], pair[1]));
            }
        }
    }

    /// Adds where the path crosses a circle, as distances along the edge.
    fn cross_circle(&self, centre: Point2<f64>, radius: f64, cuts: &mut Vec<f64>) {
        if radius < 0.0 {
            return;
        }
        match self.round {
            None => {
                let to = centre - self.centre(0.0);
                let direction = self.edge.direction_at(0.0);
                let (middle, off) = (to.dot(&direction), to.perp(&direction));
                let half = (radius - off) * (radius + off);
                if half >= 0.0 {
                    cuts.extend([middle - half.sqrt(), middle + half.sqrt()]);
                }
            }
            Some((arc, own)) => {
                // Two circles: the foot of the common chord lies (d^2 + own^2 - radius^2) / 2 d from the own centre.
                let to = centre - arc.centre;
                let apart = to.norm();
                let foot = (apart + (own - radius) * (own + radius) / apart) / 2.0;
                let half = (own - foot) * (own + foot);
                if apart > 0.0 && half >= 0.0 {
                    let (toward, side) = (to / apart * foot, Vector2::new(-to.y, to.x) / apart * half.sqrt());
                    self.cut_toward(&arc, [toward + side, toward - side], cuts);
                }
            }
        }
    }

    /// Adds where the path crosses a line.
    fn cross_line(&self, start: Point2<f64>, along: Vector2<f64>, cuts: &mut Vec<f64>) {
        match self.round {
            None => {
                let rate = along.perp(&self.edge.direction_at(0.0));
                let cut = along.perp(&(start - self.centre(0.0))) / rate;
                if cut.is_finite() {
                    cuts.push(cut);
                }
            }
            Some((arc, own)) => {
                let to = start - arc.centre;
                let foot = to - along * to.dot(&along);
                let half = own * own - foot.norm_squared();
                if half >= 0.0 {
                    self.cut_toward(&arc, [foot + along * half.sqrt(), foot - along * half.sqrt()], cuts);
                }
            }
        }
    }

    fn cut_toward(&self, arc: &Arc, directions: [Vector2<f64>; 2], cuts: &mut Vec<f64>) {
        cuts.extend(directions.into_iter().filter_map(|direction| self.edge.along_toward(arc, direction)));
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
