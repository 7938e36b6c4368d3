//! The bound of a box is never below the merit of a placement in it, down to tiny boxes, and closes in on it.

use super::cover::Cover;
use super::gauge::Spans;
use super::plot::Plot;
use super::*;
use crate::hand::{FingerCount, Tip};
use crate::mechanics::LoadCase;
use crate::part::{ArcDescription, Part, PartDescription};
use crate::search::Setup;
use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::{Rng, SeedableRng};
use std::f64::consts::TAU;
use std::sync::Arc;

struct Dice(ChaCha8Rng);

impl Dice {
    fn even(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * (self.0.next_u64() >> 11) as f64 / (1u64 << 53) as f64
    }

    fn pick(&mut self, count: usize) -> usize {
        (self.0.next_u64() % count as u64) as usize
    }
}

/// Outlines with and without arcs, pins and pads, one friction and several, gaps, floors and loads.
fn scene(dice: &mut Dice, with_loads: bool) -> Scene {
    let corners = 4 + dice.pick(4);
    let vertex = |i: usize, dice: &mut Dice| {
        let at = (i as f64 + dice.even(-0.3, 0.3)) / corners as f64 * TAU;
        let r = dice.even(25.0, 50.0);
        [1.2 * r * at.cos(), r * at.sin()]
    };
    let mut described = PartDescription::bare("test part", vec![(0..corners).map(|i| vertex(i, dice)).collect()]);
    for edge in 0..corners {
        if dice.pick(4) == 0 {
            described.arcs.push(ArcDescription { ring: 0, edge, bulge: dice.even(0.02, 0.25) });
        }
        if dice.pick(4) == 0 {
            described.edge_friction.push((0, edge, dice.even(0.1, 1.0)));
        }
    }
    if dice.pick(2) == 0 {
        described.edge_friction.clear();
    }
    let mut setup = Setup::default();
    setup.hand.fingers = FingerCount::new(2 + dice.pick(3)).unwrap();
    setup.friction.mu = dice.even(0.1, 0.9);
    match dice.pick(3) {
        0 => {
            setup.hand.tip = Tip::Pad;
            (setup.hand.pad_width_mm, setup.hand.pad_depth_mm) = (4.0, 3.0);
        }
        1 => (setup.hand.pin_radius_mm, setup.hand.gap_mm) = (1.5, 4.0),
        _ => {}
    }
    if dice.pick(3) == 0 {
        (setup.floors.friction_margin, setup.floors.placement_mm) = (1.2, 0.5);
    }
    if with_loads {
        described.thickness = Some(6.0);
        described.mass_kg = Some(0.3);
        setup.hand.force_limit_n = Some(40.0);
        setup.loads = vec![LoadCase { acceleration_m_s2: [2.0, -4.0, 1.0], ..LoadCase::default() }];
    }
    let part = Part::new(described.clone()).or_else(|_| {
        // Arcs that cross: the same without them.
        described.arcs.clear();
        Part::new(described)
    });
    Scene::new(Arc::new(part.unwrap()), setup).unwrap()
}

fn family(dice: &mut Dice, setting: &Setting<'_>) -> Family {
    let mut on: Vec<u32> = (0..setting.fingers).map(|_| dice.pick(setting.rails.len()) as u32).collect();
    on.sort_unstable();
    Family::new(&on)
}

/// A box of a family about a random place, as wide as `share` of each stretch.
fn piece(dice: &mut Dice, plot: &Plot<'_>, share: f64) -> Spans {
    let mut spans = plot.whole();
    for span in &mut spans[..plot.dims] {
        let [from, to] = *span;
        let width = share * (to - from);
        let start = match dice.pick(4) {
            0 => from,
            1 => to - width,
            _ => dice.even(from, to - width),
        };
        *span = [start, (start + width).min(to)];
    }
    spans
}

fn inside(dice: &mut Dice, spans: &Spans) -> super::gauge::Spots {
    spans.map(|[from, to]| match dice.pick(4) {
        0 => from,
        1 => to,
        _ => dice.even(from, to).clamp(from, to),
    })
}

