//! The printed sheet: well-formed, its numbers those of `score --json`, inert whatever files hold, one page a grasp.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]
#![allow(clippy::float_cmp, reason = "numbers are carried over in full, not worked out again")]

mod common;
mod shell;

use common::assert_close;
use holdwright::file::{self, Keep};
use holdwright::part::Part;
use holdwright::search::{Cancel, Key, Listing, Scene, Setup, Spot, sample};
use roxmltree::{Document, Node, ParsingOptions};
use serde_json::Value;
use shell::{command, complaints, err, json, out};
use std::io::Write;
use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};
use std::sync::Arc;
use std::time::{Duration, Instant};

fn parts() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("parts")
}

/// Parses what must be XML as well as HTML.
#[track_caller]
fn parsed(text: &str) -> Document<'_> {
    Document::parse_with_options(text, ParsingOptions { allow_dtd: true, ..ParsingOptions::default() })
        .unwrap_or_else(|fault| panic!("{fault}"))
}

/// Elements of a class, in the order of the document.
fn of_class<'a>(doc: &'a Document<'_>, class: &str) -> Vec<Node<'a, 'a>> {
    let has = |node: &Node<'_, '_>| node.attribute("class").is_some_and(|all| all.split(' ').any(|own| own == class));
    doc.descendants().filter(has).collect()
}

fn text_of(node: Node<'_, '_>) -> String {
    node.descendants().filter(Node::is_text).filter_map(|node| node.text()).collect()
}

/// Everything a reader sees or a program runs, without styles.
fn names_of_elements(doc: &Document<'_>) -> Vec<String> {
    let mut names: Vec<_> =
        doc.descendants().filter(Node::is_element).map(|node| node.tag_name().name().to_owned()).collect();
    names.sort();
    names.dedup();
    names
}

/// The best grasp of a part under a setup, found in a small sample.
fn best(part: &Arc<Part>, setup: &Setup) -> Option<Keep> {
    let mut quick = setup.clone();
    quick.search.budget = 20_000;
    let scene = Scene::new(part.clone(), quick).unwrap();
    let listed = sample(&scene, Key::Quality, Listing::Families, 1, &Cancel::default(), &|_| {}).unwrap().grasps;
    let spots = listed.first()?.grasp.spots.clone();
    Some(keep("best", part, setup, &spots))
}

fn keep(name: &str, part: &Arc<Part>, setup: &Setup, spots: &[Spot]) -> Keep {
    let scene = Scene::new(part.clone(), setup.clone()).unwrap();
    let grasp = scene.grasp(spots).unwrap();
    let (assessment, _) = scene.assess(&grasp);
    let setup = setup.clone();
    Keep { name: name.to_owned(), note: "kept".to_owned(), grasp, assessment, setup, density: None }
}

/// A part, a setup, and a file of its best grasp.
struct Kept {
    folder: tempfile::TempDir,
    part_path: PathBuf,
    setup_path: PathBuf,
    grasps: PathBuf,
    spots: Vec<Spot>,
}

fn kept(part_name: &str, setup_name: &str) -> Kept {
    let folder = tempfile::tempdir().unwrap();
    let part_path = parts().join(format!("{part_name}.toml"));
    let setup_path = parts().join(format!("{setup_name}.setup.toml"));
    let part = Arc::new(file::read_part(&part_path).unwrap());
    let keep = best(&part, &file::read_setup(&setup_path).unwrap()).unwrap();
    let grasps = folder.path().join("kept.grasps.toml");
    file::save(&grasps, &part_path, &part, std::slice::from_ref(&keep), None).unwrap();
    Kept { folder, part_path, setup_path, grasps, spots: keep.grasp.spots }
}

impl Kept {
    fn score(&self) -> Value {
        let one = |spot: &Spot| format!("{}:{}:{}", spot.edge.ring, spot.edge.edge, spot.along_mm);
        let at = self.spots.iter().map(one).collect::<Vec<_>>().join(",");
        let (part, setup) = (self.part_path.to_str().unwrap(), self.setup_path.to_str().unwrap());
        json(&command(&["score", part, "--setup", setup, "--at", &at, "--json"]).output().unwrap())
    }

