//! Fingers in space: the wrenches each can bring up per newton of its normal force, in six rows.
//!
//! A pin of bite height v touches along a vertical line and acts through its two ends, z = +-v/2; a flat pad touches on a
//! rectangle and acts through its four corners. At each such point the friction cone is replaced by an inscribed pyramid
//! with an even number F of sides, `n + mu (cos(2 pi j / F) t + sin(2 pi j / F) z)`: never optimistic, at worst
//! cos(pi / F) of the true cone. Two sides and no height are the exact cone of the plane, so that parts without a
//! thickness need nothing of their own: their three rows are these six with the others left at nought.
//!
//! Wrenches are (fx, fy, fz, mx/l, my/l, mz/l) about the centre of mass; z = 0 is the middle plane of the part.

use super::wrench::{Lever, Wrenches};
use crate::hand::{Drive, FingerCount};
use nalgebra::{Vector2, Vector6};

/// Force in N and torque over l in N, about the centre of mass.
pub type Wrench = Vector6<f64>;

/// Most sides of a friction pyramid.
pub const MOST_SIDES: usize = 64;

/// A friction cone's inscribed pyramid.
#[derive(Debug, Clone, PartialEq)]
pub struct Pyramid {
    sides: usize,
    /// Cosine and sine of the sides in the first quadrant. An even pyramid is its own mirror image in both axes, so these
    /// say all.
    quadrant: Vec<[f64; 2]>,
}

impl Pyramid {
    /// A pyramid of an even number of sides up to [`MOST_SIDES`], or nothing.
    pub fn new(sides: usize) -> Option<Self> {
        if !(2..=MOST_SIDES).contains(&sides) || !sides.is_multiple_of(2) {
            return None;
        }
        let quadrant = (0..=sides / 4).map(|j| unit(j, sides)).collect();
        Some(Self { sides, quadrant })
    }

    /// The exact cone of the plane.
    pub fn planar() -> Self {
        Self { sides: 2, quadrant: vec![[1.0, 0.0]] }
    }

    /// Number of sides.
    pub fn sides(&self) -> usize {
        self.sides
    }

    /// The side that reaches farthest toward (along, up): its cosine and sine, and how far it reaches.
    fn toward(&self, along: f64, up: f64) -> ([f64; 2], f64) {
        let (a, b) = (along.abs(), up.abs());
        let mut best = ([1.0, 0.0], f64::NEG_INFINITY);
        for &[cos, sin] in &self.quadrant {
            let reach = cos * a + sin * b;
            if reach > best.1 {
                best = ([cos, sin], reach);
            }
        }
        let [cos, sin] = best.0;
        ([cos.copysign(along), sin.copysign(up)], best.1)
    }

    /// All sides, as cosine and sine.
    pub fn all(&self) -> impl Iterator<Item = [f64; 2]> {
        (0..self.sides).map(|j| unit(j, self.sides))
    }
}

/// Cosine and sine of j turns out of `of`; exact on the axes.
fn unit(j: usize, of: usize) -> [f64; 2] {
    if (4 * j).is_multiple_of(of) {
        return [[1.0, 0.0], [0.0, 1.0], [-1.0, 0.0], [0.0, -1.0]][4 * j / of % 4];
    }
    let angle = std::f64::consts::TAU * j as f64 / of as f64;
    [angle.cos(), angle.sin()]
}

/// One finger in space.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Press {
    /// Unit normal into the material.
    pub normal: Vector2<f64>,
    /// Unit tangent, the normal turned by -90 degrees.
    pub tangent: Vector2<f64>,
    /// From the centre of mass to the middle of the contact, over l.
    pub arm: Vector2<f64>,
    /// Friction coefficient.
    pub mu: f64,
    /// Half the pad's width over l; 0 for a pin.
    pub half_width: f64,
    /// Half the bite over l; 0 in the plane.
    pub half_height: f64,
}

/// A force of one finger with a unit normal part, at one of its points.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct UnitForce {
    /// Offset of the point along the tangent, over l.
    pub end: f64,
    /// Height of the point, over l.
    pub level: f64,
    /// Part along the tangent.
    pub along: f64,
    /// Part along z.
    pub up: f64,
}

impl Press {
    /// The finger that makes a planar contact, pressing over a height of twice `half_height` (over l).
    pub fn new(lever: &Lever, mu: f64, half_height: f64) -> Self {
        // arm x n is the part of the arm along t, since t x n is +1; arm x t is minus that along n.
        let arm = lever.tangent * lever.normal_torque - lever.normal * lever.tangent_torque;
        Self { normal: lever.normal, tangent: lever.tangent, arm, mu, half_width: lever.spread, half_height }
    }

    /// The wrench of a force of this finger.
    pub fn wrench(&self, force: &UnitForce) -> Wrench {
        let f = self.normal + self.tangent * force.along;
        let r = self.arm + self.tangent * force.end;
        let z = force.level;
        Wrench::new(f.x, f.y, force.up, r.y * force.up - z * f.y, z * f.x - r.x * force.up, r.x * f.y - r.y * f.x)
    }

