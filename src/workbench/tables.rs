//! The built-in tables on the bench: friction pairs and densities, offered where the setup or the part says nothing.

use super::action::{self, Action};
use super::knobs;
use super::loads;
use super::state::{Layer, State};
use super::update::Effect;
use crate::mechanics::pair::{PAIRS, Pair};
use crate::mechanics::{Condition, FrictionBand};
use crate::part::material::{DENSITIES, Density};
use std::sync::Arc;

/// The pair a row of the list stands for; the first row is the friction the workbench was opened with.
pub(super) fn pair_at(at: usize) -> Option<&'static Pair> {
    PAIRS.get(at.checked_sub(1)?)
}

/// The density a row of the list stands for; the first row is the part as its file has it.
pub(super) fn density_at(at: usize) -> Option<&'static Density> {
    DENSITIES.get(at.checked_sub(1)?)
}

/// Opens the list of pairs on the row that is in force.
pub(super) fn open_pairs(state: &mut State) {
    let friction = &state.setup().friction;
    let in_force = |condition| {
        let taken = |pair: &Pair| pair.band(condition).as_ref() == Some(friction);
        PAIRS.iter().position(taken).map(|row| Layer::Pairs { at: row + 1, condition })
    };
    let layer = in_force(Condition::Dry).or_else(|| in_force(Condition::Oily));
    state.layers.push(layer.unwrap_or(Layer::Pairs { at: 0, condition: Condition::Dry }));
}

/// Opens the list of densities on the row that is in force.
pub(super) fn open_materials(state: &mut State) {
    let in_force = state.density.and_then(|taken| DENSITIES.iter().position(|row| row == taken));
    state.layers.push(Layer::Materials { at: in_force.map_or(0, |row| row + 1) });
}

/// Carries out an action in one of the lists.
pub(super) fn act(state: &mut State, action: Action) -> Vec<Effect> {
    let page = usize::from(state.size.1 / 2).max(1);
    let (at, last) = match state.layers.last_mut() {
        Some(Layer::Pairs { at, .. }) => (at, PAIRS.len()),
        Some(Layer::Materials { at }) => (at, DENSITIES.len()),
        _ => return Vec::new(),
    };
    match action {
        Action::Down => *at = (*at + 1).min(last),
        Action::Up => *at = at.saturating_sub(1),
        Action::PageDown => *at = (*at + page).min(last),
        Action::PageUp => *at = at.saturating_sub(page),
        Action::First => *at = 0,
        Action::Last => *at = last,
        Action::Close => {
            state.layers.pop();
        }
        Action::OtherCondition => {
            if let Some(Layer::Pairs { condition, .. }) = state.layers.last_mut() {
                *condition = if *condition == Condition::Dry { Condition::Oily } else { Condition::Dry };
            }
        }
        Action::Accept => {
            let taken = match state.layers.last() {
                Some(&Layer::Pairs { at, condition }) => take_pair(state, at, condition),
                Some(&Layer::Materials { at }) => take_density(state, at),
                _ => Ok(Vec::new()),
            };
            match taken {
                Ok(effects) => {
                    state.layers.pop();
                    return effects;
                }
                Err(fault) => state.message = Some(fault),
            }
        }
        _ => {}
    }
    Vec::new()
}

fn take_pair(state: &mut State, at: usize, condition: Condition) -> Result<Vec<Effect>, String> {
    let (band, told) = match pair_at(at) {
        None => (state.opened.friction.clone(), "friction as the workbench was opened with".to_owned()),
        Some(pair) => {
            let word = condition.word();
            let band = pair.band(condition).ok_or_else(|| format!("no planning value when {word}: {}", pair.name))?;
            let told = format!("mu {:.2} for {}, {word}: a planning value, test it", band.mu, pair.name);
            (band, told)
        }
    };
    let effects = knobs::turn(state, |setup| setup.friction = band)?;
    state.message = Some(told);
    Ok(effects)
}

fn take_density(state: &mut State, at: usize) -> Result<Vec<Effect>, String> {
    let row = density_at(at);
    let (part, told) = match row {
        None => (Arc::clone(&state.opened.part), "the part as its file has it: no mass".to_owned()),
        Some(row) => {
            let part = state.opened.part.with_density(row.name, row.kg_m3).ok_or(NO_THICKNESS)?;
            (Arc::new(part), format!("{} at {} kg/m3, until the workbench is left", row.name, row.kg_m3))
        }
    };
    let before = loads::aside(&state.loads, state.order.scene.part());
    let effects = knobs::take_part(state, part)?;
    state.density = row;
    let part = state.order.scene.part();
    let back = before.saturating_sub(loads::aside(&state.loads, part));
    let with_loads = match loads::told_aside(&state.loads, part) {
        Some(aside) => format!("; {aside}"),
        None if back > 0 => format!("; {back} {} back", if back == 1 { "load is" } else { "loads are" }),
        None => String::new(),
    };
    state.message = Some(told + &with_loads);
    Ok(effects)
}

/// Why a density is of no use.
pub(super) const NO_THICKNESS: &str = "no density gives a mass: the part file has no `thickness`";

/// True when a band says where it is from.
pub(super) fn has_source(friction: &FrictionBand) -> bool {
    friction.source.as_ref().is_some_and(|source| !source.trim().is_empty())
}

/// What is missing and where it is offered, shortest first needed.
pub(super) fn missing(state: &State) -> Vec<String> {
    let mut missing = Vec::new();
    if !has_source(&state.setup().friction) {
        missing.push(format!("mu has no source, {} lists pairs", action::key_of(Action::OpenPairs)));
    }
    let part = state.order.scene.part();
    if let Some(aside) = loads::told_aside(&state.loads, part) {
        missing.push(aside);
    } else if part.mass().is_none() {
        missing.push(if part.thickness_mm().is_some() {
            format!("no mass, {} lists densities", action::key_of(Action::OpenMaterials))
        } else {
            "no mass, no thickness".to_owned()
        });
    }
    missing
}