    fn sheet(&self, more: &[&str]) -> std::process::Output {
        command(&["sheet", self.grasps.to_str().unwrap()]).args(more).output().unwrap()
    }
}

/// Full numbers in the elements of a class; the number a reader sees must be the same, rounded.
#[track_caller]
fn values(doc: &Document<'_>, class: &str) -> Vec<f64> {
    let one = |node: Node<'_, '_>| {
        let full: f64 = node.attribute("value").unwrap().parse().unwrap();
        let said = text_of(node);
        let seen: f64 = said.parse().unwrap();
        let (mantissa, power) = said.split_once('e').map_or((said.as_str(), 0), |(m, e)| (m, e.parse().unwrap()));
        let decimals = mantissa.split_once('.').map_or(0, |(_, tail)| tail.len() as i32);
        assert_close(seen, full, 0.0, 0.500_001 * 10_f64.powi(power - decimals));
        full
    };
    of_class(doc, class).into_iter().map(one).collect()
}

/// The sheet against the JSON of `score` for the same contacts: the one is made apart from the other.
#[test]
fn numbers_are_those_of_score() {
    for (part_name, setup_name) in [
        ("hinge_leaf", "deck_cell"),
        ("hinge_leaf", "two_jaw"),
        ("mast_collar_flange", "three_pin"),
        ("cleat_base", "two_jaw"),
    ] {
        let kept = kept(part_name, setup_name);
        let page = kept.sheet(&[]);
        assert_eq!(page.status.code(), Some(0), "{}", err(&page));
        let doc = parsed(out(&page));
        let score = kept.score();
        let grasp = &score["grasps"][0];
        for key in [
            "quality",
            "quality_per_finger",
            "friction_needed",
            "friction_margin",
            "placement_mm",
            "squeeze_n",
            "load_margin",
        ] {
            let want: Vec<f64> = grasp[key].as_f64().into_iter().collect();
            assert_eq!(values(&doc, key), want, "{part_name} {setup_name} {key}");
        }
        let all = |list: &Value, get: &dyn Fn(&Value) -> Option<f64>| -> Vec<f64> {
            list.as_array().unwrap().iter().filter_map(get).collect()
        };
        let contacts = &grasp["contacts"];
        assert_eq!(values(&doc, "along_mm"), all(contacts, &|c| c["along_mm"].as_f64()));
        assert_eq!(values(&doc, "mu"), all(contacts, &|c| c["mu"].as_f64()));
        for (i, key) in ["x_mm", "y_mm"].into_iter().enumerate() {
            assert_eq!(values(&doc, key), all(contacts, &|c| c["point_mm"][i].as_f64()), "{key}");
        }
        let angle = |c: &Value| Some(c["normal"][1].as_f64()?.atan2(c["normal"][0].as_f64()?).to_degrees());
        for (a, b) in values(&doc, "normal_deg").into_iter().zip(all(contacts, &angle)) {
            assert_close(a, b, 0.0, 1e-9);
        }
        for (key, own) in [("case_squeeze_n", "squeeze_n"), ("case_margin", "margin")] {
            assert_eq!(values(&doc, key), all(&grasp["loads"], &|load| load[own].as_f64()), "{key}");
        }
        let governing = grasp["loads"].as_array().unwrap().iter().find(|load| load["name"] == grasp["governing_load"]);
        for (key, own) in [("normal_n", "normal"), ("force_along_n", "along"), ("up_n", "up")] {
            assert_eq!(values(&doc, key), all(&governing.unwrap()["finger_forces_n"], &|f| f[own].as_f64()), "{key}");
        }
        for key in ["pressure_mpa", "line_n_per_mm"] {
            assert_eq!(values(&doc, key), all(&grasp["bearing"], &|b| b[key].as_f64()), "{key}");
        }
        for standing in grasp["standing"].as_array().unwrap() {
            let class = format!("{}_squeeze_n", standing["name"].as_str().unwrap());
            assert_eq!(values(&doc, &class), standing["squeeze_n"].as_f64().into_iter().collect::<Vec<_>>(), "{class}");
        }
        let jaws = &grasp["jaws"];
        for (key, want) in [
            ("jaw_x_mm", &jaws["centre_mm"][0]),
            ("jaw_y_mm", &jaws["centre_mm"][1]),
            ("jaw_deg", &jaws["angle_deg"]),
            ("opening_mm", &jaws["opening_mm"]),
        ] {
            assert_eq!(values(&doc, key), want.as_f64().into_iter().collect::<Vec<_>>(), "{key}");
        }
        dimensions(&doc, grasp, &kept.part_path);
    }
}

