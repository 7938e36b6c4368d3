//! `completions` and `man`: what a shell and a reader of manuals need, made from the definitions of the commands.

use super::output::{self, Answer, Stop};
use crate::file::shown;
use clap::{Args, Command};
use clap_complete::Shell;
use clap_mangen::Man;

/// Long answer to `--version`: the version and what the build is made of.
pub(super) const BUILD: &str = concat!(
    env!("CARGO_PKG_VERSION"),
    "\nrustc:   ",
    env!("HOLDWRIGHT_RUSTC"),
    "\ntarget:  ",
    env!("HOLDWRIGHT_TARGET"),
    "\nprofile: ",
    env!("HOLDWRIGHT_PROFILE"),
    "\ncommit:  ",
    env!("HOLDWRIGHT_COMMIT")
);

#[derive(Debug, Args)]
pub(super) struct CompletionsArgs {
    /// The shell
    #[arg(value_enum)]
    shell: Shell,
}

#[derive(Debug, Args)]
pub(super) struct ManArgs {
    /// Command whose page is asked for [default: the page of the program]
    command: Option<String>,
}

/// Prints the completions of a shell.
pub(super) fn completions(args: &CompletionsArgs, mut program: Command) -> Result<Answer, Stop> {
    let name = program.get_name().to_owned();
    let mut text = Vec::new();
    clap_complete::generate(args.shell, &mut program, name, &mut text);
    output::print_bytes(&text)?;
    Ok(Answer::Done)
}

/// Prints a page of the manual as roff.
pub(super) fn man(args: &ManArgs, program: Command) -> Result<Answer, Stop> {
    let page = match &args.command {
        None => program.version(env!("CARGO_PKG_VERSION")),
        Some(name) => {
            let found = program.find_subcommand(name).cloned();
            let Some(command) = found else {
                let names: Vec<_> = program.get_subcommands().map(Command::get_name).collect();
                let names = names.join(", ");
                return Err(Stop::bad(format!("there is no command \"{}\"; there are {names}", shown(name))));
            };
            // Named as the page of the program refers to it.
            let title = format!("{}-{name}", program.get_name());
            command.name(title.clone()).display_name(title).version(env!("CARGO_PKG_VERSION"))
        }
    };
    let mut text = Vec::new();
    // The title line gives its words by place: an empty date would not be seen, and the version be taken for it.
    Man::new(page).date(" ").manual("User Commands").render(&mut text)?;
    output::print_bytes(&text)?;
    Ok(Answer::Done)
}
