//! Every demo part reads without a note, is of a size one can hold, and can be gripped with three fingers: by points
//! without size, and by the pins of the deck cell.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test stops at the first surprise")]

mod common;

use common::assert_close;
use holdwright::file;
use holdwright::mechanics::Verdict;
use holdwright::part::{EdgeId, Part};
use holdwright::search::{Cancel, Key, Listing, Ranking, Scene, Setup, Spot, sample};
use std::path::{Path, PathBuf};
use std::sync::Arc;

fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("parts")
}

fn part_files() -> Vec<PathBuf> {
    let mut files: Vec<PathBuf> = std::fs::read_dir(folder())
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|e| e == "toml"))
        .filter(|path| !path.to_string_lossy().ends_with(".setup.toml"))
        .collect();
    files.sort();
    files
}

fn read(name: &str) -> Part {
    file::read_part(&folder().join(name)).unwrap()
}

fn ranked(part: &Arc<Part>, setup: &Setup) -> Ranking {
    let scene = Scene::new(part.clone(), setup.clone()).unwrap();
    sample(&scene, Key::Quality, Listing::Families, 5, &Cancel::default(), &|_| {}).unwrap()
}

#[test]
fn there_are_enough_of_them_and_they_read_without_a_note() {
    let files = part_files();
    assert!(files.len() >= 12, "{files:?}");
    for path in files {
        let (part, notes) = file::read_part_with_notes(&path).unwrap_or_else(|faults| panic!("{:?}", faults.lines()));
        assert!(notes.is_empty(), "{}: {notes:?}", path.display());
        let (low, high) = part.outline().bounds();
        let size = (high - low).amax();
        assert!((25.0..500.0).contains(&size), "{}: {size} mm", path.display());
        let mass = part.mass().expect("every demo part has a thickness and a material");
        assert!((0.005..3.0).contains(&mass.kg), "{}: {} kg", path.display(), mass.kg);
    }
}

#[test]
fn every_part_can_be_gripped() {
    let setups = [
        ("default", Setup::default()),
        ("deck cell", file::read_setup(&folder().join("deck_cell.setup.toml")).unwrap()),
    ];
    assert_eq!(setups[1].1.loads.len(), 3);
    for path in part_files() {
        let part = Arc::new(file::read_part(&path).unwrap());
        for (name, setup) in &setups {
            // A seventh of the sets is plenty to find a family, and quick.
            let mut setup = setup.clone();
            setup.search.budget = 300_000;
            let ranking = ranked(&part, &setup);
            assert!(!ranking.grasps.is_empty(), "{} under {name}: {ranking:?}", path.display());
            for listed in &ranking.grasps {
                assert_eq!(listed.grasp.contacts.len(), 3);
                assert!(listed.grasp.fits());
                assert_eq!(listed.assessment.verdict, Verdict::Closed);
                assert!(listed.assessment.quality > setup.floors.quality);
                let needed = listed.assessment.friction_needed_closure.unwrap_or(0.0);
                assert!(setup.friction.mu >= needed * setup.floors.friction_margin);
                assert!(listed.assessment.placement.mm >= setup.floors.placement_mm);
            }
        }
    }
}

/// A demo setup, parts it is for, and one grasp of the first of them: edges of the outer ring and places along them.
type Use = (&'static str, [&'static str; 2], &'static [(usize, f64)]);

/// Pins that all press alike hold only where their normals nearly cancel, as on what is round.
const USES: [Use; 4] = [
    ("deck_cell", ["hinge_leaf", "cleat_base"], &[(1, 9.0), (1, 29.0), (11, 19.0)]),
    ("plate_hand", ["strainer_plate", "angle_bracket"], &[(6, 65.7), (13, 34.7), (20, 60.2), (27, 7.9)]),
    ("three_pin", ["mast_collar_flange", "pintle_washer"], &[(0, 3.4), (16, 3.4), (32, 3.4)]),
    ("two_jaw", ["hinge_leaf", "cleat_base"], &[(0, 40.0), (6, 8.0)]),
];

