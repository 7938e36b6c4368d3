//! From one grasp to others near it: fingers walked along the outline, a finger more, the best that small steps lead to.
//!
//! What a person does by hand. Fingers walk from stretch to stretch in the order of the part file; parallel jaws walk
//! together, from run to run.

use super::order::Key;
use super::scene::{Scene, Spot};
use super::sites;
use crate::hand::{Closing, FingerCount, Stretch};
use crate::mechanics::{Assessment, Holding, MARGINAL, quality};

/// A step, mm, that counts as having reached the end of a stretch.
const AT_END_MM: f64 = 1e-9;

/// The grasp with one finger moved along its edge by some mm, or to the end of its stretch where that comes first; a finger
/// that stands at the end already goes on to the beginning of the next stretch. Parallel jaws move together. Nothing where
/// there is no stretch to stand on.
pub fn walked(scene: &Scene, spots: &[Spot], finger: usize, by_mm: f64) -> Option<Vec<Spot>> {
    if scene.setup().hand.closing == Closing::Parallel {
        let way = Way::jaws(scene, spots);
        let (run, u) = way.walked(by_mm)?;
        return Some(jaws_at(scene, run, u));
    }
    let way = Way::finger(scene, *spots.get(finger)?);
    let (stretch, along_mm) = way.walked(by_mm)?;
    Some(with(spots, finger, Spot { edge: scene.stretches()[stretch].edge, along_mm }))
}

/// The grasp with one finger in the middle of the next stretch, or of the one before; jaws in the middle of a run.
pub fn on_next_edge(scene: &Scene, spots: &[Spot], finger: usize, forward: bool) -> Option<Vec<Spot>> {
    if scene.setup().hand.closing == Closing::Parallel {
        let (run, u) = Way::jaws(scene, spots).next(forward)?;
        return Some(jaws_at(scene, run, u));
    }
    let way = Way::finger(scene, *spots.get(finger)?);
    let (stretch, along_mm) = way.next(forward)?;
    Some(with(spots, finger, Spot { edge: scene.stretches()[stretch].edge, along_mm }))
}

fn with(spots: &[Spot], finger: usize, spot: Spot) -> Vec<Spot> {
    let mut moved = spots.to_vec();
    moved[finger] = spot;
    moved
}

fn jaws_at(scene: &Scene, run: usize, u_mm: f64) -> Vec<Spot> {
    let run = &scene.jaw_runs()[run];
    let along = run.along_mm(u_mm);
    let spot = |finger: usize| Spot { edge: scene.stretches()[run.stretches[finger]].edge, along_mm: along[finger] };
    vec![spot(0), spot(1)]
}

/// Intervals one after the other, and where something stands on them.
struct Way {
    /// From and to, mm.
    spans: Vec<[f64; 2]>,
    /// Interval and position; between intervals the one that comes next, at its beginning.
    on: usize,
    at_mm: f64,
    /// Stands on an interval, not between two.
    inside: bool,
}

impl Way {
    fn finger(scene: &Scene, spot: Spot) -> Self {
        let stretches = scene.stretches();
        let spans = stretches.iter().map(|stretch| [stretch.from_mm, stretch.to_mm]).collect();
        let here = |stretch: &Stretch| stretch.edge == spot.edge && stretch.room_mm(spot.along_mm) >= -AT_END_MM;
        match stretches.iter().position(here) {
            Some(on) => Self { spans, on, at_mm: spot.along_mm, inside: true },
            None => {
                let before = |s: &Stretch| s.edge < spot.edge || s.edge == spot.edge && s.to_mm < spot.along_mm;
                let next = stretches.partition_point(before);
                let on = if next < stretches.len() { next } else { 0 };
                Self { at_mm: stretches.get(on).map_or(0.0, |stretch| stretch.from_mm), spans, on, inside: false }
            }
        }
    }

