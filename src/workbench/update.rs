//! What each input does to the state. Pure: what must be done outside comes back as effects.

use super::action::{self, Action, Key};
use super::entry;
use super::look::Marker;
use super::state::{Entry, EntryKind, Job, Layer, Mark, Panel, Question, Reading, State};
use crate::file::Keep;
use crate::hand::FingerCount;
use crate::mechanics::Verdict;
use crate::search::job::{News, Request, What};
use crate::search::{Listing, Scene, Setup};
use std::sync::Arc;

/// Something that reaches the workbench.
#[derive(Debug, Clone)]
pub enum Input {
    /// The first input: start working.
    Start,
    /// A key.
    Key(Key),
    /// Text pasted in one piece.
    Paste(String),
    /// The screen is that many columns and rows.
    Resize(u16, u16),
    /// The ranking asked for got this number.
    Asked(u64),
    /// News from the ranking job.
    News(News),
    /// These marks are in the file now.
    Saved(Vec<u64>),
    /// Nothing was saved.
    SaveFailed {
        /// Why, and the mend, line by line.
        lines: Vec<String>,
        /// The file is not the one that was read.
        changed: bool,
    },
    /// Something else did not work.
    Told {
        /// What.
        title: &'static str,
        /// Why, and the mend, line by line.
        lines: Vec<String>,
    },
    /// A broken run left so many marks behind.
    RecoveryFound(usize),
    /// The marks a broken run left behind.
    Recovered(Vec<Keep>),
}

/// Something to be done outside.
#[derive(Debug, Clone)]
pub enum Effect {
    /// Rank; an older request may be dropped for it.
    Rank(Request),
    /// Save marks.
    Save {
        /// Their numbers.
        ids: Vec<u64>,
        /// What goes to the file.
        keeps: Vec<Keep>,
        /// Take the file as it stands now for known.
        reread: bool,
    },
    /// Read the recovery file.
    LoadRecovery,
    /// Delete the recovery file.
    DropRecovery,
    /// Paint everything again.
    Repaint,
    /// Stop and give the shell back.
    Suspend,
    /// Leave; `recover` when unsaved marks go to the recovery file.
    Quit {
        /// Write the recovery file.
        recover: bool,
    },
}

/// Carries an input into the state.
pub fn update(state: &mut State, input: Input) -> Vec<Effect> {
    match input {
        Input::Start => rank(state),
        Input::Key(key) => press(state, key),
        Input::Paste(text) => {
            if let Some(Layer::Entry(entry)) = state.layers.last_mut() {
                text.chars().for_each(|c| entry::insert(entry, c));
            }
            Vec::new()
        }
        Input::Resize(columns, rows) => {
            state.size = (columns, rows);
            Vec::new()
        }
        Input::Asked(generation) => {
            state.asked = Some(generation);
            Vec::new()
        }
        Input::News(news) => {
            hear(state, news);
            Vec::new()
        }
        Input::Saved(ids) => saved(state, &ids),
        Input::SaveFailed { lines, changed } => {
            state.quit_when_saved = false;
            let fault = Layer::Fault { top: 0, title: "not saved", lines };
            state.layers.push(if changed { Layer::Ask(Question::Reload) } else { fault });
            Vec::new()
        }
        Input::Told { title, lines } => {
            state.layers.push(Layer::Fault { top: 0, title, lines });
            Vec::new()
        }
        Input::RecoveryFound(count) => {
            state.layers.push(Layer::Ask(Question::Recover { count }));
            Vec::new()
        }
        Input::Recovered(keeps) => {
            let count = keeps.len();
            for keep in keeps {
                add_mark(state, keep);
            }
            let marks = if count == 1 { "mark" } else { "marks" };
            state.message = Some(format!("{count} {marks} taken back, not saved yet: s saves, M lists them"));
            Vec::new()
        }
    }
}

fn hear(state: &mut State, news: News) {
    if Some(news.generation) != state.asked {
        return;
    }
    match news.what {
        What::Progress { done, total } => state.job = Job::Running(Some((done, total))),
        What::Snapshot(ranking) => state.show(ranking, news.generation),
        What::Done(ranking) => {
            state.job = Job::Idle;
            state.show(ranking, news.generation);
        }
        What::Failed(why) => state.job = Job::Failed(why),
    }
}

