//! Enthalpy of vaporization at other temperatures.

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
