//! Drawings in: outlines from DXF and SVG files become part files, or are refused with what to mend.
//!
//! The way of a drawing: a format's reader makes a `sheet::Sheet` (paths, where they are placed, layers, what was
//! skipped); tracing turns every path into straight edges and arcs (`sheet`, `curve`, `biarc`); loose ends are
//! joined into loops (`chain`); loops are nested into parts (`nest`); one part is chosen, cleaned when asked
//! (`tidy`), checked by [`Part::new`] and written (`part_text`). Nothing is guessed in silence: what was left out and
//! what was closed is in the [`Report`], and what could be part of an outline but cannot be read is a refusal.
//!
//! # Libraries, and what is guarded
//! - `roxmltree` (MIT or Apache-2.0; parses without recursion into a flat tree): XML. It knows no files and no network.
//!   Guarded: entity declarations are refused before it sees them, size and number of nodes are limited.
//! - `svgtypes` (the same licences): numbers, lengths, transforms, path data. Its curves are not used, since arcs of
//!   circles are to stay arcs. Guarded: every coordinate is checked for range after it is in place.
//! - `kurbo` (the same licences; `svgtypes` brings it along): points, vectors, affine maps.
//! - `encoding_rs` (Apache-2.0 or MIT, and BSD-3-Clause): names in the code pages of older drawings.
//! - DXF is read here: `dxf/mod.rs` says why.
//! - `usvg` was not taken: it computes in single precision, and an outline is to come back to nine digits.
//!
//! A panic anywhere below becomes a refusal, not an end.

mod biarc;
mod chain;
mod curve;
mod duplicates;
mod dxf;
mod fault;
mod measure;
mod nest;
mod part_text;
mod report;
mod sheet;
mod strand;
mod survey;
mod svg;
mod tidy;
mod units;

pub use report::{CleanedReport, LayerReport, OpenReport, PartReport, Report, RingReport, SkippedReport, UnitsReport};
pub use units::{UNIT_NAMES, Unit, unit_named};

use super::FileFaults;
use crate::part::Part;
use fault::fault;
use std::fs::File;
use std::io::{ErrorKind, Read};
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::path::Path;
use survey::{Stopped, Survey};

/// Largest drawing read, bytes.
const MOST_BYTES: u64 = 128 << 20;

/// How a drawing is to be read. The default reads everything shown, with the tolerances the report states.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Options {
    /// Unit of the drawing's coordinates; what the drawing states when absent. See [`unit_named`].
    pub units: Option<Unit>,
    /// Layers to read; all when empty.
    pub layers: Vec<String>,
    /// Number of the part to take, from 1.
    pub pick: Option<usize>,
    /// Ends within this distance are joined, mm; 1e-5 of the larger side when absent.
    pub join_mm: Option<f64>,
    /// Largest distance between a curve and its arcs, mm; 0.01, but at most 1e-4 of the larger side, when absent.
    pub sagitta_mm: Option<f64>,
    /// Leave out lines that do not close.
    pub skip_open: bool,
    /// Leave out geometry that cannot be read.
    pub skip_unread: bool,
    /// Take out vertices between straight edges that turn by less than this, degrees.
    pub merge_collinear_deg: Option<f64>,
    /// Drop edges shorter than this, mm.
    pub drop_shorter_mm: Option<f64>,
    /// Write arcs as chords within the sagitta.
    pub chords: bool,
}

/// A part made of a drawing.
#[derive(Debug, Clone)]
pub struct Imported {
    /// The part file.
    pub text: String,
    /// The part.
    pub part: Part,
    /// What was done.
    pub report: Report,
}

/// The unit of a drawing is not known.
#[derive(Debug, Clone, PartialEq)]
pub struct NeedsUnits {
    /// What the drawing says about it.
    pub hint: String,
    /// Larger side of what is drawn, in the unknown unit.
    pub size: f64,
}

/// Why a drawing gives no part.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum Refusal {
    /// Something to mend, in the drawing or in what was asked.
    #[error("{0}")]
    Faults(FileFaults),
    /// The unit must be told.
    #[error("{}; its larger side is {}: say what that is in with --units ({UNIT_NAMES})", .0.hint, report::brief(.0.size))]
    NeedsUnits(NeedsUnits),
    /// There are several parts, largest first.
    #[error("there are {} parts in the drawing; choose one with --pick", .0.parts.len())]
    NeedsPick(Box<Report>),
}

impl Refusal {
    /// A line for each thing to mend; fit for a terminal.
    pub fn lines(&self, path: &Path) -> Vec<String> {
        const SHOWN: usize = 20;
        match self {
            Self::Faults(faults) => faults.lines(),
            Self::NeedsUnits(_) => FileFaults::of_whole(path, &self.to_string()).lines(),
            Self::NeedsPick(report) => {
                let mut lines = FileFaults::of_whole(path, &self.to_string()).lines();
                lines.extend(report.parts.iter().take(SHOWN).map(|part| part.line(&report.units.part)));
                if report.parts.len() > SHOWN {
                    lines.push(format!("and {} smaller ones; --list shows more", report.parts.len() - SHOWN));
                }
                lines
            }
        }
    }
}

