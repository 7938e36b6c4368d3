//! DXF drawings, R12 to 2018, text and binary: the sections that matter to an outline.
//!
//! Read by this reader and not by a library, after trying: the one well-known crate leaves out entity kinds it does not
//! know without a word (a report could not name them), takes 1.7 kB for each line, ends with a panic on a date out of
//! range in the header, says "unexpected code pair" where a number is wrong, and brings picture, date and big-number
//! crates that build longer than this whole program; another carries a licence of its own and a reader of other formats.
//! The format needs two lines for each value and ten entity kinds; see [`pairs`] and [`entity`].

mod blocks;
mod entity;
mod pairs;

use super::fault::{Fault, fault, quoted};
use super::sheet::Sheet;
use super::units::Unit;
use encoding_rs::{Encoding, UTF_8, WINDOWS_1252};
use entity::Record;
use kurbo::Point;
use pairs::{Pair, Pairs, Place};
use std::borrow::Cow;
use std::collections::HashMap;

/// Pairs one entity may have: some times what a polyline of the largest outline needs.
const MOST_PAIRS: usize = 2_000_000;
/// Entities a file may have.
const MOST_ENTITIES: usize = 1_000_000;

/// `$INSUNITS` of the DXF reference, from 1: name and length in mm. Those of the US survey follow from 1200 m = 3937 ft.
const UNITS: [(&str, f64); 24] = [
    ("in", 25.4),
    ("ft", 304.8),
    ("mile", 1_609_344.0),
    ("mm", 1.0),
    ("cm", 10.0),
    ("m", 1000.0),
    ("km", 1e6),
    ("microinch", 25.4e-6),
    ("mil", 25.4e-3),
    ("yard", 914.4),
    ("angstrom", 1e-7),
    ("nm", 1e-6),
    ("um", 1e-3),
    ("dm", 100.0),
    ("dam", 1e4),
    ("hm", 1e5),
    ("Gm", 1e12),
    ("astronomical unit", 149_597_870_700e3),
    ("light year", 9_460_730_472_580_800e3),
    ("parsec", 3.085_677_581_491_367e19),
    ("US survey ft", 1_200_000.0 / 3937.0),
    ("US survey in", 100_000.0 / 3937.0),
    ("US survey yard", 3_600_000.0 / 3937.0),
    ("US survey mile", 6_336_000_000.0 / 3937.0),
];

/// An entity and what all entities have.
#[derive(Debug)]
struct Entity {
    what: entity::What,
    id: super::sheet::Id,
    layer: usize,
    hidden: Option<&'static str>,
}

/// A block.
#[derive(Debug)]
struct Block {
    name: String,
    base: Point,
    /// True when its content is in another file.
    elsewhere: bool,
    entities: Vec<Entity>,
}

/// What is known while reading.
struct Reader<'a> {
    pairs: Pairs<'a>,
    /// A pair read too far.
    waiting: Option<Pair<'a>>,
    total: usize,
    encoding: &'static Encoding,
    sheet: Sheet,
    /// Layers by their names as the file has them.
    layers: HashMap<Vec<u8>, usize>,
    version: String,
    unit_code: Option<i64>,
    measurement: Option<i64>,
    blocks: Vec<Block>,
    entities: Vec<Entity>,
    /// Entities met, in blocks too.
    met: usize,
    /// The section being read, in quotation marks.
    section: Option<String>,
}

