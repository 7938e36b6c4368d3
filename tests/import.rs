//! Drawings in: areas and holes against those of independent libraries and of published tables, units, layers, joining,
//! nesting, cleaning, and the command.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod common;

use common::assert_close;
use holdwright::file::drawing::{self, Imported, Options, Refusal, unit_named};
use holdwright::file::{part_digest, part_from_text};
use std::f64::consts::{PI, TAU};
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

/// Tables print three or four digits and leave the rolling tolerance out: 0.5 % and half a unit of the last digit.
#[track_caller]
fn as_printed(value: f64, printed: f64, last_digit: f64) {
    assert_close(value, printed, 0.005, last_digit / 2.0);
}

/// What a table prints of a section, each with its last digit: area cm2, I about x and y cm4, centroid x and y cm.
struct Printed {
    name: &'static str,
    area: (f64, f64),
    ixx: Option<(f64, f64)>,
    iyy: Option<(f64, f64)>,
    x: Option<(f64, f64)>,
    y: Option<(f64, f64)>,
}

/// EN 10056-1 (angle), EN 10365 (IPE), DIN 1026-2 (UPE), EN 10219-2 (RHS), as in tests/sections.rs.
const SECTIONS: [Printed; 6] = [
    Printed {
        name: "angle_60x40x5",
        area: (4.79, 0.01),
        ixx: Some((17.2, 0.1)),
        iyy: Some((6.11, 0.01)),
        x: Some((0.97, 0.01)),
        y: Some((1.96, 0.01)),
    },
    Printed { name: "ipe_100", area: (10.3, 0.1), ixx: Some((171.0, 1.0)), iyy: None, x: None, y: None },
    Printed { name: "ipe_200", area: (28.5, 0.1), ixx: Some((1943.0, 1.0)), iyy: None, x: None, y: None },
    Printed {
        name: "upe_100",
        area: (12.5, 0.1),
        ixx: Some((207.0, 1.0)),
        iyy: Some((38.3, 0.1)),
        x: Some((1.91, 0.01)),
        y: None,
    },
    Printed { name: "rhs_60x40x4", area: (6.95, 0.01), ixx: Some((30.99, 0.01)), iyy: None, x: None, y: None },
    Printed {
        name: "rhs_50x30x3",
        area: (4.21, 0.01),
        ixx: Some((12.83, 0.01)),
        iyy: Some((5.70, 0.01)),
        x: None,
        y: None,
    },
];

/// Sections drawn with their fillets as arcs, from DXF and SVG, and from the part files these become.
#[test]
fn published_sections() {
    for printed in &SECTIONS {
        for ending in ["dxf", "svg"] {
            let imported = imported(&format!("{}.{ending}", printed.name), &Options::default());
            let (from_file, notes) = part_from_text(Path::new("section.toml"), &imported.text).unwrap();
            assert!(notes.is_empty());
            for part in [&imported.part, &from_file] {
                let region = part.outline().region();
                as_printed(region.area_mm2 / 100.0, printed.area.0, printed.area.1);
                let com = part.file_point(part.com());
                for (value, said) in [
                    (region.ixx_mm4 / 1e4, printed.ixx),
                    (region.iyy_mm4 / 1e4, printed.iyy),
                    (com.x / 10.0, printed.x),
                    (com.y / 10.0, printed.y),
                ] {
                    if let Some((said, digit)) = said {
                        as_printed(value, said, digit);
                    }
                }
                // Fillets stay arcs: no chords.
                assert!(part.outline().ring_sizes().iter().sum::<usize>() < 25, "{}", printed.name);
            }
            // Digit for digit: what is written reads back to the same part.
            assert_eq!(part_digest(&imported.part), part_digest(&from_file), "{}", printed.name);
        }
    }
}