/// Every finger, and the jaws' centre, has one dimension along x and one along y: its place less the lower left corner of
/// the vertices and arcs, taken here from the part itself.
fn dimensions(doc: &Document<'_>, grasp: &Value, part_path: &Path) {
    let part = file::read_part(part_path).unwrap();
    let corner = part.file_point(part.outline().bounds().0);
    let points = grasp["contacts"].as_array().unwrap().iter().map(|contact| contact["point_mm"].clone());
    let mut named: Vec<(String, Value)> = points.enumerate().map(|(i, point)| ((i + 1).to_string(), point)).collect();
    if !grasp["jaws"].is_null() {
        named.push(("J".to_owned(), grasp["jaws"]["centre_mm"].clone()));
    }
    for (i, axis) in ["x", "y"].into_iter().enumerate() {
        for (who, point) in &named {
            let want = point[i].as_f64().unwrap() - [corner.x, corner.y][i];
            let own: Vec<_> = of_class(doc, "ordinate")
                .into_iter()
                .filter(|node| node.attribute("data-axis") == Some(axis))
                .filter(|node| node.attribute("data-who").unwrap().split(' ').any(|other| other == who))
                .collect();
            assert_eq!(own.len(), 1, "{axis} of {who}");
            let mm: f64 = own[0].attribute("data-mm").unwrap().parse().unwrap();
            assert_close(mm, want, 0.0, 1e-7);
            let said = text_of(own[0]);
            let seen: f64 = said.rsplit(": ").next().unwrap().parse().unwrap();
            assert_close(seen, want, 0.0, 0.005_001);
        }
        let key = format!("from_datum_{axis}_mm");
        for (value, (_, point)) in values(doc, &key).into_iter().zip(&named) {
            assert_close(value, point[i].as_f64().unwrap() - [corner.x, corner.y][i], 0.0, 1e-7);
        }
    }
}

