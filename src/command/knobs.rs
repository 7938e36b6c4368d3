//! The options every command takes, and the part, setup and scene they lead to.

use super::output::{self, Stop};
use crate::file::{self, TIPS};
use crate::hand::FingerCount;
use crate::part::Part;
use crate::search::{Scene, Setup, SetupFault, TorqueScale};
use clap::Args;
use clap::builder::PossibleValuesParser;
use std::path::{Path, PathBuf};
use std::sync::Arc;

/// Values that override the setup file, which overrides the defaults.
#[derive(Debug, Clone, Args)]
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
    /// Largest distance between neighbouring sites, mm
    #[arg(long, value_name = "MM", allow_negative_numbers = true)]
    spacing: Option<f64>,
    /// Seed of the sampler
    #[arg(long, value_name = "SEED")]
    seed: Option<u64>,
    /// Candidate sets looked at before sampling takes over
    #[arg(long, value_name = "SETS")]
    budget: Option<u64>,
    /// What torque is divided by to stand beside force: reach, gyration, or a length in mm
    #[arg(long, value_name = "SCALE", allow_negative_numbers = true, value_parser = torque_scale)]
    torque_scale: Option<TorqueScale>,
    /// Worker threads [default: one for each core]
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=1024))]
    threads: Option<u16>,
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
        let setup = self.over(setup)?;
        if !setup.loads.is_empty() {
            output::note("the setup's load cases are read and kept, but not scored yet");
        }
        Ok(setup)
    }

    /// A setup with the options laid over it.
    pub(super) fn over(&self, mut setup: Setup) -> Result<Setup, Stop> {
        if let Some(mu) = self.mu {
            setup.friction.mu = mu;
        }
        if let Some(fingers) = self.fingers.and_then(|count| FingerCount::new(count.into())) {
            setup.hand.fingers = fingers;
        }
        if let Some(&(_, tip)) = self.tip.as_ref().and_then(|said| TIPS.iter().find(|(word, _)| word == said)) {
            setup.hand.tip = tip;
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

    /// A fault of the setup in force, named after the option that brought it in.
    fn blame(&self, fault: &SetupFault) -> String {
        let option = match fault.key.as_str() {
            "friction.mu" => "--mu",
            "search.spacing_mm" => "--spacing",
            "search.budget" => "--budget",
            "search.torque_scale" => "--torque-scale",
            _ if self.mu.is_some() && fault.key.starts_with("friction.") => return format!("with --mu: {fault}"),
            _ => return fault.to_string(),
        };
        format!("{option} is {}: {}", fault.value, fault.mend)
    }

    /// True when an option changes what a grasp's scores are.
    pub(super) fn change_scores(&self) -> bool {
        self.mu.is_some() || self.torque_scale.is_some()
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

/// A scene of a part under the setup in force.
pub(super) fn scene(part: Arc<Part>, setup: Setup) -> Result<Scene, Stop> {
    Scene::new(part, setup).map_err(|fault| Stop::bad(fault.to_string()))
}