/// A full circle is two half circles about its centre: the group codes of the DXF reference for CIRCLE.
#[test]
fn a_circle_stays_a_circle() {
    let text = entities(&[(0, "CIRCLE"), (10, "7.5"), (20, "-3"), (40, "12.25")]);
    let imported = from_text("c.dxf", &text, &mm()).unwrap();
    let region = imported.part.outline().region();
    assert_close(region.area_mm2, PI * 12.25 * 12.25, 1e-14, 0.0);
    assert_close(imported.part.file_point(imported.part.com()).x, 7.5, 0.0, 1e-12);
    assert_close(imported.part.file_point(imported.part.com()).y, -3.0, 0.0, 1e-12);
    assert_eq!((imported.report.rings[0].edges, imported.report.rings[0].arcs), (2, 2));
}

/// An arc of more than half a turn, by the law of the DXF reference that arcs run counter-clockwise: three quarters of a
/// disc and a right angle.
#[test]
fn a_long_arc_runs_counter_clockwise() {
    let body = "0\nARC\n8\n0\n10\n0\n20\n0\n40\n10\n50\n0\n51\n270\n".to_owned()
        + &line(0.0, 0.0, 10.0, 0.0)
        + &line(0.0, 0.0, 0.0, -10.0);
    let imported = from_text("c.dxf", &with_entities(&body), &mm()).unwrap();
    assert_close(imported.part.outline().region().area_mm2, 75.0 * PI, 1e-13, 0.0);
    // Exact at the quarter turns, so nothing had to be joined over a gap.
    assert_eq!(imported.report.joints, 0);
}

/// DXF reference, $INSUNITS; NIST SP 811 for the lengths.
#[test]
fn units_of_a_drawing() {
    let text = |code: i32| {
        format!("0\nSECTION\n2\nHEADER\n9\n$INSUNITS\n70\n{code}\n0\nENDSEC\n")
            + &entities(&[(0, "CIRCLE"), (10, "0"), (20, "0"), (40, "1")])
    };
    let diameter_mm = |code: i32| {
        let imported = from_text("c.dxf", &text(code), &Options::default()).unwrap();
        (2.0 * imported.part.reach_mm(), imported.report.units)
    };
    for (code, mm, part) in [
        (1, 25.4, "in"),
        (2, 304.8, "mm"),
        (4, 1.0, "mm"),
        (5, 10.0, "cm"),
        (6, 1000.0, "m"),
        (9, 0.0254, "mm"),
        (10, 914.4, "mm"),
        (13, 0.001, "mm"),
        (14, 100.0, "mm"),
        (21, 304.800_609_601_219_2, "mm"),
    ] {
        let (diameter, units) = diameter_mm(code);
        assert_close(diameter, 2.0 * mm, 1e-12, 0.0);
        assert_eq!(units.part, part);
        assert_eq!(units.stated_by.as_deref(), Some("$INSUNITS"));
    }
    // No unit, or none that means one: asked for, with the size.
    for code in [0, 25, -3] {
        let refusal = from_text("c.dxf", &text(code), &Options::default()).unwrap_err();
        let Refusal::NeedsUnits(needs) = &refusal else { panic!("{refusal}") };
        assert_close(needs.size, 2.0, 1e-12, 0.0);
        assert!(said(&refusal).contains("--units"));
    }
    // What is told wins, and the report says that the drawing says otherwise.
    let told = from_text("c.dxf", &text(1), &mm()).unwrap();
    assert_close(told.part.reach_mm(), 1.0, 1e-12, 0.0);
    assert!(
        told.report.notes.iter().any(|note| note.contains("$INSUNITS says the unit is in")),
        "{:?}",
        told.report.notes
    );
}

