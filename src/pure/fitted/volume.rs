//! The temperature at which molar volumes are fitted.

use crate::quantity::REFERENCE_TEMPERATURE_K;

/// Part of the boiling point at which the volumes of low boilers are fitted: at 298.15 K
/// they are near their critical point, where volumes do not add up. Chosen by the
/// cross-validation of densities at other temperatures.
const OF_BOILING_POINT: f64 = 0.65;

/// Compressibility of Rackett's equation where nothing is known of it.
const USUAL_COMPRESSIBILITY: f64 = 0.27;

/// The temperature in K at which the molar volume of a liquid of this boiling point is
/// fitted: 298.15 K, or lower for what boils below 459 K.
pub fn volume_temperature_k(boiling_point_k: f64) -> f64 {
    REFERENCE_TEMPERATURE_K.min(OF_BOILING_POINT * boiling_point_k)
}

/// A molar volume of the saturated liquid at another temperature by Rackett's form, with
/// the compressibility of many liquids; `None` unless both temperatures are below
/// 0.97 of the critical one.
pub fn volume_carried(
    volume_m3_per_mol: f64,
    from_k: f64,
    to_k: f64,
    critical_temperature_k: f64,
) -> Option<f64> {
    let [from, to] = [from_k, to_k].map(|t| 1.0 - t / critical_temperature_k);
    (from > 0.03 && to > 0.03).then(|| {
        let power = to.powf(2.0 / 7.0) - from.powf(2.0 / 7.0);
        volume_m3_per_mol * USUAL_COMPRESSIBILITY.powf(power)
    })
}
