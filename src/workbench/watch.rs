//! Looks now and then whether the files the workbench was opened on changed on disk: by size, time and identity alone.

use super::state::OnDisk;
use std::os::unix::fs::MetadataExt;
use std::path::{Path, PathBuf};
use std::time::{Duration, Instant};

/// Time between two looks.
const PAUSE: Duration = Duration::from_secs(2);

/// What tells one state of a file from another: length, time of the last change, number of the file.
type Mark = (u64, i64, i64, u64);

/// A file and how it looked.
struct File {
    path: PathBuf,
    /// When it was last read, or when its change was told.
    last: Option<Mark>,
}

impl File {
    fn new(path: &Path) -> Self {
        Self { path: path.to_owned(), last: mark(path) }
    }

    /// True when it is another than at the last look. One that is not there may just be being written.
    fn changed(&mut self) -> bool {
        let now = mark(&self.path);
        let changed = now.is_some() && now != self.last;
        if changed {
            self.last = now;
        }
        changed
    }
}

fn mark(path: &Path) -> Option<Mark> {
    let data = std::fs::metadata(path).ok()?;
    Some((data.len(), data.mtime(), data.mtime_nsec(), data.ino()))
}

/// The part file, the setup file where there is one, and when they were last looked at.
pub(super) struct Watch {
    part: File,
    setup: Option<File>,
    looked: Instant,
}

impl Watch {
    pub(super) fn new(part: &Path, setup: Option<&Path>) -> Self {
        Self { part: File::new(part), setup: setup.map(File::new), looked: Instant::now() }
    }

    /// Time until the next look.
    pub(super) fn rest(&self) -> Option<Duration> {
        Some(PAUSE.saturating_sub(self.looked.elapsed()))
    }

    /// What changed since the last look; nothing before the next one is due.
    pub(super) fn look(&mut self) -> Option<OnDisk> {
        if self.looked.elapsed() < PAUSE {
            return None;
        }
        self.looked = Instant::now();
        let changed = OnDisk { part: self.part.changed(), setup: self.setup.as_mut().is_some_and(File::changed) };
        (changed != OnDisk::default()).then_some(changed)
    }

    /// The files are about to be read: as they are now is how they are known.
    pub(super) fn settle(&mut self) {
        self.part.changed();
        if let Some(setup) = &mut self.setup {
            setup.changed();
        }
    }
}