/// SVG 2, section 8.12: with a viewBox the size of a user unit is width over viewBox width. CSS Values 4, 6.2: 96 px to
/// the inch.
#[test]
fn units_of_an_svg() {
    let read = |head: &str, options: &Options| {
        let text =
            format!("<svg xmlns='http://www.w3.org/2000/svg' {head}><rect x='1' y='2' width='8' height='4'/></svg>");
        from_text("s.svg", &text, options)
    };
    let area = |head: &str| read(head, &Options::default()).unwrap().part.outline().region().area_mm2;
    assert_close(area("width='20mm' height='10mm' viewBox='0 0 20 10'"), 32.0, 1e-14, 0.0);
    assert_close(area("width='4cm' height='2cm' viewBox='0 0 20 10'"), 4.0 * 32.0, 1e-13, 0.0);
    assert_close(area("width='1in' viewBox='0 0 10 10'"), 32.0 * 2.54 * 2.54, 1e-13, 0.0);
    assert_close(area("width='72pt' height='1in'"), 32.0 * (25.4_f64 / 96.0).powi(2), 1e-13, 0.0);
    // Uneven sides: the smaller scale both ways, as preserveAspectRatio says when it is not there; or stretched.
    assert_close(area("width='40mm' height='10mm' viewBox='0 0 20 10'"), 32.0, 1e-13, 0.0);
    let stretched = "width='40mm' height='10mm' viewBox='0 0 20 10' preserveAspectRatio='none'";
    assert_close(area(stretched), 2.0 * 32.0, 1e-13, 0.0);
    for head in ["", "width='20' height='10'", "width='100%' viewBox='0 0 20 10'", "width='20px' height='10px'"] {
        let refusal = read(head, &Options::default()).unwrap_err();
        assert!(matches!(refusal, Refusal::NeedsUnits(_)), "{refusal}");
        assert_close(read(head, &mm()).unwrap().part.outline().region().area_mm2, 32.0, 1e-14, 0.0);
    }
    // y is turned up: the rectangle is 4 from the lower edge of the drawing.
    let imported = read("width='20mm' height='10mm' viewBox='0 0 20 10'", &Options::default()).unwrap();
    assert_eq!(imported.report.parts[0].at, [1.0, 4.0]);
    assert_eq!(imported.report.parts[0].size, [8.0, 4.0]);
}

/// A square of loose lines with gaps: closed within the tolerance, refused beyond it with the tolerance it would take.
#[test]
fn gaps_are_closed_within_the_tolerance() {
    let square = |gap: f64| {
        with_entities(
            &(line(0.0, 0.0, 100.0, 0.0)
                + &line(100.0, 100.0, 100.0, gap)
                + &line(0.0, 100.0, 100.0, 100.0)
                + &line(0.0, 100.0, 0.0, 0.0)),
        )
    };
    let imported = from_text("s.dxf", &square(0.0009), &mm()).unwrap();
    assert_eq!((imported.report.joints, imported.report.loops), (1, 1));
    assert_close(imported.report.largest_gap_mm, 0.0009, 1e-9, 0.0);
    assert_close(imported.report.join_mm, 0.001, 1e-9, 0.0);
    // The corner is half-way: the area loses half of a sliver of 100 by 0.0009 at most.
    assert_close(imported.part.outline().region().area_mm2, 10_000.0, 0.0, 0.05);
    let refusal = from_text("s.dxf", &square(0.4), &mm()).unwrap_err();
    let words = said(&refusal);
    assert!(words.contains("0.4 mm away") && words.contains("--join above 0.4"), "{words}");
    let wide = Options { join_mm: Some(0.5), ..mm() };
    let imported = from_text("s.dxf", &square(0.4), &wide).unwrap();
    assert_close(imported.report.largest_gap_mm, 0.4, 1e-12, 0.0);
}

/// Where a line and an arc do not quite meet, the line gives way: the arc keeps its centre and radius.
#[test]
fn an_arc_keeps_its_end() {
    let body = "0\nARC\n8\n0\n10\n0\n20\n0\n40\n10\n50\n0\n51\n180\n".to_owned() + &line(-10.004, 0.0, 10.003, 0.0);
    let options = Options { join_mm: Some(0.01), ..mm() };
    let imported = from_text("d.dxf", &with_entities(&body), &options).unwrap();
    assert_eq!(imported.report.joints, 2);
    assert_close(imported.part.outline().region().area_mm2, 50.0 * PI, 1e-12, 0.0);
}

