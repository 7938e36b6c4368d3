//! Holding: what the load cases ask of a grasp's fingers, and whether they can give it.
//!
//! A drive that presses all fingers alike is set once: one squeeze has to hold every case, and where fingers do not balance
//! one another a harder one may not.
//!
//! All of it is *weak* stability (Pang & Trinkle 2000): suitable finger forces exist. That fingers locked in place, or a
//! drive that shares its force in another way, reach those forces by themselves is not said.

use super::assess::Doubt;
use super::friction::LARGEST_MU;
use super::load::Load;
use super::program::{self, Solved};
use super::root;
use super::spatial::{Hold, Wrench};
use super::squeeze::{Answer, BEYOND, Decision, FingerForce, Held, Squeezer};
use crate::hand::Drive;

/// A load case ready to be put on grasps.
#[derive(Debug, Clone, PartialEq)]
pub struct Case {
    /// Name for people.
    pub name: String,
    /// Its loads: one, or one for each direction.
    pub loads: Vec<Load>,
    /// Part of the squeeze that is left, above 0 up to 1.
    pub squeeze_left: f64,
}

/// What a squeeze may not exceed.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Limit {
    /// N per finger.
    pub squeeze_n: f64,
    /// Why.
    pub by: LimitedBy,
}

/// Where a limit on the squeeze comes from.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum LimitedBy {
    /// The hand gives no more.
    Hand,
    /// More would mark the edge this finger presses on, counted from 0.
    Edge {
        /// The finger.
        finger: usize,
    },
}

/// What one load case asks.
#[derive(Debug, Clone, PartialEq)]
pub struct CaseHolding {
    /// Name of the case.
    pub name: String,
    /// Least squeeze that holds it, N per finger, in its worst direction; nothing when no squeeze does. Where only a part
    /// of the squeeze is left, the squeeze to be set before.
    pub squeeze_n: Option<f64>,
    /// The worst direction of the acceleration, degrees from +x, where the case asks for any.
    pub direction_deg: Option<f64>,
    /// Limit over squeeze: the largest multiple of the load that is held. Nothing without a limit or without a load; 0
    /// when no squeeze holds it.
    pub margin: Option<f64>,
    /// Held within the limit, and by the squeeze the governing case needs where all fingers are pressed alike.
    pub held: bool,
    /// With all fingers pressed alike, the largest squeeze that still holds the case, where the governing one is larger: the
    /// case is not held then.
    pub lets_go_above_n: Option<f64>,
    /// Forces that hold it with the squeeze asked for (with the part of it that is left), finger after finger; often one
    /// set of many. Empty when there are none.
    pub forces: Vec<FingerForce>,
    /// Which of the case's loads is the worst.
    pub worst: usize,
    /// The numbers were not proved: the solvers gave up.
    pub unsure: bool,
}

/// What all load cases together ask of a grasp.
#[derive(Debug, Clone, PartialEq)]
pub struct Holding {
    /// How the squeeze is shared.
    pub drive: Drive,
    /// The cases, in the setup's order; at least one.
    pub cases: Vec<CaseHolding>,
    /// The case that asks most.
    pub governing: usize,
    /// What the squeeze may not exceed.
    pub limit: Option<Limit>,
    /// Least factor on all friction (the least common mu where there is none) with which every case is held within the
    /// limit; nothing when none does. Without a limit nothing is asked and it is 0: what closes holds every load with some
    /// squeeze.
    pub friction_factor: Option<f64>,
}

