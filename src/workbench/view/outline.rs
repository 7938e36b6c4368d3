//! The outline pane: the part at true proportion, where fingers fit, keep-outs, the centre of mass, the fingers.

use super::super::look::{Look, Marker};
use super::super::picture::Picture;
use super::super::state::State;
use super::sheet::{Depth, Fit, Sheet, slope};
use crate::file::shown;
use crate::hand::{Hand, Stretch, Tip};
use crate::mechanics::Contact;
use crate::part::{Edge, KeepOut};
use crate::search::{Grasp, Scene};
use nalgebra::{Point2, Vector2};
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;
use ratatui::style::Style;

/// Columns and rows left free around the part, for the fingers that stand outside.
const FREE: (u16, u16) = (4, 2);
/// Cosine above which a corner is a bend of a flattened curve and gets no mark of its own (20 degrees).
const BEND: f64 = 0.94;
/// Edges shorter than this many cells, both of a corner, leave it without its mark.
const SHORT: f64 = 1.5;
/// Bodies of fewer rows than these are not drawn: they would be a blot.
const LEAST_BODY: f64 = 1.5;
/// Rows from which the pane carries a line that explains its signs.
const KEY_FROM: u16 = 8;

/// Draws the pane with the fingers at their places.
pub(super) fn render(state: &State, area: Rect, buf: &mut Buffer) {
    let keyed = area.height >= KEY_FROM;
    let picture = Rect { height: area.height - u16::from(keyed), ..area };
    let scene = &state.order.scene;
    let mut pen = Pen::on_part(state, (picture.width, picture.height), FREE);
    let mut signs = pen.part(scene);
    if let Some(reading) = &state.reading {
        if state.cones {
            pen.cones(&reading.grasp, scene);
        }
        pen.fingers(&reading.grasp, &scene.setup().hand);
        signs.pads = reading.grasp.contacts.iter().any(|contact| contact.half_width_mm > 0.0);
    }
    pen.sheet.render(picture, buf);
    if keyed {
        let row = Rect { y: area.bottom() - 1, height: 1, ..area };
        super::put(buf, row, &signs.text(state, usize::from(row.width)), state.look.dim());
    }
}

/// How near the picture is and what is in its middle; nothing for the whole part.
pub(super) fn nearness(state: &State) -> Option<String> {
    let contacts = state.reading.as_ref().map_or(0, |reading| reading.grasp.contacts.len());
    let times = format!("x{:.1}", state.view.zoom());
    match state.view.contact(contacts) {
        Some(contact) => Some(format!("{times} about contact {}", contact + 1)),
        None => (state.view.zoom() > 1.0).then_some(times),
    }
}

/// Which signs the picture uses, so that only those are explained.
#[derive(Default)]
pub(super) struct Signs {
    keep_out: bool,
    unreachable: bool,
    pads: bool,
}

impl Signs {
    /// As many explanations as fit, none cut.
    fn text(&self, state: &State, width: usize) -> String {
        let nearness = nearness(state);
        let mut parts: Vec<&str> = nearness.iter().map(String::as_str).collect();
        if state.reading.is_none() && state.view.picture != Picture::Fingers {
            parts.push("no grasp to show");
        }
        parts.push("@ centre of mass");
        if self.pads {
            parts.push("# pad");
        }
        let reasons = reasons(state);
        let keep_out = format!("x keep-out: {reasons}");
        if self.keep_out {
            parts.push(if reasons.is_empty() || keep_out.len() > width / 2 { "x keep-out" } else { &keep_out });
        }
        if self.unreachable {
            parts.push(if state.look.marker == Marker::Braille {
                "sparse: no finger fits"
            } else {
                ". no finger fits"
            });
        }
        if state.cones {
            parts.push(": cone");
        }
        let mut text = String::new();
        for part in parts {
            let gap = if text.is_empty() { "" } else { "  " };
            if text.len() + gap.len() + part.len() <= width {
                text.push_str(gap);
                text.push_str(part);
            }
        }
        text
    }
}

