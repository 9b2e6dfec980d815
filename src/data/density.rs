//! Liquid-density curves fitted to measurements.

use std::fmt;
use std::sync::Arc;

use super::points::POINT_STRETCH_K;
use super::{OutOfRange, Points};
use crate::quantity::{Flag, Flags};

/// The part of the absolute temperature by which a curve may be used below its range.
const STRETCH: f64 = 0.1;

/// A published density equation with its coefficients, for K and kg/m³.
#[derive(Clone, Debug, PartialEq)]
pub enum DensityEquation {
    /// Rackett's equation with four fitted coefficients:
    /// `ρ = M a / b^(1 + (1 − T/c)^d)`.
    ///
    /// Form of H. G. Rackett, J. Chem. Eng. Data 15 (1970) 514–517. Printed
    /// for the molar density in mol/dm³; `a` is kept as mass density.
    Rackett {
        /// In kg/m³, molar mass included.
        a: f64,
        /// Dimensionless.
        b: f64,
        /// Critical temperature of the fit, in K.
        c: f64,
        /// Dimensionless.
        d: f64,
    },
    /// Expansion about the critical point:
    /// `ρ = ρc + a q^0.35 + b q^(2/3) + c q + d q^(4/3)`, `q = 1 − T/Tc`.
    CriticalExpansion {
        /// The coefficients a to d, in kg/m³.
        coefficients: [f64; 4],
        /// Critical temperature of the fit, in K.
        critical_temperature_k: f64,
        /// Critical density of the fit, in kg/m³.
        critical_density_kg_per_m3: f64,
    },
    /// One measured value for the whole range.
    Constant {
        /// In kg/m³.
        density_kg_per_m3: f64,
    },
    /// Measured densities in kg/m³, straight in T between them.
    Points(Points),
}

impl DensityEquation {
    fn density_kg_per_m3(&self, temperature_k: f64) -> f64 {
        match *self {
            Self::Rackett { a, b, c, d } => {
                a / b.powf(1.0 + (1.0 - temperature_k / c).max(0.0).powf(d))
            }
            Self::CriticalExpansion {
                coefficients: [a, b, c, d],
                critical_temperature_k,
                critical_density_kg_per_m3,
            } => {
                let q = (1.0 - temperature_k / critical_temperature_k).max(0.0);
                let third = q.cbrt();
                critical_density_kg_per_m3
                    + a * q.powf(0.35)
                    + b * third * third
                    + c * q
                    + d * q * third
            }
            Self::Constant { density_kg_per_m3 } => density_kg_per_m3,
            Self::Points(ref points) => points.value(temperature_k),
        }
    }

    fn critical_temperature_k(&self) -> f64 {
        match *self {
            Self::Rackett { c, .. } => c,
            Self::CriticalExpansion {
                critical_temperature_k,
                ..
            } => critical_temperature_k,
            Self::Constant { .. } | Self::Points(_) => f64::INFINITY,
        }
    }
}

impl fmt::Display for DensityEquation {
    /// The equation with its numbers, for K and kg/m³.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match *self {
            Self::Rackett { a, b, c, d } => {
                write!(f, "Rackett, {a:.6}/{b}^(1 + (1 - T/{c})^{d})")
            }
            Self::CriticalExpansion {
                coefficients: [a, b, c, d],
                critical_temperature_k,
                critical_density_kg_per_m3,
            } => write!(
                f,
                "expansion about the critical point, {critical_density_kg_per_m3} with {a}, {b}, {c}, {d}, Tc {critical_temperature_k} K"
            ),
            Self::Constant { density_kg_per_m3 } => write!(f, "one value, {density_kg_per_m3}"),
            Self::Points(ref points) => points.fmt(f),
        }
    }
}

/// A curve of the saturated-liquid density with its range and source.
///
/// # Validity
///
/// Inside the range as published. Past it a value is given with
/// [`Flag::Extrapolated`]: curves down to 0.9 times their lower end and never
/// past their upper end (most end at the critical point); single values and
/// measured points up to 10 K to either side, which costs about 1 % where there is one point only.
#[derive(Clone, Debug, PartialEq)]
pub struct LiquidDensity {
    equation: DensityEquation,
    range_k: (f64, f64),
    limits_k: (f64, f64),
    source: Arc<str>,
}

impl LiquidDensity {
    /// The curve; `None` if it is not between 100 and 10,000 kg/m³ from its
    /// lower end to nine tenths of its upper one.
    ///
    /// `low_k` is not above `high_k`, both positive.
    pub fn new(
        equation: DensityEquation,
        low_k: f64,
        high_k: f64,
        source: Arc<str>,
    ) -> Option<Self> {
        let limits_k = match equation {
            DensityEquation::Constant { .. } | DensityEquation::Points(_) => {
                (low_k - POINT_STRETCH_K, high_k + POINT_STRETCH_K)
            }
            _ => (
                low_k * (1.0 - STRETCH),
                high_k.min(equation.critical_temperature_k()),
            ),
        };
        let sound = [low_k, low_k.max(0.9 * high_k)]
            .map(|t| equation.density_kg_per_m3(t))
            .iter()
            .all(|density| (100.0..10_000.0).contains(density));
        sound.then_some(Self {
            equation,
            range_k: (low_k, high_k),
            limits_k,
            source,
        })
    }

    /// The equation.
    pub fn equation(&self) -> &DensityEquation {
        &self.equation
    }

    /// The published range, in K.
    pub fn range_k(&self) -> (f64, f64) {
        self.range_k
    }

    /// The range with the stretch in which values are still given, in K.
    pub fn limits_k(&self) -> (f64, f64) {
        self.limits_k
    }

    /// The published source.
    pub fn source(&self) -> &Arc<str> {
        &self.source
    }

    /// [`Flag::Extrapolated`] outside the published range.
    pub fn flags_at(&self, temperature_k: f64) -> Flags {
        if self.covers(temperature_k) {
            Flags::NONE
        } else {
            Flags::NONE.with(Flag::Extrapolated)
        }
    }

    /// Whether the curve is no equation, but measured points.
    pub fn is_points(&self) -> bool {
        matches!(self.equation, DensityEquation::Points(_))
    }

    pub(super) fn covers(&self, temperature_k: f64) -> bool {
        (self.range_k.0..=self.range_k.1).contains(&temperature_k)
    }

    /// Density of the saturated liquid in kg/m³.
    ///
    /// # Errors
    ///
    /// [`OutOfRange::Temperature`] past the [limits](Self::limits_k).
    pub fn density_kg_per_m3(&self, temperature_k: f64) -> Result<f64, OutOfRange> {
        let (low_k, high_k) = self.limits_k;
        let density = self.equation.density_kg_per_m3(temperature_k);
        // the line through two points close together may leave what is possible
        let sound = density > 0.0 && density.is_finite();
        if (low_k..=high_k).contains(&temperature_k) && sound {
            Ok(density)
        } else {
            Err(OutOfRange::Temperature {
                temperature_k,
                low_k,
                high_k,
            })
        }
    }
}
