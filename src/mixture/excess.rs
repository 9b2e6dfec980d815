//! Excess properties of a liquid mixture.

use crate::quantity::GAS_CONSTANT_J_PER_MOL_K;

use super::{Liquid, MixtureError};

/// Molar excess properties, from the activity coefficients and their slope in T.
///
/// G^E = RT Σ x_i ln γ_i, H^E = −R T² Σ x_i d ln γ_i/dT, S^E = (H^E − G^E)/T.
/// Activity models know no excess volume, so the excess internal energy is
/// taken as H^E (p V^E is below 1 J/mol at ambient pressure).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Excess {
    /// Excess Gibbs energy in J/mol.
    pub gibbs_j_per_mol: f64,
    /// Excess enthalpy in J/mol.
    pub enthalpy_j_per_mol: f64,
    /// Excess entropy in J/(mol K).
    pub entropy_j_per_mol_k: f64,
}

impl Excess {
    /// Excess properties of a mixture; fractions are used as given.
    ///
    /// # Errors
    ///
    /// As [`Liquid::ln_gamma`].
    pub fn of(liquid: &mut dyn Liquid, x: &[f64]) -> Result<Self, MixtureError> {
        let mut values = vec![0.0; liquid.components()];
        let temperature_k = liquid.temperature_k();
        let rt = GAS_CONSTANT_J_PER_MOL_K * temperature_k;
        let mean = |values: &[f64]| -> f64 { x.iter().zip(values).map(|(x, v)| x * v).sum() };
        liquid.ln_gamma(x, &mut values)?;
        let gibbs_j_per_mol = rt * mean(&values);
        liquid.ln_gamma_slope_per_k(x, &mut values)?;
        let enthalpy_j_per_mol = -rt * temperature_k * mean(&values);
        Ok(Self {
            gibbs_j_per_mol,
            enthalpy_j_per_mol,
            entropy_j_per_mol_k: (enthalpy_j_per_mol - gibbs_j_per_mol) / temperature_k,
        })
    }
}
