//! Squeeze, load margin and what they rest on: two ways of our own on random grasps.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test stops at the first surprise")]

mod common;

use common::{Dice, assert_close, frame};
use holdwright::hand::Drive;
use holdwright::mechanics::program::{self, Solved};
use holdwright::mechanics::spatial::{Hold, Pyramid, Wrench};
use holdwright::mechanics::squeeze::{Answer, Squeezer};
use holdwright::mechanics::{Contact, Frame};

/// Random fingers about the origin, many of them pressing inward, and a random load.
fn toss(dice: &mut Dice) -> (Vec<Contact>, Frame, Option<f64>, Pyramid, Drive) {
    let count = 2 + dice.pick(5);
    let pads = dice.pick(2) == 0;
    let half_width_mm = if pads { dice.even(1.0, 12.0) } else { 0.0 };
    let mu = dice.even(0.05, 0.9);
    let contacts = (0..count)
        .map(|i| {
            let angle = std::f64::consts::TAU * (i as f64 + dice.even(-0.4, 0.4)) / count as f64;
            let reach = dice.even(20.0, 60.0);
            let lean = dice.even(-25.0, 25.0);
            let touch = common::touch(reach * angle.cos(), reach * angle.sin(), angle.to_degrees() + 180.0 + lean, mu);
            Contact { half_width_mm, ..touch }
        })
        .collect();
    let bite = (dice.pick(4) > 0).then(|| dice.even(1.0, 10.0));
    let sides = [4, 6, 8, 12][dice.pick(4)];
    let drive = if dice.pick(2) == 0 { Drive::Adjustable } else { Drive::Equal };
    (contacts, frame(dice.even(-9.0, 9.0), dice.even(-9.0, 9.0), 50.0), bite, Pyramid::new(sides).unwrap(), drive)
}

fn load(dice: &mut Dice, planar: bool) -> Wrench {
    let mut load = Wrench::from_fn(|row, _| if row < 3 { dice.even(-8.0, 8.0) } else { dice.even(-3.0, 3.0) });
    if planar {
        [2, 3, 4].into_iter().for_each(|row| load[row] = 0.0);
    }
    load
}

#[test]
fn the_batch_solver_and_the_programs_agree() {
    let mut dice = Dice::seeded(41);
    let (mut held, mut never, mut unsure) = (0, 0, 0);
    for _ in 0..600 {
        let (contacts, frame, bite, pyramid, drive) = toss(&mut dice);
        let hold = Hold::new(&contacts, &frame, bite, &pyramid, drive);
        let mut squeezer = Squeezer::new(&hold);
        for _ in 0..4 {
            let load = load(&mut dice, bite.is_none());
            match (squeezer.squeeze(&load), program::squeeze(&hold, &load)) {
                (Answer::Held(own), Solved::Answer(other)) => {
                    assert_close(own.squeeze_n, other, 1e-7, 1e-9);
                    held += 1;
                }
                (Answer::Never { .. }, Solved::Infeasible) => never += 1,
                (Answer::Unsure, _) => unsure += 1,
                (own, other) => panic!("{own:?} against {other:?}"),
            }
        }
    }
    println!("{held} {never} {unsure}");
    assert!(held > 500 && never > 300 && unsure == 0, "{held} {never} {unsure}");
}

#[test]
fn time_it() {
    let mut dice = Dice::seeded(4);
    let cases: Vec<_> =
        (0..200).map(|_| toss(&mut dice)).filter(|c| c.2.is_some() && c.4 == Drive::Adjustable).collect();
    let loads: Vec<_> = (0..20).map(|_| load(&mut dice, false)).collect();
    let holds: Vec<_> = cases.iter().map(|(c, f, b, p, d)| Hold::new(c, f, *b, p, *d)).collect();
    let t = std::time::Instant::now();
    let mut n = 0;
    for hold in &holds {
        let mut s = Squeezer::new(hold);
        for l in &loads {
            std::hint::black_box(s.squeeze(l));
            n += 1;
        }
    }
    println!("batch {} ns", t.elapsed().as_nanos() / n);
    let t = std::time::Instant::now();
    let mut n = 0;
    for hold in holds.iter().take(20) {
        for l in &loads {
            std::hint::black_box(program::squeeze(hold, l));
            n += 1;
        }
    }
    println!("program {} ns", t.elapsed().as_nanos() / n);
}
