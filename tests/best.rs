//! The proved best against everything that might beat it: dense random placements, local searches from many starts, the
//! sampler, plain enumeration on fine grids, and cases whose best is known.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod common;

use common::{Dice, assert_close};
use holdwright::hand::{Closing, FingerCount, Stretch, Tip};
use holdwright::mechanics::{Assessment, Holding, LoadCase, MARGINAL, Verdict, quality};
use holdwright::part::{ArcDescription, KeepOutDescription, Part, PartDescription};
use holdwright::search::{Cancel, Cancelled, Key, Listing, Proved, Scene, Setup, Spot, TorqueScale, prove, rank};
use std::f64::consts::TAU;
use std::sync::Arc;

fn scene(described: PartDescription, fingers: usize, change: impl FnOnce(&mut Setup)) -> Scene {
    let mut setup = Setup::default();
    setup.hand.fingers = FingerCount::new(fingers).unwrap();
    change(&mut setup);
    Scene::new(Arc::new(Part::new(described).unwrap()), setup).unwrap()
}

fn proved(scene: &Scene, key: Key, want: usize, gap: f64, budget: u64) -> Proved {
    prove(scene, key, want, gap, budget, &Cancel::default(), &|_| ()).unwrap()
}

/// Larger is better, whatever the key.
fn merit(key: Key, value: f64) -> f64 {
    if matches!(key, Key::Friction | Key::Squeeze) { -value } else { value }
}

/// The score of a placement read in full, if a ranking would list it.
fn score(scene: &Scene, key: Key, spots: &[Spot]) -> Option<f64> {
    let grasp = scene.grasp(spots).ok()?;
    if !grasp.fits() {
        return None;
    }
    let wrenches = scene.wrenches(&grasp);
    let holding = scene.holding(&grasp, &wrenches);
    if holding.as_ref().is_some_and(|holding| !holding.held()) {
        return None;
    }
    if key == Key::Quality {
        // The plain definition (Ferrari & Canny 1992), without the kernel.
        let quality = quality::by_definition(wrenches.generators()).signed_quality;
        return (quality > MARGINAL).then_some(quality);
    }
    let mut read = Assessment::of(&wrenches, scene.frame(), scene.setup().friction.mu, &grasp.rooms_mm);
    if read.verdict != Verdict::Closed {
        return None;
    }
    let squeeze = holding.as_ref().and_then(Holding::squeeze_n);
    if let Some(holding) = holding {
        read.hold(holding, &wrenches, scene.setup().friction.mu);
    }
    match key {
        Key::Quality => None,
        Key::QualityPerFinger => Some(read.quality_per_finger),
        Key::Placement => Some(read.placement.mm),
        Key::Friction => read.friction_needed,
        Key::Squeeze => squeeze,
    }
}

fn ring(dice: &mut Dice, corners: usize, star: bool) -> Vec<[f64; 2]> {
    let vertex = |i: usize, dice: &mut Dice| {
        let at = (i as f64 + dice.even(-0.3, 0.3)) / corners as f64 * TAU;
        let r = if star { dice.even(18.0, 50.0) } else { 40.0 };
        [1.3 * r * at.cos(), r * at.sin()]
    };
    (0..corners).map(|i| vertex(i, dice)).collect()
}

/// Outlines of all sorts: convex, concave, with a hole, near symmetric, with arcs.
fn outline(dice: &mut Dice, sort: usize) -> PartDescription {
    let corners = 4 + dice.pick(5);
    let rings = match sort % 5 {
        0 => vec![ring(dice, corners, false)],
        1 => vec![ring(dice, corners + 2, true)],
        2 => {
            let hole = ring(dice, 3, false).iter().map(|p| [p[0] / 5.0, p[1] / 5.0]).collect();
            vec![ring(dice, corners, false), hole]
        }
        3 => {
            let off = [0.0, 1e-12, 1e-9, 1e-6, 1e-3][dice.pick(5)];
            let at = |i: usize| (i as f64 + 0.5) / corners as f64 * TAU;
            vec![(0..corners).map(|i| [40.0 * at(i).cos() + off * dice.even(0.0, 1.0), 40.0 * at(i).sin()]).collect()]
        }
        _ => vec![ring(dice, corners, false)],
    };
    let mut described = PartDescription::bare("test part", rings);
    if sort % 5 == 4 {
        let bulge = dice.even(0.05, 0.3);
        described.arcs = vec![ArcDescription { ring: 0, edge: dice.pick(corners), bulge }];
    }
    described
}

