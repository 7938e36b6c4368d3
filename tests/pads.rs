//! Where flat pads fit, and how far they keep apart, against the definition: a pad may be where no other edge has a point
//! in the open rectangle, and two pads keep the distance of two rectangles.
#![allow(clippy::unwrap_used, reason = "a test that cannot go on has failed")]

mod common;

use common::{Dice, assert_close, part, part_with_arcs};
use holdwright::hand::{Hand, Tip, apart, stretch_around, stretches};
use holdwright::part::{ArcDescription, Edge, EdgeId, KeepOutDescription, Part, PartDescription};
use nalgebra::{Point2, Vector2};
use std::f64::consts::TAU;

fn pad(width: f64, depth: f64) -> Hand {
    Hand { tip: Tip::Pad, pad_width_mm: width, pad_depth_mm: depth, ..Hand::default() }
}

/// The stretches of one edge of the outer ring, as from and to.
fn on(part: &Part, hand: &Hand, edge: usize) -> Vec<(f64, f64)> {
    let found = stretches(part, hand).into_iter().filter(|s| s.edge == EdgeId { ring: 0, edge });
    found.map(|s| (s.from_mm, s.to_mm)).collect()
}

#[track_caller]
fn assert_spans(found: &[(f64, f64)], expected: &[(f64, f64)]) {
    assert_eq!(found.len(), expected.len(), "{found:?} is not {expected:?}");
    for (a, b) in found.iter().zip(expected) {
        assert_close(a.0, b.0, 0.0, 1e-7);
        assert_close(a.1, b.1, 0.0, 1e-7);
    }
}

/// Elementary geometry: in an inner corner of angle a the far corner of the pad meets the other side at
/// b / 2 + depth / tan a from the corner; where the angle is right or wider only the face needs room.
#[test]
fn an_inner_corner_of_any_angle() {
    for angle_deg in [20.0_f64, 45.0, 70.0, 90.0, 120.0, 179.0] {
        let half = (angle_deg / 2.0).to_radians();
        let (sin, cos) = (200.0 * half.sin(), 200.0 * half.cos());
        let block = part(vec![vec![[-sin - 50.0, -50.0], [sin + 50.0, -50.0], [sin, cos], [0.0, 0.0], [-sin, cos]]]);
        let lean = if angle_deg < 90.0 { 8.0 / angle_deg.to_radians().tan() } else { 0.0 };
        let hand = Hand { corner_clearance_mm: 1.0, ..pad(10.0, 8.0) };
        let near = (5.0 + lean).max(6.0);
        assert_spans(&on(&block, &hand, 3), &[(near, 194.0)]);
        assert_spans(&on(&block, &hand, 2), &[(6.0, 200.0 - near)]);
    }
}

/// Elementary geometry: a slot 10 mm wide takes a pad of width 10 on its floor at one place, and pads up to 10 mm deep on
/// its walls; above the slot's mouth, 30 mm up, there is no wall.
#[test]
fn a_slot_that_just_fits() {
    for x in [0.0, 0.1, 7.3] {
        let ring = [[0., 0.], [50., 0.], [50., 40.], [30., 40.], [30., 10.], [20., 10.], [20., 40.], [0., 40.]];
        let slotted = part(vec![ring.map(|[px, py]| [px + x, py - x]).to_vec()]);
        assert_spans(&on(&slotted, &pad(10.0, 10.0), 4), &[(5.0, 5.0)]);
        assert_spans(&on(&slotted, &pad(9.0, 10.0), 4), &[(4.5, 5.5)]);
        assert_spans(&on(&slotted, &pad(10.001, 10.0), 4), &[]);
        assert_spans(&on(&slotted, &pad(6.0, 10.0), 3), &[(3.0, 27.0)]);
        assert_spans(&on(&slotted, &pad(6.0, 10.001), 3), &[]);
        // A face without depth is stopped by the ends of its edge alone.
        assert_spans(&on(&slotted, &pad(6.0, 0.0), 3), &[(3.0, 27.0)]);
        assert_spans(&on(&slotted, &pad(6.0, 10.0), 6), &[(3.0, 17.0)]);
    }
}

