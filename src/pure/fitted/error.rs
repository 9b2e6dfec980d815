//! What can be wrong with a parameter file.

use thiserror::Error;

/// A parameter file that cannot be used.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
#[error(
    "{file}:{line}: {what}\n  parameter files are made by the program `fit_estimates`; do not edit them by hand"
)]
pub struct ParameterError {
    /// The file.
    pub file: String,
    /// The line, from 1.
    pub line: usize,
    /// What is wrong with it.
    pub what: String,
}
