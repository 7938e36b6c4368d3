//! `sheet`: saved grasps as pages to print, scored again on the part as it is now.

mod dimensions;
mod drawing;
mod labels;
mod marks;
mod markup;
mod page;
mod paper;
mod tables;
mod words;

use super::knobs::Knobs;
use super::output::{self, Answer, Stop};
use super::recheck::{Opened, Scenes, check_one};
use crate::file::{self, SavedGrasp, shown, write_new};
use crate::part::Part;
use clap::Args;
use nalgebra::Point2;
use page::{Origin, Sheet};
use std::path::{Path, PathBuf};

#[derive(Debug, Args)]
pub(super) struct SheetArgs {
    /// Grasp file
    grasps: PathBuf,
    /// Part file [default: the one the grasp file names]
    #[arg(long, value_name = "FILE")]
    part: Option<PathBuf>,
    /// Grasp to take, may be given several times [default: all]
    #[arg(long, value_name = "NAME")]
    grasp: Vec<String>,
    /// Make the drawing of one grasp alone, as SVG
    #[arg(long)]
    svg: bool,
    /// Vertex that dimensions start from [default: the lower left corner of the outline's box]
    #[arg(long, value_name = "RING:VERTEX", value_parser = vertex)]
    datum: Option<Vertex>,
    /// File to write; without it the pages go to standard output
    #[arg(short, long, value_name = "FILE")]
    output: Option<PathBuf>,
    /// Replace a file that is there already
    #[arg(long)]
    force: bool,
}

/// A vertex, numbered as in the part file.
#[derive(Debug, Clone, Copy)]
struct Vertex {
    ring: usize,
    number: usize,
}

fn vertex(written: &str) -> Result<Vertex, String> {
    let parse = || {
        let (ring, number) = written.trim().split_once(':')?;
        Some(Vertex { ring: ring.parse().ok()?, number: number.parse().ok()? })
    };
    parse().ok_or_else(|| "give RING:VERTEX, such as 0:3".to_owned())
}

pub(super) fn run(args: &SheetArgs) -> Result<Answer, Stop> {
    let opened = Opened::read(&args.grasps, args.part.as_deref())?;
    let saved = chosen(&opened.saved.grasps, &args.grasp)?;
    if args.svg && saved.len() > 1 {
        return Err(Stop::bad("--svg draws one grasp; name it with --grasp"));
    }
    let part_path = args.part.as_ref().unwrap_or(&opened.saved.part_path);
    if let Some(target) = &args.output {
        spare(target, [&args.grasps, part_path])?;
    }
    let (datum, datum_words) = datum(&opened.part, args.datum)?;
    let knobs = Knobs::default();
    let mut scenes = Scenes::new(&opened.part, &knobs);
    let scenes = saved.iter().map(|grasp| scenes.of(grasp, &grasp.setup)).collect::<Result<Vec<_>, _>>()?;
    let part_changed = opened.part_changed();
    let sheets: Vec<_> = saved
        .into_iter()
        .zip(&scenes)
        .map(|(saved, scene)| {
            let (checked, reading) = check_one(saved, scene, false);
            Sheet { checked, reading, scene, saved, datum: (datum, &datum_words), part_changed }
        })
        .collect();
    let text = match &sheets[..] {
        [only] if args.svg => only.svg(),
        all => {
            let digest = file::part_digest(&opened.part);
            page::document(
                all,
                &Origin { grasps: &args.grasps, part: part_path, digests: [&digest, &opened.saved.part_digest] },
            )
        }
    };
    let answer = if sheets.iter().all(Sheet::is_sound) { Answer::Done } else { Answer::No };
    for sheet in sheets.iter().filter(|sheet| !sheet.is_sound()) {
        output::note(&format!("{}: {}", shown(&sheet.saved.name), sheet.complaint()));
    }
    match &args.output {
        Some(target) => write_new(target, &text, args.force)?,
        None => match output::print(&text) {
            // The answer is known, even when nobody reads the pages.
            Err(Stop::Closed) | Ok(()) => {}
            Err(stop) => return Err(stop),
        },
    }
    Ok(answer)
}

/// The grasps of these names, in file order; all of them when none is named.
fn chosen<'a>(all: &'a [SavedGrasp], names: &[String]) -> Result<Vec<&'a SavedGrasp>, Stop> {
    if all.is_empty() {
        return Err(Stop::bad("the file holds no grasp"));
    }
    let unknown = names.iter().filter(|name| !all.iter().any(|grasp| grasp.name == **name));
    let unknown: Vec<_> = unknown
        .map(|name| {
            let there = all.iter().map(|grasp| format!("\"{}\"", shown(&grasp.name))).collect::<Vec<_>>();
            format!("there is no grasp \"{}\"; the file has {}", shown(name), there.join(", "))
        })
        .collect();
    if !unknown.is_empty() {
        return Err(Stop::Bad(unknown));
    }
    Ok(all.iter().filter(|grasp| names.is_empty() || names.contains(&grasp.name)).collect())
}

/// Refuses to write over what the pages are made of, with or without `--force`.
fn spare(target: &Path, sources: [&PathBuf; 2]) -> Result<(), Stop> {
    let Ok(place) = target.canonicalize() else { return Ok(()) };
    if sources.iter().any(|source| source.canonicalize().is_ok_and(|source| source == place)) {
        let target = shown(&target.display().to_string());
        return Err(Stop::bad(format!("{target}: the pages are made of this file; name another")));
    }
    Ok(())
}

/// The point dimensions start from, in the part's frame, and which one that is.
fn datum(part: &Part, asked: Option<Vertex>) -> Result<(Point2<f64>, String), Stop> {
    let Some(Vertex { ring, number }) = asked else {
        return Ok((part.outline().bounds().0, "lower left corner of the outline's box".to_owned()));
    };
    match part.outline().ring(ring).get(number) {
        Some(edge) => Ok((edge.start(), format!("vertex {ring}:{number} of the part file"))),
        None => {
            let rings = part.outline().ring_sizes();
            let have: Vec<_> =
                rings.iter().enumerate().map(|(ring, size)| format!("{ring}:0 to {ring}:{}", size - 1)).collect();
            Err(Stop::bad(format!(
                "--datum {ring}:{number}: there is no such vertex; the part has {}",
                have.join(", ")
            )))
        }
    }
}
