//! The table of pairs: quotes with who makes them, planning values, notes.

use super::super::friction::Condition::{self, Dry, Oily, Wet};
use super::{Pair, Quote, Value};
use crate::part::Source;

static MARKS: Source = Source::remembered(
    "Marks T3.2.1",
    "Marks' Standard Handbook for Mechanical Engineers, Table 3.2.1 (Fuller); agrees with open reprints",
);
static MARKS_ALONE: Source = Source::remembered(
    "Marks T3.2.1, not compared",
    "Marks' Standard Handbook for Mechanical Engineers, Table 3.2.1 (Fuller); not compared with a reprint",
);
static ROLOFF: Source = Source::seen("Roloff/Matek TB 4-1", "Roloff/Matek Maschinenelemente, Table TB 4-1");
static GIECK: Source = Source::seen("Gieck 7th ed.", "Gieck, Engineering Formulas, 7th ed. (by a reprint of LBL)");
static DAVIS: Source =
    Source::seen("Davis T14.1", "Davis, Concise Metals Data Handbook, Table 14.1 (by a reprint of LBL)");
static SURFACES: Source =
    Source::seen("Surface handbook T11.1", "Handbook of Surface Improvement and Modification, Table 11.1, p. 167");
static SHACKELFORD: Source = Source::seen(
    "Shackelford 2001 T399",
    "Shackelford, CRC Materials Science and Engineering Handbook, 2001, Table 399 (ASM data)",
);
static CTU: Source = Source::seen(
    "CTU Code 2014",
    "IMO/ILO/UNECE Code of Practice for Packing of Cargo Transport Units (CTU Code) 2014, Annex 7, Appendix 2: design \
     values, surfaces swept clean",
);
static SLIP_CLASSES: Source =
    Source::seen("RCSC slip classes", "RCSC Specification for Structural Joints (AISC), slip classes");
static DRIVES: Source = Source::seen("drive guide T7.21", "engineering guide of a maker of drives, Table 7.21");
static REPRINT: Source = Source::seen("open reprint", "an open reprint of handbook tables that does not say which");
static COMPILATION: Source = Source::seen("open list, weak", "an open compilation without sources: weak");
static EN_12195: Source = Source::seen("EN 12195-1", "EN 12195-1, securing of loads on road vehicles");
static MOULDER: Source = Source::remembered("moulder's guide", "guide of an elastomer moulder");
static GROSCH: Source = Source::seen("Grosch, by Goda 2016", "Grosch, as given by Goda 2016");

/// A pair; 0 stands for no planning value when oily.
const fn pair(name: &'static str, plan: (f64, f64), quotes: &'static [Quote], note: &'static str) -> Pair {
    let plan_oily = if plan.1 > 0.0 { Some(plan.1) } else { None };
    Pair { name, quotes, plan_dry: plan.0, plan_oily, note }
}

const fn one(condition: Condition, mu: f64, source: &'static Source) -> Quote {
    Quote { condition, fixed: Some(Value::One(mu)), sliding: None, about: "", source }
}

const fn range(condition: Condition, low: f64, high: f64, source: &'static Source) -> Quote {
    Quote { condition, fixed: Some(Value::Between(low, high)), sliding: None, about: "", source }
}

const fn slides(condition: Condition, sliding: f64, source: &'static Source) -> Quote {
    Quote { condition, fixed: None, sliding: Some(Value::One(sliding)), about: "", source }
}

const fn open(condition: Condition, value: Value, source: &'static Source) -> Quote {
    Quote { condition, fixed: Some(value), sliding: None, about: "", source }
}

impl Quote {
    const fn then(self, sliding: f64) -> Self {
        Self { sliding: Some(Value::One(sliding)), ..self }
    }

    const fn about(self, about: &'static str) -> Self {
        Self { about, ..self }
    }
}

