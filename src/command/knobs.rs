//! The options every command takes, and the part, setup and scene they lead to.

use super::output::{self, Stop};
use crate::file::{self, CLOSINGS, DRIVES, TIPS};
use crate::hand::{Closing, FingerCount, Tip};
use crate::part::Part;
use crate::search::{Scene, Setup, SetupFault, TorqueScale};
use clap::Args;
use clap::builder::PossibleValuesParser;
use std::path::{Path, PathBuf};
use std::sync::Arc;

/// Values that override the setup file, which overrides the defaults.
#[derive(Debug, Clone, Default, Args)]
pub(super) struct Knobs {
    /// Setup file: friction, hand, search, floors, loads
    #[arg(long, value_name = "FILE")]
    pub(super) setup: Option<PathBuf>,
    /// Friction coefficient every score uses
    #[arg(long, value_name = "MU", allow_negative_numbers = true)]
    mu: Option<f64>,
    /// Number of fingers, 2 to 6
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u8).range(2..=6))]
    fingers: Option<u8>,
    /// Kind of finger tip
    #[arg(long, value_name = "TIP", value_parser = PossibleValuesParser::new(TIPS.map(|(word, _)| word)))]
    tip: Option<String>,
    /// How the fingers close; parallel takes two pads
    #[arg(long, value_name = "WAY", value_parser = PossibleValuesParser::new(CLOSINGS.map(|(word, _)| word)))]
    closing: Option<String>,
    /// Height of contact along the edge face, mm
    #[arg(long, value_name = "MM", allow_negative_numbers = true)]
    bite: Option<f64>,
    /// Largest force of one finger, N
    #[arg(long, value_name = "N", allow_negative_numbers = true)]
    force_limit: Option<f64>,
    /// How the squeeze is shared: each finger's force adjustable, or all equal
    #[arg(long, value_name = "DRIVE", value_parser = PossibleValuesParser::new(DRIVES.map(|(word, _)| word)))]
    drive: Option<String>,
    /// Largest distance between neighbouring sites, mm
    #[arg(long, value_name = "MM", allow_negative_numbers = true)]
    spacing: Option<f64>,
    /// Seed of the sampler
    #[arg(long, value_name = "SEED")]
    seed: Option<u64>,
    /// Most work for a ranking, in candidate sets; what is left open then is told
    #[arg(long, value_name = "SETS")]
    budget: Option<u64>,
    /// What torque is divided by to stand beside force: reach, gyration, or a length in mm
    #[arg(long, value_name = "SCALE", allow_negative_numbers = true, value_parser = torque_scale)]
    torque_scale: Option<TorqueScale>,
    /// Worker threads [default: one for each core]
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=1024))]
    threads: Option<u16>,
}

/// The meaning of a word the command line let through.
fn meaning<T: Copy>(said: Option<&String>, words: &[(&str, T)]) -> Option<T> {
    let said = said?;
    words.iter().find(|(word, _)| word == said).map(|(_, meaning)| *meaning)
}

fn torque_scale(word: &str) -> Result<TorqueScale, String> {
    match word {
        "reach" => Ok(TorqueScale::Reach),
        "gyration" => Ok(TorqueScale::Gyration),
        _ => word.parse().map(TorqueScale::Mm).map_err(|_| "give reach, gyration or a length in mm".to_owned()),
    }
}

impl Knobs {
    /// The setup in force: defaults, then the file, then the options.
    pub(super) fn setup(&self) -> Result<Setup, Stop> {
        let setup = match &self.setup {
            Some(path) => file::read_setup(path)?,
            None => Setup::default(),
        };
        self.over(setup)
    }

    /// A setup with the options laid over it.
    pub(super) fn over(&self, mut setup: Setup) -> Result<Setup, Stop> {
        if let Some(mu) = self.mu {
            setup.friction.mu = mu;
        }
        if let Some(closing) = meaning(self.closing.as_ref(), &CLOSINGS) {
            if closing == Closing::Parallel && setup.hand.closing != closing {
                // Two pads go without saying; what another option says of them is taken below.
                setup.hand.tip = Tip::Pad;
                setup.hand.fingers = FingerCount::new(2).unwrap_or(setup.hand.fingers);
            }
            setup.hand.closing = closing;
        }
        if let Some(fingers) = self.fingers.and_then(|count| FingerCount::new(count.into())) {
            setup.hand.fingers = fingers;
        }
        if let Some(tip) = meaning(self.tip.as_ref(), &TIPS) {
            setup.hand.tip = tip;
        }
        if let Some(bite) = self.bite {
            setup.hand.bite_mm = Some(bite);
        }
        if let Some(limit) = self.force_limit {
            setup.hand.force_limit_n = Some(limit);
        }
        if let Some(drive) = meaning(self.drive.as_ref(), &DRIVES) {
            setup.hand.drive = drive;
        }
        if let Some(spacing) = self.spacing {
            setup.search.spacing_mm = Some(spacing);
        }
        if let Some(seed) = self.seed {
            setup.search.seed = seed;
        }
        if let Some(budget) = self.budget {
            setup.search.budget = budget;
        }
        if let Some(scale) = self.torque_scale {
            setup.search.torque_scale = scale;
        }
        let faults = setup.faults();
        if faults.is_empty() { Ok(setup) } else { Err(Stop::Bad(faults.iter().map(|f| self.blame(f)).collect())) }
    }

