//! Part and setup files: what is written is read, and each thing that can be wrong is said with its line.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]
#![allow(clippy::float_cmp, reason = "what was written in decimal must be read back digit for digit")]

mod sound;

use holdwright::file::{
    FileFault, default_setup_text, part_from_text, read_part, read_part_with_notes, setup_from_text, shown,
};
use holdwright::hand::{Closing, Drive, Tip};
use holdwright::mechanics::Condition;
use holdwright::part::EdgeId;
use holdwright::search::{Setup, TorqueScale};
use sound::{CELL, HINGE, broken, line_of};
use std::path::Path;

fn part_faults(text: &str) -> Vec<FileFault> {
    part_from_text(Path::new("leaf.toml"), text).expect_err("a broken part was read").faults
}

fn setup_faults(text: &str) -> Vec<FileFault> {
    setup_from_text(Path::new("cell.toml"), text).expect_err("a broken setup was read").faults
}

/// Breaks one thing of a sound file and asks for exactly one fault, at the line where `at` stands, saying `says`.
#[track_caller]
fn one_fault(faults_of: fn(&str) -> Vec<FileFault>, sound: &str, from: &str, to: &str, at: &str, says: &str) {
    let text = broken(sound, from, to);
    let faults = faults_of(&text);
    assert_eq!(faults.len(), 1, "{faults:?}");
    assert_eq!(faults[0].line, Some(line_of(&text, at)), "{faults:?}");
    assert!(faults[0].text.contains(says), "{faults:?}");
}

#[track_caller]
fn one_part_fault(from: &str, to: &str, at: &str, says: &str) {
    one_fault(part_faults, HINGE, from, to, at, says);
}

#[track_caller]
fn one_setup_fault(from: &str, to: &str, at: &str, says: &str) {
    one_fault(setup_faults, CELL, from, to, at, says);
}

#[test]
fn a_sound_part_is_read() {
    let (part, notes) = part_from_text(Path::new("leaf.toml"), HINGE).unwrap();
    assert!(notes.is_empty(), "{notes:?}");
    assert_eq!(part.name(), "hinge leaf");
    assert_eq!(part.outline().ring_sizes(), [4, 3]);
    assert_eq!(part.thickness_mm(), Some(6.0));
    // The triangle's area is half base times height.
    let area = 80.0 * 40.0 - 4.0 * 4.0 / 2.0;
    assert!((part.outline().region().area_mm2 - area).abs() < 1e-9);
    let mass = part.mass().unwrap().kg;
    assert!((mass - 2660.0 * area * 6.0 * 1e-9).abs() < 1e-12, "{mass}");
    let com = part.file_point(part.com());
    assert!((com.x - 31.0).abs() < 1e-12 && (com.y - 18.5).abs() < 1e-12);
    let keep_out = &part.keep_outs()[0];
    assert_eq!((keep_out.edge, keep_out.from_mm, keep_out.to_mm), (EdgeId { ring: 0, edge: 2 }, 0.0, 12.0));
    assert_eq!(keep_out.reason, "sealing face");
    assert_eq!(part.edge_friction()[0].edge, EdgeId { ring: 0, edge: 1 });
    assert!((part.edge_friction()[0].mu - 0.6).abs() < f64::EPSILON);
}

/// One inch is 25.4 mm exactly (international yard and pound agreement, 1959).
#[test]
fn units_scale_every_length_of_the_file() {
    for (unit, mm) in [("mm", 1.0), ("cm", 10.0), ("m", 1000.0), ("in", 25.4)] {
        let text = broken(HINGE, "units = \"mm\"", &format!("units = \"{unit}\""));
        let (part, _) = part_from_text(Path::new("leaf.toml"), &text).unwrap();
        let edge = part.outline().edge(EdgeId { ring: 0, edge: 0 }).unwrap();
        assert!((edge.length_mm() - 80.0 * mm).abs() < 1e-9 * mm, "{unit}");
        assert!((part.keep_outs()[0].to_mm - 12.0 * mm).abs() < 1e-9 * mm, "{unit}");
        assert!((part.thickness_mm().unwrap() - 6.0 * mm).abs() < 1e-9 * mm, "{unit}");
    }
}

