//! The pictures of the outline pane: every one at the sizes people have, at any size without a panic, and their keys.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod desk;

use desk::{Desk, setup, setup_with_loads, steel_hinge};
use holdwright::hand::Tip;
use holdwright::mechanics::Verdict;
use holdwright::part::{Part, PartDescription};
use holdwright::workbench::picture::{Picture, Side};
use holdwright::workbench::state::Panel;
use holdwright::workbench::{Input, Key, Marker, State, action, update, view};
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;
use std::collections::HashSet;
use std::f64::consts::PI;

/// The names of the snapshots, by key.
const NAMES: [&str; 7] = ["fingers", "forces", "labels", "envelope", "room", "wrenches", "friction"];

/// An open grasp of two fingers that turns: the same as was closed with more friction.
fn open() -> Desk {
    let mut desk = Desk::hinge();
    desk.keys(&format!("F{}=0<cr>", "j".repeat(15)));
    assert_eq!(desk.state.reading.as_ref().unwrap().assessment.verdict, Verdict::Open);
    desk
}

#[test]
fn every_picture_at_the_sizes_people_have() {
    let mut desk = Desk::loaded();
    for (key, name) in (1..).zip(NAMES) {
        desk.keys(&key.to_string());
        for (width, height) in [(80, 24), (120, 40)] {
            insta::assert_snapshot!(format!("{name}_{width}x{height}"), desk.resized(width, height));
        }
    }
}

#[test]
fn pictures_in_lines_and_braille() {
    let mut desk = Desk::loaded();
    desk.resized(120, 40);
    desk.keys("p5");
    insta::assert_snapshot!("room_line_120x40", desk.screen(120, 40));
    desk.keys("p6yy");
    insta::assert_snapshot!("wrenches_braille_120x40", desk.screen(120, 40));
    desk.keys("2");
    insta::assert_snapshot!("forces_braille_120x40", desk.screen(120, 40));
}

#[test]
fn an_open_grasp_shows_its_labels_and_has_no_room() {
    let mut desk = open();
    for (key, name) in [("3", "labels"), ("5", "room"), ("6", "wrenches")] {
        desk.keys(key);
        insta::assert_snapshot!(format!("open_{name}_80x24"), desk.resized(80, 24));
    }
}

#[test]
fn pads_are_drawn_at_their_depth_and_move_together() {
    let mut desk = Desk::loaded();
    desk.resized(120, 40);
    desk.keys("PN500<cr>5");
    insta::assert_snapshot!("room_pads_120x40", desk.screen(120, 40));
    desk.keys("1zi");
    insta::assert_snapshot!("fingers_near_120x40", desk.screen(120, 40));
}

/// Where nothing is known the picture says why, and how that is mended.
#[test]
fn what_cannot_be_shown_says_why() {
    let says = |part: Part, change: &dyn Fn(&mut holdwright::search::Setup), key: &str, words: &str| {
        let mut setup = setup();
        change(&mut setup);
        let mut desk = Desk::new(part, setup);
        desk.resized(140, 50);
        let screen = desk.keys(key).screen(140, 50);
        // Words may be broken over lines of the pane, which ends where the table begins.
        let pane: String = screen.lines().filter_map(|line| line.split('|').next()).collect::<Vec<_>>().join(" ");
        let pane = pane.split_whitespace().collect::<Vec<_>>().join(" ");
        assert!(pane.contains(words), "{words}\n{screen}");
    };
    says(desk::hinge(), &|_| {}, "2", "L adds one");
    says(desk::hinge(), &|_| {}, "4", "the part file gives neither mass nor thickness");
    says(desk::thick_hinge(), &|_| {}, "4", "the part has no mass; d lists densities");
    says(steel_hinge(), &|_| {}, "4", "not known without a force limit: N types one");
    says(steel_hinge(), &|setup| setup.hand.force_limit_n = Some(0.01), "4", "not even the weight is held");
    let flat = || Part::new(PartDescription { mass_kg: Some(0.2), thickness: None, ..described() }).unwrap();
    says(flat(), &|setup| setup.hand.force_limit_n = Some(60.0), "4", "its weight pushes out of the plane");
}

fn described() -> PartDescription {
    PartDescription::bare("plate", vec![vec![[0.0, 0.0], [80.0, 0.0], [80.0, 24.0], [52.0, 40.0], [0.0, 40.0]]])
}

/// States of many kinds: closed, open, loaded, pads, nothing listed, zoomed.
fn states() -> Vec<State> {
    let mut states = vec![open().state];
    for script in ["", "jj", "PN500<cr>", "ffc"] {
        let mut desk = Desk::loaded();
        desk.keys(script);
        states.push(desk.state);
    }
    let mut empty = Desk::new(steel_hinge(), setup_with_loads());
    empty.keys("U".repeat(60).as_str());
    states.push(empty.state);
    let mut none = setup();
    none.hand.corner_clearance_mm = 45.0;
    states.push(Desk::new(desk::hinge(), none).state);
    states
}

