//! The commands as a shell sees them: results, diagnostics, exit codes.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]
#![allow(clippy::float_cmp, reason = "numbers that pass through JSON must come out digit for digit")]

use holdwright::file::{Keep, read_part, save, setup_from_text};
use holdwright::part::EdgeId;
use holdwright::search::{Key, Scene, Setup, Spot};
use serde_json::Value;
use std::io::Read;
use std::path::{Path, PathBuf};
use std::process::{Command, Output, Stdio};
use std::sync::Arc;

/// Two by one, COM in the middle: opposite contacts across the width have a = 20 mm.
const BAR: &str = "schema = 1\nname = \"gunwale bar\"\nthickness = 5.0\nmaterial = \"steel\"\nouter = [
  [0, 0],
  [80, 0],
  [80, 40],
  [0, 40],
]\n";

struct Bench {
    folder: tempfile::TempDir,
    part: PathBuf,
}

impl Bench {
    fn new() -> Self {
        let folder = tempfile::tempdir().unwrap();
        let part = folder.path().join("bar.toml");
        std::fs::write(&part, BAR).unwrap();
        Self { folder, part }
    }

    fn write(&self, name: &str, text: &str) -> PathBuf {
        let path = self.folder.path().join(name);
        std::fs::write(&path, text).unwrap();
        path
    }

    /// Runs the program in the folder of the bench.
    fn run(&self, args: &[&str]) -> Output {
        command(args).current_dir(self.folder.path()).output().unwrap()
    }
}

fn command(args: &[&str]) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_holdwright"));
    command.args(args).stdin(Stdio::null()).env_remove("RUST_BACKTRACE");
    command
}

fn out(output: &Output) -> &str {
    std::str::from_utf8(&output.stdout).unwrap()
}

fn err(output: &Output) -> &str {
    std::str::from_utf8(&output.stderr).unwrap()
}

/// The one JSON object of a run that went well.
#[track_caller]
fn json(output: &Output) -> Value {
    assert_eq!(output.status.code(), Some(0), "{}", err(output));
    assert_eq!(out(output).lines().count(), 1);
    serde_json::from_slice(&output.stdout).unwrap()
}

/// Text as it reads, wherever its lines break.
fn flowing(text: &str) -> String {
    text.split_whitespace().collect::<Vec<_>>().join(" ")
}

/// The lines of complaint of a run that ended with exit code 2 and no result.
#[track_caller]
fn complaints(output: &Output) -> Vec<&str> {
    assert_eq!(output.status.code(), Some(2), "{}", err(output));
    assert_eq!(out(output), "");
    err(output).lines().collect()
}

fn keys(value: &Value) -> Vec<&str> {
    let mut keys: Vec<_> = value.as_object().unwrap().keys().map(String::as_str).collect();
    keys.sort_unstable();
    keys
}

fn sorted<const N: usize>(mut words: [&str; N]) -> Vec<&str> {
    words.sort_unstable();
    words.to_vec()
}

#[test]
fn rank_prints_the_promised_object() {
    let bench = Bench::new();
    let report = json(&bench.run(&["rank", "bar.toml", "--fingers", "2", "--json", "--top", "3"]));
    assert_eq!(
        keys(&report),
        sorted(["schema", "part", "setup", "examined", "closed", "inconclusive", "complete", "grasps"])
    );
    let (part, setup) = (&report["part"], &report["setup"]);
    assert_eq!(keys(part), sorted(["name", "area_mm2", "centroid_mm", "com_mm", "mass_kg", "polar_kg_m2", "reach_mm"]));
    assert_eq!(
        keys(setup),
        sorted([
            "mu",
            "fingers",
            "tip",
            "closing",
            "torque_scale_mm",
            "seed",
            "drive",
            "force_limit_n",
            "cone_sides",
            "loads"
        ])
    );
    assert_eq!(part["area_mm2"], 3200.0);
    assert_eq!(part["com_mm"], serde_json::json!([40.0, 20.0]));
    // m = 7850 kg/m3 (Gere, Table H-1) times volume; J = m (b2 + h2) / 12 of a rectangle (any text on statics).
    let mass = 7850.0 * 80e-3 * 40e-3 * 5e-3;
    assert!((part["mass_kg"].as_f64().unwrap() - mass).abs() < 1e-12);
    assert!(
        (part["polar_kg_m2"].as_f64().unwrap() - mass * (80e-3_f64.powi(2) + 40e-3_f64.powi(2)) / 12.0).abs() < 1e-12
    );
    assert!((part["reach_mm"].as_f64().unwrap() - 40.0_f64.hypot(20.0)).abs() < 1e-12);
    assert_eq!(
        (setup["mu"].as_f64(), setup["fingers"].as_u64(), setup["seed"].as_u64()),
        (Some(0.2), Some(2), Some(1))
    );
    assert_eq!(setup["drive"], "adjustable");
    assert_eq!(report["complete"], true);
    let grasps = report["grasps"].as_array().unwrap();
    assert!(!grasps.is_empty() && grasps.len() <= 3);
    for (i, grasp) in grasps.iter().enumerate() {
        assert_eq!(grasp["rank"].as_u64(), Some(i as u64 + 1));
        assert_eq!(
            keys(grasp),
            sorted([
                "rank",
                "contacts",
                "verdict",
                "fits",
                "quality",
                "quality_per_finger",
                "friction_needed",
                "friction_needed_closure",
                "friction_margin",
                "friction_margin_deg",
                "placement_mm",
                "placement_torque_mm",
                "weakest",
                "escape",
                "friction_needed_holding",
                "squeeze_n",
                "squeeze_total_n",
                "load_margin",
                "held",
                "governing_load",
                "limit_n",
                "limited_by",
                "loads",
                "bearing",
                "jaws",
                "standing",
            ])
        );
        assert_eq!(keys(&grasp["contacts"][0]), sorted(["ring", "edge", "along_mm", "point_mm", "normal", "mu"]));
        assert_eq!(keys(&grasp["weakest"]), sorted(["force_deg", "force", "torque"]));
        assert_eq!(
            (&grasp["verdict"], &grasp["squeeze_n"], &grasp["escape"]),
            (&"closed".into(), &Value::Null, &Value::Null)
        );
    }
}