fn saved(state: &mut State, ids: &[u64]) -> Vec<Effect> {
    for mark in state.marks.iter_mut().filter(|mark| ids.contains(&mark.id)) {
        mark.saved = true;
    }
    let s = if ids.len() == 1 { "" } else { "s" };
    state.message = Some(format!("{} grasp{s} saved to {}", ids.len(), state.grasp_path.display()));
    if state.quit_when_saved && state.unsaved() == 0 { vec![Effect::Quit { recover: false }] } else { Vec::new() }
}

fn press(state: &mut State, key: Key) -> Vec<Effect> {
    let Some(action) = action::action_of(state, key) else {
        if let (Key::Char(c), Some(Layer::Entry(entry))) = (key, state.layers.last_mut()) {
            entry::insert(entry, c);
        }
        return Vec::new();
    };
    state.message = None;
    act(state, action)
}

/// Does an action where it is allowed.
fn act(state: &mut State, action: Action) -> Vec<Effect> {
    match action {
        Action::Interrupt => return interrupt(state),
        Action::Repaint => return vec![Effect::Repaint],
        Action::Suspend => return vec![Effect::Suspend],
        _ => {}
    }
    match state.layers.last() {
        None => bench(state, action),
        Some(Layer::Help { .. } | Layer::Reading { .. } | Layer::Fault { .. }) => {
            page(state, action);
            Vec::new()
        }
        Some(Layer::Marks { .. }) => marks(state, action),
        Some(Layer::Entry(_)) => typing(state, action),
        Some(&Layer::Ask(question)) => answer(state, question, action),
    }
}

fn bench(state: &mut State, action: Action) -> Vec<Effect> {
    let last = state.rows().saturating_sub(1);
    let page = usize::from(state.size.1 / 2).max(1);
    match action {
        Action::Down => state.select((state.selected + 1).min(last)),
        Action::Up => state.select(state.selected.saturating_sub(1)),
        Action::PageDown => state.select((state.selected + page).min(last)),
        Action::PageUp => state.select(state.selected.saturating_sub(page)),
        Action::First => state.select(0),
        Action::Last => state.select(last),
        Action::MuUp => return step_mu(state, 100.0, 1.0),
        Action::MuDown => return step_mu(state, 100.0, -1.0),
        Action::MuUpCoarse => return step_mu(state, 20.0, 1.0),
        Action::MuDownCoarse => return step_mu(state, 20.0, -1.0),
        Action::FingersMore => return step_fingers(state, 1),
        Action::FingersFewer => return step_fingers(state, -1),
        Action::SpacingFiner => return step_spacing(state, 0.8),
        Action::SpacingWider => return step_spacing(state, 1.25),
        Action::SortNext => {
            let all = crate::search::Key::ALL;
            let at = all.iter().position(|key| *key == state.order.key).unwrap_or(0);
            state.order.key = all[(at + 1) % all.len()];
            return rank(state);
        }
        Action::Listing => {
            state.order.listing = match state.order.listing {
                Listing::Families => Listing::Members,
                Listing::Members => Listing::Families,
            };
            return rank(state);
        }
        Action::Cones => state.cones = !state.cones,
        Action::Marker => next_marker(state),
        Action::NextPanel => {
            state.panel = match state.panel {
                Panel::Table => Panel::Outline,
                Panel::Outline => Panel::Reading,
                Panel::Reading => Panel::Table,
            };
        }
        Action::OpenReading => state.layers.push(Layer::Reading { top: 0 }),
        Action::Help => state.layers.push(Layer::Help { top: 0 }),
        Action::OpenMarks => state.layers.push(Layer::Marks { at: 0 }),
        Action::Mark => toggle_mark(state),
        Action::Name => open_entry(state, EntryKind::Name),
        Action::Note => open_entry(state, EntryKind::Note),
        Action::MuEnter => open_entry(state, EntryKind::Mu),
        Action::Save => return save(state, false),
        Action::Quit => return quit(state),
        _ => {}
    }
    Vec::new()
}

