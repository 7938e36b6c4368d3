//! The tables of a page. Each says how high it stands, so that the drawing gets what is left.

use super::drawing::place_decimals;
use super::markup::{cut, datum, escaped, lines};
use super::words;
use crate::command::loads::{Beside, held_word, in_all, limited_by};
use crate::command::reading::{Reading, band, escape, governor, length, newtons, ratio, short};
use crate::file::SavedGrasp;
use crate::hand::Bearing;
use crate::mechanics::{Assessment, Holding, Verdict};
use crate::search::Scene;
use nalgebra::Point2;

/// Height of a row and of a further line in it, mm.
pub(super) const ROW: f64 = 4.1;
pub(super) const LINE: f64 = 3.2;
/// Characters of a load case in one line, of a meaning, and of a line of the narrow column.
const CASE_WIDTH: usize = 64;
const MEANING_WIDTH: usize = 57;
pub(super) const NARROW: usize = 54;

/// A piece of a page and its height on paper, mm.
pub(super) struct Piece {
    pub(super) html: String,
    pub(super) height: f64,
}

/// What every table looks at.
pub(super) struct Source<'a> {
    pub(super) saved: &'a SavedGrasp,
    pub(super) scene: &'a Scene,
    /// Nothing when the fingers have no place on the part.
    pub(super) reading: Option<&'a Reading>,
    /// Datum in the part's frame.
    pub(super) datum: Point2<f64>,
}

/// A table of rows already written, with its caption.
fn table(class: &str, caption: &str, heads: &[&[(&str, usize)]], rows: &[Vec<String>], lines: usize) -> Piece {
    let mut html = format!("<table class=\"{class}\"><caption>{caption}</caption>\n<thead>");
    for head in heads {
        html.push_str("<tr>");
        for (text, span) in *head {
            let span = if *span > 1 { format!(" colspan=\"{span}\"") } else { String::new() };
            html.push_str(&format!("<th{span}>{text}</th>"));
        }
        html.push_str("</tr>");
    }
    html.push_str("</thead>\n<tbody>\n");
    for row in rows {
        html.push_str("<tr>");
        for cell in row {
            html.push_str(&format!("<td>{cell}</td>"));
        }
        html.push_str("</tr>\n");
    }
    html.push_str("</tbody></table>\n");
    // One row more for the caption, and the space below.
    let height = ROW * (1 + heads.len() + rows.len()) as f64 + LINE * lines as f64 + 1.5;
    Piece { html, height }
}

/// Rounded first, so that a small negative number is not shown as minus nought.
pub(super) fn fixed(value: f64, decimals: usize) -> String {
    let shift = 10_f64.powi(decimals as i32);
    format!("{:.decimals$}", (value * shift).round() / shift + 0.0)
}

fn angle_deg(v: nalgebra::Vector2<f64>) -> f64 {
    v.y.atan2(v.x).to_degrees()
}

/// A paragraph below a table.
fn remark(class: &str, text: &str, most: usize) -> Piece {
    let count = lines(text, most).len();
    Piece { html: format!("<p class=\"{class}\">{}</p>\n", escaped(text)), height: LINE * count as f64 + 0.8 }
}

