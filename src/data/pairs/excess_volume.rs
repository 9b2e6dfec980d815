//! Excess volumes as Redlich–Kister polynomials.

use std::sync::Arc;

use smallvec::SmallVec;

/// How many coefficients a row may have.
pub(super) const MOST_COEFFICIENTS: usize = 6;

/// The excess volume of a binary mixture at one temperature,
///
/// V^E = x1 x2 Σ A_k (x1 − x2)^k, k from 0.
///
/// # Source
///
/// O. Redlich, A. T. Kister, Ind. Eng. Chem. 40 (1948) 345–348,
/// doi:10.1021/ie50458a036 (from memory).
#[derive(Clone, Debug, PartialEq)]
pub struct ExcessVolume {
    pub(super) coefficients_m3_per_mol: SmallVec<[f64; MOST_COEFFICIENTS]>,
    pub(super) temperature_k: f64,
    pub(super) x1_range: (f64, f64),
    pub(super) source: Arc<str>,
    /// Line of the table.
    pub(super) line: u64,
}

impl ExcessVolume {
    /// A_0, A_1, … in m³/mol.
    pub fn coefficients_m3_per_mol(&self) -> &[f64] {
        &self.coefficients_m3_per_mol
    }

    /// Temperature in K.
    pub fn temperature_k(&self) -> f64 {
        self.temperature_k
    }

    /// Mole fractions of component 1 that were measured, lowest and highest.
    pub fn x1_range(&self) -> (f64, f64) {
        self.x1_range
    }

    /// Published source.
    pub fn source(&self) -> &Arc<str> {
        &self.source
    }

    /// Excess volume in m³/mol at a mole fraction of component 1, whatever the range.
    pub fn at(&self, x1: f64) -> f64 {
        let x2 = 1.0 - x1;
        let sum = self
            .coefficients_m3_per_mol
            .iter()
            .rev()
            .fold(0.0, |sum, a| sum * (x1 - x2) + a);
        x1 * x2 * sum
    }

    /// Whether a mole fraction of component 1 lies in the measured range.
    pub fn covers(&self, x1: f64) -> bool {
        // Rounding of 1 − x may not shut out an end.
        (self.x1_range.0 - 1e-9..=self.x1_range.1 + 1e-9).contains(&x1)
    }

    /// The same with the components in the other order: A_k changes its sign
    /// for odd k.
    #[must_use]
    pub fn reversed(&self) -> Self {
        let coefficients = self.coefficients_m3_per_mol.iter().enumerate();
        Self {
            coefficients_m3_per_mol: coefficients
                .map(|(k, &a)| if k % 2 == 0 { a } else { -a })
                .collect(),
            x1_range: (1.0 - self.x1_range.1, 1.0 - self.x1_range.0),
            ..self.clone()
        }
    }
}
