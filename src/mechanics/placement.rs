//! Placement tolerance: how far may every finger be off along its edge, all at once and in the worst combination?
//!
//! Moving a contact by s along its edge adds `s fn` to its torque and nothing else. Closure therefore fails for offsets
//! up to s iff s reaches the pure torque the grasp can resist per newton of total normal force, the smaller of the two
//! senses: two linear programs of three rows ([`super::program::pure_torque`]), or for the kernel the height at which
//! the hull's caps cross the torque axis.
//!
//! # On arcs
//! A contact that slides by s along an arc of radius R turns its normal by phi = s / R and leaves its tangent by
//! R (1 - cos phi). The tolerance is then a guarantee, not the exact limit: the turned cone still holds the cone of the old
//! normal with friction angle atan mu - phi, and the shift changes the torque of a generator of that smaller cone, with
//! friction mu', by at most R (sin phi + (1 - cos phi) mu'). So closure survives every combination of offsets up to s as
//! long as the pure torque of the smaller cones exceeds the largest such change. The tolerance is the largest s for which
//! it does; with straight edges alone it is the exact limit again.

use super::force_polygon::PlanarScore;
use super::quality;
use super::root;
use super::wrench::{Lever, MOST_GENERATORS, Wrenches};
use nalgebra::Vector3;

/// What limits the placement.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Governor {
    /// Closure would be lost.
    Closure,
    /// This finger would leave its stretch.
    Stretch {
        /// The finger, from 0.
        finger: usize,
    },
}

/// Placement tolerance and what governs it, mm.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Placement {
    /// The tolerance: the smaller of the two below.
    pub mm: f64,
    /// Offset at which closure is lost in the worst combination.
    pub torque_mm: f64,
    /// Smallest distance of a finger to the end of its stretch.
    pub room_mm: f64,
    /// Which of the two is smaller.
    pub governor: Governor,
}

/// Offset in mm at which closure is lost; 0 when the grasp is not closed.
pub fn torque_mm(score: &PlanarScore, scale_mm: f64) -> f64 {
    (score.torque_up.min(score.torque_down) * scale_mm).max(0.0)
}

/// Contacts of which some stand on arcs, as the guarantee on arcs sees them.
#[derive(Debug, Clone, Copy)]
pub struct OnArcs<'a> {
    /// Levers, finger after finger.
    pub levers: &'a [Lever],
    /// Friction coefficient of each contact.
    pub mus: &'a [f64],
    /// Curvature of each contact's edge, 1/mm.
    pub curvatures: &'a [f64],
    /// Torque scale, mm.
    pub scale_mm: f64,
}

/// Width of the final bracket on the tolerance, as a part of the torque scale.
const WIDTH: f64 = 1e-11;

impl OnArcs<'_> {
    /// Friction left to each contact, and the largest change of a generator's torque per newton, at offsets up to
    /// `offset_mm`; nothing when a contact turns farther than its friction angle.
    pub fn left_at(&self, offset_mm: f64) -> Option<(Vec<f64>, f64)> {
        let mut largest = offset_mm;
        let mut left = Vec::with_capacity(self.mus.len());
        for (mu, curvature) in self.mus.iter().zip(self.curvatures) {
            let turn = offset_mm * curvature.abs();
            let angle = mu.atan() - turn;
            if angle < 0.0 {
                return None;
            }
            let mu = angle.tan();
            if turn > 0.0 {
                largest = largest.max((turn.sin() + (1.0 - turn.cos()) * mu) / curvature.abs());
            }
            left.push(mu);
        }
        Some((left, largest))
    }

    /// Above 0 when closure survives every combination of offsets up to `offset_mm`; a torque over l.
    pub fn spare_at(&self, offset_mm: f64) -> f64 {
        let Some((left, change)) = self.left_at(offset_mm) else { return f64::NEG_INFINITY };
        let mut generators = [Vector3::zeros(); MOST_GENERATORS];
        let mut n = 0;
        for (lever, &mu) in self.levers.iter().zip(&left) {
            let own = lever.generators(mu);
            generators[n..n + own.len()].copy_from_slice(&own);
            n += own.len();
        }
        let score = quality::by_definition(&generators[..n]);
        score.torque_up.min(score.torque_down) - change / self.scale_mm
    }

    /// The tolerance, mm: the largest offset with something to spare, from below. `straight_mm` is what it would be on
    /// straight edges, an upper bound.
    pub fn tolerance_mm(&self, straight_mm: f64) -> f64 {
        if !(straight_mm > 0.0) {
            return 0.0;
        }
        let lost = |offset_mm: f64| -self.spare_at(offset_mm);
        let (at_none, at_most) = (lost(0.0), lost(straight_mm));
        if at_most <= 0.0 {
            return straight_mm;
        }
        if at_none > 0.0 {
            return 0.0;
        }
        // The root finder wants finite values; far beyond the limit any positive one will do.
        let lost = |offset_mm: f64| lost(offset_mm).min(1.0);
        root::bracket(lost, (0.0, at_none), (straight_mm, at_most.min(1.0)), WIDTH * self.scale_mm).0
    }
}

impl Placement {
    /// From the wrenches, their score, and each finger's room on its stretch.
    pub fn of(wrenches: &Wrenches, score: &PlanarScore, scale_mm: f64, rooms_mm: &[f64]) -> Self {
        let mut torque_mm = torque_mm(score, scale_mm);
        let (levers, mus, curvatures) = (wrenches.levers(), wrenches.mus(), wrenches.curvatures());
        if curvatures.iter().any(|&curvature| curvature != 0.0) {
            torque_mm = OnArcs { levers, mus, curvatures, scale_mm }.tolerance_mm(torque_mm);
        }
        let (finger, room) = rooms_mm
            .iter()
            .copied()
            .enumerate()
            .fold((0, f64::INFINITY), |least, (finger, room)| if room < least.1 { (finger, room) } else { least });
        let room_mm = room.max(0.0);
        if room_mm < torque_mm {
            Self { mm: room_mm, torque_mm, room_mm, governor: Governor::Stretch { finger } }
        } else {
            Self { mm: torque_mm, torque_mm, room_mm, governor: Governor::Closure }
        }
    }
}
