//! What is kept: saved grasps come back as marks and can be renamed and taken out, files are read again when they changed,
//! the first start offers parts.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod desk;
#[cfg(unix)]
mod pty;

use desk::{Desk, hinge, setup, steel_hinge, thick_hinge};
use holdwright::file::{
    Becomes, Change, Keep, Revision, Scores, part_from_text, read_grasps, revise, save, setup_from_text, stamp,
};
use holdwright::part::{Part, PartDescription};
use holdwright::search::{Key as SortKey, Setup};
use holdwright::workbench::action::Scope;
use holdwright::workbench::demo;
use holdwright::workbench::kept::{Kept, Stored};
use holdwright::workbench::reload::Fresh;
use holdwright::workbench::start::{Choice, Found, StartPage};
use holdwright::workbench::state::{Layer, OnDisk, Question};
use holdwright::workbench::{ColorChoice, Effect, Input, Overrides, StartOptions, State, update, view};
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;
use std::path::Path;
use std::sync::Arc;

/// The first grasps of the list as they would stand in the file, with these names.
fn in_file(names: &[&str]) -> Vec<Kept> {
    let mut desk = Desk::hinge();
    for _ in names {
        desk.keys("mj");
    }
    let scale = desk.state.order.scene.frame().scale_mm;
    let marks = desk.state.marks.iter().zip(names).enumerate();
    marks
        .map(|(number, (mark, name))| {
            let keep = Keep { name: (*name).to_owned(), note: format!("why {name}"), ..mark.keep.clone() };
            let scores = Scores::of(&keep.assessment, scale, keep.grasp.spots.len());
            Kept { stored: Stored { number, name: keep.name.clone(), note: keep.note.clone(), scores }, keep }
        })
        .collect()
}

fn reopened(names: &[&str]) -> Desk {
    let mut desk = Desk::hinge();
    desk.input(Input::Kept(in_file(names)));
    desk
}

fn names(desk: &Desk) -> Vec<&str> {
    desk.state.marks.iter().map(|mark| mark.keep.name.as_str()).collect()
}

/// The last key's effects: what is written to the file.
fn saving(desk: &mut Desk) -> (Vec<u64>, Vec<Keep>, Vec<Change>) {
    match update(&mut desk.state, Input::Key(holdwright::workbench::Key::Char('s'))).pop() {
        Some(Effect::Save { ids, keeps, changes, .. }) => (ids, keeps, changes),
        other => panic!("{other:?}"),
    }
}

#[test]
fn saved_grasps_come_back_as_marks_with_the_scores_they_were_saved_with() {
    let mut kept = in_file(&["bow end", "stern", "spare"]);
    // A file says what was true when it was written.
    kept[1].stored.scores.scores[0] = Some(0.0123);
    let mut desk = Desk::hinge();
    desk.input(Input::Kept(kept));
    assert_eq!(names(&desk), ["bow end", "stern", "spare"]);
    assert_eq!((desk.state.unsaved(), desk.state.removals()), (0, 0));
    desk.keys("M");
    let screen = desk.screen(80, 24);
    assert!(screen.contains("0.0123") && screen.contains("saved"), "{screen}");
    insta::assert_snapshot!("saved_marks_80x24", screen);
    insta::assert_snapshot!("saved_marks_120x40", desk.resized(120, 40));
    // A grasp that is in the file is marked already.
    desk.resized(80, 24);
    desk.keys("<esc>q");
    assert!(matches!(desk.other.last(), Some(Effect::Quit { recover: false })));
}

