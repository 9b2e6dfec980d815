//! Why a mixture figure cannot be given.

use std::sync::Arc;

use thiserror::Error;

use crate::quantity::Absent;
use crate::table::TableError;

/// Two main groups, by published number, whose interaction is not published.
///
/// Small and `Copy`, for the batch path; [`super::UnifacTables::gap_error`] puts names to it.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Error)]
#[error("no published interaction of main groups {first} and {second}")]
pub struct PairGap {
    /// The smaller main-group number.
    pub first: u16,
    /// The larger main-group number.
    pub second: u16,
}

/// A fault in a mixture calculation.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum MixtureError {
    /// A table file is wrong.
    #[error(transparent)]
    Table(#[from] TableError),
    /// A group number that the model's list does not have.
    #[error("{model} has no group {number}; `groupsmith tables` lists the groups")]
    UnknownGroup {
        /// Identifier of the model.
        model: &'static str,
        /// The number.
        number: u16,
    },
    /// A component without groups, or with groups of no surface only.
    #[error("{model}: component {component} has no groups with a surface, so it has no activity")]
    NoSurface {
        /// Identifier of the model.
        model: &'static str,
        /// The group counts as text.
        component: String,
    },
    /// The interaction of two main groups was never published.
    #[error(
        "{model}: the interaction of main groups {first_number} ({first}) and {second_number} ({second}) is not published"
    )]
    MissingPair {
        /// Identifier of the model.
        model: &'static str,
        /// Number of one main group.
        first_number: u16,
        /// Its name.
        first: Arc<str>,
        /// Number of the other main group.
        second_number: u16,
        /// Its name.
        second: Arc<str>,
    },
    /// A mixture without components.
    #[error("a mixture needs at least one component")]
    NoComponents,
    /// A vector of another length than the mixture has components.
    #[error("expected {expected} {what}, got {found}")]
    Length {
        /// What the vector holds.
        what: &'static str,
        /// Number of components.
        expected: usize,
        /// Length found.
        found: usize,
    },
    /// A fraction, molar mass or molar volume that cannot be.
    #[error("{what} of component {component} is {value}, expected {expected}")]
    Value {
        /// What it is.
        what: &'static str,
        /// Position of the component, from 1.
        component: usize,
        /// The value.
        value: f64,
        /// What would be accepted.
        expected: &'static str,
    },
    /// All fractions are zero.
    #[error("the fractions are all zero")]
    Empty,
    /// Fractions that do not add up where they have to.
    #[error("the fractions add up to {sum}, expected 1")]
    Sum {
        /// Their sum.
        sum: f64,
    },
    /// A temperature at which the model has no finite value.
    #[error(
        "{model} has no finite value at {temperature_k} K; give a temperature above 0 K at which the group interactions stay finite"
    )]
    Temperature {
        /// Identifier of the model.
        model: &'static str,
        /// The temperature in K.
        temperature_k: f64,
    },
    /// A pressure that is not a positive number.
    #[error("the pressure is {pressure_pa} Pa, expected a positive number")]
    Pressure {
        /// The pressure in Pa.
        pressure_pa: f64,
    },
    /// A vapor pressure the calculation needs is absent.
    #[error("vapor pressure of component {component}: {reason}")]
    VaporPressure {
        /// Position of the component, from 1.
        component: usize,
        /// Why there is none.
        reason: Absent,
    },
    /// The sought state does not lie between the ends of the search.
    #[error("{what}: no solution between {low} and {high}")]
    NotBracketed {
        /// What was sought.
        what: &'static str,
        /// Lower end of the search.
        low: f64,
        /// Upper end of the search.
        high: f64,
    },
    /// An iteration did not reach its tolerance.
    #[error("{what} did not converge in {iterations} steps: residual {residual:.3e} at {last:?}")]
    NotConverged {
        /// What was sought.
        what: &'static str,
        /// Steps taken.
        iterations: u32,
        /// What was left.
        residual: f64,
        /// The last iterate.
        last: Vec<f64>,
    },
    /// A calculation that is defined for two components only.
    #[error("{what} is defined for two components, got {found}")]
    NotBinary {
        /// What was asked for.
        what: &'static str,
        /// Components of the mixture.
        found: usize,
    },
}

impl MixtureError {
    /// The same fault as the reason for an absent value.
    pub fn absent(&self) -> Absent {
        match self {
            Self::MissingPair {
                model,
                first,
                second,
                ..
            } => Absent::NoInteraction {
                model,
                first: Arc::clone(first),
                second: Arc::clone(second),
            },
            Self::VaporPressure { reason, .. } => reason.clone(),
            Self::NotConverged {
                what,
                iterations,
                residual,
                ..
            } => Absent::NotConverged {
                method: what,
                iterations: *iterations,
                residual: *residual,
            },
            other => Absent::Because(other.to_string().into()),
        }
    }
}
