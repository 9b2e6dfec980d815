//! Relative volatility of two keys beside a solvent.

use crate::mixture::{Liquid, MixtureError};
use crate::quantity::Flags;

use super::bubble::{Vapor, bubble_temperature_into};

/// Relative volatility at one solvent-free composition.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct VolatilityPoint {
    /// Mole fraction of the first key without the solvent.
    pub x1_solvent_free: f64,
    /// Bubble temperature in K.
    pub temperature_k: f64,
    /// α12 = γ1 P1/(γ2 P2).
    pub alpha: f64,
    /// Caveats.
    pub flags: Flags,
}

/// Relative volatility of components 1 and 2 along their solvent-free
/// composition, at the bubble point, with component 3 as the solvent.
///
/// # Units and shapes
///
/// The liquid has two components, or three with the solvent last.
/// `solvent_to_feed`: moles of solvent for each mole of the two keys; 0 is
/// allowed, and needed without a solvent. `points`: solvent-free mole fractions
/// of component 1, 0 and 1 included if wanted. Results in their order.
///
/// # Errors
///
/// [`MixtureError::Value`] for a point outside 0…1 or a ratio that is negative;
/// [`MixtureError::Length`] for another number of components; those of
/// [`super::bubble_temperature`].
pub fn relative_volatility(
    liquid: &mut dyn Liquid,
    solvent_to_feed: f64,
    points: &[f64],
    pressure_pa: f64,
    vapor: Vapor<'_>,
    guess_k: f64,
) -> Result<Vec<VolatilityPoint>, MixtureError> {
    let n = liquid.components();
    if !(n == 3 || n == 2 && solvent_to_feed == 0.0) {
        return Err(MixtureError::Length {
            what: "components (two keys and a solvent)",
            expected: 3,
            found: n,
        });
    }
    if !(solvent_to_feed >= 0.0 && solvent_to_feed.is_finite()) {
        return Err(MixtureError::Value {
            what: "the solvent-to-feed ratio",
            component: n,
            value: solvent_to_feed,
            expected: "a number that is not negative",
        });
    }
    let feed = 1.0 / (1.0 + solvent_to_feed);
    let mut x = vec![0.0; n];
    let mut ln_gamma = vec![0.0; n];
    let mut partial = vec![0.0; n];
    let mut temperature_k = guess_k;
    points
        .iter()
        .map(|&x1| {
            if !(0.0..=1.0).contains(&x1) {
                return Err(MixtureError::Value {
                    what: "the solvent-free mole fraction",
                    component: 1,
                    value: x1,
                    expected: "a number from 0 to 1",
                });
            }
            x[0] = x1 * feed;
            x[1] = (1.0 - x1) * feed;
            if n == 3 {
                x[2] = 1.0 - feed;
            }
            temperature_k = bubble_temperature_into(
                liquid,
                &x,
                pressure_pa,
                vapor,
                temperature_k,
                &mut ln_gamma,
                &mut partial,
            )?;
            let p1 = vapor.pressure_pa(0, temperature_k)?;
            let p2 = vapor.pressure_pa(1, temperature_k)?;
            Ok(VolatilityPoint {
                x1_solvent_free: x1,
                temperature_k,
                alpha: (ln_gamma[0] - ln_gamma[1]).exp() * p1 / p2,
                flags: vapor.flags(&x),
            })
        })
        .collect()
}
