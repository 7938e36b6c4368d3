//! The ranked table, and what is said when it is empty.

use super::super::floors;
use super::super::state::{Filter, Job, MOST_ROWS, Shown, State};
use super::{bars, number, put, titled, wrapped};
use crate::hand::{Closing, Drive, Hand, Tip};
use crate::mechanics::{Assessment, Holding};
use crate::search::{Key, Listed, Listing, Setup, Spot};
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

/// Draws the panel.
pub(super) fn render(state: &State, area: Rect, buf: &mut Buffer) {
    let (title, right) = title(state);
    let inside = titled(state, area, &title, &right, buf);
    if inside.is_empty() {
        return;
    }
    match &state.shown {
        Some(shown) if state.rows() > 0 => rows(state, shown, inside, buf),
        _ => {
            let mut at = inside;
            for paragraph in nothing(state) {
                for line in wrapped(&paragraph, usize::from(inside.width)) {
                    put(buf, at, &line, state.look.plain());
                    at = Rect { y: at.y.saturating_add(1), height: at.height.saturating_sub(1), ..at };
                    if at.height == 0 {
                        return;
                    }
                }
            }
        }
    }
}

fn title(state: &State) -> (String, String) {
    let Some(shown) = &state.shown else { return ("grasps".to_owned(), String::new()) };
    if state.is_old() {
        let mu = number::mu(shown.order.scene.setup().friction.mu);
        let fingers = bars::fingers(&shown.order.scene.setup().hand);
        return (format!("OLD: mu {mu}, {fingers}"), shown.order.key.word().replace('_', " "));
    }
    let ranking = &shown.ranking;
    let sample = match (&state.job, &ranking.proof) {
        (Job::Running(_), _) => "so far".to_owned(),
        (_, Some(proof)) if ranking.grasps.is_empty() && proof.proved => "proved".to_owned(),
        (_, Some(proof)) if proof.list_proved => format!("within {}", number::percent(proof.list_gap)),
        (_, Some(proof)) if proof.proved => format!("best within {}", number::percent(proof.gap)),
        (_, Some(proof)) if proof.gap.is_finite() => format!("GAP {}", number::percent(proof.gap)),
        (_, Some(_)) => "GAP OPEN".to_owned(),
        (_, None) if !ranking.complete => "sample".to_owned(),
        _ => String::new(),
    };
    let doubtful = match ranking.inconclusive {
        0 => String::new(),
        n => format!("{n} in doubt "),
    };
    let hidden = match ranking.below_floors {
        // A proof does not count what the floors hide.
        0 if floors::any(state) => "floors ".to_owned(),
        0 => String::new(),
        _ if !floors::any(state) => String::new(),
        _ if ranking.closed == ranking.below_floors => "floors hide all ".to_owned(),
        n => format!("floors hide {} % ", (n as u128 * 100).div_ceil(u128::from(ranking.closed)).min(99)),
    };
    let mut filter = String::new();
    if let Some(edge) = state.filter.edge {
        filter.push_str(&format!("on {}:{} ", edge.ring, edge.edge));
    }
    if state.filter.unbeaten {
        filter.push_str("only ^ ");
    }
    let kept = match state.order.scene.kept().len() {
        0 => String::new(),
        count => format!("{count} locked "),
    };
    let right = format!("{kept}{filter}{hidden}{doubtful}{sample}").trim().to_owned();
    let title = match shown.order.listing {
        Listing::Families => match ranking.families as u64 {
            count if state.filter != Filter::default() => format!("{} of {count}", state.rows()),
            count if count as usize >= MOST_ROWS => format!("best {count} families"),
            count => number::count(count, "family", "families"),
        },
        Listing::Members => number::count(ranking.closed.saturating_sub(ranking.below_floors), "grasp", "grasps"),
    };
    (title, right)
}

/// A column of numbers.
struct Column {
    name: &'static str,
    width: usize,
    value: fn(&Assessment) -> String,
    /// The list is sorted by it: it stays when others leave.
    sorted: bool,
}

