//! Whether two fingers keep their distance.

use super::stretch::GRAZE;
use super::{Hand, Tip};
use nalgebra::{Point2, Vector2};

/// Touching is allowed up to rounding of the positions themselves: this fraction of the fingers' size.
const TOUCH: f64 = 1e-12;

/// True when two fingers with these contact points and inward normals keep the hand's gap: two circles for pins, two
/// rectangles for pads.
pub fn apart(hand: &Hand, a: (Point2<f64>, Vector2<f64>), b: (Point2<f64>, Vector2<f64>)) -> bool {
    match hand.tip {
        Tip::Pin => {
            let r = hand.pin_radius_mm;
            let between = (a.0 - a.1 * r) - (b.0 - b.1 * r);
            between.norm() >= (2.0 * r + hand.gap_mm) * (1.0 - TOUCH)
        }
        Tip::Pad => pads_apart(hand, a, b),
    }
}

/// What two fingers may be nearer than they should and still count as apart, mm.
pub(super) fn slack_mm(hand: &Hand) -> f64 {
    let size = match hand.tip {
        Tip::Pin => 2.0 * hand.pin_radius_mm,
        Tip::Pad => hand.pad_width_mm + hand.pad_depth_mm,
    };
    TOUCH * (size + hand.gap_mm)
}

fn pads_apart(hand: &Hand, a: (Point2<f64>, Vector2<f64>), b: (Point2<f64>, Vector2<f64>)) -> bool {
    let wide = hand.pad_width_mm / 2.0;
    // Without a gap, a face without depth still takes its place on the edge.
    let thinnest = if hand.gap_mm > 0.0 { 0.0 } else { GRAZE * hand.pad_width_mm };
    let deep = hand.pad_depth_mm.max(thinnest) / 2.0;
    let least = hand.gap_mm - slack_mm(hand);
    let between = (b.0 - b.1 * deep) - (a.0 - a.1 * deep);
    let square = between.norm_squared();
    // A pad lies within the circle through its corners, and holds one as wide as its shorter side.
    let (outer, inner) = (2.0 * wide.hypot(deep) + least, 2.0 * wide.min(deep) + least);
    if square >= outer * outer {
        return true;
    }
    if inner > 0.0 && square < inner * inner {
        return false;
    }
    // Two convex polygons are disjoint exactly when the normal of some side separates them (separating axis theorem).
    let (cos, sin) = (a.1.dot(&b.1).abs(), a.1.perp(&b.1).abs());
    let (wide_beside, deep_beside) = (wide * cos + deep * sin, deep * cos + wide * sin);
    let separation = [a.1, b.1].into_iter().fold(f64::NEG_INFINITY, |most, n| {
        let along = between.perp(&n).abs() - wide - wide_beside;
        most.max(along).max(between.dot(&n).abs() - deep - deep_beside)
    });
    if separation >= least {
        return true;
    }
    if separation < 0.0 {
        return false;
    }
    // The distance of disjoint polygons is that of some corner of one to the other.
    nearest_corner_square(between, a.1, b.1, wide, deep).min(nearest_corner_square(-between, b.1, a.1, wide, deep))
        >= least * least
}

/// Square of the least distance from the corners of one pad, which is `between` away, to another; the arguments are
/// their normals, this pad's first, and their half sizes.
fn nearest_corner_square(between: Vector2<f64>, n: Vector2<f64>, other_n: Vector2<f64>, wide: f64, deep: f64) -> f64 {
    let (x, y) = (between.perp(&n), between.dot(&n));
    // Half sides of the other pad, in the frame of this one.
    let (along, out) = (other_n.dot(&n), other_n.perp(&n));
    let (side, depth) = ((wide * along, -wide * out), (deep * out, deep * along));
    [(1.0, 1.0), (1.0, -1.0), (-1.0, 1.0), (-1.0, -1.0)].into_iter().fold(f64::INFINITY, |least, (p, q)| {
        let beside = ((x + p * side.0 + q * depth.0).abs() - wide).max(0.0);
        let beyond = ((y + p * side.1 + q * depth.1).abs() - deep).max(0.0);
        least.min(beside * beside + beyond * beyond)
    })
}
