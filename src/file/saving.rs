//! Saving grasps: appended to what is there, byte for byte, and never over someone else's change.

use super::digest;
use super::grasp_file::{KeptDensity, grasps_from_text};
use super::{FileFaults, grasp_text, writing};
use crate::mechanics::Assessment;
use crate::part::Part;
use crate::search::{Grasp, Setup};
use std::fs::{self, File, TryLockError};
use std::io::{self, ErrorKind};
use std::path::{Path, PathBuf};

/// Contents of a grasp file as last seen, to notice a change by someone else.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Stamp(String);

impl Stamp {
    pub(super) fn of(bytes: &[u8]) -> Self {
        Self(digest::of_bytes(bytes))
    }
}

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
    /// The density they were scored under, where the part file gives no mass and one was chosen.
    pub density: Option<KeptDensity>,
}

/// Why nothing was saved. The old file is untouched in every case.
#[derive(Debug, thiserror::Error)]
pub enum SaveFault {
    /// The file is not the one that was read.
    #[error("{}: changed by someone else meanwhile", super::shown(&.0.display().to_string()))]
    ChangedMeanwhile(PathBuf),
    /// What stands there is no grasp file of this part.
    #[error("{0}")]
    Unreadable(FileFaults),
    /// The file belongs to another part.
    #[error("{}: holds grasps of another part, or of this part before it changed", super::shown(&.0.display().to_string()))]
    OtherPart(PathBuf),
    /// The system refused.
    #[error("{}: {source}", super::shown(&.path.display().to_string()))]
    Io {
        /// The file.
        path: PathBuf,
        /// Why.
        source: io::Error,
    },
}

/// The stamp of a grasp file as it is now; nothing when there is none.
pub fn stamp(path: &Path) -> Option<Stamp> {
    // A device may never end.
    let is_file = fs::metadata(path).is_ok_and(|data| data.is_file());
    is_file.then(|| fs::read(path).ok()).flatten().map(|bytes| Stamp::of(&bytes))
}

/// Appends grasps to a grasp file, making it when there is none: written beside, synced, renamed.
///
/// `known` is the stamp from the last read or save (nothing when the file was not there); a file that differs is not
/// written over. Names already taken get a number.
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
    let io_fault = |source: io::Error| SaveFault::Io { path: path.to_owned(), source };
    let changed = || SaveFault::ChangedMeanwhile(path.to_owned());
    // A link is written through, not replaced by a file.
    let target = writing::target_of(path).map_err(io_fault)?;
    let data = match fs::metadata(&target) {
        Ok(data) => Some(data),
        Err(error) if error.kind() == ErrorKind::NotFound => None,
        Err(error) => return Err(io_fault(error)),
    };
    let (mut lock, mut permissions) = (None::<File>, None);
    if let Some(data) = data {
        if data.is_dir() {
            return Err(io_fault(ErrorKind::IsADirectory.into()));
        }
        if !data.is_file() {
            return Err(io_fault(io::Error::new(ErrorKind::InvalidInput, "is not a plain file")));
        }
        if data.permissions().readonly() {
            return Err(io_fault(ErrorKind::PermissionDenied.into()));
        }
        permissions = Some(data.permissions());
        let file = lock.insert(File::open(&target).map_err(io_fault)?);
        // Held until the new file is in place, so that two programs do not both find the file unchanged and both
        // write. The second finds the lock, or the change. Where locks do not work the stamp alone has to do.
        if matches!(file.try_lock(), Err(TryLockError::WouldBlock)) {
            return Err(changed());
        }
    }
    let old = match fs::read(&target) {
        Ok(bytes) => Some(bytes),
        Err(error) if error.kind() == ErrorKind::NotFound => None,
        Err(error) => return Err(io_fault(error)),
    };
    let found = old.as_deref().map(Stamp::of);
    if found.as_ref() != known || old.is_some() != permissions.is_some() {
        return Err(changed());
    }
    let Some(first) = keeps.first() else {
        return found.ok_or_else(|| io_fault(io::Error::new(ErrorKind::InvalidInput, "there is nothing to save")));
    };
    let (mut text, mut names, file_setup, had) = match old {
        Some(bytes) => {
            let text = String::from_utf8(bytes).map_err(|_| unreadable(path, "is not UTF-8 text"))?;
            let file = grasps_from_text(path, &text).map_err(SaveFault::Unreadable)?;
            if file.part_digest != digest::part_digest(part) {
                return Err(SaveFault::OtherPart(path.to_owned()));
            }
            let had = file.grasps.len();
            (text, file.grasps.into_iter().map(|grasp| grasp.name).collect(), file.setup, had)
        }
        None => (grasp_text::header(path, part_path, part, &first.setup), Vec::new(), first.setup.clone(), 0),
    };
    if !text.ends_with('\n') {
        text.push('\n');
    }
    let now = jiff::Timestamp::now();
    for keep in keeps {
        let name = free_name(&keep.name, &names);
        text.push_str(&grasp_text::grasp(keep, &name, part, &file_setup, now));
        names.push(name);
    }
    // What is about to be written must read back; an old file may be of a form that cannot be added to at its end.
    let back = grasps_from_text(path, &text).map_err(SaveFault::Unreadable)?;
    if back.grasps.len() != had + keeps.len() {
        return Err(unreadable(path, "cannot be added to: its grasps must be tables headed [[grasp]]"));
    }
    let still_good = || stamp(&target).as_ref() == known;
    if writing::replace(&target, text.as_bytes(), permissions, still_good).map_err(io_fault)? {
        Ok(Stamp::of(text.as_bytes()))
    } else {
        Err(changed())
    }
}

fn unreadable(path: &Path, text: &str) -> SaveFault {
    SaveFault::Unreadable(FileFaults::of_whole(path, text))
}

/// The name, or the name with the first free number from 2 behind it.
fn free_name(wanted: &str, taken: &[String]) -> String {
    let wanted = super::shown(wanted);
    let wanted = if wanted.trim().is_empty() { "grasp" } else { wanted.trim() };
    let mut name = wanted.to_owned();
    let mut number = 2;
    while taken.contains(&name) {
        name = format!("{wanted} ({number})");
        number += 1;
    }
    name
}
