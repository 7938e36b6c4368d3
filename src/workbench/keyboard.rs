//! Keys as the terminal tells them, in the workbench's own terms.

use super::action::Key;
use crossterm::event::{KeyCode, KeyEvent, KeyEventKind, KeyModifiers};

/// A key press or repeat in the workbench's own terms; releases and unknown keys are nothing.
pub(super) fn key_of(event: &KeyEvent) -> Option<Key> {
    if event.kind == KeyEventKind::Release {
        return None;
    }
    let ctrl = event.modifiers.contains(KeyModifiers::CONTROL);
    Some(match event.code {
        KeyCode::Char(c) if ctrl => Key::Ctrl(c.to_ascii_lowercase()),
        KeyCode::Char(c) => Key::Char(c),
        KeyCode::Up => Key::Up,
        KeyCode::Down => Key::Down,
        KeyCode::Left => Key::Left,
        KeyCode::Right => Key::Right,
        KeyCode::Enter => Key::Enter,
        KeyCode::Esc => Key::Esc,
        KeyCode::Tab => Key::Tab,
        KeyCode::Backspace => Key::Backspace,
        KeyCode::Delete => Key::Delete,
        KeyCode::Home => Key::Home,
        KeyCode::End => Key::End,
        KeyCode::PageUp => Key::PageUp,
        KeyCode::PageDown => Key::PageDown,
        _ => return None,
    })
}

/// True for a key that came right behind an Esc. A terminal sends the same for a key with Alt; on a slow line it is two
/// keys typed one after the other, and keys are never dropped.
pub(super) fn behind_esc(event: &KeyEvent) -> bool {
    event.kind != KeyEventKind::Release && event.modifiers.contains(KeyModifiers::ALT)
}
