//! Parallel jaws: every placement of a run holds, and every placement that holds lies on a run.
#![allow(clippy::unwrap_used, reason = "a test that cannot go on has failed")]

mod common;

use common::{Dice, assert_close, part, part_with_arcs};
use holdwright::hand::{Closing, Hand, JawRun, Jaws, PARALLEL_RAD, Stretch, Tip, apart, jaw_runs, jaws_at, stretches};
use holdwright::part::{ArcDescription, Edge, EdgeId, Part, PartDescription};
use nalgebra::{Point2, Rotation2, Vector2};
use std::f64::consts::{PI, TAU};

fn jaws(width: f64, depth: f64, opening_mm: [f64; 2]) -> Hand {
    Hand {
        tip: Tip::Pad,
        closing: Closing::Parallel,
        pad_width_mm: width,
        pad_depth_mm: depth,
        opening_mm,
        ..Hand::default()
    }
}

/// Runs as the two edges of the outer ring or of the hole, whether inside, and the length.
fn listed(part: &Part, hand: &Hand) -> Vec<([EdgeId; 2], bool, f64)> {
    let found = stretches(part, hand);
    let runs = jaw_runs(part, hand, &found);
    check_runs(part, hand, &found, &runs);
    runs.iter().map(|run| (run.stretches.map(|i| found[i].edge), run.inside, run.length_mm())).collect()
}

#[track_caller]
fn assert_runs(part: &Part, hand: &Hand, expected: &[(usize, usize, usize, bool, f64)]) {
    let found = listed(part, hand);
    assert_eq!(found.len(), expected.len(), "{found:?}");
    for (run, &(ring, a, b, inside, length)) in found.iter().zip(expected) {
        assert_eq!((run.0, run.1), ([a, b].map(|edge| EdgeId { ring, edge }), inside), "{found:?}");
        assert_close(run.2, length, 0.0, 1e-7);
    }
}

fn contact(edge: &Edge, along: f64) -> (Point2<f64>, Vector2<f64>) {
    (edge.point_at(along), edge.normal_at(along))
}

/// Grip at two positions, by the single-placement functions alone.
fn grip(hand: &Hand, edges: [&Edge; 2], along: [f64; 2]) -> Option<Jaws> {
    let (a, b) = (contact(edges[0], along[0]), contact(edges[1], along[1]));
    if apart(hand, a, b) { jaws_at(hand, a, b).ok() } else { None }
}

/// Every placement of a run holds and lies on its stretches; runs come in order and not twice.
fn check_runs(part: &Part, hand: &Hand, found: &[Stretch], runs: &[JawRun]) {
    for run in runs {
        assert!(run.stretches[0] <= run.stretches[1]);
        let edges = run.stretches.map(|i| part.outline().edge(found[i].edge).unwrap());
        let length = run.length_mm();
        for i in 0..=8 {
            let along = run.along_mm(length * f64::from(i) / 8.0);
            for finger in 0..2 {
                let stretch = &found[run.stretches[finger]];
                assert!(stretch.room_mm(along[finger]) >= -1e-9, "{run:?} at {along:?} off {stretch:?}");
            }
            let (a, b) = (contact(edges[0], along[0]), contact(edges[1], along[1]));
            let here = jaws_at(hand, a, b);
            assert!(here.is_ok_and(|jaws| jaws.inside == run.inside), "{run:?} at {along:?}: {here:?}");
            assert!(apart(hand, a, b), "{run:?} at {along:?}: too near");
        }
    }
    assert!(runs.windows(2).all(|pair| pair[0].stretches <= pair[1].stretches && pair[0] != pair[1]));
}

