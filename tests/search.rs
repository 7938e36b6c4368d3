//! The ranking against plain enumeration: every subset of the same positions, scored by the linear programs and by the
//! plain definition of the hull (Trinkle 1992; Ferrari & Canny 1992), with none of the kernel's or the plan's shortcuts.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod common;

use common::{bracket, scene};
use holdwright::hand::{Closing, Drive, Tip};
use holdwright::mechanics::holding;
use holdwright::mechanics::load::Load;
use holdwright::mechanics::program::{self, Solved};
use holdwright::mechanics::{Holding, LoadCase, Verdict, Wrenches, closure, quality};
use holdwright::part::{ArcDescription, EdgeId, EdgeLimit, PartDescription};
use holdwright::search::{Cancel, Cancelled, Key, Listing, Ranking, Scene, Spot, sample};
use std::collections::{BTreeMap, BTreeSet};

fn ranked(scene: &Scene, key: Key, listing: Listing, most: usize) -> Ranking {
    sample(scene, key, listing, most, &Cancel::default(), &|_| ()).unwrap()
}

/// Positions by the rule: at most the spacing apart, both ends and the middle included.
fn positions(scene: &Scene) -> Vec<(usize, Spot)> {
    let spacing = scene.setup().search.spacing_for(scene.part());
    let mut all = Vec::new();
    for (family, stretch) in scene.stretches().iter().enumerate() {
        let length = stretch.to_mm - stretch.from_mm;
        let mut steps = 2;
        while length / f64::from(steps) > spacing {
            steps += 2;
        }
        for i in 0..=steps {
            let along_mm = stretch.from_mm + length * f64::from(i) / f64::from(steps);
            all.push((family, Spot { edge: stretch.edge, along_mm }));
        }
    }
    all
}

struct Plain {
    examined: u64,
    closed: u64,
    /// Families with a closed set.
    families: BTreeSet<Vec<usize>>,
    /// Best quality, quality per finger, friction needed, placement and squeeze of each family, of the sets that hold
    /// every load.
    best: BTreeMap<Vec<usize>, [f64; 6]>,
}

fn subsets(n: usize, k: usize, visit: &mut dyn FnMut(&[usize])) {
    fn go(from: usize, n: usize, k: usize, chosen: &mut Vec<usize>, visit: &mut dyn FnMut(&[usize])) {
        if chosen.len() == k {
            return visit(chosen);
        }
        for i in from..n {
            chosen.push(i);
            go(i + 1, n, k, chosen, visit);
            chosen.pop();
        }
    }
    go(0, n, k, &mut Vec::new(), visit);
}

/// The largest squeeze of all loads, each by the linear program.
fn plain_squeeze(scene: &Scene, wrenches: &Wrenches) -> f64 {
    let hold = scene.hold(wrenches);
    let one = |load: &Load, left: f64| match program::squeeze(&hold, &load.wrench) {
        Solved::Answer(n) => n / left,
        Solved::Infeasible => f64::INFINITY,
        Solved::Inconclusive(why) => panic!("{why}"),
    };
    let loads = || scene.cases().iter().flat_map(|case| case.loads.iter().map(|load| (load, case.squeeze_left)));
    let needed = loads().map(|(load, left)| one(load, left)).fold(0.0, f64::max);
    // Where all fingers are pressed alike, one squeeze has to hold every load, and more is not always better.
    let keeps = |load: &Load, left: f64| match program::most_squeeze(&hold, &load.wrench, 1e7) {
        Solved::Answer(n) => n / left >= needed * (1.0 - 1e-7),
        Solved::Infeasible | Solved::Inconclusive(_) => true,
    };
    let common = hold.drive() == Drive::Adjustable || loads().all(|(load, left)| keeps(load, left));
    if common { needed } else { f64::INFINITY }
}

