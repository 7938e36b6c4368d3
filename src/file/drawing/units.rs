//! Units a drawing may be in, and those a part file may be in.
/// A length that coordinates are counted in.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Unit {
    pub(super) name: &'static str,
    pub(super) mm: f64,
}

impl Unit {
    /// Its name.
    pub fn name(self) -> &'static str {
        self.name
    }

    /// Its length, mm.
    pub fn mm(self) -> f64 {
        self.mm
    }
}

/// Units that can be named for a drawing: name and length in mm. The CSS pixel is 1/96 inch (CSS Values 4, 6.2).
const UNITS: [(&str, f64); 9] = [
    ("mm", 1.0),
    ("cm", 10.0),
    ("m", 1000.0),
    ("in", 25.4),
    ("ft", 304.8),
    ("um", 1e-3),
    ("mil", 25.4e-3),
    ("pt", 25.4 / 72.0),
    ("px", 25.4 / 96.0),
];
/// The first so many of them may stand in a part file.
const OF_PARTS: usize = 4;

/// Names of the units that can be told, for messages.
pub const UNIT_NAMES: &str = "mm, cm, m, in, ft, um, mil, pt, px";

/// A unit by name; nothing for another word.
pub fn unit_named(name: &str) -> Option<Unit> {
    UNITS.iter().find(|unit| unit.0 == name).map(|&(name, mm)| Unit { name, mm })
}

/// The unit of the part made of a drawing in a unit, and what lengths are multiplied by: the same unit where a part file
/// may have it, mm otherwise.
pub(super) fn of_part(unit: Unit) -> (Unit, f64) {
    match UNITS[..OF_PARTS].iter().find(|known| known.0 == unit.name) {
        Some(_) => (unit, 1.0),
        None => (Unit { name: "mm", mm: 1.0 }, unit.mm),
    }
}
