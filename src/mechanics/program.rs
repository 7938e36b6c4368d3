//! The linear programs, stated through `good_lp` and solved by a pure-Rust simplex (`microlp`).
//!
//! The solver is never believed: equality residuals, signs and objective are computed again from our own matrices, and
//! an answer outside tolerance is [`Solved::Inconclusive`].

use super::quality;
use super::spatial::{Hold, Wrench};
use super::wrench::Wrenches;
use crate::hand::Drive;
use good_lp::{Expression, ResolutionError, Solution, SolverModel, Variable, constraint, microlp, variable, variables};
use nalgebra::{DMatrix, DVector, Vector3};
use std::panic::{AssertUnwindSafe, catch_unwind};

/// Outcome of a program.
#[derive(Debug, Clone, PartialEq)]
pub enum Solved<T> {
    /// An answer that passed the checks.
    Answer(T),
    /// No point satisfies the program.
    Infeasible,
    /// The solver gave up, or its answer failed the checks; why.
    Inconclusive(&'static str),
}

impl<T> Solved<T> {
    /// What follows from the answer.
    fn then<U>(self, follow: impl FnOnce(T) -> Solved<U>) -> Solved<U> {
        match self {
            Self::Answer(answer) => follow(answer),
            Self::Infeasible => Solved::Infeasible,
            Self::Inconclusive(why) => Solved::Inconclusive(why),
        }
    }

    /// The same outcome of what is made of the answer.
    pub fn map<U>(self, make: impl FnOnce(T) -> U) -> Solved<U> {
        self.then(|answer| Solved::Answer(make(answer)))
    }
}

/// Largest equality residual accepted, for generators of order one.
const RESIDUAL: f64 = 1e-8;
/// Largest equality residual accepted of a squeeze, relative to the largest weight.
const SHARP: f64 = 1e-10;

/// Weights that balance: `W lambda = 0`, `sum lambda = 1`, all `lambda >= least`.
#[derive(Debug, Clone, PartialEq)]
pub struct Balance {
    /// Weight of each generator.
    pub lambda: Vec<f64>,
    /// The least weight, d: the program's objective.
    pub least: f64,
    /// `|W lambda|`, computed from W.
    pub residual: f64,
}

/// A program `min cost . x` with `sum_j x_j column_j = target`, `x >= 0`.
struct Program {
    columns: Vec<Vec<f64>>,
    cost: Vec<f64>,
    target: Vec<f64>,
    /// A weight may be below 0 by this much; by default by what rounding of the largest one leaves.
    below: Option<f64>,
}

impl Program {
    /// Adds an equation with no columns yet.
    fn add_row(&mut self, target: f64) {
        self.target.push(target);
        self.columns.iter_mut().for_each(|column| column.push(0.0));
    }

    /// Adds a variable that stands in no equation yet; its number.
    fn add_column(&mut self, cost: f64) -> usize {
        self.columns.push(vec![0.0; self.target.len()]);
        self.cost.push(cost);
        self.columns.len() - 1
    }

    /// Solves the program.
    ///
    /// Columns that are parallel but for a hair can lead the simplex method astray. An answer that fails its checks is
    /// asked for again with the columns and the equations in reverse, which takes another path of pivots; it has to pass the
    /// same checks: the equations within [`RESIDUAL`], no weight below what is allowed.
    fn solve(&self) -> Solved<Vec<f64>> {
        let first = self.attempt();
        if !matches!(first, Solved::Inconclusive(_)) {
            return first;
        }
        let reversed = |list: &[f64]| list.iter().rev().copied().collect::<Vec<f64>>();
        let turned = Self {
            columns: self.columns.iter().rev().map(|column| reversed(column)).collect(),
            cost: reversed(&self.cost),
            target: reversed(&self.target),
            below: self.below,
        };
        match turned.attempt() {
            Solved::Answer(mut x) => {
                x.reverse();
                Solved::Answer(x)
            }
            other => other,
        }
    }

