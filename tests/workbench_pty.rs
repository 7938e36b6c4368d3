//! The workbench on a real pseudo-terminal: start, keys, save, quit, signals, hang-up, stop and return, resize, and
//! how many bytes it sends. Every wait has a limit.
#![cfg(unix)]
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod pty;

use holdwright::file::read_grasps;
use portable_pty::native_pty_system;
use pty::{PATIENCE, Pty, count, folder, recovery, saved, size};
use std::sync::Arc;
use std::sync::atomic::Ordering;
use std::thread;
use std::time::{Duration, Instant};

#[test]
fn a_day_at_the_bench() {
    let folder = folder();
    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    pty.wait_ranked();
    pty.send("l");
    pty.wait_for("mu 0.21");
    pty.wait_ranked();
    pty.send("jm");
    pty.wait_for("marked");
    pty.send("n\x15bow end\r");
    pty.send("s");
    pty.wait_for("1 grasp saved to");
    let file = read_grasps(&saved(&folder)).unwrap();
    assert_eq!(file.grasps.len(), 1);
    assert_eq!(file.grasps[0].name, "bow end");
    assert!((file.grasps[0].setup.friction.mu - 0.21).abs() < 1e-12);
    pty.send("q");
    assert!(pty.ended());
    pty.assert_restored();
    assert!(!recovery(&folder).exists());
}

#[test]
fn the_terminals_modes_are_as_they_were() {
    let folder = folder();
    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    pty.wait_ranked();
    let raw = pty.master.as_ref().unwrap().get_termios().unwrap();
    pty.send("q");
    assert!(pty.ended());
    let after = pty.master.as_ref().unwrap().get_termios().unwrap();
    let fresh = native_pty_system().openpty(size(80, 24)).unwrap();
    let before = fresh.master.get_termios().unwrap();
    assert_ne!(raw.local_flags, before.local_flags, "it was raw in between");
    assert_eq!(after.local_flags, before.local_flags);
    assert_eq!(after.input_flags, before.input_flags);
    assert_eq!(after.output_flags, before.output_flags);
}

#[test]
fn unsaved_marks_outlive_a_kill_and_are_offered_again() {
    let folder = folder();
    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    pty.wait_ranked();
    pty.send("jm");
    pty.wait_for("marked; n names it");
    pty.signal("TERM");
    assert!(!pty.ended(), "a killed run is no success");
    pty.assert_restored();
    assert!(!saved(&folder).exists());
    assert_eq!(read_grasps(&recovery(&folder)).unwrap().grasps.len(), 1);
    drop(pty);

    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    pty.wait_for("1 mark was not saved");
    pty.send("y");
    pty.wait_for("1 mark taken back");
    assert!(recovery(&folder).exists(), "it stays until the mark is saved");
    pty.send("s");
    pty.wait_for("1 grasp saved to");
    assert!(!recovery(&folder).exists());
    assert_eq!(read_grasps(&saved(&folder)).unwrap().grasps.len(), 1);
    pty.send("q");
    assert!(pty.ended());
}

#[test]
fn marks_taken_back_and_cut_off_again_are_not_doubled() {
    let folder = folder();
    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    pty.wait_ranked();
    pty.send("m");
    pty.wait_for("marked; n names it");
    pty.signal("INT");
    assert!(!pty.ended());
    drop(pty);
    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    pty.wait_for("1 mark was not saved");
    pty.send("y");
    pty.wait_for("1 mark taken back");
    pty.signal("TERM");
    assert!(!pty.ended());
    assert_eq!(read_grasps(&recovery(&folder)).unwrap().grasps.len(), 1);
}

#[test]
fn a_hang_up_ends_it_and_keeps_the_marks() {
    let folder = folder();
    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    pty.wait_ranked();
    pty.send("m");
    pty.wait_for("marked; n names it");
    // The reader lets go of the line with the next bytes it gets; then both ends of this side are closed.
    pty.deaf.store(true, Ordering::SeqCst);
    pty.send("j");
    let reader = pty.reader.take().unwrap();
    pty.wait("the reader", |_| reader.is_finished());
    pty.writer = None;
    pty.master = None;
    assert!(!pty.ended());
    assert_eq!(read_grasps(&recovery(&folder)).unwrap().grasps.len(), 1);
}

