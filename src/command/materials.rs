//! `materials`: the built-in densities and friction pairs, each value with its source.

use super::output::{self, Answer, Stop};
use crate::mechanics::Condition::{self, Dry, Oily};
use crate::mechanics::pair::{LESSON, PAIRS, PLAN_MARK, Pair, Quote, Value};
use crate::part::Source;
use crate::part::material::{DENSITIES, Density};
use crate::workbench::view::wrapped;
use clap::Args;
use serde::Serialize;
use std::fmt::Write;

/// Columns of the listing.
const WIDTH: usize = 80;

#[derive(Debug, Args)]
pub(super) struct MaterialsArgs {
    /// Words that must all stand in a row's name [default: list every row]
    words: Vec<String>,
    /// Print JSON
    #[arg(long)]
    json: bool,
}

/// The rows that were asked for.
struct Chosen {
    densities: Vec<&'static Density>,
    pairs: Vec<&'static Pair>,
}

pub(super) fn run(args: &MaterialsArgs) -> Result<Answer, Stop> {
    let words: Vec<String> = args.words.iter().flat_map(|arg| arg.split_whitespace()).map(str::to_lowercase).collect();
    let has_all = |name: &str| {
        let name = name.to_lowercase();
        words.iter().all(|word| name.contains(word.as_str()))
    };
    let chosen = Chosen {
        densities: DENSITIES.iter().filter(|row| has_all(&row.names().collect::<Vec<_>>().join(" "))).collect(),
        pairs: PAIRS.iter().filter(|pair| has_all(pair.name)).collect(),
    };
    if chosen.densities.is_empty() && chosen.pairs.is_empty() {
        return Err(Stop::bad(format!(
            "no row has \"{}\" in its name; `holdwright materials` lists every row",
            crate::file::shown(&args.words.join(" "))
        )));
    }
    if args.json {
        output::print_json(&Report::of(&chosen))?;
    } else {
        output::print(&in_words(&chosen))?;
    }
    Ok(Answer::Done)
}

fn in_words(chosen: &Chosen) -> String {
    let mut text = String::new();
    // Writing to a String cannot fail.
    if !chosen.densities.is_empty() {
        let _ = writeln!(text, "{:<27}{:>6}  {:<11}source", "density", "kg/m3", "range");
        for row in &chosen.densities {
            let range = row.range.map_or(String::new(), |[low, high]| format!("{low}-{high}"));
            let name = row.names().collect::<Vec<_>>().join(", ");
            let _ = writeln!(text, "{name:<27}{:>6}  {range:<11}{}", row.kg_m3, row.source);
        }
        text.push('\n');
    }
    if !chosen.pairs.is_empty() {
        let _ = writeln!(text, "{:<42}{:<13} quoted before slip", "friction of a pair", "   plan");
        let _ = writeln!(text, "{:<42}{:>5}{:>7}  {:<11}oily", "", "dry", "oily", "dry");
        for pair in &chosen.pairs {
            write_pair(&mut text, pair);
        }
        let _ = writeln!(text, "\nplan: {PLAN_MARK}");
        let _ = writeln!(text, "s: sliding, where nothing before slip is quoted\n");
    }
    let _ = writeln!(text, "sources");
    for (source, full) in sources(chosen) {
        for (i, line) in wrapped(&format!("{source}: {full}"), WIDTH - 2).into_iter().enumerate() {
            let _ = writeln!(text, "{}{line}", if i == 0 { "" } else { "  " });
        }
    }
    if !chosen.pairs.is_empty() {
        let _ = writeln!(text, "\n{}", wrapped(LESSON, WIDTH).join("\n"));
    }
    text
}

fn write_pair(text: &mut String, pair: &Pair) {
    let plan = |condition| pair.plan(condition).map_or("-".to_owned(), |mu| format!("{mu:.2}"));
    let _ = writeln!(
        text,
        "{:<42}{:>5}{:>7}  {:<11}{}",
        pair.name,
        plan(Dry),
        plan(Oily),
        pair.spread_word(Dry),
        pair.spread_word(Oily)
    );
    for line in pair.lines() {
        for (i, line) in wrapped(&line, WIDTH - 6).into_iter().enumerate() {
            let _ = writeln!(text, "{}{line}", if i == 0 { "    " } else { "      " });
        }
    }
}

/// Each source of the rows once, in the order they come up: its few words, and all of it.
fn sources(chosen: &Chosen) -> Vec<(&'static str, String)> {
    let quoted = chosen.pairs.iter().flat_map(|pair| pair.quotes.iter().map(|quote| quote.source));
    let mut found: Vec<&'static Source> = Vec::new();
    for source in chosen.densities.iter().map(|row| row.source).chain(quoted) {
        if source.short != source.full && !found.contains(&source) {
            found.push(source);
        }
    }
    found.into_iter().map(|source| (source.short, full(source))).collect()
}

fn full(source: &Source) -> String {
    format!("{}{}", source.full, if source.from_memory { " [from memory]" } else { "" })
}

#[derive(Serialize)]
struct Report {
    schema: u32,
    densities: Vec<DensityReport>,
    friction_pairs: Vec<PairReport>,
}

#[derive(Serialize)]
struct DensityReport {
    name: &'static str,
    also: &'static [&'static str],
    kg_m3: f64,
    range_kg_m3: Option<[f64; 2]>,
    source: &'static str,
    from_memory: bool,
}

#[derive(Serialize)]
struct PairReport {
    name: &'static str,
    plan_dry: f64,
    plan_oily: Option<f64>,
    plan_source: &'static str,
    quotes: Vec<QuoteReport>,
    note: &'static str,
}

#[derive(Serialize)]
struct QuoteReport {
    condition: &'static str,
    /// Before slip: lowest and highest number, nothing where the quote is open to that side.
    mu: Option<[Option<f64>; 2]>,
    sliding: Option<[Option<f64>; 2]>,
    about: &'static str,
    source: &'static str,
    from_memory: bool,
}

impl Report {
    fn of(chosen: &Chosen) -> Self {
        let density = |row: &&'static Density| DensityReport {
            name: row.name,
            also: row.also,
            kg_m3: row.kg_m3,
            range_kg_m3: row.range,
            source: row.source.full,
            from_memory: row.source.from_memory,
        };
        let pair = |pair: &&'static Pair| PairReport {
            name: pair.name,
            plan_dry: pair.plan_dry,
            plan_oily: pair.plan_oily,
            plan_source: PLAN_MARK,
            quotes: pair.quotes.iter().map(QuoteReport::of).collect(),
            note: pair.note,
        };
        Self {
            schema: 1,
            densities: chosen.densities.iter().map(density).collect(),
            friction_pairs: chosen.pairs.iter().map(pair).collect(),
        }
    }
}

impl QuoteReport {
    fn of(quote: &Quote) -> Self {
        Self {
            condition: Condition::word(quote.condition),
            mu: quote.fixed.map(ends),
            sliding: quote.sliding.map(ends),
            about: quote.about,
            source: quote.source.full,
            from_memory: quote.source.from_memory,
        }
    }
}

fn ends(value: Value) -> [Option<f64>; 2] {
    let open_above = matches!(value, Value::AtLeast(_));
    [value.lowest(), (!open_above).then(|| value.highest())]
}
