//! A scene: one part under one setup, with everything that stays fixed while grasps are looked at.

use super::setup::{Setup, SetupFault};
use super::sites;
use crate::hand::{self, Bearing, Closing, Drive, JawFault, JawRun, Jaws, Stretch, Tip};
use crate::mechanics::assess::{self, Doubt};
use crate::mechanics::holding;
use crate::mechanics::load::Body;
use crate::mechanics::spatial::{Hold, Pyramid, Wrench};
use crate::mechanics::{Assessment, Case, Contact, Frame, Holding, Limit, LimitedBy, LoadCase, Verdict, Wrenches};
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
    /// Parallel jaws are two.
    #[error("parallel jaws are two fingers, not {0}")]
    JawCount(usize),
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
    /// With parallel closing: how the jaws stand, or why jaws cannot stand so.
    pub jaws: Option<Result<Jaws, JawFault>>,
}

impl Grasp {
    /// True when every finger stands on a stretch and keeps its distance, and parallel jaws face each other.
    pub fn fits(&self) -> bool {
        let jaws = self.jaws.as_ref().is_none_or(Result::is_ok);
        jaws && self.too_near.is_empty() && self.rooms_mm.iter().all(|&room| room >= 0.0)
    }
}

/// Sites a ranking takes: with more, memory would run out before patience.
const MOST_SITES: f64 = 2e6;

/// Where a finger of a ranking may be: a stretch, or the one position of a finger that stays.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Place {
    /// The positions a ranking may take.
    pub span: Stretch,
    /// The stretch they lie on: its ends are what room is counted to.
    pub whole: Stretch,
}

/// One part under one setup, perhaps with some fingers that stay where they are.
#[derive(Debug, Clone)]
pub struct Scene {
    part: Arc<Part>,
    setup: Setup,
    frame: Frame,
    stretches: Vec<Stretch>,
    kept: Vec<Spot>,
    places: Vec<Place>,
    jaw_runs: Vec<JawRun>,
    cases: Vec<Case>,
    pyramid: Pyramid,
    /// Half the bite over the torque scale; 0 for a part without a thickness.
    half_height: f64,
}

impl Scene {
    /// Works out the frame and the stretches. The setup must have no [`Setup::faults`].
    ///
    /// # Errors
    /// A setup the part does not allow ([`Setup::faults_with`]), or one with more sites than a ranking takes.
    pub fn new(part: Arc<Part>, setup: Setup) -> Result<Self, SetupFault> {
        Self::keeping(part, setup, &[])
    }

