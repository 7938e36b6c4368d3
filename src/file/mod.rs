//! What is kept: part, setup and grasp files, and careful writing.

use crate::mechanics::Assessment;
use crate::part::Part;
use crate::search::{Grasp, Setup};
use std::path::{Path, PathBuf};

/// One fault of a file.
#[derive(Debug, Clone, PartialEq)]
pub struct FileFault {
    /// Line, from 1, where it can be told.
    pub line: Option<usize>,
    /// What is wrong and the mend.
    pub text: String,
}

/// Every fault of a file, the deciding one first.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[error("{}", .path.display())]
pub struct FileFaults {
    /// The file.
    pub path: PathBuf,
    /// Its faults.
    pub faults: Vec<FileFault>,
}

/// Reads a part file.
///
/// # Errors
/// Every fault found.
pub fn read_part(path: &Path) -> Result<Part, FileFaults> {
    Err(FileFaults { path: path.to_owned(), faults: Vec::new() })
}

/// Reads a setup file.
///
/// # Errors
/// Every fault found.
pub fn read_setup(path: &Path) -> Result<Setup, FileFaults> {
    Err(FileFaults { path: path.to_owned(), faults: Vec::new() })
}

/// Contents of a grasp file as last seen, to notice a change by someone else.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Stamp(String);

/// A grasp to be saved.
#[derive(Debug, Clone, PartialEq)]
pub struct Keep {
    /// Name for people.
    pub name: String,
    /// Why it was kept.
    pub note: String,
    /// Where the fingers stand.
    pub grasp: Grasp,
    /// Its scores.
    pub assessment: Assessment,
    /// The setup they were scored under.
    pub setup: Setup,
}

/// Why nothing was saved. The old file is untouched in every case.
#[derive(Debug, thiserror::Error)]
pub enum SaveFault {
    /// The file is not the one that was read.
    #[error("{}: changed by someone else meanwhile", .0.display())]
    ChangedMeanwhile(PathBuf),
    /// What stands there is no grasp file of this part.
    #[error("{0}")]
    Unreadable(FileFaults),
    /// The file belongs to another part.
    #[error("{}: holds grasps of another part, or of this part before it changed", .0.display())]
    OtherPart(PathBuf),
    /// The system refused.
    #[error("{}: {source}", .path.display())]
    Io {
        /// The file.
        path: PathBuf,
        /// Why.
        source: std::io::Error,
    },
}

/// Appends grasps to a grasp file, making it when there is none: written beside, synced, renamed.
///
/// `known` is the stamp from the last read or save (nothing when the file was not there); a file that differs is not
/// written over.
///
/// # Errors
/// [`SaveFault`]; the old file is untouched.
pub fn save(
    path: &Path,
    part_path: &Path,
    part: &Part,
    keeps: &[Keep],
    known: Option<&Stamp>,
) -> Result<Stamp, SaveFault> {
    let _ = (part_path, part, keeps, known);
    Err(SaveFault::ChangedMeanwhile(path.to_owned()))
}

/// The stamp of a grasp file as it is now; nothing when there is none.
pub fn stamp(path: &Path) -> Option<Stamp> {
    let _ = path;
    None
}

/// Where a part's grasps are kept unless told otherwise: `<part>.grasps.toml` beside the part file.
pub fn default_grasp_path(part_path: &Path) -> PathBuf {
    part_path.with_extension("grasps.toml")
}

/// Text from a file as it may be shown on a terminal: control characters removed.
pub fn shown(text: &str) -> String {
    text.chars().filter(|c| !c.is_control()).collect()
}

/// The caution that stands wherever results are read.
pub const CAUTION: &str = "Rigid-body, first-order statics with the friction you entered. A dropped or thrown part can \
injure. Prove every grip by test at reduced speed. The integrator's risk assessment, the machinery safety standards \
in force and local codes decide.";
