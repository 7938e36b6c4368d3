//! How long a key takes to reach the screen while a long ranking runs on every core: `cargo bench --bench keys`.
//!
//! The program runs on a pseudo-terminal of 120 x 40. Every key is timed from its writing to the end mark of the frame that shows
//! what it did. `KEYS=2000` types more of them, `THREADS=1` leaves a core to the rest.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a measurement that cannot go on has failed")]
#![allow(clippy::print_stdout, reason = "a bench prints what it measured")]

#[path = "../pty/mod.rs"]
mod pty;

use pty::{FAST, PATIENCE, Pty, folder};
use std::time::{Duration, Instant};

/// End of a synchronized update.
const END: &[u8] = b"\x1b[?2026l";

/// A comb with many teeth: many stretches, so a ranking of millions of sets.
fn comb(teeth: usize) -> String {
    let mut outer = vec!["[0, 0]".to_owned(), format!("[{}, 0]", teeth * 10)];
    for tooth in (0..teeth).rev() {
        let x = tooth * 10;
        let high = 40 + tooth * 7 % 11;
        outer.extend([format!("[{}, {high}]", x + 10), format!("[{}, {high}.5]", x + 4), format!("[{x}, 30]")]);
    }
    format!("schema = 1\nname = \"comb\"\nouter = [{}]\n", outer.join(", "))
}

/// What the screen shows that a key may change.
#[derive(Debug, PartialEq, Clone)]
struct Seen {
    mu: String,
    selected: Option<usize>,
    body: String,
}

fn seen(pty: &Pty) -> (Seen, bool, Instant) {
    let heard = pty.heard.lock().unwrap();
    let text = heard.parser.screen().contents();
    let first = text.lines().next().unwrap_or_default();
    let mu = first.split("mu ").nth(1).unwrap_or_default().chars().take(4).collect();
    let body: String = text.lines().skip(1).collect::<Vec<_>>().join("\n");
    let selected = body.lines().position(|line| line.contains("|> "));
    (Seen { mu, selected, body }, heard.log.ends_with(END), heard.last)
}

fn main() {
    let count: usize = std::env::var("KEYS").ok().and_then(|keys| keys.parse().ok()).unwrap_or(200);
    let folder = folder();
    std::fs::write(folder.path().join("comb.toml"), comb(20)).unwrap();
    let mut args = vec!["comb.toml", "--fingers", "4", "--budget", "2000000000"];
    let threads = std::env::var("THREADS").ok();
    if let Some(threads) = &threads {
        args.extend(["--threads", threads]);
    }
    let mut pty = Pty::launch(folder.path(), &args, (120, 40), &[], FAST);
    // A proof of these families is over too soon: single grasps are ranked instead.
    pty.send("v");
    pty.wait("rows while it ranks", |pty| {
        let screen = pty.screen();
        screen.contains("ranking") && screen.contains("|> ")
    });
    std::thread::sleep(Duration::from_secs(1));
    let mut times: Vec<(char, f64)> = Vec::new();
    for key in "jjjlcjjjhc".chars().cycle().take(count) {
        let (before, _, _) = seen(&pty);
        // Neither end of the list is walked against: there a key changes nothing.
        let key = if key == 'j' && before.selected.is_some_and(|row| row > 20) { 'k' } else { key };
        let start = Instant::now();
        pty.send(&key.to_string());
        let end = loop {
            let (now, whole, at) = seen(&pty);
            let done = match key {
                'j' | 'k' => now.selected != before.selected,
                'l' | 'h' => now.mu != before.mu,
                _ => now.body != before.body,
            };
            if whole && done && at > start {
                break at;
            }
            assert!(start.elapsed() < PATIENCE, "{key} does nothing: {}", pty.screen());
            std::thread::sleep(Duration::from_micros(200));
        };
        times.push((key, end.duration_since(start).as_secs_f64() * 1e3));
        assert!(pty.screen().lines().next().unwrap().contains("ranking"), "the ranking is over: {}", pty.screen());
        std::thread::sleep(Duration::from_millis(60));
    }
    let report = |what: &str, mut own: Vec<f64>| {
        if own.is_empty() {
            return;
        }
        own.sort_by(f64::total_cmp);
        let at = |part: f64| own[((own.len() - 1) as f64 * part).round() as usize];
        println!(
            "{what:<10} {:>5} keys  median {:6.1} ms  p95 {:6.1} ms  max {:6.1} ms",
            own.len(),
            at(0.5),
            at(0.95),
            at(1.0)
        );
    };
    report("all", times.iter().map(|time| time.1).collect());
    for (what, keys) in [("selection", "jk"), ("mu", "lh"), ("view", "c")] {
        report(what, times.iter().filter(|time| keys.contains(time.0)).map(|time| time.1).collect());
    }
    pty.send("qx");
    pty.ended();
}
