//! Friction needed: how much of the friction one counts on is really called for.
//!
//! Cones only grow with mu, so there is one least factor on all friction coefficients at which a grasp is closed. It is
//! found by a bracketing root finder on the kernel, with every generator scaled to unit force: scaling a generator
//! changes no verdict, and puts contacts of different mu on one circle.

use super::MARGINAL;
use super::force_polygon::ForcePolygon;
use super::quality;
use super::root;
use super::wrench::{Lever, MOST_DIRECTIONS, MOST_GENERATORS};
use nalgebra::Vector3;

/// State of the surfaces in contact.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Condition {
    /// Clean and dry.
    Dry,
    /// Oily or greasy.
    Oily,
    /// Wet.
    Wet,
}

impl Condition {
    /// The word for it.
    pub fn word(self) -> &'static str {
        match self {
            Self::Dry => "dry",
            Self::Oily => "oily",
            Self::Wet => "wet",
        }
    }
}

/// Friction of the finger tips on the part: a band, never one number alone.
#[derive(Debug, Clone, PartialEq)]
pub struct FrictionBand {
    /// The value every score uses.
    pub mu: f64,
    /// Low end of the band.
    pub low: Option<f64>,
    /// Middle of the band.
    pub nominal: Option<f64>,
    /// High end of the band.
    pub high: Option<f64>,
    /// Coefficient once slip has begun; never above `mu`.
    pub sliding: Option<f64>,
    /// State of the surfaces.
    pub condition: Option<Condition>,
    /// Where the values come from.
    pub source: Option<String>,
}

impl Default for FrictionBand {
    /// mu 0.2: smooth dry metal on metal (CTU Code 2014, Annex 7, App. 2), with no band.
    fn default() -> Self {
        Self { mu: 0.2, low: None, nominal: None, high: None, sliding: None, condition: None, source: None }
    }
}

/// Friction coefficients beyond this are not looked at: no dry pair comes near.
pub const LARGEST_MU: f64 = 1000.0;
/// Width of the final bracket on mu.
const WIDTH: f64 = 1e-11;
/// A friction needed below this is none.
const NONE: f64 = 1e-9;
/// Signed quality (of unit-force generators) that rounding alone may reach.
pub const CLOSED: f64 = 1e-12;
/// Step of the friction angle, rad, over which a quality that is not yet told from 0 has to grow by more than [`NOISE`].
const STEP: f64 = 1e-6;
/// What rounding may change from one factor to the next, generously.
const NOISE: f64 = 1e-11;

/// Whether contacts close with all friction multiplied by a factor, given their signed quality there.
///
/// Closure begins where the quality leaves 0, which is told most sharply just above rounding. But a grasp may stay on the
/// very edge of closure over a whole range of mu, and rounding then lifts it a hair above 0: a hair counts only when the
/// quality truly grows from there.
pub fn closes(levers: &[Lever], mus: &[f64], factor: f64, signed_quality: f64) -> bool {
    if signed_quality > MARGINAL || signed_quality <= CLOSED {
        return signed_quality > MARGINAL;
    }
    let largest = mus.iter().copied().fold(0.0, f64::max);
    // d mu = (1 + mu^2) d angle; without friction there is nothing to grow with.
    let further = factor + STEP * (1.0 + (factor * largest).powi(2)) / largest;
    further.is_finite() && signed_quality_at(levers, mus, further) - signed_quality > NOISE
}

/// Signed quality of the generators scaled to unit force, with every mu multiplied by a factor. Its sign is the verdict.
pub fn signed_quality_at(levers: &[Lever], mus: &[f64], factor: f64) -> f64 {
    let unit = UnitForces::new(levers, mus, factor);
    let polygon = ForcePolygon::new(unit.forces());
    let score = polygon.score(&polygon.heights(unit.torques()));
    if score.certain {
        return score.signed_quality;
    }
    // Edges parallel but for a hair: the kernel's facets may lie anywhere inside the hull, and "open" be wrong.
    let mut generators = [Vector3::zeros(); MOST_GENERATORS];
    let mut n = 0;
    for ([x, y], torques) in unit.forces().iter().zip(unit.torques()) {
        for torque in torques {
            generators[n] = Vector3::new(*x, *y, *torque);
            n += 1;
        }
    }
    quality::by_definition(&generators[..n]).signed_quality
}

/// Cone-edge forces scaled to unit length, with every mu multiplied by a factor: whatever the friction of each contact,
/// they lie on one circle, and scaling a generator changes no verdict.
#[derive(Debug, Clone, Copy)]
pub struct UnitForces {
    count: usize,
    forces: [[f64; 2]; MOST_DIRECTIONS],
    torques: [[f64; 2]; MOST_DIRECTIONS],
}

impl UnitForces {
    /// Of contacts: finger after finger, `+mu` before `-mu`.
    pub fn new(levers: &[Lever], mus: &[f64], factor: f64) -> Self {
        let mut unit =
            Self { count: 2 * levers.len(), forces: [[0.0; 2]; MOST_DIRECTIONS], torques: [[0.0; 2]; MOST_DIRECTIONS] };
        for (finger, (lever, mu)) in levers.iter().zip(mus).enumerate() {
            let mu = mu * factor;
            let length = (1.0 + mu * mu).sqrt();
            for (at, m) in [(2 * finger, mu), (2 * finger + 1, -mu)] {
                let force = (lever.normal + lever.tangent * m) / length;
                unit.forces[at] = [force.x, force.y];
                unit.torques[at] = lever.torques(m).map(|torque| torque / length);
            }
        }
        unit
    }

    /// The forces.
    pub fn forces(&self) -> &[[f64; 2]] {
        &self.forces[..self.count]
    }

    /// Least and largest torque over l of each force.
    pub fn torques(&self) -> &[[f64; 2]] {
        &self.torques[..self.count]
    }
}

/// Least factor on all friction coefficients at which the contacts close, to about 1e-10 of mu; nothing when even
/// [`LARGEST_MU`] does not close them, or when there is no friction to scale.
pub fn factor_needed(levers: &[Lever], mus: &[f64]) -> Option<f64> {
    let largest = mus.iter().copied().fold(0.0, f64::max);
    let at = |factor: f64| {
        let quality = signed_quality_at(levers, mus, factor);
        if closes(levers, mus, factor, quality) { quality } else { -(quality - CLOSED).abs() }
    };
    let (mut low, mut at_low) = (0.0, at(0.0));
    if at_low > 0.0 {
        return Some(0.0);
    }
    if largest <= 0.0 {
        return None;
    }
    let most = LARGEST_MU / largest;
    let (mut high, mut at_high) = (1.0, at(1.0));
    while at_high <= 0.0 {
        (low, at_low) = (high, at_high);
        if high >= most {
            return None;
        }
        high = (high * 2.0).min(most);
        at_high = at(high);
    }
    let width = WIDTH * (1.0 + high * largest) / largest;
    let (_, high) = root::bracket(at, (low, at_low), (high, at_high), width);
    Some(if high * largest < NONE { 0.0 } else { high })
}

/// Margin in degrees: the least of `atan mu - atan (factor mu)` over the contacts. Every contact normal may be off by
/// less than this, all at once, and the grasp still closes: the cone at the factor turned by less stays inside the cone
/// that is there.
pub fn margin_deg(mus: &[f64], factor: f64) -> f64 {
    mus.iter().map(|mu| (mu.atan() - (factor * mu).atan()).to_degrees()).fold(f64::INFINITY, f64::min)
}
