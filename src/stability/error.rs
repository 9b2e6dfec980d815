//! What can be wrong with tables of rules and with the names of rules.

use thiserror::Error;

use crate::groups::GroupsError;
use crate::table::TableError;

/// A fault in a table of rules or reactions, or a name that is none of its rules.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum StabilityError {
    /// A table that cannot be read, or a cell that is not what it has to be.
    #[error(transparent)]
    Table(#[from] TableError),
    /// A pattern that does not compile.
    #[error(transparent)]
    Pattern(GroupsError),
    /// No rule has this name.
    #[error("there is no rule `{name}`{}\n  `groupsmith tables rules` lists them",
        nearest.as_ref().map_or(String::new(), |near| format!("; did you mean `{near}`?")))]
    UnknownRule {
        /// The name.
        name: String,
        /// The rule whose name is nearest, if one is near.
        nearest: Option<String>,
    },
}