/// The drawing is to scale: contacts lie as far apart on paper as the printed scale says, arcs are arcs, the scale bar is
/// as long as it says, and pins have their radius.
#[test]
fn the_drawing_is_to_scale() {
    let kept = kept("fairlead", "deck_cell");
    let drawn = kept.sheet(&["--svg"]);
    assert_eq!(drawn.status.code(), Some(0), "{}", err(&drawn));
    let doc = parsed(out(&drawn));
    assert_eq!(doc.root_element().tag_name().name(), "svg");
    let number = |node: &Node<'_, '_>, key: &str| -> f64 { node.attribute(key).unwrap().parse().unwrap() };
    let bar: f64 = of_class(&doc, "scale-bar")
        .iter()
        .map(|node| text_of(*node))
        .collect::<String>()
        .replace(" mm", "")
        .parse()
        .unwrap();
    let scale = 2.0
        * number(&doc.descendants().find(|n| n.has_tag_name(("http://www.w3.org/2000/svg", "rect"))).unwrap(), "width")
        / bar;
    let contacts = of_class(&doc, "contact");
    let score = kept.score();
    let points: Vec<[f64; 2]> = score["grasps"][0]["contacts"]
        .as_array()
        .unwrap()
        .iter()
        .map(|c| [c["point_mm"][0].as_f64().unwrap(), c["point_mm"][1].as_f64().unwrap()])
        .collect();
    assert_eq!(contacts.len(), points.len());
    for (node, point) in contacts.iter().zip(&points) {
        assert_close(number(node, "cx") - number(&contacts[0], "cx"), (point[0] - points[0][0]) * scale, 1e-3, 2e-3);
        // Paper runs down.
        assert_close(number(&contacts[0], "cy") - number(node, "cy"), (point[1] - points[0][1]) * scale, 1e-3, 2e-3);
    }
    let part = file::read_part(&kept.part_path).unwrap();
    let arcs = part.outline().edges().iter().filter(|edge| edge.arc().is_some()).count();
    let path = of_class(&doc, "material")[0].attribute("d").unwrap();
    assert!(
        arcs > 0 && path.matches('A').count() == arcs && path.matches('Z').count() == part.outline().ring_sizes().len()
    );
    let setup = file::read_setup(&kept.setup_path).unwrap();
    for finger in of_class(&doc, "finger") {
        assert_close(number(&finger, "r"), setup.hand.pin_radius_mm * scale, 1e-3, 1e-3);
    }
    // The program's own reader of drawings sees the outline it was drawn from, by area.
    let only_outline = format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"1000mm\" height=\"1000mm\" viewBox=\"0 0 1000 1000\"><path d=\"{path}\"/></svg>"
    );
    let drawing = kept.folder.path().join("outline.svg");
    let back = kept.folder.path().join("back.toml");
    std::fs::write(&drawing, only_outline).unwrap();
    let import = command(&["import", drawing.to_str().unwrap(), "-o", back.to_str().unwrap()]).output().unwrap();
    assert_eq!(import.status.code(), Some(0), "{}", err(&import));
    let area = file::read_part(&back).unwrap().outline().region().area_mm2;
    assert_close(area, part.outline().region().area_mm2 * scale * scale, 1e-3, 0.0);
}

/// Names and notes of files are shown, never obeyed.
#[test]
fn hostile_text_is_inert() {
    const NASTY: &str = "</svg><script>alert(1)</script>\"'&<!--\u{1b}[2J\u{202e}]]>";
    let part_path = parts().join("hinge_leaf.toml");
    let folder = tempfile::tempdir().unwrap();
    let text = std::fs::read_to_string(&part_path).unwrap();
    let quoted = toml::Value::from(NASTY).to_string();
    let mut text = text.replace("\"hinge leaf\"", &quoted).replace("\"runs against the other leaf\"", &quoted);
    text = text.replace("thickness = 3.0", "thickness = 3.0\nmass_kg = 0.03").replace("\"aluminium 5083\"", &quoted);
    let part_path = folder.path().join("leaf.toml");
    std::fs::write(&part_path, text).unwrap();
    let part = Arc::new(file::read_part(&part_path).unwrap());
    let mut setup = file::read_setup(&parts().join("deck_cell.setup.toml")).unwrap();
    setup.friction.source = Some(NASTY.to_owned());
    setup.loads.iter_mut().for_each(|load| load.name = NASTY.to_owned());
    let mut keep = best(&part, &setup).unwrap();
    (keep.name, keep.note) = (NASTY.to_owned(), format!("{NASTY}\n{NASTY}"));
    let grasps = folder.path().join("kept.grasps.toml");
    file::save(&grasps, &part_path, &part, &[keep], None).unwrap();
    for more in [&[][..], &["--svg"]] {
        let made = command(&["sheet", grasps.to_str().unwrap()]).args(more).output().unwrap();
        assert_eq!(made.status.code(), Some(0), "{}", err(&made));
        let text = out(&made);
        assert!(!text.contains(|c: char| c.is_control() && c != '\n') && !text.contains('\u{202e}'));
        let doc = parsed(text);
        let names = names_of_elements(&doc);
        assert!(!names.iter().any(|name| ["script", "iframe", "img", "link", "object", "a", "image", "use"].contains(&name.as_str())), "{names:?}");
        // Not one address beside those that name the languages.
        assert!(!text.replace("http://www.w3.org/", "").contains("://"));
        assert!(!text.contains("url(") && !text.contains("@import"));
        let title = doc.descendants().find(|node| node.tag_name().name() == "title").unwrap();
        assert!(text_of(title).contains("</svg><script>alert(1)</script>\"'&<!--[2J]]>"), "{}", text_of(title));
        let handlers = doc.descendants().flat_map(|node| node.attributes()).filter(|own| own.name().starts_with("on"));
        assert_eq!(handlers.count(), 0);
    }
}

