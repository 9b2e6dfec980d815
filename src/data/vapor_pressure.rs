//! Vapor-pressure curves fitted to measurements.

use std::fmt;
use std::sync::Arc;

use super::points::{POINT_STRETCH_K, Straight};
use super::substance::{BOILING_POINT_MISS_K, misses};
use super::{OutOfRange, Points};
use crate::quantity::{Flag, Flags};

/// The part of the absolute temperature by which a curve may be used below its
/// range, and an Antoine curve also above it.
const STRETCH: f64 = 0.1;

/// The two sets of exponents with which Wagner's equation is tabulated.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum WagnerForm {
    /// 1, 1.5, 2.5, 5.
    TwoAndAHalfFive,
    /// 1, 1.5, 3, 6.
    ThreeSix,
}

/// A published vapor-pressure equation with its coefficients, for K and Pa.
#[derive(Clone, Debug, PartialEq)]
pub enum VaporPressureEquation {
    /// Antoine: `ln(P/Pa) = a − b / (T/K + c)`.
    ///
    /// Tables print it with log10 or ln, in several units; they are converted
    /// on load.
    Antoine {
        /// Constant.
        a: f64,
        /// In K.
        b: f64,
        /// In K.
        c: f64,
    },
    /// Wagner: `ln(P/Pc) = (a q + b q^1.5 + c q^m + d q^n) / (1 − q)`,
    /// `q = 1 − T/Tc`, with (m, n) = (2.5, 5) or (3, 6).
    ///
    /// W. Wagner, Cryogenics 13 (1973) 470–482 (form 3, 6); D. Ambrose, D.
    /// Walton, Pure Appl. Chem. 61 (1989) 1395–1403 (form 2.5, 5).
    Wagner {
        /// Which exponents.
        form: WagnerForm,
        /// The coefficients a to d.
        coefficients: [f64; 4],
        /// Critical temperature of the fit, in K.
        critical_temperature_k: f64,
        /// Critical pressure of the fit, in Pa.
        critical_pressure_pa: f64,
    },
    /// Extended Antoine with five coefficients:
    /// `ln(P/Pa) = a + b/T + c ln(T/K) + d T^e`.
    ExtendedAntoine {
        /// The coefficients a to e.
        coefficients: [f64; 5],
    },
    /// Measured pressures in Pa, between which ln P is straight in 1/T.
    Points(Points),
}

impl VaporPressureEquation {
    /// `ln(P/Pa)` and its slope in 1/K, without any check of the range.
    fn ln_pressure_and_slope(&self, temperature_k: f64) -> (f64, f64) {
        let t = temperature_k;
        match *self {
            Self::Antoine { a, b, c } => (a - b / (t + c), b / (t + c).powi(2)),
            Self::Wagner {
                form,
                coefficients: [a, b, c, d],
                critical_temperature_k: tc,
                critical_pressure_pa,
            } => {
                let tr = t / tc;
                let q = (1.0 - tr).max(0.0);
                let root = q.sqrt();
                let (third, third_slope, fourth, fourth_slope) = match form {
                    WagnerForm::TwoAndAHalfFive => {
                        (q * q * root, 2.5 * q * root, q.powi(5), 5.0 * q.powi(4))
                    }
                    WagnerForm::ThreeSix => (q.powi(3), 3.0 * q * q, q.powi(6), 6.0 * q.powi(5)),
                };
                let sum = a * q + b * q * root + c * third + d * fourth;
                let sum_slope = a + 1.5 * b * root + c * third_slope + d * fourth_slope;
                (
                    critical_pressure_pa.ln() + sum / tr,
                    -(sum_slope / tr + sum / (tr * tr)) / tc,
                )
            }
            Self::ExtendedAntoine {
                coefficients: [a, b, c, d, e],
            } => {
                let power = d * t.powf(e);
                (a + b / t + c * t.ln() + power, (-b / t + c + e * power) / t)
            }
            Self::Points(ref points) => points.ordinate_and_slope(t),
        }
    }
}

