//! Bubble points by modified Raoult's law.

use crate::mixture::liquid::check_fractions;
use crate::mixture::{Liquid, MixtureError};
use crate::numeric::{RootError, RootTolerance, rising_root};
use crate::quantity::{Absent, Flag, Flags};

/// Vapor pressures of the components, by position from 0.
pub trait VaporPressures {
    /// The vapor pressure in Pa at a temperature in K, or why there is none.
    ///
    /// # Errors
    ///
    /// The reason of the caller, such as a temperature outside the data.
    fn vapor_pressure_pa(&self, component: usize, temperature_k: f64) -> Result<f64, Absent>;
}

impl<F: Fn(usize, f64) -> Result<f64, Absent>> VaporPressures for F {
    fn vapor_pressure_pa(&self, component: usize, temperature_k: f64) -> Result<f64, Absent> {
        self(component, temperature_k)
    }
}

/// What the caller knows of the vapor.
#[derive(Clone, Copy)]
pub struct Vapor<'a> {
    /// Vapor pressures of the components.
    pub pressures: &'a dyn VaporPressures,
    /// Which components associate in the vapor (carboxylic acids); they raise
    /// [`Flag::VaporAssociationNotModelled`] where they take part.
    pub associates: &'a [bool],
    /// Temperatures in K between which a boiling state is sought; the vapor
    /// pressures should exist there.
    pub range_k: (f64, f64),
}

/// A liquid at its bubble point and the first vapor.
#[derive(Clone, Debug, PartialEq)]
pub struct BubblePoint {
    /// Temperature in K.
    pub temperature_k: f64,
    /// Pressure in Pa.
    pub pressure_pa: f64,
    /// ln γ of the liquid.
    pub ln_gamma: Vec<f64>,
    /// Mole fractions of the vapor.
    pub y: Vec<f64>,
    /// Caveats.
    pub flags: Flags,
}

impl Vapor<'_> {
    /// The vapor pressure of a component, checked to be a positive number.
    pub(super) fn pressure_pa(
        &self,
        component: usize,
        temperature_k: f64,
    ) -> Result<f64, MixtureError> {
        let value = self
            .pressures
            .vapor_pressure_pa(component, temperature_k)
            .map_err(|reason| MixtureError::VaporPressure {
                component: component + 1,
                reason,
            })?;
        if value > 0.0 && value.is_finite() {
            Ok(value)
        } else {
            Err(MixtureError::Value {
                what: "the vapor pressure in Pa",
                component: component + 1,
                value,
                expected: "a positive number",
            })
        }
    }

    /// Caveats of a vapor over a liquid of this composition.
    pub(super) fn flags(&self, x: &[f64]) -> Flags {
        let associates = x
            .iter()
            .zip(self.associates)
            .any(|(&x, &associates)| associates && x > 0.0);
        if associates {
            Flags::NONE.with(Flag::VaporAssociationNotModelled)
        } else {
            Flags::NONE
        }
    }

    fn check(&self, components: usize) -> Result<(), MixtureError> {
        if self.associates.len() != components {
            return Err(MixtureError::Length {
                what: "marks of association",
                expected: components,
                found: self.associates.len(),
            });
        }
        let (low, high) = self.range_k;
        if low > 0.0 && low < high && high.is_finite() {
            Ok(())
        } else {
            Err(MixtureError::NotBracketed {
                what: "a boiling temperature in K",
                low,
                high,
            })
        }
    }
}

/// Refuses compositions that do not add up to 1: phase equilibrium needs mole fractions.
pub(super) fn check_composition(x: &[f64], components: usize) -> Result<(), MixtureError> {
    check_fractions(x, components)?;
    let sum: f64 = x.iter().sum();
    if (sum - 1.0).abs() > crate::mixture::SUM_TOLERANCE {
        return Err(MixtureError::Sum { sum });
    }
    Ok(())
}

