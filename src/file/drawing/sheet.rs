//! A drawing as any format leaves it: paths, where they are placed, layers, what was skipped, the stated unit. And the
//! tracing of it: every placed path as a strand of straight edges and arcs.

use super::biarc;
use super::curve::{Bezier, Curve, Ellipse};
use super::fault::{Fault, fault, short};
use super::strand::Strand;
use super::units::Unit;
use kurbo::{Affine, Point};
use std::collections::{BTreeMap, HashMap};

/// Paths in place, and pieces of them, that a drawing may come to.
pub(super) const MOST_PIECES: usize = 1_000_000;
/// Coordinates beyond this are refused before anything is computed from them.
const FARTHEST: f64 = 1e12;
/// Bulges below this are straight for a part too.
const STRAIGHT: f64 = 1e-7;

/// A piece of a path, from where the one before ended.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Segment {
    /// A straight line.
    Line(Point),
    /// A circular arc with this bulge.
    Bulge(Point, f64),
    /// An arc of an ellipse; it ends exactly at the point.
    Ellipse(Ellipse, Point),
    /// A Bezier curve.
    Bezier(Bezier),
}

/// One entity's path.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Path {
    /// Kind of entity or element, as the format calls it.
    pub(super) kind: &'static str,
    /// What tells it from others.
    pub(super) id: Id,
    /// First point.
    pub(super) start: Point,
    /// The rest.
    pub(super) segments: Vec<Segment>,
    /// True when it returns to its first point, with a straight edge where it has not done so by itself.
    pub(super) closed: bool,
}

/// What tells one entity from another.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Id {
    /// A handle.
    Handle(u64),
    /// A name given in the drawing.
    Name(Box<str>),
    /// Line of a text file.
    Line(usize),
    /// Byte of a binary file.
    Byte(usize),
}

impl Id {
    /// An entity of a kind in words.
    pub(super) fn words(&self, kind: &str) -> String {
        match self {
            Self::Handle(handle) => format!("{kind} {handle:X}"),
            Self::Name(name) => format!("{kind} \"{}\"", short(name)),
            Self::Line(line) => format!("{kind} at line {line}"),
            Self::Byte(byte) => format!("{kind} at byte {byte}"),
        }
    }
}

/// A path in its place.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Placed {
    /// Number of the path.
    pub(super) path: usize,
    /// From the path's coordinates to the drawing's.
    pub(super) place: Affine,
    /// Number of the layer.
    pub(super) layer: usize,
}

/// A layer.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Layer {
    /// Its name as the drawing has it.
    pub(super) name: String,
    /// Why nothing on it is read; nothing when it is shown.
    pub(super) hidden: Option<&'static str>,
}

/// Whether what was skipped could be missed in an outline.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Weight {
    /// Lettering, dimensions, what is hidden on purpose.
    Harmless,
    /// Geometry that might be part of the outline.
    Missed,
}

/// A drawing read.
#[derive(Debug)]
pub(super) struct Sheet {
    /// Format and version.
    pub(super) format: String,
    /// The unit it states, and where.
    pub(super) stated: Option<(Unit, &'static str)>,
    /// What it says about units when it states none.
    pub(super) unit_hint: String,
    /// From the drawing's coordinates to x right, y up, in the stated unit or the one told.
    pub(super) root: Affine,
    /// Layers, in the order met.
    pub(super) layers: Vec<Layer>,
    /// Their numbers by name in small letters.
    by_name: HashMap<String, usize>,
    /// Paths.
    pub(super) paths: Vec<Path>,
    /// Paths in place.
    pub(super) placed: Vec<Placed>,
    /// What was skipped: kind, why, weight and layer, with the count and the first one in words.
    pub(super) skipped: BTreeMap<(String, String, Weight, usize), (usize, String)>,
    /// Worth knowing without being a fault.
    pub(super) notes: Vec<String>,
}

impl Sheet {
    /// An empty sheet.
    pub(super) fn new(format: impl Into<String>) -> Self {
        Self {
            format: format.into(),
            stated: None,
            unit_hint: String::new(),
            root: Affine::IDENTITY,
            layers: Vec::new(),
            by_name: HashMap::new(),
            paths: Vec::new(),
            placed: Vec::new(),
            skipped: BTreeMap::new(),
            notes: Vec::new(),
        }
    }

    /// Number of a layer by name, made when it is new. Capital and small letters are the same.
    pub(super) fn layer(&mut self, name: &str) -> usize {
        let layers = &mut self.layers;
        *self.by_name.entry(name.to_lowercase()).or_insert_with(|| {
            layers.push(Layer { name: name.to_owned(), hidden: None });
            layers.len() - 1
        })
    }

    /// Number of a layer by name.
    pub(super) fn find_layer(&self, name: &str) -> Option<usize> {
        self.by_name.get(&name.to_lowercase()).copied()
    }