#[test]
fn the_least_part_is_an_outline() {
    let (part, notes) = part_from_text(Path::new("dir/cleat.toml"), "schema = 1\nouter = [[0,0],[9,0],[0,9]]").unwrap();
    assert!(notes.is_empty());
    assert_eq!(part.name(), "cleat");
    assert!(part.mass().is_none());
}

#[test]
fn a_material_without_density_is_noted_with_the_nearest_row() {
    let text = broken(HINGE, "aluminium 5083", "aluminum 5083");
    let (part, notes) = part_from_text(Path::new("leaf.toml"), &text).unwrap();
    assert!(part.mass().is_none());
    assert_eq!(notes.len(), 1);
    assert_eq!(notes[0].line, Some(5));
    assert!(notes[0].text.contains("\"aluminium 5083\""), "{notes:?}");
    // A mass makes the density needless.
    let weighed = text.replacen("thickness", "mass_kg = 0.4\nthickness", 1);
    assert!(part_from_text(Path::new("leaf.toml"), &weighed).unwrap().1.is_empty());
}

#[test]
fn material_of_a_wrong_type() {
    one_part_fault("\"aluminium 5083\"", "5083", "5083", "`material` is 5083; give a text");
}

#[test]
fn an_unknown_key_names_the_nearest() {
    one_part_fault("thickness", "thicknes", "thicknes", "did you mean `thickness`");
}

#[test]
fn an_unknown_key_in_an_entry_names_the_entry() {
    one_part_fault("reason", "raeson", "raeson", "`keep_out.0.raeson`; did you mean `reason`");
}

#[test]
fn an_unknown_unit() {
    one_part_fault(
        "units = \"mm\"",
        "units = \"yd\"",
        "units",
        "the text \"yd\"; give \"mm\" or \"cm\" or \"m\" or \"in\"",
    );
}

#[test]
fn no_schema() {
    let faults = part_faults(&broken(HINGE, "schema = 1\n", ""));
    assert_eq!(faults.len(), 1);
    assert_eq!(faults[0].line, None);
    assert!(faults[0].text.contains("`schema` is missing"));
}

#[test]
fn another_schema() {
    one_part_fault("schema = 1", "schema = 2", "schema", "`schema` is 2");
}

#[test]
fn no_outline() {
    let faults = part_faults("schema = 1\n");
    assert_eq!(faults.len(), 1, "{faults:?}");
    assert!(faults[0].text.contains("`outer` is missing"));
}

#[test]
fn a_vertex_of_three_numbers() {
    one_part_fault("[80.0, 40.0]", "[80.0, 40.0, 1.0]", "[80.0, 40.0, 1.0]", "ring 0 vertex 2 is a list of 3 entries");
}

#[test]
fn a_vertex_of_words() {
    one_part_fault("[80.0, 40.0]", "[80.0, \"40\"]", "[80.0, \"40\"]", "ring 0 vertex 2 is not two numbers");
}

#[test]
fn a_vertex_that_is_no_number() {
    one_part_fault("[80.0, 40.0]", "[80.0, nan]", "[80.0, nan]", "ring 0 vertex 2");
}

#[test]
fn a_vertex_beyond_a_double() {
    one_part_fault("[80.0, 40.0]", "[80.0, 1e999]", "[80.0, 1e999]", "ring 0 vertex 2");
}

#[test]
fn a_vertex_too_far() {
    one_part_fault("[80.0, 40.0]", "[80.0, 1e308]", "[80.0, 1e308]", "farther than");
}

#[test]
fn a_repeated_vertex() {
    one_part_fault("[80.0, 40.0]", "[80.0, 0.0 ]", "[80.0, 0.0 ]", "ring 0 vertex 2 repeats vertex 1");
}

