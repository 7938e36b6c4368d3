//! What is seen: panels laid out and drawn from the state alone.
//!
//! ```text
//! header      part, knobs, job
//! outline     | table            the outline leaves second
//! reading                        the reading leaves first
//! message
//! footer      keys
//! ```

mod bars;
mod by_hand;
mod compare;
mod dialog;
mod floors;
mod help;
mod holding;
mod loads;
mod number;
mod outline;
mod picture;
mod reading;
mod sheet;
mod start;
mod table;
mod tables;

use super::action;
use super::state::{Layer, Panel, State};
use ratatui::Frame;
use ratatui::buffer::Buffer;
use ratatui::layout::{Position, Rect};
use ratatui::style::Style;
use ratatui::text::Line;

/// Smallest screen on which anything but the size needed is shown.
pub const LEAST: (u16, u16) = (24, 6);
/// Screen from which all panels are shown.
pub const FULL: (u16, u16) = (60, 16);

/// Draws a frame.
pub fn draw(state: &State, frame: &mut Frame) {
    let area = frame.area();
    if let Some(cursor) = render(state, area, frame.buffer_mut()) {
        frame.set_cursor_position(cursor);
    }
}

/// Draws into a buffer; returns where the cursor belongs when text is typed.
pub fn render(state: &State, area: Rect, buf: &mut Buffer) -> Option<Position> {
    let area = area.intersection(buf.area);
    if area.is_empty() {
        return None;
    }
    if area.width < LEAST.0 || area.height < LEAST.1 {
        let text = format!("needs {}x{}, has {}x{}", LEAST.0, LEAST.1, area.width, area.height);
        put(buf, Rect { height: 1, ..area }, &text, state.look.plain());
        return None;
    }
    let layout = Layout::of(area, state.panel, !state.setup().loads.is_empty());
    match state.layers.last() {
        Some(Layer::Help { top }) => page(state, area, "help", &help::lines(state, area.width), *top, buf),
        Some(Layer::Reading { top }) => {
            page(state, area, "reading", &reading::lines(state, area.width, true), *top, buf);
        }
        Some(Layer::Fault { top, title, lines }) => {
            page(state, area, title, &dialog::fault_lines(lines, area.width), *top, buf);
        }
        Some(Layer::Marks { at }) => dialog::marks(state, area, *at, buf),
        Some(Layer::Pairs { at, condition }) => tables::pairs(state, area, *at, *condition, buf),
        Some(Layer::Materials { at }) => tables::materials(state, area, *at, buf),
        Some(Layer::Loads { at }) => loads::list(state, area, *at, buf),
        Some(Layer::Start(page)) => start::render(state, area, page, buf),
        Some(Layer::Floors { at }) => floors::list(state, area, *at, buf),
        Some(Layer::Hand) => bench(state, &layout, buf),
        Some(Layer::Compare { top }) => {
            page(state, area, "beside each other", &compare::lines(state, area.width), *top, buf);
        }
        top @ (None | Some(Layer::Entry(_) | Layer::Ask(_))) => {
            match state.layers.iter().rev().nth(1) {
                Some(Layer::Loads { at }) => loads::list(state, area, *at, buf),
                Some(Layer::Floors { at }) => floors::list(state, area, *at, buf),
                Some(Layer::Marks { at }) => dialog::marks(state, area, *at, buf),
                _ => bench(state, &layout, buf),
            }
            return match top {
                Some(Layer::Entry(entry)) => Some(dialog::entry(state, area, entry, buf)),
                Some(Layer::Ask(question)) => {
                    dialog::ask(state, area, *question, buf);
                    None
                }
                _ => None,
            };
        }
    }
    None
}

/// The line of the help page at which the keys with a grasp in hand begin.
pub(super) fn help_in_hand(state: &State) -> usize {
    help::line_of(state, state.size.0, action::help_parts()[1].0)
}

