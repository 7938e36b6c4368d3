//! The pictures of the outline pane.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod desk;

use desk::Desk;

#[test]
fn look() {
    let mut desk = Desk::loaded();
    for size in [(80, 24), (120, 40)] {
        for key in 1..=7 {
            desk.keys(&key.to_string());
            println!("=== {key} {size:?}\n{}", desk.resized(size.0, size.1));
        }
    }
}