#[test]
fn edges_that_cross() {
    let text = broken(HINGE, "  [80.0, 40.0],\n  [0.0, 40.0],\n", "  [0.0, 40.0],\n  [80.0, 40.0],\n");
    let faults = part_faults(&text);
    assert_eq!(faults[0].line, Some(line_of(&text, "[80.0, 0.0]")), "{faults:?}");
    assert!(faults[0].text.contains("crosses"), "{faults:?}");
}

#[test]
fn a_hole_outside() {
    one_part_fault(
        "[[10.0, 10.0], [14.0, 10.0], [12.0, 14.0]]",
        "[[110.0, 10.0], [114.0, 10.0], [112.0, 14.0]]",
        "[[110.0",
        "ring 1 (a hole) lies outside",
    );
}

#[test]
fn a_thickness_of_nothing() {
    one_part_fault("thickness = 6.0", "thickness = 0", "thickness", "`thickness` is 0; it must be a number above 0");
}

#[test]
fn a_centre_of_mass_of_one_number() {
    one_part_fault("[31.0, 18.5]", "[31.0]", "[31.0]", "`com` is a list of 1 entry; give a list of 2 finite numbers");
}

#[test]
fn a_keep_out_on_an_edge_that_is_not_there() {
    one_part_fault("edge = 2", "edge = 4", "edge = 4", "there is no ring 0 edge 4 (ring 0 has edges 0..3");
}

#[test]
fn a_keep_out_from_behind_to() {
    one_part_fault("from = 0.0", "from = 13.0", "from", "keep_out 0: from 13 mm to 12 mm");
}

#[test]
fn a_keep_out_without_an_edge() {
    one_part_fault("edge = 2\n", "", "[[keep_out]]", "`keep_out.0.edge` is missing");
}

#[test]
fn a_negative_edge() {
    one_part_fault("edge = 2", "edge = -2", "edge = -2", "`keep_out.0.edge` is -2; give a whole number");
}

#[test]
fn a_friction_too_large() {
    one_part_fault("mu = 0.6", "mu = 60", "mu = 60", "edge_friction 0: mu is 60");
}

#[test]
fn a_fault_of_syntax_has_line_and_column() {
    one_part_fault("thickness = 6.0", "thickness = 6.0.1", "thickness", "column ");
    one_part_fault("units = \"mm\"", "units : \"mm\"", "units", "not TOML");
    one_part_fault("com = [31.0, 18.5]", "units = \"cm\"", "units = \"cm\"", "not TOML: duplicate key");
}

#[test]
fn several_faults_are_listed_together_in_the_order_of_the_file() {
    let text = HINGE
        .replacen("units", "unit", 1)
        .replacen("6.0", "\"six\"", 1)
        .replacen("edge = 2", "edge = 9", 1)
        .replacen("mu = 0.6", "mu = true", 1);
    let faults = part_faults(&text);
    let lines: Vec<_> = faults.iter().map(|fault| fault.line.unwrap()).collect();
    let want = ["unit ", "\"six\"", "edge = 9", "mu = true"].map(|piece| line_of(&text, piece));
    assert_eq!(lines, want, "{faults:?}");
}

#[test]
fn a_long_list_of_faults_is_cut() {
    let outer = "  [0, 0, 0],\n".repeat(500);
    let faults = part_faults(&format!("schema = 1\nouter = [\n{outer}]\n"));
    assert_eq!(faults.len(), 21);
    assert_eq!(faults[19].line, Some(22));
    assert_eq!(faults[20].text, "and more; mend these first");
}

#[test]
fn what_is_no_text_file() {
    let folder = tempfile::tempdir().unwrap();
    let fault = |path: &Path| {
        let faults = read_part(path).unwrap_err();
        assert_eq!(faults.faults.len(), 1);
        faults.lines().remove(0)
    };
    assert!(fault(&folder.path().join("none.toml")).ends_with("none.toml: there is no such file"));
    assert!(fault(folder.path()).ends_with("is a folder; name a file in it"));
    let latin = folder.path().join("latin.toml");
    std::fs::write(&latin, b"schema = 1\nname = \"K\xf6nig\"\n").unwrap();
    assert!(fault(&latin).ends_with("latin.toml:2: is not UTF-8 text; save it as UTF-8"));
    let empty = folder.path().join("empty.toml");
    std::fs::write(&empty, b"").unwrap();
    assert!(read_part(&empty).unwrap_err().to_string().contains("`schema` is missing"));
    let marked = folder.path().join("marked.toml");
    std::fs::write(&marked, format!("\u{feff}{}", HINGE.replace('\n', "\r\n"))).unwrap();
    assert_eq!(read_part_with_notes(&marked).unwrap().0.name(), "hinge leaf");
}