    /// The same answer with the equations met as exactly as its own columns allow. The checks let through what they miss by
    /// 1e-8 of the largest weight; where columns are nearly parallel, that is much in the objective.
    fn sharpened(&self, x: Vec<f64>) -> Solved<Vec<f64>> {
        let size = size(&x);
        let used: Vec<usize> = (0..x.len()).filter(|&j| x[j] > SHARP * size).collect();
        let w = DMatrix::from_fn(self.target.len(), used.len(), |row, at| self.columns[used[at]][row]);
        let target = DVector::from_column_slice(&self.target);
        let mut best = x;
        if used.is_empty() {
            return Solved::Inconclusive("no weight stands out");
        }
        if let Ok(y) = w.svd(true, true).solve(&target, 1e-14) {
            let mut sharp = vec![0.0; best.len()];
            used.iter().zip(y.iter()).for_each(|(&j, y)| sharp[j] = *y);
            if y.iter().all(|y| *y >= 0.0) && self.left_over(&sharp).amax() <= self.left_over(&best).amax() {
                best = sharp;
            }
        }
        if self.left_over(&best).amax() <= SHARP * size {
            Solved::Answer(best)
        } else {
            Solved::Inconclusive("the load is balanced by rounding alone")
        }
    }

    /// One run of the solver, its answer checked.
    fn attempt(&self) -> Solved<Vec<f64>> {
        let mut vars = variables!();
        let x: Vec<Variable> = self.columns.iter().map(|_| vars.add(variable().min(0.0))).collect();
        let objective: Expression = x.iter().zip(&self.cost).map(|(&x, &c)| c * x).sum();
        let mut problem = vars.minimise(objective).using(microlp);
        for (row, &target) in self.target.iter().enumerate() {
            let sum: Expression = x.iter().zip(&self.columns).map(|(&x, column)| column[row] * x).sum();
            problem = problem.with(constraint!(sum == target));
        }
        // The solver asserts what rounding may break on programs with entries far apart.
        let solution = match catch_unwind(AssertUnwindSafe(|| problem.solve())) {
            Ok(Ok(solution)) => solution,
            Ok(Err(ResolutionError::Infeasible)) => return Solved::Infeasible,
            Ok(Err(_)) | Err(_) => return Solved::Inconclusive("the solver gave up"),
        };
        let mut values: Vec<f64> = x.iter().map(|&x| solution.value(x)).collect();
        if self.left_over(&values).amax() > RESIDUAL * size(&values) {
            self.polish(&mut values);
        }
        let size = size(&values);
        if !values.iter().all(|v| v.is_finite() && *v >= -self.below.unwrap_or(RESIDUAL * size)) {
            return Solved::Inconclusive("a negative weight");
        }
        if !(self.left_over(&values).amax() <= RESIDUAL * size) {
            return Solved::Inconclusive("an equation is not met");
        }
        Solved::Answer(values)
    }

    /// By how much each equation is missed.
    fn left_over(&self, x: &[f64]) -> DVector<f64> {
        let mut missed = -DVector::from_column_slice(&self.target);
        for (column, x) in self.columns.iter().zip(x) {
            missed.iter_mut().zip(column).for_each(|(missed, w)| *missed += w * x);
        }
        missed
    }

