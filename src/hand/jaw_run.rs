//! Every placement of parallel jaws on the stretches of a part, as one-parameter sets.
//!
//! Two straight edges that face each other within the tolerance carry a run: both contacts move along their edges at one
//! rate, because the jaw axis lies midway between the two normals. Concentric arcs carry one too: the axis turns about
//! the common centre. A straight edge and an arc have one placement, where the arc's normal is the reverse of the
//! edge's; two other arcs have one on each ray of the line through their centres.

use super::apart::{apart, slack_mm};
use super::jaws::{PARALLEL_RAD, jaws_at, off_parallel_rad, out_of_line_mm};
use super::stretch::SHORTEST_MM;
use super::{Hand, Stretch, Tip};
use crate::part::{Arc, Edge, Part};
use nalgebra::{Point2, Vector2};
use rayon::prelude::*;
use std::f64::consts::{PI, TAU};

/// A maximal one-parameter set of placements of parallel jaws on two stretches; its parameter runs from 0 to
/// [`JawRun::length_mm`].
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct JawRun {
    /// Indices into the stretches, ascending; the same one twice where two ends of one arc face each other.
    pub stretches: [usize; 2],
    /// True when the jaws stand between the faces and press outward.
    pub inside: bool,
    /// Positions on the two edges at the run's start, mm.
    from_mm: [f64; 2],
    /// Positions on the two edges at its end, mm.
    to_mm: [f64; 2],
}

impl JawRun {
    /// Distance that the contact moves that moves farther, mm; 0 for a single placement.
    pub fn length_mm(&self) -> f64 {
        let moved = |finger: usize| (self.to_mm[finger] - self.from_mm[finger]).abs();
        moved(0).max(moved(1))
    }

    /// Positions on the two edges, mm from each edge's first vertex, at a distance along the run.
    pub fn along_mm(&self, u_mm: f64) -> [f64; 2] {
        let length = self.length_mm();
        let share = if length > 0.0 { (u_mm / length).clamp(0.0, 1.0) } else { 0.0 };
        [0, 1].map(|finger| self.from_mm[finger] * (1.0 - share) + self.to_mm[finger] * share)
    }

    /// The distance along the run at which the contacts stand at these positions on the two edges; nothing where they
    /// stand so nowhere on it.
    pub fn u_mm(&self, along_mm: [f64; 2]) -> Option<f64> {
        let way = |finger: usize| self.to_mm[finger] - self.from_mm[finger];
        // The finger that moves farther tells it best.
        let finger = usize::from(way(1).abs() > way(0).abs());
        let u_mm = ((along_mm[finger] - self.from_mm[finger]) * way(finger).signum()).clamp(0.0, self.length_mm());
        let there = self.along_mm(u_mm);
        let near =
            |finger: usize| (there[finger] - along_mm[finger]).abs() <= ON_RUN_MM * (1.0 + along_mm[finger].abs());
        (near(0) && near(1)).then_some(u_mm)
    }
}

/// How far a position may be off a run and still be on it: it may have gone through a file in decimal.
const ON_RUN_MM: f64 = 1e-6;

/// All placements of parallel jaws on stretches of a part, in order of the stretches. As with the stretches themselves, a
/// single placement left over where two ends just meet is none, but one that the edges leave no other choice for is.
pub fn jaw_runs(part: &Part, hand: &Hand, stretches: &[Stretch]) -> Vec<JawRun> {
    let sides: Vec<Side<'_>> = stretches
        .iter()
        .enumerate()
        .filter_map(|(number, stretch)| Side::of(number, stretch, part.outline().edge(stretch.edge)?))
        .collect();
    // Wide arcs face much, straight edges little: apart, so that one wide arc does not widen every search.
    let fans = [Fan::of(&sides, |side| side.arc.is_none()), Fan::of(&sides, |side| side.arc.is_some())];
    let from_side = |side: &Side<'_>| {
        let mut runs = Vec::new();
        let mut facing: Vec<usize> = fans.iter().flat_map(|fan| fan.facing(side, &sides)).collect();
        facing.sort_unstable();
        facing.dedup();
        for other in facing {
            Pair { hand, sides: [side, &sides[other]] }.runs(&mut runs);
        }
        runs
    };
    sides.par_iter().map(from_side).collect::<Vec<_>>().concat()
}

