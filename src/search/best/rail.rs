//! Rails: what a finger runs along, and the contacts it makes anywhere on a piece of it.
//!
//! On a straight edge a finger anywhere in an interval has its generators in the hull of those at the two ends: they are
//! exactly the generators of a pad centred on the interval that is wider by half of it on either side.
//!
//! On an arc of radius R the normal turns by up to phi = half / R either way. With friction angle psi every force the finger
//! can make lies within psi + phi of the middle normal, and stands off the middle contact by at most R sin phi along the
//! tangent and R (1 - cos phi) across it. So, with mu' = tan(psi + phi), a force with normal part fn has a torque that differs
//! from that of the same force at the middle by at most fn (R sin phi + R (1 - cos phi) mu'): a pad with friction mu' of that
//! half width covers the arc, once its forces are made longer by the largest normal part a cone edge can have,
//! cos(psi - phi) / cos psi (1 / cos psi when phi > psi). All of it shrinks to the contact itself as the piece gets shorter.
//!
//! That error is as long as the piece; in the plane a cover with an error of the second order takes its place. A cone edge turned by theta has its torque about the arc's centre o unchanged, k, so its generator is
//! (f, ((o - c) x f + k) / l): linear in the force f, which runs along a circle. The chord between the forces at the two ends,
//! both made longer by 1 / cos phi, passes outside that circle; on it lie the points (f / cos theta,
//! ((o - c) x f / cos theta + k') / l) for every k' from k to k / cos phi once both ends have both torques, and one of them is
//! the generator itself made longer by 1 / cos theta. A hull that holds 0, as every hull of a closed grasp does, holds
//! with it the generator.

use super::super::scene::Scene;
use crate::hand::{self, FingerCount, Hand, Tip};
use crate::mechanics::force_polygon::{CERTAIN, PlanarScore, Polygon};
use crate::mechanics::wrench::{MOST_DIRECTIONS, MOST_GENERATORS, cross};
use crate::mechanics::{Lever, quality};
use crate::part::Edge;
use nalgebra::{Point2, Vector2, Vector3};

use super::super::family_forces::NO_LEVER;

/// An interval of positions along an edge, mm; a single position when both are the same.
pub(super) type Span = [f64; 2];

/// Half of an interval.
pub(super) fn half_mm(span: Span) -> f64 {
    (span[1] - span[0]) / 2.0
}

/// Middle of an interval.
pub(super) fn middle(span: Span) -> f64 {
    span[0] + (span[1] - span[0]) / 2.0
}

/// Angles of the common cone and the turn together beyond this cover half the plane: nothing is said there.
const WIDEST_RAD: f64 = 1.5;

/// Largest half turn of a piece of an arc that is covered by its ends.
const WIDEST_TURN_RAD: f64 = 1.2;

/// A place as the search sees it: a stretch, or the one position of a finger that is kept.
pub(super) struct Rail<'a> {
    scene: &'a Scene,
    edge: &'a Edge,
    /// Index into [`Scene::places`].
    pub stretch: usize,
    /// Where fingers may be.
    pub whole: Span,
    /// Ends of the stretch, that room is counted to; beyond `whole` where a finger is kept.
    ends: Span,
    /// Friction coefficient of the edge.
    pub mu: f64,
    /// Size of the edge's curvature, 1/mm; 0 where it is straight.
    pub bend: f64,
    /// Contact at the start of the stretch.
    base: Lever,
    /// What its torque over l gains for each mm along the edge.
    torque_per_mm: f64,
}

/// The contacts of a box: one lever for each finger, with the friction and the length of its forces.
#[derive(Clone, Copy)]
pub(super) struct Contacts {
    pub levers: [Lever; FingerCount::MOST],
    pub mus: [f64; FingerCount::MOST],
    /// What the forces of each finger are longer by, at least 1.
    pub longer: [f64; FingerCount::MOST],
    pub count: usize,
}

impl Contacts {
    pub(super) fn none() -> Self {
        let longer = [1.0; FingerCount::MOST];
        Self { levers: [NO_LEVER; FingerCount::MOST], mus: [0.0; FingerCount::MOST], longer, count: 0 }
    }