/// Every demo part under a setup it can be held with.
fn demo_parts() -> Vec<(String, Kept)> {
    let mut files: Vec<_> = std::fs::read_dir(parts())
        .unwrap()
        .map(|entry| entry.unwrap().file_name().into_string().unwrap())
        .filter_map(|name| name.strip_suffix(".toml").filter(|name| !name.ends_with(".setup")).map(str::to_owned))
        .collect();
    files.sort();
    files.into_iter().map(|name| (name.clone(), kept(&name, "deck_cell"))).collect()
}

#[test]
fn every_demo_part_makes_a_sheet() {
    let all = demo_parts();
    assert!(all.len() >= 12);
    for (name, kept) in &all {
        let target = kept.folder.path().join("sheet.html");
        let made = kept.sheet(&["-o", target.to_str().unwrap()]);
        assert_eq!((made.status.code(), out(&made)), (Some(0), ""), "{name}: {}", err(&made));
        let text = std::fs::read_to_string(target).unwrap();
        let doc = parsed(&text);
        assert_eq!(of_class(&doc, "page").len(), 1);
        assert_eq!(of_class(&doc, "contact").len(), kept.spots.len());
        assert!(of_class(&doc, "warning-box").is_empty());
        assert!(text.contains("A dropped or thrown part can injure"));
        // Nothing is drawn outside the paper.
        let svg = doc.descendants().find(|node| node.tag_name().name() == "svg").unwrap();
        let size: Vec<f64> = svg.attribute("viewBox").unwrap().split(' ').map(|n| n.parse().unwrap()).collect();
        for (class, x, y) in [("number", "cx", "cy"), ("contact", "cx", "cy"), ("ordinate", "x", "y")] {
            for node in of_class(&doc, class) {
                let at = [x, y].map(|key| node.attribute(key).unwrap().parse::<f64>().unwrap());
                assert!(
                    (0.0..size[2]).contains(&at[0]) && (0.0..size[3]).contains(&at[1]),
                    "{name} {class}: {at:?} {size:?}"
                );
            }
        }
    }
}

/// What is wrong stands in large words, the sheet is written all the same, and the exit code says so.
#[test]
fn a_sheet_that_does_not_hold_says_so() {
    let kept = kept("hinge_leaf", "deck_cell");
    let text = std::fs::read_to_string(&kept.grasps).unwrap();
    let warned = |grasps: &Path, more: &[&str]| {
        let made = command(&["sheet", grasps.to_str().unwrap()]).args(more).output().unwrap();
        assert_eq!(made.status.code(), Some(1), "{}", err(&made));
        assert!(err(&made).starts_with("note: "));
        let text = out(&made).to_owned();
        let doc = parsed(&text);
        of_class(&doc, "warning-box").into_iter().chain(of_class(&doc, "warning")).map(text_of).collect::<String>()
    };
    let write = |name: &str, text: &str| {
        let path = kept.folder.path().join(name);
        std::fs::write(&path, text).unwrap();
        path
    };
    // Another mass.
    let part = std::fs::read_to_string(&kept.part_path).unwrap();
    let heavier = write("heavier.toml", &part.replace("thickness = 3.0", "thickness = 3.0\nmass_kg = 0.9"));
    let heavier = heavier.to_str().unwrap();
    assert!(warned(&kept.grasps, &["--part", heavier]).starts_with("PART CHANGED"));
    assert!(warned(&kept.grasps, &["--part", heavier, "--svg"]).starts_with("PART CHANGED"));
    // A hand too weak.
    let weak = write("weak.grasps.toml", &text.replace("force_limit_n = 60.0", "force_limit_n = 0.5"));
    assert!(warned(&weak, &[]).starts_with("LOADS NO LONGER HELD"));
    // A finger that has no place, and an edge that is not there.
    let edge = kept.spots[0].edge.edge;
    let gone = write("gone.grasps.toml", &text.replacen(&format!("edge = {edge},"), "edge = 99,", 1));
    let said = warned(&gone, &[]);
    assert!(said.starts_with("NO LONGER FITS") && said.contains("there is no ring 0 edge 99"), "{said}");
    assert!(warned(&gone, &["--svg"]).starts_with("NO LONGER FITS"));
}

