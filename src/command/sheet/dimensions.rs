//! Dimensions from a datum: a line from each finger to the border of the drawing, with its distance there.

use super::labels::spread;
use super::paper::Paper;
use crate::search::Grasp;
use nalgebra::Point2;
use std::fmt::{Result as Written, Write};

/// Width of a character of a dimension, mm on paper: digits of the usual faces are 0.556 of the size wide.
const CHARACTER: f64 = 1.45;
/// Least distance between two dimensions, mm on paper.
const APART: f64 = 3.3;
/// From the drawing to where the lines of dimensions begin to lean, and from there to the text.
const STUB: f64 = 2.5;
const LEAN: f64 = 4.0;

/// The two directions dimensions are given in.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Axis {
    /// Along x, written below the drawing.
    X,
    /// Along y, written on its left.
    Y,
}

impl Axis {
    fn word(self) -> &'static str {
        match self {
            Self::X => "x",
            Self::Y => "y",
        }
    }

    /// Coordinate of a point.
    pub(super) fn of(self, p: Point2<f64>) -> f64 {
        match self {
            Self::X => p.x,
            Self::Y => p.y,
        }
    }
}

/// One distance from the datum.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Ordinate {
    /// Point from which the line is drawn, in the part's frame.
    from: Point2<f64>,
    /// Distance from the datum, mm.
    mm: f64,
    /// Whose distance it is; the outline's own ends have no name.
    who: Vec<String>,
}

impl Ordinate {
    fn text(&self, decimals: usize) -> String {
        // Rounded first, so that a small negative number is not shown as minus nought.
        let shift = 10_f64.powi(decimals as i32);
        let value = format!("{:.decimals$}", (self.mm * shift).round() / shift + 0.0);
        if self.who.is_empty() { value } else { format!("{}: {value}", self.who.join(", ")) }
    }
}

/// Every distance along an axis from a datum, rising; those that are the same have one line.
pub(super) fn ordinates(
    axis: Axis,
    datum: Point2<f64>,
    bounds: (Point2<f64>, Point2<f64>),
    grasp: Option<&Grasp>,
) -> Vec<Ordinate> {
    let mut all: Vec<Ordinate> = Vec::new();
    // Equal to a billionth of the part: what two fingers on one line differ by after a file in decimal.
    let same = 1e-9 * (bounds.1 - bounds.0).norm();
    let mut add = |from: Point2<f64>, who: Option<String>| {
        let mm = axis.of(from) - axis.of(datum);
        match all.iter_mut().find(|other| (other.mm - mm).abs() <= same) {
            Some(other) => other.who.extend(who),
            None => all.push(Ordinate { from, mm, who: who.into_iter().collect() }),
        }
    };
    add(datum, Some("D".to_owned()));
    if let Some(grasp) = grasp {
        for (finger, contact) in grasp.contacts.iter().enumerate() {
            add(contact.point, Some((finger + 1).to_string()));
        }
        if let Some(Ok(jaws)) = &grasp.jaws {
            add(jaws.centre, Some("J".to_owned()));
        }
    }
    // From the near sides, so that no line crosses the part.
    add(bounds.0, None);
    add(if axis == Axis::X { Point2::new(bounds.1.x, bounds.0.y) } else { Point2::new(bounds.0.x, bounds.1.y) }, None);
    all.sort_by(|a, b| a.mm.total_cmp(&b.mm));
    all
}

/// Paper that dimensions along an axis take beside the drawing, mm: across, and the least along.
pub(super) fn room(all: &[Ordinate], decimals: usize) -> (f64, f64) {
    let longest = all.iter().map(|own| own.text(decimals).chars().count()).max().unwrap_or(0);
    (STUB + LEAN + 1.5 + CHARACTER * longest as f64, APART * all.len() as f64)
}

/// Draws dimensions beside a box of the paper, given by its corners.
pub(super) fn draw(
    svg: &mut String,
    axis: Axis,
    all: &[Ordinate],
    paper: &Paper,
    border: (Point2<f64>, Point2<f64>),
    decimals: usize,
) -> Written {
    let (low, high) = border;
    // On paper y runs down, so the rising row of y starts at the bottom.
    let sign = if axis == Axis::X { 1.0 } else { -1.0 };
    let places: Vec<f64> = all.iter().map(|own| sign * axis.of(paper.at(own.from))).collect();
    let (a, b) = (sign * axis.of(low), sign * axis.of(high));
    let ends = (a.min(b) - 4.0, a.max(b) + 4.0);
    for (own, place) in all.iter().zip(spread(&places, APART, ends)) {
        let (from, place) = (paper.at(own.from), sign * place);
        let text = own.text(decimals);
        let (path, at, turn) = match axis {
            Axis::X => {
                let base = high.y + STUB;
                let path = format!("M{:.3} {:.3}V{base:.3}L{place:.3} {:.3}", from.x, from.y + 1.0, base + LEAN);
                (path, (place + 0.9, base + LEAN + 0.7), " transform=\"rotate(-90 ")
            }
            Axis::Y => {
                let base = low.x - STUB;
                let path = format!("M{:.3} {:.3}H{base:.3}L{:.3} {place:.3}", from.x - 1.0, from.y, base - LEAN);
                (path, (base - LEAN - 0.7, place + 0.9), "")
            }
        };
        let turned = if turn.is_empty() { String::new() } else { format!("{turn}{:.3} {:.3})\"", at.0, at.1) };
        writeln!(svg, "<path class=\"reach\" d=\"{path}\"/>")?;
        writeln!(
            svg,
            "<text class=\"ordinate\" data-axis=\"{}\" data-who=\"{}\" data-mm=\"{:?}\" text-anchor=\"end\" \
             x=\"{:.3}\" y=\"{:.3}\"{turned}>{text}</text>",
            axis.word(),
            own.who.join(" "),
            own.mm + 0.0,
            at.0,
            at.1
        )?;
    }
    Ok(())
}