#[test]
fn saved_grasps_are_renamed_noted_taken_away_and_brought_back() {
    let mut desk = reopened(&["bow end", "stern", "spare"]);
    desk.keys("Mn<c-u>bow<cr>");
    assert_eq!(names(&desk), ["bow", "stern", "spare"]);
    assert_eq!(desk.state.unsaved(), 1);
    desk.keys("n<c-u>bow end<cr>");
    assert_eq!(desk.state.unsaved(), 0, "the words are those of the file again");
    desk.keys("jw<c-u>clear of the seal<cr>jd");
    assert_eq!(names(&desk), ["bow end", "stern"]);
    desk.keys("kkm");
    assert_eq!((names(&desk), desk.state.removals()), (vec!["stern"], 2));
    insta::assert_snapshot!("marks_to_be_taken_out_80x24", desk.screen(80, 24));
    // The stack gives the last one first, each back to its place.
    desk.keys("u");
    assert_eq!(names(&desk), ["bow end", "stern"]);
    desk.keys("u");
    assert_eq!(names(&desk), ["bow end", "stern", "spare"]);
    desk.keys("u");
    assert_eq!(desk.state.removals(), 0);
    desk.keys("jd");
    let (ids, keeps, changes) = saving(&mut desk);
    assert_eq!((ids.len(), keeps.len()), (1, 0));
    assert_eq!(changes.len(), 2);
    let Becomes::Reworded { name, note, .. } = &changes[0].to else { panic!("{changes:?}") };
    assert_eq!((changes[0].number, name, note.as_deref()), (1, &None, Some("clear of the seal")));
    assert_eq!((changes[1].number, &changes[1].to), (2, &Becomes::Removed));
}

#[test]
fn leaving_asks_for_removals_and_renames_too() {
    let mut desk = reopened(&["bow end", "stern"]);
    desk.keys("Mdn<c-u>aft<cr><esc>q");
    assert_eq!(desk.state.layers, [Layer::Ask(Question::Quit)]);
    let screen = desk.screen(80, 24);
    let flowing = screen.split_whitespace().collect::<Vec<_>>().join(" ");
    assert!(flowing.contains("1 saved grasp has another name or note than in the file."), "{screen}");
    assert!(flowing.contains("1 grasp is still to be taken out of the file."), "{screen}");
    insta::assert_snapshot!("ask_quit_changes_80x24", screen);
    desk.keys("<esc><esc><c-c>");
    assert_eq!(desk.state.layers, [Layer::Ask(Question::Quit)]);
    desk.keys("s");
    assert!(matches!(desk.other.last(), Some(Effect::Quit { recover: false })), "{:?}", desk.other);
}

#[test]
fn marking_a_saved_grasp_under_other_knobs_leaves_the_saved_one() {
    let mut desk = reopened(&["bow end"]);
    desk.keys("m");
    assert_eq!((desk.state.marks.len(), desk.state.removals()), (0, 1));
    desk.keys("m");
    assert_eq!((names(&desk), desk.state.removals()), (vec!["bow end"], 0));
    desk.keys("=0.21<cr>g");
    let spots = desk.state.marks[0].keep.grasp.spots.clone();
    let rows = &desk.state.shown.as_ref().unwrap().ranking.grasps;
    let row = rows.iter().position(|row| row.grasp.spots == spots).expect("still listed");
    desk.keys(&"j".repeat(row));
    desk.keys("m");
    assert_eq!((desk.state.marks.len(), desk.state.unsaved(), desk.state.removals()), (2, 1, 0));
    assert!(desk.state.message.as_ref().unwrap().contains("saved at mu 0.20 stays"), "{:?}", desk.state.message);
}

#[test]
fn what_someone_else_did_to_the_file_is_taken_in_after_a_save() {
    let mut desk = reopened(&["bow end", "stern"]);
    let mut now = in_file(&["bow end", "stern", "colleague's"]);
    now.remove(0);
    desk.input(Input::Kept(now));
    assert_eq!(names(&desk), ["bow end", "stern", "colleague's"]);
    let saved: Vec<bool> = desk.state.marks.iter().map(|mark| mark.saved).collect();
    assert_eq!(saved, [false, true, true], "what was taken out elsewhere is still wanted here");
}

#[test]
fn renames_and_removals_of_a_broken_run_are_taken_back() {
    let mut desk = reopened(&["bow end", "stern"]);
    let mut keep = desk.state.marks[0].keep.clone();
    keep.name = "bow".into();
    desk.input(Input::Recovered(vec![keep]));
    desk.input(Input::RemovalsRecovered(vec!["stern".into(), "gone long ago".into()]));
    assert_eq!((names(&desk), desk.state.unsaved(), desk.state.removals()), (vec!["bow"], 1, 1));
    assert!(desk.state.message.as_ref().unwrap().starts_with("1 taken out"));
}