/// Where each finger stands, and what it gives in the case that asks most.
pub(super) fn fingers(source: &Source<'_>) -> Piece {
    let decimals = place_decimals(source.scene.part());
    let reading = source.reading;
    let holding = reading.and_then(|reading| reading.assessment.holding.as_ref());
    let squeeze_n = holding.and_then(Holding::squeeze_n);
    let mut rows = Vec::new();
    for (finger, spot) in source.saved.spots.iter().enumerate() {
        let number = |class: &str, value: Option<f64>, decimals: usize| {
            value.map_or("-".to_owned(), |value| datum(class, value, &fixed(value, decimals)))
        };
        let newtons_of = |class: &str, n: Option<f64>| n.map_or("-".to_owned(), |n| datum(class, n, &newtons(n)));
        let contact = reading.and_then(|reading| reading.grasp.contacts.get(finger));
        let at = contact.map(|contact| source.scene.part().file_point(contact.point));
        let from = contact.map(|contact| contact.point - source.datum);
        let force = holding.and_then(|holding| holding.governing_case().forces.get(finger));
        let bears = contact.zip(squeeze_n).map_or("-".to_owned(), |(contact, n)| {
            let bearing = source.scene.bearing(contact);
            let class = if matches!(bearing, Bearing::Face { .. }) { "pressure_mpa" } else { "line_n_per_mm" };
            format!("{} {}", datum(class, bearing.load(n), &length(bearing.load(n))), bearing.unit())
        });
        rows.push(vec![
            (finger + 1).to_string(),
            format!("{}:{}", spot.edge.ring, spot.edge.edge),
            number("along_mm", Some(spot.along_mm), decimals),
            number("x_mm", at.map(|at| at.x), decimals),
            number("y_mm", at.map(|at| at.y), decimals),
            number("from_datum_x_mm", from.map(|from| from.x), decimals),
            number("from_datum_y_mm", from.map(|from| from.y), decimals),
            number("normal_deg", contact.map(|contact| angle_deg(contact.normal)), 2),
            contact.map_or("-".to_owned(), |contact| datum("mu", contact.mu, &ratio(contact.mu))),
            newtons_of("normal_n", force.map(|force| force.normal_n)),
            newtons_of("force_along_n", force.map(|force| force.along_n)),
            newtons_of("up_n", force.map(|force| force.up_n)),
            bears,
        ]);
    }
    let of = match holding {
        Some(holding) => format!("holding \u{201c}{}\u{201d}, N", escaped(&cut(&holding.governing_case().name, 22))),
        None => "force, N".to_owned(),
    };
    let groups: &[(&str, usize)] =
        &[("", 1), ("place", 2), ("in the part file, mm", 2), ("from D, mm", 2), ("", 2), (&of, 3), ("", 1)];
    let heads: &[(&str, usize)] = &[
        ("", 1),
        ("edge", 1),
        ("along, mm", 1),
        ("x", 1),
        ("y", 1),
        ("x", 1),
        ("y", 1),
        ("normal, deg", 1),
        ("mu", 1),
        ("into", 1),
        ("along", 1),
        ("up", 1),
        ("bears", 1),
    ];
    let caption = "Fingers <small>edge is ring:edge of the part file, along from its first vertex; normal into the part, \
                   from +x; bears: at the squeeze asked for</small>";
    let mut piece = table("fingers numbers", caption, &[groups, heads], &rows, 0);
    if holding.is_some_and(|holding| !holding.governing_case().forces.is_empty()) {
        let text = "Forces: into the part; along the edge, the material on its left; up out of the plane. \
                    Often one set of many.";
        piece.and(remark("remark", text, 150));
    }
    if let Some(jaws) = jaws(source, decimals) {
        piece.and(jaws);
    }
    piece
}

impl Piece {
    /// Puts another below.
    pub(super) fn and(&mut self, other: Self) {
        self.html.push_str(&other.html);
        self.height += other.height;
    }
}

fn jaws(source: &Source<'_>, decimals: usize) -> Option<Piece> {
    let jaws = source.reading?.grasp.jaws.as_ref()?.as_ref().ok()?;
    let centre = source.scene.part().file_point(jaws.centre);
    let from = jaws.centre - source.datum;
    let mm = |class: &str, value: f64| datum(class, value, &fixed(value, decimals));
    let html = format!(
        "<p class=\"jaws\"><b>Jaws</b> centre J at x {}, y {}; from D {}, {}; axis {} deg from +x (finger 1 to 2); opening <b>{} \
         mm</b>; pressing {}</p>\n",
        mm("jaw_x_mm", centre.x),
        mm("jaw_y_mm", centre.y),
        mm("jaw_from_datum_x_mm", from.x),
        mm("jaw_from_datum_y_mm", from.y),
        datum("jaw_deg", jaws.angle_rad.to_degrees(), &fixed(jaws.angle_rad.to_degrees(), 2)),
        mm("opening_mm", jaws.opening_mm),
        if jaws.inside { "outward" } else { "inward" }
    );
    Some(Piece { html, height: LINE + 2.0 })
}

