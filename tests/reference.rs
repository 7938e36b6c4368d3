//! Every score against outside libraries: Qhull for hulls, HiGHS for linear programs.
//!
//! Source: tests/reference/grasps.py (numpy, scipy, highspy; versions, seed and columns stated there), which builds its
//! own generators from the definition and knows nothing of this program.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test stops at the first surprise")]

mod common;

use common::assert_close;
use holdwright::mechanics::program::{self, Solved};
use holdwright::mechanics::{Assessment, Contact, Frame, MARGINAL, Verdict, Wrenches, closure, friction, quality};
use nalgebra::{Point2, Vector2, Vector3};

const TABLE: &str = include_str!("reference/grasps.csv");

/// Qhull works in doubles and merges facets below about 1e-15 of the largest coordinate (here up to 10). The largest
/// difference seen is 1.4e-15.
const HULL: f64 = 1e-13;
/// HiGHS was asked for 1e-10 on residuals and reduced costs. The largest difference seen is 1.4e-14.
const PROGRAM: f64 = 1e-10;
/// Both root finders stop at about 1e-11 of mu; what is left is the flatness of the hull's distance at its root. The
/// largest difference seen is 2.4e-10.
const FACTOR: f64 = 1e-9;
/// Our own programs are held to residuals of 1e-8: within ten times that of the edge they may decline or err.
const NEAR: f64 = 1e-7;

struct Row {
    kind: &'static str,
    line: usize,
    contacts: Vec<Contact>,
    frame: Frame,
    d: Option<f64>,
    rank: usize,
    signed: Option<f64>,
    quality: f64,
    per_finger: f64,
    up: Option<f64>,
    down: Option<f64>,
    needed: Option<f64>,
}

impl Row {
    fn read(line: usize, text: &'static str) -> Self {
        let (given, found) = text.split_once('=').unwrap();
        let mut given = given.split(',');
        let kind = given.next().unwrap();
        let k: usize = given.next().unwrap().parse().unwrap();
        let numbers: Vec<f64> = given.map(|x| x.parse().unwrap()).collect();
        assert_eq!(numbers.len(), 3 + 5 * k);
        let contact = |c: &[f64]| Contact {
            point: Point2::new(c[0], c[1]),
            normal: Vector2::new(c[2], c[3]),
            mu: c[4],
            half_width_mm: 0.0,
        };
        let found: Vec<&str> = found.split(',').collect();
        let value = |column: usize| (found[column] != "-").then(|| found[column].parse::<f64>().unwrap());
        Self {
            kind,
            line,
            contacts: numbers[3..].chunks_exact(5).map(contact).collect(),
            frame: common::frame(numbers[0], numbers[1], numbers[2]),
            d: value(0),
            rank: value(1).unwrap() as usize,
            signed: value(2),
            quality: value(3).unwrap(),
            per_finger: value(4).unwrap(),
            up: value(5),
            down: value(6),
            needed: value(7),
        }
    }

    fn wrenches(&self) -> Wrenches {
        Wrenches::new(&self.contacts, &self.frame)
    }

    fn closed(&self) -> bool {
        self.signed.is_some_and(|signed| signed > MARGINAL)
    }
}

fn rows() -> impl Iterator<Item = Row> {
    TABLE.lines().enumerate().map(|(i, text)| Row::read(i + 1, text))
}

/// The table has not shrunk, and holds enough of every kind.
#[test]
fn the_table_is_whole() {
    let count = |test: &dyn Fn(&Row) -> bool| rows().filter(test).count();
    assert_eq!(count(&|_| true), 2680);
    assert!(count(&|row| row.closed()) > 1000);
    assert!(count(&|row| !row.closed()) > 700);
    assert!(count(&|row| row.kind == "mixed" && row.closed()) > 150);
    assert!(count(&|row| row.signed.is_some_and(|s| s.abs() < 1e-4)) > 300);
    for k in 2..=6 {
        assert!(count(&|row| row.contacts.len() == k && row.closed()) > 60, "{k}");
    }
}

