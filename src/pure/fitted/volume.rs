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

/// By how much the volume of the liquid at 298.15 K exceeds that at its
/// [reference temperature](volume_temperature_k), as a factor, from the boiling point in K
/// alone: Rackett's form with Guldberg's critical temperature, 1.5 T_b.
///
/// Never below 1; it falls as the boiling point rises and is 1 from 458.7 K on. The density at
/// 298.15 K is M/(V · factor). `None` below 205 K, where 298.15 K is at the critical
/// point or past it.
pub fn expansion_to_298(boiling_point_k: f64) -> Option<f64> {
    let from_k = volume_temperature_k(boiling_point_k);
    volume_carried(1.0, from_k, REFERENCE_TEMPERATURE_K, 1.5 * boiling_point_k)
}

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::*;

    proptest! {
        #[test]
        fn expansion_falls_with_the_boiling_point(tb in 206.0..700.0_f64, more in 0.0..100.0_f64) {
            let [low, high] = [tb, tb + more].map(|tb| expansion_to_298(tb).unwrap());
            prop_assert!(low >= high && high >= 1.0);
            prop_assert!(high == 1.0 || tb + more < 458.7);
        }
    }

    #[test]
    fn pentane_expands_as_measured() {
        // T_b 309.2 K; saturated liquid: 708.9 kg/m3 at 201 K, 621.3 at 298.15 K (from memory)
        let factor = expansion_to_298(309.2).unwrap();
        assert!((factor - 708.9 / 621.3).abs() < 0.02, "{factor}");
    }
}
