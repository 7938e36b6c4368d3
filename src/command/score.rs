//! `score`: given contacts, scored one by one.

use super::json::Report;
use super::knobs::{self, Knobs};
use super::loads;
use super::output::{self, Answer, Stop};
use super::reading::{Reading, decimals, escape, fingers, governor, length, misfits, ratio, short, wrapped};
use crate::mechanics::Verdict;
use crate::part::EdgeId;
use crate::search::{Scene, Spot};
use clap::Args;
use std::fmt::Write;
use std::path::PathBuf;

#[derive(Debug, Args)]
pub(super) struct ScoreArgs {
    /// Part file
    part: PathBuf,
    #[command(flatten)]
    knobs: Knobs,
    /// Contacts of one grasp, two to six: ring, edge, distance in mm from the edge's first vertex
    #[arg(long, required = true, value_name = "RING:EDGE:ALONG_MM,...", allow_hyphen_values = true, value_parser = contacts)]
    at: Vec<Contacts>,
    /// Print JSON
    #[arg(long)]
    json: bool,
}

/// The value of one `--at`.
#[derive(Debug, Clone)]
struct Contacts {
    written: String,
    spots: Vec<Spot>,
}

fn contacts(written: &str) -> Result<Contacts, String> {
    let spots = written.split(',').map(spot).collect::<Result<Vec<_>, _>>()?;
    Ok(Contacts { written: written.to_owned(), spots })
}

fn spot(written: &str) -> Result<Spot, String> {
    let parse = || {
        let mut fields = written.trim().split(':');
        let ring = fields.next()?.parse().ok()?;
        let edge = fields.next()?.parse().ok()?;
        let along_mm: f64 = fields.next()?.parse().ok()?;
        let whole = fields.next().is_none() && along_mm.is_finite();
        whole.then_some(Spot { edge: EdgeId { ring, edge }, along_mm })
    };
    parse().ok_or_else(|| format!("\"{written}\" is no RING:EDGE:ALONG_MM, such as 0:3:12.5"))
}

pub(super) fn run(args: &ScoreArgs) -> Result<Answer, Stop> {
    let part = knobs::part(&args.part)?;
    let scene = args.knobs.scene(part, args.knobs.setup()?)?;
    let mut readings = Vec::with_capacity(args.at.len());
    let mut faults = Vec::new();
    for at in &args.at {
        match scene.grasp(&at.spots) {
            Ok(grasp) => readings.push(Reading::of(&scene, grasp)),
            Err(fault) => faults.push(format!("--at {}: {fault}", at.written)),
        }
    }
    if !faults.is_empty() {
        return Err(Stop::Bad(faults));
    }
    if args.json {
        let mut report = Report::new(&scene);
        for (at, reading) in args.at.iter().zip(&readings) {
            report.add(&scene, reading);
            // The report has no place for these; they must not be lost.
            for reason in misfits(&reading.grasp) {
                output::note(&format!("--at {}: {reason}", at.written));
            }
        }
        report.examined = readings.len() as u64;
        report.closed = readings.iter().filter(|reading| reading.is_closed()).count() as u64;
        report.inconclusive = readings.iter().filter(|reading| !reading.doubts.is_empty()).count() as u64;
        output::print_json(&report)?;
    } else {
        let mut text = String::new();
        for (number, reading) in readings.iter().enumerate() {
            // Writing to a String cannot fail.
            let _ = describe(&mut text, &scene, number + 1, reading);
        }
        output::print(&text)?;
    }
    Ok(Answer::Done)
}

/// The scores, then a line for each reason behind them, then what the loads ask.
fn describe(text: &mut String, scene: &Scene, number: usize, reading: &Reading) -> std::fmt::Result {
    let a = &reading.assessment;
    let mu = scene.setup().friction.mu;
    let mut line =
        format!("{number} {}: {}", fingers(&reading.grasp.spots, decimals(scene.part().reach_mm())), reading.verdict());
    if a.verdict == Verdict::Closed {
        write!(
            line,
            ", quality {}, per finger {}, friction needed {}",
            short(a.quality),
            short(a.quality_per_finger),
            a.friction_needed.map_or("-".to_owned(), ratio)
        )?;
        match (a.friction_margin, a.friction_margin_deg) {
            (Some(margin), Some(deg)) => write!(line, ", margin {} ({deg:.1} deg)", ratio(margin))?,
            (Some(margin), None) => write!(line, ", margin {} (no friction will do)", ratio(margin))?,
            (None, _) => write!(line, ", margin - (any friction at all will do)")?,
        }
        write!(line, ", placement {} mm", length(a.placement.mm))?;
    }
    writeln!(text, "{}", wrapped(&line, 0, 4))?;
    for doubt in &reading.doubts {
        writeln!(text, "{}", wrapped(&format!("two ways of scoring disagree: {doubt}"), 4, 6))?;
    }
    for reason in misfits(&reading.grasp) {
        writeln!(text, "{}", wrapped(&reason, 4, 6))?;
    }
    if let Some(Ok(jaws)) = &reading.grasp.jaws {
        let centre = scene.part().file_point(jaws.centre);
        let words = format!(
            "jaws {} mm open, centre ({:.2}, {:.2}) mm, axis {:.2} deg, pressing {}",
            length(jaws.opening_mm),
            centre.x + 0.0,
            centre.y + 0.0,
            jaws.angle_rad.to_degrees() + 0.0,
            if jaws.inside { "outward" } else { "inward" }
        );
        writeln!(text, "{}", wrapped(&words, 4, 6))?;
    }
    if let Some(weakest) = &a.weakest {
        let share = weakest.torque();
        match weakest.force_deg() {
            Some(deg) => writeln!(text, "    weakest: force toward {deg:.1} deg, torque share {share:.2}")?,
            None => writeln!(text, "    weakest: pure torque {}", if share > 0.0 { "ccw" } else { "cw" })?,
        }
        writeln!(text, "    placement is limited by {}", governor(&a.placement))?;
    }
    if let Some(way) = &a.escape {
        writeln!(text, "    the part {}", escape(scene, way))?;
    }
    if a.verdict != Verdict::Closed {
        match a.friction_needed_closure {
            Some(needed) => writeln!(text, "    closes above mu {}; mu is {mu}", ratio(needed))?,
            None => match a.friction_margin {
                // Only edges of their own have friction, and the setup's mu of 0 names no scale.
                Some(margin) if margin > 0.0 => {
                    writeln!(
                        text,
                        "    closes when the edges' own friction is more than {} times as large",
                        ratio(1.0 / margin)
                    )?;
                }
                _ => writeln!(text, "    no friction closes it")?,
            },
        }
    }
    loads::describe(text, scene, reading)
}
