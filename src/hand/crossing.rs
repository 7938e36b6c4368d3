//! Where a circle crosses another curve: the critical positions of a finger that runs round an arc.

use nalgebra::{Point2, Vector2};

/// Offsets from a circle's centre to where it crosses a line through `start` with the unit direction `along`.
pub(super) fn circle_and_line(
    centre: Point2<f64>,
    radius: f64,
    start: Point2<f64>,
    along: Vector2<f64>,
) -> Option<[Vector2<f64>; 2]> {
    let to = start - centre;
    let foot = to - along * to.dot(&along);
    let half = radius * radius - foot.norm_squared();
    (half >= 0.0).then(|| [foot + along * half.sqrt(), foot - along * half.sqrt()])
}

/// Offsets from a circle's centre to where it crosses another circle; nothing for concentric ones.
pub(super) fn circle_and_circle(
    centre: Point2<f64>,
    radius: f64,
    other: Point2<f64>,
    other_radius: f64,
) -> Option<[Vector2<f64>; 2]> {
    // The foot of the common chord lies (d^2 + radius^2 - other_radius^2) / 2 d from the centre. Half the chord is the
    // height of the triangle of d and the radii, as Heron's formula has it: with factors of small differences, so that
    // a circle of kilometres keeps the digits of a small one that it crosses.
    let to = other - centre;
    let apart = to.norm();
    let foot = (apart + (radius - other_radius) * (radius + other_radius) / apart) / 2.0;
    let (less, more) = (radius - apart, radius + apart);
    let half = (other_radius - less) * (other_radius + less) / apart * ((more - other_radius) * (more + other_radius))
        / (4.0 * apart);
    (apart > 0.0 && half >= 0.0).then(|| {
        let (toward, side) = (to / apart * foot, Vector2::new(-to.y, to.x) / apart * half.sqrt());
        [toward + side, toward - side]
    })
}

/// Directions, not of unit length, along which a vector's component is `component`.
pub(super) fn facing(vector: Vector2<f64>, component: f64) -> Option<[Vector2<f64>; 2]> {
    let across = vector.norm_squared() - component * component;
    (across >= 0.0 && vector.norm_squared() > 0.0).then(|| {
        let side = Vector2::new(-vector.y, vector.x) * across.sqrt();
        [vector * component + side, vector * component - side]
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The 3-4-5 triangle (elementary geometry).
    #[test]
    fn crossings_of_round_numbers() {
        let centre = Point2::new(1.0, 1.0);
        let [p, q] = circle_and_line(centre, 5.0, Point2::new(40.0, 4.0), Vector2::x()).unwrap();
        assert_eq!((p, q), (Vector2::new(4.0, 3.0), Vector2::new(-4.0, 3.0)));
        assert_eq!(circle_and_line(centre, 5.0, Point2::new(0.0, 6.5), Vector2::x()), None);
        let [p, q] = circle_and_circle(centre, 5.0, Point2::new(9.0, 1.0), 5.0).unwrap();
        assert_eq!((p, q), (Vector2::new(4.0, 3.0), Vector2::new(4.0, -3.0)));
        assert_eq!(circle_and_circle(centre, 5.0, centre, 5.0), None);
        assert_eq!(circle_and_circle(centre, 5.0, Point2::new(12.0, 1.0), 5.0), None);
        for direction in facing(Vector2::new(0.0, 5.0), 3.0).unwrap() {
            assert!((direction.normalize() - Vector2::new(0.8_f64.copysign(direction.x), 0.6)).norm() < 1e-15);
        }
        assert_eq!(facing(Vector2::new(0.0, 5.0), 5.1), None);
        assert_eq!(facing(Vector2::zeros(), 0.0), None);
    }
}