/// A file of three grasps with comments, its path and the part.
fn three(folder: &Path) -> (std::path::PathBuf, Part, String) {
    let (path, part) = (folder.join("leaf.grasps.toml"), hinge());
    let keeps: Vec<Keep> = in_file(&["a", "b", "c"]).into_iter().map(|kept| kept.keep).collect();
    save(&path, &folder.join("leaf.toml"), &part, &keeps, None).unwrap();
    let text = std::fs::read_to_string(&path).unwrap().replace("name = \"b\"", "name = 'b' # of the deck");
    let text = text.replace("\n[[grasp]]\nname = 'b'", "\n# tried on Monday\n[[grasp]]\nname = 'b'");
    std::fs::write(&path, &text).unwrap();
    (path, part, text)
}

fn change(number: usize, name: &str, to: Becomes) -> Change {
    let spots = in_file(&["a", "b", "c"])[number].keep.grasp.spots.clone();
    Change { number, name: name.to_owned(), spots, to }
}

fn renamed(number: usize, name: &str, to: &str) -> Change {
    let mut keep = in_file(&["a", "b", "c"]).remove(number).keep;
    keep.name = to.to_owned();
    change(number, name, Becomes::Reworded { name: Some(to.to_owned()), note: None, keep: Box::new(keep) })
}

#[test]
fn the_file_keeps_every_byte_of_what_was_not_changed() {
    let folder = tempfile::tempdir().unwrap();
    let (path, part, text) = three(folder.path());
    let part_path = folder.path().join("leaf.toml");
    let write = |changes: &[Change]| {
        let revision = Revision { changes, ..Revision::default() };
        let new = revise(&path, &part_path, &part, &revision, stamp(&path).as_ref()).unwrap();
        assert_eq!(new, stamp(&path));
        std::fs::read_to_string(&path).unwrap()
    };
    assert_eq!(write(&[renamed(1, "b", "bow")]), text.replace("name = 'b' #", "name = \"bow\" #"));
    // A name that is taken gets a number.
    assert_eq!(write(&[renamed(1, "bow", "a")]), text.replace("name = 'b' #", "name = \"a (2)\" #"));
    let without_a = write(&[change(0, "a", Becomes::Removed)]);
    let (head, rest) = text.split_once("\n[[grasp]]\nname = \"a\"").unwrap();
    let after = rest.split_once("\n# tried on Monday").unwrap().1;
    assert_eq!(without_a, format!("{head}\n# tried on Monday{}", after.replace("name = 'b' #", "name = \"a (2)\" #")));
    // One that is gone: a removal is done already, a rename adds it again under its new name.
    assert_eq!(write(&[change(0, "a", Becomes::Removed)]), without_a);
    assert!(write(&[renamed(0, "a", "again")]).starts_with(&without_a));
    let left: Vec<String> = read_grasps(&path).unwrap().grasps.into_iter().map(|grasp| grasp.name).collect();
    assert_eq!(left, ["a (2)", "c", "again"]);
    // Numbers are those of the file as it was read; another order is found by name.
    write(&[change(2, "c", Becomes::Removed)]);
    let left: Vec<String> = read_grasps(&path).unwrap().grasps.into_iter().map(|grasp| grasp.name).collect();
    assert_eq!(left, ["a (2)", "again"]);
}

#[test]
fn a_file_changed_meanwhile_or_of_another_form_is_not_changed() {
    let folder = tempfile::tempdir().unwrap();
    let (path, part, text) = three(folder.path());
    let part_path = folder.path().join("leaf.toml");
    let changes = [change(0, "a", Becomes::Removed)];
    let revision = Revision { changes: &changes, ..Revision::default() };
    let known = stamp(&path);
    std::fs::write(&path, format!("{text}# a colleague\n")).unwrap();
    let fault = revise(&path, &part_path, &part, &revision, known.as_ref()).unwrap_err();
    assert!(fault.to_string().contains("changed by someone else"), "{fault}");
    // A heading in quotes is a heading all the same (TOML 1.0, keys).
    let quoted = text.replacen("\n[[grasp]]", "\n[[\"grasp\"]]", 1);
    std::fs::write(&path, &quoted).unwrap();
    revise(&path, &part_path, &part, &revision, stamp(&path).as_ref()).unwrap();
    let left: Vec<String> = read_grasps(&path).unwrap().grasps.into_iter().map(|grasp| grasp.name).collect();
    assert_eq!(left, ["b", "c"]);
    // Two names on one line of brackets are a form that is not written here: refused, and nothing is touched.
    let head = text.split("\n[[grasp]]").next().unwrap().split("\n# tried").next().unwrap();
    let contacts = "contacts = [{ ring = 0, edge = 0, along_mm = 30.0 }, { ring = 0, edge = 3, along_mm = 9.0 }]";
    let line = format!("grasp = [{{ name = \"a\", verdict = \"open\", {contacts} }}]");
    let inline = head.replacen("schema = 1\n", &format!("schema = 1\n{line}\n"), 1);
    std::fs::write(&path, &inline).unwrap();
    let spots = read_grasps(&path).unwrap().grasps[0].spots.clone();
    let changes = [Change { number: 0, name: "a".to_owned(), spots, to: Becomes::Removed }];
    let revision = Revision { changes: &changes, ..Revision::default() };
    let fault = revise(&path, &part_path, &part, &revision, stamp(&path).as_ref()).unwrap_err();
    assert!(fault.to_string().contains("headed [[grasp]]"), "{fault}");
    assert_eq!(std::fs::read_to_string(&path).unwrap(), inline);
}

