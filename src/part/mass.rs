//! Area, centroid and moments of a region bounded by rings, by Green's theorem, and the mass they give.

use nalgebra::Point2;

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
fn raw(ring: &[Point2<f64>], about: Point2<f64>) -> Raw {
    let mut sum = Raw::default();
    for (i, p) in ring.iter().enumerate() {
        let q = &ring[(i + 1) % ring.len()];
        let (x0, y0, x1, y1) = (p.x - about.x, p.y - about.y, q.x - about.x, q.y - about.y);
        let cross = x0 * y1 - x1 * y0;
        sum.a += cross / 2.0;
        sum.sx += cross * (x0 + x1) / 6.0;
        sum.sy += cross * (y0 + y1) / 6.0;
        sum.yy += cross * (y0 * y0 + y0 * y1 + y1 * y1) / 12.0;
        sum.xx += cross * (x0 * x0 + x0 * x1 + x1 * x1) / 12.0;
        sum.xy += cross * (x0 * y1 + 2.0 * x0 * y0 + 2.0 * x1 * y1 + x1 * y0) / 24.0;
    }
    sum
}

/// Signed area of one ring, mm2; positive when it runs counter-clockwise.
pub(super) fn signed_area(ring: &[Point2<f64>]) -> f64 {
    raw(ring, ring[0]).a
}

impl RegionMoments {
    /// Moments of the region inside the first ring and outside the others. Winding does not matter.
    pub(super) fn of(rings: &[Vec<Point2<f64>>]) -> Self {
        // A first pass about a vertex finds the centroid; the second takes the moments about it, so that the
        // parallel-axis term of a region far from its reference vertex is not subtracted from a larger number.
        let rough = Self::total(rings, rings[0][0]);
        let centroid = Point2::new(rings[0][0].x + rough.sx / rough.a, rings[0][0].y + rough.sy / rough.a);
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

    fn total(rings: &[Vec<Point2<f64>>], about: Point2<f64>) -> Raw {
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
