//! Grasp files as they are read: the header, the setup, and every saved grasp with its scores.

use super::FileFaults;
use super::digest;
use super::reading::text_of;
use super::saving::Stamp;
use super::setup_file::{DRIVES, setup_of};
use super::toml_reader::{self, Table};
use super::writing::folder_of;
use crate::mechanics::{Assessment, CaseHolding, Holding, Verdict};
use crate::part::{EdgeId, Part};
use crate::search::{Setup, Spot};
use std::path::{Path, PathBuf};
use std::sync::Arc;

/// Names of the scores kept with a grasp, in the order they are written. Those of the weakest direction stand in a
/// table of their own.
pub const SCORES: [&str; SCORE_COUNT] = [
    "quality",
    "quality_per_finger",
    "friction_needed_closure",
    "friction_needed",
    "friction_margin",
    "friction_margin_deg",
    "placement_mm",
    "placement_torque_mm",
    "torque_scale_mm",
    "friction_needed_holding",
    "squeeze_n",
    "squeeze_total_n",
    "load_margin",
];
const SCORE_COUNT: usize = 13;
/// Names of the numbers that give the weakest direction.
pub const WEAKEST: [&str; 3] = ["force_deg", "force", "torque"];

/// The scores kept with a grasp; nothing where one has no value.
#[derive(Debug, Clone, PartialEq)]
pub struct Scores {
    /// Closed, open or marginal.
    pub verdict: Verdict,
    /// In the order of [`SCORES`].
    pub scores: [Option<f64>; SCORE_COUNT],
    /// In the order of [`WEAKEST`].
    pub weakest: [Option<f64>; 3],
    /// Every load case held; nothing when there were none.
    pub held: Option<bool>,
    /// Name of the load case that asks most.
    pub governing_load: Option<String>,
    /// What each load case asks, in the setup's order.
    pub loads: Vec<SavedLoad>,
}

/// What one load case asks, as kept with a grasp.
#[derive(Debug, Clone, PartialEq)]
pub struct SavedLoad {
    /// Name of the case.
    pub name: String,
    /// Least squeeze, N per finger; nothing when none holds it.
    pub squeeze_n: Option<f64>,
    /// Held within the limit.
    pub held: bool,
    /// Largest multiple of the load that is held; nothing without a limit.
    pub margin: Option<f64>,
    /// Worst direction of the acceleration, degrees from +x.
    pub direction_deg: Option<f64>,
    /// For each finger its force, N: into the material, along the edge, toward the viewer. One set of many.
    pub finger_forces_n: Vec<[f64; 3]>,
}

impl SavedLoad {
    fn of(case: &CaseHolding) -> Self {
        Self {
            name: case.name.clone(),
            squeeze_n: case.squeeze_n.filter(|n| n.is_finite()),
            held: case.held,
            margin: case.margin.filter(|margin| margin.is_finite()),
            direction_deg: case.direction_deg,
            finger_forces_n: case.forces.iter().map(|f| [f.normal_n, f.along_n, f.up_n]).collect(),
        }
    }
}

/// A density chosen for a part whose file gives no mass.
#[derive(Debug, Clone, PartialEq)]
pub struct KeptDensity {
    /// The material.
    pub of: String,
    /// Its density, kg/m3.
    pub kg_m3: f64,
}

impl KeptDensity {
    /// The part with the mass this density gives it; nothing where the part has a mass of its own, or no thickness.
    pub fn applied_to(&self, part: &Part) -> Option<Part> {
        if part.mass().is_some() { None } else { part.with_density(&self.of, self.kg_m3) }
    }
}

impl Scores {
    /// The scores of a reading of so many fingers taken with a torque scale in mm.
    pub fn of(a: &Assessment, torque_scale_mm: f64, fingers: usize) -> Self {
        let weakest = a.weakest;
        let holding = a.holding.as_ref();
        let squeeze_n = holding.and_then(Holding::squeeze_n);
        Self {
            verdict: a.verdict,
            scores: [
                Some(a.quality),
                Some(a.quality_per_finger),
                a.friction_needed_closure,
                a.friction_needed,
                a.friction_margin,
                a.friction_margin_deg,
                Some(a.placement.mm),
                Some(a.placement.torque_mm),
                Some(torque_scale_mm),
                a.friction_needed_holding,
                squeeze_n,
                squeeze_n.map(|n| n * fingers as f64),
                holding.and_then(Holding::load_margin),
            ]
            .map(|score| score.filter(|value| value.is_finite())),
            weakest: [weakest.and_then(|w| w.force_deg()), weakest.map(|w| w.force()), weakest.map(|w| w.torque())],
            held: holding.map(Holding::held),
            governing_load: holding.map(|holding| holding.governing_case().name.clone()),
            loads: holding.map_or(Vec::new(), |holding| holding.cases.iter().map(SavedLoad::of).collect()),
        }
    }
}