/// Elementary geometry: a lip 5 mm over a 100 mm face, from 70 mm on, and a boss beside it.
#[test]
fn a_lip_over_a_face_and_a_boss_beside_one() {
    let lipped = part(vec![vec![
        [0., 0.],
        [120., 0.],
        [120., 30.],
        [70., 30.],
        [70., 15.],
        [100., 15.],
        [100., 10.],
        [0., 10.],
    ]]);
    assert_spans(&on(&lipped, &pad(12.0, 8.0), 6), &[(36.0, 94.0)]);
    assert_spans(&on(&lipped, &pad(12.0, 5.0), 6), &[(6.0, 94.0)]);
    // The far side of the lip does not matter while the pad lies on the lip's top.
    assert_spans(&on(&lipped, &pad(12.0, 8.0), 2), &[(6.0, 44.0)]);
    // A boss as a round arc: centre (50, 10), radius 20; at depth 8 it is sqrt(400 - 64) wide on either side.
    let bossed = part_with_arcs(
        vec![vec![[0., 0.], [100., 0.], [100., 10.], [70., 10.], [30., 10.], [0., 10.]]],
        &[(0, 3, 1.0)],
    );
    assert_spans(&on(&bossed, &pad(8.0, 8.0), 2), &[(4.0, 26.0)]);
    // On the boss the pad's corner meets the floor at R cos a = b / 2 sin a, a from the top.
    let most = 20.0 * (2.0 * 20.0 / 8.0_f64).atan();
    let top = 10.0 * std::f64::consts::PI;
    assert_spans(&on(&bossed, &pad(8.0, 8.0), 3), &[(top - most, top + most)]);
    // The boss hollow: nowhere.
    let hollow = part_with_arcs(
        vec![vec![[0., -20.], [100., -20.], [100., 10.], [70., 10.], [30., 10.], [0., 10.]]],
        &[(0, 3, -1.0)],
    );
    assert_spans(&on(&hollow, &pad(0.5, 8.0), 3), &[]);
    assert_spans(&on(&hollow, &pad(0.5, 0.0), 3), &[]);
}

/// A keep-out is widened by half the pad, on a straight edge only.
#[test]
fn a_keep_out_and_clearance_cut_an_edge() {
    let mut described = PartDescription::bare("plate", vec![vec![[0., 0.], [80., 0.], [80., 40.], [0., 40.]]]);
    let keep_out = |edge, from, to| KeepOutDescription { ring: 0, edge, from, to, reason: "seal".into() };
    described.keep_outs = vec![keep_out(0, Some(30.0), Some(50.0)), keep_out(1, Some(20.0), Some(25.0))];
    described.arcs.push(ArcDescription { ring: 0, edge: 1, bulge: 0.5 });
    let plate = Part::new(described).unwrap();
    let hand = Hand { corner_clearance_mm: 2.0, ..pad(12.0, 8.0) };
    assert_spans(&on(&plate, &hand, 0), &[(8.0, 24.0), (56.0, 72.0)]);
    let length = plate.outline().edges()[1].length_mm();
    assert_spans(&on(&plate, &hand, 1), &[(2.0, 20.0), (25.0, length - 2.0)]);
    // 40 mm hold a pad of 36 with 2 mm on either side, and no wider one.
    let exact = Hand { corner_clearance_mm: 2.0, ..pad(36.0, 8.0) };
    assert_spans(&on(&plate, &exact, 3), &[(20.0, 20.0)]);
    assert_spans(&on(&plate, &pad(40.1, 8.0), 3), &[]);
}

/// Largest share of a point in the open rectangle: how far inside the four sides it lies, mm; negative outside.
fn depth_inside(hand: &Hand, contact: (Point2<f64>, Vector2<f64>), q: Point2<f64>) -> [f64; 4] {
    let (from, n) = (q - contact.0, contact.1);
    let (x, y) = (from.x * n.y - from.y * n.x, -from.dot(&n));
    [hand.pad_width_mm / 2.0 - x, hand.pad_width_mm / 2.0 + x, y, hand.pad_depth_mm - y]
}

fn least(sides: [f64; 4]) -> f64 {
    sides.into_iter().fold(f64::INFINITY, f64::min)
}

