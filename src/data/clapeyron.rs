//! The enthalpy of vaporization that a vapor-pressure curve implies.

use super::{Substance, VaporPressureEquation};
use crate::quantity::{Absent, GAS_CONSTANT_J_PER_MOL_K, Property, STANDARD_ATMOSPHERE_PA};

/// Highest pressure at which an ideal vapor is assumed where no critical point is known, in Pa.
const IDEAL_UP_TO_PA: f64 = 1.1 * STANDARD_ATMOSPHERE_PA;

/// By how much an ideal vapor overstates the enthalpy at the standard
/// atmosphere, as a part of it (the median over the built-in substances is 4 %);
/// the deviation is proportional to the pressure.
const IDEAL_EXCESS: f64 = 0.05;

/// Up to this reduced temperature ΔZ by Haggenmacher's equation is used.
const HIGHEST_REDUCED_TEMPERATURE: f64 = 0.9;

/// An enthalpy of vaporization by the equation of Clausius and Clapeyron.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ClapeyronEnthalpy {
    /// Temperature in K.
    pub temperature_k: f64,
    /// Enthalpy of vaporization in J/mol.
    pub enthalpy_j_per_mol: f64,
    /// ΔZ, the compressibility factor of the vapor less that of the liquid.
    pub delta_z: f64,
    /// By what part the ideal vapor may overstate the enthalpy; 0 where ΔZ
    /// comes from a critical point. The curve has its own error beside it.
    pub ideal_excess: f64,
}

impl Substance {
    /// The enthalpy of vaporization at a temperature in K by its vapor-pressure
    /// curve, `ΔH = R T² (d ln P/dT) ΔZ`; `None` if there is no curve. Equations
    /// go before measured points, whose slope is that between two of them.
    ///
    /// `ΔZ = sqrt(1 − Pr/Tr³)` where a critical point is known: that of the
    /// Wagner set, else the measured one. Without a critical point ΔZ is 1, at
    /// pressures up to 1.1 times the standard atmosphere.
    ///
    /// # Source
    ///
    /// J. E. Haggenmacher, J. Am. Chem. Soc. 68 (1946) 1633–1634, for ΔZ.
    ///
    /// # Validity
    ///
    /// Vapors of single molecules: carboxylic acids, which associate in the
    /// vapor, have about half of what this gives. Up to Tr 0.9.
    ///
    /// # Errors
    ///
    /// The curve does not reach so far, the state is too near to the critical
    /// point, or no critical point is known and the pressure is higher.
    pub fn clapeyron_enthalpy(
        &self,
        temperature_k: f64,
    ) -> Option<Result<ClapeyronEnthalpy, Absent>> {
        let curve = self.curve_for_slope(temperature_k)?;
        Some(
            curve
                .ln_pressure_and_slope(temperature_k)
                .map_err(Absent::from)
                .and_then(|(ln_pressure, slope)| {
                    let pressure_pa = ln_pressure.exp();
                    let (delta_z, ideal_excess) = self.delta_z(temperature_k, pressure_pa)?;
                    Ok(ClapeyronEnthalpy {
                        temperature_k,
                        enthalpy_j_per_mol: GAS_CONSTANT_J_PER_MOL_K
                            * temperature_k.powi(2)
                            * slope
                            * delta_z,
                        delta_z,
                        ideal_excess,
                    })
                }),
        )
    }

    /// ΔZ and by what part it may be too high.
    fn delta_z(&self, temperature_k: f64, pressure_pa: f64) -> Result<(f64, f64), Absent> {
        let because = |text: &str| Absent::Because(text.into());
        let Some((critical_k, critical_pa)) = self.critical_point() else {
            return if pressure_pa <= IDEAL_UP_TO_PA {
                let excess = IDEAL_EXCESS * pressure_pa / STANDARD_ATMOSPHERE_PA;
                Ok((1.0, excess))
            } else {
                Err(because(
                    "no critical point is known, and the vapor is not ideal at this pressure",
                ))
            };
        };
        let reduced = temperature_k / critical_k;
        if reduced > HIGHEST_REDUCED_TEMPERATURE {
            return Err(because("too near to the critical point"));
        }
        let square = 1.0 - pressure_pa / critical_pa / reduced.powi(3);
        if square > 0.0 {
            Ok((square.sqrt(), 0.0))
        } else {
            Err(because("critical point and vapor pressure do not fit"))
        }
    }

    /// Critical temperature in K and pressure in Pa: those of a Wagner set, else measured ones.
    pub fn critical_point(&self) -> Option<(f64, f64)> {
        let of_curve = self
            .vapor_pressures
            .iter()
            .find_map(|curve| match *curve.equation() {
                VaporPressureEquation::Wagner {
                    critical_temperature_k,
                    critical_pressure_pa,
                    ..
                } => Some((critical_temperature_k, critical_pressure_pa)),
                _ => None,
            });
        let constant = |property| self.values(property).next().map(|found| found.value);
        of_curve.or_else(|| {
            constant(Property::CriticalTemperature).zip(constant(Property::CriticalPressure))
        })
    }
}
