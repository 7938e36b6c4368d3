//! Basic shapes as paths (SVG 2, section 10).

use super::super::curve::Ellipse;
use super::super::sheet::Segment;
use super::path::{Subpath, subpaths};
use super::viewport::user_length;
use kurbo::{Point, Vec2};
use roxmltree::Node;
use std::f64::consts::{FRAC_PI_2, TAU};
use std::str::FromStr;
use svgtypes::{Length, PointsParser};

/// Kinds of elements that draw lines.
pub(super) const SHAPES: [&str; 7] = ["path", "rect", "circle", "ellipse", "line", "polyline", "polygon"];

/// The subpaths of a shape; none where it draws nothing.
///
/// # Errors
/// What is wrong with it.
pub(super) fn shape(node: &Node<'_, '_>) -> Result<Vec<Subpath>, String> {
    let length = |name: &str| length(node, name);
    match node.tag_name().name() {
        "path" => subpaths(node.attribute("d").unwrap_or_default()),
        "rect" => rect(node),
        "circle" => {
            let centre = Point::new(length("cx")?.unwrap_or(0.0), length("cy")?.unwrap_or(0.0));
            let radius = length("r")?.unwrap_or(0.0);
            round(centre, radius, radius)
        }
        "ellipse" => {
            let centre = Point::new(length("cx")?.unwrap_or(0.0), length("cy")?.unwrap_or(0.0));
            let (rx, ry) = radii(node)?;
            round(centre, rx.unwrap_or(0.0), ry.unwrap_or(0.0))
        }
        "line" => {
            let at = |x: &str, y: &str| -> Result<Point, String> {
                Ok(Point::new(length(x)?.unwrap_or(0.0), length(y)?.unwrap_or(0.0)))
            };
            let (start, end) = (at("x1", "y1")?, at("x2", "y2")?);
            Ok(vec![Subpath { start, segments: vec![Segment::Line(end)], closed: false }])
        }
        "polyline" => points(node, false),
        _ => points(node, true),
    }
}

/// A length attribute in user units.
pub(super) fn length(node: &Node<'_, '_>, name: &str) -> Result<Option<f64>, String> {
    let Some(text) = node.attribute(name) else { return Ok(None) };
    let parsed = Length::from_str(text.trim()).map_err(|_| format!("its {name} is no length"))?;
    user_length(parsed)
        .map(Some)
        .ok_or_else(|| format!("its {name} depends on a font or on what is around; give a plain number"))
}

/// rx and ry; one that is lacking or "auto" is like the other.
fn radii(node: &Node<'_, '_>) -> Result<(Option<f64>, Option<f64>), String> {
    let radius = |name: &str| if node.attribute(name) == Some("auto") { Ok(None) } else { length(node, name) };
    let (rx, ry) = (radius("rx")?, radius("ry")?);
    Ok((rx.or(ry), ry.or(rx)))
}

fn round(centre: Point, rx: f64, ry: f64) -> Result<Vec<Subpath>, String> {
    if rx < 0.0 || ry < 0.0 {
        return Err("a radius is below 0".to_owned());
    }
    if rx == 0.0 || ry == 0.0 {
        return Ok(Vec::new());
    }
    let ellipse = Ellipse { centre, u: Vec2::new(rx, 0.0), v: Vec2::new(0.0, ry), from: 0.0, to: TAU };
    let start = ellipse.point(0.0);
    Ok(vec![Subpath { start, segments: vec![Segment::Ellipse(ellipse, start)], closed: true }])
}

fn rect(node: &Node<'_, '_>) -> Result<Vec<Subpath>, String> {
    let side = |name: &str| -> Result<f64, String> { Ok(length(node, name)?.unwrap_or(0.0)) };
    let (x, y, width, height) = (side("x")?, side("y")?, side("width")?, side("height")?);
    if width < 0.0 || height < 0.0 {
        return Err("its width or height is below 0".to_owned());
    }
    if width == 0.0 || height == 0.0 {
        return Ok(Vec::new());
    }
    let (rx, ry) = radii(node)?;
    let (rx, ry) = (rx.unwrap_or(0.0), ry.unwrap_or(0.0));
    if rx < 0.0 || ry < 0.0 {
        return Err("a corner radius is below 0".to_owned());
    }
    let (rx, ry) = (rx.min(width / 2.0), ry.min(height / 2.0));
    let (right, bottom) = (x + width, y + height);
    let mut segments = Vec::with_capacity(8);
    if rx == 0.0 || ry == 0.0 {
        segments.extend([(right, y), (right, bottom), (x, bottom)].map(|(x, y)| Segment::Line(Point::new(x, y))));
        return Ok(vec![Subpath { start: Point::new(x, y), segments, closed: true }]);
    }
    // Side and corner, four times; y runs down, so the angle grows clockwise on the screen.
    let corners = [
        ((right - rx, y), (right - rx, y + ry), (right, y + ry), -FRAC_PI_2),
        ((right, bottom - ry), (right - rx, bottom - ry), (right - rx, bottom), 0.0),
        ((x + rx, bottom), (x + rx, bottom - ry), (x, bottom - ry), FRAC_PI_2),
        ((x, y + ry), (x + rx, y + ry), (x + rx, y), 2.0 * FRAC_PI_2),
    ];
    for (side_end, centre, corner_end, from) in corners {
        let centre = Point::new(centre.0, centre.1);
        let ellipse = Ellipse { centre, u: Vec2::new(rx, 0.0), v: Vec2::new(0.0, ry), from, to: from + FRAC_PI_2 };
        segments.push(Segment::Line(Point::new(side_end.0, side_end.1)));
        segments.push(Segment::Ellipse(ellipse, Point::new(corner_end.0, corner_end.1)));
    }
    Ok(vec![Subpath { start: Point::new(x + rx, y), segments, closed: true }])
}

fn points(node: &Node<'_, '_>, closed: bool) -> Result<Vec<Subpath>, String> {
    let text = node.attribute("points").unwrap_or_default();
    let mut points = PointsParser::from(text).map(|(x, y)| Point::new(x, y));
    let Some(start) = points.next() else {
        return if text.trim().is_empty() { Ok(Vec::new()) } else { Err(not_points()) };
    };
    let segments: Vec<Segment> = points.map(Segment::Line).collect();
    // The parser stops without a word at what is no number; the numbers are counted against it.
    let numbers = text.split(|c: char| c.is_ascii_whitespace() || c == ',').filter(|word| !word.is_empty()).count();
    if numbers > 2 * (segments.len() + 1) {
        return Err(not_points());
    }
    Ok(vec![Subpath { start, segments, closed }])
}

fn not_points() -> String {
    "its points are not pairs of numbers".to_owned()
}
