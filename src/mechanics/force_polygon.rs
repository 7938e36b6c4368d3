//! The kernel: closure, quality and placement tolerance of a planar grasp, in well under a microsecond.
//!
//! # The idea
//! With one friction coefficient all cone-edge forces have the same length, `sqrt(1 + mu^2)`, so in the force plane
//! they are points on one circle: in convex position whatever the grasp. The wrench hull is then a fixed convex polygon
//! of forces with a height (torque over l) above each vertex, and its boundary falls apart into three known pieces:
//!
//! - a *wall* over each polygon side, whose plane is vertical: its distance from 0 is that of the side;
//! - an *upper cap*, the concave envelope of the heights over the polygon;
//! - a *lower cap*, the convex envelope.
//!
//! A cap over a convex polygon is a triangulation found by wrapping: the facet on a chord (i, j) has as its apex that
//! vertex between i and j which makes the plane steepest, and splits the rest into two smaller chords. No general hull
//! code, no visibility tests, nothing to allocate.
//!
//! - quality = least distance from 0 to a wall or to a facet's plane (Ferrari & Canny 1992);
//! - placement = least height above (below) 0 at which a facet's plane crosses the torque axis;
//! - closed iff all of these are above 0.
//!
//! Several generators with one force direction (both ends of a pad, parallel edges, several fingers on one edge) share a
//! vertex; only the highest counts above and the lowest below. The same holds for a box of positions: heights at both ends.
//!
//! # Why it can be trusted
//! The facets form a closed surface inside the true hull, so their least distance is never above the true quality.
//! The reach of the wrench set in the direction of the nearest facet is never below it. [`ForcePolygon::score`] computes
//! both and says so when they differ by more than [`CERTAIN`]; the caller then takes the slow, plain definition.

use super::wrench::{Lever, MOST_DIRECTIONS};
use nalgebra::Vector3;

/// Force directions closer than this on the unit circle are one vertex; it moves a generator, and so the quality, by no more.
const SAME_DIRECTION: f64 = 1e-11;
/// Largest difference between the two bounds on the quality that counts as agreement.
pub const CERTAIN: f64 = 1e-10;
/// A facet whose shadow on the force plane is smaller than this cannot lie over the origin.
const LEAST_SHADOW: f64 = 1e-12;

/// Heights over the vertices of a [`Polygon`] of at most `N` forces.
#[derive(Debug, Clone, Copy)]
pub struct Heights<const N: usize = MOST_DIRECTIONS> {
    top: [f64; N],
    bottom: [f64; N],
}

/// What the kernel says of one grasp.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct PlanarScore {
    /// Least distance from 0 to a facet's plane; above 0 iff closed, and then the quality.
    pub signed_quality: f64,
    /// Largest pure torque over l for 1 N of normal force, counter-clockwise; below 0 when there is none.
    pub torque_up: f64,
    /// The same clockwise, as a positive number.
    pub torque_down: f64,
    /// Unit normal of the nearest facet.
    pub direction: Vector3<f64>,
    /// The two bounds on the quality agree.
    pub certain: bool,
}

/// The polygon of a grasp.
pub type ForcePolygon = Polygon<MOST_DIRECTIONS>;

/// The forces of generators, at most `N`, sorted round the circle and merged where they coincide.
#[derive(Debug, Clone, Copy)]
pub struct Polygon<const N: usize> {
    count: usize,
    forces: [[f64; 2]; N],
    /// Vertex of each generator, in the caller's order.
    vertex: [u8; N],
    generators: usize,
    /// Distance from the origin to the nearest side, 0 or below when the origin is not inside.
    wall: f64,
    wall_normal: [f64; 2],
}

/// A number that grows with the angle of a vector, from -2 at -180 degrees to 2.
fn pseudo_angle(x: f64, y: f64) -> f64 {
    let p = x / (x.abs() + y.abs());
    if y < 0.0 { p - 1.0 } else { 1.0 - p }
}

