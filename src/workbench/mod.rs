//! What is seen and touched: state, update, view, terminal.

use crate::part::Part;
use crate::search::Setup;
use std::path::PathBuf;
use std::sync::Arc;

/// When colours are used.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum ColorChoice {
    /// When the terminal has them and NO_COLOR is not set.
    Auto,
    /// Always.
    Always,
    /// Never.
    Never,
}

/// What the outline is drawn with.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Marker {
    /// Plain ASCII.
    Ascii,
    /// Line-drawing characters.
    Line,
    /// Braille dots.
    Braille,
}

/// What the workbench opens with.
#[derive(Debug, Clone)]
pub struct Options {
    /// The part file.
    pub part_path: PathBuf,
    /// The setup file, when one was given.
    pub setup_path: Option<PathBuf>,
    /// The part.
    pub part: Arc<Part>,
    /// The setup in force, command-line values included.
    pub setup: Setup,
    /// Where grasps are kept.
    pub grasp_path: PathBuf,
    /// Colours.
    pub color: ColorChoice,
    /// Marker, when one was given.
    pub marker: Option<Marker>,
}

/// Runs the workbench until it is left.
///
/// # Errors
/// The terminal failed.
pub fn run(options: Options) -> std::io::Result<()> {
    let _ = options;
    Err(std::io::Error::other("the workbench is not part of this build"))
}