/// Elementary geometry: a U of 10 mm walls round a slot 40 mm wide and 30 mm deep. Pads 6 mm wide stand 3 mm from every
/// corner; two of them 8 mm deep have room in the slot.
#[test]
fn a_u_is_gripped_from_outside_and_from_inside() {
    let u =
        part(vec![vec![[0., 0.], [60., 0.], [60., 40.], [50., 40.], [50., 10.], [10., 10.], [10., 40.], [0., 40.]]]);
    let all = [
        (0, 0, 2, false, 4.0),  // under the right wall and on its top, 40 mm
        (0, 0, 4, false, 34.0), // under the floor and on it, 10 mm
        (0, 0, 6, false, 4.0),
        (0, 1, 3, false, 24.0), // the right wall, 10 mm
        (0, 1, 7, false, 34.0), // across, 60 mm
        (0, 3, 5, true, 24.0),  // the slot, 40 mm
        (0, 5, 7, false, 24.0),
    ];
    assert_runs(
        &u,
        &jaws(6.0, 8.0, [5.0, 100.0]),
        &[
            (0, 0, 2, false, 4.0),
            (0, 0, 4, false, 34.0),
            (0, 0, 6, false, 4.0),
            (0, 1, 3, false, 16.0 + 8.0),
            all[4],
            all[5],
            all[6],
        ],
    );
    // Openings of 40 mm alone; 12 mm and no more leave the walls and the floor.
    assert_runs(&u, &jaws(6.0, 8.0, [30.0, 40.0]), &[all[0], all[2], all[5]]);
    assert_runs(&u, &jaws(6.0, 8.0, [0.0, 12.0]), &[all[1], all[3], all[6]]);
    // Two pads 15 mm deep with 10 mm between them just fit in the slot, or just do not.
    let spaced = |gap_mm| Hand { gap_mm, ..jaws(6.0, 15.0, [30.0, 40.0]) };
    assert_runs(&u, &spaced(10.0), &[all[0], all[2], all[5]]);
    assert_runs(&u, &spaced(10.001), &[all[0], all[2]]);
    // A hole is gripped from inside, and its rim from outside.
    let ring = part(vec![
        vec![[0., 0.], [60., 0.], [60., 50.], [0., 50.]],
        vec![[10., 10.], [50., 10.], [50., 35.], [10., 35.]],
    ]);
    let hand = jaws(6.0, 8.0, [20.0, 45.0]);
    assert_runs(&ring, &hand, &[(1, 0, 2, true, 34.0), (1, 1, 3, true, 19.0)]);
    let rim = jaws(6.0, 8.0, [12.0, 18.0]);
    let found = listed(&ring, &rim);
    assert_eq!(found.len(), 1, "{found:?}");
    assert_eq!(found[0].0, [EdgeId { ring: 0, edge: 2 }, EdgeId { ring: 1, edge: 2 }]);
    assert_close(found[0].2, 34.0, 0.0, 1e-7);
}

/// A bar 100 mm long that tapers from 20 mm: within half a degree it is gripped, beyond it is not. Derived: at x from the
/// thick end the faces of a symmetric taper of half angle t are 20 - 2 x tan t apart.
#[test]
fn a_taper_within_and_beyond_the_tolerance() {
    let bar = |full_deg: f64| {
        let drop = 100.0 * (full_deg / 2.0).to_radians().tan();
        part(vec![vec![[0., -10.], [100., -10. + drop], [100., 10. - drop], [0., 10.]]])
    };
    let hand = jaws(6.0, 8.0, [0.0, 50.0]);
    let long = |full_deg: f64| listed(&bar(full_deg), &hand).iter().filter(|run| run.2 > 50.0).count();
    assert_eq!((long(0.4), long(0.499), long(0.501), long(0.6)), (1, 1, 0, 0));
    // An opening of 19.8 mm at most is reached 0.1 / tan 0.2 deg from the thick end; the run ends 3 mm from the thin one.
    let half = 0.2_f64.to_radians();
    let length = 100.0 / half.cos();
    let narrow = jaws(6.0, 8.0, [19.5, 19.8]);
    let found = listed(&bar(0.4), &narrow);
    assert_eq!(found.len(), 1, "{found:?}");
    assert_close(found[0].2, 0.15 / half.sin(), 0.0, 1e-5);
    let from_end = jaws(6.0, 8.0, [0.0, 19.8]);
    let found = listed(&bar(0.4), &from_end);
    assert_close(found.iter().map(|run| run.2).fold(0.0, f64::max), length - 3.0 - 0.1 / half.sin(), 0.0, 1e-5);
    // A gap of 19.7 mm is kept by the pads' nearer corners, each 3 mm from its middle, as far as the faces are
    // 19.7 mm + 6 mm sin t apart: 0.15 mm / sin t - 3 mm from the thick end.
    let spaced = Hand { gap_mm: 19.7, ..hand };
    let found = listed(&bar(0.4), &spaced);
    assert_eq!(found.iter().filter(|run| run.2 > 30.0).count(), 1, "{found:?}");
    assert_close(found.iter().map(|run| run.2).fold(0.0, f64::max), 0.15 / half.sin() - 6.0, 0.0, 1e-5);
}

