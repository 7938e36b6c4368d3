//! Smooth curves as pairs of arcs that share tangents (biarcs), within a sagitta.
//!
//! Between two points with tangents the pair with equal control lengths is taken (Bolton 1975). It meets the curve's
//! tangents at both ends, so that the normals of the arcs are those of the curve there; its distance from the curve
//! shrinks with the cube of the length.

use super::curve::Curve;
use super::strand::Strand;
use kurbo::{Point, Vec2};

/// Points of the curve held against each pair of arcs.
const SAMPLES: usize = 16;
/// Part of the sagitta that the samples may use up: between two of them the distance may be larger, most where the curve
/// turns sharply.
const SAMPLED: f64 = 0.75;
/// Halvings of a curve before it is taken as straight.
const DEEPEST: u32 = 24;
/// Largest angle between an arc's chord and its end tangent, rad.
const STEEPEST: f64 = 1.0;
/// Edges whose own sagitta is below this fraction of the allowed one are straight.
const STRAIGHT: f64 = 1e-6;

/// An arc to a point.
#[derive(Debug, Clone, Copy)]
struct Arc {
    from: Point,
    to: Point,
    bulge: f64,
}

/// Adds a curve to a strand that has reached its beginning, `most` edges at most: the tracer counts and refuses more.
pub(super) fn trace(curve: &impl Curve, sagitta: f64, strand: &mut Strand, most: usize) {
    let (from, to) = curve.range();
    let start = strand.end();
    if !sagitta.is_finite() {
        for i in 1..=SAMPLES {
            strand.to(curve.at(from + (to - from) * (i as f64 / SAMPLES as f64)), 0.0);
        }
        return;
    }
    let sagitta = SAMPLED * sagitta;
    // What is left to do, the next stretch last.
    let mut waiting = vec![(from, to, DEEPEST)];
    let mut here = (from, start);
    while let Some((low, high, depth)) = waiting.pop() {
        if strand.bulges.len() > most {
            return;
        }
        let end = curve.at(high);
        let fitted = fit(curve, here.1, end, low, high, sagitta);
        match fitted {
            Some(arcs) => arcs.iter().flatten().for_each(|arc| strand.to(arc.to, arc.bulge)),
            None if depth == 0 => strand.to(end, 0.0),
            None => {
                let middle = low + (high - low) / 2.0;
                waiting.push((middle, high, depth - 1));
                waiting.push((low, middle, depth - 1));
                continue;
            }
        }
        here = (high, end);
    }
}

/// Direction of the curve at `t`, seen from the side of `other`.
fn tangent(curve: &impl Curve, t: f64, other: f64, chord: Vec2) -> Vec2 {
    let forward = (other - t).signum();
    // The speed is judged against the chord over the stretch; at a cusp it vanishes, and a point beside tells.
    let speed = curve.speed(t) * (other - t).abs();
    let sign = if curve.range().0 <= curve.range().1 { 1.0 } else { -1.0 };
    if speed.hypot() > 1e-6 * chord.hypot() {
        return speed.normalize() * sign;
    }
    let beside = (curve.at(t + (other - t) * 1e-3) - curve.at(t)) * forward * sign;
    if beside.hypot() > 0.0 { beside.normalize() } else { chord.normalize() }
}

/// Angle from one direction to another, rad, counter-clockwise positive.
fn angle(from: Vec2, to: Vec2) -> f64 {
    from.cross(to).atan2(from.dot(to))
}

