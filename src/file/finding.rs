//! Part files in a folder, found without checking their outlines.

use super::reading::text_of;
use std::path::{Path, PathBuf};
use toml::de::DeTable;

/// Files looked into at most; a folder with more is no folder of parts.
const MOST_FILES: usize = 500;
/// Largest file looked into, bytes; the name of a larger one is that of its file.
const MOST_BYTES: u64 = 4 << 20;
/// Endings of files beside parts.
const BESIDE: [&str; 2] = [".setup.toml", ".grasps.toml"];

/// The part files in a folder by name of file, each with the name of its part; nothing for a name that cannot be read.
/// A folder that cannot be read holds none.
pub fn parts_in(folder: &Path) -> Vec<(PathBuf, Option<String>)> {
    let Ok(entries) = std::fs::read_dir(folder) else { return Vec::new() };
    let named_so = |path: &PathBuf| {
        let name = path.file_name().map(|name| name.to_string_lossy().to_lowercase()).unwrap_or_default();
        name.ends_with(".toml") && !name.starts_with('.') && !BESIDE.iter().any(|ending| name.ends_with(ending))
    };
    let mut paths: Vec<PathBuf> = entries.filter_map(|entry| Some(entry.ok()?.path())).filter(named_so).collect();
    paths.sort();
    paths.truncate(MOST_FILES);
    paths.into_iter().filter_map(|path| Some((path.clone(), name_of(&path)?))).collect()
}

/// The name of the part in a file, or nothing within where it cannot be read; nothing when it is no part file.
fn name_of(path: &Path) -> Option<Option<String>> {
    // What is no plain file may never end.
    let data = std::fs::metadata(path).ok().filter(|data| data.is_file())?;
    let stem = || path.file_stem().map(|stem| stem.to_string_lossy().into_owned());
    if data.len() > MOST_BYTES {
        return Some(stem());
    }
    let Ok(text) = text_of(path) else { return Some(None) };
    let (root, errors) = DeTable::parse_recoverable(&text);
    let outer = root.get_ref().contains_key("outer");
    match (outer, errors.is_empty()) {
        (true, true) => {
            Some(root.get_ref().get("name").and_then(|name| name.get_ref().as_str()).map(str::to_owned).or_else(stem))
        }
        // Broken, but meant as a part.
        (_, false) if outer || text.lines().any(|line| line.trim_start().starts_with("outer")) => Some(None),
        _ => None,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn part_files_are_told_from_others() {
        let folder = tempfile::tempdir().unwrap();
        let write = |name: &str, text: &str| std::fs::write(folder.path().join(name), text).unwrap();
        write("b.toml", "name = \"bow \\u001b end\"\nouter = []\n");
        write("a.toml", "outer = [[0, 0]]\n");
        write("broken.toml", "outer = [[0, 0\n");
        write("Cargo.toml", "[package]\nname = \"x\"\n");
        write("a.setup.toml", "outer = []\n");
        write("a.grasps.toml", "outer = []\n");
        std::fs::create_dir(folder.path().join("c.toml")).unwrap();
        let found: Vec<(String, Option<String>)> = parts_in(folder.path())
            .into_iter()
            .map(|(path, name)| (path.file_name().unwrap().to_string_lossy().into_owned(), name))
            .collect();
        let one = |file: &str, name: Option<&str>| (file.to_owned(), name.map(str::to_owned));
        assert_eq!(found, [one("a.toml", Some("a")), one("b.toml", Some("bow \u{1b} end")), one("broken.toml", None)]);
        assert!(parts_in(&folder.path().join("absent")).is_empty());
    }
}