impl Holding {
    /// Puts the cases on the fingers.
    pub fn of(hold: &Hold<'_>, cases: &[Case], limit: Option<Limit>) -> Self {
        let mut squeezer = Squeezer::new(*hold);
        let answers: Vec<CaseHolding> = cases.iter().map(|case| on_one(&mut squeezer, hold, case, limit)).collect();
        let mut answers = answers;
        let rank = |case: &CaseHolding| case.squeeze_n.unwrap_or(f64::INFINITY);
        let governing = (0..answers.len())
            .fold(0, |worst, i| if rank(&answers[i]) > rank(&answers[worst]) * (1.0 + 1e-9) { i } else { worst });
        if let (Drive::Equal, Some(squeeze_n)) = (hold.drive(), answers[governing].squeeze_n) {
            for (case, answer) in cases.iter().zip(&mut answers) {
                let most_n = most(&mut squeezer, hold, case);
                if most_n < squeeze_n * (1.0 - 1e-9) {
                    answer.held = false;
                    answer.lets_go_above_n = Some(most_n);
                    answer.margin = limit.map(|_| 0.0);
                }
            }
        }
        // Without any friction to scale, ask what common mu would do.
        let frictionless = hold.presses().iter().all(|press| press.mu <= 0.0);
        let scale = if frictionless { hold.with_friction(1.0) } else { *hold };
        let friction_factor = match limit {
            None if closed_is_enough(&scale) => Some(0.0),
            _ => {
                let limit_n = limit.map_or_else(|| any_squeeze_n(&all_loads(cases)), |limit| limit.squeeze_n);
                factor_needed(&scale, &in_turn(cases, &answers, governing), limit_n, 0.0)
            }
        };
        Self { drive: hold.drive(), cases: answers, governing, limit, friction_factor }
    }

    /// The case that asks most.
    pub fn governing_case(&self) -> &CaseHolding {
        &self.cases[self.governing]
    }

    /// The squeeze needed, N per finger; nothing when some case is not held by any.
    pub fn squeeze_n(&self) -> Option<f64> {
        self.governing_case().squeeze_n
    }

    /// The largest multiple of every load that is held at the limit; nothing without a limit or without a load.
    pub fn load_margin(&self) -> Option<f64> {
        self.cases.iter().filter_map(|case| case.margin).reduce(f64::min)
    }

    /// Every case is held.
    pub fn held(&self) -> bool {
        self.cases.iter().all(|case| case.held)
    }

    /// Some number was not proved.
    pub fn unsure(&self) -> bool {
        self.cases.iter().any(|case| case.unsure)
    }

    /// Confirms the squeeze of every case in its worst direction by the linear program. Empty when all agree.
    pub fn doubts(&self, hold: &Hold<'_>, cases: &[Case]) -> Vec<Doubt> {
        let all = 0..self.cases.len();
        all.filter_map(|case| self.doubt(hold, cases, case)).collect()
    }

    /// Confirms the squeeze of the governing case alone.
    pub fn doubt_of_governing(&self, hold: &Hold<'_>, cases: &[Case]) -> Option<Doubt> {
        self.doubt(hold, cases, self.governing)
    }

    fn doubt(&self, hold: &Hold<'_>, cases: &[Case], case: usize) -> Option<Doubt> {
        let own = &self.cases[case];
        if own.unsure {
            return Some(Doubt::Solver("the squeeze could not be proved"));
        }
        let load = &self.worst_load(cases, case)?.wrench;
        let left = cases.get(case)?.squeeze_left;
        let program = match program::squeeze(hold, load) {
            // Beyond any force both mean none.
            Solved::Answer(n) if n > BEYOND / 10.0 * load.norm() => f64::INFINITY,
            Solved::Answer(n) => n / left,
            Solved::Infeasible => f64::INFINITY,
            Solved::Inconclusive(why) => return Some(Doubt::Solver(why)),
        };
        let batch = own
            .squeeze_n
            .map_or(f64::INFINITY, |n| if n * left > BEYOND / 10.0 * load.norm() { f64::INFINITY } else { n });
        if own.lets_go_above_n.is_some() || (hold.drive() == Drive::Equal && own.squeeze_n.is_some()) {
            let squeeze_n = self.squeeze_n().unwrap_or(0.0);
            let most_n = cases.get(case)?.loads.iter().fold(f64::INFINITY, |least, load| {
                match program::most_squeeze(hold, &load.wrench, any_squeeze_n(&[(load.wrench, 1.0)])) {
                    Solved::Answer(n) => least.min(n / left),
                    Solved::Infeasible | Solved::Inconclusive(_) => least,
                }
            });
            let lets_go = most_n < squeeze_n * (1.0 - AGREE);
            let near = (most_n - squeeze_n).abs() <= AGREE * (1.0 + squeeze_n);
            if lets_go != own.lets_go_above_n.is_some() && !near {
                return Some(Doubt::Squeeze {
                    case: own.name.clone(),
                    batch: own.lets_go_above_n.unwrap_or(f64::INFINITY),
                    program: most_n,
                });
            }
        }
        let both_none = batch.is_infinite() && program.is_infinite();
        let agree = both_none || (batch - program).abs() <= AGREE * (1.0 + batch);
        (!agree).then(|| Doubt::Squeeze { case: own.name.clone(), batch, program })
    }

