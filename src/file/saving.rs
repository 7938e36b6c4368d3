//! Saving grasps: appended to what is there, renamed or taken out in it, byte for byte, and never over someone else's
//! change.

use super::digest;
use super::editing::{self, Edit};
use super::grasp_file::{KeptDensity, SavedGrasp, grasps_from_text};
use super::{FileFaults, grasp_text, writing};
use crate::mechanics::Assessment;
use crate::part::Part;
use crate::search::{Grasp, Setup, Spot};
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

/// A change to a grasp that is in the file.
#[derive(Debug, Clone, PartialEq)]
pub struct Change {
    /// Its number in the file as it was read.
    pub number: usize,
    /// The name it has there.
    pub name: String,
    /// Where its fingers stand there.
    pub spots: Vec<Spot>,
    /// What is to become of it.
    pub to: Becomes,
}

/// What is to become of a grasp in the file.
#[derive(Debug, Clone, PartialEq)]
pub enum Becomes {
    /// Other words; nothing where they stay. Where the grasp is not in the file any more, it is added as kept here.
    Reworded {
        /// Name.
        name: Option<String>,
        /// Note.
        note: Option<String>,
        /// The grasp with its new words.
        keep: Box<Keep>,
    },
    /// Taken out. Where it is not in the file any more, nothing is done.
    Removed,
}

impl Change {
    /// The number of the grasp it is about among those of a file; the file may be another than the one that was read.
    fn find(&self, grasps: &[SavedGrasp]) -> Option<usize> {
        let same = |grasp: &SavedGrasp| grasp.name == self.name && grasp.spots == self.spots;
        let as_read = grasps.get(self.number).is_some_and(same).then_some(self.number);
        as_read.or_else(|| grasps.iter().position(same))
    }
}

/// All that is written at once.
#[derive(Debug, Clone, Copy, Default)]
pub struct Revision<'a> {
    /// Added at the end.
    pub keeps: &'a [Keep],
    /// Done to what is there.
    pub changes: &'a [Change],
    /// Names of grasps of another file that are to be taken out of it; kept in a list of their own.
    pub removed: &'a [String],
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

/// Appends grasps to a grasp file; see [`revise`].
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
    let nothing = || SaveFault::Io {
        path: path.to_owned(),
        source: io::Error::new(ErrorKind::InvalidInput, "there is nothing to save"),
    };
    revise(path, part_path, part, &Revision { keeps, ..Revision::default() }, known)?.ok_or_else(nothing)
}

/// Writes a grasp file with what is added and changed, making it when there is none: written beside, synced, renamed.
/// Returns the stamp of the file as it is then; nothing when there is no file and nothing to put into one.
///
/// `known` is the stamp from the last read or save (nothing when the file was not there); a file that differs is not
/// written over. Every byte of a grasp that is not changed stays. Names already taken get a number.
///
/// # Errors
/// [`SaveFault`]; the old file is untouched.
pub fn revise(
    path: &Path,
    part_path: &Path,
    part: &Part,
    revision: &Revision<'_>,
    known: Option<&Stamp>,
) -> Result<Option<Stamp>, SaveFault> {
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
    if revision.keeps.is_empty() && revision.removed.is_empty() && (revision.changes.is_empty() || old.is_none()) {
        let lost = |change: &Change| matches!(change.to, Becomes::Reworded { .. });
        if !revision.changes.iter().any(lost) {
            return Ok(found);
        }
    }
    let mut draft = Draft::begin(path, part_path, part, old, revision)?;
    draft.change(path, revision.changes)?;
    draft.append(path, part, revision.keeps)?;
    if !revision.removed.is_empty() {
        let odd = || unreadable(path, "cannot be added to: it has no part_digest at its head");
        draft.text = editing::with_removed(&draft.text, revision.removed).ok_or_else(odd)?;
        grasps_from_text(path, &draft.text).map_err(SaveFault::Unreadable)?;
    }
    let text = draft.text;
    let still_good = || stamp(&target).as_ref() == known;
    if writing::replace(&target, text.as_bytes(), permissions, still_good).map_err(io_fault)? {
        Ok(Some(Stamp::of(text.as_bytes())))
    } else {
        Err(changed())
    }
}

