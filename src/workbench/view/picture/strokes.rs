//! What the pictures are drawn with, in millimetres of the part or the units of another plane.

use super::super::super::look::Marker;
use super::super::outline::{Pen, head};
use super::super::sheet::{Depth, Fit, Ink, Sheet, slope};
use nalgebra::{Point2, Rotation2, Vector2};
use ratatui::style::Style;

/// Circles of a smaller radius, in columns, are set cell by cell.
const SMALL: f64 = 4.0;

impl Pen {
    /// A straight stroke by the marker: signs of its slope, or dots.
    pub(in super::super) fn stroke(&mut self, a: Point2<f64>, b: Point2<f64>, depth: Depth, style: Style) {
        let ink = match self.look.marker {
            Marker::Braille => Ink::Dots,
            marker => Ink::Sign(slope(b - a, marker == Marker::Line)),
        };
        self.sheet.stroke(self.fit.cell(a), self.fit.cell(b), ink, depth, style);
    }

    /// A circle: by the marker, or of one sign.
    pub(in super::super) fn circle(
        &mut self,
        middle: Point2<f64>,
        radius: f64,
        sign: Option<char>,
        depth: Depth,
        style: Style,
    ) {
        let cell_mm = self.fit.cell_mm();
        let braille = self.look.marker == Marker::Braille;
        if !braille && radius < SMALL * cell_mm.0 {
            return self.small_circle(
                self.fit.rounded(middle),
                (radius / cell_mm.0, radius / cell_mm.1),
                sign,
                depth,
                style,
            );
        }
        // Chords shorter than a cell or a dot.
        let sides = (radius / cell_mm.0 * 16.0).ceil().clamp(32.0, 4096.0);
        let at = |k: f64| middle + Rotation2::new(std::f64::consts::TAU * k / sides) * Vector2::new(radius, 0.0);
        for k in 0..sides as u32 {
            let (a, b) = (at(f64::from(k)), at(f64::from(k) + 1.0));
            match sign {
                Some(sign) if !braille => self.sign(a, sign, depth, style),
                _ => self.stroke(a, b, depth, style),
            }
        }
    }

    /// A circle of a few cells: two sides in each row, closed at the top and at the bottom.
    fn small_circle(
        &mut self,
        (column, row): (i32, i32),
        (across, up): (f64, f64),
        sign: Option<char>,
        depth: Depth,
        style: Style,
    ) {
        let line = self.look.marker == Marker::Line;
        let half = |rows: f64| across * (1.0 - (rows / up).powi(2)).max(0.0).sqrt();
        let last = up.round() as i32;
        let mut put = |x: i32, y: i32| {
            // Upright beside the middle, level above and below it, slanted between.
            let (out_x, out_y) = (f64::from(x) / across, f64::from(-y) / up);
            let ink = sign.unwrap_or_else(|| slope(Vector2::new(-out_y, out_x), line));
            self.sheet.put(column.saturating_add(x), row.saturating_add(y), ink, depth, style);
        };
        for y in -last..=last {
            let rows = f64::from(y.abs());
            if y.abs() == last && last > 0 {
                let most = (half(rows - 0.5).round() as i32 - 1).max(1);
                (-most..=most).for_each(|x| put(x, y));
            } else {
                let side = (half(rows).round() as i32).max(1);
                put(-side, y);
                put(side, y);
            }
        }
    }

    /// A closed curve of one sign, or of dots.
    pub(super) fn curve(&mut self, points: &[Point2<f64>], sign: char, depth: Depth, style: Style) {
        let ink = if self.look.marker == Marker::Braille { Ink::Dots } else { Ink::Sign(sign) };
        for (i, a) in points.iter().enumerate() {
            let b = points[(i + 1) % points.len()];
            self.sheet.stroke(self.fit.cell(*a), self.fit.cell(b), ink, depth, style);
        }
    }

    /// An arrow: its shaft, and its head in the cell where it ends.
    pub(super) fn arrow(&mut self, tail: Point2<f64>, tip: Point2<f64>, depth: Depth, style: Style) {
        let (from, to) = (self.fit.cell(tail), self.fit.cell(tip));
        let long = (to.0 - from.0).abs().max((to.1 - from.1).abs());
        // The shaft ends a cell short of the head, so that none of it lies beside the head.
        if long > 1.0 {
            self.stroke(tail, tip - (tip - tail) / long, depth, style);
        }
        let (column, row) = self.fit.rounded(tip);
        self.sheet.put(column, row, head(tip - tail), Depth::Finger, style);
    }

    /// One sign at a point.
    pub(super) fn sign(&mut self, point: Point2<f64>, sign: char, depth: Depth, style: Style) {
        let (column, row) = self.fit.rounded(point);
        self.sheet.put(column, row, sign, depth, style);
    }

    /// A round length of a scale and its number in the last row of the sheet.
    pub(super) fn scale_bar(&mut self, unit: &str) {
        let (columns, rows) = self.sheet.size();
        let (size, _) = self.fit.cell_mm();
        let Some(length) = round_below(size * f64::from(columns / 4)) else { return };
        let cells = (length / size).round() as i32;
        if columns < 16 || rows < 4 || cells < 2 {
            return;
        }
        let bar = format!("|{}| ", "-".repeat((cells - 1).max(0) as usize));
        let text = format!("{bar}{} {unit}", super::super::number::given(length));
        self.sheet.write(0, rows - 1, &text, Depth::Finger, self.look.dim());
    }
}

/// The largest of 1, 2 and 5 times a power of ten that is not above a value.
fn round_below(value: f64) -> Option<f64> {
    if !(value > 0.0 && value.is_finite()) {
        return None;
    }
    let power = 10f64.powf(value.log10().floor());
    [5.0, 2.0, 1.0].into_iter().map(|step| step * power).find(|round| *round <= value * (1.0 + 1e-9))
}

/// A pen on an empty sheet of a plane of its own, a box of it fitted in.
pub(super) fn on_plane(pen: super::Paper, low: Point2<f64>, high: Point2<f64>) -> Pen {
    let free = (2.min(pen.size.0 / 8), 1.min(pen.size.1 / 6));
    let fit = Fit::new(low, high, pen.size, free, pen.look.aspect);
    Pen { sheet: Sheet::new(pen.size.0, pen.size.1), fit, look: pen.look }
}
