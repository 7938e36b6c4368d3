//! The background ranking: one worker, one waiting slot, the latest request wins.

use super::order::Key;
use super::rank::{Listing, Ranking};
use super::scene::Scene;
use std::sync::Arc;

/// A ranking someone wants.
#[derive(Debug, Clone)]
pub struct Request {
    /// Part and setup.
    pub scene: Arc<Scene>,
    /// Sort key.
    pub key: Key,
    /// Families or members.
    pub listing: Listing,
    /// Rows wanted.
    pub most: usize,
}

/// News from the worker; stale news is told by its generation.
#[derive(Debug, Clone)]
pub struct News {
    /// Number of the request, as [`Ranker::request`] returned it.
    pub generation: u64,
    /// What happened.
    pub what: What,
}

/// What the worker has to say.
#[derive(Debug, Clone)]
pub enum What {
    /// So many of so many candidate sets; at most four times a second.
    Progress {
        /// Sets looked at.
        done: u64,
        /// Sets in all.
        total: u64,
    },
    /// The best so far.
    Snapshot(Arc<Ranking>),
    /// The finished ranking.
    Done(Arc<Ranking>),
    /// The worker panicked; the message.
    Failed(String),
}

/// The worker. Dropping it cancels whatever runs.
pub struct Ranker {}

impl Ranker {
    /// Starts the worker; it tells its news through `tell`, on its own threads.
    pub fn new(_tell: impl Fn(News) + Send + Sync + 'static) -> Self {
        Self {}
    }

    /// Asks for a ranking and cancels any older one at once. Returns the request's generation number.
    pub fn request(&self, _request: Request) -> u64 {
        0
    }
}
