//! Saved grasps: read back number for number, appended without harm, never over someone else's change.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]
#![allow(clippy::float_cmp, reason = "what was written in decimal must be read back digit for digit")]

mod sound;

use holdwright::file::{
    CAUTION, GraspFile, Keep, KeptDensity, SCORES, SaveFault, Scores, default_grasp_path, grasps_from_text,
    part_digest, part_from_text, read_grasps, read_part, save, setup_from_text, shown, stamp,
};
use holdwright::hand::{Closing, Drive, Tip};
use holdwright::mechanics::{Condition, LoadCase};
use holdwright::part::{EdgeId, Part};
use holdwright::search::{Scene, Setup, Spot, TorqueScale};
use proptest::prelude::*;
use sound::{CELL, HINGE, broken, line_of};
use std::path::{Path, PathBuf};
use std::sync::Arc;

fn hinge() -> Arc<Part> {
    Arc::new(part_from_text(Path::new("leaf.toml"), HINGE).unwrap().0)
}

fn keep(name: &str, setup: &Setup, spots: &[(usize, usize, f64)]) -> Keep {
    let scene = Scene::new(hinge(), setup.clone()).unwrap();
    let spot = |&(ring, edge, along_mm)| Spot { edge: EdgeId { ring, edge }, along_mm };
    let grasp = scene.grasp(&spots.iter().map(spot).collect::<Vec<_>>()).unwrap();
    let (assessment, _) = scene.assess(&grasp);
    Keep { name: name.to_owned(), note: String::new(), grasp, assessment, setup: setup.clone(), density: None }
}

/// Two fingers that close and two that do not.
const FACING: [(usize, usize, f64); 2] = [(0, 0, 40.1), (0, 2, 40.0)];
const STAGGERED: [(usize, usize, f64); 2] = [(0, 0, 10.0), (0, 2, 30.0)];

/// A folder with the hinge's part file in it, and the place of its grasps.
fn bench() -> (tempfile::TempDir, PathBuf, PathBuf) {
    let folder = tempfile::tempdir().unwrap();
    let part = folder.path().join("leaf.toml");
    std::fs::write(&part, HINGE).unwrap();
    let grasps = default_grasp_path(&part);
    (folder, part, grasps)
}

/// Names of everything in a folder.
fn names_in(folder: &Path) -> Vec<String> {
    let mut names: Vec<_> =
        std::fs::read_dir(folder).unwrap().map(|e| e.unwrap().file_name().into_string().unwrap()).collect();
    names.sort();
    names
}

/// Lines of a grasp file from the nth `[[grasp]]` to the next, without time and name.
fn lines_of_grasp(text: &str, n: usize) -> Vec<&str> {
    let piece = text.split("[[grasp]]").nth(n + 1).unwrap();
    piece.lines().filter(|l| !l.starts_with("time") && !l.starts_with("name") && !l.trim().is_empty()).collect()
}

#[test]
fn a_saved_grasp_is_read_back_number_for_number() {
    let (folder, part_path, path) = bench();
    assert_eq!(path, folder.path().join("leaf.grasps.toml"));
    let mut setup = setup_from_text(Path::new("c"), CELL).unwrap();
    (setup.hand.tip, setup.hand.closing) = (Tip::Pin, Closing::Free);
    let setup = Setup { loads: setup.loads.clone(), ..setup };
    let mut closed = keep("by the pin", &setup, &FACING);
    closed.note = "clear of the seal\nsecond line, \"quoted\" \\ \u{fc}".to_owned();
    let open = keep("staggered", &setup, &STAGGERED);
    assert_eq!(stamp(&path), None);
    let before = jiff::Timestamp::now();
    let saved = save(&path, &part_path, &hinge(), &[closed.clone(), open.clone()], None).unwrap();
    assert_eq!(stamp(&path), Some(saved.clone()));
    let text = std::fs::read_to_string(&path).unwrap();
    assert!(text.contains(CAUTION) && text.contains("first-order statics"), "{text}");

    let GraspFile { program, part_path: named, part_name, part_digest: digest, setup: back, grasps, removed, stamp } =
        read_grasps(&path).unwrap();
    assert_eq!(program, format!("holdwright {}", env!("CARGO_PKG_VERSION")));
    assert_eq!((named, part_name.as_str(), stamp), (part_path, "hinge leaf", saved));
    assert_eq!(digest, part_digest(&hinge()));
    assert_eq!(back, setup);
    assert_eq!((grasps.len(), removed.len()), (2, 0));
    for (kept, read) in [closed, open].iter().zip(&grasps) {
        assert_eq!((&read.name, &read.note), (&kept.name, &kept.note));
        assert_eq!(read.spots, kept.grasp.spots);
        assert_eq!(read.scores, Scores::of(&kept.assessment, 40.0, 2));
        assert_eq!((&read.setup, read.own_setup), (&setup, false));
        let age = read.time.unwrap().duration_since(before).as_secs();
        assert!((-1..60).contains(&age), "{age}");
    }
    // What the loads ask is there for every case, with a force for each finger of what is held.
    assert_eq!(grasps[0].scores.loads.len(), 3);
    assert!(grasps[0].scores.loads.iter().any(|load| load.finger_forces_n.len() == 2));
    assert_eq!(grasps[0].scores.loads[1].name, "emergency stop");
    assert!(grasps[0].scores.loads[1].direction_deg.is_some() && grasps[0].scores.held.is_some());
    assert!(text.contains("friction cones in space as pyramids of 12 sides; mass from the part file"), "{text}");
    assert!(text.contains("all fingers press with the same force"), "{text}");
    assert_eq!(grasps[0].scores.scores[0], Some(keep("", &setup, &FACING).assessment.quality));
    assert_eq!(names_in(folder.path()), ["leaf.grasps.toml", "leaf.toml"]);
}

