#![doc = include_str!("reference.md")]

mod error;
mod program;
mod syntax;

pub use error::{PatternFault, PatternFaultKind};
pub use program::Pattern;
pub(super) use program::{Environments, Program, Search};
