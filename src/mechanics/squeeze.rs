//! Squeeze: the least force of one finger with which a load is held, by a small dense simplex method.
//!
//! # The program
//! Minimise F subject to `sum of all cone-edge forces' wrenches = -load`, each finger's normal force at most F (or equal to F
//! where the drive presses all fingers alike). With one squeeze F the fingers reach exactly F times the Minkowski sum of their
//! own hulls, so the program is `min sum x_v` subject to `sum x_v v = -load`, `x >= 0` over the corners v of that sum: six
//! equations whatever the number of fingers. The corners are never written down. The one that enters the basis is the
//! farthest in the direction u of the present prices, and each finger finds its own share of it (column generation; Dantzig &
//! Wolfe 1960).
//!
//! # Why it can be trusted
//! Every answer carries both sides of its proof, computed again from the fingers themselves: forces that balance the load with
//! a squeeze F, and a direction u in which no smaller squeeze reaches, `F >= -load . u / reach(u)`. [`Squeezer::squeeze`] says
//! [`Answer::Unsure`] when the two differ. A load that no squeeze holds comes with a u in which the fingers do not reach at all.
//!
//! # Many loads
//! The basis of the last load is where the next one starts: its columns that would press backwards are turned round into
//! artificial ones and driven out again, mostly in a step or two.

use super::spatial::{Hold, UnitForce, Wrench};
use crate::hand::FingerCount;
use nalgebra::Matrix6;

/// Rows.
const N: usize = 6;
/// Pivots smaller than this are none.
const PIVOT: f64 = 1e-10;
/// Pivots to be had without harm.
const GOOD_PIVOT: f64 = 1e-7;
/// What a weight may fall below nought on the way.
const HAIR: f64 = 1e-11;
/// A direction is farthest enough when it promises less than this, and less than rounding of its own length: bases nearly
/// singular make long ones.
const PRICE: f64 = 1e-11;
/// Rounding of a reach, as a part of the direction's length.
const ROUNDING: f64 = 1e-15;
/// A direction falls short when it does by more than this.
const DECIDED: f64 = 1e-10;
/// What the two sides of a proof may differ by, relative.
const GAP: f64 = 1e-9;
/// The same where bases nearly singular leave no more digits.
const WIDEST_GAP: f64 = 1e-6;
/// Artificial weight below this is rounding.
const NOTHING: f64 = 1e-12;
/// Squeezes above this, for a load of 1, are called none: the fingers reach there by rounding alone.
pub const BEYOND: f64 = 1e6;
/// Pivots after which the method gives up.
const MOST_PIVOTS: usize = 400;
/// Pivots after which tiny ones are taken as they come: passing over them may go round in a circle.
const PATIENT: usize = 60;
/// Pivots without progress after which the load is nudged to break ties.
const MOST_STALLED: usize = 12;

/// The force of one finger, in N.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct FingerForce {
    /// Normal part, into the material.
    pub normal_n: f64,
    /// Part along the edge (along the tangent, material on its left).
    pub along_n: f64,
    /// Part toward the viewer.
    pub up_n: f64,
}

impl FingerForce {
    /// Size of the tangential part, N.
    pub fn tangential_n(&self) -> f64 {
        self.along_n.hypot(self.up_n)
    }
}

/// A load held.
#[derive(Debug, Clone, PartialEq)]
pub struct Held {
    /// The least squeeze, N per finger.
    pub squeeze_n: f64,
    /// No smaller one will do: `squeeze = -load . u` and the fingers reach 1 in direction u.
    pub direction: Wrench,
    /// Forces that balance the load with this squeeze, finger after finger; often one set of many.
    pub forces: Vec<FingerForce>,
    /// By how much they miss the load, N.
    pub residual_n: f64,
}

/// What is said of one load.
#[derive(Debug, Clone, PartialEq)]
pub enum Answer {
    /// A squeeze holds it.
    Held(Held),
    /// No squeeze does: the load pushes along -u, and the fingers do not reach in direction u.
    Never {
        /// Unit wrench direction.
        direction: Wrench,
    },
    /// The method gave up, or the two sides of its proof disagree.
    Unsure,
}

/// Whether a squeeze is enough for a load.
#[derive(Debug, Clone, PartialEq)]
pub enum Decision {
    /// It is.
    Enough,
    /// It is not: the load pushes along -u, and the fingers reach too short in direction u.
    Short {
        /// Wrench direction.
        direction: Wrench,
    },
    /// The method gave up.
    Unsure,
}

