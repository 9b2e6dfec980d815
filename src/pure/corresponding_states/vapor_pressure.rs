//! Vapor pressure curves through the normal boiling point, and the acentric
//! factor that goes with each.

use super::Constants;
use crate::quantity::Absent;

/// A published corresponding-states equation for the vapor pressure.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum VaporPressureMethod {
    /// Ambrose and Walton 1989: three terms in ω and the Wagner form.
    #[default]
    AmbroseWalton,
    /// Lee and Kesler 1975: two terms in ω.
    LeeKesler,
    /// Riedel 1954.
    Riedel,
}

impl VaporPressureMethod {
    /// Every method.
    pub const ALL: [Self; 3] = [Self::AmbroseWalton, Self::LeeKesler, Self::Riedel];

    /// The identifier estimates carry.
    pub const fn id(self) -> &'static str {
        match self {
            Self::AmbroseWalton => "ambrose-walton",
            Self::LeeKesler => "lee-kesler",
            Self::Riedel => "riedel",
        }
    }
}

/// Acentric factors between which the two equations in ω rise with temperature
/// everywhere from [`LOWEST_REDUCED_TEMPERATURE`] to the critical point
/// (looked through on a grid; real substances lie between −0.25 and 2).
const OMEGA_RANGE: (f64, f64) = (-0.4, 3.0);

/// Below this fraction of T_c no curve is given.
const LOWEST_REDUCED_TEMPERATURE: f64 = 0.2;

/// Slopes d ln P/d ln T at the boiling point between which those of substances lie.
const STEEPNESS: std::ops::RangeInclusive<f64> = 5.0..=30.0;

/// How much steeper than the equation a curve may be: at the critical point, where the
/// equation has a slope of six and more, a steeper one is flatter by so much.
const LARGEST_TILT: f64 = 5.5;

/// Riedel's constant K.
const RIEDEL_K: f64 = 0.0838;

/// The vapor pressure of one substance between 0.2 T_c and T_c.
///
/// The free parameter of the equation is chosen so that the curve passes
/// through 101 325 Pa at T_b; measured and estimated constants are treated alike.
///
/// Ambrose–Walton, τ = 1 − T_r: ln p_r = f0 + ω f1 + ω² f2,
/// f0 = (−5.97616 τ + 1.29874 τ^1.5 − 0.60394 τ^2.5 − 1.06841 τ^5)/T_r,
/// f1 = (−5.03365 τ + 1.11505 τ^1.5 − 5.41217 τ^2.5 − 7.46628 τ^5)/T_r,
/// f2 = (−0.64771 τ + 2.41539 τ^1.5 − 4.26979 τ^2.5 + 3.25259 τ^5)/T_r.
///
/// Lee–Kesler: ln p_r = f0 + ω f1,
/// f0 = 5.92714 − 6.09648/T_r − 1.28862 ln T_r + 0.169347 T_r^6,
/// f1 = 15.2518 − 15.6875/T_r − 13.4721 ln T_r + 0.43577 T_r^6.
///
/// Riedel: ln p_r = −35 Q + 36 Q/T_r + (42 Q + α) ln T_r − Q T_r^6 with
/// Q = K (3.758 − α), K = 0.0838 and α from the boiling point.
///
/// A [known slope](Self::with_slope) ψ = d ln P/d ln T at the boiling point adds
/// (ψ − ψ₀) (1 − T_b/T) to ln P, ψ₀ that of the equation; above the boiling point that is
/// multiplied by (T_c − T)/(T_c − T_b), so that it ends at the critical point.
///
/// # Source
///
/// D. Ambrose, J. Walton, Pure Appl. Chem. 61 (1989) 1395–1403,
/// doi:10.1351/pac198961081395. B. I. Lee, M. G. Kesler, AIChE J. 21 (1975)
/// 510–527, doi:10.1002/aic.690210313. L. Riedel, Chem. Ing. Tech. 26 (1954)
/// 83–89, doi:10.1002/cite.330260206. Constants from memory of their printing in
/// the handbooks; the checks are the limits ln p_r(1) = 0 and −1 − log10 p_r(0.7) = ω.
///
/// # Validity
///
/// Made on and for nonpolar and moderately polar substances; checked here
/// between 10 and 300 kPa. Below about 0.5 T_c it is an extrapolation.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct VaporPressureCurve {
    method: VaporPressureMethod,
    constants: Constants,
    /// ω of the equation, or Riedel's α.
    shape: f64,
    /// What a known slope at the boiling point has over that of the equation.
    tilt: f64,
}

impl VaporPressureCurve {
    /// The curve through the normal boiling point.
    ///
    /// # Errors
    ///
    /// [`Absent::OutsideDomain`] if no parameter makes the curve pass there, or
    /// only one far from any real substance.
    pub fn through_boiling_point(
        method: VaporPressureMethod,
        constants: Constants,
    ) -> Result<Self, Absent> {
        let outside = |what| Absent::OutsideDomain {
            method: method.id(),
            what,
        };
        let tr = constants.reduced_boiling_point();
        if tr < LOWEST_REDUCED_TEMPERATURE {
            return Err(outside(
                "the boiling point is below a fifth of the critical temperature",
            ));
        }
        let target = constants.ln_reduced_atmosphere();
        let shape = match method {
            VaporPressureMethod::AmbroseWalton => {
                let [f0, f1, f2] = ambrose_walton(tr);
                let rest = f0 - target;
                let discriminant = f1 * f1 - 4.0 * f2 * rest;
                if discriminant < 0.0 {
                    return Err(outside("no acentric factor fits the boiling point"));
                }
                // f1 is negative: this is the root that stays finite as f2 vanishes.
                2.0 * rest / (-f1 + discriminant.sqrt())
            }
            VaporPressureMethod::LeeKesler => {
                let [f0, f1] = lee_kesler(tr);
                (target - f0) / f1
            }
            VaporPressureMethod::Riedel => {
                let psi = riedel_psi(tr);
                (3.758 * RIEDEL_K * psi - target) / (RIEDEL_K * psi - tr.ln())
            }
        };
        let curve = Self {
            method,
            constants,
            shape,
            tilt: 0.0,
        };
        let omega = curve.acentric_factor();
        if !(omega >= OMEGA_RANGE.0 && omega <= OMEGA_RANGE.1) {
            return Err(outside(
                "the acentric factor that fits the boiling point is not between -0.4 and 3",
            ));
        }
        Ok(curve)
    }