/// Why fingers are kept out, each reason once.
fn reasons(state: &State) -> String {
    let mut reasons: Vec<String> = Vec::new();
    for keep in state.order.scene.part().keep_outs() {
        let reason = shown(keep.reason.trim());
        if !reason.is_empty() && !reasons.contains(&reason) {
            reasons.push(reason);
        }
    }
    reasons.join(", ")
}

/// Draws in millimetres of the part.
pub(super) struct Pen {
    pub(super) sheet: Sheet,
    pub(super) fit: Fit,
    pub(super) look: Look,
}

impl Pen {
    /// A pen on a sheet of a size that shows the part as near as the user wants it, at most so many columns and rows left
    /// free around the whole.
    pub(super) fn on_part(state: &State, size: (u16, u16), free: (u16, u16)) -> Self {
        let (low, high) = state.order.scene.part().outline().bounds();
        let free = (free.0.min(size.0 / 6), free.1.min(size.1 / 5));
        let fit = Fit::new(low, high, size, free, state.look.aspect);
        let contacts = state.reading.as_ref().map_or(&[][..], |reading| &reading.grasp.contacts);
        let middle = match state.view.contact(contacts.len()) {
            Some(contact) => contacts[contact].point,
            None => nalgebra::center(&low, &high),
        };
        Self { sheet: Sheet::new(size.0, size.1), fit: fit.nearer(state.view.zoom(), middle), look: state.look }
    }

    /// The part: its edges and corners, keep-outs, centre of mass.
    pub(super) fn part(&mut self, scene: &Scene) -> Signs {
        let part = scene.part();
        let outline = part.outline();
        let mut signs = Signs::default();
        let braille = self.look.marker == Marker::Braille;
        let small: Vec<bool> = (0..outline.ring_sizes().len())
            .map(|ring| ring > 0 && !braille && self.is_small(outline.ring(ring)))
            .collect();
        for edge in outline.edges() {
            if small[edge.id().ring] {
                continue;
            }
            let first = scene.stretches().partition_point(|stretch| stretch.edge < edge.id());
            let last = scene.stretches().partition_point(|stretch| stretch.edge <= edge.id());
            let kept_out: Vec<&KeepOut> = part.keep_outs().iter().filter(|keep| keep.edge == edge.id()).collect();
            self.edge(edge, &scene.stretches()[first..last], &kept_out, &mut signs);
        }
        for (ring, small) in small.into_iter().enumerate() {
            let edges = outline.ring(ring);
            if small {
                let fits = scene.stretches().iter().any(|stretch| stretch.edge.ring == ring);
                let kept_out = part.keep_outs().iter().any(|keep| keep.edge.ring == ring);
                self.small_ring(edges, fits, kept_out, &mut signs);
            } else if !braille {
                for (i, edge) in edges.iter().enumerate() {
                    self.corner(&edges[(i + edges.len() - 1) % edges.len()], edge);
                }
            }
        }
        let (column, row) = self.fit.rounded(part.com());
        self.sheet.put(column, row, '@', Depth::Centre, self.look.title());
        signs
    }

    /// Left, top, right and bottom cell of a ring.
    fn box_of(&self, edges: &[Edge]) -> (i32, i32, i32, i32) {
        edges
            .iter()
            .flat_map(|edge| <[_; 2]>::from(edge.bounds()))
            .map(|point| self.fit.rounded(point))
            .fold((i32::MAX, i32::MAX, i32::MIN, i32::MIN), |(left, top, right, bottom), (x, y)| {
                (left.min(x), top.min(y), right.max(x), bottom.max(y))
            })
    }

    /// True for a hole of so few cells that its edges would only be a blot.
    fn is_small(&self, edges: &[Edge]) -> bool {
        let (left, top, right, bottom) = self.box_of(edges);
        right.saturating_sub(left) < 5 && bottom.saturating_sub(top) < 3
    }

