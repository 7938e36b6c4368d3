//! The commands as a shell sees them: results, diagnostics, exit codes.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]
#![allow(clippy::float_cmp, reason = "numbers that pass through JSON must come out digit for digit")]

mod shell;

use holdwright::file::{Keep, read_part, save, setup_from_text};
use holdwright::part::EdgeId;
use holdwright::search::{Scene, Setup, Spot};
use serde_json::Value;
use shell::{BAR, Bench, command, complaints, err, json, keys, out, sorted};
use std::io::Read;
use std::path::{Path, PathBuf};
use std::process::Stdio;
use std::sync::Arc;

#[test]
fn rank_prints_the_promised_object() {
    let bench = Bench::new();
    let report = json(&bench.run(&["rank", "bar.toml", "--fingers", "2", "--json", "--top", "3"]));
    assert_eq!(
        keys(&report),
        sorted([
            "schema",
            "part",
            "setup",
            "examined",
            "closed",
            "inconclusive",
            "complete",
            "best_bound",
            "gap",
            "proved",
            "list_gap",
            "list_proved",
            "grasps"
        ])
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
                "bound",
                "envelope",
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
        for said in ["gunwale bar", "torque scale 44.721 mm (reach)", "seed 1", "proved", "first-order statics"] {
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
    let spent = bench.run(&["rank", "bar.toml", "--budget", "1000", "--gap", "0.0001"]);
    assert!(out(&spent).contains("--budget closes"), "{}", out(&spent));
    let sampled = bench.run(&["rank", "bar.toml", "--budget", "1000", "--members"]);
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

/// Two facing pins give at most mu across the faces, wherever they stand (Ferrari & Canny 1992): the bound over the whole
/// outline is that, and the list is proved down to it.
#[test]
fn rank_proves_its_list() {
    let bench = Bench::new();
    let at = ["rank", "bar.toml", "--fingers", "2", "--top", "1", "--gap", "0.001", "--json"];
    let report = json(&bench.run(&at));
    assert_eq!(report["proved"], true);
    let (best, bound) = (report["grasps"][0]["quality"].as_f64().unwrap(), report["best_bound"].as_f64().unwrap());
    assert!(bound >= best && bound <= best * 1.001 + 1e-8, "{best} {bound}");
    assert!(report["gap"].as_f64().unwrap() <= 0.001 + 1e-7);
    let sampled = json(&bench.run(&["rank", "bar.toml", "--fingers", "2", "--top", "1", "--members", "--json"]));
    assert!(best >= sampled["grasps"][0]["quality"].as_f64().unwrap() - 1e-12);
    // Of single grasps of the sites nothing is proved.
    assert_eq!(sampled["proved"], false);
    assert!(sampled["gap"].is_null() && sampled["best_bound"].is_null());
    let text = bench.run(&at[..at.len() - 1]);
    assert!(out(&text).contains("proved: none above"), "{}", out(&text));
    for wrong in ["-0.1", "1", "nan", "x"] {
        let output = bench.run(&["rank", "bar.toml", "--gap", wrong]);
        assert_eq!(output.status.code(), Some(2), "{wrong}");
    }
}
