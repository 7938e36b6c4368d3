//! The ranking on the screen: its rows, which of them are listed, which of them no other beats.

use super::state::Order;
use crate::mechanics::Holding;
use crate::part::EdgeId;
use crate::search::{Listed, Place, Ranking, Spot};
use std::sync::Arc;

/// A ranking on the screen, with what it was made from.
#[derive(Debug, Clone)]
pub struct Shown {
    /// The ranking.
    pub ranking: Arc<Ranking>,
    /// What it was made from.
    pub order: Order,
    /// Its number.
    pub generation: u64,
    /// For each row: no other row is better on one of quality, friction margin, placement, load margin and squeeze and as
    /// good on the rest.
    pub unbeaten: Vec<bool>,
}

/// What of a ranking is listed.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Filter {
    /// Only rows that no other beats.
    pub unbeaten: bool,
    /// Only rows with a finger on this edge.
    pub edge: Option<EdgeId>,
}

impl Filter {
    /// Whether it lists a row.
    pub(super) fn lists(&self, shown: &Shown, row: usize) -> bool {
        let on = |edge| shown.ranking.grasps[row].grasp.spots.iter().any(|spot| spot.edge == edge);
        (!self.unbeaten || shown.unbeaten[row]) && self.edge.is_none_or(on)
    }
}

/// The family spots belong to among the places of a scene, ascending: fingers that are kept on places of their own.
pub(super) fn family_of(spots: &[Spot], places: &[Place]) -> Option<Vec<usize>> {
    let on = |spot: &Spot| {
        let near = |place: &Place| {
            let span = place.span;
            span.edge == spot.edge && span.room_mm(spot.along_mm) >= -1e-6 * (1.0 + span.to_mm)
        };
        places.iter().position(near)
    };
    let mut family = spots.iter().map(on).collect::<Option<Vec<usize>>>()?;
    family.sort_unstable();
    Some(family)
}

/// For each grasp: true when no other is better on one of quality, friction margin, placement, load margin and squeeze and
/// no worse on the others. Differences within rounding count for nothing.
pub(super) fn unbeaten(rows: &[Listed]) -> Vec<bool> {
    let keys: Vec<[f64; 5]> = rows
        .iter()
        .map(|row| {
            let a = &row.assessment;
            // Without loads all are alike in these.
            let load_margin = a.holding.as_ref().and_then(Holding::load_margin).unwrap_or(f64::INFINITY);
            let squeeze_n = a.holding.as_ref().map_or(0.0, |holding| holding.squeeze_n().unwrap_or(f64::INFINITY));
            [a.quality, a.friction_margin.unwrap_or(f64::INFINITY), a.placement.mm, load_margin, -squeeze_n]
        })
        .collect();
    let above = |a: f64, b: f64| a > b && (a.is_infinite() || a - b > 1e-9 * (1.0 + a.abs()));
    let beats = |a: &[f64; 5], b: &[f64; 5]| {
        a.iter().zip(b).any(|(a, b)| above(*a, *b)) && !a.iter().zip(b).any(|(a, b)| above(*b, *a))
    };
    keys.iter().map(|own| !keys.iter().any(|other| beats(other, own))).collect()
}