    /// How far the finger pushes in direction u with a unit normal force, every friction multiplied by `factor`, and the
    /// force that does it.
    pub fn reach(&self, u: &Wrench, pyramid: &Pyramid, factor: f64) -> (f64, UnitForce) {
        let (n, t, a) = (&self.normal, &self.tangent, &self.arm);
        // u . (f, r x f) = f . g with g = u_f + u_m x r: the velocity of the point under the twist u.
        let (gx, gy, gz) = (u[0] - u[5] * a.y, u[1] + u[5] * a.x, u[2] + u[3] * a.y - u[4] * a.x);
        let (g_normal, g_along) = (gx * n.x + gy * n.y, gx * t.x + gy * t.y);
        // Along the tangent t x n is +1, so a step s adds s u_mz to the normal part; it leaves the tangential part alone.
        let up_by_end = u[3] * t.y - u[4] * t.x;
        let (normal_by_level, along_by_level) = (u[4] * n.x - u[3] * n.y, u[4] * t.x - u[3] * t.y);
        let mu = self.mu * factor;
        let ends = [self.half_width, -self.half_width];
        let levels = [self.half_height, -self.half_height];
        let mut best = (f64::NEG_INFINITY, UnitForce { end: 0.0, level: 0.0, along: 0.0, up: 0.0 });
        for &end in &ends[..if self.half_width > 0.0 { 2 } else { 1 }] {
            for &level in &levels[..if self.half_height > 0.0 { 2 } else { 1 }] {
                let along = g_along + level * along_by_level;
                let ([cos, sin], sideways) = pyramid.toward(along, gz + end * up_by_end);
                let reach = g_normal + end * u[5] + level * normal_by_level + mu * sideways;
                if reach > best.0 {
                    best = (reach, UnitForce { end, level, along: mu * cos, up: mu * sin });
                }
            }
        }
        best
    }

    /// Every cone-edge force at every point.
    pub fn forces<'a>(&self, pyramid: &'a Pyramid) -> impl Iterator<Item = UnitForce> + use<'a> {
        let Self { mu, half_width, half_height, .. } = *self;
        let ends = if half_width > 0.0 { vec![half_width, -half_width] } else { vec![0.0] };
        let levels = if half_height > 0.0 { vec![half_height, -half_height] } else { vec![0.0] };
        let points: Vec<_> = ends.iter().flat_map(|&end| levels.iter().map(move |&level| (end, level))).collect();
        let sides = if mu > 0.0 { pyramid.sides } else { 1 };
        points.into_iter().flat_map(move |(end, level)| {
            pyramid.all().take(sides).map(move |[cos, sin]| UnitForce { end, level, along: mu * cos, up: mu * sin })
        })
    }
}

/// All fingers of a grasp in space.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Hold<'a> {
    presses: [Press; FingerCount::MOST],
    count: usize,
    pyramid: &'a Pyramid,
    drive: Drive,
}

const NO_PRESS: Press = Press {
    normal: Vector2::new(0.0, 0.0),
    tangent: Vector2::new(0.0, 0.0),
    arm: Vector2::new(0.0, 0.0),
    mu: 0.0,
    half_width: 0.0,
    half_height: 0.0,
};

impl<'a> Hold<'a> {
    /// Planar contacts pressed on over a height of twice `half_height` (over l), their cones replaced by a pyramid.
    /// Without a height, and with [`Pyramid::planar`], everything stays in the plane.
    pub fn new(levers: &[Lever], mus: &[f64], half_height: f64, pyramid: &'a Pyramid, drive: Drive) -> Self {
        let count = levers.len();
        assert!(count <= FingerCount::MOST, "at most {} fingers", FingerCount::MOST);
        let mut presses = [NO_PRESS; FingerCount::MOST];
        for (press, (lever, &mu)) in presses.iter_mut().zip(levers.iter().zip(mus)) {
            *press = Press::new(lever, mu, half_height);
        }
        Self { presses, count, pyramid, drive }
    }

    /// The fingers of a grasp whose planar wrenches are known.
    pub fn of(wrenches: &Wrenches, half_height: f64, pyramid: &'a Pyramid, drive: Drive) -> Self {
        Self::new(wrenches.levers(), wrenches.mus(), half_height, pyramid, drive)
    }

    /// Finger after finger.
    pub fn presses(&self) -> &[Press] {
        &self.presses[..self.count]
    }

    /// The pyramid their cones are replaced by.
    pub fn pyramid(&self) -> &'a Pyramid {
        self.pyramid
    }

    /// How the squeeze is shared.
    pub fn drive(&self) -> Drive {
        self.drive
    }

    /// How far the fingers push in direction u with a squeeze of 1, every friction multiplied by `factor`: each as far as
    /// it can, or, where the drive leaves it free, not at all.
    ///
    /// For every load and every u, no squeeze below `(-load . u) / reach(u)` holds the load.
    pub fn reach(&self, u: &Wrench, factor: f64) -> f64 {
        let least = match self.drive {
            Drive::Adjustable => 0.0,
            Drive::Equal => f64::NEG_INFINITY,
        };
        self.presses().iter().map(|press| press.reach(u, self.pyramid, factor).0.max(least)).sum()
    }

    /// The forces of [`Hold::reach`], nothing for a finger that is better left out, and their wrenches' sum.
    pub(super) fn farthest(&self, u: &Wrench) -> (f64, [Option<UnitForce>; FingerCount::MOST], Wrench) {
        let mut total = 0.0;
        let mut forces = [None; FingerCount::MOST];
        let mut wrench = Wrench::zeros();
        for (own, press) in forces.iter_mut().zip(self.presses()) {
            let (reach, force) = press.reach(u, self.pyramid, 1.0);
            if self.drive == Drive::Equal || reach > 0.0 {
                total += reach;
                wrench += press.wrench(&force);
                *own = Some(force);
            }
        }
        (total, forces, wrench)
    }

    /// The same fingers with one friction coefficient for all.
    #[must_use]
    pub fn with_friction(mut self, mu: f64) -> Self {
        self.presses.iter_mut().for_each(|press| press.mu = mu);
        self
    }

    /// The same fingers with every friction multiplied by a factor.
    #[must_use]
    pub fn with_friction_times(mut self, factor: f64) -> Self {
        self.presses.iter_mut().for_each(|press| press.mu *= factor);
        self
    }
}
