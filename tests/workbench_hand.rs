//! A grasp changed by hand, grasps beside each other, floors and filters, by key script.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod desk;

use desk::{Desk, hinge, setup};
use holdwright::hand::{Closing, Tip};
use holdwright::search::Spot;
use holdwright::workbench::state::Layer;
use insta::assert_snapshot;

fn in_hand(desk: &Desk) -> Vec<Spot> {
    desk.state.hand.as_ref().unwrap().now.spots.clone()
}

#[test]
fn a_finger_walks_and_every_score_follows() {
    let mut desk = Desk::hinge();
    let before = desk.spots();
    desk.keys("b");
    assert_eq!(in_hand(&desk), before);
    let room_mm = desk.state.reading.as_ref().unwrap().grasp.rooms_mm[1];
    desk.keys("jlll");
    let now = in_hand(&desk);
    assert_eq!((now[0], now[2]), (before[0], before[2]));
    assert!((now[1].along_mm - before[1].along_mm - 3.0).abs() < 1e-9, "three steps of 1 mm: {now:?}");
    let reading = desk.state.reading.as_ref().unwrap();
    assert_eq!(reading.grasp.spots, now);
    assert!((reading.grasp.rooms_mm[1] - room_mm).abs() > 1.0);
    // Shorter and longer steps.
    desk.keys(".h,,h");
    assert!((in_hand(&desk)[1].along_mm - (now[1].along_mm - 0.5 - 2.0)).abs() < 1e-9);
    // Undo all, do all again.
    desk.keys("uuuuu");
    assert_eq!(in_hand(&desk), before);
    desk.keys("u");
    assert!(desk.state.message.as_ref().unwrap().contains("nothing to undo"));
    desk.keys("rrr");
    assert_eq!(in_hand(&desk), now);
    // Esc puts it down; the list is as it was, and taking the same row up again begins with that row.
    desk.keys("<esc>");
    assert_eq!(desk.spots(), before);
    desk.keys("b");
    assert_eq!(in_hand(&desk), before);
    desk.keys("u");
    assert_eq!(in_hand(&desk), now, "what was in hand is one step back");
}

#[test]
fn a_finger_stops_at_the_end_of_its_stretch_and_then_goes_on() {
    let mut desk = Desk::hinge();
    desk.keys("b,,,");
    let mut edges = Vec::new();
    let stretches = desk.state.order.scene.stretches().to_vec();
    for _ in 0..400 {
        desk.keys("l");
        let spot = in_hand(&desk)[0];
        assert!(stretches.iter().any(|s| s.edge == spot.edge && s.room_mm(spot.along_mm) > -1e-9), "{spot:?}");
        if edges.last() != Some(&spot.edge) {
            edges.push(spot.edge);
        }
    }
    // All round the outer ring and the hole, in the order of the file.
    let all: std::collections::BTreeSet<_> = stretches.iter().map(|stretch| stretch.edge).collect();
    assert_eq!(edges.iter().copied().collect::<std::collections::BTreeSet<_>>(), all);
    // By whole edges, there and back.
    desk.keys("e");
    let here = in_hand(&desk)[0];
    desk.keys("e");
    assert_ne!(in_hand(&desk)[0], here);
    desk.keys("E");
    assert_eq!(in_hand(&desk)[0], here);
}

#[test]
fn fingers_are_added_and_taken_away() {
    let mut desk = Desk::hinge();
    let three = desk.spots();
    desk.keys("b");
    let quality = desk.state.reading.as_ref().unwrap().assessment.quality;
    desk.keys("a");
    assert_eq!(in_hand(&desk).len(), 4);
    assert_eq!(in_hand(&desk)[..3], three[..]);
    // A finger more never makes the wrench set smaller (Ferrari & Canny 1992: the hull of more generators).
    assert!(desk.state.reading.as_ref().unwrap().assessment.quality >= quality - 1e-12);
    desk.keys("aa");
    assert_eq!(in_hand(&desk).len(), 6);
    desk.keys("a");
    assert!(desk.state.message.as_ref().unwrap().contains("no more than 6"));
    desk.keys("dddd");
    assert_eq!(in_hand(&desk).len(), 2);
    desk.keys("d");
    assert!(desk.state.message.as_ref().unwrap().contains("two fingers at least"));
    desk.keys("uuuuuuu");
    assert_eq!(in_hand(&desk), three);
}

