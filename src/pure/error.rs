//! What can be wrong with a table of contributions.

use thiserror::Error;

use crate::table::TableError;

/// A table of this room that cannot be used.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum PureError {
    /// A cell, column or head line is wrong.
    #[error(transparent)]
    Table(#[from] TableError),
    /// The table does not hold the groups the method has.
    #[error("{file}: expected groups 1 to {expected} in order, found {found} rows")]
    Groups {
        /// File name.
        file: String,
        /// How many groups the method has.
        expected: usize,
        /// How many rows the file has.
        found: usize,
    },
}
