//! Results from published theorems and closed forms: what every grasp reading must reproduce.
//!
//! Values marked "derived" follow from the definition of the named paper by elementary geometry, given beside them.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test stops at the first surprise")]

mod common;

use common::{Dice, assert_close, frame, moved, on_disc, part, read, touch, touch_along};
use holdwright::mechanics::{Assessment, Contact, Verdict, Wrenches, closure, program, quality};
use holdwright::part::{EdgeId, Part, PartDescription};
use holdwright::search::{Scene, SearchSettings, Setup, Spot, TorqueScale};
use nalgebra::Vector2;
use std::f64::consts::{PI, TAU};
use std::sync::Arc;

/// Six digits are given.
const SIX_DIGITS: f64 = 1.0e-6;

fn facing(a: f64, mu: f64) -> Vec<Contact> {
    vec![touch_along(-a, 0.0, [1.0, 0.0], mu), touch_along(a, 0.0, [-1.0, 0.0], mu)]
}

/// Derived from Ferrari & Canny 1992: the hull of two facing cones is a tetrahedron whose facets all lie at
/// mu / sqrt(1 + mu^2 + (l/a)^2) from 0; with a limit per finger, the same with 2 mu. Placement mu a, friction needed 0.
#[test]
fn two_facing_contacts() {
    for (mu, six_digits) in [(0.1, 0.070535), (0.2, 0.140028), (0.3, 0.207514), (0.5, 0.333333), (1.0, 0.577350)] {
        assert_close(read(&facing(1.0, mu), &frame(0.0, 0.0, 1.0)).quality, six_digits, 0.0, SIX_DIGITS);
        for (a, l) in [(1.0, 1.0), (7.5, 31.0), (40.0, 12.0)] {
            let grasp = moved(&facing(a, mu), 0.7, Vector2::new(3.0, -8.0));
            let reading = read(&grasp, &frame(3.0, -8.0, l));
            let quality = |mu: f64| mu / (1.0 + mu * mu + (l / a).powi(2)).sqrt();
            assert_eq!(reading.verdict, Verdict::Closed);
            assert_close(reading.quality, quality(mu), 1e-12, 0.0);
            assert_close(reading.quality_per_finger, quality(2.0 * mu), 1e-12, 0.0);
            assert_close(reading.placement.torque_mm, mu * a, 1e-12, 0.0);
            assert_close(reading.friction_needed.unwrap(), 0.0, 0.0, 1e-9);
            assert_close(reading.friction_margin_deg.unwrap(), mu.atan().to_degrees(), 1e-9, 0.0);
        }
    }
}

/// Derived (definition of Ferrari & Canny 1992), a = l = 1, mu 0.5.
#[test]
fn two_facing_contacts_with_the_centre_of_mass_elsewhere() {
    for (x, y, expected) in [(0.3, 0.0, 0.291606), (0.0, 0.4, 0.298275), (2.0, 1.0, 0.142857)] {
        assert_close(read(&facing(1.0, 0.5), &frame(x, y, 1.0)).quality, expected, 0.0, SIX_DIGITS);
    }
}

/// Derived (definition of Ferrari & Canny 1992): three even contacts on a disc of radius r = l.
#[test]
fn three_and_four_even_contacts_on_a_disc() {
    let even =
        |n: usize, mu: f64| -> Vec<_> { (0..n).map(|i| on_disc(1.0, 0.4 + TAU * i as f64 / n as f64, mu)).collect() };
    let unit = frame(0.0, 0.0, 1.0);
    for mu in [0.1, 0.2, 0.3, 0.45, 0.6, 0.7] {
        assert_close(read(&even(3, mu), &unit).quality, mu, 1e-10, 0.0);
    }
    assert_close(read(&even(3, 1.0), &unit).quality, 0.935113, 0.0, SIX_DIGITS);
    for (mu, three, four) in
        [(0.1, 0.294230, 0.396097), (0.2, 0.558570, 0.770899), (0.3, 0.780318, 1.111713), (0.5, 0.998286, 1.690309)]
    {
        assert_close(read(&even(3, mu), &unit).quality_per_finger, three, 0.0, SIX_DIGITS);
        assert_close(read(&even(4, mu), &unit).quality_per_finger, four, 0.0, SIX_DIGITS);
    }
}

