//! `rank`: the best grasps of a part as a table or JSON.

use super::columns::{self, Column};
use super::json::Report;
use super::knobs::{self, Knobs};
use super::output::{self, Answer, Stop};
use super::progress::ProgressLine;
use super::reading::{LINE, decimals, drive, fingers, hand, length, newtons, ratio, short, wrapped};
use crate::file::{CAUTION, DRIVES, shown, word_for};
use crate::hand::{Closing, PARALLEL_RAD, Tip};
use crate::mechanics::{Assessment, Holding};
use crate::search::{self, Cancel, Key, Listed, Listing, Proof, Ranking, Scene, TorqueScale, Wanted};
use clap::Args;
use clap::builder::{PossibleValuesParser, TypedValueParser};
use serde::Serialize;
use std::fmt::Write;
use std::path::PathBuf;

/// The key that asks for load cases.
const SQUEEZE: &str = "squeeze";

#[derive(Debug, Args)]
pub(super) struct RankArgs {
    /// Part file
    part: PathBuf,
    #[command(flatten)]
    knobs: Knobs,
    /// Rows to list
    #[arg(long, value_name = "K", default_value_t = 20, value_parser = clap::value_parser!(u32).range(1..=100_000))]
    top: u32,
    /// Score to sort by
    #[arg(long, value_name = "KEY", default_value = "quality", value_parser = keys())]
    sort: Key,
    /// List single grasps instead of the best of each family
    #[arg(long)]
    members: bool,
    /// How much better than its row any placement of a family may be, as a part of the best score
    #[arg(long, value_name = "GAP", conflicts_with = "members", default_value = "0.01", value_parser = gap)]
    gap: f64,
    /// Print JSON
    #[arg(long)]
    json: bool,
}

fn gap(word: &str) -> Result<f64, String> {
    let gap = word.parse().ok().filter(|gap| (0.0..1.0).contains(gap));
    gap.ok_or_else(|| "give a number from 0 to below 1, such as 0.01 for one percent".to_owned())
}

fn keys() -> impl TypedValueParser<Value = Key> {
    let words = PossibleValuesParser::new(Key::ALL.map(Key::word));
    words.try_map(|word| Key::from_word(&word).ok_or("there is no such key"))
}

pub(super) fn run(args: &RankArgs) -> Result<Answer, Stop> {
    let key = args.sort;
    let part = knobs::part(&args.part)?;
    let scene = args.knobs.scene(part, args.knobs.setup()?)?;
    if key.word() == SQUEEZE && scene.cases().is_empty() {
        return Err(Stop::bad(
            "--sort squeeze needs loads: give [[load]] in a setup file (--setup FILE); `holdwright setup` prints one to \
             start from",
        ));
    }
    if !key.is_told_by(scene.setup()) {
        return Err(Stop::bad(
            "--sort load_margin needs loads and a force limit: give [[load]] and force_limit_n in a setup file",
        ));
    }
    let listing = if args.members { Listing::Members } else { Listing::Families };
    let wanted = Wanted { key, listing, most: args.top as usize, gap: args.gap, known: &[] };
    let line = ProgressLine::new();
    let observe = |progress: search::Progress| match progress.gap {
        Some(gap) => line.tell_of(&format!("of the budget; gap {:.1} %", 100.0 * gap), progress.done, progress.total),
        None => line.tell(progress.done, progress.total),
    };
    let ranked = args.knobs.on_threads(|| search::rank(&scene, &wanted, &Cancel::default(), &observe))?;
    drop(line);
    let ranking = ranked.map_err(|stopped| Stop::bad(stopped.to_string()))?;
    if args.json {
        let mut report = Report::new(&scene);
        report.proof = Some(ProofReport::of(ranking.proof.as_ref()));
        report.examined = ranking.examined;
        report.closed = ranking.closed;
        report.inconclusive = ranking.inconclusive;
        report.complete = ranking.complete;
        for listed in &ranking.grasps {
            report.add_row(&scene, listed);
        }
        if ranking.grasps.is_empty() {
            output::note(&why_empty(&scene, &ranking));
        }
        output::print_json(&report)?;
    } else {
        output::print(&table(&scene, &wanted, &ranking))?;
    }
    Ok(Answer::Done)
}

