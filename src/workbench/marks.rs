//! Marks: made, taken away, brought back, listed and handed over to be saved.

use super::action::Action;
use super::by_hand;
use super::compare;
use super::kept;
use super::state::{EntryKind, Layer, Mark, Reading, State};
use super::update::{self, Effect};
use crate::file::{Keep, KeptDensity};
use crate::mechanics::Verdict;
use crate::search::Spot;
use std::sync::Arc;

/// Marks the selected grasp, or takes its mark away.
pub(super) fn toggle(state: &mut State) {
    if let Some(spots) = state.spots() {
        toggle_at(state, &spots);
    }
}

/// The same for the grasp that is read, at these places.
pub(super) fn toggle_at(state: &mut State, spots: &[Spot]) {
    if let Some(at) = state.mark_here(spots) {
        lift(state, at);
    } else if let Some(at) = state.lifted.iter().rposition(|lifted| lifted.keep.grasp.spots == spots) {
        bring_back(state, at);
    } else if let Some(reading) = state.reading.clone() {
        let verdict = reading.assessment.verdict;
        let before = state.mark_on(spots).map(|mark| format!("{:.2}", mark.keep.setup.friction.mu));
        mark(state, reading);
        state.message = Some(match (verdict, before) {
            (Verdict::Closed, None) => "marked; n names it, w notes why, s saves".to_owned(),
            (Verdict::Closed, Some(mu)) => {
                format!("marked under the present knobs; the one saved at mu {mu} stays")
            }
            (Verdict::Open | Verdict::Marginal, _) => {
                format!("marked, although it is {} under the present knobs", verdict.word())
            }
        });
    }
}

/// Takes a mark away, and keeps it for a change of mind.
fn lift(state: &mut State, at: usize) {
    let gone = state.marks.remove(at);
    let file = if gone.stored.is_some() || gone.saved { "; s takes it out of the file" } else { "" };
    state.message = Some(format!("unmarked{file}; m on the same grasp brings it back"));
    state.lifted.push(gone);
}

fn bring_back(state: &mut State, at: usize) {
    let back = state.lifted.remove(at);
    state.message = Some(format!("marked again as {}", back.keep.name));
    // Where it stands in the file it keeps its place in the list.
    let number = |mark: &Mark| mark.stored.as_ref().map_or(usize::MAX, |stored| stored.number);
    let place = state.marks.iter().position(|mark| number(mark) > number(&back)).unwrap_or(state.marks.len());
    state.marks.insert(place, back);
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
    let part = Arc::clone(&state.opened.part);
    state.marks.push(Mark { id, keep, saved: false, stored: None, part });
}

/// Takes back what a broken run left: other words for a grasp that is in the file, else a mark of its own.
pub(super) fn take_back(state: &mut State, keep: Keep) {
    let same = |mark: &&mut Mark| {
        let own = &mark.keep;
        mark.stored.is_some()
            && own.grasp.spots == keep.grasp.spots
            && own.setup == keep.setup
            && own.density == keep.density
    };
    match state.marks.iter_mut().find(same) {
        Some(mark) => {
            mark.keep = keep;
            settle(mark);
        }
        None => add(state, keep),
    }
}

/// Takes grasps of the file away again that a broken run had taken away; returns how many are there.
pub(super) fn take_out_again(state: &mut State, names: &[String]) -> usize {
    let mut out = 0;
    for name in names {
        let named = |mark: &Mark| mark.stored.as_ref().is_some_and(|stored| stored.name == *name);
        if let Some(at) = state.marks.iter().position(named) {
            lift(state, at);
            out += 1;
        }
    }
    out
}

/// Gives a mark another name or note.
pub(super) fn reword(mark: &mut Mark, name: Option<&str>, note: Option<&str>) {
    if let Some(name) = name.filter(|name| !name.is_empty()) {
        mark.keep.name = name.to_owned();
    }
    if let Some(note) = note {
        mark.keep.note = note.to_owned();
    }
    settle(mark);
}

/// A mark is saved while its words are those of the file.
fn settle(mark: &mut Mark) {
    if let Some(stored) = &mark.stored {
        mark.saved = mark.keep.name == stored.name && mark.keep.note == stored.note;
    }
}

/// The effect that saves what is unsaved; `reread` takes the file as it stands now for known. Marks of the part as it was
/// before it changed are no grasps of the part as it is.
pub(super) fn save(state: &mut State, reread: bool) -> Vec<Effect> {
    let fits = |mark: &&Mark| Arc::ptr_eq(&mark.part, &state.opened.part);
    let unsaved = || state.marks.iter().filter(|mark| !mark.saved).filter(fits);
    let ids: Vec<u64> = unsaved().map(|mark| mark.id).collect();
    let keeps: Vec<Keep> = unsaved().filter(|mark| mark.stored.is_none()).map(|mark| mark.keep.clone()).collect();
    let changes = kept::changes(state);
    if ids.is_empty() && changes.is_empty() {
        if state.unsaved() > 0 {
            state.message = Some("not saved: these marks are of the part as it was before it changed".to_owned());
        }
        return Vec::new();
    }
    vec![Effect::Save { ids, keeps, changes, reread }]
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
                let name = state.lifted.last().map_or(String::new(), |mark| mark.keep.name.clone());
                let file = if state.lifted.last().is_some_and(|mark| mark.stored.is_some()) {
                    "; s takes it out of the file"
                } else {
                    ""
                };
                state.message = Some(format!("taken away: {name}{file}; u brings it back"));
            }
            if let Some(Layer::Marks { at }) = state.layers.last_mut() {
                *at = (*at).min(state.marks.len().saturating_sub(1));
            }
        }
        Action::BringBack => {
            if let Some(at) = state.lifted.len().checked_sub(1) {
                let id = state.lifted[at].id;
                bring_back(state, at);
                let row = state.marks.iter().position(|mark| mark.id == id).unwrap_or(0);
                if let Some(Layer::Marks { at }) = state.layers.last_mut() {
                    *at = row;
                }
            }
        }
        Action::Name | Action::Note => {
            if let Some(mark) = state.marks.get(*at).map(|mark| mark.id) {
                let kind = if action == Action::Name { EntryKind::Rename { mark } } else { EntryKind::Renote { mark } };
                update::open_entry(state, kind);
            }
        }
        Action::Accept | Action::ByHand => {
            let at = *at;
            let Some(spots) = state.marks.get(at).map(|mark| mark.keep.grasp.spots.clone()) else { return Vec::new() };
            let rows = state.shown.as_ref().map_or(&[][..], |shown| &shown.ranking.grasps);
            let row = rows.iter().position(|row| row.grasp.spots == spots);
            match row.filter(|_| action == Action::Accept) {
                Some(row) => {
                    state.layers.pop();
                    state.select(row);
                }
                // What the list does not have is shown in hand.
                None => by_hand::open_at(state, &spots),
            }
        }
        Action::Beside | Action::OpenCompare => {
            let spots = state.marks.get(*at).map(|mark| mark.keep.grasp.spots.clone());
            match spots {
                Some(spots) if action == Action::Beside => compare::toggle_at(state, &spots),
                _ => compare::open(state),
            }
        }
        _ => {}
    }
    Vec::new()
}