    fn push(&mut self, (lever, mu, longer): (Lever, f64, f64)) {
        (self.levers[self.count], self.mus[self.count], self.longer[self.count]) = (lever, mu, longer);
        self.count += 1;
    }

    pub(super) fn levers(&self) -> &[Lever] {
        &self.levers[..self.count]
    }

    pub(super) fn mus(&self) -> &[f64] {
        &self.mus[..self.count]
    }

    /// The largest of what forces are longer by.
    pub(super) fn longest(&self) -> f64 {
        self.longer[..self.count].iter().copied().fold(1.0, f64::max)
    }

    /// Closure, quality and placement by the plain definition: every number is one that no contact in the box exceeds.
    pub(super) fn by_definition(&self) -> PlanarScore {
        let mut generators = [Vector3::zeros(); MOST_GENERATORS];
        let mut n = 0;
        for ((lever, &mu), longer) in self.levers().iter().zip(self.mus()).zip(self.longer) {
            for generator in &*lever.generators(mu) {
                generators[n] = generator * longer;
                n += 1;
            }
        }
        quality::by_definition(&generators[..n])
    }
}

impl<'a> Rail<'a> {
    /// The rail of a stretch; nothing for one that is none.
    pub(super) fn new(scene: &'a Scene, stretch: usize) -> Option<Self> {
        let place = scene.places().get(stretch)?;
        let on = &place.span;
        let edge = scene.part().outline().edge(on.edge)?;
        let contact = scene.contact(edge, on.from_mm);
        let sound = on.from_mm <= on.to_mm;
        sound.then(|| Self {
            scene,
            edge,
            stretch,
            whole: [on.from_mm, on.to_mm],
            ends: [place.whole.from_mm, place.whole.to_mm],
            mu: contact.mu,
            bend: edge.curvature().abs(),
            base: Lever::of(&contact, scene.frame()),
            torque_per_mm: cross(edge.direction_at(on.from_mm), contact.normal) / scene.frame().scale_mm,
        })
    }

    /// True when a pad lies flush here.
    pub(super) fn is_flush(&self) -> bool {
        self.base.spread > 0.0
    }

    /// The edge's number.
    pub(super) fn edge(&self) -> crate::part::EdgeId {
        self.edge.id()
    }

    /// Half the angle the normal turns through on a piece, rad.
    pub(super) fn half_turn(&self, span: Span) -> f64 {
        half_mm(span) * self.bend
    }

    /// Contact in the middle of a piece.
    pub(super) fn at_middle(&self, span: Span) -> Lever {
        if self.bend > 0.0 {
            return Lever::of(&self.scene.contact(self.edge, middle(span)), self.scene.frame());
        }
        let normal_torque = self.base.normal_torque + self.torque_per_mm * (middle(span) - self.whole[0]);
        Lever { normal_torque, ..self.base }
    }

    /// What covers every contact with friction `mu` on a piece: lever, friction, and what its forces are longer by. Nothing
    /// where the piece turns too far.
    pub(super) fn over(&self, span: Span, mu: f64) -> Option<(Lever, f64, f64)> {
        let mut lever = self.at_middle(span);
        let scale_mm = self.scene.frame().scale_mm;
        let half = half_mm(span);
        if self.bend <= 0.0 {
            lever.spread += half / scale_mm;
            return Some((lever, mu, 1.0));
        }
        if half <= 0.0 {
            return Some((lever, mu, 1.0));
        }
        let (turn, angle) = (half * self.bend, mu.atan());
        if turn + angle > WIDEST_RAD {
            return None;
        }
        let wider = (turn + angle).tan();
        lever.spread += (turn.sin() + (1.0 - turn.cos()) * wider) / self.bend / scale_mm;
        Some((lever, wider, (angle - turn).max(0.0).cos() / angle.cos()))
    }

    /// Forces, each with a range of torques, whose hull, with 0 in it, holds the generators of every contact with friction
    /// `mu` on a piece of an arc. The forces are longer by `longer`, which is no less than 1 / cos of half the turn.
    fn turned(&self, span: Span, mu: f64, longer: f64, add: &mut impl FnMut([f64; 2], [f64; 2])) {
        let turn = self.half_turn(span);
        let about_centre = mu / self.edge.curvature() / self.scene.frame().scale_mm * longer * (1.0 - turn.cos());
        let ends = if turn > 0.0 { &span[..] } else { &span[..1] };
        for &end in ends {
            let lever = self.at_middle([end, end]);
            for (m, change) in [(mu, about_centre), (-mu, -about_centre)] {
                let force = (lever.normal + lever.tangent * m) * longer;
                let torque = (lever.normal_torque + m * lever.tangent_torque) * longer;
                let other = torque - change;
                add([force.x, force.y], [torque.min(other), torque.max(other)]);
                if mu <= 0.0 {
                    break;
                }
            }
        }
    }

