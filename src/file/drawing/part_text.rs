//! The last steps: choosing a part, cleaning it, checking it, writing it as a part file.

use super::chain::Loop;
use super::fault::{Fault, fault, short};
use super::measure::Measure;
use super::report::{CleanedReport, Report, RingReport, brief};
use super::survey::Survey;
use super::{Imported, Options, Refusal, refused};
use crate::file::writing::{number, quoted};
use crate::part::{Part, PartDescription, PartFault, Touch};
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
    let _ = measures;
    let name = path.file_stem().map_or(String::new(), |stem| short(&stem.to_string_lossy()));
    let part = checked(&name, unit.mm, &rings, sagitta).map_err(|faults| {
        let place = |ring: usize, edge: usize| place_words(&rings, ring, edge, &|source| sheet.source_words(source));
        let mut faults: Vec<Fault> = faults.iter().map(|fault| worded(fault, &place)).collect();
        if cleaning {
            faults.push(fault("the part was cleaned before it was checked; clean less, or not at all"));
        }
        refused(path, faults)
    })?;
    let text = text_of(&name, &report, &rings);
    Ok(Imported { text, part, report })
}

/// The part these rings make.
fn checked(name: &str, unit_mm: f64, rings: &[Loop], sagitta: f64) -> Result<Part, Vec<PlacedFault>> {
    let mut flat = rings.to_vec();
    // Which edge each chord belongs to.
    let edges: Vec<Vec<usize>> = flat.iter_mut().map(|ring| ring.flatten(sagitta)).collect();
    let rings = flat.iter().map(|ring| ring.vertices.iter().map(|p| [p.x + 0.0, p.y + 0.0]).collect()).collect();
    let mut description = PartDescription::bare(name, rings);
    description.unit_mm = unit_mm;
    Part::new(description).map_err(|faults| faults.0.into_iter().map(|fault| PlacedFault::of(fault, &edges)).collect())
}

/// A fault with edges numbered as in the rings.
struct PlacedFault {
    fault: PartFault,
    first: Option<(usize, usize)>,
    second: Option<(usize, usize)>,
}

impl PlacedFault {
    fn of(fault: PartFault, edges: &[Vec<usize>]) -> Self {
        let edge = |ring: usize, edge: usize| Some((ring, *edges.get(ring)?.get(edge)?));
        let (first, second) = match &fault {
            PartFault::NotFinite { ring, vertex }
            | PartFault::TooFar { ring, vertex, .. }
            | PartFault::RepeatedVertex { ring, vertex, .. }
            | PartFault::Spike { ring, vertex } => (edge(*ring, *vertex), None),
            PartFault::Meet { a, b, .. } => (edge(a.ring, a.edge), edge(b.ring, b.edge)),
            PartFault::TooFewVertices { ring, .. }
            | PartFault::NoArea { ring, .. }
            | PartFault::HoleOutside { ring }
            | PartFault::HoleInHole { ring, .. } => (edge(*ring, 0), None),
            _ => (None, None),
        };
        Self { fault, first, second }
    }
}

fn place_words(rings: &[Loop], ring: usize, edge: usize, source: &dyn Fn(usize) -> String) -> String {
    let Some(shape) = rings.get(ring) else { return String::new() };
    let edge = edge.min(shape.vertices.len() - 1);
    let at = shape.vertices[edge];
    format!("({}, {}), {}", brief(at.x), brief(at.y), source(shape.sources[edge]))
}

/// A fault of the part in words about the drawing.
fn worded(placed: &PlacedFault, place: &dyn Fn(usize, usize) -> String) -> Fault {
    let at = |edge: Option<(usize, usize)>| edge.map_or("somewhere".to_owned(), |(ring, edge)| place(ring, edge));
    let first = at(placed.first);
    fault(match &placed.fault {
        PartFault::RepeatedVertex { .. } => format!("at {first}: two points coincide; remove one of them"),
        PartFault::Spike { .. } => format!("at {first}: the outline turns straight back on itself; remove the spike"),
        PartFault::Meet { how, .. } => format!(
            "the edge from {first} {} the edge from {}; move one of them apart",
            match how {
                Touch::Cross => "crosses",
                Touch::Touch => "touches",
            },
            at(placed.second)
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
