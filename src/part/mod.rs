//! What is held: the outline of a part, its mass, and the marks on its edges.
//!
//! A [`Part`] can only be made from rings that pass every rule of an outline, so the rooms above never meet a
//! polygon that crosses itself, a hole outside its part, or a number that is not one.

mod check;
mod edge;
mod fault;
mod mass;
pub mod material;
mod outline;
mod source;
mod sweep;

pub use edge::{Arc, BULGE_LARGEST, Edge, EdgeId};
pub use fault::{PartFault, PartFaults, Touch};
pub use mass::{Mass, RegionMoments};
pub use outline::Outline;
pub use source::Source;

use nalgebra::Point2;
use std::collections::BTreeMap;

/// An interval of an edge that no finger may touch.
#[derive(Debug, Clone, PartialEq)]
pub struct KeepOut {
    /// The edge, numbered as in the part file.
    pub edge: EdgeId,
    /// Start along the edge in mm from its first vertex.
    pub from_mm: f64,
    /// End along the edge in mm from its first vertex.
    pub to_mm: f64,
    /// Why, in the words of the part file.
    pub reason: String,
}

/// An edge whose friction differs from the setup's: a rubber strip, a painted face.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct EdgeFriction {
    /// The edge, numbered as in the part file.
    pub edge: EdgeId,
    /// Friction coefficient of that edge.
    pub mu: f64,
}

/// What one edge may bear before a finger marks it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct EdgeLimit {
    /// The edge, numbered as in the part file.
    pub edge: EdgeId,
    /// Largest pressure under a pad that lies flush, MPa.
    pub face_mpa: Option<f64>,
    /// Largest line load under a pin, or under a pad on an arc, N/mm.
    pub line_n_per_mm: Option<f64>,
}

/// A keep-out as it stands in a description: interval ends may be left open and are in the description's unit.
#[derive(Debug, Clone, PartialEq)]
pub struct KeepOutDescription {
    /// Ring number, 0 for the outer ring.
    pub ring: usize,
    /// Edge number in the ring.
    pub edge: usize,
    /// Start along the edge; the edge's start when absent.
    pub from: Option<f64>,
    /// End along the edge; the edge's end when absent.
    pub to: Option<f64>,
    /// Why.
    pub reason: String,
}

/// An edge that is an arc instead of a straight line.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct ArcDescription {
    /// Ring number, 0 for the outer ring.
    pub ring: usize,
    /// Edge number in the ring.
    pub edge: usize,
    /// tan(sweep / 4), as the DXF reference defines it; positive when the arc runs counter-clockwise from vertex `edge`
    /// to the next.
    pub bulge: f64,
}

/// Everything that may be said about a part before it is checked; see [`Part::new`].
#[derive(Debug, Clone, PartialEq)]
pub struct PartDescription {
    /// Name for people.
    pub name: String,
    /// Length of one unit of the coordinates in mm.
    pub unit_mm: f64,
    /// Rings of vertices: the outer ring first, then the holes. Either winding; a closing vertex may repeat the first.
    pub rings: Vec<Vec<[f64; 2]>>,
    /// Edges that are arcs.
    pub arcs: Vec<ArcDescription>,
    /// Thickness in the description's unit.
    pub thickness: Option<f64>,
    /// Material, a row of [`material::DENSITIES`] where it is to give the density.
    pub material: Option<String>,
    /// Density in kg/m3; wins over the material.
    pub density_kg_m3: Option<f64>,
    /// Mass in kg; wins over any density.
    pub mass_kg: Option<f64>,
    /// Centre of mass in the description's unit; the centroid when absent.
    pub com: Option<[f64; 2]>,
    /// Intervals that no finger may touch.
    pub keep_outs: Vec<KeepOutDescription>,
    /// Edges with their own friction: ring, edge, mu.
    pub edge_friction: Vec<(usize, usize, f64)>,
    /// What edges may bear.
    pub edge_limits: Vec<EdgeLimit>,
}

