//! The linear programs, stated through `good_lp` and solved by a pure-Rust simplex (`microlp`).
//!
//! The solver is never believed: equality residuals, signs and objective are computed again from our own matrices, and
//! an answer outside tolerance is [`Solved::Inconclusive`].

use super::quality;
use super::wrench::Wrenches;
use good_lp::{Expression, ResolutionError, Solution, SolverModel, Variable, constraint, microlp, variable, variables};
use nalgebra::{DMatrix, DVector, SVector, Vector3};

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

/// Largest equality residual accepted, for generators of order one.
const RESIDUAL: f64 = 1e-8;

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

/// Solves `min cost . x` with `sum_j x_j column_j = target`, `x >= 0`.
///
/// Columns that are parallel but for a hair can lead the simplex method astray. An answer that fails its checks is asked
/// for again with the columns and the equations in reverse, which takes another path of pivots; it has to pass the same
/// checks: the equations within [`RESIDUAL`], no weight below `-below`, by default
/// below what rounding of the largest one leaves.
fn solve<const ROWS: usize>(
    columns: &[[f64; ROWS]],
    cost: &[f64],
    target: [f64; ROWS],
    below: Option<f64>,
) -> Solved<Vec<f64>> {
    let first = attempt(columns, cost, target, below);
    if !matches!(first, Solved::Inconclusive(_)) {
        return first;
    }
    let turn = |mut rows: [f64; ROWS]| {
        rows.reverse();
        rows
    };
    let columns: Vec<_> = columns.iter().rev().copied().map(turn).collect();
    let cost: Vec<f64> = cost.iter().rev().copied().collect();
    match attempt(&columns, &cost, turn(target), below) {
        Solved::Answer(mut x) => {
            x.reverse();
            Solved::Answer(x)
        }
        other => other,
    }
}

/// One run of the solver, its answer checked.
fn attempt<const ROWS: usize>(
    columns: &[[f64; ROWS]],
    cost: &[f64],
    target: [f64; ROWS],
    below: Option<f64>,
) -> Solved<Vec<f64>> {
    let mut vars = variables!();
    let x: Vec<Variable> = columns.iter().map(|_| vars.add(variable().min(0.0))).collect();
    let objective: Expression = x.iter().zip(cost).map(|(&x, &c)| c * x).sum();
    let mut problem = vars.minimise(objective).using(microlp);
    for (row, &target) in target.iter().enumerate() {
        let sum: Expression = x.iter().zip(columns).map(|(&x, column)| column[row] * x).sum();
        problem = problem.with(constraint!(sum == target));
    }
    let solution = match problem.solve() {
        Ok(solution) => solution,
        Err(ResolutionError::Infeasible) => return Solved::Infeasible,
        Err(_) => return Solved::Inconclusive("the solver gave up"),
    };
    let mut values: Vec<f64> = x.iter().map(|&x| solution.value(x)).collect();
    if left_over(columns, &values, &target).amax() > RESIDUAL * size(&values) {
        polish(columns, &mut values, &target);
    }
    let size = size(&values);
    if !values.iter().all(|v| v.is_finite() && *v >= -below.unwrap_or(RESIDUAL * size)) {
        return Solved::Inconclusive("a negative weight");
    }
    if !(left_over(columns, &values, &target).amax() <= RESIDUAL * size) {
        return Solved::Inconclusive("an equation is not met");
    }
    Solved::Answer(values)
}

fn size(values: &[f64]) -> f64 {
    values.iter().fold(1.0_f64, |size, v| size.max(v.abs()))
}

/// By how much each equation is missed.
fn left_over<const ROWS: usize>(columns: &[[f64; ROWS]], x: &[f64], target: &[f64; ROWS]) -> SVector<f64, ROWS> {
    let sum: SVector<f64, ROWS> = columns.iter().zip(x).map(|(column, x)| SVector::from(*column) * *x).sum();
    sum - SVector::from(*target)
}

/// Meets the equations by the least change of the weights: what tiny pivots left over is made good. The checks that follow
/// tell whether the weights bore it.
fn polish<const ROWS: usize>(columns: &[[f64; ROWS]], x: &mut [f64], target: &[f64; ROWS]) {
    let missed = left_over(columns, x, target);
    let w = DMatrix::from_fn(ROWS, columns.len(), |row, column| columns[column][row]);
    let missed = DVector::from_column_slice(missed.as_slice());
    if let Some(share) = (&w * w.transpose()).lu().solve(&missed) {
        for (x, change) in x.iter_mut().zip(w.tr_mul(&share).iter()) {
            *x -= change;
        }
    }
}

/// Quantitative closure (Trinkle 1992): maximise d with `W lambda = 0`, `sum lambda = 1`, `lambda_i >= d`.
///
/// Solved in its three-row form: with `lambda = t + s` it is `min sum s` subject to `W s = -W 1`, `s >= 0`, and
/// `d = 1 / (n + sum s)`. Infeasible means open, and is believed only with a [`separating_direction`] to prove it; an
/// answer with rank 3 means closed.
pub fn closure(wrenches: &Wrenches) -> Solved<Balance> {
    let generators = wrenches.generators();
    let sum: Vector3<f64> = generators.iter().sum();
    let columns: Vec<[f64; 3]> = generators.iter().map(|w| [w.x, w.y, w.z]).collect();
    let cost = vec![1.0; columns.len()];
    // Weights 1 + s are above 0, and so prove closure, as long as no s is near -1.
    match solve(&columns, &cost, [-sum.x, -sum.y, -sum.z], Some(0.5)) {
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
    let columns: Vec<[f64; 3]> = generators.iter().map(|w| [w.x, w.y, 1.0]).collect();
    let cost: Vec<f64> = generators.iter().map(|w| -sense * w.z).collect();
    match solve(&columns, &cost, [0.0, 0.0, 1.0], None) {
        Solved::Answer(lambda) => Solved::Answer(-lambda.iter().zip(&cost).map(|(l, c)| l * c).sum::<f64>()),
        Solved::Infeasible => Solved::Infeasible,
        Solved::Inconclusive(why) => Solved::Inconclusive(why),
    }
}

/// Certificate of an open grasp: a unit direction u with `u . w <= 0` (to 1e-9) for every generator, checked by
/// evaluation. Nothing when no such direction is found.
pub fn separating_direction(wrenches: &Wrenches) -> Option<Vector3<f64>> {
    let (reach, u) = quality::least_reach(wrenches.generators());
    (reach <= super::MARGINAL).then_some(u)
}