/// A place on the stretches, given by a number for each finger; the ends come up more often than by chance.
fn place(scene: &Scene, dice: &mut Dice) -> Vec<(Stretch, f64)> {
    let stretches = scene.stretches();
    let one = |dice: &mut Dice| {
        let stretch = stretches[dice.pick(stretches.len())];
        let share = [0.0, 1.0, 0.5, dice.even(0.0, 1.0), dice.even(0.0, 1.0)][dice.pick(5)];
        (stretch, stretch.from_mm + share * stretch.length_mm())
    };
    (0..scene.setup().hand.fingers.get()).map(|_| one(dice)).collect()
}

fn spots(place: &[(Stretch, f64)]) -> Vec<Spot> {
    place.iter().map(|(stretch, along_mm)| Spot { edge: stretch.edge, along_mm: *along_mm }).collect()
}

/// Family of a placement: indices of its stretches, ascending.
fn family(scene: &Scene, place: &[(Stretch, f64)]) -> Vec<usize> {
    let mut on: Vec<usize> =
        place.iter().map(|(own, _)| scene.stretches().iter().position(|other| other == own).unwrap()).collect();
    on.sort_unstable();
    on
}

struct Attack<'a> {
    scene: &'a Scene,
    key: Key,
    proved: &'a Proved,
    tried: usize,
}

impl Attack<'_> {
    /// Fails when a placement beats a stated bound.
    fn check(&mut self, place: &[(Stretch, f64)]) -> Option<f64> {
        let value = score(self.scene, self.key, &spots(place))?;
        self.tried += 1;
        let own = family(self.scene, place);
        let row = self.proved.grasps.iter().find(|row| row.listed.family == own);
        let bound = row.map_or(self.proved.rest_bound, |row| Some(row.bound));
        let key = self.key;
        for bound in [bound, self.proved.best_bound] {
            let bound = bound.expect("a grasp where there should be none");
            let hair = 1e-8 * (1.0 + bound.abs());
            assert!(merit(key, value) <= merit(key, bound) + hair, "{key:?}: {value} beats {bound} at {place:?}");
        }
        Some(merit(key, value))
    }

    /// Draws placements, and climbs from the best of them and from the listed ones.
    fn run(&mut self, dice: &mut Dice, draws: usize, climbs: usize) {
        let mut found: Vec<(f64, Vec<(Stretch, f64)>)> = Vec::new();
        for _ in 0..draws {
            let at = place(self.scene, dice);
            if let Some(value) = self.check(&at) {
                found.push((value, at));
            }
        }
        found.sort_by(|a, b| b.0.total_cmp(&a.0));
        for (value, at) in found.into_iter().take(climbs) {
            self.climb(value, at);
        }
    }

    fn climb(&mut self, mut value: f64, mut at: Vec<(Stretch, f64)>) {
        let mut step = 0.3;
        while step > 1e-4 {
            let mut better = false;
            for finger in 0..at.len() {
                for way in [step, -step] {
                    let mut next = at.clone();
                    let (stretch, along) = next[finger];
                    next[finger].1 = (along + way * stretch.length_mm()).clamp(stretch.from_mm, stretch.to_mm);
                    if let Some(own) = self.check(&next)
                        && own > value
                    {
                        (value, at, better) = (own, next, true);
                    }
                }
            }
            if !better {
                step /= 3.0;
            }
        }
    }
}