/// A grasp as it stands in a file.
#[derive(Debug, Clone, PartialEq)]
pub struct SavedGrasp {
    /// Name for people.
    pub name: String,
    /// Why it was kept.
    pub note: String,
    /// When it was kept.
    pub time: Option<jiff::Timestamp>,
    /// Where the fingers stand.
    pub spots: Vec<Spot>,
    /// Its scores when it was kept.
    pub scores: Scores,
    /// The setup it was kept under: its own, or the file's.
    pub setup: Setup,
    /// True when that setup stands with the grasp itself.
    pub own_setup: bool,
    /// The density it was kept under, where one was chosen.
    pub density: Option<KeptDensity>,
}

impl SavedGrasp {
    /// The part as the grasp was scored on it: with the chosen density, where the part file still gives no mass.
    pub fn part(&self, part: &Arc<Part>) -> Arc<Part> {
        self.density.as_ref().and_then(|density| density.applied_to(part)).map_or_else(|| Arc::clone(part), Arc::new)
    }
}

/// A grasp file.
#[derive(Debug, Clone, PartialEq)]
pub struct GraspFile {
    /// Program and version that began the file.
    pub program: String,
    /// The part file, from where the grasp file is.
    pub part_path: PathBuf,
    /// The part's name.
    pub part_name: String,
    /// Digest of the part the scores belong to; see [`super::part_digest`].
    pub part_digest: String,
    /// The setup in force when the file was begun.
    pub setup: Setup,
    /// The grasps, in file order.
    pub grasps: Vec<SavedGrasp>,
    /// In a recovery file: names of grasps that were to be taken out of the grasp file beside it.
    pub removed: Vec<String>,
    /// Stamp of the file as read.
    pub stamp: Stamp,
}

/// Reads a grasp file.
///
/// # Errors
/// Every fault found.
pub fn read_grasps(path: &Path) -> Result<GraspFile, FileFaults> {
    grasps_from_text(path, &text_of(path)?)
}

/// Reads grasps from the text of a grasp file; `path` names the file in faults and places the part.
///
/// # Errors
/// Every fault found.
pub fn grasps_from_text(path: &Path, text: &str) -> Result<GraspFile, FileFaults> {
    let (mut file, _) = toml_reader::read(path, text, file_of)?;
    file.part_path = folder_of(path).join(&file.part_path);
    file.stamp = Stamp::of(text.as_bytes());
    Ok(file)
}

fn file_of(root: &Table<'_>) -> Option<GraspFile> {
    root.require("part", "give the path of the part file");
    root.require("part_digest", "without it nobody can tell whether the part changed");
    let part_digest = root.text("part_digest");
    if let Some(digest) = &part_digest
        && digest.len() != digest::HEX_DIGITS
    {
        root.fault("part_digest", format!("`part_digest` has {} digits, not {}", digest.len(), digest::HEX_DIGITS));
    }
    root.get("caution");
    root.require("setup", "the tables [setup.friction] and so on hold what the grasps were scored under");
    let setup_table = root.table("setup");
    let setup = setup_table.as_ref().map_or_else(Setup::default, setup_of);
    if let Some(table) = setup_table {
        table.finish();
    }
    let mut grasps = Vec::new();
    for table in root.tables("grasp") {
        grasps.extend(grasp_of(&table, &setup));
        table.finish();
    }
    let removed = root.texts("removed");
    // Every key is asked for before a missing one ends the reading.
    let (part_path, part_name, program) = (root.text("part"), root.text("part_name"), root.text("program"));
    Some(GraspFile {
        program: program.unwrap_or_default(),
        part_path: part_path?.into(),
        part_name: part_name.unwrap_or_default(),
        part_digest: part_digest?,
        setup,
        grasps,
        removed: removed.unwrap_or_default(),
        stamp: Stamp::of(b""),
    })
}