#[test]
fn files_are_never_damaged_unasked() {
    let kept = kept("hinge_leaf", "deck_cell");
    let target = kept.folder.path().join("sheet.html");
    std::fs::write(&target, "mine").unwrap();
    let to = target.to_str().unwrap();
    let refused = kept.sheet(&["-o", to]);
    assert!(complaints(&refused)[0].contains("is there already"));
    assert_eq!(std::fs::read_to_string(&target).unwrap(), "mine");
    assert_eq!(kept.sheet(&["-o", to, "--force"]).status.code(), Some(0));
    assert!(std::fs::read_to_string(&target).unwrap().starts_with("<!DOCTYPE html>"));
    let before = std::fs::read(&kept.grasps).unwrap();
    let refused = kept.sheet(&["-o", kept.grasps.to_str().unwrap(), "--force"]);
    assert!(complaints(&refused)[0].contains("the pages are made of this file"));
    assert_eq!(std::fs::read(&kept.grasps).unwrap(), before);
    // The same twice gives the same, byte for byte.
    assert_eq!(kept.sheet(&[]).stdout, kept.sheet(&[]).stdout);
}

#[test]
fn grasps_and_datum_are_chosen_by_name() {
    let part_path = parts().join("hinge_leaf.toml");
    let part = Arc::new(file::read_part(&part_path).unwrap());
    let setup = file::read_setup(&parts().join("deck_cell.setup.toml")).unwrap();
    let best = best(&part, &setup).unwrap();
    let folder = tempfile::tempdir().unwrap();
    let grasps = folder.path().join("kept.grasps.toml");
    let named = |name: &str| Keep { name: name.to_owned(), ..best.clone() };
    file::save(&grasps, &part_path, &part, &["a", "b", "c"].map(named), None).unwrap();
    let run = |more: &[&str]| command(&["sheet", grasps.to_str().unwrap()]).args(more).output().unwrap();
    let pages = |more: &[&str]| {
        let made = run(more);
        let doc = parsed(out(&made));
        doc.descendants().filter(|n| n.tag_name().name() == "h1").map(text_of).collect::<Vec<_>>().join(" ")
    };
    assert_eq!(pages(&[]), "a b c");
    assert_eq!(pages(&["--grasp", "c", "--grasp", "a"]), "a c");
    assert_eq!(
        complaints(&run(&["--grasp", "d"])),
        ["error: there is no grasp \"d\"; the file has \"a\", \"b\", \"c\""]
    );
    assert_eq!(complaints(&run(&["--svg"])), ["error: --svg draws one grasp; name it with --grasp"]);
    assert!(complaints(&run(&["--datum", "0:12"]))[0].contains("--datum 0:12: there is no such vertex"));
    assert!(complaints(&run(&["--datum", "7"])).iter().any(|line| line.contains("give RING:VERTEX")));
    // Vertex 2 of the leaf stands at (80, 38).
    let moved = run(&["--svg", "--grasp", "a", "--datum", "0:2"]);
    let doc = parsed(out(&moved));
    let own = of_class(&doc, "ordinate");
    let least = |axis: &str| {
        let of = own.iter().filter(|n| n.attribute("data-axis") == Some(axis));
        of.map(|n| n.attribute("data-mm").unwrap().parse::<f64>().unwrap()).fold(f64::INFINITY, f64::min)
    };
    assert_close(least("x"), -80.0, 0.0, 1e-9);
    assert_close(least("y"), -38.0, 0.0, 1e-9);
    let empty = folder.path().join("empty.grasps.toml");
    let text = std::fs::read_to_string(&grasps).unwrap();
    std::fs::write(&empty, text.split("\n[[grasp]]").next().unwrap()).unwrap();
    let made = command(&["sheet", empty.to_str().unwrap()]).output().unwrap();
    assert_eq!(complaints(&made), ["error: the file holds no grasp"]);
}

