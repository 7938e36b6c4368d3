//! Part and setup read again from their files: what the user turned stays turned, the selection and the marks stay where
//! they still can.

use super::by_hand;
use super::knobs;
use super::loads::{self, LoadRow};
use super::state::{Anchor, Layer, Mark, OnDisk, Order, Reading, State};
use super::update::Effect;
use crate::file;
use crate::hand::Hand;
use crate::mechanics::{FrictionBand, LoadCase};
use crate::part::Part;
use crate::search::{Floors, Listed, Scene, SearchSettings, Setup, Spot};
use nalgebra::Point2;
use std::sync::Arc;

/// What the files hold now.
#[derive(Debug, Clone)]
pub struct Fresh {
    /// The part.
    pub part: Arc<Part>,
    /// The setup, with what the command line says laid over it.
    pub setup: Setup,
}

/// Takes what was read again, or shows why it could not be.
pub(super) fn take(state: &mut State, read: Result<Box<Fresh>, Vec<String>>) -> Vec<Effect> {
    state.on_disk = OnDisk::default();
    match read.and_then(|fresh| change(state, *fresh).map_err(|fault| vec![fault])) {
        Ok(effects) => effects,
        Err(mut lines) => {
            lines.push(String::new());
            lines.push("The workbench goes on with what it had. Mend the file, then press R again.".to_owned());
            state.layers.push(Layer::Fault { top: 0, title: "not read again", lines });
            Vec::new()
        }
    }
}

/// Carries what was read into the state.
///
/// # Errors
/// What does not go together; the state stays as it was.
fn change(state: &mut State, fresh: Fresh) -> Result<Vec<Effect>, String> {
    let opened = state.opened.clone();
    let other_part = file::part_digest(&fresh.part) != file::part_digest(&opened.part);
    let renamed = fresh.part.name() != opened.part.name();
    let other_setup = fresh.setup != opened.setup;
    let rows = merged_loads(&opened.setup.loads, &state.loads, &fresh.setup.loads);
    // A density from the table stands in only where the file still gives no mass.
    let density = state.density.filter(|_| fresh.part.mass().is_none());
    let part = match density.and_then(|row| fresh.part.with_density(row.name, row.kg_m3)) {
        Some(weighed) => Arc::new(weighed),
        None => Arc::clone(&fresh.part),
    };
    let (setup, overruled) = merged(&opened.setup, state.setup(), &fresh.setup);
    let setup = Setup { loads: loads::in_force(&rows, &part), ..setup };
    if let Some(fault) = setup.faults().first() {
        return Err(fault.to_string());
    }
    // Fingers that are locked stay so on the same outline, where they still fit.
    let kept = if other_part { &[] } else { state.order.scene.kept() };
    let scene = Scene::keeping(Arc::clone(&part), setup.clone(), kept)
        .or_else(|_| Scene::new(Arc::clone(&part), setup))
        .map_err(|fault| fault.to_string())?;

    let before = Arc::clone(state.order.scene.part());
    let spots = state.anchor.as_ref().map(|anchor| anchor.spots.clone());
    let spots = spots.or_else(|| state.reading.as_ref().map(|reading| reading.grasp.spots.clone()));
    state.order = Order { scene: Arc::new(scene), ..state.order.clone() };
    state.loads = rows;
    state.density = density.filter(|_| part.mass().is_some());
    state.opened.part = Arc::clone(&fresh.part);
    state.opened.friction = fresh.setup.friction.clone();
    state.opened.setup = fresh.setup;
    if other_part {
        // Rows of the part as it was say nothing of the part as it is.
        state.shown = None;
        if let Some(spots) = spots {
            let places = places_of(&before, &spots);
            let carried = carried(&before, &part, &spots);
            state.reading = carried.as_ref().and_then(|spots| Reading::of(&state.order.scene, spots));
            state.anchor = Some(Anchor { spots: carried.unwrap_or_default(), places: Some(places) });
        }
        drop_what_is_typed(state);
        by_hand::on_another_part(state);
    }
    by_hand::free_what_is_not_kept(state);
    let misfits = settle_marks(state, &fresh.part);
    state.read();
    let mut told = vec![
        match (other_part || renamed, other_setup) {
            (true, true) => "part and setup read again",
            (true, false) => "part read again",
            (false, true) => "setup read again",
            (false, false) => "read again: nothing changed",
        }
        .to_owned(),
    ];
    if other_setup && !overruled.is_empty() {
        told.push(format!("{} taken from the file", overruled.join(" and ")));
    } else if other_setup {
        told.push("knobs you turned stay".to_owned());
    }
    match misfits {
        0 => {}
        1 => told.push("1 mark no longer fits the outline".to_owned()),
        count => told.push(format!("{count} marks no longer fit the outline")),
    }
    told.extend(loads::told_aside(&state.loads, &part));
    let effects = if other_part || other_setup { knobs::rank(state) } else { Vec::new() };
    state.message = Some(told.join("; "));
    Ok(effects)
}

