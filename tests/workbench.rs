//! The workbench by key script on a test terminal: what is seen, what the keys do, and that no size breaks it.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

use holdwright::file::Keep;
use holdwright::part::{KeepOutDescription, Part, PartDescription};
use holdwright::search::job::{News, Request, What};
use holdwright::search::{Cancel, Key as SortKey, Listing, Ranking, SearchSettings, Setup, Spot, rank};
use holdwright::workbench::action::{self, Action, Scope};
use holdwright::workbench::state::{Job, Layer, Panel, Question};
use holdwright::workbench::{ColorChoice, Effect, Input, Key, Marker, Options, State, is_utf8, update, view};
use ratatui::Terminal;
use ratatui::backend::TestBackend;
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;
use ratatui::style::Color;
use std::collections::HashSet;
use std::path::PathBuf;
use std::sync::Arc;

fn hinge() -> Part {
    let outer = vec![[0.0, 0.0], [80.0, 0.0], [80.0, 24.0], [52.0, 40.0], [0.0, 40.0]];
    let hole = vec![[12.0, 10.0], [28.0, 10.0], [28.0, 26.0], [12.0, 26.0]];
    let mut described = PartDescription::bare("hinge leaf", vec![outer, hole]);
    described.keep_outs.push(KeepOutDescription {
        ring: 0,
        edge: 0,
        from: Some(20.0),
        to: Some(44.0),
        reason: "sealing face".into(),
    });
    Part::new(described).unwrap()
}

/// Pins of 3 mm, a friction band, sites far apart so that the tests stay quick.
fn setup() -> Setup {
    let mut setup = Setup::default();
    setup.friction.low = Some(0.15);
    setup.friction.nominal = Some(0.25);
    setup.friction.high = Some(0.4);
    setup.hand.pin_radius_mm = 3.0;
    setup.hand.corner_clearance_mm = 1.0;
    setup.hand.gap_mm = 1.0;
    setup.search = SearchSettings { spacing_mm: Some(8.0), ..SearchSettings::default() };
    setup
}

fn options(part: Part, setup: Setup) -> Options {
    Options {
        part_path: PathBuf::from("hinge_leaf.toml"),
        setup_path: None,
        part: Arc::new(part),
        setup,
        grasp_path: PathBuf::from("hinge_leaf.grasps.toml"),
        color: ColorChoice::Never,
        marker: None,
    }
}

/// The workbench with its effects carried out on the spot: rankings at once, saves into a list.
struct Desk {
    state: State,
    generation: u64,
    /// The last request; kept back when `hold` is set.
    request: Option<Request>,
    hold: bool,
    saved: Vec<Keep>,
    other: Vec<Effect>,
}

impl Desk {
    fn new(part: Part, setup: Setup) -> Self {
        let state = State::new(&options(part, setup)).unwrap();
        let mut desk = Self { state, generation: 0, request: None, hold: false, saved: Vec::new(), other: Vec::new() };
        desk.input(Input::Start);
        desk
    }

    fn hinge() -> Self {
        Self::new(hinge(), setup())
    }

    fn input(&mut self, input: Input) {
        for effect in update(&mut self.state, input) {
            match effect {
                Effect::Rank(request) => {
                    self.generation += 1;
                    self.request = Some(request);
                    self.input(Input::Asked(self.generation));
                    if !self.hold {
                        self.finish();
                    }
                }
                Effect::Save { ids, keeps, .. } => {
                    self.saved.extend(keeps);
                    self.input(Input::Saved(ids));
                }
                other => self.other.push(other),
            }
        }
    }

    fn finish(&mut self) {
        let ranking = ranked(self.request.as_ref().unwrap());
        self.news(self.generation, What::Done(Arc::new(ranking)));
    }

    fn news(&mut self, generation: u64, what: What) {
        self.input(Input::News(News { generation, what }));
    }

