//! How things look: colour or none, marker, shape of a character cell.

use ratatui::style::{Color, Modifier, Style};

/// Whether colour is used.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum ColorChoice {
    /// Colour on a terminal, unless `NO_COLOR` is set or the terminal is dumb.
    #[default]
    Auto,
    /// Always.
    Always,
    /// Never.
    Never,
}

impl ColorChoice {
    /// Settles `Auto` by the values of `NO_COLOR` and `TERM` (no-color.org: any value but an empty one means none).
    pub fn settled(self, no_color: Option<&str>, term: Option<&str>) -> Self {
        match self {
            Self::Auto if no_color.is_some_and(|value| !value.is_empty()) || term == Some("dumb") => Self::Never,
            Self::Auto => Self::Always,
            settled => settled,
        }
    }
}

/// What the outline is drawn with.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Marker {
    /// `-`, `|`, `/`, `\` and `+`.
    Ascii,
    /// Line-drawing characters.
    Line,
    /// Braille dots, eight to a cell.
    Braille,
}

impl Marker {
    /// The marker that follows.
    pub fn next(self) -> Self {
        match self {
            Self::Ascii => Self::Line,
            Self::Line => Self::Braille,
            Self::Braille => Self::Ascii,
        }
    }

    /// The word for it.
    pub fn word(self) -> &'static str {
        match self {
            Self::Ascii => "ASCII",
            Self::Line => "lines",
            Self::Braille => "braille dots",
        }
    }
}

/// True when the locale's character set is UTF-8: the first of `LC_ALL`, `LC_CTYPE`, `LANG` that is set and not empty
/// decides (POSIX.1-2017, Base Definitions, 8.2).
pub fn is_utf8(lc_all: Option<&str>, lc_ctype: Option<&str>, lang: Option<&str>) -> bool {
    let deciding = [lc_all, lc_ctype, lang].into_iter().flatten().find(|value| !value.is_empty());
    deciding.is_some_and(|value| {
        let value = value.to_ascii_lowercase();
        value.contains("utf-8") || value.contains("utf8")
    })
}

/// How the screen looks.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Look {
    /// Colours are used.
    pub color: bool,
    /// Marker of the outline.
    pub marker: Marker,
    /// Height of a character cell over its width.
    pub aspect: f64,
    /// The locale's characters are UTF-8.
    pub utf8: bool,
}

impl Look {
    fn colored(self, color: Color, style: Style) -> Style {
        if self.color { style.fg(color) } else { style }
    }

    /// Plain text.
    pub(super) fn plain(self) -> Style {
        Style::new()
    }

    /// Less important text.
    pub(super) fn dim(self) -> Style {
        Style::new().add_modifier(Modifier::DIM)
    }

    /// Titles.
    pub(super) fn title(self) -> Style {
        Style::new().add_modifier(Modifier::BOLD)
    }

    /// The selected row.
    pub(super) fn selected(self) -> Style {
        Style::new().add_modifier(Modifier::REVERSED)
    }

    /// Fingers and their strokes.
    pub(super) fn finger(self) -> Style {
        self.colored(Color::Magenta, Style::new().add_modifier(Modifier::BOLD))
    }

    /// Keep-outs.
    pub(super) fn keep_out(self) -> Style {
        self.colored(Color::Red, Style::new())
    }

    /// Friction cones.
    pub(super) fn cone(self) -> Style {
        self.colored(Color::Cyan, Style::new())
    }

    /// Something good.
    pub(super) fn good(self) -> Style {
        self.colored(Color::Green, Style::new().add_modifier(Modifier::BOLD))
    }

    /// Something to look at.
    pub(super) fn bad(self) -> Style {
        self.colored(Color::Red, Style::new().add_modifier(Modifier::BOLD))
    }

    /// Character of rules between panels.
    pub(super) fn rule(self) -> &'static str {
        if self.marker == Marker::Ascii { "-" } else { "\u{2500}" }
    }

    /// Character of the line between two panels side by side.
    pub(super) fn divider(self) -> &'static str {
        if self.marker == Marker::Ascii { "|" } else { "\u{2502}" }
    }
}
