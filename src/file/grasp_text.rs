//! Grasp files as they are written: the header, then one table for each grasp, the same lines for the same grasp.

use super::digest::part_digest;
use super::grasp_file::{KeptDensity, SCORES, SavedLoad, Scores, WEAKEST};
use super::saving::Keep;
use super::setup_file::{DRIVES, setup_tables, torque_scale_word, word_for};
use super::writing::{folder_of, number, quoted};
use super::{CAUTION, shown};
use crate::hand::Drive;
use crate::mechanics::escape::{Escape, Sense};
use crate::part::Part;
use crate::search::Setup;
use std::fmt::{Result, Write};
use std::path::{Component, Path, PathBuf};

/// The head of a new grasp file.
pub(super) fn header(grasp_path: &Path, part_path: &Path, part: &Part, setup: &Setup) -> String {
    format!(
        "# Grasps of one part. New ones are added at the end; notes and comments may be edited.\n\
         schema = 1\n\
         program = {}\n\
         part = {}\n\
         part_name = {}\n\
         part_digest = \"{}\"\n\
         caution = {}\n\
         \n\
         {}",
        quoted(concat!("holdwright ", env!("CARGO_PKG_VERSION"))),
        quoted(&slashed(&from_folder(&folder_of(grasp_path), part_path))),
        quoted(part.name()),
        part_digest(part),
        quoted(CAUTION),
        setup_tables(setup, "setup.")
    )
}

/// A grasp as a table that begins with an empty line. The setup is written with it when it is not the file's.
pub(super) fn grasp(keep: &Keep, name: &str, part: &Part, file_setup: &Setup, time: jiff::Timestamp) -> String {
    let mut text = String::new();
    // Writing to a String cannot fail.
    let _ = write_grasp(&mut text, keep, name, part, time);
    if keep.setup != *file_setup {
        text.push('\n');
        text.push_str(&setup_tables(&keep.setup, "grasp.setup."));
    }
    text
}

/// A note as it goes to a file: its lines, fit for a terminal.
pub(super) fn note(note: &str) -> String {
    note.lines().map(shown).collect::<Vec<_>>().join("\n")
}

fn write_grasp(text: &mut String, keep: &Keep, name: &str, part: &Part, time: jiff::Timestamp) -> Result {
    writeln!(text, "\n[[grasp]]\nname = {}", quoted(&shown(name)))?;
    writeln!(text, "note = {}", quoted(&note(&keep.note)))?;
    writeln!(text, "time = {time:.0}")?;
    writeln!(text, "contacts = [")?;
    for (spot, contact) in keep.grasp.spots.iter().zip(&keep.grasp.contacts) {
        let at = part.file_point(contact.point);
        writeln!(
            text,
            "  {{ ring = {}, edge = {}, along_mm = {}, point_mm = {}, normal = {}, mu = {} }},",
            spot.edge.ring,
            spot.edge.edge,
            number(spot.along_mm),
            pair(at.x, at.y),
            pair(contact.normal.x, contact.normal.y),
            number(contact.mu)
        )?;
    }
    writeln!(text, "]")?;
    let scores = Scores::of(&keep.assessment, keep.setup.search.torque_scale.mm(part), keep.grasp.spots.len());
    writeln!(text, "verdict = \"{}\"", scores.verdict.word())?;
    for (name, score) in SCORES.iter().zip(scores.scores) {
        if let Some(score) = score {
            writeln!(text, "{name} = {}", number(score))?;
        }
    }
    write_loads(text, &scores)?;
    let weakest: Vec<_> = WEAKEST
        .iter()
        .zip(scores.weakest)
        .filter_map(|(name, score)| Some(format!("{name} = {}", number(score?))))
        .collect();
    if !weakest.is_empty() {
        writeln!(text, "weakest = {{ {} }}", weakest.join(", "))?;
    }
    match keep.assessment.escape {
        Some(Escape::Slide { toward_deg }) => {
            writeln!(text, "escape = {{ kind = \"slide\", toward_deg = {} }}", number(toward_deg))?;
        }
        // A centre too far away for a number says no more than the verdict.
        Some(Escape::Turn { about, sense }) if about.iter().all(|x| x.is_finite()) => {
            let (at, sense) = (part.file_point(about), if sense == Sense::Clockwise { "cw" } else { "ccw" });
            writeln!(text, "escape = {{ kind = \"turn\", about_mm = {}, sense = \"{sense}\" }}", pair(at.x, at.y))?;
        }
        Some(Escape::Turn { .. }) | None => {}
    }
    if let Some(Ok(jaws)) = &keep.grasp.jaws {
        let centre = part.file_point(jaws.centre);
        writeln!(
            text,
            "jaws = {{ centre_mm = {}, angle_deg = {}, opening_mm = {}, inside = {} }}",
            pair(centre.x, centre.y),
            number(jaws.angle_rad.to_degrees()),
            number(jaws.opening_mm),
            jaws.inside
        )?;
    }
    let drive = keep.setup.hand.drive;
    writeln!(text, "drive = \"{}\"", word_for(&DRIVES, drive))?;
    writeln!(text, "torque_scale = {}", torque_scale_word(keep.setup.search.torque_scale))?;
    // A density says nothing where the part has a mass of its own.
    let chosen = keep.density.as_ref().and_then(|density| Some((density, density.applied_to(part)?)));
    let kg = chosen.as_ref().map_or(part, |(_, part)| part).mass().map(|mass| mass.kg);
    if let Some(kg) = kg {
        writeln!(text, "mass_kg = {}", number(kg))?;
    }
    if let Some((KeptDensity { of, kg_m3 }, _)) = &chosen {
        writeln!(text, "density_kg_m3 = {}\ndensity_of = {}", number(*kg_m3), quoted(&shown(of)))?;
    }
    let shares = match drive {
        Drive::Adjustable => "each finger's force can be set by itself",
        Drive::Equal => "all fingers press with the same force",
    };
    let cones = match part.thickness_mm() {
        Some(_) => format!("friction cones in space as pyramids of {} sides", keep.setup.search.cone_sides),
        None => "everything in the plane".to_owned(),
    };
    let mass = match (kg, &chosen) {
        (None, _) => "no mass known".to_owned(),
        (Some(_), None) => "mass from the part file".to_owned(),
        (Some(_), Some((KeptDensity { of, .. }, _))) => format!("mass from the density of {}, chosen", shown(of)),
    };
    let assumed = format!("rigid bodies, dry friction, first-order statics; {shares}; {cones}; {mass}");
    writeln!(text, "assumed = {}", quoted(&assumed))
}

