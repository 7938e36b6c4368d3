//! Load cases: what tries to move the part in the hand.

/// One load case as the setup states it. Accelerations in m/s2, forces in N, positions in mm in the part's file frame.
#[derive(Debug, Clone, PartialEq)]
pub struct LoadCase {
    /// Name for people.
    pub name: String,
    /// Direction of gravity in the part frame; (0, 0, -1) when the part lies flat.
    pub gravity: [f64; 3],
    /// Acceleration of the centre of mass.
    pub acceleration_m_s2: [f64; 3],
    /// Angular acceleration about z.
    pub angular_acceleration_rad_s2: f64,
    /// An acceleration of this size in any direction of the part plane.
    pub any_direction_m_s2: f64,
    /// Outside force.
    pub force_n: [f64; 3],
    /// Where the outside force acts.
    pub at_mm: [f64; 3],
    /// Factor on the whole load.
    pub safety: f64,
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
        }
    }
}
