//! The JSON report of `rank` and `score`: one object, numbers in full precision, null for what has no value.

mod loads;

use super::reading::{Reading, sense_word};
use crate::file::{CLOSINGS, DRIVES, TIPS, word_for};
use crate::mechanics::Assessment;
use crate::mechanics::escape::Escape;
use crate::part::Part;
use crate::search::{Grasp, Listed, Scene};
use loads::{HoldingReport, StandingReport};
use nalgebra::{Point2, Vector2};
use serde::Serialize;

/// The whole report.
#[derive(Debug, Serialize)]
pub(super) struct Report<'a> {
    schema: u32,
    part: PartReport<'a>,
    setup: SetupReport<'a>,
    pub(super) examined: u64,
    pub(super) closed: u64,
    pub(super) inconclusive: u64,
    pub(super) complete: bool,
    /// Present in a ranking.
    #[serde(flatten)]
    pub(super) proof: Option<super::rank::ProofReport>,
    pub(super) grasps: Vec<GraspReport>,
}

#[derive(Debug, Serialize)]
struct PartReport<'a> {
    name: &'a str,
    area_mm2: f64,
    centroid_mm: [f64; 2],
    com_mm: [f64; 2],
    mass_kg: Option<f64>,
    polar_kg_m2: Option<f64>,
    reach_mm: f64,
}

#[derive(Debug, Serialize)]
struct SetupReport<'a> {
    mu: f64,
    fingers: usize,
    tip: &'static str,
    closing: &'static str,
    torque_scale_mm: f64,
    seed: u64,
    drive: &'static str,
    force_limit_n: Option<f64>,
    cone_sides: usize,
    loads: Vec<&'a str>,
}

/// One grasp.
#[derive(Debug, Serialize)]
pub(super) struct GraspReport {
    rank: usize,
    contacts: Vec<ContactReport>,
    verdict: &'static str,
    /// Every finger stands on a stretch and keeps its distance.
    fits: bool,
    quality: f64,
    quality_per_finger: f64,
    friction_needed: Option<f64>,
    friction_needed_closure: Option<f64>,
    friction_margin: Option<f64>,
    friction_margin_deg: Option<f64>,
    placement_mm: f64,
    placement_torque_mm: f64,
    weakest: Option<WeakestReport>,
    escape: Option<EscapeReport>,
    #[serde(flatten)]
    holding: HoldingReport,
    /// Where a pair of parallel jaws stands; hands whose fingers close freely have none.
    jaws: Option<JawsReport>,
    /// No placement of its family scores better on the sort key; null where only given contacts or sites were looked at.
    bound: Option<f64>,
    /// At the other frictions of the band; given contacts only.
    standing: Option<Vec<StandingReport>>,
    /// Largest acceleration held in each of even directions of the plane; given contacts only, null where it has none.
    envelope: Option<Vec<EnvelopeReport>>,
}

#[derive(Debug, Serialize)]
struct JawsReport {
    centre_mm: [f64; 2],
    /// Of the axis from the first contact to the second.
    angle_deg: f64,
    opening_mm: f64,
    /// The jaws stand between the faces and press outward.
    inside: bool,
}

#[derive(Debug, Serialize)]
struct EnvelopeReport {
    direction_deg: f64,
    /// Null where any acceleration is held.
    m_s2: Option<f64>,
}

#[derive(Debug, Serialize)]
struct ContactReport {
    ring: usize,
    edge: usize,
    along_mm: f64,
    point_mm: [f64; 2],
    normal: [f64; 2],
    mu: f64,
}

#[derive(Debug, Serialize)]
struct WeakestReport {
    force_deg: Option<f64>,
    force: f64,
    torque: f64,
}

#[derive(Debug, Serialize)]
#[serde(tag = "kind", rename_all = "lowercase")]
enum EscapeReport {
    Slide { toward_deg: f64 },
    Turn { about_mm: [f64; 2], sense: &'static str },
}

impl<'a> Report<'a> {
    /// A report without grasps.
    pub(super) fn new(scene: &'a Scene) -> Self {
        let (part, setup) = (scene.part(), scene.setup());
        Self {
            schema: 1,
            part: part_report(part),
            setup: SetupReport {
                mu: setup.friction.mu,
                fingers: setup.hand.fingers.get(),
                tip: word_for(&TIPS, setup.hand.tip),
                closing: word_for(&CLOSINGS, setup.hand.closing),
                torque_scale_mm: scene.frame().scale_mm,
                seed: setup.search.seed,
                drive: word_for(&DRIVES, setup.hand.drive),
                force_limit_n: setup.hand.force_limit_n,
                cone_sides: setup.search.cone_sides,
                loads: setup.loads.iter().map(|load| load.name.as_str()).collect(),
            },
            examined: 0,
            closed: 0,
            inconclusive: 0,
            complete: true,
            proof: None,
            grasps: Vec::new(),
        }
    }

