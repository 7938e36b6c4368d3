//! The built-in tables of densities and friction pairs: sources, plausibility, the command, the lists on the bench.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod common;
mod desk;

use common::assert_close;
use desk::{Desk, setup};
use holdwright::file::{part_from_text, setup_from_text};
use holdwright::mechanics::Condition::{self, Dry, Oily, Wet};
use holdwright::mechanics::pair::{PAIRS, PLAN_MARK, Pair, Value};
use holdwright::mechanics::{FrictionBand, Verdict};
use holdwright::part::material::{DENSITIES, density};
use holdwright::part::{Part, PartDescription, Source};
use holdwright::search::Setup;
use holdwright::workbench::state::Layer;
use serde_json::Value as Json;
use std::collections::HashSet;
use std::path::Path;
use std::process::{Command, Output};

/// A plate of 80 x 40 x 5 mm that says nothing of its mass.
fn plate() -> Part {
    let mut plate = PartDescription::bare("plate", vec![vec![[0.0, 0.0], [80.0, 0.0], [80.0, 40.0], [0.0, 40.0]]]);
    plate.thickness = Some(5.0);
    Part::new(plate).unwrap()
}

fn pair(name: &str) -> &'static Pair {
    PAIRS.iter().find(|pair| pair.name == name).unwrap()
}

fn kg_m3(name: &str) -> f64 {
    density(name).unwrap().kg_m3
}

#[track_caller]
fn told(source: &Source) {
    assert!(source.short.len() > 3 && source.full.len() > 3, "{source:?}");
}

#[test]
fn every_row_has_a_name_of_its_own_and_says_where_it_is_from() {
    let mut names = HashSet::new();
    for row in DENSITIES {
        for name in row.names() {
            assert!(names.insert(name.to_lowercase()), "{name} stands twice");
            assert!(std::ptr::eq(density(&format!(" {} ", name.to_uppercase())).unwrap(), row), "{name}");
        }
        told(row.source);
        assert!(row.kg_m3 > 0.0);
        if let Some([low, high]) = row.range {
            assert!(low < row.kg_m3 && row.kg_m3 < high, "{}", row.name);
        }
    }
    let mut names = HashSet::new();
    for pair in PAIRS {
        assert!(names.insert(pair.name.to_lowercase()), "{} stands twice", pair.name);
        assert!(!pair.quotes.is_empty(), "{}: nobody quotes it", pair.name);
        for quote in pair.quotes {
            told(quote.source);
            assert!(quote.fixed.is_some() || quote.sliding.is_some(), "{}: {quote}", pair.name);
            assert_eq!(quote.to_string().contains("from memory"), quote.source.from_memory, "{quote}");
        }
    }
    assert!(DENSITIES.len() > 40 && PAIRS.len() > 40);
}

/// Common practice, no source: dry coefficients run from close to 0 to about 1, more only with rubber or very clean soft
/// metals; sliding is not above static; oil lowers a pair, never raises it.
#[test]
fn the_pairs_are_plausible() {
    for pair in PAIRS {
        assert!(pair.plan_dry > 0.0 && pair.plan_dry < 1.0, "{}", pair.name);
        if let Some(oily) = pair.plan_oily {
            assert!(oily > 0.0 && oily <= pair.plan_dry, "{}", pair.name);
        }
        for quote in pair.quotes {
            if let (Some(fixed), Some(sliding)) = (quote.fixed, quote.sliding) {
                assert!(sliding.highest() <= fixed.highest(), "{}: {quote}", pair.name);
            }
            if let Some(Value::Between(low, high)) = quote.fixed {
                assert!(low < high, "{}: {quote}", pair.name);
            }
        }
        if let (Some(dry), Some(oily)) = (pair.spread(Dry), pair.spread(Oily)) {
            assert!(oily.highest() <= dry.highest(), "{}", pair.name);
        }
    }
}

/// A planning value is a low pick: at or below the lowest quote of its condition. Where it is not, the row says so, and
/// the band's low end is the quote. Common practice, no source.
#[test]
fn no_planning_value_lies_above_a_quote_without_saying_so() {
    // One that is mended must leave this list.
    let above: Vec<(&str, Condition)> = vec![
        ("mild steel - mild steel", Dry),
        ("mild steel - mild steel", Oily),
        ("polyurethane pad - metal", Dry),
        ("silicone rubber - metal", Dry),
    ];
    let mut found = Vec::new();
    for pair in PAIRS {
        for condition in [Dry, Oily] {
            let lowest = pair.spread(condition).and_then(Value::lowest);
            if let (Some(plan), Some(lowest)) = (pair.plan(condition), lowest)
                && plan > lowest
            {
                found.push((pair.name, condition));
                assert!(pair.note.contains("below the"), "{}: {}", pair.name, pair.note);
                assert_close(pair.band(condition).unwrap().low.unwrap(), lowest, 0.0, 0.0);
            }
        }
    }
    assert_eq!(found, above);
}

