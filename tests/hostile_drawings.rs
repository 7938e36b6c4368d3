//! Drawings nobody would make on purpose: a clear refusal or the right part, in time, without a panic, nothing of the file
//! printed raw.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]
#![allow(clippy::float_cmp, reason = "what is exact must come out digit for digit")]

use holdwright::file::drawing::{self, Imported, Options, Refusal, unit_named};
use proptest::prelude::*;
use std::fmt::Write;
use std::path::Path;
use std::time::{Duration, Instant};

/// Beyond this a reader hangs, however busy the machine: it says nothing of speed.
const LONGEST: Duration = Duration::from_secs(180);

fn mm() -> Options {
    Options { units: unit_named("mm"), ..Options::default() }
}

/// Everything said about a drawing must be in words and fit for a terminal.
#[track_caller]
fn proper(lines: &[String]) {
    assert!(!lines.is_empty() && lines.len() < 200, "{lines:?}");
    for line in lines {
        assert!(!line.trim().is_empty() && !line.contains(char::is_control), "{line:?}");
        assert!(line.chars().count() < 1000, "{line:?}");
        assert!(!line.contains("stumble"), "a panic inside: {line}");
    }
}

#[track_caller]
fn read_as(name: &str, bytes: &[u8], options: &Options) -> Result<Imported, String> {
    let path = Path::new(name);
    let start = Instant::now();
    let read = drawing::read_bytes(path, bytes, options, &mut |_, _, _| {});
    let took = start.elapsed();
    assert!(took < LONGEST, "{took:?}");
    match read {
        Ok(imported) => {
            proper(&imported.report.lines());
            let (again, _) = holdwright::file::part_from_text(path, &imported.text).unwrap();
            assert_eq!(holdwright::file::part_digest(&imported.part), holdwright::file::part_digest(&again));
            Ok(imported)
        }
        Err(refusal) => {
            let lines = refusal.lines(path);
            proper(&lines);
            if let Refusal::NeedsPick(report) = refusal {
                proper(&report.lines());
            }
            Err(lines.join("\n"))
        }
    }
}

#[track_caller]
fn refused(name: &str, bytes: impl AsRef<[u8]>, word: &str) {
    let said = read_as(name, bytes.as_ref(), &mm()).unwrap_err();
    assert!(said.contains(word), "\"{word}\" is not in: {said}");
}

fn dxf(blocks: &str, entities: &str) -> String {
    format!("0\nSECTION\n2\nBLOCKS\n{blocks}0\nENDSEC\n0\nSECTION\n2\nENTITIES\n{entities}0\nENDSEC\n0\nEOF\n")
}

fn block(name: &str, entities: &str) -> String {
    format!("0\nBLOCK\n2\n{name}\n70\n0\n10\n0\n20\n0\n{entities}0\nENDBLK\n")
}

fn insert(name: &str, more: &str) -> String {
    format!("0\nINSERT\n8\n0\n2\n{name}\n10\n0\n20\n0\n{more}")
}

fn circle(x: f64, r: f64) -> String {
    format!("0\nCIRCLE\n8\n0\n10\n{x}\n20\n0\n40\n{r}\n")
}

fn svg(body: &str) -> String {
    format!(
        "<svg xmlns='http://www.w3.org/2000/svg' xmlns:xlink='http://www.w3.org/1999/xlink' width='100mm' height='100mm' \
         viewBox='0 0 100 100'>{body}</svg>"
    )
}

#[test]
fn blocks_inside_themselves() {
    refused("x.dxf", dxf(&block("A", &insert("A", "")), &insert("A", "")), "inside itself");
    let ring = block("A", &insert("B", "")) + &block("B", &insert("c", "")) + &block("C", &insert("a", ""));
    refused("x.dxf", dxf(&ring, &insert("B", "")), "inside itself");
    // The ring is harmless where nothing leads into it.
    read_as("x.dxf", dxf(&ring, &circle(0.0, 1.0)).as_bytes(), &mm()).unwrap();
}

