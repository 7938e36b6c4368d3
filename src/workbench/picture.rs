//! Which picture of the selected grasp the outline pane shows, and what of it: the load case, the side the wrench set is
//! seen from, the zoom.

use super::action::Action;
use super::state::{Panel, State};

/// What the outline pane shows of the selected grasp.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Hash)]
pub enum Picture {
    /// Contacts with their normals, fingers at true size.
    #[default]
    Fingers,
    /// The finger forces that hold a load case.
    Forces,
    /// Moment labels.
    Labels,
    /// The acceleration envelope.
    Envelope,
    /// Where each finger may move.
    Room,
    /// The wrench set with the largest ball.
    Wrenches,
    /// Quality and squeeze over friction.
    Friction,
}

impl Picture {
    /// In the order of their keys.
    pub const ALL: [Self; 7] =
        [Self::Fingers, Self::Forces, Self::Labels, Self::Envelope, Self::Room, Self::Wrenches, Self::Friction];

    /// The word for it.
    pub fn word(self) -> &'static str {
        match self {
            Self::Fingers => "fingers",
            Self::Forces => "forces",
            Self::Labels => "moment labels",
            Self::Envelope => "accelerations",
            Self::Room => "room",
            Self::Wrenches => "wrenches",
            Self::Friction => "friction",
        }
    }

    /// The part itself is drawn, so that one contact can be its middle.
    pub fn shows_contacts(self) -> bool {
        matches!(self, Self::Fingers | Self::Forces | Self::Labels | Self::Room)
    }
}

/// Where the wrench set is seen from.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Side {
    /// Force x to the right, force y up.
    #[default]
    Forces,
    /// Force x to the right, torque up.
    TorqueOverX,
    /// Force y to the right, torque up.
    TorqueOverY,
    /// The weakest direction to the right.
    Weakest,
}

impl Side {
    fn next(self) -> Self {
        match self {
            Self::Forces => Self::TorqueOverX,
            Self::TorqueOverX => Self::TorqueOverY,
            Self::TorqueOverY => Self::Weakest,
            Self::Weakest => Self::Forces,
        }
    }
}

/// What the outline pane shows, and how near.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct View {
    /// The picture.
    pub picture: Picture,
    /// Load case whose forces are shown; the one that asks most until another is chosen.
    pub case: Option<usize>,
    /// Where the wrench set is seen from.
    pub side: Side,
    zoom: u8,
    contact: Option<usize>,
}

/// Zoom steps: 1.5 to the ninth power is 38.
const MOST_STEPS: u8 = 9;
/// Steps taken at once when a contact is picked in the whole picture.
const PICKED_STEPS: u8 = 3;

impl View {
    /// How many times larger than the whole part the picture is, 1 to 38.4.
    pub fn zoom(&self) -> f64 {
        1.5_f64.powi(i32::from(self.zoom))
    }

    /// The contact in the middle of the picture, from 0, of so many.
    pub fn contact(&self, contacts: usize) -> Option<usize> {
        self.contact.filter(|contact| *contact < contacts && self.picture.shows_contacts())
    }

    /// Back to the whole part.
    pub(super) fn whole(&mut self) {
        (self.zoom, self.contact) = (0, None);
    }
}

/// The picture has more than one side or case to step through.
pub(super) fn steps(state: &State) -> bool {
    match state.view.picture {
        Picture::Forces => state.setup().loads.len() > 1,
        Picture::Wrenches => state.reading.is_some(),
        _ => false,
    }
}

/// The picture can be seen from nearer.
pub(super) fn zooms(state: &State) -> bool {
    state.view.picture != Picture::Friction
}

/// The picture is nearer than the whole part.
pub(super) fn zoomed(state: &State) -> bool {
    zooms(state) && state.view.zoom > 0
}

/// The picture can have a contact in its middle.
pub(super) fn has_contacts(state: &State) -> bool {
    state.reading.is_some() && state.view.picture.shows_contacts()
}

/// Carries out what concerns the picture alone.
pub(super) fn act(state: &mut State, action: Action) {
    let contacts = state.reading.as_ref().map_or(0, |reading| reading.grasp.contacts.len());
    let holding = state.reading.as_ref().and_then(|reading| reading.assessment.holding.as_ref());
    let shown_case = holding.map(|holding| (holding.cases.len(), holding.governing));
    let view = &mut state.view;
    match action {
        Action::Show(picture) => {
            view.picture = picture;
            state.panel = Panel::Outline;
        }
        Action::NextSide if view.picture == Picture::Wrenches => view.side = view.side.next(),
        Action::NextSide => {
            if let Some((cases, governing)) = shown_case {
                let now = view.case.filter(|case| *case < cases).unwrap_or(governing);
                view.case = Some((now + 1) % cases);
            }
        }
        Action::ZoomIn => view.zoom = (view.zoom + 1).min(MOST_STEPS),
        Action::ZoomOut => view.zoom = view.zoom.saturating_sub(1),
        Action::NextContact => match view.contact.map_or(0, |contact| contact + 1) {
            next if next < contacts => {
                view.contact = Some(next);
                view.zoom = if view.zoom == 0 { PICKED_STEPS } else { view.zoom };
            }
            _ => view.whole(),
        },
        Action::Close => view.whole(),
        _ => {}
    }
}
