//! Moment labels: a picture of every wrench the fingers of a grasp can bring up (Mason 1991, "Two graphical methods for
//! planar contact problems").
//!
//! A point of the plane is labelled + when every such wrench has a moment about it that is not negative, - when none has
//! a positive one. Every wrench is a sum of cone-edge forces with weights that are not negative, and moments add, so the
//! forces themselves decide: the force f at p has the moment `(p - q) x f` about q, and one sign has to suit them all. A
//! pad acts through both ends of its face. Each force leaves one half of the plane for a label, so the points of a label
//! are a convex set.
//!
//! Nothing the fingers do resists a turn about a labelled point in the label's own sense, so a closed grasp leaves no
//! labelled point. The reverse does not hold: where the part can only slide, the labels lie at infinity.

use super::Contact;
use super::wrench::cross;
use nalgebra::{Point2, Vector2};

/// What all moments about a point have in common.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Label {
    /// None is negative, and some is positive: counter-clockwise.
    Plus,
    /// None is positive, and some is negative: clockwise.
    Minus,
    /// All are nought: every force goes through the point.
    Both,
}

/// Sense of a label, to ask for its region.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Sign {
    /// Counter-clockwise.
    Plus,
    /// Clockwise.
    Minus,
}

/// Moments of a unit normal force below this part of the lengths involved are rounding.
const ROUNDING: f64 = 1e-12;

/// The cone-edge forces of a grasp, each with the point it goes through.
#[derive(Debug, Clone, PartialEq)]
pub struct Labels {
    forces: Vec<(Point2<f64>, Vector2<f64>)>,
}

impl Labels {
    /// The forces of contacts: one or two directions, at one point or at both ends of a pad.
    pub fn of(contacts: &[Contact]) -> Self {
        let mut forces = Vec::with_capacity(4 * contacts.len());
        for contact in contacts {
            let tangent = Vector2::new(contact.normal.y, -contact.normal.x);
            let (ends, sides) = ([contact.half_width_mm, -contact.half_width_mm], [contact.mu, -contact.mu]);
            for &end in &ends[..if contact.half_width_mm > 0.0 { 2 } else { 1 }] {
                for &side in &sides[..if contact.mu > 0.0 { 2 } else { 1 }] {
                    forces.push((contact.point + tangent * end, contact.normal + tangent * side));
                }
            }
        }
        Self { forces }
    }

    /// The label of a point, in the frame of the contacts; nothing where the fingers can turn the part both ways.
    pub fn at(&self, q: Point2<f64>) -> Option<Label> {
        let (mut some_positive, mut some_negative) = (false, false);
        for &(point, force) in &self.forces {
            let arm = point - q;
            let moment = cross(arm, force);
            let rounding = ROUNDING * (point.coords.norm() + q.coords.norm()) * force.norm();
            some_positive |= moment > rounding;
            some_negative |= moment < -rounding;
            if some_positive && some_negative {
                return None;
            }
        }
        Some(match (some_positive, some_negative) {
            (true, _) => Label::Plus,
            (_, true) => Label::Minus,
            _ => Label::Both,
        })
    }

    /// The points of one label within a box, as a convex polygon, counter-clockwise; a line or a single point comes as a
    /// polygon without an area, no point as an empty one. Half-planes are cut off one after the other (Sutherland &
    /// Hodgman 1974).
    pub fn region(&self, sign: Sign, low: Point2<f64>, high: Point2<f64>) -> Vec<Point2<f64>> {
        let mut polygon = vec![low, Point2::new(high.x, low.y), high, Point2::new(low.x, high.y)];
        let size = low.coords.norm() + high.coords.norm();
        for &(point, force) in &self.forces {
            let way = if sign == Sign::Plus { force } else { -force };
            let rounding = ROUNDING * (point.coords.norm() + size) * force.norm();
            polygon = cut(&polygon, |q| cross(point - q, way), rounding);
        }
        polygon
    }
}

/// What a half-plane leaves of a convex polygon: the points where `value`, which is linear, is not below `-rounding`.
fn cut(polygon: &[Point2<f64>], value: impl Fn(Point2<f64>) -> f64, rounding: f64) -> Vec<Point2<f64>> {
    let mut left = Vec::with_capacity(polygon.len() + 1);
    for (i, &a) in polygon.iter().enumerate() {
        let b = polygon[(i + 1) % polygon.len()];
        let (at_a, at_b) = (value(a), value(b));
        if at_a >= -rounding {
            left.push(a);
        }
        if at_a.max(at_b) > rounding && at_a.min(at_b) < -rounding {
            left.push(a + (b - a) * (at_a / (at_a - at_b)));
        }
    }
    left
}
