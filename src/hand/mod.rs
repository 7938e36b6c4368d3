//! What holds the part: the fingers, and where on the outline they fit.

mod apart;
mod crossing;
mod jaw_run;
mod jaws;
mod pad;
mod pin;
mod stretch;

pub use apart::apart;
pub use jaw_run::{JawRun, jaw_runs};
pub use jaws::{JawFault, Jaws, PARALLEL_RAD, jaws_at};
pub use stretch::{Stretch, stretch_around, stretches};

/// How many fingers the hand has: two to six.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct FingerCount(u8);

impl FingerCount {
    /// Fewest fingers that can close a grasp.
    pub const LEAST: usize = 2;
    /// Most fingers the program takes.
    pub const MOST: usize = 6;

    /// A count from two to six, or nothing.
    pub fn new(count: usize) -> Option<Self> {
        if (Self::LEAST..=Self::MOST).contains(&count) { Some(Self(count as u8)) } else { None }
    }

    /// The number.
    pub fn get(self) -> usize {
        usize::from(self.0)
    }
}

/// What the end of each finger is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Tip {
    /// A cylinder standing on the part plane; touches an edge at one point.
    Pin,
    /// A flat face; lies flush on a straight edge.
    Pad,
}

/// How the fingers may move toward the part.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Closing {
    /// Each finger on its own.
    Free,
    /// Two pads on one line, facing each other.
    Parallel,
}

/// How the squeeze is shared among the fingers.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Drive {
    /// Each finger's force can be set, up to the limit.
    Adjustable,
    /// All fingers press with one and the same force.
    Equal,
}

/// The hand. Lengths in mm, forces in N.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Hand {
    /// Number of fingers.
    pub fingers: FingerCount,
    /// Kind of tip.
    pub tip: Tip,
    /// How they close.
    pub closing: Closing,
    /// Radius of a pin; 0 is a point.
    pub pin_radius_mm: f64,
    /// Width of a pad along the edge.
    pub pad_width_mm: f64,
    /// Depth of a pad away from the edge.
    pub pad_depth_mm: f64,
    /// Height of contact along the edge face.
    pub bite_mm: f64,
    /// Smallest and largest distance between the faces of parallel pads.
    pub opening_mm: [f64; 2],
    /// Distance kept from both ends of an edge.
    pub corner_clearance_mm: f64,
    /// Distance kept between two fingers.
    pub gap_mm: f64,
    /// Largest normal force of one finger; none when not stated.
    pub force_limit_n: Option<f64>,
    /// How the squeeze is shared.
    pub drive: Drive,
}

impl Default for Hand {
    /// Three points without size: what can be said of a part before anything is known of the fingers.
    fn default() -> Self {
        Self {
            fingers: FingerCount(3),
            tip: Tip::Pin,
            closing: Closing::Free,
            pin_radius_mm: 0.0,
            pad_width_mm: 12.0,
            pad_depth_mm: 8.0,
            bite_mm: 6.0,
            opening_mm: [0.0, 120.0],
            corner_clearance_mm: 0.0,
            gap_mm: 0.0,
            force_limit_n: None,
            drive: Drive::Adjustable,
        }
    }
}
