//! Where a number in a built-in table was read.

use std::fmt;

/// Where a number was read, or that it was read nowhere.
#[derive(Debug, PartialEq, Eq)]
pub struct Source {
    /// A few words to stand beside a number.
    pub short: &'static str,
    /// Author, title, edition, table.
    pub full: &'static str,
    /// Known by heart only: not looked up again when the table was made.
    pub from_memory: bool,
}

impl Source {
    pub(crate) const fn seen(short: &'static str, full: &'static str) -> Self {
        Self { short, full, from_memory: false }
    }

    pub(crate) const fn remembered(short: &'static str, full: &'static str) -> Self {
        Self { short, full, from_memory: true }
    }
}

impl fmt::Display for Source {
    /// The few words, with the mark of what is from memory.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.short)?;
        if self.from_memory { f.write_str(", from memory") } else { Ok(()) }
    }
}
