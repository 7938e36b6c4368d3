//! What was chosen on the start page becomes a part on the bench; a part that comes with the program is written first.

use super::demo::{self, Demo};
use super::start::Choice;
use super::{Options, StartOptions};
use crate::file;
use crate::search::Setup;
use std::path::{Path, PathBuf};
use std::sync::Arc;

/// What the workbench is opened with, and a line for the user.
///
/// # Errors
/// Why it cannot be opened and the mend, line by line.
pub(super) fn chosen(start: &StartOptions, choice: &Choice) -> Result<(Options, Option<String>), Vec<String>> {
    let (part_path, demo) = match choice {
        Choice::File(path) => (path.clone(), None),
        Choice::Demo(number) => {
            let demo = demo::PARTS.get(*number).ok_or_else(|| vec!["there is no such part".to_owned()])?;
            (written(&start.folder, demo)?, Some(demo))
        }
    };
    let mut setup_path = start.setup_path.clone();
    if demo.is_some() && setup_path.is_none() {
        let path = start.folder.join(demo::SETUP.file);
        // One that is there already is the user's own, whatever is in it.
        if !path.exists() {
            file::write_new(&path, demo::SETUP.text, false).map_err(|faults| faults.lines())?;
        }
        setup_path = Some(path);
    }
    let part = Arc::new(file::read_part(&part_path).map_err(|faults| faults.lines())?);
    let setup = match &setup_path {
        Some(path) => file::read_setup(path).map_err(|faults| faults.lines())?,
        None => Setup::default(),
    };
    let setup = start.overrides.over(setup)?;
    let told = demo.map(|demo| {
        let with = if start.setup_path.is_none() { format!(" --setup {}", demo::SETUP.file) } else { String::new() };
        format!("written here; next time: holdwright {}{with}", demo.file)
    });
    let options = Options {
        grasp_path: start.grasp_path.clone().unwrap_or_else(|| file::default_grasp_path(&part_path)),
        part_path,
        setup_path,
        part,
        setup,
        color: start.color,
        marker: start.marker,
        overrides: start.overrides.clone(),
    };
    Ok((options, told))
}

/// Writes a part that comes with the program, unless the very same file is there.
fn written(folder: &Path, demo: &Demo) -> Result<PathBuf, Vec<String>> {
    let path = folder.join(demo.file);
    if std::fs::symlink_metadata(&path).is_err() {
        file::write_new(&path, demo.text, false).map_err(|faults| faults.lines())?;
        return Ok(path);
    }
    match std::fs::read(&path) {
        Ok(bytes) if bytes == demo.text.as_bytes() => Ok(path),
        _ => {
            let shown = file::shown(&path.display().to_string());
            Err(vec![
                format!("{shown} is there already, and is not the part that comes with the program."),
                String::new(),
                "It stays as it is: open it from the list of files, or start in another directory.".to_owned(),
            ])
        }
    }
}