fn plain(scene: &Scene) -> Plain {
    let positions = positions(scene);
    let mut plain = Plain { examined: 0, closed: 0, families: BTreeSet::new(), best: BTreeMap::new() };
    subsets(positions.len(), scene.setup().hand.fingers.get(), &mut |chosen| {
        let spots: Vec<Spot> = chosen.iter().map(|&i| positions[i].1).collect();
        let grasp = scene.grasp(&spots).unwrap();
        if !grasp.too_near.is_empty() {
            return;
        }
        plain.examined += 1;
        let wrenches = scene.wrenches(&grasp);
        let hull = quality::by_definition(wrenches.generators());
        let closed = hull.signed_quality > 1e-9;
        if hull.signed_quality.abs() > 1e-7 {
            let program = matches!(program::closure(&wrenches), Solved::Answer(_)) && closure::rank(&wrenches) == 3;
            assert_eq!(program, closed, "{spots:?}");
        }
        if !closed {
            return;
        }
        plain.closed += 1;
        let family: Vec<usize> = chosen.iter().map(|&i| positions[i].0).collect();
        plain.families.insert(family.clone());
        let squeeze = plain_squeeze(scene, &wrenches);
        // Without a limit, a hundred thousand times the load is no squeeze any more.
        let most = holding::any_squeeze_n(&holding::all_loads(scene.cases()));
        if !(squeeze <= scene.limit(&grasp).map_or(most, |limit| limit.squeeze_n)) {
            return;
        }
        let best = plain.best.entry(family).or_insert([0.0, 0.0, f64::INFINITY, 0.0, f64::INFINITY, 0.0]);
        best[4] = best[4].min(squeeze);
        // A squeeze grows with the loads.
        best[5] = best[5].max(scene.limit(&grasp).map_or(0.0, |limit| limit.squeeze_n / squeeze));
        let (assessment, doubts) = scene.assess(&grasp);
        assert_eq!(doubts, []);
        best[0] = best[0].max(hull.signed_quality);
        best[1] = best[1].max(assessment.quality_per_finger);
        best[2] = best[2].min(assessment.friction_needed.unwrap());
        best[3] = best[3].max(assessment.placement.mm);
    });
    plain
}

fn check_against_plain(scene: &Scene) {
    let plain = plain(scene);
    assert!(plain.closed > 10, "{}", plain.closed);
    for (at, key) in Key::ALL.into_iter().enumerate() {
        if !key.is_told_by(scene.setup()) {
            continue;
        }
        let ranking = ranked(scene, key, Listing::Families, 10_000);
        assert!(ranking.complete);
        assert_eq!((ranking.examined, ranking.closed), (plain.examined, plain.closed));
        assert_eq!((ranking.families, ranking.grasps.len()), (plain.families.len(), plain.best.len()));
        let value = |listed: &holdwright::search::Listed| match key {
            Key::Quality => listed.assessment.quality,
            Key::QualityPerFinger => listed.assessment.quality_per_finger,
            Key::Friction => listed.assessment.friction_needed.unwrap(),
            Key::Placement => listed.assessment.placement.mm,
            Key::Squeeze => listed.assessment.holding.as_ref().and_then(Holding::squeeze_n).unwrap(),
            Key::LoadMargin => listed.assessment.holding.as_ref().and_then(Holding::load_margin).unwrap(),
        };
        for listed in &ranking.grasps {
            assert_eq!(listed.assessment.verdict, Verdict::Closed);
            let best = plain.best[&listed.family][at];
            // Scores are compared in quanta of 1e-10 (1e-8 for friction), lengths over a reach of about 60 mm.
            assert!(
                (value(listed) - best).abs() < 2e-8 * (1.0 + best),
                "{key:?} {:?}: {} {best}",
                listed.family,
                value(listed)
            );
        }
        let falls = |pair: &[holdwright::search::Listed]| {
            let step = value(&pair[1]) - value(&pair[0]);
            let slack = 2e-8 * (1.0 + value(&pair[0]));
            if matches!(key, Key::Friction | Key::Squeeze) { step >= -slack } else { step <= slack }
        };
        assert!(ranking.grasps.windows(2).all(falls), "{key:?}");
        let members = ranked(scene, key, Listing::Members, 50);
        let best = ranking.grasps.first().map(value).unwrap();
        assert!((value(&members.grasps[0]) - best).abs() < 2e-8 * (1.0 + best));
        assert!(members.grasps.windows(2).all(falls));
        assert!(members.grasps.windows(2).all(|pair| pair[0].grasp != pair[1].grasp));
    }
}

#[test]
fn two_points() {
    check_against_plain(&scene(bracket(), 2, |setup| setup.search.spacing_mm = Some(5.0)));
}

#[test]
fn three_points() {
    check_against_plain(&scene(bracket(), 3, |setup| {
        setup.search.spacing_mm = Some(14.0);
        setup.friction.mu = 0.3;
    }));
}

#[test]
fn three_pins_that_need_room() {
    check_against_plain(&scene(bracket(), 3, |setup| {
        setup.search.spacing_mm = Some(12.0);
        setup.hand.pin_radius_mm = 3.0;
        setup.hand.gap_mm = 9.0;
        setup.hand.corner_clearance_mm = 2.0;
    }));
}

#[test]
fn edges_with_their_own_friction() {
    let mut described = bracket();
    described.edge_friction = vec![(0, 2, 0.7), (0, 0, 0.05)];
    check_against_plain(&scene(described, 3, |setup| setup.search.spacing_mm = Some(16.0)));
}