#[test]
fn the_same_grasp_twice_gives_the_same_lines() {
    let (_folder, part_path, path) = bench();
    let kept = keep("a", &Setup::default(), &FACING);
    let first = save(&path, &part_path, &hinge(), std::slice::from_ref(&kept), None).unwrap();
    save(&path, &part_path, &hinge(), &[kept.clone(), kept], Some(&first)).unwrap();
    let text = std::fs::read_to_string(&path).unwrap();
    assert!(lines_of_grasp(&text, 0).len() > 12);
    assert_eq!(lines_of_grasp(&text, 0), lines_of_grasp(&text, 1));
    let names: Vec<_> = read_grasps(&path).unwrap().grasps.into_iter().map(|grasp| grasp.name).collect();
    assert_eq!(names, ["a", "a (2)", "a (3)"]);
}

/// Two pads against each other hold the weight by friction alone, so F = m g / (2 mu) (Coulomb, statics).
#[test]
fn a_chosen_density_is_kept_with_its_grasp_and_taken_again() {
    let (_folder, part_path, path) = bench();
    let massless = broken(HINGE, "material = \"aluminium 5083\"\n", "");
    let massless = broken(&massless, "com = [31.0, 18.5]", "com = [40.0, 20.0]");
    std::fs::write(&part_path, &massless).unwrap();
    let part = Arc::new(part_from_text(&part_path, &massless).unwrap().0);
    assert!(part.mass().is_none());
    let density = KeptDensity { of: "brass".to_owned(), kg_m3: 8500.0 };
    let weighed = Arc::new(density.applied_to(&part).unwrap());
    let mut setup = Setup { loads: vec![LoadCase::default()], ..Setup::default() };
    setup.hand.tip = Tip::Pad;
    let scene = Scene::new(weighed.clone(), setup.clone()).unwrap();
    let spot = |edge| Spot { edge: EdgeId { ring: 0, edge }, along_mm: 40.0 };
    let grasp = scene.grasp(&[spot(0), spot(2)]).unwrap();
    let (assessment, doubts) = scene.assess(&grasp);
    assert!(doubts.is_empty(), "{doubts:?}");
    let keep = Keep { name: "a".into(), note: String::new(), grasp, assessment, setup, density: Some(density.clone()) };
    save(&path, &part_path, &part, &[keep], None).unwrap();
    let text = std::fs::read_to_string(&path).unwrap();
    assert!(text.contains("density_kg_m3 = 8500.0\ndensity_of = \"brass\"\n"), "{text}");
    assert!(text.contains("mass from the density of brass, chosen"), "{text}");
    let read = read_grasps(&path).unwrap();
    let own = &read.grasps[0];
    assert_eq!(own.density, Some(density));
    let mass = own.part(&part).mass().unwrap().kg;
    assert_eq!(mass, weighed.mass().unwrap().kg);
    assert!(text.contains(&format!("mass_kg = {mass:?}\n")), "{text}");
    let squeeze_n = own.scores.loads[0].squeeze_n.unwrap();
    let by_hand = mass * 9.80665 / (2.0 * 0.2);
    assert!((squeeze_n - by_hand).abs() < 1e-6 * by_hand, "{squeeze_n} {by_hand}");
    let at = |name: &str| own.scores.scores[SCORES.iter().position(|score| *score == name).unwrap()];
    assert_eq!((at("squeeze_n"), at("squeeze_total_n")), (Some(squeeze_n), Some(2.0 * squeeze_n)));
    // A part with a mass of its own needs no density.
    assert_eq!(own.part(&hinge()).mass(), hinge().mass());
}