/// What the load cases ask; nothing when there are none.
fn write_loads(text: &mut String, scores: &Scores) -> Result {
    if let Some(held) = scores.held {
        writeln!(text, "held = {held}")?;
    }
    if let Some(name) = &scores.governing_load {
        writeln!(text, "governing_load = {}", quoted(name))?;
    }
    if scores.loads.is_empty() {
        return Ok(());
    }
    writeln!(text, "loads = [")?;
    for SavedLoad { name, squeeze_n, held, margin, direction_deg, finger_forces_n } in &scores.loads {
        write!(text, "  {{ name = {}, held = {held}", quoted(name))?;
        for (key, value) in [("squeeze_n", squeeze_n), ("margin", margin), ("direction_deg", direction_deg)] {
            if let Some(value) = value {
                write!(text, ", {key} = {}", number(*value))?;
            }
        }
        let forces: Vec<_> = finger_forces_n.iter().map(|f| format!("[{}]", f.map(number).join(", "))).collect();
        writeln!(text, ", finger_forces_n = [{}] }},", forces.join(", "))?;
    }
    writeln!(text, "]")
}

fn pair(x: f64, y: f64) -> String {
    format!("[{}, {}]", number(x), number(y))
}

/// A path as seen from a folder; as it is when the two share nothing.
fn from_folder(folder: &Path, path: &Path) -> PathBuf {
    let whole = |path: &Path| path.canonicalize().or_else(|_| std::path::absolute(path));
    // The last step is kept as named: a part that is a link stays the link.
    let (Ok(folder), Ok(place), Some(name)) = (whole(folder), whole(&folder_of(path)), path.file_name()) else {
        return path.to_owned();
    };
    let mut up = folder.components().peekable();
    let mut down = place.components().peekable();
    let mut shared = 0;
    while let (Some(a), Some(b)) = (up.peek(), down.peek())
        && a == b
    {
        up.next();
        down.next();
        shared += 1;
    }
    if shared == 0 {
        return place.join(name);
    }
    up.map(|_| Component::ParentDir).chain(down).collect::<PathBuf>().join(name)
}

/// A path with slashes, which every system reads.
fn slashed(path: &Path) -> String {
    let text = path.to_string_lossy();
    if std::path::MAIN_SEPARATOR == '\\' { text.replace('\\', "/") } else { text.into_owned() }
}
