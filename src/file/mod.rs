//! What is kept: part, setup and grasp files, and careful writing.

mod digest;
pub mod drawing;
mod editing;
mod finding;
mod grasp_file;
mod grasp_text;
mod part_file;
mod reading;
mod saving;
mod setup_file;
mod toml_reader;
mod writing;

pub use digest::part_digest;
pub use finding::parts_in;
pub use grasp_file::{
    GraspFile, KeptDensity, SCORES, SavedGrasp, SavedLoad, Scores, WEAKEST, grasps_from_text, read_grasps,
};
pub use part_file::{part_from_text, read_part, read_part_with_notes};
pub use saving::{Becomes, Change, Keep, Revision, SaveFault, Stamp, revise, save, stamp};
pub use setup_file::{CLOSINGS, CONDITIONS, DRIVES, TIPS, default_setup_text, read_setup, setup_from_text, word_for};
pub use writing::write_new;

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
    /// One fault of the whole file.
    pub(crate) fn of_whole(path: &Path, text: &str) -> Self {
        Self { path: path.to_owned(), faults: vec![FileFault { line: None, text: text.to_owned() }] }
    }

    /// One line for each fault, as `FILE:LINE: text`; fit for a terminal.
    pub fn lines(&self) -> Vec<String> {
        self.faults.iter().map(|fault| fault.at(&self.path)).collect()
    }
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