/// The columns there are, the most wanted on the left.
fn columns(key: Key, loads: bool) -> Vec<Column> {
    let column = |name, width, value, sorted| Column { name, width, value, sorted };
    // The quality shown is the one the list is sorted by.
    let mut columns = vec![
        if key == Key::QualityPerFinger {
            column("/finger", 7, |a| number::quality(a.quality_per_finger), true)
        } else {
            column("quality", 7, |a| number::quality(a.quality), key == Key::Quality)
        },
        column("margin", 7, |a| number::margin(a.friction_margin), key == Key::Friction),
        column("place", 6, |a| number::mm(a.placement.mm), key == Key::Placement),
    ];
    if loads {
        let squeeze = |a: &Assessment| {
            let needed = a.holding.as_ref().and_then(Holding::squeeze_n);
            needed.map_or("none".to_owned(), number::mm)
        };
        let load = |a: &Assessment| {
            a.holding.as_ref().map_or(String::new(), |holding| number::load(holding.load_margin(), holding.held()))
        };
        columns.push(column("squeeze", 8, squeeze, key == Key::Squeeze));
        columns.push(column("load", 9, load, key == Key::LoadMargin));
    }
    columns.push(column("needed", 8, |a| a.friction_needed.map_or("-".to_owned(), number::mu), false));
    if key != Key::QualityPerFinger {
        columns.push(column("/finger", 8, |a| number::quality(a.quality_per_finger), false));
    }
    columns
}

/// Drops columns from the right until the rest fits; the one the list is sorted by stays.
fn fitting(mut columns: Vec<Column>, room: usize) -> Vec<Column> {
    let width = |columns: &[Column]| columns.iter().map(|column| column.width).sum::<usize>();
    while columns.len() > 1 && width(&columns) > room {
        let Some(last) = columns.iter().rposition(|column| !column.sorted) else { break };
        columns.remove(last);
    }
    columns
}

fn rows(state: &State, shown: &Shown, area: Rect, buf: &mut Buffer) {
    let width = usize::from(area.width);
    // Two signs, the Pareto sign, the rank, a space.
    let lead = 7;
    // Number columns leave from the right before the edges are cut, unless there are very many fingers.
    // Grasps of one family differ in their positions alone.
    let places = |row: &Listed| match shown.order.listing {
        Listing::Families => edges(&row.grasp.spots),
        Listing::Members => edges_at(&row.grasp.spots),
    };
    let longest = |row: &Listed| places(row).chars().count();
    let least_edges = shown.ranking.grasps.iter().map(longest).max().unwrap_or(0).clamp(6, 24);
    let loads = !shown.order.scene.cases().is_empty();
    let columns = fitting(columns(shown.order.key, loads), width.saturating_sub(lead + least_edges));
    let numbers: usize = columns.iter().map(|column| column.width).sum();
    let edges_width = width.saturating_sub(lead + numbers);
    let mut head = format!("   {:>3} {:<edges_width$}", "#", "edges");
    for Column { name, width, .. } in &columns {
        head.push_str(&format!("{name:>width$}"));
    }
    put(buf, area, &head, state.look.dim());
    let height = usize::from(area.height.saturating_sub(1));
    let listed = state.listed();
    let top = first_row(listed.partition_point(|row| *row < state.selected), height, listed.len());
    for (line, &i) in listed.iter().enumerate().skip(top).take(height) {
        let row = &shown.ranking.grasps[i];
        let selected = i == state.selected;
        let mut text = format!(
            "{}{}{}{:>3} {}",
            if selected { '>' } else { ' ' },
            if state.mark_on(&row.grasp.spots).is_some() { '*' } else { ' ' },
            if shown.unbeaten.get(i) == Some(&true) { '^' } else { ' ' },
            i + 1,
            padded(&places(row), edges_width),
        );
        for Column { value, width, .. } in &columns {
            text.push_str(&format!("{:>width$}", value(&row.assessment)));
        }
        let line = Rect { y: area.y + 1 + (line - top) as u16, height: 1, ..area };
        let style = match (selected, state.is_old()) {
            (true, _) => state.look.selected(),
            (false, true) => state.look.dim(),
            _ => state.look.plain(),
        };
        put(buf, line, &format!("{text:<width$}"), style);
    }
}