#[test]
fn no_size_panics_in_any_picture() {
    let widths = [0, 1, 2, 3, 5, 7, 11, 17, 23, 24, 25, 31, 40, 48, 59, 60, 61, 71, 80, 97, 113, 130];
    let heights = (0..=18).chain([20, 22, 24, 25, 27, 31, 36, 40, 45]);
    let sizes: Vec<(u16, u16)> = heights.flat_map(|height| widths.map(|width| (width, height))).collect();
    for (number, state) in states().iter_mut().enumerate() {
        for picture in Picture::ALL {
            state.view.picture = picture;
            state.look.marker = [Marker::Ascii, Marker::Line, Marker::Braille][number % 3];
            for (i, &(width, height)) in sizes.iter().enumerate() {
                // Every state has its share of the sizes, and the loaded one all.
                if number != 1 && i % 7 != number {
                    continue;
                }
                for panel in [Panel::Outline, Panel::Table] {
                    state.panel = panel;
                    let mut buffer = Buffer::empty(Rect::new(0, 0, width, height));
                    view::render(state, buffer.area, &mut buffer);
                }
            }
        }
    }
}

#[test]
fn zoomed_pictures_do_not_panic_either() {
    let mut desk = Desk::loaded();
    for script in ["1", "2", "3", "4", "5", "6"] {
        desk.keys(script);
        for _ in 0..4 {
            desk.keys("izz");
            for size in [(80, 24), (24, 6), (130, 45), (60, 16), (40, 20), (25, 30)] {
                desk.screen(size.0, size.1);
            }
        }
        desk.keys("<esc>");
    }
}

#[test]
fn ascii_pictures_are_ascii_and_colour_is_not_needed() {
    let mut desk = Desk::loaded();
    for key in 1..=7 {
        let screen = desk.keys(&key.to_string()).screen(120, 40);
        assert!(screen.is_ascii(), "{:?}", screen.chars().find(|c| !c.is_ascii()));
        let plain = desk.screen(120, 40);
        desk.state.look.color = true;
        assert_eq!(desk.screen(120, 40), plain);
        desk.state.look.color = false;
    }
}

#[test]
fn digits_choose_the_picture_and_bring_the_pane_in() {
    let mut desk = Desk::hinge();
    for (key, picture) in (1..).zip(Picture::ALL) {
        desk.state.panel = Panel::Table;
        desk.keys(&key.to_string());
        assert_eq!((desk.state.view.picture, desk.state.panel), (picture, Panel::Outline));
    }
    // The footer has one word for all seven.
    let footer: Vec<&str> =
        action::footer(&desk.state).filter(|row| row.label.contains("picture")).map(|row| row.label).collect();
    assert_eq!(footer, ["to 7 picture"]);
    assert_eq!(action::action_of(&desk.state, Key::Char('8')), None);
}

#[test]
fn zoom_goes_in_steps_of_half_as_much_again_and_escape_goes_back() {
    let mut desk = Desk::hinge();
    let zoom = |desk: &Desk| desk.state.view.zoom();
    assert_eq!(action::action_of(&desk.state, Key::Char('Z')), None);
    desk.keys("zz");
    assert!((zoom(&desk) - 2.25).abs() < 1e-12);
    desk.keys("Z");
    assert!((zoom(&desk) - 1.5).abs() < 1e-12);
    desk.keys(&"z".repeat(40));
    assert!(zoom(&desk) > 30.0 && zoom(&desk) <= 40.0);
    desk.keys("<esc>");
    assert!((zoom(&desk) - 1.0).abs() < 1e-12);
    desk.keys("ZZ");
    assert!((zoom(&desk) - 1.0).abs() < 1e-12);
    // A graph has no nearer.
    desk.keys("7z");
    assert!((zoom(&desk) - 1.0).abs() < 1e-12);
}

#[test]
fn contacts_come_to_the_middle_one_after_the_other() {
    let mut desk = Desk::hinge();
    let middle = |desk: &Desk| desk.state.view.contact(3);
    for contact in 0..3 {
        desk.keys("i");
        assert_eq!(middle(&desk), Some(contact));
        assert!(desk.state.view.zoom() > 3.0);
        let screen = desk.screen(120, 40);
        assert!(screen.contains(&format!("x3.4 about contact {}", contact + 1)), "{screen}");
    }
    desk.keys("i");
    assert_eq!((middle(&desk), desk.state.view.zoom() > 1.0), (None, false));
    desk.keys("iz<esc>");
    assert_eq!((middle(&desk), desk.state.view.zoom() > 1.0), (None, false));
    // Fewer fingers than the contact's number leave no contact in the middle; nor does a picture without contacts.
    desk.keys("iii");
    assert_eq!(desk.state.view.contact(2), None);
    desk.keys("6");
    assert_eq!(middle(&desk), None);
    assert_eq!(action::action_of(&desk.state, Key::Char('i')), None);
}

