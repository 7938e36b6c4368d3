//! What a build is made of, for `--version`: compiler, target, profile, and the commit where there is one.

use std::env;
use std::path::Path;
use std::process::Command;

fn main() {
    println!("cargo:rerun-if-changed=src/build.rs");
    let rustc = env::var("RUSTC").unwrap_or_else(|_| "rustc".to_owned());
    let known = |text: Option<String>| text.unwrap_or_else(|| "unknown".to_owned());
    println!("cargo:rustc-env=HOLDWRIGHT_RUSTC={}", known(line_of(&rustc, &["--version"])));
    println!("cargo:rustc-env=HOLDWRIGHT_TARGET={}", known(env::var("TARGET").ok()));
    println!("cargo:rustc-env=HOLDWRIGHT_PROFILE={}", known(env::var("PROFILE").ok()));
    println!("cargo:rustc-env=HOLDWRIGHT_COMMIT={}", known(commit()));
}

/// The commit that is checked out, where the sources are a git working tree of their own and git is there to say so.
fn commit() -> Option<String> {
    let own = Path::new(&env::var_os("CARGO_MANIFEST_DIR")?).canonicalize().ok()?;
    // Sources unpacked inside another tree are not of its commits.
    let top = line_of("git", &["rev-parse", "--show-toplevel"])?;
    if Path::new(&top).canonicalize().ok()? != own {
        return None;
    }
    // Every commit and every checkout writes a line there.
    let log = line_of("git", &["rev-parse", "--git-path", "logs/HEAD"]).filter(|log| Path::new(log).exists());
    if let Some(log) = log {
        println!("cargo:rerun-if-changed={log}");
    }
    line_of("git", &["rev-parse", "--short=12", "HEAD"])
}

/// The one line a program answers; nothing when it cannot be run, fails, or says something else.
fn line_of(program: &str, args: &[&str]) -> Option<String> {
    let answer = Command::new(program).args(args).output().ok().filter(|answer| answer.status.success())?;
    let text = String::from_utf8(answer.stdout).ok()?;
    let line = text.trim();
    (!line.is_empty() && !line.contains('\n')).then(|| line.to_owned())
}