/// What every result has to be in itself: scores that the grasps really have, bounds beyond them, a gap that follows.
fn check_rows(scene: &Scene, key: Key, proved: &Proved, gap: f64) {
    for row in &proved.grasps {
        let value = score(scene, key, &row.listed.grasp.spots).expect("a listed grasp is one");
        assert_close(value, row.value, 1e-7, 1e-8);
        assert!(merit(key, row.bound) >= merit(key, row.value) - 1e-12);
        assert!(row.listed.grasp.fits());
    }
    for pair in proved.grasps.windows(2) {
        assert!(merit(key, pair[0].value) >= merit(key, pair[1].value) - 1e-7);
        assert_ne!(pair[0].listed.family, pair[1].listed.family);
    }
    if proved.proved {
        assert!(proved.gap <= gap + 1e-6);
        if let (Some(first), Some(bound)) = (proved.grasps.first(), proved.best_bound) {
            let small = match key {
                Key::Quality | Key::QualityPerFinger => 1e-4,
                Key::Placement => 1e-4 * scene.frame().scale_mm,
                Key::Friction => 1e-2 * scene.setup().friction.mu,
                Key::Squeeze => 1e-6,
            };
            let over = merit(key, bound) - merit(key, first.value);
            assert!(over <= gap * first.value.abs().max(small) * (1.0 + 1e-6) + 1e-6, "{over}");
        }
    }
}

/// No dense sampling of placements and no local search beats a stated bound, on outlines of all sorts.
fn nothing_beats(key: Key, seeds: std::ops::Range<u64>, budget: u64, least_proved: usize) {
    let (mut tried, mut ended, mut count) = (0, 0, 0);
    for seed in seeds {
        let mut dice = Dice::seeded(seed);
        let described = outline(&mut dice, seed as usize);
        let fingers = 2 + dice.pick(3);
        let pads = dice.pick(4) == 0;
        let scene = scene(described, fingers, |setup| {
            setup.friction.mu = dice.even(0.15, 0.9);
            if pads {
                setup.hand.tip = Tip::Pad;
                setup.hand.pad_width_mm = 5.0;
                setup.hand.pad_depth_mm = 3.0;
            } else if dice.pick(3) == 0 {
                setup.hand.pin_radius_mm = 2.0;
                setup.hand.gap_mm = 3.0;
            }
        });
        if scene.stretches().is_empty() {
            continue;
        }
        let gap = 0.02;
        let proved = proved(&scene, key, 3, gap, budget);
        check_rows(&scene, key, &proved, gap);
        let mut attack = Attack { scene: &scene, key, proved: &proved, tried: 0 };
        attack.run(&mut dice, 250, 4);
        eprintln!(
            "SEED {seed} {} fingers {fingers} pads {pads} stretches {} mu {:.2} proved {} gap {:.4} boxes {} fam {} opened {} rows {:?} best {:?} rest {:?}",
            seed % 5,
            scene.stretches().len(),
            scene.setup().friction.mu,
            proved.proved,
            proved.gap,
            proved.boxes,
            proved.families,
            proved.opened,
            proved.grasps.iter().map(|g| (g.value, g.bound)).collect::<Vec<_>>(),
            proved.best_bound,
            proved.rest_bound
        );
        tried += attack.tried;
        ended += usize::from(proved.proved);
        count += 1;
    }
    assert!(tried > 30 * count, "{tried} closed placements tried on {count} outlines");
    assert!(ended >= least_proved, "{ended} of {count} proved");
}

#[test]
fn no_placement_beats_the_bound_on_quality() {
    nothing_beats(Key::Quality, 0..320, 20_000, 300);
}

#[test]
fn no_placement_beats_the_bound_on_quality_per_finger() {
    nothing_beats(Key::QualityPerFinger, 1000..1080, 6_000, 60);
}

#[test]
fn no_placement_beats_the_bound_on_placement() {
    nothing_beats(Key::Placement, 2000..2150, 10_000, 100);
}

#[test]
fn no_placement_beats_the_bound_on_friction() {
    nothing_beats(Key::Friction, 3000..3080, 5_000, 50);
}

