//! The loop: threads for keys, signals and ranking feed one channel; effects are carried out here.

use super::action::Key;
use super::guard::{Ending, Raft, conclude, guarded, watch_signals};
use super::kept;
use super::keyboard;
use super::look::is_utf8;
use super::opening::chosen;
use super::recovery::{Recovery, Unsaved};
use super::reload::Fresh;
use super::start::Choice;
use super::state::State;
use super::terminal::{self, Screen};
use super::told::{not_taken_back, told};
use super::update::{Effect, Input, update};
use super::watch::Watch;
use super::{ColorChoice, Options, StartOptions};
use crate::file::{self, Change, Keep, Revision, SaveFault, Stamp};
use crate::part::Part;
use crate::search::Setup;
use crate::search::job::{News, Ranker, What};
use crossterm::event::{self, Event};
use signal_hook::consts::{SIGCONT, SIGSTOP, SIGTSTP};
use std::fs::File;
use std::io;
use std::sync::Arc;
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
    options.color = settled(options.color);
    let state = State::new(&options).map_err(Stopped::Setup)?;
    on_terminal(Opening::Part(Box::new(options)), state).map_err(Stopped::Terminal)
}

/// Opens the start page on the terminal, then the workbench on what is chosen there; returns when the user leaves.
///
/// # Errors
/// As [`run`]. A part that cannot be read is told on the page.
pub fn run_start(mut options: StartOptions) -> Result<(), Stopped> {
    options.color = settled(options.color);
    let state = State::start(&options).map_err(Stopped::Setup)?;
    on_terminal(Opening::Start(options), state).map_err(Stopped::Terminal)
}