/// The list stands still while the selection moves inside it, a page at a time.
fn first_row(selected: usize, height: usize, rows: usize) -> usize {
    if height == 0 {
        return 0;
    }
    // Half a screen of overlap: the top is a multiple of half the height.
    let half = (height / 2).max(1);
    let top = if selected < height { 0 } else { (selected - height) / half * half + half };
    top.min(rows.saturating_sub(height))
}

/// The fingers' edges: those of the outer ring by their number, those of a hole as ring:edge.
pub(super) fn edges(spots: &[Spot]) -> String {
    spots.iter().map(edge).collect::<Vec<_>>().join(",")
}

/// The same with the place on each edge in whole mm.
fn edges_at(spots: &[Spot]) -> String {
    let name = |spot: &Spot| format!("{}@{:.0}", edge(spot), spot.along_mm);
    spots.iter().map(name).collect::<Vec<_>>().join(",")
}

fn edge(spot: &Spot) -> String {
    match spot.edge.ring {
        0 => spot.edge.edge.to_string(),
        ring => format!("{ring}:{}", spot.edge.edge),
    }
}

fn padded(text: &str, width: usize) -> String {
    if text.chars().count() <= width {
        format!("{text:<width$}")
    } else {
        let cut: String = text.chars().take(width.saturating_sub(3)).collect();
        format!("{:<width$}", format!("{cut}.."))
    }
}

/// Why nothing is listed, and what to try.
fn nothing(state: &State) -> Vec<String> {
    let setup = state.setup();
    let scene = &state.order.scene;
    let fingers = setup.hand.fingers.get();
    if let Job::Failed(why) = &state.job {
        return vec![format!("The ranking broke: {}", crate::file::shown(why)), "Turn a knob to try again.".to_owned()];
    }
    if scene.stretches().is_empty() {
        return vec![
            "No finger fits anywhere on this part.".to_owned(),
            format!(
                "{} stay {} mm off corners and off every keep-out. Smaller ones, less clearance or fewer keep-outs make \
                 room.",
                tips(&setup.hand),
                number::mm(setup.hand.corner_clearance_mm),
            ),
        ];
    }
    if setup.hand.closing == Closing::Parallel && scene.jaw_runs().is_empty() {
        let [least, most] = setup.hand.opening_mm.map(number::given);
        return vec![
            "Nowhere do two pads fit that face each other.".to_owned(),
            format!("{} open {least} to {most} mm; P goes back to fingers of their own.", tips(&setup.hand)),
        ];
    }
    let Some(shown) = state.shown.as_ref().filter(|_| !state.is_old()) else {
        return vec!["Ranking ...".to_owned()];
    };
    let ranking = &shown.ranking;
    if ranking.grasps.is_empty() && !scene.kept().is_empty() && !matches!(state.job, Job::Running(_)) {
        let locked = number::count(scene.kept().len() as u64, "finger is", "fingers are");
        return vec![
            format!("{locked} locked, and no grasp that keeps them is listed."),
            "Take the grasp in hand (b), free a finger (L), or lower the floors (_).".to_owned(),
        ];
    }
    if !ranking.grasps.is_empty() {
        return hidden_by_filter(state, ranking.grasps.len());
    }
    if matches!(state.job, Job::Running(_)) {
        return vec!["Nothing closed so far.".to_owned()];
    }
    if ranking.closed == 0 {
        let looked = number::count(ranking.examined, "candidate set", "candidate sets");
        return vec![
            format!("No closed grasp among {looked} of {fingers} fingers at mu {}.", number::mu(setup.friction.mu)),
            "Try more friction (l), one finger more (f), or finer sites (.).".to_owned(),
        ];
    }
    let mut lines = Vec::new();
    if ranking.not_held == 0 || ranking.below_floors > 0 {
        let closed = number::count(ranking.closed, "candidate set is", "candidate sets are");
        lines.push(format!("{closed} closed, none listed."));
    }
    let floors = floors_asked(setup);
    if !floors.is_empty() {
        lines.push(format!("The floors ask for {}.", floors.join(", ")));
        lines.push("Try a lower floor (_), more friction (l) or one finger more (f).".to_owned());
    }
    if ranking.not_held > 0 {
        lines.extend(not_held(state, ranking.not_held));
    }
    if ranking.inconclusive > 0 {
        lines.push(format!("{} left out: the two ways to the score disagree.", ranking.inconclusive));
    }
    lines
}