#[derive(Debug, Clone, Copy)]
struct Column {
    wrench: Wrench,
    artificial: bool,
    forces: [Option<UnitForce>; FingerCount::MOST],
}

impl Column {
    fn artificial(row: usize) -> Self {
        let mut wrench = Wrench::zeros();
        wrench[row] = 1.0;
        Self { wrench, artificial: true, forces: [None; FingerCount::MOST] }
    }
}

/// Solves load after load for the fingers of one grasp.
#[derive(Debug, Clone)]
pub struct Squeezer<'a> {
    hold: Hold<'a>,
    columns: [Column; N],
    inverse: Matrix6<f64>,
    x: Wrench,
}

impl<'a> Squeezer<'a> {
    /// For these fingers.
    pub fn new(hold: Hold<'a>) -> Self {
        let columns = std::array::from_fn(Column::artificial);
        Self { hold, columns, inverse: Matrix6::identity(), x: Wrench::zeros() }
    }

    /// Whether a squeeze is enough for a load, in fewer steps than it takes to find the least one: any forces within it
    /// will do, and so will any direction in which they reach too short. For screening, without the proof of
    /// [`Squeezer::squeeze`].
    pub fn decide(&mut self, load: &Wrench, enough_n: f64) -> Decision {
        let size = load.norm();
        if size <= 0.0 {
            return Decision::Enough;
        }
        let target = -load / size;
        match self.solve(&target, Some(enough_n / size)) {
            Ok(decision) => decision,
            Err(Answer::Held(held)) if held.squeeze_n * size <= enough_n => Decision::Enough,
            Err(Answer::Held(Held { direction, .. }) | Answer::Never { direction }) => Decision::Short { direction },
            Err(Answer::Unsure) => Decision::Unsure,
        }
    }

    /// The least squeeze for a load.
    pub fn squeeze(&mut self, load: &Wrench) -> Answer {
        let size = load.norm();
        if size <= 0.0 {
            return Answer::Held(Held {
                squeeze_n: 0.0,
                direction: Wrench::zeros(),
                forces: vec![FingerForce::default(); self.hold.presses().len()],
                residual_n: 0.0,
            });
        }
        if !size.is_finite() {
            return Answer::Unsure;
        }
        let target = -load / size;
        match self.least(&target) {
            Answer::Unsure => {
                // From a clean start, once.
                *self = Self::new(self.hold);
                self.least(&target).of_size(size)
            }
            answer => answer.of_size(size),
        }
    }

    /// The largest squeeze that still holds a load, N per finger: infinite where more always does, nothing where the method
    /// gave up or no squeeze holds it. Only a drive that presses all fingers alike has one: pressed harder, fingers that do
    /// not balance one another throw the part out.
    pub fn most(&mut self, load: &Wrench) -> Option<f64> {
        let size = load.norm();
        let target = if size > 0.0 { -load / size } else { return Some(f64::INFINITY) };
        for pivots in 0..MOST_PIVOTS {
            let artificial = (0..N).any(|r| self.columns[r].artificial && self.x[r] > NOTHING);
            if (artificial || pivots == 0) && self.solve(&target, Some(f64::INFINITY)) != Ok(Decision::Enough) {
                return None;
            }
            let u = -self.prices(false);
            let (reach, forces, wrench) = self.hold.farthest(&u);
            if reach <= -1.0 + PRICE + ROUNDING * u.norm() {
                // Of every corner u . v <= reach, so that no weights on them come to more than this.
                let (most, bound) = (self.weight(), target.dot(&u) / reach);
                let gap = (GAP + ROUNDING * u.norm()).min(WIDEST_GAP) * (1.0 + most);
                return ((most - bound).abs() <= gap).then_some(most * size);
            }
            let mut stalled = 0;
            if !self.enter(Column { wrench, artificial: false, forces }, false, pivots < PATIENT, &mut stalled) {
                return Some(f64::INFINITY);
            }
            if self.weight() > BEYOND {
                return Some(f64::INFINITY);
            }
        }
        None
    }

    fn least(&mut self, target: &Wrench) -> Answer {
        match self.solve(target, None) {
            Ok(_) => Answer::Unsure,
            Err(answer) => answer,
        }
    }

