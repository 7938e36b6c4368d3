//! Values as TOML text, and careful writing: beside the old file, synced, renamed over it.

use super::FileFaults;
use std::fs::{self, File, OpenOptions, Permissions};
use std::io::{self, ErrorKind, Write};
use std::path::{Path, PathBuf};

/// A finite number as TOML writes it, shortest digits that read back to the same number.
pub(super) fn number(value: f64) -> String {
    // Adding 0 turns minus nought, which says nothing and would make equal files differ, into nought.
    format!("{:?}", value + 0.0)
}

/// A text as a TOML string.
pub(super) fn quoted(text: &str) -> String {
    toml::Value::from(text).to_string()
}

/// Links followed before giving up, as many as Linux follows.
const MOST_LINKS: usize = 40;

/// Where a path leads when it is a symbolic link, also one whose target is not there yet.
pub(super) fn target_of(path: &Path) -> io::Result<PathBuf> {
    let mut path = path.to_owned();
    for _ in 0..MOST_LINKS {
        match fs::symlink_metadata(&path) {
            Ok(data) if data.is_symlink() => {
                let to = fs::read_link(&path)?;
                path = folder_of(&path).join(to);
            }
            _ => return Ok(path),
        }
    }
    Err(io::Error::new(ErrorKind::InvalidInput, "too many symbolic links"))
}

/// The folder a file is in.
pub(super) fn folder_of(path: &Path) -> PathBuf {
    match path.parent() {
        Some(folder) if !folder.as_os_str().is_empty() => folder.to_owned(),
        _ => PathBuf::from("."),
    }
}

/// Puts bytes in the place of a file, whole or not at all: they are written beside it and synced before they take its
/// name. Without `old` permissions the file must not be there yet; with them it gets the same.
///
/// `still_good` is asked just before the name is taken; when it says no, nothing happens and the answer is false.
pub(super) fn replace(
    target: &Path,
    bytes: &[u8],
    old: Option<Permissions>,
    still_good: impl FnOnce() -> bool,
) -> io::Result<bool> {
    let folder = folder_of(target);
    let mut prefix = std::ffi::OsString::from(".");
    prefix.push(target.file_name().unwrap_or_default());
    let mut options = OpenOptions::new();
    options.write(true).create_new(true);
    // Opened here and not by the builder, which would make it unreadable for everyone else and name it in every error.
    let beside =
        tempfile::Builder::new().prefix(&prefix).suffix(".part").make_in(&folder, |path| options.open(path))?;
    // Before anything is in it that the old file may keep from others.
    if let Some(permissions) = &old {
        beside.as_file().set_permissions(permissions.clone())?;
    }
    (&mut beside.as_file()).write_all(bytes)?;
    beside.as_file().sync_all()?;
    if !still_good() {
        return Ok(false);
    }
    let taken = if old.is_some() { beside.persist(target) } else { beside.persist_noclobber(target) };
    match taken {
        Ok(_) => {}
        Err(error) if error.error.kind() == ErrorKind::AlreadyExists => return Ok(false),
        Err(error) => return Err(error.error),
    }
    // The new name must be on the disk too. Some file systems cannot sync a folder; the file is whole either way.
    if let Ok(folder) = File::open(&folder) {
        let _ = folder.sync_all();
    }
    Ok(true)
}

/// Puts a text file where it belongs, whole or not at all. A file already there is only replaced with `force`.
///
/// # Errors
/// One fault.
pub fn write_new(path: &Path, text: &str, force: bool) -> Result<(), FileFaults> {
    let fault = |error: io::Error| FileFaults::of_whole(path, &error.to_string());
    let there = || FileFaults::of_whole(path, "is there already; name another file, or replace it with --force");
    let target = target_of(path).map_err(fault)?;
    let old = match fs::metadata(&target) {
        Ok(_) if !force => return Err(there()),
        Ok(data) if !data.is_file() => return Err(FileFaults::of_whole(path, "is not a file; name another")),
        Ok(data) => Some(data.permissions()),
        Err(error) if error.kind() == ErrorKind::NotFound => None,
        Err(error) => return Err(fault(error)),
    };
    match replace(&target, text.as_bytes(), old, || true) {
        Ok(true) => Ok(()),
        Ok(false) => Err(there()),
        Err(error) => Err(fault(error)),
    }
}