    /// A hole of a few cells: its two sides.
    fn small_ring(&mut self, edges: &[Edge], fits: bool, kept_out: bool, signs: &mut Signs) {
        let (left, top, right, bottom) = self.box_of(edges);
        signs.keep_out |= kept_out;
        signs.unreachable |= !fits && !kept_out;
        let (sides, style) = match (kept_out, fits) {
            (true, _) => (['x', 'x'], self.look.keep_out()),
            (false, true) => (['(', ')'], self.look.plain()),
            (false, false) => (['.', '.'], self.look.dim()),
        };
        for row in top..=bottom {
            self.sheet.put(left, row, sides[0], Depth::Edge, style);
            self.sheet.put(right.max(left.saturating_add(1)), row, sides[1], Depth::Edge, style);
        }
    }

    fn edge(&mut self, edge: &Edge, stretches: &[Stretch], kept_out: &[&KeepOut], signs: &mut Signs) {
        if self.is_off(edge) {
            return;
        }
        let braille = self.look.marker == Marker::Braille;
        let (a, b) = (self.fit.cell(edge.start()), self.fit.cell(edge.end()));
        let fine = if braille { (2.0, 4.0) } else { (1.0, 1.0) };
        let steps = self.steps(edge, fine);
        let half = edge.length_mm() / steps / 2.0;
        let line = self.look.marker == Marker::Line;
        for k in 0..=steps as u32 {
            let t = f64::from(k) / steps;
            let along = t * edge.length_mm();
            // A straight edge is walked in cells, so that rounding never leaves one out.
            let (column, row) = match edge.arc() {
                None => (a.0 + t * (b.0 - a.0), a.1 + t * (b.1 - a.1)),
                Some(_) => self.fit.cell(edge.point_at(along)),
            };
            let ink = slope(edge.direction_at(along), line);
            let within = |from: f64, to: f64| along >= from - half && along <= to + half;
            let cell = (column.round() as i32, row.round() as i32);
            if kept_out.iter().any(|keep| within(keep.from_mm, keep.to_mm)) {
                signs.keep_out = true;
                self.sheet.put(cell.0, cell.1, 'x', Depth::Edge, self.look.keep_out());
                continue;
            }
            let free = stretches.iter().any(|stretch| within(stretch.from_mm, stretch.to_mm));
            signs.unreachable |= !free;
            let style = if free { self.look.plain() } else { self.look.dim() };
            if braille {
                if free || k % 4 == 0 {
                    let dot = (((column + 0.5) * 2.0).floor() as i32, ((row + 0.5) * 4.0).floor() as i32);
                    self.sheet.dot(dot.0, dot.1, Depth::Edge, style);
                }
            } else {
                let ink = match (free, line) {
                    (true, _) => ink,
                    (false, false) => '.',
                    (false, true) => '\u{b7}',
                };
                self.sheet.put(cell.0, cell.1, ink, Depth::Edge, style);
            }
        }
    }

    /// No part of an edge lies on the sheet.
    fn is_off(&self, edge: &Edge) -> bool {
        let (low, high) = edge.bounds();
        let ((left, bottom), (right, top)) = (self.fit.cell(low), self.fit.cell(high));
        let (columns, rows) = self.sheet.size();
        right < -1.0 || left > f64::from(columns) || bottom < -1.0 || top > f64::from(rows)
    }

    /// Steps that leave no cell (or dot, where cells are finer) of an edge out.
    fn steps(&self, edge: &Edge, fine: (f64, f64)) -> f64 {
        // Chords of an eighth of a turn are near enough to the arc to count cells along it.
        let ends = edge.chords(edge.length_mm() / 50.0, 64).map(|along| self.fit.cell(edge.point_at(along)));
        let mut from = self.fit.cell(edge.start());
        let mut steps = 0.0;
        for to in ends {
            steps += ((to.0 - from.0).abs() * fine.0).max((to.1 - from.1).abs() * fine.1);
            from = to;
        }
        let bent = if edge.arc().is_some() { 1.3 } else { 1.0 };
        (steps * bent).ceil().clamp(1.0, 65_536.0)
    }