/// A line typed about a grasp of the part as it was, and a row of a list that may be shorter now.
fn drop_what_is_typed(state: &mut State) {
    state.layers.retain(|layer| !matches!(layer, Layer::Entry(_)));
    state.draft = None;
}

/// Brings the marks to the part as it is now; returns how many have no place on it any more.
fn settle_marks(state: &mut State, part: &Arc<Part>) -> usize {
    let digest = file::part_digest(part);
    let mut misfits = 0;
    for mark in state.marks.iter_mut().chain(&mut state.lifted) {
        if file::part_digest(&mark.part) == digest {
            mark.part = Arc::clone(part);
        } else if mark.stored.is_none() {
            rescore(mark, part);
        }
    }
    for mark in &state.marks {
        let carried = carried(&mark.part, part, &mark.keep.grasp.spots);
        let fits = |spots: &Vec<Spot>| {
            let scene = Scene::new(weighed(mark, part), mark.keep.setup.clone()).ok();
            scene.and_then(|scene| scene.grasp(spots).ok()).is_some_and(|grasp| grasp.fits())
        };
        misfits += usize::from(!carried.as_ref().is_some_and(fits));
    }
    misfits
}

fn weighed(mark: &Mark, part: &Arc<Part>) -> Arc<Part> {
    let density = mark.keep.density.as_ref().and_then(|density| density.applied_to(part));
    density.map_or_else(|| Arc::clone(part), Arc::new)
}

/// A mark that is in no file is scored again on the part as it is now, where it has a place there.
fn rescore(mark: &mut Mark, part: &Arc<Part>) {
    let Some(spots) = carried(&mark.part, part, &mark.keep.grasp.spots) else { return };
    let Ok(scene) = Scene::new(weighed(mark, part), mark.keep.setup.clone()) else { return };
    if let Ok(grasp) = scene.grasp(&spots) {
        mark.keep.assessment = scene.assess(&grasp).0;
        mark.keep.grasp = grasp;
        mark.part = Arc::clone(part);
    }
}

/// Where fingers stand, in the file's frame; those without a place are left out.
fn places_of(part: &Part, spots: &[Spot]) -> Vec<Point2<f64>> {
    let at = |spot: &Spot| Some(part.file_point(part.outline().edge(spot.edge)?.point_at(spot.along_mm)));
    spots.iter().filter_map(at).collect()
}

/// Spots of one part on another. While the rings have as many edges as before, edge numbers mean the same edges. Otherwise a
/// finger stays where it stood, on whatever edge runs there now; nothing when one has none.
fn carried(before: &Part, now: &Part, spots: &[Spot]) -> Option<Vec<Spot>> {
    if before.outline().ring_sizes() == now.outline().ring_sizes() {
        return Some(spots.to_vec());
    }
    let size = now.outline().perimeter_mm();
    let moved = |spot: &Spot| {
        let place = before.file_point(before.outline().edge(spot.edge)?.point_at(spot.along_mm));
        let local = place - now.outline().origin();
        let edges = now.outline().edges().iter().map(|edge| (edge.distance_to(local), edge));
        let (off, edge) = edges.min_by(|a, b| a.0.total_cmp(&b.0))?;
        let along_mm = match edge.arc() {
            Some(arc) => edge.along_toward(&arc, local - arc.centre)?,
            None => (local - edge.start()).dot(&edge.direction_at(0.0)),
        };
        let along_mm = along_mm.clamp(0.0, edge.length_mm());
        (off <= 1e-9 * size).then_some(Spot { edge: edge.id(), along_mm })
    };
    spots.iter().map(moved).collect()
}

/// The row whose fingers stand nearest to where others stood, by the sum of squared distances from each finger to the nearest
/// of the other grasp, both ways.
pub(super) fn nearest(rows: &[Listed], part: &Part, places: &[Point2<f64>]) -> Option<usize> {
    let to_nearest = |from: &[Point2<f64>], to: &[Point2<f64>]| -> f64 {
        let least = |a: &Point2<f64>| to.iter().map(|b| (a - b).norm_squared()).fold(f64::INFINITY, f64::min);
        from.iter().map(least).sum()
    };
    let off = |row: &Listed| {
        let own: Vec<_> = row.grasp.contacts.iter().map(|contact| part.file_point(contact.point)).collect();
        to_nearest(&own, places) + to_nearest(places, &own)
    };
    let rows = rows.iter().map(off).enumerate();
    rows.filter(|(_, off)| off.is_finite()).min_by(|a, b| a.1.total_cmp(&b.1)).map(|(row, _)| row)
}

/// The value of the knob where it was turned since opening, that of the file otherwise.
fn pick<T: Clone + PartialEq>(opened: &T, now: &T, file: &T) -> T {
    if now == opened { file.clone() } else { now.clone() }
}

macro_rules! picked {
    ($type:ident, $opened:expr, $now:expr, $file:expr; $($field:ident),+) => {
        $type { $($field: pick(&$opened.$field, &$now.$field, &$file.$field)),+ }
    };
}