/// The CTU Code (IMO/ILO/UNECE 2014, Annex 7, Appendix 2) gives design values, which are low by intent; ours are at or
/// below them. EN 12195-1 gives 0.6 for an anti-slip mat.
#[test]
fn planning_values_are_not_above_published_design_values() {
    for (name, published) in [
        ("metal, smooth - metal, smooth", 0.2),
        ("metal, rough and unpainted - metal", 0.4),
        ("metal, painted - metal", 0.2),
        ("planed wood - plywood or smooth metal", 0.2),
        ("wood - metal", 0.3),
        ("cardboard - cardboard or wood", 0.5),
        ("anti-slip rubber mat - clean surfaces", 0.6),
    ] {
        assert!(pair(name).plan_dry <= published, "{name}");
    }
    // The default of a setup is the CTU Code's smooth metal.
    assert_close(FrictionBand::default().mu, pair("metal, smooth - metal, smooth").plan_dry, 0.0, 0.0);
}

#[test]
fn every_band_can_stand_in_a_setup_and_goes_through_a_file_unchanged() {
    let mut bands = 0;
    for pair in PAIRS {
        assert_eq!(pair.band(Wet), None);
        for condition in [Dry, Oily] {
            let Some(friction) = pair.band(condition) else {
                assert_eq!(pair.plan(condition), None);
                continue;
            };
            bands += 1;
            assert_eq!(Some(friction.mu), pair.plan(condition));
            assert!(friction.low.unwrap() <= friction.mu);
            let source = friction.source.clone().unwrap();
            assert!(source.contains(pair.name) && source.contains(PLAN_MARK), "{source}");
            for quote in pair.quotes_for(condition).filter(|quote| quote.fixed.is_some()) {
                assert!(source.contains(quote.source.short), "{source}");
            }
            let setup = Setup { friction: friction.clone(), ..Setup::default() };
            assert!(setup.faults().is_empty(), "{}: {:?}", pair.name, setup.faults());
            let mut text = format!("schema = 1\n[friction]\nmu = {}\nlow = {}\n", friction.mu, friction.low.unwrap());
            for (key, value) in [("nominal", friction.nominal), ("high", friction.high)] {
                value.iter().for_each(|value| text.push_str(&format!("{key} = {value}\n")));
            }
            text.push_str(&format!("condition = \"{}\"\nsource = {source:?}\n", condition.word()));
            assert_eq!(setup_from_text(Path::new("x.toml"), &text).unwrap().friction, friction);
        }
    }
    assert!(bands > 70);
}

/// By hand from the quotes of mild steel on itself: the middles 0.74, 0.225, 0.31, 0.31, 0.65, 0.36 have the median
/// 0.335; the highest quote is 0.8, the lowest 0.12.
#[test]
fn a_band_holds_the_median_and_the_ends_of_the_quotes() {
    let band = pair("mild steel - mild steel").band(Dry).unwrap();
    assert_close(band.mu, 0.15, 0.0, 0.0);
    assert_close(band.low.unwrap(), 0.12, 0.0, 0.0);
    assert_close(band.nominal.unwrap(), 0.335, 0.0, 1e-12);
    assert_close(band.high.unwrap(), 0.8, 0.0, 0.0);
    assert_eq!((band.sliding, band.condition), (None, Some(Dry)));
    // Nothing is quoted before slip: nothing stands in for it.
    let band = pair("brass - cast iron").band(Dry).unwrap();
    assert_eq!((band.low, band.nominal, band.high), (Some(0.25), None, None));
    assert_eq!(pair("cardboard - cardboard or wood").band(Oily), None);
}

