//! Loads, squeeze and holding as a shell sees them.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod shell;

use holdwright::file::{Keep, read_part, save, setup_from_text};
use holdwright::part::EdgeId;
use holdwright::search::{Key, Scene, Spot};
use serde_json::Value;
use shell::{BAR, Bench, complaints, err, flowing, json, keys, out, sorted};
use std::path::Path;
use std::sync::Arc;

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
            "lets_go_above_n",
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

/// ECMA-48 control sequences start with ESC.
#[test]
fn the_name_of_a_load_cannot_steer_the_terminal() {
    let bench = Bench::new();
    bench.write("ghost.toml", &BAR.replace("\"steel\"", "\"ether\""));
    bench.write("cell.toml", &CELL.replace("0.25", "1.0").replace("\"lift\"", "\"\\u001b[2Jl\\nift\""));
    let output = bench.run(&["rank", "ghost.toml", "--setup", "cell.toml"]);
    assert!(err(&output).contains("[2Jlift") && !err(&output).contains('\u{1b}'), "{:?}", err(&output));
    for args in [
        &["rank", "bar.toml", "--setup", "cell.toml"][..],
        &["score", "bar.toml", "--setup", "cell.toml", "--at", "0:0:9,0:2:9"],
    ] {
        let output = bench.run(args);
        assert!(out(&output).contains("[2J") && !out(&output).contains('\u{1b}'), "{:?}", out(&output));
    }
}

/// Parallel jaws across a bar 40 mm high: opening, centre and axis by the drawing. Along the faces friction carries weight
/// and push together, `S m sqrt(g^2 + a^2) = 2 mu F` for the exact cone (Coulomb), at most a pyramid's cos(pi / 8) less;
/// across them the weight takes its share of friction first and what one jaw adds to the other holds the push,
/// `S m a <= F` at the least (statics).
#[test]
fn score_says_how_jaws_stand_and_what_they_hold() {
    let bench = Bench::new();
    let cell = CELL.replace("fingers = 2\ntip = \"pad\"", "closing = \"parallel\"\nopening_mm = [30.0, 50.0]");
    bench.write("jaws.toml", &cell.replace("force_limit_n = 10.0", "force_limit_n = 30.0"));
    let at = ["score", "bar.toml", "--setup", "jaws.toml", "--at", "0:0:40,0:2:40"];
    let report = json(&bench.run(&[&at[..], &["--json"]].concat()));
    let grasp = &report["grasps"][0];
    assert_eq!(grasp["fits"], true);
    let jaws = &grasp["jaws"];
    near(&jaws["opening_mm"], 40.0);
    near(&jaws["angle_deg"], 90.0);
    near(&jaws["centre_mm"][0], 40.0);
    near(&jaws["centre_mm"][1], 20.0);
    assert_eq!(jaws["inside"], false);
    let envelope = grasp["envelope"].as_array().unwrap();
    assert_eq!(envelope.len(), 36);
    let toward = |deg: f64| {
        let end = envelope.iter().find(|end| (end["direction_deg"].as_f64().unwrap() - deg).abs() < 1e-9).unwrap();
        end["m_s2"].as_f64().unwrap()
    };
    let (mass, s, mu, limit) = (7850.0 * 80e-3 * 40e-3 * 5e-3, 2.0, 0.2, 30.0);
    let along = |reach: f64| ((2.0 * mu * limit * reach / (s * mass)).powi(2) - 9.80665_f64.powi(2)).sqrt();
    for deg in [0.0, 180.0] {
        assert!(toward(deg) <= along(1.0) * (1.0 + 1e-9) && toward(deg) >= along((std::f64::consts::PI / 8.0).cos()));
    }
    // Across: one jaw at the limit, the other at what is left, and mu times both still bears the weight.
    let others = s * mass * 9.80665 / mu - limit;
    near(&serde_json::json!(toward(90.0)), (limit - others.max(0.0)) / (s * mass));
    let output = bench.run(&at);
    let text = out(&output);
    assert!(
        flowing(text).contains("jaws 40.000 mm open, centre (40.00, 20.00) mm, axis 90.00 deg, pressing inward"),
        "{text}"
    );
    assert!(flowing(text).contains("on top of its weight (S 2.000) the limit holds"), "{text}");
    assert!(text.lines().all(|line| line.chars().count() <= 80), "{text}");
    // Two places that do not face each other, and an opening out of range.
    let beside = bench.run(&["score", "bar.toml", "--setup", "jaws.toml", "--at", "0:0:40,0:2:30"]);
    assert!(out(&beside).contains("no jaws so"), "{}", out(&beside));
    let wide = bench.run(&["score", "bar.toml", "--setup", "jaws.toml", "--at", "0:1:20,0:3:20"]);
    assert!(out(&wide).contains("no jaws so"), "{}", out(&wide));
    let three = bench.run(&["score", "bar.toml", "--setup", "jaws.toml", "--at", "0:0:40,0:2:30,0:1:20"]);
    assert!(err(&three).contains("parallel jaws are two fingers, not 3"), "{}", err(&three));
    let ranked = json(&bench.run(&["rank", "bar.toml", "--setup", "jaws.toml", "--json"]));
    assert!(ranked["grasps"].as_array().unwrap().iter().all(|grasp| grasp["jaws"]["opening_mm"].is_number()));
}

/// What once broke the program or emptied a list. Fingers pressed alike that nearly fail to balance, with nothing asked of
/// the loads; a torque scale beside which no digits are left; jaws on faces a hair from parallel. Found by trying; the
/// squeeze of the last is held against the definition by the list itself, which leaves out what two ways disagree on.
#[test]
fn near_degenerate_grips_are_ranked_or_refused() {
    let bench = Bench::new();
    let wedge = "schema = 1\nthickness = 0.6\nmass_kg = 0.1\nouter = [[0, 0], [40, 0], [40, 22], [0, 24]]\n";
    bench.write("wedge.toml", wedge);
    let alike = "schema = 1\n[hand]\nforce_limit_n = 1.0\ndrive = \"equal\"\n[floors]\nload_margin = 0.0\n[[load]]\n";
    bench.write("alike.toml", alike);
    for key in Key::ALL {
        let at = ["rank", "wedge.toml", "--setup", "alike.toml", "--spacing", "4", "--sort", key.word(), "--json"];
        assert_eq!(bench.run(&at).status.code(), Some(0), "{}", key.word());
    }
    let tiny = bench.run(&["rank", "wedge.toml", "--setup", "alike.toml", "--torque-scale", "1e-6"]);
    assert_eq!(tiny.status.code(), Some(2));
    assert!(err(&tiny).contains("give at least"), "{}", err(&tiny));
    let hair = "schema = 1\nthickness = 2.16\nmass_kg = 0.05\ncom = [54.1, 47.8]\n\
                outer = [[0, 0], [111.19, 0], [111.19, 89.86], [0, 89.862]]\n";
    bench.write("hair.toml", hair);
    let jaws = "schema = 1\n[friction]\nmu = 0.15\n[hand]\nclosing = \"parallel\"\npad_width_mm = 7.0\npad_depth_mm = 20.0\n\
                force_limit_n = 150.0\n[[load]]\nangular_acceleration_rad_s2 = 46.0\nsafety = 0.7\n";
    bench.write("jaws.toml", jaws);
    let report =
        json(&bench.run(&["rank", "hair.toml", "--setup", "jaws.toml", "--members", "--top", "400", "--json"]));
    assert_eq!(report["inconclusive"], 0);
    assert!(report["grasps"].as_array().unwrap().len() > 30);
}
