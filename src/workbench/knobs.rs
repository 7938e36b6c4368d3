//! The knobs: each takes a changed setup, reads the selected grasp under it at once and asks for a new ranking.

use super::by_hand;
use super::loads;
use super::look::Marker;
use super::state::{Job, State};
use super::update::Effect;
use crate::hand::{Closing, Drive, FingerCount, Tip};
use crate::mechanics::Holding;
use crate::part::Part;
use crate::search::{Key, Listing, Scene, Setup};
use std::sync::Arc;

/// Asks for a ranking by the knobs as they stand.
pub(super) fn rank(state: &mut State) -> Vec<Effect> {
    state.job = Job::Running(None);
    if !state.order.key.is_told_by(state.setup()) {
        state.order.key = Key::Quality;
    }
    // Until the new number is known no ranking on the screen counts as that of the new knobs.
    state.asked = None;
    // The list at the knobs before is a good beginning: after a small step most of it still stands.
    let rows = state.shown.as_ref().map_or(&[][..], |shown| &shown.ranking.grasps);
    let known = rows.iter().map(|row| row.grasp.spots.clone()).collect();
    vec![Effect::Rank(state.order.request(known))]
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
    let scene = &state.order.scene;
    let scene = Scene::keeping(Arc::clone(scene.part()), setup, scene.kept()).map_err(|fault| fault.to_string())?;
    Ok(take_scene(state, scene))
}

/// Takes another scene, reads the grasps at hand under it and ranks again.
fn take_scene(state: &mut State, scene: Scene) -> Vec<Effect> {
    state.order.scene = Arc::new(scene);
    by_hand::read_began(state);
    state.read();
    rank(state)
}

/// Ranks what keeps the fingers that are locked by hand. Where more are locked than there are fingers, as many are taken.
///
/// # Errors
/// Why they cannot be kept; everything stays as it was.
pub(super) fn keep_fingers(state: &mut State) -> Result<Vec<Effect>, String> {
    let (kept, count) = state.hand.as_ref().map_or((Vec::new(), 0), |hand| (hand.now.kept(), hand.now.spots.len()));
    let scene = &state.order.scene;
    let mut setup = scene.setup().clone();
    if let Some(fingers) = FingerCount::new(count).filter(|_| kept.len() > setup.hand.fingers.get()) {
        setup.hand.fingers = fingers;
    }
    let scene = Scene::keeping(Arc::clone(scene.part()), setup, &kept).map_err(|fault| fault.to_string())?;
    let told = match kept.len() {
        0 => "no finger is locked; the list is free again".to_owned(),
        1 => "1 finger locked; the list keeps it".to_owned(),
        count => format!("{count} fingers locked; the list keeps them"),
    };
    let effects = take_scene(state, scene);
    state.message = Some(told);
    Ok(effects)
}

/// Takes another part in place of the present one, of the same outline, puts the loads it lacks something for aside, brings
/// back those it has all for, and ranks again.
///
/// # Errors
/// What is wrong with the setup for this part; everything stays as it was.
pub(super) fn take_part(state: &mut State, part: Arc<Part>) -> Result<Vec<Effect>, String> {
    let setup = Setup { loads: loads::in_force(&state.loads, &part), ..state.setup().clone() };
    let scene = Scene::keeping(part, setup, state.order.scene.kept()).map_err(|fault| fault.to_string())?;
    Ok(take_scene(state, scene))
}

fn turn_or_say(state: &mut State, change: impl FnOnce(&mut Setup)) -> Vec<Effect> {
    turn(state, change).unwrap_or_else(|fault| {
        state.message = Some(fault);
        Vec::new()
    })
}

/// Takes a changed setup and says what it is now, or why it was refused.
fn turn_and_say(state: &mut State, told: String, change: impl FnOnce(&mut Setup)) -> Vec<Effect> {
    match turn(state, change) {
        Ok(effects) => {
            state.message = Some(told);
            effects
        }
        Err(fault) => {
            state.message = Some(fault);
            Vec::new()
        }
    }
}

/// Moves mu to the next multiple of `1 / per_unit` above or below.
pub(super) fn step_mu(state: &mut State, per_unit: f64, way: f64) -> Vec<Effect> {
    let mu = state.setup().friction.mu * per_unit;
    // A hair is taken off so that 0.29999999999999999 counts as 0.3.
    let next = if way > 0.0 { (mu + 1e-6).floor() + 1.0 } else { (mu - 1e-6).ceil() - 1.0 };
    let next = (next / per_unit).clamp(0.0, crate::part::MU_LARGEST);
    set_mu(state, next).unwrap_or_else(|fault| {
        state.message = Some(fault);
        Vec::new()
    })
}

/// Sets mu. Sliding friction is never above it: it goes down with mu, and back up to what the workbench was opened with.
///
/// # Errors
/// Why mu cannot be so; it stays as it was.
pub(super) fn set_mu(state: &mut State, mu: f64) -> Result<Vec<Effect>, String> {
    let opened = state.opened.friction.sliding;
    let sliding = state.setup().friction.sliding.map(|now| opened.unwrap_or(now).min(mu));
    let told = sliding.filter(|sliding| opened.is_some_and(|opened| *sliding < opened));
    let effects = turn(state, |setup| {
        setup.friction.mu = mu;
        setup.friction.sliding = sliding.filter(|sliding| *sliding >= 0.0);
    })?;
    if let Some(sliding) = told {
        state.message = Some(format!("sliding friction goes down with mu, to {sliding}"));
    }
    Ok(effects)
}