    /// Goes on until the least squeeze for a load of size 1 is proved (`Err`) or, where so much would be enough, until
    /// that is decided (`Ok`).
    fn solve(&mut self, target: &Wrench, enough: Option<f64>) -> Result<Decision, Answer> {
        self.start(target);
        let mut stalled = 0;
        let mut renewed = false;
        for pivots in 0..MOST_PIVOTS {
            let artificial: f64 = (0..N).filter(|&r| self.columns[r].artificial).map(|r| self.x[r]).sum();
            let first_phase = artificial > NOTHING;
            if let Some(enough) = enough
                && !first_phase
                && self.weight() <= enough
            {
                return Ok(Decision::Enough);
            }
            let u = self.prices(first_phase);
            let (reach, forces, wrench) = self.hold.farthest(&u);
            if let Some(enough) = enough
                && target.dot(&u) > enough * reach.max(0.0) + DECIDED * u.norm()
            {
                return Ok(Decision::Short { direction: u });
            }
            if first_phase && target.dot(&u) > BEYOND * reach {
                return Err(self.proof(target, true));
            }
            let gain = if first_phase { reach - PRICE * u.norm() } else { reach - 1.0 - PRICE - ROUNDING * u.norm() };
            let entered = gain > 0.0
                && self.enter(
                    Column { wrench, artificial: false, forces },
                    first_phase,
                    pivots < PATIENT,
                    &mut stalled,
                );
            if entered {
                if stalled == MOST_STALLED {
                    self.nudge();
                }
                continue;
            }
            // Nothing better: prove it from scratch, on a fresh inverse if need be.
            let answer = self.proof(target, first_phase);
            if answer == Answer::Unsure && !renewed {
                renewed = true;
                if self.renew(target) {
                    continue;
                }
            }
            return Err(answer);
        }
        Err(Answer::Unsure)
    }

    /// Weight of the columns that cost squeeze.
    fn weight(&self) -> f64 {
        (0..N).filter(|&r| !self.columns[r].artificial).map(|r| self.x[r]).sum()
    }

    /// Puts a new load on the basis that is there.
    fn start(&mut self, target: &Wrench) {
        self.x = self.inverse * target;
        for r in 0..N {
            if self.x[r] < 0.0 {
                self.turn(r);
            }
        }
    }

    /// Turns a column that would press backwards round into an artificial one.
    fn turn(&mut self, r: usize) {
        let column = &mut self.columns[r];
        column.wrench = -column.wrench;
        column.artificial = true;
        column.forces = [None; FingerCount::MOST];
        self.x[r] = -self.x[r];
        self.inverse.row_mut(r).neg_mut();
    }

    /// Prices of the rows: in the first phase artificial weight costs, afterwards squeeze does.
    fn prices(&self, first_phase: bool) -> Wrench {
        let mut u = Wrench::zeros();
        for r in 0..N {
            if self.columns[r].artificial == first_phase {
                u += self.inverse.row(r).transpose();
            }
        }
        u
    }

    /// Brings a column into the basis; false when nothing gives way for it.
    fn enter(&mut self, column: Column, first_phase: bool, patient: bool, stalled: &mut usize) -> bool {
        let d = self.inverse * column.wrench;
        // Tiny pivots ruin the inverse; they are taken only where there is no other.
        let Some(r) =
            [GOOD_PIVOT, PIVOT][usize::from(!patient)..].iter().find_map(|least| self.leaves(&d, first_phase, *least))
        else {
            return false;
        };
        let gone = !first_phase && self.columns[r].artificial;
        let step = if gone { 0.0 } else { self.x[r].max(0.0) / d[r] };
        *stalled = if step > NOTHING { 0 } else { *stalled + 1 };
        let pivot = self.inverse.row(r) / d[r];
        for other in 0..N {
            if other != r && d[other] != 0.0 {
                let row = self.inverse.row(other) - pivot * d[other];
                self.inverse.set_row(other, &row);
                self.x[other] -= step * d[other];
            }
        }
        self.inverse.set_row(r, &pivot);
        self.x[r] = step;
        self.columns[r] = column;
        // What a pivot passed over let fall below nought is driven out again.
        for other in 0..N {
            if self.x[other] < -HAIR {
                self.turn(other);
            }
        }
        true
    }

