//! `rank`: the best grasps of a part as a table or JSON.

use super::json::Report;
use super::knobs::{self, Knobs};
use super::output::{self, Answer, Stop};
use super::progress::ProgressLine;
use super::reading::{decimals, fingers, length, ratio, short};
use crate::file::{CAUTION, shown};
use crate::search::{self, Cancel, Key, Listed, Listing, Ranking, Scene, TorqueScale};
use clap::Args;
use clap::builder::PossibleValuesParser;
use std::fmt::Write;
use std::path::PathBuf;

/// The one sort key that cannot be served yet.
const SQUEEZE: &str = "squeeze";

#[derive(Debug, Args)]
pub(super) struct RankArgs {
    /// Part file
    part: PathBuf,
    #[command(flatten)]
    knobs: Knobs,
    /// Rows to list
    #[arg(long, value_name = "K", default_value_t = 20, value_parser = clap::value_parser!(u32).range(1..=100_000))]
    top: u32,
    /// Score to sort by
    #[arg(long, value_name = "KEY", default_value = "quality", value_parser = keys())]
    sort: String,
    /// List single grasps instead of the best of each family
    #[arg(long)]
    members: bool,
    /// Print JSON
    #[arg(long)]
    json: bool,
}

fn keys() -> PossibleValuesParser {
    PossibleValuesParser::new(Key::ALL.into_iter().map(Key::word).chain([SQUEEZE]))
}

pub(super) fn run(args: &RankArgs) -> Result<Answer, Stop> {
    let Some(key) = Key::from_word(&args.sort) else {
        let others = Key::ALL.map(Key::word).join(", ");
        return Err(Stop::bad(format!(
            "--sort {}: squeeze needs load cases, which are not scored yet; sort by one of {others}",
            args.sort
        )));
    };
    let part = knobs::part(&args.part)?;
    let scene = knobs::scene(part, args.knobs.setup()?)?;
    let listing = if args.members { Listing::Members } else { Listing::Families };
    let line = ProgressLine::new();
    let observe = |progress: search::Progress| line.tell(progress.done, progress.total);
    let ranked = args
        .knobs
        .on_threads(|| search::rank(&scene, key, listing, args.top as usize, &Cancel::default(), &observe))?;
    drop(line);
    let ranking = ranked.map_err(|stopped| Stop::bad(stopped.to_string()))?;
    if args.json {
        let mut report = Report::new(&scene);
        report.examined = ranking.examined;
        report.closed = ranking.closed;
        report.inconclusive = ranking.inconclusive;
        report.complete = ranking.complete;
        for listed in &ranking.grasps {
            report.add_scores(&scene, &listed.grasp, &listed.assessment, listed.assessment.verdict.word());
        }
        if ranking.grasps.is_empty() {
            output::note(&why_empty(&scene, &ranking));
        }
        output::print_json(&report)?;
    } else {
        output::print(&table(&scene, key, listing, &ranking))?;
    }
    Ok(Answer::Done)
}

fn table(scene: &Scene, key: Key, listing: Listing, ranking: &Ranking) -> String {
    let mut text = String::new();
    // Writing to a String cannot fail.
    let _ = head(&mut text, scene, ranking);
    let _ = if ranking.grasps.is_empty() {
        writeln!(text, "\n{}", why_empty(scene, ranking))
    } else {
        rows(&mut text, scene, key, listing, ranking)
    };
    let _ = writeln!(text, "\n{}", wrapped(CAUTION));
    text
}

fn head(text: &mut String, scene: &Scene, ranking: &Ranking) -> std::fmt::Result {
    let (setup, search) = (scene.setup(), &scene.setup().search);
    let scale = match search.torque_scale {
        TorqueScale::Reach => "reach",
        TorqueScale::Gyration => "gyration",
        TorqueScale::Mm(_) => "as given",
    };
    writeln!(
        text,
        "{}: {} pins of radius {} mm, mu {} ({:.1} deg)",
        shown(scene.part().name()),
        setup.hand.fingers.get(),
        setup.hand.pin_radius_mm,
        setup.friction.mu,
        setup.friction.mu.atan().to_degrees()
    )?;
    writeln!(text, "torque scale {} mm ({scale}), seed {}", length(scene.frame().scale_mm), search.seed)?;
    writeln!(
        text,
        "{} candidate sets of {} sites examined, {} closed, {} inconclusive",
        ranking.examined, ranking.sites, ranking.closed, ranking.inconclusive
    )?;
    if ranking.complete {
        writeln!(text, "complete: every candidate set was looked at")
    } else {
        writeln!(text, "a sample: the budget is {} sets; raise --budget or --spacing to look at all", search.budget)
    }
}

