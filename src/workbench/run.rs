//! The loop: threads for keys, signals and ranking feed one channel; effects are carried out here.

use super::action::Key;
use super::guard::{Ending, Raft, conclude, guarded, watch_signals};
use super::look::is_utf8;
use super::recovery::Recovery;
use super::state::State;
use super::terminal::{self, Screen};
use super::update::{Effect, Input, update};
use super::{ColorChoice, Options};
use crate::file::{self, Keep, SaveFault, Stamp};
use crate::search::job::{News, Ranker, What};
use crossterm::event::{self, Event, KeyCode, KeyEvent, KeyEventKind, KeyModifiers};
use signal_hook::consts::{SIGCONT, SIGSTOP, SIGTSTP};
use std::fs::File;
use std::io;
use std::sync::mpsc::{self, Receiver, RecvTimeoutError, Sender};
use std::thread;
use std::time::{Duration, Instant};

/// Least time between two frames drawn for progress alone: at most four a second.
const PROGRESS_PAUSE: Duration = Duration::from_millis(250);
/// What reaches the loop.
enum Message {
    Event(Event),
    InputEnded,
    Signal(i32),
    News(News),
}

/// Opens the workbench on the terminal and returns when the user leaves.
///
/// On SIGTERM, SIGHUP and SIGINT unsaved marks go to the recovery file beside the grasp file, the terminal is restored
/// and the process ends by that signal.
///
/// # Errors
/// A setup that cannot be used, a terminal that cannot be taken or is lost, an internal fault.
pub fn run(mut options: Options) -> Result<(), Stopped> {
    let variable = |name: &str| std::env::var(name).ok();
    options.color = options.color.settled(variable("NO_COLOR").as_deref(), variable("TERM").as_deref());
    // The screen decides by itself; the library's own reading of NO_COLOR would also drop reversed rows.
    crossterm::style::force_color_output(true);
    let state = State::new(&options).map_err(Stopped::Setup)?;
    on_terminal(&options, state).map_err(Stopped::Terminal)
}

/// Why the workbench could not go on.
#[derive(Debug, thiserror::Error)]
pub enum Stopped {
    /// The setup does not go with the part.
    #[error("{0}")]
    Setup(String),
    /// The terminal cannot be taken or is lost, or an internal fault.
    #[error("the terminal: {0}")]
    Terminal(io::Error),
}

fn on_terminal(options: &Options, mut state: State) -> io::Result<()> {
    let variable = |name: &str| std::env::var(name).ok();
    state.look.color = options.color == ColorChoice::Always;
    state.look.utf8 =
        is_utf8(variable("LC_ALL").as_deref(), variable("LC_CTYPE").as_deref(), variable("LANG").as_deref());
    let recovery = Recovery::beside(&options.grasp_path, &options.part_path, &options.part);
    if recovery.path().exists() {
        match recovery.load() {
            Ok(keeps) => update(&mut state, Input::RecoveryFound(keeps.len())),
            Err(lines) => update(&mut state, not_taken_back(lines)),
        };
    }
    let raft = Raft::default();
    let (sender, receiver) = mpsc::channel();
    let tell = sender.clone();
    watch_signals(move |signal| tell.send(Message::Signal(signal)).is_ok(), &raft, &recovery)?;
    let ended = guarded(|| Bench::new(options, &recovery, &raft, sender, receiver)?.work(&mut state));
    conclude(ended, &recovery, &raft)
}

/// Tells the loop when the input thread ends, however it ends.
struct TellEnd(Sender<Message>);

impl Drop for TellEnd {
    fn drop(&mut self) {
        let _ = self.0.send(Message::InputEnded);
    }
}

/// Reads events until the terminal is gone. Nobody waits for this thread: a read on a dead line may never return.
fn read_input(sender: &Sender<Message>) -> io::Result<()> {
    let sender = sender.clone();
    thread::Builder::new().name("input".to_owned()).spawn(move || {
        let end = TellEnd(sender.clone());
        while let Ok(event) = event::read() {
            if sender.send(Message::Event(event)).is_err() {
                break;
            }
        }
        drop(end);
    })?;
    Ok(())
}

/// A key press or repeat in the workbench's own terms; releases and unknown keys are nothing.
fn key_of(event: &KeyEvent) -> Option<Key> {
    if event.kind == KeyEventKind::Release {
        return None;
    }
    let ctrl = event.modifiers.contains(KeyModifiers::CONTROL);
    if event.modifiers.contains(KeyModifiers::ALT) {
        return None;
    }
    Some(match event.code {
        KeyCode::Char(c) if ctrl => Key::Ctrl(c.to_ascii_lowercase()),
        KeyCode::Char(c) => Key::Char(c),
        KeyCode::Up => Key::Up,
        KeyCode::Down => Key::Down,
        KeyCode::Left => Key::Left,
        KeyCode::Right => Key::Right,
        KeyCode::Enter => Key::Enter,
        KeyCode::Esc => Key::Esc,
        KeyCode::Tab => Key::Tab,
        KeyCode::Backspace => Key::Backspace,
        KeyCode::Delete => Key::Delete,
        KeyCode::Home => Key::Home,
        KeyCode::End => Key::End,
        KeyCode::PageUp => Key::PageUp,
        KeyCode::PageDown => Key::PageDown,
        _ => return None,
    })
}