    /// Keys: a word in angle brackets is a named key, everything else is typed.
    fn keys(&mut self, script: &str) -> &mut Self {
        let mut rest = script;
        while let Some(first) = rest.chars().next() {
            let named = rest.strip_prefix('<').and_then(|tail| tail.split_once('>'));
            let key = named.and_then(|(name, _)| named_key(name));
            match (key, named) {
                (Some(key), Some((_, tail))) => {
                    self.input(Input::Key(key));
                    rest = tail;
                }
                _ => {
                    self.input(Input::Key(Key::Char(first)));
                    rest = &rest[first.len_utf8()..];
                }
            }
        }
        self
    }

    fn screen(&self, width: u16, height: u16) -> String {
        let mut terminal = Terminal::new(TestBackend::new(width, height)).unwrap();
        terminal.draw(|frame| view::draw(&self.state, frame)).unwrap();
        text_of(terminal.backend().buffer())
    }

    fn resized(&mut self, width: u16, height: u16) -> String {
        self.input(Input::Resize(width, height));
        self.screen(width, height)
    }

    fn spots(&self) -> Vec<Spot> {
        self.state.row().unwrap().grasp.spots.clone()
    }
}

fn ranked(request: &Request) -> Ranking {
    rank(&request.scene, request.key, request.listing, request.most, &Cancel::default(), &|_| {}).unwrap()
}

fn named_key(name: &str) -> Option<Key> {
    Some(match name {
        "up" => Key::Up,
        "down" => Key::Down,
        "left" => Key::Left,
        "right" => Key::Right,
        "cr" => Key::Enter,
        "esc" => Key::Esc,
        "tab" => Key::Tab,
        "bs" => Key::Backspace,
        "home" => Key::Home,
        "end" => Key::End,
        "c-c" => Key::Ctrl('c'),
        "c-u" => Key::Ctrl('u'),
        "c-z" => Key::Ctrl('z'),
        _ => return None,
    })
}

fn text_of(buffer: &Buffer) -> String {
    let mut text = String::new();
    for y in 0..buffer.area.height {
        let row: String = (0..buffer.area.width).map(|x| buffer[(x, y)].symbol()).collect();
        text.push_str(row.trim_end());
        text.push('\n');
    }
    text
}