/// Two contacts facing each other across 2a through the centre: quality = mu / sqrt(1 + mu^2 + (l/a)^2), placement
/// mu a (derived from the definition of Ferrari & Canny 1992); here mu .5, l = a = 20 mm.
#[test]
fn score_gives_the_known_value_and_rank_finds_none_better_across_the_width() {
    let bench = Bench::new();
    let knobs = ["--mu", "0.5", "--torque-scale", "20"];
    let score = json(&bench.run(&[&["score", "bar.toml", "--at", "0:0:40,0:2:40", "--json"], &knobs[..]].concat()));
    let grasp = &score["grasps"][0];
    assert!((grasp["quality"].as_f64().unwrap() - 1.0 / 3.0).abs() < 1e-9);
    assert!((grasp["placement_torque_mm"].as_f64().unwrap() - 10.0).abs() < 1e-9);
    assert_eq!(grasp["contacts"][1]["point_mm"], serde_json::json!([40.0, 40.0]));
    assert_eq!(grasp["contacts"][1]["normal"], serde_json::json!([0.0, -1.0]));
    assert_eq!((score["examined"].as_u64(), score["closed"].as_u64()), (Some(1), Some(1)));
    let rank = json(&bench.run(&[&["rank", "bar.toml", "--fingers", "2", "--json"], &knobs[..]].concat()));
    for grasp in rank["grasps"].as_array().unwrap() {
        let edges: Vec<_> = grasp["contacts"].as_array().unwrap().iter().map(|c| c["edge"].as_u64().unwrap()).collect();
        if edges == [0, 2] {
            assert!(grasp["quality"].as_f64().unwrap() <= 1.0 / 3.0 + 1e-9);
        }
    }
}

#[test]
fn what_rank_lists_scores_the_same_when_given_back() {
    let bench = Bench::new();
    let ranked = json(&bench.run(&["rank", "bar.toml", "--json", "--top", "4", "--spacing", "4"]));
    for grasp in ranked["grasps"].as_array().unwrap() {
        let at: Vec<_> = grasp["contacts"]
            .as_array()
            .unwrap()
            .iter()
            .map(|c| format!("{}:{}:{}", c["ring"], c["edge"], c["along_mm"]))
            .collect();
        let scored = json(&bench.run(&["score", "bar.toml", "--json", "--at", &at.join(",")]));
        for key in ["quality", "quality_per_finger", "friction_needed", "placement_mm", "contacts", "weakest"] {
            assert_eq!(scored["grasps"][0][key], grasp[key], "{key}");
        }
    }
}

#[test]
fn open_grasps_say_how_the_part_gets_out() {
    let bench = Bench::new();
    let two = ["--at", "0:0:10,0:2:30", "--at", "0:0:20,0:0:60"];
    let text = bench.run(&[&["score", "bar.toml"], &two[..]].concat());
    assert_eq!(text.status.code(), Some(0));
    // Both fingers push up: nothing keeps the part from going up, the direction of 90 degrees.
    assert!(out(&text).contains("1 0:0@10.0 0:2@30.0: open") && out(&text).contains("turns "), "{}", out(&text));
    assert!(out(&text).contains("2 0:0@20.0 0:0@60.0: open"), "{}", out(&text));
    let report = json(&bench.run(&[&["score", "bar.toml", "--json"], &two[..]].concat()));
    assert_eq!((report["examined"].as_u64(), report["closed"].as_u64()), (Some(2), Some(0)));
    assert_eq!(keys(&report["grasps"][0]["escape"]), sorted(["kind", "about_mm", "sense"]));
    assert_eq!((&report["grasps"][0]["weakest"], &report["grasps"][0]["quality"]), (&Value::Null, &0.0.into()));
}

#[test]
fn score_says_when_a_finger_does_not_fit() {
    let bench = Bench::new();
    bench.write("cell.toml", "schema = 1\n[hand]\ncorner_clearance_mm = 5.0\npin_radius_mm = 3.0\ngap_mm = 1.0\n");
    let output = bench.run(&["score", "bar.toml", "--setup", "cell.toml", "--at", "0:0:4,0:0:10,0:2:40"]);
    assert!(out(&output).contains("finger 1 does not fit"), "{}", out(&output));
    assert!(out(&output).contains("fingers 1 and 2 are nearer"), "{}", out(&output));
    let output = bench.run(&["score", "bar.toml", "--setup", "cell.toml", "--json", "--at", "0:0:4,0:0:10,0:2:40"]);
    json(&output);
    assert!(err(&output).contains("note: --at 0:0:4,0:0:10,0:2:40: finger 1 does not fit"), "{}", err(&output));
}