/// ECMA-48 control sequences start with ESC; UAX 9 lists the marks that turn the direction of writing.
#[test]
fn nothing_of_a_file_can_steer_the_terminal() {
    assert_eq!(shown("a\u{1b}[2J\u{7}\u{9b}31mb\u{202e}c\nd"), "a[2J31mbcd");
    let text = broken(HINGE, "units = \"mm\"", "units = \"\\u001b[2J\"\n\"\\u001b]0;x\" = 1");
    let faults = part_from_text(Path::new("l\u{1b}eaf.toml"), &text).unwrap_err();
    assert!(faults.faults.len() >= 2);
    assert!(faults.lines().iter().all(|line| !line.contains(char::is_control)), "{faults:?}");
}

#[test]
fn a_sound_setup_is_read() {
    let setup = setup_from_text(Path::new("cell.toml"), CELL).unwrap();
    let f = &setup.friction;
    assert_eq!([Some(f.mu), f.low, f.nominal, f.high, f.sliding], [0.2, 0.15, 0.25, 0.4, 0.15].map(Some));
    assert_eq!(f.condition, Some(Condition::Dry));
    assert_eq!(f.source.as_deref(), Some("own tilt test, 3 Nov"));
    let h = &setup.hand;
    assert_eq!((h.fingers.get(), h.tip, h.closing, h.drive), (2, Tip::Pad, Closing::Parallel, Drive::Equal));
    assert_eq!([h.pin_radius_mm, h.pad_width_mm, h.pad_depth_mm], [3.0, 10.0, 7.0]);
    assert_eq!(h.bite_mm, Some(5.0));
    assert_eq!((h.opening_mm, h.corner_clearance_mm, h.gap_mm, h.force_limit_n), ([5.0, 110.0], 1.5, 0.5, Some(60.0)));
    let s = &setup.search;
    assert_eq!((s.spacing_mm, s.budget, s.seed, s.torque_scale), (Some(2.5), 12345, 7, TorqueScale::Mm(40.0)));
    assert_eq!(s.cone_sides, 12);
    let l = &setup.floors;
    assert_eq!([l.quality, l.friction_margin, l.placement_mm, l.load_margin], [0.01, 1.2, 0.3, 1.5]);
    assert_eq!(setup.loads.len(), 3);
    assert_eq!((setup.loads[0].acceleration_m_s2, setup.loads[0].safety), ([0.0, 0.0, 3.0], 2.0));
    assert_eq!((setup.loads[1].name.as_str(), setup.loads[1].any_direction_m_s2), ("emergency stop", 8.0));
    assert_eq!((setup.loads[2].force_n, setup.loads[2].at_mm), ([0.0, -6.0, 0.0], [40.0, 0.0, 0.0]));
    assert_eq!(setup.loads.iter().map(|load| load.squeeze_left).collect::<Vec<_>>(), [1.0, 1.0, 0.5]);
}

#[test]
fn an_empty_setup_and_the_printed_one_are_the_defaults() {
    let of = |text: &str| setup_from_text(Path::new("cell.toml"), text).unwrap();
    assert_eq!(of("schema = 1\n"), Setup::default());
    assert_eq!(of(&default_setup_text()), Setup::default());
}