    /// Length of an edge in cells.
    fn cells(&self, edge: &Edge) -> f64 {
        let (a, b) = (self.fit.cell(edge.start()), self.fit.cell(edge.end()));
        (b.0 - a.0).abs().max((b.1 - a.1).abs())
    }

    fn corner(&mut self, before: &Edge, after: &Edge) {
        let (into, out) = (before.direction_at(before.length_mm()), after.direction_at(0.0));
        if into.dot(&out) > BEND {
            return;
        }
        // Corners of something smaller than a few cells would hide its shape.
        if self.cells(before) < SHORT && self.cells(after) < SHORT {
            return;
        }
        let (column, row) = self.fit.rounded(after.start());
        let ink = if self.look.marker == Marker::Line { joint(-into, out) } else { '+' };
        self.sheet.put(column, row, ink, Depth::Edge, self.look.plain());
    }

    /// The body of each finger where it is large enough to be seen, a number in it or outside the part, and a stroke from
    /// there toward the contact along the inward normal.
    pub(super) fn fingers(&mut self, grasp: &Grasp, hand: &Hand) {
        for (finger, contact) in grasp.contacts.iter().enumerate() {
            let middle = self.body(contact, hand);
            self.finger(finger, contact, middle);
        }
    }

    fn finger(&mut self, finger: usize, contact: &Contact, middle: Option<Point2<f64>>) {
        let style = self.look.finger();
        let number = number_sign(finger);
        let (column, row) = self.fit.cell(contact.point);
        let (dx, dy) = self.fit.step(-contact.normal);
        let at = |k: i32| {
            let k = f64::from(k);
            ((column + k * dx).round() as i32, (row + k * dy).round() as i32)
        };
        let level = dx.abs() >= dy.abs();
        self.pad_face(contact, style);
        let own = at(0);
        self.sheet.put(own.0, own.1, 'o', Depth::Finger, style);
        let free = |sheet: &Sheet, k: i32| {
            let (x, y) = at(k);
            sheet.depth(x, y) < Depth::Edge
        };
        // A slanted edge may still lie in the first cell outside.
        let first = if free(&self.sheet, 1) { 1 } else { 2 };
        let wanted = if level { first + 2 } else { first + 1 };
        let run = (first..first + 6).take_while(|&k| free(&self.sheet, k)).last();
        let mut stand = match run {
            Some(last) => wanted.min(last),
            None => 0,
        };
        let inside = middle.map(|middle| self.fit.rounded(middle)).filter(|cell| {
            let (columns, rows) = self.sheet.size();
            *cell != own && (0..columns).contains(&cell.0) && (0..rows).contains(&cell.1)
        });
        match inside {
            // The number stands in the body, the head of the stroke between it and the contact where there is room.
            Some((x, y)) => {
                self.sheet.put(x, y, number, Depth::Finger, style);
                stand = if at(first) == (x, y) { 0 } else { first + 1 };
            }
            None => {
                let (x, y) = at(stand);
                self.sheet.put(x, y, number, Depth::Finger, style);
            }
        }
        for k in first..stand {
            if !free(&self.sheet, k) {
                break;
            }
            let (x, y) = at(k);
            let ink = if k == first { head(contact.normal) } else { slope(contact.normal, false) };
            self.sheet.put(x, y, ink, Depth::Finger, style);
        }
    }