impl fmt::Display for VaporPressureEquation {
    /// The equation with its numbers, for K and Pa.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match *self {
            Self::Antoine { a, b, c } => {
                write!(f, "Antoine, ln P = {a:.6} - {b:.4}/(T + ({c:.4}))")
            }
            Self::Wagner {
                form,
                coefficients: [a, b, c, d],
                critical_temperature_k,
                critical_pressure_pa,
            } => {
                let exponents = match form {
                    WagnerForm::TwoAndAHalfFive => "2.5 and 5",
                    WagnerForm::ThreeSix => "3 and 6",
                };
                write!(
                    f,
                    "Wagner with exponents 1, 1.5, {exponents}: {a}, {b}, {c}, {d}, Tc {critical_temperature_k} K, Pc {critical_pressure_pa} Pa"
                )
            }
            Self::ExtendedAntoine {
                coefficients: [a, b, c, d, e],
            } => write!(
                f,
                "extended Antoine, ln P = {a} + {b}/T + {c} ln T + {d} T^{e}"
            ),
            Self::Points(ref points) => points.fmt(f),
        }
    }
}

/// A vapor-pressure curve with its range and source.
///
/// # Validity
///
/// Inside the range as published. Past it a value is given with
/// [`Flag::Extrapolated`] down to 0.9 times the lower end and, for Antoine
/// only, up to 1.1 times the upper end: the other equations reach to the
/// critical point, beyond which there is no vapor pressure. Measured points
/// reach 10 K past the outermost. The stretch ends earlier where the curve
/// stops rising with temperature.
///
/// A published curve may have been [moved](Self::through) through measured
/// points; reach and shape are then still those of the equation.
#[derive(Clone, Debug, PartialEq)]
pub struct VaporPressure {
    equation: VaporPressureEquation,
    /// The factors by which the pressure is multiplied.
    factors: Option<Points>,
    /// What holds of it at every temperature.
    flags: Flags,
    range_k: (f64, f64),
    limits_k: (f64, f64),
    source: Arc<str>,
}

impl VaporPressure {
    /// The curve, if it rises with temperature all over its range and is
    /// finite there; else the temperature in K at which it does not.
    ///
    /// `low_k` is less than `high_k`, both positive.
    pub fn new(
        equation: VaporPressureEquation,
        low_k: f64,
        high_k: f64,
        source: Arc<str>,
    ) -> Result<Self, f64> {
        let rises = |t: f64| {
            let (ln_p, slope) = equation.ln_pressure_and_slope(t);
            // the pole of Antoine's equation separates two branches that both rise
            let right_branch = match equation {
                VaporPressureEquation::Antoine { c, .. } => t + c > 0.0,
                _ => true,
            };
            // the pressure itself has to be a number other than zero
            let has_pressure = ln_p.abs() < f64::MAX.ln();
            right_branch && has_pressure && slope.is_finite() && slope > 0.0
        };
        const STEPS: u32 = 24;
        let high_inside = match equation {
            // the slope is not finite at the critical point of some sets
            VaporPressureEquation::Wagner {
                critical_temperature_k,
                ..
            } => high_k.min(critical_temperature_k * (1.0 - 1e-9)),
            _ => high_k,
        };
        for step in 0..=STEPS {
            let t = low_k + (high_inside - low_k) * f64::from(step) / f64::from(STEPS);
            if !rises(t) {
                return Err(t);
            }
        }
        let stretched = |from: f64, towards: f64| {
            let mut limit = from;
            for step in 1..=10_u32 {
                let t = from + (towards - from) * f64::from(step) / 10.0;
                if !rises(t) {
                    break;
                }
                limit = t;
            }
            limit
        };
        let (low_limit, high_limit) = match equation {
            VaporPressureEquation::Antoine { .. } => (
                stretched(low_k, low_k * (1.0 - STRETCH)),
                stretched(high_k, high_k * (1.0 + STRETCH)),
            ),
            VaporPressureEquation::Points(_) => (
                stretched(low_k, low_k - POINT_STRETCH_K),
                stretched(high_k, high_k + POINT_STRETCH_K),
            ),
            _ => (stretched(low_k, low_k * (1.0 - STRETCH)), high_inside),
        };
        Ok(Self {
            equation,
            factors: None,
            flags: Flags::NONE,
            range_k: (low_k, high_k),
            limits_k: (low_limit, high_limit),
            source,
        })
    }

