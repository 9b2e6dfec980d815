//! The `groupsmith` command: everything lives in the library.

fn main() -> std::process::ExitCode {
    groupsmith::cli::main()
}
