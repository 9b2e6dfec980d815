//! Azeotropes of two components.

use crate::mixture::{Liquid, MixtureError};
use crate::numeric::{RootTolerance, bracketed_root, rising_root};
use crate::quantity::Flags;

use super::boiling::MOST_RISE_K;
use super::bubble::{Vapor, bubble_temperature_into, named};
use super::split::{LiquidPhase, liquid_phases};

/// What is held constant.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Condition {
    /// Constant pressure in Pa.
    Pressure(f64),
    /// Constant temperature in K.
    Temperature(f64),
}

/// How many liquids an azeotrope has.
#[derive(Clone, Debug, PartialEq)]
pub enum AzeotropeKind {
    /// One liquid, of the composition of the vapor.
    Homogeneous,
    /// Two liquids; their x1, ascending. The vapor lies between them.
    Heterogeneous {
        /// x1 of the liquid poor in component 1.
        x1_low: f64,
        /// x1 of the liquid rich in component 1.
        x1_high: f64,
    },
}

/// Which way the boiling temperature turns at an azeotrope.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Extremum {
    /// Boils below both neighbors (pressure maximum).
    MinimumBoiling,
    /// Boils above both neighbors (pressure minimum).
    MaximumBoiling,
}

/// An azeotrope of two components.
#[derive(Clone, Debug, PartialEq)]
pub struct Azeotrope {
    /// Temperature in K.
    pub temperature_k: f64,
    /// Pressure in Pa.
    pub pressure_pa: f64,
    /// Mole fraction of component 1 in the vapor (and in the liquids together).
    pub y1: f64,
    /// One liquid or two.
    pub kind: AzeotropeKind,
    /// Minimum or maximum of the boiling temperature.
    pub extremum: Extremum,
    /// Caveats.
    pub flags: Flags,
}

/// Compositions at which the sign of ln α is looked at; close-set near the ends.
const GRID: [f64; 33] = [
    0.0, 1e-4, 1e-3, 3e-3, 0.01, 0.02, 0.04, 0.07, 0.1, 0.15, 0.2, 0.25, 0.3, 0.35, 0.4, 0.45, 0.5,
    0.55, 0.6, 0.65, 0.7, 0.75, 0.8, 0.85, 0.9, 0.93, 0.96, 0.98, 0.99, 0.997, 0.999, 0.9999, 1.0,
];

/// Every azeotrope of two components at a pressure or a temperature, ascending in y1.
///
/// Along the liquid composition, ln α = ln(γ1 P1/(γ2 P2)) at the bubble point is
/// zero where liquid and vapor are alike. Each zero is tested for stability of
/// the liquid; where the liquid splits, the state of two liquids and vapor is
/// found and is an azeotrope if the vapor lies between the liquids. The liquid
/// is left at the temperature last looked at.
///
/// # Units and shapes
///
/// `guess_k`: a boiling temperature near those of the components; used at constant pressure only.
///
/// # Validity
///
/// Ideal vapor. Two azeotropes within one interval of the grid (33 points,
/// 0.05 wide in the middle) are missed. Within 1e-12 of ln α = 0 throughout, a
/// pair counts as without azeotrope.
///
/// # Errors
///
/// [`MixtureError::NotBinary`]; those of [`super::bubble_temperature`] and [`liquid_phases`].
pub fn azeotropes(
    liquid: &mut dyn Liquid,
    condition: Condition,
    vapor: Vapor<'_>,
    guess_k: f64,
) -> Result<Vec<Azeotrope>, MixtureError> {
    let n = liquid.components();
    if n != 2 {
        return Err(MixtureError::NotBinary {
            what: "an azeotrope",
            found: n,
        });
    }
    if let Condition::Temperature(temperature_k) = condition {
        liquid.set_temperature(temperature_k)?;
    }
    let mut search = Search {
        condition,
        vapor,
        guess_k,
    };
    let mut found: Vec<Azeotrope> = Vec::new();
    let mut before: Option<(f64, f64)> = None;
    for x1 in GRID {
        let here = search.ln_alpha(liquid, x1)?;
        if let Some((x0, there)) = before
            && here.abs().max(there.abs()) > 1e-12
            && there != 0.0
            && (here == 0.0 || (here > 0.0) != (there > 0.0))
        {
            let extremum = if there > 0.0 {
                Extremum::MinimumBoiling
            } else {
                Extremum::MaximumBoiling
            };
            if let Some(one) = search.refine(liquid, (x0, x1), extremum)? {
                let known = found.iter().any(|other| (other.y1 - one.y1).abs() < 1e-7);
                if !known {
                    found.push(one);
                }
            }
        }
        before = Some((x1, here));
    }
    found.sort_by(|a, b| a.y1.total_cmp(&b.y1));
    Ok(found)
}

struct Search<'a> {
    condition: Condition,
    vapor: Vapor<'a>,
    guess_k: f64,
}

