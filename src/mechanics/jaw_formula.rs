//! The hand formula for a jaw grip, beside the linear program where it applies: two flush pads, the load along their
//! faces, the centre of mass on the line that joins them: `F = S W / (2 mu)` per finger.
//!
//! Source: the usual sizing rule for jaw grippers (common practice, no source), which is Coulomb friction on two faces;
//! here derived from statics.

use super::spatial::{Hold, Press, Wrench};

/// Why the formula does not apply.
#[derive(Debug, Clone, Copy, PartialEq, thiserror::Error)]
pub enum NoFormula {
    /// Not two fingers.
    #[error("it is for two fingers, not {0}")]
    Fingers(usize),
    /// Not flush pads.
    #[error("it is for flush pads on straight edges")]
    NotPads,
    /// The two faces differ in friction.
    #[error("the faces differ in friction ({0} and {1})")]
    Friction(f64, f64),
    /// There is no friction.
    #[error("there is no friction")]
    NoFriction,
    /// The faces are not parallel.
    #[error("the faces are {off_deg:.2} deg from parallel")]
    NotParallel {
        /// By how much.
        off_deg: f64,
    },
    /// The pads are not on one line across the faces.
    #[error("the pads stand {off_mm:.2} mm to the side of one another")]
    NotFacing {
        /// By how much, mm.
        off_mm: f64,
    },
    /// The centre of mass is off the line that joins the pads.
    #[error("the centre of mass is {off_mm:.2} mm off the line between the pads")]
    OffLine {
        /// By how much, mm.
        off_mm: f64,
    },
    /// The load has a part across the faces.
    #[error("{percent:.0} % of the load lies along the squeeze axis, not along the faces")]
    Across {
        /// How much of it, percent.
        percent: f64,
    },
    /// The load turns the part.
    #[error("the load also turns the part")]
    Turns,
}

/// How a load lies to two opposed fingers: whether an equal squeeze of both can hold it.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Lies {
    /// Along the faces alone: equal squeeze holds it.
    AlongFaces,
    /// In part along the squeeze axis: one finger must back up or give.
    AlongAxis,
}

/// Lengths over l and shares of a load that are rounding: far below what any drawing or balance says.
const ROUNDING: f64 = 1e-9;

/// Whether two fingers press against each other: their normals opposed, to within 1 degree.
fn opposed(presses: &[Press]) -> Option<(&Press, &Press)> {
    let [a, b] = presses else { return None };
    (a.normal.dot(&b.normal) < -0.999_85).then_some((a, b))
}

/// How a load lies to two opposed fingers; nothing for other grasps, or without a load.
pub fn lies(hold: &Hold<'_>, load: &Wrench) -> Option<Lies> {
    let (a, b) = opposed(hold.presses())?;
    let axis = (a.normal - b.normal).normalize();
    let force = load.fixed_rows::<3>(0).norm();
    let across = (load[0] * axis.x + load[1] * axis.y).abs();
    let lies = if across > ROUNDING * force { Lies::AlongAxis } else { Lies::AlongFaces };
    (force > 0.0).then_some(lies)
}

/// Squeeze in N per finger by the hand formula for a load whose safety factor is in it; `scale_mm` is the torque scale.
///
/// # Errors
/// Why it does not apply.
pub fn squeeze_n(hold: &Hold<'_>, load: &Wrench, scale_mm: f64) -> Result<f64, NoFormula> {
    let [a, b] = hold.presses() else { return Err(NoFormula::Fingers(hold.presses().len())) };
    if !(a.half_width > 0.0 && b.half_width > 0.0) {
        return Err(NoFormula::NotPads);
    }
    if (a.mu - b.mu).abs() > ROUNDING {
        return Err(NoFormula::Friction(a.mu, b.mu));
    }
    if a.mu <= 0.0 {
        return Err(NoFormula::NoFriction);
    }
    let off = a.normal.perp(&-b.normal).atan2(-a.normal.dot(&b.normal));
    if off.abs() > ROUNDING {
        return Err(NoFormula::NotParallel { off_deg: off.abs().to_degrees() });
    }
    let beside = (b.arm - a.arm).dot(&a.tangent);
    if beside.abs() > ROUNDING {
        return Err(NoFormula::NotFacing { off_mm: beside.abs() * scale_mm });
    }
    let off_line = a.arm.dot(&a.tangent);
    if off_line.abs() > ROUNDING {
        return Err(NoFormula::OffLine { off_mm: off_line.abs() * scale_mm });
    }
    let force = load.fixed_rows::<3>(0).norm();
    let across = (load[0] * a.normal.x + load[1] * a.normal.y).abs();
    if across > ROUNDING * force {
        return Err(NoFormula::Across { percent: 100.0 * across / force });
    }
    if load.fixed_rows::<3>(3).norm() > ROUNDING * load.norm() {
        return Err(NoFormula::Turns);
    }
    Ok(force / (2.0 * a.mu))
}
