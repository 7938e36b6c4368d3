//! Measures of loops of straight edges and arcs: area, length, box, whether a point is inside or near.

use super::chain::Loop;
use kurbo::{Point, Rect, Vec2};
use robust::{Coord, orient2d};

/// A circular edge in numbers; nothing of it for a straight one.
#[derive(Debug, Clone, Copy)]
pub(super) struct Round {
    /// Centre.
    pub(super) centre: Point,
    /// Radius.
    pub(super) radius: f64,
}

/// Centre and radius of an edge with a bulge other than 0: the centre lies c (1 / b - b) / 4 left of the chord's middle.
pub(super) fn round((from, to, bulge): (Point, Point, f64)) -> Round {
    let chord = to - from;
    let left = Vec2::new(-chord.y, chord.x);
    let centre = from.midpoint(to) + left * ((1.0 / bulge - bulge) / 4.0);
    Round { centre, radius: chord.hypot() * (1.0 / bulge + bulge).abs() / 4.0 }
}

/// Area between an arc and its chord, positive for a positive bulge. With s the sweep the area is
/// c^2 / 8 (s - sin s) / sin^2(s / 2); for a small sweep the series of that quotient, which does not cancel.
fn cap(chord: f64, bulge: f64) -> f64 {
    let s = 4.0 * bulge.atan();
    let quotient = if s.abs() < 1e-2 {
        // (s - sin s) / sin^2(s / 2) = 2 s / 3 (1 + s^2 / 30 + s^4 / 840 + ...)
        2.0 * s / 3.0 * (1.0 + s * s / 30.0 + s.powi(4) / 840.0)
    } else {
        (s - s.sin()) / (s / 2.0).sin().powi(2)
    };
    chord * chord / 8.0 * quotient
}

/// Highest and lowest reach of an arc on one side of its ends.
pub(super) fn edge_bounds(edge: (Point, Point, f64)) -> Rect {
    let (from, to, bulge) = edge;
    let mut bounds = Rect::from_points(from, to);
    if bulge != 0.0 {
        let Round { centre, radius } = round(edge);
        for side in [Vec2::new(1.0, 0.0), Vec2::new(0.0, 1.0), Vec2::new(-1.0, 0.0), Vec2::new(0.0, -1.0)] {
            let extreme = centre + side * radius;
            // On the arc iff on the arc's side of the chord.
            let turn = (to - from).cross(extreme - from);
            if turn * bulge < 0.0 && extreme.is_finite() {
                bounds = bounds.union_pt(extreme);
            }
        }
    }
    bounds
}

/// Area, length and box of a loop.
#[derive(Debug, Clone, Copy)]
pub(super) struct Measure {
    /// Area, positive when it runs counter-clockwise.
    pub(super) area: f64,
    /// Length all round.
    pub(super) length: f64,
    /// The box around it.
    pub(super) bounds: Rect,
}

impl Measure {
    /// Measures a loop.
    pub(super) fn of(shape: &Loop) -> Self {
        // Relative to a vertex, so that a loop far from the origin loses no digits.
        let about = shape.vertices[0];
        let mut bounds = Rect::from_points(about, about);
        let (mut area, mut length) = (0.0, 0.0);
        for edge in 0..shape.vertices.len() {
            let (from, to, bulge) = shape.edge(edge);
            let chord = (to - from).hypot();
            area += (from - about).cross(to - about) / 2.0 + cap(chord, bulge);
            // c / (2 sin(s / 2)) s
            let half = 2.0 * bulge.atan();
            length += if half.abs() < 1e-6 { chord } else { chord * half / half.sin() };
            bounds = bounds.union(edge_bounds((from, to, bulge)));
        }
        Self { area, length, bounds }
    }

    /// True when another loop's measures are the same within a distance of its outline.
    pub(super) fn is_like(&self, other: &Self, near: f64) -> bool {
        let corner = |a: f64, b: f64| (a - b).abs() <= 2.0 * near;
        corner(self.bounds.x0, other.bounds.x0)
            && corner(self.bounds.x1, other.bounds.x1)
            && corner(self.bounds.y0, other.bounds.y0)
            && corner(self.bounds.y1, other.bounds.y1)
            && (self.area.abs() - other.area.abs()).abs() <= 2.0 * near * self.length
    }
}

/// True when a point is within the region between an arc and its chord.
fn in_cap(edge: (Point, Point, f64), point: Point) -> bool {
    let (from, to, bulge) = edge;
    let turn = (to - from).cross(point - from);
    if !(turn * bulge < 0.0) {
        return false;
    }
    let Round { centre, radius } = round(edge);
    (point - centre).hypot() < radius
}

