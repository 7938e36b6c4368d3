//! A scene: one part under one setup, with everything that stays fixed while grasps are looked at.

use super::setup::{Setup, SetupFault};
use super::sites;
use crate::hand::{self, Stretch, Tip};
use crate::mechanics::assess::Doubt;
use crate::mechanics::{Assessment, Contact, Frame, Wrenches};
use crate::part::{Edge, EdgeId, Part};
use std::sync::Arc;

/// The place of one finger: an edge and the distance from its first vertex.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Spot {
    /// Edge, numbered as in the part file.
    pub edge: EdgeId,
    /// Distance from the edge's first vertex, mm.
    pub along_mm: f64,
}

/// Why fingers cannot stand where they are told to.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum PlaceFault {
    /// No such edge.
    #[error("there is no ring {} edge {}", .0.ring, .0.edge)]
    NoSuchEdge(EdgeId),
    /// Not on the edge.
    #[error("ring {} edge {} is {length_mm} mm long; {along_mm} mm is not on it", .edge.ring, .edge.edge)]
    OffEdge {
        /// Edge.
        edge: EdgeId,
        /// Where.
        along_mm: f64,
        /// How long the edge is.
        length_mm: f64,
    },
    /// Too few or too many fingers.
    #[error("a grasp has two to six fingers, not {0}")]
    FingerCount(usize),
}

/// Fingers placed on the part, ready to be assessed.
#[derive(Debug, Clone, PartialEq)]
pub struct Grasp {
    /// Where each finger stands.
    pub spots: Vec<Spot>,
    /// Its contacts, finger after finger.
    pub contacts: Vec<Contact>,
    /// Curvature of each finger's edge, 1/mm; 0 where it is straight, positive where the material is inside the bend.
    pub curvatures: Vec<f64>,
    /// Distance of each finger to the end of its stretch, mm; below 0 when it stands where it may not.
    pub rooms_mm: Vec<f64>,
    /// Pairs of fingers that stand nearer to each other than the hand's gap allows.
    pub too_near: Vec<(usize, usize)>,
}

impl Grasp {
    /// True when every finger stands on a stretch and keeps its distance.
    pub fn fits(&self) -> bool {
        self.too_near.is_empty() && self.rooms_mm.iter().all(|&room| room >= 0.0)
    }
}

/// Sites a ranking takes: with more, memory would run out before patience.
const MOST_SITES: f64 = 2e6;

/// One part under one setup.
#[derive(Debug, Clone)]
pub struct Scene {
    part: Arc<Part>,
    setup: Setup,
    frame: Frame,
    stretches: Vec<Stretch>,
}

impl Scene {
    /// Works out the frame and the stretches. The setup must have no [`Setup::faults`].
    ///
    /// # Errors
    /// A setup that asks for something not built yet, or for more sites than a ranking takes.
    pub fn new(part: Arc<Part>, setup: Setup) -> Result<Self, SetupFault> {
        let not_yet = |key: &str, value: &str, mend: &str| SetupFault {
            key: key.to_owned(),
            value: value.to_owned(),
            mend: mend.to_owned(),
        };
        if setup.hand.tip == Tip::Pad {
            return Err(not_yet("hand.tip", "pad", "pads are not built yet; set it to \"pin\""));
        }
        if setup.hand.closing == hand::Closing::Parallel {
            return Err(not_yet("hand.closing", "parallel", "parallel closing is not built yet; set it to \"free\""));
        }
        let frame = Frame { about: part.com(), scale_mm: setup.search.torque_scale.mm(&part) };
        let stretches = hand::stretches(&part, &setup.hand);
        let spacing_mm = setup.search.spacing_for(&part);
        let sites: f64 = stretches.iter().map(|stretch| sites::count_on(stretch, spacing_mm)).sum();
        if sites > MOST_SITES {
            let least = stretches.iter().map(Stretch::length_mm).sum::<f64>() / MOST_SITES;
            return Err(SetupFault {
                key: "search.spacing_mm".to_owned(),
                value: spacing_mm.to_string(),
                mend: format!("that makes {sites:.1e} sites, more than {MOST_SITES:.0e}; give at least {least:.1e} mm"),
            });
        }
        Ok(Self { part, setup, frame, stretches })
    }

