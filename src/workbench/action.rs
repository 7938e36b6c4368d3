//! The one table of actions: keys, footer labels, help lines and when each is allowed.
//!
//! Dispatch, the footer, the help page and the README's table of keys are all read from [`TABLE`], so they cannot
//! drift apart. `[`, `O` and `A` to `D` are bound to nothing: an arrow key torn apart by a slow line looks like them.

use super::picture::{self, Picture};
use super::state::{Layer, Question, State};
use std::fmt;

/// A key as the workbench knows it.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Key {
    /// A printable character.
    Char(char),
    /// A letter with Ctrl.
    Ctrl(char),
    /// Arrow up.
    Up,
    /// Arrow down.
    Down,
    /// Arrow left.
    Left,
    /// Arrow right.
    Right,
    /// Enter.
    Enter,
    /// Escape.
    Esc,
    /// Tab.
    Tab,
    /// Backspace.
    Backspace,
    /// Delete.
    Delete,
    /// Home.
    Home,
    /// End.
    End,
    /// Page up.
    PageUp,
    /// Page down.
    PageDown,
}

impl fmt::Display for Key {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Char(' ') => f.write_str("Space"),
            Self::Char(c) => write!(f, "{c}"),
            Self::Ctrl(c) => write!(f, "Ctrl-{}", c.to_ascii_uppercase()),
            Self::Up => f.write_str("Up"),
            Self::Down => f.write_str("Down"),
            Self::Left => f.write_str("Left"),
            Self::Right => f.write_str("Right"),
            Self::Enter => f.write_str("Enter"),
            Self::Esc => f.write_str("Esc"),
            Self::Tab => f.write_str("Tab"),
            Self::Backspace => f.write_str("Backspace"),
            Self::Delete => f.write_str("Delete"),
            Self::Home => f.write_str("Home"),
            Self::End => f.write_str("End"),
            Self::PageUp => f.write_str("PgUp"),
            Self::PageDown => f.write_str("PgDn"),
        }
    }
}

/// Where a row of the table holds.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Scope {
    /// The bench itself, no layer open.
    Bench,
    /// A page that is read and scrolled: help, the full reading, a fault.
    Page,
    /// The list of marks.
    Marks,
    /// The table of friction pairs.
    Pairs,
    /// The table of densities.
    Materials,
    /// The list of load cases.
    Loads,
    /// The list of floors.
    Floors,
    /// A grasp changed by hand.
    Hand,
    /// Grasps beside each other.
    Compare,
    /// The start page.
    Start,
    /// The start page on a part that has to be written first; what does not stand here is looked up in `Start`.
    StartDemo,
    /// A line of text being typed.
    Entry,
    /// Unsaved marks at the end.
    AskQuit,
    /// The grasp file changed meanwhile.
    AskReload,
    /// Marks left behind by a broken run.
    AskRecover,
    /// Everywhere, looked up last.
    Any,
}

impl Scope {
    /// True when a row holds in this scope.
    fn takes(self, row: &Row) -> bool {
        row.scope == self || (self == Self::StartDemo && row.scope == Self::Start)
    }

    /// The scope of what lies on top.
    pub fn of(state: &State) -> Self {
        match state.layers.last() {
            None => Self::Bench,
            Some(Layer::Help { .. } | Layer::Reading { .. } | Layer::Fault { .. }) => Self::Page,
            Some(Layer::Marks { .. }) => Self::Marks,
            Some(Layer::Pairs { .. }) => Self::Pairs,
            Some(Layer::Materials { .. }) => Self::Materials,
            Some(Layer::Loads { .. }) => Self::Loads,
            Some(Layer::Floors { .. }) => Self::Floors,
            Some(Layer::Hand) => Self::Hand,
            Some(Layer::Compare { .. }) => Self::Compare,
            Some(Layer::Start(page)) if page.writes_first() => Self::StartDemo,
            Some(Layer::Start(_)) => Self::Start,
            Some(Layer::Entry(_)) => Self::Entry,
            Some(Layer::Ask(Question::Quit)) => Self::AskQuit,
            Some(Layer::Ask(Question::Reload)) => Self::AskReload,
            Some(Layer::Ask(Question::Recover { .. })) => Self::AskRecover,
        }
    }
}

