//! Part files: from TOML to a checked part, every fault with its line.

use super::reading::text_of;
use super::toml_reader::{self, Table, described, nearest};
use super::{FileFault, FileFaults};
use crate::part::{ArcDescription, EdgeId, EdgeLimit, KeepOutDescription, Part, PartDescription, PartFault, material};
use std::path::Path;
use toml::Spanned;
use toml::de::DeValue;

/// Units a part file may be in, and the length of one in mm.
const UNITS: [(&str, f64); 4] = [("mm", 1.0), ("cm", 10.0), ("m", 1000.0), ("in", 25.4)];
/// Faults noted in one ring before the rest of it is only counted.
const MOST_IN_RING: usize = 20;

/// Reads a part file.
///
/// # Errors
/// Every fault found.
pub fn read_part(path: &Path) -> Result<Part, FileFaults> {
    read_part_with_notes(path).map(|(part, _)| part)
}

/// Reads a part file and says what is worth knowing without being a fault: a material without a known density.
///
/// # Errors
/// Every fault found.
pub fn read_part_with_notes(path: &Path) -> Result<(Part, Vec<FileFault>), FileFaults> {
    part_from_text(path, &text_of(path)?)
}

/// Reads a part from the text of a part file; `path` names the file in faults, and the part when it has no name.
///
/// # Errors
/// Every fault found.
pub fn part_from_text(path: &Path, text: &str) -> Result<(Part, Vec<FileFault>), FileFaults> {
    toml_reader::read(path, text, |root| part_of(root, path))
}

fn part_of(root: &Table<'_>, path: &Path) -> Option<Part> {
    let name = root.text("name");
    let name = name.unwrap_or_else(|| path.file_stem().map_or(String::new(), |s| s.to_string_lossy().into_owned()));
    let unit_mm = match root.get("units") {
        Some(_) => root.word("units", &UNITS),
        None => Some(1.0),
    };
    let thickness = root.number("thickness");
    let material = root.text("material");
    let density_kg_m3 = root.number("density_kg_m3");
    let mass_kg = root.number("mass_kg");
    let com = root.numbers::<2>("com");
    let places = Rings::of(root);
    let rings = places.read(root);
    let keep_out_tables = root.tables("keep_out");
    let keep_outs = keep_out_tables.iter().map(keep_out).collect();
    let friction_tables = root.tables("edge_friction");
    let edge_friction = friction_tables.iter().map(edge_friction).collect();
    let limit_tables = root.tables("edge_limit");
    let edge_limits = limit_tables.iter().map(edge_limit).collect();
    let arc_tables = root.tables("arc");
    let arcs = arc_tables.iter().map(arc).collect();
    note_unknown_material(root, material.as_deref(), density_kg_m3.is_some() || mass_kg.is_some());
    let built = rings.zip(unit_mm).and_then(|(rings, unit_mm)| {
        let description = PartDescription {
            name,
            unit_mm,
            rings,
            arcs,
            thickness,
            material,
            density_kg_m3,
            mass_kg,
            com,
            keep_outs,
            edge_friction,
            edge_limits,
        };
        match Part::new(description) {
            Ok(part) => Some(part),
            Err(faults) => {
                for fault in faults.0 {
                    place(&fault, root, &places, &|table| match table {
                        "keep_out" => &keep_out_tables,
                        "arc" => &arc_tables,
                        "edge_limit" => &limit_tables,
                        _ => &friction_tables,
                    });
                }
                None
            }
        }
    });
    keep_out_tables.into_iter().chain(friction_tables).chain(arc_tables).chain(limit_tables).for_each(Table::finish);
    built
}

/// The arrays that hold the rings: the outer one, then the holes.
struct Rings<'a>(Vec<Option<&'a Spanned<DeValue<'a>>>>);

impl<'a> Rings<'a> {
    fn of(root: &Table<'a>) -> Self {
        root.require("outer", "give at least three vertices, such as [[0, 0], [80, 0], [80, 40]]");
        let mut rings = vec![root.get("outer")];
        if let Some(holes) = root.get("holes") {
            match holes.get_ref() {
                DeValue::Array(list) => rings.extend(list.iter().map(Some)),
                other => root.fault(
                    "holes",
                    format!("`holes` is {}; give a list of rings, each a list of vertices", described(other)),
                ),
            }
        }
        Self(rings)
    }

    /// All rings, or nothing when one cannot be read.
    fn read(&self, root: &Table<'_>) -> Option<Vec<Vec<[f64; 2]>>> {
        // Each ring is read even when one before it failed, so that all faults are listed.
        let rings: Vec<_> = self.0.iter().enumerate().map(|(number, ring)| read_ring(root, number, (*ring)?)).collect();
        rings.into_iter().collect()
    }

    /// Where a vertex stands in the file; where its ring does when it has none of that number.
    fn place(&self, ring: usize, vertex: Option<usize>) -> Option<usize> {
        let ring = (*self.0.get(ring)?)?;
        let vertex = vertex.and_then(|vertex| ring.get_ref().as_array()?.get(vertex));
        Some(vertex.unwrap_or(ring).span().start)
    }
}