#[test]
fn y_steps_through_the_cases_and_through_the_sides() {
    let mut desk = Desk::loaded();
    let governing = desk.state.reading.as_ref().unwrap().assessment.holding.as_ref().unwrap().governing;
    assert_eq!(action::action_of(&desk.state, Key::Char('y')), None);
    desk.keys("2");
    assert_eq!(desk.state.view.case, None);
    let mut seen = HashSet::new();
    for step in 1..=3 {
        desk.keys("y");
        assert_eq!(desk.state.view.case, Some((governing + step) % 3));
        let screen = desk.screen(120, 40);
        let name = ["lift", "emergency stop", "brush"][(governing + step) % 3];
        assert!(screen.contains(&format!("forces: \"{name}\"")), "{screen}");
        seen.insert(name);
        // A case in any direction says which is the worst.
        assert_eq!(screen.contains("worst when accelerated toward"), name == "emergency stop", "{screen}");
    }
    assert_eq!(seen.len(), 3);
    desk.keys("6");
    for side in [Side::TorqueOverX, Side::TorqueOverY, Side::Weakest, Side::Forces] {
        desk.keys("y");
        assert_eq!(desk.state.view.side, side);
    }
}

/// The forces drawn on the screen are those of the reading; the first case is the one that asks most.
#[test]
fn the_forces_told_are_those_that_hold_the_case() {
    let mut desk = Desk::loaded();
    let screen = desk.keys("2").resized(120, 40);
    let holding = desk.state.reading.as_ref().unwrap().assessment.holding.clone().unwrap();
    for (finger, force) in holding.governing_case().forces.iter().enumerate() {
        let told = format!("{} {:.2} in {:.2} along {:.2} up", finger + 1, force.normal_n, force.along_n, force.up_n);
        assert!(screen.contains(&told.replace("-0.00", "0.00")), "{told}\n{screen}");
    }
}

/// A pin of 3 mm takes 2 pi 3 mm of outline about its centre at true proportion: the cells of its circle reach as far up as
/// across, in millimetres, to within a cell.
#[test]
fn a_pin_is_a_circle_at_its_true_size() {
    let mut desk = Desk::hinge();
    desk.keys("izz");
    let screen = desk.resized(130, 60);
    let width = screen.lines().nth(1).unwrap().find('|').unwrap();
    let circle: HashSet<(usize, usize)> = screen
        .lines()
        .enumerate()
        .skip(1)
        .take(45)
        .flat_map(|(y, line)| {
            let pane: String = line.chars().take(width).collect();
            pane.match_indices(['/', '\\', '|']).map(|(x, _)| (x, y)).collect::<Vec<_>>()
        })
        .collect();
    let across = circle.iter().map(|c| c.0).max().unwrap() - circle.iter().map(|c| c.0).min().unwrap();
    let down = circle.iter().map(|c| c.1).max().unwrap() - circle.iter().map(|c| c.1).min().unwrap();
    assert!((across as f64 - 2.0 * down as f64).abs() <= 6.0, "{across} by {down}\n{screen}");
    assert!(PI * across as f64 > 30.0, "{screen}");
}

/// Left of the friction needed to close the strip under the graph says open, right of it closed; the needed friction is
/// confirmed by the linear programs elsewhere.
#[test]
fn the_graph_turns_closed_at_the_friction_needed() {
    let mut desk = Desk::hinge();
    desk.resized(120, 40);
    desk.keys("=0.9<cr>7");
    let mut looked = 0;
    for _ in 0..desk.state.rows() {
        desk.keys("j");
        let needed = desk.state.reading.as_ref().unwrap().assessment.friction_needed_closure.unwrap();
        if needed < 0.05 {
            continue;
        }
        let screen = desk.screen(120, 40);
        let strip = screen.lines().find(|line| line.trim_start().starts_with(".")).unwrap();
        let strip: Vec<char> = strip.chars().skip_while(|c| *c == ' ').take_while(|c| ".=~".contains(*c)).collect();
        // The axis goes to half as much again as mu: 1.35.
        let column = needed / 1.35 * (strip.len() - 1) as f64;
        for (k, sign) in strip.iter().enumerate() {
            let beyond = k as f64 - column;
            assert!(beyond.abs() < 1e-6 || (*sign == '=') == (beyond > 0.0), "{k} of {column}\n{screen}");
        }
        looked += 1;
    }
    assert!(looked > 10, "{looked}");
}

/// Tips of both kinds, with and without a body.
#[test]
fn fingers_without_a_size_are_points() {
    for tip in [Tip::Pin, Tip::Pad] {
        let mut bare = setup();
        bare.hand.tip = tip;
        (bare.hand.pin_radius_mm, bare.hand.pad_depth_mm) = (0.0, 0.0);
        let mut desk = Desk::new(desk::hinge(), bare);
        desk.keys("zzzzzz");
        desk.resized(120, 40);
        desk.input(Input::Resize(80, 24));
        assert!(update(&mut desk.state, Input::Key(Key::Char('i'))).is_empty());
        assert!(desk.screen(80, 24).contains("about contact 1"));
    }
}
