//! Load cases: what tries to move the part in the hand.

use super::spatial::Wrench;
use nalgebra::Vector3;

/// Standard acceleration of free fall, m/s2 (ISO 80000-3:2006, defined in 1901 by the CGPM).
pub const GRAVITY_M_S2: f64 = 9.80665;

/// Directions an acceleration "in any direction" is tried in. They are the corners of the polygon about the circle of
/// that acceleration; what is held is convex, so holding the corners is holding the circle.
const DIRECTIONS: usize = 16;

/// One load case as the setup states it. Accelerations in m/s2, forces in N, positions in mm in the part's file frame.
#[derive(Debug, Clone, PartialEq)]
pub struct LoadCase {
    /// Name for people.
    pub name: String,
    /// Direction of gravity in the part frame, of any length; (0, 0, -1) when the part lies flat, nought for none.
    pub gravity: [f64; 3],
    /// Acceleration of the centre of mass.
    pub acceleration_m_s2: [f64; 3],
    /// Angular acceleration about z.
    pub angular_acceleration_rad_s2: f64,
    /// An acceleration of this size in any direction of the part plane.
    pub any_direction_m_s2: f64,
    /// Outside force.
    pub force_n: [f64; 3],
    /// Where the outside force acts; z from the middle plane.
    pub at_mm: [f64; 3],
    /// Factor on the whole load.
    pub safety: f64,
    /// Part of the squeeze that is left, 0 to 1: less than 1 where air or power fails.
    pub squeeze_left: f64,
}

impl Default for LoadCase {
    /// The part's weight, lying flat, with a factor of 1.
    fn default() -> Self {
        Self {
            name: "load".to_owned(),
            gravity: [0.0, 0.0, -1.0],
            acceleration_m_s2: [0.0; 3],
            angular_acceleration_rad_s2: 0.0,
            any_direction_m_s2: 0.0,
            force_n: [0.0; 3],
            at_mm: [0.0; 3],
            safety: 1.0,
            squeeze_left: 1.0,
        }
    }
}

/// What of a part a load acts on.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Body {
    /// Mass, kg; 0 where no load needs it.
    pub mass_kg: f64,
    /// Polar moment of inertia about the centre of mass, kg m2.
    pub polar_kg_m2: f64,
    /// Centre of mass in the file frame, mm.
    pub com_mm: [f64; 2],
}

/// One load of a case: its safety factor is in it.
#[derive(Debug, Clone, PartialEq)]
pub struct Load {
    /// Force in N and torque over l in N about the centre of mass.
    pub wrench: Wrench,
    /// Direction of the acceleration from +x, degrees, where the case asks for any direction.
    pub direction_deg: Option<f64>,
}

impl LoadCase {
    /// True when the load depends on the mass.
    pub fn needs_mass(&self) -> bool {
        [self.gravity, self.acceleration_m_s2].concat().iter().any(|x| *x != 0.0)
            || self.angular_acceleration_rad_s2 != 0.0
            || self.any_direction_m_s2 != 0.0
    }

    /// The key of what would push or turn the part out of its plane, if anything does.
    pub fn out_of_plane(&self) -> Option<&'static str> {
        let in_plane_force = self.force_n[0] != 0.0 || self.force_n[1] != 0.0;
        if self.gravity[2] != 0.0 {
            Some("gravity")
        } else if self.acceleration_m_s2[2] != 0.0 {
            Some("acceleration_m_s2")
        } else if self.force_n[2] != 0.0 {
            Some("force_n")
        } else if in_plane_force && self.at_mm[2] != 0.0 {
            Some("at_mm")
        } else {
            None
        }
    }

    /// The loads of the case on a body, with torques over `scale_mm`: one, or one for each of 16 directions.
    ///
    /// `f = m (g ghat - a) + f_ext`, `m_z = -J alpha` and the moment of f_ext about the centre of mass, all times the
    /// safety factor.
    pub fn loads(&self, body: &Body, scale_mm: f64) -> Vec<Load> {
        let gravity = Vector3::from(self.gravity);
        // A direction so short that it has none pulls nowhere.
        let down = gravity.try_normalize(f64::MIN_POSITIVE).unwrap_or_default();
        let outside = Vector3::from(self.force_n);
        let arm = Vector3::from(self.at_mm) - Vector3::new(body.com_mm[0], body.com_mm[1], 0.0);
        let moment_n = arm.cross(&outside) / scale_mm;
        // kg m2/s2 is N m.
        let turning_n = -body.polar_kg_m2 * self.angular_acceleration_rad_s2 * 1000.0 / scale_mm;
        let load = |also: Vector3<f64>, direction_deg| {
            let acceleration = Vector3::from(self.acceleration_m_s2) + also;
            let f = (down * GRAVITY_M_S2 - acceleration) * body.mass_kg + outside;
            let wrench = Wrench::new(f.x, f.y, f.z, moment_n.x, moment_n.y, moment_n.z + turning_n) * self.safety;
            Load { wrench, direction_deg }
        };
        if self.any_direction_m_s2 == 0.0 {
            return vec![load(Vector3::zeros(), None)];
        }
        let size = self.any_direction_m_s2 / (std::f64::consts::PI / DIRECTIONS as f64).cos();
        let toward = |i: usize| {
            let deg = 360.0 * i as f64 / DIRECTIONS as f64;
            let (sin, cos) = deg.to_radians().sin_cos();
            load(Vector3::new(cos, sin, 0.0) * size, Some(deg))
        };
        (0..DIRECTIONS).map(toward).collect()
    }
}