/// The table.
pub static PAIRS: &[Pair] = &[
    pair(
        "hard steel - hard steel",
        (0.15, 0.10),
        &[
            one(Dry, 0.78, &MARKS).then(0.42),
            one(Oily, 0.23, &MARKS).about("light oil"),
            one(Oily, 0.15, &MARKS).about("castor oil"),
        ],
        "",
    ),
    pair(
        "mild steel - mild steel",
        (0.15, 0.10),
        &[
            one(Dry, 0.74, &MARKS).then(0.57),
            range(Dry, 0.15, 0.30, &GIECK),
            one(Dry, 0.31, &DAVIS),
            one(Dry, 0.31, &SURFACES),
            range(Dry, 0.5, 0.8, &ROLOFF),
            range(Dry, 0.12, 0.60, &DRIVES),
            one(Oily, 0.10, &ROLOFF),
            range(Oily, 0.12, 0.35, &DRIVES),
            range(Oily, 0.09, 0.19, &MARKS),
        ],
        "the lowest quotes, 0.12 dry and 0.09 oily, lie below the planning values",
    ),
    pair("steel, clean mill scale (slip joint)", (0.30, 0.0), &[one(Dry, 0.33, &SLIP_CLASSES)], ""),
    pair(
        "steel, blast-cleaned (slip joint)",
        (0.40, 0.20),
        &[one(Dry, 0.50, &SLIP_CLASSES)],
        "with a zinc silicate coat 0.40 in the code and 0.20 met in tests (SCI Advisory Desk AD 383)",
    ),
    pair("steel, galvanised, roughened (slip joint)", (0.30, 0.0), &[one(Dry, 0.35, &SLIP_CLASSES)], ""),
    pair("metal, smooth - metal, smooth", (0.20, 0.10), &[one(Dry, 0.2, &CTU), one(Wet, 0.2, &CTU)], ""),
    pair("metal, rough and unpainted - metal", (0.35, 0.15), &[one(Dry, 0.4, &CTU)], ""),
    pair(
        "metal, painted - metal",
        (0.20, 0.10),
        &[one(Dry, 0.3, &CTU).about("rough"), one(Dry, 0.2, &CTU).about("smooth")],
        "",
    ),
    pair(
        "aluminium - mild steel",
        (0.30, 0.12),
        &[one(Dry, 0.61, &MARKS).then(0.47), one(Dry, 0.35, &SURFACES).then(0.25)],
        "",
    ),
    pair(
        "aluminium - aluminium",
        (0.30, 0.15),
        &[range(Dry, 1.05, 1.35, &MARKS), one(Dry, 0.42, &SURFACES), one(Oily, 0.30, &REPRINT)],
        "",
    ),
    pair(
        "brass - steel",
        (0.30, 0.11),
        &[
            one(Dry, 0.51, &MARKS).then(0.44),
            one(Dry, 0.35, &REPRINT),
            one(Oily, 0.19, &REPRINT),
            one(Oily, 0.11, &REPRINT).about("castor oil"),
        ],
        "",
    ),
    pair("brass - cast iron", (0.25, 0.10), &[slides(Dry, 0.30, &MARKS)], ""),
    pair(
        "bronze - steel or cast iron",
        (0.20, 0.08),
        &[
            slides(Dry, 0.22, &MARKS).about("on cast iron"),
            one(Oily, 0.16, &REPRINT).about("on steel"),
            slides(Oily, 0.077, &MARKS),
        ],
        "",
    ),
    pair(
        "copper - mild steel",
        (0.23, 0.10),
        &[
            one(Dry, 0.53, &MARKS).then(0.36),
            one(Dry, 0.32, &SURFACES),
            one(Dry, 0.23, &REPRINT).about("on stainless steel"),
            one(Dry, 0.23, &SURFACES).about("on stainless steel"),
            one(Oily, 0.18, &MARKS),
        ],
        "",
    ),
    pair(
        "cast iron - cast iron",
        (0.15, 0.07),
        &[
            one(Dry, 1.10, &MARKS).then(0.15),
            one(Dry, 0.25, &ROLOFF),
            one(Oily, 0.15, &ROLOFF),
            slides(Oily, 0.07, &MARKS),
        ],
        "",
    ),
    pair(
        "cast iron - steel",
        (0.20, 0.10),
        &[
            one(Dry, 0.40, &REPRINT),
            one(Dry, 0.40, &SURFACES),
            slides(Dry, 0.23, &MARKS),
            one(Dry, 0.2, &ROLOFF),
            one(Oily, 0.21, &REPRINT),
            one(Oily, 0.10, &ROLOFF),
            slides(Oily, 0.133, &MARKS),
        ],
        "",
    ),
    pair(
        "tungsten carbide - steel (smooth inserts)",
        (0.30, 0.08),
        &[one(Dry, 0.5, &MARKS_ALONE), one(Oily, 0.08, &MARKS_ALONE)],
        "",
    ),
    pair("chromium - steel", (0.20, 0.10), &[one(Dry, 0.25, &SURFACES).then(0.21)], ""),
    pair(
        "PTFE - steel",
        (0.04, 0.04),
        &[
            one(Dry, 0.04, &MARKS),
            one(Dry, 0.18, &SURFACES),
            range(Dry, 0.04, 0.22, &COMPILATION),
            one(Oily, 0.04, &MARKS),
        ],
        "",
    ),
    pair(
        "PTFE - aluminium or glass",
        (0.04, 0.04),
        &[one(Dry, 0.19, &SURFACES).about("on aluminium"), one(Dry, 0.10, &SURFACES).about("on glass")],
        "",
    ),
    pair(
        "nylon (PA) - steel",
        (0.25, 0.08),
        &[
            range(Dry, 0.32, 0.45, &COMPILATION),
            slides(Dry, 0.4, &ROLOFF).about("on hardened steel"),
            one(Oily, 0.10, &COMPILATION),
        ],
        "",
    ),
    pair(
        "nylon 6/6 - itself",
        (0.04, 0.04),
        &[
            range(Dry, 0.04, 0.13, &SHACKELFORD),
            slides(Dry, 0.32, &SHACKELFORD).about("cast PA 6"),
            slides(Dry, 1.2, &ROLOFF).about("PA"),
        ],
        "the quotes disagree thirty times over",
    ),
    pair(
        "POM (acetal) - steel",
        (0.10, 0.05),
        &[
            range(Dry, 0.1, 0.3, &SHACKELFORD),
            one(Dry, 0.15, &SHACKELFORD).about("copolymer"),
            slides(Dry, 0.4, &ROLOFF),
        ],
        "with PTFE as a filler 0.05-0.15 (Shackelford 2001 T399)",
    ),
    pair("HDPE - steel", (0.08, 0.05), &[slides(Dry, 0.1, &ROLOFF)], ""),
    pair(
        "plastic - metal, general",
        (0.20, 0.05),
        &[
            range(Dry, 0.25, 0.4, &ROLOFF),
            range(Dry, 0.20, 0.45, &DRIVES),
            Quote {
                condition: Oily,
                fixed: None,
                sliding: Some(Value::Between(0.04, 0.1)),
                about: "",
                source: &ROLOFF,
            },
        ],
        "",
    ),
    pair(
        "ABS or PVC - steel",
        (0.25, 0.08),
        &[one(Dry, 0.30, &SURFACES).about("ABS"), one(Dry, 0.53, &SURFACES).about("PVC")],
        "",
    ),
    pair("polycarbonate - itself", (0.35, 0.10), &[one(Dry, 0.52, &SHACKELFORD)], ""),
    pair(
        "laminated plastic - steel",
        (0.30, 0.05),
        &[one(Dry, 0.35, &MARKS_ALONE), slides(Wet, 0.05, &MARKS_ALONE).about("water")],
        "",
    ),
    pair("glass - glass", (0.40, 0.09), &[one(Dry, 0.94, &MARKS).then(0.40), range(Oily, 0.1, 0.6, &REPRINT)], ""),
    pair(
        "glass - metal",
        (0.13, 0.10),
        &[range(Dry, 0.5, 0.7, &REPRINT), one(Dry, 0.13, &SURFACES).about("on steel"), range(Oily, 0.2, 0.3, &REPRINT)],
        "",
    ),
    pair(
        "leather - metal",
        (0.36, 0.12),
        &[
            range(Dry, 0.4, 0.6, &REPRINT),
            one(Dry, 0.60, &ROLOFF),
            one(Dry, 0.6, &REPRINT).about("on cast iron"),
            one(Oily, 0.20, &REPRINT),
            one(Oily, 0.20, &ROLOFF).then(0.12),
        ],
        "",
    ),
    pair(
        "wood - metal",
        (0.20, 0.10),
        &[
            range(Dry, 0.2, 0.6, &REPRINT),
            range(Dry, 0.5, 0.6, &ROLOFF),
            range(Dry, 0.45, 0.75, &DRIVES),
            one(Dry, 0.3, &CTU).about("sawn, on stainless steel"),
            one(Dry, 0.4, &CTU).about("sawn, on ribbed aluminium"),
            one(Wet, 0.2, &REPRINT),
            one(Oily, 0.10, &ROLOFF).about("greased"),
        ],
        "",
    ),
    pair(
        "wood - wood",
        (0.25, 0.07),
        &[
            range(Dry, 0.25, 0.5, &REPRINT),
            one(Dry, 0.62, &MARKS).then(0.48).about("oak along the grain"),
            range(Dry, 0.40, 0.75, &DRIVES),
            one(Wet, 0.2, &REPRINT),
            Quote {
                condition: Oily,
                fixed: None,
                sliding: Some(Value::Between(0.07, 0.16)),
                about: "",
                source: &MARKS,
            },
        ],
        "",
    ),
    pair(
        "planed wood - plywood or smooth metal",
        (0.20, 0.0),
        &[
            one(Dry, 0.3, &CTU).about("on plywood"),
            one(Dry, 0.25, &CTU).about("on aluminium"),
            one(Dry, 0.2, &CTU).about("on stainless steel"),
            one(Wet, 0.3, &CTU).about("on plywood"),
            one(Wet, 0.25, &CTU).about("on aluminium"),
            one(Wet, 0.2, &CTU).about("on stainless steel"),
        ],
        "",
    ),
    pair(
        "steel or brass - ice, 0 C",
        (0.02, 0.0),
        &[
            one(Dry, 0.03, &ROLOFF).about("steel"),
            one(Dry, 0.027, &COMPILATION).about("steel"),
            one(Dry, 0.02, &REPRINT).about("brass"),
        ],
        "",
    ),
    pair("cardboard - cardboard or wood", (0.40, 0.0), &[one(Dry, 0.5, &CTU)], ""),
    pair("anti-slip rubber mat - clean surfaces", (0.60, 0.0), &[one(Dry, 0.6, &EN_12195)], ""),
    pair(
        "polyurethane pad - metal",
        (0.40, 0.20),
        &[
            range(Dry, 0.2, 2.0, &MOULDER).about("or more, from hard to soft"),
            open(Dry, Value::AtLeast(0.5), &COMPILATION),
        ],
        "falls with hardness: a hard pad, about 0.2, lies below the dry planning value; nothing is quoted for oil",
    ),
    pair(
        "NBR - smooth steel",
        (0.50, 0.15),
        &[open(Dry, Value::AtMost(2.4), &GROSCH).about("at the peak")],
        "depends on speed and pressure; no table for an oil film",
    ),
    pair(
        "silicone rubber - metal",
        (0.40, 0.25),
        &[
            range(Dry, 0.25, 0.75, &COMPILATION).about("and beyond at both ends"),
            one(Dry, 1.0, &COMPILATION).about("tacky"),
        ],
        "the lowest quote, below 0.25, lies below the dry planning value; no source that can be cited",
    ),
    pair("rubber - metal, general", (0.50, 0.15), &[range(Dry, 1.0, 4.0, &COMPILATION)], "far lower when wet"),
];