/// Pressure and vapor of a liquid at its bubble point at the liquid's temperature.
///
/// p = Σ x_i γ_i P_i and y_i = x_i γ_i P_i/p. The vapor pressure of a component
/// with x = 0 is not asked for. The liquid is taken as one phase; see
/// [`super::liquid_phases`] for whether it is.
///
/// # Errors
///
/// A composition that is none or does not add up to 1; an absent vapor pressure.
pub fn bubble_pressure(
    liquid: &mut dyn Liquid,
    x: &[f64],
    vapor: Vapor<'_>,
) -> Result<BubblePoint, MixtureError> {
    let n = liquid.components();
    check_composition(x, n)?;
    vapor.check(n)?;
    let temperature_k = liquid.temperature_k();
    let mut ln_gamma = vec![0.0; n];
    liquid.ln_gamma(x, &mut ln_gamma)?;
    let mut y = vec![0.0; n];
    for (i, &x) in x.iter().enumerate().filter(|(_, x)| **x > 0.0) {
        y[i] = x * ln_gamma[i].exp() * vapor.pressure_pa(i, temperature_k)?;
    }
    let pressure_pa: f64 = y.iter().sum();
    for y in &mut y {
        *y /= pressure_pa;
    }
    Ok(BubblePoint {
        temperature_k,
        pressure_pa,
        ln_gamma,
        y,
        flags: vapor.flags(x),
    })
}

/// Temperature and vapor of a liquid at its bubble point at a pressure.
///
/// Solves ln Σ x_i γ_i P_i(T) = ln p in −1/T, in which it is nearly a straight
/// line. The liquid is left at the bubble temperature.
///
/// # Units and shapes
///
/// `guess_k`: a temperature near the answer; the mean of the boiling points serves.
///
/// # Errors
///
/// As [`bubble_pressure`]; [`MixtureError::NotBracketed`] if the bubble point
/// lies outside `vapor.range_k`; [`MixtureError::NotConverged`].
pub fn bubble_temperature(
    liquid: &mut dyn Liquid,
    x: &[f64],
    pressure_pa: f64,
    vapor: Vapor<'_>,
    guess_k: f64,
) -> Result<BubblePoint, MixtureError> {
    let n = liquid.components();
    check_composition(x, n)?;
    vapor.check(n)?;
    let mut ln_gamma = vec![0.0; n];
    let mut partial = vec![0.0; n];
    let temperature_k = bubble_temperature_into(
        liquid,
        x,
        pressure_pa,
        vapor,
        guess_k,
        &mut ln_gamma,
        &mut partial,
    )?;
    let pressure: f64 = partial.iter().sum();
    for y in &mut partial {
        *y /= pressure;
    }
    Ok(BubblePoint {
        temperature_k,
        pressure_pa,
        ln_gamma,
        y: partial,
        flags: vapor.flags(x),
    })
}

/// The same without allocation or checks of the composition; fills ln γ and x γ P.
pub(super) fn bubble_temperature_into(
    liquid: &mut dyn Liquid,
    x: &[f64],
    pressure_pa: f64,
    vapor: Vapor<'_>,
    guess_k: f64,
    ln_gamma: &mut [f64],
    partial: &mut [f64],
) -> Result<f64, MixtureError> {
    if !(pressure_pa > 0.0 && pressure_pa.is_finite()) {
        return Err(MixtureError::Pressure { pressure_pa });
    }
    let (low, high) = vapor.range_k;
    let guess = guess_k.clamp(low, high);
    let tolerance = RootTolerance {
        residual: 1e-11,
        width: 1e-15,
        evaluations: 100,
    };
    partial.fill(0.0);
    let found = rising_root(
        |u: f64| {
            let temperature_k = -1.0 / u;
            liquid.set_temperature(temperature_k)?;
            liquid.ln_gamma(x, ln_gamma)?;
            for (i, &x) in x.iter().enumerate().filter(|(_, x)| **x > 0.0) {
                partial[i] = x * ln_gamma[i].exp() * vapor.pressure_pa(i, temperature_k)?;
            }
            Ok((partial.iter().sum::<f64>() / pressure_pa).ln())
        },
        (-1.0 / low, -1.0 / high),
        -1.0 / guess,
        // Trouton's rule: ΔH/R is about 10.5 times the boiling temperature
        10.5 * guess,
        tolerance,
    );
    match found {
        Ok(_) => Ok(liquid.temperature_k()),
        Err(fault) => Err(named("a bubble temperature in K", fault, low, high, |u| {
            -1.0 / u
        })),
    }
}

/// A fault of a root search with a name and in the caller's unit.
pub(super) fn named(
    what: &'static str,
    fault: RootError<MixtureError>,
    low: f64,
    high: f64,
    in_unit: impl Fn(f64) -> f64,
) -> MixtureError {
    match fault {
        RootError::Function(fault) => fault,
        RootError::NotBracketed { .. } => MixtureError::NotBracketed { what, low, high },
        RootError::NotConverged {
            evaluations,
            residual,
            last,
        } => MixtureError::NotConverged {
            what,
            iterations: evaluations,
            residual,
            last: vec![in_unit(last)],
        },
    }
}
