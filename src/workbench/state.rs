//! What the workbench knows: the scene, the ranking shown, the selection, the marks and the open layers. No I/O.

use super::by_hand::{self, ByHand};
use super::kept::Stored;
use super::loads::{self, LoadRow};
use super::look::{ColorChoice, Look, Marker};
use super::picture::View;
use super::reload;
pub use super::shown::{Filter, Shown};
use super::shown::{family_of, unbeaten};
use super::start::StartPage;
use crate::file::Keep;
use crate::hand::{FingerCount, Tip};
use crate::mechanics::assess::Doubt;
use crate::mechanics::{Assessment, Condition, FrictionBand};
use crate::part::Part;
use crate::part::material::Density;
use crate::search::job::Request;
use crate::search::{Grasp, Key, Listed, Listing, Ranking, Scene, Setup, Spot, Standing};
use nalgebra::Point2;
use std::path::{Path, PathBuf};
use std::sync::Arc;

/// Rows asked of a ranking. More than anyone reads, few enough that the job stays quick.
pub const MOST_ROWS: usize = 200;

/// What a ranking is made from: a knob turned makes another one.
#[derive(Debug, Clone)]
pub struct Order {
    /// Part and setup.
    pub scene: Arc<Scene>,
    /// Sort key.
    pub key: Key,
    /// Families or members.
    pub listing: Listing,
}

impl Order {
    /// The ranking to ask for; `known` are placements to begin with.
    pub(super) fn request(&self, known: Vec<Vec<Spot>>) -> Request {
        Request { scene: Arc::clone(&self.scene), key: self.key, listing: self.listing, most: MOST_ROWS, known }
    }
}

/// How the running job does.
#[derive(Debug, Clone, PartialEq)]
pub enum Job {
    /// Nothing runs.
    Idle,
    /// Asked, or running and so far.
    Running(Option<Along>),
    /// It broke; the reason.
    Failed(String),
}

/// How far a running job is.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Along {
    /// Candidate sets looked at.
    pub done: u64,
    /// Those that may be looked at.
    pub total: u64,
    /// How far the best so far may be from the best there is, as a part of its score, where a proof knows.
    pub gap: Option<f64>,
}

/// The grasp the user chose, kept while rankings come and go.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Anchor {
    pub(super) spots: Vec<Spot>,
    /// Where its fingers stood on the part before it was read again, in the file's frame; nothing otherwise.
    pub(super) places: Option<Vec<Point2<f64>>>,
}

/// Everything told of the selected grasp, under the knobs as they stand now.
#[derive(Debug, Clone)]
pub struct Reading {
    /// Where the fingers stand.
    pub grasp: Grasp,
    /// Its scores.
    pub assessment: Assessment,
    /// Why a number is not to be trusted.
    pub doubts: Vec<Doubt>,
    /// Name, and how the grasp stands there, for each value of the friction band the setup states.
    pub band: Vec<(&'static str, Standing)>,
}

impl Reading {
    /// Reads spots under a scene; nothing when the scene has no such place.
    pub(super) fn of(scene: &Scene, spots: &[Spot]) -> Option<Self> {
        let grasp = scene.grasp(spots).ok()?;
        let (assessment, doubts) = scene.assess(&grasp);
        let friction = &scene.setup().friction;
        let band = [
            ("low", friction.low),
            ("nominal", friction.nominal),
            ("high", friction.high),
            ("sliding", friction.sliding),
        ]
        .into_iter()
        .filter_map(|(name, mu)| Some((name, scene.standing_at(&grasp, mu?))))
        .collect();
        Some(Self { grasp, assessment, doubts, band })
    }
}

/// A grasp set beside others.
#[derive(Debug, Clone, PartialEq)]
pub struct Beside {
    /// What it is called there.
    pub name: String,
    /// Where its fingers stand.
    pub spots: Vec<Spot>,
}

/// A grasp the user wants to keep.
#[derive(Debug, Clone)]
pub struct Mark {
    /// Number within this run.
    pub id: u64,
    /// The grasp as it goes to the file.
    pub keep: Keep,
    /// Already in the file as it stands here.
    pub saved: bool,
    /// As it stands in the file; nothing where it is not in it, or where the file was not read since.
    pub stored: Option<Stored>,
    /// The part it was read on, as the part file had it then.
    pub part: Arc<Part>,
}

/// What a line of text is typed for.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum EntryKind {
    /// The friction coefficient.
    Mu,
    /// The name of a grasp.
    Name,
    /// Why a grasp is kept.
    Note,
    /// Another name for a mark in the list.
    Rename {
        /// Its number within this run.
        mark: u64,
    },
    /// Another note for a mark in the list.
    Renote {
        /// Its number within this run.
        mark: u64,
    },
    /// The force limit.
    Limit,
    /// The size of a load case's motion.
    Size {
        /// Row of the list of loads.
        row: usize,
    },
    /// The safety factor of a load case.
    Safety {
        /// Row of the list of loads.
        row: usize,
    },
    /// A floor.
    Floor {
        /// Row of the list of floors.
        row: usize,
    },
    /// The edge that grasps are looked for by.
    Edge,
}

