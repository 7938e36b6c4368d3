//! A contact: where one finger presses on the part, with dry friction.

use nalgebra::{Point2, Vector2};

/// A contact with Coulomb friction: normal force `fn >= 0`, tangential force `|ft| <= mu fn` at every point of it.
///
/// A pin touches at one point of the edge. A flat pad touches along a piece of it; its force anywhere between is a mix
/// of forces at the two ends, so in the plane the two ends are exact.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Contact {
    /// Where, local frame, mm; the middle of a pad.
    pub point: Point2<f64>,
    /// Unit normal into the material.
    pub normal: Vector2<f64>,
    /// Friction coefficient at this contact.
    pub mu: f64,
    /// Half the length of edge a flat pad covers, mm; 0 for a point.
    pub half_width_mm: f64,
}

impl Contact {
    /// A contact at one point.
    pub fn at_point(point: Point2<f64>, normal: Vector2<f64>, mu: f64) -> Self {
        Self { point, normal, mu, half_width_mm: 0.0 }
    }
}
