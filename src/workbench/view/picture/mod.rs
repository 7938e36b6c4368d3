//! The pictures of the selected grasp in the outline pane: each a drawing with a few lines of text under it.

mod envelope;
mod forces;
mod friction;
mod labels;
mod room;
mod strokes;
mod wrenches;

use super::super::look::Look;
use super::super::picture::Picture;
use super::super::state::State;
use super::sheet::Sheet;
use super::{outline, wrapped};
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

/// What the help page says of the pictures and their numbers.
pub(super) const HELP: [(&str, &str); 21] = [
    (
        "1 fingers",
        "numbers and strokes along the inward normals, : cones; pins and pads at their true size where it shows",
    ),
    (
        "2 forces",
        "arrows: finger forces in the part plane at the least squeeze that holds the case; often one set of many",
    ),
    ("in", "N into the part, straight onto the edge"),
    ("along", "N along the edge as it runs with the material on its left; up: N toward the viewer"),
    (
        "3 label +",
        "whatever the fingers do turns the part counter-clockwise about these points, or not at all (Mason 1991)",
    ),
    (
        "3 label -",
        "the same clockwise; a closed grasp leaves no such point; 0: every finger force goes through the point",
    ),
    ("4 curve", "the largest acceleration of the part held in each direction of its plane at the force limit"),
    ("at", "force limit and weight, with its safety factor S, that the curve is for: those of the first load case"),
    (
        "4 numbers",
        "each load case's weight and acceleration in the plane, as an acceleration beside the first case's weight",
    ),
    ("|--|", "scale of the curve, or of the wrench set"),
    ("5 room", "numbers along the edge: where that finger may stand, the others staying, while the grasp is closed"),
    (
        "to",
        "ends of that in mm from the edge's first vertex, and what is lost there: closure, or another finger too near",
    ),
    ("fits", "ends of the stretch of the edge on which the finger fits"),
    (
        "6 wrenches",
        "lines: hull of the cone-edge wrenches of 1 N of normal force, numbered by finger, + in the middle no load",
    ),
    ("radius", "of the largest ball about + in the hull, drawn as *: it is the quality"),
    ("arrow", "the weakest direction, as long as the ball is wide that way; torque counts as tau over the reach"),
    (
        "7 *",
        "quality over the friction coefficient, all edges' friction in proportion; = closed, . open, ~ marginal below it",
    ),
    (
        "7 s",
        "squeeze per finger that holds every load, over the same; higher than the picture where it leaves at the top",
    ),
    ("7 M X", "mu as set; the friction needed"),
    ("7 L N H S", "the setup's low, nominal, high and sliding friction"),
    ("x3.4", "how many times nearer than the whole part the picture is"),
];

/// Where a drawing is made: its size and how things look.
#[derive(Clone, Copy)]
struct Paper {
    size: (u16, u16),
    look: Look,
}

/// A picture ready to be drawn.
struct Shown<'a> {
    /// Groups of short texts, the most important first. A group begins a line of its own.
    told: Vec<Vec<String>>,
    /// Makes the drawing.
    paint: Box<dyn FnOnce(Paper) -> Sheet + 'a>,
}

/// Panes of fewer rows are all drawing; the words go elsewhere where there is another place for them.
const WORDS_FROM: u16 = 16;

/// True when a pane is so low that its words had better stand elsewhere.
pub(super) fn is_low(area: Rect) -> bool {
    area.height < WORDS_FROM
}

/// The words of the picture for a width; none of the fingers, whose line stays with them.
pub(super) fn words(state: &State, width: u16) -> Vec<String> {
    picture(state).map_or_else(Vec::new, |shown| told_lines(state, &shown.told, usize::from(width)))
}

/// The picture chosen; nothing for the fingers, or without a grasp.
fn picture(state: &State) -> Option<Shown<'_>> {
    let reading = state.reading.as_ref()?;
    Some(match state.view.picture {
        Picture::Fingers => return None,
        Picture::Forces => forces::picture(state, reading),
        Picture::Labels => labels::picture(state, reading),
        Picture::Envelope => envelope::picture(state, reading),
        Picture::Room => room::picture(state, reading),
        Picture::Wrenches => wrenches::picture(state, reading),
        Picture::Friction => friction::picture(state, reading),
    })
}

/// Draws the pane, without words when they stand elsewhere.
pub(super) fn render(state: &State, area: Rect, words_elsewhere: bool, buf: &mut Buffer) {
    let area = area.intersection(buf.area);
    if area.is_empty() {
        return;
    }
    let Some(shown) = picture(state) else { return outline::render(state, area, buf) };
    if words_elsewhere {
        (shown.paint)(Paper { size: (area.width, area.height), look: state.look }).render(area, buf);
        return;
    }
    let mut lines = told_lines(state, &shown.told, usize::from(area.width));
    // Two fifths are text: it says what the drawing means.
    let most = if area.height < 3 { 0 } else { (area.height * 2 / 5).max(1) };
    lines.truncate(usize::from(most));
    let drawn = Rect { height: area.height - lines.len() as u16, ..area };
    (shown.paint)(Paper { size: (drawn.width, drawn.height), look: state.look }).render(drawn, buf);
    for (line, y) in lines.iter().zip(drawn.bottom()..area.bottom()) {
        super::put(buf, Rect { y, height: 1, ..area }, line, state.look.plain());
    }
}

/// The texts as lines of a width: as many to a line as fit, none cut unless it is wider than the pane.
fn told_lines(state: &State, told: &[Vec<String>], width: usize) -> Vec<String> {
    let mut lines = Vec::new();
    let name = format!("{}:", state.view.picture.word());
    for (number, group) in told.iter().enumerate() {
        let mut line = if number == 0 { name.clone() } else { String::new() };
        let nearness = outline::nearness(state).filter(|_| number == 0);
        for text in nearness.iter().chain(group) {
            let gap = match (line.is_empty(), line.ends_with(':')) {
                (true, _) => 0,
                (false, true) => 1,
                (false, false) => 2,
            };
            let (long, own) = (line.chars().count(), text.chars().count());
            if long > 0 && long + gap + own <= width {
                line.push_str(&" ".repeat(gap));
                line.push_str(text);
                continue;
            }
            if number == 0 && line == name && own <= width {
                // The name alone is not worth a line.
                line.clone_from(text);
                continue;
            }
            // A long text goes on in the line it began in.
            let whole = if own > width && long > 0 { format!("{line}{}{text}", " ".repeat(gap)) } else { text.clone() };
            if own <= width && long > 0 {
                lines.push(std::mem::take(&mut line));
            }
            let mut broken = wrapped(&whole, width);
            line = broken.pop().unwrap_or_default();
            lines.extend(broken);
        }
        if !line.is_empty() {
            lines.push(line);
        }
    }
    lines
}
