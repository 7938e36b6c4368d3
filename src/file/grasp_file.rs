//! Grasp files as they are read: the header, the setup, and every saved grasp with its scores.

use super::FileFaults;
use super::digest;
use super::reading::text_of;
use super::saving::Stamp;
use super::setup_file::{DRIVES, setup_of};
use super::toml_reader::{self, Table};
use super::writing::folder_of;
use crate::mechanics::{Assessment, Verdict};
use crate::part::EdgeId;
use crate::search::{Setup, Spot};
use std::path::{Path, PathBuf};

/// Names of the scores kept with a grasp, in the order they are written. Those of the weakest direction stand in a
/// table of their own.
pub const SCORES: [&str; 9] = [
    "quality",
    "quality_per_finger",
    "friction_needed_closure",
    "friction_needed",
    "friction_margin",
    "friction_margin_deg",
    "placement_mm",
    "placement_torque_mm",
    "torque_scale_mm",
];
/// Names of the numbers that give the weakest direction.
pub const WEAKEST: [&str; 3] = ["force_deg", "force", "torque"];

/// The scores kept with a grasp; nothing where one has no value.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Scores {
    /// Closed, open or marginal.
    pub verdict: Verdict,
    /// In the order of [`SCORES`].
    pub scores: [Option<f64>; 9],
    /// In the order of [`WEAKEST`].
    pub weakest: [Option<f64>; 3],
}

impl Scores {
    /// The scores of a reading taken with a torque scale in mm.
    pub fn of(a: &Assessment, torque_scale_mm: f64) -> Self {
        let weakest = a.weakest;
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
            ]
            .map(|score| score.filter(|value| value.is_finite())),
            weakest: [weakest.and_then(|w| w.force_deg()), weakest.map(|w| w.force()), weakest.map(|w| w.torque())],
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
    // Every key is asked for before a missing one ends the reading.
    let (part_path, part_name, program) = (root.text("part"), root.text("part_name"), root.text("program"));
    Some(GraspFile {
        program: program.unwrap_or_default(),
        part_path: part_path?.into(),
        part_name: part_name.unwrap_or_default(),
        part_digest: part_digest?,
        setup,
        grasps,
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
    // Written for whoever reads the file; the setup says the same to the program.
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
        scores: Scores { verdict: verdict?, scores, weakest },
        setup,
        own_setup,
    })
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
