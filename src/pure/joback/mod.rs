//! The additive method of Joback and Reid (1987): eleven properties from 41 groups.
//!
//! [`Contributions::sums`] is the linear half, [`close`] the closing half, and
//! [`growth`] says in which direction each input moves the closing function.

mod closing;
mod contributions;

pub use closing::{State, close, growth};
pub use contributions::{Contributions, LinearSums, Term};

/// Identifier of the method and of its group set's estimates.
pub const ID: &str = "joback-reid";

/// How many groups the method has.
pub const GROUPS: usize = 41;
