//! The knobs: each takes a changed setup, reads the selected grasp under it at once and asks for a new ranking.

use super::look::Marker;
use super::state::{Job, State};
use super::update::Effect;
use crate::hand::FingerCount;
use crate::part::Part;
use crate::search::{Key, Listing, Scene, Setup};
use std::sync::Arc;

/// Asks for a ranking by the knobs as they stand.
pub(super) fn rank(state: &mut State) -> Vec<Effect> {
    state.job = Job::Running(None);
    // Until the new number is known no ranking on the screen counts as that of the new knobs.
    state.asked = None;
    vec![Effect::Rank(state.order.request())]
}

/// Takes a changed setup, reads the selected grasp under it at once, and ranks again.
///
/// # Errors
/// What is wrong with the setup; the knobs stay as they were.
pub(super) fn turn(state: &mut State, change: impl FnOnce(&mut Setup)) -> Result<Vec<Effect>, String> {
    let mut setup = state.setup().clone();
    change(&mut setup);
    if setup == *state.setup() {
        return Ok(Vec::new());
    }
    if let Some(fault) = setup.faults().first() {
        return Err(fault.to_string());
    }
    let scene = Scene::new(Arc::clone(state.order.scene.part()), setup).map_err(|fault| fault.to_string())?;
    state.order.scene = Arc::new(scene);
    state.read();
    Ok(rank(state))
}

/// Takes another part in place of the present one, of the same outline, and ranks again.
///
/// # Errors
/// What is wrong with the setup for this part; everything stays as it was.
pub(super) fn take_part(state: &mut State, part: Arc<Part>) -> Result<Vec<Effect>, String> {
    let scene = Scene::new(part, state.setup().clone()).map_err(|fault| fault.to_string())?;
    state.order.scene = Arc::new(scene);
    state.read();
    Ok(rank(state))
}

fn turn_or_say(state: &mut State, change: impl FnOnce(&mut Setup)) -> Vec<Effect> {
    turn(state, change).unwrap_or_else(|fault| {
        state.message = Some(fault);
        Vec::new()
    })
}

/// Moves mu to the next multiple of `1 / per_unit` above or below.
pub(super) fn step_mu(state: &mut State, per_unit: f64, way: f64) -> Vec<Effect> {
    let mu = state.setup().friction.mu * per_unit;
    // A hair is taken off so that 0.29999999999999999 counts as 0.3.
    let next = if way > 0.0 { (mu + 1e-6).floor() + 1.0 } else { (mu - 1e-6).ceil() - 1.0 };
    let next = (next / per_unit).clamp(0.0, crate::part::MU_LARGEST);
    turn_or_say(state, |setup| setup.friction.mu = next)
}

pub(super) fn step_fingers(state: &mut State, way: isize) -> Vec<Effect> {
    let now = state.setup().hand.fingers.get();
    match now.checked_add_signed(way).and_then(FingerCount::new) {
        Some(count) => turn_or_say(state, |setup| setup.hand.fingers = count),
        None => {
            state.message = Some(format!("a grasp has {} to {} fingers", FingerCount::LEAST, FingerCount::MOST));
            Vec::new()
        }
    }
}

/// Sites are never set closer than this part of the perimeter, nor wider than the other.
const SPACING_LIMITS: (f64, f64) = (1.0 / 5000.0, 1.0 / 8.0);

pub(super) fn step_spacing(state: &mut State, factor: f64) -> Vec<Effect> {
    let part = state.order.scene.part();
    let perimeter = part.outline().perimeter_mm();
    let now = state.setup().search.spacing_for(part);
    let next = now * factor;
    if next < perimeter * SPACING_LIMITS.0 || next > perimeter * SPACING_LIMITS.1 {
        state.message = Some(format!("spacing stays at {now:.3} mm: the next step says no more of this part"));
        return Vec::new();
    }
    turn_or_say(state, |setup| setup.search.spacing_mm = Some(next))
}

pub(super) fn next_marker(state: &mut State) {
    state.look.marker = state.look.marker.next();
    let word = state.look.marker.word();
    state.message = Some(if state.look.marker == Marker::Ascii || state.look.utf8 {
        format!("drawn with {word}")
    } else {
        format!("drawn with {word}, but the locale is not UTF-8: if the outline is rubbish, press p again")
    });
}

/// Heights of a character cell over its width that terminals have, the commonest first (common practice, no source).
const CELL_SHAPES: [f64; 5] = [2.0, 2.2, 2.5, 1.6, 1.8];

/// Takes the next shape of the character cells.
pub(super) fn next_cell_shape(state: &mut State) {
    let now = CELL_SHAPES.iter().position(|shape| (shape - state.look.aspect).abs() < 1e-9).unwrap_or(0);
    state.look.aspect = CELL_SHAPES[(now + 1) % CELL_SHAPES.len()];
    state.message = Some(format!("cells taken as {} times as high as wide", state.look.aspect));
}

/// Sorts by the key that follows.
pub(super) fn next_key(state: &mut State) -> Vec<Effect> {
    let at = Key::ALL.iter().position(|key| *key == state.order.key).unwrap_or(0);
    state.order.key = Key::ALL[(at + 1) % Key::ALL.len()];
    rank(state)
}

/// Lists families, or every grasp.
pub(super) fn other_listing(state: &mut State) -> Vec<Effect> {
    state.order.listing = match state.order.listing {
        Listing::Families => Listing::Members,
        Listing::Members => Listing::Families,
    };
    rank(state)
}