#[test]
fn options_beat_the_file_and_the_file_the_defaults() {
    let bench = Bench::new();
    bench.write("cell.toml", "schema = 1\n[friction]\nmu = 0.3\n[hand]\nfingers = 2\n[search]\nseed = 9\n");
    let report = json(&bench.run(&["rank", "bar.toml", "--setup", "cell.toml", "--mu", "0.4", "--json"]));
    let setup = &report["setup"];
    assert_eq!(
        (setup["mu"].as_f64(), setup["fingers"].as_u64(), setup["seed"].as_u64()),
        (Some(0.4), Some(2), Some(9))
    );
    let report = json(&bench.run(&["rank", "bar.toml", "--fingers", "2", "--torque-scale", "gyration", "--json"]));
    // k2 = (b2 + h2) / 12 of a rectangle.
    let gyration = ((80.0_f64.powi(2) + 40.0_f64.powi(2)) / 12.0).sqrt();
    assert!((report["setup"]["torque_scale_mm"].as_f64().unwrap() - gyration).abs() < 1e-9);
}

#[test]
fn the_table_fits_eighty_columns_and_says_what_it_is() {
    let bench = Bench::new();
    for fingers in ["2", "3", "4"] {
        let output = bench.run(&["rank", "bar.toml", "--fingers", fingers, "--budget", "100000", "--top", "7"]);
        assert_eq!(output.status.code(), Some(0));
        let text = out(&output);
        assert!(text.lines().all(|line| line.chars().count() <= 80), "{text}");
        for said in ["gunwale bar", "torque scale 44.721 mm (reach)", "seed 1", "examined", "first-order statics"] {
            assert!(text.contains(said), "{said}\n{text}");
        }
        let rows =
            text.lines().filter(|line| line.trim_start().starts_with(char::is_numeric) && line.contains(":")).count();
        assert!((1..=7).contains(&rows), "{text}");
        let output =
            bench.run(&["rank", "bar.toml", "--fingers", fingers, "--sort", "quality_per_finger", "--top", "2"]);
        assert!(out(&output).contains("qual/f"), "{}", out(&output));
        assert!(out(&output).lines().all(|line| line.chars().count() <= 80), "{}", out(&output));
    }
    let sampled = bench.run(&["rank", "bar.toml", "--budget", "1000"]);
    assert!(out(&sampled).contains("a sample: the budget is 1000 sets"), "{}", out(&sampled));
}

#[test]
fn an_empty_list_says_why() {
    let bench = Bench::new();
    let why = |setup: &str, args: &[&str], says: &str| {
        bench.write("cell.toml", &format!("schema = 1\n{setup}"));
        let output = bench.run(&[&["rank", "bar.toml", "--setup", "cell.toml"], args].concat());
        assert_eq!(output.status.code(), Some(0));
        assert!(out(&output).contains(says), "{}", out(&output));
    };
    why("[hand]\ncorner_clearance_mm = 41.0\n", &[], "No finger fits on any edge");
    why("", &["--mu", "0"], "No candidate set closes at mu 0");
    why("[floors]\nquality = 0.9\n", &[], "none is above the floors (quality 0.9");
}

#[test]
fn the_number_of_threads_changes_no_byte() {
    let bench = Bench::new();
    for extra in [&["--json"][..], &["--members", "--sort", "placement"], &["--fingers", "4", "--budget", "30000"]] {
        let with = |n: &str| {
            let output = bench.run(&[&["rank", "bar.toml", "--spacing", "3", "--threads", n], extra].concat());
            assert_eq!(output.status.code(), Some(0), "{}", err(&output));
            output.stdout
        };
        let one = with("1");
        assert!(one.len() > 500);
        assert_eq!(one, with("2"));
        assert_eq!(one, with("5"));
    }
}

/// Two flush pads against each other hold a part that lies flat by friction alone: F = S m g / (2 mu) per finger
/// (Coulomb, statics); m = 0.1256 kg, g as in ISO 80000-3. Once slip has begun mu is the sliding one.
const CELL: &str = "schema = 1
[friction]
mu = 0.2
low = 0.1
high = 0.4
sliding = 0.1
[hand]
fingers = 2
tip = \"pad\"
force_limit_n = 10.0
[[load]]
name = \"lift\"
safety = 2.0
[[load]]
name = \"air lost\"
squeeze_left = 0.25
";

fn lift_n(mu: f64) -> f64 {
    2.0 * (7850.0 * 80e-3 * 40e-3 * 5e-3) * 9.80665 / (2.0 * mu)
}

#[track_caller]
fn near(value: &Value, by_hand: f64) {
    let value = value.as_f64().unwrap();
    assert!((value - by_hand).abs() <= 1e-7 * by_hand.abs(), "{value} {by_hand}");
}