/// Reads a drawing and makes a part of it.
///
/// # Errors
/// What is to be mended, told or chosen; see [`Refusal`].
pub fn read(path: &Path, options: &Options) -> Result<Imported, Refusal> {
    read_telling(path, options, &mut |_, _, _| {})
}

/// The same, telling a listener what is being done and how far it is.
///
/// # Errors
/// As [`read`].
pub fn read_telling(
    path: &Path,
    options: &Options,
    tell: &mut dyn FnMut(&'static str, u64, u64),
) -> Result<Imported, Refusal> {
    let bytes = bytes_of(path).map_err(Refusal::Faults)?;
    read_bytes(path, &bytes, options, tell)
}

/// Reads a drawing from the bytes of its file; `path` names it in messages and names the part.
///
/// # Errors
/// As [`read`].
pub fn read_bytes(
    path: &Path,
    bytes: &[u8],
    options: &Options,
    tell: &mut dyn FnMut(&'static str, u64, u64),
) -> Result<Imported, Refusal> {
    guarded(path, || {
        let survey = surveyed(path, bytes, options, false, tell)?;
        if !survey.problems.is_empty() {
            return Err(refused(path, survey.problems));
        }
        part_text::finish(path, survey, options)
    })
}

/// What is in a drawing, whether a part can be made of it or not.
///
/// # Errors
/// A drawing that cannot be read at all.
pub fn list(
    path: &Path,
    options: &Options,
    tell: &mut dyn FnMut(&'static str, u64, u64),
) -> Result<(Report, Vec<String>), Refusal> {
    let bytes = bytes_of(path).map_err(Refusal::Faults)?;
    guarded(path, || {
        let survey = surveyed(path, &bytes, options, true, tell)?;
        let problems = FileFaults { path: path.to_owned(), faults: survey.problems }.lines();
        Ok((survey.report, problems))
    })
}

fn refused(path: &Path, faults: Vec<fault::Fault>) -> Refusal {
    Refusal::Faults(FileFaults { path: path.to_owned(), faults })
}

/// A panic below is a refusal.
fn guarded<T>(path: &Path, work: impl FnOnce() -> Result<T, Refusal>) -> Result<T, Refusal> {
    catch_unwind(AssertUnwindSafe(work)).unwrap_or_else(|_| {
        Err(refused(path, vec![fault("the drawing made this program stumble; it cannot be read: please report it")]))
    })
}

fn surveyed(
    path: &Path,
    bytes: &[u8],
    options: &Options,
    listing: bool,
    tell: &mut dyn FnMut(&'static str, u64, u64),
) -> Result<Survey, Refusal> {
    let name = path.file_name().map_or(String::new(), |name| name.to_string_lossy().into_owned());
    let reading = &mut |done, all| tell("reading", done, all);
    let sheet = match format_of(path, bytes) {
        Format::Dxf => dxf::read(bytes, reading),
        Format::Svg => svg::read(bytes, reading),
        Format::Other(why) => Err(fault(why)),
    };
    let sheet = sheet.map_err(|fault| refused(path, vec![fault]))?;
    survey::survey(&name, sheet, options, listing, tell).map_err(|stopped| match stopped {
        Stopped::Faults(faults) => refused(path, faults),
        Stopped::Units(needs) => Refusal::NeedsUnits(needs),
    })
}

enum Format {
    Dxf,
    Svg,
    Other(&'static str),
}

/// Told by what is in the file; the name only decides where that says nothing.
fn format_of(path: &Path, bytes: &[u8]) -> Format {
    let head = bytes.get(..bytes.len().min(64)).unwrap_or_default();
    let text = head.strip_prefix(b"\xef\xbb\xbf").unwrap_or(head).trim_ascii_start();
    if text.is_empty() && bytes.trim_ascii().is_empty() {
        return Format::Other("the file is empty");
    }
    if head.starts_with(b"\x1f\x8b") {
        return Format::Other("the file is compressed; unpack it (an SVGZ is an SVG packed by gzip)");
    }
    if text.starts_with(b"%PDF") || text.starts_with(b"%!PS") {
        return Format::Other("this is a PDF or PostScript file; save the drawing as DXF or SVG");
    }
    if text.starts_with(b"<") || head.starts_with(b"\xff\xfe") || head.starts_with(b"\xfe\xff") {
        return Format::Svg;
    }
    let is_svg = path.extension().is_some_and(|extension| extension.eq_ignore_ascii_case("svg"));
    if is_svg { Format::Svg } else { Format::Dxf }
}

/// The bytes of a file.
fn bytes_of(path: &Path) -> Result<Vec<u8>, FileFaults> {
    let fault = |text: &str| Err(FileFaults::of_whole(path, text));
    let mut bytes = Vec::new();
    match File::open(path).and_then(|file| file.take(MOST_BYTES + 1).read_to_end(&mut bytes)) {
        Err(error) if error.kind() == ErrorKind::NotFound => fault("there is no such file"),
        Err(error) if error.kind() == ErrorKind::IsADirectory || path.is_dir() => {
            fault("is a folder; name a file in it")
        }
        Err(error) => fault(&error.to_string()),
        Ok(read) if read as u64 > MOST_BYTES => {
            fault(&format!("is larger than {} MiB; leave out what is not the part", MOST_BYTES >> 20))
        }
        Ok(_) => Ok(bytes),
    }
}
