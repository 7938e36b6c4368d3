//! A grasp changed by hand: fingers moved along the outline, added, taken away and locked, with every step to be undone.

use super::action::Action;
use super::knobs;
use super::marks;
use super::state::{Anchor, EntryKind, Layer, Reading, State};
use super::update::{self, Effect};
use crate::hand::{Closing, FingerCount};
use crate::search::{Scene, Spot, nearby};
use std::sync::Arc;

/// Lengths of a step, mm.
pub const STEPS_MM: [f64; 7] = [0.1, 0.2, 0.5, 1.0, 2.0, 5.0, 10.0];
/// The one of [`STEPS_MM`] to begin with.
const FIRST_STEP: usize = 3;
/// Steps that can be undone, at most.
const MOST_PAST: usize = 1000;

/// Where the fingers stand, and which of them stay.
#[derive(Debug, Clone, PartialEq)]
pub struct Placed {
    /// Finger after finger.
    pub spots: Vec<Spot>,
    /// Finger after finger: it stays where it is.
    pub locked: Vec<bool>,
}

impl Placed {
    /// The places of the fingers that stay.
    pub fn kept(&self) -> Vec<Spot> {
        let kept = self.spots.iter().zip(&self.locked).filter(|(_, locked)| **locked);
        kept.map(|(spot, _)| *spot).collect()
    }
}

/// The grasp in hand.
#[derive(Debug, Clone)]
pub struct ByHand {
    /// As it stands.
    pub now: Placed,
    /// The grasp it began as, under the knobs as they stand.
    pub began: Option<Reading>,
    /// The finger that moves.
    pub picked: usize,
    /// Which of [`STEPS_MM`].
    pub step: usize,
    past: Vec<Placed>,
    future: Vec<Placed>,
}

impl ByHand {
    /// Length of a step, mm.
    pub fn step_mm(&self) -> f64 {
        STEPS_MM[self.step.min(STEPS_MM.len() - 1)]
    }

    /// Steps that can be undone and done again.
    pub fn history(&self) -> (usize, usize) {
        (self.past.len(), self.future.len())
    }

    fn take(&mut self, next: Placed) {
        if next == self.now {
            return;
        }
        self.past.push(std::mem::replace(&mut self.now, next));
        if self.past.len() > MOST_PAST {
            self.past.remove(0);
        }
        self.future.clear();
        self.picked = self.picked.min(self.now.spots.len().saturating_sub(1));
    }

    fn undo(&mut self) -> bool {
        let Some(before) = self.past.pop() else { return false };
        self.future.push(std::mem::replace(&mut self.now, before));
        self.picked = self.picked.min(self.now.spots.len().saturating_sub(1));
        true
    }

    fn redo(&mut self) -> bool {
        let Some(after) = self.future.pop() else { return false };
        self.past.push(std::mem::replace(&mut self.now, after));
        self.picked = self.picked.min(self.now.spots.len().saturating_sub(1));
        true
    }
}

/// True while a grasp is changed by hand.
pub fn in_hand(state: &State) -> bool {
    state.layers.contains(&Layer::Hand)
}

/// Takes the grasp that is read in hand.
pub(super) fn open(state: &mut State) {
    if let Some(reading) = state.reading.clone() {
        take_up(state, reading);
    }
}

/// Takes the grasp at these places in hand, listed or not.
pub(super) fn open_at(state: &mut State, spots: &[Spot]) {
    match Reading::of(&state.order.scene, spots) {
        Some(reading) => {
            state.layers.clear();
            take_up(state, reading);
            state.read();
        }
        None => state.message = Some("this part has no such places".to_owned()),
    }
}

/// What was in hand before can be had back by undoing, as long as it began as the same grasp.
fn take_up(state: &mut State, reading: Reading) {
    let spots = reading.grasp.spots.clone();
    let kept = state.order.scene.kept();
    let locked: Vec<bool> = spots.iter().map(|spot| kept.contains(spot)).collect();
    let next = Placed { spots, locked };
    let began_here = |hand: &ByHand| {
        let began = hand.began.as_ref().is_some_and(|began| began.grasp.spots == next.spots);
        began || hand.now.spots == next.spots
    };
    match state.hand.as_mut().filter(|hand| began_here(hand)) {
        Some(hand) => hand.take(next),
        None => {
            let step = state.hand.as_ref().map_or(FIRST_STEP, |hand| hand.step);
            let began = Some(reading);
            state.hand = Some(ByHand { now: next, began, picked: 0, step, past: Vec::new(), future: Vec::new() });
        }
    }
    state.layers.push(Layer::Hand);
}

/// The scene with as many fingers as are in hand: their number need not be that of the knobs.
pub(super) fn scene(state: &State, fingers: usize) -> Option<Arc<Scene>> {
    let scene = &state.order.scene;
    let count = FingerCount::new(fingers)?;
    if scene.setup().hand.fingers == count && scene.kept().is_empty() {
        return Some(Arc::clone(scene));
    }
    let mut setup = scene.setup().clone();
    setup.hand.fingers = count;
    Scene::new(Arc::clone(scene.part()), setup).ok().map(Arc::new)
}

