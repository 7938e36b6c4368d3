//! Loads, the squeeze and the knobs of the hand on the bench, by key script on a desk without a terminal.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod common;
mod desk;

use common::assert_close;
use desk::{Desk, hinge, setup, setup_with_loads, steel_hinge, thick_hinge};
use holdwright::hand::{Closing, Drive, Tip};
use holdwright::mechanics::{Holding, LoadCase};
use holdwright::part::{EdgeId, EdgeLimit, Part, PartDescription};
use holdwright::search::{Key as SortKey, Setup};
use holdwright::workbench::state::{Layer, State};

/// m/s2 (ISO 80000-3).
const G: f64 = 9.80665;

fn holding(desk: &Desk) -> &Holding {
    desk.state.reading.as_ref().unwrap().assessment.holding.as_ref().unwrap()
}

fn squeeze(desk: &Desk, case: usize) -> f64 {
    holding(desk).cases[case].squeeze_n.unwrap()
}

#[track_caller]
fn assert_vector(own: [f64; 3], expected: [f64; 3]) {
    own.into_iter().zip(expected).for_each(|(own, expected)| assert_close(own, expected, 1e-12, 0.0));
}

fn cases(state: &State) -> Vec<&str> {
    state.setup().loads.iter().map(|case| case.name.as_str()).collect()
}

/// A bar of 80 x 20 x 10 mm and 1 kg, held by two pads at the middle of its long sides, lifted.
fn bar() -> Desk {
    let outer = vec![vec![[0.0, 0.0], [80.0, 0.0], [80.0, 20.0], [0.0, 20.0]]];
    let described =
        PartDescription { thickness: Some(10.0), mass_kg: Some(1.0), ..PartDescription::bare("bar", outer) };
    let mut setup = setup();
    setup.hand.corner_clearance_mm = 30.0;
    setup.hand.pad_width_mm = 20.0;
    setup.hand.force_limit_n = Some(400.0);
    setup.loads =
        vec![LoadCase { name: "lift".into(), acceleration_m_s2: [0.0, 0.0, 3.0], safety: 2.0, ..LoadCase::default() }];
    let mut desk = Desk::new(Part::new(described).unwrap(), setup);
    desk.keys("PN400<cr>");
    desk
}

/// Two flush pads, the load along their faces, the centre of mass on the line that joins them: F = S W / (2 mu) per finger
/// (statics, derived), here 2 x 1 kg x (9.80665 + 3) m/s2 / (2 x 0.2) = 64.03325 N.
#[test]
fn the_squeeze_of_two_pads_is_that_of_the_hand_formula_and_both_are_shown() {
    let mut desk = bar();
    assert_eq!(desk.spots().iter().map(|spot| spot.along_mm).collect::<Vec<_>>(), [40.0, 40.0]);
    let expected = 2.0 * (G + 3.0) / (2.0 * 0.2);
    assert_close(squeeze(&desk, 0), expected, 1e-9, 0.0);
    assert_close(holding(&desk).load_margin().unwrap(), 400.0 / expected, 1e-9, 0.0);
    let page = desk.keys("<cr>").screen(100, 60);
    assert!(page.contains("squeeze    64.0 N each    128 N in all"), "{page}");
    assert!(page.contains("formula    64.0 N each"), "{page}");
    assert!(page.contains("along the faces: an equal squeeze"), "{page}");
    assert!(page.contains("held x6.24") && page.contains("drive adjustable"), "{page}");
    // 64.03 N over 20 x 6 mm2, the bite where none is stated.
    assert!(page.contains("0.53 MPa       over a pad face of 120 mm2"), "{page}");
}

/// A load across the faces: one of two opposed fingers has to give. The formula says why it does not apply.
#[test]
fn a_load_along_the_squeeze_axis_is_told() {
    let mut desk = bar();
    let mut across = desk.state.setup().clone();
    across.loads[0] = LoadCase { force_n: [0.0, 5.0, 0.0], at_mm: [40.0, 10.0, 0.0], ..LoadCase::default() };
    desk = Desk::new((**desk.state.order.scene.part()).clone(), across);
    let page = desk.keys("<cr>").screen(100, 60);
    assert!(page.contains("one finger must back up or give"), "{page}");
    assert!(page.contains("does not apply") && page.contains("along the squeeze axis"), "{page}");
    // Pressing alike, two fingers across from each other push with nothing along their axis: no squeeze holds it.
    let page = desk.keys("<esc>e<cr>").screen(100, 60);
    assert!(page.contains("all fingers are taken to press alike"), "{page}");
    assert!(page.contains("none will do") && page.contains("NOT HELD"), "{page}");
}