/// Every demo setup reads, has its load set, finds grasps on its parts, and holds its loads with the grasp above.
#[test]
fn every_setup_works_with_its_parts() {
    let setup_files = std::fs::read_dir(folder()).unwrap().map(|entry| entry.unwrap().path());
    assert_eq!(setup_files.filter(|path| path.to_string_lossy().ends_with(".setup.toml")).count(), USES.len());
    let mut left = Vec::new();
    for (setup_name, parts, places) in USES {
        let path = folder().join(format!("{setup_name}.setup.toml"));
        let mut setup = file::read_setup(&path).unwrap_or_else(|faults| panic!("{:?}", faults.lines()));
        assert!(setup.loads.len() >= 3 && setup.hand.force_limit_n.is_some(), "{setup_name}");
        left.extend(setup.loads.iter().map(|load| load.squeeze_left));
        setup.search.budget = 20_000;
        for (number, part_name) in parts.into_iter().enumerate() {
            let part = Arc::new(read(&format!("{part_name}.toml")));
            let ranking = ranked(&part, &setup);
            assert!(!ranking.grasps.is_empty(), "{part_name} under {setup_name}: {ranking:?}");
            for listed in &ranking.grasps {
                let holding = listed.assessment.holding.as_ref().expect("there are loads");
                assert_eq!((holding.cases.len(), holding.drive), (setup.loads.len(), setup.hand.drive));
            }
            if number == 0 {
                let scene = Scene::new(part, setup.clone()).unwrap();
                let spot = |&(edge, along_mm): &(usize, f64)| Spot { edge: EdgeId { ring: 0, edge }, along_mm };
                let grasp = scene.grasp(&places.iter().map(spot).collect::<Vec<_>>()).unwrap();
                let (assessment, doubts) = scene.assess(&grasp);
                assert!(grasp.fits() && doubts.is_empty(), "{setup_name}: {grasp:?} {doubts:?}");
                let holding = assessment.holding.unwrap();
                assert!(assessment.verdict == Verdict::Closed && holding.held(), "{setup_name}: {holding:?}");
            }
        }
    }
    assert!(left.iter().any(|part| *part < 1.0), "no setup loses a part of its squeeze");
}

/// The strips of the fender block are rubber: they tear before the timber is marked.
#[test]
fn an_edge_may_bear_less_than_the_hand_gives() {
    let fender = read("fender_block.toml");
    let strips: Vec<_> = fender.edge_limits().iter().map(|limit| (limit.edge.edge, limit.face_mpa)).collect();
    assert_eq!(strips, [(0, Some(0.8)), (2, Some(0.8))]);
}

/// Area of a regular n-gon of circumradius r: n/2 r^2 sin(2 pi / n) (elementary geometry); vertices are written to
/// 0.0001 in.
#[test]
fn the_washer_in_inches_has_the_mass_of_two_polygons() {
    let ngon = |n: f64, r: f64| n / 2.0 * r * r * (std::f64::consts::TAU / n).sin();
    let washer = read("pintle_washer.toml");
    let square_inches = ngon(36.0, 0.625) - ngon(24.0, 0.2656);
    assert_close(washer.outline().region().area_mm2, square_inches * 25.4 * 25.4, 3e-4, 0.0);
    assert_close(washer.mass().unwrap().kg, square_inches * 0.125 * 25.4_f64.powi(3) * 8500e-9, 3e-4, 0.0);
    // The bore is off by 0.01 in, so the centroid is too, the other way.
    assert!(washer.file_point(washer.com()).x < -0.01);
}

/// What the files say beyond an outline arrives.
#[test]
fn marks_and_weights_arrive() {
    let fender = read("fender_block.toml");
    let mus: Vec<f64> = fender.outline().edges().iter().map(|edge| fender.mu_on(edge.id(), 0.2)).collect();
    assert_eq!(mus, [0.7, 0.2, 0.6, 0.2, 0.2]);
    let knee = read("thwart_knee.toml");
    assert_close(knee.mass().unwrap().kg, 0.142, 0.0, 0.0);
    assert_close(knee.file_point(knee.com()).x, 46.0, 1e-14, 0.0);
    assert_eq!(read("rudder_bracket.toml").keep_outs().len(), 3);
    assert!(read("rudder_bracket.toml").keep_outs().iter().all(|k| k.to_mm - k.from_mm > 15.0));
    assert_eq!(read("strainer_plate.toml").outline().ring_sizes().len(), 18);
}
