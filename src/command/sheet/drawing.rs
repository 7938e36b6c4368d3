//! The drawing: outline, fingers, what they press with, and where they stand, as SVG in millimetres of paper.

use super::dimensions::{self, Axis};
use super::labels::Taken;
use super::marks::{Marks, put};
use super::markup::{cut, escaped, lines};
use super::paper::{Paper, round_length, scale_below, scale_word};
use crate::command::reading;
use crate::hand::{Hand, Tip};
use crate::part::{Edge, Part};
use crate::search::Grasp;
use nalgebra::{Point2, Vector2};
use std::fmt::{Result as Written, Write};

/// How a drawing looks; stands in the page, or in the drawing itself where that is all there is.
pub(super) const LOOK: &str = include_str!("drawing.css");

/// What is drawn.
pub(super) struct Subject<'a> {
    /// The part.
    pub(super) part: &'a Part,
    /// The hand.
    pub(super) hand: &'a Hand,
    /// The fingers; nothing when they have no place on the part.
    pub(super) grasp: Option<&'a Grasp>,
    /// The datum, in the part's frame.
    pub(super) datum: Point2<f64>,
    /// Which point that is.
    pub(super) datum_words: &'a str,
}

/// A drawing.
pub(super) struct Drawing {
    body: String,
    width: f64,
    /// Height, mm.
    pub(super) height: f64,
}

/// Free border on the right and at the top, mm of paper.
const BORDER: f64 = 9.0;
/// Height of a line of the legend, mm of paper.
const LINE: f64 = 3.1;
/// Characters in a line of the legend for each mm of paper; lower-case text of the usual faces is about half as wide as
/// high.
const PER_MM: f64 = 1.0 / 1.19;
/// Height of the scale bar with its words, and width, mm of paper. It stands on the right of the legend.
const BAR: f64 = 9.5;
const BAR_WIDTH: f64 = 76.0;
/// Width of legend and bar where they stand beside the drawing, mm of paper.
const BESIDE: f64 = 60.0;
/// Reasons for keep-outs that get a number of their own.
pub(super) const MOST_REASONS: usize = 3;
/// Arcs that rise less than this above their chord, mm of paper, are drawn straight: no printer shows the difference,
/// and their circles are too large for programs that draw SVG in single precision.
const FLAT: f64 = 2e-3;

/// Where the legend stands, and what that leaves to the drawing.
struct Layout {
    /// Width and height left to the part and its fingers, mm of paper.
    room: (f64, f64),
    scale: f64,
    legend: Vec<String>,
    /// The legend stands on the right of the drawing, not below.
    beside: bool,
}

impl Layout {
    /// The layout that lets the part be drawn largest in a room, mm of paper. The whole drawing is so wide, and
    /// has dimensions of such a height below.
    fn best(subject: &Subject<'_>, room: (f64, f64), whole: (f64, f64), size: Vector2<f64>) -> Self {
        let of = |beside: bool| {
            let width = if beside { BESIDE } else { whole.0 - BAR_WIDTH };
            let mut own = Self { room, scale: 0.0, legend: legend(subject, width), beside };
            own.room.0 = (own.room.0 - if beside { BESIDE } else { 0.0 }).max(10.0);
            own.room.1 = (own.room.1 - own.below()).max(10.0);
            let (wide, tall) = (own.room.0 / size.x, own.room.1 / size.y);
            own.scale = scale_below(wide.min(tall));
            own
        };
        let (below, beside) = (of(false), of(true));
        if beside.scale > below.scale && beside.high() <= room.1 + whole.1 { beside } else { below }
    }

    /// Height of legend and scale bar where they stand beside the drawing, mm of paper.
    fn high(&self) -> f64 {
        LINE * self.legend.len() as f64 + BAR
    }

    /// Height they take below it.
    fn below(&self) -> f64 {
        if self.beside { 0.0 } else { BAR.max(LINE * self.legend.len() as f64 + 1.5) }
    }
}