/// A page with as much on it as a page can have.
fn crowded(folder: &Path) -> PathBuf {
    let part_path = parts().join("hinge_leaf.toml");
    let mut text = std::fs::read_to_string(&part_path).unwrap();
    for i in 0..9 {
        text.push_str(&format!(
            "\n[[keep_out]]\nring = 0\nedge = 0\nfrom = {}.0\nto = {}.5\nreason = \"{}\"\n",
            8 * i,
            8 * i,
            "seal ".repeat(9 + i)
        ));
    }
    let part_path = folder.join("leaf.toml");
    std::fs::write(&part_path, text).unwrap();
    let part = Arc::new(file::read_part(&part_path).unwrap());
    let mut setup = file::read_setup(&parts().join("plate_hand.setup.toml")).unwrap();
    setup.hand.gap_mm = 0.0;
    setup.friction.source = Some("tilt test ".repeat(200));
    let load = setup.loads[3].clone();
    for i in 0..60 {
        let mut own = load.clone();
        (own.name, own.squeeze_left) = (format!("load with a long name {i}"), 0.5);
        (own.acceleration_m_s2, own.angular_acceleration_rad_s2, own.any_direction_m_s2) =
            ([0.1, 0.2, 0.3], 0.25, 0.125);
        setup.loads.push(own);
    }
    let on = |edge: usize, along_mm: f64| Spot { edge: holdwright::part::EdgeId { ring: 0, edge }, along_mm };
    let spots = [on(1, 7.0), on(1, 27.0), on(11, 7.0), on(11, 27.0), on(0, 22.0), on(0, 62.0)];
    let mut all = vec![keep(&"a name ".repeat(60), &part, &setup, &spots)];
    all[0].note = "A reason of many words that goes on and on. ".repeat(100);
    setup.hand.force_limit_n = Some(1e-3);
    all.push(keep("not held", &part, &setup, &spots));
    let grasps = folder.join("crowded.grasps.toml");
    file::save(&grasps, &part_path, &part, &all, None).unwrap();
    grasps
}

/// In a real browser: as many pages as grasps on both sizes of paper, and nothing on its console.
#[test]
fn prints_one_page_for_each_grasp() {
    let there = Command::new("chromium").arg("--version").stdout(Stdio::null()).stderr(Stdio::null()).status();
    if !there.is_ok_and(|status| status.success()) {
        // Straight to the stream, which the test runner does not hold back.
        let _ = writeln!(std::io::stderr(), "SKIPPED prints_one_page_for_each_grasp: no chromium on the path");
        return;
    }
    let folder = tempfile::tempdir().unwrap();
    // That the two checks can fail: a page that speaks on the console, and one that takes two sheets.
    let speaks = "<!DOCTYPE html><html><body><script>console.error('spoken')</script><p style=\"height:300mm\">x</p></body></html>";
    let (pages, _, console) = printed(folder.path(), speaks, "A4");
    assert!(console.contains("spoken") && pages == 2, "{pages} {console}");
    let mut sources: Vec<(String, PathBuf)> = demo_parts()
        .into_iter()
        .map(|(name, kept)| (name, std::mem::take(&mut kept.grasps.clone()), kept))
        .map(|(name, grasps, kept)| {
            let target = folder.path().join(format!("{name}.grasps.toml"));
            let text = std::fs::read_to_string(grasps).unwrap();
            let line = text.lines().find(|line| line.starts_with("part = ")).unwrap().to_owned();
            let part = format!("part = {}", toml::Value::from(kept.part_path.to_str().unwrap()));
            std::fs::write(&target, text.replace(&line, &part)).unwrap();
            (name, target)
        })
        .collect();
    let jaws = kept("cleat_base", "two_jaw");
    sources.push(("jaws".to_owned(), jaws.grasps.clone()));
    sources.push(("crowded".to_owned(), crowded(folder.path())));
    let mut all = String::new();
    let mut count = 0;
    for (name, grasps) in &sources {
        let made = command(&["sheet", grasps.to_str().unwrap()]).output().unwrap();
        assert!(made.status.code() == Some(0) || name == "crowded", "{name}: {}", err(&made));
        let text = out(&made);
        let doc = parsed(text);
        count += of_class(&doc, "page").len();
        if name == "crowded" {
            assert_eq!(of_class(&doc, "page").len(), 2);
        }
        let body = text.split_once("<body>").unwrap().1.split_once("</body>").unwrap().0;
        if all.is_empty() {
            all = text.split_once("</body>").unwrap().0.to_owned();
        } else {
            all.push_str(body);
        }
    }
    all.push_str("</body></html>");
    // For a look at all of them.
    if let Ok(keep) = std::env::var("HOLDWRIGHT_PAGES") {
        std::fs::write(keep, &all).unwrap();
    }
    for (size, points) in [("A4", [595.0, 842.0]), ("Letter", [612.0, 792.0])] {
        let (pages, paper, console) = printed(folder.path(), &all, size);
        assert_eq!((pages, console.as_str()), (count, ""), "{size}");
        assert!((paper[0] - points[0]).abs() < 1.5 && (paper[1] - points[1]).abs() < 1.5, "{size}: {paper:?}");
    }
}