    /// A scene of a part under a setup with the options laid over it.
    pub(super) fn scene(&self, part: Arc<Part>, setup: Setup) -> Result<Scene, Stop> {
        let faults = setup.faults_with(&part);
        if !faults.is_empty() {
            return Err(Stop::Bad(faults.iter().map(|fault| self.blame(fault)).collect()));
        }
        Scene::new(part, setup).map_err(|fault| Stop::bad(self.blame(&fault)))
    }

    /// A fault of the setup in force, named after the option that brought it in, or after the setup file.
    fn blame(&self, fault: &SetupFault) -> String {
        // The name of a load case comes from a file.
        file::shown(&self.blamed(fault))
    }

    fn blamed(&self, fault: &SetupFault) -> String {
        let options = [
            ("friction.mu", "--mu", self.mu.is_some()),
            ("hand.fingers", "--fingers", self.fingers.is_some()),
            ("hand.tip", "--tip", self.tip.is_some()),
            ("hand.bite_mm", "--bite", self.bite.is_some()),
            ("hand.force_limit_n", "--force-limit", self.force_limit.is_some()),
            ("search.spacing_mm", "--spacing", self.spacing.is_some()),
            ("search.budget", "--budget", self.budget.is_some()),
            ("search.torque_scale", "--torque-scale", self.torque_scale.is_some()),
        ];
        if let Some((_, option, _)) = options.iter().find(|(key, _, given)| *given && *key == fault.key) {
            return format!("{option} is {}: {}", fault.value, fault.mend);
        }
        // A value that was sound by itself is not any more beside what an option says.
        let beside = [
            ("friction.", "--mu", self.mu.is_some()),
            ("hand.tip", "--closing", self.closing.is_some()),
            ("hand.fingers", "--closing", self.closing.is_some()),
            ("hand.tip", "--fingers", self.fingers.is_some()),
            ("hand.fingers", "--tip", self.tip.is_some()),
        ];
        if let Some((_, option, _)) = beside.iter().find(|(key, _, given)| *given && fault.key.starts_with(key)) {
            return format!("with {option}: {fault}");
        }
        match &self.setup {
            Some(path) => format!("{}: {fault}", path.display()),
            None => fault.to_string(),
        }
    }

    /// True when an option changes what a grasp's scores are.
    pub(super) fn change_scores(&self) -> bool {
        let words = [&self.tip, &self.closing, &self.drive];
        let numbers = [self.mu, self.bite, self.force_limit];
        words.iter().any(|word| word.is_some()) || numbers.iter().any(Option::is_some) || self.torque_scale.is_some()
    }

    /// Runs work on as many threads as asked for.
    pub(super) fn on_threads<T: Send>(&self, work: impl FnOnce() -> T + Send) -> Result<T, Stop> {
        match self.threads {
            None => Ok(work()),
            Some(n) => {
                let pool = rayon::ThreadPoolBuilder::new().num_threads(n.into()).build();
                Ok(pool.map_err(|error| Stop::bad(format!("--threads: {error}")))?.install(work))
            }
        }
    }

    /// Makes every later piece of work run on as many threads as asked for.
    pub(super) fn use_threads_everywhere(&self) -> Result<(), Stop> {
        if let Some(n) = self.threads {
            let built = rayon::ThreadPoolBuilder::new().num_threads(n.into()).build_global();
            built.map_err(|error| Stop::bad(format!("--threads: {error}")))?;
        }
        Ok(())
    }
}

/// Reads a part and says what its file's reading noted.
pub(super) fn part(path: &Path) -> Result<Arc<Part>, Stop> {
    let (part, notes) = file::read_part_with_notes(path)?;
    output::notes(path, &notes);
    Ok(Arc::new(part))
}
