//! A sheet of character cells to draw on, and the fit of millimetres onto it at true proportion.

use nalgebra::{Point2, Vector2};
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;
use ratatui::style::Style;

/// What lies above what; more covers less.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Depth {
    Empty,
    /// What fills a region.
    Fill,
    Cone,
    /// The body of a finger beside the part.
    Body,
    Edge,
    /// A curve over the outline.
    Curve,
    Centre,
    Finger,
}

/// What a stroke is drawn with.
#[derive(Debug, Clone, Copy)]
pub(super) enum Ink {
    /// One character in every cell.
    Sign(char),
    /// Braille dots.
    Dots,
}

#[derive(Clone, Copy)]
struct Cell {
    ink: char,
    /// Braille dots, set instead of `ink`.
    dots: u8,
    depth: Depth,
    style: Style,
}

const BLANK: Cell = Cell { ink: ' ', dots: 0, depth: Depth::Empty, style: Style::new() };

/// A grid of cells; drawing outside it does nothing.
pub(super) struct Sheet {
    width: i32,
    height: i32,
    cells: Vec<Cell>,
}

impl Sheet {
    pub(super) fn new(width: u16, height: u16) -> Self {
        let cells = vec![BLANK; usize::from(width) * usize::from(height)];
        Self { width: i32::from(width), height: i32::from(height), cells }
    }

    fn at(&mut self, column: i32, row: i32) -> Option<&mut Cell> {
        if (0..self.width).contains(&column) && (0..self.height).contains(&row) {
            self.cells.get_mut((row * self.width + column) as usize)
        } else {
            None
        }
    }

    /// What lies in a cell; outside the sheet it counts as taken.
    pub(super) fn depth(&self, column: i32, row: i32) -> Depth {
        let held = (0..self.width).contains(&column) && (0..self.height).contains(&row);
        if held { self.cells[(row * self.width + column) as usize].depth } else { Depth::Finger }
    }

    /// Draws a character unless something above it is there already.
    pub(super) fn put(&mut self, column: i32, row: i32, ink: char, depth: Depth, style: Style) {
        if let Some(cell) = self.at(column, row)
            && cell.depth <= depth
        {
            *cell = Cell { ink, dots: 0, depth, style };
        }
    }

    /// Writes characters side by side.
    pub(super) fn write(&mut self, column: i32, row: i32, text: &str, depth: Depth, style: Style) {
        for (ink, k) in text.chars().zip(0..) {
            self.put(column.saturating_add(k), row, ink, depth, style);
        }
    }

    /// Draws a straight stroke between two places in cells, as far as it lies on the sheet.
    pub(super) fn stroke(&mut self, from: (f64, f64), to: (f64, f64), ink: Ink, depth: Depth, style: Style) {
        let Some((a, b)) = self.clipped(from, to) else { return };
        let fine = match ink {
            Ink::Sign(_) => (1.0, 1.0),
            Ink::Dots => (2.0, 4.0),
        };
        let steps = ((b.0 - a.0).abs() * fine.0).max((b.1 - a.1).abs() * fine.1).ceil().clamp(1.0, 65_536.0);
        for k in 0..=steps as u32 {
            let t = f64::from(k) / steps;
            let (column, row) = (a.0 + t * (b.0 - a.0), a.1 + t * (b.1 - a.1));
            match ink {
                Ink::Sign(sign) => self.put(column.round() as i32, row.round() as i32, sign, depth, style),
                Ink::Dots => {
                    let (x, y) = ((column + 0.5) * 2.0, (row + 0.5) * 4.0);
                    self.dot(x.floor() as i32, y.floor() as i32, depth, style);
                }
            }
        }
    }

    /// The piece of a stroke that lies on the sheet or a cell beside it (Liang & Barsky 1984).
    fn clipped(&self, from: (f64, f64), to: (f64, f64)) -> Option<((f64, f64), (f64, f64))> {
        let (dx, dy) = (to.0 - from.0, to.1 - from.1);
        if !(dx.is_finite() && dy.is_finite()) {
            return None;
        }
        let (right, bottom) = (f64::from(self.width), f64::from(self.height));
        let (mut enters, mut leaves) = (0.0_f64, 1.0_f64);
        for (step, room) in [(-dx, from.0 + 1.0), (dx, right - from.0), (-dy, from.1 + 1.0), (dy, bottom - from.1)] {
            if step < 0.0 {
                enters = enters.max(room / step);
            } else if step > 0.0 {
                leaves = leaves.min(room / step);
            } else if room < 0.0 {
                return None;
            }
        }
        let at = |t: f64| (from.0 + t * dx, from.1 + t * dy);
        (enters <= leaves).then(|| (at(enters), at(leaves)))
    }

    /// Columns and rows.
    pub(super) fn size(&self) -> (i32, i32) {
        (self.width, self.height)
    }