/// A line of text being typed.
#[derive(Debug, Clone, PartialEq)]
pub struct Entry {
    /// What for.
    pub kind: EntryKind,
    /// The text.
    pub text: String,
    /// Cursor, in characters.
    pub at: usize,
    /// The text is a suggestion that the first character typed replaces.
    pub suggested: bool,
    /// Why it was not taken.
    pub fault: Option<String>,
    /// The grasp it is about.
    pub spots: Vec<Spot>,
}

/// A question.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Question {
    /// Unsaved marks at the end.
    Quit,
    /// The grasp file changed meanwhile.
    Reload,
    /// So many marks were left behind by a broken run.
    Recover {
        /// How many.
        count: usize,
    },
}

/// Something that lies on top of the bench and takes the keys.
#[derive(Debug, Clone, PartialEq)]
pub enum Layer {
    /// Help page, scrolled.
    Help {
        /// First line shown.
        top: usize,
    },
    /// The full reading, scrolled.
    Reading {
        /// First line shown.
        top: usize,
    },
    /// A fault with its mend, scrolled.
    Fault {
        /// First line shown.
        top: usize,
        /// What did not work.
        title: &'static str,
        /// The lines.
        lines: Vec<String>,
    },
    /// The list of marks.
    Marks {
        /// Selected mark.
        at: usize,
    },
    /// The table of friction pairs.
    Pairs {
        /// Selected row; the first is the friction the workbench was opened with.
        at: usize,
        /// Dry or oily: the planning value that would be taken.
        condition: Condition,
    },
    /// The table of densities.
    Materials {
        /// Selected row; the first is the part as its file has it.
        at: usize,
    },
    /// The list of load cases.
    Loads {
        /// Selected row.
        at: usize,
    },
    /// The list of floors.
    Floors {
        /// Selected row.
        at: usize,
    },
    /// A grasp changed by hand; the bench stays in sight.
    Hand,
    /// Grasps beside each other, scrolled.
    Compare {
        /// First line shown.
        top: usize,
    },
    /// The page shown when no part was named.
    Start(StartPage),
    /// A line of text being typed.
    Entry(Entry),
    /// A question.
    Ask(Question),
}

/// A panel of the bench.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Panel {
    /// The ranked table.
    Table,
    /// The outline.
    Outline,
    /// The reading.
    Reading,
}

/// What the workbench was opened with, to go back to.
#[derive(Debug, Clone)]
pub struct Opened {
    /// The part as its file has it.
    pub part: Arc<Part>,
    /// Friction by file and command line.
    pub friction: FrictionBand,
    /// The whole setup by file and command line, with every load case.
    pub setup: Setup,
}

/// Which files changed on disk since they were read.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct OnDisk {
    /// The part file.
    pub part: bool,
    /// The setup file.
    pub setup: bool,
}

/// All of it.
#[derive(Debug, Clone)]
pub struct State {
    /// The knobs as they stand, whether or not a ranking for them is there yet.
    pub order: Order,
    /// The ranking on the screen.
    pub shown: Option<Shown>,
    /// Number of the ranking last asked for; nothing until the job told it.
    pub asked: Option<u64>,
    /// How that job does.
    pub job: Job,
    /// Selected row, counted in the ranking.
    pub selected: usize,
    /// Which rows are listed.
    pub filter: Filter,
    pub(super) anchor: Option<Anchor>,
    /// The selected grasp under the present knobs.
    pub reading: Option<Reading>,
    /// The grasp changed by hand, kept when it is put down.
    pub hand: Option<ByHand>,
    /// Grasps set beside each other.
    pub beside: Vec<Beside>,
    /// Marks, in the order they were made.
    pub marks: Vec<Mark>,
    pub(super) next_mark: u64,
    /// What lies on top, the last uppermost.
    pub layers: Vec<Layer>,
    /// A line for the user; gone with the next key.
    pub message: Option<String>,
    /// Cones drawn.
    pub cones: bool,
    /// What the outline pane shows.
    pub view: View,
    /// Panel that is shown when not all fit.
    pub panel: Panel,
    /// Colours, marker and cell shape.
    pub look: Look,
    /// What the workbench was opened with.
    pub opened: Opened,
    /// The row of the table that stands in for the density the part file does not give.
    pub density: Option<&'static Density>,
    /// The load cases, also those taken out or put aside. The setup as the knobs stand has those in force.
    pub loads: Vec<LoadRow>,
    /// Fingers and tip to go back to from parallel closing.
    pub(super) before_parallel: Option<(FingerCount, Tip)>,
    /// Where marks are saved.
    pub grasp_path: PathBuf,
    pub(super) quit_when_saved: bool,
    pub(super) draft: Option<Entry>,
    /// Marks taken away, the last uppermost; marking its grasp again brings one back with its name and note. Those that are
    /// in the file are taken out of it when it is saved.
    pub(super) lifted: Vec<Mark>,
    /// What changed on disk and was not read again.
    pub on_disk: OnDisk,
    /// Size of the screen, columns and rows, for page steps.
    pub size: (u16, u16),
}