#[test]
fn score_says_what_the_loads_ask() {
    let bench = Bench::new();
    bench.write("cell.toml", CELL);
    let at = ["score", "bar.toml", "--setup", "cell.toml", "--at", "0:0:40,0:2:40"];
    let report = json(&bench.run(&[&at[..], &["--json"]].concat()));
    assert_eq!(report["setup"]["loads"], serde_json::json!(["lift", "air lost"]));
    assert_eq!((&report["setup"]["tip"], &report["setup"]["force_limit_n"]), (&"pad".into(), &10.0.into()));
    let grasp = &report["grasps"][0];
    // Half the load with a quarter of the squeeze left asks for twice what the lift does: more than the hand gives.
    let [lift, lost] = [&grasp["loads"][0], &grasp["loads"][1]];
    assert_eq!(
        keys(lift),
        sorted([
            "name",
            "squeeze_n",
            "held",
            "margin",
            "direction_deg",
            "finger_forces_n",
            "lies",
            "hand_formula_n",
            "hand_formula_why_not"
        ])
    );
    near(&lift["squeeze_n"], lift_n(0.2));
    near(&lift["hand_formula_n"], lift_n(0.2));
    near(&lift["margin"], 10.0 / lift_n(0.2));
    near(&lift["finger_forces_n"][1]["normal"], lift_n(0.2));
    near(&lost["squeeze_n"], 2.0 * lift_n(0.2));
    near(&lost["hand_formula_n"], 2.0 * lift_n(0.2));
    assert_eq!((&lift["held"], &lost["held"], &lift["lies"]), (&true.into(), &false.into(), &"along_faces".into()));
    near(&grasp["squeeze_n"], 2.0 * lift_n(0.2));
    near(&grasp["squeeze_total_n"], 4.0 * lift_n(0.2));
    near(&grasp["load_margin"], 10.0 / (2.0 * lift_n(0.2)));
    assert_eq!((&grasp["held"], &grasp["governing_load"]), (&false.into(), &"air lost".into()));
    assert_eq!((&grasp["limit_n"], &grasp["limited_by"]["kind"]), (&10.0.into(), &"hand".into()));
    // The squeeze falls as 1 / mu, so the mu that brings it to the limit is in proportion.
    near(&grasp["friction_needed_holding"], 0.2 * 2.0 * lift_n(0.2) / 10.0);
    // A pad 12 mm wide on an edge 5 mm thick.
    near(&grasp["bearing"][0]["pressure_mpa"], 2.0 * lift_n(0.2) / 60.0);
    let names: Vec<_> = grasp["standing"].as_array().unwrap().iter().map(|s| s["name"].as_str().unwrap()).collect();
    assert_eq!(names, ["low", "high", "sliding"]);
    near(&grasp["standing"][1]["squeeze_n"], 2.0 * lift_n(0.4));
    assert_eq!((&grasp["standing"][1]["held"], &grasp["standing"][2]["held"]), (&true.into(), &false.into()));

    let output = bench.run(&at);
    let text = out(&output);
    assert!(text.lines().all(|line| line.chars().count() <= 80), "{text}");
    for said in [
        "fingers are assumed able to set their force",
        "* air lost            12.32    24.63  0.812  NOT HELD",
        "limit 10.00 N per finger: the hand gives no more",
        "0.246 to hold the loads",
        "hand formula S W / (2 mu): 12.32 N per finger",
        "an equal squeeze of both fingers holds it",
        "0.205 MPa on a pad face of 60.00 mm2 (fingers 1, 2)",
        "once slip has begun (mu 0.100): closed, loads NOT HELD, 24.63 N each, 49.27 N in all",
        "at mu 0.400 (high): closed, loads held, 6.16 N each",
    ] {
        assert!(flowing(text).contains(&flowing(said)), "{said}\n{text}");
    }
    let equal = bench.run(&[&at[..], &["--drive", "equal"]].concat());
    assert!(out(&equal).contains("all fingers press alike"), "{}", out(&equal));
}

/// A push of 1 N along the line between two fingers: one finger takes it alone where it may; where both press alike
/// nothing is left to take it (statics).
#[test]
fn a_load_along_the_squeeze_axis_needs_a_finger_that_backs_up() {
    let bench = Bench::new();
    let load = "[[load]]\nname = \"push\"\ngravity = [0, 0, 0]\nforce_n = [0, -1, 0]\nat_mm = [40, 20, 0]\n";
    bench.write("push.toml", &format!("schema = 1\n[hand]\nfingers = 2\n{load}"));
    let at = ["score", "bar.toml", "--setup", "push.toml", "--at", "0:0:40,0:2:40"];
    let own = json(&bench.run(&[&at[..], &["--json"]].concat()));
    near(&own["grasps"][0]["squeeze_n"], 1.0);
    assert_eq!(own["grasps"][0]["loads"][0]["lies"], "along_axis");
    assert!(own["grasps"][0]["loads"][0]["hand_formula_why_not"].as_str().unwrap().contains("pads"));
    assert_eq!((&own["grasps"][0]["limit_n"], &own["grasps"][0]["load_margin"]), (&Value::Null, &Value::Null));
    let alike = json(&bench.run(&[&at[..], &["--json", "--drive", "equal"]].concat()));
    let grasp = &alike["grasps"][0];
    assert_eq!((&grasp["squeeze_n"], &grasp["held"]), (&Value::Null, &false.into()));
    let text = bench.run(&[&at[..], &["--drive", "equal"]].concat());
    assert!(flowing(out(&text)).contains("one finger must back up or give"), "{}", out(&text));
    assert!(flowing(out(&text)).contains("none: no squeeze holds it"), "{}", out(&text));
}