/// The highest first line a page layer may be scrolled to; 0 when none lies on top.
pub(super) fn last_top(state: &State) -> usize {
    let width = state.size.0;
    let lines = match state.layers.last() {
        Some(Layer::Help { .. }) => help::lines(state, width).len(),
        Some(Layer::Reading { .. }) => reading::lines(state, width, true).len(),
        Some(Layer::Fault { lines, .. }) => dialog::fault_lines(lines, width).len(),
        Some(Layer::Compare { .. }) => compare::lines(state, width).len(),
        _ => 0,
    };
    lines.saturating_sub(usize::from(state.size.1.saturating_sub(2)))
}

/// Where the panels stand.
struct Layout {
    header: Rect,
    outline: Option<Rect>,
    divider: Option<Rect>,
    table: Option<Rect>,
    reading: Option<Rect>,
    message: Option<Rect>,
    footer: Rect,
}

impl Layout {
    /// Panels leave in a fixed order as the screen shrinks: the reading, then the outline, last the table; the panel
    /// brought in by hand takes the place of the one that would leave next.
    fn of(area: Rect, chosen: Panel, loads: bool) -> Self {
        let line = |y: u16| Rect { y, height: 1, ..area };
        let told = area.height >= 10;
        let below = 1 + u16::from(told);
        let body = Rect { y: area.y + 1, height: area.height - 1 - below, ..area };
        let mut layout = Self {
            header: line(area.y),
            outline: None,
            divider: None,
            table: None,
            reading: None,
            message: told.then(|| line(area.bottom() - 2)),
            footer: line(area.bottom() - 1),
        };
        let (wide, high) = (area.width >= FULL.0, area.height >= FULL.1);
        match (wide, high) {
            (true, true) => {
                // What the loads ask takes two lines more.
                let rows = (body.height * 9 / 20).clamp(5, 12) + 2 * u16::from(loads && body.height > 18);
                let (upper, lower) = split_rows(body, body.height - rows);
                layout.reading = Some(lower);
                layout.beside(upper, Panel::Outline, loads);
            }
            (true, false) => {
                let left = if chosen == Panel::Reading { Panel::Reading } else { Panel::Outline };
                layout.beside(body, left, loads);
            }
            (false, true) => {
                let (upper, lower) = split_rows(body, body.height / 2);
                layout.table = Some(lower);
                match chosen {
                    Panel::Reading => layout.reading = Some(upper),
                    Panel::Outline | Panel::Table => layout.outline = Some(upper),
                }
            }
            (false, false) => match chosen {
                Panel::Table => layout.table = Some(body),
                Panel::Outline => layout.outline = Some(body),
                Panel::Reading => layout.reading = Some(body),
            },
        }
        layout
    }

    fn beside(&mut self, area: Rect, left: Panel, loads: bool) {
        // The table needs about forty columns for three fingers, more for what the loads ask; what is more goes to the
        // picture first.
        let (least, most, more) = if loads { (48, 90, 8) } else { (40, 76, 0) };
        let table_width = (area.width * 9 / 20 + more).clamp(least, most).min(area.width / 2 + 8);
        let left_area = Rect { width: area.width - table_width - 1, ..area };
        self.divider = Some(Rect { x: left_area.right(), width: 1, ..area });
        self.table = Some(Rect { x: left_area.right() + 1, width: table_width, ..area });
        match left {
            Panel::Reading => self.reading = Some(left_area),
            Panel::Outline | Panel::Table => self.outline = Some(left_area),
        }
    }
}

fn split_rows(area: Rect, upper: u16) -> (Rect, Rect) {
    let upper = upper.min(area.height);
    (Rect { height: upper, ..area }, Rect { y: area.y + upper, height: area.height - upper, ..area })
}

