//! The command line: definitions, look-ups, progress, error rendering, exit codes.
//!
//! The only room that knows the terminal. Results go to standard output, all
//! else to standard error. Entry point: [`main`].

mod args;
mod assemble;
mod breakdown;
mod check;
mod error;
mod exit;
mod family;
mod mixture;
mod molecules;
mod output;
mod own_data;
mod pair_tables;
mod progress;
mod properties;
mod screen;
mod tables;
mod user_tables;

use std::process::ExitCode;

use clap::Parser;
use clap::error::ErrorKind;

use args::{Arguments, Command};
use error::CliError;
use exit::Exit;
use user_tables::Sources;

/// Runs the command named on the command line.
pub fn main() -> ExitCode {
    let arguments = match Arguments::try_parse() {
        Ok(arguments) => arguments,
        Err(error) => {
            // Help and version are what was asked for; anything else is a fault.
            let asked = matches!(
                error.kind(),
                ErrorKind::DisplayHelp | ErrorKind::DisplayVersion
            );
            // That nobody listens to the end does not make it another case.
            let _ = error.print();
            return match asked {
                true => Exit::Done.into(),
                false => Exit::Wrong.into(),
            };
        }
    };
    match run(&arguments) {
        Ok(exit) => exit.into(),
        Err(CliError::ClosedPipe) => Exit::Done.into(),
        Err(error) => {
            output::complain(&error.to_string());
            error.exit().into()
        }
    }
}

fn run(arguments: &Arguments) -> Result<Exit, CliError> {
    let notes = output::Notes::new(arguments.quiet);
    let sources = Sources::new(arguments, notes)?;
    match &arguments.command {
        Command::Breakdown(command) => breakdown::run(command, &sources.library(None)?, notes),
        Command::Properties(command) => properties::run(command, &sources.library(None)?, notes),
        Command::Mixture(command) => mixture::run(command, &sources, notes),
        Command::Screen(command) => screen::run(command, &sources, notes),
        Command::Tables(command) => tables::run(command, &sources.library(None)?),
        Command::Check(command) => check::run(command, &sources),
        Command::Assemble(command) => assemble::run(command, &sources, notes),
        Command::Gather(command) => assemble::gather(command, &sources, notes),
        Command::Report(_) => Err(CliError::NotBuiltIn),
    }
}
