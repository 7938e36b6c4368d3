//! A workbench without a terminal: keys go in, rankings are made on the spot, screens come out as text.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]
#![allow(dead_code, unreachable_pub, reason = "each test file uses its own part of this")]

use holdwright::file::Keep;
use holdwright::mechanics::LoadCase;
use holdwright::part::{KeepOutDescription, Part, PartDescription};
use holdwright::search::job::{News, Request, What};
use holdwright::search::{Cancel, Ranking, SearchSettings, Setup, Spot, USUAL_GAP, Wanted, rank};
use holdwright::workbench::{ColorChoice, Effect, Input, Key, Options, Overrides, State, update, view};
use ratatui::Terminal;
use ratatui::backend::TestBackend;
use ratatui::buffer::Buffer;
use std::path::PathBuf;
use std::sync::Arc;

pub fn hinge() -> Part {
    Part::new(hinge_description()).unwrap()
}

/// The same, 5 mm thick; it says nothing of its mass.
pub fn thick_hinge() -> Part {
    Part::new(PartDescription { thickness: Some(5.0), ..hinge_description() }).unwrap()
}

/// The same of steel: 7850 kg/m3 (Gere, Table H-1).
pub fn steel_hinge() -> Part {
    thick_hinge().with_density("steel", 7850.0).unwrap()
}

fn hinge_description() -> PartDescription {
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
    described
}

/// Pins of 3 mm, a friction band, sites far apart so that the tests stay quick.
pub fn setup() -> Setup {
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

/// A lift, a stop in any direction, a brush that pushes at a corner; 60 N per finger at most.
pub fn setup_with_loads() -> Setup {
    let mut setup = setup();
    // A proof under loads takes long in an unoptimised build.
    setup.search.budget = 60_000;
    setup.hand.force_limit_n = Some(60.0);
    setup.friction.sliding = Some(0.15);
    let case = |name: &str| LoadCase { name: name.to_owned(), ..LoadCase::default() };
    setup.loads = vec![
        LoadCase { acceleration_m_s2: [0.0, 0.0, 3.0], safety: 2.0, ..case("lift") },
        LoadCase { any_direction_m_s2: 8.0, safety: 1.5, ..case("emergency stop") },
        LoadCase { force_n: [0.0, -6.0, 0.0], at_mm: [80.0, 20.0, 0.0], ..case("brush") },
    ];
    setup
}

pub fn options(part: Part, setup: Setup) -> Options {
    Options {
        part_path: PathBuf::from("hinge_leaf.toml"),
        setup_path: None,
        part: Arc::new(part),
        setup,
        grasp_path: PathBuf::from("hinge_leaf.grasps.toml"),
        color: ColorChoice::Never,
        marker: None,
        overrides: Overrides::default(),
    }
}

/// The workbench with its effects carried out on the spot: rankings at once, saves into a list.
pub struct Desk {
    pub state: State,
    pub generation: u64,
    /// The last request; kept back when `hold` is set.
    pub request: Option<Request>,
    pub hold: bool,
    pub saved: Vec<Keep>,
    pub other: Vec<Effect>,
}

impl Desk {
    pub fn new(part: Part, setup: Setup) -> Self {
        let state = State::new(&options(part, setup)).unwrap();
        let mut desk = Self { state, generation: 0, request: None, hold: false, saved: Vec::new(), other: Vec::new() };
        desk.input(Input::Start);
        desk
    }

    pub fn hinge() -> Self {
        Self::new(hinge(), setup())
    }

    pub fn loaded() -> Self {
        Self::new(steel_hinge(), setup_with_loads())
    }

    pub fn input(&mut self, input: Input) {
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

    pub fn finish(&mut self) {
        let ranking = ranked(self.request.as_ref().unwrap());
        self.news(self.generation, What::Done(Arc::new(ranking)));
    }

    pub fn news(&mut self, generation: u64, what: What) {
        self.input(Input::News(News { generation, what }));
    }

    /// Keys: a word in angle brackets is a named key, everything else is typed.
    pub fn keys(&mut self, script: &str) -> &mut Self {
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

    pub fn screen(&self, width: u16, height: u16) -> String {
        let mut terminal = Terminal::new(TestBackend::new(width, height)).unwrap();
        terminal.draw(|frame| view::draw(&self.state, frame)).unwrap();
        text_of(terminal.backend().buffer())
    }

    pub fn resized(&mut self, width: u16, height: u16) -> String {
        self.input(Input::Resize(width, height));
        self.screen(width, height)
    }

    pub fn spots(&self) -> Vec<Spot> {
        self.state.row().unwrap().grasp.spots.clone()
    }
}

pub fn ranked(request: &Request) -> Ranking {
    let Request { scene, key, listing, most, known } = request;
    let wanted = Wanted { key: *key, listing: *listing, most: *most, gap: USUAL_GAP, known };
    rank(scene, &wanted, &Cancel::default(), &|_| {}).unwrap()
}

pub fn named_key(name: &str) -> Option<Key> {
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

pub fn text_of(buffer: &Buffer) -> String {
    let mut text = String::new();
    for y in 0..buffer.area.height {
        let row: String = (0..buffer.area.width).map(|x| buffer[(x, y)].symbol()).collect();
        text.push_str(row.trim_end());
        text.push('\n');
    }
    text
}
