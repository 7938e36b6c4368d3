//! Covering: which families may beat a level at all, told in a few nanoseconds each.
//!
//! The score of a family is at most how far its wrench set reaches in *any* one direction u (for the placement: reach over
//! the torque share of u; for closure: it has to be above 0), and the set reaches as far as the farthest of its fingers. So for
//! each stretch and each of a fixed set of directions one bit says whether a finger anywhere on that stretch reaches far
//! enough there, and a family may beat the level only if the bits of its stretches together fill every direction. That
//! is one `or` for 64 directions. With a limit on each finger the reaches add up instead, and sums take the place of bits.
//!
//! A part of a family, with every stretch there is beside it, bounds all families that contain it: where even that leaves
//! a direction open none of them is looked at.

use super::super::families::Family;
use super::super::order::Key;
use super::Setting;
use super::gauge::farthest;
use super::rail::Rail;
use crate::hand::FingerCount;
use nalgebra::Vector3;
use std::ops::ControlFlow;

/// Directions for bits.
const BITS: usize = 1024;
const WORDS: usize = BITS / 64;
/// Directions for sums.
const SUMS: usize = 192;
/// Angle one piece of an arc turns through at most, rad.
const ARC_STEP: f64 = 0.05;
/// What rounding may take from a reach.
const HAIR: f64 = 1e-11;

type Bits = [u64; WORDS];

/// The directions in which stretches reach far enough to beat a level.
pub(super) enum Cover {
    /// A bit for each direction that the stretch fills alone.
    Bits { tracks: Vec<Option<Bits>>, from: Vec<Bits> },
    /// How far each stretch pushes, and the level they have to reach together.
    Sums { tracks: Vec<Option<[f64; SUMS]>>, level: f64 },
}

/// What the families that begin with one stretch came to.
#[derive(Default)]
pub(super) struct Screened {
    /// Those that may beat the level.
    pub kept: Vec<Family>,
    /// How many there are in all, less those of beginnings that were dropped whole.
    pub seen: u64,
    /// True when the patience ran out before the last.
    pub stopped: bool,
}

impl Cover {
    /// For grasps with a merit above `level`.
    pub(super) fn above(setting: &Setting<'_>, level: f64) -> Self {
        let factor = match setting.goal.key {
            Key::Friction if level.is_finite() => (-level).clamp(0.0, 1.0),
            _ => 1.0,
        };
        let directions = directions(if setting.goal.key == Key::QualityPerFinger { SUMS } else { BITS });
        let scale_mm = setting.scene.frame().scale_mm;
        let usable = |rail: &Rail<'_>| setting.goal.key != Key::Placement || rail.room_mm(rail.whole) > level;
        if setting.goal.key == Key::QualityPerFinger {
            let row = |rail: &Rail<'_>| {
                let mut row = [0.0; SUMS];
                row.iter_mut().zip(&directions).for_each(|(own, u)| *own = reach(rail, u, factor).max(0.0));
                row
            };
            let tracks = setting.rails.iter().map(|rail| Some(row(rail))).collect();
            return Self::Sums { tracks, level: level - HAIR };
        }
        let least = |u: &Vector3<f64>| match setting.goal.key {
            Key::Quality => level.max(0.0) - HAIR,
            Key::Placement => level.max(0.0) / scale_mm * u.z.abs() - HAIR,
            _ => -HAIR,
        };
        let bits = |rail: &Rail<'_>| {
            let mut bits = [0; WORDS];
            for (i, u) in directions.iter().enumerate() {
                bits[i / 64] |= u64::from(reach(rail, u, factor) >= least(u)) << (i % 64);
            }
            bits
        };
        let tracks: Vec<Option<Bits>> = setting.rails.iter().map(|rail| usable(rail).then(|| bits(rail))).collect();
        let mut from = vec![[0; WORDS]; tracks.len() + 1];
        for i in (0..tracks.len()).rev() {
            from[i] = tracks[i].map_or(from[i + 1], |bits| or(&from[i + 1], &bits));
        }
        Self::Bits { tracks, from }
    }

    /// Families of so many fingers that begin with a stretch and may beat the level.
    pub(super) fn beginning_with(&self, first: u32, fingers: usize, setting: &Setting<'_>, patience: u64) -> Screened {
        let mut screened = Screened::default();
        let mut walk = Walk { fingers, setting, patience, screened: &mut screened, on: [0; FingerCount::MOST] };
        let flow = match self {
            Self::Bits { tracks, from } => walk.bits(tracks, from, 0, first..first + 1, &[0; WORDS]),
            Self::Sums { tracks, level } => walk.sums(tracks, *level, 0, first..first + 1, &[0.0; SUMS]),
        };
        screened.stopped = flow.is_break();
        screened
    }
}

/// The walk through the families that begin alike.
struct Walk<'a, 'b> {
    fingers: usize,
    setting: &'a Setting<'a>,
    patience: u64,
    screened: &'b mut Screened,
    on: [u32; FingerCount::MOST],
}

