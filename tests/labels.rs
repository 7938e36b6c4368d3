//! Moment labels against what they say: moments of forces within the friction cones, drawn and added here from the contacts
//! alone. Source of the method and of the cases by name: Mason 1991, "Two graphical methods for planar contact problems";
//! of the frictionless half-planes and triangles: Reuleaux 1876.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test stops at the first surprise")]

mod common;

use common::{Dice, frame, read, touch, touch_along};
use holdwright::mechanics::labels::{Label, Labels, Sign};
use holdwright::mechanics::{Contact, Escape, Verdict, escape::Sense};
use nalgebra::{Point2, Vector2};

/// Contacts anywhere in a box of 200 mm: pins and pads, with friction and without.
fn toss(dice: &mut Dice) -> Vec<Contact> {
    let count = 2 + dice.pick(5);
    let mu = [0.0, 0.05, 0.2, 0.6][dice.pick(4)];
    (0..count)
        .map(|_| {
            let at = touch(dice.even(-100.0, 100.0), dice.even(-100.0, 100.0), dice.even(0.0, 360.0), mu);
            Contact { half_width_mm: if dice.pick(3) == 0 { dice.even(1.0, 15.0) } else { 0.0 }, ..at }
        })
        .collect()
}

/// Moment about q of a force on a contact: so much along the normal, so much along the edge, so far from its middle.
fn moment(contact: &Contact, q: Point2<f64>, normal_n: f64, along_n: f64, off_mm: f64) -> f64 {
    let (nx, ny) = (contact.normal.x, contact.normal.y);
    let (tx, ty) = (ny, -nx);
    let (fx, fy) = (normal_n * nx + along_n * tx, normal_n * ny + along_n * ty);
    let (x, y) = (contact.point.x + off_mm * tx - q.x, contact.point.y + off_mm * ty - q.y);
    x * fy - y * fx
}

/// Moment about q of random forces of all fingers, none outside its cone; some fingers may rest.
fn random_moment(dice: &mut Dice, contacts: &[Contact], q: Point2<f64>) -> f64 {
    let one = |contact: &Contact, dice: &mut Dice| {
        let normal_n = if dice.pick(3) == 0 { 0.0 } else { dice.even(0.0, 1.0) };
        let share = [-1.0, 1.0, dice.even(-1.0, 1.0)][dice.pick(3)];
        let off = [-1.0, 1.0, dice.even(-1.0, 1.0)][dice.pick(3)];
        moment(contact, q, normal_n, share * contact.mu * normal_n, off * contact.half_width_mm)
    };
    contacts.iter().map(|contact| one(contact, dice)).sum()
}

/// The least and the largest moment of single forces on the sides of the cones and at the ends of the pads.
fn span(contacts: &[Contact], q: Point2<f64>) -> (f64, f64) {
    let mut span = (f64::INFINITY, f64::NEG_INFINITY);
    for contact in contacts {
        for share in [-1.0, 1.0] {
            for off in [-1.0, 1.0] {
                let own = moment(contact, q, 1.0, share * contact.mu, off * contact.half_width_mm);
                span = (span.0.min(own), span.1.max(own));
            }
        }
    }
    span
}

/// A dense grid of 41 by 41 points and where every two lines of cone-edge forces cross: the regions' corners.
fn points(contacts: &[Contact]) -> Vec<Point2<f64>> {
    let grid = (0..41 * 41).map(|i| Point2::new(f64::from(i % 41) * 15.0 - 300.0, f64::from(i / 41) * 15.0 - 300.0));
    let mut points: Vec<_> = grid.collect();
    let mut lines = Vec::new();
    for contact in contacts {
        let tangent = Vector2::new(contact.normal.y, -contact.normal.x);
        for (off, share) in [(-1.0, -1.0), (-1.0, 1.0), (1.0, -1.0), (1.0, 1.0)] {
            let through = contact.point + tangent * (off * contact.half_width_mm);
            lines.push((through, contact.normal + tangent * (share * contact.mu)));
        }
    }
    for (i, (p, d)) in lines.iter().enumerate() {
        for (q, e) in &lines[i + 1..] {
            let across = d.x * e.y - d.y * e.x;
            if across.abs() > 1e-6 {
                let between = q - p;
                points.push(p + d * ((between.x * e.y - between.y * e.x) / across));
            }
        }
    }
    points
}

/// Mason 1991: force closure leaves no label.
#[test]
fn a_closed_grasp_leaves_no_labelled_point() {
    let mut dice = Dice::seeded(31);
    let mut closed = 0;
    while closed < 300 {
        let contacts = toss(&mut dice);
        if read(&contacts, &frame(0.0, 0.0, 100.0)).verdict != Verdict::Closed {
            continue;
        }
        closed += 1;
        let labels = Labels::of(&contacts);
        for q in points(&contacts) {
            assert_eq!(labels.at(q), None, "{q:?} of {contacts:?}");
        }
        for sign in [Sign::Plus, Sign::Minus] {
            let region = labels.region(sign, Point2::new(-1e4, -1e4), Point2::new(1e4, 1e4));
            assert!(region.is_empty(), "{region:?} of {contacts:?}");
        }
    }
}