/// How good the list is beside every placement on the outline.
#[derive(Debug, Clone, Copy, Serialize)]
pub(super) struct ProofReport {
    /// No placement scores better than this on the key; null where none is a grasp at all, or nothing is known.
    best_bound: Option<f64>,
    /// How much better than the first row any placement can be, as a part of its score; null where that is not known.
    gap: Option<f64>,
    /// The gap is no wider than was asked for.
    proved: bool,
    /// How much better than its row any family can be, as a part of the best score; null where one may be missing.
    list_gap: Option<f64>,
    /// That gap, too, is no wider than was asked for.
    list_proved: bool,
}

impl ProofReport {
    /// Of a list that was proved; nothing is known of one that was not.
    fn of(proof: Option<&Proof>) -> Self {
        let finite = |number: f64| Some(number).filter(|number| number.is_finite());
        Self {
            best_bound: proof.and_then(|proof| proof.best_bound).and_then(finite),
            gap: proof.and_then(|proof| finite(proof.gap)),
            proved: proof.is_some_and(|proof| proof.proved),
            list_gap: proof.and_then(|proof| finite(proof.list_gap)),
            list_proved: proof.is_some_and(|proof| proof.list_proved),
        }
    }
}

/// What a proof says, in words.
fn proved(proof: &Proof, key: Key, asked: f64) -> String {
    let Some(bound) = proof.best_bound else {
        return "proved: no placement anywhere on the outline is such a grasp".to_owned();
    };
    let percent = |part: f64| format!("{:.2} %", 100.0 * part);
    let better = if key.more_is_better() { "above" } else { "below" };
    let none = format!("none {better} {} anywhere on the outline ({})", short(bound), percent(proof.gap));
    let list = match (proof.list_proved, proof.list_gap.is_finite()) {
        (true, _) => {
            format!("no family beats its row by more than {} of that row or the first", percent(proof.list_gap))
        }
        (false, true) => {
            let left = percent(proof.list_gap);
            format!("below the first row, families may beat theirs by {left} of it or the first; --budget closes that")
        }
        (false, false) => "below the first row, families may be missing; a larger --budget finds them".to_owned(),
    };
    if proof.proved {
        format!("proved: {none}; {list}")
    } else {
        format!("not proved to {}: {none}; a larger --budget closes the gap", percent(asked))
    }
}

fn table(scene: &Scene, wanted: &Wanted<'_>, ranking: &Ranking) -> String {
    let mut text = String::new();
    // Writing to a String cannot fail.
    let _ = head(&mut text, scene, wanted, ranking);
    let _ = if ranking.grasps.is_empty() {
        writeln!(text, "\n{}", why_empty(scene, ranking))
    } else {
        rows(&mut text, scene, wanted, ranking)
    };
    let _ = writeln!(text, "\n{}", wrapped(CAUTION, 0, 0));
    text
}

fn head(text: &mut String, scene: &Scene, wanted: &Wanted<'_>, ranking: &Ranking) -> std::fmt::Result {
    let (setup, search) = (scene.setup(), &scene.setup().search);
    let scale = match search.torque_scale {
        TorqueScale::Reach => "reach",
        TorqueScale::Gyration => "gyration",
        TorqueScale::Mm(_) => "as given",
    };
    writeln!(
        text,
        "{}: {}, mu {} ({:.1} deg)",
        shown(scene.part().name()),
        hand(&setup.hand),
        setup.friction.mu,
        setup.friction.mu.atan().to_degrees()
    )?;
    let limit = setup.hand.force_limit_n.map_or("no force limit".to_owned(), |n| format!("at most {n} N per finger"));
    let drive_word = word_for(&DRIVES, setup.hand.drive);
    writeln!(text, "{}", wrapped(&format!("drive {drive_word}: {}; {limit}", drive(setup.hand.drive)), 0, 4))?;
    writeln!(text, "torque scale {} mm ({scale}), seed {}", length(scene.frame().scale_mm), search.seed)?;
    if let Some(proof) = ranking.proof.filter(|_| !ranking.grasps.is_empty()) {
        let (examined, closed) = (ranking.examined, ranking.closed);
        writeln!(text, "{examined} placements examined, {closed} closed, {} inconclusive", ranking.inconclusive)?;
        return writeln!(text, "{}", wrapped(&proved(&proof, wanted.key, wanted.gap), 0, 4));
    }
    writeln!(
        text,
        "{} candidate sets of {} sites examined, {} closed, {} inconclusive",
        ranking.examined, ranking.sites, ranking.closed, ranking.inconclusive
    )?;
    if ranking.complete {
        writeln!(text, "complete: every candidate set was looked at")
    } else {
        writeln!(text, "a sample: the budget is {} sets; raise --budget or --spacing to look at all", search.budget)
    }
}