/// Elementary geometry: on a disc the jaws turn through half a turn; on a D they stand once, square to the flat; on a lens
/// of two arcs once, on the line of centres.
#[test]
fn round_parts() {
    let two = part_with_arcs(vec![vec![[-30., 0.], [30., 0.]]], &[(0, 0, 1.0), (0, 1, 1.0)]);
    let hand = jaws(6.0, 8.0, [5.0, 100.0]);
    assert_runs(&two, &hand, &[(0, 0, 1, false, 30.0 * PI)]);
    assert_runs(&two, &jaws(6.0, 8.0, [5.0, 59.9]), &[]);
    // One arc of 270 degrees faces itself over a quarter turn, and the other one over a quarter turn.
    let bulge = |deg: f64| (deg.to_radians() / 4.0).tan();
    let unlike = part_with_arcs(vec![vec![[30., 0.], [0., -30.]]], &[(0, 0, bulge(270.0)), (0, 1, bulge(90.0))]);
    assert_runs(&unlike, &hand, &[(0, 0, 0, false, 15.0 * PI), (0, 0, 1, false, 15.0 * PI)]);
    let d = part_with_arcs(vec![vec![[-30., 0.], [30., 0.]]], &[(0, 1, 1.0)]);
    assert_runs(&d, &hand, &[(0, 0, 1, false, 0.0)]);
    let found = stretches(&d, &hand);
    let [flat, round] = jaw_runs(&d, &hand, &found)[0].along_mm(0.0);
    assert_close(flat, 30.0, 0.0, 1e-9);
    assert_close(round, 15.0 * PI, 0.0, 1e-9);
    let lens = part_with_arcs(vec![vec![[-30., 0.], [30., 0.]]], &[(0, 0, 0.3), (0, 1, 0.2)]);
    assert_runs(&lens, &hand, &[(0, 0, 1, false, 0.0)]);
    // Centres that miss one another by what a drawing's last digit leaves still make one run.
    let rounded = part_with_arcs(vec![vec![[-30., 0.], [30., 0.]]], &[(0, 0, 1.000_000_1), (0, 1, 1.0)]);
    assert!(listed(&rounded, &hand).iter().any(|run| run.2 > 29.9 * PI));
    // A quarter turn of a curved bar, 20 and 40 mm from its centre: pins grip it square to the wall, from both sides.
    let bend = part_with_arcs(
        vec![vec![[20., 0.], [40., 0.], [0., 40.], [0., 20.]]],
        &[(0, 1, bulge(90.0)), (0, 3, -bulge(90.0))],
    );
    let pins = Hand { tip: Tip::Pin, pin_radius_mm: 1.0, ..hand };
    assert!(listed(&bend, &pins).iter().any(|run| (run.2 - 20.0 * PI).abs() < 1e-6 && !run.1));
    // Of two hollows only pins know the inside: a round hole.
    let washer = part_with_arcs(
        vec![vec![[-30., 0.], [30., 0.]], vec![[-10., 0.], [10., 0.]]],
        &[(0, 0, 1.0), (0, 1, 1.0), (1, 0, 1.0), (1, 1, 1.0)],
    );
    let inside: Vec<_> = listed(&washer, &pins).into_iter().filter(|run| run.1 && run.2 > 1.0).collect();
    assert_eq!(inside.len(), 1);
    assert_close(inside[0].2, 10.0 * PI, 0.0, 1e-7);
    assert!(listed(&washer, &hand).iter().all(|run| !run.1));
}

