//! The pictures of the outline pane.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod desk;

use desk::Desk;

#[test]
fn look() {
    let mut n = 0;
    for fingers in ["F", "FT", "", "T", "f"] {
        for row in 0..40 {
            let mut desk = Desk::hinge();
            desk.keys(fingers);
            desk.keys(&"j".repeat(row));
            desk.resized(100, 36);
            for mu in ["0.1", "0.05", "0"] {
                desk.keys(&format!("={mu}<cr>3"));
                let s = desk.screen(100, 36);
                if s.contains("clockwise only") && n < 300 {
                    n += 1;
                    if n % 15 == 1 {
                        println!("=== {fingers} {row} {mu}\n{}", s);
                    }
                }
            }
        }
    }
}
