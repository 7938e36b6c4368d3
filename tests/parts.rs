//! Every demo part reads without a note, is of a size one can hold, and can be gripped with three fingers: by points
//! without size, and by the pins of the deck cell.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test stops at the first surprise")]

mod common;

use common::assert_close;
use holdwright::file;
use holdwright::mechanics::Verdict;
use holdwright::part::Part;
use holdwright::search::{Cancel, Key, Listing, Ranking, Scene, Setup, rank};
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
    rank(&scene, Key::Quality, Listing::Families, 5, &Cancel::default(), &|_| {}).unwrap()
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
                assert!(listed.assessment.friction_margin.is_none_or(|m| m >= setup.floors.friction_margin));
                assert!(listed.assessment.placement.mm >= setup.floors.placement_mm);
            }
        }
    }
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