/// A comb: teeth of many heights on a base with a hole, upright or not, true or a little out of true; some tips are round.
fn comb(dice: &mut Dice) -> Option<Part> {
    let (mut top, mut x) = (vec![[0.0, dice.even(15.0, 40.0)]], 0.0);
    let mut round_tips = Vec::new();
    for tooth in 0..2 + dice.pick(3) {
        let high = if tooth == 0 { top[0][1] } else { 30.0 + dice.even(0.0, 30.0) };
        let low = 26.0 + dice.even(0.0, 3.0);
        if tooth > 0 {
            top.push([x, high]);
        }
        round_tips.push(top.len() - 1);
        x += dice.even(8.0, 25.0);
        top.extend([[x, high], [x, low]]);
        x += dice.even(6.0, 25.0);
        top.push([x, low]);
    }
    top.extend([[x, 38.0], [x + 12.0, 38.0]]);
    let mut ring = vec![[0.0, 0.0], [x + 12.0, 0.0]];
    let count = top.len();
    ring.extend(top.into_iter().rev());
    let (left, right) = (dice.even(4.0, 0.4 * x), dice.even(0.5 * x, 0.9 * x));
    let hole = vec![[left, 4.0], [right, 4.0], [right, dice.even(9.0, 14.0)], [left, 14.0]];
    let (shake, turn) = ([0.0, 0.01, 0.15][dice.pick(3)], [0.0, dice.even(0.0, TAU)][dice.pick(2)]);
    let mut place = |[px, py]: [f64; 2]| {
        let p = Rotation2::new(turn) * Vector2::new(px + dice.even(-shake, shake), py + dice.even(-shake, shake));
        [p.x, p.y]
    };
    let rings = [ring, hole].map(|ring| ring.into_iter().map(&mut place).collect::<Vec<_>>());
    let mut described = PartDescription::bare("comb", rings.into());
    for first in round_tips {
        // The top was read backwards after the two corners of the base.
        let edge = 2 + count - 2 - first;
        if dice.pick(2) == 0 {
            let bulge = [1.0, dice.even(0.05, 0.6), dice.even(-0.3, 0.0)][dice.pick(3)];
            described.arcs.push(ArcDescription { ring: 0, edge, bulge });
        }
    }
    if dice.pick(2) == 0 {
        described.arcs.extend([1, 3].map(|edge| ArcDescription { ring: 1, edge, bulge: 0.4 }));
    }
    Part::new(described).ok()
}

/// A wheel: arcs of one circle, chords, and arcs of other circles in turn, with a hole.
fn wheel(dice: &mut Dice) -> Option<Part> {
    let n = 2 + dice.pick(5);
    let angles: Vec<f64> = (0..n).map(|i| (i as f64 + dice.even(-0.35, 0.35)) / n as f64 * TAU).collect();
    let ring = angles.iter().map(|a| [50.0 + 40.0 * a.cos(), 40.0 * a.sin()]).collect();
    let hole = vec![[45.0, -5.0], [55.0, -5.0], [54.0, 6.0], [45.0, 6.0]];
    let mut described = PartDescription::bare("wheel", vec![ring, hole]);
    for edge in 0..n {
        let sweep = (angles[(edge + 1) % n] - angles[edge]).rem_euclid(TAU);
        match dice.pick(4) {
            0 => {}
            1 => described.arcs.push(ArcDescription { ring: 0, edge, bulge: dice.even(0.05, 0.8) }),
            _ => described.arcs.push(ArcDescription { ring: 0, edge, bulge: (sweep / 4.0).tan() }),
        }
    }
    Part::new(described).ok()
}

/// Where a function of one sign at the start has the other at the end, or nothing.
fn root(mut low: f64, mut high: f64, f: impl Fn(f64) -> f64) -> Option<f64> {
    let sign = f(low) > 0.0;
    if (f(high) > 0.0) == sign {
        return None;
    }
    for _ in 0..80 {
        let middle = (low + high) / 2.0;
        if (f(middle) > 0.0) == sign { low = middle } else { high = middle }
    }
    Some((low + high) / 2.0)
}

/// Sign changes of a function on an interval, by steps.
fn roots(low: f64, high: f64, steps: u32, f: impl Fn(f64) -> f64) -> Vec<f64> {
    let at = |i: u32| low + (high - low) * f64::from(i) / f64::from(steps);
    (0..steps).filter_map(|i| root(at(i), at(i + 1), &f)).collect()
}