fn settled(color: ColorChoice) -> ColorChoice {
    let variable = |name: &str| std::env::var(name).ok();
    // The screen decides by itself; the library's own reading of NO_COLOR would also drop reversed rows.
    crossterm::style::force_color_output(true);
    color.settled(variable("NO_COLOR").as_deref(), variable("TERM").as_deref())
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

/// What the loop is opened on.
enum Opening {
    Part(Box<Options>),
    Start(StartOptions),
}

fn on_terminal(opening: Opening, mut state: State) -> io::Result<()> {
    let variable = |name: &str| std::env::var(name).ok();
    let color = match &opening {
        Opening::Part(options) => options.color,
        Opening::Start(options) => options.color,
    };
    state.look.color = color == ColorChoice::Always;
    state.look.utf8 =
        is_utf8(variable("LC_ALL").as_deref(), variable("LC_CTYPE").as_deref(), variable("LANG").as_deref());
    // Work shared out by this thread stays on it: in the pool of the ranking it would wait until that has a thread to spare.
    // Where the system refuses, keys are slower while a ranking runs.
    let _own = rayon::ThreadPoolBuilder::new().num_threads(1).use_current_thread().build();
    let raft = Raft::default();
    let (sender, receiver) = mpsc::channel();
    let tell = sender.clone();
    watch_signals(move |signal| tell.send(Message::Signal(signal)).is_ok(), &raft)?;
    let ended = guarded(|| Bench::new(&raft, sender, receiver)?.work(opening, &mut state));
    conclude(ended, &raft)
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

/// When the next frame is due.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
enum Due {
    Never,
    /// With the next progress frame.
    Soon,
    Now,
}

/// A part on the bench, and the files about it.
struct Desk {
    options: Options,
    recovery: Recovery,
    known: Option<Stamp>,
    watch: Watch,
}

struct Bench<'a> {
    /// Nothing while the start page waits for a choice.
    desk: Option<Desk>,
    start: Option<StartOptions>,
    raft: &'a Raft,
    receiver: Receiver<Message>,
    ranker: Ranker,
    screen: Screen<File>,
    due: Due,
    progress_drawn: Instant,
    /// The SIGCONT that follows our own stop is expected and does nothing more.
    own_stop: bool,
}

impl<'a> Bench<'a> {
    fn new(raft: &'a Raft, sender: Sender<Message>, receiver: Receiver<Message>) -> io::Result<Self> {
        read_input(&sender)?;
        let ranker = Ranker::new(move |news| {
            // The loop may be gone already; then nobody wants the news.
            let _ = sender.send(Message::News(news));
        })?;
        Ok(Self {
            desk: None,
            start: None,
            raft,
            receiver,
            ranker,
            screen: terminal::screen()?,
            due: Due::Now,
            progress_drawn: Instant::now(),
            own_stop: false,
        })
    }

    fn work(&mut self, opening: Opening, state: &mut State) -> io::Result<Ending> {
        if let Ok((columns, rows)) = crossterm::terminal::size() {
            update(state, Input::Resize(columns, rows));
        }
        let effects = match opening {
            Opening::Part(options) => self.lay_out(*options, state),
            Opening::Start(options) => {
                self.start = Some(options);
                Vec::new()
            }
        };
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
                    self.look_at_files(state);
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

    /// Puts a part on the bench: the marks of an earlier run are offered, the grasps of its file become marks.
    fn lay_out(&mut self, options: Options, state: &mut State) -> Vec<Effect> {
        let recovery = Recovery::beside(&options.grasp_path, &options.part_path, &options.part);
        let watch = Watch::new(&options.part_path, options.setup_path.as_deref());
        let known = match kept::read(&options.grasp_path, &options.part) {
            Ok((kept, stamp)) => {
                update(state, Input::Kept(kept));
                stamp
            }
            Err(mut lines) => {
                lines.push(String::new());
                lines.push("That file stays as it is, and nothing is saved into it.".to_owned());
                update(state, Input::Told { title: "saved grasps not read", lines });
                file::stamp(&options.grasp_path)
            }
        };
        if recovery.path().exists() {
            match recovery.load() {
                Ok((keeps, removals)) => update(state, Input::RecoveryFound(keeps.len() + removals.len())),
                Err(lines) => update(state, not_taken_back(lines)),
            };
        }
        self.desk = Some(Desk { options, recovery, known, watch });
        self.refresh_raft(state);
        update(state, Input::Start)
    }

    /// Opens what was chosen on the start page, or tells there why it cannot be.
    fn open(&mut self, state: &mut State, choice: &Choice) -> Vec<Effect> {
        let Some(start) = &self.start else { return Vec::new() };
        match chosen(start, choice) {
            Ok((options, told)) => match State::new(&options) {
                Ok(mut fresh) => {
                    fresh.look = state.look;
                    fresh.size = state.size;
                    fresh.message = told.or(fresh.message);
                    *state = fresh;
                    self.start = None;
                    self.lay_out(options, state)
                }
                Err(fault) => update(state, Input::Told { title: "not opened", lines: vec![fault] }),
            },
            Err(lines) => update(state, Input::Told { title: "not opened", lines }),
        }
    }

    fn wait(&self) -> Result<Message, RecvTimeoutError> {
        let progress = (self.due == Due::Soon).then(|| PROGRESS_PAUSE.saturating_sub(self.progress_drawn.elapsed()));
        let files = self.desk.as_ref().and_then(|desk| desk.watch.rest());
        match progress.into_iter().chain(files).min() {
            Some(rest) => self.receiver.recv_timeout(rest),
            None => self.receiver.recv().map_err(|_| RecvTimeoutError::Disconnected),
        }
    }

    /// Has a look at the files now and then; only a change is worth a frame.
    fn look_at_files(&mut self, state: &mut State) {
        let Some(changed) = self.desk.as_mut().and_then(|desk| desk.watch.look()) else { return };
        let before = state.on_disk;
        update(state, Input::OnDisk(changed));
        if state.on_disk != before {
            self.due = Due::Now;
        }
    }

    /// Reads part and setup as they are now.
    fn reread(&mut self) -> Input {
        let Some(desk) = &mut self.desk else { return Input::Reread(Err(Vec::new())) };
        // What changes from here on is news again.
        desk.watch.settle();
        let options = &desk.options;
        let read = || {
            let (part, _) = file::read_part_with_notes(&options.part_path).map_err(|faults| faults.lines())?;
            let setup = match &options.setup_path {
                Some(path) => file::read_setup(path).map_err(|faults| faults.lines())?,
                None => Setup::default(),
            };
            Ok(Box::new(Fresh { part: Arc::new(part), setup: options.overrides.over(setup)? }))
        };
        Input::Reread(read())
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
        self.look_at_files(state);
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
            Message::Event(Event::Key(key)) => {
                let own = keyboard::key_of(&key)?;
                if keyboard::behind_esc(&key) {
                    effects.extend(update(state, Input::Key(Key::Esc)));
                }
                Input::Key(own)
            }
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
                Effect::Save { ids, keeps, changes, reread } => {
                    let inputs = self.save(&state.opened.part, ids, &keeps, &changes, reread);
                    let after: Vec<Effect> = inputs.into_iter().flat_map(|input| update(state, input)).collect();
                    self.refresh_raft(state);
                    if state.unsaved() == 0
                        && state.removals() == 0
                        && let Some(desk) = &self.desk
                    {
                        desk.recovery.settle();
                    }
                    if let Some(ending) = self.carry_out(state, after) {
                        return Some(ending);
                    }
                }
                Effect::LoadRecovery => {
                    if let Some(desk) = &self.desk {
                        take_back(&desk.recovery, state);
                    }
                    self.refresh_raft(state);
                }
                Effect::DropRecovery => {
                    if let Some(desk) = &self.desk
                        && let Err(fault) = desk.recovery.remove()
                    {
                        let lines = vec![format!("{}: {fault}", desk.recovery.path().display())];
                        update(state, Input::Told { title: "not deleted", lines });
                    }
                }
                Effect::Reread => {
                    let input = self.reread();
                    let after = update(state, input);
                    if let Some(desk) = &mut self.desk {
                        desk.recovery = desk.recovery.for_part(&state.opened.part);
                    }
                    self.refresh_raft(state);
                    if let Some(ending) = self.carry_out(state, after) {
                        return Some(ending);
                    }
                }
                Effect::Open(choice) => {
                    let after = self.open(state, &choice);
                    if let Some(ending) = self.carry_out(state, after) {
                        return Some(ending);
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
        let unsaved = state.marks.iter().filter(|mark| !mark.saved);
        let keeps = unsaved.map(|mark| (Arc::clone(&mark.part), mark.keep.clone())).collect();
        let unsaved = Unsaved { keeps, removals: kept::removals(state) };
        self.raft.load(unsaved, self.desk.as_ref().map(|desk| &desk.recovery));
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

    /// Writes the grasp file and tells what came of it; after a save also what the file holds then.
    fn save(
        &mut self,
        part: &Arc<Part>,
        ids: Vec<u64>,
        keeps: &[Keep],
        changes: &[Change],
        reread: bool,
    ) -> Vec<Input> {
        let Some(desk) = &mut self.desk else { return Vec::new() };
        let path = &desk.options.grasp_path;
        if reread {
            desk.known = file::stamp(path);
        }
        let revision = Revision { keeps, changes, ..Revision::default() };
        match file::revise(path, &desk.options.part_path, part, &revision, desk.known.as_ref()) {
            Ok(stamp) => {
                desk.known = stamp;
                // The marks count as saved before they meet the file; what cannot be read now is told at the next start.
                let kept = kept::read(path, part).map(|(kept, _)| Input::Kept(kept));
                kept.into_iter().chain([Input::Saved(ids)]).rev().collect()
            }
            Err(fault) => {
                let changed = matches!(fault, SaveFault::ChangedMeanwhile(_));
                vec![Input::SaveFailed { lines: told(&fault), changed }]
            }
        }
    }
}

/// Takes what an earlier run left among the marks.
fn take_back(recovery: &Recovery, state: &mut State) {
    match recovery.load() {
        Ok((keeps, removals)) => {
            recovery.take();
            update(state, Input::Recovered(keeps));
            if !removals.is_empty() {
                update(state, Input::RemovalsRecovered(removals));
            }
        }
        Err(lines) => drop(update(state, not_taken_back(lines))),
    }
}
