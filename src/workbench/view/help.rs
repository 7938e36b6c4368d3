//! The help page: keys from the table of actions, a line for each number, the caution.

use super::super::action;
use super::super::state::State;
use super::{picture, wrapped};
use crate::file::CAUTION;
use ratatui::text::{Line, Span};

/// What each number means.
const NUMBERS: [(&str, &str); 14] = [
    ("mu", "friction coefficient of the finger tips on the part, as entered; every score uses it"),
    (
        "closed",
        "every push and turn in the part plane can be balanced by pressing hard enough; open: one cannot (Reuleaux 1876; Nguyen 1988)",
    ),
    (
        "quality",
        "the largest load held in every direction by 1 N of total squeeze; a torque counts as tau over the reach (Ferrari & Canny 1992)",
    ),
    ("per finger", "the same with 1 N allowed to each finger; /finger in the list (Ferrari & Canny 1992)"),
    (
        "margin",
        "mu over the friction needed to close and to hold the loads; below 1 one of them fails, \"any\": any friction will do (Coulomb's law)",
    ),
    (
        "place",
        "mm every finger may be off along its edge, all at once, before closure or the stretch is lost (statics; README)",
    ),
    (
        "weakest",
        "the push and turn against which this grasp gives least (normal of the nearest facet: Ferrari & Canny 1992)",
    ),
    (
        "squeeze",
        "N of normal force per finger that hold every load case, with the forces shared as the drive allows; x fingers in all",
    ),
    (
        "load",
        "load margin: the force limit over the squeeze; the largest multiple of every load that is held; below 1: not held",
    ),
    (
        "held",
        "some finger forces within the limit hold the load; fingers locked in place may not reach them by themselves (weak stability: Pang & Trinkle 2000)",
    ),
    ("S", "safety factor: the whole load of the case is taken so many times"),
    (
        "^",
        "no row is better on one of quality, margin, place and, with loads, squeeze and load, and as good on the others",
    ),
    (
        "within, GAP",
        "no placement anywhere on the outline beats its row by more than this part of the best score; best within: this holds of \
         the first row alone; GAP: not proved to 1 %",
    ),
    (
        "edges",
        "numbers of the outer ring's edges in the part file, a hole's as ring:edge; @ is mm from the edge's first vertex",
    ),
];

/// The lines of the page for a width.
pub(super) fn lines(state: &State, width: u16) -> Vec<Line<'static>> {
    let width = usize::from(width);
    let mut lines = Vec::new();
    for (heading, rows) in action::help_parts() {
        lines.push(Line::styled(heading, state.look.title()));
        for row in rows {
            two_columns(state, &action::keys_of(row), row.help, width, &mut lines);
        }
        lines.push(Line::raw(""));
    }
    lines.push(Line::styled("signs and numbers", state.look.title()));
    two_columns(state, "> *", "the selected row; a marked grasp", width, &mut lines);
    for (name, meaning) in NUMBERS {
        two_columns(state, name, meaning, width, &mut lines);
    }
    lines.push(Line::raw(""));
    lines.push(Line::styled("pictures", state.look.title()));
    for (name, meaning) in picture::HELP {
        two_columns(state, name, meaning, width, &mut lines);
    }
    lines.push(Line::raw(""));
    lines.push(Line::styled("caution", state.look.title()));
    lines.extend(wrapped(CAUTION, width).into_iter().map(Line::raw));
    lines
}

/// The number of the line that is this heading; the first where there is none.
pub(super) fn line_of(state: &State, width: u16, heading: &str) -> usize {
    let is_it = |line: &Line<'_>| line.spans.iter().map(|span| span.content.as_ref()).collect::<String>() == heading;
    lines(state, width).iter().position(is_it).unwrap_or(0)
}

fn two_columns(state: &State, left: &str, right: &str, width: usize, lines: &mut Vec<Line<'static>>) {
    const LEFT: usize = 12;
    for (i, part) in wrapped(right, width.saturating_sub(LEFT)).into_iter().enumerate() {
        let left = if i == 0 { format!("{left:<LEFT$}") } else { " ".repeat(LEFT) };
        lines.push(Line::from(vec![Span::styled(left, state.look.title()), Span::raw(part)]));
    }
}