/// A stretch as jaws see it.
struct Side<'a> {
    /// Index of the stretch.
    number: usize,
    stretch: &'a Stretch,
    edge: &'a Edge,
    arc: Option<Arc>,
    /// Angle of the inward normal at the stretch's middle, -pi to pi.
    angle: f64,
    /// Half the angle the normal turns through along the stretch.
    half_turn: f64,
}

impl<'a> Side<'a> {
    /// Nothing for a stretch that is none.
    fn of(number: usize, stretch: &'a Stretch, edge: &'a Edge) -> Option<Self> {
        let arc = edge.arc();
        let normal = edge.normal_at(middle(stretch));
        let angle = normal.y.atan2(normal.x);
        let half_turn = arc.map_or(0.0, |arc| stretch.length_mm() / arc.radius / 2.0);
        let sound = stretch.from_mm <= stretch.to_mm && angle.is_finite() && half_turn.is_finite();
        sound.then_some(Self { number, stretch, edge, arc, angle, half_turn })
    }

    fn contact(&self, along_mm: f64) -> (Point2<f64>, Vector2<f64>) {
        (self.edge.point_at(along_mm), self.edge.normal_at(along_mm))
    }

    /// A position cut to the stretch; nothing when it is off by more than rounding.
    fn held(&self, along_mm: f64) -> Option<f64> {
        (self.stretch.room_mm(along_mm) >= -SHORTEST_MM)
            .then(|| along_mm.max(self.stretch.from_mm).min(self.stretch.to_mm))
    }

    /// Where the stretch lies in a direction from the centre of its arc.
    fn along_toward(&self, arc: &Arc, direction: Vector2<f64>) -> Option<f64> {
        let middle = middle(self.stretch);
        let turned = angle_between(self.edge.point_at(middle) - arc.centre, direction);
        self.held(middle + turned * arc.radius * arc.sweep.signum())
    }

    /// Shorter than any stretch but one that is a single position.
    fn is_point(&self) -> bool {
        self.stretch.length_mm() <= SHORTEST_MM
    }
}

fn middle(stretch: &Stretch) -> f64 {
    (stretch.from_mm + stretch.to_mm) / 2.0
}

/// Angle from one direction to another, -pi to pi.
fn angle_between(from: Vector2<f64>, to: Vector2<f64>) -> f64 {
    from.perp(&to).atan2(from.dot(&to))
}

/// From an arc's centre toward the contact, where the inward normal is this; the same rule gives the normal back.
fn outward(arc: &Arc, normal: Vector2<f64>) -> Vector2<f64> {
    if arc.convex { -normal } else { normal }
}

/// Sides in the order of their normals' angles.
struct Fan {
    /// Angle, and index of the side.
    sorted: Vec<(f64, usize)>,
    /// The widest half turn among them.
    widest: f64,
}

impl Fan {
    fn of(sides: &[Side<'_>], takes: impl Fn(&Side<'_>) -> bool) -> Self {
        let taken = sides.iter().enumerate().filter(|(_, side)| takes(side));
        let mut sorted: Vec<(f64, usize)> = taken.map(|(index, side)| (side.angle, index)).collect();
        sorted.sort_by(|a, b| a.0.total_cmp(&b.0));
        let widest = sorted.iter().map(|&(_, index)| sides[index].half_turn).fold(0.0, f64::max);
        Self { sorted, widest }
    }

    /// Indices of the sides, not before this one, with a normal that may be the reverse of one of its own.
    fn facing(&self, side: &Side<'_>, sides: &[Side<'_>]) -> impl Iterator<Item = usize> {
        let reverse = if side.angle > 0.0 { side.angle - PI } else { side.angle + PI };
        // Twice the tolerance takes in all rounding; each pair is looked at closely later.
        let own = side.half_turn + 2.0 * PARALLEL_RAD;
        let reach = own + self.widest;
        let after = |angle: f64| self.sorted.partition_point(|&(other, _)| other < angle);
        let ranges = [reverse - TAU, reverse, reverse + TAU].map(|at| after(at - reach)..after(at + reach));
        let within = move |other: &Side<'_>| {
            let off = (other.angle - reverse).abs();
            off.min(TAU - off) <= own + other.half_turn
        };
        let least = side.number;
        ranges
            .into_iter()
            .flat_map(|range| self.sorted[range].iter().map(|&(_, index)| index))
            .filter(move |&index| sides[index].number >= least && within(&sides[index]))
    }
}

