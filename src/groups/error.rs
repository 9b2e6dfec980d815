//! What can be wrong with the files of a group set.

use thiserror::Error;

use super::pattern::PatternFault;
use crate::table::TableError;

/// A fault in the files of a group set.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum GroupsError {
    /// A table that cannot be read, or a cell that is not what it has to be.
    #[error(transparent)]
    Table(#[from] TableError),
    /// A pattern that does not compile.
    #[error("{file}:{line}: pattern `{pattern}`: {}", faults.iter().map(ToString::to_string).collect::<Vec<_>>().join("; "))]
    Pattern {
        /// File name.
        file: String,
        /// Line, from 1.
        line: u64,
        /// The pattern as it stands.
        pattern: String,
        /// Everything wrong with it.
        faults: Vec<PatternFault>,
    },
}