    /// A finger's body at its true size, and its middle; nothing where it is hardly larger than a cell. A pin is a circle,
    /// a pad a rectangle.
    fn body(&mut self, contact: &Contact, hand: &Hand) -> Option<Point2<f64>> {
        let style = self.look.finger();
        let (_, row_mm) = self.fit.cell_mm();
        let out = -contact.normal;
        match hand.tip {
            Tip::Pin => {
                let middle = contact.point + out * hand.pin_radius_mm;
                if 2.0 * hand.pin_radius_mm < LEAST_BODY * row_mm {
                    return None;
                }
                // A circle of a few cells is even all round only about the middle of one.
                let cell = self.fit.rounded(middle);
                let even = if self.look.marker == Marker::Braille { middle } else { self.fit.point(cell.0, cell.1) };
                self.circle(even, hand.pin_radius_mm, None, Depth::Body, style);
                Some(middle)
            }
            Tip::Pad => {
                if hand.pad_depth_mm.min(hand.pad_width_mm) < LEAST_BODY * row_mm {
                    return None;
                }
                let along = Vector2::new(contact.normal.y, -contact.normal.x) * (hand.pad_width_mm / 2.0);
                let back = out * hand.pad_depth_mm;
                let corners = [along, along + back, back - along, -along].map(|off| contact.point + off);
                for pair in corners.windows(2) {
                    self.stroke(pair[0], pair[1], Depth::Body, style);
                }
                Some(contact.point + back / 2.0)
            }
        }
    }

    /// The face of a pad that lies flush, at its true width; nothing for a pin.
    fn pad_face(&mut self, contact: &Contact, style: Style) {
        let tangent = Vector2::new(contact.normal.y, -contact.normal.x);
        let [a, b] = [-1.0, 1.0].map(|side| self.fit.cell(contact.point + tangent * (side * contact.half_width_mm)));
        if contact.half_width_mm <= 0.0 {
            return;
        }
        let steps = (b.0 - a.0).abs().max((b.1 - a.1).abs()).ceil().clamp(1.0, 65_536.0);
        for k in 0..=steps as u32 {
            let t = f64::from(k) / steps;
            let (column, row) = (a.0 + t * (b.0 - a.0), a.1 + t * (b.1 - a.1));
            self.sheet.put(column.round() as i32, row.round() as i32, '#', Depth::Finger, style);
        }
    }

    /// The two sides of each cone, as far as the part's box reaches.
    fn cones(&mut self, grasp: &Grasp, scene: &Scene) {
        let style = self.look.cone();
        let (low, high) = scene.part().outline().bounds();
        let ((left, bottom), (right, top)) = (self.fit.rounded(low), self.fit.rounded(high));
        for contact in &grasp.contacts {
            let tangent = Vector2::new(-contact.normal.y, contact.normal.x);
            let (column, row) = self.fit.cell(contact.point);
            for side in [1.0, -1.0] {
                let (dx, dy) = self.fit.step(contact.normal + tangent * (side * contact.mu));
                for k in 1..=(right - left).max(bottom - top) {
                    let k = f64::from(k);
                    let (x, y) = ((column + k * dx).round() as i32, (row + k * dy).round() as i32);
                    if !(left..=right).contains(&x) || !(top..=bottom).contains(&y) {
                        break;
                    }
                    self.sheet.put(x, y, ':', Depth::Cone, style);
                }
            }
        }
    }
}

/// The sign of a finger, counted from 0.
pub(super) fn number_sign(finger: usize) -> char {
    char::from_digit(finger as u32 + 1, 10).unwrap_or('#')
}

/// Head of a stroke that points along a direction.
pub(super) fn head(direction: Vector2<f64>) -> char {
    if direction.x.abs() >= direction.y.abs() {
        if direction.x > 0.0 { '>' } else { '<' }
    } else if direction.y > 0.0 {
        '^'
    } else {
        'v'
    }
}

/// Line-drawing corner between two directions that leave it; `+` unless both run along the axes.
fn joint(a: Vector2<f64>, b: Vector2<f64>) -> char {
    let level = |v: Vector2<f64>| v.y.abs() < 0.1 * v.x.abs();
    let upright = |v: Vector2<f64>| v.x.abs() < 0.1 * v.y.abs();
    let (across, up) = match (level(a) && upright(b), upright(a) && level(b)) {
        (true, _) => (a.x > 0.0, b.y > 0.0),
        (_, true) => (b.x > 0.0, a.y > 0.0),
        _ => return '+',
    };
    match (across, up) {
        (true, false) => '\u{250c}',
        (false, false) => '\u{2510}',
        (true, true) => '\u{2514}',
        (false, true) => '\u{2518}',
    }
}