fn regular_triangle(inradius: f64) -> Part {
    let corner = |i: u32| {
        let at = PI / 2.0 + TAU * f64::from(i) / 3.0;
        [2.0 * inradius * at.cos(), 2.0 * inradius * at.sin()]
    };
    part(vec![(0..3).map(corner).collect()])
}

fn pins(at: &[(usize, f64)]) -> Vec<Spot> {
    at.iter().map(|&(edge, along_mm)| Spot { edge: EdgeId { ring: 0, edge }, along_mm }).collect()
}

fn scene(part: Part, mu: f64, torque_scale: TorqueScale) -> Scene {
    let mut setup = Setup { search: SearchSettings { torque_scale, ..SearchSettings::default() }, ..Setup::default() };
    setup.friction.mu = mu;
    Scene::new(Arc::new(part), setup).unwrap()
}

/// Derived: a pin on the middle of each side of a regular triangle presses as on its incircle; the whole way from
/// coordinates to scores. Friction needed when each pin is moved e the same way round: e/r (force lines then touch a
/// circle of radius e about the centre).
#[test]
fn three_pins_on_a_regular_triangle() {
    let r = 13.0;
    let side = 2.0 * 3.0_f64.sqrt() * r;
    for mu in [0.15, 0.3, 0.6] {
        let scene = scene(regular_triangle(r), mu, TorqueScale::Mm(r));
        let middles = scene.grasp(&pins(&[(0, side / 2.0), (1, side / 2.0), (2, side / 2.0)])).unwrap();
        let (reading, doubts) = scene.assess(&middles);
        assert!(doubts.is_empty(), "{doubts:?}");
        assert_close(reading.quality, mu, 1e-10, 0.0);
        for e in [0.5, 2.0, 5.0] {
            for way in [-1.0, 1.0] {
                let along = side / 2.0 + way * e;
                let grasp = scene.grasp(&pins(&[(0, along), (1, along), (2, along)])).unwrap();
                let (reading, _) = scene.assess(&grasp);
                assert_close(reading.friction_needed.unwrap(), e / r, 1e-9, 0.0);
                assert_eq!(reading.verdict == Verdict::Closed, mu > e / r);
            }
        }
    }
}

/// Derived: two flat pads of half-width q, half a span a apart; each presses at its two ends.
#[test]
fn two_flat_pads_as_four_point_contacts() {
    let (a, l, mu) = (1.0, 1.0, 0.2);
    let pads = |q: f64| {
        [-q, q]
            .into_iter()
            .flat_map(|y| [touch_along(-a, y, [1.0, 0.0], mu), touch_along(a, y, [-1.0, 0.0], mu)])
            .collect::<Vec<_>>()
    };
    let quality = |q: f64| read(&pads(q), &frame(0.0, 0.0, l)).quality;
    assert_close(quality(0.05), 0.175035, 0.0, SIX_DIGITS);
    for q in [0.0_f64, 0.01, 0.05, 0.08, 0.0857, 0.1, 0.5] {
        let expected = mu.min((mu * a + q) / (l * l + a * a * (1.0 + mu * mu)).sqrt());
        assert_close(quality(q), expected, 1e-10, 0.0);
    }
}