/// Reads the grasp it began as under the knobs as they stand.
pub(super) fn read_began(state: &mut State) {
    let Some(hand) = &mut state.hand else { return };
    let spots = hand.began.as_ref().map(|reading| reading.grasp.spots.clone());
    hand.began = spots.and_then(|spots| Reading::of(&state.order.scene, &spots));
}

/// After another part was read: what was in hand stays where it has its places there; steps before are forgotten, for they
/// were steps on the part as it was.
pub(super) fn on_another_part(state: &mut State) {
    let scene = &state.order.scene;
    let edge = state.filter.edge.filter(|edge| scene.part().outline().edge(*edge).is_some());
    let places = state.hand.as_ref().is_some_and(|hand| scene.grasp(&hand.now.spots).is_ok());
    state.filter.edge = edge;
    if let Some(hand) = state.hand.as_mut().filter(|_| places) {
        hand.past.clear();
        hand.future.clear();
    } else {
        state.hand = None;
        state.layers.retain(|layer| *layer != Layer::Hand);
    }
}

/// Frees the fingers in hand that the scene does not keep, and reads what the grasp began as again.
pub(super) fn free_what_is_not_kept(state: &mut State) {
    let kept = state.order.scene.kept().to_vec();
    if let Some(hand) = &mut state.hand {
        for (locked, spot) in hand.now.locked.iter_mut().zip(&hand.now.spots) {
            *locked &= kept.contains(spot);
        }
    }
    read_began(state);
}

/// Carries out an action on the grasp in hand.
pub(super) fn act(state: &mut State, action: Action) -> Vec<Effect> {
    let Some(hand) = &mut state.hand else { return Vec::new() };
    let count = hand.now.spots.len();
    match action {
        Action::Down => hand.picked = (hand.picked + 1) % count.max(1),
        Action::Up => hand.picked = (hand.picked + count - 1) % count.max(1),
        Action::StepLonger => hand.step = (hand.step + 1).min(STEPS_MM.len() - 1),
        Action::StepShorter => hand.step = hand.step.saturating_sub(1),
        Action::Forward => walk(state, 1.0),
        Action::Back => walk(state, -1.0),
        Action::NextEdge => jump(state, true),
        Action::EdgeBefore => jump(state, false),
        Action::AddFinger => add(state),
        Action::TakeFinger => take_away(state),
        Action::Lock => return lock(state),
        Action::BestFromHere => best(state),
        Action::Undo => return history(state, ByHand::undo, "nothing to undo"),
        Action::Redo => return history(state, ByHand::redo, "nothing to do again"),
        Action::Mark => mark(state),
        Action::Name => update::open_entry(state, EntryKind::Name),
        Action::Note => update::open_entry(state, EntryKind::Note),
        Action::Save => return marks::save(state, false),
        Action::Beside => super::compare::toggle(state),
        Action::OpenCompare => super::compare::open(state),
        Action::MuUp => return knobs::step_mu(state, 100.0, 1.0),
        Action::MuDown => return knobs::step_mu(state, 100.0, -1.0),
        Action::Cones => state.cones = !state.cones,
        Action::Help => state.layers.push(Layer::Help { top: super::view::help_in_hand(state) }),
        Action::OpenReading => state.layers.push(Layer::Reading { top: 0 }),
        Action::Close => close(state),
        // Pictures and the like work as on the bench.
        other => return update::bench(state, other),
    }
    Vec::new()
}

/// Back to the list: to the row of this grasp where it has one.
fn close(state: &mut State) {
    state.layers.retain(|layer| *layer != Layer::Hand);
    let spots = state.hand.as_ref().map(|hand| hand.now.spots.clone());
    let rows = state.shown.as_ref().map_or(&[][..], |shown| &shown.ranking.grasps);
    if let Some(row) = spots.and_then(|spots| rows.iter().position(|row| row.grasp.spots == spots)) {
        state.select(row);
    } else {
        state.read();
    }
}

/// Takes moved fingers over, or says why none moved.
fn moved(state: &mut State, spots: Option<Vec<Spot>>, why_not: &str) {
    let Some(hand) = &mut state.hand else { return };
    match spots {
        Some(spots) => {
            let locked = hand.now.locked.clone();
            hand.take(Placed { spots, locked });
            state.read();
        }
        None => state.message = Some(why_not.to_owned()),
    }
}

/// The picked finger, if it may be moved; says so where it may not.
fn free_finger(state: &mut State) -> Option<usize> {
    let hand = state.hand.as_ref()?;
    let picked = hand.picked;
    let parallel = state.setup().hand.closing == Closing::Parallel;
    let locked = |finger: usize| hand.now.locked.get(finger).copied().unwrap_or(false);
    let any = parallel && (0..hand.now.locked.len()).any(locked);
    if locked(picked) || any {
        state.message = Some(format!("finger {} is locked", picked + 1));
        return None;
    }
    Some(picked)
}

