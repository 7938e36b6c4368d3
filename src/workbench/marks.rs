//! Marks: made, taken away, brought back, listed and handed over to be saved.

use super::action::Action;
use super::state::{Layer, Mark, Reading, State};
use super::update::Effect;
use crate::file::{Keep, KeptDensity};
use crate::mechanics::Verdict;
use crate::search::Spot;

/// Marks the selected grasp, or takes its mark away.
pub(super) fn toggle(state: &mut State) {
    if let Some(spots) = state.row().map(|row| row.grasp.spots.clone()) {
        toggle_at(state, &spots);
    }
}

/// The same for the grasp that is read, at these places.
pub(super) fn toggle_at(state: &mut State, spots: &[Spot]) {
    if let Some(at) = state.marks.iter().position(|mark| mark.keep.grasp.spots == spots) {
        lift(state, at);
    } else if let Some(back) = state.lifted.take_if(|lifted| lifted.keep.grasp.spots == spots) {
        state.message = Some(format!("marked again as {}", back.keep.name));
        state.marks.push(back);
    } else if let Some(reading) = state.reading.clone() {
        let verdict = reading.assessment.verdict;
        mark(state, reading);
        state.message = Some(match verdict {
            Verdict::Closed => "marked; n names it, w notes why, s saves".to_owned(),
            Verdict::Open | Verdict::Marginal => {
                format!("marked, although it is {} under the present knobs", verdict.word())
            }
        });
    }
}

/// Takes a mark away, and keeps it for a change of mind.
fn lift(state: &mut State, at: usize) {
    let gone = state.marks.remove(at);
    let file = if gone.saved { "; it stays in the file" } else { "" };
    state.message = Some(format!("unmarked{file}; m on the same grasp brings it back"));
    state.lifted = Some(gone);
}

/// The name a grasp has until it is given one: its edges.
pub(super) fn suggested_name(spots: &[Spot]) -> String {
    let at = |spot: &Spot| format!("{}:{}", spot.edge.ring, spot.edge.edge);
    spots.iter().map(at).collect::<Vec<_>>().join(" ")
}

/// Marks a grasp as it reads under the present knobs.
pub(super) fn mark(state: &mut State, reading: Reading) {
    let name = suggested_name(&reading.grasp.spots);
    let setup = state.setup().clone();
    let density = state.density.map(|row| KeptDensity { of: row.name.to_owned(), kg_m3: row.kg_m3 });
    let keep = Keep { name, note: String::new(), grasp: reading.grasp, assessment: reading.assessment, setup, density };
    add(state, keep);
}

/// Adds a mark that is not saved yet.
pub(super) fn add(state: &mut State, keep: Keep) {
    let id = state.next_mark;
    state.next_mark += 1;
    state.marks.push(Mark { id, keep, saved: false });
}

/// The effect that saves what is unsaved; `reread` takes the file as it stands now for known.
pub(super) fn save(state: &mut State, reread: bool) -> Vec<Effect> {
    let unsaved = || state.marks.iter().filter(|mark| !mark.saved);
    let ids: Vec<u64> = unsaved().map(|mark| mark.id).collect();
    let keeps: Vec<Keep> = unsaved().map(|mark| mark.keep.clone()).collect();
    if ids.is_empty() { Vec::new() } else { vec![Effect::Save { ids, keeps, reread }] }
}

/// Carries out an action in the list of marks.
pub(super) fn act(state: &mut State, action: Action) -> Vec<Effect> {
    let last = state.marks.len().saturating_sub(1);
    let Some(Layer::Marks { at }) = state.layers.last_mut() else { return Vec::new() };
    match action {
        Action::Down => *at = (*at + 1).min(last),
        Action::Up => *at = at.saturating_sub(1),
        Action::Close => {
            state.layers.pop();
        }
        Action::Save => return save(state, false),
        Action::Mark => {
            let at = (*at).min(last);
            if at < state.marks.len() {
                lift(state, at);
            }
            match state.layers.last_mut() {
                Some(Layer::Marks { .. }) if state.marks.is_empty() => {
                    state.layers.pop();
                }
                Some(Layer::Marks { at }) => *at = (*at).min(state.marks.len() - 1),
                _ => {}
            }
        }
        Action::Accept => {
            let spots = state.marks.get(*at).map(|mark| mark.keep.grasp.spots.clone());
            let rows = state.shown.as_ref().map_or(&[][..], |shown| &shown.ranking.grasps);
            match spots.and_then(|spots| rows.iter().position(|row| row.grasp.spots == spots)) {
                Some(row) => {
                    state.layers.pop();
                    state.select(row);
                }
                None => state.message = Some("not in the list under the present knobs".to_owned()),
            }
        }
        _ => {}
    }
    Vec::new()
}
