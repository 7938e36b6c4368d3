//! What several test files share: one way to compare numbers, contacts and shapes to try, seeded dice.
#![allow(dead_code, reason = "every test file takes what it needs")]
#![allow(clippy::unwrap_used, reason = "a test stops at the first surprise")]

use holdwright::hand::{FingerCount, Stretch};
use holdwright::mechanics::{Assessment, Contact, Frame, Wrenches};
use holdwright::part::{ArcDescription, Edge, KeepOutDescription, Part, PartDescription};
use holdwright::search::{Scene, Setup};
use nalgebra::{Point2, Rotation2, Vector2};
use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::{Rng, SeedableRng};
use std::sync::Arc;

/// Fails unless `|a - b| <= abs + rel * max(|a|, |b|)`; NaN always fails.
#[track_caller]
pub(crate) fn assert_close(a: f64, b: f64, rel: f64, abs: f64) {
    let allowed = abs + rel * a.abs().max(b.abs());
    let off = (a - b).abs();
    assert!(off <= allowed, "{a} is not {b}: off by {off:e}, allowed {allowed:e}");
}

/// A contact at a point with the inward normal at `normal_deg` from +x.
pub(crate) fn touch(x: f64, y: f64, normal_deg: f64, mu: f64) -> Contact {
    let angle = normal_deg.to_radians();
    Contact { point: Point2::new(x, y), normal: Vector2::new(angle.cos(), angle.sin()), mu, half_width_mm: 0.0 }
}

/// A contact with its unit normal given outright, for right angles that are to be exact.
pub(crate) fn touch_along(x: f64, y: f64, normal: [f64; 2], mu: f64) -> Contact {
    Contact { point: Point2::new(x, y), normal: Vector2::new(normal[0], normal[1]), mu, half_width_mm: 0.0 }
}

/// A contact on a circle about the origin, pressing toward the centre.
pub(crate) fn on_disc(radius: f64, at_rad: f64, mu: f64) -> Contact {
    let out = Vector2::new(at_rad.cos(), at_rad.sin());
    Contact { point: Point2::from(out * radius), normal: -out, mu, half_width_mm: 0.0 }
}

/// A frame about a point with a torque scale.
pub(crate) fn frame(x: f64, y: f64, scale_mm: f64) -> Frame {
    Frame { about: Point2::new(x, y), scale_mm }
}

/// Reads a grasp with room to spare on every stretch.
pub(crate) fn read(contacts: &[Contact], frame: &Frame) -> Assessment {
    let mu = contacts.iter().map(|c| c.mu).fold(0.0, f64::max);
    Assessment::of(&Wrenches::new(contacts, frame), frame, mu, &vec![f64::MAX; contacts.len()])
}

/// The contacts turned about the origin, then moved.
pub(crate) fn moved(contacts: &[Contact], turn_rad: f64, by: Vector2<f64>) -> Vec<Contact> {
    let turn = Rotation2::new(turn_rad);
    contacts.iter().map(|c| Contact { point: turn * c.point + by, normal: turn * c.normal, ..*c }).collect()
}

/// Seeded dice; the same numbers on every machine.
pub(crate) struct Dice(ChaCha8Rng);

impl Dice {
    pub(crate) fn seeded(seed: u64) -> Self {
        Self(ChaCha8Rng::seed_from_u64(seed))
    }

    /// Even in `[low, high)`.
    pub(crate) fn even(&mut self, low: f64, high: f64) -> f64 {
        let unit = (self.0.next_u64() >> 11) as f64 / (1u64 << 53) as f64;
        low + (high - low) * unit
    }

    /// One of `0..count`.
    pub(crate) fn pick(&mut self, count: usize) -> usize {
        (self.0.next_u64() % count as u64) as usize
    }
}

/// A part from rings in mm.
pub(crate) fn part(rings: Vec<Vec<[f64; 2]>>) -> Part {
    Part::new(PartDescription::bare("test part", rings)).unwrap()
}

/// A part from rings in mm of which some edges are arcs: ring, edge, bulge.
pub(crate) fn part_with_arcs(rings: Vec<Vec<[f64; 2]>>, arcs: &[(usize, usize, f64)]) -> Part {
    let mut described = PartDescription::bare("test part", rings);
    described.arcs = arcs.iter().map(|&(ring, edge, bulge)| ArcDescription { ring, edge, bulge }).collect();
    Part::new(described).unwrap()
}

