//! The whole reading of one grasp, and its confirmation by a second way.

use super::closure::{self, Verdict};
use super::escape::Escape;
use super::force_polygon::PlanarScore;
use super::program::{self, Balance, Solved};
use super::quality::{self, Weakest};
use super::wrench::{Frame, Wrenches};
use super::{Holding, MARGINAL, friction};
use nalgebra::Vector3;

use super::placement::OnArcs;

pub use super::placement::Placement;

/// Why a number is not to be trusted: the two ways to it disagree.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum Doubt {
    /// Closure.
    #[error("closure: the kernel says {kernel}, the linear program {program}")]
    Closure {
        /// Kernel's verdict.
        kernel: &'static str,
        /// The program's.
        program: &'static str,
    },
    /// Quality.
    #[error("quality: the kernel says {kernel}, the definition {definition}")]
    Quality {
        /// Kernel's value.
        kernel: f64,
        /// By definition.
        definition: f64,
    },
    /// Placement tolerance.
    #[error("placement: the kernel says {kernel} mm, the linear program {program} mm")]
    Placement {
        /// Kernel's value.
        kernel: f64,
        /// The program's.
        program: f64,
    },
    /// Squeeze.
    #[error("squeeze for \"{case}\": the batch solver says {batch} N, the linear program {program} N")]
    Squeeze {
        /// The load case.
        case: String,
        /// The batch solver's value; infinite where no squeeze holds it.
        batch: f64,
        /// The program's.
        program: f64,
    },
    /// Friction needed.
    #[error("friction needed {kernel}: the linear program does not change its verdict there")]
    Friction {
        /// Kernel's value.
        kernel: f64,
    },
    /// The solver's answer did not pass its checks.
    #[error("the solver: {0}")]
    Solver(&'static str),
}

/// Proof of a verdict.
#[derive(Debug, Clone, PartialEq)]
pub enum Certificate {
    /// Positive weights that balance.
    Balance(Balance),
    /// A direction u with `u . w <= 0` for every generator.
    Direction(Vector3<f64>),
    /// A marginal grasp has none.
    None,
}

/// Every planar score of a grasp.
#[derive(Debug, Clone, PartialEq)]
pub struct Assessment {
    /// Closed, open or marginal.
    pub verdict: Verdict,
    /// Radius of the largest ball in the wrench hull; 0 when not closed.
    pub quality: f64,
    /// The same with each finger limited.
    pub quality_per_finger: f64,
    /// Least mu at which the grasp closes, on the setup's scale: it closes at every mu above. Nothing when no mu does, or
    /// when the setup's mu is 0 and only edges have friction.
    pub friction_needed_closure: Option<f64>,
    /// Least mu at which the grasp closes and holds every load.
    pub friction_needed: Option<f64>,
    /// mu over friction needed; nothing when any friction at all will do.
    pub friction_margin: Option<f64>,
    /// The same in degrees; nothing when no mu closes the grasp.
    pub friction_margin_deg: Option<f64>,
    /// Placement tolerance.
    pub placement: Placement,
    /// Weakest direction of a closed grasp.
    pub weakest: Option<Weakest>,
    /// Motion out of an open grasp.
    pub escape: Option<Escape>,
    /// Least mu at which every load case is held within the limit, on the setup's scale as above; nothing without loads,
    /// without a limit where what closes holds, or when no mu does.
    pub friction_needed_holding: Option<f64>,
    /// What the load cases ask of the fingers; nothing when there are none.
    pub holding: Option<Holding>,
}

impl Assessment {
    /// Reads a grasp.
    ///
    /// `setup_mu` is the mu that friction needed is reported on: the factor on all contacts' friction times this.
    /// `rooms_mm` holds each finger's distance to the end of its stretch.
    pub fn of(wrenches: &Wrenches, frame: &Frame, setup_mu: f64, rooms_mm: &[f64]) -> Self {
        let score = quality::planar(wrenches);
        let verdict = Verdict::of(wrenches, &score);
        let closed = verdict == Verdict::Closed;
        let friction = FrictionReading::of(wrenches, setup_mu, closed);
        Self {
            verdict,
            quality: if closed { score.signed_quality } else { 0.0 },
            quality_per_finger: if closed { quality::per_finger(wrenches) } else { 0.0 },
            friction_needed_closure: friction.needed,
            friction_needed: friction.needed,
            friction_margin: friction.margin,
            friction_margin_deg: friction.margin_deg,
            placement: Placement::of(
                wrenches,
                &if closed { score } else { not_closed(score) },
                frame.scale_mm,
                rooms_mm,
            ),
            weakest: closed.then_some(Weakest { direction: score.direction }),
            escape: match verdict {
                Verdict::Open => program::separating_direction(wrenches).map(|u| Escape::along(&u, frame)),
                Verdict::Closed | Verdict::Marginal => None,
            },
            friction_needed_holding: None,
            holding: None,
        }
    }

