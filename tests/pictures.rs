//! What the pictures of a grasp are drawn from: finger forces, the acceleration envelope, each finger's leeway.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test stops at the first surprise")]

mod common;

use common::{assert_close, bracket, rounded_with_arcs};
use good_lp::{Expression, Solution, SolverModel, constraint, microlp, variable, variables};
use holdwright::hand::{Closing, FingerCount, Tip};
use holdwright::mechanics::program::{self, Solved};
use holdwright::mechanics::spatial::Wrench;
use holdwright::mechanics::squeeze::FingerForce;
use holdwright::mechanics::{Assessment, LoadCase, Verdict};
use holdwright::part::{Part, PartDescription};
use holdwright::search::leeway::{EndedBy, Leeway, leeway};
use holdwright::search::{Cancel, Grasp, Key, Listing, Scene, Setup, sample};
use nalgebra::Vector3;
use std::f64::consts::TAU;
use std::sync::Arc;

/// g as in ISO 80000-3.
const G: f64 = 9.80665;

fn cases() -> Vec<LoadCase> {
    let case = |name: &str| LoadCase { name: name.to_owned(), ..LoadCase::default() };
    vec![
        LoadCase { acceleration_m_s2: [0.0, 0.0, 3.0], safety: 2.0, ..case("lift") },
        LoadCase { any_direction_m_s2: 8.0, safety: 1.5, gravity: [0.0, -2.0, -1.0], ..case("stop") },
        LoadCase { force_n: [3.0, -6.0, 1.0], at_mm: [80.0, 20.0, 2.0], squeeze_left: 0.5, ..case("brush") },
    ]
}

/// A steel bracket (7850 kg/m3: Gere, Table H-1), 8 mm thick, under the loads above; for parallel jaws a plate with
/// parallel edges.
fn scene(tip: Tip, fingers: usize, closing: Closing) -> Scene {
    let outer = vec![[0.0, 0.0], [80.0, 0.0], [80.0, 24.0], [52.0, 40.0], [0.0, 40.0]];
    let hole = vec![[12.0, 10.0], [28.0, 10.0], [28.0, 26.0], [12.0, 26.0]];
    let described = match closing {
        Closing::Free => bracket(),
        Closing::Parallel => PartDescription::bare("plate", vec![outer, hole]),
    };
    let part = Part::new(PartDescription { thickness: Some(8.0), ..described }).unwrap();
    let part = part.with_density("steel", 7850.0).unwrap();
    let mut setup = Setup { loads: cases(), ..Setup::default() };
    setup.friction.mu = 0.3;
    setup.hand.tip = tip;
    setup.hand.closing = closing;
    setup.hand.fingers = FingerCount::new(fingers).unwrap();
    setup.hand.pin_radius_mm = 3.0;
    setup.hand.gap_mm = 1.0;
    setup.hand.force_limit_n = Some(400.0);
    setup.search.spacing_mm = Some(9.0);
    Scene::new(Arc::new(part), setup).unwrap()
}

fn listed(scene: &Scene, most: usize) -> Vec<Grasp> {
    let ranking = sample(scene, Key::Quality, Listing::Families, most, &Cancel::default(), &|_| ()).unwrap();
    ranking.grasps.into_iter().map(|row| row.grasp).collect()
}

/// The load of a case about the centre of mass from its definition: force in N, moment in N mm.
fn load(scene: &Scene, case: &LoadCase, direction_deg: Option<f64>) -> (Vector3<f64>, Vector3<f64>) {
    let mass_kg = scene.part().mass().unwrap().kg;
    let mut acceleration = Vector3::from(case.acceleration_m_s2);
    if let Some(deg) = direction_deg {
        // The corners of the polygon about the circle: 16 directions.
        let size = case.any_direction_m_s2 / (TAU / 32.0).cos();
        acceleration += Vector3::new(deg.to_radians().cos(), deg.to_radians().sin(), 0.0) * size;
    }
    let outside = Vector3::from(case.force_n);
    let com = scene.part().file_point(scene.part().com());
    let arm = Vector3::from(case.at_mm) - Vector3::new(com.x, com.y, 0.0);
    let down = Vector3::from(case.gravity).normalize() * G;
    ((down - acceleration) * mass_kg * case.safety + outside * case.safety, arm.cross(&outside) * case.safety)
}

