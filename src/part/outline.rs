//! The outline: rings of straight edges that bound the material.
//!
//! Vertices stay in the file's order, whatever its winding; only the normals know on which side the material lies.
//! So every edge number and every distance along an edge means the same in the file, inside, and on the screen.

use super::check;
use super::fault::PartFaults;
use super::mass::{self, RegionMoments};
use nalgebra::{Point2, Vector2};

/// An edge: ring number (0 = outer) and edge number in that ring, as in the part file.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct EdgeId {
    /// Ring, 0 for the outer one.
    pub ring: usize,
    /// Edge `i` runs from vertex `i` to vertex `i + 1` of the ring as read.
    pub edge: usize,
}

/// One straight edge.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Edge {
    id: EdgeId,
    start: Point2<f64>,
    end: Point2<f64>,
    direction: Vector2<f64>,
    length_mm: f64,
    /// +1 when the material is on the left going from start to end, -1 when on the right.
    side: f64,
}

impl Edge {
    fn new(id: EdgeId, start: Point2<f64>, end: Point2<f64>, side: f64) -> Self {
        let span = end - start;
        let length_mm = span.x.hypot(span.y);
        Self { id, start, end, direction: span / length_mm, length_mm, side }
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
        self.start + self.direction * along_mm
    }

    /// Unit normal into the material at a distance along the edge.
    pub fn normal_at(&self, _along_mm: f64) -> Vector2<f64> {
        Vector2::new(-self.direction.y, self.direction.x) * self.side
    }

    /// Unit direction from the first vertex toward the second.
    pub fn direction_at(&self, _along_mm: f64) -> Vector2<f64> {
        self.direction
    }
}

/// Checked rings: finite, simple, apart, holes inside the outer ring and outside one another, area above zero.
#[derive(Debug, Clone)]
pub struct Outline {
    origin: Vector2<f64>,
    edges: Vec<Edge>,
    /// Index of each ring's first edge in `edges`, and the total at the end.
    starts: Vec<usize>,
    region: RegionMoments,
}

impl Outline {
    /// Checks rings given in a unit of `unit_mm` millimetres and builds the outline. The first ring is the outer one.
    /// All checks of touching and crossing are exact on the coordinates as given.
    ///
    /// # Errors
    /// Every fault found, the deciding one first.
    pub fn new(rings: &[Vec<[f64; 2]>], unit_mm: f64) -> Result<Self, PartFaults> {
        let rings = check::cleaned(rings, unit_mm)?;
        let [ox, oy] = rings[0][0];
        let local: Vec<Vec<Point2<f64>>> = rings
            .iter()
            .map(|ring| ring.iter().map(|[x, y]| Point2::new((x - ox) * unit_mm, (y - oy) * unit_mm)).collect())
            .collect();
        check::areas(&local)?;
        let mut edges = Vec::with_capacity(local.iter().map(Vec::len).sum());
        let mut starts = Vec::with_capacity(local.len() + 1);
        for (number, ring) in local.iter().enumerate() {
            starts.push(edges.len());
            let counter_clockwise = mass::signed_area(ring) > 0.0;
            // The outer ring has its material inside, a hole outside.
            let side = if counter_clockwise == (number == 0) { 1.0 } else { -1.0 };
            for (i, &start) in ring.iter().enumerate() {
                let end = ring[(i + 1) % ring.len()];
                edges.push(Edge::new(EdgeId { ring: number, edge: i }, start, end, side));
            }
        }
        starts.push(edges.len());
        let region = RegionMoments::of(&local);
        Ok(Self { origin: Vector2::new(ox * unit_mm, oy * unit_mm), edges, starts, region })
    }

    /// Where the local frame's origin lies in the file's frame, mm.
    pub fn origin(&self) -> Vector2<f64> {
        self.origin
    }

    /// All edges, ring after ring, each ring in file order.
    pub fn edges(&self) -> &[Edge] {
        &self.edges
    }

    /// The edge of that number.
    pub fn edge(&self, id: EdgeId) -> Option<&Edge> {
        self.index_of(id).map(|index| &self.edges[index])
    }

    /// Position of an edge in [`Outline::edges`].
    pub fn index_of(&self, id: EdgeId) -> Option<usize> {
        let first = *self.starts.get(id.ring)?;
        let next = *self.starts.get(id.ring + 1)?;
        (id.edge < next - first).then(|| first + id.edge)
    }

    /// Edges of one ring; empty when there is no such ring.
    pub fn ring(&self, ring: usize) -> &[Edge] {
        match (self.starts.get(ring), self.starts.get(ring + 1)) {
            (Some(&first), Some(&next)) => &self.edges[first..next],
            _ => &[],
        }
    }

    /// Number of edges of each ring.
    pub fn ring_sizes(&self) -> Vec<usize> {
        self.starts.windows(2).map(|w| w[1] - w[0]).collect()
    }

    /// Total length of all rings, mm.
    pub fn perimeter_mm(&self) -> f64 {
        self.edges.iter().map(Edge::length_mm).sum()
    }

    /// Area, centroid and second moments.
    pub fn region(&self) -> &RegionMoments {
        &self.region
    }

    /// Lower left and upper right corner of the bounding box, local frame, mm.
    pub fn bounds(&self) -> (Point2<f64>, Point2<f64>) {
        self.ring(0).iter().fold(
            (Point2::new(f64::INFINITY, f64::INFINITY), Point2::new(f64::NEG_INFINITY, f64::NEG_INFINITY)),
            |(low, high), edge| (low.inf(&edge.start), high.sup(&edge.start)),
        )
    }

    /// Largest distance from a point to the outer ring, mm (attained at a vertex).
    pub fn farthest_from(&self, point: Point2<f64>) -> f64 {
        self.ring(0).iter().map(|edge| (edge.start - point).norm()).fold(0.0, f64::max)
    }
}