/// Offset of the second contact across the jaw axis through the first.
fn out_of_line(a: (Point2<f64>, Vector2<f64>), b: (Point2<f64>, Vector2<f64>)) -> f64 {
    (a.1 - b.1).normalize().perp(&(b.0 - a.0))
}

/// Placements on two stretches, found by steps and halving: a grid of positions on the first and what faces them on the
/// second, or the single positions that face each other.
fn plain_placements(edges: [&Edge; 2], on: [&Stretch; 2], same: bool) -> Vec<[f64; 2]> {
    let facing = |s: f64| {
        let a = contact(edges[0], s);
        let cross = |t: f64| a.1.perp(&edges[1].normal_at(t));
        let against = |t: &f64| a.1.dot(&edges[1].normal_at(*t)) < 0.0;
        roots(on[1].from_mm, on[1].to_mm, 32, cross).into_iter().filter(against).collect::<Vec<f64>>()
    };
    let swapped = |found: Vec<[f64; 2]>| found.into_iter().map(|[a, b]| [b, a]).collect();
    let line = |s: f64, t: f64| out_of_line(contact(edges[0], s), contact(edges[1], t));
    let grid = |i: u32| on[0].from_mm + on[0].length_mm() * (f64::from(i) + 0.37) / 24.0;
    match edges.map(|edge| edge.arc().is_some()) {
        [false, false] => (0..24)
            .filter_map(|i| root(on[1].from_mm, on[1].to_mm, |t| line(grid(i), t)).map(|t| [grid(i), t]))
            .collect(),
        [false, true] => facing(on[0].from_mm)
            .into_iter()
            .filter_map(|t| root(on[0].from_mm, on[0].to_mm, |s| line(s, t)).map(|s| [s, t]))
            .collect(),
        [true, false] => swapped(plain_placements([edges[1], edges[0]], [on[1], on[0]], same)),
        [true, true] => {
            let pairs: Vec<[f64; 2]> = (0..24)
                .flat_map(|i| facing(grid(i)).into_iter().map(move |t| [grid(i), t]))
                .filter(|[s, t]| !same || s < t)
                .collect();
            if pairs.iter().all(|&[s, t]| line(s, t).abs() < 1e-7) {
                return pairs;
            }
            // From one grid position to the next what faces it moves on, and is found again by halving.
            let mut found = Vec::new();
            for pair in pairs.windows(2) {
                let partner = |s: f64| {
                    let near = |t: &f64| (t - pair[0][1]).abs();
                    facing(s).into_iter().min_by(|a, b| near(a).total_cmp(&near(b)))
                };
                let offset = |s: f64| partner(s).map_or(f64::NAN, |t| line(s, t));
                if let Some(s) = root(pair[0][0], pair[1][0], offset)
                    && let Some(t) = partner(s)
                {
                    found.push([s, t]);
                }
            }
            found
        }
    }
}

/// True when a run goes through a placement.
fn goes_through(run: &JawRun, [s, t]: [f64; 2]) -> bool {
    let length = run.length_mm();
    let ([from, _], [to, _]) = (run.along_mm(0.0), run.along_mm(length));
    let share = if length > 0.0 { (s - from) / (to - from) } else { 0.0 };
    let at = run.along_mm(share.clamp(0.0, 1.0) * length);
    (at[0] - s).abs() < 1e-5 && (at[1] - t).abs() < 1e-5
}