/// By how little forces at the points where the fingers touch, inside pyramids in their cones and adding up to each
/// finger's own, can miss balancing a load in six rows: a program of the test's own. Moments stand over 50 mm.
fn missed(scene: &Scene, grasp: &Grasp, forces: &[FingerForce], load: (Vector3<f64>, Vector3<f64>)) -> f64 {
    const ARM: f64 = 50.0;
    let sides = scene.setup().search.cone_sides;
    let bite = scene.setup().hand.bite_for(scene.part().thickness_mm());
    let mut vars = variables!();
    let mut rows: Vec<Expression> =
        load.0.iter().copied().chain((load.1 / ARM).iter().copied()).map(Expression::from).collect();
    let mut sums = Vec::new();
    for (contact, force) in grasp.contacts.iter().zip(forces) {
        let normal = Vector3::new(contact.normal.x, contact.normal.y, 0.0);
        let tangent = Vector3::new(contact.normal.y, -contact.normal.x, 0.0);
        let arm = contact.point - scene.part().com();
        let mut own: [Expression; 3] = Default::default();
        for end in [-1.0, 1.0] {
            for level in [-1.0, 1.0] {
                let at = Vector3::new(arm.x, arm.y, level * bite / 2.0) + tangent * (end * contact.half_width_mm);
                for side in 0..sides {
                    let (sin, cos) = (TAU * side as f64 / sides as f64).sin_cos();
                    let unit = normal + (tangent * cos + Vector3::z() * sin) * contact.mu;
                    let weight = vars.add(variable().min(0.0));
                    let moment = at.cross(&unit) / ARM;
                    for (row, value) in rows.iter_mut().zip(unit.iter().chain(moment.iter())) {
                        *row += *value * weight;
                    }
                    for (sum, value) in own.iter_mut().zip([1.0, contact.mu * cos, contact.mu * sin]) {
                        *sum += value * weight;
                    }
                }
            }
        }
        sums.extend(own.into_iter().zip([force.normal_n, force.along_n, force.up_n]));
    }
    let mut total = Expression::default();
    let mut constraints = Vec::new();
    // Off the row, and off a finger's own force, by rounding: paid for either way.
    for (row, wanted) in rows.into_iter().map(|row| (row, 0.0)).chain(sums) {
        let (over, under) = (vars.add(variable().min(0.0)), vars.add(variable().min(0.0)));
        total += over + under;
        constraints.push(constraint!(row - over + under == wanted));
    }
    let mut model = vars.minimise(total.clone()).using(microlp);
    for constraint in constraints {
        model = model.with(constraint);
    }
    model.solve().unwrap().eval(total)
}