/// When the next frame is due.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
enum Due {
    Never,
    /// With the next progress frame.
    Soon,
    Now,
}

struct Bench<'a> {
    options: &'a Options,
    recovery: &'a Recovery,
    raft: &'a Raft,
    receiver: Receiver<Message>,
    ranker: Ranker,
    screen: Screen<File>,
    known: Option<Stamp>,
    due: Due,
    progress_drawn: Instant,
    /// The SIGCONT that follows our own stop is expected and does nothing more.
    own_stop: bool,
}

impl<'a> Bench<'a> {
    fn new(
        options: &'a Options,
        recovery: &'a Recovery,
        raft: &'a Raft,
        sender: Sender<Message>,
        receiver: Receiver<Message>,
    ) -> io::Result<Self> {
        read_input(&sender)?;
        let ranker = Ranker::new(move |news| {
            // The loop may be gone already; then nobody wants the news.
            let _ = sender.send(Message::News(news));
        })?;
        Ok(Self {
            options,
            recovery,
            raft,
            receiver,
            ranker,
            screen: terminal::screen()?,
            known: file::stamp(&options.grasp_path),
            due: Due::Now,
            progress_drawn: Instant::now(),
            own_stop: false,
        })
    }

    fn work(&mut self, state: &mut State) -> io::Result<Ending> {
        if let Ok((columns, rows)) = crossterm::terminal::size() {
            update(state, Input::Resize(columns, rows));
        }
        let effects = update(state, Input::Start);
        if let Some(ending) = self.carry_out(state, effects) {
            return Ok(ending);
        }
        loop {
            if let Some(ending) = self.draw_when_due(state) {
                return Ok(ending);
            }
            let first = match self.wait() {
                Ok(first) => first,
                Err(RecvTimeoutError::Timeout) => {
                    self.due = Due::Now;
                    continue;
                }
                // Every sender is gone: no key can come any more.
                Err(RecvTimeoutError::Disconnected) => return Err(io::ErrorKind::BrokenPipe.into()),
            };
            if let Some(ending) = self.drain(state, first) {
                return Ok(ending);
            }
        }
    }

    fn draw_when_due(&mut self, state: &State) -> Option<Ending> {
        let due = match self.due {
            Due::Never => false,
            Due::Soon => self.progress_drawn.elapsed() >= PROGRESS_PAUSE,
            Due::Now => true,
        };
        if due {
            self.due = Due::Never;
            self.progress_drawn = Instant::now();
            if let Err(fault) = self.screen.draw(state) {
                return Some(Ending::Lost(fault));
            }
        }
        None
    }

    fn wait(&self) -> Result<Message, RecvTimeoutError> {
        match self.due {
            Due::Soon => self.receiver.recv_timeout(PROGRESS_PAUSE.saturating_sub(self.progress_drawn.elapsed())),
            Due::Never | Due::Now => self.receiver.recv().map_err(|_| RecvTimeoutError::Disconnected),
        }
    }

    /// Takes every message that waits before anything is drawn: frames are dropped, keys never.
    fn drain(&mut self, state: &mut State, first: Message) -> Option<Ending> {
        let mut effects = Vec::new();
        let mut next = Some(first);
        while let Some(message) = next {
            if let Some(ending) = self.take(state, message, &mut effects) {
                return Some(ending);
            }
            // Only requests to rank may wait: of several the last one wins.
            if effects.iter().any(|effect| !matches!(effect, Effect::Rank(_))) {
                let ending = self.carry_out(state, std::mem::take(&mut effects));
                if ending.is_some() {
                    return ending;
                }
            }
            next = self.receiver.try_recv().ok();
        }
        self.carry_out(state, effects)
    }

