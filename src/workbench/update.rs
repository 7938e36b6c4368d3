//! What each input does to the state. Pure: what must be done outside comes back as effects.

use super::action::{self, Action, Key};
use super::by_hand;
use super::compare;
use super::entry;
use super::floors;
use super::kept::{self, Kept};
use super::knobs;
use super::loads;
use super::marks;
use super::picture;
use super::reload::{self, Fresh};
use super::start::{self, Choice};
use super::state::{Along, Entry, EntryKind, Filter, Job, Layer, Mark, OnDisk, Panel, Question, Reading, State};
use super::tables;
use crate::file::{Change, Keep};
use crate::part::EdgeId;
use crate::search::job::{News, Request, What};

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
    /// Names of grasps a broken run had taken away, but not yet out of the file.
    RemovalsRecovered(Vec<String>),
    /// What the grasp file holds now.
    Kept(Vec<Kept>),
    /// Files that changed on disk since they were read.
    OnDisk(OnDisk),
    /// The part and the setup as their files have them now, or why they cannot be read.
    Reread(Result<Box<Fresh>, Vec<String>>),
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
        /// What is done to the grasps that are in the file.
        changes: Vec<Change>,
        /// Take the file as it stands now for known.
        reread: bool,
    },
    /// Read the recovery file.
    LoadRecovery,
    /// Delete the recovery file.
    DropRecovery,
    /// Read the part and the setup again.
    Reread,
    /// Open the workbench on what was chosen on the start page.
    Open(Choice),
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
        Input::Start => knobs::rank(state),
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
                marks::take_back(state, keep);
            }
            let marks = if count == 1 { "mark" } else { "marks" };
            state.message = Some(format!("{count} {marks} taken back, not saved yet: s saves, M lists them"));
            Vec::new()
        }
        Input::RemovalsRecovered(names) => {
            let out = marks::take_out_again(state, &names);
            state.message =
                Some(format!("{out} taken out of the list again, still in the file: s saves, M then u brings back"));
            Vec::new()
        }
        Input::Kept(kept) => {
            kept::reconcile(state, kept);
            Vec::new()
        }
        Input::OnDisk(changed) => {
            state.on_disk.part |= changed.part;
            state.on_disk.setup |= changed.setup;
            Vec::new()
        }
        Input::Reread(read) => reload::take(state, read),
    }
}

