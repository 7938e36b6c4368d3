//! `check`: saved grasps scored again on the part as it is now.

use super::knobs::{self, Knobs};
use super::output::{self, Answer, Stop};
use super::reading::{Reading, misfits, newtons};
use crate::file::{self, GraspFile, KeptDensity, SCORES, SavedGrasp, Scores, shown};
use crate::mechanics::{CaseHolding, Holding, Verdict};
use crate::part::Part;
use crate::search::{Scene, Setup};
use clap::Args;
use serde::Serialize;
use std::fmt::Write;
use std::path::PathBuf;
use std::sync::Arc;

/// Scores nearer than this, relative, are the same: well above rounding, well below anything that matters.
const SAME: f64 = 1e-6;

#[derive(Debug, Args)]
pub(super) struct CheckArgs {
    /// Grasp file
    grasps: PathBuf,
    /// Part file [default: the one the grasp file names]
    #[arg(long, value_name = "FILE")]
    part: Option<PathBuf>,
    #[command(flatten)]
    knobs: Knobs,
    /// Print JSON
    #[arg(long)]
    json: bool,
}

/// What became of a saved grasp.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
enum Outcome {
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
    fn words(self) -> &'static str {
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

#[derive(Debug, Serialize)]
struct CheckReport<'a> {
    schema: u32,
    part_changed: bool,
    all_hold: bool,
    grasps: Vec<Checked<'a>>,
}

#[derive(Debug, Serialize)]
struct Checked<'a> {
    name: &'a str,
    outcome: Outcome,
    verdict: Option<&'static str>,
    held: Option<bool>,
    reasons: Vec<String>,
    changes: Vec<Change>,
}

/// A score that is not what it was.
#[derive(Debug, Serialize)]
struct Change {
    score: &'static str,
    was: Option<f64>,
    now: Option<f64>,
}

pub(super) fn run(args: &CheckArgs) -> Result<Answer, Stop> {
    let saved = file::read_grasps(&args.grasps)?;
    let part = match &args.part {
        Some(path) => knobs::part(path)?,
        None => knobs::part(&saved.part_path).inspect_err(|_| {
            output::note("the grasp file names this part; --part FILE takes another");
        })?,
    };
    let report = check(&saved, &part, &args.knobs)?;
    let answer = if report.all_hold && !report.part_changed { Answer::Done } else { Answer::No };
    let printed = if args.json { output::print_json(&report) } else { output::print(&in_words(&report, &saved)) };
    match printed {
        // The answer is known, even when nobody reads why.
        Err(Stop::Closed) | Ok(()) => Ok(answer),
        Err(stop) => Err(stop),
    }
}

fn check<'a>(saved: &'a GraspFile, part: &Arc<Part>, knobs: &Knobs) -> Result<CheckReport<'a>, Stop> {
    let given = match &knobs.setup {
        Some(path) => Some(file::read_setup(path)?),
        None => None,
    };
    let asked = given.is_some() || knobs.change_scores();
    let mut scenes: Vec<(Setup, Option<KeptDensity>, Scene)> = Vec::new();
    let mut grasps = Vec::with_capacity(saved.grasps.len());
    for grasp in &saved.grasps {
        let setup = knobs.over(given.as_ref().unwrap_or(&grasp.setup).clone())?;
        // Few setups stand in one file; the stretches of each are worked out once.
        let known = scenes.iter().position(|(other, density, _)| *other == setup && *density == grasp.density);
        let index = known.unwrap_or(scenes.len());
        if known.is_none() {
            let scene = knobs.scene(grasp.part(part), setup.clone())?;
            scenes.push((setup, grasp.density.clone(), scene));
        }
        grasps.push(check_one(grasp, &scenes[index].2, asked));
    }
    Ok(CheckReport {
        schema: 1,
        part_changed: !file::part_digest(part).eq_ignore_ascii_case(&saved.part_digest),
        all_hold: grasps.iter().all(|checked| checked.outcome == Outcome::Holds),
        grasps,
    })
}

/// `asked`: other scores are expected, because an option asks for another setup.
fn check_one<'a>(saved: &'a SavedGrasp, scene: &Scene, asked: bool) -> Checked<'a> {
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
            return checked;
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
    checked
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

fn in_words(report: &CheckReport<'_>, saved: &GraspFile) -> String {
    let mut text = String::new();
    // Writing to a String cannot fail.
    if report.part_changed {
        let _ = writeln!(
            text,
            "the part \"{}\" is not the one these grasps were saved for: its digest differs",
            shown(&saved.part_name)
        );
    }
    for checked in &report.grasps {
        let _ = write!(text, "{}: {}", shown(checked.name), checked.outcome.words());
        let value = |score: Option<f64>| score.map_or("none".to_owned(), |score| score.to_string());
        let changes: Vec<_> = checked
            .changes
            .iter()
            .map(|change| format!("{} {} -> {}", change.score, value(change.was), value(change.now)))
            .collect();
        let reasons = checked.reasons.iter().chain(&changes).cloned().collect::<Vec<_>>().join("; ");
        let _ = writeln!(text, "{}{reasons}", if reasons.is_empty() { "" } else { ": " });
    }
    if report.grasps.is_empty() {
        text.push_str("the file holds no grasp\n");
    }
    text
}
