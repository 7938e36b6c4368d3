//! The wrench set from one side: its hull, and the largest ball about no load.

use super::super::super::action::{Action, key_of};
use super::super::super::picture::Side;
use super::super::super::state::{Reading, State};
use super::super::number;
use super::super::outline::number_sign;
use super::super::reading::escape_words;
use super::super::sheet::Depth;
use super::strokes::on_plane;
use super::{Paper, Shown};
use crate::mechanics::quality::Weakest;
use crate::mechanics::wrench::cross;
use nalgebra::{Point2, Vector3};

/// Two directions of the wrench space: to the right and up.
type Axes = [Vector3<f64>; 2];

pub(super) fn picture<'a>(state: &'a State, reading: &'a Reading) -> Shown<'a> {
    let scene = &state.order.scene;
    let wrenches = scene.wrenches(&reading.grasp);
    let assessment = &reading.assessment;
    let weakest = assessment.weakest;
    let (axes, words) = axes(state.view.side, weakest);
    let scale = number::mm(scene.frame().scale_mm);
    let next = format!("{} next side", key_of(Action::NextSide));
    let mut told = vec![vec![words.to_owned()]];
    match weakest {
        Some(weakest) => {
            let quality = number::quality(assessment.quality);
            told.push(vec![format!("* radius = quality = {quality}"), format!("arrow {}", weakest_words(&weakest))]);
        }
        None => {
            let mut open = vec![format!("{}: no ball about + lies inside", assessment.verdict.word())];
            open.extend(assessment.escape.as_ref().map(|escape| escape_words(escape, scene.part())));
            told.push(open);
        }
    }
    told.push(vec![next, "of 1 N in all".to_owned(), format!("torque over {scale} mm")]);
    let seen = move |w: &Vector3<f64>| Point2::new(axes[0].dot(w), axes[1].dot(w));
    let zoom = state.view.zoom();
    let quality = assessment.quality;
    let paint = move |paper: Paper| {
        let points: Vec<Point2<f64>> = wrenches.generators().iter().map(seen).collect();
        let (mut low, mut high) = (Point2::new(-quality, -quality), Point2::new(quality, quality));
        for point in &points {
            (low, high) = (low.inf(point), high.sup(point));
        }
        let mut pen = on_plane(paper, low, high);
        if zoom > 1.0 {
            pen.fit = pen.fit.nearer(zoom, Point2::origin());
        }
        let look = pen.look;
        let hull = hull(&points);
        for (i, a) in hull.iter().enumerate() {
            pen.stroke(*a, hull[(i + 1) % hull.len()], Depth::Edge, look.plain());
        }
        if let Some(weakest) = weakest {
            pen.circle(Point2::origin(), quality, Some('*'), Depth::Curve, look.cone());
            pen.arrow(Point2::origin(), seen(&(weakest.direction * quality)), Depth::Centre, look.bad());
        }
        for (point, finger) in points.iter().zip(wrenches.fingers()) {
            pen.sign(*point, number_sign(*finger), Depth::Finger, look.finger());
        }
        pen.sign(Point2::origin(), '+', Depth::Finger, look.title());
        pen.scale_bar("N");
        pen.sheet
    };
    Shown { told, paint: Box::new(paint) }
}

/// The axes of a side, and what they are.
fn axes(side: Side, weakest: Option<Weakest>) -> (Axes, &'static str) {
    match (side, weakest) {
        (Side::TorqueOverX, _) => ([Vector3::x(), Vector3::z()], "force x right, torque up"),
        (Side::TorqueOverY, _) => ([Vector3::y(), Vector3::z()], "force y right, torque up"),
        (Side::Weakest, Some(weakest)) => {
            let right = weakest.direction;
            let across = |up: Vector3<f64>| (up - right * up.dot(&right)).try_normalize(1e-6);
            let up = across(Vector3::z()).or_else(|| across(Vector3::y())).unwrap_or_else(Vector3::y);
            ([right, up], "weakest direction right")
        }
        (Side::Weakest, None) => ([Vector3::x(), Vector3::y()], "no weakest; force x right, y up"),
        (Side::Forces, _) => ([Vector3::x(), Vector3::y()], "force x right, y up"),
    }
}

fn weakest_words(weakest: &Weakest) -> String {
    let force = weakest.force_deg().map(|deg| format!("weakest toward {} deg", number::degrees(deg)));
    let turn = if weakest.torque() > 0.0 { "ccw" } else { "cw" };
    let torque = (weakest.torque().abs() >= 0.005).then(|| format!("turning {turn} {:.2}", weakest.torque().abs()));
    [force, torque].into_iter().flatten().collect::<Vec<_>>().join(", ")
}

/// Corners of the hull of points, counter-clockwise (Andrew 1979). Points that miss a side by rounding may stay.
fn hull(points: &[Point2<f64>]) -> Vec<Point2<f64>> {
    let mut sorted = points.to_vec();
    sorted.sort_by(|a, b| a.x.total_cmp(&b.x).then(a.y.total_cmp(&b.y)));
    let mut hull: Vec<Point2<f64>> = Vec::with_capacity(2 * sorted.len());
    let forward = sorted.iter();
    let back = sorted.iter().rev().skip(1);
    let mut least = 1;
    for (number, point) in forward.chain(back).enumerate() {
        if number == sorted.len() {
            least = hull.len();
        }
        while hull.len() > least
            && cross(hull[hull.len() - 1] - hull[hull.len() - 2], point - hull[hull.len() - 1]) <= 0.0
        {
            hull.pop();
        }
        hull.push(*point);
    }
    hull.pop();
    hull
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Elementary geometry: what lies inside or on a side of a square is no corner of it.
    #[test]
    fn the_hull_has_the_corners_alone() {
        let points = [[0.0, 0.0], [1.0, 0.5], [2.0, 0.0], [2.0, 2.0], [1.0, 1.0], [0.0, 2.0], [1.0, 2.0], [0.0, 0.0]];
        let hull = hull(&points.map(Point2::from));
        assert_eq!(hull, [[0.0, 0.0], [2.0, 0.0], [2.0, 2.0], [0.0, 2.0]].map(Point2::from));
    }

    #[test]
    fn the_hull_of_few_points_is_no_surprise() {
        assert!(super::hull(&[]).is_empty());
        for points in [
            vec![[1.0, 1.0]],
            vec![[1.0, 1.0]; 3],
            vec![[0.0, 0.0], [1.0, 0.0]],
            vec![[0.0, 0.0], [1.0, 0.0], [2.0, 0.0]],
        ] {
            assert!(super::hull(&points.into_iter().map(Point2::from).collect::<Vec<_>>()).len() <= 2);
        }
    }
}