/// Derived: four frictionless pins on a square of half-side 1 whose force lines run round the centre.
#[test]
fn frictionless_pinwheel() {
    let wheel = |e1: f64, e2: f64| {
        [
            touch_along(-1.0, e1, [1.0, 0.0], 0.0),
            touch_along(1.0, -e1, [-1.0, 0.0], 0.0),
            touch_along(e2, -1.0, [0.0, 1.0], 0.0),
            touch_along(-e2, 1.0, [0.0, -1.0], 0.0),
        ]
    };
    let unit = frame(0.0, 0.0, 1.0);
    assert_close(read(&wheel(0.25, 0.25), &unit).quality, 0.223607, 0.0, SIX_DIGITS);
    assert_close(read(&wheel(0.5, 0.25), &unit).quality, 0.2, 0.0, SIX_DIGITS);
    for (e1, e2) in [(0.25, 0.25), (0.5, 0.25), (0.1, 0.9), (-0.3, -0.2), (0.4, -0.1), (-0.01, 0.6)] {
        for l in [0.4, 1.0, 3.0] {
            let reading = read(&wheel(e1, e2), &frame(0.0, 0.0, l));
            let (small, sum) = (f64::min(e1.abs(), e2.abs()), (e1 + e2).abs());
            if e1 * e2 > 0.0 {
                assert_close(reading.quality, small / l / (1.0 + (sum / l).powi(2)).sqrt(), 1e-10, 0.0);
            }
            assert_eq!(reading.verdict == Verdict::Closed, e1 * e2 > 0.0, "{e1} {e2} {l}");
        }
    }
    // Four normals through one point: weights 1/4 balance, but nothing resists turning (Trinkle 1992 needs rank 3).
    let through_one_point = Wrenches::new(&wheel(0.0, 0.0), &unit);
    assert_eq!(closure::rank(&through_one_point), 2);
    let program::Solved::Answer(balance) = program::closure(&through_one_point) else { panic!("no balance") };
    assert_close(balance.least, 0.25, 1e-12, 0.0);
    assert_eq!(read(&wheel(0.0, 0.0), &unit).verdict, Verdict::Open);
}

/// Reuleaux 1876, Somov 1897: fewer than four frictionless contacts never close in the plane.
#[test]
fn fewer_than_four_frictionless_contacts_never_close() {
    let mut dice = Dice::seeded(1876);
    for _ in 0..3000 {
        let n = 2 + dice.pick(2);
        let grasp: Vec<_> =
            (0..n).map(|_| touch(dice.even(-3.0, 1.0), dice.even(-1.0, 2.0), dice.even(0.0, 360.0), 0.0)).collect();
        let l = dice.even(0.2, 5.0);
        assert_ne!(read(&grasp, &frame(0.0, 0.0, l)).verdict, Verdict::Closed);
    }
}

/// Somov 1897: four may close, and do on some of any fair sample; so the test above can fail.
#[test]
fn four_frictionless_contacts_sometimes_close() {
    let mut dice = Dice::seeded(1897);
    let closed = (0..2000)
        .filter(|_| {
            let grasp: Vec<_> =
                (0..4).map(|_| touch(dice.even(-3.0, 1.0), dice.even(-1.0, 2.0), dice.even(0.0, 360.0), 0.0)).collect();
            read(&grasp, &frame(0.0, 0.0, 1.0)).verdict == Verdict::Closed
        })
        .count();
    // Four random wrenches positively span space with probability 1/8 (Wendel 1962: 1 - sum C(3,k)/2^3, k = 0..2),
    // were their directions even about 0; forces here are, torques nearly.
    assert!((100..500).contains(&closed), "{closed} of 2000");
}

/// Reuleaux 1876: a disc is never closed without friction, whatever the number of contacts.
#[test]
fn a_disc_is_never_closed_without_friction() {
    let mut dice = Dice::seeded(2);
    for _ in 0..2000 {
        let n = 2 + dice.pick(5);
        let radius = dice.even(0.5, 90.0);
        let grasp: Vec<_> = (0..n).map(|_| on_disc(radius, dice.even(0.0, TAU), 0.0)).collect();
        let reading = read(&grasp, &frame(0.0, 0.0, radius));
        assert_ne!(reading.verdict, Verdict::Closed);
        assert_eq!(reading.friction_margin, Some(0.0));
    }
}