impl Loop {
    /// True when a point is inside, by the parity of crossings of the chords with a ray to +x, each arc turning the
    /// answer over for what lies between it and its chord. The point is taken not to be on the loop.
    pub(super) fn contains(&self, point: Point) -> bool {
        let coord = |p: Point| Coord { x: p.x, y: p.y };
        let mut inside = false;
        for edge in 0..self.vertices.len() {
            let (from, to, bulge) = self.edge(edge);
            let (low, high) = if from.y <= to.y { (from, to) } else { (to, from) };
            if low.y <= point.y && point.y < high.y && orient2d(coord(low), coord(high), coord(point)) > 0.0 {
                inside = !inside;
            }
            if bulge != 0.0 && in_cap((from, to, bulge), point) {
                inside = !inside;
            }
        }
        inside
    }

    /// True when a point is within a distance of the loop.
    pub(super) fn is_near(&self, point: Point, near: f64) -> bool {
        (0..self.vertices.len()).any(|edge| {
            let (from, to, bulge) = self.edge(edge);
            if (point - from).hypot() <= near || (point - to).hypot() <= near {
                return true;
            }
            let chord = to - from;
            if bulge == 0.0 {
                let along = (point - from).dot(chord) / chord.hypot2();
                return (0.0..=1.0).contains(&along) && (from + chord * along - point).hypot() <= near;
            }
            let Round { centre, radius } = round((from, to, bulge));
            let on_side = chord.cross(point - from) * bulge <= 0.0;
            on_side && ((point - centre).hypot() - radius).abs() <= near
        })
    }
}

/// Most chords for one arc.
const MOST_CHORDS: f64 = 4096.0;

impl Loop {
    /// The loop with arcs as chords no farther from them than the sagitta.
    pub(super) fn flatten(&mut self, sagitta: f64) {
        let mut flat = Self::nothing();
        for edge in 0..self.vertices.len() {
            let (start, end, bulge) = self.edge(edge);
            let chords = chords((start, end, bulge), sagitta);
            for i in 0..chords {
                flat.vertices.push(point_on((start, end, bulge), i as f64 / chords as f64));
                flat.bulges.push(0.0);
                flat.sources.push(self.sources[edge]);
            }
        }
        *self = flat;
    }

    /// A loop of nothing.
    pub(super) fn nothing() -> Self {
        Self { vertices: Vec::new(), bulges: Vec::new(), sources: Vec::new() }
    }
}

/// Chords an arc takes: the sagitta of a chord that spans the angle a is r (1 - cos(a / 2)).
fn chords(edge: (Point, Point, f64), sagitta: f64) -> usize {
    let (start, end, bulge) = edge;
    // The sagitta of the whole arc is chord * bulge / 2.
    if (end - start).hypot() * bulge.abs() / 2.0 <= sagitta {
        return 1;
    }
    let radius = round(edge).radius;
    let step = 2.0 * (2.0 * (sagitta / (2.0 * radius)).sqrt().min(1.0).asin());
    let sweep = 4.0 * bulge.atan().abs();
    // The cast saturates; a chord spans half a turn at most.
    (sweep / step).ceil().clamp((sweep / 2.0).ceil().max(1.0), MOST_CHORDS) as usize
}

/// Point at a fraction of an edge's sweep, exact at its start. In units of the half chord, with the chord from -1 to 1
/// along x, the point at the angle s f from the start is (sin(s f - s / 2) / sin(s / 2), (cos(s / 2) - cos(s f - s / 2)) /
/// sin(s / 2)).
fn point_on(edge: (Point, Point, f64), fraction: f64) -> Point {
    let (start, end, bulge) = edge;
    if fraction == 0.0 {
        return start;
    }
    let half_chord = (end - start) * 0.5;
    if bulge == 0.0 {
        return start + half_chord * (2.0 * fraction);
    }
    let half = 2.0 * bulge.atan();
    let angle = half * (2.0 * fraction - 1.0);
    let along = angle.sin() / half.sin();
    // cos(half) - cos(angle) as a product, which does not cancel.
    let across = -2.0 * ((half + angle) / 2.0).sin() * ((half - angle) / 2.0).sin() / half.sin();
    let left = Vec2::new(-half_chord.y, half_chord.x);
    start.midpoint(end) + half_chord * along + left * across
}
