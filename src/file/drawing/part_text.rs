//! The last steps: choosing a part, cleaning it, checking it, writing it as a part file.

use super::chain::Loop;
use super::fault::{Fault, fault, short};
use super::measure::Measure;
use super::nest::Region;
use super::report::{CleanedReport, Report, RingReport, brief};
use super::survey::Survey;
use super::{Imported, Options, Refusal, refused};
use crate::file::writing::{number, quoted};
use crate::part::{ArcDescription, EdgeId, Part, PartDescription, PartFault, PartFaults, Touch};
use kurbo::Point;
use std::fmt::Write;
use std::path::Path;

/// Chooses, cleans, checks and writes.
pub(super) fn finish(path: &Path, survey: Survey, options: &Options) -> Result<Imported, Refusal> {
    let Survey { sheet, unit, mut loops, measures, regions, sagitta, mut report, .. } = survey;
    let number = match (options.pick, regions.len()) {
        (None, 1) => 1,
        (None, _) => return Err(Refusal::NeedsPick(Box::new(report))),
        (Some(pick), count) if (1..=count).contains(&pick) => pick,
        (Some(pick), count) => {
            return Err(refused(path, vec![fault(format!("there is no part {pick}; the drawing has 1 to {count}"))]));
        }
    };
    report.picked = Some(number);
    let region = &regions[number - 1];
    apart_from_others(region, &loops, &measures, unit.mm, &|source| sheet.source_words(source))
        .map_err(|faults| refused(path, faults))?;
    let area_before: f64 = report.parts[number - 1].area_mm2;
    let mut rings: Vec<Loop> = std::iter::once(&region.outer)
        .chain(&region.holes)
        .map(|&ring| std::mem::replace(&mut loops[ring], Loop::nothing()))
        .collect();
    let cleaning = options.merge_collinear_deg.is_some() || options.drop_shorter_mm.is_some();
    let mut cleaned = CleanedReport { merged: 0, dropped: 0, area_gained_mm2: 0.0 };
    for ring in &mut rings {
        if let Some(length_mm) = options.drop_shorter_mm {
            cleaned.dropped += ring.drop_shorter(length_mm / unit.mm);
        }
        if let Some(degrees) = options.merge_collinear_deg {
            cleaned.merged += ring.merge_in_line(degrees.to_radians());
        }
    }
    if options.chords {
        for ring in &mut rings {
            ring.flatten(sagitta);
        }
    }
    let after: Vec<Measure> = rings.iter().map(Measure::of).collect();
    let square_mm = unit.mm * unit.mm;
    if cleaning {
        let area: f64 = after[0].area.abs() - after[1..].iter().map(|measure| measure.area.abs()).sum::<f64>();
        cleaned.area_gained_mm2 = area * square_mm - area_before;
        report.cleaned = Some(cleaned);
    }
    report.rings = rings
        .iter()
        .zip(&after)
        .map(|(ring, measure)| RingReport {
            area_mm2: measure.area.abs() * square_mm,
            length_mm: measure.length * unit.mm,
            edges: ring.bulges.len(),
            arcs: ring.bulges.iter().filter(|bulge| **bulge != 0.0).count(),
            first: sheet.source_words(ring.sources[0]),
        })
        .collect();
    let name = path.file_stem().map_or(String::new(), |stem| short(&stem.to_string_lossy()));
    let part = checked(&name, unit.mm, &rings).map_err(|faults| {
        let place = |at: EdgeId| place_words(&rings, at, &|source| sheet.source_words(source));
        let mut faults: Vec<Fault> = faults.0.iter().map(|fault| worded(fault, &place)).collect();
        if cleaning {
            faults.push(fault("the part was cleaned before it was checked; clean less, or not at all"));
        }
        refused(path, faults)
    })?;
    let text = text_of(&name, &report, &rings);
    Ok(Imported { text, part, report })
}

/// No loop of another part crosses or touches this one. Loops of one part are checked when it is made.
fn apart_from_others(
    region: &Region,
    loops: &[Loop],
    measures: &[Measure],
    unit_mm: f64,
    source: &dyn Fn(usize) -> String,
) -> Result<(), Vec<Fault>> {
    let own: Vec<usize> = std::iter::once(region.outer).chain(region.holes.iter().copied()).collect();
    let bounds = measures[region.outer].bounds;
    let mut is_own = vec![false; loops.len()];
    own.iter().for_each(|&number| is_own[number] = true);
    let beside = |number: &usize| !is_own[*number] && measures[*number].bounds.overlaps(bounds);
    let others: Vec<usize> = (0..loops.len()).filter(beside).collect();
    if others.is_empty() {
        return Ok(());
    }
    // Whether loops meet is asked before whether they are nested, which these are not.
    let together: Vec<Loop> = own.iter().chain(&others).map(|&number| loops[number].clone()).collect();
    let Err(faults) = checked("", unit_mm, &together) else { return Ok(()) };
    let strange = |fault: &&PartFault| match fault {
        PartFault::Meet { a, b, .. } => (a.ring < own.len()) != (b.ring < own.len()),
        // What is not listed may be among these.
        PartFault::TooManyVertices { .. } | PartFault::AndMore => true,
        _ => false,
    };
    let place = |at: EdgeId| place_words(&together, at, source);
    let mut found: Vec<Fault> = faults.0.iter().filter(strange).map(|fault| worded(fault, &place)).collect();
    if found.is_empty() {
        return Ok(());
    }
    found.push(fault("lines of another part are in the way; leave them out with --layer, or mend them"));
    Err(found)
}