/// Loads grow by preferred numbers (ISO 3:1973, series R20). A pure lift asks for a squeeze in proportion to g + a.
#[test]
fn a_load_is_made_larger_and_smaller_and_all_is_ranked_again() {
    let mut desk = bar();
    desk.keys("L");
    assert_eq!(desk.state.layers.last(), Some(&Layer::Loads { at: 0 }));
    let (asked, before, spots) = (desk.generation, squeeze(&desk, 0), desk.spots());
    desk.keys("+");
    assert_eq!(desk.generation, asked + 1);
    assert_close(desk.state.setup().loads[0].acceleration_m_s2[2], 3.15, 1e-12, 0.0);
    assert_close(squeeze(&desk, 0) / before, (G + 3.15) / (G + 3.0), 1e-9, 0.0);
    assert_eq!(desk.spots(), spots);
    desk.keys("l");
    assert_close(desk.state.setup().loads[0].acceleration_m_s2[2], 3.55, 1e-12, 0.0);
    desk.keys("--");
    assert_close(desk.state.setup().loads[0].acceleration_m_s2[2], 2.8, 1e-12, 0.0);
    desk.keys("<cr>12,5<cr>");
    assert_eq!(desk.state.layers.last(), Some(&Layer::Loads { at: 0 }), "the list is there again");
    assert_close(desk.state.setup().loads[0].acceleration_m_s2[2], 12.5, 1e-12, 0.0);
    // The whole load is taken S times, and so is the squeeze.
    let before = squeeze(&desk, 0);
    desk.keys("s3<cr>");
    assert_close(squeeze(&desk, 0) / before, 3.0 / 2.0, 1e-9, 0.0);
    for bad in ["<cr>0<cr>", "<cr>-1<cr>", "<cr>nan<cr>", "s0<cr>", "sx<cr>", "<cr>1e12<cr>"] {
        let (was, asked) = (desk.state.setup().clone(), desk.generation);
        desk.keys(bad);
        assert!(matches!(desk.state.layers.last(), Some(Layer::Entry(entry)) if entry.fault.is_some()), "{bad}");
        desk.keys("<c-u><esc>");
        assert_eq!((desk.state.setup(), desk.generation), (&was, asked), "{bad}");
    }
}

#[test]
fn the_first_motion_that_is_not_nought_is_changed_and_keeps_its_direction() {
    let mut desk = Desk::loaded();
    desk.keys("Lj+");
    assert_close(desk.state.setup().loads[1].any_direction_m_s2, 9.0, 1e-12, 0.0);
    desk.keys("j+");
    assert_vector(desk.state.setup().loads[2].force_n, [0.0, -6.3, 0.0]);
    // A case of the weight alone has none until it is typed: against the weight.
    let mut weight = setup_with_loads();
    weight.loads = vec![LoadCase { gravity: [0.0, -2.0, 0.0], ..LoadCase::default() }];
    let mut desk = Desk::new(steel_hinge(), weight);
    desk.keys("L+");
    assert!(desk.state.message.as_ref().unwrap().contains("weight alone"));
    desk.keys("<cr>4<cr>");
    assert_vector(desk.state.setup().loads[0].acceleration_m_s2, [0.0, 4.0, 0.0]);
}

#[test]
fn cases_are_added_taken_out_and_brought_back_in_their_place() {
    let mut desk = Desk::loaded();
    desk.keys("j");
    let spots = desk.spots();
    desk.keys("Ln");
    assert_eq!(cases(&desk.state), ["lift", "emergency stop", "brush", "lift 2"]);
    assert_eq!(desk.state.layers.last(), Some(&Layer::Loads { at: 3 }));
    desk.keys("kkx");
    assert_eq!(cases(&desk.state), ["lift", "brush", "lift 2"]);
    assert_eq!(holding(&desk).cases.iter().map(|case| case.name.as_str()).collect::<Vec<_>>(), cases(&desk.state));
    assert!(desk.screen(80, 24).lines().any(|line| line.contains("emergency stop") && line.contains(" out ")));
    desk.keys("x");
    assert_eq!(cases(&desk.state), ["lift", "emergency stop", "brush", "lift 2"]);
    assert_eq!(desk.spots(), spots);
    // Without any in force there is nothing to hold.
    desk.keys("xjxjxkkkx<esc>");
    assert!(cases(&desk.state).is_empty() && desk.state.reading.as_ref().unwrap().assessment.holding.is_none());
    assert!(!desk.screen(120, 40).contains("N each"));
    // An empty list says how to begin.
    let mut desk = Desk::hinge();
    assert!(desk.keys("L").screen(80, 24).contains("n adds a lift"));
}