fn fresh(part: Part, setup: Setup) -> Input {
    Input::Reread(Ok(Box::new(Fresh { part: Arc::new(part), setup })))
}

#[test]
fn files_that_changed_are_told_and_read_again_on_request() {
    let mut desk = Desk::hinge();
    desk.input(Input::OnDisk(OnDisk { part: true, setup: false }));
    insta::assert_snapshot!("changed_on_disk_80x24", desk.screen(80, 24));
    insta::assert_snapshot!("changed_on_disk_120x40", desk.resized(120, 40));
    desk.keys("j");
    assert!(desk.screen(80, 24).contains("the part file changed on disk"), "it stays until it is read again");
    desk.keys("R");
    assert!(matches!(desk.other.last(), Some(Effect::Reread)));
    desk.input(fresh(hinge(), setup()));
    assert_eq!(desk.state.message.as_deref(), Some("read again: nothing changed"));
    assert_eq!(desk.state.on_disk, OnDisk::default());
}

#[test]
fn a_broken_file_is_shown_with_its_line_and_the_old_state_stays() {
    let mut desk = Desk::hinge();
    let before = desk.state.reading.as_ref().unwrap().grasp.spots.clone();
    let fault = part_from_text(Path::new("leaf.toml"), "schema = 1\nouter = [[0, 0], [80, 0]]\n").unwrap_err();
    desk.input(Input::Reread(Err(fault.lines())));
    let screen = desk.screen(80, 24);
    assert!(screen.contains("leaf.toml:2:") && screen.contains("goes on with what it had"), "{screen}");
    insta::assert_snapshot!("not_read_again_80x24", screen);
    insta::assert_snapshot!("not_read_again_120x40", desk.resized(120, 40));
    desk.keys("<esc>");
    assert_eq!(desk.state.reading.as_ref().unwrap().grasp.spots, before);
}

#[test]
fn knobs_that_were_turned_stay_and_the_rest_is_the_files() {
    let mut desk = Desk::loaded();
    desk.keys("=0.3<cr>Lx<esc>j");
    let spots = desk.spots();
    let mut file = desk::setup_with_loads();
    file.friction.mu = 0.25;
    file.friction.high = Some(0.5);
    file.hand.force_limit_n = Some(80.0);
    file.loads[1].safety = 3.0;
    file.loads[0].safety = 2.5;
    desk.input(fresh(steel_hinge(), file.clone()));
    let setup = desk.state.setup();
    assert_eq!((setup.friction.mu, setup.friction.high, setup.hand.force_limit_n), (0.3, Some(0.5), Some(80.0)));
    assert!(desk.state.loads[0].out && setup.loads.len() == 2);
    assert!((desk.state.loads[0].case.safety - 2.5).abs() < 1e-12 && (setup.loads[0].safety - 3.0).abs() < 1e-12);
    assert_eq!(desk.spots(), spots);
    let message = desk.state.message.clone().unwrap();
    assert!(message.contains("setup read again") && message.contains("knobs you turned stay"), "{message}");
    // What was read is what the next change is measured against.
    file.friction.mu = 0.3;
    desk.input(fresh(steel_hinge(), file.clone()));
    file.friction.mu = 0.35;
    desk.input(fresh(steel_hinge(), file));
    assert!((desk.state.setup().friction.mu - 0.35).abs() < 1e-12);
    insta::assert_snapshot!("read_again_80x24", desk.screen(80, 24));
    insta::assert_snapshot!("read_again_120x40", desk.resized(120, 40));
}

