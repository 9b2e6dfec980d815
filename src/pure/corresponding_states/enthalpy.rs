//! Enthalpy of vaporization from vapor pressures, and at other temperatures.

use super::Constants;
use crate::quantity::{GAS_CONSTANT_J_PER_MOL_K, STANDARD_ATMOSPHERE_PA};

/// Enthalpy and entropy of the pairing of carboxyl groups in the vapor, J/mol and J/(mol K) at
/// 1 atm, near those of acetic acid.
const PAIRING: (f64, f64) = (-60_600.0, -145.0);

/// Enthalpy of vaporization at the boiling point in J/mol from the slope of the vapor-pressure
/// curve there, by the equation of Clausius and Clapeyron.
///
/// ΔH = R T_b ψ ΔZ, ψ = d ln P/d ln T, ΔZ = sqrt(1 − P_r/T_r³) and
/// at least sqrt 0.3. The vapor of acids holds fewer particles: ΔZ is then multiplied by
/// 1/(y₁ + 2 y₂), y₂/y₁² = K the constant of pairing, y₁ + y₂ = 1.
///
/// # Units and shapes
///
/// `slope` without unit; J/mol. [`slope_of_enthalpy`] is the inverse.
///
/// # Source
///
/// J. E. Haggenmacher, J. Am. Chem. Soc. 68 (1946) 1633–1634, for ΔZ; the constants of
/// pairing are from memory, rounded.
pub fn enthalpy_of_vaporization_clapeyron(
    constants: &Constants,
    slope: f64,
    associates: bool,
) -> f64 {
    slope * enthalpy_per_slope(constants, associates)
}

/// The slope d ln P/d ln T at the boiling point that goes with an enthalpy of vaporization there.
pub fn slope_of_enthalpy(constants: &Constants, enthalpy_j_per_mol: f64, associates: bool) -> f64 {
    enthalpy_j_per_mol / enthalpy_per_slope(constants, associates)
}

fn enthalpy_per_slope(constants: &Constants, associates: bool) -> f64 {
    let tb = constants.boiling_point_k();
    let reduced = STANDARD_ATMOSPHERE_PA / constants.critical_pressure_pa();
    // a rough critical point must not take all of the vapor away
    let delta_z = (1.0 - reduced / constants.reduced_boiling_point().powi(3)).max(0.3);
    let particles = if associates {
        particles_of_acid(tb)
    } else {
        1.0
    };
    GAS_CONSTANT_J_PER_MOL_K * tb * delta_z.sqrt() * particles
}

/// Particles in the saturated vapor of an acid per molecule at its boiling point.
fn particles_of_acid(boiling_point_k: f64) -> f64 {
    let (enthalpy, entropy) = PAIRING;
    let exponent = entropy - enthalpy / boiling_point_k;
    let pairing = (exponent / GAS_CONSTANT_J_PER_MOL_K).exp();
    // K y₁² + y₁ − 1 = 0, in the form that stays right for a small K
    let single = 2.0 / (1.0 + (1.0 + 4.0 * pairing).sqrt());
    1.0 / (2.0 - single)
}

/// Enthalpy of vaporization at T from its value at another temperature, after Watson.
///
/// ΔH(T) = ΔH(T₀) ((1 − T/T_c)/(1 − T₀/T_c))^0.38.
///
/// # Units and shapes
///
/// J/mol in and out; `None` unless both temperatures lie between 0 K and T_c.
///
/// # Source
///
/// K. M. Watson, Ind. Eng. Chem. 35 (1943) 398–406, doi:10.1021/ie50400a004.
pub fn enthalpy_of_vaporization_watson(
    known_j_per_mol: f64,
    known_at_k: f64,
    critical_temperature_k: f64,
    temperature_k: f64,
) -> Option<f64> {
    let below = |t: f64| t > 0.0 && t < critical_temperature_k;
    (below(known_at_k) && below(temperature_k)).then(|| {
        let ratio =
            (critical_temperature_k - temperature_k) / (critical_temperature_k - known_at_k);
        known_j_per_mol * ratio.powf(0.38)
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    /// At its boiling point the vapor of acetic acid has 0.63 particles a molecule: 23.7 kJ/mol
    /// (CRC Handbook 95e) over the 37.9 that its vapor pressures give with single molecules.
    #[test]
    fn acetic_acid_evaporates_in_pairs() {
        assert!((particles_of_acid(391.05) - 23.7 / 37.9).abs() < 0.02);
        assert!(particles_of_acid(550.0) > 0.95);
    }
}