    /// The part.
    pub fn part(&self) -> &Arc<Part> {
        &self.part
    }

    /// The setup.
    pub fn setup(&self) -> &Setup {
        &self.setup
    }

    /// The frame wrenches are taken in.
    pub fn frame(&self) -> &Frame {
        &self.frame
    }

    /// Where fingers fit, in order of edge and position.
    pub fn stretches(&self) -> &[Stretch] {
        &self.stretches
    }

    /// Places fingers.
    ///
    /// # Errors
    /// An edge that is not there, a position off its edge, a wrong number of fingers. Standing where a finger does not
    /// fit is no error: it shows in [`Grasp::rooms_mm`] and [`Grasp::too_near`].
    pub fn grasp(&self, spots: &[Spot]) -> Result<Grasp, PlaceFault> {
        if hand::FingerCount::new(spots.len()).is_none() {
            return Err(PlaceFault::FingerCount(spots.len()));
        }
        let mut contacts = Vec::with_capacity(spots.len());
        let mut curvatures = Vec::with_capacity(spots.len());
        let mut rooms_mm = Vec::with_capacity(spots.len());
        for spot in spots {
            let edge = self.part.outline().edge(spot.edge).ok_or(PlaceFault::NoSuchEdge(spot.edge))?;
            let length_mm = edge.length_mm();
            // A position that went through a file in decimal may overshoot the end by rounding.
            if !(spot.along_mm >= -1e-9 * length_mm && spot.along_mm <= length_mm * (1.0 + 1e-9)) {
                return Err(PlaceFault::OffEdge { edge: spot.edge, along_mm: spot.along_mm, length_mm });
            }
            contacts.push(self.contact(edge, spot.along_mm));
            curvatures.push(edge.curvature());
            let room = hand::stretch_around(&self.stretches, spot.edge, spot.along_mm)
                .map_or(-1.0, |stretch| stretch.room_mm(spot.along_mm).max(0.0));
            rooms_mm.push(room);
        }
        let mut too_near = Vec::new();
        for (i, a) in contacts.iter().enumerate() {
            for (j, b) in contacts.iter().enumerate().skip(i + 1) {
                if !hand::apart(&self.setup.hand, (a.point, a.normal), (b.point, b.normal)) {
                    too_near.push((i, j));
                }
            }
        }
        Ok(Grasp { spots: spots.to_vec(), contacts, curvatures, rooms_mm, too_near })
    }

    /// The contact a finger makes at a place on an edge. A pad lies flush on a straight edge; on an arc it touches at one
    /// point, as a pin does.
    pub(super) fn contact(&self, edge: &Edge, along_mm: f64) -> Contact {
        let flush = self.setup.hand.tip == Tip::Pad && edge.arc().is_none();
        Contact {
            point: edge.point_at(along_mm),
            normal: edge.normal_at(along_mm),
            mu: self.part.mu_on(edge.id(), self.setup.friction.mu),
            half_width_mm: if flush { self.setup.hand.pad_width_mm / 2.0 } else { 0.0 },
        }
    }

    /// Wrenches of a grasp in the scene's frame.
    pub fn wrenches(&self, grasp: &Grasp) -> Wrenches {
        Wrenches::new(&grasp.contacts, &self.frame).on_curves(&grasp.curvatures)
    }

    /// Reads a grasp and confirms the reading by the second way.
    pub fn assess(&self, grasp: &Grasp) -> (Assessment, Vec<Doubt>) {
        let wrenches = self.wrenches(grasp);
        let mu = self.setup.friction.mu;
        let assessment = Assessment::of(&wrenches, &self.frame, mu, &grasp.rooms_mm);
        let doubts = assessment.doubts(&wrenches, &self.frame, mu);
        (assessment, doubts)
    }
}