    /// How fast the torque over l of a unit normal force grows along the edge, and how far it turns, both for each mm.
    pub(super) fn per_mm(&self) -> (f64, f64) {
        (self.torque_per_mm, self.edge.curvature())
    }

    /// How far the wrench of a unit normal force moves, at most, from the middle of a piece of an arc to anywhere on it,
    /// for forces applied up to `half_height` (over l) above or below the plane; 0 on a straight edge, whose spread says it.
    pub(super) fn wander(&self, span: Span, half_height: f64) -> f64 {
        if self.bend <= 0.0 {
            return 0.0;
        }
        let (turn, lever) = (self.half_turn(span), self.at_middle(span));
        let radius = 1.0 / self.bend / self.scene.frame().scale_mm;
        let arm = lever.normal_torque.hypot(lever.tangent_torque) + radius * turn + half_height;
        turn * self.mu.hypot(1.0) * (radius + arm).hypot(1.0)
    }

    /// Distance to the nearer end of the stretch, mm: the largest on a piece.
    pub(super) fn room_mm(&self, span: Span) -> f64 {
        let centre = middle(self.ends).clamp(span[0], span[1]);
        (centre - self.ends[0]).min(self.ends[1] - centre).max(0.0)
    }

    fn stand(&self, along_mm: f64) -> (Point2<f64>, Vector2<f64>) {
        (self.edge.point_at(along_mm), self.edge.normal_at(along_mm))
    }

    /// How far the body of a finger moves from the middle of a piece, at most, mm.
    fn moves_mm(&self, span: Span, hand: &Hand) -> f64 {
        let size = match hand.tip {
            Tip::Pin => hand.pin_radius_mm,
            Tip::Pad => hand.pad_width_mm.hypot(hand.pad_depth_mm),
        };
        half_mm(span) * (1.0 + self.bend * size)
    }
}

/// The contacts over a box, each finger's friction as `mu_of` says; nothing where an arc turns too far.
pub(super) fn contacts_over(rails: &[&Rail<'_>], spans: &[Span], mu_of: impl Fn(&Rail<'_>) -> f64) -> Option<Contacts> {
    let mut contacts = Contacts::none();
    for (rail, span) in rails.iter().zip(spans) {
        contacts.push(rail.over(*span, mu_of(rail))?);
    }
    Some(contacts)
}

/// Most forces that cover a box: two at either end of each piece.
const MOST_COVERING: usize = 2 * MOST_DIRECTIONS;

/// Closure, quality and placement over a box with fingers on arcs: no number is below that of any placement in the box,
/// where that is closed. Nothing where an arc turns too far.
#[expect(clippy::float_cmp, reason = "equal means copied from the same setting, digit for digit")]
pub(super) fn score_over(rails: &[&Rail<'_>], spans: &[Span], mu_of: impl Fn(&Rail<'_>) -> f64) -> Option<PlanarScore> {
    let turns = rails.iter().zip(spans).map(|(rail, span)| rail.half_turn(*span));
    let turn = turns.fold(0.0, f64::max);
    if turn > WIDEST_TURN_RAD {
        return None;
    }
    // All forces longer by the same: where they have one friction they end on one circle, as the kernel wants them. That
    // takes nothing from a hull with 0 in it.
    let longer = 1.0 / turn.cos();
    let (mut forces, mut torques) = ([[0.0; 2]; MOST_COVERING], [[0.0; 2]; MOST_COVERING]);
    let mut n = 0;
    let mut add = |force, torque| {
        (forces[n], torques[n]) = (force, torque);
        n += 1;
    };
    let mut alike = true;
    for (rail, span) in rails.iter().zip(spans) {
        let mu = mu_of(rail);
        alike &= mu == mu_of(rails[0]);
        if rail.bend > 0.0 {
            rail.turned(*span, mu, longer, &mut add);
            continue;
        }
        let (lever, mu, _) = rail.over(*span, mu)?;
        for m in [mu, -mu] {
            let force = (lever.normal + lever.tangent * m) * longer;
            add([force.x, force.y], lever.torques(m).map(|torque| torque * longer));
            if mu <= 0.0 {
                break;
            }
        }
    }
    let polygon = Polygon::<MOST_COVERING>::new(&forces[..n]);
    let mut score = polygon.bounds(&polygon.heights(&torques[..n]));
    // Forces of several lengths need not end in convex position, and the bounds be far off.
    if !alike && !score.certain && 2 * n <= MOST_GENERATORS {
        let mut generators = [Vector3::zeros(); MOST_GENERATORS];
        for (pair, ([x, y], torques)) in generators.chunks_exact_mut(2).zip(forces.iter().zip(&torques[..n])) {
            pair.copy_from_slice(&torques.map(|torque| Vector3::new(*x, *y, torque)));
        }
        score = quality::by_definition(&generators[..2 * n]);
    }
    // Merged directions move a generator by less.
    score.signed_quality += CERTAIN;
    Some(score)
}