impl Drawing {
    /// Draws into at most so much paper, mm. `warning` stands over the drawing in large letters.
    pub(super) fn of(subject: &Subject<'_>, most: (f64, f64), warning: Option<&str>) -> Self {
        let part = subject.part;
        let decimals = place_decimals(part);
        let outline = part.outline().bounds();
        let (low, high) = reach_of(subject, outline);
        let [x, y] = [Axis::X, Axis::Y].map(|axis| dimensions::ordinates(axis, subject.datum, outline, subject.grasp));
        let (below, least_wide) = dimensions::room(&x, decimals);
        let (left, least_high) = dimensions::room(&y, decimals);
        let over = BORDER + if warning.is_some() { 12.0 } else { 0.0 };
        let size = high - low;
        let layout = Layout::best(subject, (most.0 - left - BORDER, most.1 - over - below), (most.0, below), size);
        let Layout { room: (wide, tall), scale, legend, beside } = &layout;
        let (wide, tall, scale) = (*wide, *tall, *scale);
        let content = (size * scale).sup(&Vector2::new(least_wide.min(wide), least_high.min(tall)));
        // In the middle of what its width leaves.
        let from = left + (wide - content.x).max(0.0) / 2.0 + (content.x - size.x * scale) / 2.0;
        let paper = Paper::new(scale, Point2::new(low.x, high.y), Vector2::new(from, over));
        let mut body = String::new();
        let corners = (paper.at(Point2::new(low.x, high.y)), paper.at(Point2::new(high.x, low.y)));
        let border = (corners.0, Point2::new(corners.1.x, over + content.y.max(size.y * scale)));
        // Writing to a String cannot fail.
        let _ = (|| -> Written {
            if let Some(warning) = warning {
                put(&mut body, "warning", Point2::new(2.0, 8.0), "", &escaped(&cut(warning, 48)))?;
            }
            outline_path(&mut body, part, &paper)?;
            dimensions::draw(&mut body, Axis::X, &x, &paper, border, decimals)?;
            dimensions::draw(&mut body, Axis::Y, &y, &paper, border, decimals)?;
            let mut marks = Marks { svg: &mut body, paper: &paper, subject, taken: Taken::default() };
            marks.all()?;
            // Beside the drawing the bar stands under the words, below it on their right.
            let (at, bar) = if *beside {
                let at = Point2::new(most.0 - BESIDE, over);
                (at, at + Vector2::new(0.0, LINE * legend.len() as f64 + 5.0))
            } else {
                let foot = border.1.y + below;
                (Point2::new(1.0, foot), Point2::new(most.0 - BAR_WIDTH, foot + 4.5))
            };
            scale_bar(&mut body, &paper, bar)?;
            for (i, line) in legend.iter().enumerate() {
                put(&mut body, "small", at + Vector2::new(0.0, LINE * (i as f64 + 0.8)), "", &escaped(line))?;
            }
            Ok(())
        })();
        let height = (border.1.y + below + layout.below()).max(if layout.beside { over + layout.high() } else { 0.0 });
        Self { body, width: most.0, height }
    }

    /// As an element of a page.
    pub(super) fn inline(&self, title: &str) -> String {
        self.element(title, "")
    }

    /// As a file of its own.
    pub(super) fn file(&self, title: &str) -> String {
        let style = format!("<style>\n{LOOK}</style>\n");
        format!("<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n{}", self.element(title, &style))
    }

    fn element(&self, title: &str, style: &str) -> String {
        let (width, height) = (self.width, self.height);
        format!(
            "<svg xmlns=\"http://www.w3.org/2000/svg\" class=\"drawing\" role=\"img\" width=\"{width:.2}mm\" \
             height=\"{height:.2}mm\" viewBox=\"0 0 {width:.2} {height:.2}\">\n<title>{}</title>\n{style}{}</svg>\n",
            escaped(title),
            self.body
        )
    }
}

/// Decimals of a position on the sheet: hundredths of a millimetre, finer on small parts.
pub(super) fn place_decimals(part: &Part) -> usize {
    reading::decimals(part.reach_mm()) + 1
}

/// Lower left and upper right corner of all that is drawn, part and fingers.
fn reach_of(subject: &Subject<'_>, outline: (Point2<f64>, Point2<f64>)) -> (Point2<f64>, Point2<f64>) {
    let (mut low, mut high) = outline;
    let mut take = |p: Point2<f64>| (low, high) = (low.inf(&p), high.sup(&p));
    take(subject.datum);
    take(subject.part.com());
    for contact in subject.grasp.iter().flat_map(|grasp| &grasp.contacts) {
        match subject.hand.tip {
            Tip::Pin => {
                let r = subject.hand.pin_radius_mm;
                let centre = contact.point - contact.normal * r;
                take(centre - Vector2::new(r, r));
                take(centre + Vector2::new(r, r));
            }
            Tip::Pad => pad_corners(subject.hand, contact.point, contact.normal).into_iter().for_each(&mut take),
        }
    }
    (low, high)
}

/// Corners of a pad that touches at a point, in turn.
pub(super) fn pad_corners(hand: &Hand, at: Point2<f64>, normal: Vector2<f64>) -> [Point2<f64>; 4] {
    let along = Vector2::new(normal.y, -normal.x) * (hand.pad_width_mm / 2.0);
    let out = -normal * hand.pad_depth_mm;
    [at - along, at + along, at + along + out, at - along + out]
}

