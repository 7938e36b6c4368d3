//! Grasp quality: the largest disturbance held in every direction.
//!
//! Quality with a limit on the total normal force is the radius of the largest ball about 0 inside the convex hull of
//! the generators (Ferrari & Canny 1992; Kirkpatrick, Mishra & Yap 1992). With a limit on each finger's normal force it
//! is the same ball inside the Minkowski sum over fingers of conv{0, the finger's generators}.
//!
//! Both are least values over unit directions u of a support function, and every direction tried gives an upper bound.
//! So the plain definition is computed without any test that could go wrong: take every direction that *might* be a
//! facet's normal, and keep the least support.

use super::force_polygon::{ForcePolygon, PlanarScore};
use super::wrench::{Lever, MOST_DIRECTIONS, MOST_GENERATORS, Wrenches};
use crate::hand::FingerCount;
use nalgebra::Vector3;

/// The direction in which a closed grasp resists least: unit (fx, fy, tau/l), the normal of the hull's nearest facet.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Weakest {
    /// Unit wrench direction.
    pub direction: Vector3<f64>,
}

impl Weakest {
    /// Angle of the force part in degrees from +x, counter-clockwise; nothing when the direction is pure torque.
    pub fn force_deg(&self) -> Option<f64> {
        // Adding 0 turns -0 into 0.
        (self.force() > 1e-9).then(|| self.direction.y.atan2(self.direction.x).to_degrees() + 0.0)
    }

    /// Share of force, 0 to 1.
    pub fn force(&self) -> f64 {
        self.direction.x.hypot(self.direction.y)
    }

    /// Share of torque over l, -1 to 1, counter-clockwise positive.
    pub fn torque(&self) -> f64 {
        self.direction.z
    }
}

/// Shortest cross product of two chords whose direction still says something.
const LEAST_AREA_SQUARE: f64 = 1e-28;
/// Share of a plane's normal along the torque axis below which it does not cross that axis.
const LEAST_SLOPE: f64 = 1e-11;

/// Closure, quality and placement by the kernel where one friction coefficient holds for all contacts and the kernel is
/// certain, by the plain definition elsewhere.
pub fn planar(wrenches: &Wrenches) -> PlanarScore {
    if let Some(mu) = wrenches.common_mu() {
        let polygon = ForcePolygon::of_levers(wrenches.levers(), mu);
        let score = polygon.score(&polygon.heights_of_levers(wrenches.levers(), mu));
        if score.certain {
            return score;
        }
    }
    by_definition(wrenches.generators())
}

/// Closure, quality and placement by the plain definition: the planes through every three generators, both sides.
pub fn by_definition(generators: &[Vector3<f64>]) -> PlanarScore {
    // Pins alone need half the lanes.
    if generators.len() <= MOST_DIRECTIONS {
        over_triples::<MOST_DIRECTIONS>(generators)
    } else {
        over_triples::<MOST_GENERATORS>(generators)
    }
}

fn over_triples<const MOST: usize>(generators: &[Vector3<f64>]) -> PlanarScore {
    let n = generators.len().min(MOST);
    let mut score = PlanarScore {
        signed_quality: f64::INFINITY,
        torque_up: f64::INFINITY,
        torque_down: f64::INFINITY,
        direction: Vector3::z(),
        certain: true,
    };
    // Padding repeats the first generator: it never reaches farther than the set itself.
    let mut xs = [0.0; MOST];
    let mut ys = [0.0; MOST];
    let mut zs = [0.0; MOST];
    for i in 0..MOST {
        let w = generators.get(i).or(generators.first()).copied().unwrap_or_default();
        (xs[i], ys[i], zs[i]) = (w.x, w.y, w.z);
    }
    let scale = generators.iter().map(Vector3::norm_squared).fold(1.0, f64::max);
    for i in 0..n {
        for j in i + 1..n {
            let a = generators[j] - generators[i];
            for k in j + 1..n {
                let normal = a.cross(&(generators[k] - generators[i]));
                let square = normal.norm_squared();
                if square <= LEAST_AREA_SQUARE * scale * scale {
                    continue;
                }
                let (mut high, mut low) = (f64::NEG_INFINITY, f64::INFINITY);
                for m in 0..MOST {
                    let reach = normal.x * xs[m] + normal.y * ys[m] + normal.z * zs[m];
                    high = if reach > high { reach } else { high };
                    low = if reach < low { reach } else { low };
                }
                let norm = square.sqrt();
                for (reach, sign) in [(high, 1.0), (-low, -1.0)] {
                    if reach < score.signed_quality * norm {
                        score.signed_quality = reach / norm;
                        score.direction = normal * (sign / norm);
                    }
                    let slope = sign * normal.z;
                    if slope > LEAST_SLOPE * norm {
                        score.torque_up = score.torque_up.min(reach / slope);
                    } else if slope < -LEAST_SLOPE * norm {
                        score.torque_down = score.torque_down.min(reach / -slope);
                    }
                }
            }
        }
    }
    if !(wall(generators) > 0.0) {
        score.torque_up = f64::NEG_INFINITY;
        score.torque_down = f64::NEG_INFINITY;
    }
    if score.signed_quality.is_infinite() {
        score.signed_quality = f64::NEG_INFINITY;
    }
    score
}

