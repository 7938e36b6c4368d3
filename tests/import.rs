//! Drawings in: areas and holes against those of independent libraries and of published tables, units, layers, joining,
//! nesting, cleaning, and the command.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod common;

use common::assert_close;
use holdwright::file::drawing::{self, Imported, Options, Refusal, unit_named};
use holdwright::part::Part;
use std::path::{Path, PathBuf};

fn reference(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/reference/drawings").join(name)
}

#[track_caller]
fn imported(name: &str, options: &Options) -> Imported {
    match drawing::read(&reference(name), options) {
        Ok(imported) => imported,
        Err(refusal) => panic!("{}", refusal.lines(Path::new(name)).join("\n")),
    }
}

fn mm() -> Options {
    Options { units: unit_named("mm"), ..Options::default() }
}

/// Reads a drawing given as text.
fn from_text(name: &str, text: &str, options: &Options) -> Result<Imported, Refusal> {
    drawing::read_bytes(Path::new(name), text.as_bytes(), options, &mut |_, _, _| {})
}

/// A DXF text of entities alone, a group code and its value to each pair.
fn entities(pairs: &[(i32, &str)]) -> String {
    let body: String = pairs.iter().map(|(code, value)| format!("{code}\n{value}\n")).collect();
    format!("0\nSECTION\n2\nENTITIES\n{body}0\nENDSEC\n0\nEOF\n")
}

fn line(x: f64, y: f64, u: f64, v: f64) -> String {
    format!("0\nLINE\n8\n0\n10\n{x}\n20\n{y}\n11\n{u}\n21\n{v}\n")
}

fn with_entities(body: &str) -> String {
    format!("0\nSECTION\n2\nENTITIES\n{body}0\nENDSEC\n0\nEOF\n")
}

#[track_caller]
fn said(refusal: &Refusal) -> String {
    let lines = refusal.lines(Path::new("x.dxf"));
    assert!(!lines.is_empty());
    lines.join("\n")
}

/// Shapes drawn by ezdxf and svgwrite, their areas by shapely, closed forms and Gauss-Legendre quadrature
/// (tests/reference/drawings/draw.py).
#[test]
fn the_reference_drawings() {
    let table = std::fs::read_to_string(reference("expected.csv")).unwrap();
    let mut rows = 0;
    for row in table.lines().skip(1) {
        rows += 1;
        let fields: Vec<&str> = row.split(',').collect();
        let [file, unit, number, area, holes, tolerance, sagitta] = fields[..] else { panic!("{row}") };
        let options = Options {
            units: unit_named(unit),
            pick: Some(number.parse().unwrap()),
            sagitta_mm: sagitta.parse().ok(),
            ..Options::default()
        };
        let imported = imported(file, &options);
        let report = &imported.report;
        let picked = &report.parts[report.picked.unwrap() - 1];
        println!("{file}: {} against {area}, {} edges", picked.area_mm2, report.rings[0].edges);
        let tolerance: f64 = tolerance.parse().unwrap();
        assert_close(picked.area_mm2, area.parse().unwrap(), tolerance, 0.0);
        assert_eq!(picked.holes, holes.parse::<usize>().unwrap(), "{file}");
        assert_eq!(imported.part.outline().ring_sizes().len(), picked.holes + 1, "{file}");
    }
    assert!(rows > 55, "{rows}");
}
