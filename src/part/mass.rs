//! Area, centroid and moments of a region bounded by rings, by Green's theorem, and the mass they give.

use super::edge::Edge;
use nalgebra::{Point2, Vector2};

/// Area, centroid and second moments of area of a plane region.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct RegionMoments {
    /// Area, mm2.
    pub area_mm2: f64,
    /// Centroid in the local frame, mm.
    pub centroid: Point2<f64>,
    /// Integral of y^2 dA about the centroid, mm4.
    pub ixx_mm4: f64,
    /// Integral of x^2 dA about the centroid, mm4.
    pub iyy_mm4: f64,
    /// Integral of x y dA about the centroid, mm4.
    pub ixy_mm4: f64,
}

/// Signed raw moments of one ring about a point: area, first and second moments; positive counter-clockwise.
#[derive(Debug, Clone, Copy, Default)]
struct Raw {
    a: f64,
    sx: f64,
    sy: f64,
    xx: f64,
    yy: f64,
    xy: f64,
}

/// Sums over the ring's edges with every coordinate taken relative to `about`: near the ring, so that the large
/// products of far coordinates, which would cancel, never arise.
fn raw(ring: &[Edge], about: Point2<f64>) -> Raw {
    let mut sum = Raw::default();
    for edge in ring {
        if edge.arc().is_some() {
            sum.add_arc(edge, about);
        } else {
            sum.add_line(edge.start() - about, edge.end() - about);
        }
    }
    sum
}

/// Nodes in (0, 1) and weights of the Gauss-Legendre rule with eight points on [-1, 1] (Abramowitz & Stegun 1964,
/// Table 25.4): the nodes come in pairs with opposite signs.
const GAUSS: [(f64, f64); 4] = [
    (0.183_434_642_495_649_8, 0.362_683_783_378_362),
    (0.525_532_409_916_329, 0.313_706_645_877_887_3),
    (0.796_666_477_413_626_7, 0.222_381_034_453_374_48),
    (0.960_289_856_497_536_3, 0.101_228_536_290_376_26),
];
/// Largest angle taken in one go; the rule is then right to rounding for every moment.
const PIECE: f64 = std::f64::consts::FRAC_PI_8;

impl Raw {
    fn add_line(&mut self, p: Vector2<f64>, q: Vector2<f64>) {
        let (x0, y0, x1, y1) = (p.x, p.y, q.x, q.y);
        let cross = x0 * y1 - x1 * y0;
        self.a += cross / 2.0;
        self.sx += cross * (x0 + x1) / 6.0;
        self.sy += cross * (y0 + y1) / 6.0;
        self.yy += cross * (y0 * y0 + y0 * y1 + y1 * y1) / 12.0;
        self.xx += cross * (x0 * x0 + x0 * x1 + x1 * x1) / 12.0;
        self.xy += cross * (x0 * y1 + 2.0 * x0 * y0 + 2.0 * x1 * y1 + x1 * y0) / 24.0;
    }

    /// The fan from the reference point to the arc: a sliver at p with sides p and p + dp has the area cross / 2, its
    /// centroid at 2/3 p and the second moment p p cross / 4.
    fn add_arc(&mut self, edge: &Edge, about: Point2<f64>) {
        let pieces = edge.arc().map_or(1.0, |arc| (arc.sweep.abs() / PIECE).ceil());
        let half = edge.length_mm() / pieces / 2.0;
        for piece in 0..pieces as u32 {
            let middle = (2.0 * f64::from(piece) + 1.0) * half;
            for (node, weight) in GAUSS {
                for along_mm in [middle - node * half, middle + node * half] {
                    let p = edge.point_at(along_mm) - about;
                    let cross = p.perp(&edge.direction_at(along_mm)) * weight * half;
                    self.a += cross / 2.0;
                    self.sx += cross * p.x / 3.0;
                    self.sy += cross * p.y / 3.0;
                    self.xx += cross * p.x * p.x / 4.0;
                    self.yy += cross * p.y * p.y / 4.0;
                    self.xy += cross * p.x * p.y / 4.0;
                }
            }
        }
    }
}

/// Signed area of one ring, mm2; positive when it runs counter-clockwise.
pub(super) fn signed_area(ring: &[Edge]) -> f64 {
    raw(ring, ring[0].start()).a
}

impl RegionMoments {
    /// Moments of the region inside the first ring and outside the others. Winding does not matter.
    pub(super) fn of(rings: &[Vec<Edge>]) -> Self {
        // A first pass about a vertex finds the centroid; the second takes the moments about it, so that the
        // parallel-axis term of a region far from its reference vertex is not subtracted from a larger number.
        let first = rings[0][0].start();
        let rough = Self::total(rings, first);
        let centroid = Point2::new(first.x + rough.sx / rough.a, first.y + rough.sy / rough.a);
        let fine = Self::total(rings, centroid);
        let shift = Point2::new(fine.sx / fine.a, fine.sy / fine.a);
        Self {
            area_mm2: fine.a,
            centroid: Point2::new(centroid.x + shift.x, centroid.y + shift.y),
            ixx_mm4: fine.yy - fine.a * shift.y * shift.y,
            iyy_mm4: fine.xx - fine.a * shift.x * shift.x,
            ixy_mm4: fine.xy - fine.a * shift.x * shift.y,
        }
    }

    fn total(rings: &[Vec<Edge>], about: Point2<f64>) -> Raw {
        let mut sum = Raw::default();
        for (number, ring) in rings.iter().enumerate() {
            let one = raw(ring, about);
            let outer = if number == 0 { 1.0 } else { -1.0 };
            let sign = outer * one.a.signum();
            sum.a += sign * one.a;
            sum.sx += sign * one.sx;
            sum.sy += sign * one.sy;
            sum.xx += sign * one.xx;
            sum.yy += sign * one.yy;
            sum.xy += sign * one.xy;
        }
        sum
    }

    /// Radius of gyration about a point of the local frame, mm.
    pub fn gyration_about(&self, point: Point2<f64>) -> f64 {
        ((self.ixx_mm4 + self.iyy_mm4) / self.area_mm2 + (point - self.centroid).norm_squared()).sqrt()
    }
}

/// Mass and its distribution about the centre of mass.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Mass {
    /// Mass, kg.
    pub kg: f64,
    /// Polar moment of inertia about the z axis through the centre of mass, kg m2.
    pub polar_kg_m2: f64,
}

impl Mass {
    pub(super) fn of(kg: f64, region: &RegionMoments, com: Point2<f64>) -> Self {
        let gyration_mm = region.gyration_about(com);
        Self { kg, polar_kg_m2: kg * gyration_mm * gyration_mm * 1e-6 }
    }
}
