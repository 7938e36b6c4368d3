//! `check`: saved grasps scored again on the part as it is now.

use super::knobs::Knobs;
use super::output::{self, Answer, Stop};
use super::recheck::{Checked, Opened, Outcome, Scenes, check_one};
use crate::file::{self, GraspFile, shown};
use clap::Args;
use serde::Serialize;
use std::fmt::Write;
use std::path::PathBuf;

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

#[derive(Debug, Serialize)]
struct CheckReport<'a> {
    schema: u32,
    part_changed: bool,
    all_hold: bool,
    grasps: Vec<Checked<'a>>,
}

pub(super) fn run(args: &CheckArgs) -> Result<Answer, Stop> {
    let opened = Opened::read(&args.grasps, args.part.as_deref())?;
    let report = check(&opened, &args.knobs)?;
    let answer = if report.all_hold && !report.part_changed { Answer::Done } else { Answer::No };
    let printed =
        if args.json { output::print_json(&report) } else { output::print(&in_words(&report, &opened.saved)) };
    match printed {
        // The answer is known, even when nobody reads why.
        Err(Stop::Closed) | Ok(()) => Ok(answer),
        Err(stop) => Err(stop),
    }
}

fn check<'a>(opened: &'a Opened, knobs: &Knobs) -> Result<CheckReport<'a>, Stop> {
    let given = match &knobs.setup {
        Some(path) => Some(file::read_setup(path)?),
        None => None,
    };
    let asked = given.is_some() || knobs.change_scores();
    let mut scenes = Scenes::new(&opened.part, knobs);
    let mut grasps = Vec::with_capacity(opened.saved.grasps.len());
    for grasp in &opened.saved.grasps {
        let scene = scenes.of(grasp, given.as_ref().unwrap_or(&grasp.setup))?;
        grasps.push(check_one(grasp, &scene, asked).0);
    }
    Ok(CheckReport {
        schema: 1,
        part_changed: opened.part_changed(),
        all_hold: grasps.iter().all(|checked| checked.outcome == Outcome::Holds),
        grasps,
    })
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
