//! Dense random placements and local searches against every stated bound.

use super::*;

fn ring(dice: &mut Dice, corners: usize, star: bool) -> Vec<[f64; 2]> {
    let vertex = |i: usize, dice: &mut Dice| {
        let at = (i as f64 + dice.even(-0.3, 0.3)) / corners as f64 * TAU;
        let r = if star { dice.even(18.0, 50.0) } else { 40.0 };
        [1.3 * r * at.cos(), r * at.sin()]
    };
    (0..corners).map(|i| vertex(i, dice)).collect()
}

/// Outlines of all sorts: convex, concave, with a hole, near symmetric, with arcs.
pub(super) fn outline(dice: &mut Dice, sort: usize) -> PartDescription {
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
        for key in [Key::Squeeze, Key::LoadMargin, Key::ALL[seed as usize % 4]] {
            let proved = proved(&scene, key, 2, 0.05, 1_500);
            check_rows(&scene, key, &proved, 0.05);
            let mut attack = Attack { scene: &scene, key, proved: &proved, tried: 0 };
            attack.run(&mut dice, 60, 2);
        }
    }
}
