//! The command line: definitions, progress, error rendering, exit codes.

use std::process::ExitCode;

/// Runs the command named on the command line.
pub fn main() -> ExitCode {
    ExitCode::from(2)
}