/// Rows that a second book gives too: Callister App. B beside Gere Table H-1, and the other way round. The books differ
/// by up to 0.4 % where both give a number.
#[test]
fn densities_agree_with_a_second_book() {
    for (name, low, high) in [
        // Callister, steels 1020 to 4340; copper C11000; aluminium 6061 and 2024; grey and ductile iron; AZ31B to AZ91.
        ("steel", 7845.0, 7870.0),
        ("copper", 8890.0, 8890.0),
        ("aluminium", 2700.0, 2700.0),
        ("aluminium 2014", 2780.0, 2810.0),
        ("magnesium alloy", 1770.0, 1810.0),
        ("brass", 8500.0, 8530.0),
        // Gere.
        ("steel 1040", 7850.0, 7850.0),
        ("grey iron", 7000.0, 7400.0),
        ("ductile iron", 7000.0, 7400.0),
        ("aluminium 6061", 2700.0, 2700.0),
        ("aluminium 7075", 2800.0, 2800.0),
        ("brass c26000", 8400.0, 8600.0),
        ("brass c36000", 8400.0, 8600.0),
        ("copper c11000", 8900.0, 8900.0),
        ("magnesium az31b", 1760.0, 1830.0),
        ("magnesium az91", 1760.0, 1830.0),
    ] {
        let own = kg_m3(name);
        assert!((low * 0.996..=high * 1.004).contains(&own), "{name}: {own}");
    }
}

/// EN 10056-1: L50x50x5 has a section of 4.80 cm2 and 3.77 kg/m. A square of 4.8026 cm2, one metre thick, of steel.
#[test]
fn a_metre_of_angle_steel_weighs_what_its_standard_says() {
    let side = 480.26_f64.sqrt();
    let mut bar = PartDescription::bare("L50x50x5", vec![vec![[0.0, 0.0], [side, 0.0], [side, side], [0.0, side]]]);
    bar.thickness = Some(1000.0);
    let bare = Part::new(bar.clone()).unwrap();
    bar.material = Some("Steel".into());
    let of_steel = Part::new(bar).unwrap();
    assert_close(of_steel.mass().unwrap().kg, 3.77, 0.0, 0.005);
    assert!(bare.mass().is_none());
    // Given afterwards, the density gives the same mass to the last digit.
    let given = bare.with_density("steel", kg_m3("steel")).unwrap();
    assert_eq!((given.mass(), given.material()), (of_steel.mass(), Some("steel")));
    assert_eq!((given.com(), given.outline().edges().len()), (bare.com(), bare.outline().edges().len()));
    for bad in [0.0, -1.0, f64::NAN, f64::INFINITY] {
        assert!(bare.with_density("air", bad).is_none());
    }
    let thin = PartDescription::bare("sheet", vec![vec![[0.0, 0.0], [9.0, 0.0], [0.0, 9.0]]]);
    assert!(Part::new(thin).unwrap().with_density("steel", 7850.0).is_none());
}

#[test]
fn a_part_file_may_use_any_name_of_a_material() {
    let text = "schema = 1\nthickness = 10\nmaterial = \" Nylon\"\nouter = [[0, 0], [100, 0], [100, 100], [0, 100]]\n";
    let (part, notes) = part_from_text(Path::new("x.toml"), text).unwrap();
    // 0.1 m x 0.1 m x 0.01 m at 1130 kg/m3, the middle of the 1120 to 1140 of the Cambridge data book (from memory).
    assert_close(part.mass().unwrap().kg, 0.113, 1e-12, 0.0);
    assert!(notes.is_empty());
}

fn run(args: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_holdwright")).arg("materials").args(args).output().unwrap()
}

#[track_caller]
fn text(args: &[&str]) -> String {
    let output = run(args);
    assert_eq!(output.status.code(), Some(0));
    String::from_utf8(output.stdout).unwrap()
}

#[test]
fn the_command_lists_every_row_within_80_columns() {
    let all = text(&[]);
    for line in all.lines() {
        assert!(line.is_ascii() && line.len() <= 80 && line.trim_end() == line, "{line:?}");
    }
    for name in DENSITIES.iter().map(|row| row.name).chain(PAIRS.iter().map(|pair| pair.name)) {
        assert!(all.lines().any(|line| line.starts_with(name)), "{name}");
    }
    let sources = all.split_once("\nsources\n").unwrap().1;
    for source in PAIRS.iter().flat_map(|pair| pair.quotes).map(|quote| quote.source) {
        assert!(sources.lines().any(|line| line.starts_with(&format!("{}:", source.short))), "{}", source.short);
    }
    assert!(all.contains(PLAN_MARK) && all.contains("from memory") && all.contains("common practice, no source"));
    assert!(all.trim_end().ends_with("measure your own pair before relying on any number."), "{all}");
}