/// One straight edge or two arcs within the sagitta of a stretch of curve; nothing when it must be halved. No edge at
/// all for a stretch without length.
fn fit(curve: &impl Curve, p: Point, q: Point, low: f64, high: f64, sagitta: f64) -> Option<[Option<Arc>; 2]> {
    let sample = |i: usize| curve.at(low + (high - low) * (i as f64 / (SAMPLES + 1) as f64));
    let chord = q - p;
    if !(chord.hypot() > 0.0) {
        return (1..=SAMPLES).all(|i| (sample(i) - p).hypot() <= sagitta).then_some([None; 2]);
    }
    let (s, e) = (tangent(curve, low, high, chord), tangent(curve, high, low, chord));
    let straight = Arc { from: p, to: q, bulge: 0.0 };
    let bend = angle(s, chord).abs().max(angle(chord, e).abs());
    // The sagitta of an arc that leaves its chord at an angle a is c / 2 tan(a / 2).
    if bend * chord.hypot() < STRAIGHT * sagitta && (1..=SAMPLES).all(|i| straight.distance(sample(i)) <= sagitta) {
        return Some([Some(straight), None]);
    }
    let joint = joint(p, s, q, e)?;
    let first = Arc::leaving(p, s, joint)?;
    let second = Arc::arriving(joint, q, e)?;
    // The pair's common tangent at the joint parts the samples between the two.
    let along = q - p - (s + e) * control_length(p, s, q, e)?;
    let along = if along.hypot() > 0.0 { along } else { chord };
    let near = |point: Point| if (point - joint).dot(along) < 0.0 { &first } else { &second };
    (1..=SAMPLES)
        .all(|i| {
            let point = sample(i);
            near(point).distance(point) <= sagitta
        })
        .then_some([Some(first), Some(second)])
}

/// Length d of the control legs: `|q - p - d (s + e)| = 2 d`.
fn control_length(p: Point, s: Vec2, q: Point, e: Vec2) -> Option<f64> {
    let v = q - p;
    let (vt, vv) = (v.dot(s + e), v.hypot2());
    let a = 2.0 * (1.0 - s.dot(e));
    // a d^2 + 2 d vt - vv = 0 has one positive root; in this form it does not cancel where the tangents agree.
    let d = vv / (vt + (vt * vt + a * vv).sqrt());
    (d.is_finite() && d > 0.0).then_some(d)
}

fn joint(p: Point, s: Vec2, q: Point, e: Vec2) -> Option<Point> {
    let d = control_length(p, s, q, e)?;
    Some(p + ((q - p) + (s - e) * d) * 0.5)
}

impl Arc {
    /// The arc that leaves `from` in a direction; nothing when it turns too far.
    fn leaving(from: Point, direction: Vec2, to: Point) -> Option<Self> {
        Self::with(from, to, angle(direction, to - from))
    }

    /// The arc that arrives at `to` in a direction; nothing when it turns too far.
    fn arriving(from: Point, to: Point, direction: Vec2) -> Option<Self> {
        Self::with(from, to, angle(to - from, direction))
    }

    /// The sweep is twice the angle between chord and end tangent.
    fn with(from: Point, to: Point, half_sweep: f64) -> Option<Self> {
        let sound = half_sweep.abs() <= STEEPEST && (to - from).hypot() > 0.0;
        sound.then(|| Self { from, to, bulge: (half_sweep / 2.0).tan() })
    }

    /// Distance of a point near the arc from it, to first order; beyond the ends of the chord at least the distance from
    /// there. In the chord's frame (x along it from its middle, y to its left) the circle is
    /// `b (x^2 + y^2 - c^2 / 4) + c (b^2 - 1) y / 2 = 0`, with a gradient of length `c (1 + b^2) / 2` on it; this form has
    /// no large radius in it.
    fn distance(&self, point: Point) -> f64 {
        let chord = self.to - self.from;
        let c = chord.hypot();
        let from_middle = point - self.from.midpoint(self.to);
        let (x, y) = (from_middle.dot(chord) / c, chord.cross(from_middle) / c);
        let b = self.bulge;
        let value = b * (x * x + y * y - c * c / 4.0) + c * (b * b - 1.0) * y / 2.0;
        let off = value.abs() / (c * (1.0 + b * b) / 2.0);
        off.max(x.abs() - c / 2.0)
    }
}

#[cfg(test)]
mod tests {
    use super::super::curve::Bezier;
    use super::*;
    use proptest::prelude::*;

    fn traced(curve: &Bezier, sagitta: f64) -> Vec<Arc> {
        let mut strand = Strand::at(curve.at(0.0), 0);
        trace(curve, sagitta, &mut strand, 1_000_000);
        (0..strand.bulges.len())
            .map(|edge| {
                let (from, to, bulge) = strand.edge(edge);
                Arc { from, to, bulge }
            })
            .collect()
    }

