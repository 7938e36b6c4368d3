//! The program on a real pseudo-terminal, with a terminal that reads along. Every wait has a limit.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]
#![allow(dead_code, unreachable_pub, reason = "each test file uses its own part of this")]

use portable_pty::{Child, CommandBuilder, MasterPty, PtySize, native_pty_system};
use std::io::{Read, Write};
use std::num::NonZeroU16;
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Arc, Mutex};
use std::thread;
use std::time::{Duration, Instant};

/// Longest wait for anything; a loaded machine is slow, a hung program is slower.
pub const PATIENCE: Duration = Duration::from_secs(40);

pub const PART: &str = r#"schema = 1
name = "cleat base"
units = "mm"
outer = [[0.0, 0.0], [80.0, 0.0], [80.0, 24.0], [52.0, 40.0], [0.0, 40.0]]
"#;

/// What came from the program.
pub struct Heard {
    pub parser: vt100::Parser,
    pub log: Vec<u8>,
    /// When the last of it came.
    pub last: Instant,
}

/// The program on a pseudo-terminal.
pub struct Pty {
    pub child: Box<dyn Child + Send + Sync>,
    pub master: Option<Box<dyn MasterPty + Send>>,
    pub writer: Option<Box<dyn Write + Send>>,
    pub heard: Arc<Mutex<Heard>>,
    pub deaf: Arc<AtomicBool>,
    pub reader: Option<thread::JoinHandle<()>>,
}

/// How fast the line is read: so many bytes, then a pause.
#[derive(Clone, Copy)]
pub struct Line {
    pub bytes: usize,
    pub pause: Duration,
}

/// As fast as it comes.
pub const FAST: Line = Line { bytes: 4096, pause: Duration::ZERO };

/// Some 2 kB a second.
pub const SLOW: Line = Line { bytes: 100, pause: Duration::from_millis(50) };

pub fn some(cells: u16) -> NonZeroU16 {
    NonZeroU16::new(cells).unwrap()
}

pub fn terminal(columns: u16, rows: u16) -> vt100::Parser {
    vt100::Parser::new(some(rows), some(columns), 0)
}

pub fn size(columns: u16, rows: u16) -> PtySize {
    PtySize { rows, cols: columns, pixel_width: 0, pixel_height: 0 }
}

impl Pty {
    /// The workbench on a small part.
    pub fn start(folder: &Path, columns: u16, rows: u16, environment: &[(&str, &str)]) -> Self {
        std::fs::write(folder.join("cleat.toml"), PART).unwrap();
        Self::launch(folder, &["cleat.toml", "--spacing", "6"], (columns, rows), environment, FAST)
    }

    pub fn launch(
        folder: &Path,
        args: &[&str],
        (columns, rows): (u16, u16),
        environment: &[(&str, &str)],
        line: Line,
    ) -> Self {
        let pair = native_pty_system().openpty(size(columns, rows)).unwrap();
        let mut command = CommandBuilder::new(env!("CARGO_BIN_EXE_holdwright"));
        command.args(args);
        command.cwd(folder);
        command.env_clear();
        command.env("TERM", "xterm-256color");
        command.env("LANG", "C");
        for (name, value) in environment {
            command.env(name, value);
        }
        let child = pair.slave.spawn_command(command).unwrap();
        drop(pair.slave);
        let mut source = pair.master.try_clone_reader().unwrap();
        let heard =
            Arc::new(Mutex::new(Heard { parser: terminal(columns, rows), log: Vec::new(), last: Instant::now() }));
        let deaf = Arc::new(AtomicBool::new(false));
        let (ear, stop) = (Arc::clone(&heard), Arc::clone(&deaf));
        let reader = thread::spawn(move || {
            let mut bytes = vec![0; line.bytes];
            while let Ok(count) = source.read(&mut bytes) {
                if count == 0 || stop.load(Ordering::SeqCst) {
                    break;
                }
                {
                    let mut heard = ear.lock().unwrap();
                    heard.parser.process(&bytes[..count]);
                    heard.log.extend_from_slice(&bytes[..count]);
                    heard.last = Instant::now();
                }
                if !line.pause.is_zero() {
                    thread::sleep(line.pause);
                }
            }
        });
        let writer = pair.master.take_writer().unwrap();
        Self { child, master: Some(pair.master), writer: Some(writer), heard, deaf, reader: Some(reader) }
    }

    pub fn send(&mut self, keys: &str) {
        let writer = self.writer.as_mut().unwrap();
        writer.write_all(keys.as_bytes()).unwrap();
        writer.flush().unwrap();
    }