    fn take(&mut self, state: &mut State, message: Message, effects: &mut Vec<Effect>) -> Option<Ending> {
        let input = match message {
            Message::InputEnded => return Some(Ending::Lost(io::ErrorKind::BrokenPipe.into())),
            Message::Signal(SIGTSTP) => {
                effects.push(Effect::Suspend);
                return None;
            }
            Message::Signal(SIGCONT) => {
                if !std::mem::take(&mut self.own_stop) {
                    terminal::abandon();
                    if let Err(fault) = terminal::enter() {
                        return Some(Ending::Lost(fault));
                    }
                    effects.push(Effect::Repaint);
                }
                return None;
            }
            Message::Signal(signal) => return Some(Ending::Signal(signal)),
            Message::Event(Event::Key(key)) => Input::Key(key_of(&key)?),
            Message::Event(Event::Paste(text)) => Input::Paste(text),
            Message::Event(Event::Resize(columns, rows)) => Input::Resize(columns, rows),
            Message::Event(_) => return None,
            Message::News(news) if Some(news.generation) != state.asked => return None,
            Message::News(news) => Input::News(news),
        };
        let due = match &input {
            Input::News(News { what: What::Progress { .. } | What::Snapshot(_), .. }) => Due::Soon,
            _ => Due::Now,
        };
        self.due = self.due.max(due);
        effects.extend(update(state, input));
        self.refresh_raft(state);
        None
    }

    fn carry_out(&mut self, state: &mut State, effects: Vec<Effect>) -> Option<Ending> {
        let last_request = effects.iter().rposition(|effect| matches!(effect, Effect::Rank(_)));
        for (i, effect) in effects.into_iter().enumerate() {
            match effect {
                Effect::Rank(request) => {
                    if Some(i) == last_request {
                        let generation = self.ranker.request(request);
                        update(state, Input::Asked(generation));
                    }
                }
                Effect::Save { ids, keeps, reread } => {
                    let input = self.save(ids, &keeps, reread);
                    let after = update(state, input);
                    self.refresh_raft(state);
                    if state.unsaved() == 0 {
                        self.recovery.settle();
                    }
                    if let Some(ending) = self.carry_out(state, after) {
                        return Some(ending);
                    }
                }
                Effect::LoadRecovery => {
                    let input = match self.recovery.load() {
                        Ok(keeps) => {
                            self.recovery.take();
                            Input::Recovered(keeps)
                        }
                        Err(lines) => not_taken_back(lines),
                    };
                    update(state, input);
                    self.refresh_raft(state);
                }
                Effect::DropRecovery => {
                    if let Err(fault) = self.recovery.remove() {
                        let lines = vec![format!("{}: {fault}", self.recovery.path().display())];
                        update(state, Input::Told { title: "not deleted", lines });
                    }
                }
                Effect::Repaint => self.screen.repaint(),
                Effect::Suspend => {
                    if let Err(fault) = self.suspend() {
                        return Some(Ending::Lost(fault));
                    }
                }
                Effect::Quit { recover } => return Some(Ending::Quit { recover }),
            }
            self.due = Due::Now;
        }
        None
    }

    fn refresh_raft(&self, state: &State) {
        self.raft.load(state.marks.iter().filter(|mark| !mark.saved).map(|mark| mark.keep.clone()).collect());
    }

    fn suspend(&mut self) -> io::Result<()> {
        terminal::leave();
        self.own_stop = true;
        signal_hook::low_level::raise(SIGSTOP)?;
        // Here the shell has brought us back.
        terminal::enter()?;
        self.screen.repaint();
        Ok(())
    }

    fn save(&mut self, ids: Vec<u64>, keeps: &[Keep], reread: bool) -> Input {
        let path = &self.options.grasp_path;
        if reread {
            self.known = file::stamp(path);
        }
        match file::save(path, &self.options.part_path, &self.options.part, keeps, self.known.as_ref()) {
            Ok(stamp) => {
                self.known = Some(stamp);
                Input::Saved(ids)
            }
            Err(fault) => {
                let changed = matches!(fault, SaveFault::ChangedMeanwhile(_));
                Input::SaveFailed { lines: told(&fault), changed }
            }
        }
    }
}

/// Marks of an earlier run that cannot be taken back; their file stays.
fn not_taken_back(mut lines: Vec<String>) -> Input {
    lines.push(String::new());
    lines.push("Marks of an earlier run cannot be taken back. The file stays where it is.".to_owned());
    Input::Told { title: "marks of an earlier run", lines }
}

/// A fault with its mend.
fn told(fault: &SaveFault) -> Vec<String> {
    let mut lines = vec![fault.to_string()];
    let mend = match fault {
        SaveFault::ChangedMeanwhile(_) => "Read it again, then save.",
        SaveFault::Unreadable(faults) => {
            lines = faults.lines();
            "Mend that file or move it away, then press s again."
        }
        SaveFault::OtherPart(_) => "Move that file away, then press s again: a new one is made.",
        SaveFault::Io { .. } => "See to the rights and the free space of its directory, then press s again.",
    };
    lines.push(String::new());
    lines.push(mend.to_owned());
    lines.push("The file is as it was, and the marks are still here.".to_owned());
    lines
}
