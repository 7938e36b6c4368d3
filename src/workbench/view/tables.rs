//! The lists of friction pairs and of densities, with what is said of the selected row.

use super::super::state::State;
use super::super::tables::{NO_THICKNESS, density_at, has_source, pair_at};
use super::bars::{self, cut};
use super::{number, put, split_rows, titled, wrapped};
use crate::file::shown;
use crate::mechanics::pair::{PAIRS, PLAN_MARK};
use crate::mechanics::{Condition, FrictionBand};
use crate::part::material::DENSITIES;
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

/// Widest a name gets.
const NAME: usize = 41;
/// Most lines said of the selected row.
const MOST_TOLD: u16 = 14;

/// Draws the list of friction pairs over the whole screen.
pub(super) fn pairs(state: &State, area: Rect, at: usize, condition: Condition, buf: &mut Buffer) {
    let name = NAME.min(usize::from(area.width).saturating_sub(16)).max(1);
    let column = |of: Condition| if of == condition { format!("[{}]", of.word()) } else { format!("{} ", of.word()) };
    let head = format!(
        "  {:<name$}{:>7}{:>7} quoted dry   oily",
        "planning values",
        column(Condition::Dry),
        column(Condition::Oily)
    );
    let row = |at: usize| match pair_at(at) {
        None => format!("{:<name$}{:>6}", cut("as opened", name), number::mu(state.opened.friction.mu)),
        Some(pair) => {
            let plan = |of| pair.plan(of).map_or("-".to_owned(), |mu| format!("{mu:.2}"));
            format!(
                "{:<name$}{:>6}{:>7}  {:<11}{}",
                cut(pair.name, name),
                plan(Condition::Dry),
                plan(Condition::Oily),
                pair.spread_word(Condition::Dry),
                pair.spread_word(Condition::Oily)
            )
        }
    };
    let told = match pair_at(at) {
        None => vec![
            band_words(&state.opened.friction),
            match &state.opened.friction.source {
                Some(source) if has_source(&state.opened.friction) => format!("source: {}", shown(source)),
                _ => "no source is given".to_owned(),
            },
        ],
        Some(pair) => {
            let mut told = vec![match pair.band(condition) {
                Some(band) => format!("Enter sets {} ({}): {PLAN_MARK}", band_words(&band), condition.word()),
                None => format!("no planning value when {}", condition.word()),
            }];
            told.extend(pair.lines());
            told
        }
    };
    list(
        state,
        area,
        "friction of a pair",
        &List { head, at, count: PAIRS.len() + 1, row: &row, told, rest: REST },
        buf,
    );
}

/// Draws the list of densities over the whole screen.
pub(super) fn materials(state: &State, area: Rect, at: usize, buf: &mut Buffer) {
    let name = 30.min(usize::from(area.width).saturating_sub(10)).max(1);
    let head = format!("  {:<name$}{:>7}  {:<11}source", "density", "kg/m3", "range");
    let row = |at: usize| match density_at(at) {
        None => cut("as in the part file: no mass", name),
        Some(row) => {
            let names = row.names().collect::<Vec<_>>().join(", ");
            let range = row.range.map_or(String::new(), |[low, high]| format!("{low}-{high}"));
            format!("{:<name$}{:>7}  {range:<11}{}", cut(&names, name), row.kg_m3, row.source)
        }
    };
    let told = match density_at(at) {
        None => vec!["a mass in the part file beats any density: `mass_kg`, weighed".to_owned()],
        Some(row) => {
            let part = state.opened.part.with_density(row.name, row.kg_m3);
            let mass = part.as_ref().and_then(|part| part.mass());
            let memory = if row.source.from_memory { ", from memory" } else { "" };
            vec![
                format!("{}{memory}", row.source.full),
                mass.map_or(NO_THICKNESS.to_owned(), |mass| format!("this part: {}", number::kg(mass.kg))),
            ]
        }
    };
    list(
        state,
        area,
        "density of the part",
        &List { head, at, count: DENSITIES.len() + 1, row: &row, told, rest: REST },
        buf,
    );
}

/// A band in words.
fn band_words(friction: &FrictionBand) -> String {
    let mut words = format!("mu {}", number::mu(friction.mu));
    for (name, value) in [("low", friction.low), ("nominal", friction.nominal), ("high", friction.high)] {
        if let Some(value) = value {
            words.push_str(&format!(", {name} {}", number::mu(value)));
        }
    }
    words
}

/// A list with what is said of its selected row.
pub(super) struct List<'a> {
    /// Names of the columns.
    pub(super) head: String,
    /// The selected row.
    pub(super) at: usize,
    /// Rows in all.
    pub(super) count: usize,
    /// The text of a row.
    pub(super) row: &'a dyn Fn(usize) -> String,
    /// What is said of the selected row.
    pub(super) told: Vec<String>,
    /// Where the rest of it stands when not all of it fits.
    pub(super) rest: &'a str,
}

/// Where the rest of the sources stands.
const REST: &str = "..  `holdwright materials` lists all of it";

/// Draws a list over the whole screen.
pub(super) fn list(state: &State, area: Rect, title: &str, list: &List<'_>, buf: &mut Buffer) {
    let (body, footer) = split_rows(area, area.height.saturating_sub(1));
    let (body, message) = split_rows(body, body.height.saturating_sub(1));
    // The part below keeps its height, so that the rows stay where they are while the selection moves.
    let (body, below) = split_rows(body, body.height - (body.height * 9 / 20).min(MOST_TOLD + 1));
    let inside = titled(state, body, title, &format!("{} of {}", (list.at + 1).min(list.count), list.count), buf);
    let (head, rows) = split_rows(inside, 1);
    put(buf, head, &list.head, state.look.dim());
    let height = usize::from(rows.height);
    let top = list.at.saturating_sub(height.saturating_sub(1));
    for (at, y) in (top..list.count).zip(rows.top()..rows.bottom()) {
        let chosen = at == list.at;
        let text = format!("{} {}", if chosen { '>' } else { ' ' }, (list.row)(at));
        let style = if chosen { state.look.selected() } else { state.look.plain() };
        put(buf, Rect { y, height: 1, ..rows }, &text, style);
    }
    if below.height > 1 {
        let inside = titled(state, below, "of the selected row", "", buf);
        let width = usize::from(inside.width).saturating_sub(2);
        let lines: Vec<String> = list.told.iter().flat_map(|line| hanging(line, width)).collect();
        let room = usize::from(inside.height);
        for (i, (line, y)) in lines.iter().zip(inside.top()..inside.bottom()).enumerate() {
            let more = i + 1 == room && lines.len() > room;
            let line = if more { list.rest } else { line };
            put(buf, Rect { y, height: 1, ..inside }, line, state.look.plain());
        }
    }
    bars::message(state, message, buf);
    bars::footer(state, footer, buf);
}

/// A line broken where it must, what follows set in.
fn hanging(text: &str, width: usize) -> Vec<String> {
    let lines = wrapped(text, width);
    lines.into_iter().enumerate().map(|(i, line)| if i == 0 { line } else { format!("  {line}") }).collect()
}