/// An edge that bears 0.1 MPa under a face of 12 x 5 mm2 bears 6 N: less than the hand gives.
#[test]
fn an_edge_that_would_be_marked_limits_the_squeeze() {
    let bench = Bench::new();
    bench.write("cell.toml", CELL);
    bench.write("soft.toml", &format!("{BAR}[[edge_limit]]\nring = 0\nedge = 2\nface_mpa = 0.1\n"));
    let at = ["score", "soft.toml", "--setup", "cell.toml", "--at", "0:0:40,0:2:40"];
    let report = json(&bench.run(&[&at[..], &["--json"]].concat()));
    let grasp = &report["grasps"][0];
    near(&grasp["limit_n"], 6.0);
    assert_eq!(grasp["limited_by"], serde_json::json!({"kind": "edge", "finger": 2, "ring": 0, "edge": 2}));
    assert_eq!(grasp["loads"][0]["held"], false);
    let text = bench.run(&at);
    assert!(flowing(out(&text)).contains("more would mark the part: edge 0:2 under"), "{}", out(&text));
}

#[test]
fn rank_shows_the_loads_within_eighty_columns() {
    let bench = Bench::new();
    bench.write("cell.toml", CELL);
    for (fingers, tip) in [("2", "pad"), ("3", "pin"), ("4", "pin"), ("5", "pin")] {
        let args = ["--setup", "cell.toml", "--fingers", fingers, "--tip", tip, "--budget", "20000", "--top", "3"];
        let knobs = ["--force-limit", "1000", "--spacing", "8"];
        let output = bench.run(&[&["rank", "bar.toml"], &args[..], &knobs].concat());
        let text = out(&output);
        assert!(text.lines().all(|line| line.chars().count() <= 80), "{text}");
        let said = [
            format!("times {fingers} fingers in all"),
            "squeeze N".into(),
            "load x".into(),
            "fingers are assumed able to set their force; at most 1000 N per finger".into(),
        ];
        assert!(said.iter().all(|said| flowing(text).contains(said.as_str())), "{text}");
        if fingers == "2" {
            assert!(text.contains("2 pads 12 x 8 mm, mu 0.2") && text.contains("air lost\n"), "{text}");
        }
        let report = json(&bench.run(&[&["rank", "bar.toml", "--json"], &args[..], &knobs].concat()));
        for grasp in report["grasps"].as_array().unwrap() {
            assert!(grasp["squeeze_n"].as_f64().unwrap() > 0.0 && grasp["standing"].is_null());
            assert_eq!(grasp["loads"].as_array().unwrap().len(), 2);
        }
    }
}

#[test]
fn sorting_by_squeeze_needs_loads() {
    let bench = Bench::new();
    if Key::from_word("squeeze").is_none() {
        return;
    }
    let output = bench.run(&["rank", "bar.toml", "--sort", "squeeze"]);
    assert!(complaints(&output)[0].contains("give [[load]] in a setup file"), "{}", err(&output));
    bench.write("cell.toml", CELL);
    let args = ["rank", "bar.toml", "--setup", "cell.toml", "--sort", "squeeze", "--json", "--force-limit", "100"];
    let report = json(&bench.run(&args));
    let squeezes: Vec<_> =
        report["grasps"].as_array().unwrap().iter().map(|grasp| grasp["squeeze_n"].as_f64().unwrap()).collect();
    assert!(squeezes.len() > 1 && squeezes.windows(2).all(|pair| pair[0] <= pair[1] * (1.0 + 1e-9)), "{squeezes:?}");
}

/// A fault that only the part brings out is named with the file it came from, or with the option.
#[test]
fn faults_of_setup_and_part_together_say_where_they_come_from() {
    let bench = Bench::new();
    bench.write("deep.toml", "schema = 1\n[hand]\nbite_mm = 5.5\n");
    let output = bench.run(&["rank", "bar.toml", "--setup", "deep.toml"]);
    assert_eq!(
        complaints(&output),
        ["error: deep.toml: `hand.bite_mm` is 5.5: the part is 5 mm thick; give no more than that"]
    );
    bench.write("cell.toml", CELL);
    bench.write("ghost.toml", &BAR.replace("\"steel\"", "\"ether\""));
    let output = bench.run(&["rank", "ghost.toml", "--setup", "cell.toml"]);
    let lines: Vec<_> = complaints(&output).into_iter().filter(|line| line.starts_with("error")).collect();
    assert!(lines.len() == 2 && lines[0].starts_with("error: cell.toml: `load.0` is \"lift\""), "{lines:?}");
}

