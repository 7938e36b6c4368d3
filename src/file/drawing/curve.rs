//! Curves of drawings: elliptical arcs and rational Bezier pieces, the latter cut out of splines.

use kurbo::{Affine, Point, Vec2};
use std::f64::consts::{FRAC_PI_2, PI, TAU};

/// Highest degree of a spline.
pub(super) const HIGHEST_DEGREE: usize = 25;
/// Two half axes are a circle's when they agree in length and are square to one another within this fraction.
const CIRCULAR: f64 = 1e-9;

/// A curve with a parameter.
pub(super) trait Curve {
    /// First and last parameter.
    fn range(&self) -> (f64, f64);
    /// Point at a parameter.
    fn at(&self, t: f64) -> Point;
    /// Derivative at a parameter.
    fn speed(&self, t: f64) -> Vec2;
}

/// An arc of an ellipse: `centre + u cos t + v sin t` for t from `from` to `to`, rad. `u` and `v` are any pair of
/// conjugate half diameters, so that mapping them maps the ellipse.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Ellipse {
    /// Centre.
    pub(super) centre: Point,
    /// Half diameter at t = 0.
    pub(super) u: Vec2,
    /// Half diameter at t = pi / 2.
    pub(super) v: Vec2,
    /// First parameter, rad.
    pub(super) from: f64,
    /// Last parameter, rad.
    pub(super) to: f64,
}

/// Cosine and sine, exact at quarter turns.
fn unit(t: f64) -> (f64, f64) {
    let quarters = (t / FRAC_PI_2).round();
    // Degrees that were a whole quarter miss it by a rounding or two as radians.
    if !((t - quarters * FRAC_PI_2).abs() <= 4.0 * f64::EPSILON * t.abs() && quarters.abs() < 64.0) {
        return (t.cos(), t.sin());
    }
    match (quarters as i64).rem_euclid(4) {
        0 => (1.0, 0.0),
        1 => (0.0, 1.0),
        2 => (-1.0, 0.0),
        _ => (0.0, -1.0),
    }
}

/// Unit vector at an angle in rad, exact at quarter turns.
pub(super) fn direction(angle: f64) -> Vec2 {
    let (cos, sin) = unit(angle);
    Vec2::new(cos, sin)
}

/// A turn about the origin in degrees, exact at quarter turns.
pub(super) fn rotation(degrees: f64) -> Affine {
    let (cos, sin) = unit(degrees.to_radians());
    Affine::new([cos, sin, -sin, cos, 0.0, 0.0])
}

impl Ellipse {
    /// A whole circle.
    pub(super) fn circle(centre: Point, radius: f64) -> Self {
        Self { centre, u: Vec2::new(radius, 0.0), v: Vec2::new(0.0, radius), from: 0.0, to: TAU }
    }

    /// The arc with this bulge between two points. With c the chord, the centre lies c (1 / b - b) / 4 to the left of
    /// its middle (b = tan(sweep / 4)).
    pub(super) fn of_bulge(from: Point, to: Point, bulge: f64) -> Self {
        let chord = to - from;
        let left = Vec2::new(-chord.y, chord.x);
        let centre = from + chord * 0.5 + left * ((1.0 / bulge - bulge) / 4.0);
        let u = from - centre;
        Self { centre, u, v: Vec2::new(-u.y, u.x), from: 0.0, to: 4.0 * bulge.atan() }
    }

    /// The ellipse mapped.
    pub(super) fn placed(&self, place: Affine) -> Self {
        let [a, b, c, d, ..] = place.as_coeffs();
        let linear = |v: Vec2| Vec2::new(a * v.x + c * v.y, b * v.x + d * v.y);
        Self { centre: place * self.centre, u: linear(self.u), v: linear(self.v), ..*self }
    }

    /// True when it goes all the way round.
    pub(super) fn is_whole(&self) -> bool {
        (self.to - self.from).abs() >= TAU * (1.0 - 1e-12)
    }

    /// Point at a parameter, exact at quarter turns.
    pub(super) fn point(&self, t: f64) -> Point {
        let (cos, sin) = unit(t);
        self.centre + self.u * cos + self.v * sin
    }

    /// The arc in pieces of half a turn at most, a quarter where it is no circle's.
    pub(super) fn pieces(&self) -> Vec<Self> {
        let most = if self.is_circular() { PI } else { FRAC_PI_2 };
        // A whole turn may be more than its double by a rounding.
        let count = (((self.to - self.from) / most).abs() * (1.0 - 1e-12)).ceil().clamp(1.0, 8.0) as usize;
        let at = |i: usize| {
            if i == count { self.to } else { self.from + (self.to - self.from) * (i as f64 / count as f64) }
        };
        (0..count).map(|i| Self { from: at(i), to: at(i + 1), ..*self }).collect()
    }

    fn is_circular(&self) -> bool {
        let (u, v) = (self.u.hypot(), self.v.hypot());
        (u - v).abs() <= CIRCULAR * u && self.u.dot(self.v).abs() <= CIRCULAR * u * u
    }

    /// Bulge of a circular arc; nothing for a true ellipse.
    pub(super) fn bulge(&self) -> Option<f64> {
        self.is_circular().then(|| ((self.to - self.from) * self.u.cross(self.v).signum() / 4.0).tan())
    }
}

impl Curve for Ellipse {
    fn range(&self) -> (f64, f64) {
        (self.from, self.to)
    }

    fn at(&self, t: f64) -> Point {
        self.point(t)
    }

    fn speed(&self, t: f64) -> Vec2 {
        let (cos, sin) = unit(t);
        self.v * cos - self.u * sin
    }
}

