#![doc = include_str!("reference.md")]

mod error;
mod filing;
mod list;
mod program;
mod syntax;

pub use error::{PatternFault, PatternFaultKind};
pub(super) use filing::Filing;
pub use list::{PatternFinder, PatternList};
pub use program::Pattern;
pub(super) use program::{Environments, Program, Search};