/// With its comment marks taken off, the printed setup holds every key the reader knows, and nothing else.
#[test]
fn the_printed_setup_is_sound_with_every_example_taken() {
    let bare = default_setup_text()
        .lines()
        .filter(|l| !l.starts_with("# S") && !l.starts_with("# A"))
        .fold(String::new(), |text, line| text + line.strip_prefix("# ").unwrap_or(line) + "\n");
    let setup = setup_from_text(Path::new("cell.toml"), &bare).unwrap();
    assert_eq!(setup.friction.source.as_deref(), Some("own tilt test"));
    assert_eq!(setup.hand.force_limit_n, Some(60.0));
    assert_eq!(setup.loads.len(), 1);
    let keys = |text: &str| {
        let mut keys: Vec<_> =
            text.lines().filter_map(|line| line.split_once(" = ")).map(|(key, _)| key.to_owned()).collect();
        keys.sort();
        keys.dedup();
        keys
    };
    let mut known = keys(CELL);
    known.push("angular_acceleration_rad_s2".to_owned());
    known.sort();
    assert_eq!(keys(&bare), known);
}

#[test]
fn mu_is_the_low_end_when_left_out() {
    let setup = setup_from_text(Path::new("cell.toml"), &broken(CELL, "mu = 0.20\n", "")).unwrap();
    assert!((setup.friction.mu - 0.15).abs() < f64::EPSILON);
}

#[test]
fn a_torque_scale_by_name() {
    let setup = setup_from_text(Path::new("c"), &broken(CELL, "= 40\n", "= \"gyration\"\n")).unwrap();
    assert_eq!(setup.search.torque_scale, TorqueScale::Gyration);
    one_setup_fault("= 40\n", "= \"size\"\n", "torque_scale", "give \"reach\" or \"gyration\"");
    one_setup_fault("= 40\n", "= -1\n", "torque_scale", "`search.torque_scale` is -1");
}

#[test]
fn setup_values_out_of_range_have_their_line() {
    one_setup_fault("mu = 0.20", "mu = 11.0", "mu = 11", "`friction.mu` is 11");
    one_setup_fault("fingers = 2", "fingers = 7", "fingers", "`hand.fingers` is 7; give a number from 2 to 6");
    one_setup_fault("sliding = 0.15", "sliding = 0.3", "sliding", "never above `mu`");
    one_setup_fault("high = 0.40", "high = 0.10", "high", "must rise");
    one_setup_fault("[5.0, 110.0]", "[110.0, 5.0]", "opening_mm", "`hand.opening_mm` is [110, 5]");
    one_setup_fault("budget = 12345", "budget = 0", "budget", "`search.budget` is 0");
    one_setup_fault("spacing_mm = 2.5", "spacing_mm = -2", "spacing_mm", "`search.spacing_mm` is -2");
    one_setup_fault("safety = 2.0", "safety = 0.0", "safety", "`load.0.safety` is 0");
    one_setup_fault("any_direction_m_s2 = 8.0", "any_direction_m_s2 = -8.0", "any_dir", "`load.1.any_direction_m_s2`");
    one_setup_fault("placement_mm = 0.3", "placement_mm = -1", "placement_mm", "`floors.placement_mm`");
}

/// Every number a load or a hand cannot have is named with its key, its value and what to give instead.
#[test]
fn hands_and_loads_that_cannot_be() {
    let faults = setup_faults("schema = 1\n[friction]\nmu = -0.2\n");
    let said = (faults.len(), faults[0].line, faults[0].text.as_str());
    assert_eq!(said, (1, Some(3), "`friction.mu` is -0.2: give a number from 0 to 10"));
    one_setup_fault("bite_mm = 5.0", "bite_mm = 0.0", "bite_mm", "`hand.bite_mm` is 0: give a number above 0");
    one_setup_fault("force_limit_n = 60.0", "force_limit_n = 0", "force_limit_n", "`hand.force_limit_n` is 0: give");
    one_setup_fault("squeeze_left = 0.5", "squeeze_left = 0", "squeeze_left", "`load.2.squeeze_left` is 0: give");
    one_setup_fault("squeeze_left = 0.5", "squeeze_left = 2", "squeeze_left", "above 0 (at most 1)");
    one_setup_fault("cone_sides = 12", "cone_sides = 7", "cone_sides", "is 7: give an even number from 4");
    one_setup_fault("tip = \"pad\"", "tip = \"pin\"", "tip", "parallel closing takes pads: set it to \"pad\"");
    one_setup_fault("fingers = 2", "fingers = 3", "fingers", "parallel closing takes two pads: set it to 2");
    one_setup_fault("drive = \"equal\"", "drive = \"shared\"", "drive", "give \"adjustable\" or \"equal\"");
}

