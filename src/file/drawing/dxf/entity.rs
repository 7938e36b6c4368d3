//! One entity of a DXF file: what its group codes say about lines, arcs and curves (DXF reference, ENTITIES section).

use super::super::curve::{Ellipse, Spline, rotation};
use super::super::fault::Fault;
use super::super::sheet::{Id, Path, Segment, Weight};
use super::pairs::{Pair, Place};
use kurbo::{Affine, Point, Vec2};

/// An extrusion closer to the z axis than this is on it.
const ON_AXIS: f64 = 1e-6;
/// A z that differs from others of its entity by more than this fraction of the entity's size leaves the plane.
const LEVEL: f64 = 1e-6;

/// What an entity is.
#[derive(Debug)]
pub(super) enum What {
    /// Lines and curves, and from the entity's own coordinates to those around it.
    Path(Path, Affine),
    /// A block put in place.
    Insert(Insert),
    /// Nothing that is read, and why.
    Skipped(&'static str, String, Weight),
    /// A kind of entity nobody here has heard of.
    Unknown(String),
}

/// A reference to a block.
#[derive(Debug)]
pub(super) struct Insert {
    /// Name of the block.
    pub(super) block: String,
    /// From the block's coordinates, with its base point at the origin, to those around the insert; one for each place
    /// of an array.
    pub(super) origin: Affine,
    /// Scale and turn of the block's content.
    pub(super) content: Affine,
    /// Columns and rows.
    pub(super) counts: [usize; 2],
    /// Distances of columns and rows.
    pub(super) spacing: [f64; 2],
}

/// The group codes of one entity.
#[derive(Debug)]
pub(super) struct Record<'a> {
    /// Where it begins.
    pub(super) at: Place,
    /// Its kind.
    pub(super) kind: &'static str,
    /// The rest.
    pub(super) pairs: Vec<Pair<'a>>,
}

