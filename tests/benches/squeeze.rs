//! How fast loads are answered: the batch solver against the linear program through good_lp, and a list of 500 grasps
//! under eight load cases against the same list without loads.
//!
//! Run: `cargo bench --bench squeeze`. Ratios are medians over rounds of (time of the program) / (time of the batch solver)
//! in the same round. Nothing is asserted about time; the two ways are checked to agree before they are timed.
#![expect(clippy::print_stdout, clippy::unwrap_used, reason = "a bench reports on stdout and may stop at once")]

#[path = "../common/mod.rs"]
mod common;

use common::{Dice, touch};
use holdwright::hand::{Drive, FingerCount, Tip};
use holdwright::mechanics::program::{self, Solved};
use holdwright::mechanics::spatial::{Hold, Pyramid, Wrench};
use holdwright::mechanics::squeeze::{Answer, Squeezer};
use holdwright::mechanics::{Contact, LoadCase, Wrenches};
use holdwright::part::{Part, PartDescription};
use holdwright::search::{Cancel, Key, Listing, Ranking, Scene, Setup, sample};
use std::hint::black_box;
use std::sync::Arc;
use std::time::Instant;

/// Grasps of each kind.
const GRASPS: usize = 200;
/// Loads put on each.
const LOADS: usize = 8;
/// Rounds of each comparison.
const ROUNDS: usize = 9;

/// Fingers that press inward round the origin.
fn fingers(dice: &mut Dice, count: usize, half_width_mm: f64) -> Wrenches {
    let contact = |i: usize, dice: &mut Dice| {
        let angle = std::f64::consts::TAU * (i as f64 + dice.even(-0.3, 0.3)) / count as f64;
        let (reach, lean) = (dice.even(20.0, 60.0), dice.even(-15.0, 15.0));
        let touch = touch(reach * angle.cos(), reach * angle.sin(), angle.to_degrees() + 180.0 + lean, 0.4);
        Contact { half_width_mm, ..touch }
    };
    let contacts: Vec<Contact> = (0..count).map(|i| contact(i, dice)).collect();
    Wrenches::new(&contacts, &common::frame(dice.even(-5.0, 5.0), dice.even(-5.0, 5.0), 50.0))
}

fn load(dice: &mut Dice) -> Wrench {
    Wrench::from_fn(|row, _| if row < 3 { dice.even(-8.0, 8.0) } else { dice.even(-2.0, 2.0) })
}

fn median(mut values: Vec<f64>) -> f64 {
    values.sort_by(f64::total_cmp);
    values[values.len() / 2]
}

/// Nanoseconds for each of so many items.
fn time(items: usize, work: impl Fn()) -> f64 {
    let start = Instant::now();
    work();
    start.elapsed().as_secs_f64() * 1e9 / items as f64
}

fn programs(name: &str, count: usize, half_width_mm: f64, drive: Drive) {
    let pyramid = Pyramid::new(8).unwrap();
    let mut dice = Dice::seeded(11);
    let wrenches: Vec<Wrenches> = (0..GRASPS).map(|_| fingers(&mut dice, count, half_width_mm)).collect();
    let holds: Vec<Hold> = wrenches.iter().map(|w| Hold::of(w, 0.05, &pyramid, drive)).collect();
    let loads: Vec<Wrench> = (0..LOADS).map(|_| load(&mut dice)).collect();
    let mut held = 0;
    for hold in &holds {
        let mut squeezer = Squeezer::new(*hold);
        for load in &loads {
            match (squeezer.squeeze(load), program::squeeze(hold, load)) {
                (Answer::Held(own), Solved::Answer(other)) => {
                    assert!((own.squeeze_n - other).abs() <= 1e-6 * (1.0 + other), "{} {other}", own.squeeze_n);
                    held += 1;
                }
                (Answer::Never { .. }, Solved::Infeasible) | (_, Solved::Inconclusive(_)) => {}
                (own, other) => panic!("{own:?} against {other:?}"),
            }
        }
    }
    let all = GRASPS * LOADS;
    let (mut warm, mut fresh, mut ratio) = (Vec::new(), Vec::new(), Vec::new());
    for _ in 0..ROUNDS {
        warm.push(time(all, || {
            for hold in &holds {
                let mut squeezer = Squeezer::new(*hold);
                loads.iter().for_each(|load| {
                    black_box(squeezer.squeeze(load));
                });
            }
        }));
        fresh.push(time(all, || {
            for hold in &holds {
                loads.iter().for_each(|load| {
                    black_box(Squeezer::new(*hold).squeeze(load));
                });
            }
        }));
        let slow = time(all, || {
            for hold in &holds {
                loads.iter().for_each(|load| {
                    black_box(program::squeeze(hold, load));
                });
            }
        });
        ratio.push(slow / warm[warm.len() - 1]);
    }
    let (warm, ratio) = (median(warm), median(ratio));
    println!(
        "{name:22} batch {:6.2} us a load ({:6.0} a second), from a fresh start {:6.2} us, program / batch {ratio:5.0}, {held} of {all} held",
        warm / 1e3,
        1e9 / warm,
        median(fresh) / 1e3
    );
}

