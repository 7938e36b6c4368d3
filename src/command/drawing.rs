//! A drawing given to the workbench: asks on the terminal for what it does not say, and writes the part file.
//!
//! The workbench works on part files, so that a saved grasp names a file that can be read and checked again. The questions
//! are plain lines before the screen is taken: they work on any terminal, and what was answered stays to be read.

use crate::file::drawing::{self, Options, Refusal, UNIT_NAMES};
use crate::file::{shown, write_new};
use std::io::{self, BufRead, Read, Write};
use std::path::{Path, PathBuf};

/// Endings of files taken for drawings.
const ENDINGS: [&str; 2] = ["dxf", "svg"];

/// True for a path with the ending of a drawing.
pub(super) fn is_drawing(path: &Path) -> bool {
    path.extension().is_some_and(|ending| ENDINGS.iter().any(|known| ending.eq_ignore_ascii_case(known)))
}

/// What came of asking.
#[derive(Debug, PartialEq)]
pub(super) enum Asked {
    /// The part file to open.
    Open(PathBuf),
    /// The person wants no more of it, or the input ended.
    Left,
    /// The drawing gives no part; why and the mend, line by line.
    Refused(Vec<String>),
}

/// Reads a drawing, asking for its unit, the part and the file name as needed, and writes the part file.
///
/// # Errors
/// The terminal cannot be read or written.
pub(super) fn ask(path: &Path, input: &mut impl BufRead, out: &mut impl Write) -> io::Result<Asked> {
    let target = path.with_extension("toml");
    let mut force = false;
    if target.exists() {
        writeln!(out, "{} is there already.", name(&target))?;
        match question(out, input, "o opens it, r replaces it from the drawing, q leaves [o]: ")?.as_deref() {
            Some("" | "o") => return Ok(Asked::Open(target)),
            Some("r") => force = true,
            _ => return Ok(Asked::Left),
        }
    }
    let mut options = Options::default();
    loop {
        match drawing::read(path, &options) {
            Ok(imported) => {
                for line in imported.report.lines() {
                    writeln!(out, "{}", shown(&line))?;
                }
                return Ok(match write_new(&target, &imported.text, force) {
                    Ok(()) => {
                        writeln!(out, "written to {}", name(&target))?;
                        match question(out, input, "Enter opens it, q leaves: ")?.as_deref() {
                            Some("") => Asked::Open(target),
                            _ => Asked::Left,
                        }
                    }
                    Err(faults) => Asked::Refused(faults.lines()),
                });
            }
            Err(refusal @ Refusal::NeedsUnits(_)) => {
                say(out, &refusal, path)?;
                let Some(unit) = until(out, input, &format!("unit ({UNIT_NAMES}), q leaves: "), drawing::unit_named)?
                else {
                    return Ok(Asked::Left);
                };
                options.units = Some(unit);
            }
            Err(Refusal::NeedsPick(report)) => {
                let many = report.parts.len();
                say(out, &Refusal::NeedsPick(report), path)?;
                let pick = |word: &str| word.parse().ok().filter(|number| (1..=many).contains(number));
                let Some(number) = until(out, input, &format!("part (1 to {many}), q leaves: "), pick)? else {
                    return Ok(Asked::Left);
                };
                options.pick = Some(number);
            }
            Err(refusal) => return Ok(Asked::Refused(refusal.lines(path))),
        }
    }
}

fn name(path: &Path) -> String {
    shown(&path.display().to_string())
}

fn say(out: &mut impl Write, refusal: &Refusal, path: &Path) -> io::Result<()> {
    refusal.lines(path).iter().try_for_each(|line| writeln!(out, "{}", shown(line)))
}

/// Asks once; nothing when the input ended.
fn question(out: &mut impl Write, input: &mut impl BufRead, words: &str) -> io::Result<Option<String>> {
    write!(out, "{words}")?;
    out.flush()?;
    let mut line = String::new();
    let read = Read::take(&mut *input, LONGEST).read_line(&mut line)?;
    Ok((read > 0).then(|| line.trim().to_owned()))
}

/// Longest answer read, bytes.
const LONGEST: u64 = 1000;

/// Asks until the answer makes sense; nothing for `q` or when the input ended.
fn until<T>(
    out: &mut impl Write,
    input: &mut impl BufRead,
    words: &str,
    sense: impl Fn(&str) -> Option<T>,
) -> io::Result<Option<T>> {
    loop {
        match question(out, input, words)?.as_deref() {
            None | Some("q") => return Ok(None),
            Some(answer) => {
                if let Some(value) = sense(answer) {
                    return Ok(Some(value));
                }
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A square in an R12 drawing without units, by the DXF reference: group codes and values on alternate lines.
    fn square(x: f64, side: f64) -> String {
        let corners = [(x, 0.0), (x + side, 0.0), (x + side, side), (x, side)];
        let line = |i: usize| {
            let ((x0, y0), (x1, y1)) = (corners[i], corners[(i + 1) % 4]);
            format!("0\nLINE\n8\n0\n10\n{x0}\n20\n{y0}\n11\n{x1}\n21\n{y1}\n")
        };
        (0..4).map(line).collect()
    }

    fn drawing(squares: &[(f64, f64)]) -> (tempfile::TempDir, PathBuf) {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("plates.dxf");
        let entities: String = squares.iter().map(|&(x, side)| square(x, side)).collect();
        std::fs::write(&path, format!("0\nSECTION\n2\nENTITIES\n{entities}0\nENDSEC\n0\nEOF\n")).unwrap();
        (folder, path)
    }

    fn talk(path: &Path, answers: &str) -> (Asked, String) {
        let mut out = Vec::new();
        let asked = ask(path, &mut answers.as_bytes(), &mut out).unwrap();
        (asked, String::from_utf8(out).unwrap())
    }

    #[test]
    fn asks_for_the_unit_and_the_part() {
        let (_folder, path) = drawing(&[(0.0, 40.0), (100.0, 20.0)]);
        let (asked, said) = talk(&path, "furlong\nin\n7\n2\n\n");
        let target = path.with_extension("toml");
        assert_eq!(asked, Asked::Open(target.clone()), "{said}");
        let part = crate::file::read_part(&target).unwrap();
        assert!((part.outline().region().area_mm2 - (20.0 * 25.4_f64).powi(2)).abs() < 1e-6);
    }

    #[test]
    fn a_part_file_that_is_there_is_never_lost_unasked() {
        let (_folder, path) = drawing(&[(0.0, 40.0)]);
        let target = path.with_extension("toml");
        std::fs::write(&target, "mine").unwrap();
        assert_eq!(talk(&path, "o\n").0, Asked::Open(target.clone()));
        assert_eq!(talk(&path, "q\n").0, Asked::Left);
        assert_eq!(std::fs::read_to_string(&target).unwrap(), "mine");
        assert_eq!(talk(&path, "r\nmm\n\n").0, Asked::Open(target.clone()));
        assert!(crate::file::read_part(&target).is_ok());
    }

    #[test]
    fn an_input_that_ends_leaves() {
        let (_folder, path) = drawing(&[(0.0, 40.0)]);
        assert_eq!(talk(&path, "").0, Asked::Left);
        assert_eq!(talk(&path, "mm\nq\n").0, Asked::Left);
    }

    #[test]
    fn a_drawing_without_a_part_says_why() {
        let (_folder, path) = drawing(&[]);
        assert!(matches!(talk(&path, "mm\n").0, Asked::Refused(lines) if !lines.is_empty()));
    }
}
