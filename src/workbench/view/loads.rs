//! The list of load cases, with what each asks of the selected grasp.

use super::super::loads::{LoadRow, refusal};
use super::super::state::State;
use super::bars::cut;
use super::tables::{self, List};
use super::{holding, number};
use crate::file::shown;
use crate::mechanics::{CaseHolding, LoadCase};
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

/// Widest a name gets.
const NAME: usize = 16;

/// Draws the list over the whole screen.
pub(super) fn list(state: &State, area: Rect, at: usize, buf: &mut Buffer) {
    let name = NAME.min(usize::from(area.width).saturating_sub(28)).max(4);
    let head = format!("  {:<name$}{:>8}{:>7}  {:<9}what it is", "load case", "squeeze", "margin", "");
    let row = |at: usize| {
        state.loads.get(at).map_or(String::new(), |row| {
            let (squeeze, margin, held) = asked(state, at, row);
            let own = cut(&shown(&row.case.name), name - 1);
            format!("{own:<name$}{squeeze:>8}{margin:>7}  {held:<9}{}", in_short(&row.case))
        })
    };
    let told = match state.loads.get(at) {
        Some(row) => told(state, at, row),
        None => vec!["No load cases: n adds a lift; a setup file has more kinds ([[load]]).".to_owned()],
    };
    let list = List { head, at, count: state.loads.len(), row: &row, told, rest: "..  a taller screen shows the rest" };
    tables::list(state, area, "loads", &list, buf);
}

/// What a case asks of the selected grasp, where it is in force and a grasp is selected.
fn holding_of(state: &State, at: usize) -> Option<&CaseHolding> {
    let part = state.order.scene.part();
    let before = state.loads.get(..at)?.iter().filter(|row| row.in_force(part)).count();
    let holding = state.reading.as_ref()?.assessment.holding.as_ref()?;
    holding.cases.get(before).filter(|_| state.loads[at].in_force(part))
}

/// Squeeze, margin and whether it is held, as the columns have it.
fn asked(state: &State, at: usize, row: &LoadRow) -> (String, String, &'static str) {
    let none = || (String::new(), String::new());
    let ((squeeze, margin), held) = match holding_of(state, at) {
        _ if row.out => (none(), "out"),
        _ if row.aside(state.order.scene.part()) => (none(), "aside"),
        None => (none(), "-"),
        Some(case) => {
            let squeeze = case.squeeze_n.map_or("none".to_owned(), number::mm);
            let margin = case.margin.map_or(String::new(), |margin| number::times(Some(margin)));
            ((squeeze, margin), holding::held_word(case))
        }
    };
    (squeeze, margin, held)
}

/// What is said of the selected case.
fn told(state: &State, at: usize, row: &LoadRow) -> Vec<String> {
    let name = shown(&row.case.name);
    let mut told = vec![format!("{name}: {}", in_full(&row.case))];
    if row.out {
        told.push("taken out: x brings it back".to_owned());
    } else if let Some(fault) = refusal(&row.case, state.order.scene.part()) {
        told.push(format!("put aside: {}", fault.mend));
    } else if let (Some(case), Some(reading)) = (holding_of(state, at), &state.reading) {
        told.push(match (state.row(), state.selected + 1) {
            (Some(_), number) => format!("of grasp number {number} it asks:"),
            (None, _) => "of the grasp last selected it asks:".to_owned(),
        });
        let holding_of_all = reading.assessment.holding.as_ref();
        let most = holding_of_all.is_some_and(|all| all.cases.len() > 1 && std::ptr::eq(all.governing_case(), case));
        let most = if most { "; of all cases it asks most" } else { "" };
        told.push(holding::asks(case, reading.grasp.contacts.len()) + most);
        if let Some(limit) = holding_of_all.and_then(|holding| holding.limit) {
            told.push(holding::limit_words(&limit, &reading.grasp));
        }
        told.push(holding::drive_words(state.setup().hand.drive).to_owned());
    }
    told
}

/// A direction in words: up and down across the part plane, degrees in it, else its parts.
fn toward(v: [f64; 3]) -> String {
    let [x, y, z] = v;
    let (in_plane, across) = (x != 0.0 || y != 0.0, z != 0.0);
    match (in_plane, across) {
        (false, _) if z > 0.0 => "up".to_owned(),
        (false, _) => "down".to_owned(),
        (true, false) => format!("toward {} deg", number::degrees(y.atan2(x).to_degrees())),
        (true, true) => format!("along ({}, {}, {})", number::given(x), number::given(y), number::given(z)),
    }
}

fn size(v: [f64; 3]) -> String {
    number::given(v.iter().fold(0.0_f64, |sum, x| sum.hypot(*x)))
}

fn is_nought(v: [f64; 3]) -> bool {
    v.iter().all(|x| *x == 0.0)
}

/// What moves and pushes the part, without its weight.
fn motions(case: &LoadCase) -> Vec<String> {
    let mut told = Vec::new();
    if !is_nought(case.acceleration_m_s2) {
        told.push(format!("{} m/s2 {}", size(case.acceleration_m_s2), toward(case.acceleration_m_s2)));
    }
    if case.any_direction_m_s2 != 0.0 {
        told.push(format!("{} m/s2 any way", number::given(case.any_direction_m_s2)));
    }
    if !is_nought(case.force_n) {
        told.push(format!("{} N {}", size(case.force_n), toward(case.force_n)));
    }
    if case.angular_acceleration_rad_s2 != 0.0 {
        told.push(format!("{} rad/s2", number::given(case.angular_acceleration_rad_s2)));
    }
    told
}

fn factors(case: &LoadCase) -> Vec<String> {
    let mut told = Vec::new();
    if (case.safety - 1.0).abs() > 0.0 {
        told.push(format!("S {}", number::given(case.safety)));
    }
    if case.squeeze_left < 1.0 {
        told.push(format!("{} % squeeze left", number::given(case.squeeze_left * 100.0)));
    }
    told
}

/// A case in few words.
pub(super) fn in_short(case: &LoadCase) -> String {
    let mut told = motions(case);
    if told.is_empty() {
        told.push("its weight".to_owned());
    }
    told.extend(factors(case));
    told.join(", ")
}

/// A case with all it has.
fn in_full(case: &LoadCase) -> String {
    let mut told = motions(case);
    if !is_nought(case.force_n) {
        let [x, y, z] = case.at_mm.map(number::given);
        told.push(format!("acting at ({x}, {y}, {z}) mm"));
    }
    let weightless = is_nought(case.gravity);
    told.push(if weightless { "no weight".to_owned() } else { format!("weight {}", toward(case.gravity)) });
    told.push(format!("safety factor {}", number::given(case.safety)));
    if case.squeeze_left < 1.0 {
        told.push(format!("{} % of the squeeze left", number::given(case.squeeze_left * 100.0)));
    }
    told.join(", ")
}
