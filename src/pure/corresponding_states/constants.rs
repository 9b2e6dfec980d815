//! The three constants every relation starts from.

use crate::quantity::{Absent, STANDARD_ATMOSPHERE_PA};

/// Normal boiling point and critical point, checked against one another.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Constants {
    boiling_point_k: f64,
    critical_temperature_k: f64,
    critical_pressure_pa: f64,
}

impl Constants {
    /// Takes the constants of one substance; `method` is named where they do not fit together.
    ///
    /// # Errors
    ///
    /// [`Absent::OutsideDomain`] unless 0 < T_b < T_c and P_c is above 1 atm.
    pub fn new(
        boiling_point_k: f64,
        critical_temperature_k: f64,
        critical_pressure_pa: f64,
        method: &'static str,
    ) -> Result<Self, Absent> {
        let outside = |what| Err(Absent::OutsideDomain { method, what });
        let finite = boiling_point_k.is_finite()
            && critical_temperature_k.is_finite()
            && critical_pressure_pa.is_finite();
        if !finite || boiling_point_k <= 0.0 {
            return outside("boiling point and critical point are not positive numbers");
        }
        if boiling_point_k >= critical_temperature_k {
            return outside("the boiling point is not below the critical temperature");
        }
        if critical_pressure_pa <= STANDARD_ATMOSPHERE_PA {
            return outside("the critical pressure is not above one atmosphere");
        }
        Ok(Self {
            boiling_point_k,
            critical_temperature_k,
            critical_pressure_pa,
        })
    }

    /// Normal boiling point, K.
    pub const fn boiling_point_k(&self) -> f64 {
        self.boiling_point_k
    }

    /// Critical temperature, K.
    pub const fn critical_temperature_k(&self) -> f64 {
        self.critical_temperature_k
    }

    /// Critical pressure, Pa.
    pub const fn critical_pressure_pa(&self) -> f64 {
        self.critical_pressure_pa
    }

    /// T / T_c.
    pub fn reduced(&self, temperature_k: f64) -> f64 {
        temperature_k / self.critical_temperature_k
    }

    /// T_b / T_c.
    pub fn reduced_boiling_point(&self) -> f64 {
        self.boiling_point_k / self.critical_temperature_k
    }

    /// ln(1 atm / P_c), negative.
    pub fn ln_reduced_atmosphere(&self) -> f64 {
        (STANDARD_ATMOSPHERE_PA / self.critical_pressure_pa).ln()
    }
}

/// Acentric factor from T_b, T_c and P_c after Edmister.
///
/// ω = (3/7) θ/(1 − θ) log10(P_c / 1 atm) − 1 with θ = T_b/T_c: the straight
/// line of ln p over 1/T between the boiling and the critical point.
///
/// # Source
///
/// W. C. Edmister, Petroleum Refiner 37(4) (1958) 173–179.
pub fn acentric_factor_edmister(constants: &Constants) -> f64 {
    let theta = constants.reduced_boiling_point();
    -3.0 / 7.0 * theta / (1.0 - theta) * constants.ln_reduced_atmosphere() / std::f64::consts::LN_10
        - 1.0
}
