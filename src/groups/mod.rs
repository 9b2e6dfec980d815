//! Group sets, the pattern language, and the breakdown of a molecule into groups.
//!
//! Does no thermodynamics and no file work: table texts come in as strings.
//! Entry points: [`GroupSet::read`], [`Breaker`], [`Pattern::compile`].

mod breakdown;
mod built_in;
mod counts;
mod cover;
mod describe;
pub mod environment;
mod error;
mod features;
pub mod pattern;
mod set;

pub use breakdown::{ATOM_LIMIT, Breakdown, Breaker, Coverage, Piece};
pub use built_in::{SetId, SetTexts};
pub use counts::GroupCounts;
pub use error::GroupsError;
pub use pattern::Pattern;
pub use set::{Group, GroupSet};
