//! What can be wrong with a table file.

use thiserror::Error;

/// A fault in a table file, with the place where it stands.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum TableError {
    /// The text is not CSV.
    #[error("{file}:{line}: not readable as CSV: {reason}")]
    Csv {
        /// File name.
        file: String,
        /// Line, from 1.
        line: u64,
        /// What the reader said.
        reason: String,
    },
    /// The comment block at the top lacks a fact every table states.
    #[error("{file}: the head of the table has no `# {fact}: …` line")]
    MissingFact {
        /// File name.
        file: String,
        /// The fact.
        fact: &'static str,
    },
    /// A column is missing or stands twice.
    #[error("{file}:{line}: column `{column}` {fault}")]
    Column {
        /// File name.
        file: String,
        /// Line of the column heads.
        line: u64,
        /// Column name.
        column: String,
        /// `is missing`, `stands twice`, …
        fault: &'static str,
    },
    /// A column is not given in the unit the program converts from.
    #[error("{file}:{line}: column `{column}` is in `{found}`, expected `{expected}`")]
    Unit {
        /// File name.
        file: String,
        /// Line of the units row.
        line: u64,
        /// Column name.
        column: String,
        /// The unit in the file.
        found: String,
        /// The unit that is understood.
        expected: String,
    },
    /// One cell does not hold what its column needs.
    #[error("{file}:{line}: column `{column}`: {fault} (found `{found}`)")]
    Cell {
        /// File name.
        file: String,
        /// Line, from 1.
        line: u64,
        /// Column name.
        column: String,
        /// The cell as it stands.
        found: String,
        /// What is wrong with it.
        fault: String,
    },
}

impl TableError {
    /// File name and line, from 1; line 0 where the whole head is meant.
    pub fn place(&self) -> (&str, u64) {
        match self {
            Self::Csv { file, line, .. }
            | Self::Column { file, line, .. }
            | Self::Unit { file, line, .. }
            | Self::Cell { file, line, .. } => (file, *line),
            Self::MissingFact { file, .. } => (file, 0),
        }
    }
}
