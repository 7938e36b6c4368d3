//! Saved grasps read and scored again on the part as it is now, and what became of each.

use super::knobs::{self, Knobs};
use super::output::{self, Stop};
use super::reading::{Reading, misfits, newtons};
use crate::file::{self, GraspFile, KeptDensity, SCORES, SavedGrasp, Scores, shown};
use crate::mechanics::{CaseHolding, Holding, Verdict};
use crate::part::Part;
use crate::search::{Scene, Setup};
use serde::Serialize;
use std::path::Path;
use std::sync::Arc;

/// Scores nearer than this, relative, are the same: well above rounding, well below anything that matters.
const SAME: f64 = 1e-6;

/// A grasp file and the part it is checked on.
pub(super) struct Opened {
    pub(super) saved: GraspFile,
    pub(super) part: Arc<Part>,
}

impl Opened {
    /// Reads a grasp file, and the part it names or another.
    pub(super) fn read(grasps: &Path, part: Option<&Path>) -> Result<Self, Stop> {
        let saved = file::read_grasps(grasps)?;
        let part = match part {
            Some(path) => knobs::part(path)?,
            None => knobs::part(&saved.part_path).inspect_err(|_| {
                output::note("the grasp file names this part; --part FILE takes another");
            })?,
        };
        Ok(Self { saved, part })
    }

    /// The part is not the one the grasps were saved for.
    pub(super) fn part_changed(&self) -> bool {
        !file::part_digest(&self.part).eq_ignore_ascii_case(&self.saved.part_digest)
    }
}

/// Scenes of the part; few setups stand in one file, and the stretches of each are worked out once.
pub(super) struct Scenes<'a> {
    part: &'a Arc<Part>,
    knobs: &'a Knobs,
    known: Vec<(Setup, Option<KeptDensity>, Arc<Scene>)>,
}

impl<'a> Scenes<'a> {
    /// Of a part, with options laid over every setup.
    pub(super) fn new(part: &'a Arc<Part>, knobs: &'a Knobs) -> Self {
        Self { part, knobs, known: Vec::new() }
    }

    /// The scene of a saved grasp under a setup.
    pub(super) fn of(&mut self, grasp: &SavedGrasp, setup: &Setup) -> Result<Arc<Scene>, Stop> {
        let setup = self.knobs.over(setup.clone())?;
        let known = self.known.iter().find(|(other, density, _)| *other == setup && *density == grasp.density);
        if let Some((_, _, scene)) = known {
            return Ok(Arc::clone(scene));
        }
        let scene = Arc::new(self.knobs.scene(grasp.part(self.part), setup.clone())?);
        self.known.push((setup, grasp.density.clone(), Arc::clone(&scene)));
        Ok(scene)
    }
}

/// What became of a saved grasp.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub(super) enum Outcome {
    /// Closed and every load held, with the scores it was saved with, or with other scores where an option asked for them.
    Holds,
    /// Closed and every load held, but not with the scores it was saved with.
    ScoreChanged,
    /// Closed, but a load case that was held is not any more.
    LoadsNoLongerHeld,
    /// Closed, but a load case is not held, and was not known to be when it was saved.
    LoadsNotHeld,
    /// Not closed any more.
    NoLongerClosed,
    /// Not closed, and saved so.
    NeverClosed,
    /// A finger cannot stand where it stood.
    NoLongerFits,
    /// The two ways of scoring disagree.
    Inconclusive,
}

impl Outcome {
    /// In words.
    pub(super) fn words(self) -> &'static str {
        match self {
            Self::Holds => "holds",
            Self::ScoreChanged => "score changed",
            Self::LoadsNoLongerHeld => "loads no longer held",
            Self::LoadsNotHeld => "loads not held",
            Self::NoLongerClosed => "no longer closed",
            Self::NeverClosed => "not closed when it was saved, nor now",
            Self::NoLongerFits => "no longer fits",
            Self::Inconclusive => "inconclusive",
        }
    }
}

/// A saved grasp beside what it is now.
#[derive(Debug, Serialize)]
pub(super) struct Checked<'a> {
    pub(super) name: &'a str,
    pub(super) outcome: Outcome,
    pub(super) verdict: Option<&'static str>,
    pub(super) held: Option<bool>,
    pub(super) reasons: Vec<String>,
    pub(super) changes: Vec<Change>,
}