#[test]
fn a_chosen_density_gives_way_to_a_mass_in_the_file_and_loads_come_back() {
    let mut desk = Desk::new(thick_hinge(), desk::setup_with_loads());
    assert_eq!(desk.state.setup().loads.len(), 0, "every case has weight");
    desk.keys("dj<cr>");
    assert!(desk.state.density.is_some());
    desk.input(fresh(thick_hinge(), desk::setup_with_loads()));
    assert!(desk.state.density.is_some() && desk.state.setup().loads.len() == 3);
    desk.input(fresh(steel_hinge(), desk::setup_with_loads()));
    assert!(desk.state.density.is_none() && desk.state.setup().loads.len() == 3);
}

/// The hinge's outer ring without its slope, or with a vertex more on its lower edge.
fn reshaped(outer: Vec<[f64; 2]>) -> Part {
    Part::new(PartDescription::bare("hinge leaf", vec![outer])).unwrap()
}

#[test]
fn a_part_with_fewer_edges_breaks_nothing() {
    let small = || reshaped(vec![[0.0, 0.0], [40.0, 0.0], [0.0, 30.0]]);
    for script in ["Gm", "G<cr>", "Gmn", "jmM", "v", "Lj", "?", "o", "=0<cr>", "tj", "dj", "Gq"] {
        let mut desk = Desk::hinge();
        desk.input(Input::Kept(in_file(&["bow end", "stern"])));
        desk.keys("jjm");
        desk.keys(script);
        desk.hold = true;
        desk.input(fresh(small(), setup()));
        // Before the new ranking is there, and after.
        for _ in 0..2 {
            for (width, height) in [(80, 24), (120, 40), (40, 20), (24, 6), (1, 1)] {
                desk.resized(width, height);
            }
            desk.keys("jkcGg<esc><esc>jMjnx<esc>u<esc>w<esc>mm<cr><esc>");
            desk.finish();
        }
        assert!(desk.state.rows() > 0 || script == "=0<cr>", "{script}");
    }
}

#[test]
fn marks_that_no_longer_fit_are_counted_and_not_saved_on_the_new_part() {
    let mut desk = Desk::hinge();
    desk.keys("mjmjm");
    let small = reshaped(vec![[0.0, 0.0], [40.0, 0.0], [0.0, 30.0]]);
    desk.input(fresh(small, setup()));
    assert_eq!(desk.state.marks.len(), 3);
    let message = desk.state.message.clone().unwrap();
    assert!(message.contains("3 marks no longer fit the outline"), "{message}");
    desk.keys("M");
    assert!(desk.screen(80, 24).contains("OLD"), "{}", desk.screen(80, 24));
    desk.keys("<esc>s");
    assert!(desk.saved.is_empty());
    assert!(desk.state.message.as_ref().unwrap().contains("as it was before it changed"));
    // The part as it was brings them back.
    desk.input(fresh(hinge(), setup()));
    desk.keys("s");
    assert_eq!(desk.saved.len(), 3);
}

#[test]
fn the_selected_grasp_stays_where_it_stood_when_edges_get_other_numbers() {
    let outer = vec![[0.0, 0.0], [80.0, 0.0], [80.0, 24.0], [52.0, 40.0], [0.0, 40.0]];
    let mut desk = Desk::new(reshaped(outer.clone()), setup());
    desk.keys("jjj");
    let places = |desk: &Desk| -> Vec<(i64, i64)> {
        let reading = desk.state.reading.as_ref().unwrap();
        let part = desk.state.order.scene.part();
        let at = |point| {
            let at = part.file_point(point);
            ((at.x * 1e6).round() as i64, (at.y * 1e6).round() as i64)
        };
        let mut places: Vec<_> = reading.grasp.contacts.iter().map(|contact| at(contact.point)).collect();
        places.sort_unstable();
        places
    };
    let before = places(&desk);
    // The ring begins elsewhere and has a corner more: every number is another.
    let mut turned = outer;
    turned.rotate_left(2);
    turned.insert(3, [0.0, 0.5]);
    desk.hold = true;
    desk.input(fresh(reshaped(turned), setup()));
    assert_eq!(places(&desk), before, "before the ranking is there");
    desk.finish();
    let after = places(&desk);
    let off: i64 = after.iter().zip(&before).map(|(a, b)| (a.0 - b.0).abs() + (a.1 - b.1).abs()).sum();
    // Its sites are others now, at most the spacing apart: one of them is near.
    assert!(off < 3 * 16_000_000, "{before:?} {after:?}");
}