    /// Directions of an arc at its ends: half the sweep either way from the chord.
    fn directions(arc: &Arc) -> (Vec2, Vec2) {
        let half = 2.0 * arc.bulge.atan();
        let turned = |v: Vec2, by: f64| Vec2::new(v.x * by.cos() - v.y * by.sin(), v.x * by.sin() + v.y * by.cos());
        let chord = (arc.to - arc.from).normalize();
        (turned(chord, -half), turned(chord, half))
    }

    /// Distance from the nearest arc, by its centre and radius; from a chord where it is straight.
    fn distance(arcs: &[Arc], point: Point) -> f64 {
        let one = |arc: &Arc| {
            let ends = (point - arc.from).hypot().min((point - arc.to).hypot());
            let chord = arc.to - arc.from;
            let along = (point - arc.from).dot(chord) / chord.hypot2();
            if !(0.0..=1.0).contains(&along) {
                return ends;
            }
            if arc.bulge.abs() < 1e-7 {
                return (chord.cross(point - arc.from) / chord.hypot()).abs();
            }
            let centre = arc.from + chord * 0.5 + Vec2::new(-chord.y, chord.x) * ((1.0 / arc.bulge - arc.bulge) / 4.0);
            ((point - centre).hypot() - (arc.from - centre).hypot()).abs()
        };
        arcs.iter().map(one).fold(f64::INFINITY, f64::min)
    }

    proptest! {
        #![proptest_config(ProptestConfig::with_cases(1000))]
        /// By definition of the sagitta: every point of the curve is within it of the arcs.
        #[test]
        fn arcs_are_within_the_sagitta(
            points in prop::collection::vec((-100.0..100.0f64, -100.0..100.0f64), 4),
            sagitta in prop::sample::select(vec![0.3, 0.01, 1e-4]),
        ) {
            let points: Vec<Point> = points.iter().map(|&(x, y)| Point::new(x, y)).collect();
            let curve = Bezier::plain(&points);
            let arcs = traced(&curve, sagitta);
            prop_assert!(arcs.len() < 4000, "{}", arcs.len());
            for i in 0..=700 {
                let off = distance(&arcs, curve.at(f64::from(i) / 700.0));
                prop_assert!(off <= sagitta, "{off} at {i} with {} arcs", arcs.len());
            }
        }

        /// Neighbouring arcs share their tangent (Bolton 1975), so that the normal does not jump where the curve is
        /// smooth. Control points in the corners of a quarter ring keep the curve free of cusps.
        #[test]
        fn neighbours_share_their_tangent(
            a in 20.0..60.0f64, b in 20.0..60.0f64, r in 50.0..90.0f64,
        ) {
            let curve = Bezier::plain(&[(r, 0.0), (r, a), (b, r), (0.0, r)].map(|(x, y)| Point::new(x, y)));
            let arcs = traced(&curve, 1e-3);
            for pair in arcs.windows(2) {
                let (end, start) = (directions(&pair[0]).1, directions(&pair[1]).0);
                prop_assert!(angle(end, start).abs() < 1e-6, "{}", angle(end, start));
            }
            let last = arcs.len() - 1;
            prop_assert!(angle(directions(&arcs[0]).0, curve.speed(0.0)).abs() < 1e-9);
            prop_assert!(angle(directions(&arcs[last]).1, curve.speed(1.0)).abs() < 1e-9);
        }
    }

    /// A quarter of a circle as a Bezier curve with handles of 0.5523 r is within 2.73e-4 r of the circle (from memory; it
    /// follows from the curve's distance from the centre); its arcs have that radius.
    #[test]
    fn arcs_have_the_curvature_of_the_curve() {
        const HANDLE: f64 = 0.552_284_749_8;
        let curve = Bezier::plain(
            &[(10.0, 0.0), (10.0, 10.0 * HANDLE), (10.0 * HANDLE, 10.0), (0.0, 10.0)].map(|(x, y)| Point::new(x, y)),
        );
        let arcs = traced(&curve, 0.01);
        assert!(arcs.len() <= 4, "{}", arcs.len());
        for arc in arcs {
            let radius = (arc.to - arc.from).hypot() * (1.0 + arc.bulge * arc.bulge) / (4.0 * arc.bulge);
            assert!((radius - 10.0).abs() < 0.1, "{radius}");
        }
    }
}