/// Chords for each rounded corner: their sagitta is below 1e-4 of the radius.
const CHORDS: usize = 64;

/// A corner of a polygon and the radius it is rounded with; 0 leaves it sharp.
pub(crate) type Corner = ([f64; 2], f64);

/// Where a rounded corner begins, its centre, and the angle it sweeps.
fn fillet(corners: &[Corner], i: usize) -> (Point2<f64>, Point2<f64>, f64) {
    let n = corners.len();
    let ([x, y], radius) = corners[i];
    let here = Point2::new(x, y);
    let toward = |j: usize| (Point2::from(corners[j % n].0) - here).normalize();
    let (back, on) = (toward(i + n - 1), toward(i + 1));
    // Tangent points lie r / tan(half the corner's angle) from the vertex, the centre r / sin(half) along the bisector.
    let half = back.dot(&on).acos() / 2.0;
    let centre = here + (back + on).normalize() * (radius / half.sin());
    let from = here + back * (radius / half.tan());
    let to = here + on * (radius / half.tan());
    let sweep = (from - centre).perp(&(to - centre)).signum() * (std::f64::consts::PI - 2.0 * half);
    (from, centre, sweep)
}

/// A polygon with rounded corners, the fillets as chords.
pub(crate) fn rounded(corners: &[Corner]) -> Vec<[f64; 2]> {
    let mut ring = Vec::new();
    for (i, &(sharp, radius)) in corners.iter().enumerate() {
        if radius <= 0.0 {
            ring.push(sharp);
            continue;
        }
        let (from, centre, sweep) = fillet(corners, i);
        for step in 0..=CHORDS {
            let p = centre + Rotation2::new(sweep * step as f64 / CHORDS as f64) * (from - centre);
            ring.push([p.x, p.y]);
        }
    }
    ring
}

/// Rings with rounded corners as one part, the fillets as arcs.
pub(crate) fn rounded_with_arcs(rings: &[Vec<Corner>]) -> Part {
    let (mut vertices, mut arcs) = (Vec::new(), Vec::new());
    for (number, corners) in rings.iter().enumerate() {
        let mut ring = Vec::new();
        for (i, &(sharp, radius)) in corners.iter().enumerate() {
            if radius <= 0.0 {
                ring.push(sharp);
                continue;
            }
            let (from, centre, sweep) = fillet(corners, i);
            let to = centre + Rotation2::new(sweep) * (from - centre);
            arcs.push((number, ring.len(), (sweep / 4.0).tan()));
            ring.extend([[from.x, from.y], [to.x, to.y]]);
        }
        vertices.push(ring);
    }
    part_with_arcs(vertices, &arcs)
}

/// Stretches come in order, apart from one another, and on their edges.
pub(crate) fn check_shape(part: &Part, found: &[Stretch]) {
    for stretch in found {
        let length = part.outline().edge(stretch.edge).map_or(0.0, Edge::length_mm);
        assert!(0.0 <= stretch.from_mm && stretch.from_mm <= stretch.to_mm && stretch.to_mm <= length, "{stretch:?}");
    }
    for pair in found.windows(2) {
        assert!((pair[0].edge, pair[0].to_mm) < (pair[1].edge, pair[1].from_mm), "{pair:?}");
    }
}

/// An asymmetric bracket with a hole and a keep-out.
pub(crate) fn bracket() -> PartDescription {
    let outer = vec![[0.0, 0.0], [70.0, -6.0], [95.0, 31.0], [48.0, 66.0], [9.0, 52.0]];
    let hole = vec![[30.0, 18.0], [52.0, 20.0], [40.0, 39.0]];
    let mut described = PartDescription::bare("bracket", vec![outer, hole]);
    described.keep_outs.push(KeepOutDescription {
        ring: 0,
        edge: 1,
        from: Some(10.0),
        to: Some(20.0),
        reason: "weld".into(),
    });
    described
}

/// A scene of so many fingers under the default setup, changed.
pub(crate) fn scene(described: PartDescription, fingers: usize, change: impl FnOnce(&mut Setup)) -> Scene {
    let mut setup = Setup::default();
    setup.hand.fingers = FingerCount::new(fingers).unwrap();
    change(&mut setup);
    Scene::new(Arc::new(Part::new(described).unwrap()), setup).unwrap()
}
