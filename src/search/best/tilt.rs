//! Tilt: boxes excluded by directions that turn with the placement.
//!
//! A grasp of quality q satisfies `q |v| <= max over its generators w of v . w` for *every* direction v, so a direction may be
//! chosen anew for each placement x of a box: v(x) affine in x, turning with the facet of the wrench set that it is normal to in
//! the middle of the box. Then, to the first order, the generators the facet touches stay level in direction v(x), and all of
//! them push as far as one number does that is linear in x. What is not of the first order is bounded: generators that
//! overtake the facet, the turn of v itself times that of a force, the bow of an arc. Since `|v(x)| >= u . v(x)` for the
//! unit vector u along v in the middle, a placement of quality above B keeps the linear inequality
//!
//! `0 <= c + a . x` with `c + a . x = (facet's push at x) + (bounded rest) - B u . v(x)`
//!
//! for every facet. Where a mix of these inequalities, none counting negative (Farkas 1902), fails all over the box, the box
//! holds nothing above B. Near a best placement the facets pull in different directions and their mix leaves an error of the
//! second order in the width of the box, where a bound by hulls has one of the first. The same with a torque in place of
//! `q |v|` goes for the placement tolerance on straight edges, and with 0 for closure.

use super::rail::{Rail, Span, half_mm};
use crate::hand::FingerCount;
use crate::mechanics::Lever;
use crate::mechanics::force_polygon::{Facet, ForcePolygon};
use crate::mechanics::wrench::MOST_DIRECTIONS;
use nalgebra::Vector3;

/// What a placement has to exceed to be of interest.
#[derive(Clone, Copy)]
pub(super) struct Target {
    /// Push in a unit direction.
    pub push: f64,
    /// Torque over l beside it.
    pub torque: f64,
}

/// Facets of a wrench set: a wall for each force, and two caps.
const MOST_FACETS: usize = 3 * MOST_DIRECTIONS;
/// Steps of the search for a mix.
const MIXES: usize = 8;
/// What rounding may amount to in an inequality between numbers of size 1.
const HAIR: f64 = 1e-10;
/// A cap nearly as steep as a wall is no help.
const FLATTEST: f64 = 1e-6;

/// A cone edge's force in the middle of a box, and how it moves along the edge.
#[derive(Clone, Copy)]
struct Push {
    finger: usize,
    wrench: Vector3<f64>,
    /// Torque it gains or loses from end to end of a pad.
    spread: f64,
    /// Change for each mm.
    slope: Vector3<f64>,
    /// Minus the second derivative by the angle turned.
    bow: Vector3<f64>,
    size: f64,
}

/// `c + a . x`, x from the middle of the box.
#[derive(Clone, Copy)]
struct Inequality {
    c: f64,
    a: [f64; FingerCount::MOST],
}

/// The contacts of a box: those in its middle and how they move.
pub(super) struct Tilt<'a> {
    halves: [f64; FingerCount::MOST],
    turns: [f64; FingerCount::MOST],
    k: usize,
    pushes: [Push; MOST_DIRECTIONS],
    polygon: &'a ForcePolygon,
    torques: [[f64; 2]; MOST_DIRECTIONS],
}