/// What can be done.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Action {
    /// One row up.
    Up,
    /// One row down.
    Down,
    /// A page up.
    PageUp,
    /// A page down.
    PageDown,
    /// First row.
    First,
    /// Last row.
    Last,
    /// Friction up a fine step.
    MuUp,
    /// Friction down a fine step.
    MuDown,
    /// Friction up a coarse step.
    MuUpCoarse,
    /// Friction down a coarse step.
    MuDownCoarse,
    /// Type the friction.
    MuEnter,
    /// One finger more.
    FingersMore,
    /// One finger fewer.
    FingersFewer,
    /// Force limit up a step.
    LimitUp,
    /// Force limit down a step.
    LimitDown,
    /// Type the force limit.
    LimitEnter,
    /// Pins or pads.
    OtherTip,
    /// Each finger on its own, or two pads facing each other.
    OtherClosing,
    /// Each finger's force set, or all alike.
    OtherDrive,
    /// Next sort key.
    SortNext,
    /// Sites closer together.
    SpacingFiner,
    /// Sites farther apart.
    SpacingWider,
    /// Families or single grasps.
    Listing,
    /// Friction cones on the outline.
    Cones,
    /// Another picture in the outline pane.
    Show(Picture),
    /// Next load case, or next side of the wrench set.
    NextSide,
    /// The picture from nearer.
    ZoomIn,
    /// The picture from farther.
    ZoomOut,
    /// Next contact into the middle of the picture.
    NextContact,
    /// Next marker.
    Marker,
    /// Next shape of the character cells.
    CellShape,
    /// Bring in the next panel where not all fit.
    NextPanel,
    /// The reading on the whole screen.
    OpenReading,
    /// Mark or unmark.
    Mark,
    /// Name the grasp.
    Name,
    /// Note why.
    Note,
    /// The list of marks.
    OpenMarks,
    /// The table of friction pairs.
    OpenPairs,
    /// The table of densities.
    OpenMaterials,
    /// The list of load cases.
    OpenLoads,
    /// The list of floors.
    OpenFloors,
    /// Take the grasp in hand.
    ByHand,
    /// The picked finger forward along the outline.
    Forward,
    /// The picked finger back along the outline.
    Back,
    /// The picked finger to the middle of the next edge.
    NextEdge,
    /// The picked finger to the middle of the edge before.
    EdgeBefore,
    /// Longer steps.
    StepLonger,
    /// Shorter steps.
    StepShorter,
    /// One finger more, by hand.
    AddFinger,
    /// The picked finger away.
    TakeFinger,
    /// The picked finger stays, or may move again.
    Lock,
    /// The best grasp that small steps lead to.
    BestFromHere,
    /// The step before.
    Undo,
    /// The step undone.
    Redo,
    /// Set the grasp beside others.
    Beside,
    /// Compare what stands beside each other.
    OpenCompare,
    /// List only what no other row beats.
    OnlyUnbeaten,
    /// List only grasps on an edge.
    OnEdge,
    /// A larger load.
    Larger,
    /// A smaller load.
    Smaller,
    /// Type the safety factor of a load case.
    Safety,
    /// One load case more.
    NewCase,
    /// Take a load case out, or bring it back.
    TakeOut,
    /// Dry or oily, in the table of pairs.
    OtherCondition,
    /// Bring the mark taken away last back.
    BringBack,
    /// Read part and setup again.
    Reload,
    /// Save unsaved marks.
    Save,
    /// The help page.
    Help,
    /// Leave.
    Quit,
    /// Close the top layer.
    Close,
    /// Take what was typed or chosen.
    Accept,
    /// Answer that keeps or loads.
    Yes,
    /// Answer that drops.
    No,
    /// Delete to the left.
    Backspace,
    /// Delete to the right.
    Delete,
    /// Delete all that was typed.
    Empty,
    /// Cursor left.
    CursorLeft,
    /// Cursor right.
    CursorRight,
    /// Paint the whole screen again.
    Repaint,
    /// Stop and give the shell back.
    Suspend,
    /// Ctrl-C.
    Interrupt,
}