#[test]
fn finger_forces_balance_their_load_in_six_rows_within_cones_and_squeeze() {
    let mut looked = 0;
    for (tip, fingers, closing) in [
        (Tip::Pin, 3, Closing::Free),
        (Tip::Pin, 4, Closing::Free),
        (Tip::Pad, 3, Closing::Free),
        (Tip::Pad, 2, Closing::Parallel),
    ] {
        let scene = scene(tip, fingers, closing);
        for grasp in listed(&scene, 12) {
            let (assessment, _) = scene.assess(&grasp);
            let holding = assessment.holding.unwrap();
            for (number, case) in holding.cases.iter().enumerate() {
                let Some(squeeze_n) = case.squeeze_n else { continue };
                let own = &scene.setup().loads[number];
                let load = load(&scene, own, case.direction_deg);
                let size = 1.0 + load.0.norm();
                assert_eq!(case.forces.len(), grasp.contacts.len());
                let mut sum = load.0;
                for (contact, force) in grasp.contacts.iter().zip(&case.forces) {
                    let n = Vector3::new(contact.normal.x, contact.normal.y, 0.0);
                    let t = Vector3::new(contact.normal.y, -contact.normal.x, 0.0);
                    sum += n * force.normal_n + t * force.along_n + Vector3::z() * force.up_n;
                    let rounding = 1e-9 * size;
                    assert!(
                        force.normal_n >= -rounding && force.tangential_n() <= contact.mu * force.normal_n + rounding
                    );
                    assert!(force.normal_n <= squeeze_n * own.squeeze_left * (1.0 + 1e-9) + rounding, "{force:?}");
                }
                assert!(sum.norm() <= 1e-8 * size, "{sum:?} in {}", case.name);
                let missed = missed(&scene, &grasp, &case.forces, load);
                assert!(missed <= 1e-6 * size, "{missed} N in {}", case.name);
                looked += 1;
            }
        }
    }
    assert!(looked > 60, "{looked}");
}

/// The drawn curve in several directions by the linear program, its loads from the definition.
#[test]
fn the_drawn_envelope_is_the_linear_program_s() {
    let mut points = 0;
    for (tip, fingers) in [(Tip::Pin, 3), (Tip::Pad, 2)] {
        let scene = scene(tip, fingers, Closing::Free);
        let weight_n = scene.part().mass().unwrap().kg * G * 2.0;
        let fixed = Wrench::new(0.0, 0.0, -weight_n, 0.0, 0.0, 0.0);
        for grasp in listed(&scene, 8) {
            let Some(curve) = scene.envelope(&grasp, 72) else { continue };
            assert_eq!(curve.len(), 72);
            let wrenches = scene.wrenches(&grasp);
            for (deg, m_s2) in curve.into_iter().step_by(9) {
                let (sin, cos) = deg.to_radians().sin_cos();
                let growing = Wrench::new(-cos, -sin, 0.0, 0.0, 0.0, 0.0) * (weight_n / G);
                match program::most_held(&scene.hold(&wrenches), &fixed, &growing, 400.0) {
                    Solved::Answer(most) => assert_close(m_s2, most, 1e-6, 1e-6),
                    other => panic!("{other:?} toward {deg}"),
                }
                points += 1;
            }
        }
    }
    assert!(points > 60, "{points}");
}

/// A grasp with one finger moved.
fn moved(scene: &Scene, grasp: &Grasp, finger: usize, along_mm: f64) -> Option<Grasp> {
    let mut spots = grasp.spots.clone();
    spots[finger].along_mm = along_mm;
    scene.grasp(&spots).ok()
}

/// The verdict by the linear program.
fn closed(scene: &Scene, grasp: &Grasp) -> bool {
    let wrenches = scene.wrenches(grasp);
    let by_program = matches!(program::closure(&wrenches), Solved::Answer(balance) if balance.least > 1e-12);
    by_program && Assessment::verdict_at(&wrenches) == Verdict::Closed
}

#[derive(Default)]
struct Ends {
    stretch: usize,
    closure: usize,
    finger: usize,
}

/// Just inside an end all is well, just outside it is not, and well all the way between.
fn check_leeway(scene: &Scene, grasp: &Grasp, all: &[Leeway], ends: &mut Ends) {
    let step = 1e-5;
    for (finger, own) in all.iter().enumerate() {
        let (from, to) = (own.back.along_mm, own.on.along_mm);
        let here = grasp.spots[finger].along_mm;
        assert!(from <= here && here <= to, "{from} {here} {to}");
        for k in 0..=50 {
            let along_mm = from + (to - from) * f64::from(k) / 50.0;
            let inside = along_mm.clamp((from + step).min(here), (to - step).max(here));
            let there = moved(scene, grasp, finger, inside).unwrap();
            assert!(
                there.fits() && closed(scene, &there),
                "finger {finger} at {inside} in {own:?} of {:?}",
                grasp.spots
            );
        }
        for (end, way) in [(own.back, -1.0), (own.on, 1.0)] {
            let beyond = moved(scene, grasp, finger, end.along_mm + way * step);
            match end.by {
                EndedBy::Stretch => {
                    assert!(beyond.is_none_or(|grasp| grasp.rooms_mm[finger] < 0.0), "{own:?}");
                    ends.stretch += 1;
                }
                EndedBy::Closure => {
                    assert!(!closed(scene, &beyond.unwrap()), "finger {finger} of {own:?}");
                    ends.closure += 1;
                }
                EndedBy::Finger(other) => {
                    let pair = (finger.min(other), finger.max(other));
                    assert!(beyond.unwrap().too_near.contains(&pair), "finger {finger} of {own:?}");
                    ends.finger += 1;
                }
            }
        }
    }
}

