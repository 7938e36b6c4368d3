//! The grasps that are in the grasp file: read when the workbench opens and after each save, and brought together with
//! the marks.

use super::state::{Mark, State};
use crate::file::{self, Becomes, Change, Keep, SavedGrasp, Scores};
use crate::part::Part;
use crate::search::{Scene, Setup};
use std::path::Path;
use std::sync::Arc;

/// A grasp as it stands in the file.
#[derive(Debug, Clone, PartialEq)]
pub struct Stored {
    /// Its number there.
    pub number: usize,
    /// Its name there.
    pub name: String,
    /// Its note there.
    pub note: String,
    /// The scores it was saved with.
    pub scores: Scores,
}

/// A grasp read from the file, placed on the part.
#[derive(Debug, Clone)]
pub struct Kept {
    /// What the file says.
    pub stored: Stored,
    /// The grasp as a mark has it, scored again under the setup it was saved with.
    pub keep: Keep,
}

/// Saved grasps placed and scored on a part under their own setups. Few setups stand in one file, and the scene of each is
/// made once.
///
/// # Errors
/// The first that has no place on the part, in words.
pub(super) fn placed(grasps: &[SavedGrasp], part: &Arc<Part>) -> Result<Vec<Keep>, String> {
    let mut scenes: Vec<(&Setup, &Option<file::KeptDensity>, Scene)> = Vec::new();
    let mut keeps = Vec::with_capacity(grasps.len());
    for saved in grasps {
        let named = |fault: &dyn std::fmt::Display| format!("{}: {fault}", saved.name);
        let at =
            match scenes.iter().position(|(setup, density, _)| **setup == saved.setup && **density == saved.density) {
                Some(at) => at,
                None => {
                    let scene = Scene::new(saved.part(part), saved.setup.clone()).map_err(|fault| named(&fault))?;
                    scenes.push((&saved.setup, &saved.density, scene));
                    scenes.len() - 1
                }
            };
        let scene = &scenes[at].2;
        let grasp = scene.grasp(&saved.spots).map_err(|fault| named(&fault))?;
        let (assessment, _) = scene.assess(&grasp);
        keeps.push(Keep {
            name: saved.name.clone(),
            note: saved.note.clone(),
            grasp,
            assessment,
            setup: saved.setup.clone(),
            density: saved.density.clone(),
        });
    }
    Ok(keeps)
}

/// Reads the grasp file and places what is in it; an absent file holds nothing. With it comes the stamp of the file.
///
/// # Errors
/// Why nothing of it can be listed and the mend, line by line.
pub(super) fn read(path: &Path, part: &Arc<Part>) -> Result<(Vec<Kept>, Option<file::Stamp>), Vec<String>> {
    if std::fs::symlink_metadata(path).is_err() {
        return Ok((Vec::new(), None));
    }
    let shown = file::shown(&path.display().to_string());
    let saved = file::read_grasps(path).map_err(|faults| faults.lines())?;
    if !file::part_digest(part).eq_ignore_ascii_case(&saved.part_digest) {
        return Err(vec![
            format!("{shown}: holds grasps of another part, or of this part before it changed"),
            String::new(),
            format!("`holdwright check {shown}` scores them on the part its file names, as it is now."),
        ]);
    }
    let keeps = placed(&saved.grasps, part).map_err(|fault| vec![format!("{shown}: {fault}")])?;
    let stored = |(number, grasp): (usize, SavedGrasp)| Stored {
        number,
        name: grasp.name,
        note: grasp.note,
        scores: grasp.scores,
    };
    let stored = saved.grasps.into_iter().enumerate().map(stored);
    let kept = stored.zip(keeps).map(|(stored, keep)| Kept { stored, keep }).collect();
    Ok((kept, Some(saved.stamp)))
}

/// Brings the marks together with what the file holds now: what is in it and not among the marks becomes one; marks that
/// were in it and are no longer count as not saved.
pub(super) fn reconcile(state: &mut State, kept: Vec<Kept>) {
    let mut loose: Vec<Option<Kept>> = kept.into_iter().map(Some).collect();
    let marks = state.marks.iter_mut().filter(|mark| mark.saved || mark.stored.is_some());
    let mut claims: Vec<&mut Mark> =
        marks.chain(state.lifted.iter_mut().filter(|mark| mark.stored.is_some())).collect();
    for alike in [alike_by_all, alike_but_for_words, alike_by_name] {
        claims.retain_mut(|mark| {
            let found = loose.iter_mut().find(|kept| kept.as_ref().is_some_and(|kept| alike(mark, kept)));
            let Some(kept) = found.and_then(Option::take) else { return true };
            if mark.saved {
                (mark.keep.name, mark.keep.note) = (kept.stored.name.clone(), kept.stored.note.clone());
            }
            mark.stored = Some(kept.stored);
            false
        });
    }
    for mark in claims {
        // Taken out meanwhile; where it is still a mark it is wanted here.
        (mark.saved, mark.stored) = (false, None);
    }
    for Kept { stored, keep } in loose.into_iter().flatten() {
        let id = state.next_mark;
        state.next_mark += 1;
        let part = Arc::clone(&state.opened.part);
        state.marks.push(Mark { id, keep, saved: true, stored: Some(stored), part });
    }
}

fn alike_by_all(mark: &Mark, kept: &Kept) -> bool {
    alike_but_for_words(mark, kept) && alike_by_name(mark, kept)
}

fn alike_but_for_words(mark: &Mark, kept: &Kept) -> bool {
    let (own, other) = (&mark.keep, &kept.keep);
    own.grasp.spots == other.grasp.spots && own.setup == other.setup && own.density == other.density
}

fn alike_by_name(mark: &Mark, kept: &Kept) -> bool {
    let name = mark.stored.as_ref().map_or(&mark.keep.name, |stored| &stored.name);
    mark.keep.grasp.spots == kept.keep.grasp.spots && *name == kept.stored.name
}

/// What saving does to the grasps that are in the file: other words, and those taken out.
pub(super) fn changes(state: &State) -> Vec<Change> {
    let change = |mark: &Mark, stored: &Stored, to: Becomes| Change {
        number: stored.number,
        name: stored.name.clone(),
        spots: mark.keep.grasp.spots.clone(),
        to,
    };
    let reworded = state.marks.iter().filter(|mark| !mark.saved).filter_map(|mark| {
        let stored = mark.stored.as_ref()?;
        let other = |now: &String, then: &String| (now != then).then(|| now.clone());
        let name = other(&mark.keep.name, &stored.name);
        let note = other(&mark.keep.note, &stored.note);
        Some(change(mark, stored, Becomes::Reworded { name, note, keep: Box::new(mark.keep.clone()) }))
    });
    let removed = state.lifted.iter().filter_map(|mark| Some(change(mark, mark.stored.as_ref()?, Becomes::Removed)));
    reworded.chain(removed).collect()
}

/// Names, as the file has them, of the grasps that are to be taken out of it.
pub(super) fn removals(state: &State) -> Vec<String> {
    state.lifted.iter().filter_map(|mark| Some(mark.stored.as_ref()?.name.clone())).collect()
}