/// One row of the table.
pub struct Row {
    /// What it does.
    pub action: Action,
    /// Where it holds.
    pub scope: Scope,
    /// Keys, the one shown in the footer first.
    pub keys: &'static [Key],
    /// Word in the footer; empty keeps it out.
    pub label: &'static str,
    /// Line of the help page; empty keeps it out.
    pub help: &'static str,
    /// Whether it makes sense now.
    pub allowed: fn(&State) -> bool,
}

const fn row(
    action: Action,
    scope: Scope,
    keys: &'static [Key],
    label: &'static str,
    help: &'static str,
    allowed: fn(&State) -> bool,
) -> Row {
    Row { action, scope, keys, label, help, allowed }
}

fn always(_: &State) -> bool {
    true
}

fn any_row(state: &State) -> bool {
    state.rows() > 0
}

fn any_reading(state: &State) -> bool {
    state.reading.is_some()
}

fn any_mark(state: &State) -> bool {
    !state.marks.is_empty()
}

fn any_load(state: &State) -> bool {
    !state.loads.is_empty()
}

fn no_mass_in_the_file(state: &State) -> bool {
    state.opened.part.mass().is_none()
}

fn any_unsaved(state: &State) -> bool {
    state.unsaved() > 0 || state.removals() > 0
}

fn any_lifted(state: &State) -> bool {
    !state.lifted.is_empty()
}

fn any_mark_or_lifted(state: &State) -> bool {
    any_mark(state) || any_lifted(state)
}

fn any_start_row(state: &State) -> bool {
    matches!(state.layers.last(), Some(Layer::Start(page)) if page.rows() > 0)
}

use Action as A;
use Key::{Char as C, Ctrl};
use Scope as S;