/// The setup in force now, merged with that of the file, and the tables taken whole from the file because the knobs turned do
/// not go with it. Loads are merged apart.
fn merged(opened: &Setup, now: &Setup, file: &Setup) -> (Setup, Vec<&'static str>) {
    let friction = picked!(FrictionBand, opened.friction, now.friction, file.friction;
        mu, low, nominal, high, sliding, condition, source);
    let mut hand = picked!(Hand, opened.hand, now.hand, file.hand;
        fingers, tip, closing, pin_radius_mm, pad_width_mm, pad_depth_mm, bite_mm, opening_mm, corner_clearance_mm, gap_mm,
        force_limit_n, drive);
    // How many fingers of what kind close in what way is one choice.
    let choice = |hand: &Hand| (hand.fingers, hand.tip, hand.closing);
    (hand.fingers, hand.tip, hand.closing) = pick(&choice(&opened.hand), &choice(&now.hand), &choice(&file.hand));
    let search = picked!(SearchSettings, opened.search, now.search, file.search;
        spacing_mm, budget, seed, torque_scale, cone_sides);
    let floors = picked!(Floors, opened.floors, now.floors, file.floors;
        quality, friction_margin, placement_mm, load_margin);
    let mut setup = Setup { friction, hand, search, floors, loads: Vec::new() };
    let mut overruled = Vec::new();
    for fault in setup.faults() {
        match fault.key.split('.').next() {
            Some("friction") if !overruled.contains(&"friction") => {
                setup.friction = file.friction.clone();
                overruled.push("friction");
            }
            Some("hand") if !overruled.contains(&"hand") => {
                setup.hand = file.hand;
                overruled.push("hand");
            }
            _ => {}
        }
    }
    (setup, overruled)
}

/// The list of load cases: the file's, in its order, each as the user changed it; then those the user made, or changed although
/// the file does without them now.
fn merged_loads(opened: &[LoadCase], now: &[LoadRow], file: &[LoadCase]) -> Vec<LoadRow> {
    let opened_as = |name: &str| opened.iter().find(|case| case.name == name);
    let mut left: Vec<&LoadRow> = now.iter().collect();
    let mut rows = Vec::with_capacity(file.len());
    for case in file {
        let own = left.iter().position(|row| row.case.name == case.name).map(|at| left.remove(at));
        rows.push(match (own, opened_as(&case.name)) {
            (Some(own), Some(opened)) => LoadRow { case: pick(opened, &own.case, case), out: own.out },
            (Some(own), None) => own.clone(),
            (None, _) => LoadRow::new(case.clone()),
        });
    }
    let kept = |row: &&LoadRow| opened_as(&row.case.name).is_none_or(|opened| *opened != row.case);
    rows.extend(left.into_iter().filter(kept).cloned());
    rows
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn of_three_setups_what_was_turned_stays_and_the_rest_is_the_files() {
        let opened = Setup::default();
        let (mut now, mut file) = (opened.clone(), opened.clone());
        now.friction.mu = 0.3;
        now.floors.quality = 0.1;
        file.friction.mu = 0.25;
        file.friction.high = Some(0.5);
        file.hand.gap_mm = 2.0;
        file.floors.quality = 0.2;
        let (setup, overruled) = merged(&opened, &now, &file);
        assert_eq!((setup.friction.mu, setup.friction.high, setup.hand.gap_mm), (0.3, Some(0.5), 2.0));
        assert_eq!((setup.floors.quality, overruled), (0.1, vec![]));
        // Sliding friction above the mu that was turned down.
        (now.friction.mu, file.friction.sliding) = (0.1, Some(0.2));
        let (setup, overruled) = merged(&opened, &now, &file);
        assert_eq!((setup.friction, overruled), (file.friction.clone(), vec!["friction"]));
    }

    #[test]
    fn loads_are_merged_by_name() {
        let case = |name: &str, safety: f64| LoadCase { name: name.to_owned(), safety, ..LoadCase::default() };
        let opened = [case("lift", 1.0), case("stop", 1.0), case("gone", 1.0), case("kept", 1.0)];
        let mut now: Vec<LoadRow> = opened.iter().cloned().map(LoadRow::new).collect();
        now[0].case.safety = 3.0;
        now[1].out = true;
        now[3].case.safety = 4.0;
        now.push(LoadRow::new(case("own", 5.0)));
        let file = [case("new", 1.0), case("stop", 2.0), case("lift", 2.0)];
        let rows: Vec<(String, f64, bool)> = merged_loads(&opened, &now, &file)
            .into_iter()
            .map(|row| (row.case.name, row.case.safety, row.out))
            .collect();
        let row = |name: &str, safety, out| (name.to_owned(), safety, out);
        assert_eq!(
            rows,
            [
                row("new", 1.0, false),
                row("stop", 2.0, true),
                row("lift", 3.0, false),
                row("kept", 4.0, false),
                row("own", 5.0, false)
            ]
        );
    }
}
