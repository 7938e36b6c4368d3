//! Escape: how the part gets out of an open grasp.
//!
//! For a direction u with `u . w <= 0` for every generator w, no finger force does positive work on the motion -u and
//! none resists it: the part may move with velocity (-ux, -uy) of the torque point and rate -u_tau / l.

use super::wrench::Frame;
use nalgebra::{Point2, Vector3};

/// Sense of turning, seen with z toward the viewer.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Sense {
    /// Clockwise.
    Clockwise,
    /// Counter-clockwise.
    CounterClockwise,
}

/// A motion nothing stops.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Escape {
    /// Pure translation.
    Slide {
        /// Toward this direction, degrees from +x.
        toward_deg: f64,
    },
    /// Rotation about a point.
    Turn {
        /// Rotation centre, local frame, mm.
        about: Point2<f64>,
        /// Sense.
        sense: Sense,
    },
}

/// Share of torque in u below which the motion is a translation.
const PURE: f64 = 1e-9;

impl Escape {
    /// The motion -u for a certificate direction u.
    pub fn along(u: &Vector3<f64>, frame: &Frame) -> Self {
        let motion = -u;
        if motion.z.abs() <= PURE * u.norm() {
            return Self::Slide { toward_deg: (motion.y + 0.0).atan2(motion.x + 0.0).to_degrees() };
        }
        let rate = motion.z / frame.scale_mm;
        let about = Point2::new(frame.about.x - motion.y / rate, frame.about.y + motion.x / rate);
        let sense = if rate > 0.0 { Sense::CounterClockwise } else { Sense::Clockwise };
        Self::Turn { about, sense }
    }
}