/// Every key of the workbench.
pub static TABLE: &[Row] = &[
    row(A::Help, S::Bench, &[C('?')], "help", "help: every key and every number", always),
    row(A::Quit, S::Bench, &[C('q')], "quit", "leave; asks when marks are unsaved", always),
    row(A::Down, S::Bench, &[C('j'), Key::Down], "down", "next grasp", any_row),
    row(A::Up, S::Bench, &[C('k'), Key::Up], "", "grasp before", any_row),
    row(A::OpenReading, S::Bench, &[Key::Enter], "read", "the whole reading of the grasp", any_reading),
    row(A::Mark, S::Bench, &[C('m'), C(' ')], "mark", "mark the grasp, or take its mark away", any_reading),
    row(A::Save, S::Bench, &[C('s')], "save", "save marks, new names and removals to the grasp file", any_unsaved),
    row(
        A::ByHand,
        S::Bench,
        &[C('b')],
        "by hand",
        "change the grasp by hand: move, add, take away, lock fingers",
        any_reading,
    ),
    row(A::MuUp, S::Bench, &[C('l'), Key::Right, C('+')], "mu+", "mu up by 0.01", always),
    row(A::MuDown, S::Bench, &[C('h'), Key::Left, C('-')], "", "mu down by 0.01", always),
    row(A::Show(Picture::Fingers), S::Bench, &[C('1')], "to 7 picture", "picture: fingers with their normals", always),
    row(A::Show(Picture::Forces), S::Bench, &[C('2')], "", "picture: the finger forces that hold a load case", always),
    row(
        A::Show(Picture::Labels),
        S::Bench,
        &[C('3')],
        "",
        "picture: moment labels, where fingers turn the part one way only",
        always,
    ),
    row(
        A::Show(Picture::Envelope),
        S::Bench,
        &[C('4')],
        "",
        "picture: the accelerations held in each direction",
        always,
    ),
    row(
        A::Show(Picture::Room),
        S::Bench,
        &[C('5')],
        "",
        "picture: where each finger may move while the others stay",
        always,
    ),
    row(
        A::Show(Picture::Wrenches),
        S::Bench,
        &[C('6')],
        "",
        "picture: the wrench set and the largest ball in it",
        always,
    ),
    row(A::Show(Picture::Friction), S::Bench, &[C('7')], "", "picture: quality and squeeze over friction", always),
    row(A::OpenLoads, S::Bench, &[C('L')], "loads", "list the load cases: make them larger, smaller, add some", always),
    row(
        A::NextSide,
        S::Bench,
        &[C('y')],
        "next",
        "forces: next load case; wrench set: seen from the next side",
        picture::steps,
    ),
    row(A::ZoomIn, S::Bench, &[C('z')], "zoom", "picture from nearer, up to 38 times", picture::zooms),
    row(A::ZoomOut, S::Bench, &[C('Z')], "zoom out", "picture from farther", picture::zoomed),
    row(
        A::NextContact,
        S::Bench,
        &[C('i')],
        "",
        "next contact into the middle of the picture, after the last the whole part",
        picture::has_contacts,
    ),
    row(A::FingersMore, S::Bench, &[C('f')], "finger+", "one finger more", always),
    row(A::FingersFewer, S::Bench, &[C('F')], "", "one finger fewer", always),
    row(A::LimitUp, S::Bench, &[C('u')], "limit+", "force limit up a step (about 12 %)", always),
    row(A::LimitDown, S::Bench, &[C('U')], "", "force limit down a step", always),
    row(A::SortNext, S::Bench, &[C('o')], "order", "sort by the next key", always),
    row(A::Listing, S::Bench, &[C('v')], "members", "list families' best grasps, or every grasp", always),
    row(
        A::Beside,
        S::Bench,
        &[C('x')],
        "beside",
        "set the grasp beside others, or take it away from there",
        any_reading,
    ),
    row(A::OpenCompare, S::Bench, &[C('X')], "compare", "compare the grasps set beside each other", always),
    row(A::OnlyUnbeaten, S::Bench, &[C('^')], "", "list only rows that no other beats, or all", always),
    row(A::OnEdge, S::Bench, &[C('/')], "edge", "list only grasps with a finger on an edge; empty lists all", always),
    row(A::OpenFloors, S::Bench, &[C('_')], "floors", "list the floors a grasp must reach: change them", always),
    row(A::Cones, S::Bench, &[C('c')], "cones", "friction cones on the outline", always),
    row(A::Name, S::Bench, &[C('n')], "name", "mark the grasp and name it", any_reading),
    row(A::Note, S::Bench, &[C('w')], "why", "mark the grasp and note why", any_reading),
    row(
        A::OpenMarks,
        S::Bench,
        &[C('M')],
        "marks",
        "list the marks and saved grasps: rename, note, remove",
        any_mark_or_lifted,
    ),
    row(A::MuEnter, S::Bench, &[C('=')], "set mu", "type mu", always),
    row(A::LimitEnter, S::Bench, &[C('N')], "set limit", "type the force limit, N per finger", always),
    row(A::OtherTip, S::Bench, &[C('T')], "tip", "pins or pads", always),
    row(
        A::OtherClosing,
        S::Bench,
        &[C('P')],
        "closing",
        "two parallel pads facing each other, or fingers of their own",
        always,
    ),
    row(A::OtherDrive, S::Bench, &[C('e')], "drive", "each finger's force can be set, or all press alike", always),
    row(A::OpenPairs, S::Bench, &[C('t')], "pairs", "take mu from the table of friction pairs", always),
    row(
        A::OpenMaterials,
        S::Bench,
        &[C('d')],
        "density",
        "take a density from the table, where the part file gives no mass",
        no_mass_in_the_file,
    ),
    row(A::MuUpCoarse, S::Bench, &[C('>')], "", "mu up by 0.05", always),
    row(A::MuDownCoarse, S::Bench, &[C('<')], "", "mu down by 0.05", always),
    row(A::SpacingFiner, S::Bench, &[C('.')], "finer", "sites closer together (spacing x 0.8)", always),
    row(A::SpacingWider, S::Bench, &[C(',')], "wider", "sites farther apart (spacing x 1.25)", always),
    row(A::Marker, S::Bench, &[C('p')], "pen", "draw with ASCII, lines or braille dots", always),
    row(A::CellShape, S::Bench, &[C('a')], "", "another cell shape, until right angles look right", always),
    row(A::Reload, S::Bench, &[C('R')], "", "read the part and the setup again from their files", always),
    row(A::NextPanel, S::Bench, &[Key::Tab], "panel", "on a small screen: bring in the next panel", always),
    row(A::PageDown, S::Bench, &[C('J'), Key::PageDown], "", "a page down", any_row),
    row(A::PageUp, S::Bench, &[C('K'), Key::PageUp], "", "a page up", any_row),
    row(A::First, S::Bench, &[C('g'), Key::Home], "", "first grasp", any_row),
    row(A::Last, S::Bench, &[C('G'), Key::End], "", "last grasp", any_row),
    row(A::Close, S::Bench, &[Key::Esc], "", "close what lies on top, or back to the whole part; never quits", always),
    row(A::Close, S::Page, &[Key::Esc, C('q'), Key::Enter, C('?')], "close", "", always),
    row(A::Down, S::Page, &[C('j'), Key::Down], "down", "", always),
    row(A::Up, S::Page, &[C('k'), Key::Up], "up", "", always),
    row(A::PageDown, S::Page, &[C(' '), C('J'), Key::PageDown], "page", "", always),
    row(A::PageUp, S::Page, &[C('K'), Key::PageUp], "", "", always),
    row(A::First, S::Page, &[C('g'), Key::Home], "", "", always),
    row(A::Last, S::Page, &[C('G'), Key::End], "", "", always),
    row(A::Close, S::Marks, &[Key::Esc, C('q')], "close", "", always),
    row(A::Down, S::Marks, &[C('j'), Key::Down], "down", "", always),
    row(A::Up, S::Marks, &[C('k'), Key::Up], "up", "", always),
    row(A::Accept, S::Marks, &[Key::Enter], "show", "", any_mark),
    row(A::Name, S::Marks, &[C('n')], "rename", "", any_mark),
    row(A::Note, S::Marks, &[C('w')], "why", "", any_mark),
    row(A::ByHand, S::Marks, &[C('b')], "by hand", "", any_mark),
    row(A::Mark, S::Marks, &[C('d'), C('m'), C(' '), Key::Delete], "remove", "", any_mark),
    row(A::Beside, S::Marks, &[C('x')], "beside", "", any_mark),
    row(A::OpenCompare, S::Marks, &[C('X')], "compare", "", any_mark),
    row(A::BringBack, S::Marks, &[C('u')], "bring back", "", any_lifted),
    row(A::Save, S::Marks, &[C('s')], "save", "", any_unsaved),
    row(A::Accept, S::Pairs, &[Key::Enter], "take", "", always),
    row(A::OtherCondition, S::Pairs, &[C('l'), C('h'), Key::Right, Key::Left], "dry or oily", "", always),
    row(A::Close, S::Pairs, &[Key::Esc, C('q'), C('t')], "close", "", always),
    row(A::Down, S::Pairs, &[C('j'), Key::Down], "down", "", always),
    row(A::Up, S::Pairs, &[C('k'), Key::Up], "up", "", always),
    row(A::PageDown, S::Pairs, &[C(' '), C('J'), Key::PageDown], "page", "", always),
    row(A::PageUp, S::Pairs, &[C('K'), Key::PageUp], "", "", always),
    row(A::First, S::Pairs, &[C('g'), Key::Home], "first", "", always),
    row(A::Last, S::Pairs, &[C('G'), Key::End], "last", "", always),
    row(A::Accept, S::Materials, &[Key::Enter], "take", "", always),
    row(A::Close, S::Materials, &[Key::Esc, C('q'), C('d')], "close", "", always),
    row(A::Down, S::Materials, &[C('j'), Key::Down], "down", "", always),
    row(A::Up, S::Materials, &[C('k'), Key::Up], "up", "", always),
    row(A::PageDown, S::Materials, &[C(' '), C('J'), Key::PageDown], "page", "", always),
    row(A::PageUp, S::Materials, &[C('K'), Key::PageUp], "", "", always),
    row(A::First, S::Materials, &[C('g'), Key::Home], "first", "", always),
    row(A::Last, S::Materials, &[C('G'), Key::End], "last", "", always),
    row(A::Larger, S::Loads, &[C('+'), C('l'), Key::Right], "larger", "", any_load),
    row(A::Smaller, S::Loads, &[C('-'), C('h'), Key::Left], "smaller", "", any_load),
    row(A::Accept, S::Loads, &[Key::Enter], "set size", "", any_load),
    row(A::Safety, S::Loads, &[C('s')], "safety factor", "", any_load),
    row(A::NewCase, S::Loads, &[C('n')], "new", "", always),
    row(A::TakeOut, S::Loads, &[C('x')], "out or back", "", any_load),
    row(A::Close, S::Loads, &[Key::Esc, C('q'), C('L')], "close", "", always),
    row(A::Down, S::Loads, &[C('j'), Key::Down], "down", "", any_load),
    row(A::Up, S::Loads, &[C('k'), Key::Up], "up", "", any_load),
    row(A::Larger, S::Floors, &[C('+'), C('l'), Key::Right], "higher", "", always),
    row(A::Smaller, S::Floors, &[C('-'), C('h'), Key::Left], "lower", "", always),
    row(A::Accept, S::Floors, &[Key::Enter], "type it", "", always),
    row(A::TakeOut, S::Floors, &[C('x')], "take off", "", always),
    row(A::Close, S::Floors, &[Key::Esc, C('q'), C('_')], "close", "", always),
    row(A::Down, S::Floors, &[C('j'), Key::Down], "down", "", always),
    row(A::Up, S::Floors, &[C('k'), Key::Up], "up", "", always),
    row(
        A::Forward,
        S::Hand,
        &[C('l'), Key::Right, C('+')],
        "move",
        "the picked finger forward along the outline",
        always,
    ),
    row(A::Back, S::Hand, &[C('h'), Key::Left, C('-')], "", "the picked finger back along the outline", always),
    row(A::Down, S::Hand, &[C('j'), Key::Down], "finger", "pick the next finger", always),
    row(A::Up, S::Hand, &[C('k'), Key::Up], "", "pick the finger before", always),
    row(A::Undo, S::Hand, &[C('u')], "undo", "undo the last step", always),
    row(
        A::BestFromHere,
        S::Hand,
        &[C('b')],
        "best near",
        "the best grasp that small steps of the free fingers lead to",
        always,
    ),
    row(A::Close, S::Hand, &[Key::Esc, C('q')], "put down", "put the grasp down; it stays in hand for later", always),
    row(A::NextEdge, S::Hand, &[C('e')], "edge+", "the picked finger to the middle of the next edge", always),
    row(A::EdgeBefore, S::Hand, &[C('E')], "", "the picked finger to the middle of the edge before", always),
    row(
        A::Lock,
        S::Hand,
        &[C('L')],
        "lock",
        "lock the picked finger, or free it; the list then keeps the locked ones",
        always,
    ),
    row(A::AddFinger, S::Hand, &[C('a')], "add", "one finger more, where it helps most", always),
    row(A::TakeFinger, S::Hand, &[C('d'), Key::Delete], "take away", "the picked finger away", always),
    row(A::Mark, S::Hand, &[C('m'), C(' ')], "mark", "", any_reading),
    row(A::OpenCompare, S::Hand, &[C('X')], "compare", "", always),
    row(A::Save, S::Hand, &[C('s')], "save", "", any_unsaved),
    row(A::StepShorter, S::Hand, &[C('.')], "finer", "shorter steps", always),
    row(A::StepLonger, S::Hand, &[C(',')], "wider", "longer steps", always),
    row(A::Redo, S::Hand, &[C('r'), Ctrl('r')], "redo", "do the undone step again", always),
    row(A::Beside, S::Hand, &[C('x')], "beside", "", any_reading),
    row(A::Name, S::Hand, &[C('n')], "name", "", any_reading),
    row(A::Note, S::Hand, &[C('w')], "why", "", any_reading),
    row(A::OpenReading, S::Hand, &[Key::Enter], "read", "", any_reading),
    row(A::MuUp, S::Hand, &[C('>')], "mu+", "", always),
    row(A::MuDown, S::Hand, &[C('<')], "mu-", "", always),
    row(A::Cones, S::Hand, &[C('c')], "cones", "", always),
    row(A::Help, S::Hand, &[C('?')], "help", "", always),
    row(A::Close, S::Compare, &[Key::Esc, C('q'), C('X'), Key::Enter], "close", "", always),
    row(A::Down, S::Compare, &[C('j'), Key::Down], "down", "", always),
    row(A::Up, S::Compare, &[C('k'), Key::Up], "up", "", always),
    row(A::PageDown, S::Compare, &[C(' '), C('J'), Key::PageDown], "page", "", always),
    row(A::PageUp, S::Compare, &[C('K'), Key::PageUp], "", "", always),
    row(A::First, S::Compare, &[C('g'), Key::Home], "", "", always),
    row(A::Last, S::Compare, &[C('G'), Key::End], "", "", always),
    row(A::MuUp, S::Compare, &[C('l'), Key::Right, C('+')], "mu+", "", always),
    row(A::MuDown, S::Compare, &[C('h'), Key::Left, C('-')], "mu-", "", always),
    row(A::TakeOut, S::Compare, &[C('x')], "empty", "", always),
    row(A::Accept, S::StartDemo, &[Key::Enter], "write it here and open", "", always),
    row(A::Accept, S::Start, &[Key::Enter], "open", "", |state| Scope::of(state) == S::Start),
    row(A::Down, S::Start, &[C('j'), Key::Down], "down", "", any_start_row),
    row(A::Up, S::Start, &[C('k'), Key::Up], "up", "", any_start_row),
    row(A::Quit, S::Start, &[C('q')], "leave", "", always),
    row(A::Help, S::Start, &[C('?')], "help", "", always),
    row(A::PageDown, S::Start, &[C(' '), C('J'), Key::PageDown], "", "", any_start_row),
    row(A::PageUp, S::Start, &[C('K'), Key::PageUp], "", "", any_start_row),
    row(A::First, S::Start, &[C('g'), Key::Home], "", "", any_start_row),
    row(A::Last, S::Start, &[C('G'), Key::End], "", "", any_start_row),
    row(A::Accept, S::Entry, &[Key::Enter], "take", "", always),
    row(A::Close, S::Entry, &[Key::Esc], "leave", "", always),
    row(A::Backspace, S::Entry, &[Key::Backspace, Ctrl('h')], "", "", always),
    row(A::Delete, S::Entry, &[Key::Delete], "", "", always),
    row(A::Empty, S::Entry, &[Ctrl('u')], "empty", "", always),
    row(A::CursorLeft, S::Entry, &[Key::Left, Ctrl('b')], "", "", always),
    row(A::CursorRight, S::Entry, &[Key::Right, Ctrl('f')], "", "", always),
    row(A::First, S::Entry, &[Key::Home, Ctrl('a')], "", "", always),
    row(A::Last, S::Entry, &[Key::End, Ctrl('e')], "", "", always),
    row(A::Yes, S::AskQuit, &[C('s')], "save and quit", "", always),
    row(A::No, S::AskQuit, &[C('x')], "quit without saving", "", always),
    row(A::Close, S::AskQuit, &[Key::Esc], "stay", "", always),
    row(A::Yes, S::AskReload, &[C('y')], "read it again and append", "", always),
    row(A::Close, S::AskReload, &[Key::Esc, C('n')], "not now", "", always),
    row(A::Yes, S::AskRecover, &[C('y')], "take them back", "", always),
    row(A::No, S::AskRecover, &[C('x')], "delete them", "", always),
    row(A::Close, S::AskRecover, &[Key::Esc, C('n')], "ask again next time", "", always),
    row(A::Repaint, S::Any, &[Ctrl('l')], "", "paint the whole screen again", always),
    row(A::Suspend, S::Any, &[Ctrl('z')], "", "stop and give the shell back; `fg` returns", always),
    row(A::Interrupt, S::Any, &[Ctrl('c')], "", "leave; twice leaves at once, marks go to a recovery file", always),
];