#[test]
fn blocks_that_explode() {
    // Ten to the tenth circles, and as many of nothing at all.
    for inner in [circle(0.0, 1.0), String::new()] {
        let mut blocks = block("B0", &inner);
        for level in 1..=10 {
            blocks += &block(&format!("B{level}"), &insert(&format!("B{}", level - 1), "").repeat(10));
        }
        refused("x.dxf", dxf(&blocks, &insert("B10", "")), "more than 1000000");
    }
    let array = insert("B0", "70\n32767\n71\n32767\n44\n3\n45\n3\n");
    refused("x.dxf", dxf(&block("B0", &circle(0.0, 1.0)), &array), "more than 1000000");
    let mut deep = block("B0", &circle(0.0, 1.0));
    for level in 1..1000 {
        deep += &block(&format!("B{level}"), &insert(&format!("B{}", level - 1), ""));
    }
    refused("x.dxf", dxf(&deep, &insert("B999", "")), "nested deeper");
}

#[test]
fn numbers_that_are_none() {
    for (value, word) in [
        ("1e999", "not a number the drawing can mean"),
        ("-1e999", "not a number the drawing can mean"),
        ("NaN", "not a number the drawing can mean"),
        ("inf", "not a number the drawing can mean"),
        ("10,5", "decimal points, not commas"),
        ("", "is no number"),
        ("0x10", "is no number"),
        ("\u{1b}[31m", "is no number"),
        ("1e300", "beyond any drawing"),
        ("1e10", "farther than 1e9 mm"),
    ] {
        refused("x.dxf", dxf("", &format!("0\nCIRCLE\n8\n0\n10\n{value}\n20\n0\n40\n3\n")), word);
    }
    for value in ["1e999", "NaN", "1e300", "10,5.", "&#27;"] {
        let said = read_as("x.svg", svg(&format!("<circle cx='50' cy='50' r='{value}'/>")).as_bytes(), &mm());
        assert!(said.is_err(), "{value}");
        let path = svg(&format!("<path d='M0 0 L 10 {value} L 0 10 Z'/>"));
        let _ = read_as("x.svg", path.as_bytes(), &mm());
    }
}

