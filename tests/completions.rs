//! What is made from the definitions of the commands: completions of shells, the manual, the answer to `--version`.
#![allow(clippy::unwrap_used, reason = "a test that cannot go on has failed")]

mod shell;

use shell::{Bench, command, complaints, err, out};
use std::io::Write;
use std::process::Command;

#[test]
fn completions_and_manual_come_from_the_commands() {
    let bench = Bench::new();
    let run = |args: &[&str]| {
        let made = bench.run(args);
        assert_eq!((made.status.code(), err(&made)), (Some(0), ""), "{args:?}");
        out(&made).to_owned()
    };
    for shell in ["bash", "zsh", "fish", "powershell"] {
        let text = run(&["completions", shell]);
        for word in ["holdwright", "materials", "datum", "parallel"] {
            assert!(text.contains(word), "{shell}: {word}");
        }
    }
    // Shells that are here read what they are given.
    for shell in ["bash", "zsh", "fish"] {
        let script = bench.write("completions", &run(&["completions", shell]));
        match Command::new(shell).arg("-n").arg(&script).output() {
            Ok(read) => assert!(read.status.success() && read.stderr.is_empty(), "{shell}: {read:?}"),
            Err(_) => drop(writeln!(std::io::stderr(), "SKIPPED syntax of the completions: no {shell} on the path")),
        }
    }
    let whole = run(&["man"]);
    assert!(whole.contains(".TH holdwright 1") && whole.contains("holdwright\\-sheet(1)"), "{whole}");
    let sheet = run(&["man", "sheet"]);
    assert!(sheet.contains(".TH holdwright-sheet 1") && sheet.contains("\\-\\-datum"), "{sheet}");
    assert!(
        complaints(&bench.run(&["man", "shet"]))[0]
            .starts_with("error: there is no command \"shet\"; there are rank, ")
    );
    match Command::new("man")
        .args(["--warnings", "-l"])
        .arg(bench.write("sheet.1", &whole))
        .env("MANWIDTH", "80")
        .output()
    {
        Ok(page) => assert!(page.status.success() && page.stderr.is_empty(), "{page:?}"),
        Err(_) => drop(writeln!(std::io::stderr(), "SKIPPED layout of the manual: no man on the path")),
    }
}

#[test]
fn version_in_long_tells_the_build() {
    let version = |flag: &str| out(&command(&[flag]).output().unwrap()).to_owned();
    let first = concat!("holdwright ", env!("CARGO_PKG_VERSION"));
    assert_eq!(version("-V"), format!("{first}\n"));
    let long = version("--version");
    let lines: Vec<_> = long.lines().collect();
    let keys: Vec<_> = lines[1..].iter().map(|line| line.split_once(':').unwrap().0).collect();
    assert_eq!((lines[0], &keys[..]), (first, &["rustc", "target", "profile", "commit"][..]));
    assert!(lines.iter().all(|line| line.len() <= 80) && lines[1].contains("rustc 1."), "{long}");
}