/// Actions of the bench that also work with a grasp in hand, by the same keys where those are free there.
fn works_in_hand(action: Action) -> bool {
    matches!(
        action,
        Action::Show(_)
            | Action::NextSide
            | Action::ZoomIn
            | Action::ZoomOut
            | Action::NextContact
            | Action::MuEnter
            | Action::Marker
            | Action::CellShape
            | Action::NextPanel
    )
}

/// What a key does now, if anything.
pub fn action_of(state: &State, key: Key) -> Option<Action> {
    row_of(state, key).filter(|row| (row.allowed)(state)).map(|row| row.action)
}

/// The row of a key here, allowed now or not; of several the one that is.
pub(super) fn row_of(state: &State, key: Key) -> Option<&'static Row> {
    let scope = Scope::of(state);
    let has = |row: &&Row| row.keys.contains(&key);
    let here = || TABLE.iter().filter(move |row| scope.takes(row)).filter(has);
    let in_hand = || TABLE.iter().filter(|row| row.scope == Scope::Bench && works_in_hand(row.action)).find(has);
    here()
        .find(|row| (row.allowed)(state))
        .or_else(|| here().next())
        .or_else(|| in_hand().filter(|_| scope == Scope::Hand))
        .or_else(|| TABLE.iter().filter(|row| row.scope == Scope::Any).find(has))
}