#[test]
fn bad_usage_is_told_from_bad_input_by_words_not_by_code() {
    let bench = Bench::new();
    let one = |args: &[&str], says: &str| {
        let output = bench.run(args);
        let lines = complaints(&output);
        assert!(lines[0].starts_with("error: ") && lines[0].contains(says), "{lines:?}");
    };
    one(&["rank", "none.toml"], "none.toml: there is no such file");
    one(&["rank", "."], "is a folder");
    one(&["rank", "bar.toml", "--setup", "none.toml"], "none.toml: there is no such file");
    one(&["rank", "bar.toml", "--mu", "-1"], "--mu is -1: give a number from 0 to 10");
    one(&["rank", "bar.toml", "--mu", "nan"], "--mu is NaN");
    one(&["rank", "bar.toml", "--mu", "much"], "--mu");
    one(&["rank", "bar.toml", "--spacing", "0"], "--spacing is 0");
    one(&["rank", "bar.toml", "--budget", "0"], "--budget is 0");
    one(&["rank", "bar.toml", "--torque-scale", "-3"], "--torque-scale is -3");
    one(&["rank", "bar.toml", "--torque-scale", "size"], "--torque-scale");
    one(&["rank", "bar.toml", "--fingers", "7"], "--fingers");
    one(&["rank", "bar.toml", "--threads", "0"], "--threads");
    one(&["rank", "bar.toml", "--top", "0"], "--top");
    one(&["rank", "bar.toml", "--sort", "beauty"], "--sort");
    one(&["rank", "bar.toml", "--sort", "squeeze"], "squeeze");
    one(&["rank", "bar.toml", "--bite", "0"], "--bite is 0: give a number above 0");
    one(&["rank", "bar.toml", "--bite", "5.5"], "--bite is 5.5: the part is 5 mm thick; give no more than that");
    one(&["rank", "bar.toml", "--force-limit", "-3"], "--force-limit is -3: give a number above 0");
    one(&["rank", "bar.toml", "--drive", "shared"], "--drive");
    one(&["rank", "bar.toml", "--closing", "parallel", "--tip", "pin"], "--tip is pin: parallel closing takes pads");
    one(&["rank", "bar.toml", "--closing", "parallel", "--fingers", "3"], "--fingers is 3: parallel closing takes two");
    one(&["rank"], "required arguments");
    one(&["score", "bar.toml"], "required arguments");
    one(&["score", "bar.toml", "--at", "0:0"], "\"0:0\" is no RING:EDGE:ALONG_MM");
    one(&["score", "bar.toml", "--at", "0:0:inf,0:1:2"], "is no RING:EDGE:ALONG_MM");
    one(&["score", "bar.toml", "--at", "0:0:1"], "a grasp has two to six fingers, not 1");
    one(&["score", "bar.toml", "--at", "0:0:1,0:7:1"], "there is no ring 0 edge 7");
    one(&["score", "bar.toml", "--at", "0:0:1,0:1:-1"], "ring 0 edge 1 is 40 mm long; -1 mm is not on it");
    one(&["check", "none.grasps.toml"], "there is no such file");
    one(&["check", "bar.toml"], "bar.toml");
}

#[test]
fn every_fault_of_a_file_is_one_line_with_its_place() {
    let bench = Bench::new();
    bench.write("bad.toml", &BAR.replace("name", "nmae").replace("[80, 40]", "[80]").replace("5.0", "\"5\""));
    let output = bench.run(&["rank", "bad.toml"]);
    let lines = complaints(&output);
    let starts = ["error: bad.toml:2: ", "error: bad.toml:3: ", "error: bad.toml:8: "];
    assert_eq!(lines.len(), 3, "{lines:?}");
    assert!(lines.iter().zip(starts).all(|(line, start)| line.starts_with(start)), "{lines:?}");
}

#[test]
fn notes_go_to_standard_error_and_stop_nothing() {
    let bench = Bench::new();
    bench.write("odd.toml", &BAR.replace("\"steel\"", "\"steal\""));
    let output = bench.run(&["rank", "odd.toml", "--json", "--fingers", "2"]);
    assert_eq!(json(&output)["part"]["mass_kg"], Value::Null);
    assert!(
        err(&output)
            .starts_with("note: odd.toml:4: no density is known for \"steal\" (nearest in the table: \"steel\")")
    );
}

#[test]
fn the_workbench_without_a_terminal_names_rank() {
    let bench = Bench::new();
    let output = bench.run(&["bar.toml"]);
    assert_eq!(complaints(&output).len(), 1);
    assert!(err(&output).contains("needs a terminal") && err(&output).contains("holdwright rank bar.toml"));
}

/// A part file named like a command is reached through its folder.
#[test]
fn a_part_named_like_a_command() {
    let bench = Bench::new();
    std::fs::copy(&bench.part, bench.folder.path().join("rank")).unwrap();
    let output = bench.run(&["./rank"]);
    assert!(err(&output).contains("holdwright rank ./rank"), "{}", err(&output));
    json(&bench.run(&["rank", "rank", "--json", "--fingers", "2"]));
}

#[test]
fn help_and_version_are_results() {
    for args in [&["--help"][..], &["--version"], &["rank", "--help"], &["help", "score"]] {
        let output = command(args).output().unwrap();
        assert_eq!((output.status.code(), err(&output)), (Some(0), ""));
        assert!(!out(&output).is_empty());
    }
    let nothing = command(&[]).output().unwrap();
    assert_eq!((nothing.status.code(), out(&nothing)), (Some(2), ""));
}

#[test]
fn the_printed_setup_is_the_default() {
    let output = command(&["setup"]).output().unwrap();
    assert_eq!(output.status.code(), Some(0));
    assert_eq!(setup_from_text(Path::new("s"), out(&output)).unwrap(), Setup::default());
    assert!(out(&output).lines().all(|line| line.chars().count() <= 110));
}