/// Derived, checked on random cases: on a disc n >= 2 contacts close iff the largest gap between neighbours is below
/// 180 degrees + 2 atan mu. Every third case is put within 1e-6 of that edge.
#[test]
fn a_disc_closes_by_its_largest_gap() {
    let mut dice = Dice::seeded(180);
    let mut seen = [0; 2];
    for case in 0..6000 {
        let n = 2 + dice.pick(5);
        let mu = dice.even(0.02, 1.2);
        let limit = PI + 2.0 * mu.atan();
        let mut at: Vec<f64> = (0..n).map(|_| dice.even(0.0, TAU)).collect();
        at.sort_by(f64::total_cmp);
        let mut clear = 1e-5;
        if case % 3 == 0 {
            // Squeeze all contacts together so that the gap after the last is the limit, or a hair off it.
            let off = 10.0_f64.powf(dice.even(-6.0, -1.5)) * if dice.pick(2) == 0 { 1.0 } else { -1.0 };
            let (first, span) = (at[0], at[n - 1] - at[0]);
            at.iter_mut().for_each(|angle| *angle = (*angle - first) / span * (TAU - limit - off));
            clear = 5e-7;
        }
        let largest =
            (0..n).map(|i| if i + 1 < n { at[i + 1] - at[i] } else { at[0] + TAU - at[n - 1] }).fold(0.0, f64::max);
        if (largest - limit).abs() < clear {
            continue;
        }
        let grasp: Vec<_> = at.iter().map(|&angle| on_disc(2.0, angle, mu)).collect();
        let reading = read(&grasp, &frame(0.7, -0.2, 2.0));
        seen[usize::from(largest < limit)] += 1;
        assert_eq!(reading.verdict == Verdict::Closed, largest < limit, "gap {largest} limit {limit} mu {mu}");
        // The same rule read as friction needed.
        let needed = ((largest - PI) / 2.0).max(0.0);
        if needed < 1.5 {
            assert_close(reading.friction_needed.unwrap(), needed.tan(), 1e-8, 2e-9);
        }
    }
    assert!(seen[0] > 1000 && seen[1] > 1000, "{seen:?}");
}

/// Nguyen 1988, theorem on two contacts with friction: closed iff the segment joining them lies strictly inside both
/// cones, facing each other or both away. Half of the cases lie within 1e-7 .. 1e-1 of a cone's edge.
#[test]
fn two_contacts_close_iff_each_sees_the_other() {
    let mut dice = Dice::seeded(1988);
    let mut closed = 0;
    for case in 0..8000 {
        let (x, y) = (dice.even(-5.0, 5.0), dice.even(-5.0, 5.0));
        let (length, heading) = (dice.even(0.3, 6.0), dice.even(0.0, TAU));
        let mus = [dice.even(0.02, 1.5), dice.even(0.02, 1.5)];
        // Angles between each normal and the way to the other contact; as parts of the cone's half-angle.
        let lean = |dice: &mut Dice, mu: f64| match case % 2 {
            0 => dice.even(-1.6, 1.6) * mu.atan(),
            _ => {
                let off = 10.0_f64.powf(dice.even(-7.0, -1.0)) * if dice.pick(3) == 0 { 1.0 } else { -1.0 };
                mu.atan() * (1.0 + off) * if dice.pick(2) == 0 { 1.0 } else { -1.0 }
            }
        };
        let leans = [lean(&mut dice, mus[0]), lean(&mut dice, mus[1])];
        let away = dice.pick(2) == 0;
        let base = if away { PI } else { 0.0 };
        let grasp = [
            touch(x, y, (heading + base + leans[0]).to_degrees(), mus[0]),
            touch(
                x + length * heading.cos(),
                y + length * heading.sin(),
                (heading + PI + base + leans[1]).to_degrees(),
                mus[1],
            ),
        ];
        let expected = (0..2).all(|i| leans[i].abs() < mus[i].atan());
        let reading = read(&grasp, &frame(0.0, 0.0, dice.even(0.5, 6.0)));
        closed += usize::from(expected);
        if reading.verdict == Verdict::Marginal {
            // Allowed only where a turn of 1e-6 of the cone would change the answer.
            let to_edge = (0..2).map(|i| (leans[i].abs() / mus[i].atan() - 1.0).abs()).fold(f64::INFINITY, f64::min);
            assert!(to_edge < 1e-6, "{to_edge:e} {reading:?}");
        } else {
            assert_eq!(reading.verdict == Verdict::Closed, expected, "{grasp:?} {leans:?} {reading:?}");
        }
        // Friction needed scales both: the larger of tan(lean) / mu is the factor.
        let factor = (0..2).map(|i| leans[i].abs().tan() / mus[i]).fold(0.0, f64::max);
        let setup_mu = mus[0].max(mus[1]);
        if factor * setup_mu < 10.0 {
            assert_close(reading.friction_needed.unwrap(), factor * setup_mu, 1e-8, 2e-9);
        }
    }
    assert!((1500..6500).contains(&closed), "{closed}");
}

