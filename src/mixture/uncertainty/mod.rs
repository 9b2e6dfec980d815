//! How far ln γ∞ of a model may be from a measurement: errors by chemical class
//! of solute and solvent, fitted to measured values and read from a table.
//!
//! The value of the model is never changed. An error has a middle (the bias of
//! its classes) and a width; the 90 % interval around the value may therefore
//! reach further on one side than on the other.

mod class;
mod dilution;
mod parameters;

pub(in crate::mixture) use class::ClassMasks;
pub use class::{ChemicalClass, Likeness};
pub use dilution::{ActivityErrors, ErrorModel, LnError};
