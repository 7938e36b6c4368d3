//! The outline: rings of edges, straight or circular arcs, that bound the material.
//!
//! Vertices stay in the file's order, whatever its winding; only the normals know on which side the material lies.
//! So every edge number and every distance along an edge means the same in the file, inside, and on the screen.

use super::check;
use super::edge::{Edge, EdgeId};
use super::fault::PartFaults;
use super::mass::{self, RegionMoments};
use nalgebra::{Point2, Vector2};
use std::collections::BTreeMap;

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
    /// `bulges` holds the bulge of each edge, ring after ring; edges without an entry are straight.
    ///
    /// Crossing and touching of straight edges is decided exactly on the coordinates as given; arcs take part as chords
    /// within 2e-6 of the part's size.
    ///
    /// # Errors
    /// Every fault found, the deciding one first.
    pub fn new(rings: &[Vec<[f64; 2]>], bulges: &BTreeMap<EdgeId, f64>, unit_mm: f64) -> Result<Self, PartFaults> {
        let rings = check::cleaned(rings, bulges, unit_mm)?;
        let [ox, oy] = rings[0][0];
        let local: Vec<Vec<Point2<f64>>> = rings
            .iter()
            .map(|ring| ring.iter().map(|[x, y]| Point2::new((x - ox) * unit_mm, (y - oy) * unit_mm)).collect())
            .collect();
        let edges_of = |number: usize, side: f64| -> Vec<Edge> {
            let ring = &local[number];
            let edge = |(i, &start): (usize, &Point2<f64>)| {
                let id = EdgeId { ring: number, edge: i };
                let bulge = bulges.get(&id).copied().unwrap_or(0.0);
                Edge::new(id, start, ring[(i + 1) % ring.len()], bulge, side)
            };
            ring.iter().enumerate().map(edge).collect()
        };
        let as_if_left: Vec<Vec<Edge>> = (0..local.len()).map(|number| edges_of(number, 1.0)).collect();
        check::areas(&as_if_left)?;
        let region = RegionMoments::of(&as_if_left);
        let mut edges = Vec::with_capacity(local.iter().map(Vec::len).sum());
        let mut starts = Vec::with_capacity(local.len() + 1);
        for (number, ring) in as_if_left.iter().enumerate() {
            starts.push(edges.len());
            let counter_clockwise = mass::signed_area(ring) > 0.0;
            // The outer ring has its material inside, a hole outside.
            edges.extend(edges_of(number, if counter_clockwise == (number == 0) { 1.0 } else { -1.0 }));
        }
        starts.push(edges.len());
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
        self.ring(0).iter().map(Edge::bounds).fold(
            (Point2::new(f64::INFINITY, f64::INFINITY), Point2::new(f64::NEG_INFINITY, f64::NEG_INFINITY)),
            |(low, high), (edge_low, edge_high)| (low.inf(&edge_low), high.sup(&edge_high)),
        )
    }

    /// Largest distance from a point to the outer ring, mm.
    pub fn farthest_from(&self, point: Point2<f64>) -> f64 {
        self.ring(0).iter().map(|edge| edge.farthest_from(point)).fold(0.0, f64::max)
    }

    /// True when some edge is an arc.
    pub fn has_arcs(&self) -> bool {
        self.edges.iter().any(|edge| edge.arc().is_some())
    }
}
