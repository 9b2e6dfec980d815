//! Bubble points of liquids that may split in two.

use super::bubble::{BubblePoint, Vapor, bubble_pressure, bubble_temperature, named};
use super::split::{LiquidPhase, liquid_phases};
use crate::mixture::{Liquid, MixtureError};
use crate::numeric::{RootTolerance, rising_root};

/// A mixture at its bubble point with the liquids it forms there.
#[derive(Clone, Debug, PartialEq)]
pub struct Boiling {
    /// Temperature, pressure and vapor; ln γ is that of the first liquid.
    pub point: BubblePoint,
    /// The liquids, the larger first; one where the mixture is stable.
    pub liquids: Vec<LiquidPhase>,
}

/// How far above the bubble point of the unstable single liquid the true one is
/// sought, K: no pair of the reference azeotropes differs by half of it.
pub(super) const MOST_RISE_K: f64 = 150.0;

/// How far below it is sought: where one of the liquids is much the more
/// volatile, the split may boil a little lower.
const MOST_FALL_K: f64 = 40.0;

/// Pressure and vapor at the bubble point of whatever liquids the mixture forms.
///
/// Liquids at equilibrium share their activities, so each of them has the
/// same bubble pressure p = Σ x_i γ_i P_i and the same vapor.
///
/// # Errors
///
/// Those of [`bubble_pressure`] and [`liquid_phases`].
pub fn boiling_pressure(
    liquid: &mut dyn Liquid,
    z: &[f64],
    vapor: Vapor<'_>,
) -> Result<Boiling, MixtureError> {
    let liquids = liquid_phases(liquid, z)?;
    let first = liquids.first().map_or(z, |phase| &phase.x);
    let point = bubble_pressure(liquid, first, vapor)?;
    Ok(Boiling { point, liquids })
}

/// Temperature and vapor at the bubble point of whatever liquids the mixture forms.
///
/// Starts from the bubble point of the single liquid; where that is unstable
/// the true one mostly lies higher. The liquid is left at the temperature found.
///
/// # Errors
///
/// Those of [`bubble_temperature`] and [`liquid_phases`].
pub fn boiling_temperature(
    liquid: &mut dyn Liquid,
    z: &[f64],
    pressure_pa: f64,
    vapor: Vapor<'_>,
    guess_k: f64,
) -> Result<Boiling, MixtureError> {
    let point = bubble_temperature(liquid, z, pressure_pa, vapor, guess_k)?;
    let liquids = liquid_phases(liquid, z)?;
    if liquids.len() == 1 {
        return Ok(Boiling { point, liquids });
    }
    let start = point.temperature_k;
    let low = (start - MOST_FALL_K).max(vapor.range_k.0);
    let high = (start + MOST_RISE_K).min(vapor.range_k.1);
    let tolerance = RootTolerance {
        residual: 1e-10,
        width: 1e-9,
        evaluations: 100,
    };
    let mut last = None;
    let found = rising_root(
        |temperature_k: f64| {
            liquid.set_temperature(temperature_k)?;
            let boiling = boiling_pressure(liquid, z, vapor)?;
            let excess = (boiling.point.pressure_pa / pressure_pa).ln();
            last = Some(boiling);
            Ok(excess)
        },
        (low, high),
        start,
        // Trouton's rule, as for a single liquid.
        10.5 / start,
        tolerance,
    );
    match (found, last) {
        (Ok(_), Some(boiling)) => Ok(boiling),
        (Err(fault), _) => Err(named("a bubble temperature in K", fault, low, high, |t| t)),
        (Ok(_), None) => unreachable!("a root was evaluated"),
    }
}
