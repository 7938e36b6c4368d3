//! Friction needed: how much of the friction one counts on is really called for.
//!
//! Cones only grow with mu, so there is one least factor on all friction coefficients at which a grasp is closed. It is
//! found by a bracketing root finder on the kernel, with every generator scaled to unit force: scaling a generator
//! changes no verdict, and puts contacts of different mu on one circle.

use super::force_polygon::ForcePolygon;
use super::quality;
use super::wrench::{Lever, MOST_GENERATORS};
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
/// Signed quality (of unit-force generators) above which the root finder takes a grasp for closed.
pub const CLOSED: f64 = 1e-12;

/// Signed quality of the generators scaled to unit force, with every mu multiplied by a factor. Its sign is the verdict.
pub fn signed_quality_at(levers: &[Lever], mus: &[f64], factor: f64) -> f64 {
    let mut forces = [[0.0; 2]; MOST_GENERATORS];
    let mut torques = [0.0; MOST_GENERATORS];
    for (finger, (lever, mu)) in levers.iter().zip(mus).enumerate() {
        let mu = mu * factor;
        let length = (1.0 + mu * mu).sqrt();
        for (side, m) in [(0, mu), (1, -mu)] {
            let at = 2 * finger + side;
            forces[at] =
                [(lever.normal.x + m * lever.tangent.x) / length, (lever.normal.y + m * lever.tangent.y) / length];
            torques[at] = (lever.normal_torque + m * lever.tangent_torque) / length;
        }
    }
    let n = 2 * levers.len();
    let polygon = ForcePolygon::new(&forces[..n]);
    let score = polygon.score(&polygon.heights(&torques[..n]));
    if score.certain {
        return score.signed_quality;
    }
    // Edges parallel but for a hair: the kernel's facets may lie anywhere inside the hull, and "open" be wrong.
    let mut generators = [Vector3::zeros(); MOST_GENERATORS];
    for ((generator, [x, y]), torque) in generators.iter_mut().zip(forces).zip(torques) {
        *generator = Vector3::new(x, y, torque);
    }
    quality::by_definition(&generators[..n]).signed_quality
}

/// Least factor on all friction coefficients at which the contacts close, to about 1e-10 of mu; nothing when even
/// [`LARGEST_MU`] does not close them, or when there is no friction to scale.
pub fn factor_needed(levers: &[Lever], mus: &[f64]) -> Option<f64> {
    let largest = mus.iter().copied().fold(0.0, f64::max);
    let at = |factor: f64| signed_quality_at(levers, mus, factor) - CLOSED;
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
    let high = bracketed(at, (low, at_low), (high, at_high), width);
    Some(if high * largest < NONE { 0.0 } else { high })
}

/// Narrows a bracket around the place where `f` turns positive to `width` and returns its upper end.
///
/// The ITP method (Oliveira & Takahashi 2020): never more steps than bisection plus one, and far fewer where `f` is
/// smooth; a jump does no harm.
fn bracketed(f: impl Fn(f64) -> f64, low: (f64, f64), high: (f64, f64), width: f64) -> f64 {
    let (mut low, mut at_low) = (low.0, low.1.max(STEEPEST));
    let (mut high, mut at_high) = high;
    let whole = high - low;
    let half_width = width / 2.0;
    let steps = (whole / width).log2().ceil().max(0.0) + 1.0;
    for step in 0..=steps as i32 {
        let span = high - low;
        if span <= width {
            break;
        }
        let middle = low + span / 2.0;
        let chord = (at_high * low - at_low * high) / (at_high - at_low);
        let toward = (middle - chord).signum();
        let shift = 0.2 / whole * span * span;
        let trial = if shift <= (middle - chord).abs() { chord + toward * shift } else { middle };
        let leash = half_width * (steps - f64::from(step)).exp2() - span / 2.0;
        let at = if (trial - middle).abs() <= leash { trial } else { middle - toward * leash };
        let value = f(at);
        if value > 0.0 {
            (high, at_high) = (at, value);
        } else {
            (low, at_low) = (at, value.max(STEEPEST));
        }
    }
    high
}

/// Values below this say no more than that the grasp is open; without a floor they would flatten the chord.
const STEEPEST: f64 = -1.0;

/// Margin in degrees: the least of `atan mu - atan (factor mu)` over the contacts. Every contact normal may be off by
/// less than this, all at once, and the grasp still closes: the cone at the factor turned by less stays inside the cone
/// that is there.
pub fn margin_deg(mus: &[f64], factor: f64) -> f64 {
    mus.iter().map(|mu| (mu.atan() - (factor * mu).atan()).to_degrees()).fold(f64::INFINITY, f64::min)
}