/// Files from before loads were scored have none of their keys.
#[test]
fn a_file_without_the_keys_of_loads_is_read() {
    let (_folder, part_path, path) = bench();
    let setup = Setup { loads: vec![LoadCase::default()], ..Setup::default() };
    save(&path, &part_path, &hinge(), &[keep("a", &setup, &FACING)], None).unwrap();
    let text = std::fs::read_to_string(&path).unwrap();
    let (before, after) = text.split_once("loads = [\n").unwrap();
    let new = ["friction_needed_holding", "squeeze", "load_margin = ", "held", "governing_load", "mass_kg"];
    let old: String = format!("{before}{}", after.split_once("]\n").unwrap().1)
        .split_inclusive('\n')
        .filter(|line| line.starts_with("load_margin = 1.0") || !new.iter().any(|key| line.starts_with(key)))
        .collect();
    assert!(old.len() + 200 < text.len(), "{old}");
    let file = grasps_from_text(&path, &old).unwrap();
    let scores = &file.grasps[0].scores;
    assert!((scores.held, scores.loads.len(), &scores.governing_load) == (None, 0, &None));
    assert_eq!(scores.scores[0], read_grasps(&path).unwrap().grasps[0].scores.scores[0]);
}

#[test]
fn saving_keeps_every_byte_that_is_there_and_a_setup_of_its_own_beside_its_grasp() {
    let (_folder, part_path, path) = bench();
    save(&path, &part_path, &hinge(), &[keep("a", &Setup::default(), &FACING)], None).unwrap();
    // Someone writes a comment, and no line end after it.
    let mut text = std::fs::read_to_string(&path).unwrap().replace("\n[[grasp]]", "\n# tried on Monday\n[[grasp]]");
    text.push_str("# last words");
    std::fs::write(&path, &text).unwrap();
    let mut slippery = Setup::default();
    slippery.friction.mu = 0.12;
    slippery.hand.force_limit_n = Some(45.5);
    let known = stamp(&path);
    save(&path, &part_path, &hinge(), &[keep("b", &slippery, &FACING)], known.as_ref()).unwrap();
    let after = std::fs::read_to_string(&path).unwrap();
    assert!(after.starts_with(&text));
    let file = read_grasps(&path).unwrap();
    assert_eq!((&file.grasps[0].setup, file.grasps[0].own_setup), (&Setup::default(), false));
    assert_eq!((&file.grasps[1].setup, file.grasps[1].own_setup), (&slippery, true));
    assert_eq!(file.setup, Setup::default());
}

#[test]
fn a_change_by_someone_else_is_not_written_over() {
    let (folder, part_path, path) = bench();
    let kept = [keep("a", &Setup::default(), &FACING)];
    let mine = save(&path, &part_path, &hinge(), &kept, None).unwrap();
    let is_changed = |known| {
        let before = std::fs::read(&path).ok();
        let fault = save(&path, &part_path, &hinge(), &kept, known).unwrap_err();
        assert!(matches!(fault, SaveFault::ChangedMeanwhile(_)), "{fault}");
        assert!(fault.to_string().ends_with("leaf.grasps.toml: changed by someone else meanwhile"));
        assert_eq!(std::fs::read(&path).ok(), before);
    };
    // There is a file where none was known.
    is_changed(None);
    let text = std::fs::read_to_string(&path).unwrap();
    std::fs::write(&path, format!("{text}\n")).unwrap();
    is_changed(Some(&mine));
    std::fs::remove_file(&path).unwrap();
    is_changed(Some(&mine));
    assert_eq!(names_in(folder.path()), ["leaf.toml"]);
}