fn read_ring(root: &Table<'_>, number: usize, ring: &Spanned<DeValue<'_>>) -> Option<Vec<[f64; 2]>> {
    let Some(list) = ring.get_ref().as_array() else {
        root.sheet().fault(
            Some(ring.span().start),
            format!("ring {number} is {}; give a list of vertices [x, y]", described(ring.get_ref())),
        );
        return None;
    };
    let mut vertices = Vec::with_capacity(list.len());
    let mut bad = 0;
    for (vertex, value) in list.iter().enumerate() {
        match coordinates(value.get_ref()) {
            Some(point) => vertices.push(point),
            None if bad == MOST_IN_RING => {
                root.sheet().and_more();
                return None;
            }
            None => {
                bad += 1;
                root.sheet().fault(
                    Some(value.span().start),
                    format!(
                        "ring {number} vertex {vertex} is {}; give two numbers [x, y]",
                        match value.get_ref().as_array() {
                            Some(list) if list.len() == 2 => "not two numbers".to_owned(),
                            _ => described(value.get_ref()),
                        }
                    ),
                );
            }
        }
    }
    (bad == 0).then_some(vertices)
}

fn coordinates(value: &DeValue<'_>) -> Option<[f64; 2]> {
    let list = value.as_array()?;
    if list.len() != 2 {
        return None;
    }
    Some([toml_reader::number(list.first()?.get_ref())?, toml_reader::number(list.get(1)?.get_ref())?])
}

/// An entry that lacks something is a fault by itself; what stands in for it keeps the entries' numbers in step.
fn keep_out(table: &Table<'_>) -> KeepOutDescription {
    let (ring, edge) = edge_numbers(table);
    KeepOutDescription {
        ring,
        edge,
        from: table.number("from"),
        to: table.number("to"),
        reason: table.text("reason").unwrap_or_default(),
    }
}

fn edge_friction(table: &Table<'_>) -> (usize, usize, f64) {
    let (ring, edge) = edge_numbers(table);
    table.require("mu", "give the friction coefficient of this edge");
    (ring, edge, table.number("mu").unwrap_or(0.0))
}

fn edge_limit(table: &Table<'_>) -> EdgeLimit {
    let (ring, edge) = edge_numbers(table);
    let limit = EdgeLimit {
        edge: EdgeId { ring, edge },
        face_mpa: table.number("face_mpa"),
        line_n_per_mm: table.number("line_n_per_mm"),
    };
    if !table.has("face_mpa") {
        table.require(
            "line_n_per_mm",
            "give what the edge may bear: `face_mpa` under pads or `line_n_per_mm` under pins",
        );
    }
    limit
}

fn arc(table: &Table<'_>) -> ArcDescription {
    let (ring, edge) = edge_numbers(table);
    table.require("bulge", "give the tangent of a quarter of the angle swept, positive counter-clockwise");
    ArcDescription { ring, edge, bulge: table.number("bulge").unwrap_or(0.0) }
}

fn edge_numbers(table: &Table<'_>) -> (usize, usize) {
    table.require("ring", "0 is the outer ring, 1 the first hole");
    table.require("edge", "edge i runs from vertex i to vertex i + 1, counted from 0");
    (table.index("ring").unwrap_or(0), table.index("edge").unwrap_or(0))
}

fn note_unknown_material(root: &Table<'_>, material: Option<&str>, mass_is_known: bool) {
    let Some(name) = material else { return };
    if mass_is_known || material::density(name).is_some() {
        return;
    }
    let near = nearest(name.trim(), material::DENSITIES.iter().flat_map(material::Density::names))
        .map_or(String::new(), |row| format!(" (nearest in the table: \"{row}\")"));
    root.sheet().note(
        root.place("material"),
        format!("no density is known for \"{name}\"{near}, so the mass is unknown; give `density_kg_m3` or `mass_kg`"),
    );
}

/// Notes a fault of the part at the line of the file that caused it.
fn place<'a>(fault: &PartFault, root: &Table<'_>, rings: &Rings<'_>, tables: &dyn Fn(&'static str) -> &'a [Table<'a>]) {
    let entry_place = |table: &'static str, entry: usize, keys: &[&str]| {
        let table = tables(table).get(entry)?;
        keys.iter().find(|key| table.has(key)).map_or(table.at(), |key| table.place(key))
    };
    let at = match fault {
        PartFault::NoRing => root.place("outer"),
        PartFault::NotFinite { ring, vertex }
        | PartFault::TooFar { ring, vertex, .. }
        | PartFault::RepeatedVertex { ring, vertex, .. }
        | PartFault::Spike { ring, vertex } => rings.place(*ring, Some(*vertex)),
        PartFault::Meet { a: EdgeId { ring, edge }, .. } => rings.place(*ring, Some(*edge)),
        PartFault::TooFewVertices { ring, .. }
        | PartFault::NoArea { ring, .. }
        | PartFault::HoleOutside { ring }
        | PartFault::HoleInHole { ring, .. } => rings.place(*ring, None),
        PartFault::TooManyVertices { .. } => root.place("outer"),
        PartFault::TooSmall { .. } if root.has("units") => root.place("units"),
        PartFault::TooSmall { .. } => root.place("outer"),
        PartFault::NotPositive { key, .. } => root.place(key),
        PartFault::BadCentreOfMass { .. } => root.place("com"),
        PartFault::NoSuchEdge { table, entry, .. } => entry_place(table, *entry, &["edge", "ring"]),
        PartFault::BadInterval { entry, .. } => entry_place("keep_out", *entry, &["from", "to"]),
        PartFault::BadEdgeFriction { entry, .. } => entry_place("edge_friction", *entry, &["mu"]),
        PartFault::BadEdgeLimit { entry, key, .. } => entry_place("edge_limit", *entry, &[key]),
        PartFault::BadBulge { entry, .. } => entry_place("arc", *entry, &["bulge"]),
        PartFault::ArcTwice { entry, .. } => entry_place("arc", *entry, &["edge"]),
        PartFault::AndMore => {
            root.sheet().and_more();
            return;
        }
    };
    root.sheet().fault(at, fault.to_string());
}