/// Prints a page to paper of a size: how many sheets, their size in points, and what was said on the console.
fn printed(folder: &Path, html: &str, size: &str) -> (usize, [f64; 2], String) {
    let (page, pdf) = (folder.join("page.html"), folder.join("page.pdf"));
    let sized = html.replacen("</head>", &format!("<style>@page {{ size: {size} }}</style></head>"), 1);
    let sized = if sized == html {
        html.replacen("<html>", &format!("<html><style>@page {{ size: {size} }}</style>"), 1)
    } else {
        sized
    };
    std::fs::write(&page, sized).unwrap();
    let _ = std::fs::remove_file(&pdf);
    let log = folder.join("log.txt");
    let mut browser = Command::new("chromium")
        .args(["--headless", "--no-sandbox", "--disable-gpu", "--disable-dev-shm-usage", "--no-pdf-header-footer"])
        .args(["--enable-logging=stderr", "--log-level=0"])
        .arg(format!("--user-data-dir={}", folder.join("profile").display()))
        .arg(format!("--print-to-pdf={}", pdf.display()))
        .arg(&page)
        .stdin(Stdio::null())
        .stdout(Stdio::null())
        .stderr(std::fs::File::create(&log).unwrap())
        .spawn()
        .unwrap();
    let begun = Instant::now();
    while browser.try_wait().unwrap().is_none() {
        if begun.elapsed() > Duration::from_secs(120) {
            let _ = browser.kill();
            let _ = browser.wait();
            panic!("chromium did not end");
        }
        std::thread::sleep(Duration::from_millis(50));
    }
    let bytes = std::fs::read(&pdf).unwrap();
    let text: String = bytes.iter().map(|&byte| char::from(byte)).collect();
    let pages =
        text.match_indices("/Type /Page").filter(|(at, found)| !text[at + found.len()..].starts_with('s')).count();
    let paper = text.split_once("/MediaBox [").unwrap().1.split_once(']').unwrap().0;
    let corners: Vec<f64> = paper.split_whitespace().map(|n| n.parse().unwrap()).collect();
    let log = String::from_utf8_lossy(&std::fs::read(&log).unwrap()).into_owned();
    let console = log.lines().filter(|line| line.contains(":CONSOLE")).collect::<Vec<_>>().join("\n");
    (pages, [corners[2], corners[3]], console)
}

/// The grasp file the checks of the repository print from is of the demo part as it is.
#[test]
fn the_bench_file_holds() {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/reference/bench.grasps.toml");
    let part = file::read_part(&parts().join("hinge_leaf.toml")).unwrap();
    assert_eq!(file::read_grasps(&path).unwrap().part_digest, file::part_digest(&part));
    let made = command(&["sheet", path.to_str().unwrap()]).output().unwrap();
    assert_eq!(made.status.code(), Some(0), "{}", err(&made));
}
