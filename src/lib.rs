//! Where to touch a part, how much friction the grip needs, and how far a finger may be off.
#![cfg_attr(test, allow(clippy::unwrap_used, clippy::expect_used, clippy::float_cmp))]

pub mod command;
pub mod file;
pub mod hand;
pub mod mechanics;
pub mod part;
pub mod search;
pub mod workbench;
