//! From a sheet to loops and parts: everything that is found out before one part is chosen.

use super::chain::{self, Chained, Loop};
use super::fault::{Fault, fault, short};
use super::measure::Measure;
use super::nest::{self, Region};
use super::report::{LayerReport, OpenReport, PartReport, Report, SkippedReport, UnitsReport, brief};
use super::sheet::{Sheet, Weight};
use super::units::Unit;
use super::{NeedsUnits, Options, units};
use kurbo::{Affine, Point};

/// Default tolerance of joining, as a fraction of the larger side of what is read.
const JOIN: f64 = 1e-5;
/// Default sagitta, mm, and the fraction of the larger side it never exceeds.
const SAGITTA_MM: f64 = 0.01;
const SAGITTA: f64 = 1e-4;
/// Finest sagitta, as a fraction of the larger side: beyond it doubles have no digits left for the fit.
const FINEST: f64 = 1e-10;
/// Lines of one kind of problem.
const MOST_LINES: usize = 10;

/// What a drawing holds.
#[derive(Debug)]
pub(super) struct Survey {
    /// The drawing.
    pub(super) sheet: Sheet,
    /// Unit of the part; of nothing known when it is only listed.
    pub(super) unit: Unit,
    /// Every closed loop.
    pub(super) loops: Vec<Loop>,
    /// Their measures.
    pub(super) measures: Vec<Measure>,
    /// Parts.
    pub(super) regions: Vec<Region>,
    /// Allowed distance of chords and arcs from a curve, in the part's unit.
    pub(super) sagitta: f64,
    /// The report so far.
    pub(super) report: Report,
    /// What stands against taking a part from it.
    pub(super) problems: Vec<Fault>,
}

/// Why a survey could not be made.
pub(super) enum Stopped {
    /// Faults.
    Faults(Vec<Fault>),
    /// The unit is not known.
    Units(NeedsUnits),
}

impl From<Fault> for Stopped {
    fn from(fault: Fault) -> Self {
        Self::Faults(vec![fault])
    }
}