#[test]
fn the_command_lists_the_rows_whose_names_have_every_word() {
    let steel = text(&["STEEL", "alumin"]);
    assert!(steel.contains("aluminium - mild steel") && !steel.contains("kg/m3"), "{steel}");
    assert_eq!(steel.lines().filter(|line| line.contains(" - ")).count(), 1, "{steel}");
    assert!(text(&["nylon"]).contains("pa, polyamide, nylon"));
    assert_eq!(text(&["az31b"]).lines().count(), 6, "{}", text(&["az31b"]));
    let none = run(&["unobtainium"]);
    assert_eq!((none.status.code(), none.stdout.len()), (Some(2), 0));
    assert!(String::from_utf8(none.stderr).unwrap().contains("no row has \"unobtainium\""));
}

#[test]
fn the_command_prints_json_with_every_value_and_its_source() {
    let all: Json = serde_json::from_str(&text(&["--json"])).unwrap();
    assert_eq!(all["schema"], 1);
    assert_eq!(all["densities"].as_array().unwrap().len(), DENSITIES.len());
    assert_eq!(all["friction_pairs"].as_array().unwrap().len(), PAIRS.len());
    let some: Json = serde_json::from_str(&text(&["--json", "nbr"])).unwrap();
    assert_eq!(some["densities"], serde_json::json!([]));
    let nbr = &some["friction_pairs"][0];
    assert_eq!((nbr["plan_dry"].as_f64(), nbr["plan_oily"].as_f64()), (Some(0.5), Some(0.15)));
    assert_eq!(nbr["quotes"][0]["mu"], serde_json::json!([null, 2.4]));
    assert!(nbr["quotes"][0]["source"].as_str().unwrap().contains("Grosch"));
    let steel: Json = serde_json::from_str(&text(&["--json", "mild steel - mild steel"])).unwrap();
    let marks = &steel["friction_pairs"][0]["quotes"][0];
    assert_eq!((&marks["sliding"], &marks["from_memory"]), (&serde_json::json!([0.57, 0.57]), &Json::Bool(true)));
}

#[test]
fn a_pair_taken_on_the_bench_sets_the_band_and_ranks_again() {
    let mut desk = Desk::new(plate(), setup());
    let asked = desk.generation;
    desk.keys("tjj");
    assert_eq!(desk.state.layers.last(), Some(&Layer::Pairs { at: 2, condition: Dry }));
    assert_eq!(desk.generation, asked, "looking changes nothing");
    desk.keys("<cr>");
    assert!(desk.state.layers.is_empty());
    assert_eq!(desk.state.setup().friction, pair("mild steel - mild steel").band(Dry).unwrap());
    assert_eq!(desk.generation, asked + 1);
    let shown = desk.state.shown.as_ref().unwrap();
    assert_eq!(shown.order.scene.setup().friction.mu.to_bits(), 0.15f64.to_bits());
    let band: Vec<_> =
        desk.state.reading.as_ref().unwrap().band.iter().map(|(name, standing)| (*name, standing.verdict)).collect();
    assert_eq!(band, [("low", Verdict::Closed), ("nominal", Verdict::Closed), ("high", Verdict::Closed)]);
    // What is kept says where mu is from.
    desk.keys("ms");
    let source = desk.saved[0].setup.friction.source.clone().unwrap();
    assert!(source.starts_with("mild steel - mild steel, dry: 0.15 is a planning value, no source"), "{source}");
    // The list opens where it was left; oily is another value of the same row.
    desk.keys("t");
    assert_eq!(desk.state.layers.last(), Some(&Layer::Pairs { at: 2, condition: Dry }));
    desk.keys("l<cr>");
    assert_eq!(desk.state.setup().friction, pair("mild steel - mild steel").band(Oily).unwrap());
    // The first row is the way back.
    desk.keys("tg<cr>");
    assert_eq!(desk.state.setup().friction, setup().friction);
}

#[test]
fn a_pair_without_a_value_for_oil_is_refused_with_its_reason() {
    let mut desk = Desk::new(plate(), setup());
    let row = PAIRS.iter().position(|pair| pair.plan_oily.is_none()).unwrap() + 1;
    desk.keys(&format!("t{}h<cr>", "j".repeat(row)));
    assert!(matches!(desk.state.layers.last(), Some(Layer::Pairs { condition: Oily, .. })));
    assert!(desk.screen(80, 24).contains("no planning value when oily"));
    assert_eq!(desk.state.setup().friction, setup().friction);
}