/// A grasp file on its way to be written: its text, and what reading it back must give.
struct Draft {
    text: String,
    grasps: Vec<SavedGrasp>,
    setup: Setup,
    /// Grasps that were to be reworded but are gone: they are added.
    gone: Vec<Keep>,
}

impl Draft {
    fn begin(
        path: &Path,
        part_path: &Path,
        part: &Part,
        old: Option<Vec<u8>>,
        revision: &Revision<'_>,
    ) -> Result<Self, SaveFault> {
        let (text, grasps, setup) = match old {
            Some(bytes) => {
                let text = String::from_utf8(bytes).map_err(|_| unreadable(path, "is not UTF-8 text"))?;
                let file = grasps_from_text(path, &text).map_err(SaveFault::Unreadable)?;
                if file.part_digest != digest::part_digest(part) {
                    return Err(SaveFault::OtherPart(path.to_owned()));
                }
                (text, file.grasps, file.setup)
            }
            None => {
                let setup = revision.keeps.first().map_or_else(Setup::default, |keep| keep.setup.clone());
                (grasp_text::header(path, part_path, part, &setup), Vec::new(), setup)
            }
        };
        Ok(Self { text, grasps, setup, gone: Vec::new() })
    }

    /// Carries out changes to what is there, and makes sure that they are all that changed.
    fn change(&mut self, path: &Path, changes: &[Change]) -> Result<(), SaveFault> {
        let mut edits = Vec::new();
        let mut out = Vec::new();
        for change in changes {
            match (change.find(&self.grasps), &change.to) {
                (Some(number), Becomes::Reworded { name, note, .. }) => {
                    let others = self.grasps.iter().enumerate().filter(|(other, _)| *other != number);
                    let taken: Vec<String> = others.map(|(_, grasp)| grasp.name.clone()).collect();
                    let name = name.as_ref().map(|name| free_name(name, &taken));
                    let note = note.as_ref().map(|note| grasp_text::note(note));
                    let grasp = &mut self.grasps[number];
                    grasp.name = name.clone().unwrap_or_else(|| grasp.name.clone());
                    grasp.note = note.clone().unwrap_or_else(|| grasp.note.clone());
                    edits.push((number, Edit::Words { name, note }));
                }
                (None, Becomes::Reworded { keep, .. }) => self.gone.push(keep.as_ref().clone()),
                (Some(number), Becomes::Removed) => {
                    out.push(number);
                    edits.push((number, Edit::Out));
                }
                (None, Becomes::Removed) => {}
            }
        }
        let mut number = 0;
        self.grasps.retain(|_| {
            number += 1;
            !out.contains(&(number - 1))
        });
        let odd = || unreadable(path, "cannot be changed: its grasps must be tables headed [[grasp]]");
        self.text = editing::edited(&self.text, &edits).ok_or_else(odd)?;
        let back = grasps_from_text(path, &self.text).map_err(SaveFault::Unreadable)?;
        if back.grasps == self.grasps && back.setup == self.setup { Ok(()) } else { Err(odd()) }
    }

    fn append(&mut self, path: &Path, part: &Part, keeps: &[Keep]) -> Result<(), SaveFault> {
        let had = self.grasps.len();
        let mut names: Vec<String> = self.grasps.iter().map(|grasp| grasp.name.clone()).collect();
        let now = jiff::Timestamp::now();
        let keeps: Vec<Keep> = keeps.iter().cloned().chain(std::mem::take(&mut self.gone)).collect();
        if !keeps.is_empty() && !self.text.ends_with('\n') {
            self.text.push('\n');
        }
        for keep in &keeps {
            let name = free_name(&keep.name, &names);
            self.text.push_str(&grasp_text::grasp(keep, &name, part, &self.setup, now));
            names.push(name);
        }
        // What is about to be written must read back; an old file may be of a form that cannot be added to at its end.
        let back = grasps_from_text(path, &self.text).map_err(SaveFault::Unreadable)?;
        if back.grasps.len() != had + keeps.len() {
            return Err(unreadable(path, "cannot be added to: its grasps must be tables headed [[grasp]]"));
        }
        Ok(())
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