    /// Places a path.
    pub(super) fn place(&mut self, path: usize, place: Affine, layer: usize) -> Result<(), Fault> {
        if self.placed.len() >= MOST_PIECES {
            return Err(too_much());
        }
        self.placed.push(Placed { path, place, layer });
        Ok(())
    }

    /// Notes something that is not read.
    pub(super) fn skip(&mut self, kind: &str, id: &Id, why: &str, weight: Weight, layer: usize) {
        let key = (short(kind), why.to_owned(), weight, layer);
        let entry = self.skipped.entry(key).or_insert_with(|| (0, id.words(kind)));
        entry.0 += 1;
    }

    /// Where a strand comes from, in words.
    pub(super) fn source_words(&self, source: usize) -> String {
        let placed = &self.placed[source];
        let path = &self.paths[placed.path];
        let layer = &self.layers[placed.layer].name;
        if layer.is_empty() {
            path.id.words(path.kind)
        } else {
            format!("{} on layer \"{}\"", path.id.words(path.kind), short(layer))
        }
    }

    /// Traces every placed path on a chosen layer, curves within the sagitta; an infinite one gives a rough idea of the
    /// size. `tell` hears how far the work is.
    ///
    /// # Errors
    /// One fault: a coordinate nothing can be done with, or too many pieces.
    pub(super) fn trace(
        &self,
        root: Affine,
        chosen: &[bool],
        sagitta: f64,
        tell: &mut dyn FnMut(u64, u64),
    ) -> Result<Vec<Strand>, Fault> {
        let mut strands = Vec::with_capacity(self.placed.len());
        let mut pieces = 0;
        for (source, placed) in self.placed.iter().enumerate() {
            if !chosen[placed.layer] {
                continue;
            }
            let path = &self.paths[placed.path];
            let mut strand = traced(path, root * placed.place, sagitta, source);
            strand.bulges.iter_mut().filter(|bulge| bulge.abs() < STRAIGHT).for_each(|bulge| *bulge = 0.0);
            let sound = |p: &Point| p.x.abs() <= FARTHEST && p.y.abs() <= FARTHEST;
            if !(strand.vertices.iter().all(sound) && strand.bulges.iter().all(|bulge| bulge.is_finite())) {
                return Err(fault(format!(
                    "{}: a coordinate is beyond any drawing; mend it or leave it out",
                    self.source_words(source)
                )));
            }
            pieces += strand.bulges.len();
            if pieces > MOST_PIECES {
                return Err(too_much());
            }
            if !strand.bulges.is_empty() {
                strands.push(strand);
            }
            if source % 1024 == 0 {
                tell(source as u64, self.placed.len() as u64);
            }
        }
        Ok(strands)
    }
}

/// The fault of a drawing that expands to too much.
pub(super) fn too_much() -> Fault {
    fault(format!(
        "the drawing comes to more than {MOST_PIECES} lines and arcs once everything is in place; leave out layers with \
         --layer, or take a coarser --sagitta"
    ))
}

fn traced(path: &Path, place: Affine, sagitta: f64, source: usize) -> Strand {
    let mut strand = Strand::at(place * path.start, source);
    let mut from = path.start;
    for segment in &path.segments {
        let end = match segment {
            Segment::Line(end) => {
                strand.to(place * *end, 0.0);
                *end
            }
            Segment::Bulge(end, bulge) => {
                if *bulge == 0.0 || from == *end {
                    strand.to(place * *end, 0.0);
                } else {
                    let ellipse = Ellipse::of_bulge(from, *end, *bulge);
                    ellipse_to(&mut strand, &ellipse.placed(place), place * *end, sagitta);
                }
                *end
            }
            Segment::Ellipse(ellipse, end) => {
                ellipse_to(&mut strand, &ellipse.placed(place), place * *end, sagitta);
                *end
            }
            Segment::Bezier(bezier) => {
                biarc::trace(&bezier.placed(place), sagitta, &mut strand, MOST_PIECES);
                bezier.end()
            }
        };
        from = end;
    }
    if path.closed {
        strand.close(0.0);
    }
    strand
}

/// Adds an elliptical arc: true arcs where it is circular.
fn ellipse_to(strand: &mut Strand, ellipse: &Ellipse, end: Point, sagitta: f64) {
    let pieces = ellipse.pieces();
    for (number, piece) in pieces.iter().enumerate() {
        match piece.bulge() {
            Some(bulge) => strand.to(piece.at(piece.to), bulge),
            None => biarc::trace(piece, sagitta, strand, MOST_PIECES),
        }
        if number + 1 == pieces.len()
            && strand.vertices.len() > 1
            && let Some(last) = strand.vertices.last_mut()
        {
            *last = end;
        }
    }
}
