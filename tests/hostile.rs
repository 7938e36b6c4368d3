//! Input nobody would write on purpose, and disks that fail: an answer in words every time, and no file harmed.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

use holdwright::file::{
    FileFaults, Keep, SaveFault, grasps_from_text, part_from_text, read_grasps, read_part, read_setup, save,
    setup_from_text, stamp,
};
use holdwright::part::{EdgeId, Part};
use holdwright::search::{Scene, Setup, Spot};
use proptest::prelude::*;
use std::fmt::Write;
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::time::{Duration, Instant};

/// What every failed reading must be: at least one fault, each in words, none with control characters, not too many.
fn proper(faults: &FileFaults) {
    assert!((1..=21).contains(&faults.faults.len()), "{faults:?}");
    for line in faults.lines() {
        assert!(!line.trim().is_empty() && !line.contains(char::is_control), "{line:?}");
        assert!(line.chars().count() < 1000, "{line:?}");
    }
}

/// Reads a text as each kind of file.
fn read_all(text: &str) {
    let path = Path::new("x.toml");
    if let Err(faults) = part_from_text(path, text) {
        proper(&faults);
    }
    if let Err(faults) = setup_from_text(path, text) {
        proper(&faults);
    }
    if let Err(faults) = grasps_from_text(path, text) {
        proper(&faults);
    }
}

const NUMBERS: [&str; 18] = [
    "0",
    "1",
    "-1",
    "2.5",
    "-0.0",
    "1e308",
    "-1e308",
    "5e-324",
    "1e999",
    "nan",
    "inf",
    "-inf",
    "0xffff_ffff_ffff_ffff",
    "9223372036854775808",
    "99999999999999999999999999999999999999999999",
    "1_000",
    "0o17",
    "0.1",
];
const OTHERS: [&str; 12] = [
    "true",
    "\"\"",
    "\"mm\"",
    "\"reach\"",
    "'\u{1b}'",
    "1979-05-27",
    "1979-05-27T07:32:00Z",
    "[]",
    "{}",
    "[[]]",
    "{ ring = 0, edge = 0, along_mm = 1 }",
    "\"\\u0000\"",
];
const KEYS: [&str; 45] = [
    "schema",
    "name",
    "units",
    "thickness",
    "material",
    "density_kg_m3",
    "mass_kg",
    "com",
    "outer",
    "holes",
    "ring",
    "edge",
    "from",
    "to",
    "reason",
    "mu",
    "low",
    "high",
    "fingers",
    "tip",
    "pin_radius_mm",
    "opening_mm",
    "spacing_mm",
    "budget",
    "seed",
    "torque_scale",
    "quality",
    "gravity",
    "safety",
    "contacts",
    "verdict",
    "time",
    "part_digest",
    "weakest",
    "squeeze_left",
    "cone_sides",
    "force_limit_n",
    "face_mpa",
    "line_n_per_mm",
    "held",
    "loads",
    "finger_forces_n",
    "density_of",
    "squeeze_n",
    "governing_load",
];
const HEADS: [&str; 17] = [
    "[[keep_out]]",
    "[[edge_friction]]",
    "[friction]",
    "[hand]",
    "[search]",
    "[floors]",
    "[[load]]",
    "[setup]",
    "[setup.hand]",
    "[[setup.load]]",
    "[[grasp]]",
    "[grasp.setup.friction]",
    "[grasp.escape]",
    "[[grasp.loads]]",
    "[[grasp.setup.load]]",
    "[[edge_limit]]",
    "[nobody]",
];

fn value() -> impl Strategy<Value = String> {
    let word = |words: &'static [&'static str]| prop::sample::select(words).prop_map(str::to_owned);
    let leaf = prop_oneof![3 => word(&NUMBERS), 1 => word(&OTHERS)];
    leaf.prop_recursive(3, 24, 6, |inner| {
        prop::collection::vec(inner, 0..6).prop_map(|list| format!("[{}]", list.join(", ")))
    })
}

