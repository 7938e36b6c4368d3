//! How much faster the kernel is than the other ways to the same numbers, and how long a whole ranking takes.
//!
//! Run: `cargo bench --bench kernel`. Every ratio is the median over rounds of (time of the other way) / (time of the
//! kernel) in the same round, so that a machine that slows down for a while slows both; the range over all rounds stands
//! beside it. Nothing is asserted about time. Both ways are checked to agree before they are timed.
#![expect(clippy::print_stdout, clippy::unwrap_used, reason = "a bench reports on stdout and may stop at once")]

#[path = "../common/mod.rs"]
mod common;

use common::Dice;
use holdwright::mechanics::program::{self, Solved};
use holdwright::mechanics::{Contact, Frame, MARGINAL, Wrenches, quality};
use holdwright::part::Part;
use holdwright::search::{Cancel, Key, Listing, Ranking, Scene, Setup, sample};
use std::hint::black_box;
use std::sync::Arc;
use std::time::Instant;

/// Grasps of each set.
const GRASPS: usize = 3000;
/// Rounds of each comparison.
const ROUNDS: usize = 15;
/// Sites of the ranking: 200 over 3 is 1,313,400 candidate sets.
const SITES: usize = 200;
/// Rounds of the ranking.
const RANKINGS: usize = 9;

/// A star-shaped polygon with no symmetry.
fn polygon(dice: &mut Dice, corners: usize) -> Part {
    let vertex = |i: usize, dice: &mut Dice| {
        let at = (i as f64 + dice.even(-0.35, 0.35)) / corners as f64 * std::f64::consts::TAU;
        let r = dice.even(20.0, 70.0);
        [1.4 * r * at.cos(), r * at.sin()]
    };
    common::part(vec![(0..corners).map(|i| vertex(i, dice)).collect()])
}

/// Pins anywhere on the outline.
fn grasp(dice: &mut Dice, part: &Part, pins: usize, mu: f64) -> (Vec<Contact>, Frame) {
    let outline = part.outline();
    let contacts = (0..pins)
        .map(|_| {
            let mut at = dice.even(0.0, outline.perimeter_mm());
            let last = outline.edges().len() - 1;
            let edge = outline
                .edges()
                .iter()
                .enumerate()
                .find(|(i, edge)| {
                    let here = at <= edge.length_mm() || *i == last;
                    at -= if here { 0.0 } else { edge.length_mm() };
                    here
                })
                .unwrap()
                .1;
            Contact { point: edge.point_at(at), normal: edge.normal_at(at), mu, half_width_mm: 0.0 }
        })
        .collect();
    (contacts, Frame { about: part.com(), scale_mm: part.reach_mm() })
}

/// Random grasps on random polygons; closed ones only where asked.
fn grasps(seed: u64, pins: usize, closed_only: bool) -> Vec<(Vec<Contact>, Frame)> {
    let mut dice = Dice::seeded(seed);
    let mut all = Vec::with_capacity(GRASPS);
    while all.len() < GRASPS {
        let corners = 5 + dice.pick(8);
        let part = polygon(&mut dice, corners);
        for _ in 0..20 {
            let (contacts, frame) = grasp(&mut dice, &part, pins, 0.3);
            let closed = quality::planar(&Wrenches::new(&contacts, &frame)).signed_quality > MARGINAL;
            if closed || !closed_only {
                all.push((contacts, frame));
            }
        }
    }
    all.truncate(GRASPS);
    all
}

/// Closure and both senses of pure torque by linear programs.
fn programs(wrenches: &Wrenches) -> f64 {
    let closed = matches!(program::closure(wrenches), Solved::Answer(_));
    let torque = |sense| match program::pure_torque(wrenches, sense) {
        Solved::Answer(torque) => torque,
        _ => 0.0,
    };
    f64::from(u8::from(closed)) + torque(1.0).min(torque(-1.0))
}

/// Nanoseconds for each item.
fn time<T>(items: &[T], work: impl Fn(&T) -> f64) -> f64 {
    let start = Instant::now();
    let sum: f64 = items.iter().map(|item| work(black_box(item))).sum();
    black_box(sum);
    start.elapsed().as_secs_f64() * 1e9 / items.len() as f64
}

struct Spread {
    median: f64,
    low: f64,
    high: f64,
}

fn spread(mut values: Vec<f64>) -> Spread {
    values.sort_by(f64::total_cmp);
    Spread { median: values[values.len() / 2], low: values[0], high: values[values.len() - 1] }
}

fn agree(wrenches: &[Wrenches]) {
    for w in wrenches {
        let (kernel, plain) = (quality::planar(w), quality::by_definition(w.generators()));
        common::assert_close(kernel.signed_quality.max(0.0), plain.signed_quality.max(0.0), 1e-12, 1e-10);
        if kernel.signed_quality > 1e-6 {
            common::assert_close(programs(w), 1.0 + kernel.torque_up.min(kernel.torque_down), 1e-9, 1e-9);
        }
    }
}

