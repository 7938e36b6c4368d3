//! How long the proof of the best takes as edges and fingers grow, and how long plain enumeration of the grid that gives the
//! same gap would.
//!
//! Run: `cargo bench --bench best`. The outlines are random stars with mu 0.4; the gap is 1 % of the best quality q. A grid
//! of spacing s misses at most s / 2 over l (moving every contact by d changes the quality by at most d / l), so the
//! grid with the same gap has s = 0.02 q l. Its sets are counted; their cost is measured by a ranking of a sample in
//! the same round, on as many threads, and multiplied. Nothing is asserted about time.
#![expect(clippy::print_stdout, clippy::unwrap_used, reason = "a bench reports on stdout and may stop at once")]

#[path = "../common/mod.rs"]
mod common;

use common::Dice;
use holdwright::hand::FingerCount;
use holdwright::search::{Ask, Cancel, Key, Listing, Proved, Scene, Setup, Spot, Wanted, prove, rank, sample};
use std::sync::Arc;
use std::time::Instant;

/// Gap asked for.
const GAP: f64 = 0.01;
/// Boxes looked at, at most.
const BUDGET: u64 = 50_000_000;
/// Sets of the sample by which enumeration is timed.
const SAMPLE: u64 = 200_000;

fn scene(edges: usize, pins: usize) -> Scene {
    let mut dice = Dice::seeded(7 * edges as u64 + pins as u64);
    let vertex = |i: usize, dice: &mut Dice| {
        let at = (i as f64 + dice.even(-0.35, 0.35)) / edges as f64 * std::f64::consts::TAU;
        let r = dice.even(20.0, 70.0);
        [1.4 * r * at.cos(), r * at.sin()]
    };
    let part = common::part(vec![(0..edges).map(|i| vertex(i, &mut dice)).collect()]);
    let mut setup = Setup::default();
    setup.hand.fingers = FingerCount::new(pins).unwrap();
    setup.friction.mu = 0.4;
    setup.search.budget = SAMPLE;
    Scene::new(Arc::new(part), setup).unwrap()
}

fn proved(scene: &Scene, key: Key, want: usize) -> (Proved, f64) {
    let start = Instant::now();
    let proved =
        prove(scene, &Ask { key, want, gap: GAP, budget: BUDGET, known: &[] }, &Cancel::default(), &|_| {}).unwrap();
    (proved, start.elapsed().as_secs_f64())
}

/// Sets of the grid that gives the same gap.
fn sets(scene: &Scene, quality: f64, pins: usize) -> f64 {
    let spacing = 2.0 * GAP * quality * scene.frame().scale_mm;
    let sites: f64 = scene.stretches().iter().map(|stretch| (stretch.length_mm() / spacing).ceil() + 1.0).sum();
    (0..pins).map(|i| (sites - i as f64) / (i as f64 + 1.0)).product()
}

fn run(edges: usize, pins: usize, rounds: usize) {
    let scene = scene(edges, pins);
    let (mut times, mut ratios) = (Vec::new(), Vec::new());
    let (first, _) = proved(&scene, Key::Quality, 1);
    let count = sets(&scene, first.grasps[0].value, pins);
    for _ in 0..rounds {
        let (again, time) = proved(&scene, Key::Quality, 1);
        assert_eq!(first, again);
        let start = Instant::now();
        let sampled = sample(&scene, Key::Quality, Listing::Families, 1, &Cancel::default(), &|_| {}).unwrap();
        let per_set = start.elapsed().as_secs_f64() / sampled.examined as f64;
        times.push(time);
        ratios.push(per_set * count / time);
    }
    times.sort_by(f64::total_cmp);
    ratios.sort_by(f64::total_cmp);
    let middle = rounds / 2;
    println!(
        "{pins} pins on {edges} edges: {:.1} ms ({:.1} to {:.1}), {} boxes, {} families screened, {} opened, best {:.5}, none above {:.5}, proved {}; \
         the grid of the same gap has {count:.1e} sets, {:.1e} times as long",
        1e3 * times[middle],
        1e3 * times[0],
        1e3 * times[rounds - 1],
        first.boxes,
        first.families,
        first.opened,
        first.grasps[0].value,
        first.best_bound.unwrap(),
        first.proved,
        ratios[middle],
    );
}

/// A whole list, by each key: no grid to compare with, since only the quality has a bound for one.
fn list(edges: usize, pins: usize, want: usize) {
    let scene = scene(edges, pins);
    for key in [Key::Quality, Key::QualityPerFinger, Key::Friction, Key::Placement] {
        let (found, time) = proved(&scene, key, want);
        println!(
            "{pins} pins on {edges} edges by {}, the best {want} families: {:.1} ms, {} boxes, {} opened, proved {}",
            key.word(),
            1e3 * time,
            found.boxes,
            found.opened,
            found.proved,
        );
    }
}

/// A knob turned step by step, as in the workbench: each ranking begins with the list before it.
fn steps(edges: usize, pins: usize) {
    let first = scene(edges, pins);
    let ranked = |scene: &Scene, most: usize, known: &[Vec<Spot>]| {
        let wanted = Wanted { known, ..Wanted::families(Key::Quality, most) };
        let start = Instant::now();
        let ranking = rank(scene, &wanted, &Cancel::default(), &|_| {}).unwrap();
        let known: Vec<Vec<Spot>> = ranking.grasps.iter().map(|row| row.grasp.spots.clone()).collect();
        (known, start.elapsed().as_secs_f64(), ranking.proof.is_some_and(|proof| proof.list_proved))
    };
    for most in [20, 200] {
        let (mut known, cold, _) = ranked(&first, most, &[]);
        let mut times = Vec::new();
        let mut all_proved = true;
        for step in 1..=15 {
            let mut setup = first.setup().clone();
            setup.friction.mu += 0.01 * f64::from(step);
            setup.search.budget = 2_000_000;
            let turned = Scene::new(Arc::clone(first.part()), setup).unwrap();
            let (next, time, proved) = ranked(&turned, most, &known);
            known = next;
            times.push(time);
            all_proved &= proved;
        }
        times.sort_by(f64::total_cmp);
        println!(
            "{pins} pins on {edges} edges, the best {most} families: {:.1} ms at first, {:.1} ms ({:.1} to {:.1}) for a step of mu, all proved: {all_proved}",
            1e3 * cold,
            1e3 * times[times.len() / 2],
            1e3 * times[0],
            1e3 * times[times.len() - 1],
        );
    }
}

fn main() {
    // `cargo test --benches` runs this too: once round, on the small ones.
    let timed = std::env::args().any(|argument| argument == "--bench");
    // `ONLY=3x60` runs one case, for a profiler.
    let only = std::env::var("ONLY").ok();
    let wanted = |pins: usize, edges: usize| only.as_ref().is_none_or(|only| *only == format!("{pins}x{edges}"));
    let all = [(3, 60), (3, 200), (3, 400), (4, 20), (4, 60), (5, 20), (2, 2000), (4, 200), (6, 20)];
    for (pins, edges) in all.into_iter().filter(|&(pins, edges)| wanted(pins, edges)) {
        if timed || edges <= 20 && pins < 5 {
            run(edges, pins, if timed { 5 } else { 1 });
        }
    }
    if timed && only.as_ref().is_none_or(|only| only == "steps") {
        steps(60, 3);
    }
    for (pins, edges) in [(3, 60), (4, 20)].into_iter().filter(|_| timed && only.is_none()) {
        for want in [1, 20] {
            list(edges, pins, want);
        }
    }
}
