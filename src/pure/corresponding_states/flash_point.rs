//! Flash point from the boiling point.

use crate::quantity::Absent;

/// Identifier of the method.
pub(crate) const CATOIRE_NAUDET: &str = "catoire-naudet";

/// Boiling points over which the relation was fitted, K.
pub(crate) const CATOIRE_NAUDET_BOILING_POINTS_K: (f64, f64) = (250.0, 650.0);

/// Carbon atoms over which the relation was fitted.
pub(crate) const CATOIRE_NAUDET_CARBONS: (u16, u16) = (1, 21);

/// Closed-cup flash point in K after Catoire and Naudet.
///
/// T_f = 1.477 T_b^0.79686 ΔH_vap(298.15 K)^0.16845 n_C^−0.05948, ΔH_vap in
/// kJ/mol, n_C the number of carbon atoms.
///
/// # Units and shapes
///
/// T_b in K, ΔH_vap in J/mol at 298.15 K; K out.
///
/// # Source
///
/// L. Catoire, V. Naudet, J. Phys. Chem. Ref. Data 33 (2004) 1083–1111,
/// doi:10.1063/1.1835321; constants and ranges from memory.
///
/// # Validity
///
/// Substances that burn, of 1 to 21 carbon atoms, boiling between about 250 and
/// 650 K. It knows nothing of flame inhibition: whether a molecule rich in
/// halogen has a flash point at all it cannot tell.
///
/// # Errors
///
/// [`Absent::OutsideDomain`] without carbon or with an input that is not positive.
pub fn flash_point_catoire_naudet(
    boiling_point_k: f64,
    enthalpy_of_vaporization_j_per_mol: f64,
    carbons: u16,
) -> Result<f64, Absent> {
    if carbons == 0 || boiling_point_k <= 0.0 || enthalpy_of_vaporization_j_per_mol <= 0.0 {
        return Err(Absent::OutsideDomain {
            method: CATOIRE_NAUDET,
            what: "needs carbon atoms, a boiling point and an enthalpy of vaporization",
        });
    }
    Ok(1.477
        * boiling_point_k.powf(0.79686)
        * (1e-3 * enthalpy_of_vaporization_j_per_mol).powf(0.16845)
        * f64::from(carbons).powf(-0.05948))
}