/// Two sides that may face each other.
struct Pair<'a> {
    hand: &'a Hand,
    sides: [&'a Side<'a>; 2],
}

impl Pair<'_> {
    fn runs(&self, runs: &mut Vec<JawRun>) {
        match self.sides.map(|side| side.arc) {
            [None, None] => self.straight(runs),
            [None, Some(arc)] => self.straight_and_round(0, &arc, runs),
            [Some(arc), None] => self.straight_and_round(1, &arc, runs),
            [Some(a), Some(b)] => {
                // Along two rays of unlike sense the distance is the sum of the radii, of like sense the difference.
                let distance = if a.convex == b.convex { a.radius + b.radius } else { (a.radius - b.radius).abs() };
                // Half of what may be out of line leaves the rest to rounding.
                if (a.centre - b.centre).norm() <= out_of_line_mm(distance) / 2.0 {
                    self.concentric(&a, &b, runs);
                } else {
                    self.round(&a, &b, runs);
                }
            }
        }
    }

    fn straight(&self, runs: &mut Vec<JawRun>) {
        let [a, b] = self.sides;
        let ((p, n), (q, m)) = (a.contact(a.stretch.from_mm), b.contact(b.stretch.from_mm));
        let off = off_parallel_rad(n, m);
        if !(off <= PARALLEL_RAD) {
            return;
        }
        let pressing = (n - m).normalize();
        let across = Vector2::new(-pressing.y, pressing.x);
        // Both edges advance across the jaws at the same rate, but for the sense.
        let rates = [a, b].map(|side| side.edge.direction_at(0.0).dot(&across));
        let starts = [0.0, (q - p).dot(&across)];
        let along = |side: usize, x: f64| self.sides[side].stretch.from_mm + (x - starts[side]) / rates[side];
        let spans = [0, 1].map(|side| {
            let end = starts[side] + self.sides[side].stretch.length_mm() * rates[side];
            (starts[side].min(end), starts[side].max(end))
        });
        let (low, high) = (spans[0].0.max(spans[1].0), spans[0].1.min(spans[1].1));
        let single = a.is_point() || b.is_point();
        if !(high - low > if single { -SHORTEST_MM } else { SHORTEST_MM }) {
            return;
        }
        let place = |x: f64| [0, 1].map(|side| self.sides[side].held(along(side, x)));
        let signed = |x: f64| {
            let (p, q) = (a.edge.point_at(along(0, x)), b.edge.point_at(along(1, x)));
            (q - p).dot(&pressing)
        };
        let (low, high) = if single { ((low + high) / 2.0, (low + high) / 2.0) } else { (low, high) };
        let ends = (signed(low), signed(high));
        for inside in [false, true] {
            let (first, last) = if inside { (-ends.0, -ends.1) } else { ends };
            let Some((from, to)) = self.within_opening(first, last, off / 2.0, inside) else { continue };
            let at = |share: f64| place(low * (1.0 - share) + high * share);
            if (high - low) * (to - from) > SHORTEST_MM || single {
                self.note(at(from), at(to), runs);
            }
        }
    }

    /// Shares of a way, on which the distance of the faces goes from one value to another, between which the jaws open so
    /// far and the fingers keep their gap. The faces are tilted against each other by twice `tilt` rad.
    fn within_opening(&self, first: f64, last: f64, tilt: f64, inside: bool) -> Option<(f64, f64)> {
        let hand = self.hand;
        // The fingers are mirror images of each other in the line midway, so each keeps half the gap from that line.
        let reach = match hand.tip {
            Tip::Pin => 2.0 * hand.pin_radius_mm * if inside { 1.0 + tilt.cos() } else { 1.0 - tilt.cos() },
            Tip::Pad => {
                let depth = if inside { 2.0 * hand.pad_depth_mm * tilt.cos() } else { 0.0 };
                hand.pad_width_mm * tilt.sin() + depth
            }
        };
        // Faces nearer than the shortest stretch is long are one face.
        let least = hand.opening_mm[0].max(hand.gap_mm + reach).max(SHORTEST_MM);
        let most = hand.opening_mm[1];
        let slack = slack_mm(hand) / 2.0;
        if !(least <= most) {
            return None;
        }
        let good = |opening: f64| least - slack <= opening && opening <= most + slack;
        // A cut stays clear of the limit by more than rounding, for the far end of a run must hold as well as its middle.
        let [a, b] = [least + SHORTEST_MM, most].map(|limit| (limit - first) / (last - first));
        let from = if good(first) { 0.0 } else { a.min(b) };
        let to = if good(last) { 1.0 } else { a.max(b) };
        (0.0 <= from && from <= to && to <= 1.0).then_some((from, to))
    }

    fn straight_and_round(&self, straight: usize, arc: &Arc, runs: &mut Vec<JawRun>) {
        let (flat, bent) = (self.sides[straight], self.sides[1 - straight]);
        let (start, normal) = flat.contact(flat.stretch.from_mm);
        let Some(on_arc) = bent.along_toward(arc, outward(arc, -normal)) else { return };
        let along = (bent.edge.point_at(on_arc) - start).dot(&flat.edge.direction_at(0.0));
        let on_flat = flat.held(flat.stretch.from_mm + along);
        let place = if straight == 0 { [on_flat, Some(on_arc)] } else { [Some(on_arc), on_flat] };
        self.note(place, place, runs);
    }

    fn round(&self, a: &Arc, b: &Arc, runs: &mut Vec<JawRun>) {
        let line = (b.centre - a.centre).normalize();
        for normal in [line, -line] {
            let place = [(0, a, normal), (1, b, -normal)]
                .map(|(side, arc, normal)| self.sides[side].along_toward(arc, outward(arc, normal)));
            self.note(place, place, runs);
        }
    }

    fn concentric(&self, a: &Arc, b: &Arc, runs: &mut Vec<JawRun>) {
        let [side_a, side_b] = self.sides;
        let middles = [(side_a, a), (side_b, b)].map(|(side, arc)| {
            let along_mm = middle(side.stretch);
            (along_mm, side.edge.point_at(along_mm) - arc.centre)
        });
        // From the middle of the first stretch to what faces the middle of the second.
        let reverse = if a.convex == b.convex { -middles[1].1 } else { middles[1].1 };
        let to_middle = angle_between(middles[0].1, reverse);
        let rates = [a.radius * a.sweep.signum(), b.radius * b.sweep.signum()];
        let single = side_a.is_point() || side_b.is_point();
        let radius = a.radius.max(b.radius);
        for turn in [to_middle - TAU, to_middle, to_middle + TAU] {
            // On one arc every pair is met twice; the first of its contacts is the one nearer to the arc's start.
            if side_a.number == side_b.number && turn * rates[0] >= 0.0 {
                continue;
            }
            let low = (-side_a.half_turn).max(turn - side_b.half_turn);
            let high = side_a.half_turn.min(turn + side_b.half_turn);
            if !((high - low) * radius > if single { -SHORTEST_MM } else { SHORTEST_MM }) {
                continue;
            }
            let (low, high) = if single { ((low + high) / 2.0, (low + high) / 2.0) } else { (low, high) };
            let place = |angle: f64| {
                [side_a.held(middles[0].0 + angle * rates[0]), side_b.held(middles[1].0 + (angle - turn) * rates[1])]
            };
            self.note(place(low), place(high), runs);
        }
    }

    /// Notes a run from one placement to another, if it is one.
    fn note(&self, from: [Option<f64>; 2], to: [Option<f64>; 2], runs: &mut Vec<JawRun>) {
        let ([Some(a), Some(b)], [Some(c), Some(d)]) = (from, to) else { return };
        let stretches = self.sides.map(|side| side.number);
        // The middle is the last to be hurt by rounding, so it says which way the jaws press.
        let Some(inside) = self.grips([(a + c) / 2.0, (b + d) / 2.0]) else { return };
        if [[a, b], [c, d]].into_iter().all(|end| self.grips(end) == Some(inside)) {
            runs.push(JawRun { stretches, inside, from_mm: [a, b], to_mm: [c, d] });
        }
    }

    /// Whether jaws at these positions press outward; nothing where they cannot stand.
    fn grips(&self, along_mm: [f64; 2]) -> Option<bool> {
        let [a, b] = [0, 1].map(|side| self.sides[side].contact(along_mm[side]));
        apart(self.hand, a, b).then(|| jaws_at(self.hand, a, b).ok()).flatten().map(|jaws| jaws.inside)
    }
}