#[test]
fn idle_sends_nothing_and_small_steps_send_little() {
    let folder = folder();
    let mut pty = Pty::start(folder.path(), 120, 40, &[]);
    pty.wait_ranked();
    pty.wait_quiet();
    let before = pty.bytes();
    thread::sleep(Duration::from_secs(3));
    assert_eq!(pty.bytes(), before, "idle");
    let mut budget = Vec::new();
    for (keys, most) in [("j", 1600), ("l", 5000), ("m", 600), ("c", 1600)] {
        let before = pty.bytes();
        pty.send(keys);
        pty.wait("an answer", |pty| pty.bytes() > before);
        pty.wait_ranked();
        pty.wait_quiet();
        let sent = pty.bytes() - before;
        budget.push(format!("{keys}: {sent} of {most} bytes"));
        assert!(sent <= most, "{budget:?}");
    }
    // A whole frame is no larger than this, so that even a repaint is short.
    let before = pty.bytes();
    pty.send("\x0c");
    pty.wait("a repaint", |pty| pty.bytes() > before + 1000);
    pty.wait_quiet();
    let sent = pty.bytes() - before;
    println!("{budget:?}, repaint: {sent}");
    assert!(sent < 9_000, "repaint: {sent}");
    pty.send("qx");
    assert!(pty.ended());
}

#[test]
fn ctrl_z_gives_the_shell_back_and_returning_paints_everything_without_a_question() {
    let folder = folder();
    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    for (round, stop) in ["\x1a", "TSTP"].into_iter().enumerate() {
        pty.wait_ranked();
        pty.wait_quiet();
        let full = pty.screen();
        if stop == "\x1a" {
            pty.send(stop);
        } else {
            pty.signal(stop);
        }
        pty.wait("the stop", |pty| pty.state() == 'T');
        pty.wait("the shell's screen", |pty| !pty.heard.lock().unwrap().parser.screen().alternate_screen());
        assert!(!pty.heard.lock().unwrap().parser.screen().hide_cursor());
        pty.signal("CONT");
        pty.wait("the same screen", |pty| pty.screen() == full);
        assert_eq!(count(&pty.log(), b"\x1b[?1049h"), round + 2);
    }
    // A stop from outside leaves no time to restore; on return the terminal is taken again.
    pty.wait_quiet();
    let full = pty.screen();
    pty.signal("STOP");
    pty.wait("the stop", |pty| pty.state() == 'T');
    let before = pty.bytes();
    pty.signal("CONT");
    pty.wait("a repaint", |pty| pty.bytes() > before + 1000 && pty.screen() == full);
    pty.send("q");
    assert!(pty.ended());
    // Device status, attributes, keyboard and mode questions (ECMA-48 DSR and DA; the rest from memory).
    for question in [&b"\x1b[6n"[..], b"\x1b[5n", b"\x1b[c", b"\x1b[>c", b"\x1b[?u", b"$p"] {
        assert_eq!(count(&pty.log(), question), 0, "{question:?}");
    }
}

/// A line that takes no bytes any more holds the loop in a write; the signal must still end it.
#[test]
fn a_stalled_line_does_not_keep_a_signal_from_ending_it() {
    let folder = folder();
    let mut pty = Pty::start(folder.path(), 120, 40, &[]);
    pty.wait_ranked();
    pty.send("m");
    pty.wait_for("marked; n names it");
    pty.wait_quiet();
    {
        // While this is held the reader takes nothing more than what it has in hand.
        let heard = Arc::clone(&pty.heard);
        let _held = heard.lock().unwrap();
        for _ in 0..60 {
            pty.writer.as_mut().unwrap().write_all(b"\x0c").unwrap();
            thread::sleep(Duration::from_millis(20));
        }
        pty.signal("TERM");
        let start = Instant::now();
        while pty.child.try_wait().unwrap().is_none() {
            assert!(start.elapsed() < PATIENCE, "a stalled line holds it");
            thread::sleep(Duration::from_millis(20));
        }
    }
    assert!(!pty.ended());
    assert_eq!(read_grasps(&recovery(&folder)).unwrap().grasps.len(), 1);
}

#[test]
fn a_flood_of_keys_is_drained_before_anything_is_drawn() {
    let folder = folder();
    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    pty.wait_ranked();
    pty.wait_quiet();
    let before = pty.bytes();
    // Up and down again and again, then 37 steps of friction; an arrow torn apart in between does nothing.
    pty.send(&"jk".repeat(300));
    pty.send("\x1b");
    thread::sleep(Duration::from_millis(50));
    pty.send("[A");
    pty.send(&"l".repeat(37));
    pty.wait_for("mu 0.57");
    pty.wait_ranked();
    pty.wait_quiet();
    let sent = pty.bytes() - before;
    println!("{sent} bytes for 640 keys");
    assert!(sent < 640 * 400, "{sent} bytes");
    pty.send("q");
    assert!(pty.ended());
}

