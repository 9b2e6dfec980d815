//! The user's job file: TOML text becomes a checked [`Brief`] in SI units.
//!
//! Two steps: `raw` mirrors the file, every field as written with its place,
//! unknown keys refused; `check` gives the fields their meaning. Both collect
//! faults instead of stopping at the first, so that [`Brief::read`] reports
//! every one with its line, its cause and a remedy.
//!
//! This room judges shape, names and units. It does not know whether a
//! component, a group or a pattern exists: those texts are kept with their
//! [`Place`] for whoever binds the brief to tables and data. It computes no
//! property; what figures there are comes in as a [`FigureCatalog`]. Its only
//! file work is [`Brief::load`], which reads the brief itself.
//!
#![doc = include_str!("reference.md")]

mod catalog;
mod check;
mod error;
mod fractions;
mod load;
mod place;
mod raw;
mod structure;
mod target;
mod types;

pub use catalog::{Figure, FigureCatalog, Model, Need, Needs};
pub use error::{BriefError, Cause, Fault, Faults};
pub use fractions::{FRACTION_SUM_TOLERANCE, FractionError, checked_fractions};
pub use place::{Located, Place};
pub use structure::{CountRange, GroupLimit, PatternLimit, Structure};
pub use target::{Direction, Target, Want};
pub use types::{
    Assembly, Basis, Brief, DEFAULT_KEEP_BEST, Job, LARGEST_KEEP_BEST, Mixture, Pool, RankBy,
    Ranking, SolventToFeed,
};

/// The fields of a brief as a page of Markdown: documentation and help text.
pub const REFERENCE: &str = include_str!("reference.md");