#[test]
fn locked_fingers_stay_and_the_list_keeps_them() {
    let mut desk = Desk::hinge();
    desk.keys("bl");
    let locked = in_hand(&desk)[0];
    desk.keys("L");
    assert!(desk.state.message.as_ref().unwrap().contains("1 finger locked"));
    desk.keys("l");
    assert_eq!(in_hand(&desk)[0], locked, "a locked finger does not move");
    assert!(desk.state.message.as_ref().unwrap().contains("finger 1 is locked"));
    desk.keys("d");
    assert_eq!(in_hand(&desk)[0], locked);
    let rows = &desk.state.shown.as_ref().unwrap().ranking.grasps;
    assert!(!rows.is_empty() && rows.iter().all(|row| row.grasp.spots.contains(&locked)));
    // The best near here leaves it where it is, and is no worse.
    let before = desk.state.reading.as_ref().unwrap().assessment.quality;
    desk.keys("b");
    assert_eq!(in_hand(&desk)[0], locked);
    assert!(desk.state.reading.as_ref().unwrap().assessment.quality >= before - 1e-9);
    // Other knobs keep the lock; freeing it gives the whole list back.
    desk.keys("<esc>+");
    let rows = &desk.state.shown.as_ref().unwrap().ranking.grasps;
    assert!(rows.iter().all(|row| row.grasp.spots.contains(&locked)));
    desk.keys("FF");
    assert!(desk.state.order.scene.kept() == [locked]);
    desk.keys("b");
    let at = in_hand(&desk).iter().position(|spot| *spot == locked).unwrap();
    for _ in 0..at {
        desk.keys("j");
    }
    desk.keys("L");
    assert!(desk.state.message.as_ref().unwrap().contains("free again"));
    assert!(desk.state.order.scene.kept().is_empty());
}

#[test]
fn undoing_a_lock_frees_the_list() {
    let mut desk = Desk::hinge();
    desk.keys("bLu");
    assert!(desk.state.order.scene.kept().is_empty());
    desk.keys("r");
    assert_eq!(desk.state.order.scene.kept().len(), 1);
}

#[test]
fn the_best_near_an_open_grasp_is_closed_where_steps_lead_there() {
    let mut desk = Desk::hinge();
    desk.keys("b");
    let best = desk.state.reading.as_ref().unwrap().assessment.quality;
    // Off the best by a few steps.
    desk.keys("hhhjlllkb");
    let again = desk.state.reading.as_ref().unwrap().assessment.quality;
    assert!(again > 0.9 * best, "{again} {best}");
    desk.keys("b");
    assert!(desk.state.message.as_ref().unwrap().contains("already the best near here"));
}

#[test]
fn jaws_walk_together() {
    let mut setup = setup();
    (setup.hand.closing, setup.hand.tip) = (Closing::Parallel, Tip::Pad);
    setup.hand.fingers = holdwright::hand::FingerCount::new(2).unwrap();
    let mut desk = Desk::new(hinge(), setup);
    desk.keys("b");
    for keys in ["l", "h", "e", "E", "lllll", "b"] {
        desk.keys(keys);
        let reading = desk.state.reading.as_ref().unwrap();
        assert!(matches!(reading.grasp.jaws, Some(Ok(_))), "{keys}: {:?}", reading.grasp.jaws);
    }
    for keys in ["a", "d", "L"] {
        desk.keys(keys);
        assert!(desk.state.message.as_ref().unwrap().contains("parallel jaws"), "{keys}");
    }
}

#[test]
fn a_grasp_in_hand_is_marked_named_and_saved() {
    let mut desk = Desk::hinge();
    desk.keys("bllm");
    let moved = in_hand(&desk);
    assert_eq!(desk.state.marks[0].keep.grasp.spots, moved);
    desk.keys("noff the weld<cr>wthe bead is there<cr>s");
    assert_eq!(desk.saved.len(), 1);
    let kept = &desk.saved[0];
    assert_eq!((kept.name.as_str(), kept.note.as_str()), ("off the weld", "the bead is there"));
    assert_eq!(kept.grasp.spots, moved);
}