#[test]
fn pasted_text_is_typed_into_a_line_and_nowhere_else() {
    let folder = folder();
    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    pty.wait_ranked();
    pty.send("\x1b[200~mqs\x1b[201~");
    pty.send("n\x15\x1b[200~bow\tend\x1b[201~\r");
    pty.wait_for("1 mark, 1 not saved");
    pty.send("s");
    pty.wait_for("1 grasp saved to");
    assert_eq!(read_grasps(&saved(&folder)).unwrap().grasps[0].name, "bowend");
    pty.send("q");
    assert!(pty.ended());
}

#[test]
fn any_size_of_the_window_is_lived_through() {
    let folder = folder();
    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    pty.wait_ranked();
    for (columns, rows) in [(1, 1), (0, 0), (200, 3), (3, 60), (23, 6), (0, 24), (80, 0), (60, 16)] {
        pty.master.as_ref().unwrap().resize(size(columns, rows)).unwrap();
        thread::sleep(Duration::from_millis(150));
        assert!(pty.child.try_wait().unwrap().is_none(), "ended at {columns}x{rows}");
    }
    pty.settles_at_another_size();
    pty.send("q");
    assert!(pty.ended());
    pty.assert_restored();
}

#[test]
fn ctrl_c_leaves_and_a_second_one_leaves_at_once() {
    let folder = folder();
    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    pty.wait_ranked();
    pty.send("\x03");
    assert!(pty.ended());
    pty.assert_restored();
    drop(pty);
    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    pty.wait_ranked();
    pty.send("m");
    pty.wait_for("marked; n names it");
    pty.send("\x03");
    pty.wait_for("leave?");
    pty.send("\x03");
    assert!(!pty.ended());
    pty.assert_restored();
    assert_eq!(read_grasps(&recovery(&folder)).unwrap().grasps.len(), 1);
}

/// no-color.org. Set graphic rendition 30 to 37, 90 to 97 and 38 set a foreground colour (ECMA-48; 90 up from memory).
#[test]
fn no_color_is_obeyed_and_the_selected_row_is_still_reversed() {
    for (environment, colored) in [(&[("NO_COLOR", "1")][..], false), (&[][..], true)] {
        let folder = folder();
        let mut pty = Pty::start(folder.path(), 80, 24, environment);
        pty.wait_ranked();
        pty.wait_quiet();
        let found = {
            let heard = pty.heard.lock().unwrap();
            let screen = heard.parser.screen();
            let cells = || (0..24).flat_map(|row| (0..80).filter_map(move |column| screen.cell(row, column)));
            assert!(cells().any(vt100::Cell::inverse), "no row is reversed");
            cells().any(|cell| cell.fgcolor() != vt100::Color::Default || cell.bgcolor() != vt100::Color::Default)
        };
        assert_eq!(found, colored);
        pty.send("q");
        assert!(pty.ended());
    }
}

#[test]
fn a_grasp_file_changed_meanwhile_is_not_written_over() {
    let folder = folder();
    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    pty.wait_ranked();
    pty.send("ms");
    pty.wait_for("1 grasp saved to");
    let text = std::fs::read_to_string(saved(&folder)).unwrap();
    std::fs::write(saved(&folder), format!("# a colleague was here\n{text}")).unwrap();
    pty.send("jms");
    pty.wait_for("changed by someone else");
    assert!(std::fs::read_to_string(saved(&folder)).unwrap().starts_with("# a colleague"));
    pty.send("y");
    pty.wait("both grasps", |_| read_grasps(&saved(&folder)).is_ok_and(|file| file.grasps.len() == 2));
    assert!(std::fs::read_to_string(saved(&folder)).unwrap().starts_with("# a colleague"));
    pty.send("q");
    assert!(pty.ended());
}

#[test]
fn a_place_that_cannot_be_written_is_told_with_the_mend() {
    let folder = folder();
    std::fs::create_dir(saved(&folder)).unwrap();
    let mut pty = Pty::start(folder.path(), 80, 24, &[]);
    pty.wait_for("saved grasps not read");
    pty.send("\x1b");
    pty.wait_ranked();
    pty.send("ms");
    pty.wait_for("press s again");
    pty.send("\x1b");
    pty.wait_for("1 mark, 1 not saved");
    pty.send("q");
    pty.wait_for("leave?");
    pty.send("x");
    assert!(pty.ended());
}
