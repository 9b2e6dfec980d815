//! Surface tension of the liquid against its vapor.

use super::Constants;
use crate::quantity::Absent;

/// The classes Sastri and Rao give separate constants for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum SurfaceTensionClass {
    /// With an alcoholic hydroxyl group.
    Alcohol,
    /// With a carboxyl group.
    Acid,
    /// All others, phenols among them.
    Other,
}

/// Identifier of the method.
pub(crate) const SASTRI_RAO: &str = "sastri-rao";

/// Surface tension in N/m after Sastri and Rao.
///
/// σ = K P_c^x T_b^y T_c^z ((1 − T_r)/(1 − T_br))^m in mN/m, P_c in bar, T in K;
/// (K, x, y, z, m) = (2.28, 0.25, 0.175, 0, 0.8) for alcohols,
/// (0.125, 0.5, −1.5, 1.85, 11/9) for acids, (0.158, 0.5, −1.5, 1.85, 11/9) for all others.
///
/// # Source
///
/// S. R. S. Sastri, K. K. Rao, Chem. Eng. J. 59 (1995) 181–186,
/// doi:10.1016/0923-0467(94)02946-6; constants from memory of the handbooks.
///
/// # Validity
///
/// Below T_c; it vanishes there.
///
/// # Errors
///
/// [`Absent::OutsideRange`] unless T lies between 0 K and T_c.
pub fn surface_tension_sastri_rao(
    constants: &Constants,
    class: SurfaceTensionClass,
    temperature_k: f64,
) -> Result<f64, Absent> {
    let tc = constants.critical_temperature_k();
    let tb = constants.boiling_point_k();
    if !(temperature_k > 0.0 && temperature_k < tc) {
        return Err(Absent::OutsideRange {
            method: SASTRI_RAO,
            temperature_k,
            low_k: 0.0,
            high_k: tc,
        });
    }
    let pc_bar = 1e-5 * constants.critical_pressure_pa();
    let ratio = (tc - temperature_k) / (tc - tb);
    let rest =
        |k: f64| k * pc_bar.sqrt() * (tc / tb).powf(1.5) * tc.powf(0.35) * ratio.powf(11.0 / 9.0);
    let millinewton_per_m = match class {
        SurfaceTensionClass::Alcohol => {
            2.28 * pc_bar.sqrt().sqrt() * tb.powf(0.175) * ratio.powf(0.8)
        }
        SurfaceTensionClass::Acid => rest(0.125),
        SurfaceTensionClass::Other => rest(0.158),
    };
    Ok(1e-3 * millinewton_per_m)
}
