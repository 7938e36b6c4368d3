//! Strands: runs of straight edges and arcs, each from one entity of a drawing.

use kurbo::Point;

/// A run of edges. Edge i runs from vertex i to vertex i + 1; a closed strand has an edge from the last vertex back to
/// the first. `bulges[i]` is the tangent of a quarter of edge i's sweep, positive counter-clockwise, 0 for a straight
/// edge.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Strand {
    /// Vertices.
    pub(super) vertices: Vec<Point>,
    /// One for each edge.
    pub(super) bulges: Vec<f64>,
    /// True when the last vertex joins the first.
    pub(super) closed: bool,
    /// Where it comes from: a number in the sheet's list of things in place.
    pub(super) source: usize,
}

impl Strand {
    /// Begins a strand at a point.
    pub(super) fn at(point: Point, source: usize) -> Self {
        Self { vertices: vec![point], bulges: Vec::new(), closed: false, source }
    }

    /// The last vertex.
    pub(super) fn end(&self) -> Point {
        self.vertices[self.vertices.len() - 1]
    }

    /// Adds an edge.
    pub(super) fn to(&mut self, point: Point, bulge: f64) {
        self.vertices.push(point);
        self.bulges.push(bulge);
    }

    /// Closes the strand with an edge from its last vertex to its first; where the two are one already, no edge is
    /// added and the last vertex goes.
    pub(super) fn close(&mut self, bulge: f64) {
        #[expect(clippy::float_cmp, reason = "the same vertex written twice")]
        let same = self.vertices.len() > 1 && self.vertices[0] == self.end();
        if same {
            self.vertices.pop();
        } else {
            self.bulges.push(bulge);
        }
        self.closed = true;
    }

    /// Ends of an edge and its bulge.
    pub(super) fn edge(&self, edge: usize) -> (Point, Point, f64) {
        let next = if edge + 1 == self.vertices.len() { 0 } else { edge + 1 };
        (self.vertices[edge], self.vertices[next], self.bulges[edge])
    }
}