/// A reader that leaves early is no error: POSIX shells do it with every `| head`.
#[test]
fn a_closed_pipe_is_quiet() {
    let bench = Bench::new();
    for args in [
        &["rank", "bar.toml", "--members", "--top", "5000", "--json", "--fingers", "2"][..],
        &["setup"],
        &["--help"],
        &["score", "bar.toml", "--at", "0:0:40,0:2:40"],
    ] {
        let mut child = command(args)
            .current_dir(bench.folder.path())
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .unwrap();
        // Gone before a byte is written.
        drop(child.stdout.take());
        let mut said = String::new();
        child.stderr.take().unwrap().read_to_string(&mut said).unwrap();
        assert_eq!((child.wait().unwrap().code(), said.as_str()), (Some(0), ""), "{args:?}");
    }
}

/// Linux's /dev/full answers every write with "no space left".
#[cfg(target_os = "linux")]
#[test]
fn results_that_cannot_be_written_are_an_error() {
    let full = std::fs::OpenOptions::new().write(true).open("/dev/full").unwrap();
    let output = command(&["setup"]).stdout(full).output().unwrap();
    assert_eq!(output.status.code(), Some(3));
    assert!(err(&output).starts_with("error: standard output: No space left"), "{}", err(&output));
}

/// Saves two closed grasps and returns the file's place.
fn saved(bench: &Bench) -> PathBuf {
    let part = Arc::new(read_part(&bench.part).unwrap());
    let mut rough = Setup::default();
    rough.friction.mu = 0.5;
    let keep = |name: &str, setup: &Setup, along_mm: f64| {
        let scene = Scene::new(part.clone(), setup.clone()).unwrap();
        let spot = |edge, along_mm| Spot { edge: EdgeId { ring: 0, edge }, along_mm };
        let grasp = scene.grasp(&[spot(0, 40.0), spot(2, along_mm)]).unwrap();
        let (assessment, _) = scene.assess(&grasp);
        Keep { name: name.into(), note: String::new(), grasp, assessment, setup: setup.clone(), density: None }
    };
    let path = bench.folder.path().join("bar.grasps.toml");
    // The first leans by 1 mm in 40 mm, the second by 12.
    let keeps = [keep("middle", &Setup::default(), 41.0), keep("askew", &rough, 28.0)];
    save(&path, &bench.part, &part, &keeps, None).unwrap();
    path
}

#[test]
fn check_holds_while_nothing_changed() {
    let bench = Bench::new();
    saved(&bench);
    let output = bench.run(&["check", "bar.grasps.toml"]);
    assert_eq!((output.status.code(), err(&output)), (Some(0), ""));
    assert_eq!(out(&output), "middle: holds\naskew: holds\n");
    let report = json(&bench.run(&["check", "bar.grasps.toml", "--json"]));
    assert_eq!((&report["all_hold"], &report["part_changed"]), (&true.into(), &false.into()));
    assert_eq!(report["grasps"][1]["outcome"], "holds");
    // From anywhere: the part is found from where the grasp file is.
    let output = command(&["check", bench.folder.path().join("bar.grasps.toml").to_str().unwrap()]).output().unwrap();
    assert_eq!(output.status.code(), Some(0));
}

#[test]
fn check_notices_a_part_that_changed() {
    let bench = Bench::new();
    saved(&bench);
    // Narrower: the same places still close, with other scores.
    bench.write("bar.toml", &BAR.replace("40]", "36]"));
    let output = bench.run(&["check", "bar.grasps.toml"]);
    assert_eq!(output.status.code(), Some(1));
    let lines: Vec<_> = out(&output).lines().collect();
    assert!(lines[0].starts_with("the part \"gunwale bar\" is not the one"), "{lines:?}");
    assert!(lines[1].starts_with("middle: score changed: quality 0."), "{lines:?}");
    // Only what no score reads changed: the mass, and so the digest.
    bench.write("bar.toml", &BAR.replace("steel", "brass"));
    let output = bench.run(&["check", "bar.grasps.toml"]);
    assert_eq!(output.status.code(), Some(1));
    assert!(out(&output).ends_with("middle: holds\naskew: holds\n"), "{}", out(&output));
    // Shorter than the fingers' places.
    bench.write("bar.toml", &BAR.replace("80,", "30,"));
    let output = bench.run(&["check", "bar.grasps.toml"]);
    assert_eq!(output.status.code(), Some(1));
    assert!(out(&output).contains("middle: no longer fits: ring 0 edge 0 is 30 mm long"), "{}", out(&output));
    // Not where it was.
    std::fs::remove_file(&bench.part).unwrap();
    let output = bench.run(&["check", "bar.grasps.toml"]);
    assert_eq!(output.status.code(), Some(2));
    assert!(err(&output).contains("bar.toml: there is no such file") && err(&output).contains("--part"));
    // The old part under another name still passes.
    bench.write("old.toml", BAR);
    assert_eq!(bench.run(&["check", "bar.grasps.toml", "--part", "old.toml"]).status.code(), Some(0));
}

