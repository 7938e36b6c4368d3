//! What is asked: the command line, its exit codes, one file for each command.

mod check;
mod columns;
mod completions;
mod drawing;
mod import;
mod json;
mod knobs;
mod loads;
mod materials;
mod output;
mod progress;
mod rank;
mod reading;
mod recheck;
mod score;
mod sheet;

use crate::file::{self, shown};
use crate::workbench;
use clap::{Args, CommandFactory, Parser, Subcommand, ValueEnum};
use knobs::Knobs;
use output::{Answer, Stop};
use std::io::{self, IsTerminal, Write};
use std::path::{Path, PathBuf};
use std::process::ExitCode;

/// Says where fingers, jaws or clamps should touch a flat part, and what the grip can take.
#[derive(Debug, Parser)]
#[command(
    version,
    long_version = completions::BUILD,
    args_conflicts_with_subcommands = true,
    after_help = "Without a command the workbench opens on PART, without PART on a page to choose one; a part named like a command is opened as ./NAME.\n\
                  Exit codes: 0 done, 1 the answer is no (check, sheet), 2 bad usage or input, 3 internal fault."
)]
struct Cli {
    #[command(flatten)]
    open: Open,
    #[command(subcommand)]
    command: Option<Command>,
}

#[derive(Debug, Args)]
struct Open {
    /// Part file to open the workbench on; a drawing (DXF, SVG) becomes one first
    part: Option<PathBuf>,
    #[command(flatten)]
    knobs: Knobs,
    /// File grasps are kept in [default: PART with the ending .grasps.toml]
    #[arg(long, value_name = "FILE")]
    grasps: Option<PathBuf>,
    /// When to use colours
    #[arg(long, value_enum, default_value_t = ColorWord::Auto)]
    color: ColorWord,
    /// What to draw the outline with [default: by locale]
    #[arg(long, value_enum)]
    marker: Option<MarkerWord>,
}

#[derive(Debug, Clone, Copy, ValueEnum)]
enum ColorWord {
    Auto,
    Always,
    Never,
}

#[derive(Debug, Clone, Copy, ValueEnum)]
enum MarkerWord {
    Ascii,
    Line,
    Braille,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Rank grasps of a part
    Rank(rank::RankArgs),
    /// Score given contacts
    Score(score::ScoreArgs),
    /// Score saved grasps again; exit code 1 when one no longer holds or the part changed
    Check(check::CheckArgs),
    /// Make a part file of the outline in a DXF or SVG drawing
    Import(import::ImportArgs),
    /// List the built-in densities and friction pairs with their sources
    Materials(materials::MaterialsArgs),
    /// Make a page to print of each saved grasp; exit code 1 when one no longer holds or the part changed
    Sheet(sheet::SheetArgs),
    /// Print the default setup as a file to start from
    Setup,
    /// Print the completions of a shell
    Completions(completions::CompletionsArgs),
    /// Print a page of the manual, as roff
    Man(completions::ManArgs),
}

/// Runs the program on its command line.
pub fn main() -> ExitCode {
    std::panic::set_hook(Box::new(|panic| {
        let payload = panic.payload();
        let said = payload.downcast_ref::<&str>().copied().or(payload.downcast_ref::<String>().map(String::as_str));
        let said = said.unwrap_or("no message");
        let place = panic.location().map_or(String::new(), |at| format!(" ({}:{})", at.file(), at.line()));
        let _ = writeln!(io::stderr(), "error: internal fault: {}{place}", shown(said));
    }));
    let cli = match Cli::try_parse() {
        Ok(cli) => cli,
        Err(usage) => {
            // Help and version come this way too; a closed pipe is no error.
            let _ = usage.print();
            return ExitCode::from(if usage.use_stderr() { 2 } else { 0 });
        }
    };
    match std::panic::catch_unwind(|| run(cli)) {
        Ok(Ok(Answer::Done)) | Ok(Err(Stop::Closed)) => ExitCode::SUCCESS,
        Ok(Ok(Answer::No)) => ExitCode::from(1),
        Ok(Err(Stop::Bad(lines))) => {
            for line in lines {
                let _ = writeln!(io::stderr(), "error: {line}");
            }
            ExitCode::from(2)
        }
        Ok(Err(Stop::Output(error))) => {
            let _ = writeln!(io::stderr(), "error: standard output: {error}");
            ExitCode::from(3)
        }
        // The hook has said what happened.
        Err(_) => ExitCode::from(3),
    }
}

