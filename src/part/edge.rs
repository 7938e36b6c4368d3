//! One edge of an outline: a straight line or a circular arc between two vertices.

use nalgebra::{Point2, Rotation2, Vector2};

/// An edge: ring number (0 = outer) and edge number in that ring, as in the part file.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct EdgeId {
    /// Ring, 0 for the outer one.
    pub ring: usize,
    /// Edge `i` runs from vertex `i` to vertex `i + 1` of the ring as read.
    pub edge: usize,
}

/// Bulges smaller than this are straight: the arc would rise above its chord by less than 5e-8 of it.
pub(super) const STRAIGHT: f64 = 1e-7;
/// Largest bulge taken: an arc of 358.9 degrees.
pub const BULGE_LARGEST: f64 = 200.0;

/// One edge, from its first vertex to its second in file order.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Edge {
    id: EdgeId,
    start: Point2<f64>,
    end: Point2<f64>,
    /// Unit direction at the start.
    direction: Vector2<f64>,
    length_mm: f64,
    /// Angle the direction turns through from start to end, counter-clockwise positive; 0 on a straight edge.
    sweep: f64,
    /// +1 when the material is on the left going from start to end, -1 when on the right.
    side: f64,
}

impl Edge {
    /// An edge from one vertex to another. Its bulge is tan(sweep / 4) as the DXF reference defines it: positive when
    /// the arc runs counter-clockwise, 0 for a straight edge.
    pub(super) fn new(id: EdgeId, start: Point2<f64>, end: Point2<f64>, bulge: f64, side: f64) -> Self {
        let span = end - start;
        let chord = span.x.hypot(span.y);
        let along = span / chord;
        if bulge.abs() < STRAIGHT {
            return Self { id, start, end, direction: along, length_mm: chord, sweep: 0.0, side };
        }
        let sweep = 4.0 * bulge.atan();
        let radius = chord * (1.0 + bulge * bulge) / (4.0 * bulge.abs());
        let direction = Rotation2::new(-sweep / 2.0) * along;
        Self { id, start, end, direction, length_mm: radius * sweep.abs(), sweep, side }
    }

    /// Its numbers in the file.
    pub fn id(&self) -> EdgeId {
        self.id
    }

    /// First vertex in file order, local frame, mm.
    pub fn start(&self) -> Point2<f64> {
        self.start
    }

    /// Second vertex in file order, local frame, mm.
    pub fn end(&self) -> Point2<f64> {
        self.end
    }

    /// Length, mm.
    pub fn length_mm(&self) -> f64 {
        self.length_mm
    }

    /// Point at a distance from the first vertex, local frame, mm.
    pub fn point_at(&self, along_mm: f64) -> Point2<f64> {
        // On an arc: along the chord, which starts at half the angle turned so far. No centre, so no large numbers on
        // an arc that is almost straight.
        let half = self.turned(along_mm) / 2.0;
        let chord = if half == 0.0 { along_mm } else { along_mm * half.sin() / half };
        self.start + Rotation2::new(half) * self.direction * chord
    }

    /// Unit normal into the material at a distance along the edge.
    pub fn normal_at(&self, along_mm: f64) -> Vector2<f64> {
        let direction = self.direction_at(along_mm);
        Vector2::new(-direction.y, direction.x) * self.side
    }

    /// Unit direction of travel from the first vertex toward the second, at a distance along the edge.
    pub fn direction_at(&self, along_mm: f64) -> Vector2<f64> {
        if self.sweep == 0.0 { self.direction } else { Rotation2::new(self.turned(along_mm)) * self.direction }
    }

    fn turned(&self, along_mm: f64) -> f64 {
        self.sweep * (along_mm / self.length_mm)
    }

    /// The circle of an arc; nothing for a straight edge.
    pub fn arc(&self) -> Option<Arc> {
        if self.sweep == 0.0 {
            return None;
        }
        let radius = self.length_mm / self.sweep.abs();
        let left = Vector2::new(-self.direction.y, self.direction.x);
        let centre = self.start + left * (radius * self.sweep.signum());
        Some(Arc { centre, radius, sweep: self.sweep, convex: self.sweep * self.side > 0.0 })
    }

    /// Curvature, 1/mm; 0 on a straight edge, positive where the material is on the inside of the bend.
    pub fn curvature(&self) -> f64 {
        self.sweep * self.side / self.length_mm
    }

    /// Distance from the first vertex of the point of the edge's circle that lies in a direction from its centre; nothing
    /// when the arc does not reach it.
    pub(crate) fn along_toward(&self, arc: &Arc, direction: Vector2<f64>) -> Option<f64> {
        let from = self.start - arc.centre;
        // Angle from the start to the direction, in the arc's own sense of turning, in [0, 2 pi).
        let angle = (from.perp(&direction) * self.sweep.signum()).atan2(from.dot(&direction));
        let angle = if angle < 0.0 { angle + std::f64::consts::TAU } else { angle };
        (angle <= self.sweep.abs()).then_some(angle * arc.radius)
    }

    /// Distance of a point to the edge, mm.
    pub fn distance_to(&self, point: Point2<f64>) -> f64 {
        let ends = (point - self.start).norm().min((point - self.end).norm());
        match self.arc() {
            None => {
                let from = point - self.start;
                let foot = from.dot(&self.direction);
                if (0.0..=self.length_mm).contains(&foot) { self.direction.perp(&from).abs().min(ends) } else { ends }
            }
            Some(arc) => {
                let from = point - arc.centre;
                let beside = self.along_toward(&arc, from).map(|_| (from.norm() - arc.radius).abs());
                beside.map_or(ends, |beside| beside.min(ends))
            }
        }
    }