    /// The same, with fingers that every grasp of a ranking keeps where they are.
    ///
    /// # Errors
    /// As [`Scene::new`], and a finger that does not fit where it is to stay, more of them than there are fingers, any with
    /// parallel jaws.
    pub fn keeping(part: Arc<Part>, setup: Setup, kept: &[Spot]) -> Result<Self, SetupFault> {
        if let Some(fault) = setup.faults_with(&part).into_iter().next() {
            return Err(fault);
        }
        let frame = Frame { about: part.com(), scale_mm: setup.search.torque_scale.mm(&part) };
        let stretches = hand::stretches(&part, &setup.hand);
        let places = places(&stretches, kept, &setup)?;
        let spacing_mm = setup.search.spacing_for(&part);
        let jaw_runs = match setup.hand.closing {
            Closing::Free => Vec::new(),
            Closing::Parallel => hand::jaw_runs(&part, &setup.hand, &stretches),
        };
        let lengths: Vec<f64> = match setup.hand.closing {
            Closing::Free => stretches.iter().map(Stretch::length_mm).collect(),
            // A site for each of two fingers.
            Closing::Parallel => jaw_runs.iter().flat_map(|run| [run.length_mm(); 2]).collect(),
        };
        let sites: f64 = lengths.iter().map(|&length_mm| sites::count_on(length_mm, spacing_mm)).sum();
        if sites > MOST_SITES {
            let least = lengths.iter().sum::<f64>() / MOST_SITES;
            return Err(SetupFault {
                key: "search.spacing_mm".to_owned(),
                value: spacing_mm.to_string(),
                mend: format!("that makes {sites:.1e} sites, more than {MOST_SITES:.0e}; give at least {least:.1e} mm"),
            });
        }
        let body = Body {
            mass_kg: part.mass().map_or(0.0, |mass| mass.kg),
            polar_kg_m2: part.mass().map_or(0.0, |mass| mass.polar_kg_m2),
            com_mm: part.file_point(part.com()).into(),
        };
        let case = |load: &LoadCase| Case {
            name: load.name.clone(),
            loads: load.loads(&body, frame.scale_mm),
            squeeze_left: load.squeeze_left,
        };
        let cases = setup.loads.iter().map(case).collect();
        let in_space = part.thickness_mm().is_some();
        let pyramid = Pyramid::new(setup.search.cone_sides).filter(|_| in_space).unwrap_or_else(Pyramid::planar);
        let bite_mm = if in_space { setup.hand.bite_for(part.thickness_mm()) } else { 0.0 };
        let half_height = bite_mm / 2.0 / frame.scale_mm;
        Ok(Self { part, setup, frame, stretches, kept: kept.to_vec(), places, jaw_runs, cases, pyramid, half_height })
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

    /// Fingers that every grasp of a ranking keeps.
    pub fn kept(&self) -> &[Spot] {
        &self.kept
    }

    /// Where the fingers of a ranking may be: first the fingers that are kept, then the stretches.
    pub fn places(&self) -> &[Place] {
        &self.places
    }

    /// With parallel closing: every placement of the two jaws, as one-parameter sets.
    pub fn jaw_runs(&self) -> &[JawRun] {
        &self.jaw_runs
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
        let parallel = self.setup.hand.closing == Closing::Parallel;
        if parallel && spots.len() != 2 {
            return Err(PlaceFault::JawCount(spots.len()));
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
        let jaws = match &contacts[..] {
            [a, b] if parallel => Some(hand::jaws_at(&self.setup.hand, (a.point, a.normal), (b.point, b.normal))),
            _ => None,
        };
        Ok(Grasp { spots: spots.to_vec(), contacts, curvatures, rooms_mm, too_near, jaws })
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

    /// The load cases, ready to be put on grasps, in the setup's order.
    pub fn cases(&self) -> &[Case] {
        &self.cases
    }

    /// The fingers of a grasp in space; in the plane where the part has no thickness.
    pub fn hold(&self, wrenches: &Wrenches) -> Hold<'_> {
        Hold::of(wrenches, self.half_height, &self.pyramid, self.setup.hand.drive)
    }

    /// What fingers in space are made with: pyramid, half the bite over the torque scale, drive.
    pub(super) fn in_space(&self) -> (&Pyramid, f64, Drive) {
        (&self.pyramid, self.half_height, self.setup.hand.drive)
    }

    /// What carries the squeeze of a finger that makes this contact.
    pub fn bearing(&self, contact: &Contact) -> Bearing {
        self.setup.hand.bearing(contact.half_width_mm > 0.0, self.part.thickness_mm())
    }

    /// What the squeeze of a grasp may not exceed: the hand's limit, or less where an edge would be marked.
    pub fn limit(&self, grasp: &Grasp) -> Option<Limit> {
        let flush = grasp.contacts.iter().map(|contact| contact.half_width_mm > 0.0);
        self.limit_on(grasp.spots.iter().map(|spot| spot.edge).zip(flush))
    }

    /// The same for fingers on these edges, each lying flush or not.
    pub(super) fn limit_on(&self, edges: impl Iterator<Item = (EdgeId, bool)>) -> Option<Limit> {
        let hand = self.setup.hand.force_limit_n.map(|squeeze_n| Limit { squeeze_n, by: LimitedBy::Hand });
        let edges = edges.enumerate().filter_map(|(finger, (edge, flush))| {
            let bearing = self.setup.hand.bearing(flush, self.part.thickness_mm());
            let squeeze_n = bearing.most_n(self.part.limit_on(edge)?)?;
            Some(Limit { squeeze_n, by: LimitedBy::Edge { finger } })
        });
        hand.into_iter()
            .chain(edges)
            .reduce(|least, other| if other.squeeze_n < least.squeeze_n { other } else { least })
    }

    /// What the load cases ask of a grasp; nothing when there are none.
    pub fn holding(&self, grasp: &Grasp, wrenches: &Wrenches) -> Option<Holding> {
        if self.cases.is_empty() {
            return None;
        }
        Some(Holding::of(&self.hold(wrenches), &self.cases, self.limit(grasp)))
    }

    /// Reads a grasp and confirms the reading by the second way.
    pub fn assess(&self, grasp: &Grasp) -> (Assessment, Vec<Doubt>) {
        self.assess_with(grasp, |holding, hold| holding.doubts(hold, &self.cases))
    }

    /// The same for a row of a list: of the load cases only the governing one, which the row shows, is confirmed by the
    /// linear program; every other squeeze carries the batch solver's own proof.
    pub fn assess_for_list(&self, grasp: &Grasp) -> (Assessment, Vec<Doubt>) {
        self.assess_with(grasp, |holding, hold| holding.doubt_of_governing(hold, &self.cases).into_iter().collect())
    }

    fn assess_with(
        &self,
        grasp: &Grasp,
        confirm: impl Fn(&Holding, &Hold<'_>) -> Vec<Doubt>,
    ) -> (Assessment, Vec<Doubt>) {
        let (wrenches, mu) = (self.wrenches(grasp), self.setup.friction.mu);
        let mut assessment = Assessment::of(&wrenches, &self.frame, mu, &grasp.rooms_mm);
        let mut doubts = assessment.doubts(&wrenches, &self.frame, mu);
        if let Some(holding) = self.holding(grasp, &wrenches) {
            doubts.extend(confirm(&holding, &self.hold(&wrenches)));
            assessment.hold(holding, &wrenches, mu);
        }
        (assessment, doubts)
    }

    /// The acceleration envelope of a grasp: for even directions in the plane, degrees from +x, the largest acceleration in
    /// m/s2 that is held at the limit on top of the weight. Gravity and safety factor are those of the first load case, or
    /// those of a part that lies flat. Nothing without a limit, without a mass, or when not even the weight is held;
    /// infinite where no acceleration breaks the hold.
    pub fn envelope(&self, grasp: &Grasp, directions: usize) -> Option<Vec<(f64, f64)>> {
        let mass_kg = self.part.mass()?.kg;
        let first = self.setup.loads.first().cloned().unwrap_or_default();
        let weight = LoadCase { gravity: first.gravity, safety: first.safety, ..LoadCase::default() };
        if self.part.thickness_mm().is_none() && weight.out_of_plane().is_some() {
            return None;
        }
        let body = Body { mass_kg, polar_kg_m2: 0.0, com_mm: [0.0; 2] };
        let fixed = weight.loads(&body, self.frame.scale_mm).first()?.wrench;
        let push = mass_kg * first.safety;
        let per_unit = [Wrench::new(-push, 0.0, 0.0, 0.0, 0.0, 0.0), Wrench::new(0.0, -push, 0.0, 0.0, 0.0, 0.0)];
        let wrenches = self.wrenches(grasp);
        let limit_n = self.limit(grasp)?.squeeze_n;
        holding::envelope(&self.hold(&wrenches), &fixed, &per_unit, limit_n, directions)
    }

    /// How a grasp stands at another friction of the band: `mu` in place of the setup's.
    pub fn standing_at(&self, grasp: &Grasp, mu: f64) -> Standing {
        let wrenches = assess::scaled_to(&self.wrenches(grasp), self.setup.friction.mu, mu);
        Standing { mu, verdict: Assessment::verdict_at(&wrenches), holding: self.holding(grasp, &wrenches) }
    }
}

/// The places of a ranking.
fn places(stretches: &[Stretch], kept: &[Spot], setup: &Setup) -> Result<Vec<Place>, SetupFault> {
    let fault =
        |value: String, mend: &str| SetupFault { key: "locked fingers".to_owned(), value, mend: mend.to_owned() };
    if !kept.is_empty() && setup.hand.closing == Closing::Parallel {
        return Err(fault(kept.len().to_string(), "parallel jaws stand on one line: unlock them"));
    }
    if kept.len() > setup.hand.fingers.get() {
        let value = format!("{} of {}", kept.len(), setup.hand.fingers.get());
        return Err(fault(value, "unlock one or take more fingers"));
    }
    let mut places = Vec::with_capacity(kept.len() + stretches.len());
    for spot in kept {
        let Some(&whole) = hand::stretch_around(stretches, spot.edge, spot.along_mm) else {
            let value = format!("{}:{}@{:.2}", spot.edge.ring, spot.edge.edge, spot.along_mm);
            return Err(fault(value, "no finger of this hand fits there: unlock it"));
        };
        let along_mm = spot.along_mm.clamp(whole.from_mm, whole.to_mm);
        places.push(Place { span: Stretch { from_mm: along_mm, to_mm: along_mm, ..whole }, whole });
    }
    places.extend(stretches.iter().map(|&whole| Place { span: whole, whole }));
    Ok(places)
}

/// How a grasp stands at some friction.
#[derive(Debug, Clone, PartialEq)]
pub struct Standing {
    /// The friction in place of the setup's.
    pub mu: f64,
    /// Closed, open or marginal there.
    pub verdict: Verdict,
    /// What the load cases ask there; nothing when there are none.
    pub holding: Option<Holding>,
}

impl Standing {
    /// Closed, and every load held: what a person may count on.
    pub fn holds(&self) -> bool {
        self.verdict == Verdict::Closed && self.holding.as_ref().is_none_or(Holding::held)
    }
}
