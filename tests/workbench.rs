//! What the workbench shows: screens at many sizes, markers, colours, pages and dialogs.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod desk;

use desk::{Desk, hinge, setup};
use holdwright::part::{Part, PartDescription};
use holdwright::workbench::state::Panel;
use holdwright::workbench::{ColorChoice, Input, Marker, is_utf8, update, view};
use ratatui::Terminal;
use ratatui::backend::TestBackend;
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;
use ratatui::style::Color;
use std::collections::HashSet;

#[test]
fn the_bench_at_the_sizes_people_have() {
    let mut desk = Desk::hinge();
    insta::assert_snapshot!("bench_80x24", desk.resized(80, 24));
    insta::assert_snapshot!("bench_120x40", desk.resized(120, 40));
    insta::assert_snapshot!("bench_60x16", desk.resized(60, 16));
    insta::assert_snapshot!("bench_40x20", desk.resized(40, 20));
    insta::assert_snapshot!("bench_24x6", desk.resized(24, 6));
}

#[test]
fn the_bench_with_loads_at_the_sizes_people_have() {
    let mut desk = Desk::loaded();
    insta::assert_snapshot!("loaded_80x24", desk.resized(80, 24));
    insta::assert_snapshot!("loaded_120x40", desk.resized(120, 40));
    insta::assert_snapshot!("loaded_60x16", desk.resized(60, 16));
    insta::assert_snapshot!("loaded_40x20", desk.resized(40, 20));
    desk.resized(80, 24);
    desk.keys("<cr>");
    insta::assert_snapshot!("loaded_reading_80x64", desk.resized(80, 64));
    insta::assert_snapshot!("loaded_reading_120x40", desk.resized(120, 40));
    desk.keys("<esc>L");
    insta::assert_snapshot!("loads_80x24", desk.resized(80, 24));
    insta::assert_snapshot!("loads_120x40", desk.resized(120, 40));
    insta::assert_snapshot!("loads_40x20", desk.resized(40, 20));
    desk.resized(80, 24);
    desk.keys("jjx<cr>0<cr>");
    insta::assert_snapshot!("load_size_refused_80x24", desk.screen(80, 24));
}

#[test]
fn a_grasp_that_does_not_hold_its_loads_says_by_which_case() {
    let mut desk = Desk::loaded();
    desk.keys("jN4<cr>");
    insta::assert_snapshot!("not_held_80x24", desk.screen(80, 24));
}

#[test]
fn pads_are_drawn_at_their_width() {
    let mut desk = Desk::loaded();
    desk.keys("PN500<cr>");
    insta::assert_snapshot!("pads_80x24", desk.screen(80, 24));
    insta::assert_snapshot!("pads_120x40", desk.resized(120, 40));
    desk.keys("<cr>");
    insta::assert_snapshot!("pads_reading_80x64", desk.resized(80, 64));
}

#[test]
fn the_outline_with_each_marker_and_with_cones() {
    let mut desk = Desk::hinge();
    desk.keys("jjc");
    insta::assert_snapshot!("cones_ascii_80x24", desk.screen(80, 24));
    desk.keys("p");
    insta::assert_snapshot!("cones_line_80x24", desk.screen(80, 24));
    desk.keys("p");
    insta::assert_snapshot!("cones_braille_80x24", desk.screen(80, 24));
}

#[test]
fn every_grasp_is_listed_with_its_positions() {
    let mut desk = Desk::hinge();
    desk.keys("v");
    insta::assert_snapshot!("members_80x24", desk.screen(80, 24));
    insta::assert_snapshot!("members_120x40", desk.screen(120, 40));
}