    /// The text of the screen without the blanks at the ends of its lines.
    pub fn screen(&self) -> String {
        let text = self.heard.lock().unwrap().parser.screen().contents();
        text.lines().map(str::trim_end).collect::<Vec<_>>().join("\n")
    }

    pub fn bytes(&self) -> usize {
        self.heard.lock().unwrap().log.len()
    }

    pub fn log(&self) -> Vec<u8> {
        self.heard.lock().unwrap().log.clone()
    }

    pub fn wait(&self, what: &str, done: impl Fn(&Self) -> bool) {
        let start = Instant::now();
        while !done(self) {
            assert!(start.elapsed() < PATIENCE, "waited in vain for {what}; the screen:\n{}", self.screen());
            thread::sleep(Duration::from_millis(15));
        }
    }

    pub fn wait_for(&self, text: &str) {
        self.wait(text, |pty| pty.screen().contains(text));
    }

    /// Waits for the finished list.
    pub fn wait_ranked(&self) {
        self.wait("the ranking", |pty| {
            let screen = pty.screen();
            screen.contains("families --")
                && !screen.contains("ranking")
                && !screen.contains("proving")
                && !screen.contains("so far")
        });
    }

    /// Takes another size, and waits until the bench is whole there.
    pub fn settles_at_another_size(&self) {
        let (columns, rows) = (100, 30);
        self.heard.lock().unwrap().parser.screen_mut().set_size(some(rows), some(columns));
        self.master.as_ref().unwrap().resize(size(columns, rows)).unwrap();
        self.wait("the bench at another size", |pty| {
            let screen = pty.screen();
            screen.lines().count() == 30 && screen.contains("Enter shows all") && screen.contains("? help")
        });
    }

    /// Waits until nothing has come for a while.
    pub fn wait_quiet(&self) {
        let (start, mut last, mut since) = (Instant::now(), self.bytes(), Instant::now());
        while since.elapsed() < Duration::from_millis(400) {
            assert!(start.elapsed() < PATIENCE, "never quiet");
            thread::sleep(Duration::from_millis(20));
            if self.bytes() != last {
                (last, since) = (self.bytes(), Instant::now());
            }
        }
    }

    pub fn signal(&self, name: &str) {
        let pid = self.child.process_id().unwrap().to_string();
        assert!(std::process::Command::new("kill").args([&format!("-{name}"), &pid]).status().unwrap().success());
    }

    /// Waits for the end; true when the exit code is 0.
    pub fn ended(&mut self) -> bool {
        let start = Instant::now();
        loop {
            if let Some(status) = self.child.try_wait().unwrap() {
                // What was written last may still be on its way to the reader.
                if let Some(reader) = self.reader.take() {
                    let waited = Instant::now();
                    while !reader.is_finished() && waited.elapsed() < Duration::from_secs(2) {
                        thread::sleep(Duration::from_millis(10));
                    }
                }
                return status.success();
            }
            assert!(start.elapsed() < PATIENCE, "does not end; the screen:\n{}", self.screen());
            thread::sleep(Duration::from_millis(15));
        }
    }

    /// Alternate screen left and cursor shown, each exactly once in all.
    pub fn assert_restored(&self) {
        let heard = self.heard.lock().unwrap();
        assert!(!heard.parser.screen().alternate_screen(), "still on the alternate screen");
        assert!(!heard.parser.screen().hide_cursor(), "the cursor is hidden");
        assert!(!heard.parser.screen().bracketed_paste(), "bracketed paste is on");
        assert_eq!(count(&heard.log, b"\x1b[?1049h"), 1);
        assert_eq!(count(&heard.log, b"\x1b[?1049l"), 1);
    }

    pub fn state(&self) -> char {
        let pid = self.child.process_id().unwrap();
        let stat = std::fs::read_to_string(format!("/proc/{pid}/stat")).unwrap_or_default();
        stat.rsplit(") ").next().and_then(|rest| rest.chars().next()).unwrap_or('?')
    }
}

impl Drop for Pty {
    fn drop(&mut self) {
        let _ = self.child.kill();
        let _ = self.child.wait();
    }
}

pub fn count(log: &[u8], piece: &[u8]) -> usize {
    log.windows(piece.len()).filter(|window| *window == piece).count()
}

pub fn folder() -> tempfile::TempDir {
    tempfile::tempdir().unwrap()
}

pub fn saved(folder: &tempfile::TempDir) -> PathBuf {
    folder.path().join("cleat.grasps.toml")
}

pub fn recovery(folder: &tempfile::TempDir) -> PathBuf {
    folder.path().join("cleat.grasps.toml.recovery")
}