    /// Which weight gives way for a column that changes the weights by -d, with a pivot of at least `least`.
    fn leaves(&self, d: &Wrench, first_phase: bool, least: f64) -> Option<usize> {
        // Artificial columns that are down to nothing go first: they must not come back.
        let gone = |r: usize| !first_phase && self.columns[r].artificial && d[r].abs() > least;
        // How far the column may come in before another weight falls below nought by more than a hair. Of all that then
        // may leave, the one with the largest pivot does (Harris 1973).
        let mut farthest = f64::INFINITY;
        for r in 0..N {
            if gone(r) {
                farthest = 0.0;
            } else if d[r] > least {
                farthest = farthest.min((self.x[r].max(0.0) + HAIR) / d[r]);
            }
        }
        let mut leaves: Option<usize> = None;
        for r in 0..N {
            let may = gone(r) || (d[r] > least && self.x[r] <= farthest * d[r]);
            if may && leaves.is_none_or(|other| d[r].abs() > d[other].abs()) {
                leaves = Some(r);
            }
        }
        leaves
    }

    /// Lifts weights that are nought a little, each by another amount, so that ties are broken. The proof is made with the
    /// true load.
    fn nudge(&mut self) {
        for r in 0..N {
            if self.x[r].abs() < 1e-10 {
                self.x[r] += 1e-10 * (1.0 + r as f64);
            }
        }
    }

    /// Inverts the basis afresh; false when it is singular.
    fn renew(&mut self, target: &Wrench) -> bool {
        let basis = Matrix6::from_columns(&self.columns.map(|column| column.wrench));
        let Some(inverse) = basis.try_inverse() else { return false };
        self.inverse = inverse;
        self.start(target);
        true
    }

    /// Weights that meet the load and prices that meet the costs, with what rounding in the inverse left over taken out.
    fn refined(&self, target: &Wrench, first_phase: bool) -> (Wrench, Wrench) {
        let basis = Matrix6::from_columns(&self.columns.map(|column| column.wrench));
        let cost = Wrench::from_fn(|r, _| if self.columns[r].artificial == first_phase { 1.0 } else { 0.0 });
        let (mut x, mut u) = (self.inverse * target, self.prices(first_phase));
        for _ in 0..2 {
            x += self.inverse * (target - basis * x);
            u += self.inverse.tr_mul(&(cost - basis.tr_mul(&u)));
        }
        (x, u)
    }

    /// The answer for a load of size 1, both sides of it worked out again.
    fn proof(&self, target: &Wrench, first_phase: bool) -> Answer {
        let (x, u) = self.refined(target, first_phase);
        let u = &u;
        let reach = self.hold.reach(u, 1.0);
        let pushed = target.dot(u);
        if first_phase {
            // No squeeze below pushed / reach will do.
            return if pushed > 0.0 && pushed > BEYOND * reach {
                Answer::Never { direction: u / u.norm() }
            } else {
                Answer::Unsure
            };
        }
        let mut sum = Wrench::zeros();
        let mut squeeze = 0.0;
        let mut forces = vec![FingerForce::default(); self.hold.presses().len()];
        for (column, x) in self.columns.iter().zip(x.iter()) {
            if column.artificial || *x <= 0.0 {
                continue;
            }
            squeeze += x;
            for ((own, total), press) in column.forces.iter().zip(&mut forces).zip(self.hold.presses()) {
                let Some(force) = own else { continue };
                sum += press.wrench(force) * *x;
                total.normal_n += x;
                total.along_n += force.along * x;
                total.up_n += force.up * x;
            }
        }
        let residual_n = (sum - target).norm();
        let least = pushed / reach;
        if squeeze > BEYOND {
            return if least > BEYOND / 2.0 { Answer::Never { direction: u / u.norm() } } else { Answer::Unsure };
        }
        let gap = (GAP + ROUNDING * u.norm()).min(WIDEST_GAP) * (1.0 + squeeze);
        let agree = reach > 0.0 && (squeeze - least).abs() <= gap && residual_n <= gap;
        if agree {
            Answer::Held(Held { squeeze_n: squeeze, direction: u / reach, forces, residual_n })
        } else {
            Answer::Unsure
        }
    }
}

impl Answer {
    /// The answer for a load of size 1 made that for one of another size.
    fn of_size(self, size: f64) -> Self {
        match self {
            Self::Held(mut held) => {
                held.squeeze_n *= size;
                held.residual_n *= size;
                for force in &mut held.forces {
                    force.normal_n *= size;
                    force.along_n *= size;
                    force.up_n *= size;
                }
                Self::Held(held)
            }
            other => other,
        }
    }
}