#[test]
fn each_finger_keeps_the_grasp_closed_up_to_the_ends_of_its_leeway_and_no_farther() {
    let mut ends = Ends::default();
    let round =
        rounded_with_arcs(&[vec![([0.0, 0.0], 12.0), ([90.0, 0.0], 0.0), ([70.0, 50.0], 20.0), ([0.0, 60.0], 8.0)]]);
    let bare = Setup { loads: Vec::new(), ..scene(Tip::Pin, 3, Closing::Free).setup().clone() };
    let scenes = [
        scene(Tip::Pin, 2, Closing::Free),
        scene(Tip::Pin, 3, Closing::Free),
        scene(Tip::Pin, 4, Closing::Free),
        scene(Tip::Pad, 3, Closing::Free),
        Scene::new(Arc::new(round), bare).unwrap(),
    ];
    for scene in &scenes {
        for grasp in listed(scene, 40) {
            let all = leeway(scene, &grasp).unwrap();
            assert_eq!(all.len(), grasp.spots.len());
            check_leeway(scene, &grasp, &all, &mut ends);
        }
    }
    assert!(
        ends.stretch > 50 && ends.closure > 50 && ends.finger > 5,
        "{} {} {}",
        ends.stretch,
        ends.closure,
        ends.finger
    );
}

/// Two pads on one line move together: at both ends of their run they still face each other and the grasp is closed.
#[test]
fn parallel_jaws_move_together() {
    let scene = scene(Tip::Pad, 2, Closing::Parallel);
    let grasps = listed(&scene, 20);
    assert!(grasps.len() > 2);
    for grasp in grasps {
        let all = leeway(&scene, &grasp).unwrap();
        assert_eq!(all.len(), 2);
        for (own, spot) in all.iter().zip(&grasp.spots) {
            assert!(own.back.along_mm <= spot.along_mm + 1e-6 && spot.along_mm <= own.on.along_mm + 1e-6, "{own:?}");
        }
        // One runs up its edge while the other may run down: one of the two pairings of ends stands.
        let together = [(all[0].back, all[1].back), (all[0].back, all[1].on)].into_iter().any(|(a, b)| {
            let mut spots = grasp.spots.clone();
            (spots[0].along_mm, spots[1].along_mm) = (a.along_mm, b.along_mm);
            scene.grasp(&spots).is_ok_and(|there| there.fits() && closed(&scene, &there))
        });
        assert!(together, "{all:?} of {:?}", grasp.spots);
    }
}

/// A grasp that is open, or that stands where it may not, has no leeway.
#[test]
fn what_does_not_hold_has_no_leeway() {
    let scene = scene(Tip::Pin, 3, Closing::Free);
    let grasp = listed(&scene, 1).remove(0);
    let mut near = grasp.spots.clone();
    near[1] = near[0];
    assert!(leeway(&scene, &scene.grasp(&near).unwrap()).is_none());
    let mut setup = scene.setup().clone();
    setup.friction.mu = 0.0;
    let slippery = Scene::new(Arc::clone(scene.part()), setup).unwrap();
    assert!(leeway(&slippery, &slippery.grasp(&grasp.spots).unwrap()).is_none());
}
