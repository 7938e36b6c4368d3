//! Placement tolerance: how far may every finger be off along its edge, all at once and in the worst combination?
//!
//! Moving a contact by s along its edge adds `s fn` to its torque and nothing else. Closure therefore fails for offsets
//! up to s iff s reaches the pure torque the grasp can resist per newton of total normal force, the smaller of the two
//! senses: two linear programs of three rows ([`super::program::pure_torque`]), or for the kernel the height at which
//! the hull's caps cross the torque axis.

use super::force_polygon::PlanarScore;

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

impl Placement {
    /// From the score and each finger's room on its stretch.
    pub fn new(score: &PlanarScore, scale_mm: f64, rooms_mm: &[f64]) -> Self {
        let torque_mm = torque_mm(score, scale_mm);
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
