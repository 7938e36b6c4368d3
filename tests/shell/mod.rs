//! The program run as a shell runs it, in a folder with a part.
#![allow(dead_code, reason = "each test program uses some of this")]
#![allow(clippy::unwrap_used, reason = "a test that cannot go on has failed")]

use serde_json::Value;
use std::path::PathBuf;
use std::process::{Command, Output, Stdio};

/// Two by one, COM in the middle: opposite contacts across the width have a = 20 mm.
pub(crate) const BAR: &str = "schema = 1\nname = \"gunwale bar\"\nthickness = 5.0\nmaterial = \"steel\"\nouter = [
  [0, 0],
  [80, 0],
  [80, 40],
  [0, 40],
]\n";

pub(crate) struct Bench {
    pub(crate) folder: tempfile::TempDir,
    pub(crate) part: PathBuf,
}

impl Bench {
    pub(crate) fn new() -> Self {
        let folder = tempfile::tempdir().unwrap();
        let part = folder.path().join("bar.toml");
        std::fs::write(&part, BAR).unwrap();
        Self { folder, part }
    }

    pub(crate) fn write(&self, name: &str, text: &str) -> PathBuf {
        let path = self.folder.path().join(name);
        std::fs::write(&path, text).unwrap();
        path
    }

    /// Runs the program in the folder of the bench.
    pub(crate) fn run(&self, args: &[&str]) -> Output {
        command(args).current_dir(self.folder.path()).output().unwrap()
    }
}

pub(crate) fn command(args: &[&str]) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_holdwright"));
    command.args(args).stdin(Stdio::null()).env_remove("RUST_BACKTRACE");
    command
}

pub(crate) fn out(output: &Output) -> &str {
    std::str::from_utf8(&output.stdout).unwrap()
}

pub(crate) fn err(output: &Output) -> &str {
    std::str::from_utf8(&output.stderr).unwrap()
}

/// The one JSON object of a run that went well.
#[track_caller]
pub(crate) fn json(output: &Output) -> Value {
    assert_eq!(output.status.code(), Some(0), "{}", err(output));
    assert_eq!(out(output).lines().count(), 1);
    serde_json::from_slice(&output.stdout).unwrap()
}

/// Text as it reads, wherever its lines break.
pub(crate) fn flowing(text: &str) -> String {
    text.split_whitespace().collect::<Vec<_>>().join(" ")
}

/// The lines of complaint of a run that ended with exit code 2 and no result.
#[track_caller]
pub(crate) fn complaints(output: &Output) -> Vec<&str> {
    assert_eq!(output.status.code(), Some(2), "{}", err(output));
    assert_eq!(out(output), "");
    err(output).lines().collect()
}

pub(crate) fn keys(value: &Value) -> Vec<&str> {
    let mut keys: Vec<_> = value.as_object().unwrap().keys().map(String::as_str).collect();
    keys.sort_unstable();
    keys
}

pub(crate) fn sorted<const N: usize>(mut words: [&str; N]) -> Vec<&str> {
    words.sort_unstable();
    words.to_vec()
}