/// A flat plate of some weight, lifted and swung.
fn heavy(mut described: PartDescription) -> PartDescription {
    described.thickness = Some(8.0);
    described.mass_kg = Some(0.4);
    described
}

fn loads() -> Vec<LoadCase> {
    let named = |name: &str| LoadCase { name: name.into(), ..LoadCase::default() };
    vec![
        LoadCase { acceleration_m_s2: [0.0, 0.0, 2.5], safety: 1.5, ..named("lift") },
        LoadCase { acceleration_m_s2: [3.0, -5.0, 0.0], ..named("swing") },
    ]
}

/// The same under loads, by squeeze and, with the squeeze limited, by the other keys.
#[test]
fn no_placement_beats_the_bound_under_loads() {
    for seed in 4000..4020_u64 {
        let mut dice = Dice::seeded(seed);
        let described = heavy(outline(&mut dice, seed as usize));
        let fingers = 2 + dice.pick(2);
        let scene = scene(described, fingers, |setup| {
            setup.friction.mu = dice.even(0.3, 0.9);
            setup.loads = loads();
            setup.hand.force_limit_n = Some(60.0);
        });
        for key in [Key::Squeeze, Key::ALL[seed as usize % 4]] {
            let proved = proved(&scene, key, 2, 0.05, 1_500);
            check_rows(&scene, key, &proved, 0.05);
            let mut attack = Attack { scene: &scene, key, proved: &proved, tried: 0 };
            attack.run(&mut dice, 60, 2);
        }
    }
}

fn plate(width: f64, height: f64) -> PartDescription {
    PartDescription::bare("plate", vec![vec![[0.0, 0.0], [width, 0.0], [width, height], [0.0, height]]])
}

/// Two contacts facing each other across 2a: quality mu / sqrt(1 + mu^2 + (l/a)^2), placement mu a (derived; definition
/// Ferrari & Canny 1992), friction needed 0. All pairs on the facing edges are equal on the key: the middle is listed.
#[test]
fn two_parallel_faces() {
    let (mu, a, l) = (0.3, 10.0, 35.0);
    let scene = scene(plate(80.0, 20.0), 2, |setup| {
        setup.friction.mu = mu;
        setup.search.torque_scale = TorqueScale::Mm(l);
    });
    let facing = |proved: &Proved| {
        let row = proved.grasps.iter().find(|row| row.listed.family == [0, 2]).unwrap().clone();
        let contacts = &row.listed.grasp.contacts;
        (row.value, row.bound, contacts[0].point.x, contacts[1].point.x)
    };
    let (value, bound, left, right) = facing(&proved(&scene, Key::Placement, 4, 0.01, 100_000));
    assert_close(value, mu * a, 1e-6, 0.0);
    assert!(bound >= mu * a && bound <= mu * a * 1.0101, "{bound}");
    assert_close(left, 40.0, 0.0, 0.01);
    assert_close(right, 40.0, 0.0, 0.01);
    let (value, bound, left, right) = facing(&proved(&scene, Key::Quality, 4, 0.01, 100_000));
    let expected = mu / (1.0 + mu * mu + (l / a) * (l / a)).sqrt();
    assert_close(value, expected, 1e-4, 0.0);
    assert!(bound >= expected && bound <= expected * 1.0101);
    assert_close(left, right, 0.0, 0.5);
    let (value, bound, ..) = facing(&proved(&scene, Key::Friction, 4, 0.01, 100_000));
    assert!((0.0..1e-4).contains(&value) && bound <= value, "{value} {bound}");
}

/// Faces tapered by gamma each need tan gamma (derived); the other two faces may not be touched.
#[test]
fn a_tapered_part() {
    let gamma = 5.0_f64.to_radians();
    let rise = 60.0 * gamma.tan();
    let mut described =
        PartDescription::bare("taper", vec![vec![[0.0, 0.0], [60.0, rise], [60.0, 50.0 - rise], [0.0, 50.0]]]);
    for edge in [1, 3] {
        described.keep_outs.push(KeepOutDescription { ring: 0, edge, from: None, to: None, reason: "seal".into() });
    }
    let scene = scene(described, 2, |setup| setup.friction.mu = 0.3);
    let found = proved(&scene, Key::Friction, 1, 0.001, 100_000);
    assert!(found.proved && found.grasps[0].listed.family == [0, 1]);
    assert_close(found.grasps[0].value, gamma.tan(), 1e-3, 0.0);
    assert!(found.best_bound.unwrap() <= gamma.tan() + 1e-9);
    assert!(found.best_bound.unwrap() >= gamma.tan() * 0.9985);
}