fn start_state(found: Vec<Found>) -> State {
    let options = StartOptions {
        found,
        folder: "".into(),
        setup_path: None,
        overrides: Overrides::default(),
        grasp_path: None,
        color: ColorChoice::Never,
        marker: None,
    };
    State::start(&options).unwrap()
}

fn start_desk(found: Vec<Found>) -> Desk {
    Desk { state: start_state(found), ..Desk::hinge() }
}

#[test]
fn the_start_page_lists_files_here_then_parts_to_try() {
    let found = |path: &str, name: Option<&str>| Found { path: path.into(), name: name.map(str::to_owned) };
    let mut desk = start_desk(vec![found("bow\u{1b}[2J.toml", Some("bow \u{9b}plate")), found("parts/x.toml", None)]);
    assert_eq!(Scope::of(&desk.state), Scope::Start);
    insta::assert_snapshot!("start_80x24", desk.resized(80, 24));
    insta::assert_snapshot!("start_120x40", desk.resized(120, 40));
    insta::assert_snapshot!("start_40x12", desk.resized(40, 12));
    desk.resized(80, 24);
    desk.keys("<esc>mRsl");
    assert!(desk.other.is_empty() && desk.state.marks.is_empty());
    desk.keys("j<cr>");
    assert!(matches!(desk.other.last(), Some(Effect::Open(Choice::File(path))) if path == Path::new("parts/x.toml")));
    desk.keys("jj");
    let screen = desk.screen(80, 24);
    assert!(screen.contains("Enter write it here and open"), "{screen}");
    insta::assert_snapshot!("start_demo_80x24", screen);
    desk.keys("<cr>");
    assert!(matches!(desk.other.last(), Some(Effect::Open(Choice::Demo(1)))), "{:?}", desk.other.last());
    desk.keys("G?<esc>kG");
    insta::assert_snapshot!("start_end_40x12", desk.resized(40, 12));
    // What cannot be opened is told on top, and the page is still there.
    desk.input(Input::Told { title: "not opened", lines: vec!["x.toml: there is no such file".into()] });
    desk.keys("<esc>q");
    assert!(matches!(desk.other.last(), Some(Effect::Quit { recover: false })));
}

#[test]
fn the_start_page_is_drawn_at_every_size() {
    let many = (0..60).map(|i| Found { path: format!("part_{i}.toml").into(), name: Some("x".repeat(i)) }).collect();
    for found in [Vec::new(), many] {
        let mut state = start_state(found);
        for at in [0, 5, 1000] {
            state.layers = vec![Layer::Start(StartPage {
                at,
                ..match &state.layers[0] {
                    Layer::Start(page) => page.clone(),
                    other => panic!("{other:?}"),
                }
            })];
            for width in 0..=90 {
                for height in 0..=30 {
                    update(&mut state, Input::Resize(width, height));
                    let mut buffer = Buffer::empty(Rect::new(0, 0, width, height));
                    view::render(&state, buffer.area, &mut buffer);
                }
            }
        }
    }
}

#[test]
fn every_part_that_comes_with_the_program_opens_in_its_cell_and_ranks() {
    let setup = setup_from_text(Path::new(demo::SETUP.file), demo::SETUP.text).unwrap();
    for demo in demo::PARTS {
        let (part, _) = part_from_text(Path::new(demo.file), demo.text).unwrap_or_else(|fault| panic!("{fault}"));
        let mut coarse = setup.clone();
        coarse.search.spacing_mm = Some(part.outline().perimeter_mm() / 40.0);
        let desk = Desk::new(part, coarse);
        assert!(desk.state.rows() > 0, "{}: nothing is listed", demo.file);
        assert_eq!(desk.state.order.key, SortKey::Quality);
    }
}

#[cfg(unix)]
mod on_a_terminal {
    use super::*;
    use crate::pty::{FAST, Pty, folder, recovery, saved};
    use std::time::Duration;

    fn start(folder: &tempfile::TempDir) -> Pty {
        Pty::start(folder.path(), 80, 24, &[])
    }