fn grasp_of(table: &Table<'_>, file_setup: &Setup) -> Option<SavedGrasp> {
    const VERDICTS: [Verdict; 3] = [Verdict::Closed, Verdict::Open, Verdict::Marginal];
    table.require("name", "every grasp has one");
    table.require("contacts", "a grasp has two to six");
    table.require("verdict", "closed, open or marginal");
    let spots = table.tables("contacts").into_iter().map(spot_of).collect::<Option<Vec<_>>>();
    let verdict = table.word("verdict", &VERDICTS.map(|verdict| (verdict.word(), verdict)));
    let scores = SCORES.map(|name| table.number(name));
    let mut weakest = [None; 3];
    if let Some(inner) = table.table("weakest") {
        weakest = WEAKEST.map(|name| inner.number(name));
        inner.finish();
    }
    if let Some(inner) = table.table("escape") {
        inner.text("kind");
        inner.number("toward_deg");
        inner.numbers::<2>("about_mm");
        inner.text("sense");
        inner.finish();
    }
    // Written for whoever sets up the jaws; the contacts say the same to the program.
    if let Some(inner) = table.table("jaws") {
        inner.numbers::<2>("centre_mm");
        inner.number("angle_deg");
        inner.number("opening_mm");
        inner.flag("inside");
        inner.finish();
    }
    let (held, governing_load) = (table.flag("held"), table.text("governing_load"));
    let loads = table.tables("loads").into_iter().filter_map(load_of).collect();
    let density = density_of(table);
    // Written for whoever reads the file; the setup says the same to the program.
    table.number("mass_kg");
    table.word("drive", &DRIVES);
    table.get("torque_scale");
    table.text("assumed");
    let own = table.table("setup");
    let own_setup = own.is_some();
    let setup = own.as_ref().map_or_else(|| file_setup.clone(), setup_of);
    if let Some(own) = own {
        own.finish();
    }
    let (name, note, time) = (table.text("name"), table.text("note"), table.time("time"));
    Some(SavedGrasp {
        name: name.unwrap_or_default(),
        note: note.unwrap_or_default(),
        time,
        spots: spots?,
        scores: Scores { verdict: verdict?, scores, weakest, held, governing_load, loads },
        setup,
        own_setup,
        density,
    })
}

fn load_of(table: Table<'_>) -> Option<SavedLoad> {
    table.require("name", "it is the load case of the setup");
    table.require("held", "true or false");
    let (name, held) = (table.text("name"), table.flag("held"));
    let [squeeze_n, margin, direction_deg] = ["squeeze_n", "margin", "direction_deg"].map(|key| table.number(key));
    let finger_forces_n = table.rows("finger_forces_n").unwrap_or_default();
    table.finish();
    Some(SavedLoad { name: name?, squeeze_n, held: held?, margin, direction_deg, finger_forces_n })
}

fn density_of(table: &Table<'_>) -> Option<KeptDensity> {
    const BOTH: &str = "a chosen density has a number and the material it is of";
    for (key, other) in [("density_kg_m3", "density_of"), ("density_of", "density_kg_m3")] {
        if table.has(key) {
            table.require(other, BOTH);
        }
    }
    let (kg_m3, of) = (table.number("density_kg_m3"), table.text("density_of"));
    let kg_m3 = kg_m3.filter(|&kg_m3| {
        let sound = kg_m3 > 0.0;
        if !sound {
            let named = table.named("density_kg_m3");
            table.fault("density_kg_m3", format!("{named} is {kg_m3}; give a number above 0"));
        }
        sound
    });
    Some(KeptDensity { of: of?, kg_m3: kg_m3? })
}

fn spot_of(table: Table<'_>) -> Option<Spot> {
    for key in ["ring", "edge", "along_mm"] {
        table.require(key, "a contact is a ring, an edge and a distance along it");
    }
    let (ring, edge) = (table.index("ring"), table.index("edge"));
    let along_mm = table.number("along_mm");
    // What follows from these and the part.
    table.numbers::<2>("point_mm");
    table.numbers::<2>("normal");
    table.number("mu");
    table.finish();
    Some(Spot { edge: EdgeId { ring: ring?, edge: edge? }, along_mm: along_mm? })
}