/// A score that is not what it was.
#[derive(Debug, Serialize)]
pub(super) struct Change {
    pub(super) score: &'static str,
    pub(super) was: Option<f64>,
    pub(super) now: Option<f64>,
}

/// Scores a saved grasp again; there is no reading of one that has no place on the part.
///
/// `asked`: other scores are expected, because an option asks for another setup.
pub(super) fn check_one<'a>(saved: &'a SavedGrasp, scene: &Scene, asked: bool) -> (Checked<'a>, Option<Reading>) {
    let mut checked = Checked {
        name: &saved.name,
        outcome: Outcome::NoLongerFits,
        verdict: None,
        held: None,
        reasons: Vec::new(),
        changes: Vec::new(),
    };
    let grasp = match scene.grasp(&saved.spots) {
        Ok(grasp) => grasp,
        Err(fault) => {
            checked.reasons.push(fault.to_string());
            return (checked, None);
        }
    };
    let reading = Reading::of(scene, grasp);
    let now = Scores::of(&reading.assessment, scene.frame().scale_mm, reading.grasp.spots.len());
    checked.verdict = Some(reading.verdict());
    checked.held = now.held;
    checked.changes = changes(&saved.scores, &now);
    checked.reasons = misfits(&reading.grasp);
    checked.reasons.extend(reading.doubts.iter().map(|doubt| format!("two ways of scoring disagree: {doubt}")));
    let was_closed = saved.scores.verdict == Verdict::Closed;
    if saved.scores.verdict != reading.assessment.verdict {
        let (was, now) = (saved.scores.verdict.word(), reading.assessment.verdict.word());
        checked.reasons.push(format!("saved as {was}, now {now}"));
    }
    checked.reasons.extend(reading.assessment.holding.iter().flat_map(not_held));
    let held_now = saved.scores.held == Some(false) && now.held == Some(true);
    if held_now {
        checked.reasons.push("its loads were not held when it was saved, now they are".to_owned());
    }
    checked.outcome = if !reading.grasp.fits() {
        Outcome::NoLongerFits
    } else if !reading.doubts.is_empty() {
        Outcome::Inconclusive
    } else if !reading.is_closed() {
        if was_closed { Outcome::NoLongerClosed } else { Outcome::NeverClosed }
    } else if now.held == Some(false) {
        if saved.scores.held == Some(true) { Outcome::LoadsNoLongerHeld } else { Outcome::LoadsNotHeld }
    } else if asked || (checked.changes.is_empty() && was_closed && !held_now) {
        Outcome::Holds
    } else {
        Outcome::ScoreChanged
    };
    (checked, Some(reading))
}

/// Every load case that is not held, and why.
fn not_held(holding: &Holding) -> Vec<String> {
    let why = |case: &CaseHolding| match (case.squeeze_n, &holding.limit) {
        (Some(n), Some(limit)) => {
            format!(
                "\"{}\" takes {} N per finger, the limit is {}",
                shown(&case.name),
                newtons(n),
                newtons(limit.squeeze_n)
            )
        }
        _ if case.unsure => format!("\"{}\": no squeeze could be proved", shown(&case.name)),
        _ => format!("no squeeze holds \"{}\"", shown(&case.name)),
    };
    let lets_go = |case: &CaseHolding| {
        let n = newtons(case.lets_go_above_n?);
        Some(format!("no one squeeze holds all: \"{}\" lets go above {n} N per finger", shown(&case.name)))
    };
    holding.cases.iter().filter(|case| !case.held).map(|case| lets_go(case).unwrap_or_else(|| why(case))).collect()
}

/// Scores that differ; one that was not saved is not compared, nor is the weakest direction, which may be one of several.
fn changes(was: &Scores, now: &Scores) -> Vec<Change> {
    let differ = |was: f64, now: Option<f64>| {
        // Of numbers near nought only the size matters: a placement of 1e-12 mm is one of 0.
        now.is_none_or(|now| (was - now).abs() > SAME * was.abs().max(now.abs()).max(SAME))
    };
    SCORES
        .iter()
        .zip(was.scores.into_iter().zip(now.scores))
        .filter(|(_, (was, now))| was.is_some_and(|was| differ(was, *now)))
        .map(|(score, (was, now))| Change { score, was, now })
        .collect()
}
