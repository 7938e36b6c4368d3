//! `import`: the outline of a drawing as a part file.

use super::output::{self, Answer, Stop};
use super::progress::ProgressLine;
use crate::file::drawing::{self, Options, Report, UNIT_NAMES, Unit};
use crate::file::{shown, write_new};
use clap::{Args, ValueEnum};
use std::io::{self, Write};
use std::path::PathBuf;

#[derive(Debug, Args)]
pub(super) struct ImportArgs {
    /// Drawing, DXF (R12 to 2018, text or binary) or SVG
    drawing: PathBuf,
    /// Unit of the drawing's coordinates, where the drawing does not say or is wrong: mm, cm, m, in, ft, um, mil, pt, px
    #[arg(long, value_name = "U", value_parser = unit)]
    units: Option<Unit>,
    /// Part file to write; without it the part goes to standard output
    #[arg(short, long, value_name = "PART")]
    output: Option<PathBuf>,
    /// Replace a part file that is there already
    #[arg(long)]
    force: bool,
    /// Say what is in the drawing (layers, parts, what cannot be read) and stop
    #[arg(long)]
    list: bool,
    /// Layer to read, may be given several times [default: all that are shown]
    #[arg(long, value_name = "NAME")]
    layer: Vec<String>,
    /// Number of the part to take where there are several, as listed
    #[arg(long, value_name = "NUMBER")]
    pick: Option<usize>,
    /// Ends this close are joined, mm [default: 1e-5 of the larger side of what is read]
    #[arg(long, value_name = "MM", value_parser = length, allow_negative_numbers = true)]
    join: Option<f64>,
    /// Largest distance between a curve and its arcs, mm [default: 0.01, or 1e-4 of the larger side where that is less]
    #[arg(long, value_name = "MM", value_parser = length, allow_negative_numbers = true)]
    sagitta: Option<f64>,
    /// Do without lines that do not close, or without geometry that cannot be read
    #[arg(long, value_enum, value_name = "WHAT")]
    skip: Vec<Skip>,
    /// Write straight chords instead of arcs
    #[arg(long)]
    chords: bool,
    /// Take out vertices between straight edges that turn by less than this, degrees
    #[arg(long, value_name = "ANGLE", value_parser = angle, allow_negative_numbers = true)]
    merge_collinear: Option<f64>,
    /// Drop edges shorter than this, mm
    #[arg(long, value_name = "MM", value_parser = length, allow_negative_numbers = true)]
    drop_shorter: Option<f64>,
    /// Print the report as JSON on standard output; the part is written only with --output
    #[arg(long)]
    json: bool,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
enum Skip {
    /// Lines that do not close
    Open,
    /// Geometry that cannot be read
    Unread,
}

fn unit(word: &str) -> Result<Unit, String> {
    drawing::unit_named(word).ok_or_else(|| format!("\"{}\" is none of {UNIT_NAMES}", shown(word)))
}

fn length(word: &str) -> Result<f64, String> {
    let number = word.parse::<f64>().ok().filter(|number| number.is_finite() && *number > 0.0);
    number.ok_or_else(|| "give a length in mm above 0".to_owned())
}

fn angle(word: &str) -> Result<f64, String> {
    let number = word.parse::<f64>().ok().filter(|number| *number > 0.0 && *number <= 90.0);
    number.ok_or_else(|| "give an angle in degrees above 0, 90 at most".to_owned())
}

pub(super) fn run(args: &ImportArgs) -> Result<Answer, Stop> {
    let options = Options {
        units: args.units,
        layers: args.layer.clone(),
        pick: args.pick,
        join_mm: args.join,
        sagitta_mm: args.sagitta,
        skip_open: args.skip.contains(&Skip::Open),
        skip_unread: args.skip.contains(&Skip::Unread),
        merge_collinear_deg: args.merge_collinear,
        drop_shorter_mm: args.drop_shorter,
        chords: args.chords,
    };
    let progress = ProgressLine::new();
    let mut tell = |what: &'static str, done: u64, total: u64| progress.tell_of(what, done, total);
    let path = &args.drawing;
    if args.list {
        let (report, problems) =
            drawing::list(path, &options, &mut tell).map_err(|refusal| Stop::Bad(refusal.lines(path)))?;
        drop(progress);
        if args.json {
            output::print_json(&report)?;
        } else {
            output::print(&text(&report))?;
        }
        problems.iter().for_each(|problem| output::note(problem));
        return Ok(Answer::Done);
    }
    let imported =
        drawing::read_telling(path, &options, &mut tell).map_err(|refusal| Stop::Bad(refusal.lines(path)))?;
    drop(progress);
    if let Some(target) = &args.output {
        write_new(target, &imported.text, args.force)?;
    } else if !args.json {
        output::print(&imported.text)?;
    }
    if args.json {
        output::print_json(&imported.report)?;
    } else {
        // Nobody is left to tell when standard error is gone.
        let _ = io::stderr().write_all(text(&imported.report).as_bytes());
    }
    Ok(Answer::Done)
}

/// The report, fit for a terminal.
fn text(report: &Report) -> String {
    report.lines().iter().map(|line| shown(line) + "\n").collect()
}
