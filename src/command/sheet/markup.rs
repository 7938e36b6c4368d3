//! Text and numbers as XML takes them.

use crate::file::shown;

/// Text from a file as it may stand between tags or in a quoted attribute: nothing in it is markup, and nothing in it
/// is a character that XML 1.0 does not allow.
pub(super) fn escaped(text: &str) -> String {
    let mut safe = String::with_capacity(text.len());
    for c in shown(text).chars() {
        match c {
            '&' => safe.push_str("&amp;"),
            '<' => safe.push_str("&lt;"),
            '>' => safe.push_str("&gt;"),
            '"' => safe.push_str("&quot;"),
            '\'' => safe.push_str("&#39;"),
            '\u{fffe}' | '\u{ffff}' => {}
            c => safe.push(c),
        }
    }
    safe
}

/// A number as it is read, and in full for a program that reads the page.
pub(super) fn datum(class: &str, value: f64, said: &str) -> String {
    format!("<data class=\"{class}\" value=\"{:?}\">{said}</data>", value + 0.0)
}

/// A text cut to so many characters, with a mark where something is missing.
pub(super) fn cut(text: &str, most: usize) -> String {
    if text.chars().count() <= most {
        return text.to_owned();
    }
    text.chars().take(most.saturating_sub(1)).chain(std::iter::once('\u{2026}')).collect()
}

/// A text broken into lines of at most so many characters; longer words are broken too.
pub(super) fn lines(text: &str, most: usize) -> Vec<String> {
    let most = most.max(1);
    let mut lines = Vec::new();
    let mut line = String::new();
    let mut width = 0;
    for word in text.split_whitespace() {
        let mut word = word.to_owned();
        let mut length = word.chars().count();
        if width > 0 && width + 1 + length > most {
            lines.push(std::mem::take(&mut line));
            width = 0;
        }
        while length > most {
            let rest = word.chars().skip(most).collect();
            lines.push(word.chars().take(most).collect());
            word = rest;
            length -= most;
        }
        if width > 0 {
            line.push(' ');
            width += 1;
        }
        line.push_str(&word);
        width += length;
    }
    if !line.is_empty() {
        lines.push(line);
    }
    lines
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn nothing_of_a_text_is_markup() {
        assert_eq!(
            escaped("</svg><script>\"'&\u{1b}[31m\u{202e}\u{ffff}\u{0}"),
            "&lt;/svg&gt;&lt;script&gt;&quot;&#39;&amp;[31m"
        );
    }

    #[test]
    fn lines_keep_their_width_and_lose_nothing() {
        let text = "one two  threefourfivesix seven";
        let broken = lines(text, 7);
        assert_eq!(broken, ["one two", "threefo", "urfives", "ix", "seven"]);
        assert_eq!(lines("  ", 7), Vec::<String>::new());
        assert_eq!(cut("abcdef", 4), "abc\u{2026}");
    }
}
