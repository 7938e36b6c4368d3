//! Setup files: from TOML to a checked setup, and a setup written out with every key.

use super::reading::text_of;
use super::toml_reader::{self, Table};
use super::writing::{number, quoted};
use super::{FileFault, FileFaults};
use crate::hand::{Closing, Drive, FingerCount, Hand, Tip};
use crate::mechanics::{Condition, FrictionBand, LoadCase};
use crate::search::{Floors, SearchSettings, Setup, TorqueScale};
use std::fmt::Write;
use std::path::Path;
use toml::de::DeValue;

/// Words for the kinds of tip.
pub const TIPS: [(&str, Tip); 2] = [("pin", Tip::Pin), ("pad", Tip::Pad)];
/// Words for the ways of closing.
pub const CLOSINGS: [(&str, Closing); 2] = [("free", Closing::Free), ("parallel", Closing::Parallel)];
/// Words for the ways the squeeze is shared.
pub const DRIVES: [(&str, Drive); 2] = [("adjustable", Drive::Adjustable), ("equal", Drive::Equal)];
/// Words for the state of the surfaces.
pub const CONDITIONS: [(&str, Condition); 3] =
    [("dry", Condition::Dry), ("oily", Condition::Oily), ("wet", Condition::Wet)];

/// The word of a meaning.
pub fn word_for<T: Copy + PartialEq>(words: &[(&'static str, T)], meaning: T) -> &'static str {
    words.iter().find(|(_, other)| *other == meaning).map_or("", |(word, _)| word)
}

/// Reads a setup file.
///
/// # Errors
/// Every fault found.
pub fn read_setup(path: &Path) -> Result<Setup, FileFaults> {
    setup_from_text(path, &text_of(path)?)
}

/// Reads a setup from the text of a setup file; `path` names the file in faults.
///
/// # Errors
/// Every fault found.
pub fn setup_from_text(path: &Path, text: &str) -> Result<Setup, FileFaults> {
    toml_reader::read(path, text, |root| Some(setup_of(root))).map(|(setup, _): (Setup, Vec<FileFault>)| setup)
}

/// The setup that stands in a table; faults are noted in the table's file.
pub(super) fn setup_of(root: &Table<'_>) -> Setup {
    let mut setup = Setup::default();
    let tables = ["friction", "hand", "search", "floors"].map(|key| root.table(key));
    let [friction, hand, search, floors] = &tables;
    if let Some(table) = friction {
        setup.friction = friction_of(table);
    }
    if let Some(table) = hand {
        setup.hand = hand_of(table);
    }
    if let Some(table) = search {
        setup.search = search_of(table);
    }
    if let Some(table) = floors {
        setup.floors = floors_of(table);
    }
    for load in root.tables("load") {
        setup.loads.push(load_of(&load, setup.loads.len()));
        load.finish();
    }
    // Without `mu` the low end stands for it; what is wrong with one is not said again of the other.
    let mu_is_low = friction.as_ref().is_some_and(|table| !table.has("mu") && table.has("low"));
    for fault in setup.faults() {
        if !(mu_is_low && fault.key == "friction.mu") {
            root.sheet().fault(root.place_of_path(&fault.key), fault.to_string());
        }
    }
    tables.into_iter().flatten().for_each(Table::finish);
    setup
}

fn friction_of(table: &Table<'_>) -> FrictionBand {
    let low = table.number("low");
    let mu = table.number("mu");
    FrictionBand {
        mu: mu.or(low).unwrap_or(FrictionBand::default().mu),
        low,
        nominal: table.number("nominal"),
        high: table.number("high"),
        sliding: table.number("sliding"),
        condition: table.word("condition", &CONDITIONS),
        source: table.text("source"),
    }
}

fn hand_of(table: &Table<'_>) -> Hand {
    let usual = Hand::default();
    let fingers = table.whole("fingers").and_then(|count| {
        let counted = usize::try_from(count).ok().and_then(FingerCount::new);
        if counted.is_none() {
            table.fault(
                "fingers",
                format!(
                    "{} is {count}; give a number from {} to {}",
                    table.named("fingers"),
                    FingerCount::LEAST,
                    FingerCount::MOST
                ),
            );
        }
        counted
    });
    let closing = table.word("closing", &CLOSINGS).unwrap_or(usual.closing);
    // Two pads go without saying.
    let parallel = closing == Closing::Parallel;
    Hand {
        fingers: fingers.or(FingerCount::new(2).filter(|_| parallel)).unwrap_or(usual.fingers),
        tip: table.word("tip", &TIPS).unwrap_or(if parallel { Tip::Pad } else { usual.tip }),
        closing,
        pin_radius_mm: table.number("pin_radius_mm").unwrap_or(usual.pin_radius_mm),
        pad_width_mm: table.number("pad_width_mm").unwrap_or(usual.pad_width_mm),
        pad_depth_mm: table.number("pad_depth_mm").unwrap_or(usual.pad_depth_mm),
        bite_mm: table.number("bite_mm").or(usual.bite_mm),
        opening_mm: table.numbers("opening_mm").unwrap_or(usual.opening_mm),
        corner_clearance_mm: table.number("corner_clearance_mm").unwrap_or(usual.corner_clearance_mm),
        gap_mm: table.number("gap_mm").unwrap_or(usual.gap_mm),
        force_limit_n: table.number("force_limit_n").or(usual.force_limit_n),
        drive: table.word("drive", &DRIVES).unwrap_or(usual.drive),
    }
}

fn search_of(table: &Table<'_>) -> SearchSettings {
    let usual = SearchSettings::default();
    let torque_scale = match table.get("torque_scale").map(toml::Spanned::get_ref) {
        Some(DeValue::Integer(_) | DeValue::Float(_)) => table.number("torque_scale").map(TorqueScale::Mm),
        Some(_) => table.word("torque_scale", &TORQUE_SCALES),
        None => None,
    };
    SearchSettings {
        spacing_mm: table.number("spacing_mm").or(usual.spacing_mm),
        budget: table.whole("budget").unwrap_or(usual.budget),
        seed: table.whole("seed").unwrap_or(usual.seed),
        torque_scale: torque_scale.unwrap_or(usual.torque_scale),
        cone_sides: table.index("cone_sides").unwrap_or(usual.cone_sides),
    }
}

const TORQUE_SCALES: [(&str, TorqueScale); 2] = [("reach", TorqueScale::Reach), ("gyration", TorqueScale::Gyration)];

fn floors_of(table: &Table<'_>) -> Floors {
    let usual = Floors::default();
    Floors {
        quality: table.number("quality").unwrap_or(usual.quality),
        friction_margin: table.number("friction_margin").unwrap_or(usual.friction_margin),
        placement_mm: table.number("placement_mm").unwrap_or(usual.placement_mm),
        load_margin: table.number("load_margin").unwrap_or(usual.load_margin),
    }
}

fn load_of(table: &Table<'_>, number: usize) -> LoadCase {
    let usual = LoadCase::default();
    LoadCase {
        name: table.text("name").unwrap_or_else(|| format!("{} {}", usual.name, number + 1)),
        gravity: table.numbers("gravity").unwrap_or(usual.gravity),
        acceleration_m_s2: table.numbers("acceleration_m_s2").unwrap_or(usual.acceleration_m_s2),
        angular_acceleration_rad_s2: table
            .number("angular_acceleration_rad_s2")
            .unwrap_or(usual.angular_acceleration_rad_s2),
        any_direction_m_s2: table.number("any_direction_m_s2").unwrap_or(usual.any_direction_m_s2),
        force_n: table.numbers("force_n").unwrap_or(usual.force_n),
        at_mm: table.numbers("at_mm").unwrap_or(usual.at_mm),
        safety: table.number("safety").unwrap_or(usual.safety),
        squeeze_left: table.number("squeeze_left").unwrap_or(usual.squeeze_left),
    }
}

/// One line of a written setup: key, value where there is one, an example where there is none, what it means.
struct Row {
    key: &'static str,
    value: Option<String>,
    example: &'static str,
    meaning: &'static str,
}

fn row(key: &'static str, value: String, meaning: &'static str) -> Row {
    Row { key, value: Some(value), example: "", meaning }
}

fn option(key: &'static str, value: Option<String>, example: &'static str, meaning: &'static str) -> Row {
    Row { key, value, example, meaning }
}

fn list(numbers: &[f64]) -> String {
    format!("[{}]", numbers.iter().map(|&x| number(x)).collect::<Vec<_>>().join(", "))
}

fn word(word: &str) -> String {
    format!("\"{word}\"")
}

fn friction_rows(f: &FrictionBand) -> Vec<Row> {
    let condition = f.condition.map(|condition| word(word_for(&CONDITIONS, condition)));
    vec![
        row("mu", number(f.mu), "the value every score uses; `low` when left out"),
        option("low", f.low.map(number), "0.15", "band, shown beside: low end"),
        option("nominal", f.nominal.map(number), "0.25", "middle"),
        option("high", f.high.map(number), "0.40", "high end"),
        option("sliding", f.sliding.map(number), "0.15", "once slip has begun; never above mu"),
        option("condition", condition, "\"dry\"", "dry | oily | wet"),
        option("source", f.source.as_deref().map(quoted), "\"own tilt test\"", "where the values come from"),
    ]
}

fn hand_rows(h: &Hand) -> Vec<Row> {
    vec![
        row("fingers", h.fingers.get().to_string(), "2..6"),
        row("tip", word(word_for(&TIPS, h.tip)), "pin | pad"),
        row("closing", word(word_for(&CLOSINGS, h.closing)), "free | parallel (two pads facing each other)"),
        row("pin_radius_mm", number(h.pin_radius_mm), "0 is a point"),
        row("pad_width_mm", number(h.pad_width_mm), "along the edge"),
        row("pad_depth_mm", number(h.pad_depth_mm), "away from the edge"),
        option(
            "bite_mm",
            h.bite_mm.map(number),
            "6.0",
            "height of contact along the edge face; 6 or the thickness if less",
        ),
        row("opening_mm", list(&h.opening_mm), "parallel closing: least and largest distance of the faces"),
        row("corner_clearance_mm", number(h.corner_clearance_mm), "kept from both ends of an edge"),
        row("gap_mm", number(h.gap_mm), "kept between two fingers"),
        option("force_limit_n", h.force_limit_n.map(number), "60.0", "per finger"),
        row("drive", word(word_for(&DRIVES, h.drive)), "adjustable | equal (all fingers press alike)"),
    ]
}

/// A torque scale as a TOML value.
pub(super) fn torque_scale_word(scale: TorqueScale) -> String {
    match scale {
        TorqueScale::Mm(mm) => number(mm),
        named => word(word_for(&TORQUE_SCALES, named)),
    }
}

fn search_rows(s: &SearchSettings) -> Vec<Row> {
    let scale = torque_scale_word(s.torque_scale);
    vec![
        option("spacing_mm", s.spacing_mm.map(number), "2.0", "between sites; perimeter / 200 when left out"),
        row("budget", s.budget.to_string(), "candidate sets looked at before sampling takes over"),
        row("seed", s.seed.to_string(), "of the sampler"),
        row("cone_sides", s.cone_sides.to_string(), "even; of the pyramid that stands in for a friction cone in space"),
        row("torque_scale", scale, "\"reach\" | \"gyration\" | a number in mm"),
    ]
}

fn floor_rows(f: &Floors) -> Vec<Row> {
    vec![
        row("quality", number(f.quality), "grasps below a floor are not listed"),
        row("friction_margin", number(f.friction_margin), "mu over the friction needed"),
        row("placement_mm", number(f.placement_mm), "how far every finger may be off"),
        row("load_margin", number(f.load_margin), "largest multiple of the load held"),
    ]
}

fn load_rows(l: &LoadCase) -> Vec<Row> {
    vec![
        row("name", quoted(&l.name), "for people"),
        row("gravity", list(&l.gravity), "direction in the part frame; the part lies flat"),
        row("acceleration_m_s2", list(&l.acceleration_m_s2), "of the centre of mass"),
        row("angular_acceleration_rad_s2", number(l.angular_acceleration_rad_s2), "about z"),
        row("any_direction_m_s2", number(l.any_direction_m_s2), "of this size, in every direction of the plane"),
        row("force_n", list(&l.force_n), "an outside force"),
        row("at_mm", list(&l.at_mm), "where it acts"),
        row("safety", number(l.safety), "factor on the whole load"),
        row("squeeze_left", number(l.squeeze_left), "part of the squeeze left: below 1 where air or power fails"),
    ]
}

/// A setup as TOML tables whose names start with `prefix` (`setup.`), every key that has a value written out.
pub(super) fn setup_tables(setup: &Setup, prefix: &str) -> String {
    let mut text = String::new();
    let mut table = |head: String, rows: Vec<Row>| {
        if !text.is_empty() {
            text.push('\n');
        }
        text.push_str(&head);
        text.push('\n');
        for row in rows {
            if let Some(value) = row.value {
                let _ = writeln!(text, "{} = {value}", row.key);
            }
        }
    };
    table(format!("[{prefix}friction]"), friction_rows(&setup.friction));
    table(format!("[{prefix}hand]"), hand_rows(&setup.hand));
    table(format!("[{prefix}search]"), search_rows(&setup.search));
    table(format!("[{prefix}floors]"), floor_rows(&setup.floors));
    for load in &setup.loads {
        table(format!("[[{prefix}load]]"), load_rows(load));
    }
    text
}

/// The default setup as a setup file to start from, every key with what it means; keys without a default stand as
/// comments.
pub fn default_setup_text() -> String {
    let setup = Setup::default();
    let mut text = String::from(
        "# Setup: the cell the part is handled in. Every key may be left out; its default stands here.\n\
         # A key behind `#` has no default; its value is an example.\n\
         schema = 1\n",
    );
    let mut table = |head: &str, rows: Vec<Row>, all_comments: bool| {
        let _ = write!(text, "\n{head}\n");
        for row in rows {
            let absent = row.value.is_none() || all_comments;
            let value = row.value.unwrap_or_else(|| row.example.to_owned());
            let line = format!("{}{} = {value}", if absent { "# " } else { "" }, row.key);
            let _ = writeln!(text, "{line:<42} # {}", row.meaning);
        }
    };
    table("[friction]", friction_rows(&setup.friction), false);
    table("[hand]", hand_rows(&setup.hand), false);
    table("[search]", search_rows(&setup.search), false);
    table("[floors]", floor_rows(&setup.floors), false);
    let lift = LoadCase { name: "lift".into(), acceleration_m_s2: [0.0, 0.0, 3.0], safety: 2.0, ..LoadCase::default() };
    table("# [[load]]                               # as many load cases as there are", load_rows(&lift), true);
    text
}