impl Search<'_> {
    /// ln(γ1 P1/(γ2 P2)) at the bubble point; leaves the liquid at its temperature.
    fn ln_alpha(&mut self, liquid: &mut dyn Liquid, x1: f64) -> Result<f64, MixtureError> {
        let x = [x1, 1.0 - x1];
        let mut ln_gamma = [0.0; 2];
        match self.condition {
            Condition::Pressure(pressure_pa) => {
                let mut partial = [0.0; 2];
                let found = bubble_temperature_into(
                    liquid,
                    &x,
                    pressure_pa,
                    self.vapor,
                    self.guess_k,
                    &mut ln_gamma,
                    &mut partial,
                );
                match found {
                    Ok(temperature_k) => self.guess_k = temperature_k,
                    // One liquid of nearly immiscible substances boils far below
                    // anything real; only the sign of ln α is wanted of it.
                    Err(fault @ MixtureError::NotBracketed { .. }) => {
                        liquid.set_temperature(self.vapor.range_k.0)?;
                        if self.pressure(liquid, &x)?.0 < pressure_pa {
                            return Err(fault);
                        }
                        liquid.ln_gamma(&x, &mut ln_gamma)?;
                    }
                    Err(fault) => return Err(fault),
                }
            }
            Condition::Temperature(_) => liquid.ln_gamma(&x, &mut ln_gamma)?,
        }
        let temperature_k = liquid.temperature_k();
        let p1 = self.vapor.pressure_pa(0, temperature_k)?;
        let p2 = self.vapor.pressure_pa(1, temperature_k)?;
        Ok(ln_gamma[0] - ln_gamma[1] + (p1 / p2).ln())
    }

    /// The azeotrope behind a change of sign, if there is one.
    fn refine(
        &mut self,
        liquid: &mut dyn Liquid,
        (low, high): (f64, f64),
        extremum: Extremum,
    ) -> Result<Option<Azeotrope>, MixtureError> {
        let tolerance = RootTolerance {
            residual: 1e-10,
            width: 1e-12,
            evaluations: 100,
        };
        let root = bracketed_root(|x1| self.ln_alpha(liquid, x1), low, high, tolerance)
            .map_err(|fault| named("an azeotropic mole fraction", fault, low, high, |x| x))?;
        let x1 = root.x;
        // the last evaluation need not have been at the root
        self.ln_alpha(liquid, x1)?;
        let x = [x1, 1.0 - x1];
        let phases = liquid_phases(liquid, &x)?;
        if phases.len() > 1 {
            return self.heterogeneous(liquid, x1, &phases, extremum);
        }
        let pressure_pa = self.pressure(liquid, &x)?.0;
        Ok(Some(Azeotrope {
            temperature_k: liquid.temperature_k(),
            pressure_pa,
            y1: x1,
            kind: AzeotropeKind::Homogeneous,
            extremum,
            flags: self.vapor.flags(&x),
        }))
    }

    /// Pressure over a liquid and y1, at the liquid's temperature.
    fn pressure(&self, liquid: &mut dyn Liquid, x: &[f64]) -> Result<(f64, f64), MixtureError> {
        let mut ln_gamma = [0.0; 2];
        liquid.ln_gamma(x, &mut ln_gamma)?;
        let temperature_k = liquid.temperature_k();
        let partial = |i: usize| -> Result<f64, MixtureError> {
            if x[i] > 0.0 {
                Ok(x[i] * ln_gamma[i].exp() * self.vapor.pressure_pa(i, temperature_k)?)
            } else {
                Ok(0.0)
            }
        };
        let (p1, p2) = (partial(0)?, partial(1)?);
        Ok((p1 + p2, p1 / (p1 + p2)))
    }

    /// The state of two liquids and vapor near an unstable azeotrope.
    fn heterogeneous(
        &mut self,
        liquid: &mut dyn Liquid,
        x1: f64,
        phases: &[LiquidPhase],
        extremum: Extremum,
    ) -> Result<Option<Azeotrope>, MixtureError> {
        let mut ends = ends_of(phases);
        if let Condition::Pressure(pressure_pa) = self.condition {
            // one unstable liquid exerts more pressure than its split, so the split boils higher
            let start_k = liquid.temperature_k();
            let high_k = (start_k + MOST_RISE_K).min(self.vapor.range_k.1);
            let tolerance = RootTolerance {
                residual: 1e-10,
                width: 1e-15,
                evaluations: 100,
            };
            let solved = rising_root(
                |u: f64| {
                    liquid.set_temperature(-1.0 / u)?;
                    let middle = 0.5 * (ends.0 + ends.1);
                    let split = match liquid_phases(liquid, &[x1, 1.0 - x1])? {
                        one if one.len() == 1 => liquid_phases(liquid, &[middle, 1.0 - middle])?,
                        split => split,
                    };
                    ends = ends_of(&split);
                    let (pressure, _) = self.pressure(liquid, &[ends.0, 1.0 - ends.0])?;
                    Ok((pressure / pressure_pa).ln())
                },
                (-1.0 / (start_k - 1e-3), -1.0 / high_k),
                -1.0 / start_k,
                10.5 * start_k,
                tolerance,
            );
            match solved {
                Ok(_) => {}
                Err(fault) => {
                    return Err(named(
                        "a heteroazeotropic temperature in K",
                        fault,
                        start_k,
                        high_k,
                        |u| -1.0 / u,
                    ));
                }
            }
        }
        let (x1_low, x1_high) = ends;
        let (pressure_pa, y1) = self.pressure(liquid, &[x1_low, 1.0 - x1_low])?;
        let x = [x1_low, 1.0 - x1_low];
        if x1_high - x1_low > 1e-9 && y1 >= x1_low && y1 <= x1_high {
            Ok(Some(Azeotrope {
                temperature_k: liquid.temperature_k(),
                pressure_pa,
                y1,
                kind: AzeotropeKind::Heterogeneous { x1_low, x1_high },
                extremum,
                flags: self.vapor.flags(&x),
            }))
        } else {
            Ok(None)
        }
    }
}

/// Least and largest x1 of the phases.
fn ends_of(phases: &[LiquidPhase]) -> (f64, f64) {
    phases.iter().fold((1.0, 0.0), |(low, high), phase| {
        (f64::min(low, phase.x[0]), f64::max(high, phase.x[0]))
    })
}
