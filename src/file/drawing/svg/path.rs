//! Path data and elliptical arcs between two points (SVG 2, sections 9.3 and appendix B.2).

use super::super::curve::{Bezier, Ellipse};
use super::super::sheet::Segment;
use kurbo::{Point, Vec2};
use svgtypes::{PathParser, PathSegment};

/// One subpath.
#[derive(Debug)]
pub(super) struct Subpath {
    /// First point.
    pub(super) start: Point,
    /// The rest.
    pub(super) segments: Vec<Segment>,
    /// True when it is closed by the letter z.
    pub(super) closed: bool,
}

/// The subpaths of path data; those of a single point are left out.
///
/// # Errors
/// What is wrong, with the place in the data.
pub(super) fn subpaths(data: &str) -> Result<Vec<Subpath>, String> {
    let mut pen = Pen::default();
    for segment in PathParser::from(data) {
        let segment =
            segment.map_err(|error| format!("its path data is wrong: {}", super::short_error(&error.to_string())))?;
        pen.draw(segment);
    }
    pen.lift(false);
    Ok(pen.done)
}

#[derive(Default)]
struct Pen {
    done: Vec<Subpath>,
    start: Point,
    at: Point,
    segments: Vec<Segment>,
    /// Last control point of a cubic or quadratic curve, for the smooth ones.
    cubic: Option<Point>,
    quadratic: Option<Point>,
}

impl Pen {
    fn lift(&mut self, closed: bool) {
        if !self.segments.is_empty() {
            self.done.push(Subpath { start: self.start, segments: std::mem::take(&mut self.segments), closed });
        }
    }

    fn to(&mut self, segment: Segment, end: Point) {
        self.segments.push(segment);
        self.at = end;
    }

    fn draw(&mut self, segment: PathSegment) {
        let at = self.at;
        let place = |abs: bool, x: f64, y: f64| if abs { Point::new(x, y) } else { at + Vec2::new(x, y) };
        // Mirrored in the point the pen is at; without a curve of that kind before, the point itself.
        let mirrored = |control: Option<Point>| control.map_or(at, |control| at + (at - control));
        let (last_cubic, last_quadratic) = (self.cubic.take(), self.quadratic.take());
        match segment {
            PathSegment::MoveTo { abs, x, y } => {
                self.lift(false);
                self.at = place(abs, x, y);
                self.start = self.at;
            }
            PathSegment::LineTo { abs, x, y } => self.line(place(abs, x, y)),
            PathSegment::HorizontalLineTo { abs, x } => self.line(Point::new(if abs { x } else { at.x + x }, at.y)),
            PathSegment::VerticalLineTo { abs, y } => self.line(Point::new(at.x, if abs { y } else { at.y + y })),
            PathSegment::CurveTo { abs, x1, y1, x2, y2, x, y } => {
                self.cubic_to(place(abs, x1, y1), place(abs, x2, y2), place(abs, x, y));
            }
            PathSegment::SmoothCurveTo { abs, x2, y2, x, y } => {
                self.cubic_to(mirrored(last_cubic), place(abs, x2, y2), place(abs, x, y));
            }
            PathSegment::Quadratic { abs, x1, y1, x, y } => self.quadratic_to(place(abs, x1, y1), place(abs, x, y)),
            PathSegment::SmoothQuadratic { abs, x, y } => self.quadratic_to(mirrored(last_quadratic), place(abs, x, y)),
            PathSegment::EllipticalArc { abs, rx, ry, x_axis_rotation, large_arc, sweep, x, y } => {
                let end = place(abs, x, y);
                match arc(at, rx, ry, x_axis_rotation, large_arc, sweep, end) {
                    Some(ellipse) => self.to(Segment::Ellipse(ellipse, end), end),
                    None => self.line(end),
                }
            }
            PathSegment::ClosePath { .. } => {
                self.lift(true);
                self.at = self.start;
            }
        }
    }

    fn line(&mut self, end: Point) {
        self.to(Segment::Line(end), end);
    }

    fn cubic_to(&mut self, first: Point, second: Point, end: Point) {
        self.cubic = Some(second);
        self.to(Segment::Bezier(Bezier::plain(&[self.at, first, second, end])), end);
    }

    fn quadratic_to(&mut self, control: Point, end: Point) {
        self.quadratic = Some(control);
        self.to(Segment::Bezier(Bezier::plain(&[self.at, control, end])), end);
    }
}

/// The elliptical arc between two points, from end points to centre (SVG 2, B.2.4 and B.2.5); nothing where the
/// specification draws a straight line.
fn arc(from: Point, rx: f64, ry: f64, degrees: f64, large: bool, sweep: bool, to: Point) -> Option<Ellipse> {
    let (mut rx, mut ry) = (rx.abs(), ry.abs());
    if rx == 0.0 || ry == 0.0 || from == to {
        return None;
    }
    let axis = super::super::curve::direction(degrees.to_radians());
    let across = Vec2::new(-axis.y, axis.x);
    // Half the chord in the ellipse's own frame, in units of its half axes.
    let half = (from - to) * 0.5;
    let (x, y) = (half.dot(axis), half.dot(across));
    let reach = ((x / rx).powi(2) + (y / ry).powi(2)).sqrt();
    let (mut u, mut v) = (x / rx, y / ry);
    if reach > 1.0 {
        // Radii too small for the chord grow until they fit.
        (rx, ry) = (rx * reach, ry * reach);
        (u, v) = (u / reach, v / reach);
    }
    let square = u * u + v * v;
    let off = if reach >= 1.0 { 0.0 } else { ((1.0 - square) / square).max(0.0).sqrt() };
    let off = if large == sweep { -off } else { off };
    // Centre in the unit frame, relative to the middle of the chord.
    let (cu, cv) = (off * v, -off * u);
    let centre = to.midpoint(from) + axis * (cu * rx) + across * (cv * ry);
    let start = (v - cv).atan2(u - cu);
    let end = (-v - cv).atan2(-u - cu);
    let mut turn = end - start;
    if sweep && turn < 0.0 {
        turn += std::f64::consts::TAU;
    } else if !sweep && turn > 0.0 {
        turn -= std::f64::consts::TAU;
    }
    let ellipse = Ellipse { centre, u: axis * rx, v: across * ry, from: start, to: start + turn };
    (centre.is_finite() && turn.is_finite() && turn != 0.0).then_some(ellipse)
}