fn bench(state: &State, layout: &Layout, buf: &mut Buffer) {
    // A low pane is all drawing: its words stand above the reading.
    let words_below = layout.reading.is_some() && layout.outline.is_some_and(picture::is_low);
    bars::header(state, layout.header, buf);
    if let Some(area) = layout.divider {
        for y in area.top()..area.bottom() {
            put(buf, Rect { y, height: 1, ..area }, state.look.divider(), state.look.dim());
        }
    }
    if let Some(area) = layout.outline {
        picture::render(state, area, words_below, buf);
    }
    if let Some(area) = layout.table {
        match state.hand.as_ref().filter(|_| super::by_hand::in_hand(state)) {
            Some(hand) => by_hand::render(state, hand, area, buf),
            None => table::render(state, area, buf),
        }
    }
    if let Some(area) = layout.reading {
        let inside = titled(state, area, "reading", "Enter shows all", buf);
        let mut lines = Vec::new();
        if words_below {
            lines.extend(
                picture::words(state, inside.width).into_iter().map(|line| Line::styled(line, state.look.title())),
            );
        }
        lines.extend(reading::lines(state, inside.width, false));
        show_lines(&lines, 0, inside, buf);
    }
    match layout.message {
        Some(area) => bars::message(state, area, buf),
        None if state.message.is_some() => {
            bars::message(state, layout.footer, buf);
            return;
        }
        None => {}
    }
    bars::footer(state, layout.footer, buf);
}

/// A title on a rule; returns the area below it.
fn titled(state: &State, area: Rect, title: &str, right: &str, buf: &mut Buffer) -> Rect {
    let area = area.intersection(buf.area);
    if area.is_empty() {
        return area;
    }
    let row = Rect { height: 1, ..area };
    put(buf, row, &state.look.rule().repeat(usize::from(area.width)), state.look.dim());
    put(buf, shifted(row, 2), &format!(" {title} "), state.look.title());
    // What does not fit is cut from the right, and left out where nothing of it would be told.
    let room = usize::from(area.width).saturating_sub(title.chars().count() + 8);
    if !right.is_empty() && room >= right.chars().count().min(6) {
        let right = format!(" {} ", bars::cut(right, room));
        let wide = right.chars().count() as u16;
        put(buf, shifted(row, area.width - wide - 2), &right, state.look.dim());
    }
    Rect { y: area.y + 1, height: area.height - 1, ..area }
}

/// A whole screen of text, scrolled.
fn page(state: &State, area: Rect, title: &str, lines: &[Line<'static>], top: usize, buf: &mut Buffer) {
    let (body, footer) = split_rows(area, area.height - 1);
    let height = usize::from(body.height.saturating_sub(1));
    let top = top.min(lines.len().saturating_sub(height));
    let last = (top + height).min(lines.len());
    let place = if lines.len() > height { format!("{}-{} of {}", top + 1, last, lines.len()) } else { String::new() };
    let inside = titled(state, body, title, &place, buf);
    show_lines(lines, top, inside, buf);
    bars::footer(state, footer, buf);
}

fn show_lines(lines: &[Line<'_>], top: usize, area: Rect, buf: &mut Buffer) {
    for (line, y) in lines.iter().skip(top).zip(area.top()..area.bottom()) {
        buf.set_line(area.x, y, line, area.width);
    }
}

fn shifted(area: Rect, by: u16) -> Rect {
    let by = by.min(area.width);
    Rect { x: area.x + by, width: area.width - by, ..area }
}

/// Writes text into the first row of an area and cuts it there.
fn put(buf: &mut Buffer, area: Rect, text: &str, style: Style) {
    let area = area.intersection(buf.area);
    if !area.is_empty() {
        buf.set_stringn(area.x, area.y, text, usize::from(area.width), style);
    }
}

/// Breaks text into lines of at most so many characters, at spaces where there are any.
pub(crate) fn wrapped(text: &str, width: usize) -> Vec<String> {
    let width = width.max(1);
    let mut lines = Vec::new();
    let mut line = String::new();
    let mut length = 0;
    for word in text.split_whitespace() {
        let mut word: Vec<char> = word.chars().collect();
        if length > 0 && length + 1 + word.len() <= width {
            line.push(' ');
            length += 1;
        } else if length > 0 {
            lines.push(std::mem::take(&mut line));
            length = 0;
        }
        while length + word.len() > width {
            let rest = word.split_off(width - length);
            line.extend(word);
            lines.push(std::mem::take(&mut line));
            length = 0;
            word = rest;
        }
        length += word.len();
        line.extend(word);
    }
    if length > 0 || lines.is_empty() {
        lines.push(line);
    }
    lines
}