/// Whether fingers keep their gaps, and when they cannot.
pub(super) struct Gaps<'a> {
    hand: &'a Hand,
    /// Fingers may stand as near to one another as they like.
    any: bool,
}

impl<'a> Gaps<'a> {
    pub(super) fn of(hand: &'a Hand) -> Self {
        Self { hand, any: hand.tip == Tip::Pin && 2.0 * hand.pin_radius_mm + hand.gap_mm <= 0.0 }
    }

    /// True when fingers at these positions keep the hand's gap.
    pub(super) fn kept(&self, rails: &[&Rail<'_>], at: &[f64]) -> bool {
        self.any
            || (1..at.len()).all(|i| {
                let a = rails[i].stand(at[i]);
                (0..i).all(|j| hand::apart(self.hand, a, rails[j].stand(at[j])))
            })
    }

    /// True when two fingers come too near wherever they stand in the box: they do in the middle of it even when both are
    /// made smaller, or the gap less, by as much as they can move.
    pub(super) fn never_kept(&self, rails: &[&Rail<'_>], spans: &[Span]) -> bool {
        !self.any
            && (1..spans.len()).any(|i| (0..i).any(|j| self.never_apart([rails[i], rails[j]], [spans[i], spans[j]])))
    }

    fn never_apart(&self, rails: [&Rail<'_>; 2], spans: [Span; 2]) -> bool {
        let moves = rails[0].moves_mm(spans[0], self.hand) + rails[1].moves_mm(spans[1], self.hand);
        let mut smaller = *self.hand;
        smaller.gap_mm = (self.hand.gap_mm - moves).max(0.0);
        let inward = (moves - self.hand.gap_mm).max(0.0) / 2.0;
        let mut stands = [0, 1].map(|i| rails[i].stand(middle(spans[i])));
        match self.hand.tip {
            Tip::Pin => {
                // Two axes this near stay nearer than they may: the circles are shrunk about their axes.
                let axes = stands.map(|(point, normal)| point - normal * self.hand.pin_radius_mm);
                let least = 2.0 * self.hand.pin_radius_mm + self.hand.gap_mm - moves;
                (axes[0] - axes[1]).norm() < least * (1.0 - ROUNDING)
            }
            Tip::Pad => {
                if inward > 0.0 {
                    // Each rectangle is eroded by `inward` on all sides.
                    let deep = self.hand.pad_depth_mm - 2.0 * inward;
                    smaller.pad_width_mm = self.hand.pad_width_mm - 2.0 * inward;
                    smaller.pad_depth_mm = deep;
                    if deep <= 0.0 || smaller.pad_width_mm <= 0.0 {
                        return false;
                    }
                    for (point, normal) in &mut stands {
                        *point -= *normal * inward;
                    }
                }
                smaller.gap_mm *= 1.0 - ROUNDING;
                !hand::apart(&smaller, stands[0], stands[1])
            }
        }
    }
}

/// Touching is allowed up to rounding of the positions themselves.
const ROUNDING: f64 = 1e-9;