impl PartDescription {
    /// A description with nothing but a name, rings in mm, and every option absent.
    pub fn bare(name: &str, rings: Vec<Vec<[f64; 2]>>) -> Self {
        Self {
            name: name.to_owned(),
            unit_mm: 1.0,
            rings,
            arcs: Vec::new(),
            thickness: None,
            material: None,
            density_kg_m3: None,
            mass_kg: None,
            com: None,
            keep_outs: Vec::new(),
            edge_friction: Vec::new(),
            edge_limits: Vec::new(),
        }
    }
}

/// A checked part. Positions are in mm in the *local frame*: file coordinates less [`Outline::origin`], so that a part
/// drawn a kilometre from the origin loses no digits in its torques. Only what is shown or saved adds the origin back.
#[derive(Debug, Clone)]
pub struct Part {
    name: String,
    outline: Outline,
    thickness_mm: Option<f64>,
    material: Option<String>,
    mass: Option<Mass>,
    com: Point2<f64>,
    keep_outs: Vec<KeepOut>,
    edge_friction: Vec<EdgeFriction>,
    edge_limits: Vec<EdgeLimit>,
}

impl Part {
    /// Checks a description and builds the part.
    ///
    /// # Errors
    /// Every fault found, the outline's first; a part with any fault is not built.
    pub fn new(description: PartDescription) -> Result<Self, PartFaults> {
        let d = description;
        let mut faults = Vec::new();
        for (key, value, most) in [
            ("thickness", d.thickness, check::FARTHEST_MM / d.unit_mm),
            ("density_kg_m3", d.density_kg_m3, DENSEST_KG_M3),
            ("mass_kg", d.mass_kg, HEAVIEST_KG),
        ] {
            if let Some(value) = value
                && !(value > 0.0 && value <= most)
            {
                faults.push(PartFault::NotPositive { key, value, most });
            }
        }
        if let Some(com) = d.com
            && !com.iter().all(|x| x.is_finite() && (x * d.unit_mm).abs() <= check::FARTHEST_MM)
        {
            faults.push(PartFault::BadCentreOfMass { x: com[0], y: com[1] });
        }
        let bulges = checked_arcs(&d, &mut faults);
        let outline = match Outline::new(&d.rings, &bulges, d.unit_mm) {
            Ok(outline) => outline,
            Err(outline_faults) => {
                let mut all = outline_faults.0;
                all.extend(faults);
                return Err(PartFaults(all));
            }
        };
        let keep_outs = checked_keep_outs(&d, &outline, &mut faults);
        let edge_friction = checked_edge_friction(&d, &outline, &mut faults);
        let edge_limits = checked_edge_limits(&d, &outline, &mut faults);
        if !faults.is_empty() {
            return Err(PartFaults(faults));
        }
        let first = d.rings[0][0];
        let com = match d.com {
            Some([x, y]) => Point2::new((x - first[0]) * d.unit_mm, (y - first[1]) * d.unit_mm),
            None => outline.region().centroid,
        };
        let thickness_mm = d.thickness.map(|t| t * d.unit_mm);
        let density =
            d.density_kg_m3.or_else(|| d.material.as_deref().and_then(material::density).map(|row| row.kg_m3));
        let mass_kg = d.mass_kg.or_else(|| Some(mass_of(density?, thickness_mm?, outline.region())));
        let mass = mass_kg.map(|kg| Mass::of(kg, outline.region(), com));
        Ok(Self {
            name: d.name,
            outline,
            thickness_mm,
            material: d.material,
            mass,
            com,
            keep_outs,
            edge_friction,
            edge_limits,
        })
    }

