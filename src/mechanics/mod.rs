//! What is true of a grasp: friction cones, wrenches, closure, quality, friction needed, placement, escape.
//!
//! Two ways lead to every score, on purpose. The *kernel* ([`force_polygon`]) is a special-purpose routine on stack
//! arrays that scores millions of candidate sets. The *linear programs* ([`program`]) state each definition in readable
//! form; every grasp that is shown is confirmed by them, and a disagreement is called inconclusive instead of ranked.

pub mod assess;
pub mod closure;
pub mod contact;
pub mod escape;
pub mod force_polygon;
pub mod friction;
pub mod holding;
pub mod jaw_formula;
pub mod labels;
pub mod load;
pub mod pair;
pub mod placement;
pub mod program;
pub mod quality;
mod root;
pub mod spatial;
pub mod squeeze;
pub mod wrench;

pub use assess::{Assessment, Doubt, Placement};
pub use closure::Verdict;
pub use contact::Contact;
pub use escape::Escape;
pub use friction::{Condition, FrictionBand};
pub use holding::{Case, CaseHolding, Holding, Limit, LimitedBy};
pub use load::LoadCase;
pub use pair::Pair;
pub use quality::Weakest;
pub use wrench::{Frame, Lever, Wrenches};

/// Quality at or below this is not told from zero: such a grasp is marginal, never closed.
pub const MARGINAL: f64 = 1e-9;