/// How far an edge reaches into the rectangle. On a segment the depth is the least of four linear functions, so it is
/// greatest at an end or where two of them are equal; on an arc many points are tried, and the way between the
/// neighbours of the best ones is halved by thirds.
fn reaches_in(hand: &Hand, contact: (Point2<f64>, Vector2<f64>), edge: &Edge) -> f64 {
    if edge.arc().is_none() {
        let at = |share: f64| edge.start() + (edge.end() - edge.start()) * share;
        let (a, b) = (depth_inside(hand, contact, at(0.0)), depth_inside(hand, contact, at(1.0)));
        let mut shares = vec![0.0, 1.0];
        for i in 0..4 {
            for j in 0..i {
                let share = (a[i] - a[j]) / ((a[i] - a[j]) - (b[i] - b[j]));
                shares.extend((0.0..=1.0).contains(&share).then_some(share));
            }
        }
        return shares
            .into_iter()
            .map(|share| least(depth_inside(hand, contact, at(share))))
            .fold(f64::NEG_INFINITY, f64::max);
    }
    let n = 600;
    let depth = |along: f64| least(depth_inside(hand, contact, edge.point_at(along)));
    let step = edge.length_mm() / f64::from(n);
    let tried: Vec<f64> = (0..=n).map(|i| depth(step * f64::from(i))).collect();
    let mut best = tried[0].max(tried[n as usize]);
    for i in 0..=n as usize {
        let around = [i.saturating_sub(1), (i + 1).min(n as usize)];
        if around.iter().all(|&beside| tried[i] >= tried[beside]) {
            let [mut low, mut high] = around.map(|beside| step * beside as f64);
            for _ in 0..60 {
                let (p, q) = (low + (high - low) / 3.0, high - (high - low) / 3.0);
                if depth(p) < depth(q) { low = p } else { high = q }
            }
            best = best.max(depth((low + high) / 2.0));
        }
    }
    best
}

/// How far the part reaches into a pad at a position; negative when nothing does.
fn blocked_by(part: &Part, hand: &Hand, edge: &Edge, along: f64) -> f64 {
    let contact = (edge.point_at(along), edge.normal_at(along));
    let others = part.outline().edges().iter().filter(|other| other.id() != edge.id());
    others.map(|other| reaches_in(hand, contact, other)).fold(f64::NEG_INFINITY, f64::max)
}

/// Room to what is written on the edge itself: its ends and its keep-outs; negative where they forbid the pad.
fn room_on_edge(part: &Part, hand: &Hand, edge: &Edge, along: f64) -> f64 {
    let half = if edge.arc().is_some() { 0.0 } else { hand.pad_width_mm / 2.0 };
    let ends = along.min(edge.length_mm() - along) - half - hand.corner_clearance_mm;
    let marks = part.keep_outs().iter().filter(|mark| mark.edge == edge.id());
    marks.map(|mark| (mark.from_mm - half - along).max(along - mark.to_mm - half)).fold(ends, f64::min)
}

/// A star with deep teeth and up to two holes; a share of the edges are arcs, either way.
fn toothed(dice: &mut Dice, arcs: bool) -> Option<Part> {
    let star = |dice: &mut Dice, x: f64, y: f64, n: usize, low: f64, high: f64| -> Vec<[f64; 2]> {
        (0..n)
            .map(|i| {
                let at = (i as f64 + dice.even(-0.4, 0.4)) / n as f64 * TAU;
                let r = dice.even(low, high);
                [x + r * at.cos(), y + 0.7 * r * at.sin()]
            })
            .collect()
    };
    let corners = 4 + dice.pick(if arcs { 7 } else { 16 });
    let mut rings = vec![star(dice, 3.0, -2.0, corners, 14.0, 60.0)];
    for _ in 0..dice.pick(3) {
        let (x, y, corners) = (dice.even(-12.0, 12.0), dice.even(-9.0, 9.0), 3 + dice.pick(6));
        rings.push(star(dice, x, y, corners, 3.0, 11.0));
    }
    let mut described = PartDescription::bare("toothed", rings);
    for (ring, vertices) in described.rings.iter().enumerate() {
        for edge in 0..vertices.len() {
            if arcs && dice.pick(5) > 1 {
                let bulge = if dice.pick(8) == 0 { dice.even(-1e-5, 1e-5) } else { dice.even(-0.6, 1.2) };
                described.arcs.push(ArcDescription { ring, edge, bulge });
            }
            if dice.pick(3) == 0 {
                let from = dice.even(0.0, 20.0);
                let keep_out =
                    KeepOutDescription { ring, edge, from: Some(from), to: Some(from + 1.0), reason: "mark".into() };
                described.keep_outs.push(keep_out);
            }
        }
    }
    if let Ok(part) = Part::new(described.clone()) {
        return Some(part);
    }
    described.keep_outs.clear();
    Part::new(described).ok()
}

fn any_pad(dice: &mut Dice) -> Hand {
    let clearance = if dice.pick(2) == 0 { 0.0 } else { dice.even(0.0, 1.0) };
    Hand { corner_clearance_mm: clearance, ..pad(dice.even(0.2, 12.0), dice.even(0.2, 12.0)) }
}

