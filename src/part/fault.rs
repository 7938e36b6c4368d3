//! What can be wrong with a part, worded with the place and the mend.

use super::EdgeId;

/// How two edges meet that must not.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Touch {
    /// They cross at an inner point of both.
    Cross,
    /// They share a point without crossing, or run along each other.
    Touch,
}

/// One fault of a part. Rings, edges and vertices are numbered as in the file, from 0.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum PartFault {
    /// No ring at all.
    #[error("there is no outer ring: give `outer` at least three vertices")]
    NoRing,
    /// A coordinate is NaN or infinite.
    #[error("ring {ring} vertex {vertex}: a coordinate is not a finite number; write a plain number")]
    NotFinite {
        /// Ring.
        ring: usize,
        /// Vertex.
        vertex: usize,
    },
    /// A coordinate is beyond what the predicates take exactly.
    #[error(
        "ring {ring} vertex {vertex}: {value} is farther than 1e9 mm from the origin; check the units, or move the part"
    )]
    TooFar {
        /// Ring.
        ring: usize,
        /// Vertex.
        vertex: usize,
        /// The coordinate as written.
        value: f64,
    },
    /// Too few vertices for a ring.
    #[error("ring {ring}: {have} distinct vertices do not make a ring; give at least three")]
    TooFewVertices {
        /// Ring.
        ring: usize,
        /// Vertices left after the closing one is dropped.
        have: usize,
    },
    /// More vertices than the checks are meant for.
    #[error("the part has {have} vertices, more than {most}; simplify the outline")]
    TooManyVertices {
        /// Vertices in all rings.
        have: usize,
        /// The limit.
        most: usize,
    },
    /// The whole part is smaller than the numbers can carry.
    #[error("the part is only {size_mm:e} mm across; check `units` (smallest is {least_mm:e} mm)")]
    TooSmall {
        /// Larger side of the bounding box.
        size_mm: f64,
        /// The limit.
        least_mm: f64,
    },
    /// Two vertices in a row coincide.
    #[error("ring {ring} vertex {vertex} repeats vertex {before}; remove one of them")]
    RepeatedVertex {
        /// Ring.
        ring: usize,
        /// The second of the two.
        vertex: usize,
        /// The first of the two.
        before: usize,
    },
    /// The outline turns straight back on itself.
    #[error("ring {ring} vertex {vertex}: the outline turns straight back on itself (a spike); remove the vertex")]
    Spike {
        /// Ring.
        ring: usize,
        /// Vertex at the tip.
        vertex: usize,
    },
    /// Two edges meet that must not.
    #[error("ring {} edge {} {} ring {} edge {}; move one of them apart", .a.ring, .a.edge, match .how { Touch::Cross => "crosses", Touch::Touch => "touches" }, .b.ring, .b.edge)]
    Meet {
        /// One edge.
        a: EdgeId,
        /// The other.
        b: EdgeId,
        /// Cross or touch.
        how: Touch,
    },
    /// A ring encloses (almost) nothing.
    #[error("ring {ring} encloses almost no area ({area_mm2:e} mm2); check its vertices")]
    NoArea {
        /// Ring.
        ring: usize,
        /// Its area.
        area_mm2: f64,
    },
    /// A hole lies outside the outer ring.
    #[error("ring {ring} (a hole) lies outside the outer ring; move it inside or give it a file of its own")]
    HoleOutside {
        /// Ring of the hole.
        ring: usize,
    },
    /// A hole lies inside another.
    #[error("ring {ring} (a hole) lies inside ring {outer}, another hole; remove it or give it a file of its own")]
    HoleInHole {
        /// Ring of the inner hole.
        ring: usize,
        /// Ring of the hole around it.
        outer: usize,
    },
    /// A quantity that must be above zero, and within what the sums can carry, is not.
    #[error("`{key}` is {value}; it must be a number above 0 (at most {most:e})")]
    NotPositive {
        /// The key.
        key: &'static str,
        /// Its value.
        value: f64,
        /// The limit.
        most: f64,
    },
    /// The centre of mass is no place.
    #[error("`com` is [{x}, {y}]; give two finite numbers")]
    BadCentreOfMass {
        /// x.
        x: f64,
        /// y.
        y: f64,
    },
    /// An edge is named that the outline lacks.
    #[error("{table} {entry}: there is no ring {} edge {} ({})", .edge.ring, .edge.edge, rings_in_words(.have))]
    NoSuchEdge {
        /// Table of the file.
        table: &'static str,
        /// Entry in that table, from 0.
        entry: usize,
        /// The edge asked for.
        edge: EdgeId,
        /// Edge count of each ring.
        have: Vec<usize>,
    },
    /// A bulge is no bulge.
    #[error("arc {entry}: bulge is {bulge}; give the tangent of a quarter of the angle swept, from -200 to 200")]
    BadBulge {
        /// Entry, from 0.
        entry: usize,
        /// The value.
        bulge: f64,
    },
    /// Two arcs for one edge.
    #[error("arc {entry}: ring {} edge {} has an arc already; remove one", .edge.ring, .edge.edge)]
    ArcTwice {
        /// The later entry, from 0.
        entry: usize,
        /// The edge.
        edge: EdgeId,
    },
    /// A keep-out interval is empty or off the edge.
    #[error("keep_out {entry}: from {from_mm} mm to {to_mm} mm is no interval of ring {} edge {}, which is {length_mm} mm long; give 0 <= from < to", .edge.ring, .edge.edge)]
    BadInterval {
        /// Entry, from 0.
        entry: usize,
        /// Edge.
        edge: EdgeId,
        /// Start.
        from_mm: f64,
        /// End.
        to_mm: f64,
        /// Length of the edge.
        length_mm: f64,
    },
    /// An edge's friction is no coefficient.
    #[error("edge_friction {entry}: mu is {mu}; give a number from 0 to 10")]
    BadEdgeFriction {
        /// Entry, from 0.
        entry: usize,
        /// The value.
        mu: f64,
    },
    /// What an edge may bear is no pressure or line load.
    #[error("edge_limit {entry}: {key} is {value}; give a number above 0")]
    BadEdgeLimit {
        /// Entry, from 0.
        entry: usize,
        /// Key.
        key: &'static str,
        /// The value.
        value: f64,
    },
    /// More faults than are worth listing.
    #[error("and more; mend these first")]
    AndMore,
}

fn rings_in_words(have: &[usize]) -> String {
    let some =
        have.iter().take(4).enumerate().map(|(ring, n)| format!("ring {ring} has edges 0..{}", n.saturating_sub(1)));
    let mut words: Vec<_> = some.collect();
    if have.len() > 4 {
        words.push(format!("{} rings in all", have.len()));
    }
    words.join(", ")
}

/// Every fault found, the deciding one first.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[error("{}", .0.iter().map(ToString::to_string).collect::<Vec<_>>().join("\n"))]
pub struct PartFaults(pub Vec<PartFault>);