/// A Bezier curve, rational where the weights differ: control points as (x w, y w, w).
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Bezier {
    points: Vec<[f64; 3]>,
}

type Homogeneous = [f64; 3];

fn blend(a: Homogeneous, b: Homogeneous, t: f64) -> Homogeneous {
    [0, 1, 2].map(|i| a[i] * (1.0 - t) + b[i] * t)
}

impl Bezier {
    /// A plain Bezier curve from its control points, two to four.
    pub(super) fn plain(points: &[Point]) -> Self {
        Self { points: points.iter().map(|p| [p.x, p.y, 1.0]).collect() }
    }

    /// First control point.
    pub(super) fn start(&self) -> Point {
        self.at(0.0)
    }

    /// Last control point.
    pub(super) fn end(&self) -> Point {
        self.at(1.0)
    }

    /// The curve mapped: its control points are, by a map that keeps lines and ratios.
    pub(super) fn placed(&self, place: Affine) -> Self {
        let [a, b, c, d, e, f] = place.as_coeffs();
        let map = |&[x, y, w]: &Homogeneous| [a * x + c * y + e * w, b * x + d * y + f * w, w];
        Self { points: self.points.iter().map(map).collect() }
    }

    /// The last two points of de Casteljau's scheme.
    fn last_two(&self, t: f64) -> (Homogeneous, Homogeneous) {
        let mut scheme = [[0.0; 3]; HIGHEST_DEGREE + 1];
        let n = self.points.len().min(scheme.len());
        scheme[..n].copy_from_slice(&self.points[..n]);
        for level in (2..n).rev() {
            for i in 0..level {
                scheme[i] = blend(scheme[i], scheme[i + 1], t);
            }
        }
        (scheme[0], scheme[1])
    }
}

impl Curve for Bezier {
    fn range(&self) -> (f64, f64) {
        (0.0, 1.0)
    }

    fn at(&self, t: f64) -> Point {
        let (a, b) = self.last_two(t);
        let [x, y, w] = if t == 0.0 {
            a
        } else if t == 1.0 {
            b
        } else {
            blend(a, b, t)
        };
        Point::new(x / w, y / w)
    }

    fn speed(&self, t: f64) -> Vec2 {
        let (a, b) = self.last_two(t);
        let [x, y, w] = blend(a, b, t);
        let degree = (self.points.len() - 1) as f64;
        let [dx, dy, dw] = [0, 1, 2].map(|i| (b[i] - a[i]) * degree);
        Vec2::new((dx - dw * x / w) / w, (dy - dw * y / w) / w)
    }
}

/// A spline: B-spline control points with weights, and knots.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Spline {
    /// Degree.
    pub(super) degree: usize,
    /// Knots, not falling; as many as control points, plus the degree, plus one.
    pub(super) knots: Vec<f64>,
    /// Control points.
    pub(super) points: Vec<Point>,
    /// One for each control point, above 0; empty when all are alike.
    pub(super) weights: Vec<f64>,
}

impl Spline {
    /// Why this is no spline; nothing when it is one.
    pub(super) fn flaw(&self) -> Option<String> {
        let (n, p) = (self.points.len(), self.degree);
        if !(1..=HIGHEST_DEGREE).contains(&p) {
            Some(format!("its degree is {p}, not 1 to {HIGHEST_DEGREE}"))
        } else if n <= p {
            Some(format!("{n} control points are too few for degree {p}"))
        } else if self.knots.len() != n + p + 1 {
            Some(format!("it has {} knots; {n} control points of degree {p} take {}", self.knots.len(), n + p + 1))
        } else if self.knots.windows(2).any(|pair| pair[1] < pair[0]) {
            Some("its knots fall".to_owned())
        } else if !(self.weights.is_empty() || self.weights.len() == n) {
            Some(format!("it has {} weights for {n} control points", self.weights.len()))
        } else if self.weights.iter().any(|&weight| !(weight > 0.0)) {
            Some("a weight is not above 0".to_owned())
        } else if (p..n).all(|span| self.knots[span] >= self.knots[span + 1]) {
            Some("all its knots are alike".to_owned())
        } else {
            None
        }
    }

    /// The spline as Bezier pieces, one for each span between different knots. The control points of a span are the
    /// blossom at its ends: j times the later one, degree - j times the earlier one (Ramshaw 1989).
    pub(super) fn beziers(&self) -> Vec<Bezier> {
        let p = self.degree;
        let control: Vec<Homogeneous> = self
            .points
            .iter()
            .enumerate()
            .map(|(i, at)| {
                let w = self.weights.get(i).copied().unwrap_or(1.0);
                [at.x * w, at.y * w, w]
            })
            .collect();
        let mut pieces = Vec::new();
        for span in p..self.points.len() {
            let (low, high) = (self.knots[span], self.knots[span + 1]);
            if low >= high {
                continue;
            }
            let points = (0..=p).map(|j| self.blossom(&control, span, |level| if level <= j { high } else { low }));
            pieces.push(Bezier { points: points.collect() });
        }
        pieces
    }

    /// De Boor's scheme on one span with an argument of its own at each level, from 1.
    fn blossom(&self, control: &[Homogeneous], span: usize, argument: impl Fn(usize) -> f64) -> Homogeneous {
        let p = self.degree;
        let mut scheme = [[0.0; 3]; HIGHEST_DEGREE + 1];
        scheme[..=p].copy_from_slice(&control[span - p..=span]);
        for level in 1..=p {
            let t = argument(level);
            for i in (level..=p).rev() {
                let (low, high) = (self.knots[span - p + i], self.knots[span + 1 + i - level]);
                scheme[i] = blend(scheme[i - 1], scheme[i], (t - low) / (high - low));
            }
        }
        scheme[p]
    }
}