/// One contact inside its cone is not enough, nor one facing and one away (Nguyen 1988).
#[test]
fn two_contacts_that_do_not_face_stay_open() {
    let unit = frame(0.0, 0.0, 1.0);
    for second_deg in [0.0, 60.0, 90.0, 300.0] {
        let grasp = [touch(-1.0, 0.0, 0.0, 0.4), touch(1.0, 0.0, second_deg, 0.4)];
        assert_eq!(read(&grasp, &unit).verdict, Verdict::Open, "{second_deg}");
    }
}

/// Nguyen 1988: two contacts pressing the same way see each other at no coefficient; the search for one ends, whatever
/// the coefficients it starts from.
#[test]
fn no_friction_closes_two_contacts_that_press_the_same_way() {
    for step in 1..=700 {
        let mu = f64::from(step) / 357.0;
        let grasp = [touch(-1.0, 0.0, 90.0, mu), touch(1.0, 0.0, 90.0, mu * 0.7)];
        let reading = read(&grasp, &frame(0.0, 0.0, 1.0));
        assert_eq!((reading.friction_needed, reading.friction_margin), (None, Some(0.0)));
    }
}

/// Derived from Nguyen 1988 for two contacts: tapered faces tan gamma; opposed pins staggered by s across D: s/D; a chord
/// at beta off a diameter: tan beta.
#[test]
fn friction_needed_of_two_contacts() {
    // The root finder promises 1e-10.
    let needed = |grasp: &[Contact]| read(grasp, &frame(0.3, 0.2, 2.0)).friction_needed.unwrap();
    let tapered = |deg: f64| needed(&[touch(-1.0, 0.0, deg, 0.3), touch(1.0, 0.0, 180.0 - deg, 0.3)]);
    assert_close(tapered(5.0), 0.087489, 0.0, SIX_DIGITS);
    for deg in [0.01, 1.0, 12.0, 40.0, -7.0_f64] {
        assert_close(tapered(deg), deg.abs().to_radians().tan(), 1e-10, 1e-10);
    }
    for (s, d) in [(1.0, 20.0), (0.01, 3.0), (5.0, 4.0)] {
        let staggered = [touch_along(-d / 2.0, 0.0, [1.0, 0.0], 0.25), touch_along(d / 2.0, s, [-1.0, 0.0], 0.25)];
        assert_close(needed(&staggered), s / d, 1e-10, 1e-10);
    }
    for beta in [0.02, 0.3, 1.1] {
        // A chord at beta off the diameter through its first end: the second end is at pi + 2 beta.
        let chord = [on_disc(1.5, 0.6, 0.25), on_disc(1.5, 0.6 + PI + 2.0 * beta, 0.25)];
        assert_close(needed(&chord), f64::tan(beta), 1e-10, 1e-10);
    }
}

/// Derived by hand (polygon formulas, statics); every input has two different sides.
#[test]
fn the_ell_plate() {
    let mut described = PartDescription::bare(
        "ell",
        vec![vec![[0.0, 0.0], [120.0, 0.0], [120.0, 40.0], [40.0, 40.0], [40.0, 120.0], [0.0, 120.0]]],
    );
    described.thickness = Some(10.0);
    described.density_kg_m3 = Some(7850.0);
    let plate = Part::new(described).unwrap();
    let region = plate.outline().region();
    assert_close(region.area_mm2, 8000.0, 1e-13, 0.0);
    assert_close(plate.com().x, 44.0, 1e-13, 0.0);
    assert_close(plate.com().y, 44.0, 1e-13, 0.0);
    assert_close(region.ixx_mm4, 9_258_666.667, 1e-10, 0.0);
    assert_close(region.iyy_mm4, 9_258_666.667, 1e-10, 0.0);
    assert_close(region.ixy_mm4, -4_608_000.0, 1e-12, 0.0);
    let mass = plate.mass().unwrap();
    assert_close(mass.kg, 0.628, 1e-12, 0.0);
    assert_close(mass.polar_kg_m2, 1.453611e-3, 5e-7, 0.0);
    assert_close(plate.reach_mm(), 87.817994, 1e-8, 0.0);

    let scene = scene(plate, 0.25, TorqueScale::Reach);
    // Pins at (80, 0) and (80, 40).
    let grasp = scene.grasp(&pins(&[(0, 80.0), (2, 40.0)])).unwrap();
    let (reading, doubts) = scene.assess(&grasp);
    assert!(doubts.is_empty(), "{doubts:?}");
    assert_eq!(reading.verdict, Verdict::Closed);
    assert_close(reading.quality, 0.046976, 0.0, SIX_DIGITS);
    assert_close(reading.quality_per_finger, 0.092198, 0.0, SIX_DIGITS);
    // Two pins straight across 40 mm: placement mu a.
    assert_close(reading.placement.torque_mm, 0.25 * 20.0, 1e-12, 0.0);
}