/// Asks for a ranking by the knobs as they stand.
fn rank(state: &mut State) -> Vec<Effect> {
    state.job = Job::Running(None);
    // Until the new number is known no ranking on the screen counts as that of the new knobs.
    state.asked = None;
    vec![Effect::Rank(state.order.request())]
}

/// Takes a changed setup, reads the selected grasp under it at once, and ranks again.
///
/// # Errors
/// What is wrong with the setup; the knobs stay as they were.
pub(super) fn turn(state: &mut State, change: impl FnOnce(&mut Setup)) -> Result<Vec<Effect>, String> {
    let mut setup = state.setup().clone();
    change(&mut setup);
    if setup == *state.setup() {
        return Ok(Vec::new());
    }
    if let Some(fault) = setup.faults().first() {
        return Err(fault.to_string());
    }
    let scene = Scene::new(Arc::clone(state.order.scene.part()), setup)?;
    state.order.scene = Arc::new(scene);
    state.read();
    Ok(rank(state))
}

fn turn_or_say(state: &mut State, change: impl FnOnce(&mut Setup)) -> Vec<Effect> {
    turn(state, change).unwrap_or_else(|fault| {
        state.message = Some(fault);
        Vec::new()
    })
}

/// Moves mu to the next multiple of `1 / per_unit` above or below.
fn step_mu(state: &mut State, per_unit: f64, way: f64) -> Vec<Effect> {
    let mu = state.setup().friction.mu * per_unit;
    // A hair is taken off so that 0.29999999999999999 counts as 0.3.
    let next = if way > 0.0 { (mu + 1e-6).floor() + 1.0 } else { (mu - 1e-6).ceil() - 1.0 };
    let next = (next / per_unit).clamp(0.0, crate::part::MU_LARGEST);
    turn_or_say(state, |setup| setup.friction.mu = next)
}

fn step_fingers(state: &mut State, way: isize) -> Vec<Effect> {
    let now = state.setup().hand.fingers.get();
    match now.checked_add_signed(way).and_then(FingerCount::new) {
        Some(count) => turn_or_say(state, |setup| setup.hand.fingers = count),
        None => {
            state.message = Some(format!("a grasp has {} to {} fingers", FingerCount::LEAST, FingerCount::MOST));
            Vec::new()
        }
    }
}

/// Sites are never set closer than this part of the perimeter, nor wider than the other.
const SPACING_LIMITS: (f64, f64) = (1.0 / 5000.0, 1.0 / 8.0);

fn step_spacing(state: &mut State, factor: f64) -> Vec<Effect> {
    let part = state.order.scene.part();
    let perimeter = part.outline().perimeter_mm();
    let now = state.setup().search.spacing_for(part);
    let next = now * factor;
    if next < perimeter * SPACING_LIMITS.0 || next > perimeter * SPACING_LIMITS.1 {
        state.message = Some(format!("spacing stays at {now:.3} mm: the next step says no more of this part"));
        return Vec::new();
    }
    turn_or_say(state, |setup| setup.search.spacing_mm = Some(next))
}

fn next_marker(state: &mut State) {
    state.look.marker = state.look.marker.next();
    let word = state.look.marker.word();
    state.message = Some(if state.look.marker == Marker::Ascii || state.look.utf8 {
        format!("drawn with {word}")
    } else {
        format!("drawn with {word}, but the locale is not UTF-8: if the outline is rubbish, press p again")
    });
}

fn page(state: &mut State, action: Action) {
    let step = usize::from(state.size.1).saturating_sub(4).max(1);
    if let Some(Layer::Help { top } | Layer::Reading { top } | Layer::Fault { top, .. }) = state.layers.last_mut() {
        match action {
            Action::Down => *top = top.saturating_add(1),
            Action::Up => *top = top.saturating_sub(1),
            Action::PageDown => *top = top.saturating_add(step),
            Action::PageUp => *top = top.saturating_sub(step),
            Action::First => *top = 0,
            Action::Last => *top = usize::MAX,
            Action::Close => {
                state.layers.pop();
                return;
            }
            _ => {}
        }
    }
    // A page is never scrolled past its end, so that the way back starts at once.
    let most = super::view::last_top(state);
    if let Some(Layer::Help { top } | Layer::Reading { top } | Layer::Fault { top, .. }) = state.layers.last_mut() {
        *top = (*top).min(most);
    }
}