    /// The same curve with another slope d ln P/d ln T at the boiling point.
    ///
    /// # Errors
    ///
    /// [`Absent::OutsideDomain`] if the slope is that of no substance, or so much steeper
    /// than the equation that the curve would fall below the critical point.
    pub fn with_slope(self, slope: f64) -> Result<Self, Absent> {
        let own = self.slope_at_boiling_point();
        let fits = STEEPNESS.contains(&slope) && slope - own <= LARGEST_TILT;
        fits.then_some(Self {
            tilt: self.tilt + slope - own,
            ..self
        })
        .ok_or(Absent::OutsideDomain {
            method: self.method.id(),
            what: "the enthalpy of vaporization does not go with the critical constants",
        })
    }

    /// The slope d ln P/d ln T at the boiling point.
    pub fn slope_at_boiling_point(&self) -> f64 {
        const STEP: f64 = 1e-4;
        let tr = self.constants.reduced_boiling_point();
        let [low, high] = [1.0 - STEP, 1.0 + STEP].map(|part| self.ln_reduced_pressure(part * tr));
        (high - low) / (2.0 * STEP)
    }

    /// The acentric factor of the curve: the ω of the equation, or for Riedel −1 − log10 p_r(0.7).
    pub fn acentric_factor(&self) -> f64 {
        match self.method {
            VaporPressureMethod::AmbroseWalton | VaporPressureMethod::LeeKesler => self.shape,
            VaporPressureMethod::Riedel => -1.0 - self.untilted(0.7) / std::f64::consts::LN_10,
        }
    }

    /// The constants the curve rests on.
    pub const fn constants(&self) -> &Constants {
        &self.constants
    }

    /// Temperatures in K between which there is a value.
    pub fn limits_k(&self) -> (f64, f64) {
        let critical_k = self.constants.critical_temperature_k();
        (LOWEST_REDUCED_TEMPERATURE * critical_k, critical_k)
    }

    /// Vapor pressure in Pa.
    ///
    /// # Errors
    ///
    /// [`Absent::OutsideRange`] unless T lies between 0.2 T_c and T_c.
    pub fn pressure_pa(&self, temperature_k: f64) -> Result<f64, Absent> {
        let tr = self.constants.reduced(temperature_k);
        if !(LOWEST_REDUCED_TEMPERATURE..=1.0).contains(&tr) {
            return Err(Absent::OutsideRange {
                method: self.method.id(),
                temperature_k,
                low_k: LOWEST_REDUCED_TEMPERATURE * self.constants.critical_temperature_k(),
                high_k: self.constants.critical_temperature_k(),
            });
        }
        Ok(self.constants.critical_pressure_pa() * self.ln_reduced_pressure(tr).exp())
    }

    fn ln_reduced_pressure(&self, tr: f64) -> f64 {
        let boiling = self.constants.reduced_boiling_point();
        let above = ((1.0 - tr) / (1.0 - boiling)).min(1.0);
        self.untilted(tr) + self.tilt * (1.0 - boiling / tr) * above
    }

    fn untilted(&self, tr: f64) -> f64 {
        match self.method {
            VaporPressureMethod::AmbroseWalton => {
                let [f0, f1, f2] = ambrose_walton(tr);
                f0 + self.shape * (f1 + self.shape * f2)
            }
            VaporPressureMethod::LeeKesler => {
                let [f0, f1] = lee_kesler(tr);
                f0 + self.shape * f1
            }
            VaporPressureMethod::Riedel => {
                let q = RIEDEL_K * (3.758 - self.shape);
                // −35 + 36/T_r + 42 ln T_r − T_r^6, the ψ of the boiling point at any T.
                q * riedel_psi(tr) + self.shape * tr.ln()
            }
        }
    }
}

fn ambrose_walton(tr: f64) -> [f64; 3] {
    let tau = 1.0 - tr;
    let root = tau.sqrt();
    let t15 = tau * root;
    let t25 = t15 * tau;
    let t5 = t25 * t25;
    let term = |a: f64, b: f64, c: f64, d: f64| (a * tau + b * t15 + c * t25 + d * t5) / tr;
    [
        term(-5.97616, 1.29874, -0.60394, -1.06841),
        term(-5.03365, 1.11505, -5.41217, -7.46628),
        term(-0.64771, 2.41539, -4.26979, 3.25259),
    ]
}

fn lee_kesler(tr: f64) -> [f64; 2] {
    let ln_tr = tr.ln();
    let tr6 = tr.powi(6);
    [
        5.92714 - 6.09648 / tr - 1.28862 * ln_tr + 0.169347 * tr6,
        15.2518 - 15.6875 / tr - 13.4721 * ln_tr + 0.43577 * tr6,
    ]
}

fn riedel_psi(tr: f64) -> f64 {
    -35.0 + 36.0 / tr + 42.0 * tr.ln() - tr.powi(6)
}
