//! The background ranking: one worker, one waiting slot, the latest request wins.
//!
//! A new request cancels the one that runs and replaces the one that waits, so a key held down never builds a queue.
//! News carry the number of the request they belong to; whoever listens drops the stale ones.

use super::order::Key;
use super::rank::{Cancel, Listing, Progress, Ranking, USUAL_GAP, Wanted, rank_with_snapshots};
use super::scene::{Scene, Spot};
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::{Arc, Condvar, Mutex, MutexGuard, PoisonError};

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
    /// Placements to begin with: the list at the knobs before.
    pub known: Vec<Vec<Spot>>,
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
    /// So many of so many candidate sets; at most some twenty times in a run.
    Progress {
        /// Sets looked at.
        done: u64,
        /// Sets in all.
        total: u64,
        /// How far the best so far may be from the best there is, as a part of its score, where a proof knows.
        gap: Option<f64>,
    },
    /// The best so far.
    Snapshot(Arc<Ranking>),
    /// The finished ranking.
    Done(Arc<Ranking>),
    /// The worker panicked; the message.
    Failed(String),
}

/// Rows in a snapshot: a screenful.
const SNAPSHOT_ROWS: usize = 40;

/// What is asked of the worker.
#[derive(Default)]
struct Slot {
    generation: u64,
    waiting: Option<(u64, Request)>,
    running: Option<Cancel>,
    closed: bool,
}

#[derive(Default)]
struct Shared {
    slot: Mutex<Slot>,
    changed: Condvar,
}

impl Shared {
    /// The slot; a panic elsewhere never leaves it half written.
    fn slot(&self) -> MutexGuard<'_, Slot> {
        self.slot.lock().unwrap_or_else(PoisonError::into_inner)
    }

    /// Waits for a request; nothing when the ranker is gone.
    fn next(&self) -> Option<(u64, Request, Cancel)> {
        let mut slot = self.slot();
        loop {
            if slot.closed {
                return None;
            }
            if let Some((generation, request)) = slot.waiting.take() {
                let cancel = Cancel::default();
                slot.running = Some(cancel.clone());
                return Some((generation, request, cancel));
            }
            slot = self.changed.wait(slot).unwrap_or_else(PoisonError::into_inner);
        }
    }
}

/// The worker. Dropping it cancels whatever runs.
pub struct Ranker {
    shared: Arc<Shared>,
}

impl Ranker {
    /// Starts the worker; it tells its news through `tell`, on its own thread.
    ///
    /// # Errors
    /// The system has no thread to give.
    pub fn new(tell: impl Fn(News) + Send + Sync + 'static) -> std::io::Result<Self> {
        let shared = Arc::new(Shared::default());
        let worker = Arc::clone(&shared);
        std::thread::Builder::new().name("ranking".to_owned()).spawn(move || {
            while let Some((generation, request, cancel)) = worker.next() {
                run(generation, &request, &cancel, &tell);
            }
        })?;
        Ok(Self { shared })
    }

    /// Asks for a ranking and cancels any older one at once. Returns the request's generation number.
    pub fn request(&self, request: Request) -> u64 {
        let mut slot = self.shared.slot();
        slot.generation += 1;
        let generation = slot.generation;
        slot.waiting = Some((generation, request));
        if let Some(running) = slot.running.take() {
            running.cancel();
        }
        self.shared.changed.notify_one();
        generation
    }
}

impl Drop for Ranker {
    fn drop(&mut self) {
        let mut slot = self.shared.slot();
        slot.closed = true;
        if let Some(running) = slot.running.take() {
            running.cancel();
        }
        self.shared.changed.notify_one();
    }
}

fn run(generation: u64, request: &Request, cancel: &Cancel, tell: &(impl Fn(News) + Sync)) {
    let observe = |progress: Progress| {
        let Progress { done, total, gap, snapshot } = progress;
        let what = snapshot.map_or(What::Progress { done, total, gap }, What::Snapshot);
        tell(News { generation, what });
    };
    let Request { scene, key, listing, most, known } = request;
    let wanted = Wanted { key: *key, listing: *listing, most: *most, gap: USUAL_GAP, known };
    let outcome =
        catch_unwind(AssertUnwindSafe(|| rank_with_snapshots(scene, &wanted, cancel, &observe, SNAPSHOT_ROWS)));
    let what = match outcome {
        Ok(Ok(ranking)) => What::Done(Arc::new(ranking)),
        Ok(Err(_cancelled)) => return,
        Err(panic) => What::Failed(message(panic.as_ref())),
    };
    tell(News { generation, what });
}

/// The words of a panic.
fn message(panic: &(dyn std::any::Any + Send)) -> String {
    let words = panic.downcast_ref::<&str>().copied();
    words.or_else(|| panic.downcast_ref::<String>().map(String::as_str)).unwrap_or("a fault without words").to_owned()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::part::{Part, PartDescription};
    use crate::search::Setup;
    use std::sync::mpsc;
    use std::time::Duration;

    fn scene(fingers: usize) -> Arc<Scene> {
        let plate = vec![vec![[0.0, 0.0], [90.0, 0.0], [90.0, 40.0], [30.0, 60.0], [0.0, 40.0]]];
        let mut setup = Setup::default();
        setup.hand.fingers = crate::hand::FingerCount::new(fingers).unwrap();
        let part = Part::new(PartDescription::bare("plate", plate)).unwrap();
        Arc::new(Scene::new(Arc::new(part), setup).unwrap())
    }

    #[test]
    fn the_latest_request_wins() {
        let (sender, news) = mpsc::channel();
        let ranker = Ranker::new(move |one| {
            let _ = sender.send(one);
        })
        .unwrap();
        let request = |fingers| Request {
            scene: scene(fingers),
            key: Key::Quality,
            listing: Listing::Families,
            most: 5,
            known: Vec::new(),
        };
        let mut last = 0;
        for fingers in [5, 4, 5, 4, 3] {
            last = ranker.request(request(fingers));
        }
        let done = loop {
            let one = news.recv_timeout(Duration::from_secs(60)).unwrap();
            if let What::Done(ranking) = one.what
                && one.generation == last
            {
                break ranking;
            }
        };
        assert!(done.grasps.iter().all(|listed| listed.family.len() == 3));
        assert!(!done.grasps.is_empty());
        drop(ranker);
        while let Ok(one) = news.recv_timeout(Duration::from_secs(5)) {
            assert!(one.generation <= last);
        }
    }

    #[test]
    fn a_panic_becomes_news() {
        assert_eq!(message(&"words"), "words");
        assert_eq!(message(&String::from("more words")), "more words");
        assert_eq!(message(&7), "a fault without words");
    }
}
