//! Edges that are arcs: mass, where pins fit, and scores, against closed forms and plain geometry.
#![allow(clippy::unwrap_used, reason = "a test that cannot go on has failed")]

mod common;

use common::{Dice, assert_close, part, part_with_arcs};
use holdwright::hand::{FingerCount, Hand, stretch_around, stretches};
use holdwright::mechanics::{Verdict, quality};
use holdwright::part::{ArcDescription, Edge, EdgeId, Part, PartDescription, PartFault};
use holdwright::search::{Cancel, Key, Listing, Scene, Setup, Spot, TorqueScale, sample};
use nalgebra::{Point2, Vector2};
use std::f64::consts::{FRAC_PI_2, PI, TAU};
use std::sync::Arc;

/// A disc as two half circles, drawn either way round.
fn disc(x: f64, y: f64, r: f64, bulge: f64) -> Part {
    part_with_arcs(vec![vec![[x - r, y], [x + r, y]]], &[(0, 0, bulge), (0, 1, bulge)])
}

/// Handbook formulas (any table of plane sections): disc pi r^2 and pi r^4 / 4; half disc centroid 4 r / 3 pi, I about the
/// base pi r^4 / 8; quarter-circle fillet between its tangents (1 - pi / 4) r^2.
#[test]
fn moments_of_round_shapes() {
    for (x, y, bulge) in [(0.0, 0.0, 1.0), (7.0, -3.0, -1.0), (1e6, 2e6, 1.0)] {
        let disc = disc(x, y, 12.5, bulge);
        let region = disc.outline().region();
        assert_close(region.area_mm2, PI * 12.5 * 12.5, 1e-13, 0.0);
        assert_close(region.ixx_mm4, PI * 12.5_f64.powi(4) / 4.0, 1e-12, 0.0);
        assert_close(region.iyy_mm4, PI * 12.5_f64.powi(4) / 4.0, 1e-12, 0.0);
        assert_close(region.ixy_mm4, 0.0, 0.0, 1e-8);
        let centre = disc.file_point(disc.com());
        assert_close(centre.x, x, 1e-15, 1e-12);
        assert_close(centre.y, y, 1e-15, 1e-12);
        assert_close(disc.reach_mm(), 12.5, 1e-13, 0.0);
        assert_close(disc.outline().perimeter_mm(), TAU * 12.5, 1e-13, 0.0);
        let (low, high) = disc.outline().bounds();
        assert_close(high.x - low.x, 25.0, 1e-13, 0.0);
        assert_close(high.y - low.y, 25.0, 1e-13, 0.0);
    }
    let half = part_with_arcs(vec![vec![[-8.0, 0.0], [8.0, 0.0]]], &[(0, 1, 1.0)]);
    let region = half.outline().region();
    assert_close(region.area_mm2, PI * 32.0, 1e-13, 0.0);
    assert_close(half.file_point(region.centroid).y, 4.0 * 8.0 / (3.0 * PI), 1e-13, 0.0);
    let about_base = region.ixx_mm4 + region.area_mm2 * (4.0 * 8.0 / (3.0 * PI)).powi(2);
    assert_close(about_base, PI * 8.0_f64.powi(4) / 8.0, 1e-13, 0.0);
    // A square corner of side 5 hollowed by a quarter circle: the arc runs clockwise seen along the ring.
    let bulge = -(FRAC_PI_2 / 4.0).tan();
    let hollow = part_with_arcs(vec![vec![[0.0, 0.0], [5.0, 0.0], [0.0, 5.0]]], &[(0, 1, bulge)]);
    assert_close(hollow.outline().region().area_mm2, (1.0 - PI / 4.0) * 25.0, 1e-13, 0.0);
}

