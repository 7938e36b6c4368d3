//! What is seen: the terminal workbench.
//!
//! [`update()`] carries inputs into the [`State`] and returns effects, without any I/O; [`view`] draws from the state
//! alone; `run` owns the threads, the terminal and the files. All keys stand in one table ([`action::TABLE`]).

pub mod action;
pub mod by_hand;
pub mod compare;
pub mod demo;
mod entry;
pub mod floors;
mod guard;
pub mod kept;
mod keyboard;
mod knobs;
pub mod loads;
mod look;
mod marks;
mod opening;
pub mod picture;
mod recovery;
pub mod reload;
mod run;
mod shown;
pub mod start;
pub mod state;
mod tables;
mod terminal;
mod told;
pub mod update;
pub mod view;
mod watch;

pub use action::Key;
pub use look::{ColorChoice, Look, Marker, is_utf8};
pub use run::{run, run_start};
pub use state::State;
pub use update::{Effect, Input, update};

use crate::part::Part;
use crate::search::Setup;
use std::fmt;
use std::path::PathBuf;
use std::sync::Arc;

/// What the workbench is opened with.
#[derive(Debug, Clone)]
pub struct Options {
    /// The part file.
    pub part_path: PathBuf,
    /// The setup file, if one was given.
    pub setup_path: Option<PathBuf>,
    /// The part.
    pub part: Arc<Part>,
    /// The setup in force: file and command line together.
    pub setup: Setup,
    /// Where marks are saved.
    pub grasp_path: PathBuf,
    /// Colour.
    pub color: ColorChoice,
    /// Marker of the outline; ASCII unless told.
    pub marker: Option<Marker>,
    /// What the command line says, to be laid over the setup file when it is read again.
    pub overrides: Overrides,
}

type Lay = dyn Fn(Setup) -> Result<Setup, Vec<String>> + Send + Sync;

/// What the command line says, laid over a setup; by default it says nothing.
#[derive(Clone, Default)]
pub struct Overrides(Option<Arc<Lay>>);

impl Overrides {
    /// Lays what is said over a setup, or says line by line why the two do not go together.
    pub fn new(lay: impl Fn(Setup) -> Result<Setup, Vec<String>> + Send + Sync + 'static) -> Self {
        Self(Some(Arc::new(lay)))
    }

    /// The setup with what the command line says.
    ///
    /// # Errors
    /// Why they do not go together.
    pub fn over(&self, setup: Setup) -> Result<Setup, Vec<String>> {
        match &self.0 {
            Some(lay) => lay(setup),
            None => Ok(setup),
        }
    }
}

impl fmt::Debug for Overrides {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(if self.0.is_some() { "Overrides(..)" } else { "Overrides" })
    }
}

/// What the start page is opened with: everything but the part.
#[derive(Debug, Clone)]
pub struct StartOptions {
    /// Part files found.
    pub found: Vec<start::Found>,
    /// Folder a part that comes with the program is written into.
    pub folder: PathBuf,
    /// The setup file, if one was given.
    pub setup_path: Option<PathBuf>,
    /// What the command line says.
    pub overrides: Overrides,
    /// Where marks are saved, if it was said; beside the part otherwise.
    pub grasp_path: Option<PathBuf>,
    /// Colour.
    pub color: ColorChoice,
    /// Marker of the outline; ASCII unless told.
    pub marker: Option<Marker>,
}
