//! The list of floors.

use super::super::floors::{self, ROWS};
use super::super::state::State;
use super::{bars, number, put, split_rows, titled};
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

/// Draws the list over the whole screen.
pub(super) fn list(state: &State, area: Rect, at: usize, buf: &mut Buffer) {
    let (body, footer) = split_rows(area, area.height.saturating_sub(1));
    let (body, told) = split_rows(body, body.height.saturating_sub(1));
    let inside = titled(state, body, "floors", "grasps below one are not listed", buf);
    for ((i, row), y) in ROWS.iter().enumerate().zip(inside.top()..inside.bottom()) {
        let value = floors::value(state, i);
        let asked = if value > row.none { format!("{}{}", number::given(value), row.unit) } else { "none".to_owned() };
        let text = format!("{} {:<16} {asked:>10}   {}", if i == at { '>' } else { ' ' }, row.name, row.meaning);
        let style = if i == at { state.look.selected() } else { state.look.plain() };
        put(buf, Rect { y, height: 1, ..inside }, &text, style);
    }
    // What comes of it stands below as it changes.
    let y = inside.top().saturating_add(ROWS.len() as u16 + 1);
    if y < inside.bottom() {
        let listed = number::count(state.rows() as u64, "row is listed", "rows are listed");
        let text = if state.is_old() { "ranking ...".to_owned() } else { listed };
        put(buf, Rect { y, height: 1, ..inside }, &text, state.look.dim());
    }
    bars::message(state, told, buf);
    bars::footer(state, footer, buf);
}