/// A washer's hole is taken out, whatever the windings.
#[test]
fn a_hole_of_arcs() {
    for bulge in [1.0, -1.0] {
        let rings = vec![vec![[-20.0, 0.0], [20.0, 0.0]], vec![[1.0, -7.0], [1.0, 7.0]]];
        let washer = part_with_arcs(rings, &[(0, 0, 1.0), (0, 1, 1.0), (1, 0, bulge), (1, 1, bulge)]);
        let region = washer.outline().region();
        assert_close(region.area_mm2, PI * (400.0 - 49.0), 1e-13, 0.0);
        // Moments subtract: x = -49 / (400 - 49) for a hole at x = 1.
        assert_close(washer.file_point(region.centroid).x, -49.0 / 351.0, 1e-12, 0.0);
        // Normals point into the material: away from the hole's centre, toward the disc's.
        let outline = washer.outline();
        for edge in outline.edges() {
            let along = edge.length_mm() / 3.0;
            let point = washer.file_point(edge.point_at(along));
            let hole = edge.id().ring == 1;
            let centre = if hole { Point2::new(1.0, 0.0) } else { Point2::origin() };
            let outward = edge.normal_at(along).dot(&(point - centre));
            assert!(if hole { outward > 0.0 } else { outward < 0.0 });
            assert_eq!(edge.curvature() > 0.0, !hole);
        }
    }
}

fn faults(rings: Vec<Vec<[f64; 2]>>, arcs: &[(usize, usize, f64)]) -> Vec<PartFault> {
    let mut described = PartDescription::bare("faulty", rings);
    described.arcs = arcs.iter().map(|&(ring, edge, bulge)| ArcDescription { ring, edge, bulge }).collect();
    Part::new(described).err().map_or(Vec::new(), |faults| faults.0)
}

#[test]
fn arcs_that_cannot_be() {
    let square = || vec![vec![[0.0, 0.0], [10.0, 0.0], [10.0, 10.0], [0.0, 10.0]]];
    assert_eq!(faults(square(), &[(0, 1, 0.3)]), []);
    assert!(matches!(faults(square(), &[(0, 1, f64::NAN)])[..], [PartFault::BadBulge { entry: 0, .. }]));
    assert!(matches!(faults(square(), &[(0, 1, 0.2), (0, 1, 0.3)])[..], [PartFault::ArcTwice { entry: 1, .. }]));
    assert!(matches!(faults(square(), &[(0, 4, 0.2)])[..], [PartFault::NoSuchEdge { table: "arc", .. }]));
    // A deep dent reaches the side across: sagitta = bulge * chord / 2 = 10.5.
    let a = EdgeId { ring: 0, edge: 0 };
    let b = EdgeId { ring: 0, edge: 2 };
    let dent = faults(square(), &[(0, 0, -2.1)]);
    assert!(
        dent.iter().any(|fault| matches!(fault, PartFault::Meet { a: x, b: y, .. } if (*x, *y) == (a, b))),
        "{dent:?}"
    );
    assert!(dent[0].to_string().contains("ring 0 edge 0"), "{}", dent[0]);
    // Two vertices are a ring only with an arc between them.
    assert!(matches!(faults(vec![vec![[0.0, 0.0], [5.0, 0.0]]], &[])[..], [PartFault::TooFewVertices { .. }]));
    assert_eq!(faults(vec![vec![[0.0, 0.0], [5.0, 0.0]]], &[(0, 0, 0.5)]), []);
    // There and back along the same arc encloses nothing.
    assert_ne!(faults(vec![vec![[0.0, 0.0], [5.0, 0.0]]], &[(0, 0, 0.5), (0, 1, -0.5)]), []);
}

/// Distance to an edge by brute force: the nearest of many points on it, and so too large by at most their spacing
/// squared over twice the distance.
fn distance(point: Point2<f64>, edge: &Edge) -> f64 {
    let n = 4000;
    (0..=n)
        .map(|i| (edge.point_at(edge.length_mm() * f64::from(i) / f64::from(n)) - point).norm())
        .fold(f64::INFINITY, f64::min)
}

/// A blob of arcs, some bulging out and some in.
fn blob(dice: &mut Dice) -> Option<Part> {
    let n = 3 + dice.pick(6);
    let ring: Vec<[f64; 2]> = (0..n)
        .map(|i| {
            let at = (i as f64 + dice.even(-0.3, 0.3)) / n as f64 * TAU;
            let r = dice.even(20.0, 50.0);
            [r * at.cos(), r * at.sin()]
        })
        .collect();
    let mut described = PartDescription::bare("blob", vec![ring]);
    for edge in 0..n {
        if dice.pick(4) > 0 {
            described.arcs.push(ArcDescription { ring: 0, edge, bulge: dice.even(-0.7, 0.9) });
        }
    }
    Part::new(described).ok()
}

