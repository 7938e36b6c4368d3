//! Nearly degenerate grasps against exact rational arithmetic.
//!
//! Source: tests/reference/degenerate.py, the plain definition of the hull's facets in Python's `fractions`, without
//! rounding. Edges parallel to within 1e-15 to 1e-4, several fingers at nearly one point, mu from 0 to 0.5.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

use holdwright::mechanics::{Assessment, Contact, Frame, MARGINAL, Verdict, Wrenches, quality};
use nalgebra::{Point2, Vector2};

const TABLE: &str = include_str!("reference/degenerate.csv");

fn rows() -> impl Iterator<Item = (Wrenches, f64, &'static str)> {
    TABLE.lines().map(|line| {
        let (left, right) = line.split_once('=').unwrap();
        let numbers: Vec<f64> = left.split(',').map(|x| x.parse().unwrap()).collect();
        let contacts: Vec<Contact> = numbers[1..]
            .chunks_exact(4)
            .map(|c| Contact {
                point: Point2::new(c[0], c[1]),
                normal: Vector2::new(c[2], c[3]),
                mu: numbers[0],
                half_width_mm: 0.0,
            })
            .collect();
        let frame = Frame { about: Point2::origin(), scale_mm: 1.0 };
        (Wrenches::new(&contacts, &frame), right.parse().unwrap(), line)
    })
}

/// The generators themselves carry rounding of about 1e-16 each, and the quality moves by no more than they do; 1e-12
/// leaves room for the kernel's merging of directions closer than 1e-11.
const TOLERANCE: f64 = 1e-11;

#[test]
fn quality_and_verdict() {
    let mut counts = [0; 3];
    for (wrenches, exact, line) in rows() {
        let score = quality::planar(&wrenches);
        let verdict = Verdict::of(&wrenches, &score);
        let by_definition = quality::by_definition(wrenches.generators());
        if exact > MARGINAL {
            counts[0] += 1;
            assert_eq!(verdict, Verdict::Closed, "{line}");
            assert!((score.signed_quality - exact).abs() <= TOLERANCE, "{} {exact}\n{line}", score.signed_quality);
            let plain = by_definition.signed_quality;
            assert!((plain - exact).abs() <= TOLERANCE, "{plain} {exact}\n{line}");
        } else if exact < -MARGINAL {
            counts[1] += 1;
            assert_eq!(verdict, Verdict::Open, "{line}");
        } else {
            counts[2] += 1;
            assert_ne!(verdict, Verdict::Closed, "{exact}\n{line}");
        }
    }
    assert_eq!(counts.iter().sum::<usize>(), 400);
    assert!(counts.iter().all(|&count| count >= 30), "{counts:?}");
}

/// How often the kernel has to hand over to the plain definition: seldom even here.
#[test]
fn the_kernel_is_mostly_certain() {
    use holdwright::mechanics::force_polygon::ForcePolygon;
    let uncertain = rows()
        .filter(|(wrenches, ..)| {
            let mu = wrenches.common_mu().unwrap();
            let polygon = ForcePolygon::of_levers(wrenches.levers(), mu);
            !polygon.score(&polygon.heights_of_levers(wrenches.levers(), mu)).certain
        })
        .count();
    assert!(uncertain < 40, "{uncertain} of 400");
}

/// A grasp may stay exactly on the edge of closure over a whole range of mu; rounding must not pass for closure there.
///
/// Two facing pins, one without friction, and a third across: below mu = 5/7 of the third its push cannot be balanced in
/// torque (0.5 against 0.7 mu about the middle), so it cannot help and the pair alone is marginal. Derived (statics).
#[test]
fn a_marginal_plateau_needs_the_friction_at_its_end() {
    for (turn, far) in [(0.0, 0.0), (0.3, 0.0), (1.1, 1e3), (2.5, -4e4), (4.0, 1e5)] {
        let (rotate, by) = (nalgebra::Rotation2::new(turn), Vector2::new(far, -0.7 * far));
        let contact = |x: f64, y: f64, nx: f64, ny: f64, mu: f64| {
            Contact::at_point(rotate * Point2::new(x, y) + by, rotate * Vector2::new(nx, ny), mu)
        };
        let grasp =
            [contact(0.0, -0.5, 0.0, 1.0, 0.6), contact(0.7, 0.0, -1.0, 0.0, 1.0), contact(0.0, 0.5, 0.0, -1.0, 0.0)];
        let frame = Frame { about: Point2::origin() + by, scale_mm: 1.0 };
        let wrenches = Wrenches::new(&grasp, &frame);
        let reading = Assessment::of(&wrenches, &frame, 1.0, &[9.0; 3]);
        assert_eq!(reading.verdict, Verdict::Closed);
        let needed = reading.friction_needed.unwrap();
        assert!((needed - 5.0 / 7.0).abs() < 2e-6, "{needed} turned {turn}, {far} away");
        assert_eq!(reading.doubts(&wrenches, &frame, 1.0), []);
    }
}