fn marks(state: &mut State, action: Action) -> Vec<Effect> {
    let last = state.marks.len().saturating_sub(1);
    let Some(Layer::Marks { at }) = state.layers.last_mut() else { return Vec::new() };
    match action {
        Action::Down => *at = (*at + 1).min(last),
        Action::Up => *at = at.saturating_sub(1),
        Action::Close => {
            state.layers.pop();
        }
        Action::Save => return save(state, false),
        Action::Mark => {
            let at = (*at).min(last);
            if at < state.marks.len() {
                lift(state, at);
            }
            match state.layers.last_mut() {
                Some(Layer::Marks { .. }) if state.marks.is_empty() => {
                    state.layers.pop();
                }
                Some(Layer::Marks { at }) => *at = (*at).min(state.marks.len() - 1),
                _ => {}
            }
        }
        Action::Accept => {
            let spots = state.marks.get(*at).map(|mark| mark.keep.grasp.spots.clone());
            let rows = state.shown.as_ref().map_or(&[][..], |shown| &shown.ranking.grasps);
            match spots.and_then(|spots| rows.iter().position(|row| row.grasp.spots == spots)) {
                Some(row) => {
                    state.layers.pop();
                    state.select(row);
                }
                None => state.message = Some("not in the list under the present knobs".to_owned()),
            }
        }
        _ => {}
    }
    Vec::new()
}

fn typing(state: &mut State, action: Action) -> Vec<Effect> {
    let Some(Layer::Entry(entry)) = state.layers.last_mut() else { return Vec::new() };
    match action {
        Action::Close => {
            // An arrow key torn apart looks like Esc: what was typed comes back when the dialog opens again.
            if let Some(Layer::Entry(entry)) = state.layers.pop() {
                state.draft = Some(entry);
            }
        }
        Action::Accept => return accept(state),
        edit => entry::edit(entry, edit),
    }
    Vec::new()
}

fn accept(state: &mut State) -> Vec<Effect> {
    let Some(Layer::Entry(entry)) = state.layers.last().cloned() else { return Vec::new() };
    match entry.kind {
        EntryKind::Mu => {
            let taken = match entry.text.trim().replace(',', ".").parse::<f64>() {
                Ok(mu) => turn(state, |setup| setup.friction.mu = mu),
                Err(_) => Err("give a number, for example 0.15".to_owned()),
            };
            match taken {
                Ok(effects) => {
                    state.layers.pop();
                    effects
                }
                Err(fault) => {
                    if let Some(Layer::Entry(entry)) = state.layers.last_mut() {
                        entry.fault = Some(fault);
                    }
                    Vec::new()
                }
            }
        }
        EntryKind::Name | EntryKind::Note => {
            state.layers.pop();
            if state.mark_on(&entry.spots).is_none()
                && let Some(reading) = Reading::of(&state.order.scene, &entry.spots)
            {
                mark(state, reading);
            }
            let text = entry.text.trim().to_owned();
            if let Some(mark) = state.marks.iter_mut().find(|mark| mark.keep.grasp.spots == entry.spots) {
                let field = if entry.kind == EntryKind::Name { &mut mark.keep.name } else { &mut mark.keep.note };
                if *field != text && !(entry.kind == EntryKind::Name && text.is_empty()) {
                    *field = text;
                    mark.saved = false;
                }
            }
            Vec::new()
        }
    }
}

fn open_entry(state: &mut State, kind: EntryKind) {
    let spots = match kind {
        EntryKind::Mu => Vec::new(),
        EntryKind::Name | EntryKind::Note => match state.row() {
            Some(row) => row.grasp.spots.clone(),
            None => return,
        },
    };
    let text = match kind {
        EntryKind::Mu => String::new(),
        EntryKind::Name => state.mark_on(&spots).map(|mark| mark.keep.name.clone()).unwrap_or_default(),
        EntryKind::Note => state.mark_on(&spots).map(|mark| mark.keep.note.clone()).unwrap_or_default(),
    };
    let fresh = Entry { kind, at: text.chars().count(), text, fault: None, spots };
    let entry = match state.draft.take() {
        Some(draft) if draft.kind == kind && draft.spots == fresh.spots => Entry { fault: None, ..draft },
        _ => fresh,
    };
    state.layers.push(Layer::Entry(entry));
}