#[test]
fn check_never_calls_a_verdict_that_turned_the_same() {
    let bench = Bench::new();
    let path = saved(&bench);
    let text = std::fs::read_to_string(&path).unwrap();
    std::fs::write(&path, text.replacen("verdict = \"closed\"", "verdict = \"open\"", 1)).unwrap();
    let output = bench.run(&["check", "bar.grasps.toml"]);
    assert_eq!(output.status.code(), Some(1));
    assert_eq!(out(&output), "middle: score changed: saved as open, now closed\naskew: holds\n");
}

/// Two contacts close with friction iff their chord is strictly inside both cones (Nguyen 1988): "askew" leans by 12 mm
/// in 40 mm, so it needs mu 0.3; "middle" by 1 in 40 needs 0.025.
#[test]
fn check_answers_what_if_with_the_knobs() {
    let bench = Bench::new();
    saved(&bench);
    for (mu, code, middle, askew) in [
        ("0.31", 0, "middle: holds", "askew: holds"),
        ("0.29", 1, "middle: holds", "askew: no longer closed: saved as closed, now open"),
        (
            "0.02",
            1,
            "middle: no longer closed: saved as closed, now open",
            "askew: no longer closed: saved as closed, now open",
        ),
    ] {
        let output = bench.run(&["check", "bar.grasps.toml", "--mu", mu]);
        assert_eq!(output.status.code(), Some(code), "{}", out(&output));
        let lines: Vec<_> = out(&output).lines().collect();
        assert!(lines[0].starts_with(middle) && lines[1].starts_with(askew), "{lines:?}");
        assert!(lines[0].contains("friction_margin "), "{lines:?}");
    }
    bench.write("corners.toml", "schema = 1\n[hand]\ncorner_clearance_mm = 30.0\n[friction]\nmu = 0.5\n");
    let output = bench.run(&["check", "bar.grasps.toml", "--setup", "corners.toml"]);
    assert_eq!(output.status.code(), Some(1));
    assert!(out(&output).contains("askew: no longer fits: finger 2"), "{}", out(&output));
}

/// The lift takes 6.16 N per finger (see [`CELL`]).
#[test]
fn check_tells_loads_that_are_no_longer_held() {
    let bench = Bench::new();
    let part = Arc::new(read_part(&bench.part).unwrap());
    let setup = setup_from_text(Path::new("cell.toml"), &CELL.replace("0.25", "0.75")).unwrap();
    let scene = Scene::new(part.clone(), setup.clone()).unwrap();
    let spot = |edge| Spot { edge: EdgeId { ring: 0, edge }, along_mm: 40.0 };
    let grasp = scene.grasp(&[spot(0), spot(2)]).unwrap();
    let (assessment, _) = scene.assess(&grasp);
    let keep = Keep { name: "flat".into(), note: String::new(), grasp, assessment, setup, density: None };
    let path = bench.folder.path().join("bar.grasps.toml");
    save(&path, &bench.part, &part, &[keep], None).unwrap();
    let check = |more: &[&str], code: i32, says: &str| {
        let output = bench.run(&[&["check", "bar.grasps.toml"], more].concat());
        assert_eq!(output.status.code(), Some(code), "{}{}", out(&output), err(&output));
        assert!(out(&output).contains(says), "{}", out(&output));
    };
    check(&[], 0, "flat: holds\n");
    check(&["--force-limit", "7"], 0, "flat: holds: friction_needed");
    let says = "flat: loads no longer held: \"lift\" takes 6.16 N per finger, the limit is 6.00";
    check(&["--force-limit", "6"], 1, says);
    let report = bench.run(&["check", "bar.grasps.toml", "--force-limit", "6", "--json"]);
    let report: Value = serde_json::from_slice(&report.stdout).unwrap();
    assert_eq!((&report["grasps"][0]["outcome"], &report["all_hold"]), (&"loads_no_longer_held".into(), &false.into()));
    assert_eq!((&report["grasps"][0]["verdict"], &report["grasps"][0]["held"]), (&"closed".into(), &false.into()));
    // Heavier than when it was saved: the squeeze is another, and the digest too.
    bench.write("bar.toml", &BAR.replace("steel", "copper"));
    check(&[], 1, "flat: score changed: ");
    check(&[], 1, "squeeze_n 6.15");
    // As heavy as gold plate: not held.
    bench.write("bar.toml", &BAR.replace("material = \"steel\"", "mass_kg = 0.3"));
    check(&[], 1, "flat: loads no longer held: ");
    // Never held.
    let text = std::fs::read_to_string(&path).unwrap();
    std::fs::write(&path, text.replace("\nheld = true\n", "\nheld = false\n")).unwrap();
    check(&[], 1, "flat: loads not held: ");
}

#[test]
fn check_notices_edited_scores() {
    let bench = Bench::new();
    let path = saved(&bench);
    let text = std::fs::read_to_string(&path).unwrap();
    let askew = text.find("name = \"askew\"").unwrap();
    let (before, after) = text.split_at(askew + text[askew..].find("quality = 0.").unwrap());
    let after = &after[after.find('\n').unwrap()..];
    std::fs::write(&path, format!("{before}quality = 0.9{after}")).unwrap();
    let output = bench.run(&["check", "bar.grasps.toml"]);
    assert_eq!(output.status.code(), Some(1));
    assert!(out(&output).contains("askew: score changed: quality 0.9 -> 0."), "{}", out(&output));
    assert!(out(&output).starts_with("middle: holds\n"), "{}", out(&output));
}