    /// The same part of a material with a density in kg/m3; its outline, marks and centre of mass stay. Nothing when the
    /// thickness is not known, for then no density gives a mass, or when the density cannot be one.
    pub fn with_density(&self, material: &str, kg_m3: f64) -> Option<Self> {
        if !(kg_m3 > 0.0 && kg_m3 <= DENSEST_KG_M3) {
            return None;
        }
        let region = self.outline.region();
        let mass = Mass::of(mass_of(kg_m3, self.thickness_mm?, region), region, self.com);
        Some(Self { material: Some(material.to_owned()), mass: Some(mass), ..self.clone() })
    }

    /// Name for people, as written in the file.
    pub fn name(&self) -> &str {
        &self.name
    }

    /// The outline.
    pub fn outline(&self) -> &Outline {
        &self.outline
    }

    /// Thickness in mm, when known.
    pub fn thickness_mm(&self) -> Option<f64> {
        self.thickness_mm
    }

    /// Material as written in the file.
    pub fn material(&self) -> Option<&str> {
        self.material.as_deref()
    }

    /// Mass and polar moment, when the file gives enough to know them.
    pub fn mass(&self) -> Option<&Mass> {
        self.mass.as_ref()
    }

    /// Centre of mass in the local frame, mm.
    pub fn com(&self) -> Point2<f64> {
        self.com
    }

    /// Where nothing may touch.
    pub fn keep_outs(&self) -> &[KeepOut] {
        &self.keep_outs
    }

    /// Edges with their own friction.
    pub fn edge_friction(&self) -> &[EdgeFriction] {
        &self.edge_friction
    }

    /// Friction coefficient of an edge: its own, or `mu` where it has none. The last entry for an edge wins.
    pub fn mu_on(&self, edge: EdgeId, mu: f64) -> f64 {
        self.edge_friction.iter().rev().find(|own| own.edge == edge).map_or(mu, |own| own.mu)
    }

    /// Edges with limits on what they may bear.
    pub fn edge_limits(&self) -> &[EdgeLimit] {
        &self.edge_limits
    }

    /// What an edge may bear, where it is stated; of several entries for an edge the least.
    pub fn limit_on(&self, edge: EdgeId) -> Option<EdgeLimit> {
        let least = |a: Option<f64>, b: Option<f64>| a.into_iter().chain(b).reduce(f64::min);
        self.edge_limits.iter().filter(|own| own.edge == edge).copied().reduce(|a, b| EdgeLimit {
            face_mpa: least(a.face_mpa, b.face_mpa),
            line_n_per_mm: least(a.line_n_per_mm, b.line_n_per_mm),
            ..a
        })
    }

    /// A local point in the file's frame, mm: what is shown and saved.
    pub fn file_point(&self, local: Point2<f64>) -> Point2<f64> {
        local + self.outline.origin()
    }

    /// Distance from the centre of mass to the farthest point of the outer ring, mm: the default torque scale.
    pub fn reach_mm(&self) -> f64 {
        self.outline.farthest_from(self.com)
    }

    /// Radius of gyration about the centre of mass, mm; depends on the shape alone, not on the mass.
    pub fn gyration_mm(&self) -> f64 {
        self.outline.region().gyration_about(self.com)
    }
}

/// Larger numbers are slips of the keyboard: the densest element has 22 600 kg/m3 (common practice, no source).
const DENSEST_KG_M3: f64 = 1e5;
/// Larger numbers are slips of the keyboard, and would overflow on the way to a force.
const HEAVIEST_KG: f64 = 1e12;

/// Mass in kg of a plate of a density and a thickness.
fn mass_of(kg_m3: f64, thickness_mm: f64, region: &RegionMoments) -> f64 {
    kg_m3 * thickness_mm * region.area_mm2 * 1e-9
}

