//! The goal: what counts as better, as good enough, and as the same.

use super::super::order::{self, Key};
use super::super::scene::Scene;
use crate::mechanics::holding;

/// The key of a search, its gap, and the units they are told in.
///
/// Inside, every key is a *merit*, larger is better: quality, quality per finger, placement in mm, minus the friction
/// factor, minus the squeeze in N, minus its share of the limit, which is 1 over the load margin.
#[derive(Debug, Clone, Copy)]
pub(super) struct Goal {
    pub key: Key,
    gap: f64,
    /// The gap as a part of the merit.
    part: f64,
    /// A merit smaller than this is near 0, where no relative gap can be reached: the gap is a part of this instead.
    small: f64,
    /// Torque scale, mm.
    scale_mm: f64,
    /// What a friction factor is told as: the setup's friction, or the factor itself where that is 0.
    friction_unit: f64,
    /// Size of the largest load, N.
    size_n: f64,
}

impl Goal {
    pub(super) fn new(scene: &Scene, key: Key, gap: f64) -> Self {
        let scale_mm = scene.frame().scale_mm;
        let size_n = holding::all_loads(scene.cases()).iter().map(|(load, _)| load.norm()).fold(0.0, f64::max);
        let small = match key {
            Key::Quality | Key::QualityPerFinger => 1e-4,
            Key::Placement => 1e-4 * scale_mm,
            Key::Friction => 1e-2,
            Key::Squeeze => 1e-6 * size_n,
            Key::LoadMargin => 1e-6,
        };
        let mu = scene.setup().friction.mu;
        let gap = gap.max(0.0);
        // A load margin larger by a part is a share smaller by a little less.
        let part = if key == Key::LoadMargin { gap / (1.0 + gap) } else { gap };
        Self { key, gap, part, small, scale_mm, friction_unit: if mu > 0.0 { mu } else { 1.0 }, size_n }
    }

    /// What gaps are parts of: the best merit found, or that of a row where it is larger.
    fn whole(&self, merit: Option<f64>, best: Option<f64>) -> f64 {
        merit.into_iter().chain(best).map(f64::abs).fold(self.small, f64::max)
    }

    /// What a merit may be beaten by and still stand beside the best found; without one, what nobody looks for.
    pub(super) fn enough(&self, merit: Option<f64>, best: Option<f64>) -> f64 {
        match (merit, self.key) {
            (Some(merit), _) => merit + self.part * self.whole(Some(merit), best) + HAIR * self.unit(),
            (None, Key::Friction | Key::Squeeze | Key::LoadMargin) => f64::NEG_INFINITY,
            (None, _) => (self.gap * self.whole(None, best)).max(HAIR * self.unit()),
        }
    }

    /// The same with the gap to which the first row is polished.
    pub(super) fn nearly(&self, merit: f64) -> f64 {
        merit + self.part.min(POLISHED) * merit.abs().max(self.small) + HAIR * self.unit()
    }

    /// The gap between a merit and a bound on it, beside the best found.
    pub(super) fn gap_between(&self, merit: f64, bound: f64, best: f64) -> f64 {
        // Nothing is better than no friction, no squeeze, no part of the limit.
        let most = match self.key {
            Key::Quality | Key::QualityPerFinger | Key::Placement => f64::INFINITY,
            Key::Friction | Key::Squeeze | Key::LoadMargin => 0.0,
        };
        let over = bound.min(most) - merit;
        // Rounding alone is no gap.
        if over <= 2.0 * HAIR * self.unit() {
            return 0.0;
        }
        let part = over / self.whole(Some(merit), Some(best));
        if self.key == Key::LoadMargin { part / (1.0 - part).max(0.0) } else { part }
    }

    /// The gap asked for.
    pub(super) fn gap(&self) -> f64 {
        self.gap
    }

    /// A step of a friction factor that is small beside the gap at `factor`.
    pub(super) fn fine_factor(&self, factor: f64) -> f64 {
        (self.gap / 8.0).clamp(1e-9, 0.1) * factor.max(self.small)
    }

    /// Width of one unit of the key, for rounding.
    fn unit(&self) -> f64 {
        match self.key {
            Key::Quality | Key::QualityPerFinger | Key::Friction | Key::LoadMargin => 1.0,
            Key::Placement => self.scale_mm,
            Key::Squeeze => self.size_n,
        }
    }

    /// The merit as people read it.
    pub(super) fn told(&self, merit: f64) -> f64 {
        match self.key {
            Key::Quality | Key::QualityPerFinger | Key::Placement => merit,
            // No bound says less than nothing, though rounding may.
            Key::Friction => (-merit * self.friction_unit).max(0.0),
            Key::Squeeze => (-merit).max(0.0),
            Key::LoadMargin => 1.0 / (-merit).max(0.0),
        }
    }

    /// The merit in the quanta of a ranking: what has as many counts as equal.
    pub(super) fn quanta(&self, merit: f64) -> i64 {
        match self.key {
            Key::Quality | Key::QualityPerFinger => order::quanta(merit),
            Key::Placement => order::quanta(merit / self.scale_mm),
            Key::Friction => -order::friction_quanta(-merit),
            Key::Squeeze => order::squeeze_quanta(-merit, self.size_n),
            Key::LoadMargin => order::squeeze_quanta(-merit, 1.0),
        }
    }
}

/// Gap of a polished first row, as a part of its score.
pub(super) const POLISHED: f64 = 1e-6;
/// What rounding may lift a bound by, as a part of the key's unit.
const HAIR: f64 = 1e-9;
