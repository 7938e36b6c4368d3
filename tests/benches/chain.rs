//! How long loose lines take to be joined into a loop, over sizes: the time for each line must not grow with their number.
//!
//! Run: `cargo bench --bench chain`. One star-shaped outline drawn as single lines in any order and direction, read from a
//! DXF text. Times are medians over rounds; joining is what lies between the first word of that step and the first of the
//! next. Nothing is asserted about time; that the loop comes back whole is.
#![expect(clippy::print_stdout, clippy::unwrap_used, reason = "a bench reports on stdout and may stop at once")]

#[path = "../common/mod.rs"]
mod common;

use common::Dice;
use holdwright::file::drawing::{self, Options, unit_named};
use std::fmt::Write;
use std::path::Path;
use std::time::Instant;

/// Rounds of each size.
const ROUNDS: usize = 7;
/// Numbers of lines.
const SIZES: [usize; 7] = [1_875, 3_750, 7_500, 15_000, 30_000, 60_000, 120_000];

fn loose_lines(count: usize) -> String {
    let mut dice = Dice::seeded(3);
    let points: Vec<(f64, f64)> = (0..count)
        .map(|i| {
            let angle = std::f64::consts::TAU * i as f64 / count as f64;
            let radius = dice.even(80.0, 100.0);
            (radius * angle.cos(), radius * angle.sin())
        })
        .collect();
    let mut order: Vec<usize> = (0..count).collect();
    for i in (1..count).rev() {
        order.swap(i, dice.pick(i + 1));
    }
    let mut text = String::from("0\nSECTION\n2\nENTITIES\n");
    for edge in order {
        let (mut a, mut b) = (points[edge], points[(edge + 1) % count]);
        if dice.pick(2) == 0 {
            std::mem::swap(&mut a, &mut b);
        }
        write!(text, "0\nLINE\n8\n0\n10\n{}\n20\n{}\n11\n{}\n21\n{}\n", a.0, a.1, b.0, b.1).unwrap();
    }
    text + "0\nENDSEC\n0\nEOF\n"
}

fn median(mut times: Vec<f64>) -> f64 {
    times.sort_by(f64::total_cmp);
    times[times.len() / 2]
}

fn main() {
    let options = Options { units: unit_named("mm"), ..Options::default() };
    println!("{:>9} {:>12} {:>14} {:>12}", "lines", "joining, ms", "for a line, us", "whole, ms");
    for count in SIZES {
        let text = loose_lines(count);
        let (mut joining, mut whole) = (Vec::new(), Vec::new());
        for _ in 0..ROUNDS {
            let start = Instant::now();
            let mut begun = None;
            let mut done = None;
            let imported =
                drawing::read_bytes(Path::new("lines.dxf"), text.as_bytes(), &options, &mut |step, _, _| match step {
                    "joining" if begun.is_none() => begun = Some(start.elapsed()),
                    "nesting" if done.is_none() => done = Some(start.elapsed()),
                    _ => {}
                })
                .unwrap();
            whole.push(start.elapsed().as_secs_f64() * 1e3);
            joining.push((done.unwrap() - begun.unwrap()).as_secs_f64() * 1e3);
            assert_eq!(imported.report.rings[0].edges, count);
        }
        let joining = median(joining);
        println!("{count:>9} {joining:>12.2} {:>14.3} {:>12.1}", joining * 1e3 / count as f64, median(whole));
    }
}