/// Rings as one path whose arcs are arcs.
fn outline_path(svg: &mut String, part: &Part, paper: &Paper) -> Written {
    write!(svg, "<path class=\"material\" d=\"")?;
    for ring in 0..part.outline().ring_sizes().len() {
        for (i, edge) in part.outline().ring(ring).iter().enumerate() {
            if i == 0 {
                let start = paper.at(edge.start());
                write!(svg, "M{:.3} {:.3}", start.x, start.y)?;
            }
            step(svg, edge, paper, edge.end(), edge.length_mm())?;
        }
        svg.push('Z');
    }
    writeln!(svg, "\"/>")
}

/// The step of a path along a piece of an edge that ends at a point.
pub(super) fn step(svg: &mut String, edge: &Edge, paper: &Paper, end: Point2<f64>, length_mm: f64) -> Written {
    let to = paper.at(end);
    match edge.arc() {
        // An arc over the angle a rises R (1 - cos(a / 2)), about s^2 / (8 R), above its chord.
        Some(arc) if paper.length(length_mm * length_mm / (8.0 * arc.radius)) > FLAT => {
            let large = u8::from(length_mm > std::f64::consts::PI * arc.radius);
            // Counter-clockwise stays so on paper, where SVG counts the other sense as positive.
            let sense = u8::from(arc.sweep < 0.0);
            let r = paper.length(arc.radius);
            write!(svg, "A{r:.4} {r:.4} 0 {large} {sense} {:.3} {:.3}", to.x, to.y)
        }
        _ => write!(svg, "L{:.3} {:.3}", to.x, to.y),
    }
}

fn scale_bar(svg: &mut String, paper: &Paper, at: Point2<f64>) -> Written {
    let mm = round_length(45.0 / paper.length(1.0));
    let half = paper.length(mm) / 2.0;
    let (x, y) = (at.x, at.y);
    writeln!(
        svg,
        "<rect class=\"black\" x=\"{x:.3}\" y=\"{:.3}\" width=\"{half:.3}\" height=\"1\"/>\
         <rect class=\"mark\" x=\"{:.3}\" y=\"{:.3}\" width=\"{half:.3}\" height=\"1\"/>",
        y - 1.0,
        x + half,
        y - 1.0
    )?;
    put(svg, "small", Point2::new(x, y - 2.0), "", "0")?;
    put(svg, "scale-bar small", Point2::new(x + 2.0 * half, y - 2.0), "middle", &format!("{mm} mm"))?;
    let scale = scale_word(paper.length(1.0));
    put(svg, "small", Point2::new(x, y + 3.4), "", &format!("lengths in mm; scale {scale} when printed at 100 %"))
}

/// Different reasons for keep-outs, in file order.
pub(super) fn reasons(part: &Part) -> Vec<&str> {
    let mut reasons: Vec<&str> = Vec::new();
    for keep_out in part.keep_outs() {
        if !reasons.contains(&keep_out.reason.as_str()) {
            reasons.push(&keep_out.reason);
        }
    }
    reasons
}

/// What the marks mean.
fn legend(subject: &Subject<'_>, width: f64) -> Vec<String> {
    let part = subject.part;
    let decimals = place_decimals(part);
    let datum = part.file_point(subject.datum);
    let mut words = vec![format!(
        "D: datum of the dimensions, {}; x {:.decimals$}, y {:.decimals$} in the part file",
        subject.datum_words,
        datum.x + 0.0,
        datum.y + 0.0
    )];
    if subject.grasp.is_some() {
        let jaws = if subject.grasp.is_some_and(|grasp| matches!(grasp.jaws, Some(Ok(_)))) {
            "; J: centre of the jaws"
        } else {
            ""
        };
        words.push(format!(
            "1, 2: fingers at true size; arrow: normal into the part; wedge: friction cone; \
             quartered circle: centre of mass{jaws}"
        ));
    }
    let reasons = reasons(part);
    for (number, reason) in reasons.iter().enumerate().take(MOST_REASONS) {
        let reason = if reason.trim().is_empty() { "no reason given" } else { reason };
        words.push(format!("K{}: no finger: {}", number + 1, cut(reason, 32)));
    }
    if reasons.len() > MOST_REASONS {
        words.push(format!("K: no finger; {} more reasons in the part file", reasons.len() - MOST_REASONS));
    }
    let most = ((width - 3.0) * PER_MM) as usize;
    words.iter().flat_map(|words| lines(words, most)).collect()
}
