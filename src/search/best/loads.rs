//! The loads as a box of placements meets them.
//!
//! A load is not held, or asks for a squeeze, because of a direction u in which the fingers reach too short
//! ([`Hold::reach`]). What is found with pads as wide as the box holds for every placement in it; on arcs the reach in
//! direction u is enlarged by how far the wrenches can wander. A solver that gives up says nothing, and excludes nothing.

use super::super::order::Key;
use super::super::scene::Scene;
use super::rail::{Contacts, Rail, Span};
use crate::hand::{Drive, FingerCount};
use crate::mechanics::holding::{self, Asked};
use crate::mechanics::program;
use crate::mechanics::spatial::{Hold, Pyramid, Wrench};
use crate::mechanics::squeeze::{Answer, Decision, Squeezer};

/// All loads of the setup, put on the fingers of one family.
pub(super) struct Loads<'a> {
    pyramid: &'a Pyramid,
    pub half_height: f64,
    drive: Drive,
    /// Loads, those that asked most in front.
    asked: Vec<Asked>,
    /// What the squeeze may not exceed, N; infinite where nothing limits it.
    pub limit_n: f64,
    /// What it may not exceed with the load floor kept.
    pub most_n: f64,
}

impl<'a> Loads<'a> {
    /// The loads of a scene as fingers on these rails meet them; nothing when it has none.
    pub(super) fn new(scene: &'a Scene, rails: &[&Rail<'_>]) -> Option<Self> {
        let asked: Vec<Asked> =
            holding::all_loads(scene.cases()).into_iter().filter(|(load, _)| load.norm() > 0.0).collect();
        if asked.is_empty() {
            return None;
        }
        let (pyramid, half_height, drive) = scene.in_space();
        let limit = scene.limit_on(rails.iter().map(|rail| (rail.edge(), rail.is_flush())));
        let limit_n = limit.map_or(f64::INFINITY, |limit| limit.squeeze_n);
        let floor = scene.setup().floors.load_margin;
        let most_n = if floor > 0.0 { limit_n / floor } else { f64::INFINITY };
        Some(Self { pyramid, half_height, drive, asked, limit_n, most_n })
    }

    /// What a squeeze is told as a multiple of, N: itself, or the limit for the load margin.
    pub(super) fn unit_n(&self, key: Key) -> f64 {
        if key == Key::LoadMargin { self.limit_n } else { 1.0 }
    }

    fn hold(&self, contacts: &Contacts, factor: f64) -> Hold<'a> {
        let mut mus = [0.0; FingerCount::MOST];
        for (scaled, mu) in mus.iter_mut().zip(contacts.mus()) {
            *scaled = mu * factor;
        }
        Hold::new(contacts.levers(), &mus[..contacts.count], self.half_height, self.pyramid, self.drive)
    }

    /// What the contacts of a box wander beyond those of `Contacts`.
    pub(super) fn wander(&self, rails: &[&Rail<'_>], spans: &[Span]) -> f64 {
        rails.iter().zip(spans).map(|(rail, span)| rail.wander(*span, self.half_height)).sum()
    }

    /// The largest squeeze that some load is sure to ask for, N; infinite when no squeeze holds one. `wander` is how far
    /// the wrenches of the contacts may lie beside those given.
    pub(super) fn at_least_n(&mut self, contacts: &Contacts, wander: f64, enough_n: f64) -> f64 {
        let hold = self.hold(contacts, 1.0);
        let mut squeezer = Squeezer::new(hold);
        let mut most = 0.0_f64;
        for at in 0..self.asked.len() {
            let (load, left) = self.asked[at];
            if most > 0.0 && squeezer.decide(&load, most * left) == Decision::Enough {
                continue;
            }
            let direction = match squeezer.squeeze(&load) {
                Answer::Held(held) => held.direction,
                Answer::Never { direction } => direction,
                Answer::Unsure => continue,
            };
            let needed = sure_n(&hold, &load, &direction, wander) / left;
            if needed > most {
                most = needed;
                self.asked[..=at].rotate_right(1);
            }
            if most > enough_n {
                break;
            }
        }
        most
    }

    /// True when some load is sure not to be held by a squeeze.
    pub(super) fn never_within(&mut self, contacts: &Contacts, wander: f64, factor: f64, limit_n: f64) -> bool {
        if limit_n.is_infinite() {
            return false;
        }
        let enough_n = holding::at_most(limit_n);
        let hold = self.hold(contacts, factor);
        let mut squeezer = Squeezer::new(hold);
        for at in 0..self.asked.len() {
            let (load, left) = self.asked[at];
            if let Decision::Short { direction } = squeezer.decide(&load, enough_n * left)
                && sure_n(&hold, &load, &direction, wander) > enough_n * left
            {
                self.asked[..=at].rotate_right(1);
                return true;
            }
        }
        false
    }

    /// The squeeze a grasp needs, N; nothing when a load is not held, or the solvers give up.
    pub(super) fn squeeze_n(&self, contacts: &Contacts) -> Option<f64> {
        let hold = self.hold(contacts, 1.0);
        if self.drive == Drive::Equal {
            return holding::common_squeeze_n(&hold, &self.asked, f64::INFINITY);
        }
        let mut squeezer = Squeezer::new(hold);
        let mut most = 0.0_f64;
        for (load, left) in &self.asked {
            if most > 0.0 && squeezer.decide(load, most * left) == Decision::Enough {
                continue;
            }
            let squeeze_n = match squeezer.squeeze(load) {
                Answer::Held(held) => held.squeeze_n,
                Answer::Never { .. } => return None,
                Answer::Unsure => by_program(&hold, load)?,
            };
            most = most.max(squeeze_n / left);
        }
        Some(most)
    }

    /// True when a grasp holds every load by a squeeze, all friction multiplied by a factor.
    pub(super) fn within(&self, contacts: &Contacts, factor: f64, limit_n: f64) -> bool {
        let hold = self.hold(contacts, factor);
        let unlimited = limit_n.is_infinite();
        if unlimited && holding::closed_is_enough(&hold) {
            return true;
        }
        let enough_n = if unlimited { holding::any_squeeze_n(&self.asked) } else { holding::at_most(limit_n) };
        if self.drive == Drive::Equal {
            return holding::common_squeeze_n(&hold, &self.asked, enough_n).is_some();
        }
        let mut squeezer = Squeezer::new(hold);
        self.asked.iter().all(|(load, left)| match squeezer.decide(load, enough_n * left) {
            Decision::Enough => true,
            Decision::Short { .. } => false,
            Decision::Unsure => by_program(&hold, load).is_some_and(|n| n <= enough_n * left),
        })
    }

    /// Least factor on all friction, not below `from`, with which a grasp holds every load; nothing when none does.
    pub(super) fn factor_needed(&self, contacts: &Contacts, from: f64) -> Option<f64> {
        let hold = self.hold(contacts, 1.0);
        let unlimited = self.limit_n.is_infinite();
        if unlimited && holding::closed_is_enough(&hold) {
            return Some(from);
        }
        let limit_n = if unlimited { holding::any_squeeze_n(&self.asked) } else { self.limit_n };
        holding::factor_needed(&hold, &self.asked, limit_n, from)
    }
}

/// The squeeze a load is sure to ask for because of direction u, a hair less; 0 where u says nothing.
fn sure_n(hold: &Hold<'_>, load: &Wrench, u: &Wrench, wander: f64) -> f64 {
    let pushed = -load.dot(u);
    let reach = hold.reach(u, 1.0) + wander * u.norm();
    if pushed <= 0.0 {
        0.0
    } else if reach <= 0.0 {
        f64::INFINITY
    } else {
        pushed / reach * (1.0 - HAIR)
    }
}

/// What rounding may change of a reach, relative, generously.
const HAIR: f64 = 1e-9;

/// The least squeeze by the linear program, where the batch solver gives up.
fn by_program(hold: &Hold<'_>, load: &Wrench) -> Option<f64> {
    match program::squeeze(hold, load) {
        program::Solved::Answer(n) => Some(n),
        program::Solved::Infeasible | program::Solved::Inconclusive(_) => None,
    }
}