    fn read_names(folder: &tempfile::TempDir) -> Vec<String> {
        read_grasps(&saved(folder)).unwrap().grasps.into_iter().map(|grasp| grasp.name).collect()
    }

    #[test]
    fn saved_reopened_renamed_and_taken_out() {
        let folder = folder();
        let mut pty = start(&folder);
        pty.wait_ranked();
        pty.send("n\x15bow end\rjn\x15stern\rjn\x15spare\rs");
        pty.wait_for("3 grasps saved to");
        // Names come back from the file, also in the run that saved them.
        pty.send("Mjn\x15aft\rs");
        pty.wait("the new name", |_| read_names(&folder) == ["bow end", "aft", "spare"]);
        pty.send("\x1bq");
        assert!(pty.ended());
        drop(pty);
        let text = std::fs::read_to_string(saved(&folder)).unwrap();
        let commented = text.replace("\n[[grasp]]\nname = \"aft\"", "\n# by the rail\n[[grasp]]\nname = \"aft\"");
        std::fs::write(saved(&folder), &commented).unwrap();

        let mut pty = start(&folder);
        pty.wait_ranked();
        pty.wait_for("3 marks, all saved");
        pty.send("Mw\x15why not\rjjd");
        pty.wait_for("1 to be taken out");
        pty.send("\x1bqs");
        assert!(pty.ended());
        let expected = commented.split("\n[[grasp]]\nname = \"spare\"").next().unwrap();
        let expected = expected.replacen("note = \"\"", "note = \"why not\"", 1);
        assert_eq!(std::fs::read_to_string(saved(&folder)).unwrap(), expected);
        assert!(!recovery(&folder).exists());
    }

    #[test]
    fn removals_and_renames_outlive_a_kill() {
        let folder = folder();
        let mut pty = start(&folder);
        pty.wait_ranked();
        pty.send("n\x15bow end\rjn\x15stern\rs");
        pty.wait_for("2 grasps saved to");
        pty.send("Mdn\x15aft\r");
        pty.wait_for("aft");
        pty.signal("TERM");
        assert!(!pty.ended());
        assert_eq!(read_names(&folder), ["bow end", "stern"], "the file is as it was");
        let text = std::fs::read_to_string(recovery(&folder)).unwrap();
        assert!(text.contains("# Taken out on the bench, but not yet in the grasp file"), "{text}");
        assert!(text.contains("removed = [\"bow end\"]"), "{text}");
        drop(pty);
        let mut pty = start(&folder);
        pty.wait_for("2 marks were not saved");
        pty.send("y");
        pty.wait_for("1 taken out of the list again");
        pty.send("s");
        pty.wait("both changes", |_| read_names(&folder) == ["aft"]);
        pty.wait("the end of the recovery file", |_| !recovery(&folder).exists());
        pty.send("q");
        assert!(pty.ended());
    }

    #[test]
    fn a_foreign_or_broken_grasp_file_is_told_and_never_written() {
        let folder = folder();
        let mut pty = start(&folder);
        pty.wait_ranked();
        pty.send("ms");
        pty.wait_for("1 grasp saved to");
        pty.send("q");
        assert!(pty.ended());
        drop(pty);
        let good = std::fs::read_to_string(saved(&folder)).unwrap();
        let digest = read_grasps(&saved(&folder)).unwrap().part_digest;
        let foreign = good.replace(&digest, &digest.chars().rev().collect::<String>());
        for (text, told) in [(foreign, "of another part"), ("schema = 1\nnot toml".to_owned(), "cleat.grasps.toml:2:")]
        {
            std::fs::write(saved(&folder), &text).unwrap();
            let mut pty = start(&folder);
            pty.wait_for(told);
            pty.send("\x1b");
            pty.wait_ranked();
            pty.send("jms");
            pty.wait_for("not saved");
            pty.send("\x1bqx");
            pty.ended();
            assert_eq!(std::fs::read_to_string(saved(&folder)).unwrap(), text);
        }
    }