/// Both ways: inside a stretch the rectangle meets nothing, elsewhere something stops it.
fn compare(arcs: bool, seed: u64, parts: usize, tries: usize) -> [usize; 4] {
    let mut dice = Dice::seeded(seed);
    let mut seen = [0; 4];
    let mut made = 0;
    while made < parts {
        let Some(part) = toothed(&mut dice, arcs) else { continue };
        made += 1;
        let hand = any_pad(&mut dice);
        let found = stretches(&part, &hand);
        common::check_shape(&part, &found);
        for edge in part.outline().edges() {
            let hollow = edge.arc().is_some_and(|arc| !arc.convex);
            for _ in 0..tries {
                let along = dice.even(0.0, edge.length_mm());
                let room = room_on_edge(&part, &hand, edge, along);
                let inside = if room > 0.0 && !hollow { blocked_by(&part, &hand, edge, along) } else { 0.0 };
                // Not within a hair of a stretch's end, where rounding and the grazing allowance decide.
                if room.abs() < 1e-6 || (room > 0.0 && !hollow && inside.abs() < 1e-6) {
                    continue;
                }
                let expected = room > 0.0 && inside < 0.0 && !hollow;
                let round = usize::from(edge.arc().is_some());
                if room > 0.0 && !hollow {
                    seen[2 * round + usize::from(expected)] += 1;
                }
                let stands = stretch_around(&found, edge.id(), along).is_some();
                assert_eq!(stands, expected, "{:?} at {along}: {inside} in, room {room}, {hand:?}", edge.id());
            }
        }
    }
    seen
}

#[test]
fn a_pad_fits_on_straight_edges_exactly_where_it_meets_no_other_edge() {
    let [stopped, free, ..] = compare(false, 31, 300, 60);
    assert!(stopped > 10_000 && free > 20_000, "{stopped} {free}");
}

#[test]
fn a_pad_fits_among_arcs_exactly_where_it_meets_no_other_edge() {
    let seen = compare(true, 32, 150, 24);
    assert!(seen.iter().all(|&count| count > 300), "{seen:?}");
}

/// A stretch ends at a corner, at a keep-out, or where the pad touches another edge.
#[test]
fn a_stretch_is_as_long_as_it_can_be() {
    let mut dice = Dice::seeded(33);
    let mut touching = [0, 0];
    for round in 0..300 {
        let Some(part) = toothed(&mut dice, round % 2 == 0) else { continue };
        let hand = any_pad(&mut dice);
        for stretch in stretches(&part, &hand) {
            let edge = part.outline().edge(stretch.edge).unwrap();
            for end in [stretch.from_mm, stretch.to_mm] {
                let room = room_on_edge(&part, &hand, edge, end);
                assert!(room > -1e-9, "{stretch:?} ends at {end} with room {room}");
                if room > 1e-9 {
                    touching[usize::from(edge.arc().is_some())] += 1;
                    let inside = blocked_by(&part, &hand, edge, end);
                    assert!(inside.abs() < 1e-6, "{stretch:?} ends at {end}, {inside} in");
                }
            }
        }
    }
    assert!(touching.iter().all(|&count| count > 150), "{touching:?}");
}

/// Numbers that are none, and sizes beyond all measure, give no stretch or some, and no panic.
#[test]
fn hostile_pads() {
    let mut dice = Dice::seeded(34);
    let part = (0..).find_map(|_| toothed(&mut dice, true)).unwrap();
    for width in [0.0, -1.0, 1e-300, 1e9, f64::NAN, f64::INFINITY] {
        for depth in [0.0, -1.0, 1e-300, 1e9, f64::NAN, f64::INFINITY] {
            for clearance in [0.0, f64::NAN, 1e300] {
                let hand = Hand { corner_clearance_mm: clearance, ..pad(width, depth) };
                for stretch in stretches(&part, &hand) {
                    assert!(stretch.from_mm <= stretch.to_mm, "{stretch:?} of {hand:?}");
                }
            }
        }
    }
}

/// Corners of a pad's rectangle, in order round it.
fn corners(hand: &Hand, contact: (Point2<f64>, Vector2<f64>)) -> [Point2<f64>; 4] {
    let (p, n) = contact;
    let (side, back) = (Vector2::new(n.y, -n.x) * (hand.pad_width_mm / 2.0), n * hand.pad_depth_mm);
    [p + side, p - side, p - side - back, p + side - back]
}