/// A pin may stand where its circle meets no other edge, by plain distances.
#[test]
fn pins_fit_on_arcs_where_nothing_is_in_their_way() {
    let mut dice = Dice::seeded(11);
    let (mut parts, mut free, mut stopped) = (0, 0, 0);
    while parts < 40 {
        let Some(part) = blob(&mut dice) else { continue };
        parts += 1;
        let hand = Hand { pin_radius_mm: dice.even(1.0, 40.0), ..Hand::default() };
        let found = stretches(&part, &hand);
        for edge in part.outline().edges() {
            for _ in 0..12 {
                let along = dice.even(0.0, edge.length_mm());
                let centre = edge.point_at(along) - edge.normal_at(along) * hand.pin_radius_mm;
                let others = part.outline().edges().iter().filter(|other| other.id() != edge.id());
                let near = others.map(|other| distance(centre, other)).fold(f64::INFINITY, f64::min);
                let hollow = edge.arc().is_some_and(|arc| !arc.convex && arc.radius < hand.pin_radius_mm);
                // Not within a hair of a stretch's end.
                if (near - hand.pin_radius_mm).abs() < 1e-3 {
                    continue;
                }
                let fits = stretch_around(&found, edge.id(), along).is_some();
                assert_eq!(fits, near > hand.pin_radius_mm && !hollow, "{:?} at {along}", edge.id());
                *(if fits { &mut free } else { &mut stopped }) += 1;
            }
        }
    }
    assert!(free > 500 && stopped > 150, "{free} {stopped}");
}

fn scene(part: Part, fingers: usize, mu: f64, scale: TorqueScale) -> Scene {
    let mut setup = Setup::default();
    setup.hand.fingers = FingerCount::new(fingers).unwrap();
    setup.friction.mu = mu;
    setup.search.torque_scale = scale;
    Scene::new(Arc::new(part), setup).unwrap()
}

/// Derived (definition of Ferrari & Canny 1992): three even contacts on a disc of radius r = l have quality mu; two
/// facing ones mu / sqrt(1 + mu^2 + (l/a)^2). The disc is two arcs here, and the normals are the true ones.
#[test]
fn a_disc_of_two_arcs_scores_like_a_disc() {
    let scene = scene(disc(3.0, 4.0, 30.0, 1.0), 3, 0.3, TorqueScale::Reach);
    let at = |angle: f64| {
        // Edge 0 runs counter-clockwise from the left over the bottom, edge 1 back over the top.
        let from_left = (angle - PI).rem_euclid(TAU);
        let edge = usize::from(from_left >= PI);
        Spot { edge: EdgeId { ring: 0, edge }, along_mm: 30.0 * (from_left - PI * edge as f64) }
    };
    let three = scene.grasp(&[at(0.1), at(0.1 + TAU / 3.0), at(0.1 + 2.0 * TAU / 3.0)]).unwrap();
    let (reading, doubts) = scene.assess(&three);
    assert_eq!(doubts, []);
    assert_close(reading.quality, 0.3, 1e-12, 0.0);
    let two = scene.grasp(&[at(1.0), at(1.0 + PI)]).unwrap();
    let (reading, doubts) = scene.assess(&two);
    assert_eq!(doubts, []);
    assert_close(reading.quality, 0.3 / (1.0_f64 + 0.09 + 1.0).sqrt(), 1e-12, 0.0);
    // On a disc sliding a contact only turns the chord: two contacts stay closed while the chord stays within both cones
    // (Nguyen 1988), that is while the angle each has moved by, both the same way round or not, keeps |a - b| / 2 below
    // atan mu: up to r atan mu each. The guarantee must not claim more.
    assert!(reading.placement.torque_mm <= 30.0 * 0.3_f64.atan() + 1e-9);
    assert!(reading.placement.torque_mm > 0.4 * 30.0 * 0.3_f64.atan(), "{}", reading.placement.torque_mm);
}

