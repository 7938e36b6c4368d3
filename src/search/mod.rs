//! Which grasps are good: sites on the stretches, candidate sets, their scores, families, order, the background job.

mod best;
mod families;
mod family_forces;
pub mod job;
pub mod leeway;
mod load_check;
mod order;
mod plan;
mod rank;
mod scene;
mod screen;
mod setup;
mod sites;
mod tally;
mod under_load;

pub use best::{Ask, Proved, ProvedGrasp, Proving, prove};
pub use order::Key;
pub use rank::{Cancel, Cancelled, Listed, Listing, Progress, Ranking, rank};
pub use scene::{Grasp, PlaceFault, Scene, Spot, Standing};
pub use setup::{Floors, SearchSettings, Setup, SetupFault, TorqueScale};
