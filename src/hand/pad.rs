//! What stops a flat pad on an edge, in closed form.
//!
//! A pad is a rectangle of width b along the edge and some depth away from the material. On a straight edge it lies
//! flush and slides: in the edge's own frame another edge is in its way exactly where what the strip over the edge holds
//! of that edge comes closer than b/2 along the edge. On an arc it is tangent at one point and turns about the arc's
//! centre as that point moves. Whether another edge is in its way changes only where an end of that edge lies on a side
//! line of the rectangle, a corner of the rectangle on the edge, or a side line is tangent to it; all those positions
//! are in closed form, and between two of them one look decides.

use super::Hand;
use super::crossing::{circle_and_circle, circle_and_line, facing};
use super::stretch::{GRAZE, SHORTEST_MM};
use crate::part::{Arc, Edge};
use nalgebra::{Point2, Vector2};

/// A pad while it runs along an edge.
pub(super) struct Pad<'a> {
    edge: &'a Edge,
    body: Body,
    /// The circle it rolls on, where the edge is an arc.
    round: Option<Arc>,
    /// Half the width that lies on the edge, mm; 0 on an arc, where the pad touches at one point.
    pub(super) half_face_mm: f64,
}

/// The inside of a pad, seen from its contact: `|x| < half`, `low < y < high`, with x along the edge and y away from the
/// material, mm. Smaller than the pad by what it may graze.
#[derive(Clone, Copy)]
struct Body {
    half: f64,
    low: f64,
    high: f64,
}

impl<'a> Pad<'a> {
    /// Nothing on a hollow arc: the corners of the pad would be inside the material.
    pub(super) fn of(edge: &'a Edge, hand: &Hand) -> Option<Self> {
        let round = edge.arc();
        let half = hand.pad_width_mm / 2.0;
        let graze = GRAZE * hand.pad_width_mm.max(hand.pad_depth_mm);
        let body = Body { half: (half - graze).max(0.0), low: graze, high: hand.pad_depth_mm - graze };
        let half_face_mm = if round.is_some() { 0.0 } else { half };
        round.is_none_or(|arc| arc.convex).then_some(Self { edge, body, round, half_face_mm })
    }

    /// Adds the intervals on which the pad meets another edge.
    pub(super) fn block(&self, other: &Edge, blocked: &mut Vec<(f64, f64)>) {
        if !(self.body.low < self.body.high) {
            return;
        }
        match self.round {
            None => {
                let half = self.body.half;
                let view = View::at(self.edge, 0.0);
                self.body.strip(&view, other, |from, to| blocked.push((from - half, to + half)));
            }
            Some(arc) => self.block_round(&arc, other, blocked),
        }
    }

    fn block_round(&self, arc: &Arc, other: &Edge, blocked: &mut Vec<(f64, f64)>) {
        let mut cuts = vec![0.0, self.edge.length_mm()];
        self.critical(arc, other, |direction| cuts.extend(self.edge.along_toward(arc, direction)));
        cuts.sort_by(f64::total_cmp);
        let meets = |along_mm: f64| self.body.meets(&View::at(self.edge, along_mm), other);
        let mut start = 0.0;
        let mut before: Option<(f64, bool)> = None;
        for pair in cuts.windows(2).filter(|pair| pair[0] < pair[1]) {
            let middle = (pair[0] + pair[1]) / 2.0;
            let met = meets(middle);
            if let Some((from, was)) = before
                && was != met
            {
                let turn = turning_point(from, pair[0], middle, |along_mm| meets(along_mm) == met);
                if met {
                    start = turn;
                } else {
                    blocked.push((start, turn));
                }
            }
            before = Some((middle, met));
        }
        if before.is_some_and(|(_, met)| met) {
            blocked.push((start, self.edge.length_mm()));
        }
    }

    /// Emits the directions from the arc's centre to the contact at which another edge may begin or cease to be in the
    /// way.
    fn critical(&self, arc: &Arc, other: &Edge, mut emit: impl FnMut(Vector2<f64>)) {
        let Body { half, low, high } = self.body;
        let across = [-half, half];
        let out = [arc.radius + low, arc.radius + high];
        // A point lies at a distance from a side line: an end of the other edge at 0, its centre at its radius.
        let mut on_sides = |point: Point2<f64>, off: f64| {
            let from = point - arc.centre;
            for (line, side) in across.iter().map(|x| (x, true)).chain(out.iter().map(|y| (y, false))) {
                for level in [line - off, line + off] {
                    for axis in facing(from, level).into_iter().flatten() {
                        // The outward axis is the direction to the contact, the axis along the face is square to it.
                        emit(if side { Vector2::new(axis.y, -axis.x) } else { axis });
                    }
                }
            }
        };
        on_sides(other.start(), 0.0);
        on_sides(other.end(), 0.0);
        let curve = other.arc();
        if let Some(curve) = curve {
            on_sides(curve.centre, curve.radius);
        }
        for (x, y) in [(across[0], out[0]), (across[0], out[1]), (across[1], out[0]), (across[1], out[1])] {
            let reach = x.hypot(y);
            let crossings = match curve {
                Some(curve) => circle_and_circle(arc.centre, reach, curve.centre, curve.radius),
                None => circle_and_line(arc.centre, reach, other.start(), other.direction_at(0.0)),
            };
            for to in crossings.into_iter().flatten() {
                // The direction to the contact is the one to the corner turned back by the corner's own angle.
                emit(Vector2::new(y * to.x + x * to.y, y * to.y - x * to.x));
            }
        }
    }
}