/// Reads a DXF file.
///
/// # Errors
/// The first fault found.
pub(super) fn read(bytes: &[u8], tell: &mut dyn FnMut(u64, u64)) -> Result<Sheet, Fault> {
    if bytes.starts_with(b"AC10") {
        return Err(fault("this is a DWG file; save the drawing as DXF"));
    }
    if bytes.starts_with(b"AutoCAD DXB") {
        return Err(fault("this is a DXB file; save the drawing as DXF"));
    }
    let pairs = Pairs::of(bytes);
    let mut reader = Reader {
        waiting: None,
        total: bytes.len(),
        encoding: WINDOWS_1252,
        sheet: Sheet::new(""),
        layers: HashMap::new(),
        version: String::new(),
        unit_code: None,
        measurement: None,
        blocks: Vec::new(),
        entities: Vec::new(),
        met: 0,
        section: None,
        pairs,
    };
    // Layer 0 is always there, and what a block draws on it goes to the layer of the insert.
    reader.sheet.layer("0");
    reader.file(tell)?;
    let binary = if reader.pairs.is_binary() { "binary" } else { "text" };
    let version = if reader.version.is_empty() { "version not stated".to_owned() } else { reader.version.clone() };
    reader.sheet.format = format!("DXF, {version}, {binary}");
    reader.units();
    let Reader { mut sheet, blocks, entities, .. } = reader;
    blocks::expand(&mut sheet, &blocks, entities)?;
    Ok(sheet)
}

