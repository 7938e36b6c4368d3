//! Values as TOML text, and careful writing: beside the old file, synced, renamed over it.

/// A finite number as TOML writes it, shortest digits that read back to the same number.
pub(super) fn number(value: f64) -> String {
    // Minus nought says nothing and would make equal files differ.
    let value = if value == 0.0 { 0.0 } else { value };
    format!("{value:?}")
}

/// A text as a TOML string.
pub(super) fn quoted(text: &str) -> String {
    toml::Value::from(text).to_string()
}