impl<const N: usize> Polygon<N> {
    /// Builds the polygon of forces that all have the same length, at most `N` of them.
    pub fn new(forces: &[[f64; 2]]) -> Self {
        let n = forces.len();
        debug_assert!(n <= N);
        let mut order = [0u8; N];
        let mut angle = [0.0; N];
        for (i, f) in forces.iter().enumerate() {
            let a = pseudo_angle(f[0], f[1]);
            let mut at = i;
            while at > 0 && angle[at - 1] > a {
                angle[at] = angle[at - 1];
                order[at] = order[at - 1];
                at -= 1;
            }
            angle[at] = a;
            order[at] = i as u8;
        }
        let mut polygon = Self {
            count: 0,
            forces: [[0.0; 2]; N],
            vertex: [0; N],
            generators: n,
            wall: f64::NEG_INFINITY,
            wall_normal: [0.0; 2],
        };
        let same = |a: [f64; 2], b: [f64; 2]| {
            let (dx, dy) = (a[0] - b[0], a[1] - b[1]);
            dx * dx + dy * dy <= SAME_DIRECTION * SAME_DIRECTION * (a[0] * a[0] + a[1] * a[1])
        };
        for &generator in &order[..n] {
            let f = forces[usize::from(generator)];
            let vertex = if polygon.count > 0 && same(polygon.forces[polygon.count - 1], f) {
                polygon.count - 1
            } else if polygon.count > 1 && same(polygon.forces[0], f) {
                0
            } else {
                polygon.forces[polygon.count] = f;
                polygon.count += 1;
                polygon.count - 1
            };
            polygon.vertex[usize::from(generator)] = vertex as u8;
        }
        polygon.find_wall();
        polygon
    }

    /// The polygon of contacts with one friction coefficient. Generator order: finger after finger, `+mu` before `-mu`.
    pub fn of_levers(levers: &[Lever], mu: f64) -> Self {
        let mut forces = [[0.0; 2]; N];
        for (pair, lever) in forces.chunks_exact_mut(2).zip(levers) {
            let (nx, ny, tx, ty) = (lever.normal.x, lever.normal.y, mu * lever.tangent.x, mu * lever.tangent.y);
            pair[0] = [nx + tx, ny + ty];
            pair[1] = [nx - tx, ny - ty];
        }
        Self::new(&forces[..2 * levers.len()])
    }

    fn find_wall(&mut self) {
        if self.count < 3 {
            return;
        }
        let mut nearest = f64::INFINITY;
        for i in 0..self.count {
            let (a, b) = (self.forces[i], self.forces[if i + 1 == self.count { 0 } else { i + 1 }]);
            let (dx, dy) = (b[0] - a[0], b[1] - a[1]);
            let length = (dx * dx + dy * dy).sqrt();
            let distance = (a[0] * b[1] - a[1] * b[0]) / length;
            if distance < nearest {
                nearest = distance;
                self.wall_normal = [dy / length, -dx / length];
            }
        }
        self.wall = nearest;
    }

    /// Distance from the origin to the nearest side: the forces positively span the plane iff it is above 0.
    pub fn wall(&self) -> f64 {
        self.wall
    }

    /// Heights of one grasp from the least and the largest torque over l of each force, in the order the polygon was built
    /// with.
    pub fn heights(&self, torques: &[[f64; 2]]) -> Heights<N> {
        let mut heights = self.no_heights();
        for (&vertex, torque) in self.vertex[..self.generators].iter().zip(torques) {
            heights.cover(usize::from(vertex), torque);
        }
        heights
    }

    /// Heights of contacts with the friction coefficient the polygon was built for.
    pub fn heights_of_levers(&self, levers: &[Lever], mu: f64) -> Heights<N> {
        let mut heights = self.no_heights();
        for (pair, lever) in self.vertex.chunks_exact(2).zip(levers) {
            for (vertex, m) in [(pair[0], mu), (pair[1], -mu)] {
                heights.cover(usize::from(vertex), &lever.torques(m));
            }
        }
        heights
    }

    fn no_heights(&self) -> Heights<N> {
        Heights { top: [f64::NEG_INFINITY; N], bottom: [f64::INFINITY; N] }
    }

