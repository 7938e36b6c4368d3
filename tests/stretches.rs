//! Where pins fit, against the definition: a pin may stand where its circle meets no other edge, by plain distances.

mod common;

use common::Dice;
use holdwright::hand::{Hand, apart, stretch_around, stretches};
use holdwright::part::{Edge, EdgeId, Part, PartDescription};
use nalgebra::Point2;

/// Distance from a point to a segment (textbook: foot of the perpendicular, cut to the segment).
fn distance(p: Point2<f64>, edge: &Edge) -> f64 {
    let span = edge.end() - edge.start();
    let share = ((p - edge.start()).dot(&span) / span.norm_squared()).clamp(0.0, 1.0);
    (p - (edge.start() + span * share)).norm()
}

/// Least distance of a pin's centre to all edges but its own, less the radius.
fn room_around(part: &Part, edge: &Edge, along_mm: f64, radius: f64) -> f64 {
    let centre = edge.point_at(along_mm) - edge.normal_at(along_mm) * radius;
    let others = part.outline().edges().iter().filter(|other| other.id() != edge.id());
    others.map(|other| distance(centre, other)).fold(f64::INFINITY, f64::min) - radius
}

/// A star with deep teeth, and one or two star-shaped holes where they fit.
fn toothed(dice: &mut Dice) -> Option<Part> {
    let star = |dice: &mut Dice, x: f64, y: f64, n: usize, low: f64, high: f64| -> Vec<[f64; 2]> {
        (0..n)
            .map(|i| {
                let at = (i as f64 + dice.even(-0.4, 0.4)) / n as f64 * std::f64::consts::TAU;
                let r = dice.even(low, high);
                [x + r * at.cos(), y + 0.7 * r * at.sin()]
            })
            .collect()
    };
    let corners = 4 + dice.pick(16);
    let mut rings = vec![star(dice, 3.0, -2.0, corners, 12.0, 60.0)];
    for _ in 0..dice.pick(3) {
        let (x, y, corners) = (dice.even(-12.0, 12.0), dice.even(-9.0, 9.0), 3 + dice.pick(12));
        rings.push(star(dice, x, y, corners, 2.0, 9.0));
    }
    Part::new(PartDescription::bare("toothed", rings)).ok()
}

#[test]
fn a_pin_fits_exactly_where_it_meets_no_other_edge() {
    let mut dice = Dice::seeded(3);
    let (mut parts, mut free, mut blocked) = (0, 0, 0);
    while parts < 150 {
        let Some(part) = toothed(&mut dice) else { continue };
        parts += 1;
        let hand =
            Hand { pin_radius_mm: dice.even(0.1, 9.0), corner_clearance_mm: dice.even(0.0, 0.5), ..Hand::default() };
        let found = stretches(&part, &hand);
        for edge in part.outline().edges() {
            for _ in 0..60 {
                let along = dice.even(0.0, edge.length_mm());
                let clear = along.min(edge.length_mm() - along) - hand.corner_clearance_mm;
                let room = room_around(&part, edge, along, hand.pin_radius_mm);
                // Not within a hair of a stretch's end, where rounding and the grazing allowance decide.
                if room.abs() < 1e-6 || clear.abs() < 1e-6 {
                    continue;
                }
                let expected = room > 0.0 && clear > 0.0;
                *if expected { &mut free } else { &mut blocked } += 1;
                let stands = stretch_around(&found, edge.id(), along).is_some();
                assert_eq!(stands, expected, "{:?} at {along}: room {room}, radius {}", edge.id(), hand.pin_radius_mm);
            }
        }
        common::check_shape(&part, &found);
    }
    assert!(free > 20_000 && blocked > 20_000, "{free} {blocked}");
}

/// A stretch ends at a corner, at a keep-out, or where the pin touches another edge.
#[test]
fn a_stretch_is_as_long_as_it_can_be() {
    let mut dice = Dice::seeded(4);
    let mut touching = 0;
    for _ in 0..200 {
        let Some(part) = toothed(&mut dice) else { continue };
        let hand = Hand { pin_radius_mm: dice.even(0.5, 6.0), ..Hand::default() };
        for stretch in stretches(&part, &hand) {
            let Some(edge) = part.outline().edge(stretch.edge) else { panic!("{stretch:?}") };
            for end in [stretch.from_mm, stretch.to_mm] {
                if end > 0.0 && end < edge.length_mm() {
                    touching += 1;
                    let room = room_around(&part, edge, end, hand.pin_radius_mm);
                    assert!(room.abs() < 1e-6, "{stretch:?} ends at {end} with room {room}");
                }
            }
        }
    }
    assert!(touching > 300, "{touching}");
}

/// Elementary geometry: in a corner of inner angle 2 b a circle of radius r touches both sides at r / tan b from the
/// corner.
#[test]
fn an_inner_corner_of_any_angle() {
    for half_deg in [15.0_f64, 30.0, 45.0, 60.0, 85.0, 89.9] {
        let half = half_deg.to_radians();
        // A notch with its corner at the origin, opening to +y, cut into a block.
        let (sin, cos) = (200.0 * half.sin(), 200.0 * half.cos());
        let block =
            common::part(vec![vec![[-sin - 50.0, -50.0], [sin + 50.0, -50.0], [sin, cos], [0.0, 0.0], [-sin, cos]]]);
        let r = 2.0;
        let found = stretches(&block, &Hand { pin_radius_mm: r, ..Hand::default() });
        let on = |edge: usize| found.iter().find(|s| s.edge == EdgeId { ring: 0, edge });
        let side = on(3).map_or(f64::NAN, |s| s.from_mm);
        common::assert_close(side, r / half.tan(), 1e-6, 1e-6);
        let side = on(2).map_or(f64::NAN, |s| 200.0 - s.to_mm);
        common::assert_close(side, r / half.tan(), 1e-6, 1e-6);
    }
}

/// Two pins keep 2 r + gap between their centres.
#[test]
fn pins_keep_apart() {
    let hand = Hand { pin_radius_mm: 3.0, gap_mm: 1.0, ..Hand::default() };
    let spot = |x: f64| (Point2::new(x, 0.0), nalgebra::Vector2::new(0.0, 1.0));
    assert!(apart(&hand, spot(0.0), spot(7.0)));
    assert!(!apart(&hand, spot(0.0), spot(6.999)));
    // Back to back on a thin wall of 2 mm the centres are 8 mm apart, whatever the wall does.
    assert!(apart(&hand, spot(0.0), (Point2::new(0.0, 2.0), nalgebra::Vector2::new(0.0, -1.0))));
}