fn rows(text: &mut String, scene: &Scene, wanted: &Wanted<'_>, ranking: &Ranking) -> std::fmt::Result {
    let (count, key) = (ranking.grasps.len(), wanted.key);
    match wanted.listing {
        Listing::Families => writeln!(text, "\nBest placement of the best {count} families, by {}:", key.word())?,
        Listing::Members => writeln!(text, "\nBest {count} grasps, by {}:", key.word())?,
    }
    let columns = columns::fitted(columns_of(scene, key, ranking), LINE);
    text.push_str(&columns::lines(&columns));
    text.push_str("\nring:edge@mm  ring 0 is the outer one; mm count from the edge's first vertex\n");
    for column in &columns {
        text.push_str(legend(column.head));
    }
    if !scene.cases().is_empty() {
        writeln!(text, "N are per finger; times {} fingers in all", scene.setup().hand.fingers.get())?;
    }
    Ok(())
}

/// Every column there is, the ones to be left out first with the least [`Column::keep`].
fn columns_of(scene: &Scene, key: Key, ranking: &Ranking) -> Vec<Column> {
    let decimals = decimals(scene.part().reach_mm());
    let rows = |cell: &dyn Fn(&Listed) -> String| ranking.grasps.iter().map(cell).collect::<Vec<_>>();
    let scores = |cell: &dyn Fn(&Assessment) -> String| rows(&|listed| cell(&listed.assessment));
    // Two qualities beside each other would not fit; the one sorted by is shown.
    let quality = if key == Key::QualityPerFinger {
        Column::new(PER_FINGER, 7, scores(&|a| short(a.quality_per_finger)))
    } else {
        Column::new(QUALITY, 7, scores(&|a| short(a.quality)))
    };
    let mut columns = vec![
        Column::new("rank", 4, (1..=ranking.grasps.len()).map(|number| number.to_string()).collect()),
        Column::new("ring:edge@mm", 13, rows(&|listed| fingers(&listed.grasp.spots, decimals))).left(),
        quality,
        Column::new(MARGIN, 6, scores(&|a| a.friction_margin.map_or("-".to_owned(), ratio))).keep(4),
        Column::new(NEEDED, 6, scores(&|a| a.friction_needed.map_or("-".to_owned(), ratio)))
            .keep(if key == Key::Friction { 5 } else { 1 }),
        Column::new(PLACE, 8, scores(&|a| length(a.placement.mm))).keep(if key == Key::Placement { 5 } else { 2 }),
    ];
    if !scene.cases().is_empty() {
        let asked = |a: &Assessment, cell: &dyn Fn(&Holding) -> String| a.holding.as_ref().map_or("-".to_owned(), cell);
        let squeeze = |holding: &Holding| holding.squeeze_n().map_or("none".to_owned(), newtons);
        let load_margin = |holding: &Holding| holding.load_margin().map_or("-".to_owned(), ratio);
        let case = |holding: &Holding| shown(&holding.governing_case().name);
        columns.push(Column::new(SQUEEZE_N, 9, scores(&|a| asked(a, &squeeze))));
        columns.push(Column::new(LOAD_MARGIN, 6, scores(&|a| asked(a, &load_margin))));
        columns.push(Column::new(CASE, 4, scores(&|a| asked(a, &case))).left().cut_to(4).keep(3));
    }
    columns
}

