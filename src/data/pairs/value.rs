//! Values of a pair at a state, with where they come from.

use std::fmt;
use std::sync::Arc;

use crate::quantity::Flags;

/// One measured activity coefficient at infinite dilution.
#[derive(Clone, Debug, PartialEq)]
pub struct Dilution {
    /// Temperature in K.
    pub temperature_k: f64,
    /// ln γ∞ of the solute.
    pub ln_gamma: f64,
    /// Stated uncertainty, in ln γ∞.
    pub uncertainty: Option<f64>,
    /// Published source.
    pub source: Arc<str>,
    /// Line of the table.
    pub(super) line: u64,
}

/// A value of a pair that measurements give for one temperature.
#[derive(Clone, Debug, PartialEq)]
pub struct PairValue {
    /// The value in SI: ln γ∞, or an excess volume in m³/mol.
    pub value: f64,
    /// The temperatures in K it was measured at: twice the same, or the two
    /// between which it was interpolated.
    pub temperatures_k: (f64, f64),
    /// Stated uncertainty of the value; of two, the larger.
    pub uncertainty: Option<f64>,
    /// Whether data of another stereoisomer stand in.
    pub flags: Flags,
    /// Published source, or both.
    pub source: Arc<str>,
}

/// Temperature and source in words: `at 298.15 K (A. Author 1999)`.
impl fmt::Display for PairValue {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let (low, high) = self.temperatures_k;
        if low == high {
            write!(f, "at {low} K")?;
        } else {
            write!(f, "between {low} K and {high} K")?;
        }
        if let Some(uncertainty) = self.uncertainty {
            write!(f, ", ln gamma to {uncertainty}")?;
        }
        if !self.flags.is_empty() {
            write!(f, ", {}", self.flags)?;
        }
        write!(f, " ({})", self.source)
    }
}

/// Two sources, told once where they are one.
pub(super) fn both(first: &Arc<str>, second: &Arc<str>) -> Arc<str> {
    if first == second {
        Arc::clone(first)
    } else {
        format!("{first}; {second}").into()
    }
}