/// Bulges by edge; those that are none, or of no edge, are noted.
fn checked_arcs(d: &PartDescription, faults: &mut Vec<PartFault>) -> BTreeMap<EdgeId, f64> {
    let have: Vec<usize> = d.rings.iter().map(check::vertex_count).collect();
    let mut bulges = BTreeMap::new();
    for (entry, arc) in d.arcs.iter().enumerate() {
        let id = EdgeId { ring: arc.ring, edge: arc.edge };
        if have.get(arc.ring).is_none_or(|&edges| arc.edge >= edges) {
            faults.push(PartFault::NoSuchEdge { table: "arc", entry, edge: id, have: have.clone() });
        } else if !(arc.bulge.abs() <= BULGE_LARGEST) {
            faults.push(PartFault::BadBulge { entry, bulge: arc.bulge });
        } else if bulges.insert(id, arc.bulge).is_some() {
            faults.push(PartFault::ArcTwice { entry, edge: id });
        }
    }
    bulges.retain(|_, bulge| bulge.abs() >= edge::STRAIGHT);
    bulges
}

fn checked_keep_outs(d: &PartDescription, outline: &Outline, faults: &mut Vec<PartFault>) -> Vec<KeepOut> {
    let mut kept = Vec::with_capacity(d.keep_outs.len());
    for (entry, raw) in d.keep_outs.iter().enumerate() {
        let id = EdgeId { ring: raw.ring, edge: raw.edge };
        let Some(edge) = outline.edge(id) else {
            faults.push(PartFault::NoSuchEdge { table: "keep_out", entry, edge: id, have: outline.ring_sizes() });
            continue;
        };
        let from_mm = raw.from.map_or(0.0, |from| from * d.unit_mm);
        let to_mm = raw.to.map_or(edge.length_mm(), |to| to * d.unit_mm);
        // `to` may overshoot the edge by what rounding in a drawing leaves; it is cut to the edge.
        if !(from_mm.is_finite()
            && to_mm.is_finite()
            && from_mm >= 0.0
            && from_mm < to_mm
            && from_mm < edge.length_mm())
        {
            faults.push(PartFault::BadInterval { entry, edge: id, from_mm, to_mm, length_mm: edge.length_mm() });
            continue;
        }
        kept.push(KeepOut { edge: id, from_mm, to_mm: to_mm.min(edge.length_mm()), reason: raw.reason.clone() });
    }
    kept
}

fn checked_edge_friction(d: &PartDescription, outline: &Outline, faults: &mut Vec<PartFault>) -> Vec<EdgeFriction> {
    let mut own = Vec::with_capacity(d.edge_friction.len());
    for (entry, &(ring, edge, mu)) in d.edge_friction.iter().enumerate() {
        let id = EdgeId { ring, edge };
        if outline.edge(id).is_none() {
            faults.push(PartFault::NoSuchEdge { table: "edge_friction", entry, edge: id, have: outline.ring_sizes() });
        } else if !(mu.is_finite() && (0.0..=MU_LARGEST).contains(&mu)) {
            faults.push(PartFault::BadEdgeFriction { entry, mu });
        } else {
            own.push(EdgeFriction { edge: id, mu });
        }
    }
    own
}

fn checked_edge_limits(d: &PartDescription, outline: &Outline, faults: &mut Vec<PartFault>) -> Vec<EdgeLimit> {
    let mut limits = Vec::with_capacity(d.edge_limits.len());
    for (entry, limit) in d.edge_limits.iter().enumerate() {
        if outline.edge(limit.edge).is_none() {
            let (edge, have) = (limit.edge, outline.ring_sizes());
            faults.push(PartFault::NoSuchEdge { table: "edge_limit", entry, edge, have });
            continue;
        }
        let values = [("face_mpa", limit.face_mpa), ("line_n_per_mm", limit.line_n_per_mm)];
        let bad =
            values.into_iter().find_map(|(key, value)| Some((key, value.filter(|v| !(*v > 0.0 && v.is_finite()))?)));
        match bad {
            Some((key, value)) => faults.push(PartFault::BadEdgeLimit { entry, key, value }),
            None => limits.push(*limit),
        }
    }
    limits
}

/// Largest friction coefficient taken as a number rather than a slip of the keyboard. Tacky rubber reaches about 4
/// (common practice, no source); ten leaves room.
pub const MU_LARGEST: f64 = 10.0;