const QUALITY: &str = "quality";
const PER_FINGER: &str = "qual/f";
const MARGIN: &str = "margin";
const NEEDED: &str = "needed";
const PLACE: &str = "place mm";
const SQUEEZE_N: &str = "squeeze N";
const LOAD_MARGIN: &str = "load x";
const CASE: &str = "case";

/// What a column means; nothing for those that need no words.
fn legend(head: &str) -> &'static str {
    match head {
        QUALITY => {
            "\
quality   a disturbance of size 1 (force, or torque over the torque scale) in
          any direction is held with a total finger force of 1 / quality
"
        }
        PER_FINGER => {
            "\
qual/f    quality per finger: a disturbance of size 1 (force, or torque over the
          torque scale) in any direction is held with at most 1 / (qual/f) from
          each finger
"
        }
        MARGIN => "margin    mu over the friction needed; - where any friction at all will do\n",
        NEEDED => {
            "\
needed    least mu at which the grasp closes, and holds every load within the
          force limit where both are set; as an angle, its arc tangent
"
        }
        PLACE => "place mm  how far every finger may be off along its edge, all at once\n",
        SQUEEZE_N => {
            "\
squeeze N the least squeeze of each finger that holds every load case; none
          where no squeeze does
"
        }
        LOAD_MARGIN => {
            "\
load x    largest multiple of every load that is held within the limit of the
          hand and of the edges; below 1 not held, - without a limit
"
        }
        CASE => "case      the load case that asks most, its name cut to fit\n",
        _ => "",
    }
}

/// Why a list is empty and what to try.
fn why_empty(scene: &Scene, ranking: &Ranking) -> String {
    let (hand, floors) = (&scene.setup().hand, &scene.setup().floors);
    if scene.stretches().is_empty() {
        let size = match hand.tip {
            Tip::Pin => format!("pins (now of radius {} mm)", hand.pin_radius_mm),
            Tip::Pad => format!("pads (now {} x {} mm)", hand.pad_width_mm, hand.pad_depth_mm),
        };
        return format!(
            "No finger fits on any edge: try smaller {size} or corner clearance (now {} mm),\nor fewer keep-outs.",
            hand.corner_clearance_mm
        );
    }
    if hand.closing == Closing::Parallel && scene.jaw_runs().is_empty() {
        let [least, most] = hand.opening_mm;
        return format!(
            "No two edges take a pair of parallel jaws: they must face each other, parallel to within {:.1} deg and {least}\n\
             to {most} mm apart, with room for pads of {} x {} mm. Try another opening, smaller pads, or closing = \"free\".",
            PARALLEL_RAD.to_degrees(),
            hand.pad_width_mm,
            hand.pad_depth_mm
        );
    }
    if ranking.examined == 0 {
        return format!(
            "There is no set of {} sites that keeps the fingers apart: try fewer fingers, a smaller gap (now {} mm)\n\
             or a smaller --spacing.",
            hand.fingers.get(),
            hand.gap_mm
        );
    }
    if ranking.closed == 0 {
        let sample = if ranking.complete { "" } else { " A larger --budget looks at more." };
        return format!(
            "No candidate set closes at mu {}: try more fingers, a smaller --spacing, or tips with more friction.{sample}",
            scene.setup().friction.mu
        );
    }
    if ranking.inconclusive > 0 {
        return format!(
            "{} sets close, but the two ways of scoring disagree on the {} best: try another torque scale.",
            ranking.closed, ranking.inconclusive
        );
    }
    if ranking.not_held > 0 {
        return format!(
            "{} sets close; {} of them came in question, and none holds every load: try a larger force limit, more\n\
             friction, more fingers or pads, or a lower load margin under [floors]. `score` shows what each load asks.",
            ranking.closed, ranking.not_held
        );
    }
    let load_margin =
        if scene.cases().is_empty() { String::new() } else { format!(", load margin {}", floors.load_margin) };
    format!(
        "{} sets close, but none is above the floors (quality {}, friction margin {}, placement {} mm{load_margin}):\n\
         lower them in the setup.",
        ranking.closed, floors.quality, floors.friction_margin, floors.placement_mm
    )
}