fn run(cli: Cli) -> Result<Answer, Stop> {
    match cli.command {
        None => open(cli.open),
        Some(Command::Rank(args)) => rank::run(&args),
        Some(Command::Score(args)) => score::run(&args),
        Some(Command::Check(args)) => check::run(&args),
        Some(Command::Import(args)) => import::run(&args),
        Some(Command::Materials(args)) => materials::run(&args),
        Some(Command::Sheet(args)) => sheet::run(&args),
        Some(Command::Completions(args)) => completions::completions(&args, Cli::command()),
        Some(Command::Man(args)) => completions::man(&args, Cli::command()),
        Some(Command::Setup) => {
            output::print(&file::default_setup_text())?;
            Ok(Answer::Done)
        }
    }
}

fn open(args: Open) -> Result<Answer, Stop> {
    let terminal = io::stdin().is_terminal() && io::stdout().is_terminal();
    let Some(part_path) = args.part.clone() else {
        return if terminal { start(&args) } else { Err(Stop::Bad(how_to())) };
    };
    if !terminal {
        return Err(Stop::bad(format!(
            "the workbench needs a terminal for input and output; `holdwright rank {}` lists grasps without one",
            shown(&part_path.display().to_string())
        )));
    }
    let part_path = if drawing::is_drawing(&part_path) {
        match drawing::ask(&part_path, &mut io::stdin().lock(), &mut io::stdout())? {
            drawing::Asked::Open(written) => written,
            drawing::Asked::Left => return Ok(Answer::Done),
            drawing::Asked::Refused(lines) => return Err(Stop::Bad(lines)),
        }
    } else {
        part_path
    };
    let part = knobs::part(&part_path)?;
    let setup = args.knobs.setup()?;
    args.knobs.use_threads_everywhere()?;
    let options = workbench::Options {
        grasp_path: args.grasps.clone().unwrap_or_else(|| file::default_grasp_path(&part_path)),
        part_path,
        setup_path: args.knobs.setup.clone(),
        part,
        setup,
        color: args.color(),
        marker: args.marker(),
        overrides: args.overrides(),
    };
    workbench::run(options).map_err(|stopped| Stop::bad(stopped.to_string()))?;
    Ok(Answer::Done)
}

/// What to do where there is no terminal for the start page.
fn how_to() -> Vec<String> {
    [
        "name a part file, or start on a terminal to choose one; without a terminal:",
        "  holdwright rank PART.toml                      lists grasps of a part",
        "  holdwright import DRAWING -o PART.toml         makes a part file of a DXF or SVG drawing",
        "  holdwright --help                              lists everything else",
    ]
    .map(str::to_owned)
    .into()
}

/// The page that is shown where no part is named.
fn start(args: &Open) -> Result<Answer, Stop> {
    // What cannot be used is said before the screen is taken.
    args.knobs.setup()?;
    args.knobs.use_threads_everywhere()?;
    let here = Path::new("");
    let mut found = file::parts_in(Path::new("."));
    found.iter_mut().for_each(|(path, _)| *path = path.strip_prefix(".").map_or(path.clone(), Path::to_owned));
    found.extend(file::parts_in(Path::new("parts")));
    let options = workbench::StartOptions {
        found: found.into_iter().map(|(path, name)| workbench::start::Found { path, name }).collect(),
        folder: here.to_owned(),
        setup_path: args.knobs.setup.clone(),
        overrides: args.overrides(),
        grasp_path: args.grasps.clone(),
        color: args.color(),
        marker: args.marker(),
    };
    workbench::run_start(options).map_err(|stopped| Stop::bad(stopped.to_string()))?;
    Ok(Answer::Done)
}

impl Open {
    fn color(&self) -> workbench::ColorChoice {
        match self.color {
            ColorWord::Auto => workbench::ColorChoice::Auto,
            ColorWord::Always => workbench::ColorChoice::Always,
            ColorWord::Never => workbench::ColorChoice::Never,
        }
    }

    fn marker(&self) -> Option<workbench::Marker> {
        self.marker.map(|word| match word {
            MarkerWord::Ascii => workbench::Marker::Ascii,
            MarkerWord::Line => workbench::Marker::Line,
            MarkerWord::Braille => workbench::Marker::Braille,
        })
    }

    fn overrides(&self) -> workbench::Overrides {
        let knobs = self.knobs.clone();
        workbench::Overrides::new(move |setup| {
            knobs.over(setup).map_err(|stop| match stop {
                Stop::Bad(lines) => lines,
                Stop::Closed | Stop::Output(_) => Vec::new(),
            })
        })
    }
}
