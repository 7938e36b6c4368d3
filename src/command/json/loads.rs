//! What the load cases ask of a grasp, in the JSON report.

use super::super::loads;
use super::super::reading::band;
use crate::hand::Bearing;
use crate::mechanics::jaw_formula::Lies;
use crate::mechanics::squeeze::FingerForce;
use crate::mechanics::{Assessment, CaseHolding, Holding, Limit, LimitedBy};
use crate::search::{Grasp, Scene};
use serde::Serialize;

/// What all load cases together ask; null throughout where the setup has none.
#[derive(Debug, Default, Serialize)]
pub(super) struct HoldingReport {
    friction_needed_holding: Option<f64>,
    squeeze_n: Option<f64>,
    /// With every finger at the squeeze.
    squeeze_total_n: Option<f64>,
    load_margin: Option<f64>,
    held: Option<bool>,
    governing_load: Option<String>,
    limit_n: Option<f64>,
    limited_by: Option<LimitReport>,
    loads: Vec<LoadReport>,
    /// Finger after finger, at the squeeze; empty where there is none.
    bearing: Vec<BearingReport>,
}

#[derive(Debug, Serialize)]
#[serde(tag = "kind", rename_all = "lowercase")]
enum LimitReport {
    Hand,
    /// Fingers count from 1.
    Edge {
        finger: usize,
        ring: usize,
        edge: usize,
    },
}

#[derive(Debug, Serialize)]
struct LoadReport {
    name: String,
    squeeze_n: Option<f64>,
    held: bool,
    margin: Option<f64>,
    /// Pressed alike with more, the fingers let go of the part; null where that is not the case below the squeeze needed.
    lets_go_above_n: Option<f64>,
    direction_deg: Option<f64>,
    finger_forces_n: Vec<ForceReport>,
    lies: Option<&'static str>,
    hand_formula_n: Option<f64>,
    hand_formula_why_not: Option<String>,
}

#[derive(Debug, Serialize)]
struct ForceReport {
    normal: f64,
    along: f64,
    up: f64,
}

#[derive(Debug, Serialize)]
struct BearingReport {
    pressure_mpa: Option<f64>,
    line_n_per_mm: Option<f64>,
}

/// How the grasp stands at one friction of the band.
#[derive(Debug, Serialize)]
pub(super) struct StandingReport {
    name: &'static str,
    mu: f64,
    verdict: &'static str,
    held: Option<bool>,
    squeeze_n: Option<f64>,
}

impl HoldingReport {
    /// Of a grasp as it was assessed.
    pub(super) fn of(scene: &Scene, grasp: &Grasp, a: &Assessment) -> Self {
        let Some(holding) = &a.holding else { return Self::default() };
        let squeeze_n = holding.squeeze_n();
        Self {
            friction_needed_holding: a.friction_needed_holding,
            squeeze_n,
            squeeze_total_n: squeeze_n.map(|n| loads::in_all(n, grasp)),
            load_margin: holding.load_margin(),
            held: Some(holding.held()),
            governing_load: Some(holding.governing_case().name.clone()),
            limit_n: holding.limit.map(|limit| limit.squeeze_n),
            limited_by: holding.limit.map(|limit| limited_by(&limit, grasp)),
            loads: (0..holding.cases.len()).map(|case| load(scene, grasp, holding, case)).collect(),
            bearing: squeeze_n.map_or(Vec::new(), |n| bearing(scene, grasp, n)),
        }
    }
}

/// The grasp at every friction of the setup's band.
pub(super) fn standing(scene: &Scene, grasp: &Grasp) -> Vec<StandingReport> {
    let at = |(name, mu): (&'static str, f64)| {
        let standing = scene.standing_at(grasp, mu);
        StandingReport {
            name,
            mu,
            verdict: standing.verdict.word(),
            held: standing.holding.as_ref().map(Holding::held),
            squeeze_n: standing.holding.as_ref().and_then(Holding::squeeze_n),
        }
    };
    band(&scene.setup().friction).map(at).collect()
}

fn limited_by(limit: &Limit, grasp: &Grasp) -> LimitReport {
    match limit.by {
        LimitedBy::Hand => LimitReport::Hand,
        LimitedBy::Edge { finger } => {
            let edge = grasp.spots[finger].edge;
            LimitReport::Edge { finger: finger + 1, ring: edge.ring, edge: edge.edge }
        }
    }
}

fn load(scene: &Scene, grasp: &Grasp, holding: &Holding, number: usize) -> LoadReport {
    let case: &CaseHolding = &holding.cases[number];
    let beside = loads::Beside::of(scene, grasp, holding, number);
    let (hand_formula_n, hand_formula_why_not) = match beside.formula {
        Ok(squeeze_n) => (Some(squeeze_n), None),
        Err(why) => (None, Some(why)),
    };
    LoadReport {
        name: case.name.clone(),
        squeeze_n: case.squeeze_n,
        held: case.held,
        lets_go_above_n: case.lets_go_above_n,
        margin: case.margin,
        direction_deg: case.direction_deg,
        finger_forces_n: case.forces.iter().map(force).collect(),
        lies: beside.lies.map(|lies| match lies {
            Lies::AlongFaces => "along_faces",
            Lies::AlongAxis => "along_axis",
        }),
        hand_formula_n,
        hand_formula_why_not,
    }
}

// Adding 0 turns minus nought into nought, which reads better and means the same.
fn force(force: &FingerForce) -> ForceReport {
    ForceReport { normal: force.normal_n + 0.0, along: force.along_n + 0.0, up: force.up_n + 0.0 }
}

fn bearing(scene: &Scene, grasp: &Grasp, squeeze_n: f64) -> Vec<BearingReport> {
    let one = |contact| {
        let bearing = scene.bearing(contact);
        let load = Some(bearing.load(squeeze_n));
        match bearing {
            Bearing::Face { .. } => BearingReport { pressure_mpa: load, line_n_per_mm: None },
            Bearing::Line { .. } => BearingReport { pressure_mpa: None, line_n_per_mm: load },
        }
    };
    grasp.contacts.iter().map(one).collect()
}