    /// Meets the equations by the least change of the weights: what tiny pivots left over is made good. The checks that
    /// follow tell whether the weights bore it.
    fn polish(&self, x: &mut [f64]) {
        let missed = self.left_over(x);
        let w = DMatrix::from_fn(self.target.len(), self.columns.len(), |row, column| self.columns[column][row]);
        if let Some(share) = (&w * w.transpose()).lu().solve(&missed) {
            for (x, change) in x.iter_mut().zip(w.tr_mul(&share).iter()) {
                *x -= change;
            }
        }
    }
}

fn size(values: &[f64]) -> f64 {
    values.iter().fold(1.0_f64, |size, v| size.max(v.abs()))
}

/// Quantitative closure (Trinkle 1992): maximise d with `W lambda = 0`, `sum lambda = 1`, `lambda_i >= d`.
///
/// Solved in its three-row form: with `lambda = t + s` it is `min sum s` subject to `W s = -W 1`, `s >= 0`, and
/// `d = 1 / (n + sum s)`. Infeasible means open, and is believed only with a [`separating_direction`] to prove it; an
/// answer with rank 3 means closed.
pub fn closure(wrenches: &Wrenches) -> Solved<Balance> {
    let generators = wrenches.generators();
    let sum: Vector3<f64> = generators.iter().sum();
    let program = Program {
        columns: generators.iter().map(|w| vec![w.x, w.y, w.z]).collect(),
        cost: vec![1.0; generators.len()],
        target: vec![-sum.x, -sum.y, -sum.z],
        // Weights 1 + s are above 0, and so prove closure, as long as no s is near -1.
        below: Some(0.5),
    };
    match program.solve() {
        Solved::Answer(s) => {
            let total = generators.len() as f64 + s.iter().sum::<f64>();
            let lambda: Vec<f64> = s.iter().map(|s| (1.0 + s) / total).collect();
            let left: Vector3<f64> = generators.iter().zip(&lambda).map(|(w, l)| w * *l).sum();
            let least = lambda.iter().copied().fold(f64::INFINITY, f64::min);
            Solved::Answer(Balance { lambda, least, residual: left.norm() })
        }
        // Edges parallel but for 1e-10 to 1e-7 make pivots so small that the simplex method loses its way.
        Solved::Infeasible if separating_direction(wrenches).is_none() => {
            Solved::Inconclusive("no proof of infeasibility")
        }
        Solved::Infeasible => Solved::Infeasible,
        Solved::Inconclusive(why) => Solved::Inconclusive(why),
    }
}

/// The largest pure torque over l the grasp can bring up per newton of total normal force, in one sense (+1 or -1):
/// `max sense * tau` with `sum lambda f = 0`, `sum lambda = 1`, `lambda >= 0`. Infeasible when the forces alone do not
/// balance.
pub fn pure_torque(wrenches: &Wrenches, sense: f64) -> Solved<f64> {
    let generators = wrenches.generators();
    let program = Program {
        columns: generators.iter().map(|w| vec![w.x, w.y, 1.0]).collect(),
        cost: generators.iter().map(|w| -sense * w.z).collect(),
        target: vec![0.0, 0.0, 1.0],
        below: None,
    };
    program.solve().map(|lambda| sense * lambda.iter().zip(generators).map(|(l, w)| l * w.z).sum::<f64>())
}

/// Certificate of an open grasp: a unit direction u with `u . w <= 0` (to 1e-9) for every generator, checked by
/// evaluation. Nothing when no such direction is found.
pub fn separating_direction(wrenches: &Wrenches) -> Option<Vector3<f64>> {
    let (reach, u) = quality::least_reach(wrenches.generators());
    (reach <= super::MARGINAL).then_some(u)
}

/// The least squeeze that holds a load, N per finger: `min F` with the wrenches of all cone-edge forces balancing the
/// load and each finger's normal force at most F, or equal to F where the drive presses all alike.
pub fn squeeze(hold: &Hold<'_>, load: &Wrench) -> Solved<f64> {
    let size = load.norm();
    if size <= 0.0 {
        return Solved::Answer(0.0);
    }
    let (mut program, _) = balance(hold, &(load / size), &Wrench::zeros());
    let squeeze = program.columns.len() - 1;
    program.cost[squeeze] = 1.0;
    program.solve().then(|x| program.sharpened(x)).map(|x| x[squeeze] * size)
}

/// The largest squeeze that still holds a load, N per finger; infinite where it is beyond `cap_n`. See
/// [`super::squeeze::Squeezer::most`].
pub fn most_squeeze(hold: &Hold<'_>, load: &Wrench, cap_n: f64) -> Solved<f64> {
    let size = load.norm();
    if size <= 0.0 {
        return Solved::Answer(f64::INFINITY);
    }
    let (mut program, _) = balance(hold, &(load / size), &Wrench::zeros());
    let squeeze = program.columns.len() - 1;
    program.cost[squeeze] = -1.0;
    program.add_row(1.0);
    let (spare, last) = (program.add_column(0.0), program.target.len() - 1);
    // In units of the cap, so that the last equation is of the size of the others.
    program.columns[squeeze][last] = size / cap_n;
    program.columns[spare][last] = 1.0;
    let most = program.solve().then(|x| program.sharpened(x)).map(|x| x[squeeze] * size);
    most.map(|n| if n >= 0.999 * cap_n { f64::INFINITY } else { n })
}

/// The largest c for which the load `fixed + c growing` is held with a squeeze of at most `limit_n`. With nothing fixed
/// it is the load margin; with the weight fixed and an acceleration growing, a point of the acceleration envelope.
/// Infeasible when not even `fixed` is held.
pub fn most_held(hold: &Hold<'_>, fixed: &Wrench, growing: &Wrench, limit_n: f64) -> Solved<f64> {
    let size = growing.norm();
    if !(size > 0.0 && limit_n > 0.0) {
        return Solved::Inconclusive("nothing grows, or there is no limit");
    }
    let growing = growing / size;
    let (mut program, rows) = balance(hold, &(fixed / limit_n), &growing);
    // In units of the limit: the squeeze and what is left of it make 1.
    let squeeze = program.columns.len() - 1;
    program.add_row(1.0);
    program.add_column(0.0);
    let most = program.add_column(-1.0);
    let last = program.target.len() - 1;
    program.columns[squeeze][last] = 1.0;
    program.columns[most - 1][last] = 1.0;
    for (at, row) in rows.into_iter().enumerate() {
        program.columns[most][at] = growing[row];
    }
    program.solve().then(|x| program.sharpened(x)).map(|x| x[most] * limit_n / size)
}

/// The equations of a load balanced by fingers, the last column the squeeze they share, and which rows of the wrench
/// stand in it: those that are nought throughout, as out of the plane, are left out.
fn balance(hold: &Hold<'_>, load: &Wrench, growing: &Wrench) -> (Program, Vec<usize>) {
    let mut wrenches = Vec::new();
    for (finger, press) in hold.presses().iter().enumerate() {
        wrenches.extend(press.forces(hold.pyramid()).map(|force| (finger, press.wrench(&force))));
    }
    let used = |row: &usize| {
        load[*row] != 0.0 || growing[*row] != 0.0 || wrenches.iter().any(|(_, wrench)| wrench[*row] != 0.0)
    };
    let rows: Vec<usize> = (0..load.len()).filter(used).collect();
    let fingers = hold.presses().len();
    let mut program = Program { columns: Vec::new(), cost: Vec::new(), target: Vec::new(), below: None };
    rows.iter().for_each(|&row| program.add_row(-load[row]));
    (0..fingers).for_each(|_| program.add_row(0.0));
    for (finger, wrench) in wrenches {
        let column = program.add_column(0.0);
        for (at, &row) in rows.iter().enumerate() {
            program.columns[column][at] = wrench[row];
        }
        program.columns[column][rows.len() + finger] = 1.0;
    }
    if hold.drive() == Drive::Adjustable {
        for finger in 0..fingers {
            let spare = program.add_column(0.0);
            program.columns[spare][rows.len() + finger] = 1.0;
        }
    }
    let squeeze = program.add_column(0.0);
    program.columns[squeeze][rows.len()..].fill(-1.0);
    (program, rows)
}