impl State {
    /// A workbench with nothing ranked yet. Loads the part lacks something for are put aside.
    ///
    /// # Errors
    /// A setup the part does not allow.
    pub fn new(options: &super::Options) -> Result<Self, String> {
        let loads: Vec<LoadRow> = options.setup.loads.iter().cloned().map(LoadRow::new).collect();
        let setup = Setup { loads: loads::in_force(&loads, &options.part), ..options.setup.clone() };
        let scene = Arc::new(Scene::new(Arc::clone(&options.part), setup).map_err(|fault| fault.to_string())?);
        Ok(Self {
            order: Order { scene, key: Key::Quality, listing: Listing::Families },
            shown: None,
            asked: None,
            job: Job::Idle,
            selected: 0,
            filter: Filter::default(),
            anchor: None,
            reading: None,
            hand: None,
            beside: Vec::new(),
            marks: Vec::new(),
            next_mark: 1,
            layers: Vec::new(),
            message: loads::told_aside(&loads, &options.part),
            cones: false,
            view: View::default(),
            panel: Panel::Table,
            look: Look {
                color: options.color == ColorChoice::Always,
                marker: options.marker.unwrap_or(Marker::Ascii),
                aspect: 2.0,
                utf8: true,
            },
            opened: Opened {
                part: Arc::clone(&options.part),
                friction: options.setup.friction.clone(),
                setup: options.setup.clone(),
            },
            density: None,
            loads,
            before_parallel: None,
            grasp_path: options.grasp_path.clone(),
            quit_when_saved: false,
            draft: None,
            lifted: Vec::new(),
            on_disk: OnDisk::default(),
            size: (80, 24),
        })
    }

    /// The start page. Until a part is chosen, one of those that come with the program lies unseen behind it.
    ///
    /// # Errors
    /// That part cannot be used, which would be a fault of the program.
    pub fn start(options: &super::StartOptions) -> Result<Self, String> {
        let demo = super::demo::PARTS[0];
        let (part, _) =
            crate::file::part_from_text(Path::new(demo.file), demo.text).map_err(|fault| fault.to_string())?;
        let mut state = Self::new(&super::Options {
            part_path: PathBuf::from(demo.file),
            setup_path: None,
            part: Arc::new(part),
            setup: Setup::default(),
            grasp_path: PathBuf::new(),
            color: options.color,
            marker: options.marker,
            overrides: super::Overrides::default(),
        })?;
        state.layers.push(Layer::Start(StartPage::new(options.found.clone())));
        Ok(state)
    }

    /// The setup as the knobs stand.
    pub fn setup(&self) -> &Setup {
        self.order.scene.setup()
    }

    /// The rows that are listed, as numbers in the ranking.
    pub fn listed(&self) -> Vec<usize> {
        let Some(shown) = &self.shown else { return Vec::new() };
        (0..shown.ranking.grasps.len()).filter(|&row| self.filter.lists(shown, row)).collect()
    }

    /// Rows of the list.
    pub fn rows(&self) -> usize {
        self.listed().len()
    }

    /// The selected row; nothing when it is not listed.
    pub fn row(&self) -> Option<&Listed> {
        let shown = self.shown.as_ref()?;
        let row = shown.ranking.grasps.get(self.selected)?;
        self.filter.lists(shown, self.selected).then_some(row)
    }

