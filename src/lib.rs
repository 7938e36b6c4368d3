//! Where fingers should touch a flat part, how much friction the grip needs, and how far a finger may be off.
//!
//! # The problem
//! A rigid part of constant thickness is held by k fingers (two to six) that press on its edges with dry friction. Is
//! every load balanced by some finger forces (*force closure*)? How large a load, in every direction, for a given
//! squeeze (*quality*)? How small may friction be, and how far may the fingers be off, before closure is lost?
//!
//! # Frame, units, signs
//! - Part frame: x right, y up, z toward the viewer; right-handed. The plane cross product is `a x b = ax by - ay bx`.
//! - mm, N, N mm, kg, rad inside; degrees only where people read them. Accelerations are in m/s2.
//! - Positions inside are relative to the first vertex of the outer ring ([`part::Part::file_point`] adds it back).
//! - Every edge has a unit normal `n` *into the material* and a tangent `t`, the normal turned by -90 degrees, so that the
//!   material lies on the left of `t`.
//!
//! # Symbols and shapes
//! - `c`: centre of mass, the torque point. `l`: torque scale, mm (by default the *reach*, the distance from c to the
//!   farthest point of the outer ring). Torques always stand as `tau / l` beside forces.
//! - Contact: point `p`, normal `n`, friction coefficient `mu`; normal force `fn >= 0`, tangential `|ft| <= mu fn`.
//! - Generators: the wrenches `w = (fx, fy, ((p - c) x f) / l)` of the cone edges `f = n + mu t` and `f = n - mu t`.
//!   `W` is 3 x 2k (3 x k without friction).
//! - Closed iff `rank W = 3` and `W lambda = 0` for some `lambda > 0`.
//! - Quality: radius of the largest ball about 0 in the convex hull of the columns of W.
//!
//! # The rooms
//! Data runs one way; nothing names a room below it in this list.
//!
//! | room | holds |
//! |---|---|
//! | [`part`] | what is held: outline, validity, mass, materials |
//! | [`hand`] | what holds it: fingers, and the stretches where they fit |
//! | [`mechanics`] | what is true of a grasp: closure, quality, friction, placement, escape |
//! | [`search`] | which grasps are good: sites, candidate sets, order, the background job |
//! | [`mod@file`] | what is kept: part, setup and grasp files |
//! | [`workbench`] | what is seen: the terminal |
//! | [`command`] | what is asked: the command line |
//!
//! The first four do no input or output of any kind.
#![cfg_attr(test, allow(clippy::unwrap_used, clippy::expect_used, clippy::float_cmp))]

pub mod command;
pub mod file;
pub mod hand;
pub mod mechanics;
pub mod part;
pub mod search;
pub mod workbench;
