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

use crate::part::EdgeLimit;

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
    /// Height of contact along the edge face; see [`Hand::bite_for`] where it is not stated.
    pub bite_mm: Option<f64>,
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

/// Height of contact where none is stated, mm.
const USUAL_BITE_MM: f64 = 6.0;

impl Hand {
    /// Height of contact on a part of a thickness, mm: as stated, or else 6 mm and never more than the thickness.
    pub fn bite_for(&self, thickness_mm: Option<f64>) -> f64 {
        self.bite_mm.unwrap_or_else(|| thickness_mm.map_or(USUAL_BITE_MM, |thickness| thickness.min(USUAL_BITE_MM)))
    }

    /// What carries a squeeze on one finger: the face of a pad that lies flush, mm2, or the line of a pin, mm.
    pub fn bearing(&self, flush: bool, thickness_mm: Option<f64>) -> Bearing {
        let bite_mm = self.bite_for(thickness_mm);
        if flush { Bearing::Face { mm2: self.pad_width_mm * bite_mm } } else { Bearing::Line { mm: bite_mm } }
    }
}

/// What carries the squeeze of one finger.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Bearing {
    /// A flush face: the squeeze over it is a pressure, N/mm2 = MPa.
    Face {
        /// Its area.
        mm2: f64,
    },
    /// A line across the edge: the squeeze over it is a line load, N/mm.
    Line {
        /// Its length.
        mm: f64,
    },
}

impl Bearing {
    /// What a squeeze comes to: MPa on a face, N/mm on a line.
    pub fn load(self, squeeze_n: f64) -> f64 {
        match self {
            Self::Face { mm2 } => squeeze_n / mm2,
            Self::Line { mm } => squeeze_n / mm,
        }
    }

    /// The largest squeeze an edge bears here without being marked, N; nothing where its limits do not say.
    pub fn most_n(self, limit: EdgeLimit) -> Option<f64> {
        match self {
            Self::Face { mm2 } => limit.face_mpa.map(|mpa| mpa * mm2),
            Self::Line { mm } => limit.line_n_per_mm.map(|n_per_mm| n_per_mm * mm),
        }
    }

    /// The unit of [`Bearing::load`].
    pub fn unit(self) -> &'static str {
        match self {
            Self::Face { .. } => "MPa",
            Self::Line { .. } => "N/mm",
        }
    }
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
            bite_mm: None,
            opening_mm: [0.0, 120.0],
            corner_clearance_mm: 0.0,
            gap_mm: 0.0,
            force_limit_n: None,
            drive: Drive::Adjustable,
        }
    }
}