#[test]
fn a_part_without_a_mass_opens_with_its_loads_put_aside_until_it_has_one() {
    let mut desk = Desk::new(thick_hinge(), setup_with_loads());
    assert!(cases(&desk.state).is_empty());
    let told = "3 loads aside: no mass, d lists densities";
    assert_eq!(desk.state.message.as_deref(), Some(told));
    desk.keys("j");
    assert!(desk.screen(120, 40).contains(told), "{}", desk.screen(120, 40));
    let list = desk.keys("L").screen(120, 40);
    assert!(list.contains("put aside: it moves a mass, and the part has none"), "{list}");
    assert_eq!(list.matches("aside  ").count(), 3, "{list}");
    // Bringing a case back does not help; the reason stays.
    desk.keys("xx");
    assert!(desk.state.message.as_ref().unwrap().contains("still aside"));
    desk.keys("<esc>dj<cr>");
    assert_eq!(cases(&desk.state), ["lift", "emergency stop", "brush"]);
    assert!(desk.state.message.as_ref().unwrap().contains("3 loads are back"));
    assert_eq!(holding(&desk).cases.len(), 3);
    // The density taken back, they go aside again.
    desk.keys("dg<cr>");
    assert!(cases(&desk.state).is_empty());
    assert!(desk.state.message.as_ref().unwrap().contains("3 loads aside"));
}

/// A part without a thickness holds what lies in its plane and says why it cannot hold more.
#[test]
fn loads_that_point_out_of_a_part_without_a_thickness_are_put_aside() {
    let mut loads = setup_with_loads();
    loads.loads[2].gravity = [0.0; 3];
    let mut desk = Desk::new(hinge(), loads);
    assert_eq!(cases(&desk.state), ["brush"], "a force in the plane needs neither mass nor thickness");
    assert_eq!(desk.state.message.as_deref(), Some("2 loads aside: no mass, no thickness"));
    // Its own lift is one in the plane, but still of a mass.
    desk.keys("Ln");
    assert_vector(desk.state.loads[3].case.gravity, [0.0, -1.0, 0.0]);
    assert!(desk.screen(80, 24).contains("the part has none"));
    assert_eq!(cases(&desk.state), ["brush"]);
}

#[test]
fn the_force_limit_goes_by_preferred_numbers_and_can_be_typed_or_taken_away() {
    let mut desk = bar();
    let margin = |desk: &Desk| holding(desk).load_margin().unwrap();
    let before = margin(&desk);
    desk.keys("u");
    assert_close(margin(&desk) / before, 450.0 / 400.0, 1e-9, 0.0);
    desk.keys("UU");
    assert_eq!(desk.state.setup().hand.force_limit_n, Some(355.0));
    desk.keys("N12<cr>");
    assert_close(margin(&desk), 12.0 * 0.4 / (2.0 * (G + 3.0)), 1e-9, 0.0);
    assert!(!holding(&desk).held());
    desk.keys("Nnone<cr>");
    assert_eq!(desk.state.setup().hand.force_limit_n, None);
    assert!(holding(&desk).held() && holding(&desk).load_margin().is_none());
    // From none the first step is the preferred number above what is needed, 64.03 N.
    desk.keys("u");
    assert_eq!(desk.state.setup().hand.force_limit_n, Some(71.0));
    for bad in ["0", "-3", "much", "inf"] {
        desk.keys(&format!("N{bad}<cr>"));
        assert!(matches!(desk.state.layers.last(), Some(Layer::Entry(entry)) if entry.fault.is_some()), "{bad}");
        desk.keys("<c-u><esc>");
    }
    assert_eq!(desk.state.setup().hand.force_limit_n, Some(71.0));
}

