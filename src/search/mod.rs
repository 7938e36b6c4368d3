//! Which grasps are good: sites on the stretches, candidate sets, their scores, families, order, the background job.

mod best;
mod families;
mod family_forces;
pub mod job;
pub mod leeway;
mod load_check;
pub mod nearby;
mod order;
mod plan;
mod rank;
mod sample;
mod scene;
mod screen;
mod setup;
mod sites;
mod tally;
mod under_load;

pub use best::{Ask, Proved, ProvedGrasp, Proving, prove};
pub use order::Key;
pub use rank::{Cancel, Cancelled, Listed, Listing, Progress, Proof, Ranking, USUAL_GAP, Wanted, rank};
pub use sample::sample;
pub use scene::{Grasp, Place, PlaceFault, Scene, Spot, Standing};
pub use setup::{Floors, SearchSettings, Setup, SetupFault, TorqueScale};