impl<'a> Tilt<'a> {
    /// Contacts in the middle of a box, cone-edge forces multiplied by `scale_of` their friction; `polygon` is that of these
    /// forces.
    pub(super) fn new(
        rails: &[&Rail<'_>],
        spans: &[Span],
        levers: &[Lever],
        mus: &[f64],
        scale_of: impl Fn(f64) -> f64,
        polygon: &'a ForcePolygon,
    ) -> Self {
        let zero = Vector3::zeros();
        let none = Push { finger: 0, wrench: zero, spread: 0.0, slope: zero, bow: zero, size: 0.0 };
        let mut tilt = Self {
            halves: [0.0; FingerCount::MOST],
            turns: [0.0; FingerCount::MOST],
            k: rails.len(),
            pushes: [none; MOST_DIRECTIONS],
            polygon,
            torques: [[0.0; 2]; MOST_DIRECTIONS],
        };
        for (finger, ((rail, span), (lever, &mu))) in rails.iter().zip(spans).zip(levers.iter().zip(mus)).enumerate() {
            tilt.halves[finger] = half_mm(*span);
            tilt.turns[finger] = rail.half_turn(*span);
            let (torque_per_mm, turn_per_mm) = rail.per_mm();
            let scale = scale_of(mu);
            for (at, m) in [(2 * finger, mu), (2 * finger + 1, -mu)] {
                let (force, turned) = (lever.normal + lever.tangent * m, lever.normal * m - lever.tangent);
                let torque = lever.normal_torque + m * lever.tangent_torque;
                let turned_torque = m * lever.normal_torque - lever.tangent_torque;
                let slope = turned * turn_per_mm;
                let about_centre = if turn_per_mm == 0.0 { 0.0 } else { m * torque_per_mm / turn_per_mm };
                tilt.pushes[at] = Push {
                    finger,
                    wrench: Vector3::new(force.x, force.y, torque) * scale,
                    spread: lever.spread * scale,
                    slope: Vector3::new(slope.x, slope.y, torque_per_mm + turn_per_mm * turned_torque) * scale,
                    bow: Vector3::new(force.x, force.y, torque - about_centre) * scale,
                    size: force.norm() * scale,
                };
                tilt.torques[at] = lever.torques(m).map(|torque| torque * scale);
            }
        }
        tilt
    }

    /// By how much less than the target even, in its unit (a push or a torque), nothing in the box exceeds; nothing when the
    /// target itself may be exceeded.
    pub(super) fn short_by(&self, target: Target) -> Option<f64> {
        let mut all = [Inequality { c: 0.0, a: [0.0; FingerCount::MOST] }; MOST_FACETS];
        let (mut n, mut longest) = (0, 1.0_f64);
        self.polygon.facets(&self.torques[..2 * self.k], |facet| {
            if let Some((inequality, longer)) = self.inequality(&facet, target) {
                all[n] = inequality;
                n += 1;
                longest = longest.max(longer);
            }
        });
        // A lower target lifts each inequality by no more than so much.
        self.least_of_mixes(&all[..n]).map(|least| -least / longest)
    }

    /// What a placement above the target keeps because of one facet, and how much longer than in the middle v gets, as a
    /// factor.
    fn inequality(&self, facet: &Facet, target: Target) -> Option<(Inequality, f64)> {
        let corners = &facet.on[..facet.corners];
        let size = facet.normal.norm();
        // On a cap the torque share of v stays as it is, on a wall 0.
        let scale = if facet.corners == 3 { facet.normal.z.abs() } else { size };
        if !(scale > FLATTEST * size) {
            return None;
        }
        let v = facet.normal / scale;
        let length = v.norm();
        let unit = v / length;
        // How fast each corner rises, what that adds to the push, and how it turns v, so that the others stay level.
        let mut rises = [0.0; 3];
        let (mut adds, mut turns) = ([0.0; 3], [Vector3::zeros(); 3]);
        let force = |i: usize| self.pushes[corners[i]].wrench.xy();
        for (i, &corner) in corners.iter().enumerate() {
            rises[i] = self.pushes[corner].slope.dot(&v);
        }
        if facet.corners == 3 {
            let (a, b, c) = (force(0), force(1), force(2));
            let area = (b - a).perp(&(c - a));
            for (i, (from, to)) in [(b, c), (c, a), (a, b)].into_iter().enumerate() {
                adds[i] = from.perp(&to) / area;
                let side = to - from;
                turns[i] = Vector3::new(side.y, -side.x, 0.0) / area;
            }
        } else {
            let along = Vector3::new(-v.y, v.x, 0.0);
            let [a, b] = [0, 1].map(|i| force(i).dot(&along.xy()));
            (adds[0], adds[1]) = (b / (b - a), -a / (b - a));
            (turns[0], turns[1]) = (along / (b - a), -along / (b - a));
        }
        let mut turning = 0.0;
        for (i, &corner) in corners.iter().enumerate() {
            turning += rises[i].abs() * turns[i].norm() * self.halves[self.pushes[corner].finger];
        }
        let reach = |push: &Push| push.wrench.dot(&v) + push.spread * v.z.abs();
        let level = reach(&self.pushes[corners[0]]);
        // What any force pushes beyond the facet, at most.
        let mut beyond = 0.0_f64;
        for push in &self.pushes[..2 * self.k] {
            let mut coefficients = [0.0; FingerCount::MOST];
            let rise = push.slope.dot(&v);
            coefficients[push.finger] = rise;
            for (i, &corner) in corners.iter().enumerate() {
                coefficients[self.pushes[corner].finger] += rises[i] * (push.wrench.dot(&turns[i]) - adds[i]);
            }
            let mut own = reach(push) - level;
            for (coefficient, half) in coefficients.iter().zip(&self.halves[..self.k]) {
                own += coefficient.abs() * half;
            }
            let turn = self.turns[push.finger];
            if turn > 0.0 {
                let half = self.halves[push.finger];
                own += (-push.bow.dot(&v)).max(0.0) * (1.0 - turn.cos())
                    + rise.abs() * half / turn * (turn - turn.sin())
                    + turning * push.size * turn;
            }
            beyond = beyond.max(own);
        }
        let mut inequality = Inequality {
            c: (level + beyond - target.torque * v.z.abs()) / length - target.push,
            a: [0.0; FingerCount::MOST],
        };
        for (i, &corner) in corners.iter().enumerate() {
            let own = rises[i] * (adds[i] - target.push * unit.dot(&turns[i])) / length;
            inequality.a[self.pushes[corner].finger] += own;
        }
        self.most(&inequality).is_finite().then_some((inequality, 1.0 + turning / length))
    }

    /// The largest an inequality's left side gets in the box.
    fn most(&self, inequality: &Inequality) -> f64 {
        let swing = inequality.a.iter().zip(&self.halves[..self.k]).map(|(a, half)| a.abs() * half);
        inequality.c + swing.sum::<f64>()
    }

    /// The largest the left side of some mix of the inequalities gets in the box, where that is below 0.
    fn least_of_mixes(&self, all: &[Inequality]) -> Option<f64> {
        let lowest = all.iter().min_by(|a, b| self.most(a).total_cmp(&self.most(b)));
        let mut mixed = *lowest?;
        let mut least = self.most(&mixed);
        for _ in 0..MIXES {
            let (before, from) = (least, mixed);
            for other in all {
                // Along the way from one to the other the most is convex and linear between zeros of the coefficients.
                for i in 0..self.k {
                    let share = from.a[i] / (from.a[i] - other.a[i]);
                    if !(share > 0.0 && share < 1.0) {
                        continue;
                    }
                    let mut own = Inequality { c: from.c + share * (other.c - from.c), a: from.a };
                    for (a, b) in own.a.iter_mut().zip(&other.a) {
                        *a += share * (b - *a);
                    }
                    let most = self.most(&own);
                    if most < least {
                        (least, mixed) = (most, own);
                    }
                }
            }
            if !(least < before) {
                break;
            }
        }
        Some(least + HAIR).filter(|least| *least < 0.0)
    }
}
