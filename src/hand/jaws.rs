//! Parallel closing: two fingers on one line, facing each other.
//!
//! The line is the *jaw axis*, the direction midway between one inward normal and the reverse of the other. An outside
//! grip presses from both sides on what lies between the faces; an inside grip stands in a hole or slot and presses
//! outward.

use super::Hand;
use nalgebra::{Point2, Vector2};

/// Largest angle between one inward normal and the reverse of the other, rad: half a degree, within what the play of
/// common grippers takes up (common practice, no source).
pub const PARALLEL_RAD: f64 = 0.5 * std::f64::consts::PI / 180.0;

/// Where a pair of jaws stands. Lengths in mm, local frame.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Jaws {
    /// Midway between the two contacts.
    pub centre: Point2<f64>,
    /// Direction of the jaw axis from the first contact to the second, counter-clockwise from +x, -pi to pi.
    pub angle_rad: f64,
    /// Distance between the two faces along the axis.
    pub opening_mm: f64,
    /// True when the jaws stand between the faces and press outward.
    pub inside: bool,
}

/// Why two contacts cannot be gripped by parallel jaws.
#[derive(Debug, Clone, Copy, PartialEq, thiserror::Error)]
pub enum JawFault {
    /// The faces are not parallel, or look the same way.
    #[error(
        "the two faces are {off_deg:.4} degrees away from facing each other; parallel jaws take {most_deg} degrees"
    )]
    NotParallel {
        /// Angle between one inward normal and the reverse of the other, degrees, 0 to 180.
        off_deg: f64,
        /// The limit, degrees.
        most_deg: f64,
    },
    /// The contacts do not stand on one line along the jaw axis.
    #[error("the two contacts are {off_mm:.4} mm out of line across the jaws; move one of them by that much")]
    NotFacing {
        /// Offset of the second contact from the jaw axis through the first, mm.
        off_mm: f64,
    },
    /// The jaws do not open so far, or do not close so far.
    #[error("the two faces are {mm:.4} mm apart; the jaws open from {least} mm to {most} mm")]
    Opening {
        /// Distance between the faces, mm.
        mm: f64,
        /// Smallest opening of the hand, mm.
        least: f64,
        /// Largest opening of the hand, mm.
        most: f64,
    },
}

/// Where parallel jaws stand that touch at two contact points with these inward normals. Whether the fingers keep clear
/// of each other is [`super::apart`]'s question, and whether each of them fits that of the stretches.
///
/// # Errors
/// The first of: faces not parallel, contacts out of line, opening out of the hand's range.
pub fn jaws_at(hand: &Hand, a: (Point2<f64>, Vector2<f64>), b: (Point2<f64>, Vector2<f64>)) -> Result<Jaws, JawFault> {
    let off = off_parallel_rad(a.1, b.1);
    if !(off <= PARALLEL_RAD) {
        return Err(JawFault::NotParallel { off_deg: off.to_degrees(), most_deg: PARALLEL_RAD.to_degrees() });
    }
    let pressing = (a.1 - b.1).normalize();
    let between = b.0 - a.0;
    let off_mm = pressing.perp(&between);
    if !(off_mm.abs() <= out_of_line_mm(between.norm())) {
        return Err(JawFault::NotFacing { off_mm });
    }
    let along = pressing.dot(&between);
    let inside = along < 0.0;
    let (axis, mm) = if inside { (-pressing, -along) } else { (pressing, along) };
    let [least, most] = hand.opening_mm;
    // A hair outside still counts, so that a grip that went through a file in decimal is found again.
    let hair = 1e-9 * (1.0 + mm);
    if !(mm >= least - hair && mm <= most + hair) {
        return Err(JawFault::Opening { mm, least, most });
    }
    Ok(Jaws { centre: a.0 + between / 2.0, angle_rad: axis.y.atan2(axis.x), opening_mm: mm, inside })
}

/// Angle between one inward normal and the reverse of another, rad, 0 to pi.
pub(super) fn off_parallel_rad(a: Vector2<f64>, b: Vector2<f64>) -> f64 {
    a.perp(&b).abs().atan2(-a.dot(&b))
}