    /// Closure, quality and placement of the wrench set with these heights.
    pub fn score(&self, heights: &Heights<N>) -> PlanarScore {
        self.score_and_caps(heights).0
    }

    fn score_and_caps(&self, heights: &Heights<N>) -> (PlanarScore, Option<[Cap; 2]>) {
        let mut score = PlanarScore {
            signed_quality: self.wall,
            torque_up: f64::NEG_INFINITY,
            torque_down: f64::NEG_INFINITY,
            direction: Vector3::new(self.wall_normal[0], self.wall_normal[1], 0.0),
            certain: true,
        };
        if self.wall <= 0.0 {
            return (score, None);
        }
        let [up, down] = self.caps(heights);
        score.torque_up = up.height;
        score.torque_down = down.height;
        for (cap, sign) in [(&up, 1.0), (&down, -1.0)] {
            let distance = cap.signed_square.signum() * cap.signed_square.abs().sqrt();
            if distance < score.signed_quality {
                let [x, y, z] = cap.normal;
                let norm = (x * x + y * y + z * z).sqrt();
                score.signed_quality = distance;
                score.direction = Vector3::new(x / norm, y / norm, sign * z / norm);
            }
        }
        score.certain = self.reach(heights, &score.direction) <= score.signed_quality + CERTAIN;
        (score, Some([up, down]))
    }

    /// Numbers that the wrench set with these heights does not exceed, whatever its forces: each is its reach in one
    /// direction, the one that would be weakest if the forces had one length. The nearer they are to that the closer.
    pub fn bounds(&self, heights: &Heights<N>) -> PlanarScore {
        let (mut score, caps) = self.score_and_caps(heights);
        let Some([up, down]) = caps else { return score };
        score.signed_quality = self.reach(heights, &score.direction);
        let torque = |cap: &Cap, sign: f64| {
            let [x, y, z] = cap.over_axis;
            if z > 0.0 { self.reach(heights, &Vector3::new(x / z, y / z, sign)) } else { f64::INFINITY }
        };
        (score.torque_up, score.torque_down) = (torque(&up, 1.0), torque(&down, -1.0));
        score
    }

    /// Calls `each` with the facets of the wrench set: walls, and those of both caps. Torques as for [`Self::heights`].
    pub fn facets(&self, torques: &[[f64; 2]], mut each: impl FnMut(Facet)) {
        if self.wall <= 0.0 {
            return;
        }
        let heights = self.heights(torques);
        // The generator that makes the height of a vertex.
        let (mut top, mut bottom) = ([0; N], [0; N]);
        for (generator, (&vertex, [low, high])) in self.vertex[..self.generators].iter().zip(torques).enumerate() {
            let vertex = usize::from(vertex);
            if *high >= heights.top[vertex] {
                top[vertex] = generator;
            }
            if *low <= heights.bottom[vertex] {
                bottom[vertex] = generator;
            }
        }
        for i in 0..self.count {
            let j = if i + 1 == self.count { 0 } else { i + 1 };
            let (a, b) = (self.forces[i], self.forces[j]);
            let normal = Vector3::new(b[1] - a[1], a[0] - b[0], 0.0);
            each(Facet { on: [top[i], top[j], top[j]], corners: 2, normal });
        }
        self.wrap(&heights.top, |on, [x, y, z]| {
            each(Facet { on: on.map(|vertex| top[vertex]), corners: 3, normal: Vector3::new(x, y, z) });
        });
        self.wrap(&heights.bottom.map(|bottom| -bottom), |on, [x, y, z]| {
            each(Facet { on: on.map(|vertex| bottom[vertex]), corners: 3, normal: Vector3::new(x, y, -z) });
        });
    }

    /// Largest `u . w` over vertices with their top and bottom heights.
    fn reach(&self, heights: &Heights<N>, u: &Vector3<f64>) -> f64 {
        let z = if u.z >= 0.0 { &heights.top } else { &heights.bottom };
        let mut reach = f64::NEG_INFINITY;
        for (f, z) in self.forces[..self.count].iter().zip(z) {
            reach = reach.max(u.x * f[0] + u.y * f[1] + u.z * z);
        }
        reach
    }

