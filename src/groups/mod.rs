//! Group sets, the pattern language, and the breakdown of a molecule into groups.
//!
//! Does no thermodynamics and no file work: table texts come in as strings.

mod counts;

pub use counts::GroupCounts;
