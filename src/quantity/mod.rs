//! Physical quantities: what a property is called, which unit it has, and how
//! a value or the reason for its absence is carried around.
//!
//! This room knows no chemistry and no files. Entry points: [`Property`],
//! [`Estimate`], [`Absent`], and [`unit::parse`] for text with a unit.

mod estimate;
pub mod number;
mod property;
pub mod unit;

pub use estimate::{Absent, Estimate, Flag, Flags, Outcome, Status};
pub use property::{Property, PropertySet};
pub use unit::Dimension;

/// Molar gas constant in J/(mol K), exact since the 2019 SI (CODATA 2018).
pub const GAS_CONSTANT_J_PER_MOL_K: f64 = 8.314_462_618_153_24;

/// Standard atmosphere in Pa: the pressure of a *normal* boiling point.
pub const STANDARD_ATMOSPHERE_PA: f64 = 101_325.0;

/// Reference temperature in K of tabulated formation properties and densities.
pub const REFERENCE_TEMPERATURE_K: f64 = 298.15;
