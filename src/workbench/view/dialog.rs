//! What lies on top of the bench: a line being typed, questions, the list of marks, faults.

use super::super::floors;
use super::super::loads;
use super::super::state::{Entry, EntryKind, Mark, Question, State};
use super::{bars, number, put, shifted, split_rows, table, titled, wrapped};
use crate::file::{SCORES, shown};
use ratatui::buffer::Buffer;
use ratatui::layout::{Position, Rect};
use ratatui::text::Line;
use std::sync::Arc;

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
        EntryKind::Name | EntryKind::Rename { .. } => "name of the grasp".to_owned(),
        EntryKind::Note | EntryKind::Renote { .. } => "why it is kept".to_owned(),
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
        EntryKind::Name | EntryKind::Note | EntryKind::Rename { .. } | EntryKind::Renote { .. } => return None,
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
        Question::Quit => ("leave?", unsaved(state)),
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

/// What would be lost by leaving.
fn unsaved(state: &State) -> String {
    let reworded = state.marks.iter().filter(|mark| !mark.saved && mark.stored.is_some()).count();
    let fresh = state.unsaved() - reworded;
    let mut told = Vec::new();
    if fresh > 0 {
        told.push(format!("{} not saved.", number::count(fresh as u64, "mark is", "marks are")));
    }
    if reworded > 0 {
        let other = number::count(reworded as u64, "saved grasp has", "saved grasps have");
        told.push(format!("{other} another name or note than in the file."));
    }
    if state.removals() > 0 {
        let out = number::count(state.removals() as u64, "grasp is", "grasps are");
        told.push(format!("{out} still to be taken out of the file."));
    }
    told.join(" ")
}

/// Draws the list of marks over the whole screen.
pub(super) fn marks(state: &State, area: Rect, at: usize, buf: &mut Buffer) {
    let (body, footer) = split_rows(area, area.height.saturating_sub(1));
    let (body, told) = split_rows(body, body.height.saturating_sub(1));
    let count = number::count(state.marks.len() as u64, "mark", "marks");
    let out = match state.removals() {
        0 => String::new(),
        out => format!(", {out} to be taken out of the file"),
    };
    let inside = titled(state, body, &count, &format!("{} not saved{out}", state.unsaved()), buf);
    if state.marks.is_empty() {
        put(buf, shifted(Rect { height: 1, ..inside }, 2), "no marks; u brings the last one back", state.look.dim());
    }
    let height = usize::from(inside.height);
    let top = at.saturating_sub(height.saturating_sub(1));
    let rows = state.shown.as_ref().map_or(&[][..], |shown| &shown.ranking.grasps);
    for (i, mark) in state.marks.iter().enumerate().skip(top).take(height) {
        let keep = &mark.keep;
        let rank = match rows.iter().position(|row| row.grasp.spots == keep.grasp.spots) {
            Some(row) => format!("#{}", row + 1),
            None => "-".to_owned(),
        };
        let was = Scored::of(mark);
        let text = format!(
            "{}{} {rank:>4} {}  {}  quality {}  margin {}{}  at mu {}  {}",
            if i == at { '>' } else { ' ' },
            standing(state, mark),
            shown(&keep.name),
            table::edges(&keep.grasp.spots),
            was.quality.map_or("-".to_owned(), number::quality),
            number::margin(was.margin),
            was.load.map_or(String::new(), |(load, held)| format!("  load {}", number::load(load, held))),
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

/// How a mark stands to the file.
fn standing(state: &State, mark: &Mark) -> &'static str {
    if !Arc::ptr_eq(&mark.part, &state.opened.part) {
        return "OLD  ";
    }
    match (mark.saved, &mark.stored) {
        (true, _) => "saved",
        (false, Some(_)) => "WORDS",
        (false, None) => "NEW  ",
    }
}

/// The scores a list of marks shows: as they stand in the file, or as they were read when the grasp was marked.
struct Scored {
    quality: Option<f64>,
    margin: Option<f64>,
    /// Load margin, and whether every load is held.
    load: Option<(Option<f64>, bool)>,
}

impl Scored {
    fn of(mark: &Mark) -> Self {
        let assessment = &mark.keep.assessment;
        match &mark.stored {
            Some(stored) => {
                let at =
                    |name: &str| SCORES.iter().position(|score| *score == name).and_then(|at| stored.scores.scores[at]);
                let load = stored.scores.held.map(|held| (at("load_margin"), held));
                Self { quality: at("quality"), margin: at("friction_margin"), load }
            }
            None => Self {
                quality: Some(assessment.quality),
                margin: assessment.friction_margin,
                load: assessment.holding.as_ref().map(|holding| (holding.load_margin(), holding.held())),
            },
        }
    }
}

/// A fault with its mend, broken into lines.
pub(super) fn fault_lines(lines: &[String], width: u16) -> Vec<Line<'static>> {
    lines.iter().flat_map(|line| wrapped(&shown(line), usize::from(width))).map(Line::raw).collect()
}
