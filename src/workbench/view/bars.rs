//! Header, message line and footer.

use super::super::action;
use super::super::state::{Along, Job, State};
use super::super::tables;
use super::{number, put, shifted};
use crate::file::shown;
use crate::hand::{Closing, Drive, Hand, Tip};
use crate::search::Listing;
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;
use ratatui::text::Line;

/// Part and knobs on the left, the job on the right.
pub(super) fn header(state: &State, area: Rect, buf: &mut Buffer) {
    let setup = state.setup();
    let part = state.order.scene.part();
    let job = job(state);
    let job_width = job.chars().count() as u16;
    let left = Rect { width: area.width.saturating_sub(job_width + u16::from(job_width > 0)), ..area };
    let listing = match state.order.listing {
        Listing::Families => "families",
        Listing::Members => "every grasp",
    };
    // Knobs that do not fit leave from the right, none is cut.
    let limit = setup.hand.force_limit_n.map_or(String::new(), |limit| format!("{} N", number::given(limit)));
    let mut knobs = String::new();
    for knob in [
        format!("mu {}", number::mu(setup.friction.mu)),
        fingers(&setup.hand),
        limit,
        format!("by {}", state.order.key.word().replace('_', " ")),
        listing.to_owned(),
        match state.order.listing {
            Listing::Families => String::new(),
            Listing::Members => format!("sites {} mm", number::mm(setup.search.spacing_for(part))),
        },
    ] {
        let gap = if knobs.is_empty() || knob.is_empty() { "" } else { "  " };
        if knobs.len() + gap.len() + knob.len() > usize::from(left.width) {
            break;
        }
        knobs.push_str(gap);
        knobs.push_str(&knob);
    }
    let name = shown(part.name());
    // The knobs matter more than the name: a long name is cut so that they stay.
    let room = usize::from(left.width).saturating_sub(knobs.chars().count() + 2);
    let name = if room > 6 { cut(&name, room) } else { String::new() };
    let used = if name.is_empty() { 0 } else { columns(&name) as u16 + 2 };
    put(buf, left, &name, state.look.title());
    put(buf, shifted(left, used), &knobs, state.look.plain());
    put(buf, shifted(area, area.width.saturating_sub(job_width)), &job, state.look.title());
}

/// The hand in few words.
pub(super) fn fingers(hand: &Hand) -> String {
    let tip = match hand.tip {
        Tip::Pin => "pins",
        Tip::Pad => "pads",
    };
    let closing = if hand.closing == Closing::Parallel { ", parallel" } else { "" };
    let drive = if hand.drive == Drive::Equal { ", alike" } else { "" };
    format!("{} {tip}{closing}{drive}", hand.fingers.get())
}

/// Columns a text takes on the screen.
fn columns(text: &str) -> usize {
    Line::raw(text).width()
}

/// A text cut to a number of columns, with two dots where something is missing.
pub(super) fn cut(text: &str, most: usize) -> String {
    if columns(text) <= most {
        return text.to_owned();
    }
    let mut cut = text.to_owned();
    while columns(&cut) + 2 > most && cut.pop().is_some() {}
    cut.push_str("..");
    cut
}

fn job(state: &State) -> String {
    match &state.job {
        Job::Idle => String::new(),
        Job::Running(Some(Along { gap: Some(gap), .. })) => format!("proving, gap {}", number::percent(*gap)),
        Job::Running(Some(Along { done, total, .. })) if *total > 0 => {
            format!("ranking {} %", (*done).min(*total) as u128 * 100 / u128::from(*total))
        }
        Job::Running(_) => "ranking".to_owned(),
        Job::Failed(_) => "FAILED".to_owned(),
    }
}

/// What just happened, else how things stand with the marks.
pub(super) fn message(state: &State, area: Rect, buf: &mut Buffer) {
    let text = match (&state.message, &state.job) {
        (Some(message), _) => shown(message),
        (None, Job::Failed(why)) => format!("the ranking broke: {}; turn a knob to try again", shown(why)),
        (None, _) if on_disk(state).is_some() => on_disk(state).unwrap_or_default(),
        (None, _) if state.marks.is_empty() && state.removals() == 0 => String::new(),
        (None, _) => {
            let (unsaved, out) = (state.unsaved(), state.removals());
            let mut state_of =
                if unsaved == 0 && out == 0 { "all saved".to_owned() } else { format!("{unsaved} not saved") };
            if out > 0 {
                state_of.push_str(&format!(", {out} to be taken out of the file"));
            }
            format!("{}, {state_of}", number::count(state.marks.len() as u64, "mark", "marks"))
        }
    };
    let style = if state.message.is_some() { state.look.title() } else { state.look.plain() };
    put(buf, area, &text, style);
    if state.message.is_none() && state.layers.is_empty() && !matches!(state.job, Job::Failed(_)) {
        missing(state, shifted(area, columns(&text) as u16), buf);
    }
}

/// What changed on disk and was not read again.
fn on_disk(state: &State) -> Option<String> {
    let what = match (state.on_disk.part, state.on_disk.setup) {
        (true, true) => "the part and the setup file",
        (true, false) => "the part file",
        (false, true) => "the setup file",
        (false, false) => return None,
    };
    Some(format!("{what} changed on disk: {} reads again", action::key_of(action::Action::Reload)))
}

/// What the setup or the part leaves out, as far as it fits.
fn missing(state: &State, area: Rect, buf: &mut Buffer) {
    let mut at = area;
    for text in tables::missing(state) {
        let gap = if at.x > 0 { 2 } else { 0 };
        if text.len() + usize::from(gap) > usize::from(at.width) {
            return;
        }
        put(buf, shifted(at, gap), &text, state.look.dim());
        at = shifted(at, gap + text.len() as u16);
    }
}

/// As many keys as fit, most useful first; none is cut in half.
pub(super) fn footer(state: &State, area: Rect, buf: &mut Buffer) {
    let mut at = area;
    for row in action::footer(state) {
        let Some(key) = row.keys.first() else { continue };
        let key = key.to_string();
        let (key_width, label_width) = (key.chars().count() as u16, row.label.chars().count() as u16);
        if key_width + 1 + label_width > at.width {
            break;
        }
        put(buf, at, &key, state.look.title());
        put(buf, shifted(at, key_width + 1), row.label, state.look.plain());
        at = shifted(at, key_width + label_width + 3);
    }
}