impl Walk<'_, '_> {
    /// Counts a family, and says whether to go on.
    fn count(&mut self) -> ControlFlow<()> {
        self.screened.seen += 1;
        if self.screened.seen > self.patience { ControlFlow::Break(()) } else { ControlFlow::Continue(()) }
    }

    fn following(&self, have: usize, last: u32) -> std::ops::Range<u32> {
        let range = self.setting.following(have, last as usize);
        range.start as u32..range.end as u32
    }

    /// Two fingers cannot share a stretch that is a single position.
    fn has_place(&self, have: usize, next: u32) -> bool {
        let whole = self.setting.rails[next as usize].whole;
        whole[0] < whole[1] || !self.on[..have].contains(&next)
    }

    fn keep(&mut self) {
        self.screened.kept.push(Family::new(&self.on[..self.fingers]));
    }

    fn bits(
        &mut self,
        tracks: &[Option<Bits>],
        from: &[Bits],
        have: usize,
        range: std::ops::Range<u32>,
        so_far: &Bits,
    ) -> ControlFlow<()> {
        let last = have + 1 == self.fingers;
        for next in range {
            let Some(bits) = &tracks[next as usize] else { continue };
            if last {
                self.count()?;
                if so_far.iter().zip(bits).all(|(a, b)| a | b == u64::MAX) && self.has_place(have, next) {
                    self.on[have] = next;
                    self.keep();
                }
                continue;
            }
            if !self.has_place(have, next) {
                continue;
            }
            let with = or(so_far, bits);
            if with.iter().zip(&from[next as usize]).any(|(a, b)| a | b != u64::MAX) {
                self.count()?;
                continue;
            }
            self.on[have] = next;
            self.bits(tracks, from, have + 1, self.following(have + 1, next), &with)?;
        }
        ControlFlow::Continue(())
    }

    fn sums(
        &mut self,
        tracks: &[Option<[f64; SUMS]>],
        level: f64,
        have: usize,
        range: std::ops::Range<u32>,
        so_far: &[f64; SUMS],
    ) -> ControlFlow<()> {
        let last = have + 1 == self.fingers;
        for next in range {
            let Some(row) = &tracks[next as usize] else { continue };
            if !self.has_place(have, next) {
                continue;
            }
            if last {
                self.count()?;
                if so_far.iter().zip(row).all(|(a, b)| a + b >= level) {
                    self.on[have] = next;
                    self.keep();
                }
                continue;
            }
            let mut with = *so_far;
            with.iter_mut().zip(row).for_each(|(sum, own)| *sum += own);
            self.on[have] = next;
            self.sums(tracks, level, have + 1, self.following(have + 1, next), &with)?;
        }
        ControlFlow::Continue(())
    }
}

fn or(a: &Bits, b: &Bits) -> Bits {
    std::array::from_fn(|i| a[i] | b[i])
}

/// How far a finger anywhere on a rail reaches in direction u with a unit normal force, all friction multiplied by a factor;
/// never less than the truth.
fn reach(rail: &Rail<'_>, u: &Vector3<f64>, factor: f64) -> f64 {
    let mu = rail.mu * factor;
    if rail.bend <= 0.0 {
        return rail.over(rail.whole, mu).map_or(f64::INFINITY, |(lever, mu, _)| farthest(&lever, mu, u));
    }
    let [from, to] = rail.whole;
    let pieces = (2.0 * rail.half_turn(rail.whole) / ARC_STEP).ceil().max(1.0);
    let piece = |i: f64| {
        let span = [from + (to - from) * i / pieces, from + (to - from) * (i + 1.0) / pieces];
        let Some((lever, wider, longer)) = rail.over(span, mu) else { return f64::INFINITY };
        let own = farthest(&lever, wider, u);
        // A force has a normal part of at least cos(psi + phi) / cos psi: what falls short falls short by that.
        own * if own >= 0.0 { longer } else { mu.hypot(1.0) / wider.hypot(1.0) }
    };
    (0..pieces as usize).map(|i| piece(i as f64)).fold(f64::NEG_INFINITY, f64::max)
}

/// Directions spread evenly over the sphere, in an order in which every beginning is spread evenly too: along a spiral with
/// the golden angle between neighbours (Vogel 1979), taken in strides of the golden section.
fn directions(count: usize) -> Vec<Vector3<f64>> {
    let golden = std::f64::consts::PI * (3.0 - 5.0_f64.sqrt());
    // Odd, so that with a power of two of directions, or three times one, none is left out that 3 does not divide.
    let mut stride = (count as f64 * 0.618_034) as usize | 1;
    while stride.is_multiple_of(3) {
        stride += 2;
    }
    let one = |i: usize| {
        let z = 1.0 - (2.0 * i as f64 + 1.0) / count as f64;
        let (sin, cos) = (golden * i as f64).sin_cos();
        let r = (1.0 - z * z).sqrt();
        Vector3::new(r * cos, r * sin, z)
    };
    (0..count).map(|i| one(i * stride % count)).collect()
}
