//! Every way out: the terminal is restored once, unsaved marks are kept, and the process ends as it should.

use super::recovery::{Recovery, Unsaved};
use super::terminal;
use crate::file;
use signal_hook::consts::{SIGCONT, SIGHUP, SIGINT, SIGTERM, SIGTSTP};
use std::io::{self, Write};
use std::panic::{self, AssertUnwindSafe};
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Arc, Mutex, MutexGuard, PoisonError};
use std::thread;
use std::time::Duration;

/// How long a signal waits for the loop before it acts alone: the loop may hang in a write to a stalled line.
const SIGNAL_PATIENCE: Duration = Duration::from_secs(3);

/// How the loop ended.
pub(super) enum Ending {
    /// By the user; unsaved marks go to the recovery file when so asked.
    Quit { recover: bool },
    /// By a signal.
    Signal(i32),
    /// The terminal is gone.
    Lost(io::Error),
}

/// What a caught panic carries.
type Broken = Box<dyn std::any::Any + Send>;

/// Takes the terminal, works, and gives the terminal back, whether the work returns or panics.
///
/// A panic of this thread restores the terminal before its message is printed. Panics of other threads are caught
/// where they happen and become a line on the screen; printing them would spoil it.
pub(super) fn guarded(work: impl FnOnce() -> io::Result<Ending>) -> Result<io::Result<Ending>, Broken> {
    let own = thread::current().id();
    let previous = Arc::new(panic::take_hook());
    let chained = Arc::clone(&previous);
    panic::set_hook(Box::new(move |info| {
        if thread::current().id() == own {
            terminal::leave();
            chained(info);
        }
    }));
    let ended = panic::catch_unwind(AssertUnwindSafe(|| {
        terminal::enter()?;
        work()
    }));
    terminal::leave();
    // A hook cannot be set while this thread panics; it does not, the panic was caught.
    panic::set_hook(Box::new(move |info| previous(info)));
    ended
}

/// Keeps what must be kept and ends as the work ended: returns, ends by the signal, or panics on.
///
/// # Errors
/// The terminal could not be taken, or was lost.
pub(super) fn conclude(ended: Result<io::Result<Ending>, Broken>, raft: &Raft) -> io::Result<()> {
    let (unsaved, recovery) = raft.take();
    if let Some(recovery) = recovery {
        if let Ok(Ok(Ending::Quit { recover: false })) = ended {
            recovery.settle();
        } else {
            leave_word(&recovery, &unsaved);
        }
    }
    raft.done();
    match ended {
        Ok(Ok(Ending::Quit { recover: false })) => Ok(()),
        // A second Ctrl-C: as if the signal had come.
        Ok(Ok(Ending::Quit { recover: true })) => signal_hook::low_level::emulate_default_handler(SIGINT),
        // What is left of the input thread ends with the process.
        Ok(Ok(Ending::Signal(signal))) => signal_hook::low_level::emulate_default_handler(signal),
        Ok(Ok(Ending::Lost(fault)) | Err(fault)) => Err(fault),
        Err(broken) => panic::resume_unwind(broken),
    }
}

/// Writes the recovery file and says so on standard error, where someone may still read it.
fn leave_word(recovery: &Recovery, unsaved: &Unsaved) {
    if unsaved.is_empty() {
        return;
    }
    let word = match recovery.write(unsaved) {
        Ok(path) if path == recovery.path() => {
            format!("kept in {}, the next start offers them", path.display())
        }
        Ok(path) => format!("kept in {}", path.display()),
        Err(fault) => format!("lost: {fault}"),
    };
    let count = unsaved.keeps.len() + unsaved.removals.len();
    let what = if unsaved.removals.is_empty() { "mark" } else { "change" };
    let marks = if count == 1 { format!("1 unsaved {what} is") } else { format!("{count} unsaved {what}s are") };
    let word = file::shown(&format!("{marks} {word}"));
    let _ = writeln!(io::stderr(), "{word}");
}

/// What is not saved and where it would go, where every way out finds them.
#[derive(Clone, Default)]
pub(super) struct Raft {
    aboard: Arc<Mutex<(Unsaved, Option<Recovery>)>>,
    done: Arc<AtomicBool>,
}

impl Raft {
    fn lock(&self) -> MutexGuard<'_, (Unsaved, Option<Recovery>)> {
        self.aboard.lock().unwrap_or_else(PoisonError::into_inner)
    }

    /// What is not saved now, and where it goes when the run is cut off.
    pub(super) fn load(&self, unsaved: Unsaved, recovery: Option<&Recovery>) {
        *self.lock() = (unsaved, recovery.cloned());
    }

    fn take(&self) -> (Unsaved, Option<Recovery>) {
        std::mem::take(&mut *self.lock())
    }

    fn done(&self) {
        self.done.store(true, Ordering::SeqCst);
    }
}