/// Least reach of the forces over plane directions that might be normal to a side of their hull: above 0 iff the forces
/// positively span the plane.
fn wall(generators: &[Vector3<f64>]) -> f64 {
    let mut wall = f64::INFINITY;
    let mut chords = 0;
    for (i, a) in generators.iter().enumerate() {
        for b in &generators[i + 1..] {
            let (dx, dy) = (b.x - a.x, b.y - a.y);
            let length = dx.hypot(dy);
            if length <= 1e-14 {
                continue;
            }
            chords += 1;
            for (ux, uy) in [(dy / length, -dx / length), (-dy / length, dx / length)] {
                let reach = generators.iter().map(|w| ux * w.x + uy * w.y).fold(f64::NEG_INFINITY, f64::max);
                wall = wall.min(reach);
            }
        }
    }
    if chords == 0 { f64::NEG_INFINITY } else { wall }
}

/// Least reach of the wrench set over all unit directions, and the direction: below 0 it is minus the distance from 0
/// to the hull. Unlike the facet distances of [`planar`], it is exact for open grasps too; slower.
pub fn least_reach(generators: &[Vector3<f64>]) -> (f64, Vector3<f64>) {
    let facets = by_definition(generators);
    let mut best = (facets.signed_quality, facets.direction);
    if best.0.is_infinite() {
        best.0 = f64::INFINITY;
    }
    let mut attempt = |u: Vector3<f64>, scale: f64| {
        let norm = u.norm();
        if norm > 1e-14 * scale {
            let u = u / norm;
            let reach = generators.iter().map(|w| u.dot(w)).fold(f64::NEG_INFINITY, f64::max);
            if reach < best.0 {
                best = (reach, u);
            }
        }
    };
    for (i, a) in generators.iter().enumerate() {
        // The nearest point of an open hull is a corner, or lies on an edge, or inside a facet.
        attempt(-a, 1.0);
        for b in &generators[i + 1..] {
            let edge = b - a;
            let length = edge.norm();
            if length > 1e-14 {
                let along = edge / length;
                attempt(-(a - along * a.dot(&along)), 1.0);
            }
            // Flat sets have no facets; the normals of the planes through 0 take their place.
            let normal = a.cross(b);
            attempt(normal, a.norm() * b.norm());
            attempt(-normal, a.norm() * b.norm());
        }
    }
    // All generators on one line through 0: every direction across it, of which two suffice.
    if let Some(a) = generators.first() {
        for axis in [Vector3::x(), Vector3::y(), Vector3::z()] {
            attempt(a.cross(&axis), a.norm());
        }
    }
    best
}

/// Quality with each finger's normal force limited to 1; 0 when not closed.
pub fn per_finger(wrenches: &Wrenches) -> f64 {
    per_finger_of(wrenches.levers(), wrenches.mus()).0
}

/// How far the fingers together push in direction u: each as far as it can with a unit normal force, or not at all.
pub fn reach_per_finger(levers: &[Lever], mus: &[f64], u: &Vector3<f64>) -> f64 {
    let reach = |(lever, mu): (&Lever, &f64)| lever.generators(*mu).iter().map(|w| u.dot(w)).fold(0.0, f64::max);
    levers.iter().zip(mus).map(reach).sum()
}

/// Directions of the edges of conv{0, a finger's generators}, most of one finger: to each generator, from cone edge to
/// cone edge, and from end to end of a pad. The generators of a pad are the corners of a parallelogram.
const MOST_EDGES: usize = 6;

/// Quality with each finger limited, and the direction that attains it. Exact: all normals of the Minkowski sum's facets
/// are tried, the cross products of two edges of the fingers' own hulls.
pub fn per_finger_of(levers: &[Lever], mus: &[f64]) -> (f64, Vector3<f64>) {
    let mut edges = [Vector3::zeros(); MOST_EDGES * FingerCount::MOST];
    let mut count = 0;
    let mut add = |edge| {
        edges[count] = edge;
        count += 1;
    };
    for (lever, &mu) in levers.iter().zip(mus) {
        lever.generators(mu).iter().copied().for_each(&mut add);
        if mu > 0.0 {
            add(Vector3::new(lever.tangent.x, lever.tangent.y, lever.tangent_torque));
        }
    }
    if levers.iter().any(|lever| lever.spread > 0.0) {
        add(Vector3::z());
    }
    let edges = &edges[..count];
    let mut generators = [Vector3::zeros(); MOST_GENERATORS];
    let mut ends = [0; FingerCount::MOST];
    let mut n = 0;
    for (end, (lever, &mu)) in ends.iter_mut().zip(levers.iter().zip(mus)) {
        let own = lever.generators(mu);
        generators[n..n + own.len()].copy_from_slice(&own);
        n += own.len();
        *end = n;
    }
    let mut least = (f64::INFINITY, Vector3::z());
    for (i, a) in edges.iter().enumerate() {
        for b in &edges[i + 1..] {
            let normal = a.cross(b);
            let square = normal.norm_squared();
            if square <= 1e-28 * a.norm_squared() * b.norm_squared() {
                continue;
            }
            let (mut up, mut down) = (0.0, 0.0);
            let mut from = 0;
            for &end in &ends[..levers.len()] {
                let (mut high, mut low) = (0.0_f64, 0.0_f64);
                for w in &generators[from..end] {
                    let reach = normal.dot(w);
                    high = high.max(reach);
                    low = low.min(reach);
                }
                up += high;
                down -= low;
                from = end;
            }
            let norm = square.sqrt();
            for (reach, sign) in [(up, 1.0), (down, -1.0)] {
                if reach < least.0 * norm {
                    least = (reach / norm, normal * (sign / norm));
                }
            }
        }
    }
    if least.0.is_finite() { least } else { (0.0, least.1) }
}