impl<'a> Record<'a> {
    fn find(&self, code: i32) -> Option<&Pair<'a>> {
        self.pairs.iter().find(|pair| pair.code == code)
    }

    fn real(&self, code: i32, absent: f64) -> Result<f64, Fault> {
        self.find(code).map_or(Ok(absent), Pair::real)
    }

    /// A whole number, or 0.
    pub(super) fn whole(&self, code: i32) -> Result<i64, Fault> {
        self.find(code).map_or(Ok(0), Pair::whole)
    }

    /// A text, or nothing in it.
    pub(super) fn text(&self, code: i32) -> &[u8] {
        self.find(code).map_or(b"", Pair::text)
    }

    /// A point whose x has this code.
    pub(super) fn point(&self, code: i32) -> Result<Point, Fault> {
        match (self.find(code), self.find(code + 10)) {
            (Some(x), Some(y)) => Ok(Point::new(x.real()?, y.real()?)),
            _ => Err(self.at.fault(format!("{} has no point with group codes {code} and {}", self.kind, code + 10))),
        }
    }

    /// What tells it from others: its handle, or where it stands.
    pub(super) fn id(&self) -> Id {
        let handle = std::str::from_utf8(self.text(5)).ok().and_then(|text| u64::from_str_radix(text, 16).ok());
        match (handle, self.at) {
            (Some(handle), _) => Id::Handle(handle),
            (None, Place::Line(line)) => Id::Line(line),
            (None, Place::Byte(byte)) => Id::Byte(byte),
        }
    }

    /// From the coordinates of the entity's own plane to the drawing's, by the arbitrary axis algorithm of the DXF
    /// reference: for an extrusion along -z x is turned over. Nothing for a plane that is not the drawing's.
    fn plane(&self) -> Result<Option<Affine>, Fault> {
        let (x, y, z) = (self.real(210, 0.0)?, self.real(220, 0.0)?, self.real(230, 1.0)?);
        let tilted = !(x.hypot(y) <= ON_AXIS * z.abs());
        Ok(match z {
            _ if tilted || z == 0.0 => None,
            z if z > 0.0 => Some(Affine::IDENTITY),
            _ => Some(Affine::scale_non_uniform(-1.0, 1.0)),
        })
    }

    fn path(&self, start: Point, segments: Vec<Segment>, closed: bool) -> Path {
        Path { kind: self.kind, id: self.id(), start, segments, closed }
    }

    /// Reads the entity. A polyline of the old kind brings its vertices along; the name of an insert's block is for the
    /// caller to set, who knows the encoding.
    ///
    /// # Errors
    /// One fault: something that is no number, or lacking.
    pub(super) fn read(&self, vertices: &[Record<'_>]) -> Result<What, Fault> {
        match self.kind {
            "LINE" => self.line(),
            "ARC" | "CIRCLE" => self.arc(),
            "ELLIPSE" => self.ellipse(),
            "LWPOLYLINE" => self.light_polyline(),
            "POLYLINE" => self.polyline(vertices),
            "SPLINE" => self.spline(),
            "INSERT" => self.insert(),
            kind => {
                let (why, weight) = unread(kind);
                Ok(What::Skipped(kind, why.to_owned(), weight))
            }
        }
    }

    fn missed(&self, why: impl Into<String>) -> What {
        What::Skipped(self.kind, why.into(), Weight::Missed)
    }

    fn tilted(&self) -> What {
        self.missed("it is drawn in a tilted plane; draw it in the plane of the drawing")
    }

    fn out_of_plane(&self) -> What {
        self.missed("it leaves the plane of the drawing; flatten the drawing to z = 0")
    }

    fn line(&self) -> Result<What, Fault> {
        let (from, to) = (self.point(10)?, self.point(11)?);
        let rise = (self.real(31, 0.0)? - self.real(30, 0.0)?).abs();
        if rise > LEVEL * (to - from).hypot() {
            return Ok(self.out_of_plane());
        }
        Ok(What::Path(self.path(from, vec![Segment::Line(to)], false), Affine::IDENTITY))
    }

    fn arc(&self) -> Result<What, Fault> {
        let (centre, radius) = (self.point(10)?, self.real(40, 0.0)?);
        let Some(plane) = self.plane()? else { return Ok(self.tilted()) };
        if !(radius > 0.0) {
            return Ok(self.missed("its radius is not above 0"));
        }
        let mut circle = Ellipse::circle(centre, radius);
        if self.kind == "ARC" {
            let (from, to) = (self.real(50, 0.0)?, self.real(51, 360.0)?);
            if from == to {
                return Ok(self.missed("it ends at the angle where it begins; draw a CIRCLE, or remove it"));
            }
            let sweep = (to - from).rem_euclid(360.0);
            let sweep = if sweep == 0.0 { 360.0 } else { sweep };
            // Whole degrees stay exact at quarter turns.
            circle.from = from.to_radians();
            circle.to = (from + sweep).to_radians();
        }
        Ok(What::Path(self.round(circle), plane))
    }

    /// The path of an elliptical arc or a whole ellipse.
    fn round(&self, ellipse: Ellipse) -> Path {
        let start = ellipse.point(ellipse.from);
        let whole = ellipse.is_whole();
        let end = if whole { start } else { ellipse.point(ellipse.to) };
        self.path(start, vec![Segment::Ellipse(ellipse, end)], whole)
    }

    fn ellipse(&self) -> Result<What, Fault> {
        let (centre, major, ratio) = (self.point(10)?, self.point(11)?.to_vec2(), self.real(40, 1.0)?);
        // An ellipse is given in the drawing's coordinates; its plane only says which way round it runs.
        let Some(plane) = self.plane()? else { return Ok(self.tilted()) };
        if self.real(31, 0.0)?.abs() > LEVEL * major.hypot() {
            return Ok(self.out_of_plane());
        }
        if !(major.hypot() > 0.0 && ratio > 0.0) {
            return Ok(self.missed("an axis is not above 0"));
        }
        let round = if plane == Affine::IDENTITY { 1.0 } else { -1.0 };
        let minor = Vec2::new(-major.y, major.x) * (ratio * round);
        let (from, to) = (self.real(41, 0.0)?, self.real(42, std::f64::consts::TAU)?);
        if from == to {
            return Ok(self.missed("it ends where it begins; draw it whole, or remove it"));
        }
        let sweep = (to - from).rem_euclid(std::f64::consts::TAU);
        let to = if sweep == 0.0 || (to - from).abs() >= std::f64::consts::TAU {
            from + std::f64::consts::TAU
        } else {
            from + sweep
        };
        Ok(What::Path(self.round(Ellipse { centre, u: major, v: minor, from, to }), Affine::IDENTITY))
    }

    /// The path through vertices with bulges, each the bulge of the edge that leaves the vertex.
    fn through(&self, vertices: &[(Point, f64)], closed: bool) -> What {
        let Some(&(start, _)) = vertices.first() else {
            return What::Skipped(self.kind, "it has no vertices".to_owned(), Weight::Harmless);
        };
        let mut segments = Vec::with_capacity(vertices.len());
        for (i, &(_, bulge)) in vertices.iter().enumerate() {
            let last = i + 1 == vertices.len();
            if last && !closed {
                break;
            }
            segments.push(Segment::Bulge(vertices[if last { 0 } else { i + 1 }].0, bulge));
        }
        What::Path(self.path(start, segments, closed), Affine::IDENTITY)
    }

    fn light_polyline(&self) -> Result<What, Fault> {
        let Some(plane) = self.plane()? else { return Ok(self.tilted()) };
        let mut vertices: Vec<(Point, f64)> = Vec::new();
        let mut whole = true;
        for pair in &self.pairs {
            match (pair.code, vertices.last_mut()) {
                (10, _) => {
                    whole &= vertices.last().is_none_or(|(point, _)| !point.y.is_nan());
                    vertices.push((Point::new(pair.real()?, f64::NAN), 0.0));
                }
                (20, Some((point, _))) => point.y = pair.real()?,
                (42, Some((_, bulge))) => *bulge = pair.real()?,
                _ => {}
            }
        }
        whole &= vertices.last().is_none_or(|(point, _)| !point.y.is_nan());
        let said = self.find(90).map(Pair::whole).transpose()?;
        if !whole || said.is_some_and(|said| said != vertices.len() as i64) {
            return Err(self.at.fault(format!(
                "{} has {} vertices of which some are not whole, or not the {} it announces; the file is damaged",
                self.kind,
                vertices.len(),
                said.unwrap_or(0)
            )));
        }
        let closed = self.whole(70)? & 1 == 1;
        Ok(match self.through(&vertices, closed) {
            What::Path(path, _) => What::Path(path, plane),
            other => other,
        })
    }

    fn polyline(&self, records: &[Record<'_>]) -> Result<What, Fault> {
        const CLOSED: i64 = 1;
        const SOLID: i64 = 16 | 64;
        const IN_SPACE: i64 = 8;
        // Vertices that only control a spline drawn through others.
        const FRAME: i64 = 16;
        let flags = self.whole(70)?;
        if flags & SOLID != 0 {
            return Ok(self.missed("it is a mesh of a solid; draw the outline"));
        }
        let plane = if flags & IN_SPACE == 0 { self.plane()? } else { Some(Affine::IDENTITY) };
        let Some(plane) = plane else { return Ok(self.tilted()) };
        let mut vertices = Vec::with_capacity(records.len());
        let mut levels = Vec::new();
        for record in records {
            if record.whole(70)? & FRAME == 0 {
                vertices.push((record.point(10)?, record.real(42, 0.0)?));
                levels.push(record.real(30, 0.0)?);
            }
        }
        if flags & IN_SPACE != 0 {
            let size = vertices.iter().fold(0.0_f64, |size, v| size.max((v.0 - vertices[0].0).hypot()));
            if levels.iter().any(|level| (level - levels[0]).abs() > LEVEL * size) {
                return Ok(self.out_of_plane());
            }
        }
        Ok(match self.through(&vertices, flags & CLOSED != 0) {
            What::Path(path, _) => What::Path(path, plane),
            other => other,
        })
    }

    fn spline(&self) -> Result<What, Fault> {
        let mut spline = Spline { degree: 0, knots: Vec::new(), points: Vec::new(), weights: Vec::new() };
        let mut levels = Vec::new();
        let mut fit_points = 0;
        for pair in &self.pairs {
            match (pair.code, spline.points.last_mut()) {
                (10, _) => spline.points.push(Point::new(pair.real()?, f64::NAN)),
                (20, Some(point)) => point.y = pair.real()?,
                (30, _) => levels.push(pair.real()?),
                (40, _) => spline.knots.push(pair.real()?),
                (41, _) => spline.weights.push(pair.real()?),
                (11, _) => fit_points += 1,
                _ => {}
            }
        }
        spline.degree = usize::try_from(self.whole(71)?).unwrap_or(0);
        if spline.points.is_empty() && fit_points > 0 {
            return Ok(self.missed("it has only points to pass through; export it with its control points"));
        }
        if let Some(flaw) = spline.flaw() {
            return Ok(self.missed(format!("{flaw}; export the drawing again")));
        }
        if spline.points.iter().any(|point| point.y.is_nan()) {
            return Err(self.at.fault("SPLINE has a control point without y; the file is damaged"));
        }
        let size = spline.points.iter().fold(0.0_f64, |size, p| size.max((*p - spline.points[0]).hypot()));
        if levels.iter().any(|level| (level - levels[0]).abs() > LEVEL * size) {
            return Ok(self.out_of_plane());
        }
        let pieces = spline.beziers();
        let Some(start) = pieces.first().map(|piece| piece.start()) else {
            return Ok(self.missed("it has no length"));
        };
        let segments = pieces.into_iter().map(Segment::Bezier).collect();
        Ok(What::Path(self.path(start, segments, false), Affine::IDENTITY))
    }

    fn insert(&self) -> Result<What, Fault> {
        let Some(plane) = self.plane()? else { return Ok(self.tilted()) };
        let at = self.point(10)?;
        let (sx, sy) = (self.real(41, 1.0)?, self.real(42, 1.0)?);
        if sx == 0.0 || sy == 0.0 {
            return Ok(self.missed("it is scaled to nothing"));
        }
        let count = |code: i32| -> Result<usize, Fault> {
            let count = self.find(code).map_or(Ok(1), Pair::whole)?;
            Ok(usize::try_from(count).unwrap_or(0).max(1))
        };
        let turn = rotation(self.real(50, 0.0)?);
        Ok(What::Insert(Insert {
            block: String::new(),
            origin: plane * Affine::translate(at.to_vec2()) * turn,
            content: Affine::scale_non_uniform(sx, sy),
            counts: [count(70)?, count(71)?],
            spacing: [self.real(44, 0.0)?, self.real(45, 0.0)?],
        }))
    }
}

/// The kinds of entities this reader knows by name, so that a kind needs no text of its own; `unread` says why those
/// without lines are not read.
const KINDS: [&str; 46] = [
    "LINE",
    "ARC",
    "CIRCLE",
    "ELLIPSE",
    "LWPOLYLINE",
    "POLYLINE",
    "VERTEX",
    "SEQEND",
    "SPLINE",
    "INSERT",
    "TEXT",
    "MTEXT",
    "ATTRIB",
    "ATTDEF",
    "DIMENSION",
    "ARC_DIMENSION",
    "LARGE_RADIAL_DIMENSION",
    "LEADER",
    "MLEADER",
    "MULTILEADER",
    "TOLERANCE",
    "POINT",
    "HATCH",
    "IMAGE",
    "WIPEOUT",
    "VIEWPORT",
    "OLEFRAME",
    "OLE2FRAME",
    "ACAD_TABLE",
    "SHAPE",
    "RTEXT",
    "UNDERLAY",
    "PDFUNDERLAY",
    "DWFUNDERLAY",
    "DGNUNDERLAY",
    "XLINE",
    "RAY",
    "SOLID",
    "TRACE",
    "3DFACE",
    "3DSOLID",
    "BODY",
    "REGION",
    "MLINE",
    "HELIX",
    "MESH",
];

/// The name of a kind of entity; nothing for one this reader has never heard of.
pub(super) fn kind(bytes: &[u8]) -> Option<&'static str> {
    KINDS.into_iter().find(|kind| kind.as_bytes() == bytes)
}

