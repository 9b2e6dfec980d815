//! Saturated-liquid density at a temperature.

use super::Constants;
use crate::quantity::{Absent, GAS_CONSTANT_J_PER_MOL_K};

/// A published way to the molar volume of the saturated liquid.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum LiquidDensityMethod {
    /// Tyn and Calus 1975: V at T_b from V_c, carried to T with Rackett's form
    /// and the Z_RA of Yamada and Gunn.
    #[default]
    TynCalus,
    /// Rackett 1970 with the Z_RA of Yamada and Gunn 1973, scaled by R T_c/P_c.
    RackettYamadaGunn,
    /// Rackett 1970 as published: V_c and Z_c.
    Rackett,
    /// Hankinson and Thomson 1979 with V_c in place of the characteristic volume.
    HankinsonThomson,
}

impl LiquidDensityMethod {
    /// Every method.
    pub const ALL: [Self; 4] = [
        Self::TynCalus,
        Self::RackettYamadaGunn,
        Self::Rackett,
        Self::HankinsonThomson,
    ];

    /// The identifier estimates carry.
    pub const fn id(self) -> &'static str {
        match self {
            Self::TynCalus => "tyn-calus",
            Self::RackettYamadaGunn => "rackett-yamada-gunn",
            Self::Rackett => "rackett",
            Self::HankinsonThomson => "hankinson-thomson",
        }
    }

    /// Whether it takes the critical volume.
    pub const fn needs_critical_volume(self) -> bool {
        !matches!(self, Self::RackettYamadaGunn)
    }
}

/// What a density curve is made from.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LiquidDensityInput {
    /// T_b, T_c, P_c.
    pub constants: Constants,
    /// Critical volume, m³/mol; only [`LiquidDensityMethod::RackettYamadaGunn`] does without.
    pub critical_volume_m3_per_mol: f64,
    /// Acentric factor.
    pub acentric_factor: f64,
    /// Molar mass, kg/mol.
    pub molar_mass_kg_per_mol: f64,
}

/// Density of the saturated liquid of one substance over temperature; it falls
/// as temperature rises.
///
/// Rackett's form between two temperatures: V(T)/V(T₀) = Z^((1 − T_r)^(2/7) − (1 − T_r0)^(2/7)).
/// Yamada–Gunn: Z_RA = 0.29056 − 0.08775 ω, V = (R T_c/P_c) Z_RA^(1 + (1 − T_r)^(2/7)).
/// Rackett: V = V_c Z_c^((1 − T_r)^(2/7)). Tyn–Calus: V(T_b) = 0.285 V_c^1.048 (cm³/mol).
/// Hankinson–Thomson: V = V* V0 (1 − ω Vδ), t = (1 − T_r)^(1/3),
/// V0 = 1 − 1.52816 t + 1.43907 t² − 0.81446 t³ + 0.190454 t⁴,
/// Vδ = (−0.296123 + 0.386914 T_r − 0.0427258 T_r² − 0.0480645 T_r³)/(T_r − 1.00001).
///
/// # Source
///
/// M. T. Tyn, W. F. Calus, Processing 21(4) (1975) 16–17. H. G. Rackett, J.
/// Chem. Eng. Data 15 (1970) 514–517, doi:10.1021/je60047a012. T. Yamada, R. D.
/// Gunn, J. Chem. Eng. Data 18 (1973) 234–236, doi:10.1021/je60057a006. R. W.
/// Hankinson, G. H. Thomson, AIChE J. 25 (1979) 653–663,
/// doi:10.1002/aic.690250412. Constants from memory of the handbooks.
///
/// # Validity
///
/// Saturated liquid below T_c; the pressure dependence is not modelled.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LiquidDensityCurve {
    method: &'static str,
    critical_temperature_k: f64,
    molar_mass_kg_per_mol: f64,
    shape: Shape,
}

#[derive(Clone, Copy, Debug, PartialEq)]
enum Shape {
    /// V = scale · z^((1 − T_r)^(2/7)), the scale in m³/mol.
    Rackett {
        scale: f64,
        ln_z: f64,
    },
    HankinsonThomson {
        volume: f64,
        omega: f64,
    },
}

/// Identifier of a density carried from a measured one.
pub(crate) const FROM_DENSITY: &str = "rackett-from-density";