/// The best at stretch ends: a frictionless pinwheel on a square, quality e / l / sqrt(1 + (2 e / l)^2) (derived), grows with
/// e up to the corners.
#[test]
fn the_best_at_stretch_ends() {
    let (half, l) = (20.0, 25.0);
    let scene = scene(plate(2.0 * half, 2.0 * half), 4, |setup| {
        setup.friction.mu = 0.0;
        setup.search.torque_scale = TorqueScale::Mm(l);
    });
    let found = proved(&scene, Key::Quality, 1, 0.01, 300_000);
    assert!(found.proved);
    assert_eq!(found.grasps[0].listed.family, [0, 1, 2, 3]);
    let e = half / l;
    assert_close(found.grasps[0].value, e / (1.0 + 4.0 * e * e).sqrt(), 1e-9, 0.0);
}

/// Three even contacts on a disc of radius l: quality mu for .1 <= mu <= .7 (derived), and no three are better, since no contact
/// has more than mu of torque. The disc is three arcs; as a polygon of 24 sides a contact off the middle of its
/// side gains at most half a side of torque.
#[test]
fn a_disc_and_a_polygon_like_one() {
    let (radius, mu) = (30.0, 0.4);
    let on =
        |i: usize, n: usize, r: f64| [r * (i as f64 / n as f64 * TAU).cos(), r * (i as f64 / n as f64 * TAU).sin()];
    let mut disc = PartDescription::bare("disc", vec![(0..3).map(|i| on(i, 3, radius)).collect()]);
    disc.arcs = (0..3).map(|edge| ArcDescription { ring: 0, edge, bulge: (TAU / 12.0).tan() }).collect();
    let of = |described: PartDescription| {
        scene(described, 3, |setup| {
            setup.friction.mu = mu;
            setup.search.torque_scale = TorqueScale::Mm(radius);
        })
    };
    let found = proved(&of(disc), Key::Quality, 1, 0.03, 60_000);
    assert_close(found.grasps[0].value, mu, 0.0, 1e-6);
    assert!(found.best_bound.unwrap() >= mu && found.best_bound.unwrap() <= mu * 1.1, "{:?}", found.best_bound);
    let n = 24;
    let outer = radius / (TAU / 2.0 / n as f64).cos();
    let found = proved(
        &of(PartDescription::bare("coin", vec![(0..n).map(|i| on(i, n, outer)).collect()])),
        Key::Quality,
        1,
        0.01,
        2_000_000,
    );
    let half_side = (TAU / 2.0 / n as f64).tan();
    assert!(found.proved, "{} {}", found.gap, found.boxes);
    assert!(found.grasps[0].value >= mu - 1e-9 && found.grasps[0].value <= mu + half_side);
}

/// An asymmetric bracket with a hole and a keep-out.
fn bracket() -> PartDescription {
    let outer = vec![[0.0, 0.0], [70.0, -6.0], [95.0, 31.0], [48.0, 66.0], [9.0, 52.0]];
    let hole = vec![[30.0, 18.0], [52.0, 20.0], [40.0, 39.0]];
    let mut described = PartDescription::bare("bracket", vec![outer, hole]);
    described.keep_outs.push(KeepOutDescription {
        ring: 0,
        edge: 1,
        from: Some(10.0),
        to: Some(20.0),
        reason: "weld".into(),
    });
    described
}

