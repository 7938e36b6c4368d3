//! The terminal: entered and left exactly once, written by one buffered writer, a frame at a time.

use super::state::State;
use super::view;
use crossterm::event::{DisableBracketedPaste, EnableBracketedPaste};
use crossterm::terminal::{
    BeginSynchronizedUpdate, EndSynchronizedUpdate, EnterAlternateScreen, LeaveAlternateScreen, disable_raw_mode,
    enable_raw_mode,
};
use crossterm::{Command, cursor};
use ratatui::Terminal;
use ratatui::backend::CrosstermBackend;
use ratatui::layout::Rect;
use std::cell::RefCell;
use std::fs::File;
use std::io::{self, Write};
use std::os::fd::AsFd;
use std::rc::Rc;
use std::sync::atomic::{AtomicBool, Ordering};

/// True between entering and leaving. Whoever turns it false restores the terminal, nobody else.
static INSIDE: AtomicBool = AtomicBool::new(false);

fn sequence(text: &mut String, command: impl Command) {
    // Writing to a string does not fail.
    let _ = command.write_ansi(text);
}

fn enter_sequence() -> String {
    let mut text = String::new();
    sequence(&mut text, EnterAlternateScreen);
    sequence(&mut text, cursor::Hide);
    sequence(&mut text, EnableBracketedPaste);
    text
}

fn leave_sequence() -> String {
    let mut text = String::new();
    sequence(&mut text, EndSynchronizedUpdate);
    sequence(&mut text, DisableBracketedPaste);
    sequence(&mut text, crossterm::style::ResetColor);
    sequence(&mut text, LeaveAlternateScreen);
    sequence(&mut text, cursor::Show);
    text
}

/// Takes the terminal: raw mode, alternate screen, no cursor.
pub(super) fn enter() -> io::Result<()> {
    enable_raw_mode()?;
    INSIDE.store(true, Ordering::SeqCst);
    send(&enter_sequence())
}

/// Gives the terminal back; a second call does nothing. Faults are of no use to anyone here: the terminal may be gone.
pub(super) fn leave() {
    if INSIDE.swap(false, Ordering::SeqCst) {
        let _ = disable_raw_mode();
        let _ = send(&leave_sequence());
    }
}

/// Gives back what can be without writing, for a terminal that no longer takes bytes.
pub(super) fn abandon() {
    if INSIDE.swap(false, Ordering::SeqCst) {
        let _ = disable_raw_mode();
    }
}

/// Writes past the frame buffer. The descriptor is its own, so that no lock of `std::io::stdout` can stand in the way.
fn send(text: &str) -> io::Result<()> {
    let mut out = File::from(io::stdout().as_fd().try_clone_to_owned()?);
    out.write_all(text.as_bytes())
}

/// The one writer: collects a frame and sends it in one piece.
struct Wire<W> {
    out: W,
    held: Vec<u8>,
    in_frame: bool,
    fault: Option<io::Error>,
}

impl<W: Write> Wire<W> {
    fn send(&mut self) -> io::Result<()> {
        let sent = self.out.write_all(&self.held).and_then(|()| self.out.flush());
        self.held.clear();
        sent
    }
}

/// A handle on the wire; the backend has one, the frame mark another.
struct Handle<W>(Rc<RefCell<Wire<W>>>);

impl<W> Clone for Handle<W> {
    fn clone(&self) -> Self {
        Self(Rc::clone(&self.0))
    }
}

impl<W: Write> Write for Handle<W> {
    fn write(&mut self, bytes: &[u8]) -> io::Result<usize> {
        self.0.borrow_mut().held.extend_from_slice(bytes);
        Ok(bytes.len())
    }

    /// Inside a frame nothing is sent before its end.
    fn flush(&mut self) -> io::Result<()> {
        let mut wire = self.0.borrow_mut();
        if wire.in_frame { Ok(()) } else { wire.send() }
    }
}

/// A frame on its way: its end mark is sent however the drawing ends.
struct FrameMark<W: Write>(Handle<W>);

impl<W: Write> FrameMark<W> {
    fn open(handle: &Handle<W>) -> Self {
        let mut wire = handle.0.borrow_mut();
        wire.in_frame = true;
        wire.held.extend_from_slice(mark(BeginSynchronizedUpdate).as_bytes());
        Self(handle.clone())
    }
}