pub(super) fn step_fingers(state: &mut State, way: isize) -> Vec<Effect> {
    if state.setup().hand.closing == Closing::Parallel {
        return parallel_holds(state);
    }
    let now = state.setup().hand.fingers.get();
    match now.checked_add_signed(way).and_then(FingerCount::new) {
        Some(count) => turn_or_say(state, |setup| setup.hand.fingers = count),
        None => {
            state.message = Some(format!("a grasp has {} to {} fingers", FingerCount::LEAST, FingerCount::MOST));
            Vec::new()
        }
    }
}

/// What parallel closing does not leave open.
fn parallel_holds(state: &mut State) -> Vec<Effect> {
    state.message = Some("parallel closing is two pads; P goes back to fingers of their own".to_owned());
    Vec::new()
}

/// Pins for pads, pads for pins.
pub(super) fn other_tip(state: &mut State) -> Vec<Effect> {
    if state.setup().hand.closing == Closing::Parallel {
        return parallel_holds(state);
    }
    let hand = &state.setup().hand;
    let (tip, told) = match hand.tip {
        Tip::Pin => (Tip::Pad, format!("pads {} mm wide, {} mm deep", hand.pad_width_mm, hand.pad_depth_mm)),
        Tip::Pad => (Tip::Pin, format!("pins of {} mm radius", hand.pin_radius_mm)),
    };
    turn_and_say(state, told, |setup| setup.hand.tip = tip)
}

/// Two pads facing each other, or back to the fingers there were before.
pub(super) fn other_closing(state: &mut State) -> Vec<Effect> {
    let hand = state.setup().hand;
    if hand.closing == Closing::Parallel {
        let (fingers, tip) = state.before_parallel.unwrap_or((hand.fingers, hand.tip));
        return turn_and_say(state, "fingers close each on its own".to_owned(), |setup| {
            setup.hand.closing = Closing::Free;
            setup.hand.fingers = fingers;
            setup.hand.tip = tip;
        });
    }
    let Some(two) = FingerCount::new(2) else { return Vec::new() };
    let [least, most] = hand.opening_mm;
    let effects = turn_and_say(state, format!("two pads facing each other, {least} to {most} mm apart"), |setup| {
        setup.hand.closing = Closing::Parallel;
        setup.hand.fingers = two;
        setup.hand.tip = Tip::Pad;
    });
    if state.setup().hand.closing == Closing::Parallel {
        state.before_parallel = Some((hand.fingers, hand.tip));
    }
    effects
}

/// Each finger's force set, or all alike.
pub(super) fn other_drive(state: &mut State) -> Vec<Effect> {
    let (drive, told) = match state.setup().hand.drive {
        Drive::Adjustable => (Drive::Equal, "all fingers press alike"),
        Drive::Equal => (Drive::Adjustable, "each finger's force can be set"),
    };
    turn_and_say(state, told.to_owned(), |setup| setup.hand.drive = drive)
}

/// Preferred numbers of a decade, about 12 % apart (ISO 3:1973, series R20).
const R20: [f64; 20] =
    [1.0, 1.12, 1.25, 1.4, 1.6, 1.8, 2.0, 2.24, 2.5, 2.8, 3.15, 3.55, 4.0, 4.5, 5.0, 5.6, 6.3, 7.1, 8.0, 9.0];

/// The preferred number above or below a value above 0.
pub(super) fn preferred(value: f64, up: bool) -> f64 {
    let decade = 10_f64.powf(value.log10().floor());
    let share = value / decade;
    // A hair is left so that 1.1199999999999999 counts as 1.12.
    let next = if up {
        R20.iter().find(|own| **own > share * (1.0 + 1e-6)).map_or(10.0, |own| *own)
    } else {
        R20.iter().rev().find(|own| **own < share * (1.0 - 1e-6)).map_or(0.9, |own| *own)
    };
    // Read back from three figures, so that no more are kept than are meant.
    format!("{:.2e}", next * decade).parse().unwrap_or(next * decade)
}

/// A force limit to start from where nothing is known of what is needed, N (common practice, no source).
const FIRST_LIMIT_N: f64 = 100.0;

/// Moves the force limit to the next preferred number; where there is none, to the first above what the selected grasp needs.
pub(super) fn step_limit(state: &mut State, up: bool) -> Vec<Effect> {
    let holding = state.reading.as_ref().and_then(|reading| reading.assessment.holding.as_ref());
    let needed = holding.and_then(Holding::squeeze_n).filter(|n| *n > 0.0);
    let next = match (state.setup().hand.force_limit_n, needed) {
        (Some(now), _) => preferred(now, up),
        (None, Some(needed)) => preferred(needed, true),
        (None, None) => FIRST_LIMIT_N,
    };
    turn_and_say(state, format!("at most {next} N per finger"), |setup| setup.hand.force_limit_n = Some(next))
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
        format!("drawn with {word}; p again if it is rubbish: the locale is not UTF-8")
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

/// Sorts by the key that follows; those that the setup cannot tell are left out.
pub(super) fn next_key(state: &mut State) -> Vec<Effect> {
    let at = Key::ALL.iter().position(|key| *key == state.order.key).unwrap_or(0);
    let mut following = Key::ALL.iter().cycle().skip(at + 1).take(Key::ALL.len());
    if let Some(key) = following.find(|key| key.is_told_by(state.setup())) {
        state.order.key = *key;
    }
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