/// A curve drawn in pieces shorter than the tolerance is not drawn together.
#[test]
fn pieces_shorter_than_the_tolerance_stay_apart() {
    let n = 2000;
    let at = |i: usize| {
        let angle = TAU * (i % n) as f64 / n as f64;
        (10.0 * angle.cos(), 10.0 * angle.sin())
    };
    let body: String = (0..n).map(|i| line(at(i).0, at(i).1, at(i + 1).0, at(i + 1).1)).collect();
    let options = Options { join_mm: Some(0.5), ..mm() };
    let imported = from_text("c.dxf", &with_entities(&body), &options).unwrap();
    assert_eq!(imported.report.rings[0].edges, n);
    assert_eq!(imported.report.joints, 0);
    // Area of a regular polygon.
    assert_close(imported.part.outline().region().area_mm2, n as f64 * 50.0 * (TAU / n as f64).sin(), 1e-12, 0.0);
}

/// Lines drawn twice, loops drawn twice by other means, lines without length: once, dropped, counted.
#[test]
fn duplicates_and_points_are_dropped() {
    let square = [(0.0, 0.0), (30.0, 0.0), (30.0, 20.0), (0.0, 20.0)];
    let mut body = String::new();
    for (i, &(x, y)) in square.iter().enumerate() {
        let (u, v) = square[(i + 1) % 4];
        body += &line(x, y, u, v);
        body += &line(u, v, x, y);
    }
    body += &line(5.0, 5.0, 5.0, 5.0);
    // A circle, and the same as two arcs.
    body += "0\nCIRCLE\n8\n0\n10\n15\n20\n10\n40\n4\n";
    for (from, to) in [(0, 200), (200, 360)] {
        body += &format!("0\nARC\n8\n0\n10\n15\n20\n10\n40\n4\n50\n{from}\n51\n{to}\n");
    }
    let imported = from_text("s.dxf", &with_entities(&body), &mm()).unwrap();
    assert_eq!((imported.report.duplicates, imported.report.without_length, imported.report.loops), (5, 1, 2));
    assert_close(imported.part.outline().region().area_mm2, 600.0 - 16.0 * PI, 1e-12, 0.0);
}

/// What does not close is never taken for closed, nor left out without being asked.
#[test]
fn open_lines_and_forks_are_refused() {
    let square = |extra: &str| {
        let body = line(0.0, 0.0, 40.0, 0.0) + &line(40.0, 0.0, 40.0, 30.0) + &line(40.0, 30.0, 0.0, 30.0);
        with_entities(&(body + &line(0.0, 30.0, 0.0, 0.0) + extra))
    };
    let skip = Options { skip_open: true, ..mm() };
    for extra in [line(10.0, 10.0, 20.0, 10.0), line(40.0, 30.0, 60.0, 45.0)] {
        let refusal = from_text("s.dxf", &square(&extra), &mm()).unwrap_err();
        assert!(said(&refusal).contains("--skip open"), "{refusal}");
        let imported = from_text("s.dxf", &square(&extra), &skip).unwrap();
        assert_close(imported.part.outline().region().area_mm2, 1200.0, 1e-13, 0.0);
        assert_eq!(imported.report.open.len(), 1);
    }
    // A line across from corner to corner: two loops or one, nobody can tell.
    let across = square(&line(0.0, 0.0, 40.0, 30.0));
    for options in [mm(), skip] {
        let words = said(&from_text("s.dxf", &across, &options).unwrap_err());
        assert!(words.contains("3 lines meet at (0, 0)"), "{words}");
    }
}