    /// The worst load of a case.
    pub fn worst_load<'c>(&self, cases: &'c [Case], case: usize) -> Option<&'c Load> {
        cases.get(case)?.loads.get(self.cases.get(case)?.worst)
    }
}

/// Agreement asked of the batch solver and the linear program, relative.
const AGREE: f64 = 1e-6;

/// A load and the part of the squeeze that is left for it.
pub type Asked = (Wrench, f64);

/// The largest squeeze that still holds every load of a case, N per finger.
fn most(squeezer: &mut Squeezer<'_>, hold: &Hold<'_>, case: &Case) -> f64 {
    let one = |load: &Load| {
        squeezer.most(&load.wrench).unwrap_or_else(|| {
            match program::most_squeeze(hold, &load.wrench, any_squeeze_n(&[(load.wrench, 1.0)])) {
                Solved::Answer(n) => n,
                // Not known: nothing is said against a larger squeeze.
                Solved::Infeasible | Solved::Inconclusive(_) => f64::INFINITY,
            }
        })
    };
    case.loads.iter().map(one).fold(f64::INFINITY, f64::min) / case.squeeze_left
}

/// Whether a closed grasp holds every load with some squeeze: in the plane, and in space where every finger has friction
/// to bear a weight with. Not where all are pressed alike, for then the fingers' own forces may not balance.
pub fn closed_is_enough(hold: &Hold<'_>) -> bool {
    let in_plane = hold.presses().iter().all(|press| press.half_height <= 0.0);
    hold.drive() == Drive::Adjustable && (in_plane || hold.presses().iter().all(|press| press.mu > 0.0))
}

/// A squeeze that stands for any whatever, N per finger.
pub fn any_squeeze_n(loads: &[Asked]) -> f64 {
    BEYOND / 10.0 * loads.iter().map(|(load, left)| load.norm() / left).fold(0.0, f64::max)
}

/// The squeeze that holds every load, N per finger; nothing when it is above `limit_n`, or when none holds them all.
pub fn common_squeeze_n(hold: &Hold<'_>, loads: &[Asked], limit_n: f64) -> Option<f64> {
    let mut squeezer = Squeezer::new(*hold);
    let mut most_needed = 0.0_f64;
    for (load, left) in loads {
        match least(&mut squeezer, hold, load) {
            Answer::Held(held) => most_needed = most_needed.max(held.squeeze_n / left),
            Answer::Never { .. } | Answer::Unsure => return None,
        }
        if most_needed > at_most(limit_n) {
            return None;
        }
    }
    let keeps =
        |(load, left): &Asked| squeezer.most(load).is_none_or(|most_n| most_n / left >= most_needed * (1.0 - 1e-9));
    (hold.drive() == Drive::Adjustable || loads.iter().all(keeps)).then_some(most_needed)
}

/// Every load of every case.
pub fn all_loads(cases: &[Case]) -> Vec<Asked> {
    cases.iter().flat_map(|case| case.loads.iter().map(|load| (load.wrench, case.squeeze_left))).collect()
}

/// All loads, the one that asks most first: what holds it holds the others, mostly.
fn in_turn(cases: &[Case], answers: &[CaseHolding], governing: usize) -> Vec<Asked> {
    let mut all = all_loads(cases);
    let before: usize = cases[..governing].iter().map(|case| case.loads.len()).sum();
    if let Some(first) = all.get_mut(..=before + answers[governing].worst) {
        first.rotate_right(1);
    }
    all
}

