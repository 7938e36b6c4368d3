//! What lies on top of the bench: a line being typed, questions, the list of marks, faults.

use super::super::floors;
use super::super::loads;
use super::super::state::{Entry, EntryKind, Question, State};
use super::{bars, number, put, shifted, split_rows, table, titled, wrapped};
use crate::file::shown;
use ratatui::buffer::Buffer;
use ratatui::layout::{Position, Rect};
use ratatui::text::Line;

/// Three rows above the footer; the bench stays in sight above them.
fn strip(area: Rect, rows: u16, buf: &mut Buffer) -> (Rect, Rect) {
    let (body, footer) = split_rows(area, area.height.saturating_sub(1));
    let rows = rows.min(body.height);
    let strip = Rect { y: body.bottom() - rows, height: rows, ..body };
    for y in strip.top()..footer.bottom() {
        for x in strip.left()..strip.right() {
            buf[(x, y)].reset();
        }
    }
    (strip, footer)
}

/// Draws a line being typed; returns where the cursor belongs.
pub(super) fn entry(state: &State, area: Rect, entry: &Entry, buf: &mut Buffer) -> Position {
    let (strip, footer) = strip(area, 3, buf);
    let title = match entry.kind {
        EntryKind::Mu => "mu, the friction coefficient".to_owned(),
        EntryKind::Name => "name of the grasp".to_owned(),
        EntryKind::Note => "why it is kept".to_owned(),
        EntryKind::Limit => "force limit, N per finger".to_owned(),
        EntryKind::Size { row } => format!("size of {}", case_name(state, row)),
        EntryKind::Safety { row } => format!("safety factor on {}", case_name(state, row)),
        EntryKind::Floor { row } => format!("floor: {}", floors::ROWS.get(row).map_or("", |own| own.meaning)),
        EntryKind::Edge => "edge to list grasps by; nothing lists all".to_owned(),
    };
    let mut inside = titled(state, strip, &title, "", buf);
    if let Some(fault) = &entry.fault {
        put(buf, shifted(Rect { y: inside.y + 1, height: 1, ..inside }, 2), &shown(fault), state.look.bad());
    } else if entry.suggested {
        let how = "typing replaces it; the arrow keys keep it";
        put(buf, shifted(Rect { y: inside.y + 1, height: 1, ..inside }, 2), how, state.look.dim());
    } else if let Some(now) = now(state, entry.kind) {
        put(buf, shifted(Rect { y: inside.y + 1, height: 1, ..inside }, 2), &now, state.look.dim());
    }
    inside.height = 1;
    let line = shifted(inside, 2);
    put(buf, inside, ">", state.look.title());
    // A long text slides so that the cursor stays in sight.
    let room = usize::from(line.width.saturating_sub(1)).max(1);
    let skip = entry.at.saturating_sub(room);
    let visible: String = entry.text.chars().skip(skip).take(room).collect();
    let before: String = entry.text.chars().skip(skip).take(entry.at - skip).collect();
    put(buf, line, &visible, if entry.suggested { state.look.dim() } else { state.look.plain() });
    bars::footer(state, footer, buf);
    let cursor = Line::raw(before).width().min(usize::from(line.width.saturating_sub(1))) as u16;
    Position { x: line.x.saturating_add(cursor).min(area.right() - 1), y: line.y }
}

/// Name of a load case, short enough for a title.
fn case_name(state: &State, row: usize) -> String {
    state.loads.get(row).map_or(String::new(), |own| format!("\"{}\"", bars::cut(&shown(&own.case.name), 24)))
}

