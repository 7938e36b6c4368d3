//! A contact: one point where a finger presses on the part, with dry friction.

use nalgebra::{Point2, Vector2};

/// A point contact with Coulomb friction: normal force `fn >= 0`, tangential force `|ft| <= mu fn`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Contact {
    /// Where, local frame, mm.
    pub point: Point2<f64>,
    /// Unit normal into the material.
    pub normal: Vector2<f64>,
    /// Friction coefficient at this contact.
    pub mu: f64,
}
