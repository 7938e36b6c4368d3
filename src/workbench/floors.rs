//! The floors on the bench: what a grasp must reach to be listed, changed in place.

use super::action::Action;
use super::knobs;
use super::state::{EntryKind, Layer, State};
use super::update::{self, Effect};
use crate::search::Floors;

/// A floor as it is listed.
pub struct FloorRow {
    /// What has to be reached.
    pub name: &'static str,
    /// Unit, with a space before it; empty for a bare number.
    pub unit: &'static str,
    /// What it means, in a line.
    pub meaning: &'static str,
    /// The value at which it asks for nothing.
    pub none: f64,
    /// How much a step adds.
    pub step: f64,
    value: fn(&mut Floors) -> &mut f64,
}

/// The floors there are.
pub const ROWS: [FloorRow; 4] = [
    FloorRow {
        name: "quality",
        unit: "",
        meaning: "least quality",
        none: 0.0,
        step: 0.02,
        value: |floors| &mut floors.quality,
    },
    FloorRow {
        name: "friction margin",
        unit: "",
        meaning: "mu over the friction needed, at least",
        none: 1.0,
        step: 0.1,
        value: |floors| &mut floors.friction_margin,
    },
    FloorRow {
        name: "placement",
        unit: " mm",
        meaning: "mm every finger may be off, at least",
        none: 0.0,
        step: 0.5,
        value: |floors| &mut floors.placement_mm,
    },
    FloorRow {
        name: "load margin",
        unit: "",
        meaning: "multiple of every load that is held, at least; needs a force limit",
        none: 1.0,
        step: 0.1,
        value: |floors| &mut floors.load_margin,
    },
];

/// The value of a floor.
pub fn value(state: &State, row: usize) -> f64 {
    let mut floors = state.setup().floors;
    ROWS.get(row).map_or(0.0, |own| *(own.value)(&mut floors))
}

/// Sets a floor.
///
/// # Errors
/// Why it cannot be so.
pub(super) fn set(state: &mut State, row: usize, value: f64) -> Result<Vec<Effect>, String> {
    let Some(own) = ROWS.get(row) else { return Ok(Vec::new()) };
    knobs::turn(state, |setup| *(own.value)(&mut setup.floors) = value)
}

/// True when some floor asks for something.
pub fn any(state: &State) -> bool {
    (0..ROWS.len()).any(|row| value(state, row) > ROWS[row].none)
}

/// Carries out an action in the list.
pub(super) fn act(state: &mut State, action: Action) -> Vec<Effect> {
    let Some(Layer::Floors { at }) = state.layers.last_mut() else { return Vec::new() };
    let row = (*at).min(ROWS.len() - 1);
    let own = &ROWS[row];
    match action {
        Action::Down => *at = (row + 1).min(ROWS.len() - 1),
        Action::Up => *at = row.saturating_sub(1),
        Action::Close => {
            state.layers.pop();
        }
        Action::Larger | Action::Smaller => {
            let way = if action == Action::Larger { 1.0 } else { -1.0 };
            // Whole steps, so that no digits pile up.
            let steps = ((value(state, row) - own.none) / own.step + way).round().max(0.0);
            return change(state, row, own.none + steps * own.step);
        }
        Action::TakeOut => return change(state, row, own.none),
        Action::Accept => update::open_entry(state, EntryKind::Floor { row }),
        _ => {}
    }
    Vec::new()
}

fn change(state: &mut State, row: usize, value: f64) -> Vec<Effect> {
    // Rounded to what is shown, so that 0.06 does not become 0.060000000000000005.
    let value = (value * 1e6).round() / 1e6;
    set(state, row, value).unwrap_or_else(|fault| {
        state.message = Some(fault);
        Vec::new()
    })
}