/// Distance of two rectangles by their sides: 0 when a side crosses a side or one holds the other's first corner.
fn plain_distance(a: [Point2<f64>; 4], b: [Point2<f64>; 4]) -> f64 {
    let turn = |p: Point2<f64>, q: Point2<f64>, r: Point2<f64>| (q - p).perp(&(r - p)) > 0.0;
    let to_side = |r: Point2<f64>, p: Point2<f64>, q: Point2<f64>| {
        let share = ((r - p).dot(&(q - p)) / (q - p).norm_squared()).clamp(0.0, 1.0);
        (r - (p + (q - p) * share)).norm()
    };
    let holds = |quad: &[Point2<f64>; 4], r: Point2<f64>| {
        let turns = [0, 1, 2, 3].map(|i| turn(quad[i], quad[(i + 1) % 4], r));
        turns.iter().all(|&side| side == turns[0])
    };
    let mut nearest = if holds(&a, b[0]) || holds(&b, a[0]) { 0.0 } else { f64::INFINITY };
    for i in 0..4 {
        for j in 0..4 {
            let (p, q, r, s) = (a[i], a[(i + 1) % 4], b[j], b[(j + 1) % 4]);
            if turn(p, q, r) != turn(p, q, s) && turn(r, s, p) != turn(r, s, q) {
                nearest = 0.0;
            }
            nearest = nearest.min(to_side(r, p, q)).min(to_side(p, r, s));
        }
    }
    nearest
}

#[test]
fn two_pads_are_apart_exactly_when_their_rectangles_are() {
    let mut dice = Dice::seeded(35);
    let mut seen = [0, 0];
    for round in 0..400_000 {
        let mut hand = pad(dice.even(0.5, 20.0), dice.even(0.5, 20.0));
        hand.gap_mm = if round % 3 == 0 { 0.0 } else { dice.even(0.0, 8.0) };
        let mut spot = |reach: f64| {
            let angle = if dice.pick(3) == 0 { dice.pick(8) as f64 * TAU / 8.0 } else { dice.even(0.0, TAU) };
            (Point2::new(dice.even(-reach, reach), dice.even(-reach, reach)), Vector2::new(angle.cos(), angle.sin()))
        };
        let (a, b) = (spot(14.0), spot(14.0));
        let distance = plain_distance(corners(&hand, a), corners(&hand, b));
        // At no gap touching decides, which the turns above tell to rounding only.
        if (distance - hand.gap_mm).abs() < 1e-9 && distance > 0.0 {
            continue;
        }
        let expected = distance > 0.0 && distance >= hand.gap_mm;
        seen[usize::from(expected)] += 1;
        assert_eq!(apart(&hand, a, b), expected, "{distance} of {} between {a:?} and {b:?}", hand.gap_mm);
        assert_eq!(apart(&hand, b, a), expected);
    }
    assert!(seen.iter().all(|&count| count > 100_000), "{seen:?}");
}

/// Elementary geometry: side by side, back to back, corner to corner.
#[test]
fn pads_may_touch() {
    let up = Vector2::new(0.0, 1.0);
    let spot = |x: f64, y: f64, n: Vector2<f64>| (Point2::new(x, y), n);
    for depth in [8.0, 0.0] {
        let hand = pad(12.0, depth);
        assert!(apart(&hand, spot(0.1, 0.3, up), spot(12.1, 0.3, up)));
        assert!(!apart(&hand, spot(0.1, 0.3, up), spot(12.099, 0.3, up)));
        assert!(!apart(&hand, spot(0.1, 0.3, up), spot(0.1, 0.3, up)));
        // Across a thin wall the bodies stand on either side of it.
        assert!(apart(&hand, spot(0.0, 0.0, up), spot(0.0, 0.1, -up)));
        // In a slot of 16 mm two pads 8 mm deep touch.
        assert!(apart(&hand, spot(0.0, 16.0, up), spot(0.0, 0.0, -up)));
        assert_eq!(apart(&hand, spot(0.0, 15.999, up), spot(0.0, 0.0, -up)), depth == 0.0);
        // A gap of 5 mm from corner to corner, 3 mm along and 4 mm across.
        let spaced = Hand { gap_mm: 5.0, ..hand };
        assert!(apart(&spaced, spot(0.0, 0.0, up), spot(15.0, 4.0 + depth, up)));
        assert!(!apart(&spaced, spot(0.0, 0.0, up), spot(14.999, 4.0 + depth, up)));
    }
    let nowhere = spot(f64::NAN, 0.0, up);
    assert!(!apart(&pad(12.0, 8.0), nowhere, spot(0.0, 0.0, up)));
}
