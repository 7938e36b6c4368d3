//! Faults of a drawing, and its own words made fit for a message.

use crate::file::{FileFault, shown};

/// One fault of a drawing.
pub(super) type Fault = FileFault;

/// Characters of a drawing's own text quoted in a message.
const MOST_QUOTED: usize = 40;

/// A fault of the whole drawing.
pub(super) fn fault(text: impl Into<String>) -> Fault {
    Fault { line: None, text: text.into() }
}

/// A text in quotation marks, shortened, without anything a terminal would obey.
pub(super) fn quoted(bytes: &[u8]) -> String {
    // Four bytes at most to a character; more is not even looked at.
    let text = String::from_utf8_lossy(&bytes[..bytes.len().min(4 * MOST_QUOTED)]);
    format!("\"{}\"", short(&text))
}

/// A text shortened, without anything a terminal would obey.
pub(super) fn short(text: &str) -> String {
    let all = shown(text);
    let mut some: String = all.chars().take(MOST_QUOTED).collect();
    if some.len() < all.len() {
        some.push_str("...");
    }
    some
}
