//! Numbers as they are shown.

/// Quality: four decimals, or two digits of a power of ten where they would show nothing.
pub(super) fn quality(value: f64) -> String {
    if value > 0.0 && value < 5e-5 { format!("{value:.0e}") } else { format!("{value:.4}") }
}

/// Margin: mu over friction needed. Nothing means that none is needed.
pub(super) fn margin(value: Option<f64>) -> String {
    match value {
        None => "any".to_owned(),
        Some(value) if value >= 99.5 => ">99".to_owned(),
        // A margin that is shown as 1.00 although it is below would mislead: it is rounded down. A hair is
        // left for rounding, so that twenty does not become 19.99.
        Some(value) => format!("{:.2}", (value * 100.0 * (1.0 + 1e-6)).floor() / 100.0),
    }
}

/// Load margin: limit over the squeeze needed, or in words.
pub(super) fn load(margin: Option<f64>, held: bool) -> String {
    match margin {
        _ if !held => "not held".to_owned(),
        None => "held".to_owned(),
        Some(_) => times(margin),
    }
}

/// A multiple of the load.
pub(super) fn times(value: Option<f64>) -> String {
    format!("x{}", margin(value))
}

/// A value as someone gave it: no more decimals than it has, at most four.
pub(super) fn given(value: f64) -> String {
    let text = format!("{value:.4}");
    let text = text.trim_end_matches('0').trim_end_matches('.');
    if text == "-0" { "0".to_owned() } else { text.to_owned() }
}

/// Friction coefficient: at least two decimals, at most four.
pub(super) fn mu(value: f64) -> String {
    let text = format!("{value:.4}");
    let text = text.trim_end_matches('0');
    let decimals = text.len() - text.find('.').map_or(text.len(), |dot| dot + 1);
    if decimals < 2 { format!("{value:.2}") } else { text.to_owned() }
}

/// A part of a score in percent: two figures, never rounded down, so that no bound is told tighter than it is.
pub(super) fn percent(part: f64) -> String {
    let percent = 100.0 * part;
    if percent > 99.0 {
        "over 99 %".to_owned()
    } else if percent >= 9.95 {
        format!("{:.0} %", percent.ceil())
    } else if percent >= 0.005 {
        format!("{:.1} %", (percent * 10.0 - 1e-3).ceil() / 10.0)
    } else {
        "0 %".to_owned()
    }
}

/// Length in mm: about three figures.
pub(super) fn mm(value: f64) -> String {
    let size = value.abs();
    if size >= 1e6 {
        format!("{value:.2e}")
    } else if size >= 99.95 {
        format!("{value:.0}")
    } else if size >= 9.995 {
        format!("{value:.1}")
    } else if size > 0.0 && size < 0.005 {
        format!("{value:.0e}")
    } else {
        format!("{value:.2}")
    }
}

/// Mass: about three figures, in kg or g.
pub(super) fn kg(value: f64) -> String {
    if value >= 0.9995 { format!("{} kg", mm(value)) } else { format!("{} g", mm(value * 1e3)) }
}

/// Position in mm, or a signed force in N: two decimals, without a minus before zero.
pub(super) fn at(value: f64) -> String {
    let text = format!("{value:.2}");
    if text == "-0.00" { "0.00".to_owned() } else { text }
}

/// Angle in whole degrees, -179 to 180.
pub(super) fn degrees(value: f64) -> String {
    let whole = (value.round() as i64).rem_euclid(360);
    (if whole > 180 { whole - 360 } else { whole }).to_string()
}

/// Plain count with its noun.
pub(super) fn count(number: u64, one: &str, many: &str) -> String {
    format!("{number} {}", if number == 1 { one } else { many })
}
