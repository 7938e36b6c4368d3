//! Marks of a run that was cut off: kept beside the grasp file, offered at the next start.

use super::kept;
use crate::file::{self, Keep, Revision, SaveFault};
use crate::part::Part;
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

/// What would be lost if the run ended now.
#[derive(Debug, Clone, Default)]
pub(super) struct Unsaved {
    /// Marks not in the file as they stand here, each with the part it was read on.
    pub(super) keeps: Vec<(Arc<Part>, Keep)>,
    /// Names of grasps of the file that are to be taken out of it.
    pub(super) removals: Vec<String>,
}

impl Unsaved {
    pub(super) fn is_empty(&self) -> bool {
        self.keeps.is_empty() && self.removals.is_empty()
    }
}

/// Where they are kept, and for which part.
#[derive(Debug, Clone)]
pub(super) struct Recovery {
    path: PathBuf,
    part_path: PathBuf,
    part: Arc<Part>,
    /// What waited there is among the marks of this run.
    taken: Arc<AtomicBool>,
}

impl Recovery {
    /// `<grasp file>.recovery`.
    pub(super) fn beside(grasp_path: &Path, part_path: &Path, part: &Arc<Part>) -> Self {
        Self {
            path: with_ending(grasp_path, ".recovery"),
            part_path: part_path.to_owned(),
            part: Arc::clone(part),
            taken: Arc::default(),
        }
    }

    pub(super) fn path(&self) -> &Path {
        &self.path
    }

    /// The same for the part as it was read again.
    pub(super) fn for_part(&self, part: &Arc<Part>) -> Self {
        Self { part: Arc::clone(part), ..self.clone() }
    }

    /// Writes what is not saved and tells where. Marks of an earlier run that still wait there stay, unless they were taken
    /// back and so are among these. Marks of the part as it was before it changed get a file of their own.
    pub(super) fn write(&self, unsaved: &Unsaved) -> Result<PathBuf, SaveFault> {
        let mut rest: Vec<&(Arc<Part>, Keep)> = unsaved.keeps.iter().collect();
        let here: Vec<Keep> =
            rest.extract_if(.., |(part, _)| Arc::ptr_eq(part, &self.part)).map(|(_, keep)| keep.clone()).collect();
        let own = |number: usize| with_ending(&self.path, &format!("-{}{}", std::process::id(), suffix(number)));
        let mut kept_in = None;
        if !here.is_empty() || !unsaved.removals.is_empty() {
            if self.taken.load(Ordering::SeqCst) {
                let _ = self.remove();
            }
            let revision = Revision { keeps: &here, removed: &unsaved.removals, ..Revision::default() };
            let known = file::stamp(&self.path);
            kept_in = Some(match file::revise(&self.path, &self.part_path, &self.part, &revision, known.as_ref()) {
                Ok(_) => self.path.clone(),
                // Something else stands there, perhaps marks of the part as it was before: a name of this run's own.
                Err(_) => {
                    file::revise(&own(0), &self.part_path, &self.part, &revision, None)?;
                    own(0)
                }
            });
        }
        let mut number = 1;
        while let Some((part, _)) = rest.first() {
            let part = Arc::clone(part);
            let keeps: Vec<Keep> =
                rest.extract_if(.., |(other, _)| Arc::ptr_eq(other, &part)).map(|(_, keep)| keep.clone()).collect();
            file::save(&own(number), &self.part_path, &part, &keeps, None)?;
            kept_in.get_or_insert_with(|| own(number));
            number += 1;
        }
        Ok(kept_in.unwrap_or_else(|| self.path.clone()))
    }

    /// What waits there, placed and scored again.
    ///
    /// # Errors
    /// Why it cannot be taken back, line by line.
    pub(super) fn load(&self) -> Result<(Vec<Keep>, Vec<String>), Vec<String>> {
        let path = file::shown(&self.path.display().to_string());
        let saved = file::read_grasps(&self.path).map_err(|faults| faults.lines())?;
        if saved.part_digest != file::part_digest(&self.part) {
            return Err(vec![format!("{path}: holds marks of another part, or of this part before it changed")]);
        }
        let keeps = kept::placed(&saved.grasps, &self.part).map_err(|fault| vec![format!("{path}: {fault}")])?;
        Ok((keeps, saved.removed))
    }

    /// From now on this run answers for what waits there.
    pub(super) fn take(&self) {
        self.taken.store(true, Ordering::SeqCst);
    }

    /// Deletes the file once its marks are saved or given up; does nothing while they still wait.
    pub(super) fn settle(&self) {
        if self.taken.swap(false, Ordering::SeqCst) {
            let _ = self.remove();
        }
    }

    /// Deletes it; one that is not there is deleted already.
    pub(super) fn remove(&self) -> std::io::Result<()> {
        match std::fs::remove_file(&self.path) {
            Err(fault) if fault.kind() != std::io::ErrorKind::NotFound => Err(fault),
            _ => Ok(()),
        }
    }
}

fn with_ending(path: &Path, ending: &str) -> PathBuf {
    let mut name = path.as_os_str().to_owned();
    name.push(ending);
    PathBuf::from(name)
}

/// What tells one file of a run from another.
fn suffix(number: usize) -> String {
    if number == 0 { String::new() } else { format!("-{number}") }
}