/// The verdict is right on every grasp farther than 1e-9 from the edge, and never "closed" within it.
#[test]
fn verdict() {
    for row in rows() {
        let wrenches = row.wrenches();
        let reading = Assessment::of(&wrenches, &row.frame, 0.3, &vec![1e9; row.contacts.len()]);
        let expected_open = row.signed.is_none_or(|signed| signed < -MARGINAL);
        match reading.verdict {
            // Qhull's own rounding is HULL at worst.
            Verdict::Closed => assert!(row.quality > MARGINAL - HULL, "line {}: {:?}", row.line, row.signed),
            Verdict::Open => assert!(!row.closed(), "line {}: {:?}", row.line, row.signed),
            Verdict::Marginal => {
                assert!(row.signed.is_none_or(|s| s.abs() < MARGINAL + HULL), "line {}: {:?}", row.line, row.signed);
            }
        }
        assert!(!(expected_open && reading.verdict == Verdict::Closed), "line {}", row.line);
        assert_eq!(closure::rank(&wrenches), row.rank, "line {}", row.line);
        let doubts = reading.doubts(&wrenches, &row.frame, 0.3);
        // The program's own residual tolerance is 1e-8: that near the edge the solver may decline.
        let near = row.signed.is_some_and(|signed| signed.abs() < NEAR);
        assert!(doubts.is_empty() || near, "line {}: {doubts:?}", row.line);
    }
}

#[test]
fn quality_both_ways() {
    for row in rows() {
        let wrenches = row.wrenches();
        let kernel = quality::planar(&wrenches).signed_quality;
        let plain = quality::by_definition(wrenches.generators()).signed_quality;
        assert_close(kernel.max(0.0), row.quality, 1e-12, HULL);
        assert_close(plain.max(0.0), row.quality, 1e-12, HULL);
    }
}

#[test]
fn quality_per_finger() {
    for row in rows().filter(Row::closed) {
        assert_close(quality::per_finger(&row.wrenches()), row.per_finger, 1e-11, HULL);
    }
}

/// Placement: the kernel's crossings of the torque axis, and our own linear programs, against HiGHS.
#[test]
fn pure_torque_both_ways() {
    for row in rows().filter(Row::closed) {
        let wrenches = row.wrenches();
        let score = quality::planar(&wrenches);
        let (up, down) = (row.up.unwrap(), row.down.unwrap());
        assert_close(score.torque_up, up, PROGRAM, PROGRAM);
        assert_close(score.torque_down, down, PROGRAM, PROGRAM);
        for (sense, expected) in [(1.0, up), (-1.0, down)] {
            match program::pure_torque(&wrenches, sense) {
                Solved::Answer(torque) => assert_close(torque, expected, PROGRAM, PROGRAM),
                other => panic!("line {}: {other:?}", row.line),
            }
        }
        let reading = Assessment::of(&wrenches, &row.frame, 0.3, &vec![1e9; row.contacts.len()]);
        let expected = up.min(down) * row.frame.scale_mm;
        assert_close(reading.placement.mm, expected, PROGRAM, PROGRAM * row.frame.scale_mm);
    }
}

/// Trinkle's d against HiGHS on the same program in another form. Within 1e-7 of the edge the solvers' own tolerances
/// decide, and nothing is asked but that an answer balances.
#[test]
fn least_weight() {
    let mut compared = 0;
    for row in rows() {
        let wrenches = row.wrenches();
        let near = row.signed.is_some_and(|signed| signed.abs() < NEAR);
        match (program::closure(&wrenches), row.d) {
            (Solved::Answer(balance), Some(d)) => {
                compared += 1;
                assert_close(balance.least, d, PROGRAM, PROGRAM);
                let left: Vector3<f64> = wrenches.generators().iter().zip(&balance.lambda).map(|(w, l)| w * *l).sum();
                assert!(left.norm() < 1e-8, "line {}", row.line);
            }
            // HiGHS balances with d = 0 what only some of the generators balance: on a face of the hull.
            (Solved::Infeasible, d) => assert!(near || d.is_none_or(|d| d < NEAR), "line {}: {d:?}", row.line),
            (answer, d) => assert!(near, "line {}: {answer:?} {d:?}", row.line),
        }
    }
    assert!(compared > 1150, "{compared}");
}

#[test]
fn friction_needed() {
    let mut compared = 0;
    for row in rows() {
        let wrenches = row.wrenches();
        let largest = row.contacts.iter().map(|c| c.mu).fold(0.0, f64::max);
        let factor = friction::factor_needed(wrenches.levers(), wrenches.mus());
        match (factor, row.needed) {
            // Beyond mu = 10 no coefficient is taken, and unit-force cones hardly change any more.
            (Some(found), Some(needed)) if needed * largest < 10.0 => {
                compared += 1;
                assert_close(found, needed, FACTOR, FACTOR);
            }
            (found, needed) => {
                let beyond = |factor: Option<f64>| factor.is_none_or(|factor| factor * largest > 9.9);
                assert!(beyond(found) && beyond(needed), "line {}: {found:?} {needed:?}", row.line);
            }
        }
    }
    assert!(compared > 2200, "{compared}");
}