/// Directions differ from member to member where a finger stands on an arc; one of the arcs is a hollow.
#[test]
fn edges_that_are_arcs() {
    let mut described = bracket();
    described.arcs = [(0, 0, 0.35), (0, 3, -0.2), (1, 1, 0.4)]
        .into_iter()
        .map(|(ring, edge, bulge)| ArcDescription { ring, edge, bulge })
        .collect();
    check_against_plain(&scene(described.clone(), 3, |setup| setup.search.spacing_mm = Some(16.0)));
    described.edge_friction = vec![(0, 2, 0.7)];
    check_against_plain(&scene(described, 2, |setup| setup.search.spacing_mm = Some(6.0)));
}

/// A flat plate of some weight, lifted, jerked and pushed.
fn loads() -> Vec<LoadCase> {
    let named = |name: &str| LoadCase { name: name.into(), ..LoadCase::default() };
    vec![
        LoadCase { acceleration_m_s2: [0.0, 0.0, 2.5], safety: 1.8, ..named("lift") },
        LoadCase { acceleration_m_s2: [3.0, -5.0, 0.0], angular_acceleration_rad_s2: 30.0, ..named("swing") },
        LoadCase { force_n: [0.0, -2.0, 0.0], at_mm: [90.0, 30.0, 1.0], squeeze_left: 0.7, ..named("brush, low air") },
    ]
}

fn heavy(mut described: PartDescription) -> PartDescription {
    described.thickness = Some(8.0);
    described.mass_kg = Some(0.4);
    described
}

/// Loads take grasps away and raise the friction needed: two rounds find what one plain pass finds, whatever limits the
/// squeeze.
#[test]
fn pins_under_loads() {
    for (limit_n, spacing_mm) in [(Some(60.0), 15.0), (Some(22.0), 17.0), (None, 19.0)] {
        check_against_plain(&scene(heavy(bracket()), 3, |setup| {
            setup.search.spacing_mm = Some(spacing_mm);
            setup.friction.mu = 0.3;
            setup.hand.force_limit_n = limit_n;
            setup.loads = loads();
        }));
    }
}

/// Pads, one edge of which would be marked by little, and a drive that presses all alike.
#[test]
fn pads_under_loads() {
    let mut described = heavy(bracket());
    described.edge_limits =
        vec![EdgeLimit { edge: EdgeId { ring: 0, edge: 2 }, face_mpa: Some(0.5), line_n_per_mm: None }];
    check_against_plain(&scene(described, 2, |setup| {
        setup.search.spacing_mm = Some(3.5);
        setup.friction.mu = 0.4;
        setup.hand.tip = Tip::Pad;
        setup.hand.pad_width_mm = 7.0;
        setup.hand.pad_depth_mm = 5.0;
        setup.hand.force_limit_n = Some(80.0);
        setup.hand.drive = Drive::Equal;
        setup.loads = loads();
    }));
    check_against_plain(&scene(bracket(), 3, |setup| {
        setup.search.spacing_mm = Some(16.0);
        setup.hand.tip = Tip::Pad;
        setup.hand.pad_width_mm = 6.0;
        setup.hand.gap_mm = 2.0;
    }));
}

/// Pressed alike without a limit, three pins hold what they hold at one squeeze for all loads, or not at all.
#[test]
fn pins_pressed_alike() {
    for limit_n in [None, Some(70.0)] {
        check_against_plain(&scene(heavy(bracket()), 3, |setup| {
            setup.search.spacing_mm = Some(15.0);
            setup.friction.mu = 0.5;
            setup.hand.drive = Drive::Equal;
            setup.hand.force_limit_n = limit_n;
            setup.loads = loads();
        }));
    }
    // Two pins below and one above press the plate up by F: a push of 30 N down and one of 3 N ask for two different F.
    let plate = PartDescription::bare("plate", vec![vec![[0.0, 0.0], [80.0, 0.0], [80.0, 40.0], [0.0, 40.0]]]);
    let push = |n: f64| LoadCase {
        gravity: [0.0; 3],
        force_n: [0.0, -n, 0.0],
        at_mm: [40.0, 20.0, 0.0],
        ..LoadCase::default()
    };
    let pushed = scene(plate, 3, |setup| {
        setup.search.spacing_mm = Some(20.0);
        setup.hand.drive = Drive::Equal;
        setup.hand.force_limit_n = Some(100.0);
        setup.loads = vec![push(30.0), push(3.0)];
    });
    assert!(plain(&pushed).best.is_empty());
    for key in Key::ALL {
        let ranking = ranked(&pushed, key, Listing::Families, 100);
        assert!(ranking.grasps.is_empty() && ranking.families == 8 && ranking.not_held > 0, "{key:?}");
    }
}