/// That rows are there, but the filter lists none.
fn hidden_by_filter(state: &State, rows: usize) -> Vec<String> {
    let mut lines = vec![format!("None of the {rows} best is listed.")];
    if let Some(edge) = state.filter.edge {
        lines.push(format!("None has a finger on edge {}:{}; / and Enter lists all.", edge.ring, edge.edge));
        lines.push(
            "To rank grasps with a finger there, take one in hand (b), move a finger and lock it (L).".to_owned(),
        );
    }
    if state.filter.unbeaten {
        lines.push("Only rows that no other beats are listed; ^ lists all.".to_owned());
    }
    lines
}

/// That sets which came in question do not hold the loads, by which case where that is known, and what to try.
fn not_held(state: &State, sets: u64) -> Vec<String> {
    let hand = &state.setup().hand;
    let sets = if sets == 1 { "1 closed set came".to_owned() } else { format!("{sets} closed sets came") };
    let limit = match hand.force_limit_n {
        Some(limit) => format!(" within {} N each", number::given(limit)),
        None => String::new(),
    };
    let drive = if hand.drive == Drive::Equal { "forces of their own (e), " } else { "" };
    let more = if hand.closing == Closing::Parallel { "" } else { "one finger more (f), " };
    let mut lines = vec![
        format!("{sets} in question, none holds every load{limit}."),
        format!("Try {drive}a higher force limit (u), more friction (l), {more}smaller loads (L)."),
    ];
    let holding = state.reading.as_ref().and_then(|reading| reading.assessment.holding.as_ref());
    if let Some(case) = holding.map(Holding::governing_case) {
        let asks = match case.squeeze_n {
            Some(n) => format!("asks {} N each", number::mm(n)),
            None => "is held by no squeeze".to_owned(),
        };
        lines.insert(1, format!("\"{}\" {asks} of the grasp last selected.", crate::file::shown(&case.name)));
    }
    lines
}

/// The tips with their size.
fn tips(hand: &Hand) -> String {
    match hand.tip {
        Tip::Pin => format!("Pins of radius {} mm", number::mm(hand.pin_radius_mm)),
        Tip::Pad => {
            let [width, depth] = [hand.pad_width_mm, hand.pad_depth_mm].map(number::mm);
            format!("Pads {width} mm wide and {depth} mm deep")
        }
    }
}

/// The floors that ask for something, in words.
fn floors_asked(setup: &Setup) -> Vec<String> {
    let floors = &setup.floors;
    let loads = !setup.loads.is_empty() && setup.hand.force_limit_n.is_some();
    let mut asked = Vec::new();
    if floors.quality > 0.0 {
        asked.push(format!("quality {}", number::quality(floors.quality)));
    }
    if floors.friction_margin > 1.0 {
        asked.push(format!("friction margin {}", number::margin(Some(floors.friction_margin))));
    }
    if floors.placement_mm > 0.0 {
        asked.push(format!("placement {} mm", number::mm(floors.placement_mm)));
    }
    if loads && floors.load_margin > 1.0 {
        asked.push(format!("load margin {}", number::times(Some(floors.load_margin))));
    }
    asked
}