fn rows(text: &mut String, scene: &Scene, key: Key, listing: Listing, ranking: &Ranking) -> std::fmt::Result {
    let count = ranking.grasps.len();
    match listing {
        Listing::Families => {
            writeln!(text, "\nBest grasp of {count} of {} families, by {}:", ranking.families, key.word())?;
        }
        Listing::Members => writeln!(text, "\nBest {count} grasps, by {}:", key.word())?,
    }
    let decimals = decimals(scene.part().reach_mm());
    let places: Vec<_> = ranking.grasps.iter().map(|listed| fingers(&listed.grasp.spots, decimals)).collect();
    let width = places.iter().map(String::len).max().unwrap_or(0).max("ring:edge@mm".len());
    // Two qualities beside each other would not fit; the one sorted by is shown.
    let per_finger = key == Key::QualityPerFinger;
    let quality = if per_finger { "qual/f" } else { "quality" };
    writeln!(text, "rank  {:width$} {quality:>7} margin needed place mm", "ring:edge@mm")?;
    for (number, (Listed { assessment: a, .. }, place)) in ranking.grasps.iter().zip(&places).enumerate() {
        writeln!(
            text,
            "{:4}  {place:width$} {:>7} {:>6} {:>6} {:>8}",
            number + 1,
            short(if per_finger { a.quality_per_finger } else { a.quality }),
            a.friction_margin.map_or("-".to_owned(), ratio),
            a.friction_needed.map_or("-".to_owned(), ratio),
            length(a.placement.mm)
        )?;
    }
    text.push_str("\nring:edge@mm  ring 0 is the outer one; mm count from the edge's first vertex\n");
    text.push_str(if per_finger { QUALITY_PER_FINGER } else { QUALITY });
    text.push_str(LEGEND);
    Ok(())
}

const QUALITY: &str = "\
quality   a disturbance of size 1 (force, or torque over the torque scale) in
          any direction is held with a total finger force of 1 / quality
";
const QUALITY_PER_FINGER: &str = "\
qual/f    quality per finger: a disturbance of size 1 (force, or torque over the
          torque scale) in any direction is held with at most 1 / (qual/f) from
          each finger
";
const LEGEND: &str = "\
margin    mu over the friction needed; - where any friction at all will do
needed    least mu at which the grasp closes; as an angle, its arc tangent
place mm  how far every finger may be off along its edge, all at once
";

/// Why a list is empty and what to try.
fn why_empty(scene: &Scene, ranking: &Ranking) -> String {
    let (hand, floors) = (&scene.setup().hand, &scene.setup().floors);
    if scene.stretches().is_empty() {
        return format!(
            "No finger fits on any edge: try a smaller pin radius (now {} mm) or corner clearance (now {} mm),\n\
             or fewer keep-outs.",
            hand.pin_radius_mm, hand.corner_clearance_mm
        );
    }
    if ranking.examined == 0 {
        return format!(
            "There is no set of {} sites that keeps the fingers apart: try fewer fingers, a smaller gap (now {} mm)\n\
             or a smaller --spacing.",
            hand.fingers.get(),
            hand.gap_mm
        );
    }
    if ranking.closed == 0 {
        let sample = if ranking.complete { "" } else { " A larger --budget looks at more." };
        return format!(
            "No candidate set closes at mu {}: try more fingers, a smaller --spacing, or tips with more friction.{sample}",
            scene.setup().friction.mu
        );
    }
    if ranking.inconclusive > 0 {
        return format!(
            "{} sets close, but the two ways of scoring disagree on the {} best: try another torque scale.",
            ranking.closed, ranking.inconclusive
        );
    }
    format!(
        "{} sets close, but none is above the floors (quality {}, friction margin {}, placement {} mm):\n\
         lower them in the setup.",
        ranking.closed, floors.quality, floors.friction_margin, floors.placement_mm
    )
}

/// A text broken into lines of at most 80 characters.
fn wrapped(text: &str) -> String {
    let mut lines = String::new();
    let mut width = 0;
    for word in text.split_whitespace() {
        if width > 0 && width + 1 + word.len() > 80 {
            lines.push('\n');
            width = 0;
        } else if width > 0 {
            lines.push(' ');
            width += 1;
        }
        lines.push_str(word);
        width += word.len();
    }
    lines
}