// What is seen.

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
    for script in ["<cr>", "?", "M", "n", "=x<cr>", "q"] {
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
    for script in ["", "<cr>", "<esc>?", "<esc>M", "<esc>q"] {
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

// What the keys do.

#[test]
fn no_key_stands_twice_in_a_scope_and_pieces_of_an_arrow_do_nothing() {
    let mut seen = HashSet::new();
    for row in action::TABLE {
        for key in row.keys {
            assert!(seen.insert((row.scope, *key)), "{key} stands twice in {:?}", row.scope);
            if matches!(row.scope, Scope::Any) {
                continue;
            }
            assert!(
                !matches!(key, Key::Char('[' | 'O' | 'A' | 'B' | 'C' | 'D')),
                "{key} may be a piece of an arrow key torn apart"
            );
        }
    }
    for arrow in [Key::Up, Key::Down, Key::Left, Key::Right] {
        for row in action::TABLE.iter().filter(|row| row.keys.contains(&arrow)) {
            assert!(row.keys.iter().any(|key| matches!(key, Key::Char(_) | Key::Ctrl(_))), "{arrow} has no letter");
        }
    }
}

#[test]
fn the_readme_has_the_table_of_keys() {
    let readme = include_str!("../README.md");
    let table = action::markdown();
    assert!(readme.contains(&table), "put this table into README.md:\n\n{table}");
}

/// The picture is what the first command of the README shows.
#[test]
fn the_readme_has_the_picture() {
    let part = holdwright::file::read_part(std::path::Path::new("parts/hinge_leaf.toml")).unwrap();
    let screen = Desk::new(part, Setup::default()).screen(80, 24);
    assert!(include_str!("../README.md").contains(&screen), "put this picture into README.md:\n\n{screen}");
}

#[test]
fn the_readme_table_has_every_line_of_the_help_page() {
    let markdown = action::markdown();
    assert!(action::help().count() > 20);
    for row in action::help() {
        assert!(markdown.contains(row.help), "{}", row.help);
    }
}

#[test]
fn escape_closes_the_top_layer_only_and_never_quits() {
    let mut desk = Desk::hinge();
    desk.keys("m?<esc>q<esc><esc><esc>[A[BOC");
    assert!(desk.other.is_empty(), "{:?}", desk.other);
    assert!(desk.state.layers.is_empty());
    assert_eq!(desk.state.marks.len(), 1);
    assert_eq!(desk.state.selected, 0);
}

#[test]
fn text_left_by_a_torn_arrow_key_comes_back() {
    let mut desk = Desk::hinge();
    desk.keys("n<c-u>port side<esc>[A");
    assert!(desk.state.layers.is_empty());
    desk.keys("n<cr>");
    assert_eq!(desk.state.marks[0].keep.name, "port side");
}

#[test]
fn the_friction_knob_goes_in_clean_steps_and_stops_at_none() {
    let mut desk = Desk::hinge();
    desk.hold = true;
    desk.keys("llll");
    assert!((desk.state.setup().friction.mu - 0.24).abs() < 1e-15);
    desk.keys("<");
    assert!((desk.state.setup().friction.mu - 0.2).abs() < 1e-15);
    desk.keys("=0.333<cr>l");
    assert!((desk.state.setup().friction.mu - 0.34).abs() < 1e-15);
    desk.keys("=0.333<cr>h");
    assert!((desk.state.setup().friction.mu - 0.33).abs() < 1e-15);
    desk.keys(&"<".repeat(20));
    assert_eq!(desk.state.setup().friction.mu.to_bits(), 0.0f64.to_bits());
    for bad in ["-1", "11", "nan", "inf", "0.2.1", ""] {
        desk.keys(&format!("=<c-u>{bad}<cr>"));
        assert!(matches!(desk.state.layers.last(), Some(Layer::Entry(entry)) if entry.fault.is_some()), "{bad}");
        desk.keys("<c-u><esc>");
    }
}

#[test]
fn a_setting_that_cannot_be_is_refused_with_its_reason() {
    let mut slippery = setup();
    slippery.friction.sliding = Some(0.195);
    let mut desk = Desk::new(hinge(), slippery);
    desk.keys("h");
    assert!((desk.state.setup().friction.mu - 0.2).abs() < 1e-15);
    assert!(desk.state.message.as_ref().unwrap().contains("sliding"));
    desk.keys("FF");
    assert_eq!(desk.state.setup().hand.fingers.get(), 2);
    assert!(desk.state.message.as_ref().unwrap().contains("2 to 6 fingers"));
}

#[test]
fn the_selection_stays_on_its_grasp_when_a_knob_is_turned() {
    let mut desk = Desk::hinge();
    desk.keys("jjj");
    let mine = desk.spots();
    for script in ["l", "o", "o", "v", "v", "o", "o", "h"] {
        desk.keys(script);
        let listed = desk.state.shown.as_ref().unwrap();
        if listed.ranking.grasps.iter().any(|row| row.grasp.spots == mine) {
            assert_eq!(desk.spots(), mine, "after {script}");
        }
    }
    assert_eq!(desk.spots(), mine);
    // Other sites: the spots are gone, the family is not.
    let edges = |spots: &[Spot]| {
        let mut edges: Vec<_> = spots.iter().map(|spot| spot.edge).collect();
        edges.sort();
        edges
    };
    desk.keys(".");
    assert_eq!(edges(&desk.spots()), edges(&mine));
}

#[test]
fn the_old_list_stays_and_says_it_is_old_until_the_new_one_comes() {
    let mut desk = Desk::hinge();
    desk.keys("j");
    let (old, quality) = (desk.spots(), desk.state.reading.as_ref().unwrap().assessment.quality);
    desk.hold = true;
    desk.keys(">");
    assert!(desk.state.is_old());
    assert_eq!(desk.spots(), old);
    // Quality never falls when mu rises (a larger cone holds the smaller one); the reading follows at once.
    assert!(desk.state.reading.as_ref().unwrap().assessment.quality >= quality);
    assert!(desk.screen(80, 24).contains("OLD: mu 0.20"));
    desk.news(desk.generation, What::Progress { done: 30, total: 120 });
    assert!(desk.screen(80, 24).contains("ranking 25 %"));
    // News of the request before this one changes nothing.
    desk.news(desk.generation - 1, What::Done(Arc::new(Ranking::default())));
    assert!(desk.state.rows() > 0 && desk.state.is_old());
    desk.finish();
    assert!(!desk.state.is_old());
    assert_eq!(desk.state.job, Job::Idle);
}

#[test]
fn a_ranking_that_breaks_becomes_a_line_on_the_screen() {
    let mut desk = Desk::hinge();
    desk.hold = true;
    desk.keys("l");
    desk.news(desk.generation, What::Failed("index out of bounds".into()));
    let screen = desk.screen(80, 24);
    assert!(screen.contains("the ranking broke: index out of bounds"), "{screen}");
    assert!(desk.state.rows() > 0, "the old list is still there");
    desk.hold = false;
    desk.keys("l");
    assert_eq!(desk.state.job, Job::Idle);
}

#[test]
fn knobs_ask_for_what_they_say() {
    let mut desk = Desk::hinge();
    desk.hold = true;
    desk.keys("f");
    assert_eq!(desk.request.as_ref().unwrap().scene.setup().hand.fingers.get(), 4);
    desk.keys("o");
    assert_eq!(desk.request.as_ref().unwrap().key, SortKey::QualityPerFinger);
    desk.keys("v");
    assert_eq!(desk.request.as_ref().unwrap().listing, Listing::Members);
    desk.keys(".");
    let spacing = desk.request.as_ref().unwrap().scene.setup().search.spacing_mm.unwrap();
    assert!((spacing - 6.4).abs() < 1e-12);
    desk.keys(",");
    let spacing = desk.request.as_ref().unwrap().scene.setup().search.spacing_mm.unwrap();
    assert!((spacing - 8.0).abs() < 1e-12);
    for _ in 0..60 {
        desk.keys(",");
    }
    assert!(desk.state.message.as_ref().unwrap().contains("spacing stays"));
}

#[test]
fn rows_marked_unbeaten_are_those_no_row_beats() {
    let desk = Desk::hinge();
    let shown = desk.state.shown.as_ref().unwrap();
    let keys: Vec<[f64; 3]> = shown
        .ranking
        .grasps
        .iter()
        .map(|row| {
            let a = &row.assessment;
            [a.quality, a.friction_margin.unwrap_or(1e300), a.placement.mm]
        })
        .collect();
    let beaten = |own: &[f64; 3]| {
        keys.iter().any(|other| {
            let clear = |a: f64, b: f64| a > b * (1.0 + 1e-6) + 1e-6;
            other.iter().zip(own).all(|(a, b)| a >= b) && other.iter().zip(own).any(|(a, b)| clear(*a, *b))
        })
    };
    let mut both = HashSet::new();
    for (own, unbeaten) in keys.iter().zip(&shown.unbeaten) {
        both.insert(*unbeaten);
        if *unbeaten {
            assert!(!beaten(own), "{own:?}");
        }
        if beaten(own) {
            assert!(!unbeaten);
        }
    }
    assert_eq!(both.len(), 2, "the list has both kinds");
}

/// Against plain enumeration: every closed set is listed without floors, and those below the floor are counted.
#[test]
fn the_list_says_how_much_the_floors_hide() {
    let mut open = setup();
    open.search.spacing_mm = Some(20.0);
    let scene = |setup: &Setup| Arc::new(holdwright::search::Scene::new(Arc::new(hinge()), setup.clone()).unwrap());
    let all = |setup: &Setup| {
        let request =
            Request { scene: scene(setup), key: SortKey::Quality, listing: Listing::Members, most: 1_000_000 };
        ranked(&request)
    };
    let every = all(&open);
    assert_eq!(every.grasps.len() as u64 + every.inconclusive, every.closed);
    assert_eq!(every.below_floors, 0);
    let mut floored = open.clone();
    floored.floors.quality = 0.1;
    let below = every.grasps.iter().filter(|row| row.assessment.quality < 0.1).count() as u64;
    assert!(below > 0 && below < every.closed);
    let hidden = all(&floored);
    assert_eq!((hidden.closed, hidden.below_floors), (every.closed, below));
    let screen = Desk::new(hinge(), floored).screen(80, 24);
    assert!(screen.contains("floors hide"), "{screen}");
}

#[test]
fn marks_are_named_noted_saved_and_asked_after() {
    let mut desk = Desk::hinge();
    desk.keys("m");
    let spots = desk.spots();
    desk.keys("jn<c-u>bow \u{7}end<cr>wclear of the seal<cr>");
    assert_eq!(desk.state.marks.len(), 2);
    assert_eq!(desk.state.marks[1].keep.name, "bow end");
    assert_eq!(desk.state.marks[1].keep.note, "clear of the seal");
    assert_eq!(desk.state.marks[0].keep.grasp.spots, spots);
    desk.keys("q");
    assert_eq!(desk.state.layers, [Layer::Ask(Question::Quit)]);
    desk.keys("<esc>s");
    assert_eq!(desk.saved.len(), 2);
    assert_eq!(desk.state.unsaved(), 0);
    desk.keys("s");
    assert_eq!(desk.saved.len(), 2, "nothing is saved twice");
    desk.keys("w more<cr>");
    assert_eq!(desk.state.unsaved(), 1);
    desk.keys("qs");
    assert_eq!(desk.saved.len(), 3);
    assert!(matches!(desk.other.last(), Some(Effect::Quit { recover: false })));
}

#[test]
fn a_mark_taken_away_by_mistake_comes_back_with_its_note() {
    let mut desk = Desk::hinge();
    desk.keys("wclear of the seal<cr>m");
    assert!(desk.state.marks.is_empty());
    desk.keys("jk");
    desk.keys("m");
    assert_eq!(desk.state.marks[0].keep.note, "clear of the seal");
    desk.keys("Mm");
    assert!(desk.state.marks.is_empty());
    desk.keys("m");
    assert_eq!(desk.state.marks[0].keep.note, "clear of the seal");
}

#[test]
fn names_of_wide_characters_keep_the_header_in_line() {
    let outer = vec![vec![[0.0, 0.0], [80.0, 0.0], [80.0, 40.0], [0.0, 40.0]]];
    for name in [
        "\u{8236}\u{5177}\u{8236}\u{5177}",
        "\u{8236}\u{5177}\u{8236}\u{5177}\u{8236}\u{5177}\u{8236}\u{5177}\u{8236}\u{5177}\u{8236}\u{5177}",
    ] {
        let desk = Desk::new(Part::new(PartDescription::bare(name, outer.clone())).unwrap(), setup());
        for width in 24..100 {
            let screen = desk.screen(width, 24);
            assert!(screen.lines().next().unwrap().contains("mu 0.20"), "{width}: {screen}");
        }
    }
}

#[test]
fn a_grasp_is_kept_as_it_read_when_it_was_marked() {
    let mut desk = Desk::hinge();
    desk.keys("m=0.5<cr>s");
    assert!((desk.saved[0].setup.friction.mu - 0.2).abs() < 1e-15);
    let scene = holdwright::search::Scene::new(Arc::new(hinge()), setup()).unwrap();
    let grasp = scene.grasp(&desk.saved[0].grasp.spots).unwrap();
    assert_eq!(scene.assess(&grasp).0, desk.saved[0].assessment);
}

#[test]
fn a_save_that_fails_is_shown_and_the_marks_stay() {
    let mut desk = Desk::hinge();
    desk.keys("m");
    desk.input(Input::SaveFailed { lines: vec!["x.toml: disk full".into(), "Make room.".into()], changed: false });
    let screen = desk.screen(80, 24);
    assert!(screen.contains("disk full") && screen.contains("Make room."), "{screen}");
    desk.keys("<esc>");
    assert_eq!(desk.state.unsaved(), 1);
    desk.input(Input::SaveFailed { lines: Vec::new(), changed: true });
    assert!(desk.screen(80, 24).contains("changed by someone else"));
    let effects = update(&mut desk.state, Input::Key(Key::Char('y')));
    assert!(matches!(&effects[..], [Effect::Save { reread: true, keeps, .. }] if keeps.len() == 1));
}

#[test]
fn a_failed_save_on_the_way_out_does_not_leave() {
    let mut desk = Desk::hinge();
    desk.keys("mq");
    let effects = update(&mut desk.state, Input::Key(Key::Char('s')));
    assert!(matches!(&effects[..], [Effect::Save { .. }]));
    desk.input(Input::SaveFailed { lines: vec!["no".into()], changed: false });
    desk.keys("<esc>s");
    assert!(desk.other.is_empty(), "a later save does not quit: {:?}", desk.other);
}

#[test]
fn ctrl_c_leaves_asks_first_when_marks_are_unsaved_and_then_keeps_them() {
    let mut desk = Desk::hinge();
    desk.keys("<c-c>");
    assert!(matches!(&desk.other[..], [Effect::Quit { recover: false }]));
    let mut desk = Desk::hinge();
    desk.keys("m?<c-c>");
    assert!(desk.other.is_empty());
    desk.keys("<c-c>");
    assert!(matches!(&desk.other[..], [Effect::Quit { recover: true }]));
}

#[test]
fn marks_of_a_broken_run_are_offered_and_taken_back() {
    let mut desk = Desk::hinge();
    desk.keys("m");
    let keep = desk.state.marks[0].keep.clone();
    let mut desk = Desk::hinge();
    desk.input(Input::RecoveryFound(1));
    assert!(desk.screen(80, 24).contains("1 mark was not saved"));
    desk.keys("y");
    assert!(matches!(desk.other.last(), Some(Effect::LoadRecovery)));
    desk.input(Input::Recovered(vec![keep]));
    assert_eq!(desk.state.unsaved(), 1);
}

#[test]
fn marks_that_left_the_list_can_still_be_seen() {
    let mut desk = Desk::hinge();
    desk.keys("jjm=0<cr>M");
    let screen = desk.screen(80, 24);
    assert!(screen.contains("NEW") && screen.contains("at mu 0.20"), "{screen}");
    desk.keys("<cr>");
    assert!(desk.screen(80, 24).contains("not in the list"));
    desk.keys("m");
    assert!(desk.state.marks.is_empty() && desk.state.layers.is_empty());
}

#[test]
fn every_action_of_the_table_can_be_done_in_its_scope_without_a_panic() {
    for row in action::TABLE {
        for script in ["", "jm", "=0<cr>"] {
            let mut desk = Desk::hinge();
            desk.hold = true;
            desk.keys(script);
            match row.scope {
                Scope::Bench | Scope::Any => {}
                Scope::Page => drop(desk.keys("?")),
                Scope::Marks => drop(desk.keys("M")),
                Scope::Entry => drop(desk.keys("=")),
                Scope::AskQuit => desk.state.layers.push(Layer::Ask(Question::Quit)),
                Scope::AskReload => desk.state.layers.push(Layer::Ask(Question::Reload)),
                Scope::AskRecover => desk.state.layers.push(Layer::Ask(Question::Recover { count: 2 })),
            }
            for key in row.keys {
                if Scope::of(&desk.state) == row.scope && (row.allowed)(&desk.state) {
                    assert_eq!(action::action_of(&desk.state, *key), Some(row.action));
                }
                desk.input(Input::Key(*key));
                desk.screen(80, 24);
            }
        }
    }
    assert!(action::TABLE.iter().any(|row| row.action == Action::Suspend));
}
