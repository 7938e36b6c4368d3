//! Where results and diagnostics go, and how a command ends.

use crate::file::{FileFault, FileFaults};
use std::io::{self, ErrorKind, Write};
use std::path::Path;

/// How a command ended when nothing was wrong with what was asked.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Answer {
    /// Done.
    Done,
    /// Done, and what was asked is not so.
    No,
}

/// Why a command stopped.
#[derive(Debug)]
pub(super) enum Stop {
    /// Bad usage or input; one line each.
    Bad(Vec<String>),
    /// Whoever reads the results has enough.
    Closed,
    /// Results cannot be written.
    Output(io::Error),
}

impl Stop {
    /// Bad usage or input, in one line.
    pub(super) fn bad(line: impl Into<String>) -> Self {
        Self::Bad(vec![line.into()])
    }
}

impl From<FileFaults> for Stop {
    fn from(faults: FileFaults) -> Self {
        Self::Bad(faults.lines())
    }
}

impl From<io::Error> for Stop {
    /// Of an error while writing results.
    fn from(error: io::Error) -> Self {
        if error.kind() == ErrorKind::BrokenPipe { Self::Closed } else { Self::Output(error) }
    }
}

/// Writes a result to standard output.
pub(super) fn print(text: &str) -> Result<(), Stop> {
    print_bytes(text.as_bytes())
}

/// Writes a result of another form to standard output.
pub(super) fn print_bytes(bytes: &[u8]) -> Result<(), Stop> {
    let mut out = io::stdout().lock();
    out.write_all(bytes)?;
    out.flush()?;
    Ok(())
}

/// Writes a result as one JSON object on one line.
pub(super) fn print_json(result: &impl serde::Serialize) -> Result<(), Stop> {
    let mut text = serde_json::to_string(result).map_err(|error| Stop::Output(error.into()))?;
    text.push('\n');
    print(&text)
}

/// Says something worth knowing on standard error.
pub(super) fn note(text: &str) {
    // Nobody is left to tell when standard error is gone.
    let _ = writeln!(io::stderr(), "note: {text}");
}

/// Says what a file's reading noted.
pub(super) fn notes(path: &Path, notes: &[FileFault]) {
    for fault in notes {
        note(&fault.at(path));
    }
}
