//! The workbench over a bad line: slow, torn, resized again and again, stopped, hung up. Every wait has a limit.
#![cfg(unix)]
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod pty;

use holdwright::file::read_grasps;
use pty::{FAST, PART, Pty, SLOW, count, folder, recovery, size};
use std::sync::atomic::Ordering;
use std::thread;
use std::time::Duration;

fn slow(folder: &tempfile::TempDir) -> Pty {
    std::fs::write(folder.path().join("cleat.toml"), PART).unwrap();
    Pty::launch(folder.path(), &["cleat.toml", "--spacing", "6"], (80, 24), &[], SLOW)
}

/// Forty keys: down and up the list, cones, mu up and down, members and back, a mark.
const FORTY: &str = "jjjjjjjjkkjjjjkjjjkclllllllllhhllllllvvm";

#[test]
fn keys_typed_fast_on_a_line_of_2_kb_a_second_all_count() {
    assert_eq!(FORTY.chars().count(), 40);
    // What a fast line shows in the end is what the slow one must show.
    let quick = folder();
    let mut fast = Pty::start(quick.path(), 80, 24, &[]);
    fast.wait_ranked();
    for key in FORTY.chars() {
        fast.send(&key.to_string());
        thread::sleep(Duration::from_millis(30));
    }
    fast.wait_for("mu 0.33");
    fast.wait_for("marked;");
    fast.wait_ranked();
    fast.wait_quiet();

    let folder = folder();
    let mut pty = slow(&folder);
    pty.wait_ranked();
    pty.wait_quiet();
    let before = pty.bytes();
    for piece in FORTY.as_bytes().chunks(5) {
        // The line's delay on the way there; the answers of the keys before are still on their way back.
        thread::sleep(Duration::from_millis(40));
        pty.send(std::str::from_utf8(piece).unwrap());
    }
    pty.wait_for("mu 0.33");
    pty.wait_for("marked;");
    pty.wait_ranked();
    pty.wait_quiet();
    let sent = pty.bytes() - before;
    println!("{sent} bytes for 40 keys");
    // Which of the grasps within the gap is listed may depend on the lists on the way; knobs, marks, counts and words do not.
    let told = |screen: &str| {
        let lines: Vec<&str> = screen.lines().collect();
        let title = lines[1].split_once('|').map(|(_, title)| title.to_owned()).unwrap();
        let rest = &lines[lines.len() - 2..];
        (lines[0].to_owned(), title, rest.join(" "))
    };
    assert_eq!(told(&pty.screen()), told(&fast.screen()));
    assert!(sent < 24_000, "{sent} bytes");
    pty.send("qx");
    assert!(pty.ended());
    pty.assert_restored();
    fast.send("qx");
    assert!(fast.ended());
}

#[test]
fn a_frame_never_waits_behind_more_than_the_line_holds() {
    let folder = folder();
    let mut pty = slow(&folder);
    pty.wait_ranked();
    pty.wait_quiet();
    let before = pty.bytes();
    // Two seconds of a held key: frames are dropped, so that the last one comes soon after the last key.
    for _ in 0..40 {
        pty.send("jk");
        thread::sleep(Duration::from_millis(50));
    }
    pty.send("=0.33\r");
    pty.wait_for("mu 0.33");
    pty.wait_ranked();
    pty.wait_quiet();
    let sent = pty.bytes() - before;
    println!("{sent} bytes for a held key");
    assert!(sent < 30_000, "{sent} bytes");
    pty.send("q");
    assert!(pty.ended());
}

#[test]
fn arrow_keys_torn_apart_lose_nothing() {
    let folder = folder();
    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    pty.wait_ranked();
    pty.send("m");
    pty.wait_for("marked; n names it");
    for pieces in [["\x1b", "[", "A"], ["\x1b[", "B", ""], ["\x1b", "[C", ""], ["\x1b", "O", "D"]] {
        for piece in pieces {
            pty.send(piece);
            thread::sleep(Duration::from_millis(120));
        }
    }
    // In the list of marks, in a line being typed and before the question at the end as well.
    for open in ["M", "n", "q"] {
        pty.send(open);
        thread::sleep(Duration::from_millis(120));
        for piece in ["\x1b", "[", "A"] {
            pty.send(piece);
            thread::sleep(Duration::from_millis(120));
        }
    }
    pty.wait_ranked();
    pty.wait_quiet();
    let screen = pty.screen();
    assert!(screen.contains("1 mark, 1 not saved"), "{screen}");
    pty.send("qx");
    assert!(pty.ended());
}

#[test]
fn two_hundred_sizes_in_a_row_end_in_a_whole_screen() {
    let folder = folder();
    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    pty.wait_ranked();
    for step in 0..200_u16 {
        let (columns, rows) = (step * 37 % 140, step * 23 % 50);
        pty.master.as_ref().unwrap().resize(size(columns, rows)).unwrap();
        thread::sleep(Duration::from_millis(5));
    }
    assert!(pty.child.try_wait().unwrap().is_none(), "ended");
    pty.settles_at_another_size();
    pty.send("q");
    assert!(pty.ended());
    pty.assert_restored();
}

#[test]
fn stopped_and_brought_back_on_a_slow_line() {
    let folder = folder();
    let mut pty = slow(&folder);
    pty.wait_ranked();
    pty.wait_quiet();
    let full = pty.screen();
    pty.send("\x1a");
    pty.wait("the stop", |pty| pty.state() == 'T');
    pty.wait("the shell's screen", |pty| !pty.heard.lock().unwrap().parser.screen().alternate_screen());
    pty.signal("CONT");
    pty.wait("the same screen", |pty| pty.screen() == full);
    assert_eq!(count(&pty.log(), b"\x1b[?1049h"), 2);
    pty.send("q");
    assert!(pty.ended());
}

#[test]
fn a_line_lost_with_frames_on_the_way_keeps_the_marks_for_the_next_start() {
    let folder = folder();
    let mut pty = slow(&folder);
    pty.wait_ranked();
    pty.send("mn\x15bow end\r");
    pty.wait_for("1 mark, 1 not saved");
    pty.send("lllllllj");
    pty.deaf.store(true, Ordering::SeqCst);
    let reader = pty.reader.take().unwrap();
    pty.send("j");
    pty.wait("the reader", |_| reader.is_finished());
    pty.writer = None;
    pty.master = None;
    assert!(!pty.ended());
    assert_eq!(read_grasps(&recovery(&folder)).unwrap().grasps[0].name, "bow end");
    drop(pty);
    let mut pty = Pty::launch(folder.path(), &["cleat.toml", "--spacing", "6"], (80, 24), &[], FAST);
    pty.wait_for("1 mark was not saved");
    pty.send("yM");
    pty.wait_for("bow end");
    pty.send("\x1bqx");
    pty.ended();
}
