//! What is seen: the terminal workbench.
//!
//! [`update()`] carries inputs into the [`State`] and returns effects, without any I/O; [`view`] draws from the state
//! alone; `run` owns the threads, the terminal and the files. All keys stand in one table ([`action::TABLE`]).

pub mod action;
pub mod by_hand;
pub mod compare;
mod entry;
pub mod floors;
mod guard;
mod knobs;
pub mod loads;
mod look;
mod marks;
pub mod picture;
mod recovery;
mod run;
pub mod state;
mod tables;
mod terminal;
pub mod update;
pub mod view;

pub use action::Key;
pub use look::{ColorChoice, Look, Marker, is_utf8};
pub use run::run;
pub use state::State;
pub use update::{Effect, Input, update};

use crate::part::Part;
use crate::search;
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
    pub setup: search::Setup,
    /// Where marks are saved.
    pub grasp_path: PathBuf,
    /// Colour.
    pub color: ColorChoice,
    /// Marker of the outline; ASCII unless told.
    pub marker: Option<Marker>,
}