    /// Adds a reading below those that are there, with how it stands at the other frictions of the band.
    pub(super) fn add(&mut self, scene: &Scene, reading: &Reading) {
        let mut own = self.scores(scene, &reading.grasp, &reading.assessment, reading.verdict());
        own.standing = Some(loads::standing(scene, &reading.grasp));
        let end = |(direction_deg, m_s2): (f64, f64)| EnvelopeReport {
            direction_deg,
            m_s2: Some(m_s2).filter(|m_s2| m_s2.is_finite()),
        };
        own.envelope = super::loads::envelope(scene, &reading.grasp).map(|ends| ends.into_iter().map(end).collect());
        self.grasps.push(own);
    }

    fn scores(&self, scene: &Scene, grasp: &Grasp, a: &Assessment, verdict: &'static str) -> GraspReport {
        GraspReport {
            rank: self.grasps.len() + 1,
            contacts: contacts(scene.part(), grasp),
            verdict,
            fits: grasp.fits(),
            quality: a.quality,
            quality_per_finger: a.quality_per_finger,
            friction_needed: a.friction_needed,
            friction_needed_closure: a.friction_needed_closure,
            friction_margin: a.friction_margin,
            friction_margin_deg: a.friction_margin_deg,
            placement_mm: a.placement.mm,
            placement_torque_mm: a.placement.torque_mm,
            weakest: a.weakest.map(|weakest| WeakestReport {
                force_deg: weakest.force_deg(),
                force: weakest.force(),
                torque: weakest.torque(),
            }),
            escape: a.escape.map(|way| match way {
                Escape::Slide { toward_deg } => EscapeReport::Slide { toward_deg },
                Escape::Turn { about, sense } => {
                    EscapeReport::Turn { about_mm: point(scene.part().file_point(about)), sense: sense_word(sense) }
                }
            }),
            holding: HoldingReport::of(scene, grasp, a),
            jaws: grasp.jaws.as_ref().and_then(|jaws| jaws.as_ref().ok()).map(|jaws| JawsReport {
                centre_mm: point(scene.part().file_point(jaws.centre)),
                angle_deg: jaws.angle_rad.to_degrees() + 0.0,
                opening_mm: jaws.opening_mm,
                inside: jaws.inside,
            }),
            bound: None,
            standing: None,
            envelope: None,
        }
    }

    /// Adds a row of a ranking.
    pub(super) fn add_row(&mut self, scene: &Scene, row: &Listed) {
        let mut own = self.scores(scene, &row.grasp, &row.assessment, row.assessment.verdict.word());
        own.bound = row.bound.filter(|bound| bound.is_finite());
        self.grasps.push(own);
    }
}

fn part_report(part: &Part) -> PartReport<'_> {
    let region = part.outline().region();
    PartReport {
        name: part.name(),
        area_mm2: region.area_mm2,
        centroid_mm: point(part.file_point(region.centroid)),
        com_mm: point(part.file_point(part.com())),
        mass_kg: part.mass().map(|mass| mass.kg),
        polar_kg_m2: part.mass().map(|mass| mass.polar_kg_m2),
        reach_mm: part.reach_mm(),
    }
}

fn contacts(part: &Part, grasp: &Grasp) -> Vec<ContactReport> {
    let one = |(spot, contact): (&crate::search::Spot, &crate::mechanics::Contact)| ContactReport {
        ring: spot.edge.ring,
        edge: spot.edge.edge,
        along_mm: spot.along_mm,
        point_mm: point(part.file_point(contact.point)),
        normal: vector(contact.normal),
        mu: contact.mu,
    };
    grasp.spots.iter().zip(&grasp.contacts).map(one).collect()
}

// Adding 0 turns minus nought into nought, which reads better and means the same.
fn point(p: Point2<f64>) -> [f64; 2] {
    [p.x + 0.0, p.y + 0.0]
}

fn vector(v: Vector2<f64>) -> [f64; 2] {
    [v.x + 0.0, v.y + 0.0]
}