#[test]
fn runs_hold_exactly_the_placements_there_are() {
    let mut dice = Dice::seeded(41);
    let mut placed = [0_usize; 4];
    let (mut single, mut inner, mut tapered) = (0, 0, 0);
    for round in 0..900 {
        let Some(part) = (if round % 3 == 0 { wheel(&mut dice) } else { comb(&mut dice) }) else { continue };
        let least = dice.even(0.0, 20.0);
        let mut hand = jaws(dice.even(0.5, 9.0), dice.even(0.0, 9.0), [least, least + dice.even(1.0, 90.0)]);
        hand.corner_clearance_mm = dice.even(0.0, 0.5);
        hand.gap_mm = [0.0, dice.even(0.0, 12.0)][dice.pick(2)];
        if dice.pick(5) == 0 {
            (hand.tip, hand.pin_radius_mm) = (Tip::Pin, dice.even(0.2, 4.0));
        }
        // A grip that is to be found holds by more than a hair.
        let mut strict = hand;
        strict.gap_mm += 1e-6;
        strict.opening_mm = [hand.opening_mm[0] + 1e-6, hand.opening_mm[1] - 1e-6];
        let found = stretches(&part, &hand);
        let runs = jaw_runs(&part, &hand, &found);
        check_runs(&part, &hand, &found, &runs);
        for (i, a) in found.iter().enumerate() {
            for (j, b) in found.iter().enumerate().skip(i) {
                let edges = [a, b].map(|stretch| part.outline().edge(stretch.edge).unwrap());
                let arcs = edges.map(|edge| usize::from(edge.arc().is_some()));
                if i == j && arcs[0] == 0 {
                    continue;
                }
                let between: Vec<&JawRun> = runs.iter().filter(|run| run.stretches == [i, j]).collect();
                for along in plain_placements(edges, [a, b], i == j) {
                    let room = a.room_mm(along[0]).min(b.room_mm(along[1]));
                    let (n, m) = (edges[0].normal_at(along[0]), edges[1].normal_at(along[1]));
                    let off = n.angle(&-m);
                    let Some(jaws) = grip(&strict, edges, along).filter(|_| room > 1e-6) else { continue };
                    if (off - PARALLEL_RAD).abs() < 1e-9 {
                        continue;
                    }
                    placed[2 * arcs[0] + arcs[1]] += 1;
                    inner += usize::from(jaws.inside);
                    tapered += usize::from(off > 1e-4);
                    let through = between.iter().filter(|run| run.inside == jaws.inside && goes_through(run, along));
                    assert_eq!(through.count(), 1, "{i} {j} {along:?} {jaws:?} {between:?} {hand:?}");
                }
                single += between.iter().filter(|run| run.length_mm() <= 1e-9).count();
            }
        }
    }
    assert!(placed.iter().all(|&count| count > 40), "{placed:?}");
    assert!(single > 100 && inner > 500 && tapered > 200, "{single} {inner} {tapered}");
}

/// Straight pairs by plain pairs of grid positions: what holds there holds on a run, whatever the order of the stretches.
#[test]
fn the_order_of_the_stretches_only_renames_them() {
    let mut dice = Dice::seeded(42);
    let mut compared = 0;
    for _ in 0..60 {
        let Some(part) = comb(&mut dice) else { continue };
        let hand = jaws(3.0, 4.0, [1.0, 80.0]);
        let found = stretches(&part, &hand);
        let runs = jaw_runs(&part, &hand, &found);
        assert_eq!(runs, jaw_runs(&part, &hand, &found));
        let reversed: Vec<Stretch> = found.iter().rev().copied().collect();
        let back = jaw_runs(&part, &hand, &reversed);
        check_runs(&part, &hand, &reversed, &back);
        assert_eq!(runs.len(), back.len());
        for run in &runs {
            let names = run.stretches.map(|i| found.len() - 1 - i);
            let [s, t] = run.along_mm(run.length_mm() / 2.0);
            let same = back.iter().filter(|other| other.stretches == [names[1], names[0]]);
            assert!(same.into_iter().any(|other| goes_through(other, [t, s])), "{run:?}");
            compared += 1;
        }
    }
    assert!(compared > 200, "{compared}");
}

#[test]
fn hostile_stretches_and_hands() {
    let mut dice = Dice::seeded(43);
    let part = (0..).find_map(|_| wheel(&mut dice)).unwrap();
    let numbers = [0.0, -1.0, 1e-300, 1e300, f64::NAN, f64::INFINITY];
    for &width in &numbers {
        for &opening in &numbers {
            let hand = jaws(width, 4.0, [opening, 50.0]);
            let mut found = stretches(&part, &jaws(3.0, 4.0, [0.0, 90.0]));
            for (stretch, &number) in found.iter_mut().zip(&numbers) {
                stretch.to_mm = number;
            }
            found.push(Stretch { edge: EdgeId { ring: 9, edge: 9 }, from_mm: 0.0, to_mm: 1.0 });
            for run in jaw_runs(&part, &hand, &found) {
                assert!(run.length_mm() >= 0.0, "{run:?}");
            }
        }
    }
}
