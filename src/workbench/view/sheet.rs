//! A sheet of character cells to draw on, and the fit of millimetres onto it at true proportion.

use nalgebra::{Point2, Vector2};
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;
use ratatui::style::Style;

/// What lies above what; more covers less.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Depth {
    Empty,
    Cone,
    Edge,
    Centre,
    Finger,
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