    /// The curve moved so that it passes through measured points, given as
    /// temperature in K and pressure in Pa in order of temperature: its pressure
    /// is multiplied by a factor whose logarithm is straight in 1/T between the
    /// points and constant past the outermost. Flagged [`Flag::Inconsistent`]
    /// where the curve had missed a point by more than 3 K.
    ///
    /// `None` if no point lies inside its [limits](Self::limits_k), or the moved
    /// curve does not rise with temperature.
    pub fn through(&self, points: &[(f64, f64)], source: &str) -> Option<Self> {
        let reached = |&(t, p): &(f64, f64)| Some((t, p / self.pressure_pa(t).ok()?));
        let factors: Vec<(f64, f64)> = points.iter().filter_map(reached).collect();
        let factors = Points::new(Straight::LogInReciprocalTemperature, &factors)?;
        let contradicts = |&(t, p): &(f64, f64)| misses(self, t, p, BOILING_POINT_MISS_K);
        let moved = Self {
            flags: match points.iter().any(contradicts) {
                true => self.flags.with(Flag::Inconsistent),
                false => self.flags,
            },
            factors: Some(factors),
            source: format!("{}, moved through {source}", self.source).into(),
            ..self.clone()
        };
        let (low, high) = moved.limits_k;
        const STEPS: u32 = 48;
        let even = (0..=STEPS).map(|step| low + (high - low) * f64::from(step) / f64::from(STEPS));
        // of the kinks, both sides
        let kinks = points
            .iter()
            .flat_map(|&(t, _)| [t * (1.0 - 1e-9), t * (1.0 + 1e-9)])
            .filter(|t| (low..=high).contains(t));
        even.chain(kinks)
            .all(|t| {
                let (ln_p, slope) = moved.ln_and_slope(t);
                ln_p.abs() < f64::MAX.ln() && slope > 0.0 && slope.is_finite()
            })
            .then_some(moved)
    }

    /// The curve [moved](Self::through) through measured points; where that
    /// cannot be done it stays, flagged if it misses one of them.
    pub fn moved_or_flagged(&self, points: &[(f64, f64)], source: &str) -> Self {
        self.through(points, source).unwrap_or_else(|| {
            let missed = |&(t, p): &(f64, f64)| misses(self, t, p, BOILING_POINT_MISS_K);
            match points.iter().any(missed) {
                true => self.clone().contradicted(),
                false => self.clone(),
            }
        })
    }

    /// Lines between measured points, given as for [`through`](Self::through);
    /// `None` if there are fewer than two or the pressure does not rise.
    pub fn between(points: &[(f64, f64)], source: Arc<str>) -> Option<Self> {
        let [(low_k, _), .., (high_k, _)] = *points else {
            return None;
        };
        let points = Points::new(Straight::LogInReciprocalTemperature, points)?;
        Self::new(VaporPressureEquation::Points(points), low_k, high_k, source).ok()
    }

    /// The same curve, known to contradict other data of its substance.
    pub(super) fn contradicted(mut self) -> Self {
        self.flags = self.flags.with(Flag::Inconsistent);
        self
    }

    /// What holds of the curve at every temperature.
    pub(super) fn flags(&self) -> Flags {
        self.flags
    }

    /// Whether the curve contradicts other data of its substance.
    pub fn is_contradicted(&self) -> bool {
        self.flags.contains(Flag::Inconsistent)
    }

    /// Whether the curve was moved through measured points.
    pub fn is_moved(&self) -> bool {
        self.factors.is_some()
    }

    fn ln_and_slope(&self, temperature_k: f64) -> (f64, f64) {
        let (ln_p, slope) = self.equation.ln_pressure_and_slope(temperature_k);
        let Some(factors) = &self.factors else {
            return (ln_p, slope);
        };
        let (low, high) = factors.range_k();
        let (ln_factor, factor_slope) = factors.ordinate_and_slope(temperature_k.clamp(low, high));
        match (low..high).contains(&temperature_k) {
            true => (ln_p + ln_factor, slope + factor_slope),
            false => (ln_p + ln_factor, slope),
        }
    }