/// Faults of the outline are told in the drawing's words: where, and which entity on which layer.
#[test]
fn faults_name_the_entity() {
    let bow =
        "0\nLWPOLYLINE\n5\n2A\n8\nHULL\n90\n4\n70\n1\n10\n0\n20\n0\n10\n10\n20\n10\n10\n10\n20\n0\n10\n0\n20\n9\n";
    let words = said(&from_text("bow.dxf", &with_entities(bow), &mm()).unwrap_err());
    assert!(words.contains("crosses") && words.contains("LWPOLYLINE 2A on layer \"HULL\""), "{words}");
    let off = "0\nCIRCLE\n5\n7\n8\n0\n10\n0\n20\n0\n40\n5\n0\nCIRCLE\n5\n8\n8\n0\n10\n4\n20\n0\n40\n3\n";
    let options = Options { pick: Some(1), ..mm() };
    let words = said(&from_text("off.dxf", &with_entities(off), &options).unwrap_err());
    assert!(words.contains("crosses") && words.contains("CIRCLE 8"), "{words}");
}

/// What could be part of an outline but cannot be read is a refusal; what cannot is only reported.
#[test]
fn nothing_is_left_out_in_silence() {
    let frame = "0\nCIRCLE\n8\n0\n10\n0\n20\n0\n40\n5\n";
    for missed in [
        "0\nREGION\n8\n0\n",
        "0\nBRAND_NEW\n8\n0\n10\nno number\n",
        "0\nLINE\n8\n0\n10\n0\n20\n0\n30\n0\n11\n1\n21\n0\n31\n1\n",
        "0\nCIRCLE\n8\n0\n10\n0\n20\n0\n40\n1\n210\n0\n220\n1\n230\n0\n",
        "0\nCIRCLE\n8\n0\n10\n0\n20\n0\n40\n0\n",
        "0\nINSERT\n8\n0\n2\nGONE\n10\n0\n20\n0\n",
        "0\nSPLINE\n8\n0\n71\n3\n11\n0\n21\n0\n11\n1\n21\n1\n",
    ] {
        let text = with_entities(&(frame.to_owned() + missed));
        let words = said(&from_text("m.dxf", &text, &mm()).unwrap_err());
        assert!(words.contains("cannot be read") && words.contains("--skip unread"), "{words}");
        let skip = Options { skip_unread: true, ..mm() };
        let imported = from_text("m.dxf", &text, &skip).unwrap();
        assert_eq!(imported.report.skipped.len(), 1, "{missed}");
        assert!(imported.text.contains("# skipped: 1 "), "{}", imported.text);
    }
    let text = with_entities(&(frame.to_owned() + "0\nTEXT\n8\n0\n1\nhull\n0\nPOINT\n8\n0\n10\n0\n20\n0\n"));
    let imported = from_text("m.dxf", &text, &mm()).unwrap();
    let skipped: Vec<_> = imported.report.skipped.iter().map(|skipped| skipped.kind.as_str()).collect();
    assert_eq!(skipped, ["POINT", "TEXT"]);
}

/// Layers: chosen by name whatever its capitals; hidden ones are not read, and the report says why.
#[test]
fn layers_are_chosen() {
    let pick = |layers: &[&str]| Options {
        layers: layers.iter().map(|&layer| layer.to_owned()).collect(),
        pick: Some(1),
        ..Options::default()
    };
    let imported = imported("layers_ft.dxf", &pick(&["Cut"]));
    let why = |name: &str| {
        let layer = imported.report.layers.iter().find(|layer| layer.name == name).unwrap();
        layer.why.clone().unwrap_or_default()
    };
    assert_eq!((why("CUT").as_str(), why("0").as_str()), ("", "not chosen"));
    let all = drawing::read(&reference("layers_ft.dxf"), &pick(&[])).unwrap();
    let reasons: Vec<_> = all.report.skipped.iter().map(|skipped| skipped.why.as_str()).collect();
    for reason in ["its layer is off", "its layer is frozen", "it is invisible", "it is on the paper, not in the model"]
    {
        assert!(reasons.contains(&reason), "{reason}: {reasons:?}");
    }
    let refusal = drawing::read(&reference("layers_ft.dxf"), &pick(&["KEEL"])).unwrap_err();
    assert!(said(&refusal).contains("there is no layer \"KEEL\""), "{refusal}");
}

