//! Densities of common materials, each with where it was read.

use super::source::Source;

/// One row of the density table.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Density {
    /// Name a part file may use; matched without regard to case.
    pub name: &'static str,
    /// Other names it answers to.
    pub also: &'static [&'static str],
    /// Density, kg/m3; the middle where the source gives a range.
    pub kg_m3: f64,
    /// Lowest and highest density of the source, kg/m3, where it gives a range.
    pub range: Option<[f64; 2]>,
    /// Where it was read.
    pub source: &'static Source,
}

impl Density {
    /// Every name it answers to, its own first.
    pub fn names(&self) -> impl Iterator<Item = &'static str> {
        std::iter::once(self.name).chain(self.also.iter().copied())
    }
}

static GERE: Source =
    Source::seen("Gere, Table H-1", "Gere, Mechanics of Materials, 5th ed., Table H-1 (by a reprint)");
static CALLISTER: Source =
    Source::seen("Callister, App. B", "Callister, Materials Science and Engineering, Appendix B (by a compilation)");
static CAMBRIDGE: Source = Source::remembered("Cambridge data book", "Cambridge Materials Data Book 2003, p. 10");
static PRACTICE: Source = Source::seen("common practice, no source", "common practice, no source");

const fn row(name: &'static str, kg_m3: f64, source: &'static Source) -> Density {
    Density { name, also: &[], kg_m3, range: None, source }
}

/// A range stands in at its middle.
const fn between(
    name: &'static str,
    also: &'static [&'static str],
    low: f64,
    high: f64,
    source: &'static Source,
) -> Density {
    Density { name, also, kg_m3: (low + high) / 2.0, range: Some([low, high]), source }
}

/// The table: metals, then what is neither metal nor plastic, then plastics and rubbers. A weighed part beats any row.
pub static DENSITIES: &[Density] = &[
    row("steel", 7850.0, &GERE),
    row("steel 1020", 7870.0, &CALLISTER),
    row("steel 1040", 7845.0, &CALLISTER),
    row("steel 4140", 7850.0, &CALLISTER),
    row("steel 4340", 7850.0, &CALLISTER),
    row("stainless steel", 7900.0, &PRACTICE),
    row("stainless steel 302", 7860.0, &CALLISTER),
    row("stainless steel 316", 8000.0, &CALLISTER),
    row("stainless steel 405", 7800.0, &CALLISTER),
    row("stainless steel 434", 7800.0, &CALLISTER),
    between("cast iron", &[], 7000.0, 7400.0, &GERE),
    row("grey iron", 7150.0, &CALLISTER),
    row("ductile iron", 7150.0, &CALLISTER),
    row("aluminium", 2700.0, &GERE),
    row("aluminium 2014", 2800.0, &GERE),
    row("aluminium 2024", 2780.0, &CALLISTER),
    row("aluminium 5083", 2660.0, &PRACTICE),
    row("aluminium 6061", 2700.0, &CALLISTER),
    row("aluminium 7075", 2810.0, &CALLISTER),
    between("brass", &[], 8400.0, 8600.0, &GERE),
    row("brass c26000", 8530.0, &CALLISTER),
    row("brass c36000", 8500.0, &CALLISTER),
    between("bronze", &[], 8200.0, 8800.0, &GERE),
    row("copper", 8900.0, &GERE),
    row("copper c11000", 8890.0, &CALLISTER),
    row("titanium", 4500.0, &GERE),
    row("nickel", 8800.0, &GERE),
    between("magnesium alloy", &[], 1760.0, 1830.0, &GERE),
    row("magnesium az31b", 1770.0, &CALLISTER),
    row("magnesium az91", 1810.0, &CALLISTER),
    between("zinc alloy", &[], 4950.0, 7000.0, &CAMBRIDGE),
    between("glass", &[], 2400.0, 2800.0, &GERE),
    row("concrete", 2300.0, &GERE),
    between("wood", &[], 600.0, 800.0, &CAMBRIDGE),
    between("douglas fir", &[], 480.0, 560.0, &GERE),
    between("southern pine", &[], 560.0, 640.0, &GERE),
    between("ptfe", &[], 2140.0, 2200.0, &CAMBRIDGE),
    between("pom", &["acetal"], 1390.0, 1430.0, &CAMBRIDGE),
    between("pa", &["polyamide", "nylon"], 1120.0, 1140.0, &CAMBRIDGE),
    between("pc", &["polycarbonate"], 1140.0, 1210.0, &CAMBRIDGE),
    between("pmma", &["acrylic"], 1160.0, 1220.0, &CAMBRIDGE),
    between("peek", &[], 1300.0, 1320.0, &CAMBRIDGE),
    between("abs", &[], 1010.0, 1210.0, &CAMBRIDGE),
    between("pp", &["polypropylene"], 890.0, 910.0, &CAMBRIDGE),
    between("pe", &["polyethylene"], 939.0, 960.0, &CAMBRIDGE),
    between("pet", &[], 1290.0, 1400.0, &CAMBRIDGE),
    between("pvc", &[], 1300.0, 1580.0, &CAMBRIDGE),
    between("cfrp", &["carbon fibre"], 1500.0, 1600.0, &CAMBRIDGE),
    between("gfrp", &["glass fibre"], 1750.0, 1970.0, &CAMBRIDGE),
    between("polyurethane", &["pu elastomer"], 1020.0, 1250.0, &CAMBRIDGE),
    between("silicone rubber", &["silicone"], 1300.0, 1800.0, &CAMBRIDGE),
    between("natural rubber", &[], 920.0, 930.0, &CAMBRIDGE),
    between("rubber", &[], 960.0, 1300.0, &GERE),
];

/// The row of a material, by any of its names without regard to case or outer blanks.
pub fn density(name: &str) -> Option<&'static Density> {
    let name = name.trim();
    DENSITIES.iter().find(|row| row.names().any(|own| own.eq_ignore_ascii_case(name)))
}