/// Where something that does not hold at `low` comes to hold by `high`: at the position found in closed form, or, where
/// the arc is so flat that its far centre has cost that position its digits, by halving.
fn turning_point(mut low: f64, found: f64, mut high: f64, holds: impl Fn(f64) -> bool) -> f64 {
    if !holds((found - SHORTEST_MM).max(low)) && holds((found + SHORTEST_MM).min(high)) {
        return found;
    }
    while high - low > SHORTEST_MM {
        let middle = (low + high) / 2.0;
        if !(low < middle && middle < high) {
            break;
        }
        if holds(middle) {
            high = middle;
        } else {
            low = middle;
        }
    }
    (low + high) / 2.0
}

/// The frame of a pad: its contact, the direction along the face, the direction away from the material.
struct View {
    contact: Point2<f64>,
    along: Vector2<f64>,
    away: Vector2<f64>,
}

impl View {
    fn at(edge: &Edge, along_mm: f64) -> Self {
        let (contact, away) = (edge.point_at(along_mm), -edge.normal_at(along_mm));
        Self { contact, along: edge.direction_at(along_mm), away }
    }

    fn of(&self, point: Point2<f64>) -> Vector2<f64> {
        let from = point - self.contact;
        Vector2::new(from.dot(&self.along), from.dot(&self.away))
    }

    /// Where an edge crosses a height, by one step of Newton's method from a position that the far centre of a flat arc
    /// may have cost some digits; that position where the step does not lead nearer.
    fn sharpened(&self, edge: &Edge, along_mm: f64, y: f64) -> f64 {
        let off = |along_mm: f64| self.of(edge.point_at(along_mm)).y - y;
        let next = along_mm - off(along_mm) / edge.direction_at(along_mm).dot(&self.away);
        let nearer = (0.0..=edge.length_mm()).contains(&next) && off(next).abs() < off(along_mm).abs();
        if nearer { next } else { along_mm }
    }
}

impl Body {
    fn meets(&self, view: &View, other: &Edge) -> bool {
        let mut met = false;
        self.strip(view, other, |from, to| met |= from < self.half && to > -self.half);
        met
    }

    /// Emits, piece by piece, from where to where along x another edge is within `low < y < high`.
    fn strip(&self, view: &View, other: &Edge, mut emit: impl FnMut(f64, f64)) {
        let Some(arc) = other.arc() else {
            let (p, q) = (view.of(other.start()), view.of(other.end()));
            // Shares of the way at which the line enters and leaves. Along the strip they are infinite, of unlike sign
            // inside it and of like sign outside, or, on its border, one is no number and gives way to the other.
            let (a, b) = ((self.low - p.y) / (q.y - p.y), (self.high - p.y) / (q.y - p.y));
            let (enter, leave) = (a.min(b).max(0.0), a.max(b).min(1.0));
            if enter < leave {
                let (from, to) = (p.lerp(&q, enter).x, p.lerp(&q, leave).x);
                emit(from.min(to), from.max(to));
            }
            return;
        };
        // Pieces on which neither x turns back nor the border is crossed.
        let mut cuts = vec![0.0, other.length_mm()];
        for direction in [view.along, -view.along] {
            cuts.extend(other.along_toward(&arc, direction));
        }
        for y in [self.low, self.high] {
            let border = view.contact + view.away * y;
            let crossings = circle_and_line(arc.centre, arc.radius, border, view.along).into_iter().flatten();
            let along = crossings.filter_map(|direction| other.along_toward(&arc, direction));
            cuts.extend(along.map(|along_mm| view.sharpened(other, along_mm, y)));
        }
        cuts.sort_by(f64::total_cmp);
        for pair in cuts.windows(2) {
            let y = view.of(other.point_at((pair[0] + pair[1]) / 2.0)).y;
            if pair[0] < pair[1] && self.low < y && y < self.high {
                let (from, to) = (view.of(other.point_at(pair[0])).x, view.of(other.point_at(pair[1])).x);
                emit(from.min(to), from.max(to));
            }
        }
    }
}
