//! Marks of a run that was cut off: kept beside the grasp file, offered at the next start.

use crate::file::{self, Keep, SaveFault};
use crate::part::Part;
use crate::search::Scene;
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

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

    /// Writes marks and tells where. Marks of an earlier run that still wait there stay, unless they were taken back
    /// and so are among these.
    pub(super) fn write(&self, keeps: &[Keep]) -> Result<PathBuf, SaveFault> {
        if self.taken.load(Ordering::SeqCst) {
            let _ = self.remove();
        }
        let known = file::stamp(&self.path);
        match file::save(&self.path, &self.part_path, &self.part, keeps, known.as_ref()) {
            Ok(_) => Ok(self.path.clone()),
            // Something else stands there, perhaps marks of the part as it was before: a name of this run's own.
            Err(_) => {
                let own = with_ending(&self.path, &format!("-{}", std::process::id()));
                file::save(&own, &self.part_path, &self.part, keeps, None).map(|_| own)
            }
        }
    }

    /// What waits there, placed and scored again.
    ///
    /// # Errors
    /// Why it cannot be taken back, line by line.
    pub(super) fn load(&self) -> Result<Vec<Keep>, Vec<String>> {
        let path = file::shown(&self.path.display().to_string());
        let saved = file::read_grasps(&self.path).map_err(|faults| faults.lines())?;
        if saved.part_digest != file::part_digest(&self.part) {
            return Err(vec![format!("{path}: holds marks of another part, or of this part before it changed")]);
        }
        let keep = |saved: &file::SavedGrasp| {
            let scene = Scene::new(saved.part(&self.part), saved.setup.clone()).map_err(|fault| fault.to_string())?;
            let grasp = scene.grasp(&saved.spots).map_err(|fault| fault.to_string())?;
            let (assessment, _) = scene.assess(&grasp);
            let (name, note, setup) = (saved.name.clone(), saved.note.clone(), saved.setup.clone());
            Ok(Keep { name, note, grasp, assessment, setup, density: saved.density.clone() })
        };
        let keeps: Result<Vec<Keep>, String> = saved.grasps.iter().map(keep).collect();
        keeps.map_err(|fault| vec![format!("{path}: {fault}")])
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