impl<'a> Reader<'a> {
    fn next(&mut self) -> Result<Option<Pair<'a>>, Fault> {
        match self.waiting.take() {
            Some(pair) => Ok(Some(pair)),
            None => self.pairs.next(),
        }
    }

    /// The next pair where the file must not end.
    fn must(&mut self) -> Result<Pair<'a>, Fault> {
        if let Some(pair) = self.next()? {
            return Ok(pair);
        }
        let inside = self.section.as_ref().map_or(String::new(), |name| format!(" inside section {name}"));
        Err(fault(format!("the file ends{inside}; it was cut short: copy or export it again")))
    }

    fn file(&mut self, tell: &mut dyn FnMut(u64, u64)) -> Result<(), Fault> {
        let mut sections = 0;
        loop {
            let Some(pair) = self.next()? else {
                if sections == 0 {
                    return Err(fault("there is no section in it; is this a DXF file?"));
                }
                self.sheet.notes.push("the file has no end mark (0 EOF); all its sections are whole".to_owned());
                return Ok(());
            };
            if pair.begins("EOF") {
                return if sections == 0 {
                    Err(fault("there is no section in it; is this a DXF file?"))
                } else {
                    Ok(())
                };
            }
            if !pair.begins("SECTION") {
                return Err(pair.at.fault(format!(
                    "{} stands where a section must begin; the file is damaged or no DXF file",
                    quoted(pair.text())
                )));
            }
            let name = self.must()?;
            if name.code != 2 {
                return Err(name.at.fault("the section has no name; the file is damaged"));
            }
            sections += 1;
            self.section = Some(quoted(name.text()));
            match name.text() {
                b"HEADER" => self.header()?,
                b"TABLES" => self.tables()?,
                b"BLOCKS" => self.blocks(tell)?,
                b"ENTITIES" => self.entities(tell)?,
                _ => while !self.must()?.begins("ENDSEC") {},
            }
            self.section = None;
        }
    }

    fn header(&mut self) -> Result<(), Fault> {
        let mut variable: &[u8] = b"";
        loop {
            let pair = self.must()?;
            if pair.begins("ENDSEC") {
                return Ok(());
            }
            if pair.code == 9 {
                variable = pair.text();
                continue;
            }
            match (variable, pair.code) {
                (b"$ACADVER", 1) => {
                    self.version = super::fault::short(&String::from_utf8_lossy(pair.text()));
                    // From AC1021 (R2007) text is UTF-8, whatever the code page says.
                    if self.version.as_str() >= "AC1021" {
                        self.encoding = UTF_8;
                    }
                }
                (b"$DWGCODEPAGE", 3) if self.encoding != UTF_8 => match code_page(pair.text()) {
                    Some(encoding) => self.encoding = encoding,
                    None => self.sheet.notes.push(format!(
                        "code page {} is not known; names are read as Windows-1252",
                        quoted(pair.text())
                    )),
                },
                (b"$INSUNITS", 70) => self.unit_code = Some(pair.whole()?),
                (b"$MEASUREMENT", 70) => self.measurement = pair.whole().ok(),
                _ => {}
            }
        }
    }

    fn units(&mut self) {
        let code = self.unit_code.and_then(|code| usize::try_from(code).ok());
        match code {
            Some(code @ 1..=24) => {
                let (name, mm) = UNITS[code - 1];
                self.sheet.stated = Some((Unit { name, mm }, "$INSUNITS"));
            }
            Some(0) => "the drawing says it has no unit ($INSUNITS is 0)".clone_into(&mut self.sheet.unit_hint),
            Some(code) => self.sheet.unit_hint = format!("its $INSUNITS is {code}, which means no unit"),
            None => "the drawing states no unit".clone_into(&mut self.sheet.unit_hint),
        }
        if self.sheet.stated.is_none()
            && let Some(measurement) = self.measurement
        {
            let family = if measurement == 0 { "inches" } else { "metric units" };
            self.sheet.unit_hint += &format!("; its hatch patterns are made for {family} ($MEASUREMENT)");
        }
    }

    /// Text of the file as a string: the file's encoding, and `\U+XXXX` for characters it lacks.
    fn decoded(&self, bytes: &[u8]) -> String {
        let (text, _): (Cow<'_, str>, bool) = self.encoding.decode_without_bom_handling(bytes);
        let mut result = String::with_capacity(text.len());
        let mut rest = text.as_ref();
        while let Some(at) = rest.find("\\U+") {
            let digits = rest.get(at + 3..at + 7);
            let c = digits.and_then(|digits| u32::from_str_radix(digits, 16).ok()).and_then(char::from_u32);
            result.push_str(&rest[..at]);
            match c {
                Some(c) => {
                    result.push(c);
                    rest = &rest[at + 7..];
                }
                None => {
                    result.push_str("\\U+");
                    rest = &rest[at + 3..];
                }
            }
        }
        result.push_str(rest);
        result
    }

    /// The rest of what began with `0 kind`; pairs are kept only where `kept` says so.
    fn record(&mut self, at: Place, kind: &'static str, kept: bool) -> Result<Record<'a>, Fault> {
        let mut pairs = Vec::new();
        loop {
            let pair = self.must()?;
            if pair.code == 0 {
                self.waiting = Some(pair);
                return Ok(Record { at, kind, pairs });
            }
            // Codes of 1000 and more belong to other programs.
            if kept && pair.code < 1000 {
                if pairs.len() >= MOST_PAIRS {
                    return Err(at.fault(format!("{kind} has more values than any outline; simplify it")));
                }
                pairs.push(pair);
            }
        }
    }

    fn tables(&mut self) -> Result<(), Fault> {
        const FROZEN: i64 = 1;
        loop {
            let pair = self.must()?;
            if pair.begins("ENDSEC") {
                return Ok(());
            }
            if pair.begins("LAYER") {
                let record = self.record(pair.at, "LAYER", true)?;
                let name = self.decoded(record.text(2));
                let layer = self.sheet.layer(&name);
                self.sheet.layers[layer].hidden = if record.whole(70)? & FROZEN != 0 {
                    Some("its layer is frozen")
                } else if record.whole(62)? < 0 {
                    Some("its layer is off")
                } else {
                    None
                };
            }
        }
    }

    fn blocks(&mut self, tell: &mut dyn FnMut(u64, u64)) -> Result<(), Fault> {
        const ELSEWHERE: i64 = 4;
        loop {
            let pair = self.must()?;
            if pair.begins("ENDSEC") {
                return Ok(());
            }
            if !pair.begins("BLOCK") {
                continue;
            }
            let record = self.record(pair.at, "BLOCK", true)?;
            let name = self.decoded(record.text(2));
            let base = record.point(10).unwrap_or(Point::ORIGIN);
            let elsewhere = record.whole(70)? & ELSEWHERE != 0;
            let mut entities = Vec::new();
            self.run(&mut entities, "ENDBLK", tell)?;
            self.blocks.push(Block { name, base, elsewhere, entities });
        }
    }

    fn entities(&mut self, tell: &mut dyn FnMut(u64, u64)) -> Result<(), Fault> {
        let mut entities = std::mem::take(&mut self.entities);
        self.run(&mut entities, "ENDSEC", tell)?;
        self.entities = entities;
        Ok(())
    }

    /// Entities up to the word that ends them.
    fn run(&mut self, entities: &mut Vec<Entity>, end: &str, tell: &mut dyn FnMut(u64, u64)) -> Result<(), Fault> {
        loop {
            let pair = self.must()?;
            if pair.begins(end) {
                return Ok(());
            }
            if pair.begins("ENDSEC") || pair.begins("EOF") || pair.begins("BLOCK") {
                return Err(pair.at.fault(format!(
                    "{} stands before {end}; the file is damaged or was cut short",
                    quoted(pair.text())
                )));
            }
            if pair.code != 0 {
                return Err(pair.at.fault("an entity must begin here; the file is damaged"));
            }
            self.met += 1;
            if self.met > MOST_ENTITIES {
                return Err(fault(format!(
                    "it has more than {MOST_ENTITIES} entities; leave out what is not the part"
                )));
            }
            if self.met.is_multiple_of(1024) {
                let left = self.pairs.left();
                tell((self.total - left.min(self.total)) as u64, self.total as u64);
            }
            let entity = self.entity(pair)?;
            entities.push(entity);
        }
    }

    fn entity(&mut self, begin: Pair<'a>) -> Result<Entity, Fault> {
        let Some(kind) = entity::kind(begin.text()) else {
            let record = self.record(begin.at, "entity", true)?;
            let what = entity::What::Unknown(quoted(begin.text()));
            return self.common(&record, what);
        };
        let record = self.record(begin.at, kind, true)?;
        let mut vertices = Vec::new();
        if kind == "POLYLINE" {
            loop {
                let pair = self.must()?;
                if pair.begins("VERTEX") {
                    if vertices.len() >= MOST_PAIRS / 8 {
                        return Err(begin.at.fault("POLYLINE has more vertices than any outline; simplify it"));
                    }
                    let mut vertex = self.record(pair.at, "VERTEX", true)?;
                    // A vertex has a dozen values of which four count.
                    vertex.pairs.retain(|pair| matches!(pair.code, 10 | 20 | 30 | 42 | 70));
                    vertex.pairs.shrink_to_fit();
                    vertices.push(vertex);
                } else if pair.begins("SEQEND") {
                    self.record(pair.at, "SEQEND", false)?;
                    break;
                } else {
                    self.waiting = Some(pair);
                    break;
                }
            }
        }
        let mut what = record.read(&vertices)?;
        if let entity::What::Insert(insert) = &mut what {
            insert.block = self.decoded(record.text(2));
        }
        self.common(&record, what)
    }

    fn common(&mut self, record: &Record<'a>, what: entity::What) -> Result<Entity, Fault> {
        let layer = match record.text(8) {
            b"" => 0,
            name => match self.layers.get(name) {
                Some(&layer) => layer,
                None => {
                    let decoded = self.decoded(name);
                    let layer = self.sheet.layer(&decoded);
                    self.layers.insert(name.to_vec(), layer);
                    layer
                }
            },
        };
        let hidden = if record.whole(67)? == 1 {
            Some("it is on the paper, not in the model")
        } else if record.whole(60)? == 1 {
            Some("it is invisible")
        } else {
            None
        };
        Ok(Entity { what, id: record.id(), layer, hidden })
    }
}

/// The encoding of a code page named as in `$DWGCODEPAGE`.
fn code_page(name: &[u8]) -> Option<&'static Encoding> {
    let name = std::str::from_utf8(name).ok()?.to_ascii_lowercase();
    let number = name.rsplit(['_', ' ']).next().unwrap_or_default();
    let label = match number {
        "932" => "shift_jis".to_owned(),
        "936" => "gbk".to_owned(),
        "949" | "1361" | "johab" => "euc-kr".to_owned(),
        "950" => "big5".to_owned(),
        "874" => "windows-874".to_owned(),
        "866" => "ibm866".to_owned(),
        "utf8" | "utf-8" | "65001" => "utf-8".to_owned(),
        number if number.starts_with("125") => format!("windows-{number}"),
        number => name
            .strip_prefix("iso")
            .map_or(String::new(), |_| format!("iso-8859-{}", number.trim_start_matches("8859-"))),
    };
    Encoding::for_label(label.as_bytes())
}
