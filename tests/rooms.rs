//! The house rules: dependencies between the rooms run one way, and the lower rooms touch nothing outside the program.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

use std::fs;
use std::path::{Path, PathBuf};

/// From bottom to top; a room may name itself and any room before it.
const ROOMS: [&str; 7] = ["part", "hand", "mechanics", "search", "file", "workbench", "command"];
/// Rooms without input or output.
const QUIET: [&str; 4] = ["part", "hand", "mechanics", "search"];
/// What a quiet room must not name.
const NOISE: [&str; 12] = [
    "std::fs",
    "std::io::",
    "std::env",
    "std::time",
    "std::process",
    "std::net",
    "println!",
    "eprintln!",
    "ratatui",
    "crossterm",
    "toml::",
    "jiff::",
];
/// Exceptions: a file and what it may name.
const ALLOWED: [(&str, &str); 1] = [("search/job.rs", "std::io::")];

fn sources(folder: &Path) -> Vec<PathBuf> {
    let mut found = Vec::new();
    for entry in fs::read_dir(folder).unwrap() {
        let path = entry.unwrap().path();
        if path.is_dir() {
            found.extend(sources(&path));
        } else if path.extension().is_some_and(|extension| extension == "rs") {
            found.push(path);
        }
    }
    found
}

/// Code lines without comments and without the unit tests at the end of a file.
fn code(path: &Path) -> Vec<String> {
    let text = fs::read_to_string(path).unwrap();
    text.lines()
        .take_while(|line| *line != "#[cfg(test)]")
        .map(|line| line.split("//").next().unwrap_or("").to_owned())
        .collect()
}

/// True when a line names a room of this crate.
fn names(line: &str, room: &str) -> bool {
    [format!("crate::{room}"), format!("holdwright::{room}")].iter().any(|name| {
        line.split(name.as_str()).skip(1).any(|rest| !rest.starts_with(|c: char| c.is_alphanumeric() || c == '_'))
    })
}

#[test]
fn no_room_names_one_above_it() {
    let src = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let mut looked_at = 0;
    let mut faults = Vec::new();
    for (height, room) in ROOMS.iter().enumerate() {
        for path in sources(&src.join(room)) {
            looked_at += 1;
            for (number, line) in code(&path).iter().enumerate() {
                // A group such as `crate::{search, file}` would hide names from this test.
                if line.contains("crate::{") {
                    faults.push(format!("{}:{}: write one path for each use", path.display(), number + 1));
                }
                for above in &ROOMS[height + 1..] {
                    if names(line, above) {
                        faults.push(format!("{}:{}: {room} names {above}", path.display(), number + 1));
                    }
                }
            }
        }
    }
    assert!(looked_at > 30, "only {looked_at} files");
    assert!(faults.is_empty(), "{}", faults.join("\n"));
}

#[test]
fn quiet_rooms_do_no_input_or_output() {
    let src = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let mut faults = Vec::new();
    for room in QUIET {
        for path in sources(&src.join(room)) {
            for (number, line) in code(&path).iter().enumerate() {
                for noise in NOISE {
                    let allowed = ALLOWED.iter().any(|(file, name)| path.ends_with(file) && *name == noise);
                    if line.contains(noise) && !allowed {
                        faults.push(format!("{}:{}: {noise}", path.display(), number + 1));
                    }
                }
            }
        }
    }
    assert!(faults.is_empty(), "{}", faults.join("\n"));
}

#[test]
fn this_test_can_fail() {
    assert!(names("use crate::search::Scene;", "search"));
    assert!(!names("use crate::searching;", "search"));
    assert!(names("let x = crate::file::read(p);", "file"));
}