/// Bounds against placements, so many scenes by a key.
fn check(key: Key, seed: u64, rounds: usize, with_loads: bool) {
    let mut dice = Dice(ChaCha8Rng::seed_from_u64(seed));
    let (mut counted, mut far, mut tiny) = (0, 0, 0);
    for _ in 0..rounds {
        let scene = scene(&mut dice, with_loads);
        let setting = Setting::new(&scene, key, 0.01);
        if setting.rails.is_empty() {
            continue;
        }
        for _ in 0..12 {
            let mut plot = Plot::new(&setting, &family(&mut dice, &setting));
            for share in [1.0, 0.3, 0.05, 1e-3, 1e-6, 1e-9] {
                let spans = piece(&mut dice, &plot, share);
                let bound = plot.bound(&spans, f64::NEG_INFINITY).merit;
                let mut best = f64::NEG_INFINITY;
                for _ in 0..6 {
                    let at = inside(&mut dice, &spans);
                    let Some(merit) = plot.value(&at, f64::NEG_INFINITY) else { continue };
                    counted += 1;
                    best = best.max(merit);
                    assert!(!plot.is_crowded(&spans), "a crowded box holds a grasp");
                    let hair = 1e-9 * (1.0 + merit.abs());
                    assert!(merit <= bound + hair, "{key:?} {merit} above {bound}, box of {share}");
                    // A bound that may stop at a level says no more than the level.
                    for below in [0.1, 0.01, 1e-4, 1e-7] {
                        let level = merit - below * merit.abs().max(1e-3);
                        let stopped = plot.bound(&spans, level).merit;
                        assert!(stopped > level && merit <= stopped + hair, "{key:?} {merit} {level} {stopped}");
                    }
                    // Nor may one that stops at a level above say less than the merit.
                    let stopped = plot.bound(&spans, merit + 0.003 * merit.abs()).merit;
                    assert!(merit <= stopped + hair, "{key:?} {merit} {stopped}");
                }
                if share <= 1e-9 && best > f64::NEG_INFINITY {
                    // Under loads the friction on arcs is bounded by closure alone.
                    let open = with_loads && key == Key::Friction;
                    // The brackets of a friction, and of a placement on arcs, are no narrower than the gap asks for.
                    let coarse = matches!(key, Key::Placement | Key::Friction);
                    let most = if coarse { 2e-3 } else { 1e-5 } * (1.0 + best.abs());
                    far += usize::from(bound - best > most && !open);
                    tiny += 1;
                }
            }
        }
    }
    assert!(counted > 20 * rounds, "{counted} placements");
    assert!(far == 0 && tiny > rounds, "{far} of {tiny} tiny boxes have bounds far above their grasps");
}

#[test]
fn a_box_bounds_the_quality_of_what_is_in_it() {
    check(Key::Quality, 1, 60, false);
}

#[test]
fn a_box_bounds_the_quality_per_finger() {
    check(Key::QualityPerFinger, 2, 30, false);
}

#[test]
fn a_box_bounds_the_placement() {
    check(Key::Placement, 3, 40, false);
}

#[test]
fn a_box_bounds_the_friction() {
    check(Key::Friction, 4, 30, false);
}

#[test]
fn a_box_bounds_what_loads_ask() {
    check(Key::Squeeze, 5, 20, true);
    check(Key::LoadMargin, 8, 20, true);
    check(Key::Friction, 6, 12, true);
    check(Key::Quality, 7, 12, true);
}

/// What the directions exclude holds nothing above the level.
#[test]
fn families_excluded_by_directions_are_behind() {
    for key in Key::ALL {
        let mut dice = Dice(ChaCha8Rng::seed_from_u64(11));
        let (mut excluded, mut closed) = (0, 0);
        for _ in 0..25 {
            let scene = scene(&mut dice, key.is_by_squeeze());
            let setting = Setting::new(&scene, key, 0.01);
            if setting.rails.is_empty() {
                continue;
            }
            let families: Vec<Family> = (0..30).map(|_| family(&mut dice, &setting)).collect();
            let mut best: Vec<f64> = Vec::new();
            for family in &families {
                let mut plot = Plot::new(&setting, family);
                let whole = plot.whole();
                let values = (0..12).filter_map(|_| plot.value(&inside(&mut dice, &whole), f64::NEG_INFINITY));
                best.push(values.fold(f64::NEG_INFINITY, f64::max));
            }
            let mut sorted = best.clone();
            sorted.sort_by(f64::total_cmp);
            let level = sorted[sorted.len() * 2 / 3];
            let level = if level.is_finite() { level } else { setting.goal.enough(None, None) };
            let cover = Cover::above(&setting, level);
            for (family, merit) in families.iter().zip(&best) {
                let first = family.stretches()[0];
                let kept = cover.beginning_with(first, setting.fingers, &setting, u64::MAX).kept;
                if !kept.contains(family) {
                    excluded += 1;
                    let hair = if level.is_finite() { 1e-9 * (1.0 + level.abs()) } else { 0.0 };
                    assert!(*merit <= level + hair, "{key:?} {merit} {level}");
                }
                closed += usize::from(*merit > level);
            }
        }
        assert!(excluded > 50 && closed > 20, "{key:?}: {excluded} excluded, {closed} above the level");
    }
}