    /// Where the fingers of the grasp stand that is read: the one in hand, else the selected one, else the one last selected.
    pub fn spots(&self) -> Option<Vec<Spot>> {
        let in_hand = self.hand.as_ref().filter(|_| by_hand::in_hand(self)).map(|hand| hand.now.spots.clone());
        let read = || self.reading.as_ref().map(|reading| reading.grasp.spots.clone());
        in_hand.or_else(|| self.row().map(|row| row.grasp.spots.clone())).or_else(read)
    }

    /// True when the list on the screen belongs to other knobs than those that stand now.
    pub fn is_old(&self) -> bool {
        self.shown.as_ref().is_some_and(|shown| Some(shown.generation) != self.asked)
    }

    /// Marks not in the file as they stand here.
    pub fn unsaved(&self) -> usize {
        self.marks.iter().filter(|mark| !mark.saved).count()
    }

    /// Grasps of the file that are to be taken out of it.
    pub fn removals(&self) -> usize {
        self.lifted.iter().filter(|mark| mark.stored.is_some()).count()
    }

    /// The mark on a grasp.
    pub fn mark_on(&self, spots: &[Spot]) -> Option<&Mark> {
        self.marks.iter().find(|mark| mark.keep.grasp.spots == spots)
    }

    /// The mark that marking a grasp is about: the one made in this run, else the one saved under the knobs as they stand.
    pub(super) fn mark_here(&self, spots: &[Spot]) -> Option<usize> {
        let on = |mark: &Mark| mark.keep.grasp.spots == spots;
        let own = self.marks.iter().position(|mark| on(mark) && mark.stored.is_none());
        let alike = |mark: &Mark| same_terms(&mark.keep.setup, self.setup());
        own.or_else(|| self.marks.iter().position(|mark| on(mark) && alike(mark)))
    }

    /// Reads the selected grasp again; while nothing is listed, the one last selected, so that it can be seen how it
    /// comes open.
    pub(super) fn read(&mut self) {
        let last = || self.reading.as_ref().map(|reading| reading.grasp.spots.clone());
        let spots = self.spots().or_else(last);
        self.reading = spots.and_then(|spots| Reading::of(&self.order.scene, &spots));
    }

    /// Puts a ranking on the screen and keeps the selection on the user's grasp: the same spots, else the same family,
    /// else the nearest rank.
    pub(super) fn show(&mut self, ranking: Arc<Ranking>, generation: u64) {
        let unbeaten = unbeaten(&ranking.grasps);
        let shown = Shown { ranking, order: self.order.clone(), generation, unbeaten };
        let rows = &shown.ranking.grasps;
        self.selected = match &self.anchor {
            None => 0,
            Some(anchor) => {
                let same = rows.iter().position(|row| row.grasp.spots == anchor.spots);
                let family = || {
                    let family = family_of(&anchor.spots, self.order.scene.places())?;
                    rows.iter().position(|row| row.family == family)
                };
                let near = || reload::nearest(rows, self.order.scene.part(), anchor.places.as_deref()?);
                same.or_else(family).or_else(near).unwrap_or(self.selected.min(rows.len().saturating_sub(1)))
            }
        };
        self.shown = Some(shown);
        self.stay_listed();
        self.read();
    }

    /// Moves the selection to the nearest listed row where its own is not listed.
    pub(super) fn stay_listed(&mut self) {
        let listed = self.listed();
        if !listed.is_empty() && !listed.contains(&self.selected) {
            let next = listed.partition_point(|row| *row < self.selected).min(listed.len() - 1);
            self.selected = listed[next];
        }
    }

    /// Selects the row so many listed rows farther down for the user.
    pub(super) fn step(&mut self, by: isize) {
        let listed = self.listed();
        let Some(last) = listed.len().checked_sub(1) else { return };
        let at = listed.partition_point(|row| *row < self.selected);
        self.select(listed[at.saturating_add_signed(by).min(last)]);
    }

    /// Selects a row for the user, who expects to stay on that grasp.
    pub(super) fn select(&mut self, row: usize) {
        let rows = self.shown.as_ref().map_or(0, |shown| shown.ranking.grasps.len());
        self.selected = row.min(rows.saturating_sub(1));
        self.anchor = self.row().map(|row| Anchor { spots: row.grasp.spots.clone(), places: None });
        self.read();
    }
}

/// True when two setups score a grasp alike: what only steers the search does not count.
fn same_terms(a: &Setup, b: &Setup) -> bool {
    let scale = |setup: &Setup| (setup.search.torque_scale, setup.search.cone_sides);
    a.friction == b.friction && a.hand == b.hand && a.loads == b.loads && scale(a) == scale(b)
}
