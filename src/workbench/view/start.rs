//! The start page.

use super::super::demo;
use super::super::start::StartPage;
use super::super::state::State;
use super::bars::{self, cut};
use super::{put, split_rows, titled, wrapped};
use crate::file::shown;
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

const WHAT: &str = "Says where fingers, jaws or clamps should touch a flat part, how hard they must squeeze and how much friction \
the grip needs. Choose a part.";
const DRAWING: &str = "Your own drawing (DXF or SVG):  holdwright import DRAWING -o PART.toml";
/// The same where there is little room.
const DRAWING_SHORT: &str = "drawings: holdwright import --help";

/// A line of the list.
enum Row {
    Head(&'static str),
    Part { number: usize, name: String, file: String },
}

fn rows(page: &StartPage) -> Vec<Row> {
    let mut rows = vec![Row::Head("part files here")];
    for (number, found) in page.found.iter().enumerate() {
        let name = found.name.as_deref().map_or("(cannot be read)".to_owned(), shown);
        rows.push(Row::Part { number, name, file: shown(&found.path.display().to_string()) });
    }
    if page.found.is_empty() {
        rows = vec![Row::Head("no part file here or in parts/")];
    }
    rows.push(Row::Head("parts to try, in a deck cell's setup"));
    for (at, demo) in demo::PARTS.iter().enumerate() {
        let name = demo.file.trim_end_matches(".toml").replace('_', " ");
        rows.push(Row::Part { number: page.found.len() + at, name, file: demo.file.to_owned() });
    }
    rows
}

/// Draws the page over the whole screen.
pub(super) fn render(state: &State, area: Rect, page: &StartPage, buf: &mut Buffer) {
    let (body, footer) = split_rows(area, area.height.saturating_sub(1));
    let (body, message) = split_rows(body, body.height.saturating_sub(1));
    let mut inside = titled(state, body, "holdwright", &format!("{} of {}", page.at + 1, page.rows()), buf);
    // The list matters most: what is said around it leaves first.
    let what = wrapped(WHAT, usize::from(inside.width));
    if usize::from(inside.height) > what.len() + 8 {
        for line in what.iter().map(String::as_str).chain([""]) {
            put(buf, inside, line, state.look.plain());
            inside = split_rows(inside, 1).1;
        }
    }
    if inside.height > 6 {
        let (list, last) = split_rows(inside, inside.height - 2);
        let text = if usize::from(last.width) < DRAWING.len() { DRAWING_SHORT } else { DRAWING };
        put(buf, split_rows(last, 1).1, text, state.look.plain());
        inside = list;
    }
    let rows = rows(page);
    let chosen = rows.iter().position(|row| matches!(row, Row::Part { number, .. } if *number == page.at)).unwrap_or(0);
    let height = usize::from(inside.height);
    let top = if chosen < height { 0 } else { chosen + 1 - height };
    let widest = rows.iter().map(|row| match row {
        Row::Part { name, .. } => name.chars().count(),
        Row::Head(_) => 0,
    });
    let column = widest.max().unwrap_or(0).min(usize::from(inside.width) / 2);
    for (row, y) in rows.iter().skip(top).zip(inside.top()..inside.bottom()) {
        let line = Rect { y, height: 1, ..inside };
        match row {
            Row::Head(text) => put(buf, line, text, state.look.dim()),
            Row::Part { number, name, file } => {
                let selected = *number == page.at;
                let text = format!("{} {:<column$}  {file}", if selected { '>' } else { ' ' }, cut(name, column));
                put(buf, line, &text, if selected { state.look.selected() } else { state.look.plain() });
            }
        }
    }
    if state.message.is_some() {
        bars::message(state, message, buf);
    } else if page.writes_first() {
        put(buf, message, "files that are there already stay", state.look.dim());
    }
    bars::footer(state, footer, buf);
}