#[test]
fn a_file_someone_is_saving_to_is_left_alone() {
    let (_folder, part_path, path) = bench();
    let kept = [keep("a", &Setup::default(), &FACING)];
    let known = save(&path, &part_path, &hinge(), &kept, None).unwrap();
    let other = std::fs::File::open(&path).unwrap();
    other.lock().unwrap();
    let fault = save(&path, &part_path, &hinge(), &kept, Some(&known)).unwrap_err();
    assert!(matches!(fault, SaveFault::ChangedMeanwhile(_)), "{fault}");
    drop(other);
    save(&path, &part_path, &hinge(), &kept, Some(&known)).unwrap();
}

#[test]
fn a_file_of_another_part_or_of_something_else_is_left_alone() {
    let (_folder, part_path, path) = bench();
    let kept = [keep("a", &Setup::default(), &FACING)];
    save(&path, &part_path, &hinge(), &kept, None).unwrap();
    let (longer, _) = part_from_text(&part_path, &HINGE.replacen("[80.0, 40.0]", "[80.5, 40.0]", 1)).unwrap();
    let fault = save(&path, &part_path, &longer, &kept, stamp(&path).as_ref()).unwrap_err();
    assert!(matches!(fault, SaveFault::OtherPart(_)), "{fault}");
    for text in ["schema = 1\n", "not a grasp file", "\u{0}"] {
        std::fs::write(&path, text).unwrap();
        let fault = save(&path, &part_path, &hinge(), &kept, stamp(&path).as_ref()).unwrap_err();
        assert!(matches!(fault, SaveFault::Unreadable(_)), "{fault}");
        assert_eq!(std::fs::read_to_string(&path).unwrap(), text);
    }
}

#[cfg(unix)]
#[test]
fn permissions_and_links_are_kept() {
    use std::os::unix::fs::PermissionsExt;
    let (folder, part_path, path) = bench();
    let kept = [keep("a", &Setup::default(), &FACING)];
    let known = save(&path, &part_path, &hinge(), &kept, None).unwrap();
    let mode = |path: &Path| std::fs::metadata(path).unwrap().permissions().mode() & 0o777;
    // A new file gets what any program's new file gets here.
    assert_eq!(mode(&path), mode(&part_path));
    std::fs::set_permissions(&path, std::fs::Permissions::from_mode(0o640)).unwrap();
    let link = folder.path().join("link.toml");
    std::os::unix::fs::symlink("leaf.grasps.toml", &link).unwrap();
    save(&link, &part_path, &hinge(), &kept, Some(&known)).unwrap();
    assert!(std::fs::symlink_metadata(&link).unwrap().is_symlink());
    assert_eq!(read_grasps(&path).unwrap().grasps.len(), 2);
    assert_eq!(mode(&path), 0o640);
    // A file made read-only stays as it is, whoever asks.
    std::fs::set_permissions(&path, std::fs::Permissions::from_mode(0o440)).unwrap();
    let fault = save(&path, &part_path, &hinge(), &kept, stamp(&path).as_ref()).unwrap_err();
    assert!(fault.to_string().ends_with("permission denied"), "{fault}");
    assert_eq!(read_grasps(&path).unwrap().grasps.len(), 2);
    // A link to a file that is not there yet makes that file.
    let early = folder.path().join("early.toml");
    std::os::unix::fs::symlink("later.toml", &early).unwrap();
    save(&early, &part_path, &hinge(), &kept, None).unwrap();
    assert!(folder.path().join("later.toml").is_file());
}

#[test]
fn the_part_is_named_from_where_the_grasps_are() {
    let (folder, part_path, _) = bench();
    let elsewhere = folder.path().join("kept/by me");
    std::fs::create_dir_all(&elsewhere).unwrap();
    let path = elsewhere.join("g.toml");
    save(&path, &part_path, &hinge(), &[keep("a", &Setup::default(), &FACING)], None).unwrap();
    assert!(std::fs::read_to_string(&path).unwrap().contains("part = \"../../leaf.toml\"\n"));
    let part = read_part(&read_grasps(&path).unwrap().part_path).unwrap();
    assert_eq!(part_digest(&part), part_digest(&hinge()));
}

