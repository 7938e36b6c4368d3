//! Grasps set beside each other: which, and what is told of them. All are read under the knobs as they stand, so they bear the
//! same loads with the same friction.

use super::by_hand;
use super::marks;
use super::state::{Beside, Layer, Reading, State};
use crate::file::shown;
use crate::search::Spot;

/// Grasps that stand beside each other, at most.
pub const MOST: usize = 3;

/// Sets the grasp that is read beside the others, or takes it away from there.
pub(super) fn toggle(state: &mut State) {
    let Some(spots) = state.spots() else { return };
    toggle_at(state, &spots);
}

/// The same for a grasp at these places.
pub(super) fn toggle_at(state: &mut State, spots: &[Spot]) {
    if let Some(at) = state.beside.iter().position(|own| own.spots == spots) {
        state.beside.remove(at);
        state.message = Some("no longer beside the others".to_owned());
        return;
    }
    if state.beside.len() == MOST {
        state.message = Some(format!("{MOST} stand beside each other already; X shows them, x on one takes it away"));
        return;
    }
    let name = name(state, spots);
    state.beside.push(Beside { name, spots: spots.to_vec() });
    state.message = Some(match state.beside.len() {
        1 => "set beside; x on another, then X compares them".to_owned(),
        count => format!("{count} beside each other; X compares them"),
    });
}

/// What a grasp is called: by its mark, else by hand or by its number, which may pass to another.
fn name(state: &State, spots: &[Spot]) -> String {
    let rows = state.shown.as_ref().map_or(&[][..], |shown| &shown.ranking.grasps);
    if let Some(mark) = state.mark_on(spots) {
        shown(&mark.keep.name)
    } else if by_hand::in_hand(state) {
        format!("by hand {}", marks::suggested_name(spots))
    } else {
        let number = rows.iter().position(|row| row.grasp.spots == spots);
        number.map_or_else(|| marks::suggested_name(spots), |row| format!("was number {}", row + 1))
    }
}

/// The grasps to compare: those set beside each other; with fewer than two, the grasp that is read joins them, and the one a
/// grasp in hand began as.
pub(super) fn chosen(state: &State) -> Vec<Beside> {
    let mut chosen = state.beside.clone();
    let mut join = |name: String, spots: Vec<Spot>| {
        if chosen.len() < 2 && chosen.iter().all(|own| own.spots != spots) {
            chosen.push(Beside { name, spots });
        }
    };
    if by_hand::in_hand(state)
        && let Some(began) = state.hand.as_ref().and_then(|hand| hand.began.as_ref())
    {
        join("before".to_owned(), began.grasp.spots.clone());
    }
    if let Some(spots) = state.spots() {
        join(name(state, &spots), spots);
    }
    chosen
}

/// Opens the comparison, or says what is missing.
pub(super) fn open(state: &mut State) {
    if chosen(state).len() < 2 {
        state.message = Some("two grasps are needed: x sets one beside, then choose another".to_owned());
    } else {
        state.layers.push(Layer::Compare { top: 0 });
    }
}

/// The grasps to compare, read.
pub fn readings(state: &State) -> Vec<(Beside, Option<Reading>)> {
    let read = |own: Beside| {
        let reading = Reading::of(&state.order.scene, &own.spots);
        (own, reading)
    };
    chosen(state).into_iter().map(read).collect()
}