/// What only the part makes impossible: found when the two meet, with the key as in the setup file.
#[test]
fn a_setup_the_part_does_not_allow() {
    let setup = setup_from_text(Path::new("cell.toml"), CELL).unwrap();
    let faults = |part: &str, setup: &Setup| {
        let (part, _) = part_from_text(Path::new("leaf.toml"), part).unwrap();
        setup.faults_with(&part).into_iter().map(|fault| fault.to_string()).collect::<Vec<_>>()
    };
    assert!(faults(HINGE, &setup).is_empty());
    let mut deep = setup.clone();
    deep.hand.bite_mm = Some(6.5);
    let said = faults(HINGE, &deep);
    assert!(said.len() == 1 && said[0].starts_with("`hand.bite_mm` is 6.5: the part is 6 mm thick"), "{said:?}");
    // Without a mass; the brush moves none, but the part's weight is on it too.
    let said = faults(&broken(HINGE, "aluminium 5083", "driftwood"), &setup);
    assert_eq!(said.len(), 3, "{said:?}");
    assert!(said[0].starts_with("`load.0` is \"lift\"") && said[0].contains("give the part `mass_kg`"), "{said:?}");
    // Without a thickness, weighed: all three loads have gravity across the plane.
    let flat = broken(HINGE, "thickness = 6.0", "mass_kg = 0.05");
    let said = faults(&flat, &setup);
    assert_eq!(said.len(), 3, "{said:?}");
    assert!(said[0].contains("`load.0.gravity` is [0.0, 0.0, -1.0]") && said[0].contains("`thickness`"), "{said:?}");
    let mut level = setup;
    level.loads.iter_mut().for_each(|load| load.gravity = [0.0, -1.0, 0.0]);
    let said = faults(&flat, &level);
    assert!(said.len() == 1 && said[0].starts_with("`load.0.acceleration_m_s2`"), "{said:?}");
}

#[test]
fn setup_values_of_wrong_type_have_their_line() {
    one_setup_fault("mu = 0.20", "mu = \"0.2\"", "mu = \"", "`friction.mu` is the text \"0.2\"; give a finite number");
    one_setup_fault("fingers = 2", "fingers = 2.5", "fingers", "`hand.fingers` is 2.5; give a whole number");
    one_setup_fault("seed = 7", "seed = -7", "seed", "`search.seed` is -7");
    one_setup_fault("seed = 7", "seed = 99999999999999999999", "seed", "`search.seed` is 99999999999999999999");
    one_setup_fault("tip = \"pad\"", "tip = \"ball\"", "tip", "give \"pin\" or \"pad\"");
    one_setup_fault("[0.0, -6.0, 0.0]", "[0.0, -6.0]", "force_n", "`load.2.force_n` is a list of 2 entries");
    one_setup_fault("quality = 0.01", "quality = inf", "quality", "`floors.quality` is inf; give a finite number");
}

#[test]
fn setup_keys_unknown_name_the_nearest() {
    one_setup_fault("pin_radius_mm", "pin_radius", "pin_radius", "`hand.pin_radius`; did you mean `pin_radius_mm`");
    one_setup_fault("[search]", "[serach]", "[serach]", "did you mean `search`");
    one_setup_fault("any_direction_m_s2", "any_direction", "any_direction", "`load.1.any_direction`");
}

#[test]
fn a_table_written_as_a_value() {
    let faults = setup_faults("schema = 1\nhand = 3\nload = [1]\n");
    assert_eq!(faults.len(), 2, "{faults:?}");
    assert!(faults[0].text.contains("`hand` is 3; give a table"));
    assert!(faults[1].text.contains("entry 0 of `load` is 1"));
}