/// A star-shaped plate of 24 edges.
fn plate() -> Part {
    let mut dice = Dice::seeded(3);
    let vertex = |i: usize, dice: &mut Dice| {
        let at = (f64::from(i as u32) + dice.even(-0.3, 0.3)) / 24.0 * std::f64::consts::TAU;
        let r = dice.even(30.0, 70.0);
        [1.3 * r * at.cos(), r * at.sin()]
    };
    let mut described = PartDescription::bare("plate", vec![(0..24).map(|i| vertex(i, &mut dice)).collect()]);
    described.thickness = Some(6.0);
    described.mass_kg = Some(0.3);
    Part::new(described).unwrap()
}

/// Eight cases; the last `any` of them ask for any direction, which is sixteen loads each.
fn cases(any: usize) -> Vec<LoadCase> {
    let one = |i: usize| {
        let part = i as f64;
        let mut case = LoadCase {
            name: format!("case {i}"),
            acceleration_m_s2: [part - 3.0, 2.0 - part, 0.5 * part],
            angular_acceleration_rad_s2: 5.0 * part,
            ..LoadCase::default()
        };
        if i >= 8 - any {
            case.any_direction_m_s2 = 2.0 + part;
        }
        case
    };
    (0..8).map(one).collect()
}

fn list(loads: Vec<LoadCase>, tip: Tip) -> (f64, Ranking) {
    let mut setup = Setup::default();
    setup.hand.fingers = FingerCount::new(3).unwrap();
    setup.hand.tip = tip;
    setup.hand.pad_width_mm = 4.0;
    setup.hand.pad_depth_mm = 4.0;
    setup.hand.force_limit_n = Some(60.0);
    setup.friction.mu = 0.3;
    setup.search.spacing_mm = Some(3.5);
    setup.loads = loads;
    let scene = Scene::new(Arc::new(plate()), setup).unwrap();
    let start = Instant::now();
    let ranking = sample(&scene, Key::Quality, Listing::Families, 500, &Cancel::default(), &|_| ()).unwrap();
    (start.elapsed().as_secs_f64() * 1e3, ranking)
}

fn lists(name: &str, tip: Tip) {
    for any in [0, 2, 8] {
        let (mut without, mut more) = (Vec::new(), Vec::new());
        let mut about = (0, 0, 0);
        for _ in 0..ROUNDS {
            let (plain, _) = list(Vec::new(), tip);
            let (loaded, ranking) = list(cases(any), tip);
            without.push(plain);
            more.push(loaded - plain);
            about = (ranking.grasps.len(), ranking.examined, ranking.families);
        }
        println!(
            "{name}: {} rows of {} families, {} sets: {:.0} ms without loads, {:.0} ms more with eight cases, {any} of them in any direction",
            about.0,
            about.2,
            about.1,
            median(without),
            median(more)
        );
    }
}

fn main() {
    programs("3 pins", 3, 0.0, Drive::Adjustable);
    programs("4 pins", 4, 0.0, Drive::Adjustable);
    programs("2 pads", 2, 5.0, Drive::Adjustable);
    programs("3 pads", 3, 5.0, Drive::Adjustable);
    programs("4 pins pressed alike", 4, 0.0, Drive::Equal);
    lists("pins", Tip::Pin);
    lists("pads", Tip::Pad);
}
