//! SVG drawings: shapes and paths, transforms, viewBox and physical size (SVG 1.1 and 2).
//!
//! No entity is expanded, no file or address is followed. What a `use` shows is put in place, without end or in too great
//! a number refused.

mod path;
mod shape;
mod viewport;
mod walk;

use super::fault::{Fault, fault, short};
use super::sheet::Sheet;
use encoding_rs::{Encoding, UTF_8};
use roxmltree::{Document, ParsingOptions};
use std::borrow::Cow;

/// Nodes of the XML tree.
const MOST_NODES: u32 = 1_500_000;
/// Attributes in all, told by their equals signs.
const MOST_ATTRIBUTES: usize = 3_000_000;
/// Attributes of one element: the parser compares each with every other.
const MOST_ATTRIBUTES_OF_ONE: usize = 20_000;
/// Declarations of name spaces: the parser copies those in force at each new one.
const MOST_NAMESPACES: usize = 1000;

/// Reads an SVG file.
///
/// # Errors
/// The first fault found.
pub(super) fn read(bytes: &[u8], tell: &mut dyn FnMut(u64, u64)) -> Result<Sheet, Fault> {
    let text = decoded(bytes)?;
    fit_for_parser(&text)?;
    tell(0, 1);
    let options = ParsingOptions { allow_dtd: true, nodes_limit: MOST_NODES, ..ParsingOptions::default() };
    let document = Document::parse_with_options(&text, options).map_err(|error| not_xml(&error))?;
    let root = document.root_element();
    if root.tag_name().name() != "svg" {
        return Err(fault(format!("it is XML, but its root is \"{}\", not svg", short(root.tag_name().name()))));
    }
    let lines: Vec<usize> = std::iter::once(0).chain(text.match_indices('\n').map(|(at, _)| at + 1)).collect();
    let mut sheet = Sheet::new("SVG");
    viewport::units(&root, &mut sheet)?;
    walk::walk(&document, &lines, &mut sheet, tell)?;
    Ok(sheet)
}

fn not_xml(error: &roxmltree::Error) -> Fault {
    if matches!(error, roxmltree::Error::NodesLimitReached) {
        return fault(format!("it has more than {MOST_NODES} elements; leave out what is not the part"));
    }
    let line = usize::try_from(error.pos().row).ok().filter(|&row| row > 0);
    Fault { line, text: format!("not sound XML: {}", short_error(&error.to_string())) }
}

/// A parser's message may quote the file at any length.
fn short_error(message: &str) -> String {
    const MOST: usize = 120;
    let all = crate::file::shown(message);
    let some: String = all.chars().take(MOST).collect();
    if some.len() < all.len() { some + "..." } else { some }
}

/// Refuses what would make the parser take long or much memory.
fn fit_for_parser(text: &str) -> Result<(), Fault> {
    if text.contains("<!ENTITY") {
        return Err(fault("it declares entities of its own; save it as plain SVG without them"));
    }
    let (mut all, mut of_one) = (0, 0);
    for byte in text.bytes() {
        match byte {
            b'<' => of_one = 0,
            b'=' => {
                all += 1;
                of_one += 1;
                if of_one > MOST_ATTRIBUTES_OF_ONE || all > MOST_ATTRIBUTES {
                    return Err(fault("it has more attributes than any drawing; leave out what is not the part"));
                }
            }
            _ => {}
        }
    }
    if text.match_indices("xmlns").nth(MOST_NAMESPACES).is_some() {
        return Err(fault("it declares more name spaces than any drawing; save it as plain SVG"));
    }
    Ok(())
}

/// The text of the file: by its byte order mark, else as its first line says, else as UTF-8.
fn decoded(bytes: &[u8]) -> Result<Cow<'_, str>, Fault> {
    let (encoding, bytes) = match Encoding::for_bom(bytes) {
        Some((encoding, length)) => (encoding, &bytes[length..]),
        None => (declared(bytes), bytes),
    };
    let (text, broken) = encoding.decode_without_bom_handling(bytes);
    if broken {
        let name = encoding.name();
        return Err(fault(format!("it is not sound {name} text, which it says or is taken to be; save it as UTF-8")));
    }
    Ok(text)
}

/// The encoding in the XML declaration; UTF-8 where there is none or it is not known. UTF-16 has a mark of its own.
fn declared(bytes: &[u8]) -> &'static Encoding {
    let head = &bytes[..bytes.len().min(200)];
    let label = || {
        let head = std::str::from_utf8(head).map_or_else(|error| &head[..error.valid_up_to()], str::as_bytes);
        let head = std::str::from_utf8(head).ok()?;
        let declaration = head.trim_start().strip_prefix("<?xml")?;
        let declaration = &declaration[..declaration.find("?>")?];
        let after = declaration.split_once("encoding")?.1.trim_start().strip_prefix('=')?.trim_start();
        let quote = after.chars().next().filter(|c| matches!(c, '"' | '\''))?;
        after[1..].split(quote).next()
    };
    label().and_then(|label| Encoding::for_label(label.as_bytes())).unwrap_or(UTF_8)
}