fn walk(state: &mut State, way: f64) {
    move_picked(state, |scene, hand, finger| nearby::walked(scene, &hand.now.spots, finger, way * hand.step_mm()));
}

fn jump(state: &mut State, forward: bool) {
    move_picked(state, |scene, hand, finger| nearby::on_next_edge(scene, &hand.now.spots, finger, forward));
}

fn move_picked(state: &mut State, next: impl FnOnce(&Scene, &ByHand, usize) -> Option<Vec<Spot>>) {
    let Some(finger) = free_finger(state) else { return };
    let Some(hand) = &state.hand else { return };
    let Some(scene) = scene(state, hand.now.spots.len()) else { return };
    let next = next(&scene, hand, finger);
    moved(state, next, NO_STRETCH);
}

const NO_STRETCH: &str = "no finger fits anywhere on this part";

fn add(state: &mut State) {
    if state.setup().hand.closing == Closing::Parallel {
        state.message = Some("parallel jaws are two; P on the bench lets fingers close freely".to_owned());
        return;
    }
    let Some(hand) = &state.hand else { return };
    let more = hand.now.spots.len() + 1;
    let found = scene(state, more).and_then(|scene| nearby::with_one_more(&scene, state.order.key, &hand.now.spots));
    let Some(spots) = found else {
        state.message = Some(format!("no more than {} fingers", FingerCount::MOST));
        return;
    };
    let Some(hand) = &mut state.hand else { return };
    let mut locked = hand.now.locked.clone();
    locked.push(false);
    hand.take(Placed { spots, locked });
    hand.picked = hand.now.spots.len() - 1;
    state.message = Some(format!("finger {more} added where it helps most"));
    state.read();
}

fn take_away(state: &mut State) {
    if state.setup().hand.closing == Closing::Parallel {
        state.message = Some("parallel jaws are two; P on the bench lets fingers close freely".to_owned());
        return;
    }
    let Some(finger) = free_finger(state) else { return };
    let Some(hand) = &mut state.hand else { return };
    if FingerCount::new(hand.now.spots.len() - 1).is_none() {
        state.message = Some("a grasp has two fingers at least".to_owned());
        return;
    }
    let mut next = hand.now.clone();
    next.spots.remove(finger);
    next.locked.remove(finger);
    hand.take(next);
    state.message = Some(format!("finger {} taken away; u brings it back", finger + 1));
    state.read();
}

fn best(state: &mut State) {
    let Some(hand) = &state.hand else { return };
    let Some(scene) = scene(state, hand.now.spots.len()) else { return };
    let next = nearby::climbed(&scene, state.order.key, &hand.now.spots, &hand.now.locked);
    let same = next.as_ref().is_some_and(|next| *next == hand.now.spots);
    let key = state.order.key.word().replace('_', " ");
    moved(state, next, "no step from here leads to a better grasp");
    state.message = Some(if same {
        format!("already the best near here, by {key}")
    } else {
        format!("the best near here, by {key}; u goes back")
    });
}

/// Locks or frees the picked finger, and ranks what keeps the locked ones.
fn lock(state: &mut State) -> Vec<Effect> {
    if state.setup().hand.closing == Closing::Parallel {
        state.message = Some("parallel jaws stand on one line: neither can be locked alone".to_owned());
        return Vec::new();
    }
    let Some(hand) = &mut state.hand else { return Vec::new() };
    let mut next = hand.now.clone();
    let Some(locked) = next.locked.get_mut(hand.picked) else { return Vec::new() };
    *locked = !*locked;
    let before = hand.now.clone();
    hand.take(next);
    match knobs::keep_fingers(state) {
        Ok(effects) => effects,
        Err(fault) => {
            if let Some(hand) = &mut state.hand {
                hand.now = before;
                hand.past.pop();
            }
            state.message = Some(fault);
            Vec::new()
        }
    }
}

fn history(state: &mut State, step: fn(&mut ByHand) -> bool, none: &str) -> Vec<Effect> {
    let Some(hand) = &mut state.hand else { return Vec::new() };
    let before = hand.now.kept();
    if !step(hand) {
        state.message = Some(none.to_owned());
        return Vec::new();
    }
    let locks_changed = hand.now.kept() != before;
    state.read();
    if locks_changed { knobs::keep_fingers(state).unwrap_or_default() } else { Vec::new() }
}

/// Marks the grasp in hand, or takes its mark away.
fn mark(state: &mut State) {
    let Some(spots) = state.hand.as_ref().map(|hand| hand.now.spots.clone()) else { return };
    state.anchor = Some(Anchor { spots: spots.clone(), places: None });
    marks::toggle_at(state, &spots);
}