/// The least squeeze for one load, by the batch solver, or by the linear program where that gives up.
fn least(squeezer: &mut Squeezer<'_>, hold: &Hold<'_>, load: &Wrench) -> Answer {
    match squeezer.squeeze(load) {
        Answer::Unsure => match program::squeeze(hold, load) {
            Solved::Answer(squeeze_n) if squeeze_n <= BEYOND * load.norm() => {
                Answer::Held(Held { squeeze_n, direction: Wrench::zeros(), forces: Vec::new(), residual_n: 0.0 })
            }
            Solved::Answer(_) | Solved::Infeasible => Answer::Never { direction: Wrench::zeros() },
            Solved::Inconclusive(_) => Answer::Unsure,
        },
        answer => answer,
    }
}

fn on_one(squeezer: &mut Squeezer<'_>, hold: &Hold<'_>, case: &Case, limit: Option<Limit>) -> CaseHolding {
    let mut worst = CaseHolding {
        name: case.name.clone(),
        squeeze_n: Some(0.0),
        direction_deg: None,
        margin: None,
        held: true,
        lets_go_above_n: None,
        forces: Vec::new(),
        worst: 0,
        unsure: false,
    };
    for (at, load) in case.loads.iter().enumerate() {
        let (squeeze_n, forces) = match least(squeezer, hold, &load.wrench) {
            Answer::Held(held) => (Some(held.squeeze_n / case.squeeze_left), held.forces),
            Answer::Never { .. } => (None, Vec::new()),
            Answer::Unsure => {
                worst.unsure = true;
                (None, Vec::new())
            }
        };
        let asks_more = match (squeeze_n, worst.squeeze_n) {
            _ if at == 0 => true,
            (_, None) => false,
            (None, Some(_)) => true,
            // Of directions that ask alike the first is named, whatever rounding says.
            (Some(now), Some(before)) => now > before * (1.0 + 1e-9),
        };
        if asks_more {
            worst = CaseHolding { squeeze_n, direction_deg: load.direction_deg, forces, worst: at, ..worst };
        }
    }
    worst.held =
        !worst.unsure && worst.squeeze_n.is_some_and(|n| limit.is_none_or(|limit| n <= at_most(limit.squeeze_n)));
    worst.margin = limit.and_then(|limit| match worst.squeeze_n {
        Some(n) => (n > 0.0).then(|| limit.squeeze_n / n),
        None => Some(0.0),
    });
    worst
}

/// A limit met to within rounding is met.
pub fn at_most(limit_n: f64) -> f64 {
    limit_n * (1.0 + 1e-9)
}

/// Relative width of the final bracket on a factor.
const WIDTH: f64 = 1e-11;
/// Rounds after which a point of the envelope is left to the linear program.
const MOST_ROUNDS: usize = 60;

/// Least factor on all friction, not below `from`, with which every load is held by a squeeze of at most `limit_n`, to
/// about 1e-11; nothing when no friction does.
///
/// Cones only grow with friction, so each load has one least factor, and the largest of them is wanted. Near its own a
/// load's squeeze falls like a hyperbola, so limit over squeeze is what the root finder is given: nearly straight.
pub fn factor_needed(hold: &Hold<'_>, loads: &[Asked], limit_n: f64, from: f64) -> Option<f64> {
    let largest = hold.presses().iter().map(|press| press.mu).fold(0.0, f64::max);
    let most = LARGEST_MU / largest;
    if hold.drive() == Drive::Equal {
        return common_factor(hold, loads, limit_n, from, most);
    }
    let mut factor = from;
    let mut squeezer = Squeezer::new(hold.with_friction_times(factor));
    for (load, left) in loads {
        let limit_n = at_most(limit_n * left);
        if squeezer.decide(load, limit_n) == Decision::Enough {
            continue;
        }
        let spare = |factor: f64| {
            let scaled = hold.with_friction_times(factor);
            match least(&mut Squeezer::new(scaled), &scaled, load) {
                Answer::Held(held) => (limit_n / held.squeeze_n - 1.0).min(1.0),
                Answer::Never { .. } | Answer::Unsure => -1.0,
            }
        };
        let mut low = (factor, spare(factor));
        if low.1 >= 0.0 {
            continue;
        }
        // Most ask with friction enough.
        let mut high = if factor < 1.0 { 1.0 } else { 2.0 * factor };
        let mut at_high = spare(high);
        while !(at_high > 0.0) {
            if !(high < most) {
                return None;
            }
            low = (high, at_high);
            high = (2.0 * high).min(most);
            at_high = spare(high);
        }
        factor = root::bracket(spare, low, (high, at_high), WIDTH * (1.0 + high)).1;
        squeezer = Squeezer::new(hold.with_friction_times(factor));
    }
    Some(factor)
}