/// The value that is about to be typed over.
fn now(state: &State, kind: EntryKind) -> Option<String> {
    let value = match kind {
        EntryKind::Name | EntryKind::Note => return None,
        EntryKind::Floor { row } => number::given(floors::value(state, row)),
        EntryKind::Edge => match state.filter.edge {
            Some(edge) => format!("{}:{}", edge.ring, edge.edge),
            None => "all; 3 is edge 3 of the outer ring, 1:0 edge 0 of the first hole".to_owned(),
        },
        EntryKind::Mu => number::mu(state.setup().friction.mu),
        EntryKind::Limit => match state.setup().hand.force_limit_n {
            Some(limit) => format!("{} N; none takes it away", number::given(limit)),
            None => "none".to_owned(),
        },
        EntryKind::Size { row } => {
            let (size, unit) = loads::size_of(state, row)?;
            format!("{} {unit}", number::given(size))
        }
        EntryKind::Safety { row } => number::given(state.loads.get(row)?.case.safety),
    };
    Some(format!("now {value}"))
}

/// Draws a question.
pub(super) fn ask(state: &State, area: Rect, question: Question, buf: &mut Buffer) {
    let path = shown(&state.grasp_path.display().to_string());
    let (title, text) = match question {
        Question::Quit => {
            ("leave?", format!("{} not saved.", number::count(state.unsaved() as u64, "mark is", "marks are")))
        }
        Question::Reload => (
            "not saved",
            format!("{path} was changed by someone else meanwhile. The file is as they left it; your marks are here."),
        ),
        Question::Recover { count } => (
            "marks of an earlier run",
            format!(
                "{} not saved when an earlier run on this part was cut off.",
                number::count(count as u64, "mark was", "marks were")
            ),
        ),
    };
    let lines = wrapped(&text, usize::from(area.width.saturating_sub(4)).max(1));
    let (strip, footer) = strip(area, lines.len() as u16 + 1, buf);
    let inside = titled(state, strip, title, "", buf);
    for (line, y) in lines.iter().zip(inside.top()..inside.bottom()) {
        put(buf, shifted(Rect { y, height: 1, ..inside }, 2), line, state.look.plain());
    }
    bars::footer(state, footer, buf);
}

/// Draws the list of marks over the whole screen.
pub(super) fn marks(state: &State, area: Rect, at: usize, buf: &mut Buffer) {
    let (body, footer) = split_rows(area, area.height.saturating_sub(1));
    let (body, told) = split_rows(body, body.height.saturating_sub(1));
    let count = number::count(state.marks.len() as u64, "mark", "marks");
    let inside = titled(state, body, &count, &format!("{} not saved", state.unsaved()), buf);
    let height = usize::from(inside.height);
    let top = at.saturating_sub(height.saturating_sub(1));
    let rows = state.shown.as_ref().map_or(&[][..], |shown| &shown.ranking.grasps);
    for (i, mark) in state.marks.iter().enumerate().skip(top).take(height) {
        let keep = &mark.keep;
        let rank = match rows.iter().position(|row| row.grasp.spots == keep.grasp.spots) {
            Some(row) => format!("#{}", row + 1),
            None => "-".to_owned(),
        };
        let text = format!(
            "{}{} {rank:>4} {}  {}  quality {}  margin {}{}  at mu {}  {}",
            if i == at { '>' } else { ' ' },
            if mark.saved { "saved" } else { "NEW  " },
            shown(&keep.name),
            table::edges(&keep.grasp.spots),
            number::quality(keep.assessment.quality),
            number::margin(keep.assessment.friction_margin),
            keep.assessment.holding.as_ref().map_or(String::new(), |holding| format!(
                "  load {}",
                number::load(holding.load_margin(), holding.held())
            )),
            number::mu(keep.setup.friction.mu),
            shown(&keep.note),
        );
        let line = Rect { y: inside.y + (i - top) as u16, height: 1, ..inside };
        let style = if i == at { state.look.selected() } else { state.look.plain() };
        put(buf, line, &text, style);
    }
    bars::message(state, told, buf);
    bars::footer(state, footer, buf);
}

/// A fault with its mend, broken into lines.
pub(super) fn fault_lines(lines: &[String], width: u16) -> Vec<Line<'static>> {
    lines.iter().flat_map(|line| wrapped(&shown(line), usize::from(width))).map(Line::raw).collect()
}
