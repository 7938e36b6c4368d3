//! Leeway: how far each finger of a grasp may move along its stretch while the others stay and the grasp stays closed.
//!
//! Unlike the placement tolerance, which is for all fingers at once, this is one finger's own. On a straight edge the
//! places where the grasp is closed are one interval (derived): the cone-edge wrenches of the moving finger change by their
//! place times (0, 0, 1 / l), so for each direction u in which the others do not reach, the places where the finger does
//! not reach either are a half-line; what is left when half-lines are taken away is an interval. Its ends are found by
//! bisection on the verdict. On an arc, for parallel jaws, and for the distance to another finger the first place where
//! something is lost is looked for in small steps and then narrowed by bisection.

use super::scene::{Grasp, Scene, Spot};
use crate::hand::{self, Closing, JawRun};
use crate::mechanics::{Assessment, Verdict};

/// What ends a finger's leeway.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum EndedBy {
    /// The stretch, or the run of placements of parallel jaws, ends.
    Stretch,
    /// The grasp is no longer closed.
    Closure,
    /// This other finger would be too near, counted from 0.
    Finger(usize),
}

/// One end of an interval of places.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct End {
    /// The last place where all is well, mm from the edge's first vertex.
    pub along_mm: f64,
    /// What would be lost beyond.
    pub by: EndedBy,
}

/// Where one finger may stand while the others stay.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Leeway {
    /// The end nearer to the edge's first vertex.
    pub back: End,
    /// The other end.
    pub on: End,
}

/// Steps in which the first loss is looked for where the places need not be one interval.
const STEPS: u32 = 256;
/// Halvings by which an end is narrowed: to less than 1e-11 of the way looked at.
const ROUNDS: u32 = 38;

/// The leeway of every finger; of parallel jaws, which move together, that of both. Nothing for a grasp that is not
/// closed or does not fit where it stands.
pub fn leeway(scene: &Scene, grasp: &Grasp) -> Option<Vec<Leeway>> {
    if !grasp.fits() || Assessment::verdict_at(&scene.wrenches(grasp)) != Verdict::Closed {
        return None;
    }
    match scene.setup().hand.closing {
        Closing::Free => (0..grasp.spots.len()).map(|finger| of_finger(scene, grasp, finger)).collect(),
        Closing::Parallel => of_jaws(scene, grasp),
    }
}

fn of_finger(scene: &Scene, grasp: &Grasp, finger: usize) -> Option<Leeway> {
    let spot = *grasp.spots.get(finger)?;
    let stretch = hand::stretch_around(scene.stretches(), spot.edge, spot.along_mm)?;
    let edge = scene.part().outline().edge(spot.edge)?;
    let moved = |along_mm: f64| {
        let mut moved = grasp.clone();
        moved.contacts[finger] = scene.contact(edge, along_mm);
        moved
    };
    let closed = |along_mm: f64| Assessment::verdict_at(&scene.wrenches(&moved(along_mm))) == Verdict::Closed;
    let others = || grasp.contacts.iter().enumerate().filter(|(other, _)| *other != finger);
    let too_near = |along_mm: f64| {
        let own = scene.contact(edge, along_mm);
        let clear = |(_, other): &(usize, &crate::mechanics::Contact)| {
            hand::apart(&scene.setup().hand, (own.point, own.normal), (other.point, other.normal))
        };
        others().find(|other| !clear(other)).map(|(other, _)| other)
    };
    let toward = |end_mm: f64| {
        let steps = if edge.arc().is_some() { STEPS } else { 1 };
        let mut end = End { along_mm: end_mm, by: EndedBy::Stretch };
        if let Some((inside, _)) = first_loss(closed, spot.along_mm, end.along_mm, steps) {
            end = End { along_mm: inside, by: EndedBy::Closure };
        }
        if let Some((inside, beyond)) = first_loss(|at| too_near(at).is_none(), spot.along_mm, end.along_mm, STEPS) {
            let by = too_near(beyond).map_or(EndedBy::Stretch, EndedBy::Finger);
            end = End { along_mm: inside, by };
        }
        end
    };
    Some(Leeway { back: toward(stretch.from_mm), on: toward(stretch.to_mm) })
}