impl LiquidDensityCurve {
    /// The curve of a method.
    ///
    /// # Errors
    ///
    /// [`Absent::OutsideDomain`] if the constants give no compressibility between 0 and 1 or no volume.
    pub fn new(method: LiquidDensityMethod, input: &LiquidDensityInput) -> Result<Self, Absent> {
        let id = method.id();
        let constants = &input.constants;
        let tc = constants.critical_temperature_k();
        let pc = constants.critical_pressure_pa();
        let vc = input.critical_volume_m3_per_mol;
        if method.needs_critical_volume() && !(vc > 0.0 && vc.is_finite()) {
            return Err(outside(id, "the critical volume is not positive"));
        }
        let shape = match method {
            LiquidDensityMethod::TynCalus => {
                let ln_z = ln_z_ra(input.acentric_factor, id)?;
                let at_boiling_point = 0.285e-6 * (vc * 1e6).powf(1.048);
                Shape::Rackett {
                    scale: at_boiling_point
                        / (ln_z * rackett_power(constants.reduced_boiling_point())).exp(),
                    ln_z,
                }
            }
            LiquidDensityMethod::RackettYamadaGunn => {
                let ln_z = ln_z_ra(input.acentric_factor, id)?;
                Shape::Rackett {
                    scale: GAS_CONSTANT_J_PER_MOL_K * tc / pc * ln_z.exp(),
                    ln_z,
                }
            }
            LiquidDensityMethod::Rackett => {
                let z = pc * vc / (GAS_CONSTANT_J_PER_MOL_K * tc);
                Shape::Rackett {
                    scale: vc,
                    ln_z: ln_compressibility(z, id)?,
                }
            }
            LiquidDensityMethod::HankinsonThomson => Shape::HankinsonThomson {
                volume: vc,
                omega: input.acentric_factor,
            },
        };
        Ok(Self {
            method: id,
            critical_temperature_k: tc,
            molar_mass_kg_per_mol: input.molar_mass_kg_per_mol,
            shape,
        })
    }

    /// The curve through a known density, carried to other temperatures with
    /// Rackett's form and the Z_RA of Yamada and Gunn.
    ///
    /// # Errors
    ///
    /// [`Absent::OutsideDomain`] if the density is not positive or its temperature not below T_c.
    pub fn through_density(
        density_kg_per_m3: f64,
        at_k: f64,
        critical_temperature_k: f64,
        acentric_factor: f64,
        molar_mass_kg_per_mol: f64,
    ) -> Result<Self, Absent> {
        if !(density_kg_per_m3 > 0.0 && at_k > 0.0 && at_k < critical_temperature_k) {
            return Err(outside(
                FROM_DENSITY,
                "the known density is not one of a liquid below its critical temperature",
            ));
        }
        let ln_z = ln_z_ra(acentric_factor, FROM_DENSITY)?;
        let volume = molar_mass_kg_per_mol / density_kg_per_m3;
        Ok(Self {
            method: FROM_DENSITY,
            critical_temperature_k,
            molar_mass_kg_per_mol,
            shape: Shape::Rackett {
                scale: volume / (ln_z * rackett_power(at_k / critical_temperature_k)).exp(),
                ln_z,
            },
        })
    }

    /// Identifier of the method.
    pub const fn method(&self) -> &'static str {
        self.method
    }

    /// Density in kg/m³.
    ///
    /// # Errors
    ///
    /// [`Absent::OutsideRange`] unless T lies between 0 K and T_c;
    /// [`Absent::OutsideDomain`] if the form gives no volume there.
    pub fn density_kg_per_m3(&self, temperature_k: f64) -> Result<f64, Absent> {
        let tr = temperature_k / self.critical_temperature_k;
        if !(tr > 0.0 && tr < 1.0) {
            return Err(Absent::OutsideRange {
                method: self.method,
                temperature_k,
                low_k: 0.0,
                high_k: self.critical_temperature_k,
            });
        }
        let volume = match self.shape {
            Shape::Rackett { scale, ln_z } => scale * (ln_z * rackett_power(tr)).exp(),
            Shape::HankinsonThomson { volume, omega } => volume * hankinson_thomson(tr, omega),
        };
        let density = self.molar_mass_kg_per_mol / volume;
        if density > 0.0 && density.is_finite() {
            Ok(density)
        } else {
            Err(outside(self.method, "the form gives no positive volume"))
        }
    }
}

fn hankinson_thomson(tr: f64, omega: f64) -> f64 {
    let t = (1.0 - tr).cbrt();
    let simple = 1.0 + t * (-1.52816 + t * (1.43907 + t * (-0.81446 + t * 0.190454)));
    let delta = (-0.296123 + tr * (0.386914 + tr * (-0.0427258 - tr * 0.0480645))) / (tr - 1.00001);
    simple * (1.0 - omega * delta)
}

fn rackett_power(tr: f64) -> f64 {
    (1.0 - tr).powf(2.0 / 7.0)
}

fn ln_z_ra(acentric_factor: f64, method: &'static str) -> Result<f64, Absent> {
    ln_compressibility(0.29056 - 0.08775 * acentric_factor, method)
}

fn ln_compressibility(z: f64, method: &'static str) -> Result<f64, Absent> {
    // Density falls with temperature only for a compressibility below one.
    if z > 0.0 && z < 1.0 {
        Ok(z.ln())
    } else {
        Err(outside(
            method,
            "the compressibility is not between 0 and 1",
        ))
    }
}

const fn outside(method: &'static str, what: &'static str) -> Absent {
    Absent::OutsideDomain { method, what }
}
