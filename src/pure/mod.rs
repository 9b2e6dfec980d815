//! Pure-component methods on group counts and the structure facts that travel
//! with them.
//!
//! Never sees a molecule graph: counts come in as [`GroupCounts`], what counts
//! alone cannot tell as [`StructureFacts`], measured values as estimates of
//! status *measured* that replace what a method would say. An additive method
//! keeps its halves apart (linear sums, then a closing function whose
//! direction of growth is declared), because a search bounds with the halves.
//!
//! Entry points: [`estimate_all`] for every property of one molecule,
//! [`METHODS`] for what is built in, [`joback::Contributions`] for the additive
//! method, [`corresponding_states`] for the relations between constants.
//!
//! [`GroupCounts`]: crate::groups::GroupCounts

mod additive;
pub mod corresponding_states;
mod error;
mod estimates;
mod facts;
pub mod fitted;
pub mod joback;
mod method;

pub use additive::{Growth, Input};
pub use error::PureError;
pub use estimates::{
    Estimates, Given, PureMethods, density_of_fitted_volume, enthalpy_of_vaporization_of_slope,
    estimate_all, estimate_some, vapor_pressure_curve,
};
pub use facts::StructureFacts;
pub use method::{METHODS, Method, Role, default_method, methods_of, with_inputs};