#[test]
fn grasps_beside_each_other() {
    let mut desk = Desk::loaded();
    desk.keys("xjx");
    assert_eq!(desk.state.beside.len(), 2);
    desk.keys("jxjx");
    assert_eq!(desk.state.beside.len(), 3, "three at most");
    desk.keys("X");
    assert!(matches!(desk.state.layers.last(), Some(Layer::Compare { .. })));
    assert_snapshot!("compare_80x24", desk.resized(80, 24));
    assert_snapshot!("compare_120x40", desk.resized(120, 40));
    // The knobs go on turning there.
    let mu = desk.state.setup().friction.mu;
    desk.keys("+");
    assert!(desk.state.setup().friction.mu > mu);
    desk.keys("<esc>");
    assert!(desk.state.layers.is_empty());
    // In hand the grasp stands beside what it began as.
    desk.keys("XxX");
    assert!(desk.state.beside.is_empty());
    assert!(desk.state.message.as_ref().unwrap().contains("two grasps are needed"));
    desk.keys("blX");
    let screen = desk.resized(80, 24);
    assert!(screen.contains("before") && screen.contains("by hand"), "{screen}");
}

#[test]
fn the_panel_in_hand_at_the_sizes_people_have() {
    let mut desk = Desk::loaded();
    desk.keys("bllLj");
    assert_snapshot!("by_hand_80x24", desk.resized(80, 24));
    assert_snapshot!("by_hand_120x40", desk.resized(120, 40));
}

#[test]
fn floors_are_changed_in_place() {
    let mut desk = Desk::hinge();
    let rows = desk.state.rows();
    desk.keys("_");
    desk.keys("+++");
    assert!((desk.state.setup().floors.quality - 0.06).abs() < 1e-12);
    assert!(desk.state.rows() < rows && desk.state.rows() > 0);
    let least = |desk: &Desk| {
        let rows = &desk.state.shown.as_ref().unwrap().ranking.grasps;
        rows.iter().map(|row| row.assessment.quality).fold(f64::INFINITY, f64::min)
    };
    assert!(least(&desk) >= 0.06);
    desk.keys("<cr>0.1<cr>");
    assert!((desk.state.setup().floors.quality - 0.1).abs() < 1e-12);
    assert!(desk.state.rows() == 0 || least(&desk) >= 0.1);
    assert_snapshot!("floors_80x24", desk.resized(80, 24));
    assert_snapshot!("floors_120x40", desk.resized(120, 40));
    desk.keys("<cr>x<cr>");
    assert!(desk.screen(80, 24).contains("give a number"));
    desk.keys("<esc>x");
    assert!(desk.state.setup().floors.quality.abs() < 1e-12);
    desk.keys("jj++<esc>");
    assert!((desk.state.setup().floors.placement_mm - 1.0).abs() < 1e-12);
    let rows = &desk.state.shown.as_ref().unwrap().ranking.grasps;
    assert!(rows.iter().all(|row| row.assessment.placement.mm >= 1.0 - 1e-9));
}

#[test]
fn only_rows_that_none_beats_and_rows_on_an_edge() {
    let mut desk = Desk::hinge();
    let all = desk.state.listed();
    desk.keys("^");
    let some = desk.state.listed();
    let unbeaten = desk.state.shown.as_ref().unwrap().unbeaten.clone();
    assert!(!some.is_empty() && some.len() < all.len());
    assert!(all.iter().all(|row| some.contains(row) == unbeaten[*row]));
    desk.keys("G");
    assert_eq!(desk.state.selected, *some.last().unwrap());
    desk.keys("j");
    assert_eq!(desk.state.selected, *some.last().unwrap());
    desk.keys("g^");
    assert_eq!(desk.state.listed(), all);
    // A hole's edge by ring:edge.
    desk.keys("/1:2<cr>");
    let on = desk.state.listed();
    let rows = &desk.state.shown.as_ref().unwrap().ranking.grasps;
    let has = |row: usize| rows[row].grasp.spots.iter().any(|spot| (spot.edge.ring, spot.edge.edge) == (1, 2));
    assert!(all.iter().all(|row| on.contains(row) == has(*row)));
    assert!(desk.screen(120, 40).contains("on 1:2"));
    desk.keys("/9<cr>");
    assert!(
        desk.screen(80, 24).contains("there is no such edge; there are 0:0 to 0:4, 1:0 to 1:3"),
        "{}",
        desk.screen(80, 24)
    );
    desk.keys("<esc>");
    desk.keys("/x<cr><esc>/");
    desk.input(holdwright::workbench::Input::Key(holdwright::workbench::Key::Ctrl('u')));
    desk.keys("<cr>");
    assert_eq!(desk.state.listed(), all);
}