/// Parallel jaws: every run gone through, the best of each listed, and each listed pair one that jaws can take.
#[test]
fn parallel_jaws_are_ranked_run_after_run() {
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
    let jaws = scene(heavy(PartDescription::bare("channel", channel)), 2, |setup| {
        setup.hand.tip = Tip::Pad;
        setup.hand.closing = Closing::Parallel;
        setup.hand.pad_width_mm = 8.0;
        setup.hand.pad_depth_mm = 5.0;
        setup.hand.opening_mm = [10.0, 80.0];
        setup.hand.force_limit_n = Some(90.0);
        setup.search.spacing_mm = Some(2.0);
        setup.loads = loads();
    });
    let mut best: BTreeMap<Vec<usize>, f64> = BTreeMap::new();
    let mut examined = 0;
    for run in jaws.jaw_runs() {
        let steps = 2 * (run.length_mm() / 4.0).ceil() as usize;
        for i in 0..=steps {
            let along = run.along_mm(run.length_mm() * i as f64 / steps.max(1) as f64);
            let spot =
                |finger: usize| Spot { edge: jaws.stretches()[run.stretches[finger]].edge, along_mm: along[finger] };
            let grasp = jaws.grasp(&[spot(0), spot(1)]).unwrap();
            assert!(grasp.fits(), "{:?}", grasp.jaws);
            examined += 1;
            let (assessment, doubts) = jaws.assess(&grasp);
            assert_eq!(doubts, []);
            if assessment.verdict == Verdict::Closed && assessment.holding.unwrap().held() {
                let own = best.entry(run.stretches.to_vec()).or_insert(0.0);
                *own = own.max(assessment.quality);
            }
        }
    }
    let ranking = ranked(&jaws, Key::Quality, Listing::Families, 1000);
    assert_eq!((ranking.examined, ranking.complete), (examined, true));
    assert_eq!(ranking.grasps.len(), best.len());
    assert!(best.len() >= 3, "{best:?}");
    for listed in &ranking.grasps {
        assert!((listed.assessment.quality - best[&listed.family]).abs() < 2e-10);
        let stand = listed.grasp.jaws.as_ref().unwrap().as_ref().unwrap();
        assert!((10.0..=80.0).contains(&stand.opening_mm));
    }
    // Between the legs the jaws press outward.
    let inside = |listed: &holdwright::search::Listed| matches!(&listed.grasp.jaws, Some(Ok(jaws)) if jaws.inside);
    assert!(ranking.grasps.iter().any(inside));
}

/// Fewer than four frictionless contacts never close (Reuleaux 1876; Somov 1897); four can.
#[test]
fn without_friction() {
    let square = || PartDescription::bare("plate", vec![vec![[0.0, 0.0], [40.0, 0.0], [40.0, 30.0], [0.0, 30.0]]]);
    let frictionless = |fingers| {
        scene(square(), fingers, |setup| {
            setup.friction.mu = 0.0;
            setup.search.spacing_mm = Some(5.0);
        })
    };
    for fingers in [2, 3] {
        assert_eq!(ranked(&frictionless(fingers), Key::Quality, Listing::Families, 5).closed, 0);
    }
    let four = ranked(&frictionless(4), Key::Quality, Listing::Families, 5);
    assert!(four.closed > 0);
    assert_eq!(four.grasps[0].family, [0, 1, 2, 3]);
}

/// Along a plateau of equal scores the grasp in the middle is listed: two pins on facing edges of a long plate are as
/// good anywhere as long as the torque arm is short (quality mu / sqrt(1 + mu^2 + (l/a)^2), placement mu a, friction
/// needed 0 for every facing pair).
#[test]
fn a_plateau_is_settled_in_its_middle() {
    let plate = PartDescription::bare("plate", vec![vec![[0.0, 0.0], [80.0, 0.0], [80.0, 20.0], [0.0, 20.0]]]);
    let scene = scene(plate, 2, |setup| setup.search.spacing_mm = Some(4.0));
    let ranking = ranked(&scene, Key::Placement, Listing::Families, 10);
    let facing = ranking.grasps.iter().find(|listed| listed.family == [0, 2]).unwrap();
    assert_eq!(facing.assessment.friction_needed, Some(0.0));
    for (contact, x) in facing.grasp.contacts.iter().zip([40.0, 40.0]) {
        assert!((contact.point.x - x).abs() < 1e-9, "{:?}", facing.grasp.spots);
    }
}

