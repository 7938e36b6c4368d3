//! What stops a pin on an edge, in closed form.
//!
//! A pin of radius r that touches edge e at p has its centre at p - r n. While p runs along e the centre runs along a
//! parallel line, or along a concentric circle where e is an arc, and it meets another edge f exactly while it is closer
//! to f than r. The distance changes from above r to below only where the centre's path crosses the curve at distance r
//! from f: two lines or two concentric circles beside it, and a circle round each end. All those crossings are in closed
//! form; between two of them one look decides. Nothing is sampled, so nothing thin is missed.

use super::crossing::{circle_and_circle, circle_and_line};
use super::stretch::GRAZE;
use crate::part::{Arc, Edge};
use nalgebra::{Point2, Vector2};

/// The way of a pin's centre while the pin runs along an edge.
pub(super) struct Path<'a> {
    edge: &'a Edge,
    radius: f64,
    /// The circle the centre runs on, where the edge is an arc: the arc's own, and its radius for the centre.
    round: Option<(Arc, f64)>,
}

impl<'a> Path<'a> {
    /// Nothing for a pin thicker than the hollow it should touch.
    pub(super) fn of(edge: &'a Edge, radius: f64) -> Option<Self> {
        let round = edge.arc().map(|arc| (arc, if arc.convex { arc.radius + radius } else { arc.radius - radius }));
        round.is_none_or(|(_, own)| own > -GRAZE * radius).then_some(Self { edge, radius, round })
    }

    fn centre(&self, along_mm: f64) -> Point2<f64> {
        self.edge.point_at(along_mm) - self.edge.normal_at(along_mm) * self.radius
    }

    /// Adds the intervals on which the pin meets another edge.
    pub(super) fn block(&self, other: &Edge, blocked: &mut Vec<(f64, f64)>) {
        let r = self.radius * (1.0 - GRAZE);
        let length = self.edge.length_mm();
        let mut cuts = vec![0.0, length];
        self.cross_circle(other.start(), r, &mut cuts);
        self.cross_circle(other.end(), r, &mut cuts);
        match other.arc() {
            Some(arc) => {
                self.cross_circle(arc.centre, arc.radius + r, &mut cuts);
                self.cross_circle(arc.centre, arc.radius - r, &mut cuts);
            }
            None => {
                let along = other.direction_at(0.0);
                let beside = Vector2::new(-along.y, along.x) * r;
                self.cross_line(other.start() + beside, along, &mut cuts);
                self.cross_line(other.start() - beside, along, &mut cuts);
            }
        }
        cuts.retain(|cut| (0.0..=length).contains(cut));
        cuts.sort_by(f64::total_cmp);
        for pair in cuts.windows(2) {
            if pair[0] < pair[1] && other.distance_to(self.centre((pair[0] + pair[1]) / 2.0)) < r {
                blocked.push((pair[0], pair[1]));
            }
        }
    }

    /// Adds where the path crosses a circle, as distances along the edge.
    fn cross_circle(&self, centre: Point2<f64>, radius: f64, cuts: &mut Vec<f64>) {
        if radius < 0.0 {
            return;
        }
        match self.round {
            None => {
                let to = centre - self.centre(0.0);
                let direction = self.edge.direction_at(0.0);
                let (middle, off) = (to.dot(&direction), to.perp(&direction));
                let half = (radius - off) * (radius + off);
                if half >= 0.0 {
                    cuts.extend([middle - half.sqrt(), middle + half.sqrt()]);
                }
            }
            Some((arc, own)) => self.cut_toward(&arc, circle_and_circle(arc.centre, own, centre, radius), cuts),
        }
    }

    /// Adds where the path crosses a line.
    fn cross_line(&self, start: Point2<f64>, along: Vector2<f64>, cuts: &mut Vec<f64>) {
        match self.round {
            None => {
                let rate = along.perp(&self.edge.direction_at(0.0));
                let cut = along.perp(&(start - self.centre(0.0))) / rate;
                if cut.is_finite() {
                    cuts.push(cut);
                }
            }
            Some((arc, own)) => self.cut_toward(&arc, circle_and_line(arc.centre, own, start, along), cuts),
        }
    }

    fn cut_toward(&self, arc: &Arc, directions: Option<[Vector2<f64>; 2]>, cuts: &mut Vec<f64>) {
        let directions = directions.into_iter().flatten();
        cuts.extend(directions.filter_map(|direction| self.edge.along_toward(arc, direction)));
    }
}