    /// Adds what the load cases ask: the friction needed becomes the larger of that for closure and that for holding,
    /// the margins the smaller.
    pub fn hold(&mut self, holding: Holding, wrenches: &Wrenches, setup_mu: f64) {
        // Without a limit what closes holds, mostly; then nothing more is asked of friction.
        if holding.limit.is_some() || holding.friction_factor != Some(0.0) {
            let closed = self.verdict == Verdict::Closed;
            let own = FrictionReading::of_factor(wrenches, setup_mu, closed, holding.friction_factor);
            self.friction_needed_holding = own.needed;
            self.friction_needed = self.friction_needed.zip(own.needed).map(|(closure, holding)| closure.max(holding));
            self.friction_margin = match (self.friction_margin, own.margin) {
                (Some(closure), Some(holding)) => Some(closure.min(holding)),
                (one, other) => one.or(other),
            };
            self.friction_margin_deg = self.friction_margin_deg.zip(own.margin_deg).map(|(a, b)| a.min(b));
        }
        self.holding = Some(holding);
    }

    /// The verdict on contacts.
    pub fn verdict_at(wrenches: &Wrenches) -> Verdict {
        Verdict::of(wrenches, &quality::planar(wrenches))
    }

    /// Confirms the reading by the linear programs and the plain definition of the hull. Empty when all agree.
    pub fn doubts(&self, wrenches: &Wrenches, frame: &Frame, setup_mu: f64) -> Vec<Doubt> {
        let mut doubts = Vec::new();
        confirm_closure(self, wrenches, &mut doubts);
        let definition = quality::by_definition(wrenches.generators());
        let by_definition = if definition.signed_quality > MARGINAL { definition.signed_quality } else { 0.0 };
        if !((self.quality - by_definition).abs() <= AGREE_QUALITY * (1.0 + by_definition)) {
            doubts.push(Doubt::Quality { kernel: self.quality, definition: by_definition });
        }
        if self.verdict == Verdict::Closed && self.quality > LP_BLUR {
            confirm_placement(self, wrenches, frame, &mut doubts);
            confirm_friction(self, wrenches, setup_mu, &mut doubts);
        }
        doubts
    }

    /// The proof of the verdict.
    pub fn certificate(&self, wrenches: &Wrenches) -> Certificate {
        match self.verdict {
            Verdict::Closed => match program::closure(wrenches) {
                Solved::Answer(balance) => Certificate::Balance(balance),
                _ => Certificate::None,
            },
            Verdict::Open => program::separating_direction(wrenches).map_or(Certificate::None, Certificate::Direction),
            Verdict::Marginal => Certificate::None,
        }
    }
}

/// The wrenches with friction scaled so that the setup's mu becomes another; contacts follow in proportion, or take the
/// new mu outright when the setup's is 0.
pub fn scaled_to(wrenches: &Wrenches, setup_mu: f64, mu: f64) -> Wrenches {
    if setup_mu > 0.0 {
        wrenches.with_friction_times(mu / setup_mu)
    } else {
        wrenches.with_friction(wrenches.mus().iter().map(|own| if *own > 0.0 { *own } else { mu }).collect())
    }
}

/// No contact has any friction.
fn is_frictionless(wrenches: &Wrenches) -> bool {
    wrenches.mus().iter().all(|&mu| mu <= 0.0)
}

fn not_closed(score: PlanarScore) -> PlanarScore {
    PlanarScore { torque_up: 0.0, torque_down: 0.0, ..score }
}

struct FrictionReading {
    needed: Option<f64>,
    margin: Option<f64>,
    margin_deg: Option<f64>,
}

impl FrictionReading {
    fn of(wrenches: &Wrenches, setup_mu: f64, closed: bool) -> Self {
        let ones = vec![1.0; wrenches.finger_count()];
        // Without any friction to scale, ask what common mu would do.
        let mus = if is_frictionless(wrenches) { &ones[..] } else { wrenches.mus() };
        let factor = friction::factor_needed(wrenches.levers(), mus);
        Self::of_factor(wrenches, setup_mu, closed, factor)
    }

    /// From the least factor on all friction, where there is one.
    fn of_factor(wrenches: &Wrenches, setup_mu: f64, closed: bool, factor: Option<f64>) -> Self {
        let frictionless = is_frictionless(wrenches);
        let ones = vec![1.0; wrenches.finger_count()];
        let (mus, unit) = if frictionless { (&ones[..], 1.0) } else { (wrenches.mus(), setup_mu) };
        match factor {
            None => Self { needed: None, margin: Some(0.0), margin_deg: None },
            Some(factor) => {
                // With a setup mu of 0 and edges of their own, the factor scales nothing the setup names.
                let needed = (unit > 0.0).then_some(factor * unit);
                let margin = if frictionless && !closed {
                    // However little would do, there is none.
                    Some(0.0)
                } else {
                    (factor > 0.0).then(|| 1.0 / factor)
                };
                let margin_deg =
                    if frictionless { -factor.atan().to_degrees() } else { friction::margin_deg(mus, factor) };
                Self { needed, margin, margin_deg: Some(margin_deg) }
            }
        }
    }
}