    fn jaws(scene: &Scene, spots: &[Spot]) -> Self {
        let runs = scene.jaw_runs();
        let spans = runs.iter().map(|run| [0.0, run.length_mm()]).collect();
        let stand = runs.iter().enumerate().find_map(|(number, run)| {
            let edges = run.stretches.map(|stretch| scene.stretches()[stretch].edge);
            let [a, b] = spots else { return None };
            // Either jaw may be the first.
            let along = match edges {
                _ if edges == [a.edge, b.edge] => [a.along_mm, b.along_mm],
                _ if edges == [b.edge, a.edge] => [b.along_mm, a.along_mm],
                _ => return None,
            };
            run.u_mm(along).map(|u| (number, u))
        });
        match stand {
            Some((on, at_mm)) => Self { spans, on, at_mm, inside: true },
            None => Self { spans, on: 0, at_mm: 0.0, inside: false },
        }
    }

    fn walked(&self, by_mm: f64) -> Option<(usize, f64)> {
        let [from, to] = *self.spans.get(self.on)?;
        if !self.inside {
            return Some((self.on, from));
        }
        let end = if by_mm > 0.0 { to } else { from };
        if (end - self.at_mm).abs() > AT_END_MM {
            return Some((self.on, (self.at_mm + by_mm).clamp(from, to)));
        }
        let on = self.beside(by_mm > 0.0);
        let [from, to] = self.spans[on];
        Some((on, if by_mm > 0.0 { from } else { to }))
    }

    fn next(&self, forward: bool) -> Option<(usize, f64)> {
        let on = if self.inside || !forward { self.beside(forward) } else { self.on };
        let [from, to] = *self.spans.get(on)?;
        Some((on, f64::midpoint(from, to)))
    }

    fn beside(&self, forward: bool) -> usize {
        let count = self.spans.len().max(1);
        if forward { (self.on + 1) % count } else { (self.on + count - 1) % count }
    }
}

/// How far up a grasp is, how good there, and what tells equals apart.
type Merit = (u8, f64, f64);

/// How good a grasp is on the way up: fingers that do not fit, then open ones by how near they are to closing, then those
/// below a floor, then those that do not hold every load, then by the key; larger is better.
fn merit(scene: &Scene, key: Key, spots: &[Spot]) -> Option<Merit> {
    let grasp = scene.grasp(spots).ok()?;
    if !grasp.fits() {
        let off = grasp.rooms_mm.iter().filter(|room| **room < 0.0).count() + grasp.too_near.len();
        return Some((0, -(off as f64), 0.0));
    }
    let wrenches = scene.wrenches(&grasp);
    let planar = quality::planar(&wrenches);
    let signed = planar.signed_quality;
    if signed <= MARGINAL {
        return Some((1, signed, 0.0));
    }
    // Equals are told apart by placement tolerance, as in every list; as on straight edges, which is near enough here.
    let closure_mm = planar.torque_up.min(planar.torque_down) * scene.frame().scale_mm;
    let place_mm = grasp.rooms_mm.iter().copied().fold(closure_mm, f64::min);
    let floors = &scene.setup().floors;
    if signed < floors.quality || place_mm < floors.placement_mm {
        return Some((2, place_mm.min(floors.placement_mm), signed));
    }
    let holding = scene.holding(&grasp, &wrenches);
    if holding.as_ref().is_some_and(|holding| !holding.held()) {
        return Some((3, signed, place_mm));
    }
    let value = match key {
        Key::Quality => signed,
        Key::Squeeze => holding.as_ref().and_then(Holding::squeeze_n).map_or(f64::NEG_INFINITY, |squeeze_n| -squeeze_n),
        Key::LoadMargin => holding.as_ref().and_then(Holding::load_margin).unwrap_or(f64::INFINITY),
        Key::QualityPerFinger | Key::Friction | Key::Placement => {
            let mut read = Assessment::of(&wrenches, scene.frame(), scene.setup().friction.mu, &grasp.rooms_mm);
            if let Some(holding) = holding {
                read.hold(holding, &wrenches, scene.setup().friction.mu);
            }
            match key {
                Key::QualityPerFinger => read.quality_per_finger,
                Key::Friction => -read.friction_needed.unwrap_or(0.0),
                _ => read.placement.mm,
            }
        }
    };
    Some((4, value, place_mm))
}