fn line() -> impl Strategy<Value = String> {
    let key = prop::sample::select(&KEYS[..]);
    prop_oneof![
        6 => (key, value()).prop_map(|(key, value)| format!("{key} = {value}")),
        3 => prop::sample::select(&HEADS[..]).prop_map(str::to_owned),
        1 => "[ -~]{0,20}",
    ]
}

/// Rings of few values, so that touching, crossing and flat ones are common.
fn ring() -> impl Strategy<Value = Vec<[i8; 2]>> {
    prop::collection::vec(prop::array::uniform2(-3..4_i8), 0..9)
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 1500, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn any_bytes(bytes in prop::collection::vec(any::<u8>(), 0..400)) {
        let file = tempfile::NamedTempFile::new().unwrap();
        std::fs::write(file.path(), &bytes).unwrap();
        proper(&read_part(file.path()).unwrap_err());
        if let Err(faults) = read_setup(file.path()) {
            proper(&faults);
        }
        proper(&read_grasps(file.path()).unwrap_err());
    }

    #[test]
    fn any_text(text in "\\PC{0,200}") {
        read_all(&text);
    }

    #[test]
    fn nearly_sound_lines(lines in prop::collection::vec(line(), 0..30), headed in any::<bool>()) {
        let head = if headed { "schema = 1\n" } else { "" };
        read_all(&format!("{head}{}", lines.join("\n")));
    }

    /// What is read is sound: area above nought, and every score of two fingers on it has an answer.
    #[test]
    fn small_rings(rings in prop::collection::vec(ring(), 1..4), unit in prop::sample::select(&["mm", "m", "in"][..])) {
        let text = format!("schema = 1\nunits = \"{unit}\"\nouter = {:?}\nholes = {:?}\n", rings[0], &rings[1..]);
        match part_from_text(Path::new("x.toml"), &text) {
            Err(faults) => proper(&faults),
            Ok((part, _)) => {
                assert!(part.outline().region().area_mm2 > 0.0);
                let part = Arc::new(part);
                let scene = Scene::new(part, Setup::default()).unwrap();
                let spot = |edge| Spot { edge: EdgeId { ring: 0, edge }, along_mm: 0.3 };
                let grasp = scene.grasp(&[spot(0), spot(1)]).unwrap();
                assert!(scene.assess(&grasp).0.quality.is_finite());
            }
        }
    }
}

/// A closed saw blade of so many teeth, one vertex a line.
fn saw(teeth: usize) -> String {
    let mut text = String::from("schema = 1\nouter = [\n");
    for tooth in 0..teeth {
        let _ = writeln!(text, "[{tooth}.0, 0.0],\n[{tooth}.5, 1.0],");
    }
    let _ = writeln!(text, "[{teeth}.0, -5.0],\n[0.0, -5.0],\n]");
    text
}

#[test]
fn the_largest_outline() {
    let text = saw(124_999);
    let start = Instant::now();
    let (part, _) = part_from_text(Path::new("saw.toml"), &text).unwrap();
    let took = start.elapsed();
    assert_eq!(part.outline().edges().len(), 250_000);
    // Teeth of half a square millimetre on a body 5 mm high; the last tooth leans on the side.
    let area = 124_999.0 * 5.5;
    assert!((part.outline().region().area_mm2 / area - 1.0).abs() < 1e-3);
    // A second or so on a slow machine; reading that grows with the square of the size would take an hour.
    assert!(took < Duration::from_secs(30), "{took:?}");
    println!("250000 vertices: {took:?}");
}

#[test]
fn a_million_vertices_are_refused_in_words() {
    let start = Instant::now();
    let faults = part_from_text(Path::new("saw.toml"), &saw(500_000)).unwrap_err();
    assert_eq!(faults.faults.len(), 1);
    assert!(faults.faults[0].text.contains("has 1000002 vertices"), "{faults}");
    assert!(start.elapsed() < Duration::from_secs(30), "{:?}", start.elapsed());
}

