//! Loads in the screening: which candidate sets hold every load case, and with what squeeze.
//!
//! A look through the programs costs a few microseconds a load, so most candidates are turned away before. A load that was
//! not held leaves a direction u in which the fingers reached too short ([`Hold::reach`]); neighbours on the same edges
//! mostly fall short in that direction too, which costs one evaluation to see and is as sure as the program.

use super::scene::Scene;
use crate::hand::{Drive, FingerCount};
use crate::mechanics::holding::{self, Asked};
use crate::mechanics::spatial::{Hold, Pyramid, Wrench};
use crate::mechanics::squeeze::{Answer, Decision, Squeezer};
use crate::mechanics::{Lever, program};

/// Directions kept.
const MOST_CUTS: usize = 16;

/// All loads of the setup, put on the fingers of one family.
pub(super) struct LoadCheck<'a> {
    pyramid: &'a Pyramid,
    half_height: f64,
    drive: Drive,
    /// Loads, those that stopped a candidate last in front.
    loads: Vec<Asked>,
    /// What the squeeze may not exceed, N; infinite where nothing limits it.
    pub limit_n: f64,
    /// Directions that stopped candidates, the last first: u, and how far the fingers have to reach in it.
    cuts: Vec<(Wrench, f64)>,
    /// Size of the largest load, N: what a squeeze is compared with.
    pub size_n: f64,
}

impl<'a> LoadCheck<'a> {
    /// The loads of a scene, nothing when it has none.
    pub(super) fn new(scene: &'a Scene, limit_n: f64) -> Option<Self> {
        let loads = holding::all_loads(scene.cases());
        let size_n = loads.iter().map(|(load, _)| load.norm()).fold(0.0, f64::max);
        let (pyramid, half_height, drive) = scene.in_space();
        (size_n > 0.0).then_some(Self { pyramid, half_height, drive, loads, limit_n, cuts: Vec::new(), size_n })
    }

    fn hold(&self, levers: &[Lever], mus: &[f64], factor: f64) -> Hold<'a> {
        let mut scaled = [0.0; FingerCount::MOST];
        for (scaled, mu) in scaled.iter_mut().zip(mus) {
            *scaled = mu * factor;
        }
        Hold::new(levers, &scaled[..mus.len()], self.half_height, self.pyramid, self.drive)
    }

    /// The fingers with all friction multiplied by a factor, unless a direction that stopped others shows that a squeeze is
    /// not enough for them either.
    fn not_short(&mut self, levers: &[Lever], mus: &[f64], factor: f64, enough_n: f64) -> Option<Hold<'a>> {
        let hold = self.hold(levers, mus, factor);
        let short = |(u, need): &(Wrench, f64)| *need > enough_n * hold.reach(u, 1.0).max(0.0);
        if let Some(at) = self.cuts.iter().position(short) {
            self.cuts[..=at].rotate_right(1);
            return None;
        }
        Some(hold)
    }

    /// Keeps the direction in which a load was not held.
    fn cut(&mut self, at: usize, direction: &Wrench) {
        let (load, left) = self.loads[at];
        self.cuts.truncate(MOST_CUTS - 1);
        self.cuts.insert(0, (*direction, -load.dot(direction) / left));
        self.loads[..=at].rotate_right(1);
    }

    /// The largest squeeze any load asks for, N per finger; nothing when it is more than `enough_n`.
    pub(super) fn squeeze_n(&mut self, levers: &[Lever], mus: &[f64], enough_n: f64) -> Option<f64> {
        let enough_n = holding::at_most(enough_n);
        let hold = self.not_short(levers, mus, 1.0, enough_n)?;
        if self.drive == Drive::Equal {
            return holding::common_squeeze_n(&hold, &self.loads, enough_n);
        }
        let mut squeezer = Squeezer::new(hold);
        let mut most = 0.0_f64;
        let mut governing = None;
        for at in 0..self.loads.len() {
            let (load, left) = self.loads[at];
            // Most loads ask for less than one before them did.
            if most > 0.0 && squeezer.decide(&load, most * left) == Decision::Enough {
                continue;
            }
            let (squeeze_n, direction) = match squeezer.squeeze(&load) {
                Answer::Held(held) => (held.squeeze_n, Some(held.direction)),
                Answer::Never { direction } => (f64::INFINITY, Some(direction)),
                Answer::Unsure => (by_program(&hold, &load), None),
            };
            if squeeze_n / left > most {
                most = squeeze_n / left;
                governing = direction.map(|u| (at, u));
            }
            if most > enough_n {
                break;
            }
        }
        if let Some((at, direction)) = governing {
            self.cut(at, &direction);
        }
        (most <= enough_n).then_some(most)
    }

    /// True when every load is held by a squeeze, all friction multiplied by a factor.
    pub(super) fn within(&mut self, levers: &[Lever], mus: &[f64], factor: f64, limit_n: f64) -> bool {
        let unlimited = limit_n.is_infinite();
        if unlimited && holding::closed_is_enough(&self.hold(levers, mus, 1.0)) {
            return true;
        }
        let enough_n = if unlimited { holding::any_squeeze_n(&self.loads) } else { holding::at_most(limit_n) };
        let Some(hold) = self.not_short(levers, mus, factor, enough_n) else { return false };
        if self.drive == Drive::Equal {
            return self.common_within(&hold, enough_n);
        }
        let mut squeezer = Squeezer::new(hold);
        for at in 0..self.loads.len() {
            let (load, left) = self.loads[at];
            match squeezer.decide(&load, enough_n * left) {
                Decision::Enough => {}
                Decision::Short { direction } => {
                    self.cut(at, &direction);
                    return false;
                }
                Decision::Unsure if by_program(&hold, &load) <= enough_n * left => {}
                Decision::Unsure => return false,
            }
        }
        true
    }

    /// The same where one squeeze has to hold all loads.
    fn common_within(&mut self, hold: &Hold<'a>, enough_n: f64) -> bool {
        // What one load alone denies is cheaper to see, and leaves a direction.
        let mut squeezer = Squeezer::new(*hold);
        for at in 0..self.loads.len() {
            let (load, left) = self.loads[at];
            if let Decision::Short { direction } = squeezer.decide(&load, enough_n * left) {
                self.cut(at, &direction);
                return false;
            }
        }
        holding::common_squeeze_n(hold, &self.loads, enough_n).is_some()
    }

    /// True when every load is held within the limit, all friction multiplied by a factor.
    pub(super) fn holds(&mut self, levers: &[Lever], mus: &[f64], factor: f64) -> bool {
        self.within(levers, mus, factor, self.limit_n)
    }

    /// Least factor on all friction, not below `from`, with which every load is held within the limit; nothing when none
    /// does.
    pub(super) fn factor_needed(&self, levers: &[Lever], mus: &[f64], from: f64) -> Option<f64> {
        let hold = self.hold(levers, mus, 1.0);
        let unlimited = self.limit_n.is_infinite();
        if unlimited && holding::closed_is_enough(&hold) {
            return Some(from);
        }
        let limit_n = if unlimited { holding::any_squeeze_n(&self.loads) } else { self.limit_n };
        holding::factor_needed(&hold, &self.loads, limit_n, from)
    }
}

/// The least squeeze by the linear program, where the batch solver gives up; infinite where that does too.
fn by_program(hold: &Hold<'_>, load: &Wrench) -> f64 {
    match program::squeeze(hold, load) {
        program::Solved::Answer(n) => n,
        program::Solved::Infeasible | program::Solved::Inconclusive(_) => f64::INFINITY,
    }
}