/// Several parts: never the first without a word.
#[test]
fn several_parts_are_listed() {
    let refusal = drawing::read(&reference("nested.dxf"), &mm()).unwrap_err();
    let Refusal::NeedsPick(report) = &refusal else { panic!("{refusal}") };
    assert_eq!(report.parts.iter().map(|part| (part.number, part.holes)).collect::<Vec<_>>(), [(1, 1), (2, 1), (3, 0)]);
    assert!(said(&refusal).contains("--pick"));
    for pick in [0, 4] {
        let options = Options { pick: Some(pick), ..mm() };
        let refusal = drawing::read(&reference("nested.dxf"), &options).unwrap_err();
        assert!(said(&refusal).contains(&format!("there is no part {pick}")), "{refusal}");
    }
}

/// Cleaning: a square with a vertex in the middle of each side and one corner cut by a short edge.
#[test]
fn cleaning_is_done_on_request_and_reported() {
    let corners = [(0.0, 0.0), (20.0, 0.004), (40.0, 0.0), (40.0, 20.0), (40.0, 39.98), (39.98, 40.0), (0.0, 40.0)];
    let body: String = (0..corners.len())
        .map(|i| {
            let ((x, y), (u, v)) = (corners[i], corners[(i + 1) % corners.len()]);
            line(x, y, u, v)
        })
        .collect();
    let text = with_entities(&body);
    let plain = from_text("s.dxf", &text, &mm()).unwrap();
    assert_eq!((plain.report.rings[0].edges, plain.report.cleaned), (7, None));
    let options = Options { merge_collinear_deg: Some(0.1), drop_shorter_mm: Some(0.05), ..mm() };
    let clean = from_text("s.dxf", &text, &options).unwrap();
    let cleaned = clean.report.cleaned.unwrap();
    assert_eq!((clean.report.rings[0].edges, cleaned.merged, cleaned.dropped), (4, 2, 1));
    let (before, after) = (plain.part.outline().region().area_mm2, clean.part.outline().region().area_mm2);
    assert_close(cleaned.area_gained_mm2, after - before, 1e-6, 1e-9);
    assert!(clean.text.contains("# cleaned: 2 vertices"), "{}", clean.text);
}

/// A fine regular polygon turns little at each vertex, and all round: it must not come to nothing.
#[test]
fn cleaning_does_not_unroll_a_curve() {
    let n = 720;
    let at = |i: usize| {
        let angle = TAU * i as f64 / n as f64;
        (100.0 * angle.cos(), 100.0 * angle.sin())
    };
    let body: String = (0..n).map(|i| line(at(i).0, at(i).1, at((i + 1) % n).0, at((i + 1) % n).1)).collect();
    let options = Options { merge_collinear_deg: Some(3.0), ..mm() };
    let imported = from_text("c.dxf", &with_entities(&body), &options).unwrap();
    // Within 3 degrees: vertices no farther apart than 7 of the old ones, so a sagitta below r (1 - cos 1.75 degrees).
    let edges = imported.report.rings[0].edges;
    assert!((n / 7..n / 2).contains(&edges), "{edges}");
    assert_close(imported.part.outline().region().area_mm2, PI * 1e4, 1e-3, 0.0);
}

/// Chords on request: within the sagitta, area below the disc's and above that of the disc less the sagitta all round.
#[test]
fn chords_on_request() {
    let text = entities(&[(0, "CIRCLE"), (10, "0"), (20, "0"), (40, "10")]);
    let options = Options { chords: true, sagitta_mm: Some(0.01), ..mm() };
    let imported = from_text("c.dxf", &text, &options).unwrap();
    let area = imported.part.outline().region().area_mm2;
    assert!(area < PI * 100.0 && area > PI * (10.0 - 0.01_f64).powi(2), "{area}");
    assert!(!imported.text.contains("[[arc]]"));
    // n chords have a sagitta of r (1 - cos(pi / n)): 71 for this one, and an even number of them.
    assert_eq!(imported.report.rings[0].edges, 72);
}