#[test]
fn parallel_closing_brings_two_pads_and_gives_the_fingers_back() {
    let mut desk = Desk::hinge();
    let hand = |desk: &Desk| {
        let hand = &desk.state.setup().hand;
        (hand.closing, hand.tip, hand.fingers.get())
    };
    desk.keys("P");
    assert_eq!(hand(&desk), (Closing::Parallel, Tip::Pad, 2));
    assert!(desk.screen(80, 24).contains("2 pads, parallel"));
    // What parallel closing settles is refused with the way out.
    for script in ["T", "f", "F"] {
        let asked = desk.generation;
        desk.keys(script);
        assert_eq!((hand(&desk), desk.generation), ((Closing::Parallel, Tip::Pad, 2), asked));
        assert!(desk.state.message.as_ref().unwrap().contains("P goes back"), "{script}");
    }
    desk.keys("P");
    assert_eq!(hand(&desk), (Closing::Free, Tip::Pin, 3));
    desk.keys("T");
    assert_eq!(hand(&desk), (Closing::Free, Tip::Pad, 3));
    // Opened with it, going free leaves the two pads.
    let mut parallel = setup();
    parallel.hand.closing = Closing::Parallel;
    parallel.hand.tip = Tip::Pad;
    parallel.hand.fingers = holdwright::hand::FingerCount::new(2).unwrap();
    let mut desk = Desk::new(hinge(), parallel);
    desk.keys("P");
    assert_eq!(hand(&desk), (Closing::Free, Tip::Pad, 2));
}

/// Fingers that press alike reach less than fingers set each on its own, so they never need less squeeze (every set of
/// equal forces is one the others may choose).
#[test]
fn pressing_alike_never_needs_less_squeeze() {
    let mut desk = Desk::loaded();
    let adjustable: Vec<f64> = (0..3).map(|case| squeeze(&desk, case)).collect();
    let spots = desk.spots();
    desk.keys("e");
    assert_eq!(desk.state.setup().hand.drive, Drive::Equal);
    assert_eq!(desk.state.reading.as_ref().unwrap().grasp.spots, spots);
    for (case, before) in adjustable.iter().enumerate() {
        assert!(holding(&desk).cases[case].squeeze_n.is_none_or(|n| n >= before * (1.0 - 1e-9)));
    }
    assert!(desk.screen(80, 24).contains("3 pins, alike"));
}

/// The limit of an edge: 2 N/mm along the 5 mm of a pin are 10 N.
#[test]
fn an_edge_that_would_be_marked_is_named_as_what_limits() {
    let plate = vec![vec![[0.0, 0.0], [80.0, 0.0], [80.0, 20.0], [0.0, 20.0]]];
    let mut described =
        PartDescription { thickness: Some(5.0), mass_kg: Some(0.1), ..PartDescription::bare("painted bar", plate) };
    for edge in 0..4 {
        let edge = EdgeId { ring: 0, edge };
        described.edge_limits.push(EdgeLimit { edge, face_mpa: None, line_n_per_mm: Some(2.0) });
    }
    let desk = Desk::new(Part::new(described).unwrap(), setup_with_loads());
    assert_close(holding(&desk).limit.unwrap().squeeze_n, 10.0, 1e-12, 0.0);
    let screen = desk.screen(80, 24);
    assert!(screen.contains("more than 10 N each would mark edge 0:"), "{screen}");
}

/// The numbers of a row: the columns leave from the right as the table narrows, the one the list is sorted by last.
#[test]
fn columns_leave_from_the_right_and_the_sorted_one_stays() {
    let mut desk = Desk::loaded();
    let names = ["quality", "margin", "place", "squeeze", "load"];
    for script in ["", "o", "o", "o"] {
        desk.keys(script);
        let sorted = match desk.state.order.key.word() {
            "quality" => "quality",
            "quality_per_finger" => "/finger",
            "friction" => "margin",
            "placement" => "place",
            word => word,
        };
        for width in 60..140 {
            let screen = desk.screen(width, 40);
            let head = screen.lines().find(|line| line.contains(" # edges")).unwrap();
            let head = &head[head.find(" # edges").unwrap()..];
            assert!(head.contains(sorted), "{width}: {head}");
            let there: Vec<bool> = names
                .iter()
                .filter(|name| !(**name == sorted || sorted == "/finger" && **name == "quality"))
                .map(|name| head.contains(*name))
                .collect();
            assert!(there.is_sorted_by(|a, b| a >= b), "{width}: {head}");
        }
    }
    assert!(desk.screen(140, 40).contains("load"));
    assert!(!Desk::hinge().screen(140, 40).lines().any(|line| line.contains(" # edges") && line.contains("squeeze")));
}