/// Ferrari & Canny 1992, the meaning of quality: a ball of that radius, and no larger, fits in the hull of the wrenches.
/// Seen through support values along many directions, none of which the program chose itself.
#[test]
fn no_direction_is_weaker_than_the_quality() {
    let mut dice = Dice::seeded(92);
    for _ in 0..300 {
        let n = 2 + dice.pick(5);
        let mu = dice.even(0.2, 0.9);
        let grasp: Vec<_> = (0..n).map(|_| on_disc(1.0, dice.even(0.0, TAU), mu)).collect();
        let unit = frame(0.2, 0.1, 1.0);
        let wrenches = Wrenches::new(&grasp, &unit);
        let reading = Assessment::of(&wrenches, &unit, mu, &vec![1.0; n]);
        let Some(weakest) = reading.weakest else { continue };
        assert_close(wrenches.support(&weakest.direction), reading.quality, 0.0, 1e-9);
        assert_close(quality::planar(&wrenches).signed_quality, reading.quality, 0.0, 0.0);
        for _ in 0..200 {
            let u = nalgebra::Vector3::new(dice.even(-1.0, 1.0), dice.even(-1.0, 1.0), dice.even(-1.0, 1.0));
            if u.norm() > 0.1 {
                assert!(wrenches.support(&u.normalize()) >= reading.quality - 1e-12);
            }
        }
    }
}

/// Two flat pads of half-width q across 2 a, torque scale l: quality = min(mu, (mu a + q) / sqrt(l^2 + a^2 (1 + mu^2))).
/// Derived from the definition of Ferrari & Canny 1992: across the faces nothing gives more than mu; about the middle the
/// two ends of each pad add q to what friction gives.
#[test]
fn two_flat_pads() {
    let pads = |q: f64, mu: f64, a: f64| {
        [touch(-a, 0.0, 0.0, mu), touch(a, 0.0, 180.0, mu)].map(|c| Contact { half_width_mm: q, ..c })
    };
    assert_close(read(&pads(0.05, 0.2, 1.0), &frame(0.0, 0.0, 1.0)).quality, 0.175035, 0.0, 5e-7);
    for q in [0.08566, 0.2, 3.0] {
        assert_close(read(&pads(q, 0.2, 1.0), &frame(0.0, 0.0, 1.0)).quality, 0.2, 1e-5, 0.0);
    }
    for (mu, a, l) in [(0.1, 10.0, 10.0), (0.3, 25.0, 40.0), (0.7, 8.0, 5.0), (1.0, 3.0, 30.0)] {
        for q in [0.0, 0.02 * a, 0.3 * a, 2.0 * a] {
            let by_hand = f64::min(mu, (mu * a + q) / f64::sqrt(l * l + a * a * (1.0 + mu * mu)));
            let reading = read(&pads(q, mu, a), &frame(0.0, 0.0, l));
            assert_close(reading.quality, by_hand, 1e-12, 0.0);
            // About the middle both fingers together, each with all its force: twice what half of it each would give.
            assert!(
                reading.quality_per_finger >= reading.quality && reading.quality_per_finger <= 2.0 * by_hand + 1e-12
            );
            // The pure torque per newton: friction's arm and the pad's.
            assert_close(reading.placement.torque_mm, mu * a + q, 1e-12, 0.0);
        }
    }
}