fn better(a: Merit, b: Merit) -> bool {
    let above = |a: f64, b: f64| a > b + 1e-9 * (1.0 + b.abs());
    a.0 > b.0 || a.0 == b.0 && (above(a.1, b.1) || !above(b.1, a.1) && above(a.2, b.2))
}

/// Steps of a climb get half as long so many times.
const HALVINGS: u32 = 12;
/// Grasps looked at in a climb, at most: a person waits for it.
const MOST_LOOKS: usize = 4000;

/// The best grasp that steps along the stretches lead to, of one finger or of two together, those not in `locked` alone.
/// From an open grasp it first climbs to a closed one. A local best: [`super::prove`] tells of the whole outline.
pub fn climbed(scene: &Scene, key: Key, spots: &[Spot], locked: &[bool]) -> Option<Vec<Spot>> {
    let parallel = scene.setup().hand.closing == Closing::Parallel;
    let free: Vec<usize> = (0..spots.len()).filter(|&i| !locked.get(i).copied().unwrap_or(false)).collect();
    let mut moves: Vec<Vec<(usize, f64)>> = Vec::new();
    for (n, &a) in free.iter().enumerate() {
        for way in [1.0, -1.0] {
            moves.push(vec![(a, way)]);
            if parallel {
                continue;
            }
            moves.extend(free[n + 1..].iter().flat_map(|&b| [1.0, -1.0].map(|other| vec![(a, way), (b, other)])));
        }
        if parallel {
            break;
        }
    }
    let mut best = spots.to_vec();
    let mut own = merit(scene, key, &best)?;
    let lengths = scene.stretches().iter().map(Stretch::length_mm);
    let mut step_mm = lengths.fold(0.0, f64::max) / 4.0;
    let mut looks = 0;
    for _ in 0..HALVINGS {
        loop {
            let before = own;
            for steps in &moves {
                looks += 1;
                let tried = steps.iter().try_fold(best.clone(), |spots, &(finger, way)| {
                    let moved = walked(scene, &spots, finger, way * step_mm)?;
                    // A climb stays on the edges it began on.
                    let stays = |(a, b): (&Spot, &Spot)| a.edge == b.edge;
                    Some(if moved.iter().zip(&spots).all(stays) { moved } else { spots })
                });
                if let Some(tried) = tried
                    && let Some(merit) = merit(scene, key, &tried)
                    && better(merit, own)
                {
                    (best, own) = (tried, merit);
                }
            }
            if !better(own, before) || looks > MOST_LOOKS {
                break;
            }
        }
        step_mm /= 2.0;
    }
    Some(best)
}

/// The place among the sites where one finger more helps most; nothing where there is none, or no more fingers.
pub fn with_one_more(scene: &Scene, key: Key, spots: &[Spot]) -> Option<Vec<Spot>> {
    FingerCount::new(spots.len() + 1)?;
    if scene.setup().hand.closing == Closing::Parallel {
        return None;
    }
    let spacing_mm = scene.setup().search.spacing_for(scene.part());
    let mut best: Option<(Vec<Spot>, Merit)> = None;
    for stretch in scene.stretches() {
        for along_mm in sites::positions(stretch.from_mm, stretch.to_mm, spacing_mm) {
            let mut tried = spots.to_vec();
            tried.push(Spot { edge: stretch.edge, along_mm });
            if let Some(merit) = merit(scene, key, &tried)
                && best.as_ref().is_none_or(|(_, own)| better(merit, *own))
            {
                best = Some((tried, merit));
            }
        }
    }
    best.map(|(spots, _)| spots)
}
