//! Measured data of pairs of substances: activity coefficients at infinite
//! dilution, excess volumes, and parameters of binary activity models, each
//! with its published source.
//!
//! Nothing is built in; a user's tables come in as text. The form of the tables
//! and the equations behind every column stand in `groups/pairs/README.md`.
//! Loading checks every row alone and against the others and tells all faults
//! with file, row and column.
//!
//! Computes no activity at any composition: that is for the models. Entry
//! points: [`Pairs::read`], [`Pairs::identify`], [`Pairs::gamma_infinity`],
//! [`Pairs::excess_volume`], [`Pairs::activity_parameters`].

mod activity;
mod activity_rows;
mod collection;
mod excess_volume;
mod load;
mod member;
mod series;
mod value;

pub use activity::{ActivityParameters, InverseLinear, PairModel, PairParameters};
pub use collection::{FoundParameters, PairEntry, Pairs};
pub use excess_volume::ExcessVolume;
pub use load::PairTables;
pub use member::PairIdentity;
pub use value::{Dilution, PairValue};

/// ln γ∞ beyond which a value says more of the table than of the molecules:
/// long alkanes in water come to +25, hydrogen bonds to −6 (from memory of the
/// compilations in `results/2026-12-01-mixture-models`).
pub const PLAUSIBLE_LN_GAMMA_INFINITY: std::ops::RangeInclusive<f64> = -10.0..=40.0;
