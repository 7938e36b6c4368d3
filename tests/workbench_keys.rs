//! What the keys of the workbench do, by key script on a desk without a terminal.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod desk;

use desk::{Desk, hinge, ranked, setup};
use holdwright::part::{Part, PartDescription};
use holdwright::search::job::{Request, What};
use holdwright::search::{Key as SortKey, Listing, Ranking, Setup, Spot};
use holdwright::workbench::action::{Action, Scope};
use holdwright::workbench::start::{Found, StartPage};
use holdwright::workbench::state::{Job, Layer, Question};
use holdwright::workbench::{Effect, Input, Key, action, update};
use std::collections::HashSet;
use std::sync::Arc;

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
    // Sliding friction goes down with mu, says so, and comes back up with it.
    desk.keys("h");
    let friction = desk.state.setup().friction.clone();
    assert!((friction.mu - 0.19).abs() < 1e-15 && (friction.sliding.unwrap() - 0.19).abs() < 1e-15);
    assert!(desk.state.message.as_ref().unwrap().contains("sliding"));
    desk.keys("l");
    assert!((desk.state.setup().friction.sliding.unwrap() - 0.195).abs() < 1e-15);
    desk.keys("=-1<cr>");
    assert!(desk.screen(80, 24).contains("friction.mu"), "{}", desk.screen(80, 24));
    desk.keys("<esc>FF");
    assert_eq!(desk.state.setup().hand.fingers.get(), 2);
    assert!(desk.state.message.as_ref().unwrap().contains("2 to 6 fingers"));
}

#[test]
fn the_cell_shape_goes_round_and_changes_the_picture() {
    let mut desk = Desk::hinge();
    let first = desk.screen(80, 24);
    desk.keys("a<esc>");
    assert_ne!(desk.screen(80, 24), first);
    desk.keys("aaaa<esc>");
    assert_eq!(desk.screen(80, 24), first);
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
    desk.news(desk.generation, What::Progress { done: 30, total: 120, gap: None });
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
        let request = Request {
            scene: scene(setup),
            key: SortKey::Quality,
            listing: Listing::Members,
            most: 1_000_000,
            known: Vec::new(),
        };
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
    let mut desk = Desk::new(hinge(), floored);
    let screen = desk.screen(80, 24);
    assert!(screen.contains("families") && screen.contains(" floors "), "{screen}");
    // The sampler counts them.
    desk.keys("v");
    let screen = desk.screen(80, 24);
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
    // The list stays open when its last mark is taken away, so that it can be brought back there, or on the bench.
    desk.keys("Mm");
    assert!(desk.state.marks.is_empty());
    desk.keys("u");
    assert_eq!(desk.state.marks[0].keep.note, "clear of the seal");
    desk.keys("m<esc>m");
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
    // What the list does not have is shown in hand.
    desk.keys("<cr>");
    let hand = desk.state.hand.as_ref().unwrap();
    assert_eq!(hand.now.spots, desk.state.marks[0].keep.grasp.spots);
    assert_eq!(Scope::of(&desk.state), Scope::Hand);
    assert!(desk.screen(80, 24).contains("by hand"));
    desk.keys("<esc>Mm");
    assert!(desk.state.marks.is_empty());
    desk.keys("u");
    assert_eq!(desk.state.marks.len(), 1);
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
                Scope::Pairs => drop(desk.keys("t")),
                Scope::Materials => drop(desk.keys("d")),
                Scope::Loads => drop(desk.keys("Ln")),
                Scope::Floors => drop(desk.keys("_")),
                Scope::Hand => drop(desk.keys("b")),
                Scope::Compare => drop(desk.keys("xjxX")),
                Scope::Start => {
                    let found = vec![Found { path: "a.toml".into(), name: Some("a".into()) }];
                    desk.state.layers.push(Layer::Start(StartPage::new(found)));
                }
                Scope::StartDemo => desk.state.layers.push(Layer::Start(StartPage::new(Vec::new()))),
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
