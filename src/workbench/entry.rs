//! Editing a line of text.

use super::action::Action;
use super::state::Entry;

/// Longest text taken, in characters: a name or a note, not a document.
const LONGEST: usize = 500;

/// Puts a character at the cursor; control characters are dropped.
pub(super) fn insert(entry: &mut Entry, c: char) {
    if c.is_control() || entry.text.chars().count() >= LONGEST {
        return;
    }
    if entry.suggested {
        edit(entry, Action::Empty);
    }
    let byte = byte_at(&entry.text, entry.at);
    entry.text.insert(byte, c);
    entry.at += 1;
    entry.fault = None;
}

/// Carries out an editing action.
pub(super) fn edit(entry: &mut Entry, action: Action) {
    let length = entry.text.chars().count();
    match action {
        Action::Backspace if entry.at > 0 => {
            entry.at -= 1;
            let byte = byte_at(&entry.text, entry.at);
            entry.text.remove(byte);
        }
        Action::Delete if entry.at < length => {
            let byte = byte_at(&entry.text, entry.at);
            entry.text.remove(byte);
        }
        Action::Empty => {
            entry.text.clear();
            entry.at = 0;
        }
        Action::CursorLeft => entry.at = entry.at.saturating_sub(1),
        Action::CursorRight => entry.at = (entry.at + 1).min(length),
        Action::First => entry.at = 0,
        Action::Last => entry.at = length,
        _ => {}
    }
    entry.suggested = false;
    entry.fault = None;
}

fn byte_at(text: &str, chars: usize) -> usize {
    text.char_indices().nth(chars).map_or(text.len(), |(byte, _)| byte)
}