    #[test]
    fn a_part_changed_on_disk_is_noticed_and_read_again_without_a_byte_while_idle() {
        let folder = folder();
        let mut pty = start(&folder);
        pty.wait_ranked();
        pty.wait_quiet();
        let part = folder.path().join("cleat.toml");
        let before = pty.bytes();
        std::thread::sleep(Duration::from_secs(5));
        assert_eq!(pty.bytes(), before, "idle");
        let text = std::fs::read_to_string(&part).unwrap();
        std::fs::write(&part, text.replace("[80.0, 0.0]", "[80.0, 0.0")).unwrap();
        pty.wait_for("the part file changed on disk: R reads again");
        pty.wait_quiet();
        let before = pty.bytes();
        std::thread::sleep(Duration::from_secs(5));
        assert_eq!(pty.bytes(), before, "told once");
        pty.send("R");
        pty.wait_for("cleat.toml:4:");
        pty.send("\x1b");
        std::fs::write(&part, text.replace("cleat base", "cleat plate").replace("52.0, 40.0", "60.0, 40.0")).unwrap();
        pty.send("lR");
        pty.wait_for("part read again");
        pty.wait_for("cleat plate");
        pty.wait_for("mu 0.21");
        pty.wait_ranked();
        // What is saved now is of the part as it is now.
        pty.send("ms");
        pty.wait_for("1 grasp saved to");
        let now = holdwright::file::read_part(&part).unwrap();
        assert_eq!(read_grasps(&saved(&folder)).unwrap().part_digest, holdwright::file::part_digest(&now));
        pty.send("q");
        assert!(pty.ended());
    }

    #[test]
    fn what_the_command_line_says_wins_over_a_setup_read_again() {
        let folder = folder();
        std::fs::write(folder.path().join("cleat.toml"), pty::PART).unwrap();
        let setup = folder.path().join("cell.setup.toml");
        std::fs::write(&setup, "schema = 1\n[friction]\nmu = 0.2\n[search]\nspacing_mm = 6.0\n").unwrap();
        let args = ["cleat.toml", "--setup", "cell.setup.toml", "--mu", "0.2"];
        let mut pty = Pty::launch(folder.path(), &args, (80, 24), &[], FAST);
        pty.wait_ranked();
        std::fs::write(&setup, "schema = 1\n[friction]\nmu = 0.5\n[search]\nspacing_mm = 8.0\n").unwrap();
        pty.wait_for("the setup file changed on disk");
        pty.send("R");
        pty.wait_for("setup read again");
        pty.send("v");
        pty.wait_for("sites 8.00 mm");
        assert!(pty.screen().contains("mu 0.20"), "{}", pty.screen());
        pty.send("q");
        assert!(pty.ended());
    }

    #[test]
    fn the_first_start_offers_parts_and_writes_one_never_over_another() {
        let folder = folder();
        let mut pty = Pty::launch(folder.path(), &[], (80, 24), &[], FAST);
        pty.wait_for("no part file here");
        pty.wait_for("write it here and open");
        pty.send("\r");
        pty.wait_for("written here; next time: holdwright hinge_leaf.toml --setup");
        pty.wait_ranked();
        pty.send("m");
        pty.wait_for("marked");
        pty.signal("TERM");
        assert!(!pty.ended());
        pty.assert_restored();
        drop(pty);
        let here = |name: &str| std::fs::read_to_string(folder.path().join(name)).unwrap();
        assert_eq!(
            (here("hinge_leaf.toml"), here(demo::SETUP.file)),
            (demo::PARTS[0].text.to_owned(), demo::SETUP.text.to_owned())
        );
        assert!(folder.path().join("hinge_leaf.grasps.toml.recovery").exists());
        // A file of the same name that is another stays.
        std::fs::write(folder.path().join("cleat_base.toml"), pty::PART).unwrap();
        let mut pty = Pty::launch(folder.path(), &[], (80, 24), &[], FAST);
        pty.wait_for("part files here");
        pty.send("jjj\r");
        pty.wait_for("is there already");
        assert_eq!(here("cleat_base.toml"), pty::PART);
        pty.send("\x1bg\r");
        pty.wait_for("cleat base");
        pty.wait_ranked();
        pty.send("q");
        assert!(pty.ended());
        pty.assert_restored();
    }

    #[test]
    fn without_a_terminal_the_first_start_says_what_to_do() {
        let output = std::process::Command::new(env!("CARGO_BIN_EXE_holdwright"))
            .stdin(std::process::Stdio::null())
            .output()
            .unwrap();
        assert_eq!((output.status.code(), output.stdout.len()), (Some(2), 0));
        let said = String::from_utf8(output.stderr).unwrap();
        assert!(["rank", "import", "--help"].iter().all(|word| said.contains(word)), "{said}");
    }
}
