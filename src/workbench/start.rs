//! The start page: what this is, the parts that lie here, those that come with the program, how to bring a drawing.

use super::action::Action;
use super::demo;
use super::state::{Layer, State};
use super::update::Effect;
use std::path::PathBuf;

/// A part file found where the program was started.
#[derive(Debug, Clone, PartialEq)]
pub struct Found {
    /// Where.
    pub path: PathBuf,
    /// The part's name, where the file can be read that far.
    pub name: Option<String>,
}

/// The page.
#[derive(Debug, Clone, PartialEq)]
pub struct StartPage {
    /// Part files found, in order of their paths.
    pub found: Vec<Found>,
    /// Selected row: the files found, then the parts that come with the program.
    pub at: usize,
}

/// What was chosen.
#[derive(Debug, Clone, PartialEq)]
pub enum Choice {
    /// A part file that is here.
    File(PathBuf),
    /// A part that comes with the program; its number in [`demo::PARTS`].
    Demo(usize),
}

impl StartPage {
    /// A page with the first row selected.
    pub fn new(found: Vec<Found>) -> Self {
        Self { found, at: 0 }
    }

    /// Rows that can be chosen.
    pub fn rows(&self) -> usize {
        self.found.len() + demo::PARTS.len()
    }

    /// The choice a row stands for.
    pub fn choice(&self, at: usize) -> Option<Choice> {
        match self.found.get(at) {
            Some(found) => Some(Choice::File(found.path.clone())),
            None => Some(at - self.found.len()).filter(|demo| *demo < demo::PARTS.len()).map(Choice::Demo),
        }
    }

    /// The selected row is a part that has to be written first.
    pub fn writes_first(&self) -> bool {
        matches!(self.choice(self.at), Some(Choice::Demo(_)))
    }
}

/// Carries out an action on the page.
pub(super) fn act(state: &mut State, action: Action) -> Vec<Effect> {
    let page_step = usize::from(state.size.1 / 2).max(1);
    let Some(Layer::Start(page)) = state.layers.last_mut() else { return Vec::new() };
    let last = page.rows().saturating_sub(1);
    match action {
        Action::Down => page.at = (page.at + 1).min(last),
        Action::Up => page.at = page.at.saturating_sub(1),
        Action::PageDown => page.at = (page.at + page_step).min(last),
        Action::PageUp => page.at = page.at.saturating_sub(page_step),
        Action::First => page.at = 0,
        Action::Last => page.at = last,
        Action::Accept => return page.choice(page.at).map(Effect::Open).into_iter().collect(),
        Action::Help => state.layers.push(Layer::Help { top: 0 }),
        Action::Quit => return vec![Effect::Quit { recover: false }],
        _ => {}
    }
    Vec::new()
}