/// FIPS 180-4 gives SHA-256 64 hexadecimal digits; what must change it and what must not is this program's promise.
#[test]
fn the_digest_sees_what_alters_scores_and_nothing_else() {
    let digest = |text: &str| part_digest(&part_from_text(Path::new("leaf.toml"), text).unwrap().0);
    let sound = digest(HINGE);
    assert_eq!(sound.len(), 64);
    assert!(sound.chars().all(|c| c.is_ascii_hexdigit()));
    for (from, to) in [("hinge leaf", "leaf"), ("sealing face", "seal"), ("80.0, 0.0", "80, 0")] {
        assert_eq!(digest(&broken(HINGE, from, to)), sound, "{from}");
    }
    for (from, to) in [
        ("[80.0, 40.0]", "[80.0, 40.001]"),
        ("[14.0, 10.0]", "[14.0, 10.5]"),
        ("thickness = 6.0", "thickness = 6.5"),
        ("aluminium 5083", "steel"),
        ("[31.0, 18.5]", "[31.0, 18.6]"),
        ("to = 12.0", "to = 13.0"),
        ("edge = 2", "edge = 0"),
        ("mu = 0.6", "mu = 0.5"),
    ] {
        assert_ne!(digest(&broken(HINGE, from, to)), sound, "{from}");
    }
}

#[test]
fn grasp_files_broken_in_one_place() {
    let (_folder, part_path, path) = bench();
    save(&path, &part_path, &hinge(), &[keep("a", &Setup::default(), &FACING)], None).unwrap();
    let sound = std::fs::read_to_string(&path).unwrap();
    let one = |from: &str, to: &str, at: &str, says: &str| {
        let text = broken(&sound, from, to);
        let faults = grasps_from_text(Path::new("g.toml"), &text).unwrap_err().faults;
        assert_eq!(faults.len(), 1, "{faults:?}");
        let line = if at.is_empty() { None } else { Some(line_of(&text, at)) };
        assert_eq!(faults[0].line, line, "{faults:?}");
        assert!(faults[0].text.contains(says), "{faults:?}");
    };
    one("part = \"leaf.toml\"\n", "", "", "`part` is missing");
    one("part_digest = \"", "part_digest = \"0", "part_digest", "has 65 digits, not 64");
    one("quality_per_finger", "quality_per_fingers", "quality_per_fingers", "did you mean `quality_per_finger`");
    one("verdict = \"closed\"", "verdict = \"shut\"", "verdict", "give \"closed\" or \"open\" or \"marginal\"");
    one("along_mm = 40.1", "along_mm = \"a\"", "{ ring = 0, edge = 0", "`grasp.0.contacts.0.along_mm`");
    one("edge = 2, ", "", "{ ring = 0, along", "`grasp.0.contacts.1.edge` is missing");
    one("time = ", "time = \"today\" # ", "time = \"today\"", "`grasp.0.time`");
    one("fingers = 3", "fingers = 9", "fingers = 9", "`setup.hand.fingers` is 9");
    one("name = \"a\"\n", "", "[[grasp]]", "`grasp.0.name` is missing");
    one("mass_kg", "density_kg_m3 = 0.0\ndensity_of = \"x\"\nmass_kg", "density_kg_m3", "`grasp.0.density_kg_m3` is 0");
    one("mass_kg", "density_of = \"x\"\nmass_kg", "[[grasp]]", "`grasp.0.density_kg_m3` is missing");
    one("mass_kg", "held = 1\nmass_kg", "held", "`grasp.0.held` is 1; give true or false");
    let loads = "loads = [{ name = \"lift\", held = true, finger_forces_n = [[1.0, 2.0]] }]\nmass_kg";
    one("mass_kg", loads, "loads", "`grasp.0.loads.0.finger_forces_n` is a list of 1 entry; give a list of lists of 3");
}

/// However many save at once, whoever is refused may try again, and in the end everything is there once.
#[test]
fn many_save_at_once() {
    let (folder, part_path, path) = bench();
    let part = hinge();
    let kept = keep("start", &Setup::default(), &FACING);
    save(&path, &part_path, &part, std::slice::from_ref(&kept), None).unwrap();
    let one = |who: usize| {
        for turn in 0..5 {
            let mine = [Keep { name: format!("{who}/{turn}"), ..kept.clone() }];
            loop {
                match save(&path, &part_path, &part, &mine, stamp(&path).as_ref()) {
                    Ok(_) => break,
                    Err(SaveFault::ChangedMeanwhile(_)) => std::thread::yield_now(),
                    Err(fault) => panic!("{fault}"),
                }
            }
        }
    };
    std::thread::scope(|scope| {
        for who in 0..4 {
            scope.spawn(move || one(who));
        }
    });
    let mut there: Vec<_> = read_grasps(&path).unwrap().grasps.into_iter().map(|grasp| grasp.name).collect();
    there.sort();
    let mut want: Vec<_> = (0..4).flat_map(|who| (0..5).map(move |turn| format!("{who}/{turn}"))).collect();
    want.push("start".to_owned());
    assert_eq!(there, want);
    assert_eq!(names_in(folder.path()), ["leaf.grasps.toml", "leaf.toml"]);
}