#[test]
fn a_row_that_needs_less_squeeze_is_not_beaten_by_one_better_in_the_rest() {
    let desk = Desk::loaded();
    let shown = desk.state.shown.as_ref().unwrap();
    let rows = &shown.ranking.grasps;
    let squeeze = |row: usize| rows[row].assessment.holding.as_ref().unwrap().squeeze_n().unwrap();
    let least = (0..rows.len()).min_by(|a, b| squeeze(*a).total_cmp(&squeeze(*b))).unwrap();
    let tied =
        (0..rows.len()).filter(|row| squeeze(*row) < squeeze(least) * (1.0 + 1e-6)).any(|row| shown.unbeaten[row]);
    assert!(tied, "a grasp of least squeeze stands unbeaten");
}

#[test]
fn the_loads_list_draws_at_every_size_with_anything_in_it() {
    let mut odd = setup_with_loads();
    odd.loads[0].name = "a\u{1b}[2Jb\u{9b}c, a name of more than any column".into();
    odd.loads[1].squeeze_left = 0.5;
    odd.loads[1].angular_acceleration_rad_s2 = 20.0;
    odd.loads[2].acceleration_m_s2 = [1.0, 0.0, 2.0];
    let mut desk = Desk::new(steel_hinge(), odd);
    for script in ["L", "j", "jx", "<cr>", "7<esc>sabc<cr>", "<esc>"] {
        desk.keys(script);
        for width in 0..=90 {
            for height in 0..=26 {
                let screen = desk.resized(width, height);
                assert!(screen.chars().all(|c| c == '\n' || !c.is_control()));
            }
        }
    }
}

#[test]
fn marks_keep_the_loads_they_were_read_under() {
    let mut desk = Desk::loaded();
    desk.keys("mL+<esc>s");
    let kept: &Setup = &desk.saved[0].setup;
    assert_eq!(kept.loads, setup_with_loads().loads);
    assert_eq!(desk.saved[0].assessment.holding.as_ref().unwrap().cases.len(), 3);
}

/// No grasp holds 0.5 kg and more with 1 N: two closed pins bring up at most 2 x 2 x 0.2 N along their faces (Coulomb).
#[test]
fn a_list_emptied_by_the_loads_says_by_which_and_what_to_try() {
    let mut desk = bar();
    desk.keys("N1<cr>");
    assert_eq!(desk.state.rows(), 0);
    let screen = desk.screen(100, 30);
    for word in ["none holds every", "\"lift\" asks 64.0 N each", "force limit (u)"] {
        assert!(screen.contains(word), "{word}\n{screen}");
    }
    desk.keys("N65<cr>");
    assert!(desk.state.rows() > 0);
}

#[test]
fn the_squeeze_is_a_key_where_there_are_loads_and_is_left_out_where_there_are_none() {
    let words = |desk: &mut Desk| -> Vec<&str> {
        (0..SortKey::ALL.len())
            .map(|_| {
                desk.keys("o");
                desk.state.order.key.word()
            })
            .collect()
    };
    let mut desk = Desk::loaded();
    assert_eq!(words(&mut desk), ["quality_per_finger", "friction", "placement", "squeeze", "load_margin", "quality"]);
    assert_eq!(words(&mut Desk::hinge())[3..], ["quality", "quality_per_finger", "friction"]);
    // By squeeze the first row needs least, and its column is there on a narrow screen.
    desk.keys("oooo");
    let rows = &desk.state.shown.as_ref().unwrap().ranking.grasps;
    let needed: Vec<f64> =
        rows.iter().map(|row| row.assessment.holding.as_ref().unwrap().squeeze_n().unwrap()).collect();
    assert!(needed.is_sorted_by(|a, b| *a <= b * (1.0 + 1e-6)), "{needed:?}");
    assert!(desk.screen(60, 16).contains("squeeze"));
    // The last load taken out, the list is one by quality.
    desk.keys("LxjxjxL");
    assert_eq!(desk.state.order.key, SortKey::Quality);
}

#[test]
fn parallel_jaws_say_where_they_stand() {
    let page = bar().keys("<cr>").screen(100, 60);
    assert!(
        page.contains("jaws       20.0 mm open   pressing inward, axis toward 90 deg, centre (40.00, 10.00)"),
        "{page}"
    );
    let mut wide = bar().state.setup().clone();
    wide.hand.opening_mm = [25.0, 30.0];
    let desk = Desk::new((**bar().state.order.scene.part()).clone(), wide);
    let screen = desk.screen(100, 30);
    assert!(screen.contains("Nowhere do two pads fit"), "{screen}");
}
