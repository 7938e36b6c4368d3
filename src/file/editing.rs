//! Changes to the text of a grasp file that leave every other byte as it is: a grasp renamed, its note changed, a grasp
//! taken out.
//!
//! Places come from the parser's spans; where a line is a heading or a comment is only asked outside of values. Whoever
//! calls reads the result back and compares, so a text of a form not foreseen here is refused, never spoilt.

use super::writing::quoted;
use std::ops::Range;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// What is to be done to one grasp of a file.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Edit {
    /// Other texts; nothing where one stays.
    Words {
        /// Name.
        name: Option<String>,
        /// Note.
        note: Option<String>,
    },
    /// Taken out, with the comments that stand right above it or within it.
    Out,
}

/// Carries out edits, each with the number of its grasp in the file. Nothing when the text is not of the form that is
/// written here: grasps as tables headed `[[grasp]]`.
pub(super) fn edited(text: &str, edits: &[(usize, Edit)]) -> Option<String> {
    let (root, errors) = DeTable::parse_recoverable(text);
    if !errors.is_empty() {
        return None;
    }
    let root = root.get_ref();
    let lines = Lines::of(text, root);
    let grasps = root.get("grasp").and_then(|value| value.get_ref().as_array());
    let mut cuts: Vec<(Range<usize>, String)> = Vec::new();
    for (number, edit) in edits {
        let table = grasps?.get(*number)?.get_ref().as_table()?;
        match edit {
            Edit::Words { name, note } => {
                if let Some(name) = name {
                    cuts.push((table.get("name")?.span(), quoted(name)));
                }
                match (note, table.get("note")) {
                    (Some(note), Some(old)) => cuts.push((old.span(), quoted(note))),
                    (Some(note), None) => {
                        let end = table.get("name")?.span().end;
                        cuts.push((end..end, format!("\nnote = {}", quoted(note))));
                    }
                    (None, _) => {}
                }
            }
            Edit::Out => cuts.push((lines.bytes_of_grasp(*number)?, String::new())),
        }
    }
    Some(with_cuts(text, cuts))
}

/// The text with the names of grasps that are to be taken out of another file, in a list of its own.
pub(super) fn with_removed(text: &str, names: &[String]) -> Option<String> {
    let (root, errors) = DeTable::parse_recoverable(text);
    if !errors.is_empty() {
        return None;
    }
    let list = format!("[{}]", names.iter().map(|name| quoted(name)).collect::<Vec<_>>().join(", "));
    let cut = match root.get_ref().get("removed") {
        Some(old) => (old.span(), list),
        None => {
            let end = root.get_ref().get("part_digest")?.span().end;
            (
                end..end,
                format!(
                    "\n# Taken out on the bench, but not yet in the grasp file when the run was cut off.\nremoved = {list}"
                ),
            )
        }
    };
    Some(with_cuts(text, vec![cut]))
}

fn with_cuts(text: &str, mut cuts: Vec<(Range<usize>, String)>) -> String {
    cuts.sort_by_key(|(range, _)| range.start);
    let (mut out, mut at) = (String::with_capacity(text.len()), 0);
    for (range, put) in cuts {
        // Of two cuts that meet the first stands.
        if range.start < at {
            continue;
        }
        out.push_str(&text[at..range.start]);
        out.push_str(&put);
        at = range.end;
    }
    out.push_str(&text[at..]);
    out
}

/// What a line is, as far as it matters here.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Kind {
    Blank,
    Comment,
    /// `[[grasp]]`.
    Grasp,
    /// A table within a grasp.
    Within,
    /// Any other table.
    Other,
    Content,
}

struct Lines(Vec<(Range<usize>, Kind)>);

impl Lines {
    fn of(text: &str, root: &DeTable<'_>) -> Self {
        let mut values = Vec::new();
        gather(root, &mut values);
        values.sort_by_key(|range| range.start);
        let mut lines = Vec::new();
        let mut start = 0;
        for line in text.split_inclusive('\n') {
            let own = start..start + line.len();
            start = own.end;
            // A line that begins within a value is a part of that value.
            let before = values.partition_point(|value| value.start < own.start);
            let inside = before > 0 && values[before - 1].end > own.start;
            lines.push((own, if inside { Kind::Content } else { kind(line) }));
        }
        Self(lines)
    }