/// Why a row's key does nothing now.
pub(super) fn refusal(row: &Row) -> &'static str {
    match row.action {
        Action::Save => "nothing is unsaved",
        Action::OpenMarks => "there are no marks yet; m makes one",
        Action::OpenMaterials => "the part file gives the mass",
        Action::Up | Action::Down | Action::PageUp | Action::PageDown | Action::First | Action::Last => {
            "nothing is listed"
        }
        _ => "no grasp to do it with",
    }
}

/// The rows the footer may show now, most useful first.
pub fn footer(state: &State) -> impl Iterator<Item = &'static Row> {
    let scope = Scope::of(state);
    TABLE.iter().filter(move |row| scope.takes(row) && !row.label.is_empty() && (row.allowed)(state))
}

/// The keys of a row, joined for reading.
pub fn keys_of(row: &Row) -> String {
    row.keys.iter().map(Key::to_string).collect::<Vec<_>>().join(" ")
}

/// The key an action of the bench has first.
pub fn key_of(action: Action) -> String {
    let row = TABLE.iter().find(|row| row.scope == Scope::Bench && row.action == action);
    row.and_then(|row| row.keys.first()).map_or_else(String::new, Key::to_string)
}

/// The rows of the help page: the bench's keys, those that hold everywhere, those with a grasp in hand.
pub fn help() -> impl Iterator<Item = &'static Row> {
    TABLE.iter().filter(|row| !row.help.is_empty())
}

/// The rows of the help page in its parts, each with its heading.
pub fn help_parts() -> [(&'static str, Vec<&'static Row>); 2] {
    let (hand, bench) = help().partition(|row| row.scope == Scope::Hand);
    [("keys", bench), ("keys with a grasp in hand", hand)]
}

/// The table of keys in Markdown, for the README.
pub fn markdown() -> String {
    let mut text = String::new();
    for (heading, rows) in help_parts() {
        let gap = if text.is_empty() { "" } else { "\n" };
        text.push_str(&format!("{gap}| {heading} | what they do |\n|---|---|\n"));
        for row in rows {
            let keys: Vec<String> = row.keys.iter().map(|key| format!("`{key}`")).collect();
            text.push_str(&format!("| {} | {} |\n", keys.join(" "), row.help));
        }
    }
    text
}