    /// Lower left and upper right corner of the edge's bounding box, local frame, mm.
    pub fn bounds(&self) -> (Point2<f64>, Point2<f64>) {
        let mut low = self.start.inf(&self.end);
        let mut high = self.start.sup(&self.end);
        if let Some(arc) = self.arc() {
            for direction in [Vector2::x(), -Vector2::x(), Vector2::y(), -Vector2::y()] {
                if let Some(along_mm) = self.along_toward(&arc, direction) {
                    let point = self.point_at(along_mm);
                    (low, high) = (low.inf(&point), high.sup(&point));
                }
            }
        }
        (low, high)
    }

    /// The point of the edge farthest from a point, as a distance, mm.
    pub fn farthest_from(&self, point: Point2<f64>) -> f64 {
        let ends = (point - self.start).norm().max((point - self.end).norm());
        let beyond = self.arc().and_then(|arc| {
            self.along_toward(&arc, arc.centre - point).map(|_| (arc.centre - point).norm() + arc.radius)
        });
        beyond.map_or(ends, |beyond| beyond.max(ends))
    }

    /// Chords that stay within `sagitta_mm` of the edge, as the distances along it where they end (at most `most` of
    /// them; one for a straight edge).
    pub fn chords(&self, sagitta_mm: f64, most: usize) -> impl Iterator<Item = f64> + use<> {
        let pieces = match self.arc() {
            None => 1,
            Some(arc) => {
                // A chord over the angle a rises to R (1 - cos(a / 2)).
                let step = 2.0 * (1.0 - (sagitta_mm / arc.radius).min(1.0)).acos();
                let least = (self.sweep.abs() / std::f64::consts::FRAC_PI_2).ceil();
                (self.sweep.abs() / step).ceil().max(least).min(most as f64) as usize
            }
        };
        let length = self.length_mm;
        (1..=pieces).map(move |i| length * (i as f64 / pieces as f64))
    }
}

/// The circle an arc lies on.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Arc {
    /// Centre, local frame, mm.
    pub centre: Point2<f64>,
    /// Radius, mm.
    pub radius: f64,
    /// Angle swept, counter-clockwise positive.
    pub sweep: f64,
    /// The material is on the centre's side.
    pub convex: bool,
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::f64::consts::{FRAC_PI_2, PI};

    fn arc(bulge: f64) -> Edge {
        let id = EdgeId { ring: 0, edge: 0 };
        Edge::new(id, Point2::new(3.0, -1.0), Point2::new(7.0, 2.0), bulge, 1.0)
    }

    /// DXF reference: bulge = tan(sweep / 4); elementary geometry: radius = chord (1 + b^2) / (4 |b|). Bulge 1 is a half
    /// circle over its chord, counter-clockwise, so to the right of the chord.
    #[test]
    fn a_bulge_of_one_is_a_half_circle() {
        let edge = arc(1.0);
        let circle = edge.arc().unwrap();
        assert!((circle.radius - 2.5).abs() < 1e-14 && (circle.sweep - PI).abs() < 1e-15);
        assert!((circle.centre - Point2::new(5.0, 0.5)).norm() < 1e-14);
        assert!((edge.length_mm() - 2.5 * PI).abs() < 1e-14);
        let middle = edge.point_at(edge.length_mm() / 2.0);
        assert!((middle - Point2::new(5.0 + 1.5, 0.5 - 2.0)).norm() < 1e-14, "{middle}");
        assert!((edge.normal_at(0.0) - Vector2::new(0.8, 0.6)).norm() < 1e-14);
    }

    #[test]
    fn points_normals_and_distances_agree_on_every_arc() {
        for bulge in [1e-6, 0.1, -0.3, 0.99, -2.0, 40.0, -1e-3] {
            let edge = arc(bulge);
            let circle = edge.arc().unwrap();
            assert!((edge.point_at(edge.length_mm()) - edge.end()).norm() < 1e-9, "{bulge}");
            for i in 0..=10 {
                let along_mm = edge.length_mm() * f64::from(i) / 10.0;
                let point = edge.point_at(along_mm);
                let from = point - circle.centre;
                assert!((from.norm() / circle.radius - 1.0).abs() < 1e-10);
                let normal = edge.normal_at(along_mm);
                let inward = if circle.convex { -from } else { from };
                assert!((inward.normalize() - normal).norm() < 1e-9);
                let off = point - normal * (circle.radius * 0.25);
                assert!((edge.distance_to(off) - circle.radius * 0.25).abs() < 1e-9 * circle.radius || i % 10 == 0);
            }
            let (low, high) = edge.bounds();
            for along_mm in edge.chords(1e-3, 4000) {
                let p = edge.point_at(along_mm);
                assert!(p.x > low.x - 1e-9 && p.y > low.y - 1e-9 && p.x < high.x + 1e-9 && p.y < high.y + 1e-9);
                assert!((p - Point2::origin()).norm() <= edge.farthest_from(Point2::origin()) + 1e-9);
            }
        }
    }

    #[test]
    fn chords_keep_the_sagitta() {
        let edge = arc(0.7);
        let radius = edge.arc().unwrap().radius;
        let ends: Vec<f64> = edge.chords(0.01, 1000).collect();
        let angle = ends[0] / radius;
        assert!(radius * (1.0 - (angle / 2.0).cos()) <= 0.01);
        assert!((ends[ends.len() - 1] - edge.length_mm()).abs() < 1e-12);
        assert!(arc(1.0).chords(1e3, 1000).count() >= 2 && FRAC_PI_2 > 1.0);
        assert_eq!(arc(0.0).chords(0.01, 1000).count(), 1);
    }
}