/// Read as values these would take some gigabytes.
#[test]
fn a_file_too_large_is_not_even_parsed() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("scan.toml");
    std::fs::write(&path, vec![b'['; 13_000_000]).unwrap();
    assert!(read_part(&path).unwrap_err().to_string().ends_with("holds more values than any outline; simplify it"));
    // A hole in the file system's sense: 300 MiB that take no room on the disk.
    std::fs::File::create(&path).unwrap().set_len(300 << 20).unwrap();
    assert!(read_part(&path).unwrap_err().to_string().contains("is larger than 256 MiB"));
}

#[test]
fn a_million_wrong_vertices() {
    let text = saw(500_000).replace("0.0]", "0.0, 0]");
    let start = Instant::now();
    let faults = part_from_text(Path::new("saw.toml"), &text).unwrap_err();
    assert_eq!(faults.faults.len(), 21);
    assert_eq!(faults.faults[0].line, Some(3));
    assert!(start.elapsed() < Duration::from_secs(60));
}

#[test]
fn a_million_faults_of_syntax() {
    let start = Instant::now();
    proper(&part_from_text(Path::new("x.toml"), &"= 1\n".repeat(300_000)).unwrap_err());
    proper(&part_from_text(Path::new("x.toml"), &"[".repeat(1_000_000)).unwrap_err());
    proper(&part_from_text(Path::new("x.toml"), &"\"".repeat(1_000_000)).unwrap_err());
    proper(&setup_from_text(Path::new("x.toml"), &format!("schema = 1\n{}", "a.".repeat(100_000))).unwrap_err());
    assert!(start.elapsed() < Duration::from_secs(60), "{:?}", start.elapsed());
}

#[test]
fn deep_nesting() {
    for depth in [10, 79, 80, 81, 1000, 200_000] {
        let (open, close) = ("[".repeat(depth), "]".repeat(depth));
        read_all(&format!("schema = 1\nouter = {open}{close}\n"));
        read_all(&format!("schema = 1\ncom = {}1{}\n", "{ a = ".repeat(depth), " }".repeat(depth)));
        read_all(&format!("schema = 1\n[{}a]\nb = 1\n", "hand.".repeat(depth)));
    }
}

#[test]
fn long_names_do_not_flood_the_terminal() {
    let long = "n".repeat(1_000_000);
    read_all(&format!("schema = 1\n{long} = 1\n"));
    read_all(&format!("schema = 1\nunits = \"{long}\"\n"));
    read_all(&format!("schema = 1\nmaterial = {long}\n"));
    read_all(&format!("schema = 1\n[hand]\ntip = \"{long}\"\n[{long}]\n"));
    read_all(&format!("schema = 1{}\n", "0".repeat(1_000_000)));
    let many: String = (0..50_000).fold(String::new(), |text, i| text + &format!("k{i} = 1\n"));
    read_all(&format!("schema = 1\n{many}"));
}

const BAR: &str = "schema = 1\nouter = [[0, 0], [80, 0], [80, 40], [0, 40]]\n";

fn bar() -> (Arc<Part>, Keep) {
    let part = Arc::new(part_from_text(Path::new("bar.toml"), BAR).unwrap().0);
    let scene = Scene::new(part.clone(), Setup::default()).unwrap();
    let spot = |edge, along_mm| Spot { edge: EdgeId { ring: 0, edge }, along_mm };
    let grasp = scene.grasp(&[spot(0, 40.0), spot(2, 40.0)]).unwrap();
    let (assessment, _) = scene.assess(&grasp);
    (part, Keep { name: "a".into(), note: String::new(), grasp, assessment, setup: Setup::default(), density: None })
}

fn entries(folder: &Path) -> Vec<PathBuf> {
    let mut entries: Vec<_> = std::fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().path()).collect();
    entries.sort();
    entries
}