fn of_jaws(scene: &Scene, grasp: &Grasp) -> Option<Vec<Leeway>> {
    let [a, b] = &grasp.spots[..] else { return None };
    let (run, swapped, here) = scene.jaw_runs().iter().find_map(|run| {
        let (swapped, at_mm) = place_on(scene, run, [*a, *b])?;
        Some((run, swapped, at_mm))
    })?;
    let spots = |at_mm: f64| {
        let [first, second] = run.along_mm(at_mm);
        let [own, other] = if swapped { [second, first] } else { [first, second] };
        [Spot { along_mm: own, ..*a }, Spot { along_mm: other, ..*b }]
    };
    let well = |at_mm: f64| {
        scene
            .grasp(&spots(at_mm))
            .is_ok_and(|moved| moved.fits() && Assessment::verdict_at(&scene.wrenches(&moved)) == Verdict::Closed)
    };
    let toward = |end_mm: f64| match first_loss(well, here, end_mm, STEPS) {
        Some((inside, _)) => (spots(inside), EndedBy::Closure),
        None => (spots(end_mm), EndedBy::Stretch),
    };
    let (start, end) = (toward(0.0), toward(run.length_mm()));
    let of = |finger: usize| {
        let [mut back, mut on] = [&start, &end].map(|(spots, by)| End { along_mm: spots[finger].along_mm, by: *by });
        if back.along_mm > on.along_mm {
            std::mem::swap(&mut back, &mut on);
        }
        Leeway { back, on }
    };
    Some(vec![of(0), of(1)])
}

/// Where two spots stand on a run, and whether they come in the other order than its stretches.
fn place_on(scene: &Scene, run: &JawRun, spots: [Spot; 2]) -> Option<(bool, f64)> {
    let length_mm = run.length_mm();
    let (start, end) = (run.along_mm(0.0), run.along_mm(length_mm));
    [false, true].into_iter().find_map(|swapped| {
        let [first, second] = if swapped { [spots[1], spots[0]] } else { spots };
        let own = [first, second];
        let on = |i: usize| scene.stretches().get(run.stretches[i]).is_some_and(|stretch| stretch.edge == own[i].edge);
        if !on(0) || !on(1) {
            return None;
        }
        // The finger that moves farther says where on the run.
        let wide = usize::from((end[1] - start[1]).abs() > (end[0] - start[0]).abs());
        let way = end[wide] - start[wide];
        let share = if way == 0.0 { 0.0 } else { (own[wide].along_mm - start[wide]) / way };
        let at_mm = (share * length_mm).clamp(0.0, length_mm);
        let there = run.along_mm(at_mm);
        let near = |i: usize| (there[i] - own[i].along_mm).abs() <= 1e-6 * (1.0 + own[i].along_mm.abs());
        (near(0) && near(1)).then_some((swapped, at_mm))
    })
}

/// The first place on the way from `here` to `end` where something is lost, between the last looked at where it is not and
/// the first where it is; nothing when all is well up to the end.
fn first_loss(well: impl Fn(f64) -> bool, here: f64, end: f64, steps: u32) -> Option<(f64, f64)> {
    let at = |step: u32| if step == steps { end } else { here + (end - here) * f64::from(step) / f64::from(steps) };
    let lost = (1..=steps).find(|&step| !well(at(step)))?;
    let (mut inside, mut beyond) = (at(lost - 1), at(lost));
    for _ in 0..ROUNDS {
        let middle = inside + (beyond - inside) / 2.0;
        if well(middle) {
            inside = middle;
        } else {
            beyond = middle;
        }
    }
    Some((inside, beyond))
}