    /// From the blank line above a grasp and the comments right above it, to its last line or the comments right below.
    fn bytes_of_grasp(&self, number: usize) -> Option<Range<usize>> {
        let lines = &self.0;
        let is = |at: usize, kind: Kind| lines.get(at).is_some_and(|line| line.1 == kind);
        let head = (0..lines.len()).filter(|&at| is(at, Kind::Grasp)).nth(number)?;
        let mut first = head;
        while first > 0 && is(first - 1, Kind::Comment) {
            first -= 1;
        }
        if first > 0 && is(first - 1, Kind::Blank) {
            first -= 1;
        }
        let stop =
            (head + 1..lines.len()).find(|&at| is(at, Kind::Grasp) || is(at, Kind::Other)).unwrap_or(lines.len());
        let mut end = (head..stop).rev().find(|&at| is(at, Kind::Content) || is(at, Kind::Within)).unwrap_or(head) + 1;
        // Comments that follow without a gap belong to it, unless they lead over to the next heading without one.
        let mut after = end;
        while after < stop && is(after, Kind::Comment) {
            after += 1;
        }
        if after == lines.len() || is(after, Kind::Blank) {
            end = after;
        }
        Some(lines[first].0.start..lines[end - 1].0.end)
    }
}

/// The bytes of every value that is no table of its own heading.
fn gather(table: &DeTable<'_>, values: &mut Vec<Range<usize>>) {
    for (_, value) in table.iter() {
        gather_value(value, values);
    }
}

fn gather_value(value: &Spanned<DeValue<'_>>, values: &mut Vec<Range<usize>>) {
    match value.get_ref() {
        DeValue::Table(inner) => gather(inner, values),
        DeValue::Array(entries)
            if entries.iter().all(|entry| entry.get_ref().as_table().is_some()) && !entries.is_empty() =>
        {
            // An array of tables is one value where it is written in brackets, many headings otherwise.
            let span = value.span();
            if entries.iter().all(|entry| span.start < entry.span().start && entry.span().end <= span.end) {
                values.push(span);
            } else {
                entries.iter().for_each(|entry| gather_value(entry, values));
            }
        }
        _ => values.push(value.span()),
    }
}

fn kind(line: &str) -> Kind {
    let line = line.trim();
    let heading = |opening: &str| {
        let name = line.strip_prefix(opening)?.split([']', '.']).next()?.trim();
        Some(name.trim_matches(['"', '\'']) == "grasp")
    };
    if line.is_empty() {
        Kind::Blank
    } else if line.starts_with('#') {
        Kind::Comment
    } else if let Some(grasp) = heading("[[") {
        let deeper = line[2..].split(']').next().is_some_and(|name| name.contains('.'));
        match (grasp, deeper) {
            (true, false) => Kind::Grasp,
            (true, true) => Kind::Within,
            (false, _) => Kind::Other,
        }
    } else if let Some(grasp) = heading("[") {
        if grasp { Kind::Within } else { Kind::Other }
    } else {
        Kind::Content
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const FILE: &str = "# head\nschema = 1\n\n[[grasp]]\nname = \"a\" # mine\nnote = \"\"\"\n[[grasp]]\n# no comment\n\"\"\"\n\
                        contacts = [\n  { ring = 0 },\n]\n\n[grasp.setup.friction]\nmu = 0.3\n# end of a\n\n# of nobody\n\n# of b\n[[grasp]]\n\
                        name = 'b'\n\n[[grasp]]\nname = \"c\"\nnote = \"x\"\n[[grasp.setup.load]]\nname = \"lift\"\n# end of c";

    fn out(number: usize) -> String {
        edited(FILE, &[(number, Edit::Out)]).unwrap()
    }

    #[test]
    fn a_grasp_taken_out_leaves_every_other_byte() {
        let (head, rest) = FILE.split_once("\n[[grasp]]\nname = \"a\"").unwrap();
        let after_a = rest.split_once("# end of a\n").unwrap().1;
        assert_eq!(out(0), format!("{head}{after_a}"));
        assert_eq!(out(1), FILE.replace("\n# of b\n[[grasp]]\nname = 'b'\n", ""));
        assert_eq!(out(2), FILE.split_once("\n[[grasp]]\nname = \"c\"").unwrap().0);
        let both = edited(FILE, &[(1, Edit::Out), (0, Edit::Out)]).unwrap();
        assert_eq!(both, format!("{head}{}", after_a.replace("\n# of b\n[[grasp]]\nname = 'b'\n", "")));
    }

    #[test]
    fn words_are_put_in_the_place_of_words() {
        let words = |name: Option<&str>, note: Option<&str>| Edit::Words {
            name: name.map(str::to_owned),
            note: note.map(str::to_owned),
        };
        let changed = edited(
            FILE,
            &[(0, words(Some("bow \"end\""), None)), (1, words(None, Some("why"))), (2, words(None, Some("")))],
        );
        let expected = FILE
            .replace("name = \"a\" # mine", "name = 'bow \"end\"' # mine")
            .replace("name = 'b'", "name = 'b'\nnote = \"why\"")
            .replace("note = \"x\"", "note = \"\"");
        assert_eq!(changed.unwrap(), expected);
        assert_eq!(edited(FILE, &[(3, Edit::Out)]), None);
        assert_eq!(edited("grasp = [{ name = \"a\" }]", &[(0, Edit::Out)]), None);
        assert_eq!(edited("grasp = ", &[]), None);
    }
}