/// Looks through a sheet. With `listing` an unknown unit is no hindrance.
pub(super) fn survey(
    drawing: &str,
    sheet: Sheet,
    options: &Options,
    listing: bool,
    tell: &mut dyn FnMut(&'static str, u64, u64),
) -> Result<Survey, Stopped> {
    let chosen = chosen_layers(&sheet, options)?;
    let told = options.units.map(|unit| (unit, "--units"));
    let known = told.or(sheet.stated);
    let (unit, factor) = known.map_or((Unit { name: "units", mm: 1.0 }, 1.0), |(unit, _)| units::of_part(unit));
    let root = Affine::scale(factor) * sheet.root;
    let rough = sheet.trace(root, &chosen, f64::INFINITY, &mut |done, all| tell("placing", done, all))?;
    let size = chain::size(rough.iter().flat_map(|strand| &strand.vertices));
    drop(rough);
    if known.is_none() && !listing {
        return Err(Stopped::Units(NeedsUnits { hint: sheet.unit_hint.clone(), size }));
    }
    let sagitta = match options.sagitta_mm {
        Some(sagitta) => (sagitta / unit.mm).max(FINEST * size),
        None => (SAGITTA_MM / unit.mm).min(SAGITTA * size),
    };
    let join = options.join_mm.map_or(JOIN * size, |join| join / unit.mm);
    // A drawing of a single point has no size; any positive number does then.
    let sagitta = if sagitta > 0.0 { sagitta } else { SAGITTA_MM };
    let strands = sheet.trace(root, &chosen, sagitta, &mut |done, all| tell("tracing", done, all))?;
    let entities = strands.len();
    let pieces = strands.iter().map(|strand| strand.bulges.len()).sum();
    let chained = chain::chain(strands, join, options.skip_open, &mut |done, all| tell("joining", done, all));
    let Chained { loops, open, forks, without_length, duplicates, joints, largest_gap } = chained;
    let measures: Vec<Measure> = loops.iter().map(Measure::of).collect();
    let regions = nest::regions(&loops, &measures, &mut |done, all| tell("nesting", done, all));

    let mut report = Report {
        schema: 1,
        drawing: drawing.to_owned(),
        format: sheet.format.clone(),
        units: UnitsReport {
            drawing: known.map(|(unit, _)| unit.name.to_owned()),
            stated_by: known.map(|(_, by)| by.to_owned()),
            part: unit.name.to_owned(),
            factor,
        },
        layers: layers_of(&sheet, &chosen),
        skipped: skipped_of(&sheet, &chosen),
        entities,
        pieces,
        without_length,
        duplicates,
        join_mm: join * unit.mm,
        joints,
        largest_gap_mm: largest_gap * unit.mm,
        sagitta_mm: sagitta * unit.mm,
        open: open
            .iter()
            .map(|open| OpenReport {
                from: pair(open.ends[0]),
                to: pair(open.ends[1]),
                nearest_mm: open.nearest.map(|gap| gap * unit.mm),
                first: sheet.source_words(open.source),
            })
            .collect(),
        loops: loops.len(),
        parts: Vec::with_capacity(regions.len()),
        picked: None,
        rings: Vec::new(),
        cleaned: None,
        notes: sheet.notes.clone(),
    };
    if let (Some((told, _)), Some((stated, by))) = (told, sheet.stated)
        && told != stated
    {
        report.notes.push(format!("{by} says the unit is {}; --units {} was taken", stated.name, told.name));
    }
    for (number, region) in regions.iter().enumerate() {
        let measure = &measures[region.outer];
        let holes: f64 = region.holes.iter().map(|&hole| measures[hole].area.abs()).sum();
        report.parts.push(PartReport {
            number: number + 1,
            area_mm2: (measure.area.abs() - holes) * unit.mm * unit.mm,
            at: [measure.bounds.x0, measure.bounds.y0],
            size: [measure.bounds.width(), measure.bounds.height()],
            holes: region.holes.len(),
            first: sheet.source_words(loops[region.outer].sources[0]),
        });
    }
    let mut problems = Vec::new();
    missed(&report, options, &mut problems);
    for fork in forks.iter().take(MOST_LINES) {
        problems.push(fault(format!(
            "{} lines meet at ({}, {}), so that no loop can be told: {}; draw each outline closed by itself, leave the \
             others out with --layer, or drop lines that end free with --skip open",
            fork.sources.len(),
            brief(fork.at.x),
            brief(fork.at.y),
            fork.sources.iter().take(4).map(|&source| sheet.source_words(source)).collect::<Vec<_>>().join(", ")
        )));
    }
    if forks.len() > MOST_LINES {
        problems.push(fault(format!("{} more such points", forks.len() - MOST_LINES)));
    }
    if !report.open.is_empty() && !options.skip_open {
        problems.extend(report.open_lines().into_iter().map(fault));
        problems.push(fault(open_mend(&report)));
    }
    if regions.is_empty() && problems.is_empty() {
        problems.push(fault(nothing_closed(&report)));
    }
    Ok(Survey { sheet, unit, loops, measures, regions, sagitta, report, problems })
}

fn pair(p: Point) -> [f64; 2] {
    [p.x, p.y]
}

/// Which layers are read.
fn chosen_layers(sheet: &Sheet, options: &Options) -> Result<Vec<bool>, Fault> {
    let mut chosen = vec![options.layers.is_empty(); sheet.layers.len()];
    for name in &options.layers {
        let Some(layer) = sheet.find_layer(name) else {
            let known: Vec<_> =
                sheet.layers.iter().take(MOST_LINES).map(|layer| format!("\"{}\"", short(&layer.name))).collect();
            let more = if sheet.layers.len() > MOST_LINES { ", ..." } else { "" };
            return Err(fault(format!(
                "there is no layer \"{}\"; it has {}{more}; --list shows them all",
                short(name),
                known.join(", ")
            )));
        };
        chosen[layer] = true;
    }
    Ok(chosen)
}

fn layers_of(sheet: &Sheet, chosen: &[bool]) -> Vec<LayerReport> {
    let mut counts = vec![0; sheet.layers.len()];
    for placed in &sheet.placed {
        counts[placed.layer] += 1;
    }
    let why = |number: usize| {
        let unchosen = (!chosen[number]).then_some("not chosen");
        unchosen.or(sheet.layers[number].hidden).map(str::to_owned)
    };
    (0..sheet.layers.len())
        .map(|number| LayerReport {
            name: sheet.layers[number].name.clone(),
            entities: counts[number],
            read: why(number).is_none(),
            why: why(number),
        })
        .collect()
}

fn skipped_of(sheet: &Sheet, chosen: &[bool]) -> Vec<SkippedReport> {
    let on_chosen = sheet.skipped.iter().filter(|((.., layer), _)| chosen[*layer]);
    on_chosen
        .map(|((kind, why, weight, layer), (count, first))| SkippedReport {
            kind: kind.clone(),
            why: why.clone(),
            count: *count,
            first: first.clone(),
            layer: sheet.layers[*layer].name.clone(),
            missed: *weight == Weight::Missed,
        })
        .collect()
}

/// Geometry that was not read is a problem, unless it may be skipped.
fn missed(report: &Report, options: &Options, problems: &mut Vec<Fault>) {
    if options.skip_unread {
        return;
    }
    let missed: Vec<_> = report.skipped.iter().filter(|skipped| skipped.missed).collect();
    for skipped in missed.iter().take(MOST_LINES) {
        let many = if skipped.count > 1 { format!(" and {} more", skipped.count - 1) } else { String::new() };
        problems.push(fault(format!("{}{many} cannot be read: {}", skipped.first, skipped.why)));
    }
    if missed.len() > MOST_LINES {
        problems.push(fault(format!("{} more kinds of things cannot be read", missed.len() - MOST_LINES)));
    }
    if !missed.is_empty() {
        problems.push(fault("mend these, leave their layers out with --layer, or do without them with --skip unread"));
    }
}

fn open_mend(report: &Report) -> String {
    let nearest = report.open.iter().filter_map(|open| open.nearest_mm).min_by(f64::total_cmp);
    let raise = nearest.filter(|&gap| gap > report.join_mm).map_or(String::new(), |gap| {
        format!("raise --join above {} (it is {} mm), ", brief(gap), brief(report.join_mm))
    });
    format!(
        "these lines do not close: close them, {raise}leave their layers out with --layer, or do without them with --skip open"
    )
}

fn nothing_closed(report: &Report) -> String {
    if report.entities > 0 {
        return "no line in it closes to an outline".to_owned();
    }
    let unread: Vec<_> = report.layers.iter().filter(|layer| !layer.read).collect();
    if unread.is_empty() && report.skipped.is_empty() {
        return "there is nothing drawn in it".to_owned();
    }
    let mut said = "nothing in it can be read".to_owned();
    if let Some(skipped) = report.skipped.first() {
        said += &format!("; {} {} skipped: {}", skipped.count, skipped.kind, skipped.why);
    }
    if let Some(layer) = unread.first() {
        said +=
            &format!("; layer \"{}\" is not read: {}", short(&layer.name), layer.why.as_deref().unwrap_or_default());
    }
    said
}