#[test]
fn cut_short_at_every_place() {
    let whole = dxf(&block("B", &circle(0.0, 2.0)), &(insert("B", "") + &circle(0.0, 9.0)));
    let right = read_as("x.dxf", whole.as_bytes(), &mm()).unwrap();
    let mut accepted = 0;
    for end in 0..whole.len() {
        if let Ok(imported) = read_as("x.dxf", &whole.as_bytes()[..end], &mm()) {
            // Only the end mark is lacking.
            assert_eq!(imported.report.rings.len(), right.report.rings.len(), "cut at {end}");
            accepted += 1;
        }
    }
    assert!(accepted < 12, "{accepted}");
    let whole = svg("<circle cx='50' cy='50' r='20'/>");
    for end in 0..whole.len() {
        assert!(read_as("x.svg", &whole.as_bytes()[..end], &mm()).is_err());
    }
    let binary =
        std::fs::read(Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/reference/drawings/random_02_light_R2004.dxf"));
    let binary = binary.unwrap();
    assert!(binary.starts_with(b"AutoCAD Binary DXF"));
    for end in (0..binary.len()).step_by(97) {
        if let Ok(imported) = read_as("x.dxf", &binary[..end], &mm()) {
            assert!(imported.report.notes.iter().any(|note| note.contains("no end mark")), "cut at {end}");
        }
    }
}

#[test]
fn other_files() {
    refused("x.dxf", "", "the file is empty");
    refused("x.svg", " \n\n", "the file is empty");
    refused("x.dxf", "AC1027\0\0\0", "DWG");
    refused("x.dxf", "AutoCAD DXB 1.0\r\n\x1a\0", "DXB");
    refused("x.svg", [0x1f, 0x8b, 8, 0], "unpack it");
    refused("x.dxf", "%PDF-1.7\n", "PDF");
    refused("x.dxf", "hello\nworld\n", "is this a DXF file?");
    refused("x.dxf", "0\nhello\n", "a section must begin");
    refused("x.dxf", "999\nonly a remark\n", "no section");
    refused("x.svg", "<html><body/></html>", "not svg");
    refused("x.dxf", [0u8; 4096], "is this a DXF file?");
    refused("x.svg", "<svg", "not sound XML");
    refused("x.svg", b"<?xml version='1.0' encoding='us-ascii'?><svg>\xff\xfe</svg>", "not");
    refused("x.svg", b"<svg>\xff</svg>", "not sound UTF-8");
}

#[test]
fn entities_of_xml() {
    let laughs: String = (1..12).fold(String::from("<!ENTITY a0 'ha'>"), |text, i| {
        text + &format!("<!ENTITY a{i} '{}'>", format!("&a{};", i - 1).repeat(10))
    });
    refused("x.svg", format!("<!DOCTYPE svg [{laughs}]><svg>&a11;</svg>"), "entities of its own");
    refused("x.svg", "<!DOCTYPE svg [<!ENTITY x SYSTEM 'file:///etc/passwd'>]><svg>&x;</svg>", "entities of its own");
    // A document type without any is what old programs write.
    let typed = format!(
        "<?xml version='1.0'?><!DOCTYPE svg PUBLIC '-//W3C//DTD SVG 1.1//EN' \
         'http://www.w3.org/Graphics/SVG/1.1/DTD/svg11.dtd'>{}",
        svg("<circle cx='50' cy='50' r='20'/>")
    );
    read_as("x.svg", typed.as_bytes(), &Options::default()).unwrap();
}

#[test]
fn groups_nested_deep_and_uses_that_explode() {
    let depth = 200_000;
    let deep = svg(&format!("{}<circle cx='50' cy='50' r='20'/>{}", "<g>".repeat(depth), "</g>".repeat(depth)));
    read_as("x.svg", deep.as_bytes(), &mm()).unwrap();
    let mut uses = String::from("<g id='u0'><circle r='1'/></g>");
    for level in 1..=10 {
        let below = format!("<use href='#u{}' x='{level}'/>", level - 1);
        let _ = write!(uses, "<g id='u{level}'>{}</g>", below.repeat(10));
    }
    refused("x.svg", svg(&format!("<defs>{uses}</defs><use href='#u10'/>")), "more than 1000000");
    refused("x.svg", svg("<g id='a'><use href='#b'/></g><g id='b'><use xlink:href='#a'/></g>"), "shows itself");
    refused("x.svg", svg("<use href='#a' id='a'/>"), "shows itself");
    refused("x.svg", svg("<use href='other.svg#a'/>"), "nothing");
    refused("x.svg", svg("<use href='http://127.0.0.1/a.svg#a'/>"), "nothing");
}

#[test]
fn trees_that_would_take_long() {
    let attributes: String = (0..300_000).fold(String::new(), |text, i| text + &format!(" a{i}=''"));
    refused("x.svg", format!("<svg{attributes}/>"), "more attributes");
    let spaces: String = (0..60_000).fold(String::new(), |text, i| text + &format!("<g xmlns:n{i}='u{i}'>"));
    refused("x.svg", format!("<svg>{spaces}"), "more name spaces");
    refused("x.svg", svg(&"<g/>".repeat(2_000_000)), "more than 1500000 elements");
}

#[test]
fn two_hundred_thousand_vertices() {
    let n = 200_000;
    let at = |i: usize| {
        let angle = std::f64::consts::TAU * i as f64 / n as f64;
        (1000.0 * angle.cos(), 1000.0 * angle.sin())
    };
    let mut light = format!("0\nLWPOLYLINE\n8\n0\n90\n{n}\n70\n1\n");
    let mut heavy = String::from("0\nPOLYLINE\n8\n0\n66\n1\n70\n1\n");
    let mut data = String::from("M");
    for (x, y) in (0..n).map(at) {
        let _ = write!(light, "10\n{x}\n20\n{y}\n");
        let _ = write!(heavy, "0\nVERTEX\n8\n0\n10\n{x}\n20\n{y}\n30\n0\n");
        let _ = write!(data, "{x} {y} ");
    }
    heavy += "0\nSEQEND\n8\n0\n";
    let path = svg(&format!("<path d='{data}z'/>"));
    for (name, text) in [("light.dxf", dxf("", &light)), ("heavy.dxf", dxf("", &heavy)), ("path.svg", path)] {
        let imported = read_as(name, text.as_bytes(), &mm()).unwrap();
        assert_eq!(imported.report.rings[0].edges, n, "{name}");
    }
}

/// Crowds that a search by pairs would take hours for: one centre, one line, two points, one box for all, a far outlier.
#[test]
fn crowds() {
    let n = 60_000;
    let many = |one: &dyn Fn(f64) -> String| dxf("", &(0..n).map(|i| one(f64::from(i))).collect::<String>());
    let line = |x: f64, y: f64, u: f64, v: f64| format!("0\nLINE\n8\n0\n10\n{x}\n20\n{y}\n11\n{u}\n21\n{v}\n");
    refused("centre.dxf", many(&|i| circle(0.0, 1e4 + i)), "deep");
    let spokes = many(&|i| {
        let angle = i / f64::from(n) * std::f64::consts::PI;
        line(angle.cos(), angle.sin(), -angle.cos(), -angle.sin())
    });
    refused("spokes.dxf", spokes, "do not close");
    refused("star.dxf", many(&|i| line(0.0, 0.0, i, 1.0)), "lines meet at (0, 0)");
    refused("copies.dxf", many(&|_| line(0.0, 0.0, 1.0, 1.0)), "do not close");
    let arcs = many(&|i| {
        let bulge = i / f64::from(n);
        format!("0\nLWPOLYLINE\n8\n0\n90\n2\n70\n0\n10\n0\n20\n0\n42\n{bulge}\n10\n1\n20\n0\n")
    });
    refused("arcs.dxf", arcs, "lines meet at (0, 0)");
    let slots = many(&|i| {
        let (x, y) = (i, 1e5 + i);
        format!(
            "0\nLWPOLYLINE\n8\n0\n90\n3\n70\n1\n10\n{i}\n20\n{}\n10\n{x}\n20\n{y}\n10\n{}\n20\n{}\n",
            -1e5 - i,
            x + 0.3,
            y
        )
    });
    let _ = read_as("slots.dxf", slots.as_bytes(), &mm());
    // The default tolerance, a part of the drawing's size, is wider than everything but the outlier.
    let outlier = many(&|i| line(i % 300.0, (i / 300.0).floor(), i % 300.0 + 0.4, (i / 300.0).floor()));
    let outlier = outlier.replace("0\nENDSEC\n0\nEOF", &(circle(1e8, 1.0) + "0\nENDSEC\n0\nEOF"));
    let _ = read_as("outlier.dxf", outlier.as_bytes(), &mm());
}

/// A plate with as many vertices as holes: the search for what is inside must not look at every edge for every hole.
#[test]
fn many_holes_in_a_long_outline() {
    let n = 100_000;
    let mut body = format!("0\nLWPOLYLINE\n8\n0\n90\n{n}\n70\n1\n");
    for i in 0..n {
        let angle = std::f64::consts::TAU * f64::from(i) / f64::from(n);
        let _ = write!(body, "10\n{}\n20\n{}\n", 1000.0 * angle.cos(), 1000.0 * angle.sin());
    }
    for i in 0..10_000 {
        let _ = write!(body, "0\nCIRCLE\n8\n0\n10\n{}\n20\n{}\n40\n3\n", i % 100 * 10 - 500, i / 100 * 10 - 500);
    }
    let imported = read_as("x.dxf", dxf("", &body).as_bytes(), &mm()).unwrap();
    assert_eq!(imported.report.rings.len(), 10_001);
}

/// Entities drawn from behind are mirrored (arbitrary axis algorithm of the DXF reference); other planes are refused.
#[test]
fn odd_planes() {
    let plane = |x: &str, y: &str, z: &str| {
        dxf("", &format!("0\nCIRCLE\n8\n0\n10\n5\n20\n1\n40\n3\n210\n{x}\n220\n{y}\n230\n{z}\n"))
    };
    let behind = read_as("x.dxf", plane("0", "0", "-1").as_bytes(), &mm()).unwrap();
    assert_eq!(behind.report.parts[0].at, [-8.0, -2.0]);
    let front = read_as("x.dxf", plane("0", "0", "2").as_bytes(), &mm()).unwrap();
    assert_eq!(front.report.parts[0].at, [2.0, -2.0]);
    for (x, y, z) in [("0", "1", "0"), ("0.1", "0", "1"), ("0", "0", "0"), ("1", "1", "-1")] {
        refused("x.dxf", plane(x, y, z), "tilted plane");
    }
}

/// Names in old code pages, in UTF-8 and as \U+XXXX are the same name (DXF reference, $DWGCODEPAGE; Unicode).
#[test]
fn code_pages() {
    let file = |head: &str, name: &[u8]| {
        let mut bytes =
            format!("0\nSECTION\n2\nHEADER\n{head}0\nENDSEC\n0\nSECTION\n2\nENTITIES\n0\nCIRCLE\n8\n").into_bytes();
        bytes.extend(name);
        bytes.extend(b"\n10\n0\n20\n0\n40\n5\n0\nENDSEC\n0\nEOF\n");
        bytes
    };
    let options = Options { layers: vec!["RYŚ".to_owned()], ..mm() };
    for (head, name) in [
        ("9\n$ACADVER\n1\nAC1015\n9\n$DWGCODEPAGE\n3\nANSI_1250\n", &b"RY\x8c"[..]),
        ("9\n$ACADVER\n1\nAC1027\n9\n$DWGCODEPAGE\n3\nANSI_1252\n", "ryś".as_bytes()),
        ("9\n$ACADVER\n1\nAC1015\n", b"RY\\U+015A"),
        ("9\n$ACADVER\n1\nAC1015\n9\n$DWGCODEPAGE\n3\nDOS852\n", b"RY\\U+015a"),
    ] {
        read_as("x.dxf", &file(head, name), &options).unwrap();
    }
    // Bytes that are nothing in the encoding become a mark, never a fault of the outline.
    read_as("x.dxf", &file("9\n$ACADVER\n1\nAC1027\n", b"\xff\xfe\x80"), &mm()).unwrap();
    read_as("x.dxf", &file("9\n$DWGCODEPAGE\n3\nANSI_932\n", b"\x81"), &mm()).unwrap();
}

/// Colours and titles of a terminal, and marks that turn writing round, in every name a drawing has.
#[test]
fn nothing_is_printed_raw() {
    let bad = "a\u{1b}[31m\u{202e}\u{7}b";
    let text = dxf(
        "",
        &format!(
            "0\nCIRCLE\n5\n{bad}\n8\n{bad}\n10\n0\n20\n0\n40\n5\n0\n{bad}\n8\n{bad}\n0\nINSERT\n8\n{bad}\n2\n{bad}\n10\n0\n20\n0\n"
        ),
    );
    let options = Options { skip_unread: true, ..mm() };
    assert!(read_as("x.dxf", text.as_bytes(), &mm()).is_err());
    let imported = read_as("x.dxf", text.as_bytes(), &options).unwrap();
    assert!(!imported.text.contains('\u{1b}') && !imported.text.contains('\u{202e}'));
    let words = "a&#x202e;b";
    read_as(
        "x.svg",
        svg(&format!("<g id='{words}'><path id='{words}' d='M0 0h1v1z'/></g><{words}/>")).as_bytes(),
        &mm(),
    )
    .unwrap_err();
    let named = svg(&format!("<g id='{words}'><path id='{words}' d='M0 0h10v10z'/><wave id='{words}'/></g>"));
    let imported = read_as("x.svg", named.as_bytes(), &options).unwrap();
    assert!(!imported.text.contains('\u{202e}'));
}

/// Loops that share an edge, cross, touch at a point, or run back on themselves: never a part.
#[test]
fn outlines_that_are_none() {
    let square = |x: f64, y: f64, s: f64| {
        format!(
            "0\nLWPOLYLINE\n8\n0\n90\n4\n70\n1\n10\n{x}\n20\n{y}\n10\n{}\n20\n{y}\n10\n{}\n20\n{}\n10\n{x}\n20\n{}\n",
            x + s,
            x + s,
            y + s,
            y + s
        )
    };
    for (second, word) in [
        (square(10.0, 0.0, 10.0), "touches"),
        (square(5.0, 5.0, 10.0), "crosses"),
        (square(10.0, 10.0, 3.0), "touches"),
        (square(0.0, 2.0, 3.0), "touches"),
    ] {
        let options = Options { pick: Some(1), ..mm() };
        let said = read_as("x.dxf", dxf("", &(square(0.0, 0.0, 10.0) + &second)).as_bytes(), &options).unwrap_err();
        assert!(said.contains(word), "{said}");
    }
    let spike =
        "0\nLWPOLYLINE\n8\n0\n90\n5\n70\n1\n10\n0\n20\n0\n10\n9\n20\n0\n10\n9\n20\n9\n10\n9\n20\n20\n10\n9\n20\n9\n";
    refused("x.dxf", dxf("", spike), "at (9");
    refused("x.dxf", dxf("", "0\nLWPOLYLINE\n8\n0\n90\n2\n70\n1\n10\n0\n20\n0\n10\n9\n20\n0\n"), "distinct vertices");
    refused("x.dxf", dxf("", "0\nPOINT\n8\n0\n10\n0\n20\n0\n"), "nothing in it can be read");
    refused("x.dxf", dxf("", ""), "nothing drawn");
}

/// Splines with every part of them wrong.
#[test]
fn splines_that_are_none() {
    let spline = |degree: &str, knots: &[&str], points: usize, weights: &[&str]| {
        let mut text = format!("0\nSPLINE\n8\n0\n71\n{degree}\n");
        knots.iter().for_each(|knot| text += &format!("40\n{knot}\n"));
        weights.iter().for_each(|weight| text += &format!("41\n{weight}\n"));
        (0..points).for_each(|i| text += &format!("10\n{}\n20\n{}\n", i * i, i));
        dxf("", &text)
    };
    let good = ["0", "0", "0", "1", "1", "1"];
    refused("x.dxf", spline("2", &good, 3, &[]), "do not close");
    refused("x.dxf", spline("0", &good, 3, &[]), "degree");
    refused("x.dxf", spline("99999999999999999999", &good, 3, &[]), "whole number");
    refused("x.dxf", spline("-2", &good, 3, &[]), "degree");
    refused("x.dxf", spline("26", &good, 3, &[]), "degree");
    refused("x.dxf", spline("2", &good[1..], 3, &[]), "knots");
    refused("x.dxf", spline("2", &["0", "0", "1", "0", "1", "1"], 3, &[]), "knots fall");
    refused("x.dxf", spline("2", &["0"; 6], 3, &[]), "all its knots are alike");
    refused("x.dxf", spline("2", &good, 2, &[]), "too few");
    refused("x.dxf", spline("2", &good, 3, &["1", "1"]), "weights");
    refused("x.dxf", spline("2", &good, 3, &["1", "0", "1"]), "not above 0");
    refused("x.dxf", spline("2", &good, 3, &["1", "-1", "1"]), "not above 0");
}

/// Curves with cusps, loops, straight stretches and control points on one another, closed by a line.
#[test]
fn curves_with_cusps() {
    for data in [
        "M10 10C90 90 10 90 90 10Z",
        "M10 10C10 10 90 10 50 60Z",
        "M10 10C50 60 50 60 90 10Z",
        "M10 10Q50 60 10 60Z",
        "M10 10C10 10 10 10 90 10L50 50Z",
        "M10 10C40 10 60 10 90 10L50 50Z",
        "M10 10C10 60 90 60 90 10C90 10 90 10 90 10Z",
        "M10 10A40 1e-9 0 0 0 90 10L50 90Z",
        "M10 10A1e-300 1e-300 0 0 0 90 10Z",
        "M10 10A1e300 1e300 0 0 0 90 10L50 90Z",
        "M10 10a0.001 0.001 0 1 1 80 0z",
    ] {
        if let Err(said) = read_as("x.svg", svg(&format!("<path d='{data}'/>")).as_bytes(), &mm()) {
            println!("{data}: {said}");
        }
    }
    // A curve that runs back on itself encloses nothing.
    refused("x.svg", svg("<path d='M10 10C90 10 10 10 50 10Z'/>"), "x.svg");
    // One that crosses itself is no outline.
    refused("x.svg", svg("<path d='M10 10C140 90 -40 90 90 10Z'/>"), "crosses");
}

/// One entity of a list that may be anything.
fn any_entity() -> impl Strategy<Value = String> {
    let number = prop_oneof![
        (-100i32..100).prop_map(|n| n.to_string()),
        (-1e3..1e3).prop_map(|n: f64| n.to_string()),
        Just("1e-300".to_owned()),
        Just("1e12".to_owned()),
        Just("x".to_owned()),
    ];
    let kind = prop::sample::select(vec![
        "LINE",
        "ARC",
        "CIRCLE",
        "ELLIPSE",
        "LWPOLYLINE",
        "POLYLINE",
        "VERTEX",
        "SEQEND",
        "SPLINE",
        "INSERT",
        "TEXT",
        "HATCH",
        "SOLID",
        "REGION",
    ]);
    let code = prop::sample::select(vec![
        8, 10, 20, 30, 11, 21, 31, 40, 41, 42, 50, 51, 60, 62, 66, 67, 70, 71, 72, 73, 74, 90, 210, 220, 230, 2, 5, 100,
    ]);
    (kind, prop::collection::vec((code, number), 0..20)).prop_map(|(kind, pairs)| {
        let mut text = format!("0\n{kind}\n");
        for (code, number) in pairs {
            // Handles, names and the like take any text.
            let _ = write!(text, "{code}\n{number}\n");
        }
        text
    })
}

/// Sound entities about a few places, so that ends meet, loops close, cross and repeat.
fn sound_entity() -> impl Strategy<Value = String> {
    let at = || (0i32..6, 0i32..6);
    prop_oneof![
        (at(), at()).prop_map(|((x, y), (u, v))| format!("0\nLINE\n8\n0\n10\n{x}\n20\n{y}\n11\n{u}\n21\n{v}\n")),
        (at(), 1i32..4).prop_map(|((x, y), r)| format!("0\nCIRCLE\n8\n0\n10\n{x}\n20\n{y}\n40\n{r}\n")),
        (at(), 1i32..4, 0i32..4, 0i32..4).prop_map(|((x, y), r, a, b)| {
            format!("0\nARC\n8\n0\n10\n{x}\n20\n{y}\n40\n{r}\n50\n{}\n51\n{}\n", 90 * a, 90 * b)
        }),
        (prop::collection::vec((at(), -2i32..3), 0..7), 0..2).prop_map(|(vertices, closed)| {
            let mut text = format!("0\nLWPOLYLINE\n8\n0\n90\n{}\n70\n{closed}\n", vertices.len());
            for ((x, y), bulge) in vertices {
                let _ = write!(text, "10\n{x}\n20\n{y}\n42\n{}\n", f64::from(bulge) / 2.0);
            }
            text
        }),
        (at(), at(), 1i32..9).prop_map(|((x, y), (u, v), r)| {
            format!("0\nELLIPSE\n8\n0\n10\n{x}\n20\n{y}\n11\n{u}\n21\n{v}\n40\n{}\n", f64::from(r) / 5.0)
        }),
        (at(), -2i32..3, -2i32..3, -180i32..180).prop_map(|((x, y), sx, sy, turn)| {
            format!("0\nINSERT\n8\n0\n2\nB\n10\n{x}\n20\n{y}\n41\n{sx}\n42\n{sy}\n50\n{turn}\n")
        }),
        prop::collection::vec(at(), 4..9).prop_map(|points| {
            let n = points.len();
            let mut text = String::from("0\nSPLINE\n8\n0\n71\n3\n");
            (0..n + 4).for_each(|i| text += &format!("40\n{}\n", i.saturating_sub(3).min(n - 3)));
            points.iter().for_each(|(x, y)| text += &format!("10\n{x}\n20\n{y}\n"));
            text
        }),
    ]
}

/// A path segment or an element that may be anything.
fn any_svg() -> impl Strategy<Value = String> {
    let number = prop_oneof![(-50i32..50).prop_map(|n| n.to_string()), (-1e3..1e3).prop_map(|n: f64| n.to_string())];
    let command = prop::sample::select("MmLlHhVvCcSsQqTtAaZz".chars().collect::<Vec<_>>());
    let data = prop::collection::vec((command, prop::collection::vec(number, 0..8)), 0..8).prop_map(|segments| {
        segments.iter().fold(String::from("M0 0"), |text, (c, n)| text + &format!("{c}{}", n.join(" ")))
    });
    let transform = prop::sample::select(vec![
        "",
        "scale(2)",
        "scale(0)",
        "scale(-1 2)",
        "rotate(33)",
        "skewX(90)",
        "matrix(1 2 3 4 5 6)",
        "matrix(1 2 2 4 0 0)",
        "translate(3)",
        "rotate(",
        "scale(1e200)",
    ]);
    (data, transform, 0..4usize).prop_map(|(data, transform, kind)| match kind {
        0 | 1 => format!("<path transform='{transform}' d='{data}'/>"),
        2 => format!("<g transform='{transform}'><rect width='9' height='7' rx='2'/><path d='{data}'/></g>"),
        _ => format!("<polygon transform='{transform}' points='{}'/>", data.replace(|c: char| c.is_alphabetic(), " ")),
    })
}

/// How many random drawings of each kind: few in the tests, more when asked.
fn cases() -> u32 {
    std::env::var("HOLDWRIGHT_CASES").ok().and_then(|cases| cases.parse().ok()).unwrap_or(300)
}

fn try_all(name: &str, bytes: &[u8]) {
    let _ = read_as(name, bytes, &Options::default());
    let wide = Options {
        pick: Some(1),
        join_mm: Some(0.3),
        skip_open: true,
        skip_unread: true,
        merge_collinear_deg: Some(5.0),
        drop_shorter_mm: Some(0.5),
        ..mm()
    };
    let _ = read_as(name, bytes, &wide);
    let chords = Options { pick: Some(1), chords: true, sagitta_mm: Some(0.1), skip_open: true, ..mm() };
    let _ = read_as(name, bytes, &chords);
}

proptest! {
    #![proptest_config(ProptestConfig { cases: cases(), ..ProptestConfig::default() })]

    #[test]
    fn any_bytes(bytes in prop::collection::vec(any::<u8>(), 0..400)) {
        try_all("x.dxf", &bytes);
        try_all("x.svg", &bytes);
        let binary: Vec<u8> = b"AutoCAD Binary DXF\r\n\x1a\0\0\0SECTION\0\x02\0ENTITIES\0".iter().copied().chain(bytes).collect();
        try_all("x.dxf", &binary);
    }

    #[test]
    fn any_changed_byte(at in any::<prop::sample::Index>(), byte in any::<u8>(), which in 0..3usize) {
        let name = ["blocks.dxf", "random_08_loose_R2000.dxf", "shapes.svg"][which];
        let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/reference/drawings").join(name);
        let mut bytes = std::fs::read(path).unwrap();
        let at = at.index(bytes.len());
        bytes[at] = byte;
        try_all(name, &bytes);
    }

    #[test]
    fn any_entities(list in prop::collection::vec(any_entity(), 0..12)) {
        try_all("x.dxf", dxf("", &list.concat()).as_bytes());
    }

    #[test]
    fn any_sound_entities(inner in prop::collection::vec(sound_entity(), 0..3), list in prop::collection::vec(sound_entity(), 0..14)) {
        let inner: String = inner.into_iter().filter(|entity| !entity.contains("INSERT")).collect();
        try_all("x.dxf", dxf(&block("B", &inner), &list.concat()).as_bytes());
    }

    #[test]
    fn any_elements(list in prop::collection::vec(any_svg(), 0..6)) {
        try_all("x.svg", svg(&list.concat()).as_bytes());
    }
}