/// Why a kind of entity is not read, and whether an outline could miss it.
fn unread(kind: &str) -> (&'static str, Weight) {
    match kind {
        "TEXT" | "MTEXT" | "ATTRIB" | "ATTDEF" | "RTEXT" | "SHAPE" | "ACAD_TABLE" => ("lettering", Weight::Harmless),
        "DIMENSION"
        | "ARC_DIMENSION"
        | "LARGE_RADIAL_DIMENSION"
        | "LEADER"
        | "MLEADER"
        | "MULTILEADER"
        | "TOLERANCE" => ("a dimension or a remark", Weight::Harmless),
        "POINT" => ("a point has no length", Weight::Harmless),
        "HATCH" | "WIPEOUT" => ("a filled area; its outline is drawn by other entities", Weight::Harmless),
        "IMAGE" | "OLEFRAME" | "OLE2FRAME" | "UNDERLAY" | "PDFUNDERLAY" | "DWFUNDERLAY" | "DGNUNDERLAY" => {
            ("a picture", Weight::Harmless)
        }
        "VIEWPORT" => ("a window of the paper", Weight::Harmless),
        "XLINE" | "RAY" => ("an endless construction line", Weight::Harmless),
        "VERTEX" | "SEQEND" => ("it belongs to no polyline", Weight::Missed),
        "SOLID" | "TRACE" | "3DFACE" => ("a filled patch, not an outline; draw its edges", Weight::Missed),
        "REGION" | "MLINE" => ("it is not made of lines and arcs; explode it", Weight::Missed),
        _ => ("it is a body or a curve in space; draw the outline", Weight::Missed),
    }
}
