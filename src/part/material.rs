//! Densities of common materials, each with where it was read.

/// One row of the density table.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Density {
    /// Name a part file may use; matched without regard to case.
    pub name: &'static str,
    /// Density, kg/m3.
    pub kg_m3: f64,
    /// Published source.
    pub source: &'static str,
}

const GERE: &str = "Gere, Mechanics of Materials, 5th ed., Table H-1";
const GERE_MID: &str = "Gere, Mechanics of Materials, 5th ed., Table H-1, middle of the range given";
const CALLISTER: &str = "Callister, Materials Science and Engineering, App. B";
const CAMBRIDGE: &str = "Cambridge Materials Data Book 2003, p. 10, middle of the range given (from memory)";
const TYPICAL: &str = "common practice, no source";

const fn row(name: &'static str, kg_m3: f64, source: &'static str) -> Density {
    Density { name, kg_m3, source }
}

/// The table. Ranges in a source are entered at their middle; a weighed part beats any of them.
pub const DENSITIES: &[Density] = &[
    row("steel", 7850.0, GERE),
    row("stainless steel", 7900.0, TYPICAL),
    row("stainless steel 302", 7860.0, CALLISTER),
    row("stainless steel 316", 8000.0, CALLISTER),
    row("cast iron", 7200.0, GERE_MID),
    row("ductile iron", 7150.0, CALLISTER),
    row("aluminium", 2700.0, GERE),
    row("aluminium 2024", 2780.0, CALLISTER),
    row("aluminium 5083", 2660.0, TYPICAL),
    row("aluminium 6061", 2700.0, CALLISTER),
    row("aluminium 7075", 2810.0, CALLISTER),
    row("brass", 8500.0, GERE_MID),
    row("brass c26000", 8530.0, CALLISTER),
    row("bronze", 8500.0, GERE_MID),
    row("copper", 8900.0, GERE),
    row("titanium", 4500.0, GERE),
    row("nickel", 8800.0, GERE),
    row("magnesium az31b", 1770.0, CALLISTER),
    row("glass", 2600.0, GERE_MID),
    row("ptfe", 2170.0, CAMBRIDGE),
    row("pom", 1410.0, CAMBRIDGE),
    row("pa", 1130.0, CAMBRIDGE),
    row("pc", 1175.0, CAMBRIDGE),
    row("pmma", 1190.0, CAMBRIDGE),
    row("peek", 1310.0, CAMBRIDGE),
    row("abs", 1110.0, CAMBRIDGE),
    row("pp", 900.0, CAMBRIDGE),
    row("pe", 950.0, CAMBRIDGE),
    row("pvc", 1440.0, CAMBRIDGE),
    row("cfrp", 1550.0, CAMBRIDGE),
    row("gfrp", 1860.0, CAMBRIDGE),
    row("wood", 700.0, CAMBRIDGE),
    row("douglas fir", 520.0, GERE_MID),
];

/// The row of a material, by its name without regard to case or outer blanks.
pub fn density(name: &str) -> Option<&'static Density> {
    let name = name.trim();
    DENSITIES.iter().find(|row| row.name.eq_ignore_ascii_case(name))
}