fn hear(state: &mut State, news: News) {
    if Some(news.generation) != state.asked {
        return;
    }
    match news.what {
        What::Progress { done, total, gap } => state.job = Job::Running(Some(Along { done, total, gap })),
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
    let out = state.removals();
    for mark in &mut state.lifted {
        (mark.saved, mark.stored) = (false, None);
    }
    let grasps = |count: usize| if count == 1 { "1 grasp".to_owned() } else { format!("{count} grasps") };
    let path = state.grasp_path.display();
    state.message = Some(match (ids.len(), out) {
        (saved, 0) => format!("{} saved to {path}", grasps(saved)),
        (0, out) => format!("{} taken out of {path}", grasps(out)),
        (saved, out) => format!("{} saved to {path}, {out} taken out", grasps(saved)),
    });
    let leave = std::mem::take(&mut state.quit_when_saved) && state.unsaved() == 0;
    if leave { vec![Effect::Quit { recover: false }] } else { Vec::new() }
}

fn press(state: &mut State, key: Key) -> Vec<Effect> {
    let Some(action) = action::action_of(state, key) else {
        if let (Key::Char(c), Some(Layer::Entry(entry))) = (key, state.layers.last_mut()) {
            entry::insert(entry, c);
        } else if let Some(row) = action::row_of(state, key) {
            // A key that does something elsewhere or later is not passed over in silence.
            state.message = Some(format!("{key}: {}", action::refusal(row)));
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
        Some(Layer::Marks { .. }) => marks::act(state, action),
        Some(Layer::Pairs { .. } | Layer::Materials { .. }) => tables::act(state, action),
        Some(Layer::Loads { .. }) => loads::act(state, action),
        Some(Layer::Floors { .. }) => floors::act(state, action),
        Some(Layer::Hand) => by_hand::act(state, action),
        Some(Layer::Compare { .. }) => match action {
            Action::MuUp => knobs::step_mu(state, 100.0, 1.0),
            Action::MuDown => knobs::step_mu(state, 100.0, -1.0),
            Action::TakeOut => {
                state.beside.clear();
                state.layers.pop();
                Vec::new()
            }
            _ => {
                page(state, action);
                Vec::new()
            }
        },
        Some(Layer::Start(_)) => start::act(state, action),
        Some(Layer::Entry(_)) => typing(state, action),
        Some(&Layer::Ask(question)) => answer(state, question, action),
    }
}

pub(super) fn bench(state: &mut State, action: Action) -> Vec<Effect> {
    let page = isize::try_from(state.size.1 / 2).unwrap_or(1).max(1);
    match action {
        Action::Down => state.step(1),
        Action::Up => state.step(-1),
        Action::PageDown => state.step(page),
        Action::PageUp => state.step(-page),
        Action::First => state.step(isize::MIN),
        Action::Last => state.step(isize::MAX),
        Action::MuUp => return knobs::step_mu(state, 100.0, 1.0),
        Action::MuDown => return knobs::step_mu(state, 100.0, -1.0),
        Action::MuUpCoarse => return knobs::step_mu(state, 20.0, 1.0),
        Action::MuDownCoarse => return knobs::step_mu(state, 20.0, -1.0),
        Action::FingersMore => return knobs::step_fingers(state, 1),
        Action::FingersFewer => return knobs::step_fingers(state, -1),
        Action::LimitUp => return knobs::step_limit(state, true),
        Action::LimitDown => return knobs::step_limit(state, false),
        Action::OtherTip => return knobs::other_tip(state),
        Action::OtherClosing => return knobs::other_closing(state),
        Action::OtherDrive => return knobs::other_drive(state),
        Action::SpacingFiner => return knobs::step_spacing(state, 0.8),
        Action::SpacingWider => return knobs::step_spacing(state, 1.25),
        Action::SortNext => return knobs::next_key(state),
        Action::Listing => return knobs::other_listing(state),
        Action::ByHand => by_hand::open(state),
        Action::Beside => compare::toggle(state),
        Action::OpenCompare => compare::open(state),
        Action::OpenFloors => state.layers.push(Layer::Floors { at: 0 }),
        Action::OnlyUnbeaten => {
            state.filter.unbeaten = !state.filter.unbeaten;
            list_again(state);
        }
        Action::OnEdge => open_entry(state, EntryKind::Edge),
        Action::Cones => state.cones = !state.cones,
        Action::Marker => knobs::next_marker(state),
        Action::CellShape => knobs::next_cell_shape(state),
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
        Action::OpenPairs => tables::open_pairs(state),
        Action::OpenMaterials => tables::open_materials(state),
        Action::OpenLoads => loads::open(state),
        Action::Mark => marks::toggle(state),
        Action::Name => open_entry(state, EntryKind::Name),
        Action::Note => open_entry(state, EntryKind::Note),
        Action::MuEnter => open_entry(state, EntryKind::Mu),
        Action::LimitEnter => open_entry(state, EntryKind::Limit),
        Action::Show(_) | Action::NextSide | Action::ZoomIn | Action::ZoomOut | Action::NextContact | Action::Close => {
            picture::act(state, action);
        }
        Action::Save => return marks::save(state, false),
        Action::Reload => return vec![Effect::Reread],
        Action::Quit => return quit(state),
        _ => {}
    }
    Vec::new()
}

/// After another filter: the selection goes to a listed row.
fn list_again(state: &mut State) {
    state.stay_listed();
    state.select(state.selected);
    let Filter { unbeaten, edge } = state.filter;
    let on = edge.map(|edge| format!("with a finger on edge {}:{}", edge.ring, edge.edge));
    let what = match (unbeaten, on) {
        (true, Some(on)) => format!("rows that no other beats, {on}"),
        (true, None) => "rows that no other beats".to_owned(),
        (false, Some(on)) => format!("rows {on}"),
        (false, None) => "all rows".to_owned(),
    };
    state.message = Some(format!("{}: {what}", state.rows()));
}

/// Takes the edge to look for: a number of the outer ring, or ring:edge; nothing lists all.
fn look_for_edge(state: &mut State, text: &str) -> Result<Vec<Effect>, String> {
    let edge = if text.is_empty() {
        None
    } else {
        let (ring, edge) = text.split_once(':').unwrap_or(("0", text));
        let number = |word: &str| word.trim().parse::<usize>().ok();
        let id = number(ring).zip(number(edge)).map(|(ring, edge)| EdgeId { ring, edge });
        let id = id.ok_or("give an edge, for example 3, or 1:0 for edge 0 of the first hole")?;
        let outline = state.order.scene.part().outline();
        Some(id).filter(|id| outline.edge(*id).is_some()).ok_or_else(|| {
            let sizes: Vec<String> = outline
                .ring_sizes()
                .iter()
                .enumerate()
                .map(|(ring, n)| format!("{ring}:0 to {ring}:{}", n - 1))
                .collect();
            format!("there is no such edge; there are {}", sizes.join(", "))
        })?;
        Some(id)
    };
    state.filter.edge = edge;
    list_again(state);
    Ok(Vec::new())
}

fn page(state: &mut State, action: Action) {
    let step = usize::from(state.size.1).saturating_sub(4).max(1);
    if let Some(top) = state.layers.last_mut().and_then(scrolled) {
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
    if let Some(top) = state.layers.last_mut().and_then(scrolled) {
        *top = (*top).min(most);
    }
}

/// The first line shown of a page that is scrolled.
fn scrolled(layer: &mut Layer) -> Option<&mut usize> {
    match layer {
        Layer::Help { top } | Layer::Reading { top } | Layer::Fault { top, .. } | Layer::Compare { top } => Some(top),
        _ => None,
    }
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
        EntryKind::Mu
        | EntryKind::Limit
        | EntryKind::Size { .. }
        | EntryKind::Safety { .. }
        | EntryKind::Floor { .. }
        | EntryKind::Edge => match take_number(state, entry.kind, entry.text.trim()) {
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
        },
        EntryKind::Rename { mark } | EntryKind::Renote { mark } => {
            state.layers.pop();
            let text = entry.text.trim();
            let rename = matches!(entry.kind, EntryKind::Rename { .. });
            if let Some(mark) = state.marks.iter_mut().find(|own| own.id == mark) {
                marks::reword(mark, rename.then_some(text), (!rename).then_some(text));
            }
            Vec::new()
        }
        EntryKind::Name | EntryKind::Note => {
            state.layers.pop();
            if state.mark_here(&entry.spots).is_none()
                && let Some(reading) = Reading::of(&state.order.scene, &entry.spots)
            {
                marks::mark(state, reading);
            }
            let text = entry.text.trim().to_owned();
            if let Some(mark) = state.mark_here(&entry.spots).and_then(|at| state.marks.get_mut(at)) {
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

/// Takes a number that was typed.
fn take_number(state: &mut State, kind: EntryKind, text: &str) -> Result<Vec<Effect>, String> {
    if kind == EntryKind::Edge {
        return look_for_edge(state, text);
    }
    if kind == EntryKind::Limit && text == NO_LIMIT {
        return knobs::turn(state, |setup| setup.hand.force_limit_n = None);
    }
    let example = match kind {
        EntryKind::Mu => "0.15",
        EntryKind::Limit => "60, or none",
        _ => "2.5",
    };
    let number: f64 = text.replace(',', ".").parse().map_err(|_| format!("give a number, for example {example}"))?;
    match kind {
        EntryKind::Mu => knobs::set_mu(state, number),
        EntryKind::Limit => knobs::turn(state, |setup| setup.hand.force_limit_n = Some(number)),
        EntryKind::Size { row } => loads::resize(state, row, number),
        EntryKind::Safety { row } => loads::set_safety(state, row, number),
        EntryKind::Floor { row } => floors::set(state, row, number),
        EntryKind::Name | EntryKind::Note | EntryKind::Rename { .. } | EntryKind::Renote { .. } | EntryKind::Edge => {
            Ok(Vec::new())
        }
    }
}

/// What is typed to have no force limit.
const NO_LIMIT: &str = "none";

pub(super) fn open_entry(state: &mut State, kind: EntryKind) {
    let in_list = |id: u64| state.marks.iter().find(|mark| mark.id == id);
    let spots = match kind {
        EntryKind::Name | EntryKind::Note => match state.spots() {
            Some(spots) => spots,
            None => return,
        },
        EntryKind::Rename { mark } | EntryKind::Renote { mark } => match in_list(mark) {
            Some(mark) => mark.keep.grasp.spots.clone(),
            None => return,
        },
        _ => Vec::new(),
    };
    let here = || state.mark_here(&spots).and_then(|at| state.marks.get(at));
    let name = |mark: Option<&Mark>| mark.map(|mark| mark.keep.name.clone()).unwrap_or_default();
    let note = |mark: Option<&Mark>| mark.map(|mark| mark.keep.note.clone()).unwrap_or_default();
    let text = match kind {
        EntryKind::Name => name(here()),
        EntryKind::Note => note(here()),
        EntryKind::Rename { mark } => name(in_list(mark)),
        EntryKind::Renote { mark } => note(in_list(mark)),
        _ => String::new(),
    };
    let names = matches!(kind, EntryKind::Name | EntryKind::Rename { .. });
    let suggested = names && text == marks::suggested_name(&spots);
    let fresh = Entry { kind, at: text.chars().count(), text, suggested, fault: None, spots };
    let entry = match state.draft.take() {
        Some(draft) if draft.kind == kind && draft.spots == fresh.spots => Entry { fault: None, ..draft },
        _ => fresh,
    };
    state.layers.push(Layer::Entry(entry));
}

fn quit(state: &mut State) -> Vec<Effect> {
    if state.unsaved() == 0 && state.removals() == 0 {
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
            let effects = marks::save(state, false);
            state.quit_when_saved = !effects.is_empty();
            effects
        }
        (Question::Quit, Action::No) => vec![Effect::Quit { recover: false }],
        (Question::Reload, Action::Yes) => marks::save(state, true),
        (Question::Reload, _) => {
            state.message = Some("not saved; the marks are still here".to_owned());
            Vec::new()
        }
        (Question::Recover { .. }, Action::Yes) => vec![Effect::LoadRecovery],
        (Question::Recover { .. }, Action::No) => vec![Effect::DropRecovery],
        _ => Vec::new(),
    }
}