/// Tells of signals on a thread of their own; `tell` returns false when nobody listens. When the loop does not end in
/// time after a signal that should end it, this thread keeps the marks and ends the process alone.
///
/// # Errors
/// The system refuses the handlers or the thread.
pub(super) fn watch_signals(tell: impl Fn(i32) -> bool + Send + 'static, raft: &Raft) -> io::Result<()> {
    let mut signals = signal_hook::iterator::Signals::new([SIGTERM, SIGHUP, SIGINT, SIGTSTP, SIGCONT])?;
    let raft = raft.clone();
    thread::Builder::new().name("signals".to_owned()).spawn(move || {
        for signal in signals.forever() {
            let told = tell(signal);
            if !matches!(signal, SIGTERM | SIGHUP | SIGINT) {
                continue;
            }
            if told {
                thread::sleep(SIGNAL_PATIENCE);
            }
            if !raft.done.load(Ordering::SeqCst) {
                terminal::abandon();
                if let (unsaved, Some(recovery)) = raft.take()
                    && !unsaved.is_empty()
                {
                    // Nobody may be there to read a fault.
                    let _ = recovery.write(&unsaved);
                }
            }
            let _ = signal_hook::low_level::emulate_default_handler(signal);
        }
    })?;
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::file::Keep;
    use crate::part::{EdgeId, Part, PartDescription};
    use crate::search::{Scene, Setup, Spot};
    use portable_pty::{CommandBuilder, PtySize, native_pty_system};
    use std::io::Read;
    use std::path::Path;
    use std::sync::mpsc;

    const FOLDER: &str = "HOLDWRIGHT_TEST_FOLDER";

    /// Runs in a process and on a terminal of its own; see the test below.
    #[test]
    #[ignore = "started by the test below"]
    fn a_loop_that_breaks() {
        let Ok(folder) = std::env::var(FOLDER) else { return };
        let outer = vec![vec![[0.0, 0.0], [80.0, 0.0], [80.0, 40.0], [0.0, 40.0]]];
        let part = Arc::new(Part::new(PartDescription::bare("cleat", outer)).unwrap());
        let setup = Setup::default();
        let scene = Scene::new(Arc::clone(&part), setup.clone()).unwrap();
        let spot = |edge, along_mm| Spot { edge: EdgeId { ring: 0, edge }, along_mm };
        let grasp = scene.grasp(&[spot(0, 40.0), spot(2, 30.0), spot(2, 50.0)]).unwrap();
        let (assessment, _) = scene.assess(&grasp);
        let recovery = Recovery::beside(
            &Path::new(&folder).join("cleat.grasps.toml"),
            &Path::new(&folder).join("cleat.toml"),
            &part,
        );
        let raft = Raft::default();
        let keep = Keep { name: "a".into(), note: String::new(), grasp, assessment, setup, density: None };
        raft.load(Unsaved { keeps: vec![(part, keep)], removals: vec!["b".to_owned()] }, Some(&recovery));
        let ended = guarded(|| {
            // A worker's panic is silent.
            let _ = thread::spawn(|| panic!("worker broke")).join();
            panic!("loop broke");
        });
        let _ = conclude(ended, &raft);
    }

    #[test]
    fn a_panic_restores_the_terminal_once_then_says_its_message_and_keeps_the_marks() {
        let folder = tempfile::tempdir().unwrap();
        let pair =
            native_pty_system().openpty(PtySize { rows: 24, cols: 80, pixel_width: 0, pixel_height: 0 }).unwrap();
        let mut command = CommandBuilder::new(std::env::current_exe().unwrap());
        command.args(["--ignored", "--exact", "workbench::guard::tests::a_loop_that_breaks", "--nocapture"]);
        command.env(FOLDER, folder.path());
        let mut child = pair.slave.spawn_command(command).unwrap();
        drop(pair.slave);
        let mut source = pair.master.try_clone_reader().unwrap();
        let (sender, receiver) = mpsc::channel();
        thread::spawn(move || {
            let mut log = Vec::new();
            // The end of a terminal is an error on some systems; what was read until then counts.
            let _ = source.read_to_end(&mut log);
            let _ = sender.send(log);
        });
        let log = receiver.recv_timeout(Duration::from_secs(60)).unwrap();
        let log = String::from_utf8_lossy(&log);
        assert!(!child.wait().unwrap().success());
        assert_eq!(log.matches("\x1b[?1049h").count(), 1, "{log}");
        assert_eq!(log.matches("\x1b[?1049l").count(), 1, "{log}");
        let left = log.find("\x1b[?1049l").unwrap();
        let said = log.find("loop broke").unwrap();
        assert!(left < said, "the message must come after the terminal is restored: {log}");
        assert!(!log.contains("worker broke"), "{log}");
        let kept = file::read_grasps(&folder.path().join("cleat.grasps.toml.recovery")).unwrap();
        assert_eq!((kept.grasps.len(), kept.removed), (1, vec!["b".to_owned()]));
    }
}
