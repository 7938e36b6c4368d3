//! What an import did, for people and for programs.

use super::fault::short;
use serde::Serialize;
use std::fmt::Write;

/// Everything an import read, left out and made of it. Lengths are in the part's unit unless they say mm.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Report {
    /// 1.
    pub schema: u32,
    /// Name of the drawing's file.
    pub drawing: String,
    /// Its format and version.
    pub format: String,
    /// Units.
    pub units: UnitsReport,
    /// Every layer of the drawing.
    pub layers: Vec<LayerReport>,
    /// What was skipped, and why.
    pub skipped: Vec<SkippedReport>,
    /// Entities read and placed.
    pub entities: usize,
    /// Lines and arcs they came to.
    pub pieces: usize,
    /// Pieces without length that were dropped.
    pub without_length: usize,
    /// Pieces or loops drawn twice, dropped once.
    pub duplicates: usize,
    /// Ends within this distance were joined, mm.
    pub join_mm: f64,
    /// Joints made over a gap.
    pub joints: usize,
    /// The largest gap closed, mm.
    pub largest_gap_mm: f64,
    /// Curves are within this distance of their arcs, mm.
    pub sagitta_mm: f64,
    /// Runs of lines that do not close.
    pub open: Vec<OpenReport>,
    /// Closed loops.
    pub loops: usize,
    /// Parts, largest first.
    pub parts: Vec<PartReport>,
    /// Number of the part that was taken; nothing when none was.
    pub picked: Option<usize>,
    /// Loops of that part, the outer one first.
    pub rings: Vec<RingReport>,
    /// What cleaning did; nothing when none was asked for.
    pub cleaned: Option<CleanedReport>,
    /// Worth knowing.
    pub notes: Vec<String>,
}

/// Units of the drawing and of the part.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct UnitsReport {
    /// The drawing's; nothing when it is not known.
    pub drawing: Option<String>,
    /// Who says so.
    pub stated_by: Option<String>,
    /// The part's.
    pub part: String,
    /// A length of the drawing times this is a length of the part.
    pub factor: f64,
}

/// A layer.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct LayerReport {
    /// Its name.
    pub name: String,
    /// Entities on it that can be read.
    pub entities: usize,
    /// True when it was read.
    pub read: bool,
    /// Why it was not read.
    pub why: Option<String>,
}

/// Things that were skipped.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct SkippedReport {
    /// Kind of entity.
    pub kind: String,
    /// Why.
    pub why: String,
    /// How many.
    pub count: usize,
    /// The first of them.
    pub first: String,
    /// Their layer.
    pub layer: String,
    /// True when an outline could miss them.
    pub missed: bool,
}

/// A run of lines that does not close.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct OpenReport {
    /// One end.
    pub from: [f64; 2],
    /// The other end.
    pub to: [f64; 2],
    /// Distance to the nearest other open end, mm.
    pub nearest_mm: Option<f64>,
    /// The entity it begins with.
    pub first: String,
}

/// A part in the drawing.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct PartReport {
    /// Its number, from 1, for `--pick`.
    pub number: usize,
    /// Area less its holes, mm2.
    pub area_mm2: f64,
    /// Lower left corner of its box.
    pub at: [f64; 2],
    /// Width and height of its box.
    pub size: [f64; 2],
    /// Holes.
    pub holes: usize,
    /// The entity its outline begins with.
    pub first: String,
}

/// A loop of the part taken.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct RingReport {
    /// Area inside, mm2.
    pub area_mm2: f64,
    /// Length all round, mm.
    pub length_mm: f64,
    /// Edges.
    pub edges: usize,
    /// Arcs among them.
    pub arcs: usize,
    /// Layer and entity of its first edge.
    pub first: String,
}

/// What cleaning did.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct CleanedReport {
    /// Vertices taken out between edges in line.
    pub merged: usize,
    /// Short edges dropped.
    pub dropped: usize,
    /// Area gained, mm2.
    pub area_gained_mm2: f64,
}

/// A length in few characters.
pub(super) fn brief(value: f64) -> String {
    if value != 0.0 && !(1e-3..1e7).contains(&value.abs()) {
        return format!("{value:.2e}");
    }
    let text = format!("{value:.4}");
    let text = text.trim_end_matches('0').trim_end_matches('.');
    if text == "-0" { "0".to_owned() } else { text.to_owned() }
}

impl PartReport {
    /// The part in one line.
    pub fn line(&self, unit: &str) -> String {
        let holes = match self.holes {
            1 => "1 hole".to_owned(),
            n => format!("{n} holes"),
        };
        format!(
            "{}: {} x {} {unit} at ({}, {}), {holes}, {} mm2, {}",
            self.number,
            brief(self.size[0]),
            brief(self.size[1]),
            brief(self.at[0]),
            brief(self.at[1]),
            brief(self.area_mm2),
            self.first
        )
    }
}