#[test]
fn pages_and_dialogs() {
    let mut desk = Desk::hinge();
    desk.keys("jmn<c-u>bow end<cr>wclear of the seal<cr>");
    insta::assert_snapshot!("marked_80x24", desk.screen(80, 24));
    desk.keys("<cr>");
    insta::assert_snapshot!("reading_80x24", desk.screen(80, 24));
    desk.keys("<esc>?");
    insta::assert_snapshot!("help_80x24", desk.screen(80, 24));
    insta::assert_snapshot!("help_120x64", desk.resized(120, 64));
    desk.resized(80, 24);
    desk.keys("<esc>M");
    insta::assert_snapshot!("marks_80x24", desk.screen(80, 24));
    desk.keys("<esc>=0.x<cr>");
    insta::assert_snapshot!("mu_refused_80x24", desk.screen(80, 24));
    desk.keys("<esc>q");
    insta::assert_snapshot!("ask_quit_80x24", desk.screen(80, 24));
}

#[test]
fn an_empty_list_says_why_and_what_to_try() {
    // Fewer than four frictionless contacts never close in the plane (Reuleaux 1876; Somov 1897).
    let mut desk = Desk::hinge();
    desk.keys("=0<cr>");
    assert_eq!(desk.state.rows(), 0);
    insta::assert_snapshot!("nothing_closed_80x24", desk.screen(80, 24));

    let mut high = setup();
    high.floors.quality = 5.0;
    insta::assert_snapshot!("floors_hide_all_80x24", Desk::new(hinge(), high).screen(80, 24));

    let mut wide = setup();
    wide.hand.corner_clearance_mm = 45.0;
    let screen = Desk::new(hinge(), wide).screen(80, 24);
    assert!(screen.contains("No finger fits anywhere"), "{screen}");
}

#[test]
fn an_open_grasp_is_read_with_the_way_it_escapes() {
    let mut desk = Desk::hinge();
    desk.keys("jj");
    let before = desk.state.reading.as_ref().unwrap().grasp.spots.clone();
    desk.keys("=0<cr>");
    let reading = desk.state.reading.as_ref().unwrap();
    assert_eq!(reading.grasp.spots, before);
    let screen = desk.screen(80, 24);
    assert!(screen.contains("not listed") && screen.contains("nothing stops it"), "{screen}");
}

#[test]
fn every_size_is_drawn_without_a_panic() {
    let mut desk = Desk::hinge();
    desk.keys("jmc");
    let mut screens = vec![desk.state.clone()];
    for script in ["<cr>", "?", "M", "n", "=x<cr>", "q", "tjj", "tG", "djj", "dG"] {
        let mut other = Desk { state: desk.state.clone(), saved: Vec::new(), other: Vec::new(), ..Desk::hinge() };
        other.keys(script);
        screens.push(other.state);
    }
    let mut fault = desk.state.clone();
    update(&mut fault, Input::SaveFailed { lines: vec!["no such place".into(); 30], changed: false });
    screens.push(fault);
    let mut empty = Desk::hinge();
    empty.keys("=0<cr>");
    screens.push(empty.state);
    for state in &mut screens {
        for marker in [Marker::Ascii, Marker::Line, Marker::Braille] {
            state.look.marker = marker;
            for width in 0..=40 {
                for height in 0..=20 {
                    for panel in [Panel::Table, Panel::Outline, Panel::Reading] {
                        state.panel = panel;
                        update(state, Input::Resize(width, height));
                        let mut buffer = Buffer::empty(Rect::new(0, 0, width, height));
                        let cursor = view::render(state, buffer.area, &mut buffer);
                        if let Some(at) = cursor {
                            assert!(at.x < width && at.y < height, "cursor {at:?} outside {width}x{height}");
                        }
                    }
                }
            }
        }
    }
}

#[test]
fn a_screen_too_small_says_what_it_needs() {
    let desk = Desk::hinge();
    assert!(desk.screen(23, 6).contains("needs 24x6"));
    assert!(desk.screen(24, 5).contains("needs 24x6"));
    assert!(!desk.screen(24, 6).contains("needs"));
}

