//! What can be wrong with data tables, names and temperatures.

use std::fmt;
use std::sync::Arc;

use thiserror::Error;

use crate::quantity::Absent;
use crate::table::TableError;

/// Data tables that cannot be used.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum DataError {
    /// Faults in the tables of one layer, in the order of files and rows.
    #[error("{}", Lines(.faults))]
    Tables {
        /// Every fault found, never empty.
        faults: Vec<TableError>,
    },
}

struct Lines<'a>(&'a [TableError]);

impl fmt::Display for Lines<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (position, fault) in self.0.iter().enumerate() {
            if position > 0 {
                f.write_str("\n")?;
            }
            write!(f, "{fault}")?;
        }
        Ok(())
    }
}

/// A name that leads to no single substance.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum NameError {
    /// No substance is called so.
    #[error("no substance is called `{name}`{}", Nearest(.nearest))]
    Unknown {
        /// The name as given.
        name: String,
        /// Known names that are spelled much like it, the nearest first.
        nearest: Vec<Arc<str>>,
    },
    /// The name is in use for several substances.
    #[error("`{name}` may mean {}: say which", Choice(.candidates))]
    Ambiguous {
        /// The name as given.
        name: String,
        /// The substances it may mean, by their first name.
        candidates: Vec<Arc<str>>,
    },
    /// Written like a CAS number, but the last digit does not fit the others.
    #[error("`{text}` is not a CAS number: its check digit should be {expected}")]
    CasCheckDigit {
        /// The text as given.
        text: String,
        /// The digit that would fit.
        expected: u8,
    },
    /// A sound CAS number that is in no table.
    #[error("no substance with CAS number {cas} is in the tables; a SMILES will do instead")]
    UnknownCas {
        /// The number.
        cas: String,
    },
}

struct Nearest<'a>(&'a [Arc<str>]);

impl fmt::Display for Nearest<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if self.0.is_empty() {
            f.write_str("; give a SMILES or a CAS number instead")
        } else {
            write!(f, "; near it: {}", Choice(self.0))
        }
    }
}

struct Choice<'a>(&'a [Arc<str>]);

impl fmt::Display for Choice<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (position, name) in self.0.iter().enumerate() {
            if position > 0 {
                let last = position + 1 == self.0.len();
                f.write_str(if last { " or " } else { ", " })?;
            }
            write!(f, "`{name}`")?;
        }
        Ok(())
    }
}

/// A curve asked for where it may not be used.
#[derive(Clone, Copy, Debug, PartialEq, Error)]
pub enum OutOfRange {
    /// The temperature lies beyond the range and the stretch allowed past it.
    #[error(
        "{temperature_k} K is outside {low_k} K to {high_k} K, the range of the measured curve"
    )]
    Temperature {
        /// The temperature asked for, in K.
        temperature_k: f64,
        /// Lowest temperature allowed, in K.
        low_k: f64,
        /// Highest temperature allowed, in K.
        high_k: f64,
    },
    /// The pressure is not reached between the allowed temperatures.
    #[error(
        "{pressure_pa} Pa is outside {low_pa} Pa to {high_pa} Pa, the range of the measured curve"
    )]
    Pressure {
        /// The pressure asked for, in Pa.
        pressure_pa: f64,
        /// Lowest pressure reached, in Pa.
        low_pa: f64,
        /// Highest pressure reached, in Pa.
        high_pa: f64,
    },
}

impl From<OutOfRange> for Absent {
    fn from(error: OutOfRange) -> Self {
        match error {
            OutOfRange::Temperature {
                temperature_k,
                low_k,
                high_k,
            } => Self::OutsideRange {
                method: "measured",
                temperature_k,
                low_k,
                high_k,
            },
            OutOfRange::Pressure { .. } => Self::Because(error.to_string().into()),
        }
    }
}
