//! Numerical tools without chemistry: roots of one unknown, small dense
//! equations, finite differences, the normal distribution; [`lanes`] for numbers
//! side by side.
//!
//! Every iteration has a limit; running into it is an error that carries the
//! residual, the number of steps and the last iterate.

mod difference;
pub mod lanes;
mod linear;
mod normal;
mod root;

pub use difference::central_difference;
pub use linear::solve_dense;
pub use normal::{NORMAL_90, normal_cdf, normal_density, normal_moments};
pub use root::{Root, RootError, RootTolerance, bracketed_root, rising_root};