/// Cells are taken as twice as high as wide: an 80 by 40 part is then as many columns wide as it is rows high, times
/// four, to within a cell at either end.
#[test]
fn the_outline_keeps_its_proportion() {
    let plate = PartDescription::bare("plate", vec![vec![[0.0, 0.0], [80.0, 0.0], [80.0, 40.0], [0.0, 40.0]]]);
    let mut wide = setup();
    wide.hand.corner_clearance_mm = 0.0;
    for (width, height) in [(80, 24), (120, 40), (100, 30), (60, 16)] {
        let desk = Desk::new(Part::new(plate.clone()).unwrap(), wide.clone());
        let screen = desk.screen(width, height);
        let corners: Vec<(usize, usize)> = screen
            .lines()
            .enumerate()
            .skip(1)
            .flat_map(|(y, line)| {
                let left: String = line.chars().take_while(|c| *c != '\u{2502}').collect();
                let found: Vec<_> = left.match_indices('+').map(|(x, _)| (x, y)).collect();
                found
            })
            .take(4)
            .collect();
        assert_eq!(corners.len(), 4, "{screen}");
        let (columns, rows) = (corners[1].0 - corners[0].0, corners[2].1 - corners[0].1);
        let off = (columns as f64 - 4.0 * rows as f64).abs();
        assert!(off <= 4.0, "{columns} columns, {rows} rows at {width}x{height}\n{screen}");
    }
}

#[test]
fn without_colour_every_cell_has_the_terminals_own_and_with_it_only_named_ones() {
    let mut desk = Desk::hinge();
    desk.keys("jmc");
    for color in [false, true] {
        desk.state.look.color = color;
        let mut terminal = Terminal::new(TestBackend::new(120, 40)).unwrap();
        terminal.draw(|frame| view::draw(&desk.state, frame)).unwrap();
        let colors: HashSet<Color> =
            terminal.backend().buffer().content.iter().flat_map(|cell| [cell.fg, cell.bg]).collect();
        let named = |color: &Color| !matches!(color, Color::Rgb(..) | Color::Indexed(_));
        assert!(colors.iter().all(named));
        assert_eq!(colors.len() > 1, color, "{colors:?}");
    }
}

#[test]
fn ascii_mode_shows_nothing_but_ascii() {
    let mut desk = Desk::hinge();
    desk.keys("jmc");
    for script in ["", "<cr>", "<esc>?", "<esc>M", "<esc>tj", "<esc>dj", "<esc>q"] {
        let screen = desk.keys(script).screen(100, 40);
        assert!(screen.is_ascii(), "{:?}", screen.chars().find(|c| !c.is_ascii()));
    }
}

#[test]
fn a_part_named_with_control_characters_cannot_reach_the_terminal() {
    let part = PartDescription::bare("a\u{1b}[2Jb\u{9b}c", vec![vec![[0.0, 0.0], [80.0, 0.0], [0.0, 40.0]]]);
    let screen = Desk::new(Part::new(part).unwrap(), setup()).screen(120, 24);
    assert!(screen.chars().all(|c| c == '\n' || !c.is_control()));
}

/// no-color.org: any value but an empty one turns colour off. A dumb terminal has none (terminfo `dumb`).
#[test]
fn no_color_is_obeyed_unless_colour_is_asked_for() {
    use ColorChoice::{Always, Auto, Never};
    assert_eq!(Auto.settled(Some("1"), Some("xterm")), Never);
    assert_eq!(Auto.settled(Some(""), Some("xterm")), Always);
    assert_eq!(Auto.settled(None, Some("dumb")), Never);
    assert_eq!(Auto.settled(None, None), Always);
    assert_eq!(Always.settled(Some("1"), Some("dumb")), Always);
    assert_eq!(Never.settled(None, Some("xterm")), Never);
}

/// POSIX.1-2017, Base Definitions 8.2: LC_ALL before LC_CTYPE before LANG, an empty value counts as unset.
#[test]
fn the_locale_is_read_in_posix_order() {
    assert!(is_utf8(None, None, Some("en_GB.UTF-8")));
    assert!(!is_utf8(Some("C"), None, Some("en_GB.UTF-8")));
    assert!(is_utf8(Some(""), Some("de_DE.utf8"), Some("C")));
    assert!(!is_utf8(None, None, None));
}