/// Qualities below this are within the solver's own tolerance; the plain definition alone confirms them.
const LP_BLUR: f64 = 1e-6;
/// A least weight d at or below this is not above 0: on the edge the solver may balance with weights of 1e17 to 1.
const LEAST_WEIGHT: f64 = 1e-12;
/// Agreement asked of the two ways to the quality.
const AGREE_QUALITY: f64 = 1e-9;
/// Agreement asked of the kernel and the placement programs, relative.
const AGREE_PLACEMENT: f64 = 1e-6;
/// Step to either side of friction needed at which the programs must disagree, as a part of the setup's friction.
const FRICTION_STEP: f64 = 1e-4;

fn confirm_closure(a: &Assessment, wrenches: &Wrenches, doubts: &mut Vec<Doubt>) {
    let program_says = match program::closure(wrenches) {
        Solved::Answer(balance) if balance.least > LEAST_WEIGHT && closure::rank(wrenches) == 3 => Verdict::Closed,
        Solved::Answer(_) | Solved::Infeasible => Verdict::Open,
        Solved::Inconclusive(why) => {
            doubts.push(Doubt::Solver(why));
            return;
        }
    };
    let clear = match a.verdict {
        Verdict::Closed => a.quality > LP_BLUR,
        Verdict::Open => quality::least_reach(wrenches.generators()).0 < -LP_BLUR,
        Verdict::Marginal => false,
    };
    if clear && program_says != a.verdict {
        doubts.push(Doubt::Closure { kernel: a.verdict.word(), program: program_says.word() });
    }
}

fn confirm_placement(a: &Assessment, wrenches: &Wrenches, frame: &Frame, doubts: &mut Vec<Doubt>) {
    let on_arcs = OnArcs {
        levers: wrenches.levers(),
        mus: wrenches.mus(),
        curvatures: wrenches.curvatures(),
        scale_mm: frame.scale_mm,
    };
    // What is left at an offset: the pure torque of the cones that stay, less what the offset takes, mm. On straight
    // edges the cones stay whole and the offset takes itself.
    let mut spare_at = |offset_mm: f64| -> Option<f64> {
        let Some((mus, change_mm)) = on_arcs.left_at(offset_mm) else { return Some(f64::NEG_INFINITY) };
        let left = wrenches.with_friction(mus);
        let mut least = f64::INFINITY;
        for sense in [1.0, -1.0] {
            match program::pure_torque(&left, sense) {
                Solved::Answer(torque) => least = least.min(torque * frame.scale_mm),
                Solved::Infeasible => least = f64::NEG_INFINITY,
                Solved::Inconclusive(why) => {
                    doubts.push(Doubt::Solver(why));
                    return None;
                }
            }
        }
        Some(least - change_mm)
    };
    let kernel = a.placement.torque_mm;
    let blur = AGREE_PLACEMENT * (frame.scale_mm + kernel);
    let Some(here) = spare_at(kernel) else { return };
    let beyond = if here > blur { spare_at(kernel + 2.0 * blur) } else { Some(here) };
    // The spare falls at least as fast as the offset grows, so a step beyond the tolerance nothing is left of it.
    if here < -blur || beyond.is_some_and(|beyond| beyond > blur) {
        doubts.push(Doubt::Placement { kernel, program: kernel + here });
    }
}

fn confirm_friction(a: &Assessment, wrenches: &Wrenches, setup_mu: f64, doubts: &mut Vec<Doubt>) {
    let (Some(needed), true) = (a.friction_needed_closure, setup_mu > 0.0) else { return };
    let factor = needed / setup_mu;
    // Cones of next to no friction are pairs of nearly equal columns, on which the solver may give up; the plain
    // definition stands in for it there.
    let closes = |factor: f64| {
        let scaled = wrenches.with_friction_times(factor);
        match program::closure(&scaled) {
            Solved::Answer(balance) => balance.least > LEAST_WEIGHT && closure::rank(&scaled) == 3,
            Solved::Infeasible => false,
            Solved::Inconclusive(_) => quality::by_definition(scaled.generators()).signed_quality > MARGINAL,
        }
    };
    if factor <= 0.0 && closes(0.0) {
        return;
    }
    let step = FRICTION_STEP * factor.max(1.0);
    if !closes(factor + step) || (factor > step && closes(factor - step)) {
        doubts.push(Doubt::Friction { kernel: needed });
    }
}