#[test]
fn saving_where_nothing_can_be_saved() {
    let folder = tempfile::tempdir().unwrap();
    let (part, kept) = bar();
    let fault = |path: &Path| {
        let fault = save(path, Path::new("bar.toml"), &part, std::slice::from_ref(&kept), None).unwrap_err();
        assert!(matches!(fault, SaveFault::Io { .. }), "{fault}");
        fault.to_string()
    };
    let gone = folder.path().join("gone/g.toml");
    // The words of errno 2 on Linux and macOS; elsewhere only the start of the line is known.
    let said = fault(&gone);
    assert!(said.starts_with(&gone.display().to_string()), "{said}");
    #[cfg(unix)]
    assert!(said.ends_with("g.toml: No such file or directory (os error 2)"), "{said}");
    assert!(fault(folder.path()).contains("is a directory"));
    assert!(entries(folder.path()).is_empty());
    assert_eq!(stamp(folder.path()), None);
}

#[cfg(unix)]
#[test]
fn devices_pipes_and_loops_are_no_grasp_files() {
    let folder = tempfile::tempdir().unwrap();
    let (part, kept) = bar();
    let (one, two) = (folder.path().join("one"), folder.path().join("two"));
    std::os::unix::fs::symlink(&two, &one).unwrap();
    std::os::unix::fs::symlink(&one, &two).unwrap();
    let pipe = folder.path().join("pipe");
    assert!(std::process::Command::new("mkfifo").arg(&pipe).status().unwrap().success());
    for path in [Path::new("/dev/full"), Path::new("/dev/zero"), &pipe, &one] {
        let fault = save(path, Path::new("bar.toml"), &part, std::slice::from_ref(&kept), None).unwrap_err();
        assert!(matches!(fault, SaveFault::Io { .. }), "{fault}");
        assert_eq!(stamp(path), None);
    }
    assert_eq!(entries(folder.path()).len(), 3);
}

/// Names the folder in which [`save_beyond_a_limit`] is to save; set only for a copy of this test program.
const LIMITED: &str = "HOLDWRIGHT_TEST_LIMITED";

/// Not a test by itself: the copy that [`a_full_disk_leaves_the_old_file`] starts under a limit on file size.
#[test]
fn save_beyond_a_limit() {
    let Some(folder) = std::env::var_os(LIMITED).map(PathBuf::from) else { return };
    let path = folder.join("bar.grasps.toml");
    let (part, kept) = bar();
    let before = std::fs::read(&path).unwrap();
    let known = stamp(&path);
    let fault = save(&path, &folder.join("bar.toml"), &part, &vec![kept; 200], known.as_ref()).unwrap_err();
    assert!(matches!(fault, SaveFault::Io { .. }), "{fault}");
    assert!(fault.to_string().contains("File too large"), "{fault}");
    assert_eq!(std::fs::read(&path).unwrap(), before);
    assert_eq!(entries(&folder), [path]);
    println!("the limit was met");
}

/// A write that stops half-way: POSIX makes a write beyond the limit of `ulimit -f` fail once SIGXFSZ is ignored, at the
/// same place where a full disk would.
#[cfg(target_os = "linux")]
#[test]
fn a_full_disk_leaves_the_old_file() {
    let folder = tempfile::tempdir().unwrap();
    let (part, kept) = bar();
    let path = folder.path().join("bar.grasps.toml");
    save(&path, &folder.path().join("bar.toml"), &part, &[kept], None).unwrap();
    let output = std::process::Command::new("sh")
        .args(["-c", "trap '' XFSZ; ulimit -f 16; exec \"$0\" --exact save_beyond_a_limit --nocapture"])
        .arg(std::env::current_exe().unwrap())
        .env(LIMITED, folder.path())
        .output()
        .unwrap();
    let said = String::from_utf8_lossy(&output.stdout);
    assert!(output.status.success(), "{said}{}", String::from_utf8_lossy(&output.stderr));
    assert!(said.contains("the limit was met"), "{said}");
    assert_eq!(read_grasps(&path).unwrap().grasps.len(), 1);
}
