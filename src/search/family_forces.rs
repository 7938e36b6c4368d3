//! The forces of a family: what all its members have in common.

use super::families::Family;
use super::sites::Sites;
use crate::hand::FingerCount;
use crate::mechanics::force_polygon::ForcePolygon;
use crate::mechanics::friction::UnitForces;
use crate::mechanics::{Lever, MARGINAL};
use crate::part::MU_LARGEST;

/// What all members of a family have in common.
pub(super) struct FamilyForces {
    /// Friction coefficient of each contact.
    pub mus: [f64; FingerCount::MOST],
    /// Curvature of each contact's edge, 1/mm.
    pub curvatures: [f64; FingerCount::MOST],
    /// Some finger stands on an arc: directions differ from member to member, and `polygon` is that of the first.
    pub curved: bool,
    /// The contacts' one mu, when they share it.
    pub mu: Option<f64>,
    /// Of the generators at the setup's friction when all contacts share one mu, else of the generators scaled to unit
    /// force, which tells closure but not quality.
    pub polygon: ForcePolygon,
}

/// Polygon of the generators where contacts share one mu, else of the generators scaled to unit force.
pub(super) fn polygon_of(mu: Option<f64>, levers: &[Lever], mus: &[f64]) -> ForcePolygon {
    match mu {
        Some(mu) => ForcePolygon::of_levers(levers, mu),
        None => ForcePolygon::new(UnitForces::new(levers, mus, 1.0).forces()),
    }
}

impl FamilyForces {
    #[expect(clippy::float_cmp, reason = "equal means copied from the same setting, digit for digit")]
    pub(super) fn new(sites: &Sites, family: &Family) -> Self {
        let k = family.stretches().len();
        let mut levers = [NO_LEVER; FingerCount::MOST];
        let mut mus = [0.0; FingerCount::MOST];
        let mut curvatures = [0.0; FingerCount::MOST];
        for (finger, &stretch) in family.stretches().iter().enumerate() {
            let site = sites.get(sites.on(stretch as usize).start as u32);
            (levers[finger], mus[finger], curvatures[finger]) = (site.lever, site.mu, site.curvature);
        }
        let mu = mus[..k].iter().all(|&mu| mu == mus[0]).then_some(mus[0]);
        let polygon = polygon_of(mu, &levers[..k], &mus[..k]);
        Self { mus, curvatures, curved: curvatures.iter().any(|&curvature| curvature != 0.0), mu, polygon }
    }

    /// The quality is at most the distance to the wall; unit forces are shorter than the true ones by at most
    /// `sqrt(1 + MU_LARGEST^2)`.
    pub(super) fn may_close(&self) -> bool {
        self.curved || self.spans(&self.polygon)
    }

    /// Whether contacts with the forces of this polygon may close.
    pub(super) fn spans(&self, polygon: &ForcePolygon) -> bool {
        let shorter = if self.mu.is_some() { 1.0 } else { MU_LARGEST.hypot(1.0) };
        polygon.wall() * shorter > MARGINAL
    }
}

pub(super) const NO_LEVER: Lever = Lever {
    normal: nalgebra::Vector2::new(0.0, 0.0),
    tangent: nalgebra::Vector2::new(0.0, 0.0),
    normal_torque: 0.0,
    tangent_torque: 0.0,
    spread: 0.0,
};