/// The part these rings make.
fn checked(name: &str, unit_mm: f64, rings: &[Loop]) -> Result<Part, PartFaults> {
    let vertices = |ring: &Loop| ring.vertices.iter().map(|p| [p.x + 0.0, p.y + 0.0]).collect();
    let mut description = PartDescription::bare(name, rings.iter().map(vertices).collect());
    description.unit_mm = unit_mm;
    for (ring, shape) in rings.iter().enumerate() {
        let arcs = shape.bulges.iter().enumerate().filter(|(_, bulge)| **bulge != 0.0);
        description.arcs.extend(arcs.map(|(edge, &bulge)| ArcDescription { ring, edge, bulge }));
    }
    Part::new(description)
}

/// The edges a fault is about.
fn edges_of(fault: &PartFault) -> [Option<EdgeId>; 2] {
    let edge = |ring: usize, edge: usize| Some(EdgeId { ring, edge });
    match fault {
        PartFault::NotFinite { ring, vertex }
        | PartFault::TooFar { ring, vertex, .. }
        | PartFault::RepeatedVertex { ring, vertex, .. }
        | PartFault::Spike { ring, vertex } => [edge(*ring, *vertex), None],
        PartFault::Meet { a, b, .. } => [Some(*a), Some(*b)],
        PartFault::TooFewVertices { ring, .. }
        | PartFault::NoArea { ring, .. }
        | PartFault::HoleOutside { ring }
        | PartFault::HoleInHole { ring, .. } => [edge(*ring, 0), None],
        _ => [None, None],
    }
}

fn place_words(rings: &[Loop], at: EdgeId, source: &dyn Fn(usize) -> String) -> String {
    let Some(shape) = rings.get(at.ring) else { return String::new() };
    let edge = at.edge.min(shape.vertices.len() - 1);
    let at = shape.vertices[edge];
    format!("({}, {}), {}", brief(at.x), brief(at.y), source(shape.sources[edge]))
}

/// A fault of the part in words about the drawing.
fn worded(part_fault: &PartFault, place: &dyn Fn(EdgeId) -> String) -> Fault {
    let [first, second] = edges_of(part_fault).map(|edge| edge.map_or("somewhere".to_owned(), place));
    fault(match part_fault {
        PartFault::RepeatedVertex { .. } => format!("at {first}: two points coincide; remove one of them"),
        PartFault::Spike { .. } => format!("at {first}: the outline turns straight back on itself; remove the spike"),
        PartFault::Meet { how, .. } => format!(
            "the edge from {first} {} the edge from {second}; move one of them apart",
            match how {
                Touch::Cross => "crosses",
                Touch::Touch => "touches",
            }
        ),
        PartFault::NoArea { .. } => format!("the loop at {first} encloses almost no area; remove it"),
        PartFault::TooFar { .. } => {
            format!("at {first}: farther than 1e9 mm from the origin; check the unit, or move it")
        }
        PartFault::HoleOutside { .. } | PartFault::HoleInHole { .. } => {
            format!("the loop at {first} is not quite inside; move it")
        }
        other => other.to_string(),
    })
}

/// The part file: what was done as comments, then the rings and the arcs.
fn text_of(name: &str, report: &Report, rings: &[Loop]) -> String {
    let mut text = String::new();
    for line in comments(report) {
        text.push_str(&format!("# {line}\n"));
    }
    text.push_str(&format!("schema = 1\nname = {}\nunits = {}\n", quoted(name), quoted(&report.units.part)));
    text.push_str("outer = ");
    write_ring(&mut text, &rings[0], "");
    text.push('\n');
    if rings.len() > 1 {
        text.push_str("holes = [\n");
        for ring in &rings[1..] {
            text.push_str("  ");
            write_ring(&mut text, ring, "  ");
            text.push_str(",\n");
        }
        text.push_str("]\n");
    }
    for (ring, shape) in rings.iter().enumerate() {
        for (edge, &bulge) in shape.bulges.iter().enumerate().filter(|(_, bulge)| **bulge != 0.0) {
            // Writing to a String cannot fail.
            let _ = write!(text, "\n[[arc]]\nring = {ring}\nedge = {edge}\nbulge = {}\n", number(bulge));
        }
    }
    text
}

fn write_ring(text: &mut String, ring: &Loop, indent: &str) {
    text.push_str("[\n");
    for Point { x, y } in &ring.vertices {
        let _ = writeln!(text, "{indent}  [{}, {}],", number(*x), number(*y));
    }
    let _ = write!(text, "{indent}]");
}

/// The essentials of the report.
fn comments(report: &Report) -> Vec<String> {
    let mut lines = vec![format!(
        "From {} ({}) by holdwright {}",
        short(&report.drawing),
        report.format,
        env!("CARGO_PKG_VERSION")
    )];
    let essential = ["units:", "joined:", "curves:", "skipped:", "open:", "cleaned:", "note:"];
    lines.extend(report.lines().into_iter().filter(|line| essential.iter().any(|start| line.starts_with(start))));
    if let Some(number) = report.picked
        && report.parts.len() > 1
    {
        lines.push(format!("part {}", report.parts[number - 1].line(&report.units.part)));
    }
    lines.into_iter().map(|line| crate::file::shown(&line)).collect()
}