/// The same where one squeeze has to hold all loads, by halving.
fn common_factor(hold: &Hold<'_>, loads: &[Asked], limit_n: f64, from: f64, most: f64) -> Option<f64> {
    let holds = |factor: f64| common_squeeze_n(&hold.with_friction_times(factor), loads, limit_n).is_some();
    if holds(from) {
        return Some(from);
    }
    let (mut low, mut high) = (from, if from < 1.0 { 1.0 } else { 2.0 * from });
    while !holds(high) {
        if !(high < most) {
            return None;
        }
        (low, high) = (high, (2.0 * high).min(most));
    }
    while high - low > WIDTH * 10.0 * (1.0 + high) {
        let middle = low + (high - low) / 2.0;
        if holds(middle) { high = middle } else { low = middle }
    }
    Some(high)
}

/// The acceleration envelope: for each of `directions` even directions in the plane, from +x, the largest acceleration
/// that is held at a limit of the squeeze on top of a fixed load; nothing when not even that is held. `per_unit` is the
/// load of a unit acceleration along +x and of one along +y. What is held is convex, so the polygon through the ends lies
/// inside the envelope.
pub fn envelope(
    hold: &Hold<'_>,
    fixed: &Wrench,
    per_unit: &[Wrench; 2],
    limit_n: f64,
    directions: usize,
) -> Option<Vec<(f64, f64)>> {
    let mut squeezer = Squeezer::new(*hold);
    match least(&mut squeezer, hold, fixed) {
        Answer::Held(held) if held.squeeze_n <= at_most(limit_n) => {}
        _ => return None,
    }
    let mut ends = Vec::with_capacity(directions);
    for i in 0..directions {
        let deg = 360.0 * i as f64 / directions as f64;
        let (sin, cos) = deg.to_radians().sin_cos();
        ends.push((deg, farthest(&mut squeezer, hold, fixed, &(per_unit[0] * cos + per_unit[1] * sin), limit_n)?));
    }
    Some(ends)
}

/// The largest multiple of `growing` held on top of `fixed`. Newton's method from above: the direction that proves the last
/// one not held names a smaller one. Infinite when the fingers hold any; nothing when they do not hold `fixed`.
fn farthest(
    squeezer: &mut Squeezer<'_>,
    hold: &Hold<'_>,
    fixed: &Wrench,
    growing: &Wrench,
    limit_n: f64,
) -> Option<f64> {
    let mut at: Option<f64> = None;
    for _ in 0..MOST_ROUNDS {
        let load = at.map_or(*growing, |at| fixed + growing * at);
        let direction = match squeezer.squeeze(&load) {
            // The first look is at the growing load alone, as from infinitely far.
            Answer::Held(held) if at.is_some() && held.squeeze_n <= at_most(limit_n) => return at,
            Answer::Held(held) if held.squeeze_n <= 0.0 => return Some(f64::INFINITY),
            Answer::Held(held) => held.direction,
            Answer::Never { direction } => direction,
            Answer::Unsure => break,
        };
        // Held only if -(fixed + a growing) . u <= limit reach(u).
        let rises = -growing.dot(&direction);
        let room = limit_n * hold.reach(&direction, 1.0).max(0.0) + fixed.dot(&direction);
        if rises <= 0.0 || room < -1e-12 * limit_n {
            return None;
        }
        let next = (room / rises).max(0.0);
        if at.is_some_and(|at| next >= at) {
            // Rounding: as near as it gets.
            return Some(next);
        }
        at = Some(next);
    }
    match program::most_held(hold, fixed, growing, limit_n) {
        Solved::Answer(most) => Some(most),
        Solved::Infeasible | Solved::Inconclusive(_) => None,
    }
}
