//! Why pieces or a search are refused.

use thiserror::Error;

use crate::brief::Place;
use crate::table::TableError;

/// A table of pieces that cannot be used.
#[derive(Debug, Error)]
pub enum PieceError {
    /// A table.
    #[error(transparent)]
    Table(#[from] TableError),
}

/// What is wrong with the `[assembly]` of a brief beside the table of pieces.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum AssemblyFault {
    /// A name that is neither a piece nor a class nor a limit.
    #[error(
        "`{name}` is no piece, class of pieces or limit{}\n  `groupsmith tables pieces` lists them",
        like.as_ref().map_or_else(String::new, |like| format!("; did you mean `{like}`?"))
    )]
    Unknown {
        /// Where it stands.
        place: Place,
        /// The name.
        name: String,
        /// The name that was probably meant.
        like: Option<String>,
    },
    /// More than can be counted.
    #[error("assembly.{what}: {most} is more than the {limit} that a search can take")]
    TooMany {
        /// The limit.
        what: &'static str,
        /// What is asked for.
        most: u32,
        /// What can be.
        limit: u32,
    },
    /// A lower limit above the upper one.
    #[error("assembly.{what}: at least {least} and at most {most} leave nothing")]
    Crossed {
        /// The limit.
        what: &'static str,
        /// Lower limit.
        least: u32,
        /// Upper limit.
        most: u32,
    },
    /// Nothing to build from.
    #[error("assembly.pieces leaves no piece to build from")]
    NoPieces,
}

impl AssemblyFault {
    /// Where in the brief, if it has a place.
    pub fn place(&self) -> Option<Place> {
        match self {
            Self::Unknown { place, .. } => Some(*place),
            _ => None,
        }
    }
}