/// What a label says (Mason 1991), by random sums of forces; and where there is none, forces of both senses.
#[test]
fn a_labelled_point_has_moments_of_one_sign_and_no_other_point_has() {
    let mut dice = Dice::seeded(32);
    let (mut plus, mut minus, mut none) = (0, 0, 0);
    for _ in 0..150 {
        let contacts = toss(&mut dice);
        let labels = Labels::of(&contacts);
        for _ in 0..20 {
            let q = Point2::new(dice.even(-300.0, 300.0), dice.even(-300.0, 300.0));
            let Some(label) = labels.at(q) else {
                let (least, most) = span(&contacts, q);
                assert!(least < 0.0 && most > 0.0, "{q:?} of {contacts:?}");
                none += 1;
                continue;
            };
            let sense = if label == Label::Plus { 1.0 } else { -1.0 };
            *if label == Label::Plus { &mut plus } else { &mut minus } += 1;
            for _ in 0..1000 {
                let moment = random_moment(&mut dice, &contacts, q);
                // Rounding of sums of up to six products of some 300 mm and 1 N.
                assert!(sense * moment >= -1e-9, "{moment} about {q:?} of {contacts:?}");
            }
        }
    }
    assert!(plus > 100 && minus > 100 && none > 1000, "{plus} {minus} {none}");
}

/// A region holds the points with its label in the box and no other; elementary geometry decides what lies in a polygon.
#[test]
fn a_region_is_the_points_of_its_label() {
    let mut dice = Dice::seeded(33);
    let (low, high) = (Point2::new(-150.0, -120.0), Point2::new(160.0, 140.0));
    let (mut inside, mut outside) = (0, 0);
    for _ in 0..400 {
        let contacts = toss(&mut dice);
        let labels = Labels::of(&contacts);
        for (sign, label) in [(Sign::Plus, Label::Plus), (Sign::Minus, Label::Minus)] {
            let region = labels.region(sign, low, high);
            for _ in 0..40 {
                let q = Point2::new(dice.even(low.x, high.x), dice.even(low.y, high.y));
                // Distances from the sides, positive inside, as the corners come counter-clockwise.
                let sides = region.iter().zip(region.iter().cycle().skip(1)).filter(|(a, b)| (*b - *a).norm() > 1e-9);
                let deep = sides.map(|(a, b)| (b - a).normalize().perp(&(q - a))).fold(f64::INFINITY, f64::min);
                let deep = if region.len() < 3 { f64::NEG_INFINITY } else { deep };
                if deep.abs() < 1e-6 {
                    continue;
                }
                assert_eq!(labels.at(q) == Some(label), deep > 0.0, "{q:?} {deep} {sign:?} of {contacts:?}");
                *if deep > 0.0 { &mut inside } else { &mut outside } += 1;
            }
        }
    }
    assert!(inside > 1000 && outside > 10_000, "{inside} {outside}");
}

/// The linear program's way out of an open grasp turns about a point that has the label of its sense.
#[test]
fn the_centre_an_open_grasp_turns_about_is_labelled() {
    let mut dice = Dice::seeded(34);
    let mut turns = 0;
    while turns < 200 {
        let contacts = toss(&mut dice);
        let Some(Escape::Turn { about, sense }) = read(&contacts, &frame(0.0, 0.0, 100.0)).escape else { continue };
        if about.coords.norm() > 1e4 {
            continue;
        }
        turns += 1;
        let (least, most) = span(&contacts, about);
        // The program's weights are good to 1e-8 of the arms.
        let rounding = 1e-7 * (100.0 + about.coords.norm());
        match sense {
            Sense::CounterClockwise => assert!(least >= -rounding, "{least} about {about:?} of {contacts:?}"),
            Sense::Clockwise => assert!(most <= rounding, "{most} about {about:?} of {contacts:?}"),
        }
    }
}

/// Reuleaux 1876: one frictionless contact leaves the half-plane on either side of its normal, and no moment on it.
#[test]
fn one_finger_without_friction_halves_the_plane() {
    let labels = Labels::of(&[touch_along(5.0, -3.0, [0.0, 1.0], 0.0)]);
    assert_eq!(labels.at(Point2::new(4.999, 40.0)), Some(Label::Plus));
    assert_eq!(labels.at(Point2::new(5.001, -40.0)), Some(Label::Minus));
    assert_eq!(labels.at(Point2::new(5.0, 12.0)), Some(Label::Both));
}