#[test]
fn floors_take_grasps_out_before_the_best_of_a_family_is_chosen() {
    let with = |quality: f64, friction_margin: f64, placement_mm: f64| {
        scene(bracket(), 3, |setup| {
            setup.search.spacing_mm = Some(14.0);
            setup.floors.quality = quality;
            setup.floors.friction_margin = friction_margin;
            setup.floors.placement_mm = placement_mm;
        })
    };
    let free = with(0.0, 1.0, 0.0);
    let all = ranked(&free, Key::Quality, Listing::Members, 1_000_000);
    let floored = with(0.05, 1.5, 2.0);
    let some = ranked(&floored, Key::Quality, Listing::Members, 1_000_000);
    assert_eq!(all.grasps.len() as u64, all.closed);
    assert_eq!(all.closed, some.closed);
    let passes = |listed: &&holdwright::search::Listed| {
        let a = &listed.assessment;
        a.quality >= 0.05 && a.friction_margin.is_none_or(|margin| margin >= 1.5) && a.placement.mm >= 2.0
    };
    let expected: Vec<_> = all.grasps.iter().filter(passes).collect();
    assert!(!expected.is_empty() && expected.len() < all.grasps.len());
    assert_eq!(expected, some.grasps.iter().collect::<Vec<_>>());
    let families = ranked(&floored, Key::Quality, Listing::Families, 10_000);
    assert!(families.grasps.iter().all(|listed| passes(&listed)));
}

#[test]
fn any_number_of_threads_finds_the_same() {
    for (fingers, budget) in [(3, 2_000_000), (3, 10_000), (5, 20_000), (4, 60)] {
        let scene = scene(bracket(), fingers, |setup| {
            setup.search.spacing_mm = Some(6.0);
            setup.search.budget = budget;
        });
        for listing in [Listing::Families, Listing::Members] {
            let on = |threads| {
                let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
                pool.install(|| ranked(&scene, Key::Quality, listing, 30))
            };
            let (one, two, three) = (on(1), on(2), on(3));
            assert_eq!(one, two);
            assert_eq!(one, three);
            assert!(one.examined <= budget);
        }
    }
}

/// A sample is part of the whole: it never finds better, its seed decides what it finds, and a larger budget nears the
/// truth.
#[test]
fn a_sample_is_honest() {
    let with = |budget, seed| {
        scene(bracket(), 3, |setup| {
            setup.search.spacing_mm = Some(6.0);
            setup.search.budget = budget;
            setup.search.seed = seed;
        })
    };
    let whole = ranked(&with(10_000_000, 1), Key::Quality, Listing::Families, 5);
    assert!(whole.complete && whole.examined > 20_000);
    let best = |ranking: &Ranking| ranking.grasps[0].assessment.quality;
    let sample = ranked(&with(8_000, 1), Key::Quality, Listing::Families, 5);
    assert!(!sample.complete);
    assert!(sample.examined > 6_000 && sample.examined <= 8_000, "{}", sample.examined);
    assert!(best(&sample) <= best(&whole) + 1e-10);
    assert!(best(&sample) > 0.8 * best(&whole));
    assert_eq!(sample, ranked(&with(8_000, 1), Key::Quality, Listing::Families, 5));
    assert_ne!(sample.grasps, ranked(&with(8_000, 2), Key::Quality, Listing::Families, 5).grasps);
}

#[test]
fn a_cancelled_ranking_stops() {
    let scene = scene(bracket(), 4, |setup| setup.search.budget = 50_000_000);
    let cancel = Cancel::default();
    let stop = |_| cancel.cancel();
    assert_eq!(sample(&scene, Key::Quality, Listing::Families, 5, &cancel, &stop).err(), Some(Cancelled));
}

#[test]
fn where_fingers_do_not_fit_is_said() {
    let scene = scene(bracket(), 2, |setup| setup.hand.pin_radius_mm = 3.0);
    let at = |edge, along_mm| Spot { edge: EdgeId { ring: 0, edge }, along_mm };
    let on_weld = scene.grasp(&[at(1, 15.0), at(4, 20.0)]).unwrap();
    assert!(!on_weld.fits() && on_weld.rooms_mm[0] < 0.0 && on_weld.rooms_mm[1] > 0.0);
    let crowded = scene.grasp(&[at(0, 30.0), at(0, 35.0)]).unwrap();
    assert_eq!(crowded.too_near, [(0, 1)]);
    assert!(scene.grasp(&[at(0, 30.0), at(9, 35.0)]).is_err());
    assert!(scene.grasp(&[at(0, 30.0), at(0, 3500.0)]).is_err());
    assert!(scene.grasp(&[at(0, 30.0)]).is_err());
}