/// Every load case; of more than so many those that are not held and those that ask most.
pub(super) fn loads(source: &Source<'_>, most: usize) -> Piece {
    let Some((reading, holding)) =
        source.reading.and_then(|reading| Some((reading, reading.assessment.holding.as_ref()?)))
    else {
        return remark("remark", "No load case: what the fingers must press with is not known.", 150);
    };
    let mut order: Vec<usize> = (0..holding.cases.len()).collect();
    let more = order.len().saturating_sub(most);
    if more > 0 {
        let asks = |i: &usize| holding.cases[*i].squeeze_n.unwrap_or(f64::INFINITY);
        order.sort_by(|a, b| {
            let (one, other) = (&holding.cases[*a], &holding.cases[*b]);
            one.held.cmp(&other.held).then(asks(b).total_cmp(&asks(a)))
        });
    }
    let mut extra = 0;
    let mut rows = Vec::new();
    for &i in order.iter().take(most) {
        let case = &holding.cases[i];
        let what = source.scene.setup().loads.get(i).map_or(String::new(), words::load);
        let mut what = lines(&what, CASE_WIDTH);
        if let Some(n) = case.lets_go_above_n {
            what.push(format!("pressed alike with more than {} N each, the fingers let go", newtons(n)));
        }
        extra += what.len().saturating_sub(1);
        let value = |class: &str, n: Option<f64>| n.map_or("none".to_owned(), |n| datum(class, n, &newtons(n)));
        rows.push(vec![
            if i == holding.governing { "*" } else { "" }.to_owned(),
            escaped(&cut(&case.name, 20)),
            what.iter().map(|line| escaped(line)).collect::<Vec<_>>().join("<br/>"),
            value("case_squeeze_n", case.squeeze_n),
            value("case_total_n", case.squeeze_n.map(|n| in_all(n, &reading.grasp))),
            case.margin.map_or("-".to_owned(), |margin| datum("case_margin", margin, &ratio(margin))),
            format!("<b>{}</b>", held_word(case)),
            case.direction_deg.map_or("-".to_owned(), |deg| format!("{} deg", fixed(deg, 1))),
        ]);
    }
    let heads: &[(&str, usize)] = &[
        ("", 1),
        ("load", 1),
        ("what it is", 1),
        ("N each", 1),
        ("N in all", 1),
        ("margin", 1),
        ("held", 1),
        ("worst toward", 1),
    ];
    let limit = match &holding.limit {
        Some(limit) => format!("limit {} N each, {}", newtons(limit.squeeze_n), limited_by(limit, &reading.grasp)),
        None => "no force limit is set".to_owned(),
    };
    let caption = format!("Loads <small>squeeze of one finger and of all; * asks most; {}</small>", escaped(&limit));
    let mut piece = table("loads", &caption, &[heads], &rows, extra);
    if more > 0 {
        let hidden = order.iter().skip(most);
        let unheld = hidden.filter(|i| !holding.cases[**i].held).count();
        let text = format!(
            "{more} more cases ask no more{}; the command score tells of all.",
            if unheld > 0 { format!(", {unheld} of them NOT HELD") } else { ", all held".to_owned() }
        );
        piece.and(remark("remark", &text, 150));
    }
    piece
}