    /// The equation.
    pub fn equation(&self) -> &VaporPressureEquation {
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

    /// [`Flag::Extrapolated`] outside the published range; [`Flag::Inconsistent`]
    /// where the curve contradicts other data of its substance.
    pub fn flags_at(&self, temperature_k: f64) -> Flags {
        if self.covers(temperature_k) {
            self.flags
        } else {
            self.flags.with(Flag::Extrapolated)
        }
    }

    pub(super) fn covers(&self, temperature_k: f64) -> bool {
        (self.range_k.0..=self.range_k.1).contains(&temperature_k)
    }

    /// Vapor pressure in Pa.
    ///
    /// # Errors
    ///
    /// [`OutOfRange::Temperature`] past the [limits](Self::limits_k).
    pub fn pressure_pa(&self, temperature_k: f64) -> Result<f64, OutOfRange> {
        Ok(self.ln_pressure_and_slope(temperature_k)?.0.exp())
    }

    /// `ln(P/Pa)` and `d ln P / dT` in 1/K.
    ///
    /// # Errors
    ///
    /// [`OutOfRange::Temperature`] past the [limits](Self::limits_k).
    pub fn ln_pressure_and_slope(&self, temperature_k: f64) -> Result<(f64, f64), OutOfRange> {
        let (low_k, high_k) = self.limits_k;
        if (low_k..=high_k).contains(&temperature_k) {
            Ok(self.ln_and_slope(temperature_k))
        } else {
            Err(OutOfRange::Temperature {
                temperature_k,
                low_k,
                high_k,
            })
        }
    }

    /// The temperature in K at which the vapor pressure is `pressure_pa`.
    ///
    /// Newton's method in 1/T, in which ln P is nearly straight, kept inside a
    /// bracket that is halved where a step would leave it.
    ///
    /// # Errors
    ///
    /// [`OutOfRange::Pressure`] if the pressure is not reached inside the
    /// [limits](Self::limits_k), or is not a positive number.
    pub fn saturation_temperature_k(&self, pressure_pa: f64) -> Result<f64, OutOfRange> {
        let (mut low, mut high) = self.limits_k;
        let ln_low = self.ln_and_slope(low).0;
        let ln_high = self.ln_and_slope(high).0;
        let target = pressure_pa.ln();
        if !(ln_low..=ln_high).contains(&target) {
            return Err(OutOfRange::Pressure {
                pressure_pa,
                low_pa: ln_low.exp(),
                high_pa: ln_high.exp(),
            });
        }
        let mut t =
            1.0 / (1.0 / low + (1.0 / high - 1.0 / low) * (target - ln_low) / (ln_high - ln_low));
        // each step either converges or at least halves the bracket
        for _ in 0..100 {
            let (ln_p, slope) = self.ln_and_slope(t);
            let miss = ln_p - target;
            if miss > 0.0 {
                high = t;
            } else {
                low = t;
            }
            let mut next = 1.0 / (1.0 / t + miss / (slope * t * t));
            if !(low..=high).contains(&next) {
                next = 0.5 * (low + high);
            }
            if (next - t).abs() <= 1e-12 * t {
                return Ok(next);
            }
            t = next;
        }
        Ok(t)
    }

    /// The temperature in K at which the vapor pressure is `pressure_pa`, and
    /// how it grows with pressure, `dT/dP = 1 / (P d ln P/dT)`, in K/Pa.
    ///
    /// # Errors
    ///
    /// Those of [`saturation_temperature_k`](Self::saturation_temperature_k).
    pub fn saturation_temperature_and_slope(
        &self,
        pressure_pa: f64,
    ) -> Result<(f64, f64), OutOfRange> {
        let temperature_k = self.saturation_temperature_k(pressure_pa)?;
        let (_, slope) = self.ln_and_slope(temperature_k);
        Ok((temperature_k, 1.0 / (pressure_pa * slope)))
    }

    /// Whether the curve is no equation, but measured points.
    pub fn is_points(&self) -> bool {
        matches!(self.equation, VaporPressureEquation::Points(_))
    }
}