/// The same with no file to begin with: one of all makes it.
#[test]
fn many_begin_a_file_at_once() {
    for _ in 0..10 {
        let (_folder, part_path, path) = bench();
        let part = hinge();
        let kept = keep("a", &Setup::default(), &FACING);
        let one = || save(&path, &part_path, &part, std::slice::from_ref(&kept), None).is_ok();
        let made = std::thread::scope(|scope| {
            let threads: Vec<_> = (0..4).map(|_| scope.spawn(one)).collect();
            threads.into_iter().filter_map(|thread| thread.join().ok()).filter(|made| *made).count()
        });
        assert_eq!((made, read_grasps(&path).unwrap().grasps.len()), (1, 1));
    }
}

prop_compose! {
    fn any_setup()(
        mu in 0.0..1.0_f64,
        high in prop::option::of(1.0..2.0_f64),
        source in prop::option::of(any::<String>()),
        (radius, bite, gap) in (0.0..1e3_f64, prop::option::of(1e-3..6.0_f64), 0.0..1e-3_f64),
        limit in prop::option::of(1e-3..1e6_f64),
        drive in prop::sample::select(&[Drive::Adjustable, Drive::Equal][..]),
        condition in prop::option::of(prop::sample::select(&[Condition::Dry, Condition::Oily, Condition::Wet][..])),
        scale in prop_oneof![Just(TorqueScale::Reach), Just(TorqueScale::Gyration), (1e-6..1e6_f64).prop_map(TorqueScale::Mm)],
        (seed, budget, spacing) in (any::<u64>(), 1..10_000_000_000_u64, prop::option::of(1e-3..1e3_f64)),
        loads in prop::collection::vec((any::<String>(), prop::array::uniform3(-1e3..1e3_f64), 1e-3..1e3_f64), 0..3),
    ) -> Setup {
        let mut setup = Setup::default();
        setup.friction.mu = mu;
        (setup.friction.high, setup.friction.source, setup.friction.condition) = (high, source, condition);
        (setup.hand.pin_radius_mm, setup.hand.bite_mm, setup.hand.gap_mm) = (radius, bite, gap);
        (setup.hand.force_limit_n, setup.hand.drive) = (limit, drive);
        (setup.search.seed, setup.search.budget, setup.search.spacing_mm) = (seed, budget, spacing);
        setup.search.torque_scale = scale;
        setup.loads = loads
            .into_iter()
            .map(|(name, force_n, safety)| LoadCase { name, force_n, safety, ..LoadCase::default() })
            .collect();
        setup
    }
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 200, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn any_setup_name_and_note_are_read_back(
        first in any_setup(),
        second in any_setup(),
        name in any::<String>(),
        note in "\\PC{0,9}[\"\\\\'\n]{0,6}\\PC{0,9}",
        along in 0.1..79.9_f64,
    ) {
        let (_folder, part_path, path) = bench();
        let named = Keep { name: name.clone(), note: note.clone(), ..keep("", &first, &[(0, 0, along), (0, 2, 40.0)]) };
        let plain = keep("plain", &second, &FACING);
        save(&path, &part_path, &hinge(), &[named.clone(), plain], None).unwrap();
        let file = read_grasps(&path).unwrap();
        prop_assert_eq!(&file.setup, &first);
        prop_assert_eq!(&file.grasps[1].setup, &second);
        prop_assert_eq!(&file.grasps[0].spots, &named.grasp.spots);
        // Control characters are gone; an empty name became one.
        prop_assert!(!file.grasps[0].name.is_empty());
        prop_assert!(shown(name.trim()).contains(&file.grasps[0].name) || shown(&name).trim().is_empty());
        let lines = note.lines().map(shown).collect::<Vec<_>>().join("\n");
        prop_assert_eq!(&file.grasps[0].note, &lines);
    }
}