    /// The upper cap, and the lower one turned upside down.
    fn caps(&self, heights: &Heights<N>) -> [Cap; 2] {
        [self.cap(&heights.top), self.cap(&heights.bottom.map(|bottom| -bottom))]
    }

    fn cap(&self, z: &[f64; N]) -> Cap {
        let mut cap = Cap {
            signed_square: f64::INFINITY,
            height: f64::INFINITY,
            normal: [0.0, 0.0, 1.0],
            over_axis: [0.0, 0.0, 1.0],
        };
        self.wrap(z, |[i, ..], normal| {
            let [x, y] = self.forces[i];
            let offset = normal[0] * x + normal[1] * y + normal[2] * z[i];
            let square = normal[0] * normal[0] + normal[1] * normal[1] + normal[2] * normal[2];
            // Signed square of the distance: no root until the nearest facet is known.
            let signed_square = offset * offset.abs() / square;
            if signed_square < cap.signed_square {
                cap.signed_square = signed_square;
                cap.normal = normal;
            }
            if normal[2] > LEAST_SHADOW && offset < cap.height * normal[2] {
                cap.height = offset / normal[2];
                cap.over_axis = normal;
            }
        });
        cap
    }

    /// Wraps the upper envelope of heights `z` over the polygon: the vertices of each facet, and its normal, which points
    /// up and is not of unit length.
    #[inline]
    fn wrap(&self, z: &[f64; N], mut each: impl FnMut([usize; 3], [f64; 3])) {
        let point = |i: usize| [self.forces[i][0], self.forces[i][1], z[i]];
        let mut chords = [(0usize, 0usize); N];
        chords[0] = (0, self.count - 1);
        let mut open = 1;
        while open > 0 {
            open -= 1;
            let (i, j) = chords[open];
            let (a, b) = (point(i), point(j));
            let base = [b[0] - a[0], b[1] - a[1], b[2] - a[2]];
            let mut apex = i + 1;
            let mut normal = facet_normal(&base, &a, &point(apex));
            for candidate in i + 2..j {
                let p = point(candidate);
                let above = normal[0] * (p[0] - a[0]) + normal[1] * (p[1] - a[1]) + normal[2] * (p[2] - a[2]);
                if above > 0.0 {
                    apex = candidate;
                    normal = facet_normal(&base, &a, &p);
                }
            }
            each([i, apex, j], normal);
            if apex - i > 1 {
                chords[open] = (i, apex);
                open += 1;
            }
            if j - apex > 1 {
                chords[open] = (apex, j);
                open += 1;
            }
        }
    }
}

impl<const N: usize> Heights<N> {
    /// Raises the top and lowers the bottom over a vertex to cover `[bottom, top]`.
    fn cover(&mut self, vertex: usize, [bottom, top]: &[f64; 2]) {
        self.top[vertex] = self.top[vertex].max(*top);
        self.bottom[vertex] = self.bottom[vertex].min(*bottom);
    }
}

/// A facet of a wrench set.
#[derive(Debug, Clone, Copy)]
pub struct Facet {
    /// Generators it touches.
    pub on: [usize; 3],
    /// How many of them count: two on a wall, three on a cap.
    pub corners: usize,
    /// Outward normal, not of unit length.
    pub normal: Vector3<f64>,
}

struct Cap {
    /// Least distance from 0 to a facet's plane, squared with its sign.
    signed_square: f64,
    /// Least crossing of a facet's plane with the torque axis.
    height: f64,
    /// Normal (not unit) of the nearest facet, pointing up.
    normal: [f64; 3],
    /// The same of the facet that crosses the torque axis lowest.
    over_axis: [f64; 3],
}

/// Upward normal of the plane through a, apex and a + base, for an apex on the right of the base.
#[inline]
fn facet_normal(base: &[f64; 3], a: &[f64; 3], apex: &[f64; 3]) -> [f64; 3] {
    let p = [apex[0] - a[0], apex[1] - a[1], apex[2] - a[2]];
    [p[1] * base[2] - p[2] * base[1], p[2] * base[0] - p[0] * base[2], p[0] * base[1] - p[1] * base[0]]
}