fn compare(pins: usize, closed_only: bool, rounds: usize) {
    let grasps = grasps(100 + pins as u64, pins, closed_only);
    let wrenches: Vec<Wrenches> = grasps.iter().map(|(contacts, frame)| Wrenches::new(contacts, frame)).collect();
    agree(&wrenches);
    let closed = wrenches.iter().filter(|w| quality::planar(w).signed_quality > MARGINAL).count();
    let mut times: [Vec<f64>; 4] = Default::default();
    for _ in 0..rounds {
        times[0].push(time(&wrenches, |w| quality::planar(w).signed_quality));
        times[1]
            .push(time(&grasps, |(contacts, frame)| quality::planar(&Wrenches::new(contacts, frame)).signed_quality));
        times[2].push(time(&wrenches, |w| quality::by_definition(w.generators()).signed_quality));
        times[3].push(time(&wrenches, programs));
    }
    let set = if closed_only { "closed" } else { "any" };
    let at = |way: usize| spread(times[way].clone()).median;
    println!(
        "{pins} pins, {set:6} ({closed} of {GRASPS} closed): kernel {:.0} ns, with wrenches {:.0} ns, definition {:.0} ns, programs {:.0} ns",
        at(0),
        at(1),
        at(2),
        at(3),
    );
    let total: Vec<f64> = times[2].iter().zip(&times[3]).map(|(a, b)| a + b).collect();
    for (name, other) in [("definition", &times[2]), ("programs", &times[3]), ("programs + definition", &total)] {
        let ratio = |of: usize| spread(other.iter().zip(&times[of]).map(|(a, b)| a / b).collect());
        let (kernel, whole) = (ratio(0), ratio(1));
        println!(
            "  {name:22} / kernel {:7.1} ({:.1} to {:.1})   / kernel with wrenches {:7.1} ({:.1} to {:.1})",
            kernel.median, kernel.low, kernel.high, whole.median, whole.low, whole.high,
        );
    }
}

/// Peak memory of this process in MB, where the system tells it.
fn peak_mb() -> Option<f64> {
    let status = std::fs::read_to_string("/proc/self/status").ok()?;
    let line = status.lines().find(|line| line.starts_with("VmHWM:"))?;
    Some(line.split_whitespace().nth(1)?.parse::<f64>().ok()? / 1024.0)
}

fn ranked(scene: &Scene) -> Ranking {
    sample(scene, Key::Quality, Listing::Families, 20, &Cancel::default(), &|_| {}).unwrap()
}

/// A scene of a random polygon on which some spacing gives so many sites, or nearly.
///
/// Every stretch holds an odd number of sites (ends, middle, and pairs between), so an even number of corners is needed
/// for an even number of sites.
fn scene_with(sites: usize) -> Scene {
    let tried = (200..230).map(|seed| scene_of(&Arc::new(polygon(&mut Dice::seeded(seed), 12)), sites));
    tried.max_by_key(|(_, found)| *found).unwrap().0
}

/// A scene with as many sites as asked for, or a few less, and their number.
fn scene_of(part: &Arc<Part>, sites: usize) -> (Scene, usize) {
    let scene = |spacing: f64, budget: u64| {
        let mut setup = Setup::default();
        setup.search.spacing_mm = Some(spacing);
        setup.search.budget = budget;
        Scene::new(part.clone(), setup).unwrap()
    };
    let (mut fine, mut coarse) = (0.1, part.outline().perimeter_mm());
    for _ in 0..60 {
        let middle = (fine + coarse) / 2.0;
        if ranked(&scene(middle, 1)).sites <= sites { coarse = middle } else { fine = middle }
    }
    let found = ranked(&scene(coarse, 1)).sites;
    (scene(coarse, u64::MAX), found)
}

fn rankings(rounds: usize) {
    let scene = scene_with(SITES);
    let before = peak_mb();
    let pools: Vec<_> =
        [1, 2].map(|threads| rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap()).into();
    let mut times: [Vec<f64>; 2] = Default::default();
    let mut results = Vec::new();
    for _ in 0..rounds {
        for (pool, times) in pools.iter().zip(&mut times) {
            let start = Instant::now();
            let ranking = pool.install(|| ranked(&scene));
            times.push(start.elapsed().as_secs_f64() * 1e3);
            results.push(ranking);
        }
    }
    assert!(results.windows(2).all(|pair| pair[0] == pair[1]), "the ranking depends on the threads");
    let ranking = &results[0];
    println!(
        "ranking: {} sites, {} sets looked at, {} closed, {} families, {} inconclusive, complete {}",
        ranking.sites, ranking.examined, ranking.closed, ranking.families, ranking.inconclusive, ranking.complete
    );
    let speedup = spread(times[0].iter().zip(&times[1]).map(|(a, b)| a / b).collect());
    let (one, two) = (spread(times[0].clone()), spread(times[1].clone()));
    println!(
        "  1 thread {:.0} ms ({:.0} to {:.0}), 2 threads {:.0} ms ({:.0} to {:.0}), 1 / 2 threads {:.2} ({:.2} to {:.2})",
        one.median, one.low, one.high, two.median, two.low, two.high, speedup.median, speedup.low, speedup.high
    );
    if let (Some(before), Some(after)) = (before, peak_mb()) {
        println!("  peak memory {after:.1} MB, before the first ranking {before:.1} MB");
    }
}

fn main() {
    // `cargo test --benches` runs this too: once round, to see that it still works.
    let timed = std::env::args().any(|argument| argument == "--bench");
    rankings(if timed { RANKINGS } else { 1 });
    for pins in [3, 4, 6] {
        for closed_only in [true, false] {
            compare(pins, closed_only, if timed { ROUNDS } else { 1 });
        }
    }
}