impl<W: Write> Drop for FrameMark<W> {
    fn drop(&mut self) {
        if let Ok(mut wire) = self.0.0.try_borrow_mut() {
            wire.in_frame = false;
            wire.held.extend_from_slice(mark(EndSynchronizedUpdate).as_bytes());
            let sent = wire.send();
            wire.fault = sent.err();
        }
    }
}

fn mark(command: impl Command) -> String {
    let mut text = String::new();
    sequence(&mut text, command);
    text
}

/// The screen.
pub(super) struct Screen<W: Write> {
    terminal: Terminal<CrosstermBackend<Handle<W>>>,
    handle: Handle<W>,
    stale: bool,
}

impl<W: Write> Screen<W> {
    pub(super) fn new(out: W) -> io::Result<Self> {
        let wire = Wire { out, held: Vec::with_capacity(1 << 16), in_frame: false, fault: None };
        let handle = Handle(Rc::new(RefCell::new(wire)));
        let terminal = Terminal::new(CrosstermBackend::new(handle.clone()))?;
        Ok(Self { terminal, handle, stale: true })
    }

    /// Has the next frame paint every cell. The terminal is asked nothing for it.
    pub(super) fn repaint(&mut self) {
        self.stale = true;
    }

    /// Draws a frame; only what changed is sent. A terminal without any room is left alone.
    pub(super) fn draw(&mut self, state: &State) -> io::Result<()> {
        let size = self.terminal.size()?;
        if size.width == 0 || size.height == 0 {
            return Ok(());
        }
        let mark = FrameMark::open(&self.handle);
        let drawn = self.draw_inside(state, Rect::from((ratatui::layout::Position::ORIGIN, size)));
        drop(mark);
        drawn?;
        match self.handle.0.borrow_mut().fault.take() {
            Some(fault) => Err(fault),
            None => Ok(()),
        }
    }

    fn draw_inside(&mut self, state: &State, area: Rect) -> io::Result<()> {
        if std::mem::take(&mut self.stale) {
            self.terminal.resize(area)?;
        }
        self.terminal.draw(|frame| view::draw(state, frame))?;
        Ok(())
    }
}

/// The screen on standard output.
pub(super) fn screen() -> io::Result<Screen<File>> {
    Screen::new(File::from(io::stdout().as_fd().try_clone_to_owned()?))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A writer that remembers each piece it was handed.
    #[derive(Clone, Default)]
    struct Pieces(Rc<RefCell<Vec<Vec<u8>>>>);

    impl Write for Pieces {
        fn write(&mut self, bytes: &[u8]) -> io::Result<usize> {
            self.0.borrow_mut().push(bytes.to_vec());
            Ok(bytes.len())
        }

        fn flush(&mut self) -> io::Result<()> {
            Ok(())
        }
    }

    /// The synchronized-update marks are DEC private mode 2026 (contour's terminal extension text; from memory).
    #[test]
    fn a_frame_goes_out_in_one_piece_between_its_marks_even_when_drawing_panics() {
        let pieces = Pieces::default();
        let wire = Wire { out: pieces.clone(), held: Vec::new(), in_frame: false, fault: None };
        let mut handle = Handle(Rc::new(RefCell::new(wire)));
        let other = handle.clone();
        let drawn = std::panic::catch_unwind(std::panic::AssertUnwindSafe(|| {
            let _mark = FrameMark::open(&other);
            handle.write_all(b"half").unwrap();
            handle.flush().unwrap();
            assert!(pieces.0.borrow().is_empty(), "a flush inside a frame sends nothing");
            panic!("drawing broke");
        }));
        assert!(drawn.is_err());
        assert_eq!(pieces.0.borrow().as_slice(), [b"\x1b[?2026hhalf\x1b[?2026l".to_vec()]);
    }

    #[test]
    fn what_entering_sets_leaving_takes_back() {
        let (enter, leave) = (enter_sequence(), leave_sequence());
        for mode in ["?1049", "?2004"] {
            assert!(enter.contains(&format!("\x1b[{mode}h")), "{mode}");
            assert!(leave.contains(&format!("\x1b[{mode}l")), "{mode}");
        }
        assert!(enter.contains("\x1b[?25l") && leave.contains("\x1b[?25h"));
    }
}