    /// Sets a braille dot; dots are counted two to a column and four to a row.
    pub(super) fn dot(&mut self, x: i32, y: i32, depth: Depth, style: Style) {
        // Unicode's braille block numbers the dots down the left column, down the right one, then the bottom pair.
        const BITS: [[u8; 2]; 4] = [[0x01, 0x08], [0x02, 0x10], [0x04, 0x20], [0x40, 0x80]];
        let bit = BITS[y.rem_euclid(4) as usize][x.rem_euclid(2) as usize];
        if let Some(cell) = self.at(x.div_euclid(2), y.div_euclid(4))
            && cell.depth <= depth
        {
            if cell.depth < depth || cell.dots == 0 {
                *cell = Cell { ink: ' ', dots: 0, depth, style };
            }
            cell.dots |= bit;
        }
    }

    pub(super) fn render(&self, area: Rect, buf: &mut Buffer) {
        let area = area.intersection(buf.area);
        for row in 0..self.height.min(i32::from(area.height)) {
            for column in 0..self.width.min(i32::from(area.width)) {
                let cell = self.cells[(row * self.width + column) as usize];
                if cell.depth == Depth::Empty {
                    continue;
                }
                let ink = match cell.dots {
                    0 => cell.ink,
                    dots => char::from_u32(0x2800 + u32::from(dots)).unwrap_or('.'),
                };
                buf[(area.x + column as u16, area.y + row as u16)].set_char(ink).set_style(cell.style);
            }
        }
    }
}

/// Where a point of the part lies on the sheet. Cells are `aspect` times as high as wide, so right angles stay right.
#[derive(Clone, Copy)]
pub(super) struct Fit {
    /// Millimetres to a column.
    mm: f64,
    aspect: f64,
    middle: Point2<f64>,
    centre: (f64, f64),
}

impl Fit {
    /// Fits a box of the part into a sheet, leaving columns and rows free around it.
    pub(super) fn new(low: Point2<f64>, high: Point2<f64>, size: (u16, u16), free: (u16, u16), aspect: f64) -> Self {
        let room = |cells: u16, free: u16| f64::from(cells.saturating_sub(2 * free).saturating_sub(1).max(1));
        let across = (high.x - low.x) / room(size.0, free.0);
        let down = (high.y - low.y) / (aspect * room(size.1, free.1));
        let mm = across.max(down).max(f64::MIN_POSITIVE);
        let centre = (f64::from(size.0.saturating_sub(1)) / 2.0, f64::from(size.1.saturating_sub(1)) / 2.0);
        Self { mm, aspect, middle: nalgebra::center(&low, &high), centre }
    }

    /// The same so many times nearer, another point in the middle.
    #[must_use]
    pub(super) fn nearer(self, times: f64, middle: Point2<f64>) -> Self {
        Self { mm: self.mm / times, middle, ..self }
    }

    /// A fit of another plane, of which `unit` is a millimetre, the origin on the cell of a point of this one.
    pub(super) fn about(&self, point: Point2<f64>, unit: f64) -> Self {
        Self { mm: self.mm * unit, aspect: self.aspect, middle: Point2::origin(), centre: self.cell(point) }
    }

    /// Millimetres to a column and to a row.
    pub(super) fn cell_mm(&self) -> (f64, f64) {
        (self.mm, self.mm * self.aspect)
    }

    /// The point in the middle of a cell.
    pub(super) fn point(&self, column: i32, row: i32) -> Point2<f64> {
        let (x, y) = (f64::from(column) - self.centre.0, self.centre.1 - f64::from(row));
        self.middle + Vector2::new(x * self.mm, y * self.mm * self.aspect)
    }

    /// Column and row, with fractions; whole numbers are the middles of cells.
    pub(super) fn cell(&self, p: Point2<f64>) -> (f64, f64) {
        let off = p - self.middle;
        (self.centre.0 + off.x / self.mm, self.centre.1 - off.y / (self.mm * self.aspect))
    }

    /// The cell a point falls into.
    pub(super) fn rounded(&self, p: Point2<f64>) -> (i32, i32) {
        let (column, row) = self.cell(p);
        // `as` saturates, so that a point far off cannot wrap around.
        (column.round() as i32, row.round() as i32)
    }

    /// A direction of the part as a step of at most one cell.
    pub(super) fn step(&self, direction: Vector2<f64>) -> (f64, f64) {
        let (x, y) = (direction.x, -direction.y / self.aspect);
        let longest = x.abs().max(y.abs()).max(f64::MIN_POSITIVE);
        (x / longest, y / longest)
    }
}

/// The character that runs most nearly in a direction of the part.
pub(super) fn slope(direction: Vector2<f64>, line: bool) -> char {
    let (x, y) = (direction.x.abs(), direction.y.abs());
    // tan 22.5 degrees: halfway between a level and a slanted character.
    const HALF: f64 = 0.414;
    if y <= x * HALF {
        if line { '\u{2500}' } else { '-' }
    } else if x <= y * HALF {
        if line { '\u{2502}' } else { '|' }
    } else if (direction.x > 0.0) == (direction.y > 0.0) {
        if line { '\u{2571}' } else { '/' }
    } else if line {
        '\u{2572}'
    } else {
        '\\'
    }
}