#[test]
fn a_density_taken_on_the_bench_gives_the_part_a_mass_until_it_is_taken_back() {
    let mut desk = Desk::new(plate(), setup());
    let before = desk.spots();
    desk.keys("dj<cr>");
    // 80 x 40 x 5 mm of steel at 7850 kg/m3 (Gere, Table H-1).
    let mass = desk.state.order.scene.part().mass().unwrap().kg;
    assert_close(mass, 0.08 * 0.04 * 0.005 * 7850.0, 1e-12, 0.0);
    assert_eq!(desk.spots(), before);
    assert!(desk.state.opened.part.mass().is_none());
    // What is kept says under which density it was read.
    desk.keys("m");
    let kept = desk.state.marks[0].keep.density.clone().unwrap();
    assert_eq!((kept.of.as_str(), kept.kg_m3.to_bits()), ("steel", 7850.0_f64.to_bits()));
    desk.keys("m");
    assert!(desk.state.marks.is_empty());
    desk.keys("<cr>G");
    let reading = desk.screen(100, 40);
    assert!(reading.contains("126 g") && reading.contains("7850 kg/m3 of steel, chosen here (Gere"), "{reading}");
    desk.keys("<esc>d");
    assert_eq!(desk.state.layers.last(), Some(&Layer::Materials { at: 1 }));
    desk.keys("k<cr>");
    assert!(desk.state.order.scene.part().mass().is_none() && desk.state.density.is_none());
}

#[test]
fn densities_are_offered_only_where_they_can_help() {
    // A part with a mass needs none.
    let heavy = plate().with_density("steel", 7850.0).unwrap();
    let mut desk = Desk::new(heavy, setup());
    desk.keys("d");
    assert!(desk.state.layers.is_empty());
    // Without a thickness no density gives a mass.
    let mut desk = Desk::hinge();
    desk.keys("dj<cr>");
    assert!(matches!(desk.state.layers.last(), Some(Layer::Materials { at: 1 })));
    assert!(desk.state.message.as_ref().unwrap().contains("thickness"));
}

/// What is missing is said in one line until it is there, and not where the file gives it.
#[test]
fn what_the_setup_and_the_part_leave_out_is_said_once() {
    let mut desk = Desk::new(plate(), setup());
    let missing = |desk: &Desk, what: &str| desk.screen(80, 24).matches(what).count();
    assert_eq!((missing(&desk, "no source"), missing(&desk, "no mass")), (1, 1), "{}", desk.screen(80, 24));
    desk.keys("tj<cr><esc>");
    assert_eq!((missing(&desk, "has no source"), missing(&desk, "no mass")), (0, 1), "{}", desk.screen(80, 24));
    desk.keys("dj<cr><esc>");
    assert_eq!((missing(&desk, "has no source"), missing(&desk, "no mass")), (0, 0), "{}", desk.screen(80, 24));
    let mut given = setup();
    given.friction.source = Some("own tilt test".into());
    let desk = Desk::new(plate().with_density("steel", 7850.0).unwrap(), given);
    assert_eq!((missing(&desk, "no source"), missing(&desk, "no mass")), (0, 0), "{}", desk.screen(80, 24));
    // Beside the count of marks, in the same line.
    let mut desk = Desk::new(plate(), setup());
    desk.keys("m<esc>");
    let screen = desk.screen(120, 40);
    assert!(screen.lines().any(|line| line.contains("1 not saved") && line.contains("no source")), "{screen}");
}

#[test]
fn the_lists_at_the_sizes_people_have() {
    let mut desk = Desk::new(plate(), setup());
    insta::assert_snapshot!("missing_80x24", desk.resized(80, 24));
    desk.keys("t");
    insta::assert_snapshot!("pairs_opened_80x24", desk.screen(80, 24));
    desk.keys("jj");
    insta::assert_snapshot!("pairs_80x24", desk.screen(80, 24));
    insta::assert_snapshot!("pairs_120x40", desk.resized(120, 40));
    desk.keys("Gl");
    insta::assert_snapshot!("pairs_end_oily_40x20", desk.resized(40, 20));
    desk.resized(80, 24);
    desk.keys("<esc>djjj");
    insta::assert_snapshot!("densities_80x24", desk.screen(80, 24));
    desk.keys("G");
    insta::assert_snapshot!("densities_120x40", desk.resized(120, 40));
}

/// A source from a setup file cannot reach the terminal with its control characters.
#[test]
fn the_source_of_the_setup_is_shown_without_control_characters() {
    let mut odd = setup();
    odd.friction.source = Some("a\u{1b}[2Jb\u{9b}c".into());
    let mut desk = Desk::new(plate(), odd);
    let screen = desk.keys("t").screen(80, 24);
    assert!(screen.contains("source: a[2Jbc") && screen.chars().all(|c| c == '\n' || !c.is_control()), "{screen}");
}
