//! The `holdwright` program.

fn main() -> std::process::ExitCode {
    holdwright::command::main()
}