/// Mason 1991: a contact with friction labels what lies beside both edges of its cone and of the cone reversed.
#[test]
fn one_finger_with_friction_leaves_its_double_cone_blank() {
    let labels = Labels::of(&[touch_along(0.0, 0.0, [0.0, 1.0], 0.5)]);
    for (x, y, expected) in [
        (0.0, 1.0, None),
        (0.49, 1.0, None),
        (-0.49, 1.0, None),
        (0.49, -1.0, None),
        (0.51, 1.0, Some(Label::Minus)),
        (0.51, -1.0, Some(Label::Minus)),
        (-0.51, 1.0, Some(Label::Plus)),
        (-0.51, -1.0, Some(Label::Plus)),
        (0.0, 0.0, Some(Label::Both)),
    ] {
        assert_eq!(labels.at(Point2::new(x, y)), expected, "{x} {y}");
    }
}

/// Reuleaux 1876: two frictionless fingers pressing against each other out of line turn the part one way about every point
/// between their lines; in line they turn it about none of the line's points, and both ways about no other.
#[test]
fn two_opposed_fingers_without_friction() {
    let apart = Labels::of(&[touch_along(-1.0, -5.0, [0.0, 1.0], 0.0), touch_along(1.0, 5.0, [0.0, -1.0], 0.0)]);
    for y in [-20.0, 0.0, 7.0] {
        assert_eq!(apart.at(Point2::new(0.0, y)), Some(Label::Minus));
        assert_eq!(apart.at(Point2::new(0.999, y)), Some(Label::Minus));
        assert_eq!(apart.at(Point2::new(1.001, y)), None);
        assert_eq!(apart.at(Point2::new(-1.001, y)), None);
    }
    let strip = apart.region(Sign::Minus, Point2::new(-10.0, -10.0), Point2::new(10.0, 10.0));
    let area: f64 = (0..strip.len()).map(|i| strip[i].coords.perp(&strip[(i + 1) % strip.len()].coords) / 2.0).sum();
    assert!((area - 40.0).abs() < 1e-9, "{strip:?}");

    let in_line = Labels::of(&[touch_along(1.0, -5.0, [0.0, 1.0], 0.0), touch_along(1.0, 5.0, [0.0, -1.0], 0.0)]);
    assert_eq!(in_line.at(Point2::new(1.0, 3.0)), Some(Label::Both));
    assert_eq!(in_line.at(Point2::new(1.1, 3.0)), None);
    let line = in_line.region(Sign::Plus, Point2::new(-10.0, -10.0), Point2::new(10.0, 10.0));
    assert!(!line.is_empty() && line.iter().all(|q| (q.x - 1.0).abs() < 1e-9), "{line:?}");
}

/// Reuleaux 1876: three frictionless normals that run round a triangle label the triangle alone; that all pass through one
/// point, that point alone.
#[test]
fn three_fingers_without_friction() {
    let round = Labels::of(&[
        touch_along(2.0, 0.0, [1.0, 0.0], 0.0),
        touch_along(4.0, 1.0, [0.0, 1.0], 0.0),
        touch_along(3.0, 3.0, [-(0.5_f64.sqrt()), -(0.5_f64.sqrt())], 0.0),
    ]);
    // Lines y = 0 toward +x, x = 4 toward +y, y = x toward the origin: the triangle (0,0) (4,0) (4,4).
    assert_eq!(round.at(Point2::new(3.0, 1.0)), Some(Label::Plus));
    for (x, y) in [(3.0, -0.1), (4.1, 2.0), (1.0, 2.0), (-5.0, -6.0), (9.0, 9.5)] {
        assert_eq!(round.at(Point2::new(x, y)), None, "{x} {y}");
    }
    let slant = [-(0.5_f64.sqrt()), -(0.5_f64.sqrt())];
    let through = Labels::of(&[
        touch_along(-5.0, 0.0, [1.0, 0.0], 0.0),
        touch_along(0.0, -4.0, [0.0, 1.0], 0.0),
        touch_along(3.0, 3.0, slant, 0.0),
    ]);
    assert_eq!(through.at(Point2::origin()), Some(Label::Both));
    for (x, y) in [(0.1, 0.0), (0.0, 0.1), (-0.1, -0.1), (4.0, 4.0), (-7.0, 2.0)] {
        assert_eq!(through.at(Point2::new(x, y)), None, "{x} {y}");
    }
}

/// Nguyen 1988: two fingers whose joining segment lies in both cones close, so there is no label; a pad acts at both ends
/// of its face, so one wide enough about the other's line takes the label of two frictionless fingers away.
#[test]
fn friction_and_width_take_labels_away() {
    let pins = [touch_along(0.0, -5.0, [0.0, 1.0], 0.1), touch_along(0.4, 5.0, [0.0, -1.0], 0.1)];
    assert!((-60..60).all(|i| Labels::of(&pins).at(Point2::new(f64::from(i) * 0.1, 0.3)).is_none()));
    let bare = pins.map(|contact| Contact { mu: 0.0, ..contact });
    assert_eq!(Labels::of(&bare).at(Point2::new(0.2, 0.3)), Some(Label::Minus));
    let wide = [Contact { half_width_mm: 1.0, ..bare[0] }, bare[1]];
    assert_eq!(Labels::of(&wide).at(Point2::new(0.2, 0.3)), None);
}