/// A score: name, value, meaning.
type Score = (&'static str, String, String);

/// Every score with its meaning in a line.
pub(super) fn scores(source: &Source<'_>) -> Piece {
    let Some(reading) = source.reading else {
        return remark("remark", "No scores: the fingers have no place on the part as it is.", NARROW);
    };
    let a = &reading.assessment;
    let mut all: Vec<Score> = Vec::new();
    all.push(("verdict", format!("<b>{}</b>", reading.verdict()), verdict(source, reading)));
    if a.verdict == Verdict::Closed {
        closed(a, &mut all);
    }
    all.extend(friction(a));
    if let Some(holding) = &a.holding {
        holding_scores(source, reading, holding, &mut all);
    }
    let mut extra = 0;
    let rows: Vec<_> = all
        .into_iter()
        .map(|(name, value, meaning)| {
            let meaning = lines(&meaning, MEANING_WIDTH);
            extra += meaning.len().saturating_sub(1);
            let meaning = meaning.iter().map(|line| escaped(line)).collect::<Vec<_>>().join("<br/>");
            vec![name.to_owned(), value, meaning]
        })
        .collect();
    table("scores", "Scores", &[], &rows, extra)
}

fn verdict(source: &Source<'_>, reading: &Reading) -> String {
    let a = &reading.assessment;
    match (&a.escape, a.verdict) {
        _ if !reading.doubts.is_empty() => "two ways of scoring disagree: not to be relied on".to_owned(),
        (Some(way), _) => format!("the part {}", escape(source.scene, way)),
        (None, Verdict::Closed) => "pressing enough balances any push or turn".to_owned(),
        (None, Verdict::Marginal) => "on the very edge of closing: not to be relied on".to_owned(),
        (None, Verdict::Open) => "some push cannot be balanced, however hard one presses".to_owned(),
    }
}

fn closed(a: &Assessment, all: &mut Vec<Score>) {
    all.push((
        "quality",
        datum("quality", a.quality, &short(a.quality)),
        format!("1 N of any load takes {} N of total squeeze", ratio(1.0 / a.quality)),
    ));
    all.push((
        "per finger",
        datum("quality_per_finger", a.quality_per_finger, &short(a.quality_per_finger)),
        format!("1 N of any load takes {} N per finger", ratio(1.0 / a.quality_per_finger)),
    ));
    all.push((
        "placement",
        format!("{} mm", datum("placement_mm", a.placement.mm, &length(a.placement.mm))),
        format!("all fingers may be off so far; limited by {}", governor(&a.placement)),
    ));
    if let Some(weakest) = &a.weakest {
        let share = fixed(weakest.torque(), 2);
        let (value, meaning) = match weakest.force_deg() {
            Some(deg) => {
                (format!("{} deg", fixed(deg, 1)), format!("fingers give least that way; torque share {share}"))
            }
            None => ("turning".to_owned(), format!("fingers give least torque; share {share}")),
        };
        all.push(("weakest", value, meaning));
    }
}

fn friction(a: &Assessment) -> Vec<Score> {
    let needed = a.friction_needed.map_or("none will do".to_owned(), |mu| datum("friction_needed", mu, &ratio(mu)));
    let value = |mu: Option<f64>| mu.map_or("none".to_owned(), ratio);
    let of = match &a.holding {
        Some(holding) if holding.limit.is_some() => format!(
            "mu {} to close, {} to hold the loads",
            value(a.friction_needed_closure),
            value(a.friction_needed_holding)
        ),
        _ => "least mu at which the grasp closes".to_owned(),
    };
    let margin = match a.friction_margin {
        Some(margin) => datum("friction_margin", margin, &ratio(margin)),
        None => "any".to_owned(),
    };
    let deg = a
        .friction_margin_deg
        .filter(|deg| *deg > 0.0)
        .map_or(String::new(), |deg| format!("; normals may be off {deg:.1} deg"));
    vec![("friction needed", needed, of), ("friction margin", margin, format!("mu over that{deg}"))]
}

fn holding_scores(source: &Source<'_>, reading: &Reading, holding: &Holding, all: &mut Vec<Score>) {
    let name = cut(&holding.governing_case().name, 24);
    let (squeeze, total) = match holding.squeeze_n() {
        Some(n) => {
            let total = in_all(n, &reading.grasp);
            (
                format!("<b>{} N each</b>", datum("squeeze_n", n, &newtons(n))),
                format!("{} N in all; \"{name}\" asks most", newtons(total)),
            )
        }
        None => ("none will do".to_owned(), format!("no squeeze holds \"{name}\"")),
    };
    all.push(("squeeze", squeeze, total));
    if let Some(margin) = holding.load_margin() {
        let meaning = "largest multiple of every load that is held".to_owned();
        all.push(("load margin", datum("load_margin", margin, &ratio(margin)), meaning));
    }
    let (value, meaning) = match Beside::of(source.scene, &reading.grasp, holding, holding.governing).formula {
        Ok(n) => (format!("{} N each", datum("hand_formula_n", n, &newtons(n))), "S W / (2 mu)".to_owned()),
        Err(why) => ("-".to_owned(), format!("S W / (2 mu) does not apply: {why}")),
    };
    all.push(("hand formula", value, meaning));
}

/// How the grasp stands over the band of friction.
pub(super) fn friction_band(source: &Source<'_>) -> Option<Piece> {
    let reading = source.reading?;
    let row = |(name, mu): (&'static str, f64)| {
        let standing = source.scene.standing_at(&reading.grasp, mu);
        let squeeze = standing.holding.as_ref().map(Holding::squeeze_n);
        let class = format!("{name}_squeeze_n");
        vec![
            name.to_owned(),
            ratio(mu),
            standing.verdict.word().to_owned(),
            match squeeze {
                Some(Some(n)) => datum(&class, n, &newtons(n)),
                Some(None) => "none".to_owned(),
                None => "-".to_owned(),
            },
            match &standing.holding {
                Some(holding) => format!("<b>{}</b>", if holding.held() { "held" } else { "NOT HELD" }),
                None => "-".to_owned(),
            },
        ]
    };
    let rows: Vec<_> = band(&source.scene.setup().friction).map(row).collect();
    if rows.is_empty() {
        return None;
    }
    let heads: &[(&str, usize)] = &[("", 1), ("mu", 1), ("verdict", 1), ("N each", 1), ("loads", 1)];
    Some(table("band", "At other friction <small>sliding: once slip has begun</small>", &[heads], &rows, 0))
}

/// What was assumed, as a list.
pub(super) fn assumed(source: &Source<'_>) -> Piece {
    let all = words::assumed(source.scene, source.saved.spots.len(), source.saved.density.as_ref());
    // Sources and materials may be of any length; the page is not.
    let all: Vec<_> = all.iter().map(|words| cut(words, 2 * NARROW)).collect();
    let count: usize = all.iter().map(|words| lines(words, NARROW).len()).sum();
    let items: String = all.iter().map(|words| format!("<li>{}</li>", escaped(words))).collect();
    let html = format!("<h2>Assumed</h2>\n<ul class=\"assumed\">{items}</ul>\n");
    Piece { html, height: ROW + LINE * count as f64 + 1.5 }
}