/// The proved best of a family is never below the best the sampler finds in it by more than the gap, and no family the
/// sampler finds beats the bound that goes for it; at the top of the list, by quality, neither is above the other by more
/// than a grid can miss: half the spacing over l (Pokorny & Kragic 2013).
#[test]
fn never_below_the_sampler() {
    let cases: [(usize, fn(&mut Setup)); 5] = [
        (2, |setup| setup.search.spacing_mm = Some(2.0)),
        (3, |setup| setup.search.spacing_mm = Some(4.0)),
        (3, |setup| {
            setup.search.spacing_mm = Some(6.0);
            setup.hand.pin_radius_mm = 3.0;
            setup.hand.gap_mm = 9.0;
        }),
        (2, |setup| {
            setup.search.spacing_mm = Some(2.0);
            setup.hand.tip = Tip::Pad;
            setup.hand.pad_width_mm = 7.0;
        }),
        (3, |setup| {
            setup.search.spacing_mm = Some(6.0);
            setup.floors.quality = 0.05;
            setup.floors.friction_margin = 1.3;
        }),
    ];
    for (fingers, change) in cases {
        for mixed in [false, true] {
            let mut described = bracket();
            if mixed {
                described.edge_friction = vec![(0, 2, 0.7), (0, 0, 0.1)];
            }
            let scene = scene(described, fingers, |setup| {
                setup.friction.mu = 0.3;
                change(setup);
            });
            for key in [Key::Quality, Key::QualityPerFinger, Key::Friction, Key::Placement] {
                let gap = 0.02;
                let found = proved(&scene, key, 6, gap, 40_000);
                check_rows(&scene, key, &found, gap);
                let sampled = rank(&scene, key, Listing::Families, 10_000, &Cancel::default(), &|_| ()).unwrap();
                let value = |assessment: &Assessment| match key {
                    Key::Quality => assessment.quality,
                    Key::QualityPerFinger => assessment.quality_per_finger,
                    Key::Friction => assessment.friction_needed.unwrap(),
                    _ => assessment.placement.mm,
                };
                for listed in &sampled.grasps {
                    let row = found.grasps.iter().find(|row| row.listed.family == listed.family);
                    let bound = row.map_or_else(
                        || {
                            found.rest_bound.unwrap_or_else(|| {
                                panic!(
                                    "{key:?} {fingers} {mixed} {:?} {:?} {:?} found {:?}",
                                    listed.family,
                                    listed.assessment,
                                    listed.grasp.spots,
                                    found
                                        .grasps
                                        .iter()
                                        .map(|g| (g.listed.family.clone(), g.value, g.bound))
                                        .collect::<Vec<_>>()
                                )
                            })
                        },
                        |row| row.bound,
                    );
                    let own = merit(key, value(&listed.assessment));
                    assert!(own <= merit(key, bound) + 1e-8, "{key:?} {own} {bound}");
                }
                for (row, listed) in found.grasps.iter().zip(&sampled.grasps) {
                    let own = value(&listed.assessment);
                    let slack = gap * own.abs().max(0.01) + 1e-7;
                    assert!(merit(key, row.value) >= merit(key, own) - slack, "{key:?} {} {own}", row.value);
                    if key == Key::Quality && found.proved {
                        let spacing = scene.setup().search.spacing_for(scene.part());
                        assert!(row.value <= own + spacing / 2.0 / scene.frame().scale_mm + slack);
                    }
                }
                let best = (&found.grasps[0], &sampled.grasps[0]);
                assert!(
                    merit(key, best.0.value) >= merit(key, value(&best.1.assessment)) - 1e-7
                        || !found.proved
                        || gap > 0.0
                );
            }
        }
    }
}