/// How far two contacts at a distance may stand out of line, mm: rounding of positions that went through a file.
pub(super) fn out_of_line_mm(distance_mm: f64) -> f64 {
    1e-6 * distance_mm + 1e-9
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::f64::consts::{FRAC_PI_2, PI};

    fn spot(x: f64, y: f64, normal_deg: f64) -> (Point2<f64>, Vector2<f64>) {
        let angle = normal_deg.to_radians();
        (Point2::new(x, y), Vector2::new(angle.cos(), angle.sin()))
    }

    fn hand(least: f64, most: f64) -> Hand {
        Hand { opening_mm: [least, most], ..Hand::default() }
    }

    /// Elementary geometry: a bar 20 mm high, gripped from below and above, and a slot of 20 mm gripped from within.
    #[test]
    fn a_bar_from_outside_and_a_slot_from_inside() {
        let (below, above) = (spot(7.0, 0.0, 90.0), spot(7.0, 20.0, -90.0));
        let jaws = jaws_at(&hand(5.0, 50.0), below, above).unwrap();
        assert!((jaws.centre - Point2::new(7.0, 10.0)).norm() < 1e-15 && !jaws.inside);
        assert!((jaws.angle_rad - FRAC_PI_2).abs() < 1e-15 && (jaws.opening_mm - 20.0).abs() < 1e-15);
        let back = jaws_at(&hand(5.0, 50.0), above, below).unwrap();
        assert!((back.angle_rad + FRAC_PI_2).abs() < 1e-15);
        let slot = jaws_at(&hand(5.0, 50.0), spot(0.0, 3.0, 180.0), spot(20.0, 3.0, 0.0)).unwrap();
        assert!(slot.inside && (slot.opening_mm - 20.0).abs() < 1e-15 && slot.angle_rad.abs() < 1e-15);
        let slot = jaws_at(&hand(5.0, 50.0), spot(20.0, 3.0, 0.0), spot(0.0, 3.0, 180.0)).unwrap();
        assert!((slot.angle_rad.abs() - PI).abs() < 1e-15);
    }

    #[test]
    fn each_fault_has_its_numbers_and_words() {
        let hand = hand(5.0, 50.0);
        let below = spot(0.0, 0.0, 90.0);
        let fault = |b| jaws_at(&hand, below, b).unwrap_err();
        let JawFault::NotParallel { off_deg, .. } = fault(spot(0.0, 20.0, -89.4)) else { panic!() };
        assert!((off_deg - 0.6).abs() < 1e-12);
        assert!(jaws_at(&hand, below, spot(-20.0 * 0.2_f64.to_radians().tan(), 20.0, -89.6)).is_ok_and(|j| !j.inside));
        let JawFault::NotParallel { off_deg, .. } = fault(spot(0.0, 20.0, 90.0)) else { panic!() };
        assert!((off_deg - 180.0).abs() < 1e-12);
        let JawFault::NotFacing { off_mm } = fault(spot(0.3, 20.0, -90.0)) else { panic!() };
        assert!((off_mm.abs() - 0.3).abs() < 1e-12);
        let short = fault(spot(0.0, 4.0, -90.0));
        let JawFault::Opening { mm, .. } = short else { panic!() };
        assert!((mm - 4.0).abs() < 1e-15);
        assert_eq!(short.to_string(), "the two faces are 4.0000 mm apart; the jaws open from 5 mm to 50 mm");
        assert!(matches!(fault(spot(0.0, 50.1, -90.0)), JawFault::Opening { .. }));
        assert!(jaws_at(&hand, below, spot(0.0, 50.0, -90.0)).is_ok());
        // What is no number is a fault, not a grip.
        assert!(jaws_at(&hand, below, (Point2::new(f64::NAN, 20.0), -below.1)).is_err());
        assert!(jaws_at(&hand, below, (Point2::new(0.0, 20.0), Vector2::new(f64::NAN, 0.0))).is_err());
        assert!(jaws_at(&hand, below, (Point2::new(0.0, 20.0), Vector2::zeros())).is_err());
    }
}