fn toggle_mark(state: &mut State) {
    let Some(spots) = state.row().map(|row| row.grasp.spots.clone()) else { return };
    if let Some(at) = state.marks.iter().position(|mark| mark.keep.grasp.spots == spots) {
        lift(state, at);
    } else if let Some(back) = state.lifted.take_if(|lifted| lifted.keep.grasp.spots == spots) {
        state.message = Some(format!("marked again as {}", back.keep.name));
        state.marks.push(back);
    } else if let Some(reading) = state.reading.clone() {
        let verdict = reading.assessment.verdict;
        mark(state, reading);
        state.message = Some(match verdict {
            Verdict::Closed => "marked; n names it, w notes why, s saves".to_owned(),
            Verdict::Open | Verdict::Marginal => {
                format!("marked, although it is {} under the present knobs", verdict.word())
            }
        });
    }
}

/// Takes a mark away, and keeps it for a change of mind.
fn lift(state: &mut State, at: usize) {
    let gone = state.marks.remove(at);
    let file = if gone.saved { "; it stays in the file" } else { "" };
    state.message = Some(format!("unmarked{file}; m on the same grasp brings it back"));
    state.lifted = Some(gone);
}

/// Marks a grasp as it reads under the present knobs.
fn mark(state: &mut State, reading: Reading) {
    let at = |spot: &crate::search::Spot| format!("{}:{}", spot.edge.ring, spot.edge.edge);
    let name = reading.grasp.spots.iter().map(at).collect::<Vec<_>>().join(" ");
    let setup = state.setup().clone();
    let keep = Keep { name, note: String::new(), grasp: reading.grasp, assessment: reading.assessment, setup };
    add_mark(state, keep);
}

fn add_mark(state: &mut State, keep: Keep) {
    let id = state.next_mark;
    state.next_mark += 1;
    state.marks.push(Mark { id, keep, saved: false });
}

fn save(state: &mut State, reread: bool) -> Vec<Effect> {
    let unsaved = || state.marks.iter().filter(|mark| !mark.saved);
    let ids: Vec<u64> = unsaved().map(|mark| mark.id).collect();
    let keeps: Vec<Keep> = unsaved().map(|mark| mark.keep.clone()).collect();
    if ids.is_empty() { Vec::new() } else { vec![Effect::Save { ids, keeps, reread }] }
}

fn quit(state: &mut State) -> Vec<Effect> {
    if state.unsaved() == 0 {
        return vec![Effect::Quit { recover: false }];
    }
    state.layers.push(Layer::Ask(Question::Quit));
    Vec::new()
}

/// Ctrl-C leaves when nothing is unsaved, asks when something is, and leaves at once when it already asked; the marks
/// are then in the recovery file.
fn interrupt(state: &mut State) -> Vec<Effect> {
    if state.layers.contains(&Layer::Ask(Question::Quit)) {
        return vec![Effect::Quit { recover: true }];
    }
    quit(state)
}

fn answer(state: &mut State, question: Question, action: Action) -> Vec<Effect> {
    if !matches!(action, Action::Yes | Action::No | Action::Close) {
        return Vec::new();
    }
    state.layers.pop();
    match (question, action) {
        (Question::Quit, Action::Yes) => {
            state.quit_when_saved = true;
            save(state, false)
        }
        (Question::Quit, Action::No) => vec![Effect::Quit { recover: false }],
        (Question::Reload, Action::Yes) => save(state, true),
        (Question::Reload, _) => {
            state.message = Some("not saved; the marks are still here".to_owned());
            Vec::new()
        }
        (Question::Recover { .. }, Action::Yes) => vec![Effect::LoadRecovery],
        (Question::Recover { .. }, Action::No) => vec![Effect::DropRecovery],
        _ => Vec::new(),
    }
}