/// The placement tolerance on arcs is a guarantee: no combination of offsets within it loses closure.
#[test]
fn the_placement_tolerance_holds_on_arcs() {
    let mut dice = Dice::seeded(5);
    let (mut tried, mut beyond) = (0, 0);
    while tried < 250 {
        let Some(part) = blob(&mut dice) else { continue };
        let fingers = 2 + dice.pick(4);
        let scene = scene(part, fingers, dice.even(0.1, 0.9), TorqueScale::Reach);
        let edges = scene.part().outline().edges();
        let spots: Vec<Spot> = (0..fingers)
            .map(|_| {
                let edge = &edges[dice.pick(edges.len())];
                Spot { edge: edge.id(), along_mm: dice.even(0.05, 0.95) * edge.length_mm() }
            })
            .collect();
        let grasp = scene.grasp(&spots).unwrap();
        let (reading, doubts) = scene.assess(&grasp);
        assert_eq!(doubts, [], "{spots:?}");
        if reading.verdict != Verdict::Closed || !grasp.curvatures.iter().any(|&c| c != 0.0) {
            continue;
        }
        tried += 1;
        let closes = |offsets: &[f64]| {
            let moved: Vec<Spot> = spots
                .iter()
                .zip(offsets)
                .map(|(spot, offset)| Spot { along_mm: spot.along_mm + offset, ..*spot })
                .collect();
            // Offsets may leave an edge; then this combination says nothing.
            scene.grasp(&moved).ok().map(|g| quality::planar(&scene.wrenches(&g)).signed_quality > 0.0)
        };
        let reach = reading.placement.torque_mm;
        for corner in 0..1 << fingers {
            let signs = |f: usize| if corner >> f & 1 == 1 { 1.0 } else { -1.0 };
            let extreme: Vec<f64> = (0..fingers).map(|f| signs(f) * reach * 0.999).collect();
            assert_ne!(closes(&extreme), Some(false), "{spots:?} {reach}");
            let inside: Vec<f64> = (0..fingers).map(|_| dice.even(-0.999, 0.999) * reach).collect();
            assert_ne!(closes(&inside), Some(false), "{spots:?} {reach}");
            let far: Vec<f64> = (0..fingers).map(|f| signs(f) * reach * 1.6).collect();
            beyond += u32::from(closes(&far) == Some(false));
        }
    }
    // And it is no idle one: somewhat beyond it closure is often lost.
    assert!(beyond > 200, "{beyond}");
}

/// The same shape drawn with arcs and with fine chords: scores at the same places agree as the chords grow finer.
#[test]
fn arcs_and_fine_chords_agree() {
    let corner = |x: f64, y: f64| ([x, y], 12.0);
    let corners = vec![corner(0.0, 0.0), corner(90.0, 0.0), corner(80.0, 50.0), corner(10.0, 60.0)];
    let arcs = common::rounded_with_arcs(std::slice::from_ref(&corners));
    let chords = part(vec![common::rounded(&corners)]);
    let of = |part: Part| {
        let mut setup = Setup::default();
        setup.search.spacing_mm = Some(4.0);
        let scene = Scene::new(Arc::new(part), setup).unwrap();
        sample(&scene, Key::Quality, Listing::Members, 3, &Cancel::default(), &|_| ()).unwrap()
    };
    let (with_arcs, with_chords) = (of(arcs), of(chords));
    assert_eq!(with_arcs.inconclusive, 0);
    let best = |ranking: &holdwright::search::Ranking| ranking.grasps[0].assessment.quality;
    assert_close(best(&with_arcs), best(&with_chords), 0.02, 0.0);
}

#[test]
fn tangents_meet_where_a_fillet_begins() {
    let square = vec![([0.0, 0.0], 5.0), ([40.0, 0.0], 5.0), ([40.0, 30.0], 5.0), ([0.0, 30.0], 5.0)];
    let part = common::rounded_with_arcs(&[square]);
    let edges = part.outline().edges();
    for (i, edge) in edges.iter().enumerate() {
        let next = &edges[(i + 1) % edges.len()];
        let turn: Vector2<f64> = edge.direction_at(edge.length_mm()) - next.direction_at(0.0);
        assert!(turn.norm() < 1e-12);
        assert!((edge.point_at(edge.length_mm()) - next.start()).norm() < 1e-12);
    }
    assert_close(part.outline().region().area_mm2, 40.0 * 30.0 - (4.0 - PI) * 25.0, 1e-13, 0.0);
}
