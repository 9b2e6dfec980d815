//! Everything that can end a command, and with which exit code.

use std::io;

use thiserror::Error;

use super::exit::Exit;
use crate::assemble::{AssemblyFault, SearchError};
use crate::brief::{BriefError, FractionError};
use crate::evaluate::{LibraryError, PlanFault, UnknownMolecule};
use crate::quantity::unit::UnitError;
use crate::run::FileError;
use crate::screen::{PoolError, ScreenError};

/// Why a command ends without its result.
#[derive(Debug, Error)]
pub(super) enum CliError {
    #[error("this command is not built in yet")]
    NotBuiltIn,
    #[error("{0}")]
    Usage(String),
    #[error("{argument} {fault}\n  {}", fault.remedy())]
    Quantity {
        argument: &'static str,
        fault: UnitError,
    },
    #[error("--fractions {0}\n  give one fraction for each component, such as 0.4,0.6")]
    Fractions(FractionError),
    #[error(transparent)]
    Molecule(#[from] UnknownMolecule),
    #[error(transparent)]
    Brief(#[from] BriefError),
    #[error("{}", told(file, .faults, .pool.as_deref()))]
    Plan {
        file: String,
        faults: Vec<PlanFault>,
        /// What is wrong with the pool besides.
        pool: Option<String>,
    },
    #[error(transparent)]
    Library(#[from] LibraryError),
    #[error(transparent)]
    Pool(#[from] PoolError),
    #[error(transparent)]
    File(#[from] FileError),
    #[error("{0}")]
    Threads(String),
    /// What is wrong with an assembly search.
    #[error(transparent)]
    Search(SearchError),
    /// What is wrong with the `[assembly]` of a brief.
    #[error("{}", assembly_told(file, .faults))]
    Assembly {
        file: String,
        faults: Vec<AssemblyFault>,
    },
    /// Whoever read our output has heard enough: not an error.
    #[error("the output was closed")]
    ClosedPipe,
    #[error("cannot write the output: {0}")]
    Output(io::Error),
}

impl CliError {
    /// The exit code.
    pub(super) fn exit(&self) -> Exit {
        match self {
            Self::NotBuiltIn
            | Self::Usage(_)
            | Self::Quantity { .. }
            | Self::Fractions(_)
            | Self::Molecule(_)
            | Self::Brief(_)
            | Self::Plan { .. }
            | Self::Assembly { .. }
            | Self::Library(_) => Exit::Wrong,
            Self::Search(SearchError::State(_)) => Exit::Wrong,
            Self::Search(_) => Exit::Failed,
            Self::Pool(PoolError::Read { .. }) => Exit::Failed,
            Self::Pool(_) => Exit::Wrong,
            Self::File(FileError::IsFile { .. } | FileError::IsFolder { .. }) => Exit::Wrong,
            Self::File(_) | Self::Threads(_) | Self::Output(_) => Exit::Failed,
            Self::ClosedPipe => Exit::Done,
        }
    }
}

impl From<io::Error> for CliError {
    fn from(error: io::Error) -> Self {
        if error.kind() == io::ErrorKind::BrokenPipe {
            Self::ClosedPipe
        } else {
            Self::Output(error)
        }
    }
}

impl From<ScreenError> for CliError {
    fn from(error: ScreenError) -> Self {
        match error {
            ScreenError::Pool(error) => Self::Pool(error),
            ScreenError::File(error) => Self::File(error),
            ScreenError::Threads(reason) => Self::Threads(reason),
        }
    }
}

fn told(file: &str, faults: &[PlanFault], pool: Option<&str>) -> String {
    faults
        .iter()
        .map(|fault| match fault.place {
            Some(place) => format!("{file}:{}: {}", place.line, fault.cause),
            None => format!("{file}: {}", fault.cause),
        })
        .chain(pool.map(str::to_owned))
        .collect::<Vec<_>>()
        .join("\n")
}

fn assembly_told(file: &str, faults: &[AssemblyFault]) -> String {
    let told = faults.iter().map(|fault| match fault.place() {
        Some(place) => format!("{file}:{}: {fault}", place.line),
        None => format!("{file}: {fault}"),
    });
    told.collect::<Vec<_>>().join("\n")
}