impl Report {
    /// The report as lines for people; fit for a terminal.
    pub fn lines(&self) -> Vec<String> {
        let unit = &self.units.part;
        let mut lines = vec![format!("{}: {}", short(&self.drawing), self.format)];
        lines.push(self.unit_line());
        lines.extend(self.layer_lines());
        let mut read = format!("read: {} entities, {} lines and arcs", self.entities, self.pieces);
        for (count, what) in [(self.without_length, "without length"), (self.duplicates, "drawn twice")] {
            if count > 0 {
                // Writing to a String cannot fail.
                let _ = write!(read, ", {count} {what} dropped");
            }
        }
        lines.push(read);
        for skipped in &self.skipped {
            let first = if skipped.count == 1 { String::new() } else { "first ".to_owned() };
            lines.push(format!(
                "skipped: {} {} ({first}{}): {}",
                skipped.count, skipped.kind, skipped.first, skipped.why
            ));
        }
        lines.push(format!(
            "joined: ends within {} mm; {} gaps closed, the largest {} mm",
            brief(self.join_mm),
            self.joints,
            brief(self.largest_gap_mm)
        ));
        lines.push(format!("curves: arcs within {} mm", brief(self.sagitta_mm)));
        lines.extend(self.open_lines());
        lines.push(format!("loops: {}, parts: {}", self.loops, self.parts.len()));
        const SHOWN: usize = 50;
        for part in self.parts.iter().take(SHOWN) {
            let mark = if self.picked == Some(part.number) && self.parts.len() > 1 { " (taken)" } else { "" };
            lines.push(format!("  {}{mark}", part.line(unit)));
        }
        if self.parts.len() > SHOWN {
            lines.push(format!("  and {} smaller ones", self.parts.len() - SHOWN));
        }
        for (number, ring) in self.rings.iter().take(SHOWN).enumerate() {
            lines.push(format!(
                "ring {number}: {} edges ({} arcs), {} mm round, {} mm2, {}",
                ring.edges,
                ring.arcs,
                brief(ring.length_mm),
                brief(ring.area_mm2),
                ring.first
            ));
        }
        if self.rings.len() > SHOWN {
            lines.push(format!("and {} more rings", self.rings.len() - SHOWN));
        }
        if let Some(cleaned) = &self.cleaned {
            lines.push(format!(
                "cleaned: {} vertices between edges in line merged, {} short edges dropped, area {:+.4} mm2",
                cleaned.merged, cleaned.dropped, cleaned.area_gained_mm2
            ));
        }
        lines.extend(self.notes.iter().map(|note| format!("note: {note}")));
        lines
    }

    fn unit_line(&self) -> String {
        let units = &self.units;
        match (&units.drawing, &units.stated_by) {
            (Some(drawing), Some(by)) if drawing == &units.part => format!("units: {drawing} ({by})"),
            (Some(drawing), Some(by)) => {
                format!("units: {drawing} ({by}), written in {}: lengths times {}", units.part, units.factor)
            }
            _ => "units: not stated; lengths as drawn".to_owned(),
        }
    }

    fn layer_lines(&self) -> Vec<String> {
        const SHOWN: usize = 50;
        let named: Vec<_> = self.layers.iter().filter(|layer| !layer.name.is_empty()).collect();
        let mut lines: Vec<String> = named
            .iter()
            .take(SHOWN)
            .map(|layer| {
                let state = layer.why.as_ref().map_or("read".to_owned(), |why| format!("not read: {why}"));
                format!("layer \"{}\": {} entities, {state}", short(&layer.name), layer.entities)
            })
            .collect();
        if named.len() > SHOWN {
            lines.push(format!("and {} more layers", named.len() - SHOWN));
        }
        lines
    }

    /// A line for each open run, up to a number.
    pub(super) fn open_lines(&self) -> Vec<String> {
        const SHOWN: usize = 10;
        let mut lines: Vec<String> = self
            .open
            .iter()
            .take(SHOWN)
            .map(|open| {
                let [x, y] = open.from.map(brief);
                let [u, v] = open.to.map(brief);
                let near =
                    open.nearest_mm.map_or(String::new(), |gap| format!(", the next end is {} mm away", brief(gap)));
                format!("open: from ({x}, {y}) to ({u}, {v}){near}, {}", open.first)
            })
            .collect();
        if self.open.len() > SHOWN {
            lines.push(format!("open: {} more", self.open.len() - SHOWN));
        }
        lines
    }
}