/// Parallel jaws: one parameter for each run; the best of a channel's runs against a fine walk along each.
#[test]
fn parallel_jaws() {
    let channel = vec![vec![
        [0.0, 0.0],
        [60.0, 0.0],
        [60.0, 40.0],
        [45.0, 40.0],
        [45.0, 12.0],
        [15.0, 12.0],
        [15.0, 40.0],
        [0.0, 40.0],
    ]];
    for with_loads in [false, true] {
        let jaws = scene(heavy(PartDescription::bare("channel", channel.clone())), 2, |setup| {
            setup.hand.tip = Tip::Pad;
            setup.hand.closing = Closing::Parallel;
            setup.hand.pad_width_mm = 8.0;
            setup.hand.pad_depth_mm = 5.0;
            setup.hand.opening_mm = [10.0, 80.0];
            if with_loads {
                setup.hand.force_limit_n = Some(90.0);
                setup.loads = loads();
            }
        });
        let keys = if with_loads { &Key::ALL[..] } else { &Key::ALL[..4] };
        for &key in keys {
            let found = proved(&jaws, key, 20, 0.001, 50_000);
            check_rows(&jaws, key, &found, 0.001);
            let mut families = 0;
            for run in jaws.jaw_runs() {
                let mut best: Option<f64> = None;
                for i in 0..=400 {
                    let along = run.along_mm(run.length_mm() * f64::from(i) / 400.0);
                    let spot = |finger: usize| Spot {
                        edge: jaws.stretches()[run.stretches[finger]].edge,
                        along_mm: along[finger],
                    };
                    if let Some(value) = score(&jaws, key, &[spot(0), spot(1)]) {
                        best = Some(best.map_or(merit(key, value), |best| best.max(merit(key, value))));
                    }
                }
                let Some(best) = best else { continue };
                families += 1;
                let row = found.grasps.iter().find(|row| row.listed.family == run.stretches).unwrap();
                assert!(merit(key, row.bound) >= best - 1e-8);
                assert!(merit(key, row.value) >= best - 0.001 * best.abs().max(0.01) - 1e-7, "{key:?} {best} {row:?}");
            }
            assert!(families >= 3 && families == found.grasps.len(), "{families}");
        }
    }
}

/// A spent budget widens the gap and says so; the bound still holds.
#[test]
fn a_spent_budget_is_honest() {
    let scene = scene(bracket(), 4, |setup| setup.friction.mu = 0.3);
    let whole = proved(&scene, Key::Quality, 1, 0.005, 1_000_000);
    assert!(whole.proved);
    let best = whole.grasps[0].value;
    for budget in [0, 1, 10, 100, 400] {
        let cut = proved(&scene, Key::Quality, 1, 0.005, budget);
        assert!(cut.boxes <= budget, "{} {budget}", cut.boxes);
        assert!(cut.best_bound.unwrap() >= best - 1e-9);
        assert!(cut.proved == (cut.gap <= 0.005 + 1e-6));
        if budget <= 10 {
            assert!(!cut.proved);
        }
    }
}

#[test]
fn any_number_of_threads_finds_the_same() {
    for (key, fingers) in [(Key::Quality, 4), (Key::Placement, 3), (Key::Friction, 3)] {
        let scene = scene(bracket(), fingers, |setup| setup.friction.mu = 0.3);
        let on = |threads| {
            let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
            pool.install(|| proved(&scene, key, 5, 0.02, 30_000))
        };
        let (one, two, three) = (on(1), on(2), on(3));
        assert_eq!(one, two);
        assert_eq!(one, three);
    }
}

#[test]
fn a_cancelled_search_stops() {
    let scene = scene(bracket(), 4, |_| ());
    let cancel = Cancel::default();
    cancel.cancel();
    assert_eq!(prove(&scene, Key::Quality, 1, 0.0, 1_000_000, &cancel, &|_| ()).err(), Some(Cancelled));
    let cancel = Cancel::default();
    let stop = |_| cancel.cancel();
    assert_eq!(prove(&scene, Key::Quality, 1, 0.0, 1_000_000, &cancel, &stop).err(), Some(Cancelled));
}

/// Fewer than four frictionless contacts never close (Reuleaux 1876; Somov 1897): proved without a search.
#[test]
fn where_nothing_closes_that_is_proved() {
    let scene = scene(bracket(), 3, |setup| setup.friction.mu = 0.0);
    let none = proved(&scene, Key::Quality, 5, 0.01, 1000);
    assert!(none.proved && none.grasps.is_empty() && none.best_bound.is_none());
}
