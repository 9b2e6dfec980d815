//! Estimates fitted to measured data: a linear sum over atom environments,
//! corrected by what is known of similar molecules.
//!
//! The parameters stand in `groups/estimates/` and are made by the development
//! program `fit_estimates`. Nothing here is fitted at run time.
//!
//! Two levels. The **count level** is a closing function of linear sums over
//! first-order environments, which pieces of a molecule settle. The **structure
//! level** adds environments that need the whole structure, and the correction.
//!
//! Entry points: [`Fitted::built_in`], [`Fitted::describe`], [`Fitted::predict`].

mod count;
mod described;
mod error;
mod family;
mod model;
mod parameters;
mod quantity;
mod scale;
mod support;
mod table;
mod volume;

pub use count::{ClassCounts, CountModel, PieceSum};
pub use described::{Described, Known};
pub use error::ParameterError;
pub use family::Family;
pub use model::{
    Interval, Model, Prediction, Relatives, Supporting, has_new_kind_of_atom, has_unknown_atoms,
    rarity, similarity, unknown_environments,
};
pub use parameters::{Fitted, FittedInput, write_environments, write_model, write_molecules};
pub use quantity::{Level, PerAtom, Quantity, Terms};
pub use scale::{Ground, Scale, Signs, SizeClass, Standing};
pub use support::Support;
pub use table::{EnvironmentEntry, EnvironmentTable, classes_of};
pub use volume::{expansion_to_298, volume_carried, volume_temperature_k};
